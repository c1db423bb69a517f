//! From what was read to the field it stands for: a sensor's calibration, and the component that
//! a two-axis probe does not have. Written once for every arithmetic, so that nothing is rounded
//! before the transformation.

use super::real::{Real, Vec3, dot, vector};

/// What turns a sensor's raw numbers into a field: matrix · (raw − offset).
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Calibration {
    /// Gain, misalignment and non-orthogonality.
    pub matrix: [[f64; 3]; 3],
    /// What the sensor reads without a field.
    pub offset: [f64; 3],
}

/// How E and B follow from what was read; nothing to do by default.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Reduction {
    /// Calibration of E.
    pub e: Option<Calibration>,
    /// Calibration of B.
    pub b: Option<Calibration>,
    /// The component of E that is taken from E·B = 0.
    pub filled: Option<usize>,
}

impl Calibration {
    /// matrix · (raw − offset).
    #[inline(always)]
    pub fn apply<R: Real>(&self, raw: [f64; 3], context: R::Context) -> Vec3<R> {
        let net: Vec3<R> =
            std::array::from_fn(|i| R::new(raw[i], context) - R::new(self.offset[i], context));
        self.matrix.map(|row| dot(&vector::<R>(row, context), &net))
    }

    /// The size of what is summed for each component.
    #[inline(always)]
    pub(super) fn magnitude(&self, raw: [f64; 3]) -> [f64; 3] {
        let net: [f64; 3] = std::array::from_fn(|i| (raw[i] - self.offset[i]).abs());
        self.matrix
            .map(|row| (0..3).map(|j| row[j].abs() * net[j]).sum())
    }

    /// Which components of the field are known when these raw numbers are: those that none of
    /// the missing ones counts in.
    pub fn known(&self, raw: [bool; 3]) -> [bool; 3] {
        self.matrix
            .map(|row| (0..3).all(|j| raw[j] || row[j] == 0.0))
    }

    pub(super) fn numbers(&self) -> impl Iterator<Item = f64> {
        let matrix = self.matrix.into_iter().flatten();
        matrix.chain(self.offset)
    }
}

impl Reduction {
    /// Whether E and B are what was read.
    pub fn is_none(&self) -> bool {
        self.e.is_none() && self.b.is_none() && self.filled.is_none()
    }

    /// E and B in their own units, from what was read.
    pub fn apply<R: Real>(&self, [e, b]: [[f64; 3]; 2], context: R::Context) -> [Vec3<R>; 2] {
        let field = |raw, calibration: &Option<Calibration>| match calibration {
            Some(calibration) => calibration.apply(raw, context),
            None => vector(raw, context),
        };
        let (mut e, b): (Vec3<R>, Vec3<R>) = (field(e, &self.e), field(b, &self.b));
        if let Some(i) = self.filled {
            e[i] = fill(i, &e, &b);
        }
        [e, b]
    }

    /// The size of what is summed for each component of E and B.
    pub fn magnitudes(&self, [e, b]: [[f64; 3]; 2]) -> [[f64; 3]; 2] {
        let size = |raw: [f64; 3], calibration: &Option<Calibration>| match calibration {
            Some(calibration) => calibration.magnitude(raw),
            None => raw.map(f64::abs),
        };
        let (mut e_size, b_size) = (size(e, &self.e), size(b, &self.b));
        if let Some(i) = self.filled {
            let [_, exact] = self.apply::<super::Dd>([e, b], ());
            let (j, k) = ((i + 1) % 3, (i + 2) % 3);
            let across = exact[i].hi.abs();
            // B_i divides: what it lost itself counts once more.
            let product = e_size[j] * b_size[j] + e_size[k] * b_size[k];
            e_size[i] = product / across * (b_size[i] / across);
        }
        [e_size, b_size]
    }

    /// Every number of the calibrations.
    pub fn numbers(&self) -> impl Iterator<Item = f64> {
        let each = [self.e, self.b].into_iter().flatten();
        each.flat_map(|calibration| calibration.numbers().collect::<Vec<_>>())
    }
}

/// E_i from E·B = 0, the other components and B: −(E_j B_j + E_k B_k)/B_i. The common practice
/// with two-axis probes in a plasma, whose conductivity along B leaves no E there.
pub fn fill<R: Real>(i: usize, e: &Vec3<R>, b: &Vec3<R>) -> R {
    let (j, k) = ((i + 1) % 3, (i + 2) % 3);
    -(e[j].clone() * b[j].clone() + e[k].clone() * b[k].clone()) / b[i].clone()
}

/// How E_i from E·B = 0 changes with ex ey ez bx by bz, to first order; `e` holds E_i.
pub fn fill_sensitivities<R: Real>(i: usize, e: &Vec3<R>, b: &Vec3<R>) -> [R; 6] {
    let (j, k) = ((i + 1) % 3, (i + 2) % 3);
    let per_b = |x: &R| -(x.clone() / b[i].clone());
    let mut by = std::array::from_fn(|_| b[i].of(0.0));
    by[j] = per_b(&b[j]);
    by[k] = per_b(&b[k]);
    by[3 + j] = per_b(&e[j]);
    by[3 + k] = per_b(&e[k]);
    by[3 + i] = per_b(&e[i]);
    by
}
