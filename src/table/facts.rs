//! facts
