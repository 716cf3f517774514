//! What long work needs: a place to ask whether to go on, progress, and files that appear whole.

pub mod control;
pub mod files;
pub mod memory;

pub use control::{Control, Stopped};
