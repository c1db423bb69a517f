//! Covariance matrices: what is accepted, what is refused, and the root for draws.

use lodeframe::physics::covariance::{Covariance, Flaw};
use lodeframe::physics::eigen;
use lodeframe::physics::{Dd, Real};
use proptest::prelude::*;

/// The second difference matrix has the eigenvalues 2 − 2 cos(kπ/(N+1)) (closed form, found in
/// any text on finite differences).
#[test]
fn the_eigenvalues_of_the_second_difference_matrix_are_the_known_ones() {
    let matrix: [[Dd; 6]; 6] = std::array::from_fn(|i| {
        std::array::from_fn(|j| {
            Dd::from_f64(match i.abs_diff(j) {
                0 => 2.0,
                1 => -1.0,
                _ => 0.0,
            })
        })
    });
    let found = eigen::symmetric(&matrix);
    for (k, value) in found.values.iter().rev().enumerate() {
        let (_, cos) = (Dd::PI * Dd::from_f64(k as f64 + 1.0) / Dd::from_f64(7.0)).sin_cos();
        let known = Dd::from_f64(2.0) - cos.scale2(1);
        assert!((*value - known).abs().hi < 1e-28, "{value:?} {known:?}");
    }
    for (value, vector) in found.values.iter().zip(&found.vectors) {
        for i in 0..6 {
            let image = (0..6).fold(Dd::from_f64(0.0), |sum, j| sum + matrix[i][j] * vector[j]);
            assert!((image - *value * vector[i]).abs().hi < 1e-28);
        }
    }
}

/// A diagonal scaling by 1e-20 leaves the small eigenvalue all its digits: that of
/// [[1, r s], [r s, s²]] is s²(1 − r²)(1 + O(s²)).
#[test]
fn small_eigenvalues_keep_their_digits_beside_large_ones() {
    let (r, s) = (0.5, 1e-20);
    let matrix = [[1.0, r * s], [r * s, s * s]].map(|row| row.map(Dd::from_f64));
    let found = eigen::symmetric(&matrix).values[1].to_f64();
    assert!((found / (0.75 * s * s) - 1.0).abs() < 1e-15, "{found:e}");
}

#[test]
fn what_is_no_covariance_is_refused_with_its_measure() {
    let negative = Covariance::of_standard([1.0, -2.0, 3.0]);
    assert_eq!(
        negative,
        Err(Flaw::Negative {
            index: 1,
            value: -2.0
        })
    );
    let lopsided = Covariance::of_matrix([[1.0, 0.1, 0.0], [0.2, 1.0, 0.0], [0.0, 0.0, 1.0]]);
    assert!(matches!(
        lopsided,
        Err(Flaw::NotSymmetric {
            row: 0,
            column: 1,
            ..
        })
    ));
    // The correlation 1.5 has the eigenvalues 1 ± 1.5.
    let wild = Covariance::of_matrix([[4.0, 3.0, 0.0], [3.0, 1.0, 0.0], [0.0, 0.0, 1.0]]);
    let Err(Flaw::NotPositiveSemidefinite { eigenvalue, .. }) = wild else {
        panic!("{wild:?}");
    };
    assert!((eigenvalue + 0.5).abs() < 1e-15, "{eigenvalue}");
    let sourceless = Covariance::of_matrix([[0.0, 1.0, 0.0], [1.0, 1.0, 0.0], [0.0, 0.0, 1.0]]);
    assert!(matches!(
        sourceless,
        Err(Flaw::NotPositiveSemidefinite { .. })
    ));
}

/// Three signs that cannot hold together, off by little: eigenvalue 1 − 2ρ for ρ next to ½.
#[test]
fn eigenvalues_below_zero_by_rounding_are_brought_to_zero() {
    let with = |rho: f64| [[1.0, -rho, -rho], [-rho, 1.0, -rho], [-rho, -rho, 1.0]];
    let mended = Covariance::of_matrix(with(0.5 + 1e-7)).expect("within rounding");
    assert!((mended.smallest_eigenvalue() + 2e-7).abs() < 1e-14);
    let matrix = mended.matrix::<Dd>(());
    let sum = matrix.as_flattened().iter().fold(0.0, |sum, x| sum + x.hi);
    assert!(sum.abs() < 1e-15, "the variance of the sum is {sum:e}");
    assert!(Covariance::of_matrix(with(0.5 + 1e-6)).is_err());
}

proptest! {
    /// A Aᵀ is a covariance whatever A, in whatever units, and its root gives it back.
    #[test]
    fn the_root_squared_is_the_matrix(
        a in proptest::array::uniform6(proptest::array::uniform4(-1.0..1.0f64)),
        units in proptest::array::uniform6(-300..300i32),
    ) {
        // Of rank four.
        let unit = units.map(|n| libm::exp2(f64::from(n) / 2.0));
        let matrix: [[f64; 6]; 6] = std::array::from_fn(|i| std::array::from_fn(|j| {
            (0..4).map(|k| a[i][k] * a[j][k]).sum::<f64>() * unit[i] * unit[j]
        }));
        let found = Covariance::of_matrix(matrix).expect("positive semi-definite");
        let root = found.root();
        let standard = found.standard();
        for i in 0..6 {
            for j in 0..6 {
                let product: f64 = (0..6).map(|k| root[i][k] * root[j][k]).sum();
                let size = standard[i] * standard[j];
                prop_assert!((product - matrix[i][j]).abs() <= 1e-14 * size);
            }
        }
    }
}

#[test]
fn two_vectors_make_one_covariance_of_six() {
    let e = Covariance::of_standard([1.0, 2.0, 3.0]).expect("right");
    let b =
        Covariance::of_matrix([[4.0, 1.0, 0.0], [1.0, 9.0, 0.0], [0.0, 0.0, 1.0]]).expect("right");
    let both = Covariance::of_pair(&e, &b);
    assert_eq!(both.standard(), [1.0, 2.0, 3.0, 2.0, 3.0, 1.0]);
    let matrix = both.matrix::<Dd>(()).map(|row| row.map(|x| x.hi));
    assert_eq!(matrix[3], [0.0, 0.0, 0.0, 4.0, 1.0, 0.0]);
    assert!(!both.is_independent() && Covariance::of_pair(&e, &e).is_independent());
}
