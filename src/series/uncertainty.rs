//! Standard uncertainties of rows: those read, and those of the answer in their place.

use crate::chain;
use crate::document::{Code, Fault, Faults, Node, Place};
use crate::frames::Passage;
use crate::physics::covariance::Covariance;
use crate::physics::propagation::Inputs;
use crate::physics::resolved::Resolved;
use crate::physics::uncertain::UncertainReading;
use crate::physics::uncertainty::{Standard, depends_on_missing};
use crate::transform::{Transformed, transform};

use super::Series;
use super::block::Block;
use super::names::COLUMNS;

/// The covariance of a row of a table, in which uncertainties of E, of B, or of both stand; NaN is
/// a missing one. `None` when all are missing.
///
/// # Errors
/// One is negative, or missing beside a component that is given.
pub(super) fn of_columns(
    field: &[f64; 6],
    standard: &[f64; 6],
    has: [bool; 2],
) -> Result<Option<Covariance<6>>, Vec<Fault>> {
    if standard.iter().all(|x| x.is_nan()) {
        return Ok(None);
    }
    let mut faults = Faults::default();
    let mut known = [0.0; 6];
    for i in (0..6).filter(|i| has[i / 3]) {
        // The names of uncertainties stand behind those of the field, in the same order.
        let (name, _) = COLUMNS[7 + i];
        let place = Place::ROOT.field(name);
        if !standard[i].is_nan() {
            known[i] = standard[i];
            if let Err(flaw) = Covariance::of_standard([standard[i]]) {
                chain::uncertainty::note(&place, &flaw, &mut faults);
            }
        } else if !field[i].is_nan() {
            let detail = "this component is given, but its standard uncertainty is missing; 0 says \
                          that it is exact";
            faults.note(&place, Code::MissingField, detail);
        }
    }
    if !faults.0.is_empty() {
        for path in faults.0.iter_mut().filter_map(|fault| fault.path.as_mut()) {
            // The column alone: it holds no list.
            path.0.truncate(1);
        }
        return Err(faults.0);
    }
    Ok(Covariance::of_standard(known).ok())
}

/// Refuses errors of readings, which each row says for itself.
pub(super) fn of_query(node: Option<&Node>, faults: &mut Faults) {
    let place = Place::ROOT.field("uncertainty");
    let members = node.and_then(|node| Faults::default().any_members(node, &place, ""));
    let given = |name| members.is_some_and(|members| members.get(name).is_some());
    for name in ["e", "b", "covariance"]
        .into_iter()
        .filter(|name| given(name))
    {
        let detail = format!("the uncertainty {name:?} of a reading stands in each row");
        faults.note(&place.field(name), Code::UnknownField, detail);
    }
}

/// Whether a row says how uncertain its reading or a step of its own way is.
pub(super) fn is_stated(row: &Node) -> bool {
    fn somewhere(node: &Node) -> bool {
        match node {
            Node::List(items) => items.iter().any(somewhere),
            Node::Object(members) => members
                .iter()
                .any(|(name, node)| name == "uncertainty" || somewhere(node)),
            _ => false,
        }
    }
    let Node::Object(members) = row else {
        return false;
    };
    members.iter().any(|(name, node)| match name.as_ref() {
        "uncertainty" => true,
        "boost" | "rotation" | "steps" => somewhere(node),
        _ => false,
    })
}

/// Standard uncertainties of an answer; NaN where there is none.
pub(super) fn of_answer(
    way: &Resolved,
    answer: &Transformed,
    reading: Option<&UncertainReading>,
) -> [f64; 6] {
    let inputs = Inputs {
        way,
        field: &answer.question,
        reading,
    };
    let mut standard = inputs.propagate(Standard(answer.units));
    let hidden = if answer.is_complete() {
        [false; 6]
    } else {
        depends_on_missing(&inputs, answer.missing)
    };
    for (i, value) in answer.e.iter().chain(&answer.b).enumerate() {
        if value.is_none() || hidden[i] || !standard[i].is_finite() {
            standard[i] = f64::NAN;
        }
    }
    standard
}

impl Block {
    /// Finds the standard uncertainties of the answers to the rows that have some: of all of them
    /// if the query states those of its way. What makes a row bad is found when it is solved.
    pub(super) fn find_uncertainties(&mut self, series: &Series) {
        if self.uncertain.is_empty() && !series.uncertain {
            return;
        }
        let mut walker = series.walker();
        let rows = series.way.rows(series.setting());
        let calibration = [series.sensor.e, series.sensor.b].map(|channel| channel?.uncertainty);
        let mut own = std::mem::take(&mut self.uncertain).into_iter().peekable();
        for row in 0..self.rows {
            let field = own.next_if(|(own, _)| *own == row).map(|(_, field)| field);
            let is_bad = self.bad.binary_search_by_key(&row, |(bad, _)| *bad).is_ok();
            if is_bad || !(series.uncertain || field.is_some()) {
                continue;
            }
            let Ok(Some(Passage { way, .. })) = self.passage(row, series, &rows, walker.as_mut())
            else {
                continue;
            };
            let Ok(answer) = transform(&way, &self.reading(row, series), series.target) else {
                continue;
            };
            let reading = field.map(|field| UncertainReading { field, calibration });
            let standard = of_answer(&way, &answer, reading.as_ref());
            self.standard.push((row, standard));
        }
    }
}
