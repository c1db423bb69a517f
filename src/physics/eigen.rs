//! Eigenvalues and eigenvectors of small symmetric matrices.
//!
//! Jacobi's method keeps the digits of small eigenvalues beside large ones in a positive definite
//! matrix that is only badly scaled (Demmel and Veselić, SIAM J. Matrix Anal. Appl. 13 (1992)
//! 1204), which the usual reduction to tridiagonal form does not.

use super::real::Real;

/// Eigenvalues, largest first, and the unit eigenvector of each.
#[derive(Clone, Debug)]
pub struct Eigen<R, const N: usize> {
    /// In descending order.
    pub values: [R; N],
    /// `vectors[i]` belongs to `values[i]`.
    pub vectors: [[R; N]; N],
}

/// Bits to which an element beside the diagonal is brought to nothing.
const BITS: i64 = 108;
/// It converges quadratically: matrices of this size take five to eight.
const MOST_SWEEPS: usize = 30;

/// Of a symmetric matrix; only what stands on and above the diagonal counts.
pub fn symmetric<R: Real, const N: usize>(matrix: &[[R; N]; N]) -> Eigen<R, N> {
    let mut a = matrix.clone();
    let unit = |i, j| matrix[0][0].of(if i == j { 1.0 } else { 0.0 });
    let mut vectors: [[R; N]; N] = std::array::from_fn(|i| std::array::from_fn(|j| unit(i, j)));
    for _ in 0..MOST_SWEEPS {
        let mut still = true;
        for p in 0..N {
            for q in p + 1..N {
                if !negligible(&a[p][q], &a[p][p], &a[q][q]) {
                    still = false;
                    rotate(&mut a, &mut vectors, p, q);
                }
            }
        }
        if still {
            break;
        }
    }
    let mut order: [usize; N] = std::array::from_fn(|i| i);
    order.sort_by(|&i, &j| {
        let difference = a[j][j].clone() - a[i][i].clone();
        difference.to_f64().total_cmp(&0.0)
    });
    Eigen {
        values: order.map(|i| a[i][i].clone()),
        vectors: order.map(|i| vectors[i].clone()),
    }
}

/// Whether an element is nothing beside the geometric mean of its two diagonal elements.
fn negligible<R: Real>(element: &R, p: &R, q: &R) -> bool {
    let Some(exponent) = element.exponent() else {
        return true;
    };
    match (p.exponent(), q.exponent()) {
        (Some(p), Some(q)) => 2 * exponent < p + q - 2 * BITS,
        _ => false,
    }
}

/// Turns the axes p and q so that the element between them vanishes.
fn rotate<R: Real, const N: usize>(
    a: &mut [[R; N]; N],
    vectors: &mut [[R; N]; N],
    p: usize,
    q: usize,
) {
    let one = a[p][q].of(1.0);
    let half = (a[q][q].clone() - a[p][p].clone()) / a[p][q].scale2(1);
    // tan of the angle, the smaller of two roots; far from 1 its square has no place beside 1.
    let tan = if half.exponent().is_some_and(|n| n > 2 * BITS) {
        one.clone() / half.scale2(1)
    } else {
        let tan = one.clone() / (half.abs() + (half.square() + one.clone()).sqrt());
        if half.is_negative() { -tan } else { tan }
    };
    let cos = one.clone() / (tan.square() + one).sqrt();
    let sin = tan.clone() * cos.clone();
    let shift = tan * a[p][q].clone();
    a[p][p] = a[p][p].clone() - shift.clone();
    a[q][q] = a[q][q].clone() + shift;
    a[p][q] = cos.of(0.0);
    let turned = |x: &R, y: &R| {
        (
            cos.clone() * x.clone() - sin.clone() * y.clone(),
            sin.clone() * x.clone() + cos.clone() * y.clone(),
        )
    };
    for k in (0..N).filter(|k| *k != p && *k != q) {
        let at = |i: usize| if k < i { (k, i) } else { (i, k) };
        let ((pi, pj), (qi, qj)) = (at(p), at(q));
        (a[pi][pj], a[qi][qj]) = turned(&a[pi][pj], &a[qi][qj]);
    }
    let (before, behind) = vectors.split_at_mut(q);
    for (x, y) in before[p].iter_mut().zip(&mut behind[0]) {
        (*x, *y) = turned(x, y);
    }
}
