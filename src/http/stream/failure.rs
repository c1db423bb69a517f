//! Why a series ends before its end, and what is said of it.

use std::time::Duration;

use crate::{
    document::{Code, Fault},
    series::Refusal,
};

/// Why a series ends before its end.
pub(super) enum Failure {
    /// The rows cannot be understood.
    Refused(Refusal),
    /// Nothing was sent, or nothing read, for too long.
    Idle,
    /// The body broke off.
    Broken,
    /// Nobody reads the answer any more.
    Gone,
    /// The service was told to stop, and its grace is over.
    Ending,
    /// A fault of the service.
    Panicked,
}

impl Failure {
    /// What is said of it, in a problem or in the last row.
    pub(super) fn refusal(self, idle: Duration) -> Refusal {
        let fault = match self {
            Failure::Refused(refusal) => return refusal,
            Failure::Idle => Fault::whole(
                Code::RequestTimeout,
                format!(
                    "for {} s no row came, or none of the answer was read; send rows without such \
                     pauses, and read while you send",
                    idle.as_secs_f64()
                ),
            ),
            Failure::Ending => Fault::whole(
                Code::Stopping,
                "the service was told to stop; send the rows that have no answer again",
            ),
            Failure::Panicked => Fault::whole(
                Code::Internal,
                "the service failed in a way its authors did not foresee; the rows were not the \
                 cause. Send those that have no answer again",
            ),
            Failure::Broken | Failure::Gone => Fault::whole(
                Code::Syntax,
                "the body broke off, its chunks were not well-formed, or it is not compressed as its \
                 Content-Encoding says",
            ),
        };
        Refusal {
            faults: vec![fault],
        }
    }
}
