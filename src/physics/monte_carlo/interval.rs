//! Coverage intervals from trials (JCGM 101:2008, 7.7).

/// The coverage probability of every interval given.
pub const PROBABILITY: f64 = 0.95;
/// The least number of trials that gives an interval: 100/(1−p) (JCGM 101:2008, 7.9.4 b).
pub const FEWEST: usize = 2000;

/// Both tails of the distribution of a quantity, sorted: all that its intervals depend on.
#[derive(Clone, Debug)]
pub struct Tails {
    /// The values that may be the lower end of an interval, ascending.
    low: Vec<f64>,
    /// The values that may be the upper end, each belonging to the lower end at its place.
    high: Vec<f64>,
    /// How many trials there were.
    count: usize,
}

impl Tails {
    /// Of the values of all trials, whose order is not kept; `None` when they are fewer than
    /// [`FEWEST`].
    pub fn of(values: &mut [f64]) -> Option<Tails> {
        let count = values.len();
        if count < FEWEST {
            return None;
        }
        // q = pM rounded: an interval goes from the r-th value to the (r+q)-th, r = 1 .. M−q.
        let q = (PROBABILITY * count as f64 + 0.5).floor() as usize;
        let ends = count - q;
        let order = f64::total_cmp;
        values.select_nth_unstable_by(ends - 1, order);
        let (low, rest) = values.split_at_mut(ends);
        let highest = rest.len() - ends;
        rest.select_nth_unstable_by(highest, order);
        let high = &mut rest[highest..];
        low.sort_unstable_by(order);
        high.sort_unstable_by(order);
        Some(Tails {
            low: low.to_vec(),
            high: high.to_vec(),
            count,
        })
    }

    /// The shortest interval; the lowest of those that are equally short.
    pub fn shortest(&self) -> [f64; 2] {
        let ends = self.low.iter().zip(&self.high);
        let shortest = ends.min_by(|a, b| (a.1 - a.0).total_cmp(&(b.1 - b.0)));
        let (low, high) = shortest.expect("there are ends");
        [*low, *high]
    }

    /// The probabilistically symmetric interval.
    pub fn symmetric(&self) -> [f64; 2] {
        let middle = self.middle();
        [self.low[middle], self.high[middle]]
    }

    /// Standard uncertainties of the ends of the symmetric interval that come from the number of
    /// trials: how many fall below a quantile is binomial, so the values that many places apart
    /// tell, whatever the distribution (David and Nagaraja, Order Statistics, 3rd ed., 7.1).
    pub fn numerical_uncertainty(&self) -> [f64; 2] {
        let outside = (1.0 - PROBABILITY) / 2.0;
        let places = (self.count as f64 * outside * (1.0 - outside)).sqrt();
        let (middle, whole) = (self.middle(), places as usize);
        let spread = |tail: &[f64]| {
            let apart = tail[middle + whole] - tail[middle - whole];
            apart / 2.0 * (places / whole as f64)
        };
        [spread(&self.low), spread(&self.high)]
    }

    /// r of the symmetric interval, from 0 (JCGM 101:2008, 7.7.2).
    fn middle(&self) -> usize {
        self.low.len().div_ceil(2) - 1
    }
}
