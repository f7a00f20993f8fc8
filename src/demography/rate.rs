//! Vital rates as the study states them: a mean, and how much it varies from year to year.

use crate::mistake::Mistake;
use crate::num::beta::{Beta, largest_sd};
use crate::study::{Item, NOT_NEGATIVE, Numbers, PROBABILITY, Said, Table};

/// Rates that share a deviate within a patch and year.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum RateGroup {
    /// survival, of all stages
    Survival,
    /// fecundity, of all stages
    Fecundity,
    /// growth of a model of counts
    Growth,
}

/// How a rate varies from year to year.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Law {
    /// beta distribution: a probability
    Beta,
    /// lognormal distribution: a number of individuals
    Lognormal,
}

/// A vital rate.
#[derive(Debug, Clone, PartialEq)]
pub struct Rate {
    /// its address in the study, such as `life_history.juvenile.survival`
    pub address: String,
    /// mean over years
    pub mean: f64,
    /// standard deviation over years, 0 for a rate that does not vary
    pub sd: f64,
    /// the group whose deviates it follows
    pub group: RateGroup,
    /// its distribution over years
    pub law: Law,
}

impl Rate {
    /// A rate that does not vary.
    pub fn fixed(address: String, mean: f64, group: RateGroup, law: Law) -> Self {
        Self { address, mean, sd: 0.0, group, law }
    }

    /// Reads a number, or `{ mean, sd }`. `None` if the key is missing or its value wrong.
    pub fn read(table: &Table<'_>, key: &str, group: RateGroup, law: Law) -> Option<Self> {
        let admitted = numbers(law);
        let address = table.address(key);
        match table.item(key)? {
            Item::Table(inner) => {
                let mean = inner.number("mean", admitted);
                if !inner.has("mean") {
                    inner.missing("mean", format!("{admitted}: the mean over years"));
                }
                let sd = inner.number("sd", NOT_NEGATIVE);
                let has_sd = inner.has("sd");
                inner.finish();
                let mean = mean?;
                if let Some(mistake) = sd.as_ref().and_then(|sd| impossible_sd(sd, mean.value, law)) {
                    table.document().mistake(mistake);
                    return None;
                }
                let sd = if has_sd { sd?.value } else { 0.0 };
                Some(Self { address, mean: mean.value, sd, group, law })
            }
            item @ Item::Number(_) => {
                let mean = table.number_of(&item, admitted)?;
                Some(Self::fixed(address, mean.value, group, law))
            }
            other => {
                other.refuse(table.document(), &format!("{admitted}, or {{ mean = .., sd = .. }}"));
                None
            }
        }
    }
}

fn numbers(law: Law) -> Numbers {
    match law {
        Law::Beta => PROBABILITY,
        Law::Lognormal => Numbers { high: MOST_A_YEAR, ..NOT_NEGATIVE },
    }
}

/// The most young of one individual in a year that are believed, or the most growth: a sturgeon has a few million eggs.
const MOST_A_YEAR: f64 = 1e9;

/// The mistake of an sd that no distribution with this mean and law can have, if it is one.
pub(super) fn impossible_sd(sd: &Said<f64>, mean: f64, law: Law) -> Option<Mistake> {
    match law {
        Law::Beta if sd.value > 0.0 && largest_sd(mean) <= 0.0 => {
            let expected = format!("0, since a probability of mean {mean} cannot vary");
            Some(sd.mistake(expected).advise("leave the sd out"))
        }
        Law::Beta if sd.value > 0.0 && sd.value >= largest_sd(mean) => {
            let most = (largest_sd(mean) * 1000.0).floor() / 1000.0;
            let expected =
                format!("below {most}, the most that a probability of mean {mean} can vary: sqrt(m (1 - m))");
            Some(sd.mistake(expected).advise("give the sd of the yearly rate itself, without sampling error"))
        }
        Law::Lognormal if sd.value > 0.0 && mean <= 0.0 => {
            Some(sd.mistake("0, since a mean of 0 cannot vary").advise("leave the sd out"))
        }
        _ if sd.value > 0.0 && sd.value < LEAST_VARIATION * spread(mean, law) => {
            let expected = format!("0, or at least {LEAST_VARIATION} of the mean");
            Some(sd.mistake(expected).advise("leave the sd out: so little cannot be seen"))
        }
        Law::Lognormal if sd.value > MOST_VARIATION * mean => {
            let expected = format!("at most {MOST_VARIATION} times the mean {mean}");
            Some(sd.mistake(expected).advise("give the sd between years of the rate itself, in its own unit"))
        }
        Law::Beta if sd.value > 0.0 && Beta::with_mean_and_sd(mean, sd.value).is_none() => {
            Some(sd.mistake(format!("an sd that a probability of mean {mean} can have")))
        }
        _ => None,
    }
}

/// The least sd above 0, as a share of the mean (or of what a probability lacks of 1): the beta distribution becomes
/// too steep to be tabulated below.
const LEAST_VARIATION: f64 = 1e-5;
/// The largest sd of a number of individuals, in means.
const MOST_VARIATION: f64 = 1000.0;

fn spread(mean: f64, law: Law) -> f64 {
    match law {
        Law::Beta => mean.min(1.0 - mean),
        Law::Lognormal => mean,
    }
}
