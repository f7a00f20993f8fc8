//! CSV tables that a study names: a header, and rows that know their line.

use std::path::{Path, PathBuf};

use super::document::Document;
use super::table::{Numbers, Said};
use crate::mistake::{Mistake, Place};

/// A CSV table with a header (RFC 4180), its cells trimmed.
#[derive(Debug)]
pub struct CsvTable {
    file: PathBuf,
    /// the names of the columns
    pub header: Vec<String>,
    /// the rows below the header; blank lines are left out
    pub rows: Vec<CsvRow>,
}

/// One row of a table.
#[derive(Debug)]
pub struct CsvRow {
    /// line in the file, from 1 (the header is 1)
    pub line: usize,
    /// as many cells as the header has names
    pub cells: Vec<String>,
}

impl CsvTable {
    /// Reads the table that the study names. `None`, with all mistakes noted, if the file cannot be read, is not CSV, or
    /// a row has more or fewer cells than the header.
    pub fn read(document: &Document, said: &Said<String>) -> Option<Self> {
        let (file, bytes) = document.read_file(said)?;
        let bytes = bytes.strip_prefix("\u{feff}".as_bytes()).unwrap_or(&bytes);
        let mut mistakes = Vec::new();
        let table = Self::parse(&file, bytes, &mut mistakes);
        let sound = mistakes.is_empty();
        for mistake in mistakes {
            document.mistake(mistake);
        }
        sound.then_some(table)
    }

    fn parse(file: &Path, bytes: &[u8], mistakes: &mut Vec<Mistake>) -> Self {
        let mut reader = csv::ReaderBuilder::new().flexible(true).trim(csv::Trim::All).from_reader(bytes);
        let header: Vec<String> =
            reader.headers().map(|names| names.iter().map(str::to_owned).collect()).unwrap_or_default();
        if header.len() == 1 && header[0].contains(';') {
            let mistake =
                Mistake::new(Place::Row { file: file.into(), line: 1 }, &header[0], "columns parted by commas");
            mistakes.push(mistake.advise("export the table as CSV with commas, not semicolons"));
        }
        let mut table = Self { file: file.to_path_buf(), header, rows: Vec::new() };
        for record in reader.records() {
            match record {
                Ok(record) => {
                    let line = record.position().map_or(0, |position| usize::try_from(position.line()).unwrap_or(0));
                    let cells: Vec<String> = record.iter().map(str::to_owned).collect();
                    if cells.len() == table.header.len() {
                        table.rows.push(CsvRow { line, cells });
                    } else {
                        let expected = format!("{} cells, as the header has", table.header.len());
                        mistakes.push(Mistake::new(table.place(line), cells.join(","), expected));
                    }
                }
                Err(error) => {
                    let line = error.position().map_or(1, |at| usize::try_from(at.line()).unwrap_or(1));
                    mistakes.push(Mistake::new(table.place(line), "a row that cannot be read", "CSV in UTF-8"));
                }
            }
        }
        table
    }

    /// The place of a line of this table.
    pub fn place(&self, line: usize) -> Place {
        Place::Row { file: self.file.clone(), line }
    }

    /// The position of a column; notes a mistake that lists the columns there are if it is missing.
    pub fn column(&self, document: &Document, name: &str) -> Option<usize> {
        let position = self.header.iter().position(|column| column == name);
        if position.is_none() {
            let found = format!("header {}", self.header.join(","));
            document.mistake(Mistake::new(self.place(1), found, format!("a column {name}")));
        }
        position
    }

    /// The number in a cell; notes a mistake if it is not one of `numbers`.
    pub fn number(&self, document: &Document, row: &CsvRow, column: usize, numbers: Numbers) -> Option<f64> {
        self.number_or(row, column, numbers, |mistake| document.mistake(mistake))
    }

    /// The number in a cell; hands the mistake to `refuse` if it is not one of `numbers`.
    pub fn number_or(
        &self,
        row: &CsvRow,
        column: usize,
        numbers: Numbers,
        refuse: impl FnOnce(Mistake),
    ) -> Option<f64> {
        let cell = &row.cells[column];
        let number = cell.parse::<f64>().ok().filter(|number| numbers.admit(*number));
        if number.is_none() {
            let found = format!("{} = {cell}", self.header[column]);
            refuse(Mistake::new(self.place(row.line), found, numbers.to_string()));
        }
        number
    }
}
