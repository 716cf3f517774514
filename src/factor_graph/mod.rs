//! Factor graphs (Rauzy graphs) of any factorial language.
//!
//! The factor graph Γ_n has the words of length n as vertices and the words of length n + 1 as arcs, each
//! from its prefix to its suffix, labelled by its last letter.
//!
//! - [`census`]: counts of special words, and the share of words whose balls are paths.
//! - [`view`]: one graph with its arcs in both directions.
//! - [`canonical`]: canonical forms of small rooted graphs.
//! - [`balls`]: how many words have which ball.
//! - [`reduced`]: branches between special words, components, cycles, evolution.
//! - [`spectrum`]: spectral laws and diameters.
//! - [`labelled`]: the law of the letters round a uniform vertex.
//! - [`criterion`]: the line-limit criterion and the bound that goes with it.
//! - [`export`]: graphs as GraphML.
//! - [`listing`]: graphs as DOT, edges, lists of successors.

pub mod balls;
pub mod canonical;
pub mod census;
pub mod criterion;
pub mod export;
pub mod labelled;
pub mod listing;
pub mod reduced;
pub mod spectrum;
pub mod view;
