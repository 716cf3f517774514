//! Fillings for cells such that neighbours differ.
//!
//! The cells of a partition are the faces of a planar map, so some cell always has at most five neighbours
//! (Euler's formula). Removing such cells one after another and colouring in reverse order (the smallest-last
//! order of Matula and Beck 1983) leaves at most five taken colours at each turn: the six tints suffice.

use super::cells::Cells;
use super::geometry::{Point, Rect, distance_to_segment, edges, simplified};
use super::style::TINTS;
use std::f64::consts::PI;

/// Outlines are compared after scaling the picture to the unit square; borders closer than this are shared.
const CLOSE: f64 = 2e-3;

/// Sets the shades of all cells so that cells with a common border differ, with the six
/// [`TINTS`](super::style::TINTS) used about equally often.
///
/// Cells are neighbours if at least two points of their outlines lie on the other's outline, up to 1/500 of the
/// picture; because of this tolerance very thin cells can have more than five neighbours, and then the tint that
/// fewest of them have is taken. The width must be positive. Cost: quadratic in the number of cells, and in the
/// points of each outline for cells whose bounding boxes meet.
pub fn shade_apart(cells: &mut Cells) {
    let scaled = |p: &Point| [p[0] / cells.width, p[1] / PI];
    let outlines: Vec<Vec<Point>> = cells
        .cells
        .iter()
        .map(|cell| {
            simplified(
                &cell.outline.iter().map(scaled).collect::<Vec<_>>(),
                CLOSE / 4.0,
            )
        })
        .collect();
    let neighbours = neighbour_lists(&outlines);
    let mut used = [0usize; TINTS.len()];
    let mut shades: Vec<Option<usize>> = vec![None; outlines.len()];
    for cell in smallest_last(&neighbours).into_iter().rev() {
        let mut taken = [0usize; TINTS.len()];
        neighbours[cell]
            .iter()
            .filter_map(|&n| shades[n])
            .for_each(|shade| taken[shade] += 1);
        let best = (0..TINTS.len())
            .min_by_key(|&tint| (taken[tint], used[tint], tint))
            .unwrap_or(0);
        used[best] += 1;
        shades[cell] = Some(best);
    }
    for (cell, shade) in cells.cells.iter_mut().zip(shades) {
        cell.shade = shade.unwrap_or(0);
    }
}

fn neighbour_lists(outlines: &[Vec<Point>]) -> Vec<Vec<usize>> {
    let boxes: Vec<Option<Rect>> = outlines.iter().map(Rect::of_points).collect();
    let mut lists = vec![Vec::new(); outlines.len()];
    for i in 0..outlines.len() {
        for j in 0..i {
            let meet = match (&boxes[i], &boxes[j]) {
                (Some(a), Some(b)) => a.grown(CLOSE).overlap_area(&b.grown(CLOSE)) > 0.0,
                _ => false,
            };
            if meet && share_border(&outlines[i], &outlines[j]) {
                lists[i].push(j);
                lists[j].push(i);
            }
        }
    }
    lists
}

/// Whether two points well apart, corners of either outline, lie on both outlines.
fn share_border(a: &[Point], b: &[Point]) -> bool {
    let on = |p: &Point, outline: &[Point]| {
        edges(outline).any(|(s, t)| distance_to_segment(*p, s, t) < CLOSE)
    };
    let common = a
        .iter()
        .filter(|p| on(p, b))
        .chain(b.iter().filter(|p| on(p, a)));
    Rect::of_points(common).is_some_and(|r| r.width().max(r.height()) > 4.0 * CLOSE)
}

/// The cells in the order in which a cell with fewest remaining neighbours is removed.
fn smallest_last(neighbours: &[Vec<usize>]) -> Vec<usize> {
    let mut degrees: Vec<usize> = neighbours.iter().map(Vec::len).collect();
    let mut left: Vec<bool> = vec![true; neighbours.len()];
    let mut order = Vec::with_capacity(neighbours.len());
    while let Some(next) = (0..neighbours.len())
        .filter(|&i| left[i])
        .min_by_key(|&i| (degrees[i], i))
    {
        left[next] = false;
        order.push(next);
        neighbours[next]
            .iter()
            .for_each(|&n| degrees[n] = degrees[n].saturating_sub(1));
    }
    order
}
