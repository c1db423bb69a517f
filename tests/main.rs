//! All integration tests in one binary: two cores link one file faster than many.

mod arithmetic;
mod frames;
mod laws;
mod schema;
