//! folder
