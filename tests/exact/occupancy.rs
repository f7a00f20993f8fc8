//! Patches full or empty, against the exact chain over all states of the network: from the state at t, all at once,
//! occupied i dies out with E_i = min(1, e/A^x) (with rescue E_i (1 - C_i)) and empty i is colonised with
//! C_i = S_i^2/(S_i^2 + y^2), S_i the sum over occupied j of exp(-alpha d_ij) A_j (Hanski 1994, J. Anim. Ecol. 63, from
//! memory). The kernel here is exp(-alpha d): an exponential kernel of mean 2/alpha over its value at 0. The chains were
//! solved outside this crate, and again by a second method.

use std::fs;
use std::sync::atomic::AtomicBool;

use eyot::demography::local::Occupancy;
use eyot::engine::{Overrides, Prepared, Stopping, prepare, run};
use eyot::num;

use crate::support::{REPLICATES, Seen, sample_mean, sample_sd, seed};

/// A patch: position in km, hectares, whether it is occupied at the start.
type Patch = ([f64; 2], f64, bool);

/// A network and what its patches follow.
#[derive(Clone)]
struct Network {
    name: &'static str,
    patches: Vec<Patch>,
    alpha: f64,
    e: f64,
    x: f64,
    y: f64,
    rescue: bool,
    /// exponent of the area of a source
    b: f64,
    /// further lines: weather of the life history, and tables
    weather: &'static str,
}

impl Network {
    fn prepare(&self, horizon: u32, reversed: bool) -> Prepared {
        let folder = tempfile::tempdir().expect("a temporary folder can be made");
        let write = |name: &str, text: &str| {
            fs::write(folder.path().join(name), text).expect("a temporary file can be written")
        };
        let mut features: Vec<String> = (1..)
            .zip(&self.patches)
            .map(|(number, (at_km, area_ha, occupied))| {
                let [x, y] = at_km.map(|km| 500_000.0 + 1000.0 * km);
                format!(
                    r#"{{"type":"Feature","properties":{{"patch":"p{number}","area":{area_ha},"there":{occupied}}},"geometry":{{"type":"Point","coordinates":[{x},{y}]}}}}"#
                )
            })
            .collect();
        if reversed {
            features.reverse();
        }
        let collection = format!(r#"{{"type":"FeatureCollection","features":[{}]}}"#, features.join(","));
        write("patches.geojson", &collection);
        let Self { name, alpha, e, x, y, rescue, b, weather, .. } = self;
        let (seed, mean_km) = (seed(name), 2.0 / alpha);
        let study = format!(
            "title = \"{name}\"\nseed = {seed}\nhorizon = {horizon}\nreplicates = {REPLICATES}\n[landscape]\n\
             patches = \"patches.geojson\"\nid = \"patch\"\ncrs = \"metres\"\narea = {{ property = \"area\" }}\n\
             start = {{ property = \"there\" }}\n[dispersal]\n\
             kernel = {{ shape = \"exponential\", mean_km = {mean_km} }}\narea_exponent = {b}\n[life_history]\n\
             kind = \"occupancy\"\nextinction = {{ e = {e}, x = {x} }}\ncolonisation = {{ y = {y} }}\n\
             rescue = {rescue}\n{weather}"
        );
        write("study.toml", &study);
        match prepare(&folder.path().join("study.toml"), Overrides::default()) {
            Ok(checked) => checked.value,
            Err(failure) => panic!("{failure}"),
        }
    }

    fn run(&self, horizon: u32) -> Seen {
        let prepared = self.prepare(horizon, false);
        let run = run(&prepared.model, &Stopping::After(REPLICATES), 0, &AtomicBool::new(false), &|_, _| {});
        Seen { name: self.name, tallies: run.tallies }
    }

    /// Year, P(all empty), mean and sd of the number occupied, P(each patch occupied).
    fn follows(&self, rows: &[(u32, f64, f64, f64, &[f64])]) {
        for &(year, empty, mean, sd, occupied) in rows {
            let seen = self.run(year);
            seen.extinct(year as usize, empty);
            seen.total(year as usize, mean, sd);
            seen.occupied_at_end(occupied);
        }
    }
}

fn three(name: &'static str, rescue: bool) -> Network {
    Network {
        name,
        patches: vec![([0.0, 0.0], 2.0, true), ([2.0, 0.0], 1.0, true), ([0.0, 3.0], 0.5, true)],
        alpha: 1.0,
        e: 0.2,
        x: 1.0,
        y: 0.5,
        rescue,
        b: 1.0,
        weather: "",
    }
}

#[test]
fn three_patches() {
    three("three full or empty patches", false).follows(&[
        (1, 0.008_000, 2.300_00, 0.7000, &[0.900_000, 0.800_000, 0.600_000]),
        (5, 0.206_861, 1.263_91, 0.8516, &[0.623_079, 0.503_254, 0.137_576]),
        (10, 0.466_728, 0.807_71, 0.8701, &[0.407_219, 0.339_281, 0.061_209]),
        (20, 0.764_003, 0.355_34, 0.7002, &[0.178_277, 0.151_711, 0.025_352]),
        (50, 0.979_807, 0.030_39, 0.2276, &[0.015_234, 0.012_995, 0.002_164]),
    ]);
}

#[test]
fn three_patches_with_rescue() {
    three("three patches with rescue", true).follows(&[
        (1, 0.005_152, 2.382_32, 0.6673, &[0.909_313, 0.848_852, 0.624_152]),
        (5, 0.179_028, 1.369_19, 0.8621, &[0.645_447, 0.570_183, 0.153_556]),
        (10, 0.430_406, 0.895_18, 0.9020, &[0.433_228, 0.392_679, 0.069_272]),
        (20, 0.734_086, 0.414_70, 0.7554, &[0.200_015, 0.184_620, 0.030_061]),
        (50, 0.973_331, 0.041_57, 0.2696, &[0.020_035, 0.018_530, 0.003_008]),
    ]);
}

/// Rescue acts first, then a catastrophe: a full patch stays so with (1 - E (1 - C)) times the survival left. The chances of
/// the first year with rescue and without a catastrophe are those above; one of 0.3 a year that leaves half takes 0.15 of them.
#[test]
fn a_catastrophe_bears_on_those_who_would_have_stayed() {
    let mut network = three("three with rescue and storms", true);
    network.weather =
        "\n[[catastrophe]]\nname = \"storm\"\nyearly_probability = 0.3\nstrikes = \"each patch\"\nsurvival = 0.5\n";
    network.run(1).occupied_at_end(&[0.85 * 0.909_313, 0.85 * 0.848_852, 0.85 * 0.624_152]);
}

/// Mean years to the extinction of the network. Of the long-run yearly survival 0.926 hardly 1e-13 is left after 400
/// years, so that the horizon cuts nothing off; the sd is the sample's.
#[test]
fn the_mean_time_to_extinction_of_three_patches() {
    for (network, null) in [(three("time of three", false), 14.927_29), (three("time with rescue", true), 16.091_45)] {
        let seen = network.run(400);
        let years: Vec<f64> = seen
            .tallies
            .records
            .iter()
            .map(|record| record.totals.iter().take_while(|total| **total > 0).count() as f64)
            .collect();
        seen.mean("years to extinction", sample_mean(&years), null, sample_sd(&years));
    }
}

fn four(name: &'static str) -> Network {
    Network {
        name,
        patches: vec![
            ([0.0, 0.0], 1.0, false),
            ([1.0, 0.0], 0.5, false),
            ([1.0, 1.0], 2.0, true),
            ([3.0, 1.0], 0.25, true),
        ],
        alpha: 0.8,
        e: 0.15,
        x: 0.8,
        y: 1.2,
        rescue: false,
        b: 1.0,
        weather: "",
    }
}

#[test]
fn four_patches_of_which_two_are_occupied() {
    four("four full or empty patches").follows(&[
        (1, 0.018_566, 2.074_63, 0.8615, &[0.235_002, 0.380_496, 0.913_848, 0.545_285]),
        (5, 0.147_613, 1.949_72, 1.1643, &[0.530_000, 0.543_204, 0.671_592, 0.204_929]),
        (10, 0.306_260, 1.557_86, 1.2872, &[0.467_339, 0.440_479, 0.501_340, 0.148_704]),
        (20, 0.561_711, 0.968_72, 1.2558, &[0.298_191, 0.275_374, 0.305_261, 0.089_895]),
        (50, 0.894_248, 0.233_33, 0.7421, &[0.071_981, 0.066_374, 0.073_379, 0.021_591]),
    ]);
}

#[test]
fn what_the_loss_of_one_of_four_patches_costs() {
    let losses = [
        ("four without the first", 0.240_960),
        ("four without the second", 0.317_350),
        ("four without the third", 0.000_122),
        ("four without the fourth", 0.428_922),
    ];
    for (lost, (name, persists)) in losses.into_iter().enumerate() {
        let mut network = four(name);
        network.patches.remove(lost);
        network.run(20).extinct(20, 1.0 - persists);
    }
}

#[test]
fn six_patches_with_rescue() {
    let places = [[0.0, 0.0], [1.0, 1.0], [2.0, 0.0], [4.0, 0.0], [5.0, 1.0], [4.5, 3.0]];
    let areas = [1.2, 0.6, 0.9, 2.0, 0.4, 0.8];
    let network = Network {
        name: "six patches with rescue",
        patches: places.into_iter().zip(areas).map(|(place, area)| (place, area, true)).collect(),
        alpha: 1.2,
        e: 0.12,
        x: 1.1,
        y: 0.8,
        rescue: true,
        b: 1.0,
        weather: "",
    };
    network.follows(&[
        (1, 0.000_003, 5.190_08, 0.8232, &[0.908_144, 0.838_296, 0.894_000, 0.947_283, 0.753_353, 0.849_002]),
        (5, 0.009_426, 3.486_79, 1.2963, &[0.638_804, 0.536_342, 0.652_974, 0.770_801, 0.438_301, 0.449_568]),
        (10, 0.092_168, 2.385_64, 1.4112, &[0.426_182, 0.359_134, 0.479_119, 0.598_203, 0.310_358, 0.212_645]),
        (20, 0.390_805, 1.235_71, 1.2967, &[0.200_881, 0.175_062, 0.265_213, 0.359_754, 0.176_259, 0.058_542]),
        (50, 0.876_822, 0.221_84, 0.6754, &[0.027_579, 0.026_583, 0.048_403, 0.076_558, 0.036_729, 0.005_986]),
    ]);
}

/// A mainland that never dies out (E of 1e-10 or less) beside an island of one hectare: with b = 0 the island's
/// connectivity is exp(-alpha d) = exp(-1) as long as the mainland stands.
fn mainland(name: &'static str, e: f64, y: f64, rescue: bool, island: bool, weather: &'static str) -> Network {
    Network {
        name,
        patches: vec![([0.0, 0.0], 1.0, island), ([1.0, 0.0], 1e10, true)],
        alpha: 1.0,
        e,
        x: 1.0,
        y,
        rescue,
        b: 0.0,
        weather,
    }
}

/// With constant colonisation C = 0.3 and E = 0.1, incidence is C/(C + E) = 0.75, with rescue C/(C + E - CE) = 0.81081081.
/// After 100 years (1 - C - E)^100 < 1e-22 of the start is left.
#[test]
fn constant_colonisation() {
    let y = num::exp(-1.0) * (0.7_f64 / 0.3).sqrt();
    for (name, rescue, incidence) in
        [("constant colonisation", false, 0.75), ("constant colonisation and rescue", true, 0.810_810_81)]
    {
        let seen = mainland(name, 0.1, y, rescue, true, "").run(100);
        seen.occupied_at_end(&[incidence, 1.0]);
    }
}

/// Hanski's incidence with rescue, 1/(1 + e y^2/(S^2 A^x)), for S 1.5, y 1, e 0.2, x 0.8, A 3.
#[test]
fn the_incidence_function() {
    let occupancy = Occupancy { extinction_exponent: 0.8, rescue: true };
    let turnover = occupancy.turnover(0.2, 1.0, num::pow(3.0, 0.8), 1.5);
    let incidence = turnover.colonisation / (turnover.colonisation + turnover.extinction);
    assert!((incidence - 0.964_403_35).abs() < 1e-8, "{incidence}");
    let alone = occupancy.turnover(0.2, 1.0, 0.1, 0.0);
    assert_eq!((alone.extinction, alone.colonisation), (1.0, 0.0));
}

/// The mean of a function of the standard normal deviate, by the trapezium rule, and of a lognormal factor of mean 1.
fn mean_over_weather(value: impl Fn(f64) -> f64) -> f64 {
    let step = 1e-4;
    (-90_000..=90_000)
        .map(|at| {
            let z = step * f64::from(at);
            step * num::exp(-z * z / 2.0) / (2.0 * std::f64::consts::PI).sqrt() * value(z)
        })
        .sum()
}

fn factor(sd: f64, z: f64) -> f64 {
    let sigma = num::ln_1p(sd * sd).sqrt();
    num::exp(sigma * z - sigma * sigma / 2.0)
}

/// Under e_sd the yearly extinction of a patch alone is the mean of min(1, e f / A^x) over the factor f, whose law is that
/// of the study's documentation; years are independent, so t years leave (1 - that)^t. Null by quadrature.
#[test]
fn bad_years_raise_extinction() {
    let network = Network {
        name: "extinction under weather",
        patches: vec![([0.0, 0.0], 1.5, true)],
        alpha: 1.0,
        e: 0.3,
        x: 1.0,
        y: 1.0,
        rescue: false,
        b: 1.0,
        weather: "weather = { e_sd = 1.5 }\n",
    };
    let mean = mean_over_weather(|z| (0.2 * factor(1.5, z)).min(1.0));
    assert!(mean < 0.19, "the bound at 1 must be felt: {mean}");
    let seen = network.run(10);
    for years in [1, 3, 10] {
        seen.extinct(years, 1.0 - num::pow(1.0 - mean, years as f64));
    }
}

/// Colonisation under y_sd, and extinction with rescue under both, which hangs on e and y having one deviate: with two of
/// their own it would be the product of the means.
#[test]
fn bad_years_raise_e_and_y_together() {
    let s2 = num::exp(-2.0);
    let colonisation = |z: f64| s2 / (s2 + 0.25 * factor(0.8, z) * factor(0.8, z));
    let weather = "weather = { e_sd = 0.9, y_sd = 0.8 }\n[environment]\ncorrelation = \"none\"\n";
    let seen = mainland("colonisation under weather", 0.4, 0.5, false, false, weather).run(1);
    seen.occupied_at_end(&[mean_over_weather(colonisation), 1.0]);
    let extinction = |z: f64| (0.4 * factor(0.9, z)).min(1.0);
    let together = mean_over_weather(|z| extinction(z) * (1.0 - colonisation(z)));
    let apart = mean_over_weather(extinction) * (1.0 - mean_over_weather(colonisation));
    assert!(together - apart > 0.02, "{together} and {apart} must be told apart");
    let seen = mainland("rescue under weather", 0.4, 0.5, true, true, weather).run(1);
    seen.occupied_at_end(&[1.0 - together, 1.0]);
}

/// Two patches of one hectare at a distance of ln 2: S = p/2 in both at rest, and p = C/(C + E) is a quadratic with the
/// greater root (1 + sqrt(1 - 4 (1 + E) E y^2/w^2)) / (2 (1 + E)), w = 1/2; where it has none, the network dies out.
#[test]
fn two_alike_at_rest() {
    let mut network = Network {
        name: "two at rest",
        patches: vec![([0.0, 0.0], 1.0, true), ([std::f64::consts::LN_2, 0.0], 1.0, true)],
        alpha: 1.0,
        e: 0.1,
        x: 1.0,
        y: 0.5,
        rescue: false,
        b: 1.0,
        weather: "",
    };
    let at_rest = |network: &Network| network.prepare(1, false).model.occupied_at_rest().expect("it is soon reached");
    let p = (1.0 + (1.0_f64 - 4.0 * 1.1 * 0.1).sqrt()) / 2.2;
    // Distances are rounded to 1 mm, which moves w by 1e-6 of itself.
    assert!((at_rest(&network) - 2.0 * p).abs() < 1e-5);
    network.y = 1.0;
    assert!(at_rest(&network) < 1e-6);
}

/// Whatever the order of the patches in the file, every replicate is the same.
#[test]
fn the_order_of_patches_changes_nothing() {
    let network = three("order of full or empty patches", true);
    let tallies = [false, true].map(|reversed| {
        let prepared = network.prepare(30, reversed);
        run(&prepared.model, &Stopping::After(500), 0, &AtomicBool::new(false), &|_, _| {}).tallies
    });
    assert_eq!(tallies[0], tallies[1]);
}
