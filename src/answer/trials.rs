//! From a question to its trials, and from these to what is said of the answer.

use super::monte_carlo::{Comparison, Components, Intervals, MonteCarlo, Validation};
use super::{Answer, Notice};
use crate::physics::monte_carlo::interval::{self, FEWEST, Tails};
use crate::physics::monte_carlo::summary::{self, Results, Summary};
use crate::physics::monte_carlo::trials::{Block, Trials};
use crate::physics::monte_carlo::validation;
use crate::question::{self, Question};
use crate::transform::transform;

/// The trials of a question, ready to be made: the blocks, then the tails of each component, then
/// what they say. Blocks and tails may be made anywhere and in any order.
#[derive(Debug)]
pub struct Plan {
    asked: question::MonteCarlo,
    trials: Trials,
    /// The answer without errors; `None` for a component that is not told.
    exact: [Option<f64>; 6],
    /// Standard uncertainties of the law of propagation, in units of the answer.
    standard: [f64; 6],
    /// What the trials count in, in units of the answer: powers of two.
    units: [f64; 6],
}

impl Plan {
    /// The trials that a question asks for, if it does; `answer` is its answer, which is told when
    /// they cannot be made.
    pub fn new(question: &Question, answer: &mut Answer) -> Option<Plan> {
        let asked = question.monte_carlo?;
        let plan = Plan::of(asked, question, answer);
        if plan.is_none() {
            answer.notices.push(Notice {
                code: "trials_out_of_range".into(),
                detail: "a field between the steps is larger than the largest double; no trials \
                         were made"
                    .into(),
            });
        }
        plan
    }

    fn of(asked: question::MonteCarlo, question: &Question, answer: &Answer) -> Option<Plan> {
        let uncertainty = answer.uncertainty.as_ref()?;
        let six = |e: [Option<f64>; 3], b: [Option<f64>; 3]| [e[0], e[1], e[2], b[0], b[1], b[2]];
        let known = six(uncertainty.e, uncertainty.b);
        let told = six(answer.e, answer.b);
        let standard = known.map(|u| u.unwrap_or(0.0));
        let to = question.target_units();
        // A component without uncertainty is counted in the largest one beside it.
        let units: [f64; 6] = std::array::from_fn(|i| {
            let beside = &standard[3 * (i / 3)..][..3];
            let largest = beside.iter().copied().fold(0.0, f64::max);
            let u = if standard[i] > 0.0 {
                standard[i]
            } else {
                largest
            };
            if u > 0.0 {
                libm::scalbn(1.0, libm::ilogb(u))
            } else {
                1.0
            }
        });
        let si = [to.e.to_f64(), to.b.to_f64()];
        let field = transform(&question.way, &question.reading, to)
            .ok()?
            .question;
        let trials = Trials::new(
            &question.way,
            &field,
            question.uncertainty.as_deref(),
            std::array::from_fn(|i| units[i] * si[i / 3]),
            asked.trials,
            asked.seed,
        )
        .ok()?;
        Some(Plan {
            asked,
            trials,
            exact: std::array::from_fn(|i| known[i].and(told[i])),
            standard,
            units,
        })
    }

    /// How many blocks there are.
    pub fn blocks(&self) -> usize {
        self.trials.blocks()
    }

    /// One of the blocks.
    pub fn block(&self, number: usize) -> Block {
        self.trials.block(number)
    }

    /// The tails of one of the six components.
    pub fn tails(&self, blocks: &[Block], component: usize) -> Option<Tails> {
        summary::tails(blocks, component)
    }

    /// What all of the blocks, in their order, and the tails of the components say.
    pub fn conclude(&self, blocks: &[Block], tails: [Option<Tails>; 6], answer: &mut Answer) {
        let standard = std::array::from_fn(|i| self.standard[i] / self.units[i]);
        let summary = Summary::new(blocks, tails, standard);
        let found = self.said(&summary);
        self.note(&summary, &found, &mut answer.notices);
        answer.monte_carlo = Some(Box::new(found));
    }

    /// All of it here and now.
    pub fn finish(&self, answer: &mut Answer) {
        let blocks: Vec<Block> = (0..self.blocks()).map(|n| self.block(n)).collect();
        let tails = std::array::from_fn(|component| self.tails(&blocks, component));
        self.conclude(&blocks, tails, answer);
    }

    fn said(&self, summary: &Summary) -> MonteCarlo {
        let results = summary.results.as_ref();
        // Of results counted from the exact answer to numbers in units of the answer.
        let value = |i: usize, x: f64| held(self.exact[i]? + x * self.units[i]);
        let each = |f: &dyn Fn(&Results, usize) -> Option<f64>| {
            let of = |i: usize| f(results?, i);
            Components {
                e: [0, 1, 2].map(of),
                b: [3, 4, 5].map(of),
            }
        };
        let covariance = |i: usize, j: usize| {
            self.exact[i].and(self.exact[j])?;
            held(results?.covariance[i][j] * self.units[i] * self.units[j])
        };
        let interval = |i: usize| {
            let [low, high] = results?.intervals[i];
            Some([value(i, low)?, value(i, high)?])
        };
        let comparison = |i: usize| {
            self.exact[i]?;
            let found = results?.validations[i];
            Some(Comparison {
                tolerance: validation::tolerance(self.standard[i]),
                d_low: held(found.d_low * self.units[i])?,
                d_high: held(found.d_high * self.units[i])?,
                validated: found.validated,
                settled: found.settled,
            })
        };
        let compared: [Option<Comparison>; 6] = std::array::from_fn(comparison);
        let all = compared.iter().map(|own| Some(own.as_ref()?.validated));
        let validated = all.collect::<Option<Vec<bool>>>();
        let [e0, e1, e2, b0, b1, b2] = compared;
        MonteCarlo {
            trials: self.asked.trials as u64,
            seed: self.asked.seed,
            refused: summary.refused,
            estimate: each(&|results, i| value(i, results.estimate[i])),
            standard_uncertainty: each(&|results, i| {
                self.exact[i]?;
                held(results.covariance[i][i].sqrt() * self.units[i])
            }),
            covariance: std::array::from_fn(|i| std::array::from_fn(|j| covariance(i, j))),
            intervals: Intervals {
                probability: interval::PROBABILITY,
                e: [0, 1, 2].map(interval),
                b: [3, 4, 5].map(interval),
            },
            validation: Validation {
                validated: validated.map(|all| all.into_iter().all(|own| own)),
                significant_digits: 2,
                e: [e0, e1, e2],
                b: [b0, b1, b2],
            },
        }
    }

    fn note(&self, summary: &Summary, found: &MonteCarlo, notices: &mut Vec<Notice>) {
        let mut say = |code: &'static str, detail: String| {
            notices.push(Notice {
                code: code.into(),
                detail: detail.into(),
            });
        };
        let (trials, refused) = (self.asked.trials, summary.refused);
        if refused > 0 {
            let rest = if summary.results.is_some() {
                "what monte_carlo says is of the others".into()
            } else {
                format!("fewer than {FEWEST} are left, too few to say anything")
            };
            say(
                "draws_refused",
                format!(
                    "{refused} of {trials} draws have a speed at or past that of light, or a \
                     Lorentz factor below one: {rest}. A speed so uncertain is not normally \
                     distributed; the rapidity may be"
                ),
            );
        }
        let compared = found.validation.e.iter().chain(&found.validation.b);
        let open = compared.flatten().filter(|own| !own.settled).count();
        if open > 0 {
            say(
                "validation_not_settled",
                format!(
                    "for {open} of the components other draws could decide otherwise whether the \
                     law of propagation is good to two digits; more trials than {trials} tell"
                ),
            );
        }
    }
}

/// A number that a double holds.
fn held(x: f64) -> Option<f64> {
    x.is_finite().then_some(x + 0.0)
}
