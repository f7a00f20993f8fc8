//! Both sexes: females breed as far as males allow.
//!
//! Of the females with fecundity as many breed as the males that mate allow, so many to a male; where that is fewer than
//! there are, those who do are drawn at random among them. Young are sexed one by one and enter the first stage of their
//! sex; survival and advance are as in any life cycle. With all females mated the mean of a step is the projection matrix
//! times the counts.

use std::sync::Arc;

use super::{Fates, breeders, fates, refuse_partial_weights, survive, table_form};
use crate::demography::allee::{self, AlleeEffect};
use crate::demography::density::Density;
use crate::demography::local::young::Young;
use crate::demography::local::{LocalModel, Pressure, add};
use crate::demography::{Census, LifeHistory, ProjectionMatrix};
use crate::mistake::Mistake;
use crate::random::{PlaceKey, Purpose, binomial, remove_at_random};
use crate::study::{Item, Numbers, POSITIVE, Said, Table};

/// What `individuals` says for this kind of life cycle.
pub(super) const INDIVIDUALS: &str = "both sexes";

/// Neither sex may be missing among the young.
const PART: Numbers = Numbers { low: 0.0, high: 1.0, above_low: true, below_high: true };

#[derive(Debug, Clone, Copy, PartialEq, Eq)]
enum Sex {
    Female,
    Male,
}

const SEXES: [(&str, Sex); 2] = [("female", Sex::Female), ("male", Sex::Male)];

/// Who is what: stages by position.
#[derive(Debug)]
struct Roles {
    females: Vec<usize>,
    males: Vec<usize>,
    /// males that mate
    mates: Vec<usize>,
}

#[derive(Debug)]
struct BothSexes {
    fates: Vec<Fates>,
    young: Young,
    /// whether the individuals of a stage breed if they are mated
    breeds: Vec<bool>,
    roles: Roles,
    female_share: f64,
    harem_size: f64,
}

impl LocalModel for BothSexes {
    fn step(&self, counts: &mut [u32], rates: &[f64], pressure: Pressure, place: PlaceKey, next: &mut [u32]) -> bool {
        let (survival, fecundity) = rates.split_at(counts.len());
        next.fill(0);
        let mut over = survive(&self.fates, counts, survival, pressure.survival, place, next);
        self.leave_the_mated(counts, place);
        let born = self.young.number(counts, fecundity, pressure.fecundity, place);
        let females = binomial(&mut place.draw(Purpose::SexOfYoung), born, self.female_share);
        over |= add(&mut next[self.roles.females[0]], females);
        over |= add(&mut next[self.roles.males[0]], born - females);
        counts.copy_from_slice(next);
        over || born == u32::MAX
    }

    fn young_in_words(&self) -> String {
        let harem = self.harem_size;
        let to_each =
            if (harem - 1.0).abs() < f64::EPSILON { "one female".to_owned() } else { format!("{harem} females") };
        format!(
            "{}; {} of the young are females; {to_each} to a male that mates, at most",
            self.young.in_words(),
            self.female_share
        )
    }
}

impl BothSexes {
    /// Takes all from the counts but the females that breed this year.
    fn leave_the_mated(&self, counts: &mut [u32], place: PlaceKey) {
        let mating: u64 = self.roles.mates.iter().map(|stage| u64::from(counts[*stage])).sum();
        for (count, breeds) in counts.iter_mut().zip(&self.breeds) {
            *count = if *breeds { *count } else { 0 };
        }
        let willing: u64 = counts.iter().map(|count| u64::from(*count)).sum();
        // A hair above, so that 0.29 females to each of 100 males are 29.
        let most = (self.harem_size * mating as f64 * (1.0 + 1e-12)).floor() as u64;
        if willing > most {
            remove_at_random(&mut place.draw(Purpose::Mating), counts, willing - most);
        }
    }
}

/// Reads the rows of both sexes, and what stands beside them.
pub(super) fn read(table: &Table<'_>) -> Option<LifeHistory> {
    let census = Census::read(table);
    refuse_matrix(table);
    let young = Young::read(table);
    let female_share = number_or(table, "female_share", PART, 0.5);
    let harem_size = number_or(table, "harem_size", POSITIVE, 1.0);
    let as_read = young.clone().unwrap_or(Young::Poisson);
    let rows = read_rows(table, &as_read);
    let matrix = rows.as_ref().map(|(cycle, roles)| {
        let mut matrix = super::projection_matrix(cycle, &as_read);
        let share = female_share.unwrap_or(0.5);
        for female in &roles.females {
            let young = as_read.mean(&cycle.fecundity[*female]);
            matrix.young[(0, *female)] = 0.0;
            matrix.young[(roles.females[0], *female)] = share * young;
            matrix.young[(roles.males[0], *female)] = (1.0 - share) * young;
        }
        ProjectionMatrix { leading: Some(roles.females.clone()), ..matrix }
    });
    let density = Density::read(table, matrix.as_ref().map(ProjectionMatrix::leading_part).as_ref(), false);
    let allee_effect = AlleeEffect::read(table, rows.as_ref().map(|(cycle, _)| breeders(cycle)));
    let ((cycle, roles), matrix, density) = (rows?, matrix?, density?);
    if density.ceiling {
        refuse_partial_weights(table, &cycle.stages)?;
    }
    warn_of_lasting_males(table, &matrix);
    let model = BothSexes {
        fates: cycle.fate_shares.iter().map(|shares| fates(shares)).collect(),
        young: young?,
        breeds: cycle.fecundity.iter().map(|rate| rate.mean > 0.0).collect(),
        roles,
        female_share: female_share?,
        harem_size: harem_size?,
    };
    Some(LifeHistory {
        kind: "stages",
        individuals: "females and males".to_owned(),
        stages: cycle.stages,
        rates: cycle.survival.into_iter().chain(cycle.fecundity).collect(),
        matrix,
        density,
        model: allee::under(allee_effect.as_ref(), Arc::new(model)),
        allee_effect,
        census,
        occupancy: None,
        emigration_said: cycle.emigration_said,
    })
}

/// The number of an optional key; `None` only where it is wrong.
fn number_or(table: &Table<'_>, key: &str, numbers: Numbers, default: f64) -> Option<f64> {
    if table.has(key) { table.number(key, numbers).map(|said| said.value) } else { Some(default) }
}

fn refuse_matrix(table: &Table<'_>) {
    for key in ["matrix", "survival_sd", "fecundity_sd", "first_row_fates"].into_iter().filter(|key| table.has(key)) {
        let expected =
            "no matrix where individuals = \"both sexes\"; stages, each under [[life_history.stage]] with its sex";
        table.mistake(table.address(key), expected);
    }
}

fn read_rows(table: &Table<'_>, young: &Young) -> Option<(super::Cycle, Roles)> {
    if !table.has("stage") {
        table.missing("stage", "stages, each under [[life_history.stage]] with sex = \"female\" or \"male\"");
    }
    let rows = table.tables("stage");
    let sexes: Vec<Option<Sex>> = rows.iter().map(glimpse).collect();
    let of = |sex: Sex| -> Vec<usize> { (0..rows.len()).filter(|row| sexes[*row] == Some(sex)).collect() };
    let (females, males) = (of(Sex::Female), of(Sex::Male));
    let next: Vec<Option<usize>> =
        (0..rows.len()).map(|row| (row + 1..rows.len()).find(|later| sexes[*later] == sexes[row])).collect();
    let places = rows.len();
    let mut mates: Vec<Option<Said<bool>>> = Vec::new();
    let cycle = table_form::read_rows(rows, &next, young, &mut |row, position| {
        mates.push(read_sex(row, sexes[position]));
    });
    let known = places > 0 && sexes.iter().all(Option::is_some);
    if known && (females.is_empty() || males.is_empty()) {
        table.mistake(table.address("stage"), "at least one stage of each sex");
        return None;
    }
    let mates = who_mates(table, &mates, &males);
    let cycle = cycle?;
    let mates = if known { mates? } else { return None };
    Some((cycle, Roles { females, males, mates }))
}

/// The sex of a row, as far as it can be seen before the row is read.
fn glimpse(row: &Table<'_>) -> Option<Sex> {
    match row.item("sex")? {
        Item::Text(said) => SEXES.iter().find(|(word, _)| *word == said.value).map(|(_, sex)| *sex),
        _ => None,
    }
}

/// Reads what a row says of its sex, and returns whether it mates, if it says that.
fn read_sex(row: &Table<'_>, sex: Option<Sex>) -> Option<Said<bool>> {
    if !row.has("sex") {
        row.missing("sex", "\"female\" or \"male\", since individuals = \"both sexes\"");
    }
    row.choice("sex", &SEXES);
    let mates = row.flag("mates");
    if sex == Some(Sex::Female) && row.has("mates") {
        row.mistake(row.address("mates"), "no such key on females: they breed by their fecundity");
        return None;
    }
    if sex == Some(Sex::Male) && row.has("fecundity") {
        let expected = "no such key on males: fecundity is the young of both sexes of a breeding female";
        row.mistake(row.address("fecundity"), expected);
    }
    mates
}

/// The males that mate: those who are said to, else the last stage of males.
fn who_mates(table: &Table<'_>, said: &[Option<Said<bool>>], males: &[usize]) -> Option<Vec<usize>> {
    let says = |male: usize, what: bool| said[male].as_ref().is_some_and(|said| said.value == what);
    let marked: Vec<usize> = males.iter().copied().filter(|male| says(*male, true)).collect();
    let last = *males.last()?;
    if marked.is_empty() && says(last, false) {
        table.mistake(table.address("stage"), "mates = true on at least one stage of males");
        return None;
    }
    Some(if marked.is_empty() { vec![last] } else { marked })
}

fn warn_of_lasting_males(table: &Table<'_>, matrix: &ProjectionMatrix) {
    if matrix.settles() {
        return;
    }
    let note = format!(
        "females grow by {:.4} a year and males last longer than that, so that the sex ratio never settles; \
         where the start is a total it is split at the sex ratio at birth",
        matrix.growth()
    );
    table.document().warning(Mistake::new(table.place().clone(), "males outlast the females", note));
}
