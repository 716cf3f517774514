//! Pictures: charts, tables, corridors, partitions into cells, orbits and small graphs, as SVG text; and [`png`] of them.
//!
//! This room takes plain numbers and words and knows nothing of the rest of the crate. Every picture
//! is a pure function of its input: the same input gives the same bytes on every machine with the same
//! floating-point arithmetic, because labels are measured with a font that is compiled in.
//!
//! How a picture is made. A drawing function collects shapes on a canvas in pixels (y down),
//! choosing the canvas size last; `plotters` turns the shapes into SVG; the root element is then rewritten
//! to carry a `viewBox`, `role="img"`, a title and a description. No element has an id, so any number
//! of pictures can be inlined in one page. Arrowheads and dashes are drawn as shapes for the same reason.
//!
//! What a picture may rely on. Text is never smaller than [`style::SMALL_TEXT`] on a canvas at most
//! [`style::WIDTH`] wide, so it stays legible when the picture is shown at 400 pixels. Differences of colour
//! are doubled by dashes, markers, lightness or labels.
//!
//! Cost: linear in the number of points drawn; placing labels is quadratic in the number of labels.

mod canvas;
mod cells;
mod chart;
mod corridor;
mod dark;
mod font;
mod geometry;
mod graph;
mod plane;
pub mod png;
mod scale;
mod shading;
mod size;
mod small_graphs;
pub mod style;
mod tree;

pub use cells::{CellShape, Cells, cells_picture};
pub use chart::{Chart, Mark, Series, draw_chart};
pub use corridor::{Corridor, corridor_picture};
pub use dark::{dark_inks, dark_rules};
pub use graph::{GraphDrawing, circle_layout, graph_picture};
pub use plane::{HoleShape, TableShape, orbit_picture, table_picture};
pub use scale::Scale;
pub use shading::shade_apart;
pub use size::{PictureSize, sized};
pub use small_graphs::{SmallGraph, layered_layout, small_graphs_picture};
pub use tree::{LABELLED_LEAVES, MOST_LEAVES, TreeDrawing, TreeMark, TreeNode, tree_picture};

use thiserror::Error;

/// What a reader who cannot see the picture is told: becomes `<title>` and `<desc>`.
#[derive(Debug, Clone, Default, PartialEq, Eq)]
pub struct Caption {
    /// A short name of the picture, one line.
    pub title: String,
    /// What the picture shows, in a sentence or two. Left out of the SVG when empty.
    pub description: String,
}

impl Caption {
    /// Builds a caption from a title and a description.
    pub fn new(title: impl Into<String>, description: impl Into<String>) -> Self {
        Caption {
            title: title.into(),
            description: description.into(),
        }
    }
}

/// Why a picture could not be drawn.
#[derive(Debug, Clone, PartialEq, Error)]
pub enum FigureError {
    /// A coordinate is infinite, not a number, or too large to scale.
    #[error(
        "{what} has the coordinate {value}, but coordinates must be smaller than {limit:e} in size"
    )]
    BadCoordinate {
        /// Which part of the picture the coordinate belongs to.
        what: &'static str,
        /// The coordinate.
        value: f64,
        /// The bound that it breaks.
        limit: f64,
    },
    /// A range of an axis is empty, reversed, or not positive on a logarithmic axis.
    #[error("the axis range from {low} to {high} is not usable on a {scale} axis")]
    BadRange {
        /// Lower end.
        low: f64,
        /// Upper end.
        high: f64,
        /// `linear` or `logarithmic`.
        scale: &'static str,
    },
    /// Two lists that must have the same length do not.
    #[error("{what}: {expected} expected, {found} found")]
    LengthMismatch {
        /// Which list.
        what: &'static str,
        /// The length that the other list dictates.
        expected: usize,
        /// The length found.
        found: usize,
    },
    /// An arc names a node that the drawing does not have.
    #[error("arc {arc} names node {node}, but the drawing has {nodes} nodes")]
    NoSuchNode {
        /// Index of the arc.
        arc: usize,
        /// The node it names.
        node: usize,
        /// How many nodes there are.
        nodes: usize,
    },
    /// The partition picture has no positive finite width.
    #[error("the boundary has length {width}, which is not a positive number")]
    BadWidth {
        /// The width given.
        width: f64,
    },
    /// A PNG of no, or too many, pixels.
    #[error(
        "a picture {width} pixels wide cannot be drawn: the width must be at least 1 and at most {widest}, and the whole no more than 2^26 pixels"
    )]
    BadPixels {
        /// The width asked for.
        width: u32,
        /// The greatest width.
        widest: u32,
    },
    /// A text is no picture of this room.
    #[error("the text is not a picture of this program: {reason}")]
    NotAPicture {
        /// What is wrong with it.
        reason: String,
    },
    /// The built-in font could not be used.
    #[error("the built-in font failed: {reason}")]
    Font {
        /// What the font layer said.
        reason: String,
    },
    /// The drawing backend refused a shape.
    #[error("the drawing backend failed: {reason}")]
    Backend {
        /// What the backend said.
        reason: String,
    },
}

/// Largest coordinate accepted in a plane picture: squares of differences must not overflow.
pub(crate) const COORDINATE_LIMIT: f64 = 1e150;

/// Checks that every coordinate of `points` is finite and below [`COORDINATE_LIMIT`].
pub(crate) fn check_points(what: &'static str, points: &[[f64; 2]]) -> Result<(), FigureError> {
    for &value in points.iter().flatten() {
        if !value.is_finite() || value.abs() >= COORDINATE_LIMIT {
            return Err(FigureError::BadCoordinate {
                what,
                value,
                limit: COORDINATE_LIMIT,
            });
        }
    }
    Ok(())
}

#[cfg(test)]
mod tests;
