//! The summary that is shown when a run ends: the answer first, at most 100 characters wide.

use super::Account;
use super::occupancy::terminal as occupancy;
use super::words::{CAUTIONS, amount, answer, chance, counted, mean};
use crate::outcome::{
    CUSTOMARY_PERSISTENCE, CUSTOMARY_YEARS, Counted, Customary, Outcome, PatchRow, ROLE_MARGIN, Standing, YearRow,
};
use crate::study::QuasiExtinction;

/// The rows of the table by year, besides year 0.
const YEARS_SHOWN: u32 = 5;

/// How many of the most secure patches are shown, and of the least.
const PATCHES_SHOWN: usize = 5;

/// The longest name of a patch that is shown whole.
const NAME_WIDTH: usize = 26;

/// The most decimals of a chance in a table.
pub(super) const DECIMALS: usize = 3;

/// The summary of an outcome, ending in a line break.
pub fn summary(outcome: &Outcome, account: &Account) -> String {
    if outcome.counted == Counted::OccupiedPatches {
        return occupancy::summary(outcome, account);
    }
    let parts = [
        format!("{}\n", answer(outcome, account)),
        facts(outcome, account),
        years(outcome),
        patches(outcome),
        CAUTIONS.map(|caution| format!("{caution}\n")).concat(),
    ];
    parts.join("\n")
}

fn facts(outcome: &Outcome, account: &Account) -> String {
    let summary = &outcome.summary;
    let mut facts = vec![("study", format!("{} (seed {})", account.title, account.seed))];
    if let (Some(threshold), Some(estimate)) = (&outcome.quasi_extinction, &summary.quasi_extinction) {
        let fewer = fewer_than(threshold);
        facts.push(("quasi-extinction", format!("{}, {fewer} at least once", chance(estimate, DECIMALS))));
    }
    let lowest = mean(&summary.expected_minimum_abundance);
    facts.push(("expected minimum abundance", format!("{lowest} (McCarthy & Thompson 2001)")));
    if let Some(years) = summary.median_time_to_extinction {
        facts.push(("median years to extinction", years.to_string()));
    }
    if let Some(growth) = summary.realised_growth {
        facts.push(("realised growth, median", format!("{growth:.3} a year")));
    }
    if let Some(share) = summary.lost_emigrants_share {
        facts.push(("emigrants lost", format!("{:.1} % died on the way or landed nowhere", 100.0 * share)));
    }
    if let Some(removed) = &summary.removed_per_year {
        facts.push(("removed", format!("{} individuals a year", mean(removed))));
    }
    if let Some(customary) = &summary.customary {
        facts.push(("customary target", customary_words(customary)));
    }
    if summary.saturated_replicates > 0 {
        let replicates = counted(summary.saturated_replicates, "replicate");
        facts.push(("largest count held", format!("reached in {replicates}, and counted no further")));
    }
    let rows = facts.into_iter().map(|(label, text)| vec![label.to_owned(), text]).collect();
    lines(rows, &[Side::Left, Side::Left]).concat()
}

fn fewer_than(threshold: &QuasiExtinction) -> String {
    let stages: Vec<&str> = threshold.stages.iter().map(|stage| stage.value.as_str()).collect();
    let which = if stages.is_empty() { String::new() } else { format!(" ({})", stages.join(", ")) };
    format!("fewer than {}{which}", counted(threshold.below.into(), "individual"))
}

pub(super) fn customary_words(customary: &Customary) -> String {
    let standing = match customary.standing {
        Standing::Above => "met",
        Standing::Below => "missed",
        Standing::NotToldApart => "not told apart by so many replicates",
    };
    format!("{:.0} % over {CUSTOMARY_YEARS} years: {standing}", 100.0 * CUSTOMARY_PERSISTENCE)
}

fn years(outcome: &Outcome) -> String {
    let mut rows = vec![year_cells("year", "persists", "quasi-extinct", "mean abundance (5 to 95 %)", "patches")];
    rows.extend(shown_years(outcome).into_iter().map(year_row));
    if outcome.quasi_extinction.is_none() {
        rows.iter_mut().for_each(|row| drop(row.remove(2)));
    }
    let sides = [Side::Right; 5];
    let table = lines(rows, &sides).concat();
    format!("By year, with 95 % Monte Carlo intervals; patches: mean number occupied\n{table}")
}

/// The rows of the years that are shown, evenly spread up to the horizon.
pub(super) fn shown_years(outcome: &Outcome) -> Vec<&YearRow> {
    let mut shown: Vec<u64> = (0..=YEARS_SHOWN).map(|step| nearest_year(outcome.horizon, step)).collect();
    shown.dedup();
    shown.into_iter().map(|year| &outcome.by_year[year as usize]).collect()
}

/// The year that lies `step` of [`YEARS_SHOWN`] on the way to the horizon, rounded half up.
fn nearest_year(horizon: u32, step: u32) -> u64 {
    let (horizon, step, steps) = (u64::from(horizon), u64::from(step), u64::from(YEARS_SHOWN));
    (2 * horizon * step + steps) / (2 * steps)
}

fn year_row(row: &YearRow) -> Vec<String> {
    let quasi_extinction = row.quasi_extinction.as_ref().map(|estimate| chance(estimate, DECIMALS));
    let [low, .., high] = row.abundance.map(amount);
    year_cells(
        &row.year.to_string(),
        &chance(&row.persistence, DECIMALS),
        &quasi_extinction.unwrap_or_default(),
        &format!("{} ({low} to {high})", amount(row.mean_abundance.value)),
        &amount(row.mean_occupied_patches),
    )
}

fn year_cells(year: &str, persists: &str, quasi_extinct: &str, abundance: &str, patches: &str) -> Vec<String> {
    [year, persists, quasi_extinct, abundance, patches].map(str::to_owned).into()
}

fn patches(outcome: &Outcome) -> String {
    let header = ["patch", "occupied at the end", "share of years", "abundance", "net export", "role"];
    let sides = [Side::Left, Side::Right, Side::Right, Side::Right, Side::Right, Side::Left];
    let table = ranked_table(outcome, header.map(str::to_owned).to_vec(), &sides, patch_row);
    let margin = 100.0 * ROLE_MARGIN;
    let title = format!("Patches, most secure first; source or sink: net export surely beyond {margin} % of abundance");
    format!("{title}\n{table}")
}

/// The most secure and the least secure patches as a table.
pub(super) fn ranked_table(
    outcome: &Outcome,
    header: Vec<String>,
    sides: &[Side],
    cells: fn(&PatchRow) -> Vec<String>,
) -> String {
    let mut ranked: Vec<&PatchRow> = outcome.by_patch.iter().collect();
    ranked.sort_by(|a, b| {
        let secure =
            |row: &PatchRow| [row.occupied_at_end.value, row.share_of_years_occupied, row.mean_abundance.value];
        secure(b).partial_cmp(&secure(a)).unwrap_or(std::cmp::Ordering::Equal).then_with(|| a.patch.cmp(&b.patch))
    });
    let split = ranked.len() > 2 * PATCHES_SHOWN;
    if split {
        ranked.drain(PATCHES_SHOWN..ranked.len() - PATCHES_SHOWN);
    }
    let mut rows = vec![header];
    rows.extend(ranked.into_iter().map(cells));
    let mut table = lines(rows, sides);
    if split {
        table.insert(1 + PATCHES_SHOWN, "  ...\n".to_owned());
    }
    table.concat()
}

fn patch_row(row: &PatchRow) -> Vec<String> {
    vec![
        shortened(&row.patch),
        chance(&row.occupied_at_end, DECIMALS),
        format!("{:.2}", row.share_of_years_occupied),
        amount(row.mean_abundance.value),
        amount(row.net_export_per_year.value),
        row.role.word().to_owned(),
    ]
}

/// A name that fits its column and stays on its line.
pub(super) fn shortened(name: &str) -> String {
    let name: String = name.chars().map(|c| if c.is_control() { ' ' } else { c }).collect();
    if name.chars().count() <= NAME_WIDTH {
        return name;
    }
    name.chars().take(NAME_WIDTH - 3).chain("...".chars()).collect()
}

/// The side of a column on which its texts line up.
#[derive(Clone, Copy)]
pub(super) enum Side {
    Left,
    Right,
}

/// Rows as lines with their columns lined up, two spaces before each.
pub(super) fn lines(rows: Vec<Vec<String>>, sides: &[Side]) -> Vec<String> {
    let width = |column: usize| rows.iter().map(|row| row[column].chars().count()).max().unwrap_or(0);
    let widths: Vec<usize> = (0..rows.first().map_or(0, Vec::len)).map(width).collect();
    let line = |row: &Vec<String>| {
        let cells = row.iter().zip(&widths).zip(sides).map(|((text, width), side)| match side {
            Side::Left => format!("  {text:<width$}"),
            Side::Right => format!("  {text:>width$}"),
        });
        format!("{}\n", cells.collect::<String>().trim_end())
    };
    rows.iter().map(line).collect()
}
