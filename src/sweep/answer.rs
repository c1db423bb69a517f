//! A sweep as it is answered: columns against the quantity that runs.

use serde::{Deserialize, Serialize};
use utoipa::ToSchema;

use super::{Over, Sweep};
use crate::answer::{Answer, AnswerUnits, Measure, Notice, Provenance};
use crate::chain;
use crate::document::{Fault, Place};
use crate::question::{Deployment, Question};
use crate::units::Quantity;

/// The field in the target frame, as one quantity of the way runs through a range.
#[derive(Clone, Debug, Serialize, Deserialize, ToSchema)]
pub struct Swept {
    /// The quantity that runs: `beta`, `rapidity` or `angle`.
    #[schema(example = "beta")]
    pub over: String,
    /// Its unit (UCUM; 1 for a pure number).
    #[schema(example = "1")]
    pub over_unit: String,
    /// Its values.
    pub values: Vec<f64>,
    /// Units of `e` and `b`.
    pub units: AnswerUnits,
    /// Electric field E' at each value, in `units.e`.
    pub e: Columns,
    /// Magnetic flux density B' at each value, in `units.b`.
    pub b: Columns,
    /// Standard uncertainties of `e` and `b` at each value, when anything in the question is uncertain.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub uncertainty: Option<UncertainColumns>,
    /// Remarks that a careful colleague would make, each once, with the first value that it is about.
    pub notices: Vec<Notice>,
    /// What the answer was made with.
    pub provenance: Provenance,
}

/// Standard uncertainties at each value of a sweep.
#[derive(Clone, Debug, Default, Serialize, Deserialize, ToSchema)]
pub struct UncertainColumns {
    /// Of E', in `units.e`.
    pub e: Columns,
    /// Of B', in `units.b`.
    pub b: Columns,
}

/// A vector at each value of a sweep; null where it depends on something missing.
#[derive(Clone, Debug, Default, Serialize, Deserialize, ToSchema)]
pub struct Columns {
    /// Components along x.
    pub x: Vec<Option<f64>>,
    /// Components along y.
    pub y: Vec<Option<f64>>,
    /// Components along z.
    pub z: Vec<Option<f64>>,
    /// Lengths of the vector.
    pub magnitude: Vec<Option<f64>>,
}

impl Columns {
    /// The columns with their names.
    pub fn named(&self) -> [(&'static str, &[Option<f64>]); 4] {
        [
            ("x", &self.x),
            ("y", &self.y),
            ("z", &self.z),
            ("magnitude", &self.magnitude),
        ]
    }

    fn push(&mut self, v: [Option<f64>; 3]) {
        let length = match v {
            [Some(x), Some(y), Some(z)] => Some(libm::hypot(libm::hypot(x, y), z)),
            _ => None,
        };
        self.push_with(v, length.filter(|length| length.is_finite()));
    }

    fn push_with(&mut self, v: [Option<f64>; 3], magnitude: Option<f64>) {
        self.x.push(v[0]);
        self.y.push(v[1]);
        self.z.push(v[2]);
        self.magnitude.push(magnitude);
    }
}

impl Sweep {
    /// Asks every question of the sweep.
    ///
    /// # Errors
    /// At some value a component of the answer is larger than the largest double.
    pub fn answer(&self, deployment: &Deployment) -> Result<Swept, Vec<Fault>> {
        let (mut e, mut b) = (Columns::default(), Columns::default());
        let mut uncertainty: Option<UncertainColumns> = None;
        let mut notices: Vec<Notice> = Vec::new();
        let mut tree = self.tree.clone();
        let mut provenance = None;
        for value in &self.values {
            let here = format!("{} = {value}", self.over.name());
            self.gap.fill(&mut tree, *value);
            let question = Question::read(&tree, deployment)?;
            let answer = Answer::to(&question).map_err(|impossible| {
                let place = Place::ROOT.field("answer_units").path();
                let detail = format!("at {here}: {impossible}");
                vec![Fault::at(&place, chain::code(&impossible), detail)]
            })?;
            e.push(answer.e);
            b.push(answer.b);
            if let Some(found) = &answer.uncertainty {
                let of = |measure: &Option<Measure>| measure.as_ref().map(|m| m.uncertainty);
                let columns = uncertainty.get_or_insert_default();
                columns.e.push_with(found.e, of(&found.magnitudes.e));
                columns.b.push_with(found.b, of(&found.magnitudes.b));
            }
            for notice in answer.notices {
                if notices.iter().all(|known| known.code != notice.code) {
                    let detail = format!("at {here}: {}", notice.detail);
                    notices.push(Notice {
                        detail: detail.into(),
                        ..notice
                    });
                }
            }
            provenance = Some(answer.provenance);
        }
        let first = &self.first;
        Ok(Swept {
            over: self.over.name().into(),
            over_unit: match self.over {
                Over::Beta | Over::Rapidity => "1".into(),
                Over::Angle => first.units.get(Quantity::Angle).code.into(),
            },
            values: self.values.clone(),
            units: AnswerUnits {
                e: first.answer_units.get(Quantity::E).code.into(),
                b: first.answer_units.get(Quantity::B).code.into(),
            },
            e,
            b,
            uncertainty,
            notices,
            provenance: provenance.expect("a sweep has at least two points"),
        })
    }
}

impl Swept {
    /// The columns as CSV (RFC 4180): the quantity that runs, the components of E' and B' and
    /// their lengths, then their standard uncertainties. What is missing is empty.
    pub fn csv(&self) -> String {
        let mut fields = vec![("e", &self.e), ("b", &self.b)];
        if let Some(uncertainty) = &self.uncertainty {
            fields.extend([("u_e", &uncertainty.e), ("u_b", &uncertainty.b)]);
        }
        let columns = fields.into_iter().flat_map(|(field, columns)| {
            let named = columns.named();
            named.map(|(name, values)| match name {
                "magnitude" => (format!("{field}_magnitude"), values),
                _ => (format!("{field}{name}"), values),
            })
        });
        let columns: Vec<_> = columns.collect();
        let mut text = self.over.clone();
        for (name, _) in &columns {
            text.push(',');
            text.push_str(name);
        }
        text.push_str("\r\n");
        for (i, value) in self.values.iter().enumerate() {
            text.push_str(&number(*value));
            for (_, values) in &columns {
                text.push(',');
                text.push_str(&values[i].map(number).unwrap_or_default());
            }
            text.push_str("\r\n");
        }
        text
    }
}

/// The same text as in JSON.
fn number(value: f64) -> String {
    serde_json::to_string(&value).expect("a finite number has a JSON form")
}
