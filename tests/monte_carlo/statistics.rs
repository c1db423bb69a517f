//! Intervals, tolerance and validation against the worked examples of JCGM 101:2008 and against
//! distributions whose intervals are known.

use lodeframe::physics::monte_carlo::{
    interval::Tails,
    moments::Moments,
    normal::Streams,
    validation::{Validation, tolerance},
};

const TRIALS: usize = 100_000;

/// One column of normal draws for each stream.
fn normal(trials: usize, streams: usize) -> Vec<Vec<f64>> {
    let column = |mut normals: lodeframe::physics::monte_carlo::normal::Normals| {
        let mut draws = vec![0.0; trials];
        normals.fill(&mut draws);
        draws
    };
    Streams::new(101).take(streams).map(column).collect()
}

/// The same columns made uniform between 0 and 1.
fn uniform(trials: usize, streams: usize) -> Vec<Vec<f64>> {
    let mut columns = normal(trials, streams);
    for x in columns.iter_mut().flatten() {
        *x = 0.5 * libm::erfc(-*x / 2f64.sqrt());
    }
    columns
}

fn sum(columns: &[Vec<f64>]) -> Vec<f64> {
    let row = |i: usize| columns.iter().map(|column| column[i]).sum();
    (0..columns[0].len()).map(row).collect()
}

fn validation(values: &[f64], u: f64) -> (Tails, Validation) {
    let tails = Tails::of(&mut values.to_vec()).expect("enough trials");
    let validation = Validation::new(u, tails.symmetric(), tails.numerical_uncertainty());
    (tails, validation)
}

#[track_caller]
fn near(found: f64, expected: f64, within: f64) {
    assert!((found - expected).abs() < within, "{found}, not {expected}");
}

/// JCGM 101:2008, 7.9.2, example 1 (from memory): a mass of 100.021 47 g, u = 0.35 mg, is known to
/// δ = 0.000 005 g when two digits of u count.
#[test]
fn tolerance_of_a_standard_uncertainty() {
    assert_eq!(tolerance(0.000_35), 0.000_005);
    for (u, expected) in [
        (2.0, 0.05),
        (10.1, 0.5),
        (0.0996, 0.005),
        (0.0994, 0.0005),
        (99.4, 0.5),
        (99.6, 5.0),
        (1.0, 0.05),
        (3.5e-200, 5e-202),
        (0.0, 0.0),
    ] {
        assert_eq!(tolerance(u), expected, "{u}");
    }
}

/// JCGM 101:2008, 9.2.2 (from memory): the sum of four standard normal quantities has u = 2 and
/// the interval [−3.92, 3.92] by either method.
#[test]
fn four_normal_quantities() {
    let values = sum(&normal(TRIALS, 4));
    let moments = Moments::of([&values[..]]);
    near(moments.mean()[0], 0.0, 0.02);
    near(moments.covariance()[0][0].sqrt(), 2.0, 0.015);
    let (tails, validation) = validation(&values, 2.0);
    for (ends, within) in [(tails.symmetric(), 0.05), (tails.shortest(), 0.15)] {
        near(ends[0], -3.92, within);
        near(ends[1], 3.92, within);
    }
    assert_eq!(validation.tolerance, 0.05);
    assert!(validation.validated, "{validation:?}");
}

/// JCGM 101:2008, 9.2.3 (from memory): four rectangular quantities of standard deviation 1 have
/// u = 2, the ends ±2√3(2 − (3/5)^¼) = ±3.88 against ±3.92, and the law of propagation is
/// validated to two digits.
#[test]
fn four_rectangular_quantities() {
    let wide = |x: &f64| (x - 0.5) * 12f64.sqrt();
    let columns: Vec<Vec<f64>> = uniform(10 * TRIALS, 4)
        .iter()
        .map(|column| column.iter().map(wide).collect())
        .collect();
    let (tails, validation) = validation(&sum(&columns), 2.0);
    let [low, high] = tails.symmetric();
    near(low, -3.88, 0.02);
    near(high, 3.88, 0.02);
    near(validation.d_low, 0.04, 0.02);
    near(validation.d_high, 0.04, 0.02);
    assert_eq!(validation.tolerance, 0.05);
    assert!(
        !validation.settled,
        "0.01 apart cannot be told with so few trials"
    );
}

/// JCGM 101:2008, 9.2.4 (from memory): with one of the four ten times as wide u = 10.1, the ends
/// are ±17.0 against ±19.9, and the law of propagation is not validated.
#[test]
fn one_rectangular_quantity_that_dominates() {
    let width = [1.0, 1.0, 1.0, 10.0].map(|sigma: f64| sigma * 12f64.sqrt());
    let columns = uniform(TRIALS, 4)
        .into_iter()
        .zip(width)
        .map(|(column, width)| column.into_iter().map(|x| (x - 0.5) * width).collect());
    let (tails, validation) = validation(&sum(&columns.collect::<Vec<_>>()), 103f64.sqrt());
    let [low, high] = tails.symmetric();
    near(low, -17.0, 0.1);
    near(high, 17.0, 0.1);
    assert_eq!(validation.tolerance, 0.5);
    near(validation.d_low, 2.9, 0.1);
    near(validation.d_high, 2.9, 0.1);
    assert!(!validation.validated && validation.settled);
}

/// Of the exponential distribution: the shortest interval is [0, −ln 0.05], the symmetric one
/// [−ln 0.975, −ln 0.025].
#[test]
fn the_shortest_interval_of_a_skewed_distribution() {
    let values: Vec<f64> = uniform(TRIALS, 1)[0]
        .iter()
        .map(|x| -libm::log(*x))
        .collect();
    let tails = Tails::of(&mut values.clone()).expect("enough trials");
    let [low, high] = tails.shortest();
    near(low, 0.0, 0.005);
    near(high, 20f64.ln(), 0.04);
    let [low, high] = tails.symmetric();
    near(low, -(0.975f64.ln()), 0.002);
    near(high, 40f64.ln(), 0.06);
}

/// By its definition in JCGM 101:2008, 7.7.2 and annex D, over all of the sorted values.
#[test]
fn intervals_are_those_of_the_sorted_values() {
    for count in [2000, 2001, 2013, 9999] {
        let mut values = normal(TRIALS, 1)[0][..count].to_vec();
        let tails = Tails::of(&mut values.clone()).expect("enough trials");
        values.sort_unstable_by(f64::total_cmp);
        let q = (0.95 * count as f64 + 0.5).floor() as usize;
        let lengths = (0..count - q).map(|r| values[r + q] - values[r]);
        let shortest = lengths.fold(f64::INFINITY, f64::min);
        let [low, high] = tails.shortest();
        assert_eq!(high - low, shortest);
        let inside = values.iter().filter(|x| (low..=high).contains(x)).count();
        assert_eq!(inside, q + 1);
        let [low, high] = tails.symmetric();
        let below = values.iter().filter(|x| **x < low).count();
        let above = values.iter().filter(|x| **x > high).count();
        assert!(below.abs_diff(above) <= 1 && below + above == count - q - 1);
    }
    assert!(Tails::of(&mut [0.0; 1999]).is_none());
}

/// The numerical uncertainty of an end against √(p(1−p)/M)/φ of the normal distribution, and
/// against the spread over sets of trials.
#[test]
fn the_numerical_uncertainty_tells_how_far_the_ends_move() {
    let column = &normal(TRIALS, 1)[0];
    let sets: Vec<Tails> = column
        .chunks(4000)
        .map(|set| Tails::of(&mut set.to_vec()).expect("enough"))
        .collect();
    let n = sets.len() as f64;
    let expected = (0.025 * 0.975 / 4000.0f64).sqrt() / 0.058_445_1;
    for end in 0..2 {
        let told = sets
            .iter()
            .map(|set| set.numerical_uncertainty()[end])
            .sum::<f64>()
            / n;
        near(told / expected, 1.0, 0.1);
        let ends = sets.iter().map(|set| set.symmetric()[end]);
        let mean = ends.clone().sum::<f64>() / n;
        let spread = (ends.map(|x| (x - mean) * (x - mean)).sum::<f64>() / (n - 1.0)).sqrt();
        near(spread / expected, 1.0, 0.4);
    }
}

/// Against a plain sum over the trials.
#[test]
fn moments_are_those_of_a_plain_sum() {
    let columns = normal(TRIALS, 2);
    let [x, y] = [0, 1].map(|i| &columns[i][..1013]);
    let mixed: Vec<f64> = x.iter().zip(y).map(|(x, y)| 3.0 + x + 2.0 * y).collect();
    let n = 1013.0;
    let mean = |v: &[f64]| v.iter().sum::<f64>() / n;
    let (mx, mm) = (mean(x), mean(&mixed));
    let cross = x
        .iter()
        .zip(&mixed)
        .map(|(x, m)| (x - mx) * (m - mm))
        .sum::<f64>()
        / (n - 1.0);
    let mut moments = Moments::of([&x[..500], &mixed[..500]]);
    moments.add(&Moments::of([&x[500..], &mixed[500..]]));
    assert_eq!(moments.count(), 1013);
    near(moments.mean()[1], mm, 1e-13);
    near(moments.covariance()[0][1], cross, 1e-12);
    assert_eq!(moments.covariance()[0][1], moments.covariance()[1][0]);
}
