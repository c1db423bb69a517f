//! What is still known of an answer when components of the reading are missing.

use super::double_double::Dd;
use super::field::{FieldUnits, Kernel};
use super::real::vector;
use super::resolved::Resolved;

/// For each component of E and of B, whether it is known.
pub type Known = [[bool; 3]; 2];

/// Every component is known.
pub const ALL_KNOWN: Known = [[true; 3]; 2];

impl Resolved {
    /// Which components of E' and B' do not depend on an unknown one of the field.
    pub fn known(&self, units: FieldUnits, given: Known) -> Known {
        let mut known = ALL_KNOWN;
        if given == known {
            return known;
        }
        let kernel = Kernel::<Dd>::new(self.net(), units, ());
        for (which, given) in given.iter().enumerate() {
            for i in (0..3).filter(|i| !given[*i]) {
                let mut unit = [[0.0; 3]; 2];
                unit[which][i] = 1.0;
                let (e, b) = kernel.apply(&vector::<Dd>(unit[0], ()), &vector(unit[1], ()));
                for (known, effect) in known.iter_mut().zip([e, b]) {
                    for j in 0..3 {
                        known[j] &= effect[j].hi == 0.0;
                    }
                }
            }
        }
        known
    }
}
