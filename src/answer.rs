//! An answer as it is sent: the types behind the JSON, with their meaning and units.

mod assess;
mod monte_carlo;
mod trials;
mod uncertainty;

pub use monte_carlo::MonteCarlo;
pub use trials::Plan;
pub use uncertainty::{Ellipsoid, Measure, Uncertainty};

use std::borrow::Cow;

use serde::{Deserialize, Serialize};
use utoipa::ToSchema;

use crate::document;
use crate::physics::double_double::Dd;
use crate::physics::lorentz::{Change, Net};
use crate::physics::real::Real;
use crate::physics::resolved::Resolved;
use crate::physics::scale::Scale;
use crate::physics::tensor::{FieldTensor, Signature};
use crate::physics::{self, Impossible};
use crate::question::{Part, Question};
use crate::transform::{Transformed, transform};
use crate::units::Quantity;

/// The same field in the target frame.
#[derive(Clone, Debug, Serialize, Deserialize, ToSchema)]
pub struct Answer {
    /// Electric field E' in `units.e`, on the axes of the target frame. A component that depends on a missing one is null.
    #[schema(min_items = 3, max_items = 3)]
    pub e: [Option<f64>; 3],
    /// Magnetic flux density B' in `units.b`, on the axes of the target frame.
    #[schema(min_items = 3, max_items = 3)]
    pub b: [Option<f64>; 3],
    /// Units of `e` and `b`.
    pub units: AnswerUnits,
    /// The uncertainty of `e` and `b`, when anything in the question is uncertain.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub uncertainty: Option<Box<Uncertainty>>,
    /// What trials say of it, when asked for.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub monte_carlo: Option<Box<MonteCarlo>>,
    /// Lorentz invariants of the reading, in V²/m²; null when a component is missing.
    pub invariants: Option<Invariants>,
    /// The whole way as one transformation.
    pub net: NetTransformation,
    /// The field tensor of the answer, when asked for.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub tensor: Option<Box<Tensor>>,
    /// Λ of the whole way, v' = Λv for v = (ct, x, y, z), when asked for.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub matrix: Option<Box<[[f64; 4]; 4]>>,
    /// Energy and stress of the answer, when asked for.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub energy: Option<Box<Energy>>,
    /// The frame in which E and B are parallel, when asked for.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub parallel_frame: Option<Box<ParallelFrame>>,
    /// Remarks that a careful colleague would make.
    pub notices: Vec<Notice>,
    /// What the answer was made with.
    pub provenance: Provenance,
}

/// Units of an answer: UCUM codes.
#[derive(Clone, Debug, Serialize, Deserialize, ToSchema)]
pub struct AnswerUnits {
    /// Unit of E.
    pub e: Cow<'static, str>,
    /// Unit of B.
    pub b: Cow<'static, str>,
}

/// What every frame agrees on.
#[derive(Clone, Debug, Serialize, Deserialize, ToSchema)]
pub struct Invariants {
    /// E² − c²B² in V²/m²; null when no double can hold it.
    pub e2_minus_c2b2: Option<f64>,
    /// E·cB in V²/m²; null when no double can hold it.
    pub e_dot_cb: Option<f64>,
    /// Kind of field: `electric`, `magnetic`, `null` (both invariants vanish), `balanced` (E = cB, not perpendicular) or `zero`.
    #[schema(example = "magnetic")]
    pub kind: Cow<'static, str>,
    /// Self-check: the larger change of the two from question to answer, over the larger E² + c²B². About 1e-16.
    pub residual: f64,
}

/// A chain of steps as one boost, seen in the source axes, and the turn after it.
#[derive(Clone, Debug, Serialize, Deserialize, ToSchema)]
pub struct NetTransformation {
    /// Velocity of the target as seen in the source frame, on the source axes, in the velocity unit of the question.
    #[schema(min_items = 3, max_items = 3)]
    pub velocity: [f64; 3],
    /// The same over c.
    #[schema(min_items = 3, max_items = 3)]
    pub beta: [f64; 3],
    /// Lorentz factor γ.
    pub gamma: f64,
    /// Rapidity artanh β.
    pub rapidity: f64,
    /// The turn after the boost, from the source axes to the target axes (unit quaternion, w ≥ 0).
    pub rotation: Quaternion,
    /// Thomas–Wigner angle in rad: how far the axes turn in a chain of boosts alone; absent otherwise.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub wigner_angle: Option<f64>,
}

/// A unit quaternion w + xi + yj + zk (Hamilton's; Rv = q v q*).
#[derive(Clone, Debug, Serialize, Deserialize, ToSchema)]
pub struct Quaternion {
    /// Real part.
    pub w: f64,
    /// First vector component.
    pub x: f64,
    /// Second vector component.
    pub y: f64,
    /// Third vector component.
    pub z: f64,
}

/// The field tensor of the answer on (ct, x, y, z), in T.
#[derive(Clone, Debug, Serialize, Deserialize, ToSchema)]
pub struct Tensor {
    /// F with both indices up.
    pub contravariant: [[f64; 4]; 4],
    /// F with both indices down.
    pub covariant: [[f64; 4]; 4],
    /// The dual tensor, both indices up.
    pub dual: [[f64; 4]; 4],
    /// `mostly_minus` (+ − − −) or `mostly_plus` (− + + +).
    #[schema(example = "mostly_minus")]
    pub signature: Cow<'static, str>,
}

/// What the field of the answer holds and carries, in vacuum.
#[derive(Clone, Debug, Serialize, Deserialize, ToSchema)]
pub struct Energy {
    /// Energy density in J/m³.
    pub density: f64,
    /// Poynting vector in W/m².
    #[schema(min_items = 3, max_items = 3)]
    pub poynting: [f64; 3],
    /// Maxwell stress in Pa, tension positive.
    pub stress: [[f64; 3]; 3],
}

/// The boost after which E and B are parallel, or only one of them is left.
#[derive(Clone, Debug, Serialize, Deserialize, ToSchema)]
#[serde(untagged)]
pub enum ParallelFrame {
    /// There is one.
    Found(FoundFrame),
    /// There is none.
    None(NoFrame),
}

/// A frame in which E and B are parallel.
#[derive(Clone, Debug, Serialize, Deserialize, ToSchema)]
pub struct FoundFrame {
    /// True.
    #[schema(example = true)]
    pub exists: bool,
    /// Its velocity as seen in the target frame, along E×B, in the velocity unit of the question.
    #[schema(min_items = 3, max_items = 3)]
    pub velocity: [f64; 3],
    /// The speed over c.
    pub beta: f64,
    /// Unit vector of the velocity; zero when nothing need move.
    #[schema(min_items = 3, max_items = 3)]
    pub direction: [f64; 3],
    /// Lorentz factor.
    pub gamma: f64,
    /// Rapidity.
    pub rapidity: f64,
    /// E there, in `units.e`, not negative.
    pub e_parallel: f64,
    /// B there, in `units.b`, with the sign of E·B.
    pub b_parallel: f64,
}

/// No frame has E and B parallel.
#[derive(Clone, Debug, Serialize, Deserialize, ToSchema)]
pub struct NoFrame {
    /// False.
    #[schema(example = false)]
    pub exists: bool,
    /// The reason.
    pub why: Cow<'static, str>,
}

/// A remark.
#[derive(Clone, Debug, Serialize, Deserialize, ToSchema)]
pub struct Notice {
    /// Stable name.
    #[schema(example = "heavy_cancellation")]
    pub code: Cow<'static, str>,
    /// In words.
    pub detail: Cow<'static, str>,
}

/// What the answer was made with.
#[derive(Clone, Debug, Serialize, Deserialize, ToSchema)]
pub struct Provenance {
    /// Program and version.
    #[schema(example = "lodeframe 0.1.0")]
    pub engine: Cow<'static, str>,
    /// Source of the constants.
    #[schema(example = "CODATA 2022")]
    pub constants: Cow<'static, str>,
    /// SHA-256 of the catalogue of frames and its tracks; null without one.
    pub frames: Option<String>,
}

/// Program and version, as in `provenance`.
pub const ENGINE: &str = concat!("lodeframe ", env!("CARGO_PKG_VERSION"));

impl Answer {
    /// Answers a question, trials aside: [`Plan`] makes those.
    ///
    /// # Errors
    /// A component of the answer is larger than the largest double.
    pub fn to(question: &Question) -> Result<Answer, Impossible> {
        let transformed = transform(&question.way, &question.reading, question.target_units())?;
        let asked = |part| question.include.contains(&part);
        let remarks = question.notices.iter().chain(&transformed.notices);
        let mut notices: Vec<Notice> = remarks.map(Notice::from).collect();
        let energy = asked(Part::Energy).then(|| transformed.energy()).flatten();
        if asked(Part::Energy) && energy.is_none() && transformed.is_complete() {
            let detail = "energy, Poynting vector or stress is larger than the largest double";
            notices.push(Notice {
                code: "energy_out_of_range".into(),
                detail: detail.into(),
            });
        }
        let uncertainty = assess::uncertainty(question, &transformed, &mut notices).map(Box::new);
        let unit = |quantity| Cow::Borrowed(question.answer_units.get(quantity).code);
        Ok(Answer {
            e: transformed.e,
            b: transformed.b,
            units: AnswerUnits {
                e: unit(Quantity::E),
                b: unit(Quantity::B),
            },
            uncertainty,
            monte_carlo: None,
            invariants: transformed.invariants.map(|found| Invariants {
                e2_minus_c2b2: found.e2_minus_c2b2,
                e_dot_cb: found.e_dot_cb,
                kind: found.kind.name().into(),
                residual: found.residual,
            }),
            net: net(&question.way, question.units.si(Quantity::Velocity)),
            tensor: asked(Part::Tensor)
                .then(|| tensor(&transformed, question.signature))
                .flatten()
                .map(Box::new),
            matrix: asked(Part::Matrix).then(|| Box::new(rows(question.way.matrix()))),
            energy: energy.map(|found| {
                Box::new(Energy {
                    density: found.density,
                    poynting: found.poynting,
                    stress: found.stress,
                })
            }),
            parallel_frame: asked(Part::ParallelFrame)
                .then(|| parallel_frame(&transformed, question))
                .flatten()
                .map(Box::new),
            notices,
            provenance: Provenance::of(question.catalogue.as_deref()),
        })
    }
}

impl From<&document::Notice> for Notice {
    fn from(notice: &document::Notice) -> Notice {
        Notice {
            code: notice.code.into(),
            detail: notice.detail.clone().into(),
        }
    }
}

impl Provenance {
    /// Of this program and a catalogue, by its hash.
    pub fn of(catalogue: Option<&str>) -> Provenance {
        Provenance {
            engine: ENGINE.into(),
            constants: "CODATA 2022".into(),
            frames: catalogue.map(str::to_owned),
        }
    }
}

/// The net transformation in words of the trade; `unit` is that of velocities.
pub(crate) fn net(way: &Resolved, unit: Scale) -> NetTransformation {
    let Net { boost, turn, .. } = way.net();
    let (velocity, beta, gamma, rapidity) = match boost {
        Some(boost) => {
            let beta = boost.beta();
            let c = Scale::ratio(physics::constants::SPEED_OF_LIGHT, 1).over(unit);
            let c: Dd = c.value(());
            let d = boost.direction.map(|x| x.hi);
            let gamma_beta = boost.stretch.hi.abs() * libm::hypot(libm::hypot(d[0], d[1]), d[2]);
            // γ−1 from γβ: it is exact also where γ itself is 1 to all digits.
            let gamma_less_one = gamma_beta / (boost.gamma.hi + 1.0) * gamma_beta;
            (
                beta.map(|x| (x * c).to_f64() + 0.0),
                beta.map(|x| x.to_f64() + 0.0),
                boost.gamma.to_f64(),
                libm::log1p(gamma_less_one + gamma_beta),
            )
        }
        None => ([0.0; 3], [0.0; 3], 1.0, 0.0),
    };
    let [w, x, y, z] = turn
        .as_ref()
        .map_or([1.0, 0.0, 0.0, 0.0], |turn| turn.rounded());
    let mut steps = way.steps().peekable();
    let boosts_alone =
        steps.peek().is_some() && steps.all(|step| matches!(step.change, Change::Boost(_)));
    let angle = 2.0 * libm::atan2(libm::hypot(libm::hypot(x, y), z), w);
    NetTransformation {
        velocity,
        beta,
        gamma,
        rapidity,
        rotation: Quaternion { w, x, y, z },
        wigner_angle: boosts_alone.then_some(angle),
    }
}

fn tensor(transformed: &Transformed, signature: Signature) -> Option<Tensor> {
    let (e_over_c, b) = transformed.tesla()?;
    let tensor = FieldTensor::new(e_over_c, b, signature);
    Some(Tensor {
        contravariant: rows(tensor.contravariant),
        covariant: rows(tensor.covariant()),
        dual: rows(tensor.dual().contravariant),
        signature: match signature {
            Signature::MostlyMinus => "mostly_minus".into(),
            Signature::MostlyPlus => "mostly_plus".into(),
        },
    })
}

fn parallel_frame(transformed: &Transformed, question: &Question) -> Option<ParallelFrame> {
    let Some(found) = transformed.parallel_frame()? else {
        let why = "the field is null: E and cB are equal and perpendicular in every frame";
        return Some(ParallelFrame::None(NoFrame {
            exists: false,
            why: why.into(),
        }));
    };
    let units = question.target_units();
    let velocity_unit = question.units.si(Quantity::Velocity).to_f64();
    Some(ParallelFrame::Found(FoundFrame {
        exists: true,
        velocity: found.velocity.map(|x| x / velocity_unit),
        beta: found.speed,
        direction: found.direction,
        gamma: found.gamma,
        rapidity: found.rapidity,
        e_parallel: found.e_parallel / units.e.to_f64(),
        b_parallel: found.b_parallel / units.b.to_f64(),
    }))
}

/// The rows of a matrix.
pub(crate) fn rows(matrix: nalgebra::Matrix4<f64>) -> [[f64; 4]; 4] {
    // Adding zero turns −0 into 0.
    std::array::from_fn(|i| std::array::from_fn(|j| matrix[(i, j)] + 0.0))
}
