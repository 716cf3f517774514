//! Factoring over the rationals.
