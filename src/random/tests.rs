//! What holds for every argument, and a few draws of every code path, frozen.

use proptest::prelude::*;

use super::*;

fn stream(i: u64) -> Stream {
    ReplicateKey::new(7, 3).year(11).patch(i).draw(Purpose::Young(2))
}

/// Any double, the odd ones more often than chance would have them.
fn any_number() -> impl Strategy<Value = f64> {
    prop_oneof![any::<f64>(), 0.0..1.0, -1.0..100.0, Just(f64::NAN), Just(f64::INFINITY), Just(f64::MIN_POSITIVE)]
}

proptest! {
    #[test]
    fn binomial_is_at_most_n(i: u64, n: u32, p in any_number()) {
        let k = binomial(&mut stream(i), n, p);
        prop_assert!(k <= n);
        if p >= 1.0 { prop_assert_eq!(k, n) }
        if p <= 0.0 || p.is_nan() { prop_assert_eq!(k, 0) }
    }

    #[test]
    fn binomial_of_few_rises_with_p(i: u64, n in 0_u32..=256, p in 0.0..1.0, more in 0.0..0.1) {
        prop_assert!(binomial(&mut stream(i), n, p) <= binomial(&mut stream(i), n, p + more));
    }

    #[test]
    fn poisson_takes_any_mean(i: u64, mean in any_number()) {
        let k = poisson(&mut stream(i), mean);
        if mean > 1e10 { prop_assert_eq!(k, u32::MAX) }
        if mean <= 0.0 || mean.is_nan() { prop_assert_eq!(k, 0) }
    }

    #[test]
    fn hypergeometric_stays_in_its_support(i: u64, marked in 0_u64..1 << 34, others in 0_u64..1 << 34, share in 0.0..1.2) {
        let drawn = ((marked + others) as f64 * share) as u64;
        let k = hypergeometric(&mut stream(i), marked, others, drawn);
        prop_assert!(k <= marked && k <= drawn && k + others >= drawn.min(marked + others));
    }

    #[test]
    fn removal_removes_the_surplus(i: u64, before in prop::collection::vec(0_u32..400, 0..6), surplus in 0_u64..1500) {
        let mut after = before.clone();
        remove_at_random(&mut stream(i), &mut after, surplus);
        let sum = |counts: &[u32]| counts.iter().map(|count| u64::from(*count)).sum::<u64>();
        prop_assert_eq!(sum(&after), sum(&before).saturating_sub(surplus));
        prop_assert!(after.iter().zip(&before).all(|(after, before)| after <= before));
    }

    #[test]
    fn multinomial_shares_out_everybody(i: u64, n: u32, weights in prop::collection::vec(0.0..1.0_f64, 1..8), whole: bool) {
        let total = weights.iter().sum::<f64>().max(1e-9) * if whole { 1.0 } else { 1.1 };
        let p: Vec<f64> = weights.iter().map(|weight| weight / total).collect();
        let mut out = vec![0; p.len()];
        let left = multinomial(&mut stream(i), n, &p, &mut out);
        prop_assert_eq!(out.iter().map(|k| u64::from(*k)).sum::<u64>() + u64::from(left), u64::from(n));
        if whole && weights.iter().sum::<f64>() > 1e-9 { prop_assert_eq!(left, 0) }
    }

    #[test]
    fn destinations_are_places_of_their_row(i: u64, first in 0_usize..4, second in 0_usize..9) {
        let mut rows = AliasRows::new();
        rows.push(&vec![0.2; first]);
        rows.push(&vec![1.0 / second as f64; second]);
        let place = rows.draw(&mut stream(i), 1).map(|place| place as usize);
        match place {
            Some(place) => prop_assert!((first..first + second).contains(&place)),
            None => prop_assert_eq!(second, 0),
        }
        prop_assert!(rows.draw(&mut stream(i), 0).is_none_or(|place| (place as usize) < first));
    }
}

#[test]
fn the_largest_counts_are_no_trouble() {
    let mut counts = [u32::MAX; 5];
    remove_at_random(&mut stream(0), &mut counts, 5 * u64::from(u32::MAX) - 3);
    assert_eq!(counts.iter().sum::<u32>(), 3);
    let mut counts = [u32::MAX; 5];
    remove_at_random(&mut stream(0), &mut counts, 9_999_999_999);
    assert_eq!(counts.iter().map(|count| u64::from(*count)).sum::<u64>(), 5 * u64::from(u32::MAX) - 9_999_999_999);
    assert_eq!(multinomial(&mut stream(0), u32::MAX, &[], &mut []), u32::MAX);
}

/// Numbers that these samplers have always given: a change here changes every result, and is a change of version.
#[test]
fn draws_are_frozen() {
    fn five<T>(draw: impl Fn(&mut Stream) -> T) -> Vec<T> {
        (0..5).map(|i| draw(&mut stream(i))).collect()
    }
    /// Enough to meet the rare branches too.
    fn sum_of_1000(draw: impl Fn(&mut Stream) -> u64) -> u64 {
        (0..1000).map(|i| draw(&mut stream(i))).sum()
    }
    assert_eq!(
        five(Stream::word),
        [
            2_272_321_678_137_332_928,
            4_648_681_330_150_880_031,
            13_007_928_626_856_956_692,
            9_274_151_650_012_573_082,
            3_425_440_776_195_958_974
        ]
    );
    assert_eq!(patch_key("Withy Bed"), 18_423_457_733_191_669_803);
    assert_eq!(sum_of_1000(|s| binomial(s, 5, 0.3).into()), 1_519, "few");
    assert_eq!(five(|s| binomial(s, 100, 0.3)), [26, 44, 34, 34, 40], "asked");
    assert_eq!(five(|s| binomial(s, 1000, 0.003)), [1, 2, 4, 3, 1], "searched");
    assert_eq!(sum_of_1000(|s| binomial(s, 1000, 0.3).into()), 299_761, "rejection");
    assert_eq!(sum_of_1000(|s| binomial(s, 1000, 0.7).into()), 700_239, "rejection, turned round");
    assert_eq!(five(|s| poisson(s, 0.7)), [1, 0, 1, 0, 1], "remainder");
    assert_eq!(sum_of_1000(|s| poisson(s, 20.5).into()), 20_536, "table");
    assert_eq!(sum_of_1000(|s| poisson(s, 1e5).into()), 99_994_544, "rejection");
    assert_eq!(five(|s| hypergeometric(s, 40, 60, 20)), [10, 8, 10, 11, 7], "picks");
    assert_eq!(sum_of_1000(|s| hypergeometric(s, 4000, 6000, 2000)), 800_291, "rejection");
    assert_eq!(
        five(|s| standard_normal(s).to_bits()),
        [
            4_598_536_281_738_253_878,
            4_608_151_502_906_705_564,
            13_832_984_576_954_330_401,
            13_832_146_282_606_007_913,
            4_601_104_144_298_066_782
        ],
        "normal"
    );
    let greatest = (0..10_000).map(|i| standard_normal(&mut stream(i))).fold(0.0, f64::max);
    assert_eq!(greatest.to_bits(), 4_616_305_098_626_442_803, "normal, beyond the tail");
    let mut rows = AliasRows::new();
    rows.push(&[0.5, 0.2, 0.2]);
    assert_eq!(five(|s| rows.draw(s, 0)), [Some(0), Some(1), Some(0), Some(2), Some(0)]);
}
