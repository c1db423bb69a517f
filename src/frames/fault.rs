//! What is wrong with a catalogue, and where.

use std::fmt;
use std::path::PathBuf;

use crate::document::Code;

/// One fault of a catalogue.
#[derive(Clone, Debug, PartialEq)]
pub struct LoadFault {
    /// The file: the catalogue, or a track it names.
    pub file: PathBuf,
    /// The line in it, from 1; `None` for the file as a whole.
    pub line: Option<u64>,
    /// The frame; `None` for the catalogue as a whole.
    pub frame: Option<String>,
    /// Which problem it is, and what was wrong.
    pub reason: Reason,
}

impl fmt::Display for LoadFault {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{}:", self.file.display())?;
        if let Some(line) = self.line {
            write!(f, "{line}:")?;
        }
        if let Some(frame) = &self.frame {
            write!(f, " frame {frame:?}:")?;
        }
        write!(f, " {} [{}]", self.reason.detail, self.reason.code)
    }
}

/// Which problem it is, and what was wrong.
#[derive(Clone, Debug, PartialEq)]
pub struct Reason {
    /// Which problem it is.
    pub code: Code,
    /// What was wrong and what would be right.
    pub detail: String,
}

impl Reason {
    /// A reason in words.
    pub fn new(code: Code, detail: impl Into<String>) -> Reason {
        Reason {
            code,
            detail: detail.into(),
        }
    }

    pub(super) fn repeated_time(time: String) -> Reason {
        let detail = format!("the time {time} is that of the row before; leave one of them out");
        Reason::new(Code::RepeatedTime, detail)
    }

    pub(super) fn unsorted_times(time: String, before: String) -> Reason {
        let detail =
            format!("the time {time} is before {before}, that of the row before; sort the rows");
        Reason::new(Code::UnsortedTimes, detail)
    }

    pub(super) fn gap_too_long(gap: f64, limit: f64) -> Reason {
        let detail = format!(
            "{gap} s lie between this row and the one before; max_gap allows {limit} s. Give more \
             rows, or a larger max_gap if the motion may be interpolated over that time"
        );
        Reason::new(Code::GapTooLong, detail)
    }

    pub(super) fn attitude_jump(degrees: f64) -> Reason {
        let detail = format!(
            "the attitude is {degrees:.1} degrees from that of the row before; past 90 the way \
             between them is a guess. Give more rows, or `turning` for a steady spin"
        );
        Reason::new(Code::AttitudeJump, detail)
    }
}
