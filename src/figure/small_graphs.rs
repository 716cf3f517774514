//! A sheet of small graphs, each in a cell of its own with a line of text below.
//!
//! Vertices are dots, the root a larger ring. Arcs point from left to right where the layout allows; the others, and all
//! but the first between the same two vertices, are bent. Legible up to a few dozen vertices a cell.

use super::canvas::Canvas;
use super::geometry::{Point, Rect, add, along, length, normal, sub, times, unit};
use super::style::{BLACK, GREY, INKS, SMALL_TEXT, THIN_STROKE, WIDTH};
use super::{Caption, FigureError, check_points};
use std::collections::VecDeque;

/// A small graph.
#[derive(Debug, Clone, Default, PartialEq)]
pub struct SmallGraph {
    /// Number of vertices; vertex 0 is the root.
    pub vertices: usize,
    /// Arcs: from, to.
    pub arcs: Vec<(usize, usize)>,
    /// Whether arcs are drawn with heads.
    pub directed: bool,
    /// The line below.
    pub text: String,
}

const COLUMNS: usize = 4;
const CELL: [f64; 2] = [WIDTH / COLUMNS as f64, 196.0];
/// Height of the line of text.
const LINE: f64 = 34.0;
const DOT: f64 = 5.0;

/// Places for the vertices of a connected graph: the first coordinate counts arcs forward from vertex 0, along the
/// shortest way without directions; vertices with the same one are spread round 0, in the order in which a
/// breadth-first search meets them.
pub fn layered_layout(vertices: usize, arcs: &[(usize, usize)]) -> Vec<[f64; 2]> {
    let mut level = vec![None; vertices];
    let mut met = Vec::new();
    let mut queue = VecDeque::from_iter((vertices > 0).then_some(0));
    if let Some(root) = level.first_mut() {
        *root = Some(0i64);
    }
    while let Some(v) = queue.pop_front() {
        met.push(v);
        let here = level[v].unwrap_or(0);
        for &(from, to) in arcs {
            let (next, there) = match (from == v, to == v) {
                (true, false) => (to, here + 1),
                (false, true) => (from, here - 1),
                _ => continue,
            };
            if level[next].is_none() {
                level[next] = Some(there);
                queue.push_back(next);
            }
        }
    }
    let mut places = vec![[0.0; 2]; vertices];
    let levels = || met.iter().filter_map(|v| level[*v]);
    let (low, high) = (levels().min().unwrap_or(0), levels().max().unwrap_or(0));
    for at in low..=high {
        let row: Vec<usize> = met
            .iter()
            .copied()
            .filter(|v| level[*v] == Some(at))
            .collect();
        for (i, v) in row.iter().enumerate() {
            places[*v] = [at as f64, i as f64 - (row.len() as f64 - 1.0) / 2.0];
        }
    }
    places
}

/// Draws the graphs in rows of four.
///
/// # Errors
/// [`FigureError::NoSuchNode`], and what the backend reports.
pub fn small_graphs_picture(
    graphs: &[SmallGraph],
    caption: &Caption,
) -> Result<String, FigureError> {
    let mut canvas = Canvas::default();
    for (i, graph) in graphs.iter().enumerate() {
        for (arc, &(from, to)) in graph.arcs.iter().enumerate() {
            if let Some(node) = [from, to].into_iter().find(|v| *v >= graph.vertices) {
                return Err(FigureError::NoSuchNode {
                    arc,
                    node,
                    nodes: graph.vertices,
                });
            }
        }
        let corner = [
            (i % COLUMNS) as f64 * CELL[0],
            (i / COLUMNS) as f64 * CELL[1],
        ];
        draw_cell(&mut canvas, graph, corner)?;
    }
    let rows = graphs.len().div_ceil(COLUMNS).max(1);
    canvas.finish(WIDTH, rows as f64 * CELL[1], caption)
}

fn draw_cell(canvas: &mut Canvas, graph: &SmallGraph, corner: Point) -> Result<(), FigureError> {
    let layout = layered_layout(graph.vertices, &graph.arcs);
    check_points("a vertex", &layout)?;
    let bounds = Rect::of_points(&layout).unwrap_or(Rect::around([0.0, 0.0], 0.0, 0.0));
    // Room for bent arcs and dots round the vertices.
    let room = [CELL[0] - 72.0, CELL[1] - LINE - 64.0];
    let scale = |extent: f64, room: f64| {
        if extent > 0.0 {
            room / extent
        } else {
            f64::INFINITY
        }
    };
    let x_scale = scale(bounds.width(), room[0]).min(46.0);
    let y_scale = scale(bounds.height(), room[1]).min(40.0);
    let middle = [
        corner[0] + CELL[0] / 2.0,
        corner[1] + (CELL[1] - LINE) / 2.0,
    ];
    let centre = bounds.centre();
    let pixel = |p: &[f64; 2]| {
        [
            middle[0] + (p[0] - centre[0]) * x_scale,
            middle[1] + (p[1] - centre[1]) * y_scale,
        ]
    };
    let places: Vec<Point> = layout.iter().map(pixel).collect();
    for (i, &(from, to)) in graph.arcs.iter().enumerate() {
        let same = |a: &&(usize, usize)| **a == (from, to) || **a == (to, from);
        let earlier = graph.arcs[..i].iter().filter(same).count();
        let steps = (layout[to][0] - layout[from][0]).abs();
        let aside = steps > 1.0 || (steps == 0.0 && from != to);
        let curve = if from == to {
            loop_curve(places[from])
        } else {
            let bend = 0.22 * earlier as f64 + if aside { 0.18 } else { 0.0 };
            bent(places[from], places[to], bend)
        };
        draw_arc(canvas, &curve, graph.directed);
    }
    for (v, place) in places.iter().enumerate() {
        if v == 0 {
            canvas.disc(*place, DOT + 3.0, INKS[1]);
        } else {
            canvas.disc(*place, DOT, INKS[0]);
        }
    }
    let at = [middle[0], corner[1] + CELL[1] - LINE / 2.0];
    canvas.label(&graph.text, at, SMALL_TEXT, BLACK);
    Ok(())
}

fn bent(a: Point, b: Point, bend: f64) -> Vec<Point> {
    let control = add(along(a, b, 0.5), times(normal(sub(b, a)), 2.0 * bend));
    (0..=20)
        .map(|i| {
            let t = f64::from(i) / 20.0;
            along(along(a, control, t), along(control, b, t), t)
        })
        .collect()
}

fn loop_curve(at: Point) -> Vec<Point> {
    let (p, q) = ([at[0] - 34.0, at[1] - 46.0], [at[0] + 34.0, at[1] - 46.0]);
    (0..=20)
        .map(|i| {
            let t = f64::from(i) / 20.0;
            let (ab, bc, cd) = (along(at, p, t), along(p, q, t), along(q, at, t));
            along(along(ab, bc, t), along(bc, cd, t), t)
        })
        .collect()
}

/// An arc up to the rim of the dot at its end.
fn draw_arc(canvas: &mut Canvas, curve: &[Point], directed: bool) {
    canvas.stroke(curve, GREY, THIN_STROKE);
    let Some(&end) = curve.last() else { return };
    if directed {
        let rim = DOT + 2.0;
        let before = curve.iter().rev().find(|p| length(sub(end, **p)) >= rim);
        let way = unit(sub(end, *before.unwrap_or(&end)));
        canvas.arrowhead(sub(end, times(way, rim)), way, 9.0, GREY);
    }
}
