//! The names of the files of an outcome folder.

/// What says what the folder holds.
pub(super) const OUTCOME: &str = "outcome.json";
/// A row for every census.
pub(super) const BY_YEAR: &str = "by_year.csv";
/// A row for every patch.
pub(super) const BY_PATCH: &str = "by_patch.csv";
/// The same on the map.
pub(super) const BY_PATCH_MAP: &str = "by_patch.geojson";
/// A row for every link.
pub(super) const BY_LINK: &str = "by_link.csv";
/// The same on the map.
pub(super) const BY_LINK_MAP: &str = "by_link.geojson";
/// A row for every replicate.
pub(super) const BY_REPLICATE: &str = "by_replicate.csv";
/// The page to hand round.
pub(super) const REPORT: &str = "report.html";

/// The files that a run writes, in the order in which they are listed.
pub const RUN_FILES: [&str; 7] = [OUTCOME, BY_YEAR, BY_PATCH, BY_PATCH_MAP, BY_LINK, BY_LINK_MAP, BY_REPLICATE];

/// Every file that this program puts into an outcome folder. Any other file there is somebody else's.
pub const ALL_FILES: [&str; 8] = [OUTCOME, BY_YEAR, BY_PATCH, BY_PATCH_MAP, BY_LINK, BY_LINK_MAP, BY_REPLICATE, REPORT];
