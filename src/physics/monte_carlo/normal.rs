//! Draws from the normal distribution of mean 0 and standard deviation 1, the same bits on every
//! machine.
//!
//! The generator is xoshiro256++ (Blackman and Vigna, ACM Trans. Math. Softw. 47 (2021) 36). The
//! method is the ziggurat of 256 layers (Marsaglia and Tsang, J. Stat. Softw. 5 (2000) 8) in the
//! form of Doornik (2005), where layer and position in it come from different bits: 98.8 % of the
//! draws take one product and one comparison, the others logarithm or exponential of `libm`.

use std::sync::LazyLock;

use rand_xoshiro::Xoshiro256PlusPlus;
use rand_xoshiro::rand_core::{Rng, SeedableRng};

/// Layers, of equal area.
const LAYERS: usize = 256;
/// Where the tail begins, for this number of layers (Marsaglia and Tsang, as above).
const TAIL: f64 = 3.654_152_885_361_009;

/// 2⁻⁵².
const STEP: f64 = f64::EPSILON;

/// The layers: `width[i]` is the right end of layer i on the curve, `height[i]` the curve there.
/// The lowest layer is as wide as a rectangle of its area, tail included, would be.
struct Layers {
    width: [f64; LAYERS + 1],
    height: [f64; LAYERS + 1],
}

static LAYERED: LazyLock<Layers> = LazyLock::new(|| {
    let inverse = |height: f64| (-2.0 * libm::log(height)).sqrt();
    let beyond = (std::f64::consts::FRAC_PI_2).sqrt() * libm::erfc(TAIL / 2f64.sqrt());
    let area = TAIL * curve(TAIL) + beyond;
    let mut width = [0.0; LAYERS + 1];
    let mut height = [1.0; LAYERS + 1];
    (width[0], height[0]) = (area / curve(TAIL), 0.0);
    (width[1], height[1]) = (TAIL, curve(TAIL));
    for i in 2..LAYERS {
        height[i] = height[i - 1] + area / width[i - 1];
        width[i] = inverse(height[i]);
    }
    Layers { width, height }
});

/// e^{−x²/2}.
fn curve(x: f64) -> f64 {
    libm::exp(-0.5 * x * x)
}

/// The streams of draws that a seed has; each is 2¹²⁸ numbers long, and none overlap.
pub struct Streams(Xoshiro256PlusPlus);

impl Streams {
    /// Of a seed.
    pub fn new(seed: u64) -> Streams {
        Streams(Xoshiro256PlusPlus::seed_from_u64(seed))
    }
}

impl Iterator for Streams {
    type Item = Normals;

    fn next(&mut self) -> Option<Normals> {
        let normals = Normals(self.0.clone());
        self.0.jump();
        Some(normals)
    }
}

/// A stream of draws.
#[derive(Clone, Debug)]
pub struct Normals(Xoshiro256PlusPlus);

impl Normals {
    /// Fills a slice with independent draws.
    #[inline]
    pub fn fill(&mut self, draws: &mut [f64]) {
        let layers = &*LAYERED;
        for draw in draws {
            *draw = self.draw(layers);
        }
    }

    #[inline(always)]
    fn draw(&mut self, layers: &Layers) -> f64 {
        let bits = self.0.next_u64();
        let layer = (bits % LAYERS as u64) as usize;
        let x = signed(bits) * layers.width[layer];
        if x.abs() < layers.width[layer + 1] {
            x
        } else {
            self.beside(layers, layer, x)
        }
    }

    /// What to do with a point that is not surely below the curve.
    #[cold]
    fn beside(&mut self, layers: &Layers, layer: usize, x: f64) -> f64 {
        if layer == 0 {
            return libm::copysign(self.tail(), x);
        }
        let (low, high) = (layers.height[layer], layers.height[layer + 1]);
        if low + (high - low) * self.open() < curve(x) {
            x
        } else {
            self.draw(layers)
        }
    }

    /// A draw beyond the tail's beginning (Marsaglia, Technometrics 6 (1964) 101).
    fn tail(&mut self) -> f64 {
        loop {
            let beyond = -libm::log(self.open()) / TAIL;
            if -2.0 * libm::log(self.open()) > beyond * beyond {
                return TAIL + beyond;
            }
        }
    }

    /// Uniform between 0 and 1, neither of them included.
    fn open(&mut self) -> f64 {
        ((self.0.next_u64() >> 12) as f64 + 0.5) * STEP
    }
}

/// From the upper 53 bits, uniform from −1 to 1.
#[inline(always)]
fn signed(bits: u64) -> f64 {
    (bits as i64 >> 11) as f64 * STEP
}
