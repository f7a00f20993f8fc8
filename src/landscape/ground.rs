//! Patches on the ground, in the coordinates of the file: checked, mended, and run on across the antimeridian.

use std::path::Path;

use geo::{BoundingRect, Coord, Geometry, MultiPolygon, Rect};
use rayon::prelude::*;

use super::degrees::run_on;
use super::findings::Findings;
use super::geojson::Feature;
use super::patch::Crs;
use super::repair::{self, Fault, Verdict};
use crate::mistake::{Mistake, Place};

/// What a patch covers.
#[derive(Debug, Clone, PartialEq)]
pub(super) enum Ground {
    /// a place whose area the study gives
    Point(Coord<f64>),
    /// an outline, sound unless it was too intricate to be checked; its longitudes run on across the antimeridian
    Outline(MultiPolygon<f64>),
}

impl Ground {
    /// The box around it; `None` where an outline is empty.
    pub(super) fn bounds(&self) -> Option<Rect<f64>> {
        match self {
            Self::Point(at) => Some(Rect::new(*at, *at)),
            Self::Outline(outline) => outline.bounding_rect(),
        }
    }
}

/// The geometry (mended where need was) and ground of every feature; `None` where a mistake has been noted.
pub(super) fn mend_all(
    features: &[Feature],
    file: &Path,
    crs: Crs,
    findings: &Findings<'_>,
) -> Vec<Option<(Geometry<f64>, Ground)>> {
    let judged: Vec<Option<Judged>> =
        features.par_iter().map(|feature| feature.geometry.as_ref().map(|geometry| judge(geometry, crs))).collect();
    features
        .iter()
        .zip(judged)
        .map(|(feature, judged)| match judged? {
            Judged::Fit(geometry, ground) => Some((geometry, ground)),
            Judged::Odd(geometry, ground, why) => {
                findings.warning(why.kind(), why.warning(feature.place(file)));
                Some((geometry, ground))
            }
            Judged::Unfit(why) => {
                findings.mistake(why.kind(), why.mistake(feature.place(file)));
                None
            }
        })
        .collect()
}

enum Judged {
    Fit(Geometry<f64>, Ground),
    Odd(Geometry<f64>, Ground, Why),
    Unfit(Why),
}

enum Why {
    Fault(Fault),
    TooIntricate,
    RoundThePole,
}

fn judge(geometry: &Geometry<f64>, crs: Crs) -> Judged {
    let outline = match geometry {
        Geometry::Polygon(polygon) => MultiPolygon::new(vec![polygon.clone()]),
        Geometry::MultiPolygon(polygons) => polygons.clone(),
        Geometry::Point(point) => return Judged::Fit(geometry.clone(), Ground::Point(point.0)),
        _ => return Judged::Unfit(Why::Fault(Fault::NoArea)),
    };
    let outline = match crs {
        Crs::Metres => outline,
        Crs::Degrees => match run_on(outline) {
            Some(outline) => outline,
            None => return Judged::Unfit(Why::RoundThePole),
        },
    };
    match repair::check(&outline) {
        Verdict::Sound => Judged::Fit(geometry.clone(), Ground::Outline(outline)),
        Verdict::Unchecked => Judged::Odd(geometry.clone(), Ground::Outline(outline), Why::TooIntricate),
        Verdict::Mended(mended, fault) => {
            Judged::Odd(as_geometry(mended.clone()), Ground::Outline(mended), Why::Fault(fault))
        }
        Verdict::Hopeless(fault) => Judged::Unfit(Why::Fault(fault)),
    }
}

fn as_geometry(mut outline: MultiPolygon<f64>) -> Geometry<f64> {
    match outline.0.pop() {
        Some(only) if outline.0.is_empty() => Geometry::Polygon(only),
        Some(last) => {
            outline.0.push(last);
            Geometry::MultiPolygon(outline)
        }
        None => Geometry::MultiPolygon(outline),
    }
}

impl Why {
    fn kind(&self) -> &'static str {
        match self {
            Self::Fault(Fault::Crossing(_)) => "crossing",
            Self::Fault(Fault::StrayHole(_)) => "stray hole",
            Self::Fault(Fault::OverlappingParts) => "overlapping parts",
            Self::Fault(Fault::NoArea) => "no area",
            Self::TooIntricate => "too intricate",
            Self::RoundThePole => "round the pole",
        }
    }

    fn found(&self) -> String {
        match self {
            Self::Fault(Fault::Crossing(at)) => format!("an outline that crosses itself near {:.6}, {:.6}", at.x, at.y),
            Self::Fault(Fault::StrayHole(at)) => {
                format!("a hole outside of its polygon, or in another hole, near {:.6}, {:.6}", at.x, at.y)
            }
            Self::Fault(Fault::OverlappingParts) => "parts that overlap".to_owned(),
            Self::Fault(Fault::NoArea) => "an outline of zero area".to_owned(),
            Self::TooIntricate => "an outline too intricate to be checked for crossings".to_owned(),
            Self::RoundThePole => "an outline that runs round a pole".to_owned(),
        }
    }

    fn warning(&self, place: Place) -> Mistake {
        let (meaning, advice) = match self {
            Self::TooIntricate => ("used as it is", "simplify it in the GIS, or check its geometry there"),
            Self::Fault(Fault::OverlappingParts) => {
                ("joined: common ground counts once", "dissolve the parts in the GIS")
            }
            _ => ("repaired: ground enclosed an odd number of times is habitat", LOOK),
        };
        Mistake::new(place, self.found(), meaning).advise(advice)
    }

    fn mistake(&self, place: Place) -> Mistake {
        let (expected, advice) = match self {
            Self::Fault(Fault::NoArea) => {
                ("a patch of at least 0.01 m2", "delete the sliver in the GIS, or draw it anew")
            }
            Self::RoundThePole => {
                ("an outline that comes back to where it began", "declare crs = \"metres\" and use a polar projection")
            }
            _ => ("rings that neither cross nor stray", "repair the geometry in the GIS and export again"),
        };
        Mistake::new(place, self.found(), expected).advise(advice)
    }
}

const LOOK: &str = "look at the patch in the GIS, and repair its geometry there";
