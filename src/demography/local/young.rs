//! How many young a breeding individual has, and how a fecundity becomes the rate that varies from year to year.

use crate::demography::rate::impossible_sd;
use crate::demography::{Law, Rate, RateGroup};
use crate::mistake::Mistake;
use crate::num::beta::largest_sd;
use crate::random::{PlaceKey, Purpose, binomial, poisson};
use crate::study::{Item, NOT_NEGATIVE, PROBABILITY, Said, Table};

/// How many young a breeding individual has.
#[derive(Debug, Clone, PartialEq)]
pub(super) enum Young {
    /// a Poisson number with fecundity as its mean
    Poisson,
    /// one with fecundity as its probability, else none
    AtMostOne,
    /// a share of individuals breeds, and each of these has a litter
    Litter(Litter),
}

/// The sizes of litters.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Litter {
    /// young in a litter, with the chance of so many among the litters not yet counted out; the last has chance 1
    sizes: Vec<(u32, f64)>,
    mean: f64,
}

impl Young {
    /// Reads `young` of the life history; Poisson where it does not stand there, `None` where it is wrong.
    pub(super) fn read(table: &Table<'_>) -> Option<Self> {
        const KEY: &str = "young";
        if !table.has(KEY) {
            return Some(Self::Poisson);
        }
        match table.item(KEY)? {
            Item::Table(inner) => {
                let litter = Litter::read(&inner);
                inner.finish();
                litter.map(Self::Litter)
            }
            item @ Item::Text(_) => table
                .choice_of(&item, &[("poisson", Self::Poisson), ("at most one", Self::AtMostOne)])
                .map(|said| said.value),
            other => {
                other.refuse(table.document(), "\"poisson\", \"at most one\" or { litter = [..] }");
                None
            }
        }
    }

    /// Reads `fecundity` of a stage as the rate that varies: the mean number of young where they are Poisson, else the
    /// share of individuals that breeds.
    pub(super) fn read_fecundity(&self, row: &Table<'_>) -> Option<Rate> {
        const KEY: &str = "fecundity";
        if !row.has(KEY) {
            return Some(Rate::fixed(row.address(KEY), 0.0, RateGroup::Fecundity, self.law()));
        }
        let Self::Litter(litter) = self else { return Rate::read(row, KEY, RateGroup::Fecundity, self.law()) };
        let stated = Rate::read(row, KEY, RateGroup::Fecundity, Law::Lognormal)?;
        let (mean, sd) = match row.item(KEY)? {
            Item::Table(inner) => (inner.number("mean", NOT_NEGATIVE)?, inner.number("sd", NOT_NEGATIVE)),
            item => (row.number_of(&item, NOT_NEGATIVE)?, None),
        };
        let mistake = match litter.too_many(mean.value) {
            Some(expected) => Some(mean.mistake(expected)),
            None => sd.and_then(|sd| self.impossible_sd(&sd, mean.value)),
        };
        match mistake {
            Some(mistake) => {
                row.document().mistake(mistake);
                None
            }
            None => Some(self.rate(stated.address, stated.mean, stated.sd)),
        }
    }

    /// The rate that a possible fecundity of this mean and sd comes down to.
    pub(super) fn rate(&self, address: String, mean: f64, sd: f64) -> Rate {
        let (mean, sd) = match self {
            Self::Litter(litter) => ((mean / litter.mean).min(1.0), sd / litter.mean),
            Self::Poisson | Self::AtMostOne => (mean, sd),
        };
        Rate { address, mean, sd, group: RateGroup::Fecundity, law: self.law() }
    }

    /// Mean young of an individual whose rate is this.
    pub(super) fn mean(&self, rate: &Rate) -> f64 {
        match self {
            Self::Litter(litter) => rate.mean * litter.mean,
            Self::Poisson | Self::AtMostOne => rate.mean,
        }
    }

    /// What should stand in place of a mean fecundity that is impossible; `None` where it is possible.
    pub(super) fn too_many(&self, mean: f64) -> Option<String> {
        match self {
            Self::Poisson => None,
            Self::AtMostOne if mean <= 1.0 => None,
            Self::AtMostOne => Some(format!("a probability where young = \"at most one\", not {mean}")),
            Self::Litter(litter) => litter.too_many(mean),
        }
    }

    /// The mistake of an sd that a fecundity of this possible mean cannot have, if it is one.
    pub(super) fn impossible_sd(&self, sd: &Said<f64>, mean: f64) -> Option<Mistake> {
        let Self::Litter(litter) = self else { return impossible_sd(sd, mean, self.law()) };
        let share = (mean / litter.mean).min(1.0);
        let most = largest_sd(share) * litter.mean;
        (sd.value > 0.0 && sd.value >= most).then(|| {
            let most = (most * 1000.0).floor() / 1000.0;
            let share = (share * 10_000.0).round() / 10_000.0;
            let expected = format!(
                "below {most}: with litters of {} on average a share of {share} breeds, which can vary no more",
                litter.mean
            );
            sd.mistake(expected).advise("give the sd of the yearly fecundity itself, without sampling error")
        })
    }

    /// The young that these individuals have, `u32::MAX` where they would be more.
    ///
    /// `rates` are the year's realised rates by stage, in the order of `counts`; `pressure` multiplies them.
    pub(super) fn number(&self, counts: &[u32], rates: &[f64], pressure: f64, place: PlaceKey) -> u32 {
        match self {
            // A sum of independent Poisson numbers is Poisson: one draw for all stages.
            Self::Poisson => {
                let mean: f64 = counts.iter().zip(rates).map(|(count, rate)| f64::from(*count) * rate).sum();
                poisson(&mut place.draw(Purpose::Young(0)), mean * pressure)
            }
            Self::AtMostOne => breeding(counts, rates, pressure, place),
            Self::Litter(litter) => litter.sum(breeding(counts, rates, pressure, place), place),
        }
    }

    /// In words, for `check`.
    pub(super) fn in_words(&self) -> String {
        match self {
            Self::Poisson => "the number of young is Poisson".to_owned(),
            Self::AtMostOne => "each individual has one young or none".to_owned(),
            Self::Litter(litter) => {
                format!("litters of {:.3} young on average, by the stated chances of each size", litter.mean)
            }
        }
    }

    fn law(&self) -> Law {
        match self {
            Self::Poisson => Law::Lognormal,
            Self::AtMostOne | Self::Litter(_) => Law::Beta,
        }
    }
}

/// How many of these individuals breed, each with the rate of its stage as its chance.
fn breeding(counts: &[u32], rates: &[f64], pressure: f64, place: PlaceKey) -> u32 {
    counts
        .iter()
        .zip(rates)
        .enumerate()
        .filter(|(_, (count, rate))| **count > 0 && **rate > 0.0)
        .map(|(stage, (count, rate))| binomial(&mut place.draw(Purpose::Young(stage as u32)), *count, rate * pressure))
        .fold(0, u32::saturating_add)
}

impl Litter {
    fn read(table: &Table<'_>) -> Option<Self> {
        const KEY: &str = "litter";
        if !table.has(KEY) {
            table.missing(KEY, "a list of the chances of 0, 1, 2, ... young in a litter");
        }
        let chances = table.numbers(KEY, PROBABILITY)?;
        let sum = chances.value.iter().fold(0.0, |sum, chance| sum + chance);
        if (sum - 1.0).abs() > 1e-9 {
            let expected = format!("the chances of 0, 1, 2, ... young, which sum to 1, not to {sum}");
            table.document().mistake(chances.mistake(expected));
            return None;
        }
        let litter = Self::new(&chances.value);
        if litter.mean <= 0.0 {
            let expected = "a chance above 0 of at least one young; the first number is the chance of none";
            table.document().mistake(chances.mistake(expected));
            return None;
        }
        Some(litter)
    }

    /// From the chances of 0, 1, 2, ... young, which sum to 1.
    fn new(chances: &[f64]) -> Self {
        let mean = chances.iter().zip(0_u32..).map(|(chance, size)| chance * f64::from(size)).sum();
        let mut left = 1.0;
        let mut sizes = Vec::new();
        for (size, chance) in (0_u32..).zip(chances).filter(|(_, chance)| **chance > 0.0) {
            sizes.push((size, (chance / left).min(1.0)));
            left -= chance;
        }
        // Whoever is left has the last size, whatever rounding says.
        if let Some(last) = sizes.last_mut() {
            last.1 = 1.0;
        }
        Self { sizes, mean }
    }

    fn too_many(&self, mean: f64) -> Option<String> {
        (mean > self.mean * (1.0 + 1e-9)).then(|| {
            format!("at most {}, the mean of a litter, since fecundity is the mean over all individuals", self.mean)
        })
    }

    /// The young in so many litters: a multinomial over their sizes.
    fn sum(&self, litters: u32, place: PlaceKey) -> u32 {
        let mut stream = place.draw(Purpose::Litter);
        let mut left = litters;
        let mut young = 0_u64;
        for (size, chance) in &self.sizes {
            if left == 0 {
                break;
            }
            let so_large = binomial(&mut stream, left, *chance);
            young += u64::from(*size) * u64::from(so_large);
            left -= so_large;
        }
        u32::try_from(young).unwrap_or(u32::MAX)
    }
}
