//! CSV tables with a row for every patch.

use std::collections::{BTreeMap, BTreeSet};

use super::capacity_years::Course;
use super::findings::Findings;
use super::names::name_of_cell;
use super::occupied;
use crate::mistake::{Mistake, nearest_word};
use crate::study::{CsvRow, CsvTable, NOT_NEGATIVE, Numbers, Said};

const PATCH: &str = "patch";
const COUNT: &str = "count";
const OCCUPIED: &str = "occupied";
const CAPACITY: &str = "capacity";
const YEAR: &str = "year";

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

/// Reads a table `patch,capacity` or `patch,year,capacity`: the capacities of each of `features` features by years, those
/// without years being of year 0; `None` where a mistake has been noted.
pub(super) fn capacities(
    said: &Said<String>,
    names: &Names<'_>,
    features: usize,
    findings: &Findings<'_>,
) -> Vec<Option<Course>> {
    let mut courses = vec![None; features];
    let Some(table) = open(said, findings) else { return courses };
    let by_years = table.header.iter().any(|column| column == YEAR);
    let repeats = if by_years { Repeats::Lawful } else { Repeats::Refused };
    let Some(table) = Rows::of(table, said, names, repeats, findings) else { return courses };
    let expected: &[&str] = if by_years { &[YEAR, CAPACITY] } else { &[CAPACITY] };
    let Some(capacity) = table.column(CAPACITY, findings) else { return courses };
    table.refuse_other_columns(expected, findings);
    let year = if by_years { table.column(YEAR, findings) } else { None };
    let mut spoilt = vec![false; features];
    for (feature, row) in &table.rows {
        let at = match year {
            Some(column) => table.year(row, column, courses[*feature].as_ref(), findings),
            None => Some(0),
        };
        let Some(point) = at.zip(table.number(row, capacity, NOT_NEGATIVE, findings)) else {
            spoilt[*feature] = true;
            continue;
        };
        courses[*feature].get_or_insert_with(Course::new).push(point);
    }
    courses.into_iter().zip(spoilt).map(|(course, spoilt)| course.filter(|_| !spoilt)).collect()
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
    let Some(table) = open(said, findings) else { return counts };
    let Some(table) = Rows::of(table, said, names, Repeats::Refused, findings) else { return counts };
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
            let by_stage: Vec<_> = columns
                .iter()
                .map(|column| table.whole(row, *column, "a whole number of individuals", findings))
                .collect();
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
    let table = open(said, findings).and_then(|table| Rows::of(table, said, names, Repeats::Refused, findings));
    let Some(table) = table else { return occupied };
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

/// Whether a patch may have more than one row.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
enum Repeats {
    Lawful,
    Refused,
}

fn open(said: &Said<String>, findings: &Findings<'_>) -> Option<CsvTable> {
    let table = CsvTable::read(findings.document, said);
    if table.is_none() {
        findings.noted();
    }
    table
}

impl Rows {
    fn of(
        mut table: CsvTable,
        said: &Said<String>,
        names: &Names<'_>,
        repeats: Repeats,
        findings: &Findings<'_>,
    ) -> Option<Self> {
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
            if let Some(earlier) = lines.insert(*feature, row.line).filter(|_| repeats == Repeats::Refused) {
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

    /// The year of a row, if it is one and comes after those that the patch has already.
    fn year(&self, row: &CsvRow, column: usize, course: Option<&Course>, findings: &Findings<'_>) -> Option<u32> {
        let year = self.whole(row, column, "a whole year, counted from census 0", findings)?;
        let last = course.and_then(|course| course.last()).map(|(last, _)| *last);
        if let Some(last) = last.filter(|last| *last >= year) {
            let found = format!("{YEAR} = {year} after {YEAR} = {last} of the same patch");
            let mistake = Mistake::new(self.table.place(row.line), found, "the years of a patch in order, each once");
            findings.mistake("year", mistake);
            return None;
        }
        Some(year)
    }

    fn whole(&self, row: &CsvRow, column: usize, expected: &str, findings: &Findings<'_>) -> Option<u32> {
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
        findings.mistake("cell", Mistake::new(self.table.place(row.line), found, expected));
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
