//! Draws from the normal distribution against its known properties.

use lodeframe::physics::monte_carlo::normal::Streams;

const COUNT: usize = 200_000;

fn draws(seed: u64, stream: usize) -> Vec<f64> {
    let mut normals = Streams::new(seed).nth(stream).expect("streams go on");
    let mut draws = vec![0.0; COUNT];
    normals.fill(&mut draws);
    draws
}

/// Φ(x).
fn distribution(x: f64) -> f64 {
    0.5 * libm::erfc(-x / 2f64.sqrt())
}

/// Kolmogorov-Smirnov: √n·D stays below 1.95 in 99.9 % of all samples (Kolmogorov's limit
/// distribution, from memory).
#[test]
fn they_are_normally_distributed() {
    for (seed, stream) in [(0, 0), (0, 1), (1, 0), (u64::MAX, 300)] {
        let mut draws = draws(seed, stream);
        draws.sort_unstable_by(f64::total_cmp);
        let n = COUNT as f64;
        let apart = draws.iter().enumerate().map(|(i, x)| {
            let (below, above) = (i as f64 / n, (i + 1) as f64 / n);
            let expected = distribution(*x);
            (expected - below).abs().max((above - expected).abs())
        });
        let largest = apart.fold(0.0, f64::max) * n.sqrt();
        assert!(largest < 1.95, "seed {seed}, stream {stream}: {largest}");
    }
}

/// 1, 0, 3, 15 times standard errors that follow from the moments 1, 3, 15, 105 and 10395.
#[test]
fn their_moments_are_right() {
    let (draws, n) = (draws(7, 0), COUNT as f64);
    let moment = |power: i32| {
        draws
            .iter()
            .map(|x| libm::pow(*x, f64::from(power)))
            .sum::<f64>()
            / n
    };
    for (power, expected, variance) in [
        (1, 0.0, 1.0),
        (2, 1.0, 2.0),
        (3, 0.0, 15.0),
        (4, 3.0, 96.0),
        (6, 15.0, 10395.0 - 225.0),
    ] {
        let off = (moment(power) - expected) / (variance / n).sqrt();
        assert!(
            off.abs() < 4.0,
            "moment {power} is off by {off} standard errors"
        );
    }
}

/// The tail comes from a method of its own: as many draws lie there as should, on both sides.
#[test]
fn the_tails_hold_their_share() {
    let draws: Vec<f64> = (0..10).flat_map(|stream| draws(3, stream)).collect();
    for limit in [3.0, 3.654_152_885_361_009, 4.2] {
        let expected = distribution(-limit) * draws.len() as f64;
        for sign in [-1.0, 1.0] {
            let found = draws.iter().filter(|x| sign * **x > limit).count() as f64;
            let off = (found - expected) / expected.sqrt();
            assert!(
                off.abs() < 4.0,
                "{found} beyond {limit}, expected {expected}"
            );
        }
    }
}

/// Neither streams nor seeds repeat or resemble each other.
#[test]
fn streams_and_seeds_are_independent() {
    let samples = [draws(0, 0), draws(0, 1), draws(0, 2), draws(1, 0)];
    for (i, a) in samples.iter().enumerate() {
        for b in &samples[..i] {
            let product: f64 = a.iter().zip(b).map(|(x, y)| x * y).sum();
            let off = product / (COUNT as f64).sqrt();
            assert!(off.abs() < 4.0, "correlated: {off}");
        }
    }
}

/// The same bits on every machine: these are kept from the first machine that drew them.
#[test]
fn the_bits_are_those_of_every_machine() {
    let bits = draws(0, 1).iter().fold(0u64, |hash, x| {
        // FNV-1a, a word at a time.
        (hash ^ x.to_bits()).wrapping_mul(0x0100_0000_01b3)
    });
    assert_eq!(bits, 0x09c8_fbf0_e2cb_15fe);
}
