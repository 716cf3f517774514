//! Complete, certified coding languages of polygonal billiards.
#![forbid(unsafe_code)]
#![deny(missing_docs)]

pub mod complexity;
pub mod factor_graph;
pub mod language;
pub mod number;
pub mod table;
pub mod run;
pub mod unfold;
pub mod orbit;
pub mod study;
