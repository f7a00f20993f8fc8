//! Where the fens lie and what they are called.

use eyot::num;

use super::Rng;
use super::plane::{between, normal};

use Form::{Fen, Key, Oxbow, Pool, Ringed, Stone, TwoBanks};
use Water::{ColdBeck, DimmetBrook, HobBeck, MarlBrook, Thrindle};

/// The watercourses.
#[derive(Clone, Copy)]
pub(crate) enum Water {
    Thrindle,
    ColdBeck,
    MarlBrook,
    DimmetBrook,
    HobBeck,
}

/// What kind of patch a site is.
#[derive(Clone, Copy)]
pub(crate) enum Form {
    /// a large fen that anchors its part of the valley, of so many hectares
    Key(f64),
    /// a stepping stone between the two halves of the valley, of so many hectares
    Stone(f64),
    Fen,
    Pool,
    /// a fen round a dry island
    Ringed,
    /// a fen that its stream cuts in two
    TwoBanks,
    /// an old bend of the river that filled up with reed
    Oxbow,
}

impl Form {
    /// An area in hectares: lognormal where the form does not say, drawn anew until within its bounds. An old bend has the
    /// area that its course gives it.
    pub(crate) fn draw_area_ha(self, rng: &mut Rng) -> f64 {
        let (median, spread, least, most) = match self {
            Key(area_ha) | Stone(area_ha) => return area_ha,
            Pool => (0.9, 0.5, 0.42, 2.2),
            Ringed | TwoBanks => (7.0, 0.5, 4.0, 16.0),
            Fen | Oxbow => (3.6, 0.95, 0.6, 22.0),
        };
        loop {
            let area_ha = median * num::exp(spread * normal(rng));
            if (least..=most).contains(&area_ha) {
                return area_ha;
            }
        }
    }

    /// Habitat quality: what a hectare carries, as a share of what the best carries.
    pub(crate) fn draw_quality(self, rng: &mut Rng) -> f64 {
        match self {
            Key(_) => between(0.82, 1.0, rng),
            _ => 0.35 + 0.65 * (between(0.0, 1.0, rng) + between(0.0, 1.0, rng)) / 2.0,
        }
    }
}

/// A patch before it has an outline.
pub(crate) struct Site {
    pub(crate) name: &'static str,
    pub(crate) water: Water,
    /// the way along the watercourse; side streams count from the river upward
    pub(crate) along_km: f64,
    /// to the left of the watercourse; negative to the right
    pub(crate) aside_km: f64,
    pub(crate) form: Form,
}

const fn site(name: &'static str, water: Water, along_km: f64, aside_km: f64, form: Form) -> Site {
    Site { name, water, along_km, aside_km, form }
}

/// All patches, down the valley; no place of these names and courses exists.
#[rustfmt::skip]
pub(crate) const SITES: [Site; 48] = [
    // the upper cluster
    site("Thrindle Head", Thrindle, 0.6, 0.1, Fen),
    site("Lapwing Flow", Thrindle, 1.6, -0.15, Fen),
    site("Candlerush", Thrindle, 2.6, 0.12, Fen),
    site("Old Peg's Pool", Thrindle, 3.2, -0.5, Pool),
    site("Swan Loop", Thrindle, 4.2, 0.5, Oxbow),
    site("Silverhag", Thrindle, 4.6, -0.14, Fen),
    site("Bittergreen", Thrindle, 6.45, 0.15, Fen),
    site("Cold Beck Foot", ColdBeck, 0.5, 0.0, TwoBanks),
    site("Curlew Bottom", ColdBeck, 1.4, -0.1, Fen),
    site("Ninepin Pool", ColdBeck, 2.1, 0.35, Pool),
    site("Skelder Carr", ColdBeck, 2.9, 0.1, Fen),
    site("Hallow Fen", Thrindle, 7.45, 0.36, Key(34.0)),
    site("Tansy Corner", Thrindle, 7.9, -0.2, Fen),
    site("Parson's Piece", Thrindle, 7.9, 0.6, Fen),
    site("Crake Carr", Thrindle, 8.9, -0.3, Ringed),
    site("Marlmouth", MarlBrook, 0.5, -0.1, Fen),
    site("Wick Pool", MarlBrook, 1.2, 0.3, Pool),
    site("Hazel Slack", MarlBrook, 2.0, -0.08, Fen),
    site("Greylag Bend", Thrindle, 10.0, -0.4, Oxbow),
    site("Sallow Fen", Thrindle, 10.8, 0.12, Fen),
    // the stepping stones
    site("Ferryman's Carr", Thrindle, 14.0, 0.1, Stone(4.6)),
    site("Halfway Fen", Thrindle, 16.8, -0.1, Stone(6.2)),
    // the lower cluster
    site("Heron Carr", Thrindle, 20.2, -0.12, Fen),
    site("Pipit Green", Thrindle, 20.8, 0.5, Fen),
    site("Long Water", Thrindle, 22.0, 0.5, Oxbow),
    site("Dimmet Foot", DimmetBrook, 0.6, 0.12, Fen),
    site("Nettlebed", DimmetBrook, 1.4, -0.12, Fen),
    site("Miller's Pool", DimmetBrook, 2.0, 0.3, Pool),
    site("Bogbean Hollow", DimmetBrook, 2.8, 0.0, TwoBanks),
    site("Ravenmoss", DimmetBrook, 3.8, 0.4, Fen),
    site("Great Withy", Thrindle, 23.2, -0.34, Key(43.0)),
    site("Little Withy", Thrindle, 23.4, 0.22, Fen),
    site("Eel Pool", Thrindle, 24.1, 0.5, Pool),
    site("Broadsedge", Thrindle, 24.6, 0.42, Key(24.0)),
    site("Otterhalt", Thrindle, 25.2, -0.14, Fen),
    site("Hob's Garden", HobBeck, 0.5, -0.1, Fen),
    site("Moorhen Pool", HobBeck, 1.1, 0.3, Pool),
    site("Bramble Carr", HobBeck, 1.7, -0.2, Ringed),
    site("Sixpenny Fen", HobBeck, 2.5, 0.25, Fen),
    site("Upper Hob", HobBeck, 3.6, -0.1, Fen),
    site("Teal Crook", Thrindle, 26.2, 0.4, Oxbow),
    site("Ragged Robin", Thrindle, 26.8, -0.14, Fen),
    site("Kingcup Fen", Thrindle, 27.6, 0.14, Fen),
    site("Lower Ings", Thrindle, 28.5, -0.1, Fen),
    // the outliers
    site("Wether Hags", MarlBrook, 4.9, 0.1, Fen),
    site("Lonely Pool", ColdBeck, 5.4, -0.3, Pool),
    site("Brockmoss", Thrindle, 17.4, 3.4, Fen),
    site("Farthing Fen", Thrindle, 15.6, -3.1, Fen),
];
