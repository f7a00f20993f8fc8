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

/// Reads the rows of a life cycle whose stages follow each other as they stand.
pub(super) fn read(table: &Table<'_>, young: &Young) -> Option<Cycle> {
    let rows = table.tables("stage");
    let next: Vec<Option<usize>> = (1..=rows.len()).map(|next| (next < rows.len()).then_some(next)).collect();
    read_rows(rows, &next, young, &mut |row, _| {
        for key in ["sex", "mates"].into_iter().filter(|key| row.has(key)) {
            row.mistake(row.address(key), "no such key unless individuals = \"both sexes\"");
        }
    })
}

/// Reads rows of which each is followed by the row `next` says, if any. `read_more` reads the keys of a row that not every
/// life cycle has; it is told the row's position.
pub(super) fn read_rows(
    rows: Vec<Table<'_>>,
    next: &[Option<usize>],
    young: &Young,
    read_more: &mut dyn FnMut(&Table<'_>, usize),
) -> Option<Cycle> {
    let mut names = BTreeSet::new();
    let rows: Vec<Option<Row>> = rows
        .into_iter()
        .enumerate()
        .map(|(position, mut row)| {
            let name = read_name(&mut row, &mut names);
            read_more(&row, position);
            read_row(row, name, young, next[position].is_none())
        })
        .collect();
    if rows.is_empty() {
        return None;
    }
    let rows: Vec<Row> = rows.into_iter().collect::<Option<_>>()?;
    let fate_shares = (0..rows.len()).map(|from| shares(&rows, from, next[from])).collect();
    let emigration_said = rows.iter().find_map(|row| row.emigration.clone().filter(|said| said.value > 0.0));
    let mut cycle = Cycle { stages: vec![], survival: vec![], fate_shares, fecundity: vec![], emigration_said };
    for row in rows {
        cycle.stages.push(row.stage);
        cycle.survival.push(row.survival);
        cycle.fecundity.push(row.fecundity);
    }
    Some(cycle)
}

fn read_row(row: Table<'_>, name: Option<String>, young: &Young, last: bool) -> Option<Row> {
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
fn shares(rows: &[Row], from: usize, next: Option<usize>) -> Vec<f64> {
    let mut shares = vec![0.0; rows.len()];
    let unless_said = if next.is_some() { 1.0 } else { 0.0 };
    let advance = rows[from].advance.as_ref().map_or(unless_said, |said| said.value);
    shares[from] = 1.0 - advance;
    if let Some(next) = next {
        shares[next] = advance;
    }
    shares
}
