//! A record of good and bad years, in place of drawn ones.

use crate::mistake::Mistake;
use crate::random::{Purpose, ReplicateKey};
use crate::study::{CsvRow, CsvTable, Document, Numbers, Said, Table};

/// The deviates that a record may hold; a standard normal one lies beyond with chance 1e-15.
const DEVIATES: Numbers = Numbers { low: -8.0, high: 8.0, above_low: false, below_high: false };
/// Years of the calendar, such as 1987.
const YEARS: Numbers = Numbers { low: -1e6, high: 1e6, above_low: false, below_high: false };
/// How far from 0 the mean of a record may lie, and how far from 1 its sd, unsaid.
const SLACK: f64 = 0.1;

/// How the years of a record become those of a replicate.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Use {
    /// in order, from the first
    Replay,
    /// in blocks of consecutive years, each beginning at a year drawn at random; after the last year comes the first
    /// (circular block bootstrap, Politis & Romano 1992)
    Resample {
        /// years in a block
        block_years: u32,
    },
}

/// One deviate for each of a run of years.
#[derive(Debug, Clone, PartialEq)]
pub struct Record {
    /// the table that it stands in, as the study names it
    pub table: Said<String>,
    /// the deviates, year after year; at least two
    pub deviates: Vec<f64>,
    /// what is made of them
    pub usage: Use,
}

impl Record {
    /// Reads `{ table, use, block_years }` and the file. `None` if there is a mistake in them, which has then been noted.
    pub(super) fn read(keys: Table<'_>) -> Option<Self> {
        let document = keys.document();
        if !keys.has("table") {
            keys.missing("table", "a CSV file with the columns year and deviate");
        }
        let table = keys.text("table");
        if !keys.has("use") {
            keys.missing("use", "\"replay\" (in order) or \"resample\" (in blocks drawn at random)");
        }
        let is_replay = keys.choice("use", &[("replay", true), ("resample", false)]);
        let block = keys.whole("block_years", 1, u32::MAX.into());
        let has_block = keys.has("block_years");
        keys.finish();
        let table = table?;
        let deviates = CsvTable::read(document, &table).and_then(|rows| deviates(document, &rows));
        let (is_replay, deviates) = (is_replay?.value, deviates?);
        warn_of_other_moments(document, &table, &deviates);
        if is_replay && has_block {
            document.mistake(block?.mistake("no block_years where the record is replayed in order"));
            return None;
        }
        if block.as_ref().is_some_and(|said| said.value > deviates.len() as u64) {
            document.mistake(block?.mistake(format!("at most {}, the years of the record", deviates.len())));
            return None;
        }
        let block_years = if has_block { u32::try_from(block?.value).ok()? } else { 1 };
        let usage = if is_replay { Use::Replay } else { Use::Resample { block_years } };
        Some(Self { table, deviates, usage })
    }

    /// The deviate of a year of a replicate; beyond the end of a replayed record, its last.
    pub fn deviate(&self, replicate: ReplicateKey, year: u32) -> f64 {
        let n = self.deviates.len();
        let position = match self.usage {
            Use::Replay => (year as usize).min(n - 1),
            Use::Resample { block_years } => {
                let within = year % block_years;
                let mut stream = replicate.year(year - within).network().draw(Purpose::RecordedYears);
                (stream.below(n as u64) as usize + within as usize) % n
            }
        };
        self.deviates[position]
    }

    /// The mistake of a record that is replayed and ends before the horizon, if it does.
    pub fn too_short(&self, horizon: u32) -> Option<Mistake> {
        let n = self.deviates.len();
        if self.usage != Use::Replay || n >= horizon as usize {
            return None;
        }
        let mistake =
            self.table.mistake(format!("at least {horizon} years to replay, as the horizon has; it holds {n}"));
        Some(mistake.advise(format!("write use = \"resample\", or a horizon of at most {n}")))
    }
}

/// The deviates of a table whose years follow each other.
fn deviates(document: &Document, table: &CsvTable) -> Option<Vec<f64>> {
    let columns = (table.column(document, "year"), table.column(document, "deviate"));
    let (year, deviate) = (columns.0?, columns.1?);
    if table.rows.len() < 2 {
        document.mistake(Mistake::new(table.place(1), "fewer than two rows", "a record of at least two years"));
        return None;
    }
    let read = |row: &CsvRow| {
        let cells = (table.number(document, row, year, YEARS), table.number(document, row, deviate, DEVIATES));
        Some((cells.0?, cells.1?))
    };
    let rows: Vec<Option<(f64, f64)>> = table.rows.iter().map(read).collect();
    let rows: Vec<(f64, f64)> = rows.into_iter().collect::<Option<_>>()?;
    let first = rows[0].0;
    for ((expected, row), (found, _)) in (0_u32..).zip(&table.rows).zip(&rows) {
        let expected = first + f64::from(expected);
        if (found - expected).abs() > 0.0 {
            let mistake = Mistake::new(table.place(row.line), format!("year = {found}"), format!("{expected}"));
            document.mistake(mistake.advise("give every year from the first to the last, in order"));
            return None;
        }
    }
    Some(rows.into_iter().map(|(_, deviate)| deviate).collect())
}

/// The means and sds of rates are those of deviates of mean 0 and sd 1.
fn warn_of_other_moments(document: &Document, table: &Said<String>, deviates: &[f64]) {
    let n = deviates.len() as f64;
    let mean = deviates.iter().sum::<f64>() / n;
    let sd = (deviates.iter().map(|deviate| (deviate - mean) * (deviate - mean)).sum::<f64>() / (n - 1.0)).sqrt();
    if mean.abs() > SLACK || (sd - 1.0).abs() > SLACK {
        let note = format!(
            "deviates of mean 0 and sd 1, and not {mean:.2} and {sd:.2}: means and sds of rates will not be those stated"
        );
        document.warning(table.mistake(note).advise("subtract the mean of the years and divide by their sd"));
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::mistake::Place;

    fn record(usage: Use) -> Record {
        let table = Said { value: "years.csv".to_owned(), place: Place::Call, words: String::new() };
        Record { table, deviates: vec![0.0, 1.0, 2.0, 3.0, 4.0], usage }
    }

    fn years(record: &Record, replicate: u32, n: u32) -> Vec<u32> {
        (0..n).map(|year| record.deviate(ReplicateKey::new(11, replicate), year) as u32).collect()
    }

    #[test]
    fn a_replay_is_in_order() {
        assert_eq!(years(&record(Use::Replay), 3, 5), [0, 1, 2, 3, 4]);
        assert!(record(Use::Replay).too_short(5).is_none());
        assert!(record(Use::Replay).too_short(6).unwrap().advice.unwrap().contains("resample"));
        assert!(record(Use::Resample { block_years: 2 }).too_short(6).is_none());
    }

    #[test]
    fn blocks_keep_their_order_and_go_round() {
        for replicate in 0..50 {
            let years = years(&record(Use::Resample { block_years: 3 }), replicate, 12);
            for block in years.chunks(3) {
                assert_eq!(block, [block[0], (block[0] + 1) % 5, (block[0] + 2) % 5]);
            }
        }
    }

    /// Null: of the first years of the blocks of 4,000 replicates each is any year of the record with chance 1/5, chi-square of 4
    /// degrees of freedom, 0.9999 quantile 23.51 (table); and so for the second block, whatever the first was.
    #[test]
    fn blocks_begin_anywhere() {
        let mut counts = [[0.0_f64; 5]; 2];
        let mut alike = 0.0;
        for replicate in 0..4000 {
            let years = years(&record(Use::Resample { block_years: 3 }), replicate, 6);
            counts[0][years[0] as usize] += 1.0;
            counts[1][years[3] as usize] += 1.0;
            alike += f64::from(u8::from(years[0] == years[3]));
        }
        for counts in counts {
            let chi_square: f64 = counts.iter().map(|count| (count - 800.0) * (count - 800.0) / 800.0).sum();
            assert!(chi_square < 23.51, "{counts:?}");
        }
        let se = (0.2 * 0.8 / 4000.0_f64).sqrt();
        assert!((alike / 4000.0 - 0.2).abs() < 4.0 * se, "{alike}");
    }
}
