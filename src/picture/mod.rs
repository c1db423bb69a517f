//! SVG pictures of answers, without scripts, to be embedded by URL.
//!
//! They are drawn to be read at a width of 400 pixels, on paper, on a light or a dark screen, and
//! without colour: what differs in colour differs in dashes, marks or labels too.

mod band;
mod draw;
mod mark;
mod motion;
mod number;
mod plot;
mod reading;
mod shown;
mod space;
mod style;
mod sweep;
mod ticks;

pub use reading::reading;
pub use style::STYLE;
pub use sweep::sweep;
