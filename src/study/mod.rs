//! The main job: everything about one table, into one folder.
//!
//! - [`results`]: the computation, stage by stage, on the rooms below.
//! - [`statement`]: a statement and its standing.
//! - [`verdict`]: what follows from it, with the standing of every statement.
//! - [`theorem`]: by what a statement is proved, and what data cannot tell.
//! - [`growth`]: exponents, limits and generalized diagonals in the verdict.
//! - [`trend`]: what the ratio p(n+1)/p(n) suggests.
//! - [`claims`]: stated bounds, checked.
//! - [`pictures`], [`growth_pictures`]: the figures of a study.
//! - [`sheet`]: a table at a size that can be drawn.
//! - [`record`]: the file `study.json`.
//! - [`report`], [`report_growth`]: the file `report.html`; [`html`]: pieces of a page; [`sources`]: the bibliography.
//! - [`latex`]: the file `tables.tex`.
//! - [`collection`]: an index of many studies.
//! - [`folder`]: all files of a study.

pub mod claims;
pub mod collection;
pub mod folder;
pub mod growth;
pub mod growth_pictures;
pub mod html;
pub mod latex;
pub mod pictures;
pub mod record;
pub mod report;
pub mod report_growth;
pub mod results;
pub mod sheet;
pub mod sources;
pub mod statement;
pub mod theorem;
pub mod trend;
pub mod verdict;
