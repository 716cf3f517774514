//! Exact orbits.
//!
//! - [`line`]: an oriented line in table coordinates, at three levels of arithmetic.
//! - [`trace`]: following one orbit from an exact start.
//! - [`ensemble`]: many orbits from random exact starts.
//! - [`direction`]: all orbits in one direction.
//! - [`periodic`]: all periodic words up to a length.

pub mod direction;
pub mod ensemble;
pub mod line;
pub mod periodic;
pub mod trace;

pub use trace::{Start, Step, TraceTables, Tracer};
