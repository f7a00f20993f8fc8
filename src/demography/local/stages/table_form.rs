//! A life cycle written as rows, one `[[life_history.stage]]` each.

use std::collections::BTreeSet;

use super::Cycle;
use crate::demography::local::young::Young;
use crate::demography::{Law, Rate, RateGroup, Stage};
use crate::study::{PROBABILITY, Said, Table};

/// One row, as far as it could be read.
struct Row {
    stage: Stage,
    survival: Rate,
    advance: Option<Said<f64>>,
    fecundity: Rate,
    emigration: Option<Said<f64>>,
}

pub(super) fn read(table: &Table<'_>, young: &Young) -> Option<Cycle> {
    let rows = table.tables("stage");
    let last = rows.len().checked_sub(1)?;
    let mut names = BTreeSet::new();
    let rows: Vec<Option<Row>> = rows
        .into_iter()
        .enumerate()
        .map(|(position, row)| read_row(row, young, position == last, &mut names))
        .collect();
    let rows: Vec<Row> = rows.into_iter().collect::<Option<_>>()?;
    let fate_shares = (0..rows.len()).map(|from| shares(&rows, from)).collect();
    let emigration_said = rows.iter().find_map(|row| row.emigration.clone().filter(|said| said.value > 0.0));
    let mut cycle = Cycle { stages: vec![], survival: vec![], fate_shares, fecundity: vec![], emigration_said };
    for row in rows {
        cycle.stages.push(row.stage);
        cycle.survival.push(row.survival);
        cycle.fecundity.push(row.fecundity);
    }
    Some(cycle)
}

fn read_row(mut row: Table<'_>, young: &Young, last: bool, names: &mut BTreeSet<String>) -> Option<Row> {
    let name = read_name(&mut row, names);
    let survival = Rate::read(&row, "survival", RateGroup::Survival, Law::Beta);
    if !row.has("survival") {
        row.missing("survival", "the share alive a year later, as a number or { mean = .., sd = .. }");
    }
    let advance = read_advance(&row, last);
    let fecundity = young.read_fecundity(&row);
    let (emigration, toward_capacity) = read_common(&row);
    row.finish();
    let stage = Stage {
        name: name?,
        emigration: emigration.as_ref().map_or(0.0, |said| said.value),
        toward_capacity: toward_capacity.map_or(1.0, |said| said.value),
    };
    Some(Row { stage, survival: survival?, advance, fecundity: fecundity?, emigration })
}

/// The keys that a stage row has also where a matrix stands in place of the rates.
pub(super) fn read_common(row: &Table<'_>) -> (Option<Said<f64>>, Option<Said<f64>>) {
    (row.number("emigration", PROBABILITY), row.number("toward_capacity", PROBABILITY))
}

/// Reads the name of a stage and lets addresses speak of it by that name.
pub(super) fn read_name(row: &mut Table<'_>, names: &mut BTreeSet<String>) -> Option<String> {
    let Some(name) = row.text("name") else {
        if !row.has("name") {
            row.missing("name", "a name for the stage, such as \"adult\"");
        }
        return None;
    };
    if name.value.trim().is_empty() {
        row.document().mistake(name.mistake("a name for the stage, such as \"adult\""));
        return None;
    }
    if !names.insert(name.value.clone()) {
        row.document().mistake(name.mistake("a name that no other stage has"));
        return None;
    }
    row.rename(format!("life_history.{}", name.value));
    Some(name.value)
}

fn read_advance(row: &Table<'_>, last: bool) -> Option<Said<f64>> {
    let advance = row.number("advance", PROBABILITY)?;
    if last && advance.value > 0.0 {
        let mistake = advance.mistake("no advance on the last stage, since there is none to move on to");
        row.document().mistake(mistake.advise("take the key out, or add the stage that comes after"));
    }
    Some(advance)
}

/// The shares of a stage's survivors that are found in each stage a year later.
fn shares(rows: &[Row], from: usize) -> Vec<f64> {
    let mut shares = vec![0.0; rows.len()];
    let advance = match &rows[from].advance {
        Some(said) => said.value,
        None if from + 1 < rows.len() => 1.0,
        None => 0.0,
    };
    shares[from] = 1.0 - advance;
    if from + 1 < rows.len() {
        shares[from + 1] = advance;
    }
    shares
}
