//! Reading what is uncertain: standard uncertainties or a covariance matrix.

use crate::document::{Code, Faults, Node, Place};
use crate::physics::covariance::{Covariance, Flaw};

/// Reads the uncertainty of a vector: three standard uncertainties, or a covariance matrix.
pub fn vector(node: &Node, place: &Place, faults: &mut Faults) -> Option<Covariance<3>> {
    if let Node::Object(_) = node.plain() {
        let members = faults.members(node, place, &["covariance"])?;
        let node = faults.needed(members, place, "covariance")?;
        return covariance(node, &place.field("covariance"), faults);
    }
    let what = "three standard uncertainties [x, y, z] or {\"covariance\": ..}";
    let standard = faults.numbers(node, place, what)?;
    let found = Covariance::of_standard(standard);
    found.map_err(|flaw| note(place, &flaw, faults)).ok()
}

/// Reads a covariance matrix.
pub fn covariance<const N: usize>(
    node: &Node,
    place: &Place,
    faults: &mut Faults,
) -> Option<Covariance<N>> {
    let found = Covariance::of_matrix(faults.matrix(node, place)?);
    found
        .map_err(|flaw| match flaw {
            // A variance stands on the diagonal.
            Flaw::Negative { index, .. } => note(&place.index(index), &flaw, faults),
            _ => note(place, &flaw, faults),
        })
        .ok()
}

/// Reads one standard uncertainty.
pub fn number(node: &Node, place: &Place, faults: &mut Faults) -> Option<f64> {
    let value = faults.number(node, place)?;
    if value < 0.0 {
        let flaw = Flaw::Negative { index: 0, value };
        faults.note(place, Code::NegativeUncertainty, flaw.to_string());
        return None;
    }
    Some(value)
}

/// Notes what is wrong with standard uncertainties or a covariance matrix.
pub fn note(place: &Place, flaw: &Flaw, faults: &mut Faults) {
    let detail = flaw.to_string();
    match flaw {
        Flaw::Negative { index, .. } => {
            faults.note(&place.index(*index), Code::NegativeUncertainty, detail);
        }
        Flaw::NotSymmetric { row, column, .. } => {
            let row = place.index(*row);
            faults.note(&row.index(*column), Code::NotSymmetric, detail);
        }
        Flaw::NotPositiveSemidefinite { .. } => {
            faults.note(place, Code::NotPositiveSemidefinite, detail);
        }
    }
}
