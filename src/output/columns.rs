//! The columns of the tables, each named once: CSV and GeoJSON are written from the same lists.

use super::occupancy::columns as occupancy;
use crate::outcome::{Counted, LinkRow, Outcome, PatchRow, ReplicateRow, YearRow};

/// What stands in one column of one row.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) enum Cell<'a> {
    Text(&'a str),
    Whole(u64),
    Number(f64),
    Flag(bool),
    Empty,
}

impl From<u32> for Cell<'_> {
    fn from(number: u32) -> Self {
        Self::Whole(number.into())
    }
}

impl From<u64> for Cell<'_> {
    fn from(number: u64) -> Self {
        Self::Whole(number)
    }
}

/// A number that is not finite is one that the replicates could not give: it is left empty.
impl From<f64> for Cell<'_> {
    fn from(number: f64) -> Self {
        if number.is_finite() { Self::Number(number) } else { Self::Empty }
    }
}

impl From<bool> for Cell<'_> {
    fn from(flag: bool) -> Self {
        Self::Flag(flag)
    }
}

impl<'a> From<&'a str> for Cell<'a> {
    fn from(text: &'a str) -> Self {
        Self::Text(text)
    }
}

impl<'a, T: Into<Cell<'a>>> From<Option<T>> for Cell<'a> {
    fn from(maybe: Option<T>) -> Self {
        maybe.map_or(Self::Empty, Into::into)
    }
}

/// A column: its name, how a row fills it, and in which outcomes it stands.
pub(super) struct Column<Row> {
    pub(super) name: &'static str,
    pub(super) cell: for<'a> fn(&'a Outcome, &'a Row) -> Cell<'a>,
    pub(super) stands_in: fn(&Outcome) -> bool,
}

pub(super) const fn column<Row>(name: &'static str, cell: for<'a> fn(&'a Outcome, &'a Row) -> Cell<'a>) -> Column<Row> {
    Column { name, cell, stands_in: |_| true }
}

/// The columns of the table by year.
pub(super) fn by_year(counted: Counted) -> &'static [Column<YearRow>] {
    match counted {
        Counted::Individuals => BY_YEAR,
        Counted::OccupiedPatches => occupancy::BY_YEAR,
    }
}

/// The columns of the table by patch.
pub(super) fn by_patch(counted: Counted) -> &'static [Column<PatchRow>] {
    match counted {
        Counted::Individuals => BY_PATCH,
        Counted::OccupiedPatches => occupancy::BY_PATCH,
    }
}

/// The columns of the table by link.
pub(super) fn by_link(counted: Counted) -> &'static [Column<LinkRow>] {
    match counted {
        Counted::Individuals => BY_LINK,
        Counted::OccupiedPatches => occupancy::BY_LINK,
    }
}

/// The columns of the table by replicate.
pub(super) fn by_replicate(counted: Counted) -> &'static [Column<ReplicateRow>] {
    match counted {
        Counted::Individuals => BY_REPLICATE,
        Counted::OccupiedPatches => occupancy::BY_REPLICATE,
    }
}

const BY_YEAR: &[Column<YearRow>] = &[
    column("year", |_, row| row.year.into()),
    column("persistence", |_, row| row.persistence.value.into()),
    column("persistence_low", |_, row| row.persistence.low.into()),
    column("persistence_high", |_, row| row.persistence.high.into()),
    column("quasi_extinction", |_, row| row.quasi_extinction.map(|estimate| estimate.value).into()),
    column("quasi_extinction_low", |_, row| row.quasi_extinction.map(|estimate| estimate.low).into()),
    column("quasi_extinction_high", |_, row| row.quasi_extinction.map(|estimate| estimate.high).into()),
    column("mean_abundance", |_, row| row.mean_abundance.value.into()),
    column("sd_abundance", |_, row| row.sd_abundance.into()),
    column("abundance_5", |_, row| row.abundance[0].into()),
    column("abundance_25", |_, row| row.abundance[1].into()),
    column("abundance_50", |_, row| row.abundance[2].into()),
    column("abundance_75", |_, row| row.abundance[3].into()),
    column("abundance_95", |_, row| row.abundance[4].into()),
    column("mean_occupied_patches", |_, row| row.mean_occupied_patches.into()),
    column("mean_abundance_low", |_, row| row.mean_abundance.low.into()),
    column("mean_abundance_high", |_, row| row.mean_abundance.high.into()),
];

const BY_PATCH: &[Column<PatchRow>] = &[
    column("patch", |_, row| row.patch.as_str().into()),
    column("area_ha", |_, row| row.area_ha.into()),
    column("capacity", |_, row| row.capacity.into()),
    column("start", |_, row| row.start.into()),
    column("occupied_at_end", |_, row| row.occupied_at_end.value.into()),
    column("occupied_at_end_low", |_, row| row.occupied_at_end.low.into()),
    column("occupied_at_end_high", |_, row| row.occupied_at_end.high.into()),
    column("share_of_years_occupied", |_, row| row.share_of_years_occupied.into()),
    column("mean_abundance", |_, row| row.mean_abundance.value.into()),
    column("mean_abundance_at_end", |_, row| row.mean_abundance_at_end.value.into()),
    column("local_extinctions_per_century", |_, row| row.local_extinctions_per_century.into()),
    column("recolonisations_per_century", |_, row| row.recolonisations_per_century.into()),
    column("immigrants_per_year", |_, row| row.immigrants_per_year.into()),
    column("emigrants_per_year", |_, row| row.emigrants_per_year.into()),
    column("net_export_per_year", |_, row| row.net_export_per_year.value.into()),
    column("role", |_, row| row.role.word().into()),
    column("mean_abundance_low", |_, row| row.mean_abundance.low.into()),
    column("mean_abundance_high", |_, row| row.mean_abundance.high.into()),
    column("mean_abundance_at_end_low", |_, row| row.mean_abundance_at_end.low.into()),
    column("mean_abundance_at_end_high", |_, row| row.mean_abundance_at_end.high.into()),
    column("net_export_per_year_low", |_, row| row.net_export_per_year.low.into()),
    column("net_export_per_year_high", |_, row| row.net_export_per_year.high.into()),
    column("component", |_, row| row.place.map(|place| place.component).into()),
    column("splits_network", |_, row| row.place.map(|place| place.splits).into()),
    column("metapopulation_capacity_share", |_, row| row.place.map(|place| place.capacity_share).into()),
    column("connectivity_loss_percent", |_, row| row.place.and_then(|place| place.connectivity_loss_percent).into()),
    Column {
        stands_in: |outcome| outcome.summary.removed_per_year.is_some(),
        ..column("removed_per_year", |_, row: &PatchRow| row.removed_per_year.into())
    },
    Column {
        stands_in: has_patch_threshold,
        ..column("quasi_extinction", |_, row: &PatchRow| row.quasi_extinction.map(|estimate| estimate.value).into())
    },
    Column {
        stands_in: has_patch_threshold,
        ..column("quasi_extinction_low", |_, row: &PatchRow| row.quasi_extinction.map(|estimate| estimate.low).into())
    },
    Column {
        stands_in: has_patch_threshold,
        ..column("quasi_extinction_high", |_, row: &PatchRow| row.quasi_extinction.map(|estimate| estimate.high).into())
    },
];

const BY_LINK: &[Column<LinkRow>] = &[
    column("from", |outcome, row| patch_name(outcome, row.from)),
    column("to", |outcome, row| patch_name(outcome, row.to)),
    column("distance_km", |_, row| row.distance_km.into()),
    column("probability", |_, row| row.probability.into()),
    column("movers_per_year", |_, row| row.movers_per_year.into()),
    column("splits_network", |_, row| row.splits.into()),
];

const BY_REPLICATE: &[Column<ReplicateRow>] = &[
    column("replicate", |_, row| row.replicate.into()),
    column("extinct_in_year", |_, row| row.extinct_in_year.into()),
    column("quasi_extinct_in_year", |_, row| row.quasi_extinct_in_year.into()),
    column("lowest_abundance", |_, row| row.lowest_abundance.into()),
    column("abundance_at_end", |_, row| row.abundance_at_end.into()),
    column("occupied_at_end", |_, row| row.occupied_at_end.into()),
];

fn has_patch_threshold(outcome: &Outcome) -> bool {
    outcome.quasi_extinction.as_ref().is_some_and(|threshold| threshold.in_each_patch.is_some())
}

pub(super) fn patch_name(outcome: &Outcome, position: u32) -> Cell<'_> {
    outcome.by_patch[position as usize].patch.as_str().into()
}
