//! Complexity: how many words, and why there are more of them.
//!
//! - [`diagonals`]: generalized diagonals, found by fans; they give p(n) by a second route.
//! - [`counts`]: p, its differences, and the comparison of the two routes.
//! - [`by_distance`]: generalized diagonals up to a geometric length.
//! - [`growth`]: p(n)/n³ and local exponents.

pub mod by_distance;
pub mod counts;
pub mod diagonals;
pub mod growth;
pub mod with_code;
