//! CSV tables with a row for every patch.

use std::collections::{BTreeMap, BTreeSet};

use super::findings::Findings;
use super::names::name_of_cell;
use super::occupied;
use crate::mistake::{Mistake, nearest_word};
use crate::study::{CsvRow, CsvTable, Numbers, Said};

const PATCH: &str = "patch";
const COUNT: &str = "count";
const OCCUPIED: &str = "occupied";

/// The individuals that a table gives to a patch.
#[derive(Debug, Clone, PartialEq)]
pub(super) enum Counts {
    /// in all
    Total(f64),
    /// by stage, in the order of the life history
    ByStage(Vec<u32>),
}

/// The names of all patches that have one, by position among the features.
pub(super) type Names<'n> = BTreeMap<&'n str, usize>;

/// Reads a table `patch,capacity`: a number for each of `features` features; `None` where a mistake has been noted.
pub(super) fn capacities(
    said: &Said<String>,
    names: &Names<'_>,
    features: usize,
    admitted: Numbers,
    findings: &Findings<'_>,
) -> Vec<Option<f64>> {
    let mut capacities = vec![None; features];
    let Some(table) = Rows::read(said, names, findings) else { return capacities };
    let Some(column) = table.column("capacity", findings) else { return capacities };
    table.refuse_other_columns(&["capacity"], findings);
    for (feature, row) in &table.rows {
        capacities[*feature] = table.number(row, column, admitted, findings);
    }
    capacities
}

/// Reads a table `patch,count`, or `patch` and a column for every stage: the counts of each of `features` features;
/// `None` where a mistake has been noted.
pub(super) fn counts(
    said: &Said<String>,
    names: &Names<'_>,
    features: usize,
    stages: &[String],
    findings: &Findings<'_>,
) -> Vec<Option<Counts>> {
    let mut counts = vec![None; features];
    let Some(table) = Rows::read(said, names, findings) else { return counts };
    let has = |name: &str| table.table.header.iter().any(|column| column == name);
    let totals = has(COUNT) && !stages.iter().any(|stage| stage == COUNT);
    let expected: Vec<&str> =
        if totals || stages.is_empty() { vec![COUNT] } else { stages.iter().map(String::as_str).collect() };
    let columns: Vec<Option<usize>> = expected.iter().map(|name| table.column(name, findings)).collect();
    table.refuse_other_columns(&expected, findings);
    let Some(columns) = columns.into_iter().collect::<Option<Vec<usize>>>() else { return counts };
    for (feature, row) in &table.rows {
        counts[*feature] = if expected == [COUNT] {
            table.number(row, columns[0], COUNTS, findings).map(Counts::Total)
        } else {
            let by_stage: Vec<_> = columns.iter().map(|column| table.whole(row, *column, findings)).collect();
            by_stage.into_iter().collect::<Option<_>>().map(Counts::ByStage)
        };
    }
    counts
}

/// Reads a table `patch,occupied`: whether each of `features` features is occupied; `None` where a mistake has been noted.
pub(super) fn occupied(
    said: &Said<String>,
    names: &Names<'_>,
    features: usize,
    findings: &Findings<'_>,
) -> Vec<Option<bool>> {
    let mut occupied = vec![None; features];
    let Some(table) = Rows::read(said, names, findings) else { return occupied };
    let Some(column) = table.column(OCCUPIED, findings) else { return occupied };
    table.refuse_other_columns(&[OCCUPIED], findings);
    for (feature, row) in &table.rows {
        let cell = &row.cells[column];
        occupied[*feature] = occupied::of_cell(cell);
        if occupied[*feature].is_none() {
            let found = format!("{OCCUPIED} = {cell}");
            findings.mistake("cell", Mistake::new(table.table.place(row.line), found, occupied::EXPECTED));
        }
    }
    occupied
}

/// The numbers of individuals that a patch may start with.
pub(super) const COUNTS: Numbers = Numbers { low: 0.0, high: u32::MAX as f64, above_low: false, below_high: false };

/// A table whose rows have been matched with the features.
struct Rows {
    table: CsvTable,
    /// position of a feature, and its row
    rows: Vec<(usize, CsvRow)>,
}

impl Rows {
    fn read(said: &Said<String>, names: &Names<'_>, findings: &Findings<'_>) -> Option<Self> {
        let Some(mut table) = CsvTable::read(findings.document, said) else {
            findings.noted();
            return None;
        };
        let patch = column(&table, PATCH, findings)?;
        let mut rows = Vec::with_capacity(table.rows.len());
        let mut lines: BTreeMap<usize, usize> = BTreeMap::new();
        for row in std::mem::take(&mut table.rows) {
            let cell = &row.cells[patch];
            let Some(feature) = name_of_cell(cell, names) else {
                let found = format!("patch = {cell}");
                let mistake = Mistake::new(table.place(row.line), found, "the name of a patch of the landscape");
                let near = nearest_word(cell, names.keys().copied()).unwrap_or("the name as the landscape has it");
                findings.mistake("unknown patch", mistake.advise(format!("write {near}, or take the row out")));
                continue;
            };
            if let Some(earlier) = lines.insert(*feature, row.line) {
                let found = format!("patch = {cell}, which line {earlier} has already");
                findings.mistake("repeated row", Mistake::new(table.place(row.line), found, "one row for every patch"));
            } else {
                rows.push((*feature, row));
            }
        }
        for (name, _) in names.iter().filter(|(_, feature)| !lines.contains_key(feature)) {
            let mistake = said.mistake(format!("a row for every patch: {name} has none"));
            findings.mistake("missing row", mistake);
        }
        Some(Self { table, rows })
    }

    fn column(&self, name: &str, findings: &Findings<'_>) -> Option<usize> {
        column(&self.table, name, findings)
    }

    fn refuse_other_columns(&self, expected: &[&str], findings: &Findings<'_>) {
        let mut seen = BTreeSet::new();
        for name in &self.table.header {
            let known = name == PATCH || expected.contains(&name.as_str());
            if known && seen.insert(name) {
                continue;
            }
            let found = if known { format!("two columns {name}") } else { format!("column {name}") };
            let mut mistake = Mistake::new(self.table.place(1), found, format!("{PATCH},{}", expected.join(",")));
            if let Some(near) = nearest_word(name, expected.iter().copied()).filter(|_| !known) {
                mistake = mistake.advise(format!("write {near}"));
            }
            findings.mistake("column", mistake);
        }
    }

    fn number(&self, row: &CsvRow, column: usize, admitted: Numbers, findings: &Findings<'_>) -> Option<f64> {
        self.table.number_or(row, column, admitted, |mistake| findings.mistake("cell", mistake))
    }

    fn whole(&self, row: &CsvRow, column: usize, findings: &Findings<'_>) -> Option<u32> {
        let number = self.number(row, column, COUNTS, findings)?;
        if number.fract() == 0.0 {
            #[expect(
                clippy::cast_possible_truncation,
                clippy::cast_sign_loss,
                reason = "whole and admitted by COUNTS"
            )]
            return Some(number as u32);
        }
        let found = format!("{} = {}", self.table.header[column], row.cells[column]);
        findings.mistake("cell", Mistake::new(self.table.place(row.line), found, "a whole number of individuals"));
        None
    }
}

fn column(table: &CsvTable, name: &str, findings: &Findings<'_>) -> Option<usize> {
    let position = table.header.iter().position(|column| column == name);
    if position.is_none() {
        let found = format!("header {}", table.header.join(","));
        findings.mistake("column", Mistake::new(table.place(1), found, format!("a column {name}")));
    }
    position
}
