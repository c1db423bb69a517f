//! The two arithmetics under the formulas: double-double against the big float, and the big
//! float's conversion to doubles against what the standard library reads.

use lodeframe::physics::real::Real;
use lodeframe::physics::{Big, Dd, Scale};
use proptest::prelude::*;

const BITS: usize = 400;

/// |a − b| / |b| for a double-double and the big number it should be.
fn off(a: Dd, b: &Big) -> f64 {
    let a = Big::new(a.hi, BITS) + Big::new(a.lo, BITS);
    if b.is_zero() {
        return if a.is_zero() { 0.0 } else { f64::INFINITY };
    }
    ((a - b.clone()) / b.clone()).to_f64().abs()
}

fn big(a: Dd) -> Big {
    Big::new(a.hi, BITS) + Big::new(a.lo, BITS)
}

/// A number with 106 bits that matter.
fn dd() -> impl Strategy<Value = Dd> {
    (-1e6..1e6f64, -1.0..1.0f64)
        .prop_map(|(hi, lo)| Dd::from_f64(hi) + Dd::from_f64(lo * hi * f64::EPSILON * 0.5))
}

/// A few units of 2^-104, as published for each operation (Joldes, Muller, Popescu 2017).
const BOUND: f64 = 16.0 / (1u128 << 104) as f64;

proptest! {
    #![proptest_config(ProptestConfig::with_cases(2000))]

    #[test]
    fn double_double_keeps_its_bits(a in dd(), b in dd()) {
        prop_assert!(off(a * b, &(big(a) * big(b))) <= BOUND);
        prop_assert!(off(a / b, &(big(a) / big(b))) <= BOUND);
        // A sum is as good as its terms, unless they cancel.
        let sum = big(a) + big(b);
        let kept = (a.hi.abs() + b.hi.abs()) / sum.abs().to_f64();
        prop_assert!(off(a + b, &sum) <= BOUND * kept.max(1.0));
        let positive = a * a;
        prop_assert!(off(positive.sqrt(), &big(positive).sqrt()) <= BOUND);
    }

    #[test]
    fn double_double_knows_angles(x in -1e5..1e5f64) {
        let (sin, cos) = Dd::from_f64(x).sin_cos();
        let (big_sin, big_cos) = Big::new(x, BITS).sin_cos();
        // The reduced angle carries an error of 1e-32 or so, whatever it is of.
        prop_assert!((big(sin) - big_sin).to_f64().abs() <= 1e-30);
        prop_assert!((big(cos) - big_cos).to_f64().abs() <= 1e-30);
    }

    #[test]
    fn small_angles_keep_all_bits(x in -0.78..0.78f64, n in 0i32..60) {
        let x = libm::scalbn(x, -n);
        prop_assert!(off(Dd::from_f64(x).sin_cos().0, &Big::new(x, BITS).sin_cos().0) <= BOUND);
    }

    #[test]
    fn double_double_knows_rapidities(x in -100.0..100.0f64, n in 0i32..60) {
        let x = libm::scalbn(x, -n);
        // The exponential magnifies the rounding of its argument.
        let bound = BOUND * (1.0 + x.abs());
        prop_assert!(off(Dd::from_f64(x).sinh(), &Big::new(x, BITS).sinh()) <= bound);
    }

    #[test]
    fn every_double_survives_the_big_float(bits in any::<u64>()) {
        let x = f64::from_bits(bits);
        prop_assume!(x.is_finite());
        prop_assert_eq!(Big::new(x, BITS).to_f64(), x);
    }

    #[test]
    fn decimals_round_as_the_standard_library_reads_them(
        digits in 1u64..9_999_999_999_999_999, exponent in 0u32..38, below in any::<bool>()
    ) {
        // 10^±exponent is exact in 400 bits on the way up, and rounded far below on the way down.
        let power = Big::integer(10u128.pow(exponent), BITS);
        let digits_big = Big::integer(u128::from(digits), BITS);
        let (value, text) = if below {
            (digits_big / power, format!("{digits}e-{exponent}"))
        } else {
            (digits_big * power, format!("{digits}e{exponent}"))
        };
        prop_assert_eq!(value.to_f64(), text.parse::<f64>().unwrap());
    }
}

#[test]
fn big_numbers_round_once_below_the_smallest_normal_double() {
    let two_to = |n: i32| Big::new(1.0, BITS).scale2(n);
    let least = f64::from_bits(1);
    assert_eq!(two_to(-1074).to_f64(), least);
    assert_eq!(two_to(-1075).to_f64(), 0.0, "a tie goes to even");
    assert_eq!(
        (two_to(-1075) + two_to(-1200)).to_f64(),
        least,
        "just past the tie"
    );
    assert_eq!(
        (two_to(-1074) + two_to(-1075)).to_f64(),
        f64::from_bits(2),
        "a tie goes to even"
    );
    assert_eq!(
        (two_to(-1074) + two_to(-1075) - two_to(-1300)).to_f64(),
        least
    );
    assert_eq!((-two_to(-1076)).to_f64(), 0.0);
    assert_eq!(two_to(1024).to_f64(), f64::INFINITY);
    assert_eq!((-two_to(5000)).to_f64(), f64::NEG_INFINITY);
    let below_the_top = two_to(1024) - two_to(1024 - 55);
    assert_eq!(
        below_the_top.to_f64(),
        f64::INFINITY,
        "rounds up past the largest double"
    );
    assert_eq!((two_to(1024) - two_to(1024 - 53)).to_f64(), f64::MAX);
}

#[test]
fn scales_stay_exact() {
    let milli = Scale::ratio(1, 1000);
    let kilo = Scale::ratio(1000, 1);
    assert_eq!(milli.times(kilo).reduced(), Scale::ONE);
    assert_eq!(kilo.over(milli).reduced(), Scale::ratio(1_000_000, 1));
    let degree = Scale::pi(1, 180);
    assert_eq!(
        degree.over(Scale::pi(2, 1)).reduced(),
        Scale::ratio(1, 360),
        "degrees in a revolution"
    );
    assert_eq!(degree.to_f64(), std::f64::consts::PI / 180.0);
    let large = Scale::ratio((1 << 106) - 1, 1);
    let exact = large.value::<Dd>(());
    assert_eq!(
        (exact.hi, exact.lo),
        (81129638414606681695789005144064.0, -1.0)
    );
}
