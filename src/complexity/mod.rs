//! Complexity: how many words, and why there are more of them.
//!
//! - [`diagonals`]: generalized diagonals, found by fans; they give p(n) by a second route.
//! - [`counts`]: p, its differences, and the comparison of the two routes.
//! - [`growth`]: p(n)/n³ and local exponents.

pub mod counts;
pub mod diagonals;
pub mod growth;
