//! What all trials together say.

use super::interval::Tails;
use super::moments::Moments;
use super::trials::Block;
use super::validation::Validation;

/// What the trials say about the answer, counted from the exact one in the units that the trials
/// were made with. Components in the order ex ey ez bx by bz.
#[derive(Clone, Debug, PartialEq)]
pub struct Summary {
    /// Trials that were possible, and count.
    pub counted: u64,
    /// Draws that no frame can do.
    pub refused: u64,
    /// Averages; `None` like all else when too few trials count for an interval.
    pub results: Option<Results>,
}

/// What the trials say when there are enough.
#[derive(Clone, Debug, PartialEq)]
pub struct Results {
    /// The averages.
    pub estimate: [f64; 6],
    /// The covariance matrix.
    pub covariance: [[f64; 6]; 6],
    /// The shortest 95 % coverage interval of each component.
    pub intervals: [[f64; 2]; 6],
    /// How the law of propagation compares, component by component.
    pub validations: [Validation; 6],
}

/// Both tails of one component over all blocks; `None` when too few trials count.
pub fn tails(blocks: &[Block], component: usize) -> Option<Tails> {
    let columns = blocks.iter().map(|block| &block.values[component]);
    let mut values = Vec::with_capacity(columns.clone().map(Vec::len).sum());
    for column in columns {
        values.extend_from_slice(column);
    }
    Tails::of(&mut values)
}

impl Summary {
    /// From the blocks in their order, the tails of each component, and the standard
    /// uncertainties of the law of propagation.
    pub fn new(blocks: &[Block], tails: [Option<Tails>; 6], standard: [f64; 6]) -> Summary {
        let mut moments = Moments::default();
        for block in blocks {
            moments.add(&block.moments);
        }
        let [Some(a), Some(b), Some(c), Some(d), Some(e), Some(f)] = tails else {
            return Summary::without_results(&moments, blocks);
        };
        let tails = [a, b, c, d, e, f];
        let validation = |i: usize| {
            let own: &Tails = &tails[i];
            Validation::new(standard[i], own.symmetric(), own.numerical_uncertainty())
        };
        Summary {
            results: Some(Results {
                estimate: moments.mean(),
                covariance: moments.covariance(),
                intervals: tails.each_ref().map(Tails::shortest),
                validations: std::array::from_fn(validation),
            }),
            ..Summary::without_results(&moments, blocks)
        }
    }

    fn without_results(moments: &Moments<6>, blocks: &[Block]) -> Summary {
        Summary {
            counted: moments.count(),
            refused: blocks.iter().map(|block| block.refused).sum(),
            results: None,
        }
    }
}
