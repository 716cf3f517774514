//! Adjoining roots.
