//! Areas, capacities and start numbers of the patches, from the properties and tables that the study names.

use std::path::Path;

use super::capacity_years::{Course, at};
use super::findings::Findings;
use super::geojson::Feature;
use super::occupied;
use super::patch::{Patch, Start};
use super::properties::numbers;
use super::table::{CapacityFrom, LandscapeTable, StartFrom};
use super::tables::{self, COUNTS, Counts, Names};
use crate::mistake::{Mistake, Place};
use crate::study::{NOT_NEGATIVE, Numbers, Said};

/// Areas that a patch may have, in hectares: the surface of the Earth at most.
const AREAS_HA: Numbers = Numbers { low: 1e-6, high: 5.1e10, above_low: false, below_high: false };

/// The values that the study gives to each feature; `None` where a mistake has been noted.
pub(super) struct Values {
    /// area in hectares; empty if the study gives none
    pub(super) areas_ha: Vec<Option<f64>>,
    /// capacities, which may hang on the area
    pub(super) capacities: Vec<Option<Capacity>>,
    /// capacities by years; empty if no table states them
    pub(super) courses: Vec<Option<Course>>,
    /// start numbers
    pub(super) starts: Vec<Option<Start>>,
}

/// The capacity of a patch.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) enum Capacity {
    /// this many individuals
    Individuals(f64),
    /// this many to a hectare
    PerHectare(f64),
}

impl Capacity {
    /// The capacity in individuals of a patch of this area.
    pub(super) fn individuals(self, area_ha: f64) -> f64 {
        match self {
            Self::Individuals(individuals) => individuals,
            Self::PerHectare(per_hectare) => per_hectare * area_ha,
        }
    }
}

impl Values {
    /// Reads everything that the table names beside the geometry.
    pub(super) fn read(
        table: &LandscapeTable,
        features: &[Feature],
        file: &Path,
        stages: &[String],
        findings: &Findings<'_>,
    ) -> Self {
        let source = Source { features, file, findings };
        let (capacities, courses) = source.capacities(table);
        Self {
            areas_ha: table.area.as_ref().map_or_else(Vec::new, |area| source.numbers(area, AREAS_HA)),
            capacities,
            courses,
            starts: source.starts(&table.start, stages),
        }
    }
}

/// The features, for one value after the other.
struct Source<'a> {
    features: &'a [Feature],
    file: &'a Path,
    findings: &'a Findings<'a>,
}

impl Source<'_> {
    fn numbers(&self, property: &Said<String>, admitted: Numbers) -> Vec<Option<f64>> {
        numbers(self.features, self.file, property, admitted, self.findings)
    }

    /// The names for tables; `None` where some feature has none, which has been noted, so that its row is not called unknown.
    fn names(&self) -> Option<Names<'_>> {
        self.features.iter().enumerate().map(|(position, feature)| Some((feature.name.as_deref()?, position))).collect()
    }

    /// The capacities at census 0 and, where a table states them, by years.
    fn capacities(&self, table: &LandscapeTable) -> (Vec<Option<Capacity>>, Vec<Option<Course>>) {
        let capacities = match &table.capacity {
            CapacityFrom::PerHectare { per_hectare, quality } => {
                let qualities = match quality {
                    Some(property) => {
                        let qualities = self.numbers(property, NOT_NEGATIVE);
                        self.warn_of_high_quality(property, &qualities);
                        qualities
                    }
                    None => vec![Some(1.0); self.features.len()],
                };
                let capacity = |quality: f64| Capacity::PerHectare(per_hectare.value * quality);
                qualities.into_iter().map(|quality| quality.map(capacity)).collect()
            }
            CapacityFrom::Property(property) => {
                let capacities = self.numbers(property, NOT_NEGATIVE);
                capacities.into_iter().map(|capacity| capacity.map(Capacity::Individuals)).collect()
            }
            CapacityFrom::Table(path) => {
                let n = self.features.len();
                let Some(names) = self.names() else { return (vec![None; n], vec![None; n]) };
                let courses = tables::capacities(path, &names, self.features.len(), self.findings);
                self.refuse_trend_beside_years(&courses, table);
                let at_start =
                    |course: &Option<Course>| course.as_ref().map(|course| Capacity::Individuals(at(course, 0)));
                return (courses.iter().map(at_start).collect(), courses);
            }
            CapacityFrom::FullOrEmpty(_) => vec![Some(Capacity::Individuals(1.0)); self.features.len()],
        };
        (capacities, Vec::new())
    }

    /// A table by years says already how capacities change.
    fn refuse_trend_beside_years(&self, courses: &[Option<Course>], table: &LandscapeTable) {
        let Some(trend) = &table.capacity_changes.trend_per_year else { return };
        if courses.iter().flatten().any(|course| course.len() > 1) {
            let mistake = trend.mistake("no trend beside a table with years, which says how capacities change");
            self.findings.mistake("trend", mistake.advise("take the trend out, or the years out of the table"));
        }
    }

    /// A quality above 1 is lawful (better ground than the density was measured on), but often a percentage.
    fn warn_of_high_quality(&self, property: &Said<String>, qualities: &[Option<f64>]) {
        let highest = self
            .features
            .iter()
            .zip(qualities)
            .filter_map(|(feature, quality)| Some((feature, quality.filter(|quality| *quality > 1.0)?)))
            .max_by(|a, b| a.1.total_cmp(&b.1));
        if let Some((feature, quality)) = highest {
            let found = format!("{} = {quality}, the highest", property.value);
            let expected = "quality multiplies individuals per hectare: 1 leaves them as they are";
            let warning = Mistake::new(feature.place(self.file), found, expected);
            self.findings.warning("quality", warning.advise("if it is a percentage, divide it by 100 in the GIS"));
        }
    }

    fn starts(&self, from: &StartFrom, stages: &[String]) -> Vec<Option<Start>> {
        match from {
            StartFrom::ShareOfCapacity(share) => {
                if share.value > 1.0 {
                    let warning = share.mistake("more individuals than the patches have capacity for");
                    self.findings.warning("share", warning.advise("if it is a percentage, divide it by 100"));
                }
                vec![Some(Start::ShareOfCapacity(share.value)); self.features.len()]
            }
            StartFrom::Property(property) => {
                let totals = self.numbers(property, COUNTS);
                totals.into_iter().map(|total| total.map(Start::Total)).collect()
            }
            StartFrom::Table(path) => {
                let Some(names) = self.names() else { return vec![None; self.features.len()] };
                let counts = tables::counts(path, &names, self.features.len(), stages, self.findings);
                counts.into_iter().map(|counts| counts.map(Start::from)).collect()
            }
            StartFrom::OccupiedProperty(property) => {
                full_or_empty(occupied::of_property(self.features, self.file, property, self.findings))
            }
            StartFrom::OccupiedTable(path) => {
                let Some(names) = self.names() else { return vec![None; self.features.len()] };
                full_or_empty(tables::occupied(path, &names, self.features.len(), self.findings))
            }
        }
    }
}

/// An occupied patch holds one, an empty one none.
fn full_or_empty(occupied: Vec<Option<bool>>) -> Vec<Option<Start>> {
    let start = |occupied: bool| Start::Total(f64::from(u8::from(occupied)));
    occupied.into_iter().map(|occupied| occupied.map(start)).collect()
}

impl From<Counts> for Start {
    fn from(counts: Counts) -> Self {
        match counts {
            Counts::Total(total) => Self::Total(total),
            Counts::ByStage(stages) => Self::ByStage(stages),
        }
    }
}

/// Notes capacities beyond all numbers, and that there is no capacity anywhere, or nobody to start with.
pub(super) fn check_totals(table: &LandscapeTable, file: &Path, patches: &[Patch], findings: &Findings<'_>) {
    for patch in patches.iter().filter(|patch| !patch.capacity.is_finite()) {
        let found = "individuals per hectare times area times quality, beyond all numbers";
        findings.mistake("overflow", Mistake::new(patch.place.clone(), found, "a capacity that can be counted"));
    }
    if patches.iter().all(|patch| patch.capacity <= 0.0) {
        let (place, words) = table.capacity.said();
        let mistake = Mistake::new(place.clone(), words, "capacity above 0 in at least one patch");
        findings.mistake("totals", mistake.advise("look at the property or table that it comes from"));
        return;
    }
    let empty = patches.iter().all(|patch| match &patch.start {
        Start::ShareOfCapacity(share) => *share <= 0.0,
        Start::Total(total) => *total <= 0.0,
        Start::ByStage(counts) => counts.iter().all(|count| *count == 0),
    });
    let counted = !matches!(table.capacity, CapacityFrom::FullOrEmpty(_));
    if empty && counted {
        let warning = Mistake::new(Place::file(file), "no patch has any individual at the start", "an empty network");
        findings.warning("totals", warning.advise("give start numbers, unless a proposal releases animals"));
    }
}
