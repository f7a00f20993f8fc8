//! Rules that a study may add to the year, in words: crowding in dispersal, removals, recorded years.

use super::words::counted;
use crate::engine::removal::{Amount, RemovalTable, Years};
use crate::environment::{Record, Use};
use crate::network::CrowdingResponse;

/// A line for each answer of dispersal to crowding.
pub(super) fn crowding_in_words(response: CrowdingResponse) -> Vec<String> {
    let power = |exponent: f64| {
        let n_over_k = if (exponent - 1.0).abs() > 0.0 { format!("(N/K)^{exponent}") } else { "N/K".to_owned() };
        format!("the chance to leave is times {n_over_k}, at most 1")
    };
    let passing = response.avoids_full.then(|| "emigrants pass full patches by".to_owned());
    response.emigration_exponent.map(power).into_iter().chain(passing).collect()
}

/// A removal in one line.
pub(super) fn removal_in_words(removal: &RemovalTable) -> String {
    let stage = removal.stage.as_ref().map(|stage| format!(" of stage {}", stage.value)).unwrap_or_default();
    let patches = match removal.patches.as_ref().map(Vec::len) {
        Some(1) => "1 patch".to_owned(),
        Some(n) => format!("each of {n} patches"),
        None => "each patch".to_owned(),
    };
    let amount = match removal.amount {
        Amount::Number(number) => format!("{}{stage} in {patches}", counted(number.into(), "individual")),
        Amount::Share(share) => format!("each individual{stage} with chance {share} in {patches}"),
    };
    let floor = if removal.floor > 0 { format!(", down to {} in a patch", removal.floor) } else { String::new() };
    let years = match &removal.years {
        Years::Between(0, u32::MAX) => "every year".to_owned(),
        Years::Between(first, u32::MAX) => format!("from year {first} on"),
        Years::Between(first, last) => format!("in years {first} to {last}"),
        Years::Listed(years) => {
            format!("in years {}", years.iter().map(u32::to_string).collect::<Vec<_>>().join(", "))
        }
    };
    format!("{}: {amount}{floor}, {years}", removal.name.value)
}

/// The memory of recorded years.
pub(super) fn record_in_words(record: &Record) -> String {
    let years = counted(record.deviates.len() as u64, "year");
    match record.usage {
        Use::Replay => format!("as in the record of {years}, replayed from its first"),
        Use::Resample { block_years } => {
            format!("as in the record of {years}, resampled in blocks of {}", counted(block_years.into(), "year"))
        }
    }
}
