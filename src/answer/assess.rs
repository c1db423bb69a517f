//! Assessing the uncertainty of an answer: numbers, budget and remarks.

use super::Notice;
use super::uncertainty::{
    Budget, Coverage, Ellipsoid, Magnitudes, Measure, SecondOrder, Share, UncertainInvariants,
    UncertainParallelFrame, Uncertainty,
};
use crate::document::Path;
use crate::physics::covariance::EIGENVALUE_LIMIT;
use crate::physics::coverage::{self, FACTOR, PROBABILITY};
use crate::physics::linearity::{LIMIT, Linearity};
use crate::physics::propagation::{Inputs, Source};
use crate::physics::uncertainty::{self as found, InUnits, depends_on_missing};
use crate::question::{Part, Question};
use crate::transform::Transformed;
use crate::units::Quantity;

/// Shares below this are left out: they are rounding, or nothing to look after.
const LEAST_SHARE: f64 = 1e-12;
/// The largest eigenvalue below zero that is not worth a remark.
const WORTH_SAYING: f64 = -1e-9;

/// The uncertainty of an answer, with remarks; `None` when nothing is uncertain.
pub(super) fn uncertainty(
    question: &Question,
    transformed: &Transformed,
    notices: &mut Vec<Notice>,
) -> Option<Uncertainty> {
    let inputs = Inputs {
        way: &question.way,
        field: &transformed.question,
        reading: question.uncertainty.as_deref(),
    };
    if !inputs.any() {
        return None;
    }
    let found = inputs.propagate(InUnits(question.target_units()));
    let mut known = [false; 6];
    for (i, value) in transformed.e.iter().chain(&transformed.b).enumerate() {
        known[i] = value.is_some();
    }
    let complete = transformed.is_complete();
    if !complete {
        let hidden = depends_on_missing(&inputs, transformed.missing);
        known = std::array::from_fn(|i| known[i] && !hidden[i]);
    }
    note_mended(&inputs, notices);
    let all = |offset: usize| known[offset..offset + 3].iter().all(|known| *known);
    let element = |x: f64, i: usize, j: usize| held(x).filter(|_| known[i] && known[j]);
    let standard: [Option<f64>; 6] = std::array::from_fn(|i| element(found.standard[i], i, i));
    let matrix = |m: &[[f64; 6]; 6]| {
        std::array::from_fn(|i| std::array::from_fn(|j| element(m[i][j], i, j)))
    };
    let covariance: [[Option<f64>; 6]; 6] = matrix(&found.covariance);
    if (0..6).any(|i| {
        known[i]
            && covariance[i]
                .iter()
                .zip(known)
                .any(|(x, k)| k && x.is_none())
    }) {
        notices.push(Notice {
            code: "uncertainty_out_of_range".into(),
            detail: "an uncertainty or covariance is larger than the largest double in the units \
                     of the answer and is null"
                .into(),
        });
    }
    let ellipsoid = |which: usize| {
        let coverage::Ellipsoid {
            half_axes,
            directions,
        } = found.coverage[which];
        let whole = all(3 * which) && half_axes.iter().all(|x| x.is_finite());
        whole.then_some(Ellipsoid {
            half_axes,
            directions,
        })
    };
    let measure = |[value, uncertainty]: [f64; 2]| {
        Some(Measure {
            value: held(value)?,
            uncertainty: held(uncertainty)?,
        })
    };
    let length = |which: usize| {
        found.lengths[which]
            .filter(|_| all(3 * which))
            .and_then(measure)
    };
    let radians = question.units.si(Quantity::Angle).to_f64();
    let linearity = &found.linearity;
    if !linearity.holds {
        notices.push(not_linear(linearity));
    }
    note_large(&found, [all(0), all(3)], notices);
    let asked = |part| question.include.contains(&part);
    let [e2_minus_c2b2, e_dot_cb] = found.invariants.map(held);
    Some(Uncertainty {
        e: [standard[0], standard[1], standard[2]],
        b: [standard[3], standard[4], standard[5]],
        covariance,
        correlation: matrix(&found.correlation),
        coverage: Coverage {
            probability: PROBABILITY,
            factor: FACTOR,
            e: ellipsoid(0),
            b: ellipsoid(1),
        },
        magnitudes: Magnitudes {
            e: length(0),
            b: length(1),
            angle: found
                .angle
                .filter(|_| complete)
                .and_then(|angle| measure(angle.map(|x| x / radians))),
        },
        invariants: complete.then_some(UncertainInvariants {
            e2_minus_c2b2,
            e_dot_cb,
        }),
        parallel_frame: found
            .parallel_speed
            .filter(|_| complete && asked(Part::ParallelFrame))
            .and_then(held)
            .map(|beta| UncertainParallelFrame { beta }),
        linear: linearity.holds,
        second_order: SecondOrder {
            ratio: held(linearity.second_order),
            velocity: held(linearity.boost),
            turn: held(linearity.turn),
            limit: LIMIT,
        },
        budget: asked(Part::Budget).then(|| budget(question, &found, known)),
    })
}

/// A number that a double holds.
fn held(x: f64) -> Option<f64> {
    x.is_finite().then_some(x)
}

fn budget(question: &Question, found: &found::Uncertainty, known: [bool; 6]) -> Budget {
    let steps: Vec<_> = question.way.steps().collect();
    let sensor = |field: &str| {
        let name = question.sensor.as_deref().unwrap_or_default();
        let frame = Path::default().field("frames").field(name);
        frame.field("sensor").field(field).pointer()
    };
    let name = |source: &Source| match source {
        Source::E => "/e".into(),
        Source::B => "/b".into(),
        Source::EWithB => "/uncertainty/covariance".into(),
        Source::CalibrationE => sensor("e"),
        Source::CalibrationB => sensor("b"),
        Source::Step(i) => {
            let uncertain = steps[*i].uncertainty.as_ref();
            uncertain.map_or_else(String::new, |uncertain| uncertain.source.clone())
        }
    };
    let shares = |i: usize| {
        let mut shares: Vec<Share> = Vec::new();
        for (source, share) in found
            .shares
            .iter()
            .filter(|(_, share)| known[i] && share[i].abs() > LEAST_SHARE)
        {
            let (source, share) = (name(source), share[i]);
            match shares.iter_mut().find(|own| own.source == source) {
                Some(own) => own.share += share,
                None => shares.push(Share { source, share }),
            }
        }
        shares.sort_by(|a, b| b.share.abs().total_cmp(&a.share.abs()));
        shares
    };
    Budget {
        e: [0, 1, 2].map(shares),
        b: [3, 4, 5].map(shares),
    }
}

fn note_mended(inputs: &Inputs, notices: &mut Vec<Notice>) {
    let reading = inputs
        .reading
        .map(|reading| reading.field.smallest_eigenvalue());
    let steps = inputs
        .way
        .steps()
        .filter_map(|step| step.uncertainty.as_ref());
    let steps = steps.flat_map(|uncertain| {
        let each = uncertain.errors.covariances().into_iter();
        each.map(|covariance| covariance.smallest_eigenvalue())
            .collect::<Vec<_>>()
    });
    let smallest = reading.into_iter().chain(steps).fold(0.0, f64::min);
    if smallest < WORTH_SAYING {
        notices.push(Notice {
            code: "covariance_mended".into(),
            detail: format!(
                "the smallest eigenvalue of a correlation matrix is {smallest:.1e} and was set to \
                 zero (down to {EIGENVALUE_LIMIT:e} it is taken as rounding); give more digits"
            )
            .into(),
        });
    }
}

fn not_linear(linearity: &Linearity) -> Notice {
    let mut reasons = Vec::new();
    if linearity.boost >= LIMIT {
        reasons.push(format!(
            "the velocity of a step is uncertain by {:.2} c as seen in its own frame, where \
             Gaussian errors reach past c",
            linearity.boost
        ));
    }
    if linearity.turn >= LIMIT {
        reasons.push(format!(
            "axes or a direction are uncertain by {:.2} rad, too much for small angles",
            linearity.turn
        ));
    }
    if linearity.second_order.is_infinite() {
        reasons.push(
            "in some direction the first order leaves no uncertainty at all, and the second order \
             does: give the uncertainty of the reading too"
                .into(),
        );
    } else if linearity.second_order.is_nan() || linearity.second_order >= LIMIT {
        reasons.push(format!(
            "what the first order leaves out is {:.2} standard uncertainties",
            linearity.second_order
        ));
    }
    Notice {
        code: "not_linear".into(),
        detail: format!(
            "uncertainties are propagated to first order, and here that is not enough: {}; take \
             them as rough, and their ellipsoids as not covering 95 %",
            reasons.join("; ")
        )
        .into(),
    }
}

fn note_large(found: &found::Uncertainty, known: [bool; 2], notices: &mut Vec<Notice>) {
    for (which, name) in ["e", "b"].into_iter().enumerate() {
        let largest = found.coverage[which].half_axes[0] / FACTOR;
        let length = found.lengths[which].map_or(0.0, |[length, _]| length);
        if known[which] && largest > length {
            notices.push(Notice {
                code: "uncertainty_exceeds_value".into(),
                detail: format!(
                    "{name} is {length:.3e} with a standard uncertainty of up to {largest:.3e}: it \
                     is not told from zero"
                )
                .into(),
            });
        }
    }
}
