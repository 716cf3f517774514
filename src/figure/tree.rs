//! Pictures of trees that grow from left to right, one column a level.
//!
//! Leaves stand in rows of one height, in the order given; a node stands half way between its first and its last child. While
//! the rows are high enough for text, a node is a box with its label, and the shape of the box tells its mark; in trees with
//! more leaves it is a marker alone. A legend below names the marks that occur.

use super::canvas::{Align, Canvas};
use super::font::{text_width, wrap};
use super::geometry::{Point, Rect};
use super::style::{
    BLACK, GREY, GRID, HAIR_STROKE, Ink, LINE_SPACING, Marker, PALE, SMALL_TEXT, STROKE, TEXT,
    THIN_STROKE, TICK_TEXT, WHITE, WIDTH, ink, tint,
};
use super::{Caption, FigureError};

/// How a node is marked.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub enum TreeMark {
    /// Nothing but the label; a dot.
    #[default]
    Plain,
    /// A thin frame; a ring.
    Framed,
    /// A bold frame, filled; a square.
    Filled,
    /// Filled, pointing down; a triangle.
    Falling,
}

/// A node of a tree.
#[derive(Debug, Clone, Default, PartialEq, Eq)]
pub struct TreeNode {
    /// Index of its parent, which must come earlier; the root has none.
    pub parent: Option<usize>,
    /// Its label: a letter or two.
    pub label: String,
    /// Its mark.
    pub mark: TreeMark,
    /// A short remark at its right, shown where there is room.
    pub note: String,
}

/// A tree to draw.
#[derive(Debug, Clone, Default, PartialEq, Eq)]
pub struct TreeDrawing {
    /// The nodes, the root first.
    pub nodes: Vec<TreeNode>,
    /// What the columns count.
    pub axis: String,
    /// Names of the marks; those that do not occur are left out.
    pub legend: Vec<(TreeMark, String)>,
    /// A remark below.
    pub remark: String,
}

/// The most leaves with which nodes are labelled.
pub const LABELLED_LEAVES: usize = 44;
/// The most leaves that can be told apart.
pub const MOST_LEAVES: usize = 200;

/// Height of a row with labels, pixels.
const ROW: f64 = 30.0;
/// Height of the rows together when they are too many for labels.
const DENSE_HEIGHT: f64 = 1100.0;
/// Half the width and height of a node's box.
const HALF: Point = [14.0, 11.5];
const MARGIN: f64 = 18.0;
/// Between the left edge and the root.
const LEFT: f64 = 46.0;
/// Between the last column and the right edge, more when notes are wide.
const RIGHT: f64 = 72.0;
/// Between the top and the first row: the numbers of the columns stand there.
const TOP: f64 = 74.0;
/// Columns are at most so far apart.
const WIDEST_STEP: f64 = 150.0;
/// What a column needs beside a box and its note: the gap between them, and some of the edge.
const NOTE_GAP: f64 = 20.0;
/// Narrowest canvas: the legend needs it.
const NARROWEST: f64 = 620.0;

/// Draws a tree.
///
/// # Errors
/// [`FigureError::NoSuchNode`] when a parent does not come before its child; what the backend reports.
pub fn tree_picture(tree: &TreeDrawing, caption: &Caption) -> Result<String, FigureError> {
    let (canvas, size) = compose_tree(tree)?;
    canvas.finish(size[0], size[1], caption)
}

/// Places of the nodes: column, and row counted from 0.
struct Places {
    column: Vec<usize>,
    row: Vec<f64>,
    leaves: usize,
}

fn places(nodes: &[TreeNode]) -> Result<Places, FigureError> {
    let mut children: Vec<Vec<usize>> = vec![Vec::new(); nodes.len()];
    let mut column = vec![0; nodes.len()];
    let mut roots = Vec::new();
    for (i, node) in nodes.iter().enumerate() {
        match node.parent {
            None => roots.push(i),
            Some(parent) if parent < i => {
                children[parent].push(i);
                column[i] = column[parent] + 1;
            }
            Some(parent) => {
                return Err(FigureError::NoSuchNode {
                    arc: i,
                    node: parent,
                    nodes: i,
                });
            }
        }
    }
    // Rows of leaves in the order of a walk from the roots; then of their parents, children first.
    let mut row = vec![0.0; nodes.len()];
    let mut leaves = 0;
    let mut stack: Vec<usize> = roots.into_iter().rev().collect();
    while let Some(node) = stack.pop() {
        if children[node].is_empty() {
            row[node] = leaves as f64;
            leaves += 1;
        }
        stack.extend(children[node].iter().rev());
    }
    for node in (0..nodes.len()).rev() {
        if let (Some(first), Some(last)) = (children[node].first(), children[node].last()) {
            row[node] = (row[*first] + row[*last]) / 2.0;
        }
    }
    Ok(Places {
        column,
        row,
        leaves,
    })
}

pub(crate) fn compose_tree(tree: &TreeDrawing) -> Result<(Canvas, Point), FigureError> {
    let places = places(&tree.nodes)?;
    let depth = places.column.iter().copied().max().unwrap_or(0);
    let labelled = places.leaves <= LABELLED_LEAVES;
    let note_widths = tree.nodes.iter().map(|n| text_width(&n.note, SMALL_TEXT));
    let widest_note = note_widths.fold(0.0, f64::max);
    let right = RIGHT.max(HALF[0] + widest_note + NOTE_GAP);
    let step = ((WIDTH - LEFT - right) / depth.max(1) as f64).min(WIDEST_STEP);
    let height = match labelled {
        true => ROW,
        false => (DENSE_HEIGHT / places.leaves as f64).max(5.0),
    };
    let width = (LEFT + step * depth as f64 + right).max(NARROWEST);
    let bottom = TOP + height * places.leaves as f64;
    let place = |node: usize| {
        let x = LEFT + step * places.column[node] as f64;
        [x, TOP + height * (places.row[node] + 0.5)]
    };
    let mut canvas = Canvas::default();
    draw_columns(&mut canvas, &tree.axis, depth, step, bottom);
    let notes_fit = step >= 2.0 * HALF[0] + widest_note + NOTE_GAP;
    let shows_note = |node: &TreeNode| labelled && notes_fit && !node.note.is_empty();
    for (i, node) in tree.nodes.iter().enumerate() {
        let Some(parent) = node.parent else {
            continue;
        };
        let (mut from, mut to) = (place(parent), place(i));
        if labelled {
            from[0] += HALF[0] + 2.0;
            if shows_note(&tree.nodes[parent]) {
                from[0] += text_width(&tree.nodes[parent].note, SMALL_TEXT) + 5.0;
            }
            to[0] -= HALF[0] + 2.0;
        }
        canvas.stroke(
            &[from, to],
            PALE,
            if labelled { STROKE } else { THIN_STROKE },
        );
    }
    for (i, node) in tree.nodes.iter().enumerate() {
        let at = place(i);
        if !labelled {
            draw_marker(&mut canvas, at, node.mark, (0.42 * height).clamp(3.0, 5.5));
            continue;
        }
        draw_box(&mut canvas, at, node.mark);
        canvas.label(&node.label, at, SMALL_TEXT, BLACK);
        if shows_note(node) {
            let beside = [at[0] + HALF[0] + 4.0, at[1]];
            canvas.side_label(&node.note, beside, SMALL_TEXT, GREY, Align::Left);
        }
    }
    let end = draw_below(&mut canvas, tree, labelled, width, bottom);
    Ok((canvas, [width, end + MARGIN]))
}

/// Numbers of the columns with a hair line under each, as many as have room.
fn draw_columns(canvas: &mut Canvas, axis: &str, depth: usize, step: f64, bottom: f64) {
    let every = (34.0 / step).ceil().max(1.0) as usize;
    for column in (0..=depth).step_by(every) {
        let x = LEFT + step * column as f64;
        canvas.stroke(&[[x, TOP - 8.0], [x, bottom]], GRID, HAIR_STROKE);
        canvas.label(&column.to_string(), [x, TOP - 20.0], TICK_TEXT, GREY);
    }
    canvas.side_label(axis, [MARGIN, MARGIN + 4.0], TICK_TEXT, GREY, Align::Left);
}

fn draw_box(canvas: &mut Canvas, at: Point, mark: TreeMark) {
    let rect = Rect::around(at, 2.0 * HALF[0], 2.0 * HALF[1]);
    let (outline, fill, stroke) = look(mark);
    match mark {
        TreeMark::Plain => canvas.rect(&rect, WHITE, 1.0),
        TreeMark::Framed | TreeMark::Filled => {
            canvas.rect(&rect, fill, 1.0);
            canvas.outline(&rect.corners(), outline, stroke);
        }
        TreeMark::Falling => {
            let [x, y] = at;
            let (w, h) = (HALF[0], HALF[1]);
            let shape = [
                [x - w, y - h],
                [x + w, y - h],
                [x + w, y + 0.4 * h],
                [x, y + 1.15 * h],
                [x - w, y + 0.4 * h],
            ];
            canvas.fill(&shape, fill, 1.0);
            canvas.outline(&shape, outline, stroke);
        }
    }
}

/// Outline, filling and stroke of a node's box.
fn look(mark: TreeMark) -> (Ink, Ink, f64) {
    match mark {
        TreeMark::Plain => (WHITE, WHITE, THIN_STROKE),
        TreeMark::Framed => (GREY, WHITE, THIN_STROKE),
        TreeMark::Filled => (ink(1), tint(1), STROKE),
        TreeMark::Falling => (ink(0), tint(4), STROKE),
    }
}

fn draw_marker(canvas: &mut Canvas, at: Point, mark: TreeMark, r: f64) {
    let (marker, size, colour) = match mark {
        TreeMark::Plain => (Marker::Disc, 0.6 * r, GREY),
        TreeMark::Framed => (Marker::Ring, r - 0.5, GREY),
        TreeMark::Filled => (Marker::Square, 1.15 * r, ink(1)),
        TreeMark::Falling => (Marker::Triangle, r, ink(0)),
    };
    canvas.marker(at, marker, size, colour);
}

/// Legend and remark; returns their lower end.
fn draw_below(
    canvas: &mut Canvas,
    tree: &TreeDrawing,
    labelled: bool,
    width: f64,
    bottom: f64,
) -> f64 {
    let mut y = bottom + 16.0;
    let occurs = |mark: TreeMark| tree.nodes.iter().any(|node| node.mark == mark);
    for (mark, name) in tree.legend.iter().filter(|(mark, _)| occurs(*mark)) {
        y += ROW / 2.0;
        let at = [MARGIN + HALF[0], y];
        match labelled {
            true => {
                draw_box(canvas, at, *mark);
                if *mark == TreeMark::Plain {
                    canvas.label("a", at, SMALL_TEXT, BLACK);
                }
            }
            false => draw_marker(canvas, at, *mark, 5.5),
        }
        let beside = [at[0] + HALF[0] + 10.0, y];
        canvas.side_label(name, beside, SMALL_TEXT, BLACK, Align::Left);
        y += ROW / 2.0;
    }
    if tree.nodes.is_empty() {
        canvas.label("no data", [width / 2.0, TOP], TEXT, GREY);
    }
    y += 4.0;
    for line in wrap(&tree.remark, SMALL_TEXT, width - 2.0 * MARGIN) {
        y += SMALL_TEXT * LINE_SPACING;
        let at = [MARGIN, y - SMALL_TEXT / 2.0];
        canvas.side_label(&line, at, SMALL_TEXT, GREY, Align::Left);
    }
    y
}
