//! All integration tests in one binary (two cores link one file faster than many); each module is
//! named after what it tests.

mod access;
mod arithmetic;
mod arrow;
mod arrow_packed;
mod block;
mod corpus;
mod covariance;
mod frames;
mod http;
mod incomplete;
mod laws;
mod layering;
mod life;
mod middleware;
mod monte_carlo;
mod openapi;
mod picture;
mod pool;
mod problems;
mod schema;
mod series;
mod series_notices;
mod series_numbers;
mod series_uncertainty;
mod start;
mod stream;
mod stream_coding;
mod support;
mod sweep;
mod times;
mod uncertainty;
mod workers;
