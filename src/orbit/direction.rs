//! All orbits in one direction of a table with a finite reflection group.
//!
//! An orbit that starts in direction d later runs in the directions g⁻¹d, for g in the group G of the linear
//! parts. So "the direction" means the whole orbit of d under G. Take one copy g(table) for each g in G and
//! glue it along each side s to the copy of g·S_s, where S_s is the linear part of the reflection in s: the
//! billiard becomes a flow in the one direction d on a surface made of |G| copies.
//!
//! - [`flow`]: that flow as an exact exchange of intervals, from the sides that it enters by;
//! - [`language`]: the words of the flow, level by level;
//! - [`saddles`]: segments from corner to corner in the direction;
//! - [`strips`]: the strips of periodic orbits, when all separatrices close;
//! - [`exchange`]: the first return to a transversal as an interval exchange;
//! - [`prefixes`]: for an infinite group, the words of the orbits that start in one direction.

pub mod exchange;
pub mod flow;
pub mod language;
pub mod prefixes;
pub mod saddles;
pub mod strips;

pub use flow::{Flow, FlowFault};
