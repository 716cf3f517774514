//! Complete, certified coding languages of polygonal billiards.
//!
//! A table is a simple polygon, perhaps with holes, whose corners lie in a real number field. An orbit that
//! meets no corner is coded by the letters of the sides that it hits; the language of the table is the set of all words so obtained. This
//! library computes it completely up to a length, with exact arithmetic, and analyses it.
//!
//! The rooms, lowest first; each knows only those above it in this list:
//!
//! - [`number`]: exact reals in one number field;
//! - [`table`]: polygons, their files, and proved facts about them;
//! - [`unfold`]: straight lines through reflected copies of a table;
//! - [`run`]: what long work needs;
//! - [`language`]: the words, and the measures of their cylinders;
//! - [`orbit`]: single orbits, traced exactly;
//! - [`certificate`]: claims about words that others can check;
//! - [`complexity`]: how many words, and the generalized diagonals that make new ones;
//! - [`mod@reference`]: languages from short rules: substitutions, exchanges, patterns, forbidden words;
//! - [`factor_graph`]: Rauzy graphs of any factorial language, and the line-limit criterion;
//! - [`figure`]: pictures from plain numbers;
//! - [`study`]: all of it on one table, into one folder;
//! - [`sweep`]: the complexity of every member of a family;
//! - [`cli`]: the command line.
//!
//! ```
//! use reboundary::complexity::{counts, diagonals};
//! use reboundary::run::Control;
//! use reboundary::table::{Table, Vector, default_letters};
//! use reboundary::unfold::Mesh;
//! use reboundary::unfold::engine::{AnyEngine, Arithmetic};
//!
//! let corners = [(0, 0), (1, 0), (1, 1), (0, 1)]
//!     .map(|(x, y): (i64, i64)| Vector::new(x.into(), y.into()))
//!     .to_vec();
//! let square = Table::new("Unit square", corners, 1.into(), default_letters(4)).unwrap();
//! let engine = AnyEngine::new(&square, 6, Arithmetic::Tiered);
//! let (found, _) = diagonals::count(&engine, &Mesh::new(&square), 4, &Control::new()).unwrap();
//! let p = counts::p_from_diagonals(4, &found, 6);
//! assert_eq!(p, [1, 4, 12, 28, 52, 92, 140]);
//! ```
#![forbid(unsafe_code)]
#![deny(missing_docs)]

pub mod certificate;
pub mod cli;
pub mod complexity;
pub mod factor_graph;
pub mod figure;
pub mod language;
pub mod number;
pub mod orbit;
pub mod reference;
pub mod run;
pub mod study;
pub mod sweep;
pub mod table;
pub mod unfold;
