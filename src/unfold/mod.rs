//! Unfolding: pure geometry of straight lines through reflected copies of a table. Nothing here counts.
//!
//! - [`isometry`]: exact isometries.
//! - [`mesh`]: the triangulated table as a machine that a line walks through, gate by gate.
//! - [`engine`]: what a walk needs of arithmetic: placing corner images and deciding orientations.
//! - [`lattice`]: the engine for finite groups over the rationals: machine integers only.
//! - [`filtered`]: the engine for everything else: floating point with a proved bound, exact behind it.
//! - [`framed`]: an engine that works in the frame with the smallest field.
//! - [`exact_path`]: exact positions along a path, for the cases that the filter leaves open.
//! - [`big_path`]: exact poses in integers of any size.
//! - [`symmetry`] and [`half_turn`]: collinear images proved by the symmetry of a path.
//! - [`wide_path`]: enclosed positions along a path, for distances.
//! - [`beam`]: all lines with one itinerary, as the cyclic list of corner images that bound them.
//! - [`fan`]: all rays from one corner with one itinerary.
//! - [`grove`]: all beams of a few crossings, as trees that a fan leaps through.

pub mod beam;
pub mod big_path;
pub mod engine;
pub mod exact_path;
pub mod fan;
pub mod filtered;
pub mod framed;
pub mod group;
pub mod grove;
pub mod half_turn;
pub mod isometry;
pub mod lattice;
pub mod mesh;
pub mod symmetry;
pub mod wide_path;

pub use engine::{Engine, Leaping, Trail, with_engine};
pub use isometry::Isometry;
pub use mesh::Mesh;
