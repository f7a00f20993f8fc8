//! What is wrong, where it stands, what was expected, and what to do about it.
//!
//! Reading never stops at the first mistake: readers collect [`Mistake`]s and return them together as [`Mistakes`].
//! What is odd but lawful is a warning: the same type, carried beside a value in [`Checked`].

use std::fmt;
use std::path::{Path, PathBuf};

/// Where a mistake stands.
#[derive(Debug, Clone, PartialEq, Eq, PartialOrd, Ord)]
pub enum Place {
    /// The command line.
    Call,
    /// A file as a whole.
    File(PathBuf),
    /// A position in a text file; line and column count from 1.
    Text {
        /// the file, as the user would name it
        file: PathBuf,
        /// from 1
        line: usize,
        /// in characters, from 1
        column: usize,
    },
    /// A feature of a GeoJSON file.
    Feature {
        /// the file, as the user would name it
        file: PathBuf,
        /// position in the collection, from 0
        index: usize,
        /// the feature's name, where it has one
        id: Option<String>,
    },
    /// A row of a table.
    Row {
        /// the file, as the user would name it
        file: PathBuf,
        /// line in the file, from 1 (the header is 1)
        line: usize,
    },
}

impl Place {
    /// The place that is a whole file.
    pub fn file(path: impl AsRef<Path>) -> Self {
        Self::File(path.as_ref().to_path_buf())
    }
}

impl Place {
    /// The same place with its file named as seen from `folder`, so that it reads alike wherever the folder lies. A file
    /// outside of the folder keeps its name.
    #[must_use]
    pub fn seen_from(&self, folder: &Path) -> Self {
        let mut place = self.clone();
        match &mut place {
            Self::Call => {}
            Self::File(file) | Self::Text { file, .. } | Self::Feature { file, .. } | Self::Row { file, .. } => {
                if let Ok(inside) = file.strip_prefix(folder) {
                    *file = inside.to_path_buf();
                }
            }
        }
        place
    }
}

impl fmt::Display for Place {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::Call => write!(f, "command line"),
            Self::File(file) => write!(f, "{}", file.display()),
            Self::Text { file, line, column } => write!(f, "{}:{line}:{column}", file.display()),
            Self::Feature { file, index, id: Some(id) } => {
                write!(f, "{} feature {index} ({id})", file.display())
            }
            Self::Feature { file, index, id: None } => write!(f, "{} feature {index}", file.display()),
            Self::Row { file, line } => write!(f, "{}:{line}", file.display()),
        }
    }
}

/// One mistake (or warning): its place, the words found there, what was expected, and advice.
///
/// The texts are fragments: lower case, no full stop, no names of the program's types.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Mistake {
    /// where
    pub place: Place,
    /// the offending words, such as `survival.sd = 0.52`
    pub found: String,
    /// what would have been right; for a warning, what it means
    pub expected: String,
    /// what to do
    pub advice: Option<String>,
}

impl Mistake {
    /// A mistake without advice.
    pub fn new(place: Place, found: impl Into<String>, expected: impl Into<String>) -> Self {
        Self { place, found: found.into(), expected: expected.into(), advice: None }
    }

    /// The same with advice.
    #[must_use]
    pub fn advise(mut self, advice: impl Into<String>) -> Self {
        self.advice = Some(advice.into());
        self
    }

    fn write(&self, f: &mut fmt::Formatter<'_>, label: &str) -> fmt::Result {
        writeln!(f, "{}  {}", self.place, self.found)?;
        write!(f, "  {label:<9} {}", self.expected)?;
        if let Some(advice) = &self.advice {
            write!(f, "\n  {:<9} {advice}", "do")?;
        }
        Ok(())
    }
}

impl fmt::Display for Mistake {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        self.write(f, "expected")
    }
}

/// A [`Mistake`] shown as a warning.
pub struct Warning<'a>(pub &'a Mistake);

impl fmt::Display for Warning<'_> {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        self.0.write(f, "note")
    }
}

/// One or more mistakes, in the order of their places. Never empty.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct Mistakes(Vec<Mistake>);

impl Mistakes {
    /// `Err` with the mistakes sorted by place, each once, if there is any, else `Ok(())`.
    ///
    /// # Errors
    /// Whenever `found` holds a mistake.
    pub fn none_in(mut found: Vec<Mistake>) -> Result<(), Self> {
        if found.is_empty() {
            return Ok(());
        }
        found.sort_by(|a, b| a.place.cmp(&b.place));
        let mut kept: Vec<Mistake> = Vec::with_capacity(found.len());
        for mistake in found {
            let mut at_this_place = kept.iter().rev().take_while(|other| other.place == mistake.place);
            if !at_this_place.any(|other| *other == mistake) {
                kept.push(mistake);
            }
        }
        Err(Self(kept))
    }

    /// The mistakes, at least one.
    pub fn as_slice(&self) -> &[Mistake] {
        &self.0
    }

    /// The mistakes as a list.
    pub fn into_vec(self) -> Vec<Mistake> {
        self.0
    }
}

impl From<Mistake> for Mistakes {
    fn from(one: Mistake) -> Self {
        Self(vec![one])
    }
}

impl fmt::Display for Mistakes {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        for (position, mistake) in self.0.iter().enumerate() {
            if position > 0 {
                writeln!(f)?;
            }
            writeln!(f, "{mistake}")?;
        }
        Ok(())
    }
}

impl std::error::Error for Mistakes {}

/// A value that was read, and what is odd about it.
#[derive(Debug, Clone)]
pub struct Checked<T> {
    /// the value
    pub value: T,
    /// lawful oddities, in the order of their places
    pub warnings: Vec<Mistake>,
}

/// Why a job could not be done: the input is wrong, or the system would not let it.
#[derive(Debug)]
pub enum Failure {
    /// The study, its data or the call is wrong (exit code 2).
    Input(Mistakes),
    /// Reading or writing failed (exit code 1).
    System {
        /// the file or folder
        path: PathBuf,
        /// what was being done, such as `write`
        doing: &'static str,
        /// what the system said
        source: std::io::Error,
    },
}

impl Failure {
    /// A failure of the system on `path`.
    pub fn system(path: impl AsRef<Path>, doing: &'static str, source: std::io::Error) -> Self {
        Self::System { path: path.as_ref().to_path_buf(), doing, source }
    }
}

impl From<Mistakes> for Failure {
    fn from(mistakes: Mistakes) -> Self {
        Self::Input(mistakes)
    }
}

impl From<Mistake> for Failure {
    fn from(mistake: Mistake) -> Self {
        Self::Input(mistake.into())
    }
}

impl fmt::Display for Failure {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Self::Input(mistakes) => mistakes.fmt(f),
            Self::System { path, doing, source } => {
                write!(f, "{}  could not {doing}: {source}", path.display())
            }
        }
    }
}

impl std::error::Error for Failure {}

/// The word of `known` nearest to `word`, if one is near enough to be what was meant: a letter in three may differ, or one
/// in a word of two.
pub fn nearest_word<'a>(word: &str, known: impl IntoIterator<Item = &'a str>) -> Option<&'a str> {
    let letters = word.chars().count();
    known
        .into_iter()
        .map(|candidate| (strsim::damerau_levenshtein(&word.to_lowercase(), &candidate.to_lowercase()), candidate))
        .filter(|(distance, candidate)| {
            let of_candidate = candidate.chars().count();
            *distance <= (of_candidate / 3).max(1) && *distance < letters.min(of_candidate).max(1)
        })
        .min_by_key(|(distance, _)| *distance)
        .map(|(_, candidate)| candidate)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn a_mistake_reads_as_a_compiler_would_say_it() {
        let place = Place::Text { file: "marsh.toml".into(), line: 31, column: 12 };
        let mistake = Mistake::new(place, "survival.sd = 0.52", "below 0.477").advise("give the yearly sd");
        assert_eq!(
            mistake.to_string(),
            "marsh.toml:31:12  survival.sd = 0.52\n  expected  below 0.477\n  do        give the yearly sd"
        );
    }

    #[test]
    fn mistakes_stand_in_the_order_of_their_places() {
        let at = |line| Mistake::new(Place::Row { file: "a.csv".into(), line }, "x", "y");
        let other = Mistake { found: "z".to_owned(), ..at(9) };
        let all = Mistakes::none_in(vec![at(9), at(2), other.clone(), at(9)]).unwrap_err();
        assert_eq!(all.as_slice(), [at(2), at(9), other]);
        assert!(Mistakes::none_in(Vec::new()).is_ok());
    }

    #[test]
    fn the_nearest_word_is_offered_only_if_near() {
        let known = ["survival", "fecundity", "advance"];
        assert_eq!(nearest_word("survial", known), Some("survival"));
        assert_eq!(nearest_word("horizon", known), None);
        assert_eq!(nearest_word("q", ["c", "b", "id"]), None);
        assert_eq!(nearest_word("", ["c"]), None);
        assert_eq!(nearest_word("C", ["c"]), Some("c"));
    }
}
