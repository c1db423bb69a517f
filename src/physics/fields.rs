//! The fields of rows side by side, as they come in.

use super::block::{Readings, Setting};
use super::double_double::{Arithmetic, DoubleDouble};
use super::lanes::{LANES, Lanes, Numbers, lanes, set3, tame};

/// The field of each row, zeros standing for what is missing.
#[derive(Clone, Debug)]
pub(super) struct Fields {
    pub(super) e: [Numbers; 3],
    pub(super) b: [Numbers; 3],
    /// At least |E| and |B| with all that was summed for them; infinite where they are not tame.
    pub(super) sizes: [Lanes; 2],
    /// Not a number where a component is missing.
    gaps: Lanes,
}

impl Fields {
    pub(super) const ZERO: Fields = Fields {
        e: [Numbers::ZERO; 3],
        b: [Numbers::ZERO; 3],
        sizes: [[0.0; LANES]; 2],
        gaps: [0.0; LANES],
    };

    /// Takes the readings from `start` on, as many as there are. What doubles leave out of them
    /// is nothing, and stays zero, unless they are calibrated.
    #[inline(always)]
    pub(super) fn load<A: Arithmetic>(
        &mut self,
        readings: &Readings,
        start: usize,
        setting: &Setting,
    ) {
        let gaps = &mut self.gaps;
        *gaps = [0.0; LANES];
        let parts = [(readings.e, &mut self.e), (readings.b, &mut self.b)];
        for (which, (columns, numbers)) in parts.into_iter().enumerate() {
            let [mut x, mut y, mut z] = [[0.0; LANES]; 3];
            let [x, y, z] = [
                lanes(columns[0], start, &mut x),
                lanes(columns[1], start, &mut y),
                lanes(columns[2], start, &mut z),
            ];
            let size = &mut self.sizes[which];
            for i in 0..LANES {
                let known = |x: f64| if x.is_nan() { 0.0 } else { x };
                gaps[i] += x[i] + y[i] + z[i];
                let (x, y, z) = (known(x[i]), known(y[i]), known(z[i]));
                let all_tame = tame(x) & tame(y) & tame(z);
                let sum = x.abs() + y.abs() + z.abs();
                size[i] = if all_tame { sum } else { f64::INFINITY };
                numbers[0].hi[i] = x;
                numbers[1].hi[i] = y;
                numbers[2].hi[i] = z;
            }
            if let Some(calibration) = setting.calibration[which] {
                for (i, size) in size.iter_mut().enumerate() {
                    let raw = [numbers[0].hi[i], numbers[1].hi[i], numbers[2].hi[i]];
                    let [x, y, z] = calibration.magnitude(raw);
                    let sum = x + y + z;
                    *size = if size.is_finite() { sum } else { f64::INFINITY };
                    set3(numbers, i, calibration.apply::<DoubleDouble<A>>(raw, ()));
                }
            }
        }
    }

    /// Whether a component of a row is missing.
    pub(super) fn is_incomplete(&self, i: usize) -> bool {
        self.gaps[i].is_nan()
    }

    /// Leaves the row to the arithmetic of more digits.
    #[inline(always)]
    pub(super) fn give_up_unless(&mut self, i: usize, fits: bool) {
        for size in &mut self.sizes {
            size[i] = if fits { size[i] } else { f64::INFINITY };
        }
    }
}
