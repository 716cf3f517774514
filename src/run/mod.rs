//! What long work needs: a place to ask whether to go on, progress, limits, and files that appear whole.
//!
//! - [`control`]: asking to stop, and hearing how far the work is.
//! - [`budget`]: stopping after a time or when too much memory is used; lengths in stages.
//! - [`checkpoint`]: results of finished parts, kept in a folder.
//! - [`parts`]: what parts find, as lists of numbers.
//! - [`files`]: files and folders that appear whole.
//! - [`memory`]: how much there is, and how much the process uses.

pub mod budget;
pub mod checkpoint;
pub mod control;
pub mod files;
pub mod memory;
pub mod parts;

pub use control::{Control, StopReason, Stopped};
