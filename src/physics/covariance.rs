//! What is known of the errors of some quantities: their covariance matrix, as given.

use thiserror::Error;

use super::double_double::Dd;
use super::eigen;
use super::real::Real;

/// The covariance matrix of N quantities: symmetric and positive semi-definite.
///
/// It is kept as given, so that propagation starts from the very doubles received, beside a square
/// root for draws.
#[derive(Clone, Debug, PartialEq)]
pub struct Covariance<const N: usize> {
    given: Given<N>,
    root: [[f64; N]; N],
    smallest_eigenvalue: f64,
}

#[derive(Clone, Debug, PartialEq)]
enum Given<const N: usize> {
    /// Standard uncertainties of independent quantities.
    Standard([f64; N]),
    /// The whole matrix.
    Matrix([[f64; N]; N]),
}

/// Why something is no covariance.
#[derive(Clone, Debug, PartialEq, Error)]
pub enum Flaw {
    /// A standard uncertainty or a variance below zero.
    #[error("{value} is negative; a standard uncertainty or a variance is 0 or positive")]
    Negative {
        /// Which quantity, from 0.
        index: usize,
        /// The value.
        value: f64,
    },
    /// c_ij ≠ c_ji.
    #[error(
        "element [{row}][{column}] is {above} and [{column}][{row}] is {below}; a covariance \
         matrix is symmetric"
    )]
    NotSymmetric {
        /// Row, from 0.
        row: usize,
        /// Column, from 0.
        column: usize,
        /// The element there.
        above: f64,
        /// The element across the diagonal.
        below: f64,
    },
    /// Some combination of the quantities would have a negative variance.
    #[error(
        "the smallest eigenvalue of its correlation matrix is {eigenvalue:.3e}, but no covariance \
         has one below 0 ({limit:e} is taken as rounding); check signs, units squared and the \
         order of the rows"
    )]
    NotPositiveSemidefinite {
        /// The smallest eigenvalue of the correlation matrix; minus infinity where a quantity
        /// without variance is correlated with another.
        eigenvalue: f64,
        /// The least accepted.
        limit: f64,
    },
}

/// Eigenvalues of a correlation matrix down to this are taken as rounding, and as zero.
pub const EIGENVALUE_LIMIT: f64 = -1e-6;
/// What the eigenvalues themselves may be off: a matrix is left as given down to here.
const EIGENVALUE_ROUNDING: f64 = -1e-14;
/// Elements across the diagonal may differ by this part of the standard uncertainties' product.
const SYMMETRY: f64 = 1e-9;

impl<const N: usize> Covariance<N> {
    /// Of independent quantities with these standard uncertainties.
    ///
    /// # Errors
    /// One of them is negative.
    pub fn of_standard(standard: [f64; N]) -> Result<Covariance<N>, Flaw> {
        if let Some(index) = (0..N).find(|i| standard[*i] < 0.0) {
            let value = standard[index];
            return Err(Flaw::Negative { index, value });
        }
        let diagonal = |i: usize, j: usize| if i == j { standard[i] } else { 0.0 };
        Ok(Covariance {
            given: Given::Standard(standard),
            root: std::array::from_fn(|i| std::array::from_fn(|j| diagonal(i, j))),
            smallest_eigenvalue: 1.0,
        })
    }

    /// Of a covariance matrix, in the squares of the units of the quantities.
    ///
    /// Whether it is positive semi-definite is judged on its correlation matrix, which does not
    /// depend on units. Eigenvalues below zero by rounding are set to zero.
    ///
    /// # Errors
    /// A variance is negative, or the matrix is not symmetric or not positive semi-definite.
    pub fn of_matrix(matrix: [[f64; N]; N]) -> Result<Covariance<N>, Flaw> {
        if let Some(index) = (0..N).find(|i| matrix[*i][*i] < 0.0) {
            let value = matrix[index][index];
            return Err(Flaw::Negative { index, value });
        }
        let standard: [f64; N] = std::array::from_fn(|i| matrix[i][i].sqrt());
        let mut given = matrix;
        for row in 0..N {
            for column in row + 1..N {
                let (above, below) = (matrix[row][column], matrix[column][row]);
                let size = standard[row] * standard[column];
                // Halved first, so that no difference overflows.
                let apart = (0.5 * above - 0.5 * below).abs();
                if apart > 0.5 * SYMMETRY * size.max(0.5 * above.abs() + 0.5 * below.abs()) {
                    return Err(Flaw::NotSymmetric {
                        row,
                        column,
                        above,
                        below,
                    });
                }
                let mean = 0.5 * above + 0.5 * below;
                if size == 0.0 && mean != 0.0 {
                    return Err(Flaw::NotPositiveSemidefinite {
                        eigenvalue: f64::NEG_INFINITY,
                        limit: EIGENVALUE_LIMIT,
                    });
                }
                (given[row][column], given[column][row]) = (mean, mean);
            }
        }
        let correlation = correlation(&given, &standard);
        let eigen = eigen::symmetric(&correlation);
        let smallest = eigen.values[N - 1].to_f64();
        if smallest < EIGENVALUE_LIMIT {
            return Err(Flaw::NotPositiveSemidefinite {
                eigenvalue: smallest,
                limit: EIGENVALUE_LIMIT,
            });
        }
        let zero = Dd::from_f64(0.0);
        let roots = eigen
            .values
            .map(|x| if x.is_negative() { zero } else { x }.sqrt());
        let root: [[Dd; N]; N] = std::array::from_fn(|i| {
            let standard = Dd::from_f64(standard[i]);
            std::array::from_fn(|k| standard * eigen.vectors[k][i] * roots[k])
        });
        if smallest < EIGENVALUE_ROUNDING {
            given = std::array::from_fn(|i| {
                std::array::from_fn(|j| {
                    let sum = (0..N).fold(zero, |sum, k| sum + root[i][k] * root[j][k]);
                    sum.to_f64()
                })
            });
        }
        Ok(Covariance {
            given: Given::Matrix(given),
            root: root.map(|row| row.map(|x| x.to_f64())),
            smallest_eigenvalue: smallest,
        })
    }

    /// The standard uncertainties.
    pub fn standard(&self) -> [f64; N] {
        match &self.given {
            Given::Standard(standard) => *standard,
            Given::Matrix(matrix) => std::array::from_fn(|i| matrix[i][i].sqrt()),
        }
    }

    /// The matrix, exactly as given.
    pub fn matrix<R: Real>(&self, context: R::Context) -> [[R; N]; N] {
        let element = |i: usize, j: usize| match &self.given {
            Given::Standard(standard) if i == j => R::new(standard[i], context).square(),
            Given::Standard(_) => R::new(0.0, context),
            Given::Matrix(matrix) => R::new(matrix[i][j], context),
        };
        std::array::from_fn(|i| std::array::from_fn(|j| element(i, j)))
    }

    /// L with L Lᵀ the covariance matrix: L z are errors of this covariance when the elements of
    /// z are independent of variance one. Diagonal when the quantities are independent.
    pub fn root(&self) -> &[[f64; N]; N] {
        &self.root
    }

    /// Whether only standard uncertainties were given.
    pub fn is_independent(&self) -> bool {
        matches!(self.given, Given::Standard(_))
    }

    /// Whether every quantity is exact.
    pub fn is_zero(&self) -> bool {
        self.root.as_flattened().iter().all(|x| *x == 0.0)
    }

    /// Standard uncertainties, or the roots of all elements.
    pub(super) fn sizes(&self) -> Vec<f64> {
        match &self.given {
            Given::Standard(standard) => standard.to_vec(),
            Given::Matrix(matrix) => matrix.iter().flatten().map(|x| x.abs().sqrt()).collect(),
        }
    }

    /// The smallest eigenvalue of the correlation matrix as given; below zero by rounding only.
    pub fn smallest_eigenvalue(&self) -> f64 {
        self.smallest_eigenvalue
    }
}

impl Covariance<6> {
    /// Of two vectors that are independent of each other.
    pub fn of_pair(first: &Covariance<3>, second: &Covariance<3>) -> Covariance<6> {
        let joined = |a: [f64; 3], b: [f64; 3]| [a[0], a[1], a[2], b[0], b[1], b[2]];
        let block = |a: [[f64; 3]; 3], b: [[f64; 3]; 3]| {
            let zero = [0.0; 3];
            [
                joined(a[0], zero),
                joined(a[1], zero),
                joined(a[2], zero),
                joined(zero, b[0]),
                joined(zero, b[1]),
                joined(zero, b[2]),
            ]
        };
        let given = match (&first.given, &second.given) {
            (Given::Standard(a), Given::Standard(b)) => Given::Standard(joined(*a, *b)),
            _ => {
                let doubles =
                    |part: &Covariance<3>| part.matrix::<Dd>(()).map(|row| row.map(|x| x.to_f64()));
                Given::Matrix(block(doubles(first), doubles(second)))
            }
        };
        Covariance {
            given,
            root: block(first.root, second.root),
            smallest_eigenvalue: first.smallest_eigenvalue.min(second.smallest_eigenvalue),
        }
    }
}

/// Correlation coefficients; 1 on the diagonal also of a quantity without variance.
fn correlation<const N: usize>(matrix: &[[f64; N]; N], standard: &[f64; N]) -> [[Dd; N]; N] {
    std::array::from_fn(|i| {
        std::array::from_fn(|j| {
            if i == j {
                Dd::from_f64(1.0)
            } else if matrix[i][j] == 0.0 {
                Dd::from_f64(0.0)
            } else {
                Dd::from_f64(matrix[i][j] / standard[i] / standard[j])
            }
        })
    })
}
