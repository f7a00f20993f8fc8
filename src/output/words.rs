//! Numbers and sentences as a reader sees them: rounded to what the replicates can tell.

use super::Account;
use crate::outcome::{Estimate, Outcome};
use crate::study::Effort;

/// What every outcome says about itself, in two lines.
pub const CAUTIONS: [&str; 2] = [
    "A projection is not a forecast: it compares options, and is only as good as its vital rates.",
    "Permits, translocation and works near protected species: ask the authority and licensed people.",
];

/// The answer in one sentence, the number first.
pub fn answer(outcome: &Outcome, account: &Account) -> String {
    format!(
        "{}: the chance that the network persists for {}, from {}",
        chance(&outcome.summary.persistence, 4),
        counted(outcome.horizon.into(), "year"),
        effort(outcome, account)
    )
}

fn effort(outcome: &Outcome, account: &Account) -> String {
    let done = outcome.replicates_done();
    match account.effort {
        _ if account.complete => counted(done, "replicate"),
        Effort::Replicates(asked) => {
            let were = if done == 1 { "was" } else { "were" };
            format!("the {} of {} that {were} done", grouped(done), counted(asked.into(), "replicate"))
        }
        Effort::Precision(precision) => {
            format!("{}, stopped before the precision of {precision} was reached", counted(done, "replicate"))
        }
    }
}

/// A probability with its interval, such as `0.83 (0.81 to 0.85)`: two decimals, or as many up to `most` as the interval
/// is narrow. What is not certain is never rounded to 0 or 1.
pub(super) fn chance(estimate: &Estimate, most: usize) -> String {
    let (mut decimals, mut unit) = (2, 0.01);
    while decimals < most && estimate.half_width() < unit {
        decimals += 1;
        unit /= 10.0;
    }
    let not_certain = |number: f64| if number < 1.0 { number.min(1.0 - unit) } else { number };
    let not_excluded = |number: f64| if number > 0.0 { number.max(unit) } else { number };
    let value = not_excluded(not_certain(estimate.value));
    let (low, high) = (not_certain(estimate.low), not_excluded(estimate.high));
    format!("{value:.decimals$} ({low:.decimals$} to {high:.decimals$})")
}

/// A mean with its interval; without one where a single replicate gives none.
pub(super) fn mean(estimate: &Estimate) -> String {
    if !estimate.half_width().is_finite() {
        return amount(estimate.value);
    }
    format!("{} ({} to {})", amount(estimate.value), amount(estimate.low), amount(estimate.high))
}

/// An amount of individuals or the like: two digits below 1, one decimal below 100, whole above, as a power of ten from a
/// thousand million.
pub(super) fn amount(number: f64) -> String {
    match number.abs() {
        size if size < 0.0005 => "0.0".to_owned(),
        size if size < 0.0995 => format!("{number:.3}"),
        size if size < 0.995 => format!("{number:.2}"),
        size if size < 99.95 => format!("{number:.1}"),
        size if size < 1e9 => {
            let sign = if number < 0.0 { "-" } else { "" };
            format!("{sign}{}", grouped(size.round() as u64))
        }
        _ => format!("{number:.2e}"),
    }
}

/// A whole number with commas between its thousands.
pub(super) fn grouped(number: u64) -> String {
    let digits = number.to_string();
    let mut text = String::with_capacity(digits.len() + digits.len() / 3);
    for (position, digit) in digits.chars().enumerate() {
        if position > 0 && (digits.len() - position).is_multiple_of(3) {
            text.push(',');
        }
        text.push(digit);
    }
    text
}

/// So many of a thing, such as `1 year` or `1,000 replicates`.
pub(super) fn counted(number: u64, thing: &str) -> String {
    format!("{} {thing}{}", grouped(number), if number == 1 { "" } else { "s" })
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn chances_show_as_many_decimals_as_are_known() {
        let shown = |seen, n| chance(&Estimate::proportion(seen, n), 4);
        assert_eq!(shown(830, 1000), "0.83 (0.81 to 0.85)");
        assert_eq!(shown(1000, 1000), "1.000 (0.996 to 1.000)");
        assert_eq!(shown(0, 1000), "0.000 (0.000 to 0.004)");
        assert_eq!(shown(1, 2), "0.50 (0.09 to 0.91)");
    }

    #[test]
    fn what_is_not_certain_is_not_shown_as_certain() {
        let shown = |seen, n| chance(&Estimate::proportion(seen, n), 3);
        assert_eq!(shown(999_999, 1_000_000), "0.999 (0.999 to 1.000)");
        assert_eq!(shown(1, 1_000_000), "0.001 (0.000 to 0.001)");
        assert_eq!(shown(1_000_000, 1_000_000), "1.000 (0.999 to 1.000)");
    }

    #[test]
    fn amounts_are_short() {
        let shown: Vec<String> =
            [0.0, -0.0001, -0.04, 0.234, 12.34, 99.94, 99.96, -1234.5, 2_583_450.0, 2.5e9].map(amount).into();
        assert_eq!(shown, ["0.0", "0.0", "-0.040", "0.23", "12.3", "99.9", "100", "-1,235", "2,583,450", "2.50e9"]);
        assert_eq!([0, 999, 1000, 1_234_567].map(grouped), ["0", "999", "1,000", "1,234,567"]);
        assert_eq!((counted(1, "year"), counted(1200, "year")), ("1 year".to_owned(), "1,200 years".to_owned()));
    }
}
