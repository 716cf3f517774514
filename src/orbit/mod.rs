//! Exact orbits.
//!
//! - [`line`](mod@line): an oriented line in table coordinates, at three levels of arithmetic.
//! - [`trace`]: following one orbit from an exact start.
//! - [`ensemble`]: many orbits from random exact starts.

pub mod ensemble;
pub mod line;
pub mod trace;

pub use trace::{Start, Step, TraceTables, Tracer};
