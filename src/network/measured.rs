//! A measured dispersal matrix: who arrives where, from marked or genotyped animals.

use std::collections::{BTreeMap, BTreeSet};

use crate::mistake::{Mistake, Mistakes, Place, nearest_word};
use crate::study::{CsvRow, CsvTable, Document, PROBABILITY, Said};

/// How far above 1 the probabilities out of a patch may add up, for decimals that were rounded when written down.
const ROUNDING: f64 = 1e-9;

/// The rows of a table `from,to,probability`, with `probability` that an emigrant of `from` arrives alive in `to`.
#[derive(Debug, Clone)]
pub struct Measured {
    rows: Vec<Row>,
}

#[derive(Debug, Clone)]
struct Row {
    from: String,
    to: String,
    probability: f64,
    place: Place,
}

impl Measured {
    /// Reads the table that the study names. `None`, with every mistake noted, if it cannot be read, a row links a patch
    /// to itself or repeats a pair, a probability is none, or those out of a patch add up to more than 1.
    pub(super) fn read(document: &Document, said: &Said<String>) -> Option<Self> {
        let table = CsvTable::read(document, said)?;
        let [from, to, probability] = ["from", "to", "probability"].map(|name| table.column(document, name));
        let columns = [from?, to?, probability?];
        let rows: Vec<Option<Row>> = table.rows.iter().map(|row| read_row(document, &table, row, columns)).collect();
        let all_read = rows.iter().all(Option::is_some);
        let rows: Vec<Row> = rows.into_iter().flatten().collect();
        let faults = [repeats(&rows), overfull(&rows)].concat();
        let sound = all_read && faults.is_empty();
        for fault in faults {
            document.mistake(fault);
        }
        sound.then_some(Self { rows })
    }

    /// For each of the patches `names`, in order, the positions of its targets, rising, with their probabilities.
    ///
    /// # Errors
    /// Every row that names a patch not among `names`.
    pub(super) fn by_source<'a>(
        &self,
        names: impl Iterator<Item = &'a str>,
    ) -> Result<Vec<Vec<(usize, f64)>>, Mistakes> {
        let positions: BTreeMap<&str, usize> = names.enumerate().map(|(position, name)| (name, position)).collect();
        let mut rows = vec![Vec::new(); positions.len()];
        let mut unknown = Vec::new();
        for row in &self.rows {
            let [from, to] = [("from", &row.from), ("to", &row.to)].map(|(column, name)| {
                let position = positions.get(name.as_str()).copied();
                if position.is_none() {
                    let mistake =
                        Mistake::new(row.place.clone(), format!("{column} = {name}"), "a patch of the landscape");
                    let near =
                        nearest_word(name, positions.keys().copied()).unwrap_or("the name as the landscape has it");
                    unknown.push(mistake.advise(format!("write {near}, or take the row out")));
                }
                position
            });
            if let (Some(from), Some(to)) = (from, to) {
                rows[from].push((to, row.probability));
            }
        }
        Mistakes::none_in(unknown)?;
        for row in &mut rows {
            row.sort_by_key(|(to, _)| *to);
        }
        Ok(rows)
    }
}

fn read_row(document: &Document, table: &CsvTable, row: &CsvRow, columns: [usize; 3]) -> Option<Row> {
    let [from, to, probability] = columns;
    let probability = table.number(document, row, probability, PROBABILITY);
    let [from, to] = [from, to].map(|column| row.cells[column].clone());
    if from == to {
        let expected = "two different patches: those who stay are no emigrants";
        document.mistake(Mistake::new(table.place(row.line), format!("from {from} to {to}"), expected));
        return None;
    }
    Some(Row { from, to, probability: probability?, place: table.place(row.line) })
}

fn repeats(rows: &[Row]) -> Vec<Mistake> {
    let mut seen = BTreeSet::new();
    rows.iter()
        .filter(|row| !seen.insert((&row.from, &row.to)))
        .map(|row| {
            let found = format!("from {} to {} again", row.from, row.to);
            Mistake::new(row.place.clone(), found, "one row for each pair of patches")
        })
        .collect()
}

/// One mistake for each source whose probabilities pass 1, at the row where they do.
fn overfull(rows: &[Row]) -> Vec<Mistake> {
    let mut sums: BTreeMap<&str, f64> = BTreeMap::new();
    let mut mistakes = Vec::new();
    for row in rows {
        let sum = sums.entry(&row.from).or_default();
        let before = *sum;
        *sum += row.probability;
        if before <= 1.0 + ROUNDING && *sum > 1.0 + ROUNDING {
            let found = format!("the rows from {} add up to more than 1 here", row.from);
            mistakes.push(Mistake::new(row.place.clone(), found, "probabilities that sum to at most 1 for each patch"));
        }
    }
    mistakes
}
