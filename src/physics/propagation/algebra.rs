//! Covariance matrices of E and cB, and columns of errors.

use crate::physics::field::Field;
use crate::physics::real::{Real, Vec3};

/// A covariance matrix of E and cB, in V²/m².
pub type Matrix6<R> = [[R; 6]; 6];

pub(super) fn field<R: Clone>([e0, e1, e2, b0, b1, b2]: &[R; 6]) -> Field<R> {
    Field {
        e: [e0, e1, e2].map(R::clone),
        cb: [b0, b1, b2].map(R::clone),
    }
}

pub(super) fn six<R>(field: Field<R>) -> [R; 6] {
    let ([e0, e1, e2], [b0, b1, b2]) = (field.e, field.cb);
    [e0, e1, e2, b0, b1, b2]
}

/// X C Xᵀ, the columns of X given.
pub(super) fn sandwich<R: Real>(columns: &[[R; 6]], covariance: &[Vec<R>]) -> Matrix6<R> {
    let zero = covariance[0][0].of(0.0);
    let count = columns.len();
    let sum = |terms: &mut dyn Iterator<Item = R>| terms.fold(zero.clone(), |sum, x| sum + x);
    // C Xᵀ
    let half: Vec<[R; 6]> = (0..count)
        .map(|k| {
            std::array::from_fn(|j| {
                sum(&mut (0..count)
                    .filter(|l| !covariance[k][*l].is_zero())
                    .map(|l| covariance[k][l].clone() * columns[l][j].clone()))
            })
        })
        .collect();
    let mut product: Matrix6<R> = std::array::from_fn(|_| std::array::from_fn(|_| zero.clone()));
    for i in 0..6 {
        for j in i..6 {
            let element = sum(&mut (0..count).map(|k| columns[k][i].clone() * half[k][j].clone()));
            product[i][j] = element.clone();
            product[j][i] = element;
        }
    }
    product
}

pub(super) fn add_to<R: Real>(sum: &mut Matrix6<R>, part: &Matrix6<R>) {
    for (sum, part) in sum.iter_mut().zip(part) {
        for (sum, part) in sum.iter_mut().zip(part) {
            *sum = sum.clone() + part.clone();
        }
    }
}

pub(super) fn diagonal<R, T: Clone>(values: &[R], of: impl Fn(&R) -> T, zero: T) -> Vec<Vec<T>> {
    let element = |i: usize, j: usize| if i == j { of(&values[i]) } else { zero.clone() };
    let all = 0..values.len();
    all.clone()
        .map(|i| all.clone().map(|j| element(i, j)).collect())
        .collect()
}

/// What column k of the root makes of vectors: their errors are independent then.
pub(super) fn combine<T, R: Real>(
    items: &[T],
    of: fn(&T) -> &Vec3<R>,
    root: &[Vec<f64>],
    k: usize,
) -> Vec3<R> {
    let zero = of(&items[0])[0].of(0.0);
    let counting = || items.iter().zip(root).filter(|(_, row)| row[k] != 0.0);
    std::array::from_fn(|i| {
        counting().fold(zero.clone(), |sum, (item, row)| {
            sum + of(item)[i].clone() * zero.of(row[k])
        })
    })
}

/// The exponent of a square root, rounded up.
pub(super) fn half(exponent: i64) -> i64 {
    exponent.div_euclid(2) + 1
}
