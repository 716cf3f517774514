//! triangulation
