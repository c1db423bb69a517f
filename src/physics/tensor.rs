//! The field tensor F^{μν} on x^μ = (ct, x, y, z), in tesla.
//!
//! Mostly minus: F^{i0} = E_i/c, F^{ij} = −ε_{ijk} B_k; the dual has E/c → B, B → −E/c
//! (Jackson, Classical Electrodynamics, 3rd ed., §11.9). Mostly plus flips the sign of all.

use nalgebra::Matrix4;

use super::constants::C;

/// Which of time and space counts negative in the metric.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub enum Signature {
    /// (+ − − −)
    #[default]
    MostlyMinus,
    /// (− + + +)
    MostlyPlus,
}

/// An antisymmetric tensor of second order with two upper indices.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct FieldTensor {
    /// F^{μν}, in T.
    pub contravariant: Matrix4<f64>,
    /// The signature whose convention it follows.
    pub signature: Signature,
}

impl FieldTensor {
    /// From E/c and B, both in T.
    pub fn new(e_over_c: [f64; 3], b: [f64; 3], signature: Signature) -> FieldTensor {
        let [ex, ey, ez] = e_over_c;
        let [bx, by, bz] = b;
        #[rustfmt::skip]
        let minus = Matrix4::new(
            0.0, -ex, -ey, -ez,
            ex, 0.0, -bz, by,
            ey, bz, 0.0, -bx,
            ez, -by, bx, 0.0,
        );
        let contravariant = match signature {
            Signature::MostlyMinus => minus,
            Signature::MostlyPlus => -minus,
        };
        FieldTensor {
            contravariant,
            signature,
        }
    }

    fn sign(self) -> f64 {
        match self.signature {
            Signature::MostlyMinus => 1.0,
            Signature::MostlyPlus => -1.0,
        }
    }

    /// E/c and B, in T.
    pub fn fields(self) -> ([f64; 3], [f64; 3]) {
        let f = self.contravariant * self.sign();
        (
            [f[(1, 0)], f[(2, 0)], f[(3, 0)]],
            [f[(3, 2)], f[(1, 3)], f[(2, 1)]],
        )
    }

    /// E in V/m and B in T.
    pub fn electric_and_magnetic(self) -> ([f64; 3], [f64; 3]) {
        let (e_over_c, b) = self.fields();
        (e_over_c.map(|x| x * C), b)
    }

    /// F_{μν}: both indices lowered, which flips the time-space part in either signature.
    pub fn covariant(self) -> Matrix4<f64> {
        let f = self.contravariant;
        Matrix4::from_fn(|i, j| {
            if (i == 0) != (j == 0) {
                0.0 - f[(i, j)]
            } else {
                f[(i, j)]
            }
        })
    }

    /// The dual ½ ε^{μναβ} F_{αβ}, contravariant.
    pub fn dual(self) -> FieldTensor {
        let (e_over_c, b) = self.fields();
        FieldTensor::new(b, e_over_c.map(|x| 0.0 - x), self.signature)
    }

    /// F' = Λ F Λᵀ.
    pub fn transformed(self, lambda: &Matrix4<f64>) -> FieldTensor {
        FieldTensor {
            contravariant: lambda * self.contravariant * lambda.transpose(),
            ..self
        }
    }
}
