//! The meeting point: a reading and a resolved way give the same field in the target frame.

use crate::document::Notice;
use crate::physics::Impossible;
use crate::physics::double_double::Dd;
use crate::physics::energy::Energy;
use crate::physics::field::{FieldUnits, Measured};
use crate::physics::invariants::Invariants;
use crate::physics::missing::{ALL_KNOWN, Known};
use crate::physics::parallel::{ParallelFrame, parallel_frame};
use crate::physics::real::{Vec3, round, scale};
use crate::physics::reduction::{Calibration, Reduction};
use crate::physics::resolved::Resolved;
use crate::physics::scale::Scale;

/// The notice that no double holds an invariant.
pub const INVARIANT_OUT_OF_RANGE: &str = "invariant_out_of_range";

/// E and B at one event, any component of which may be missing.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Reading {
    /// E, in units of `units.e`.
    pub e: [Option<f64>; 3],
    /// B, in units of `units.b`.
    pub b: [Option<f64>; 3],
    /// What a unit is, once calibrated.
    pub units: FieldUnits,
    /// Calibration of E and of B, for raw numbers of a sensor.
    pub calibration: [Option<Calibration>; 2],
    /// Whether a missing component of E may be taken from E·B = 0.
    pub e_dot_b_zero: Option<EDotBZero>,
}

/// The common practice with two-axis probes: one missing component of E from E·B = 0.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct EDotBZero {
    /// The least angle in rad of B to the plane of the components measured.
    pub min_angle: f64,
}

/// A reading restated in the target frame.
#[derive(Clone, Debug)]
pub struct Transformed {
    /// E', in units of `units.e`; a component that depends on a missing one is missing.
    pub e: [Option<f64>; 3],
    /// B', in units of `units.b`.
    pub b: [Option<f64>; 3],
    /// What a unit is.
    pub units: FieldUnits,
    /// E' and B' to two doubles, in the units of the reading; `None` when anything is missing.
    precise: Option<(Vec3<Dd>, Vec3<Dd>)>,
    /// The reading as it was taken to be: zeros stand for missing components.
    pub question: Measured,
    /// Which components of its field are missing.
    pub missing: [[bool; 3]; 2],
    /// Invariants of the question; `None` when anything is missing.
    pub invariants: Option<Invariants>,
    /// Remarks.
    pub notices: Vec<Notice>,
}

/// Restates a reading; the answer is in the units `to`.
///
/// # Errors
/// A component of the answer is larger than the largest double, or E·B = 0 was to be used with B
/// too close to the measured plane.
pub fn transform(
    way: &Resolved,
    reading: &Reading,
    to: FieldUnits,
) -> Result<Transformed, Impossible> {
    let mut notices = Vec::new();
    let (question, given) = reduce(reading, &mut notices)?;
    let applied = way.apply(&question, to)?;
    note_mended_rotations(way, &mut notices);
    for (name, bits) in [
        ("e", applied.cancelled_bits[0]),
        ("b", applied.cancelled_bits[1]),
    ] {
        note_cancellation(name, bits, &mut notices);
    }
    let known = way.known(reading.units, given);
    let complete = given == ALL_KNOWN;
    let hide = |v: [f64; 3], known: [bool; 3]| std::array::from_fn(|i| known[i].then_some(v[i]));
    let invariants = complete.then(|| {
        let answer = Measured::new(applied.e, applied.b, to);
        Invariants::of(&question, &answer)
    });
    if !complete {
        notices.push(Notice {
            code: "missing_component",
            detail: "a component of the reading is missing; what depends on it is null, and so \
                     are the invariants"
                .into(),
        });
    }
    if let Some(found) = &invariants
        && (found.e2_minus_c2b2.is_none() || found.e_dot_cb.is_none())
    {
        notices.push(Notice {
            code: INVARIANT_OUT_OF_RANGE,
            detail: "an invariant is larger than the largest double in V2/m2 and is null".into(),
        });
    }
    note_strength(&question, &mut notices);
    Ok(Transformed {
        e: hide(applied.e, known[0]),
        b: hide(applied.b, known[1]),
        units: to,
        precise: complete.then_some(applied.precise),
        question,
        missing: given.map(|known| known.map(|known| !known)),
        invariants,
        notices,
    })
}

impl Transformed {
    /// Whether no component is missing.
    pub fn is_complete(&self) -> bool {
        self.precise.is_some()
    }

    /// E' in V/m and B' in T to two doubles; `None` when anything is missing.
    pub fn si(&self) -> Option<(Vec3<Dd>, Vec3<Dd>)> {
        let (e, b) = self.precise.as_ref()?;
        let in_si = |vector: &Vec3<Dd>, unit: Scale| scale(&unit.value(()), vector);
        let FieldUnits {
            e: e_unit,
            b: b_unit,
        } = self.question.units;
        Some((in_si(e, e_unit), in_si(b, b_unit)))
    }

    /// E'/c and B' in T; `None` when anything is missing.
    pub fn tesla(&self) -> Option<([f64; 3], [f64; 3])> {
        let (e, b) = self.si()?;
        let c = Dd::from_f64(crate::physics::constants::C);
        Some((round(&e.map(|x| x / c)), round(&b)))
    }

    /// Energy density, Poynting vector and stress of the answer; `None` when anything is
    /// missing or out of range.
    pub fn energy(&self) -> Option<Energy> {
        let (e, b) = self.si()?;
        Some(Energy::of(&e, &b)).filter(Energy::is_finite)
    }

    /// The frame in which E and B are parallel, as seen from that of the answer; the inner
    /// `None` says that the field is null and there is none.
    pub fn parallel_frame(&self) -> Option<Option<ParallelFrame>> {
        let (e, b) = self.si()?;
        Some(parallel_frame(&e, &b, self.invariants.as_ref()?))
    }
}

/// The reading as a whole field, and which of its components are known; zeros stand for the others.
///
/// # Errors
/// B is too close to the plane of the measured components for E·B = 0 to give the third.
fn reduce(reading: &Reading, notices: &mut Vec<Notice>) -> Result<(Measured, Known), Impossible> {
    let raw = [reading.e, reading.b];
    let [e, b] = raw.map(|v| v.map(|x| x.unwrap_or(0.0)));
    let mut known: Known = std::array::from_fn(|which| {
        let given = raw[which].map(|x| x.is_some());
        reading.calibration[which].map_or(given, |calibration| calibration.known(given))
    });
    let [calibration_e, calibration_b] = reading.calibration;
    let mut measured = Measured {
        e,
        b,
        units: reading.units,
        reduction: Reduction {
            e: calibration_e,
            b: calibration_b,
            filled: None,
        },
    };
    let missing: Vec<usize> = (0..3).filter(|i| !known[0][*i]).collect();
    if let (Some(assumed), [i], [true, true, true]) = (reading.e_dot_b_zero, &missing[..], known[1])
    {
        let [_, b] = measured.vectors::<Dd>(());
        let b = round(&b);
        let (j, k) = ((i + 1) % 3, (i + 2) % 3);
        let angle = libm::atan2(b[*i].abs(), libm::hypot(b[j], b[k]));
        if angle < assumed.min_angle {
            return Err(Impossible::FieldInPlane {
                degrees: angle.to_degrees(),
                limit: assumed.min_angle.to_degrees(),
            });
        }
        measured.reduction.filled = Some(*i);
        known[0] = [true; 3];
        notices.push(Notice {
            code: "e_dot_b_assumed",
            detail: format!(
                "component {} of E was not measured and is taken from E.B = 0; B stands {:.1} \
                 degrees out of the plane of the other two",
                ["x", "y", "z"][*i],
                angle.to_degrees()
            ),
        });
    }
    Ok((measured, known))
}

/// From a rotation mended by more than this on, the answer says so.
const WORTH_SAYING: f64 = 1e-9;
/// From this many cancelled bits on (six decimal digits), the answer says so.
const CANCELLED_BITS: f64 = 20.0;
/// Dielectric strength of air at sea level in V/m, about (common practice).
const STRONG_E: f64 = 3e6;
/// The flux density in T from which implants may be disturbed (0.5 mT, the line usually drawn
/// around magnets: ICNIRP Guidelines on Limits of Exposure to Static Magnetic Fields, 2009).
const STRONG_B: f64 = 5e-4;

fn note_mended_rotations(way: &Resolved, notices: &mut Vec<Notice>) {
    let departure = way.mended();
    if departure > WORTH_SAYING {
        let detail = format!(
            "a quaternion or matrix was off by {departure:.1e} and was taken to the nearest \
             rotation; give more digits if the attitude is known better"
        );
        notices.push(Notice {
            code: "rotation_mended",
            detail,
        });
    }
}

fn note_cancellation(name: &str, bits: f64, notices: &mut Vec<Notice>) {
    if bits < CANCELLED_BITS {
        return;
    }
    let detail = if bits.is_infinite() {
        format!("the terms of {name} cancel exactly: it vanishes for the numbers given")
    } else {
        let digits = bits * std::f64::consts::LOG10_2;
        format!(
            "{name} is what is left of terms about 1e{digits:.0} times larger: it is exact for \
             the numbers given, but their last digits decide it"
        )
    };
    notices.push(Notice {
        code: "heavy_cancellation",
        detail,
    });
}

fn note_strength(question: &Measured, notices: &mut Vec<Notice>) {
    let largest = |v: &Vec3<Dd>| v.iter().fold(0.0f64, |m, x| m.max(x.hi.abs()));
    let [e, b] = question.vectors::<Dd>(());
    let e = largest(&e) * question.units.e.to_f64();
    let b = largest(&b) * question.units.b.to_f64();
    if e >= STRONG_E || b >= STRONG_B {
        let detail = "the reading is strong enough that the usual care is due (3 MV/m: air may \
                      break down; 0.5 mT: implants may be disturbed); follow local codes and \
                      licensed practice, this answer is no safety clearance"
            .into();
        notices.push(Notice {
            code: "strong_field",
            detail,
        });
    }
}
