//! Mean and covariance from sums that are added up in a fixed order.

/// Sums over trials of N quantities.
#[derive(Clone, Debug)]
pub struct Moments<const N: usize> {
    count: u64,
    sums: [f64; N],
    /// Of x_i x_j, j ≤ i.
    products: [[f64; N]; N],
}

impl<const N: usize> Default for Moments<N> {
    fn default() -> Moments<N> {
        Moments {
            count: 0,
            sums: [0.0; N],
            products: [[0.0; N]; N],
        }
    }
}

impl<const N: usize> Moments<N> {
    /// Of columns of equal length.
    pub fn of(columns: [&[f64]; N]) -> Moments<N> {
        let sums = columns.map(|x| sum(x.len(), |i| x[i]));
        let mut products = [[0.0; N]; N];
        for (i, x) in columns.iter().enumerate() {
            for (j, y) in columns[..=i].iter().enumerate() {
                let (x, y) = (&x[..], &y[..x.len()]);
                products[i][j] = sum(x.len(), |k| x[k] * y[k]);
            }
        }
        let count = columns.first().map_or(0, |x| x.len()) as u64;
        Moments {
            count,
            sums,
            products,
        }
    }

    /// Adds the trials of another.
    pub fn add(&mut self, other: &Moments<N>) {
        self.count += other.count;
        for i in 0..N {
            self.sums[i] += other.sums[i];
            for j in 0..=i {
                self.products[i][j] += other.products[i][j];
            }
        }
    }

    /// How many trials.
    pub fn count(&self) -> u64 {
        self.count
    }

    /// The averages (JCGM 101:2008, equation 16).
    pub fn mean(&self) -> [f64; N] {
        self.sums.map(|sum| sum / self.count as f64)
    }

    /// The covariance matrix, with one trial less in the denominator (JCGM 102:2011, 7.6).
    pub fn covariance(&self) -> [[f64; N]; N] {
        let mean = self.mean();
        let element = |i: usize, j: usize| {
            let (i, j) = (i.max(j), i.min(j));
            (self.products[i][j] - self.sums[i] * mean[j]) / (self.count as f64 - 1.0)
        };
        std::array::from_fn(|i| std::array::from_fn(|j| element(i, j)))
    }
}

/// Σ f(k) in eight sums side by side, added pairwise at the end: the same order on every machine,
/// and one that it can work on several at a time.
#[inline(always)]
fn sum(count: usize, f: impl Fn(usize) -> f64) -> f64 {
    const SIDE: usize = 8;
    let mut sums = [0.0; SIDE];
    let whole = count - count % SIDE;
    for first in (0..whole).step_by(SIDE) {
        for (k, sum) in sums.iter_mut().enumerate() {
            *sum += f(first + k);
        }
    }
    for k in whole..count {
        sums[k - whole] += f(k);
    }
    let mut left = SIDE;
    while left > 1 {
        left /= 2;
        for k in 0..left {
            sums[k] += sums[k + left];
        }
    }
    sums[0]
}
