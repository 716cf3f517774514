//! Complexity: how many words, and why there are more of them.
//!
//! - [`diagonals`]: generalized diagonals, found by fans; they give p(n) by a second route.
//! - `leaps`: counting them faster where linear parts are tabulated.
//! - [`counts`]: p, its differences, and the comparison of the two routes.
//! - [`by_distance`]: generalized diagonals up to a geometric length.
//! - [`growth`]: p(n)/n³ and local exponents.
//! - [`special_tree`]: special words as trees, and the diagonals that make each bispecial word.
//! - [`estimate`]: exponents and limits that finite counts suggest.
//! - [`constant`]: limits of p(n)/n³ known from outside.
//! - [`claim`]: a stated bound, checked exactly.

pub mod by_distance;
pub mod claim;
pub mod constant;
pub mod counts;
pub mod diagonals;
pub mod estimate;
pub mod growth;
mod leaps;
pub mod special_tree;
pub mod with_code;
