//! The tables as CSV (RFC 4180 but for the line ends, which are a line feed), numbers in full precision: the shortest
//! text that reads back as the same number. A cell is empty where a thing did not happen or could not be told.

use std::fmt::Write as _;
use std::io;

use super::columns::{self, Cell, Column};
use crate::outcome::Outcome;

/// Writes `by_year.csv`.
///
/// # Errors
/// If `to` cannot be written.
pub fn by_year(outcome: &Outcome, to: impl io::Write) -> io::Result<()> {
    write(outcome, columns::by_year(outcome.counted), &outcome.by_year, to)
}

/// Writes `by_patch.csv`.
///
/// # Errors
/// If `to` cannot be written.
pub fn by_patch(outcome: &Outcome, to: impl io::Write) -> io::Result<()> {
    write(outcome, columns::by_patch(outcome.counted), &outcome.by_patch, to)
}

/// Writes `by_link.csv`.
///
/// # Errors
/// If `to` cannot be written.
pub fn by_link(outcome: &Outcome, to: impl io::Write) -> io::Result<()> {
    write(outcome, columns::by_link(outcome.counted), &outcome.by_link, to)
}

/// Writes `by_replicate.csv`.
///
/// # Errors
/// If `to` cannot be written.
pub fn by_replicate(outcome: &Outcome, to: impl io::Write) -> io::Result<()> {
    write(outcome, columns::by_replicate(outcome.counted), &outcome.by_replicate, to)
}

fn write<Row>(outcome: &Outcome, columns: &[Column<Row>], rows: &[Row], to: impl io::Write) -> io::Result<()> {
    let columns: Vec<_> = columns.iter().filter(|column| (column.stands_in)(outcome)).collect();
    let mut table = csv::Writer::from_writer(to);
    table.write_record(columns.iter().map(|column| column.name))?;
    let mut text = String::new();
    for row in rows {
        for column in &columns {
            text.clear();
            spell((column.cell)(outcome, row), &mut text);
            table.write_field(&text)?;
        }
        table.write_record(None::<&[u8]>)?;
    }
    table.flush()
}

fn spell(cell: Cell<'_>, text: &mut String) {
    let spelt = match cell {
        Cell::Text(words) => text.write_str(words),
        Cell::Whole(number) => write!(text, "{number}"),
        Cell::Number(number) => write!(text, "{number}"),
        Cell::Flag(flag) => write!(text, "{flag}"),
        Cell::Empty => Ok(()),
    };
    spelt.expect("a text in memory takes whatever is written to it");
}
