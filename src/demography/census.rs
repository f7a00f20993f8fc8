//! When in the year individuals are counted. It changes no arithmetic: it says what fecundity has to mean.

use crate::study::Table;

/// The time of the census.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Census {
    /// just after breeding: the first stage are the newborn
    PostBreeding,
    /// just before breeding: the first stage are those born nearly a year ago
    PreBreeding,
}

impl Census {
    /// Reads `census` of the life history, where it stands there.
    pub(super) fn read(life_history: &Table<'_>) -> Option<Self> {
        let choices = [("post-breeding", Self::PostBreeding), ("pre-breeding", Self::PreBreeding)];
        life_history.choice("census", &choices).map(|said| said.value)
    }

    /// What fecundity must be under it: that of an individual counted at one census, in young counted at the next (Caswell
    /// 2001, Matrix Population Models, ch. 2).
    pub fn fecundity_in_words(self) -> &'static str {
        match self {
            Self::PostBreeding => {
                "just after breeding, so that fecundity must be the chance to live until the next breeding \
                 season, times the young that one has then; the first stage are the newborn"
            }
            Self::PreBreeding => {
                "just before breeding, so that fecundity must be the young born to one, times their own chance \
                 to live until the next census; the first stage are nearly a year old"
            }
        }
    }
}
