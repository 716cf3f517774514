//! The main job: everything about one table, into one folder.
//!
//! - [`results`]: the computation, stage by stage, on the rooms below.
//! - [`statement`]: a statement and its standing.
//! - [`verdict`]: what follows from it, with the standing of every statement.
//! - [`pictures`]: the figures of a study.
//! - [`sheet`]: a table at a size that can be drawn.
//! - [`record`]: the file `study.json`.
//! - [`report`]: the file `report.html`.
//! - [`folder`]: all files of a study.

pub mod folder;
pub mod pictures;
pub mod record;
pub mod report;
pub mod results;
pub mod sheet;
pub mod statement;
pub mod verdict;
