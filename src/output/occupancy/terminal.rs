//! The summary that is shown when a run ends.

use super::super::Account;
use super::super::terminal::{DECIMALS, Side, customary_words, lines, ranked_table, shortened, shown_years};
use super::super::words::{CAUTIONS, amount, answer, chance, mean};
use crate::outcome::{Outcome, PatchRow, YearRow};

/// The summary of an outcome, ending in a line break.
pub(in crate::output) fn summary(outcome: &Outcome, account: &Account) -> String {
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
    let patches = outcome.by_patch.len();
    if let (Some(threshold), Some(estimate)) = (&outcome.quasi_extinction, &summary.quasi_extinction) {
        let fewer = format!("fewer than {} of {patches} patches occupied at least once", threshold.below);
        facts.push(("quasi-extinction", format!("{}, {fewer}", chance(estimate, DECIMALS))));
    }
    let lowest = mean(&summary.expected_minimum_abundance);
    facts.push(("expected minimum occupied", format!("{lowest} of {patches} patches")));
    if let Some(years) = summary.median_time_to_extinction {
        facts.push(("median years to extinction", years.to_string()));
    }
    if let Some(customary) = &summary.customary {
        facts.push(("customary target", customary_words(customary)));
    }
    let rows = facts.into_iter().map(|(label, text)| vec![label.to_owned(), text]).collect();
    lines(rows, &[Side::Left, Side::Left]).concat()
}

fn years(outcome: &Outcome) -> String {
    let header = ["year", "persists", "quasi-extinct", "occupied patches (5 to 95 %)"];
    let mut rows = vec![header.map(str::to_owned).to_vec()];
    rows.extend(shown_years(outcome).into_iter().map(year_row));
    if outcome.quasi_extinction.is_none() {
        rows.iter_mut().for_each(|row| drop(row.remove(2)));
    }
    format!("By year, with 95 % Monte Carlo intervals\n{}", lines(rows, &[Side::Right; 4]).concat())
}

fn year_row(row: &YearRow) -> Vec<String> {
    let quasi_extinction = row.quasi_extinction.as_ref().map(|estimate| chance(estimate, DECIMALS));
    let [low, .., high] = row.abundance.map(amount);
    vec![
        row.year.to_string(),
        chance(&row.persistence, DECIMALS),
        quasi_extinction.unwrap_or_default(),
        format!("{} ({low} to {high})", amount(row.mean_occupied_patches)),
    ]
}

fn patches(outcome: &Outcome) -> String {
    let header = ["patch", "occupied at the end", "share of years", "extinctions", "recolonisations"];
    let sides = [Side::Left, Side::Right, Side::Right, Side::Right, Side::Right];
    let table = ranked_table(outcome, header.map(str::to_owned).to_vec(), &sides, patch_row);
    format!("Patches, most secure first; extinctions and recolonisations in a hundred years\n{table}")
}

fn patch_row(row: &PatchRow) -> Vec<String> {
    vec![
        shortened(&row.patch),
        chance(&row.occupied_at_end, DECIMALS),
        format!("{:.2}", row.share_of_years_occupied),
        amount(row.local_extinctions_per_century),
        amount(row.recolonisations_per_century),
    ]
}
