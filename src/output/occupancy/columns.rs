//! The columns of the tables: those of a study of individuals without capacity, abundance, migrants, export, role, the
//! probability of a link and its movers.

use super::super::columns::{Column, column, patch_name};
use crate::outcome::{LinkRow, PatchRow, ReplicateRow, YearRow};

pub(in crate::output) const BY_YEAR: &[Column<YearRow>] = &[
    column("year", |_, row| row.year.into()),
    column("persistence", |_, row| row.persistence.value.into()),
    column("persistence_low", |_, row| row.persistence.low.into()),
    column("persistence_high", |_, row| row.persistence.high.into()),
    column("quasi_extinction", |_, row| row.quasi_extinction.map(|estimate| estimate.value).into()),
    column("quasi_extinction_low", |_, row| row.quasi_extinction.map(|estimate| estimate.low).into()),
    column("quasi_extinction_high", |_, row| row.quasi_extinction.map(|estimate| estimate.high).into()),
    column("mean_occupied_patches", |_, row| row.mean_occupied_patches.into()),
    column("mean_occupied_patches_low", |_, row| row.mean_abundance.low.into()),
    column("mean_occupied_patches_high", |_, row| row.mean_abundance.high.into()),
    column("sd_occupied_patches", |_, row| row.sd_abundance.into()),
    column("occupied_patches_5", |_, row| row.abundance[0].into()),
    column("occupied_patches_25", |_, row| row.abundance[1].into()),
    column("occupied_patches_50", |_, row| row.abundance[2].into()),
    column("occupied_patches_75", |_, row| row.abundance[3].into()),
    column("occupied_patches_95", |_, row| row.abundance[4].into()),
];

pub(in crate::output) const BY_PATCH: &[Column<PatchRow>] = &[
    column("patch", |_, row| row.patch.as_str().into()),
    column("area_ha", |_, row| row.area_ha.into()),
    column("start", |_, row| row.start.into()),
    column("occupied_at_end", |_, row| row.occupied_at_end.value.into()),
    column("occupied_at_end_low", |_, row| row.occupied_at_end.low.into()),
    column("occupied_at_end_high", |_, row| row.occupied_at_end.high.into()),
    column("share_of_years_occupied", |_, row| row.share_of_years_occupied.into()),
    column("local_extinctions_per_century", |_, row| row.local_extinctions_per_century.into()),
    column("recolonisations_per_century", |_, row| row.recolonisations_per_century.into()),
    column("component", |_, row| row.place.map(|place| place.component).into()),
    column("splits_network", |_, row| row.place.map(|place| place.splits).into()),
    column("metapopulation_capacity_share", |_, row| row.place.map(|place| place.capacity_share).into()),
    column("connectivity_loss_percent", |_, row| row.place.and_then(|place| place.connectivity_loss_percent).into()),
];

pub(in crate::output) const BY_LINK: &[Column<LinkRow>] = &[
    column("from", |outcome, row| patch_name(outcome, row.from)),
    column("to", |outcome, row| patch_name(outcome, row.to)),
    column("distance_km", |_, row| row.distance_km.into()),
    column("splits_network", |_, row| row.splits.into()),
];

pub(in crate::output) const BY_REPLICATE: &[Column<ReplicateRow>] = &[
    column("replicate", |_, row| row.replicate.into()),
    column("extinct_in_year", |_, row| row.extinct_in_year.into()),
    column("quasi_extinct_in_year", |_, row| row.quasi_extinct_in_year.into()),
    column("occupied_at_end", |_, row| row.occupied_at_end.into()),
    column("fewest_occupied", |_, row| row.lowest_abundance.into()),
];
