//! Cutting a table into triangles along inner diagonals.
//!
//! Ear clipping with exact orientations. An ear is a corner whose triangle with its two neighbours turns
//! left and holds no other remaining corner, not even on its boundary. A simple polygon that is not a
//! triangle always has one: the dual tree of any triangulation has two leaves (Meisters, Amer. Math.
//! Monthly 82 (1975) 648–651, from memory), and a leaf passes this test. Clipping an ear leaves a simple
//! polygon whose area is positive, perhaps with straight corners, so the search never gets stuck.
//! Cost: k³ orientations at worst, for k corners.

use super::{CornerId, SideId, Table, Vector, orientation};
use crate::number::Sign;

/// What lies beyond an edge of a triangle.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Beyond {
    /// A side of the table: an orbit bounces there.
    Side(SideId),
    /// The same segment as the edge with this index of another triangle: an orbit passes.
    Edge(usize),
}

/// A triangle, its corners counterclockwise; edge j runs from corner j to corner j+1 (mod 3).
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Triangle {
    /// The three corners of the table.
    pub corners: [CornerId; 3],
    /// What lies beyond each edge. Edge j of triangle t has index 3t + j.
    pub beyond: [Beyond; 3],
}

/// Triangulates a table: k − 2 triangles whose dual graph is a tree.
pub fn triangulate(table: &Table) -> Vec<Triangle> {
    let corners = table.corners();
    let mut rest: Vec<usize> = (0..corners.len()).collect();
    let mut triples = Vec::new();
    while rest.len() > 3 {
        let n = rest.len();
        let ear = (0..n)
            .find(|&i| is_ear(corners, &rest, i))
            .unwrap_or_else(|| {
                unreachable!("a simple polygon with more than 3 corners has an ear")
            });
        triples.push([rest[(ear + n - 1) % n], rest[ear], rest[(ear + 1) % n]]);
        rest.remove(ear);
    }
    triples.push([rest[0], rest[1], rest[2]]);
    join(&triples, corners.len())
}

fn is_ear(corners: &[Vector], rest: &[usize], i: usize) -> bool {
    let n = rest.len();
    let (before, here, after) = (rest[(i + n - 1) % n], rest[i], rest[(i + 1) % n]);
    let (a, b, c) = (&corners[before], &corners[here], &corners[after]);
    if orientation(a, b, c) != Sign::Positive {
        return false;
    }
    rest.iter()
        .filter(|&&other| other != before && other != here && other != after)
        .all(|&other| {
            let p = &corners[other];
            orientation(a, b, p) == Sign::Negative
                || orientation(b, c, p) == Sign::Negative
                || orientation(c, a, p) == Sign::Negative
        })
}

/// Finds what lies beyond each edge: the side of the table, or the one other triangle with that edge.
fn join(triples: &[[usize; 3]], k: usize) -> Vec<Triangle> {
    let edge = |index: usize| {
        let triple = triples[index / 3];
        (triple[index % 3], triple[(index + 1) % 3])
    };
    let count = 3 * triples.len();
    let beyond = |index: usize| {
        let (from, to) = edge(index);
        if to == (from + 1) % k {
            return Beyond::Side(SideId(from as u8));
        }
        let twin = (0..count)
            .find(|&other| edge(other) == (to, from))
            .unwrap_or_else(|| unreachable!("an inner edge has a triangle on either side"));
        Beyond::Edge(twin)
    };
    triples
        .iter()
        .enumerate()
        .map(|(t, triple)| Triangle {
            corners: triple.map(|c| CornerId(c as u8)),
            beyond: [beyond(3 * t), beyond(3 * t + 1), beyond(3 * t + 2)],
        })
        .collect()
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::table::default_letters;

    fn table(coordinates: &[(i64, i64)]) -> Table {
        let corners = coordinates
            .iter()
            .map(|&(x, y)| Vector::new(x.into(), y.into()))
            .collect();
        Table::new("", corners, 1.into(), default_letters(coordinates.len())).unwrap()
    }

    fn doubled_area(table: &Table, corners: [CornerId; 3]) -> crate::number::Real {
        let [a, b, c] = corners.map(|c| table.corner(c.0 as usize));
        b.minus(a).cross(&c.minus(a))
    }

    #[test]
    fn triangles_fill_the_table_and_share_their_edges() {
        let tables = [
            table(&[(0, 0), (1, 0), (0, 1)]),
            table(&[(0, 0), (2, 0), (2, 1), (1, 1), (1, 2), (0, 2)]),
            // Comb with collinear corners.
            table(&[
                (0, 0),
                (6, 0),
                (6, 2),
                (5, 1),
                (4, 2),
                (3, 1),
                (2, 2),
                (1, 1),
                (0, 2),
            ]),
            // Cross: many corners on common lines.
            table(&[
                (1, 0),
                (2, 0),
                (2, 1),
                (3, 1),
                (3, 2),
                (2, 2),
                (2, 3),
                (1, 3),
                (1, 2),
                (0, 2),
                (0, 1),
                (1, 1),
            ]),
        ];
        for table in &tables {
            let triangles = triangulate(table);
            let k = table.sides();
            assert_eq!(triangles.len(), k - 2);
            let mut area = crate::number::Real::from(0);
            let mut sides = 0;
            for (t, triangle) in triangles.iter().enumerate() {
                let part = doubled_area(table, triangle.corners);
                assert_eq!(part.sign(), Sign::Positive);
                area += part;
                for (j, beyond) in triangle.beyond.iter().enumerate() {
                    match beyond {
                        Beyond::Side(_) => sides += 1,
                        Beyond::Edge(twin) => {
                            let back = triangles[twin / 3].beyond[twin % 3];
                            assert_eq!(back, Beyond::Edge(3 * t + j));
                        }
                    }
                }
            }
            assert_eq!(sides, k);
            let whole = (0..k).fold(crate::number::Real::from(0), |sum, i| {
                sum + table.corner(i).cross(table.corner(i + 1))
            });
            assert_eq!(area, whole);
        }
    }
}
