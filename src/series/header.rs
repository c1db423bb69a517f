//! The header of a table: what each column is, and every slip in it refused before the first row.

use crate::document::{Code, Fault, Path};

use super::names::{self, COLUMNS, Role};
use super::way::{Taken, Way};
use super::{Format, Series};

/// The columns of a table, in their order.
#[derive(Clone, Debug)]
pub(super) struct Header {
    pub(super) names: Vec<String>,
    pub(super) columns: Vec<Column>,
    /// Columns of the answer that the question has not, before `problem`.
    pub(super) added: Added,
}

/// What answers have beside the columns of the question and `problem`.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub(super) struct Added {
    /// Uncertainties of E, and of B.
    pub(super) uncertainty: [bool; 2],
    /// Codes of notices.
    pub(super) notices: bool,
}

impl Added {
    /// Their numbers: uncertainties (6 to 11).
    pub(super) fn numbers(self) -> impl Iterator<Item = usize> {
        (6..12).filter(move |i| self.uncertainty[i / 3 - 2])
    }

    /// Their names, in order, with that of the problem, which comes last.
    pub(super) fn names(self) -> impl Iterator<Item = &'static str> {
        let numbers = self.numbers().map(|i| COLUMNS[1 + i].0);
        let notices = self.notices.then_some("notices");
        numbers.chain(notices).chain(["problem"])
    }
}

/// What a column is for.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) struct Column {
    /// What its values count for, if they do.
    pub(super) role: Option<Role>,
    /// The cell in which it goes along to another format, if it does.
    pub(super) cell: Option<usize>,
}

impl Header {
    /// Looks at the names of the columns. `cells` names those that go along to another format.
    ///
    /// # Errors
    /// Every fault found in them.
    pub(super) fn read(
        names: Vec<String>,
        series: &Series,
        cells: &[String],
    ) -> Result<Header, Vec<Fault>> {
        let mut faults = Vec::new();
        for (i, name) in names.iter().enumerate() {
            match names::role(name) {
                Some(_) if names[..i].contains(name) => {
                    let detail = format!("there are two columns {name:?}");
                    faults.push(at(name, Code::RepeatedField, detail));
                }
                Some(_) => {}
                None => {
                    if let Some(slip) = names::slip(name, true, series.notices(Format::Csv)) {
                        faults.push(at(name, Code::UnknownField, slip));
                    }
                }
            }
        }
        let has = |name: &str| names.iter().any(|own| own == name);
        groups(&has, series, &mut faults);
        for name in series.keep.iter().filter(|name| !has(name)) {
            let detail = format!("keep names {name:?}, and there is no such column");
            faults.push(at(name, Code::MissingField, detail));
        }
        if !faults.is_empty() {
            return Err(faults);
        }
        let columns = names.iter().map(|name| Column {
            role: names::role(name).filter(|role| needed(*role, series)),
            cell: cells.iter().position(|cell| cell == name),
        });
        let columns = columns.collect();
        let mut header = Header {
            names,
            columns,
            added: Added::default(),
        };
        let adds = |first| {
            let has = |i| header.place_of(i).is_some();
            series.uncertain && has(first) && !has(6 + first)
        };
        header.added = Added {
            uncertainty: [0, 3].map(adds),
            notices: series.notices(Format::Csv),
        };
        Ok(header)
    }

    /// The numbers of the answer, in the order of their columns: components of the field (0 to 5)
    /// and their uncertainties (6 to 11).
    pub(super) fn answers_in_order(&self) -> Vec<usize> {
        let answers = self.columns.iter().filter_map(|column| match column.role {
            Some(Role::Field(i)) => Some(i),
            Some(Role::Uncertainty(i)) => Some(6 + i),
            _ => None,
        });
        answers.collect()
    }

    /// The column of a component of the field (0 to 5) or of its uncertainty (6 to 11).
    pub(super) fn place_of(&self, i: usize) -> Option<usize> {
        let wanted = if i < 6 {
            Role::Field(i)
        } else {
            Role::Uncertainty(i - 6)
        };
        let mut columns = self.columns.iter();
        columns.position(|column| column.role == Some(wanted))
    }

    /// Whether there are uncertainties of E, and of B.
    pub(super) fn uncertain(&self) -> [bool; 2] {
        [6, 9].map(|first| self.place_of(first).is_some())
    }
}

/// Whether the numbers of a column count.
fn needed(role: Role, series: &Series) -> bool {
    match role {
        Role::Time => series.takes_time(),
        Role::Angle => series.takes(Taken::Angle),
        _ => true,
    }
}

/// Refuses columns that belong together and do not stand together, are missing, or would be
/// left aside without a word.
fn groups(has: &dyn Fn(&str) -> bool, series: &Series, faults: &mut Vec<Fault>) {
    let own = matches!(series.way, Way::Own { .. });
    let all = |of: &dyn Fn(Role) -> bool| -> Vec<&'static str> {
        let columns = COLUMNS.iter().filter(|(_, role)| of(*role));
        columns.map(|(name, _)| *name).collect()
    };
    let e = all(&|role| matches!(role, Role::Field(0..3)));
    let b = all(&|role| matches!(role, Role::Field(3..6)));
    let velocity = all(&|role| matches!(role, Role::Velocity(_)));
    let attitude = all(&|role| matches!(role, Role::Quaternion(_)));
    let some = |columns: &[&str]| columns.iter().any(|name| has(name));
    let moves = own && some(&velocity);
    let turns = own && some(&attitude);
    let both = series.needs_both() || moves;
    let neither = !some(&e) && !some(&b);
    let u_e = all(&|role| matches!(role, Role::Uncertainty(0..3)));
    let u_b = all(&|role| matches!(role, Role::Uncertainty(3..6)));
    let wanted = [
        (&e, both || neither || some(&u_e), "E is needed"),
        (&b, both || neither || some(&u_b), "B is needed"),
        (
            &velocity,
            series.takes(Taken::Velocity),
            "the way says \"row\" for a velocity",
        ),
        (
            &attitude,
            series.takes(Taken::Quaternion),
            "the way says \"row\" for a quaternion",
        ),
        (&u_e, false, ""),
        (&u_b, false, ""),
    ];
    for (columns, wanted, why) in wanted {
        let missing: Vec<&str> = columns.iter().copied().filter(|name| !has(name)).collect();
        if missing.is_empty() || !(wanted || some(columns)) {
            continue;
        }
        let why = if some(columns) {
            "they belong together"
        } else {
            why
        };
        let detail = format!(
            "the columns {} are needed, {why}; {} missing. Leave cells empty where nothing was \
             measured",
            columns.join(", "),
            match &missing[..] {
                [one] => format!("{one} is"),
                many => format!("{} are", many.join(", ")),
            }
        );
        faults.push(at(missing[0], Code::MissingField, detail));
    }
    if series.takes(Taken::Angle) && !has("angle") {
        let detail = "the way says \"row\" for an angle, and there is no column \"angle\"";
        faults.push(at("angle", Code::MissingField, detail));
    }
    if series.takes_time() && !has("time") {
        let detail = "the way changes with time, and there is no column \"time\"";
        faults.push(at("time", Code::MissingField, detail));
    }
    if own && moves == turns {
        let (code, detail) = if moves {
            let detail = "rows bring a velocity and an attitude, and nothing says which comes \
                          first; give the way in the query, such as steps=[{\"rotate\":\
                          {\"quaternion\":\"row\"}},{\"boost\":{\"velocity\":\"row\"}}]";
            (Code::ConflictingFields, detail)
        } else {
            let detail = "there is no way to the target: give one in the query, or let each row \
                          bring a velocity (vx, vy, vz) or an attitude (qw, qx, qy, qz)";
            (Code::MissingField, detail)
        };
        faults.push(Fault::whole(code, detail));
    }
    let used = |role| match role {
        Role::Velocity(_) => own || series.takes(Taken::Velocity),
        Role::Quaternion(_) => own || series.takes(Taken::Quaternion),
        Role::Angle => series.takes(Taken::Angle),
        _ => true,
    };
    for (name, _) in COLUMNS
        .iter()
        .filter(|(name, role)| has(name) && !used(*role))
    {
        let detail = format!(
            "{name:?} is a motion of the row, which the way of the query does not use: say \"row\" \
             there, leave out the way of the query, or give the column another name"
        );
        faults.push(at(name, Code::ConflictingFields, detail));
    }
}

fn at(name: &str, code: Code, detail: impl Into<String>) -> Fault {
    Fault::at(&Path::default().field(name), code, detail)
}
