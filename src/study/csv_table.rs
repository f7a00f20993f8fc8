//! CSV tables that a study names: a header, and rows that know their line.

use std::path::PathBuf;

use super::document::Document;
use super::table::{Numbers, Said};
use crate::mistake::{Mistake, Place};

/// A CSV table with a header (RFC 4180), its cells trimmed.
#[derive(Debug)]
pub struct CsvTable {
    file: PathBuf,
    /// the names of the columns
    pub header: Vec<String>,
    /// the rows below the header; those without anything in them are left out
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
        let table = Self::parse(file, bytes, &mut mistakes);
        let sound = mistakes.is_empty();
        for mistake in mistakes {
            document.mistake(mistake);
        }
        sound.then_some(table)
    }

    fn parse(file: PathBuf, bytes: &[u8], mistakes: &mut Vec<Mistake>) -> Self {
        let mut table = Self { file, header: Vec::new(), rows: Vec::new() };
        let mut lines = Lines { bytes, offset: 0, line: 1 };
        let mut reader = csv::ReaderBuilder::new().flexible(true).trim(csv::Trim::All).from_reader(bytes);
        match reader.headers() {
            Ok(names) => table.header = names.iter().map(str::to_owned).collect(),
            Err(_) => {
                mistakes.push(Mistake::new(table.place(1), "a header that cannot be read", "CSV in UTF-8"));
                return table;
            }
        }
        mistakes.extend(table.header_mistake());
        for record in reader.records() {
            match record {
                Ok(record) if record.iter().all(str::is_empty) => {}
                Ok(record) => {
                    let line = lines.line_of(record.position());
                    let cells: Vec<String> = record.iter().map(str::to_owned).collect();
                    if cells.len() == table.header.len() {
                        table.rows.push(CsvRow { line, cells });
                    } else {
                        let expected = format!("{} cells, as the header has", table.header.len());
                        let mistake = Mistake::new(table.place(line), cells.join(","), expected);
                        mistakes.push(if cells.len() > table.header.len() {
                            mistake.advise(
                                "write decimals with a point, and put a text that holds a comma in quotation marks",
                            )
                        } else {
                            mistake
                        });
                    }
                }
                Err(error) => {
                    let line = lines.line_of(error.position());
                    mistakes.push(Mistake::new(table.place(line), "a row that cannot be read", "CSV in UTF-8"));
                }
            }
        }
        table
    }

    fn header_mistake(&self) -> Option<Mistake> {
        if let [only] = self.header.as_slice()
            && only.contains([';', '\t'])
        {
            let mistake = Mistake::new(self.place(1), only, "columns parted by commas");
            return Some(mistake.advise("export the table as CSV with commas, not semicolons or tabs"));
        }
        let is_repeated =
            |(position, name): (usize, &String)| !name.is_empty() && self.header[..position].contains(name);
        self.header.iter().enumerate().any(is_repeated).then(|| {
            let found = format!("header {}", self.header.join(","));
            Mistake::new(self.place(1), found, "each column once")
                .advise("rename or take out the column that is there twice")
        })
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
            let name = &self.header[column];
            let found = if cell.is_empty() { format!("{name} is empty") } else { format!("{name} = {cell}") };
            refuse(Mistake::new(self.place(row.line), found, numbers.to_string()));
        }
        number
    }
}

/// Counts lines as an editor does. The positions of the CSV reader do not serve: they stand before the line feed of the
/// row above and before the blank lines between.
struct Lines<'a> {
    bytes: &'a [u8],
    offset: usize,
    line: usize,
}

impl Lines<'_> {
    /// The line on which the row that starts at `position` has its first cell. Positions must not go back.
    fn line_of(&mut self, position: Option<&csv::Position>) -> usize {
        let start = position.and_then(|position| usize::try_from(position.byte()).ok()).unwrap_or(self.offset);
        while let Some(byte) = self.bytes.get(self.offset)
            && (self.offset < start || matches!(byte, b'\r' | b'\n'))
        {
            self.offset += 1;
            let is_line_end = match byte {
                b'\n' => true,
                b'\r' => self.bytes.get(self.offset) != Some(&b'\n'),
                _ => false,
            };
            self.line += usize::from(is_line_end);
        }
        self.line
    }
}
