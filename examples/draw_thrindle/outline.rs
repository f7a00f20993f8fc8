//! The outlines of fens, pools and old river bends.

use std::f64::consts::{PI, TAU};

use eyot::num;
use geo::orient::Direction;
use geo::{Area, BooleanOps, Coord, MultiPolygon, Orient, Polygon, Simplify};
use rand::RngExt;

use super::plane::{between, left_of, normal, toward, unit};
use super::{Form, Rng};

/// Everything about an outline but its size.
pub(crate) struct Outline {
    place: Coord,
    /// the unit vector of its length
    ahead: Coord,
    /// length over breadth
    stretch: f64,
    /// how much it curves, as a share of its size
    bend: f64,
    /// strength and phase of the swellings that go once, twice, ... around it
    lobes: Vec<(f64, f64)>,
    /// a straight side that an old ditch cut: the unit vector toward it, and how far out as a share of the size
    ditch: Option<(Coord, f64)>,
    island: Option<Box<Outline>>,
    parts: usize,
}

impl Outline {
    /// An outline at `place` whose length runs `ahead`.
    pub(crate) fn draw(place: Coord, ahead: Coord, form: Form, rng: &mut Rng) -> Self {
        let (longest, roughness) = match form {
            Form::Pool => (1.7, 0.2),
            Form::Ringed | Form::TwoBanks => (1.8, 0.28),
            Form::Key(_) => (2.2, 0.6),
            _ => (3.4, 0.4),
        };
        let mut lobe = |k| (roughness * num::pow(k, -1.25) * normal(rng), TAU * rng.random::<f64>());
        let lobes = (1..=18).map(f64::from).map(&mut lobe).collect();
        let has_ditch = matches!(form, Form::Fen | Form::Key(_) | Form::Stone(_)) && rng.random::<f64>() < 0.5;
        Self {
            place,
            ahead,
            stretch: between(1.1, longest, rng),
            bend: 0.2 * normal(rng),
            lobes,
            ditch: has_ditch.then(|| (toward(TAU * rng.random::<f64>()), between(0.25, 0.45, rng))),
            island: matches!(form, Form::Ringed).then(|| Box::new(Self::draw(place, ahead, Form::Pool, rng))),
            parts: if matches!(form, Form::TwoBanks) { 2 } else { 1 },
        }
    }

    /// The outline at the size at which `area_km2` is left once channels, ditch and island have taken their part.
    pub(crate) fn of_area(&self, area_km2: f64, channels: &MultiPolygon) -> MultiPolygon {
        let mut size_km = area_km2.sqrt();
        for _ in 0..12 {
            let left_km2 = self.cut(size_km, channels).unsigned_area();
            size_km *= (area_km2 / left_km2).sqrt().clamp(0.5, 2.0);
        }
        self.cut(size_km, channels)
    }

    /// The outline before anything is cut off, about `size_km` squared in area.
    #[expect(clippy::cast_possible_truncation, clippy::cast_sign_loss, reason = "32 to 160 points")]
    fn whole(&self, size_km: f64) -> Polygon {
        let points = (size_km * 300.0).clamp(32.0, 160.0) as u32;
        let ring = (0..points).map(|i| {
            let angle = TAU * f64::from(i) / f64::from(points);
            let swell = (1..).zip(&self.lobes).map(|(k, (size, phase))| size * num::cos(f64::from(k) * angle + phase));
            let radius = size_km / PI.sqrt() * num::exp(swell.sum());
            let length = radius * num::cos(angle) * self.stretch.sqrt();
            let breadth = radius * num::sin(angle) / self.stretch.sqrt() + self.bend * length * length / size_km;
            self.place + self.ahead * length + left_of(self.ahead) * breadth
        });
        Polygon::new(ring.collect(), Vec::new())
    }

    /// What channels, ditch and island leave: the largest part, or the two of a fen on both banks.
    fn cut(&self, size_km: f64, channels: &MultiPolygon) -> MultiPolygon {
        let mut left = self.whole(size_km).difference(channels);
        if let Some((out, share)) = self.ditch {
            left = left.difference(&beyond(self.place + out * (share * size_km), out));
        }
        if let Some(island) = &self.island {
            left = left.difference(&island.whole(0.3 * size_km));
        }
        left.0.sort_by(|a, b| b.unsigned_area().total_cmp(&a.unsigned_area()));
        left.0.truncate(self.parts);
        left
    }
}

/// A square of 4 km on the far side of a straight line through `point`, across `out`.
fn beyond(point: Coord, out: Coord) -> Polygon {
    let (across, far) = (left_of(out) * 2.0, out * 4.0);
    let ring = [point - across, point + across, point + across + far, point - across + far];
    Polygon::new(ring.into_iter().collect(), Vec::new())
}

/// A crescent that opens toward the river, broad in the middle of its bend and thin at its ends.
pub(crate) fn oxbow(place: Coord, river: Coord, rng: &mut Rng) -> MultiPolygon {
    let away = unit(place - river);
    let radius_km = between(0.2, 0.34, rng);
    let half_width_km = between(0.025, 0.045, rng);
    let half_sweep = between(1.6, 2.1, rng);
    let skew = 0.2 * normal(rng);
    let phase = TAU * rng.random::<f64>();
    let bank = |side: f64| {
        (-24..=24).map(move |i| {
            let share = f64::from(i) / 24.0;
            let angle = half_sweep * share;
            let swell = 1.0 + 0.25 * num::sin(7.0 * angle + phase + side);
            let half_width = half_width_km * (1.0 - 0.85 * share * share) * swell;
            let radius = radius_km * (1.0 + 0.12 * num::sin(2.0 * angle + phase)) + side * half_width;
            let along = radius * num::sin(angle);
            place + away * (radius * num::cos(angle) + skew * along) + left_of(away) * along
        })
    };
    MultiPolygon::new(vec![Polygon::new(bank(1.0).chain(bank(-1.0).rev()).collect(), Vec::new())])
}

/// Rings without needless points, shells counter-clockwise (RFC 7946).
pub(crate) fn tidy(shape: &MultiPolygon) -> MultiPolygon {
    shape.simplify(0.0025).orient(Direction::Default)
}
