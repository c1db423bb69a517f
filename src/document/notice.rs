//! A remark beside an answer.

/// A remark that a careful colleague would make.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Notice {
    /// Stable name.
    pub code: &'static str,
    /// In words.
    pub detail: String,
}
