//! expression
