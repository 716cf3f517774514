//! The coding language: all words of hit sides, level by level.
//!
//! - [`tree`]: the words as a tree with suffix links. Knows nothing of geometry: any factorial language
//!   fits.
//! - [`walk`]: the depth-first walk over all beams of a table, and the tree that it grows.
//! - `bundle`: the same when a word has several beams: repeated letters, holes.
//! - [`suffixes`]: the factors of long words, and how far they can be trusted.
//! - [`beams`]: the exact beams of all words of one length.
//! - [`measure`]: cylinder measures, and the check of their sum.

pub mod beams;
mod bundle;
pub mod measure;
pub mod suffixes;
pub mod tree;
pub mod walk;

pub use tree::{Language, WordId};
