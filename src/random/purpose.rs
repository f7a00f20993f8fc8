//! What a draw is for.

/// What a draw is for, with the stage, rate group or action that it is for.
///
/// The numbers by which purposes enter keys are part of every result: a new purpose takes a new number, and none is ever
/// given out again.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Purpose {
    /// the weather of a rate group, shared with neighbours; beyond the groups, that of each group of each stage
    Weather(u32),
    /// the same that is a patch's own
    OwnWeather(u32),
    /// who of a stage survives, and advances
    Fates(u32),
    /// which of its fates each survivor of a stage meets
    Advance(u32),
    /// the young of a stage
    Young(u32),
    /// who of a stage leaves
    Leaving(u32),
    /// where those of a stage go who leave
    Destinations(u32),
    /// who goes where there are too many
    Surplus,
    /// whether a catastrophe strikes; its index comes from its name
    Struck(u32),
    /// the patch at which a catastrophe begins
    Origin(u32),
    /// a patch's own capacity of the year
    OwnCapacity,
    /// which females breed where males are too few for all
    Mating,
    /// how many of the young are females
    SexOfYoung,
    /// how many young the litters have
    Litter,
    /// how far a year's individuals differ from each other in the number that they leave
    Heterogeneity,
    /// whether a patch that is full or empty is full at the next census
    Turnover,
    /// who is taken by a removal, by the key of its name
    Removal(u32),
    /// at which year of a record a block of years begins
    RecordedYears,
}

impl Purpose {
    pub(super) const fn code(self) -> u64 {
        let (number, index): (u64, u32) = match self {
            Self::Weather(group) => (1, group),
            Self::OwnWeather(group) => (2, group),
            Self::Fates(stage) => (3, stage),
            Self::Young(stage) => (4, stage),
            Self::Leaving(stage) => (5, stage),
            Self::Destinations(stage) => (6, stage),
            Self::Surplus => (7, 0),
            Self::Advance(stage) => (8, stage),
            Self::Struck(catastrophe) => (20, catastrophe),
            Self::Origin(catastrophe) => (21, catastrophe),
            Self::OwnCapacity => (22, 0),
            Self::Mating => (30, 0),
            Self::SexOfYoung => (31, 0),
            Self::Litter => (32, 0),
            Self::Heterogeneity => (33, 0),
            Self::Turnover => (40, 0),
            Self::Removal(removal) => (50, removal),
            Self::RecordedYears => (51, 0),
        };
        number << 32 | index as u64
    }
}
