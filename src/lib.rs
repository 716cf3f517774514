//! Complete, certified coding languages of polygonal billiards.
#![forbid(unsafe_code)]
#![deny(missing_docs)]

pub mod figure;
pub mod number;
pub mod table;
