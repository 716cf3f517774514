//! Exact orbits.
//!
//! - [`line`](mod@line): an oriented line in table coordinates, at three levels of arithmetic.
//! - [`trace`]: following one orbit from an exact start.
//! - [`ensemble`]: many orbits from random exact starts.
//! - [`direction`]: all orbits in one direction.
//! - [`launch`]: starts inside the table and backward in time.
//! - [`law`]: the laws that an ensemble's starts follow.
//! - [`path`]: following one orbit until a limit.
//! - [`periodic`]: all periodic words up to a length.
//! - [`statistics`]: block frequencies and chords of an ensemble.
//! - [`surface`]: a line on the copies of a table with a finite group, for long orbits.

pub mod direction;
pub mod ensemble;
pub mod launch;
pub mod law;
pub mod line;
pub mod path;
pub mod periodic;
pub mod statistics;
pub mod surface;
pub mod trace;

pub use trace::{Start, Step, TraceTables, Tracer};
