//! The dispersal matrix as sparse rows.

/// A link: emigrants of one patch may arrive in another.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Link {
    /// position of the source patch in the landscape
    pub from: u32,
    /// position of the target patch in the landscape
    pub to: u32,
    /// distance in kilometres, rounded to 1 mm (effective length along the route)
    pub distance_km: f64,
    /// probability that an emigrant of `from` arrives alive in `to`
    pub probability: f64,
}

/// The dispersal matrix. For every patch, the probabilities of its links and its `lost` share sum to 1.
#[derive(Debug, Clone)]
pub struct Network {
    /// links sorted by `from`, then `to`
    pub links: Vec<Link>,
    /// `links[row_start[i]..row_start[i + 1]]` are the links out of patch i; length patches + 1
    pub row_start: Vec<usize>,
    /// per patch: probability that an emigrant dies on the way or lands nowhere
    pub lost: Vec<f64>,
    /// per patch: share of those who land that the tail's cut took away, before mortality
    pub cut_share: Vec<f64>,
}

impl Network {
    /// No links: whoever leaves is lost.
    pub fn unlinked(n_patches: usize) -> Self {
        Self {
            links: Vec::new(),
            row_start: vec![0; n_patches + 1],
            lost: vec![1.0; n_patches],
            cut_share: vec![0.0; n_patches],
        }
    }

    /// The links out of a patch.
    pub fn row(&self, patch: usize) -> &[Link] {
        &self.links[self.row_start[patch]..self.row_start[patch + 1]]
    }

    /// Number of patches.
    pub fn n_patches(&self) -> usize {
        self.lost.len()
    }
}
