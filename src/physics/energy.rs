//! Energy density, Poynting vector and Maxwell stress of a field in vacuum.
//!
//! u = ½(ε₀E² + B²/μ₀), S = E×B/μ₀, σ_ij = ε₀E_iE_j + B_iB_j/μ₀ − u δ_ij, tension positive
//! (Jackson, Classical Electrodynamics, 3rd ed., §6.7 and §12.10). ε₀ = 1/(μ₀c²).

use super::constants::{C, MAGNETIC_CONSTANT};
use super::double_double::Dd;
use super::real::{Vec3, cross, norm2};

/// What a field holds and carries.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Energy {
    /// u in J/m³.
    pub density: f64,
    /// S in W/m².
    pub poynting: [f64; 3],
    /// σ in Pa.
    pub stress: [[f64; 3]; 3],
}

impl Energy {
    /// Of E in V/m and B in T.
    pub fn of(e: &Vec3<Dd>, b: &Vec3<Dd>) -> Energy {
        let mu = Dd::from_f64(MAGNETIC_CONSTANT);
        // Everything in T²: E/c and B.
        let e = e.map(|x| x / Dd::from_f64(C));
        let half_sum = (norm2(&e) + norm2(b)).times(0.5);
        let poynting = cross(&e, b).map(|x| (x.times(C) / mu).hi + 0.0);
        let stress = std::array::from_fn(|i| {
            std::array::from_fn(|j| {
                let outer = e[i] * e[j] + b[i] * b[j];
                let element = if i == j { outer - half_sum } else { outer };
                (element / mu).hi + 0.0
            })
        });
        Energy {
            density: (half_sum / mu).hi,
            poynting,
            stress,
        }
    }

    /// Whether every number is one a double can hold.
    pub fn is_finite(&self) -> bool {
        let stress = self.stress.as_flattened();
        std::iter::once(&self.density)
            .chain(&self.poynting)
            .chain(stress)
            .all(|x| x.is_finite())
    }
}
