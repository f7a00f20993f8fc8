//! The links of a network whose patches are full or empty: from which patches each one may be colonised.

use std::sync::atomic::{AtomicUsize, Ordering};

use rayon::prelude::*;

use super::build::measured_rows;
use super::kernel::Kernel;
use super::links::{Link, Network};
use super::reach::{Candidate, Distances, Reach};
use super::settlement::{Division, index};
use super::table::{DispersalTable, KernelDispersal, Movement};
use crate::landscape::Landscape;
use crate::mistake::{Mistake, Mistakes};
use crate::num;

/// The part of a target's connectivity, all patches full, that its weakest sources may be left out with.
pub const LEFT_OUT: f64 = 1e-9;
/// The part of [`LEFT_OUT`] that is meant for what the search for sources does not see.
const FOR_THE_UNSEEN: f64 = 1e-3;
/// The most links of a network.
const MOST_LINKS: usize = 2_000_000;

/// The links by which patches are colonised, and what was left out of them.
#[derive(Debug, Clone)]
pub struct Sources {
    /// a link from each source to each of its targets; `probability` holds shape(d) = k(d) / k(0), or the measured
    /// table's own probability; `cut_share` holds by target the part of its connectivity that is left out; nobody is lost
    pub network: Network,
    /// per patch: its area in hectares to the power b, with which it counts as a source
    pub sizes: Vec<f64>,
    /// pairs of source and target that are too far apart to count; none in a measured table
    pub n_left_out: u64,
}

impl Sources {
    /// Links the patches of a landscape for the incidence function (Hanski 1994): the connectivity of patch i is the sum
    /// over the occupied patches j of shape(d_ij) A_j^b.
    ///
    /// No sum runs over all pairs: the weakest sources of each target are left out while their part stays within
    /// [`LEFT_OUT`] of its connectivity with every patch full. Of the table, the kernel, `area_exponent` and `max_km` act.
    ///
    /// # Errors
    /// A kernel without a density at distance 0, more than two million links, and rows of a measured table that name no
    /// patch of the landscape.
    pub fn build(
        landscape: &Landscape,
        dispersal: &DispersalTable,
        distances: &dyn Distances,
    ) -> Result<Self, Mistakes> {
        let sizes: Vec<f64> =
            landscape.patches.iter().map(|patch| num::pow(patch.area_ha, dispersal.area_exponent)).collect();
        let n_patches = landscape.patches.len();
        let (links, cut_share) = match &dispersal.movement {
            Movement::Measured(measured) => {
                let rows = measured_rows(landscape, measured, distances)?;
                (rows.into_iter().flat_map(|row| row.links).collect(), vec![0.0; n_patches])
            }
            Movement::Kernel(kernel) => by_kernel(landscape, dispersal, kernel, &sizes, distances)?,
        };
        let n_left_out = match dispersal.movement {
            Movement::Measured(_) => 0,
            Movement::Kernel(_) => (n_patches * (n_patches - 1)).saturating_sub(links.len()) as u64,
        };
        Ok(Self { network: of_links(links, cut_share), sizes, n_left_out })
    }
}

fn by_kernel(
    landscape: &Landscape,
    dispersal: &DispersalTable,
    by: &KernelDispersal,
    sizes: &[f64],
    distances: &dyn Distances,
) -> Result<(Vec<Link>, Vec<f64>), Mistakes> {
    if by.kernel.relative(0.0).is_none() {
        let found = "the lognormal kernel in an occupancy study";
        let expected = "a kernel with a density above 0 at distance 0, by which connectivity is measured";
        return Err(Mistake::new(dispersal.place.clone(), found, expected)
            .advise("take \"exponential\", \"exponential-power\" or \"2Dt\", for far dispersal")
            .into());
    }
    let search = KernelDispersal { tail: LEFT_OUT, ..by.clone() };
    let reach = Reach::new(landscape, distances, &search, sizes.to_vec(), false);
    let ln_sizes: Vec<f64> = sizes.iter().map(|size| num::ln(*size)).collect();
    let n_links = AtomicUsize::new(0);
    let rows: Vec<(Vec<Link>, f64)> = (0..landscape.patches.len())
        .into_par_iter()
        .map(|target| {
            if n_links.load(Ordering::Relaxed) > MOST_LINKS {
                return (Vec::new(), 0.0);
            }
            let weigh = |source: usize, km: f64| by.kernel.ln_density(km) + ln_sizes[source];
            let row = into(target, &reach.candidates(target, 0.0, weigh), &by.kernel);
            n_links.fetch_add(row.0.len(), Ordering::Relaxed);
            row
        })
        .collect();
    if n_links.into_inner() > MOST_LINKS {
        return Err(too_many(dispersal, by));
    }
    let (links, cut_share): (Vec<Vec<Link>>, Vec<f64>) = rows.into_iter().unzip();
    Ok((links.concat(), cut_share))
}

/// The links into one target, and the part of its connectivity that is left out.
fn into(target: usize, candidates: &[Candidate], kernel: &Kernel) -> (Vec<Link>, f64) {
    if candidates.is_empty() {
        return (Vec::new(), 0.0);
    }
    let division = Division::new(candidates, LEFT_OUT * (1.0 - FOR_THE_UNSEEN));
    let links = division.kept(candidates).filter_map(|source| {
        let shape = kernel.relative(source.distance_km).filter(|shape| *shape > 0.0)?;
        Some(Link { from: index(source.to), to: index(target), distance_km: source.distance_km, probability: shape })
    });
    (links.collect(), division.cut_share)
}

fn too_many(dispersal: &DispersalTable, by: &KernelDispersal) -> Mistakes {
    let found = format!("more than {MOST_LINKS} pairs of patches within reach of each other");
    let expected = match by.max_km {
        None => "max_km, the distance in km beyond which colonists do not come".to_owned(),
        Some(max_km) => format!("a max_km below {max_km}"),
    };
    let advice =
        format!("the kernel's mean is {} km; at ten times as far hardly anything is left of it", by.kernel.mean_km());
    Mistake::new(dispersal.place.clone(), found, expected).advise(advice).into()
}

fn of_links(mut links: Vec<Link>, cut_share: Vec<f64>) -> Network {
    links.sort_unstable_by_key(|link| (link.from, link.to));
    let n_patches = cut_share.len();
    let mut row_start = vec![0; n_patches + 1];
    for link in &links {
        row_start[link.from as usize + 1] += 1;
    }
    for patch in 0..n_patches {
        row_start[patch + 1] += row_start[patch];
    }
    Network { links, row_start, lost: vec![0.0; n_patches], cut_share }
}
