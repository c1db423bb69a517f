//! The names that columns and members of rows have, and what they stand for.

/// What a column holds. Components count from 0, in the order x, y, z (w, x, y, z of a
/// quaternion).
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(super) enum Role {
    /// When the reading was taken.
    Time,
    /// A component of E (0 to 2) or B (3 to 5).
    Field(usize),
    /// The standard uncertainty of one.
    Uncertainty(usize),
    /// A component of the velocity of the row's own motion.
    Velocity(usize),
    /// A component of the quaternion of the row's own attitude.
    Quaternion(usize),
    /// The angle of the row's own turn.
    Angle,
}

/// The columns of a table.
pub(super) const COLUMNS: [(&str, Role); 21] = [
    ("time", Role::Time),
    ("ex", Role::Field(0)),
    ("ey", Role::Field(1)),
    ("ez", Role::Field(2)),
    ("bx", Role::Field(3)),
    ("by", Role::Field(4)),
    ("bz", Role::Field(5)),
    ("u_ex", Role::Uncertainty(0)),
    ("u_ey", Role::Uncertainty(1)),
    ("u_ez", Role::Uncertainty(2)),
    ("u_bx", Role::Uncertainty(3)),
    ("u_by", Role::Uncertainty(4)),
    ("u_bz", Role::Uncertainty(5)),
    ("vx", Role::Velocity(0)),
    ("vy", Role::Velocity(1)),
    ("vz", Role::Velocity(2)),
    ("qw", Role::Quaternion(0)),
    ("qx", Role::Quaternion(1)),
    ("qy", Role::Quaternion(2)),
    ("qz", Role::Quaternion(3)),
    ("angle", Role::Angle),
];

/// The members of an NDJSON row: the reading, and its own way.
pub(super) const MEMBERS: [&str; 11] = [
    "e",
    "b",
    "time",
    "uncertainty",
    "velocity",
    "rotation",
    "angle",
    "boost",
    "steps",
    "from",
    "to",
];

/// What a question says once for all rows, in the query.
const IN_QUERY: [&str; 7] = [
    "units",
    "answer_units",
    "assume",
    "include",
    "signature",
    "monte_carlo",
    "inverse",
];

/// The column of this name.
pub(super) fn role(name: &str) -> Option<Role> {
    let found = COLUMNS.iter().find(|(own, _)| *own == name);
    found.map(|(_, role)| *role)
}

/// Why a name that is not among `ours` may not pass through, if so: it is so like one of ours
/// that it looks like a slip, which would silently change the answer. `notices` says whether the
/// answer has some.
pub(super) fn slip(name: &str, table: bool, notices: bool) -> Option<String> {
    let lower = name.trim().to_ascii_lowercase();
    if lower == "problem" || (notices && lower == "notices") {
        return Some(format!(
            "{name:?} is a name of the answer; give the column another one"
        ));
    }
    let column = COLUMNS.iter().any(|(own, _)| *own == lower);
    let member = MEMBERS.contains(&&*lower);
    let ours = if table { column } else { member };
    if ours {
        return Some(format!(
            "{name:?} differs from {lower:?} only in case or spaces; write {lower:?} if it is \
             meant, or give it another name"
        ));
    }
    if IN_QUERY.contains(&&*lower) {
        return Some(format!(
            "{name:?} is said once for all rows, in the query of the URL"
        ));
    }
    // `from` and `to` are ways of a row only in JSON; in a table they may be anything.
    if table && member && !["from", "to"].contains(&&*lower) {
        return Some(format!(
            "{name:?} belongs to NDJSON rows; a table has a column for each component, such as \
             ex ey ez, vx vy vz, qw qx qy qz"
        ));
    }
    (!table && column).then(|| {
        format!(
            "{name:?} is a column of a table; an NDJSON row has lists: e, b, velocity, and \
             rotation as in a single reading"
        )
    })
}
