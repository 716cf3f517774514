//! The coding language: all words of hit sides, level by level.
//!
//! - [`tree`]: the words as a tree with suffix links. Knows nothing of geometry: any factorial language
//!   fits.
//! - [`walk`]: the depth-first walk over all beams of a table, and the tree that it grows.
//! - `bundle`: the same when a word has several beams: repeated letters, holes.
//! - [`follow`]: one word through the table.
//! - [`beams`]: the exact beams of all words of one length.
//! - [`stream`]: all words of one length in order, without keeping them.
//! - [`store`]: a language in one file that answers questions.
//! - [`measure`]: cylinder measures, and the check of their sum.
//! - [`distribution`]: entropy, distance to the uniform law, block frequencies.
//! - [`compare`]: how far two languages agree, letters as they are or up to a renaming.

pub mod beams;
mod bundle;
pub mod compare;
pub mod distribution;
pub mod follow;
pub mod measure;
pub mod store;
pub mod stream;
pub mod tree;
pub mod walk;

pub use tree::{Language, WordId};
