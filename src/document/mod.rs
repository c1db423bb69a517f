//! A question as a tree of values that knows its places and its repeated names, whatever
//! notation it came in (JSON body, URL query, catalogue file), and the faults found in it.

mod code;
mod fault;
mod node;
mod notice;
mod read;
mod toml;
mod url;

pub use code::Code;
pub use fault::{Fault, Path, Segment};
pub use node::{Node, Place};
pub use notice::Notice;
pub use read::{Faults, Members};
pub use toml::{SyntaxFault, Toml};
pub use url::from_query;
