//! A life cycle written as a whole projection matrix.

use std::collections::BTreeSet;

use super::Cycle;
use super::table_form::{read_common, read_name};
use crate::demography::local::young::Young;
use crate::demography::rate::impossible_sd;
use crate::demography::{Law, Rate, RateGroup, Stage};
use crate::mistake::Mistake;
use crate::study::{NOT_NEGATIVE, PROBABILITY, Said, Table};

pub(super) fn read(table: &Table<'_>, young: &Young) -> Option<Cycle> {
    let rows = read_rows(table);
    let survival_sd = table.numbers("survival_sd", NOT_NEGATIVE);
    let fecundity_sd = table.numbers("fecundity_sd", NOT_NEGATIVE);
    let first_row_fates = table.numbers("first_row_fates", PROBABILITY);
    let stages = read_stages(table);
    let matrix = rows?;
    let size = matrix.value.len();
    let lists = [("survival_sd", &survival_sd), ("fecundity_sd", &fecundity_sd), ("first_row_fates", &first_row_fates)];
    let mut sound = true;
    for (_, list) in &lists {
        sound &= list.as_ref().is_none_or(|list| has_length(table, list, size));
    }
    for (key, list) in lists {
        sound &= list.is_some() || !table.has(key);
    }
    let (stages, emigration_said) = named_stages(table, stages?, size)?;
    if !sound {
        return None;
    }
    let at = |list: &Option<Said<Vec<f64>>>, stage: usize| list.as_ref().map_or(0.0, |list| list.value[stage]);
    let mut cycle = Cycle { stages, survival: vec![], fate_shares: vec![], fecundity: vec![], emigration_said };
    for from in 0..size {
        let mut fates: Vec<f64> = (0..size).map(|to| matrix.value[to][from]).collect();
        let entry = fates[0];
        fates[0] = entry * at(&first_row_fates, from);
        let survival: f64 = fates.iter().sum();
        let name = cycle.stages[from].name.clone();
        sound &= survival_is_possible(table, &matrix, &name, survival);
        let address = |what: &str| format!("life_history.{name}.{what}");
        let alive = Rate {
            address: address("survival"),
            mean: survival.min(1.0),
            sd: at(&survival_sd, from),
            group: RateGroup::Survival,
            law: Law::Beta,
        };
        let (born, born_sd) = (entry - fates[0], at(&fecundity_sd, from));
        let sd = said_sd(survival_sd.as_ref(), &alive.address, alive.sd);
        sound &= is_possible(table, sd.and_then(|sd| impossible_sd(&sd, alive.mean, alive.law)));
        let sd = said_sd(fecundity_sd.as_ref(), &address("fecundity"), born_sd);
        sound &= is_possible(table, sd.and_then(|sd| young.impossible_sd(&sd, born)));
        let too_many =
            young.too_many(born).map(|expected| matrix.mistake(format!("for {}: {expected}", address("fecundity"))));
        sound &= is_possible(table, too_many);
        cycle.fate_shares.push(fates.iter().map(|fate| if survival > 0.0 { fate / survival } else { 0.0 }).collect());
        cycle.survival.push(alive);
        cycle.fecundity.push(young.rate(address("fecundity"), born, born_sd));
    }
    sound.then_some(cycle)
}

fn read_rows(table: &Table<'_>) -> Option<Said<Vec<Vec<f64>>>> {
    let matrix = table.rows("matrix", NOT_NEGATIVE)?;
    let size = matrix.value.len();
    let square = size > 0 && matrix.value.iter().all(|row| row.len() == size);
    if !square {
        let lengths: Vec<String> = matrix.value.iter().map(|row| row.len().to_string()).collect();
        let expected = format!("a square matrix; this one has {size} rows, of lengths {}", lengths.join(", "));
        table.document().mistake(matrix.mistake(expected));
    }
    square.then_some(matrix)
}

/// The rows that stand beside the matrix: names, emigration, weight toward capacity.
fn read_stages(table: &Table<'_>) -> Option<Vec<(Stage, Option<Said<f64>>)>> {
    let mut names = BTreeSet::new();
    let rows: Vec<Option<_>> = table
        .tables("stage")
        .into_iter()
        .map(|mut row| {
            let name = read_name(&mut row, &mut names);
            for key in ["survival", "advance", "fecundity"].into_iter().filter(|key| row.has(key)) {
                row.mistake(row.address(key), "no such key beside a matrix, which holds these rates already");
            }
            let (emigration, toward_capacity) = read_common(&row);
            row.finish();
            let stage = Stage {
                name: name?,
                emigration: emigration.as_ref().map_or(0.0, |said| said.value),
                toward_capacity: toward_capacity.map_or(1.0, |said| said.value),
            };
            Some((stage, emigration))
        })
        .collect();
    rows.into_iter().collect()
}

fn named_stages(
    table: &Table<'_>,
    rows: Vec<(Stage, Option<Said<f64>>)>,
    size: usize,
) -> Option<(Vec<Stage>, Option<Said<f64>>)> {
    if rows.is_empty() {
        let stage = |number| Stage { name: format!("stage {number}"), emigration: 0.0, toward_capacity: 1.0 };
        return Some(((1..=size).map(stage).collect(), None));
    }
    if rows.len() != size {
        let found = format!("{} rows under [[life_history.stage]]", rows.len());
        table.mistake(found, format!("{size}, one for each row of the matrix"));
        return None;
    }
    let said = rows.iter().find_map(|(_, emigration)| emigration.clone().filter(|said| said.value > 0.0));
    Some((rows.into_iter().map(|(stage, _)| stage).collect(), said))
}

fn has_length(table: &Table<'_>, list: &Said<Vec<f64>>, size: usize) -> bool {
    if list.value.len() != size {
        table.document().mistake(list.mistake(format!("{size} numbers, one for each column of the matrix")));
    }
    list.value.len() == size
}

fn survival_is_possible(table: &Table<'_>, matrix: &Said<Vec<Vec<f64>>>, stage: &str, survival: f64) -> bool {
    let possible = survival <= 1.0 + 1e-9;
    if !possible {
        let expected = format!("fates of {stage} that sum to at most 1, not {survival}");
        let advice = "entries below the first row are shares of individuals; young stand in the first row";
        table.document().mistake(matrix.mistake(expected).advise(advice));
    }
    possible
}

/// An sd of a list of them, by the address that it would have in a row of its own.
fn said_sd(list: Option<&Said<Vec<f64>>>, address: &str, sd: f64) -> Option<Said<f64>> {
    list.map(|list| Said { value: sd, place: list.place.clone(), words: format!("{address}.sd = {sd}") })
}

fn is_possible(table: &Table<'_>, mistake: Option<Mistake>) -> bool {
    let possible = mistake.is_none();
    mistake.into_iter().for_each(|mistake| table.document().mistake(mistake));
    possible
}
