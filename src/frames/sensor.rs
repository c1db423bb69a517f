//! Sensors: leaves of the tree, whose raw numbers become fields by matrix · (raw − offset).

use crate::document::{Code, Faults, Node, Place};
use crate::physics::Dd;
use crate::physics::real::{Real, cross, dot, vector};
use crate::physics::reduction::Calibration;
use crate::physics::uncertain::UncertainCalibration;

/// How a sensor is mounted and what it reads.
#[derive(Clone, Copy, Debug, Default, PartialEq)]
pub struct Sensor {
    /// What it reads of E; `None` when its E is the field itself.
    pub e: Option<Channel>,
    /// What it reads of B.
    pub b: Option<Channel>,
}

/// One vector that a sensor reads.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Channel {
    /// From raw numbers to the unit of the catalogue.
    pub calibration: Calibration,
    /// Standard uncertainties of the calibration; `None` when it is exact.
    pub uncertainty: Option<UncertainCalibration>,
    /// Which of x, y, z it has.
    pub axes: [bool; 3],
}

/// A determinant this small beside the product of the lengths of the rows is none.
const SINGULAR: f64 = 1e-12;

const AXES: [(&str, usize); 3] = [("x", 0), ("y", 1), ("z", 2)];

impl Sensor {
    /// Reads the table of a sensor.
    pub fn read(node: &Node, place: &Place, faults: &mut Faults) -> Option<Sensor> {
        let members = faults.members(node, place, &["e", "b"])?;
        let mut channel = |name| match members.get(name) {
            Some(node) => Channel::read(node, &place.field(name), faults).map(Some),
            None => Some(None),
        };
        let sensor = Sensor {
            e: channel("e")?,
            b: channel("b")?,
        };
        if sensor == Sensor::default() {
            let detail = "a sensor reads \"e\", \"b\" or both; an empty table such as b = {} says \
                          that it reads the field itself";
            faults.note(place, Code::MissingField, detail);
        }
        Some(sensor)
    }
}

impl Channel {
    fn read(node: &Node, place: &Place, faults: &mut Faults) -> Option<Channel> {
        let known = ["matrix", "offset", "uncertainty", "axes"];
        let members = faults.members(node, place, &known)?;
        let identity = [[1.0, 0.0, 0.0], [0.0, 1.0, 0.0], [0.0, 0.0, 1.0]];
        let matrix = members.get("matrix").map_or(Some(identity), |node| {
            faults.matrix(node, &place.field("matrix"))
        });
        let offset = members.get("offset").map_or(Some([0.0; 3]), |node| {
            faults.vector(node, &place.field("offset"))
        });
        let axes = members.get("axes").map_or(Some([true; 3]), |node| {
            axes(node, &place.field("axes"), faults)
        });
        let uncertainty = members.get("uncertainty").map_or(Some(None), |node| {
            uncertainty(node, &place.field("uncertainty"), faults).map(Some)
        });
        let channel = Channel {
            calibration: Calibration {
                matrix: matrix?,
                offset: offset?,
            },
            uncertainty: uncertainty?,
            axes: axes?,
        };
        channel.check(&place.field("matrix"), faults);
        Some(channel)
    }

    /// The matrix has an inverse on the axes that the sensor has, and uses no other.
    fn check(&self, place: &Place, faults: &mut Faults) {
        let mut m = self.calibration.matrix;
        for (name, j) in AXES.into_iter().filter(|(_, j)| !self.axes[*j]) {
            if (0..3).any(|i| self.axes[i] && m[i][j] != 0.0) {
                let detail = format!(
                    "column {} mixes in {name}, which is not among the axes of the sensor; its \
                     elements in the rows of the other axes must be 0",
                    j + 1
                );
                faults.note(place, Code::ConflictingFields, detail);
            }
            // What is not measured does not count in the determinant.
            m[j] = std::array::from_fn(|k| if k == j { 1.0 } else { 0.0 });
        }
        let rows = m.map(|row| vector::<Dd>(row, ()));
        let size: f64 = m
            .iter()
            .map(|r| libm::hypot(libm::hypot(r[0], r[1]), r[2]))
            .product();
        let determinant = dot(&rows[0], &cross(&rows[1], &rows[2])).to_f64();
        // An overflow may have left NaN.
        if determinant.is_nan() || determinant.abs() <= SINGULAR * size {
            let detail = format!(
                "the matrix has determinant {determinant:e}: different fields would read the \
                 same; check for a row or column given twice or left zero"
            );
            faults.note(place, Code::SingularMatrix, detail);
        }
    }
}

fn axes(node: &Node, place: &Place, faults: &mut Faults) -> Option<[bool; 3]> {
    let mut has = [false; 3];
    let items = faults.list(node, place)?;
    for (i, item) in items.iter().enumerate() {
        let place = place.index(i);
        let axis = faults.choice(item, &place, &AXES)?;
        if has[axis] {
            faults.note(&place, Code::RepeatedField, "this axis is named twice");
        }
        has[axis] = true;
    }
    if has == [false; 3] {
        faults.note(
            place,
            Code::WrongLength,
            "a sensor has at least one of x, y, z",
        );
    }
    Some(has)
}

fn uncertainty(node: &Node, place: &Place, faults: &mut Faults) -> Option<UncertainCalibration> {
    let members = faults.members(node, place, &["matrix", "offset"])?;
    let matrix = members.get("matrix").map_or(Some([[0.0; 3]; 3]), |node| {
        faults.matrix(node, &place.field("matrix"))
    });
    let offset = members.get("offset").map_or(Some([0.0; 3]), |node| {
        faults.vector(node, &place.field("offset"))
    });
    let (matrix, offset) = (matrix?, offset?);
    if matrix
        .as_flattened()
        .iter()
        .chain(&offset)
        .any(|sigma| *sigma < 0.0)
    {
        let detail = "a standard uncertainty is 0 or positive";
        faults.note(place, Code::NegativeUncertainty, detail);
    }
    Some(UncertainCalibration { matrix, offset })
}
