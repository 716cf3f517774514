//! One family of tables: the complexity of every member.
//!
//! - [`range`]: which values a parameter takes.
//! - [`member`]: what is computed for one member, and its row.
//! - [`folder`]: all members into a folder that an interrupted sweep continues.
//! - [`picture`]: p(N) and N(n) over the parameter.

pub mod folder;
pub mod member;
pub mod picture;
pub mod range;
