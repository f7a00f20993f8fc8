//! The river of the valley and its side streams.

use std::f64::consts::{PI, TAU};

use eyot::num;
use geo::{BooleanOps, Coord, MultiPolygon, Polygon};
use rand::RngExt;

use super::plane::{left_of, toward, unit};
use super::{Rng, Water};

/// Points of a watercourse stand this far apart.
const STEP_KM: f64 = 0.04;

/// A watercourse: points [`STEP_KM`] apart.
pub(crate) struct Stream {
    course: Vec<Coord>,
    half_width_km: f64,
}

/// How a watercourse winds: its length, half its width, how far its direction swings to either side (radians), and the
/// way along it from one bend to the next of the same side.
struct Bends {
    length_km: f64,
    half_width_km: f64,
    swing: f64,
    wave_km: f64,
}

impl Stream {
    /// A meandering course: its direction swings about `heading` as a sine of the way along it (Langbein & Leopold 1966,
    /// River meanders: theory of minimum variance), here in waves of uneven length and strength.
    fn wind(start: Coord, bends: &Bends, heading: impl Fn(f64) -> f64, rng: &mut Rng) -> Self {
        let [mut wave, second, third] = [0; 3].map(|_| TAU * rng.random::<f64>());
        let mut course = vec![start];
        let mut along_km = 0.0;
        while along_km < bends.length_km {
            let uneven = num::sin(TAU * along_km / (3.7 * bends.wave_km) + second);
            let strength = 0.75 + 0.25 * num::sin(TAU * along_km / (5.3 * bends.wave_km) + third);
            let direction = heading(along_km) + bends.swing * strength * num::sin(wave);
            course.push(course[course.len() - 1] + toward(direction) * STEP_KM);
            wave += TAU * STEP_KM / bends.wave_km * (1.0 + 0.35 * uneven);
            along_km += STEP_KM;
        }
        Self { course, half_width_km: bends.half_width_km }
    }

    #[expect(clippy::cast_possible_truncation, clippy::cast_sign_loss, reason = "a short way along, at least 0")]
    fn index(&self, along_km: f64) -> usize {
        ((along_km.max(0.0) / STEP_KM) as usize).min(self.course.len() - 1)
    }

    /// The point that lies so far along the course.
    pub(crate) fn at(&self, along_km: f64) -> Coord {
        self.course[self.index(along_km)]
    }

    /// The unit vector along the course, taken over half a kilometre to either side.
    pub(crate) fn direction(&self, along_km: f64) -> Coord {
        unit(self.at(along_km + 0.5) - self.at(along_km - 0.5))
    }

    /// A line along the left bank from one place to another.
    pub(crate) fn left_bank(&self, from_km: f64, to_km: f64) -> impl Iterator<Item = Coord> {
        (self.index(from_km)..=self.index(to_km)).map(|i| self.course[i] + left_of(self.ahead(i)) * 0.04)
    }

    /// The channel from bank to bank.
    fn channel(&self) -> Polygon {
        let bank = |half_width_km: f64| {
            (0..self.course.len()).map(move |i| self.course[i] + left_of(self.ahead(i)) * half_width_km)
        };
        let ring = bank(self.half_width_km).chain(bank(-self.half_width_km).rev());
        Polygon::new(ring.collect(), Vec::new())
    }

    fn ahead(&self, i: usize) -> Coord {
        unit(self.course[(i + 1).min(self.course.len() - 1)] - self.course[i.saturating_sub(1)])
    }
}

/// All watercourses, and the ground that they take.
pub(crate) struct Valley {
    streams: [Stream; 5],
    pub(crate) channels: MultiPolygon,
}

impl Valley {
    /// Lets the river run from the north-east to the south-west, and a side stream from either bank in each half.
    pub(crate) fn carve(rng: &mut Rng) -> Self {
        let river = Bends { length_km: 30.0, half_width_km: 0.016, swing: 0.95, wave_km: 2.3 };
        let down_valley = |along_km: f64| PI + 0.28 + 0.4 * num::sin(TAU * along_km / 19.0 + 0.7);
        let thrindle = Stream::wind(Coord { x: 24.2, y: 11.4 }, &river, down_valley, rng);
        let mut side_stream = |foot_km: f64, length_km: f64, direction: f64| {
            let beck = Bends { length_km, half_width_km: 0.006, swing: 0.7, wave_km: 1.3 };
            Stream::wind(thrindle.at(foot_km), &beck, |along_km| direction + 0.25 * num::sin(along_km), rng)
        };
        let cold_beck = side_stream(6.3, 6.0, 1.9);
        let marl_brook = side_stream(9.3, 5.6, -1.3);
        let dimmet_brook = side_stream(22.0, 5.0, 1.75);
        let hob_beck = side_stream(25.4, 4.6, -1.2);
        let streams = [thrindle, cold_beck, marl_brook, dimmet_brook, hob_beck];
        let channels =
            streams.iter().fold(MultiPolygon::new(Vec::new()), |all: MultiPolygon, one| all.union(&one.channel()));
        Self { streams, channels }
    }

    pub(crate) fn stream(&self, water: Water) -> &Stream {
        &self.streams[water as usize]
    }
}
