//! All integration tests, in one binary; each module is named after what it tests.

mod http;
mod layering;
mod middleware;
mod openapi;
mod problems;
mod start;
mod support;
