//! Factor graphs (Rauzy graphs) of any factorial language.
//!
//! The factor graph Γ_n has the words of length n as vertices and the words of length n + 1 as arcs, each
//! from its prefix to its suffix, labelled by its last letter.
//!
//! - [`census`]: counts of special words, and the share of words whose balls are paths.
//! - [`criterion`]: the line-limit criterion and the bound that goes with it.
//! - [`export`]: graphs as GraphML.

pub mod census;
pub mod criterion;
pub mod export;
