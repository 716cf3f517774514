//! Cutting a table into triangles along inner diagonals.
//!
//! **Bridges.** Holes are first joined to the outline by diagonals, one hole after another: the hole with the
//! least corner v in (x, y) order among those not yet joined, from that corner. The polygonal line that is
//! walked along the outline, over a bridge, round the hole and back is again the boundary of a disc; corners
//! at bridges occur in it more than once. There is a corner to join v to: look from v in the direction
//! (−1, −ε). Everything there precedes v, so the first side or bridge that is met belongs to the joined part,
//! and so does its lesser end, a. In the triangle of v, the point met and a all corners precede v, so they
//! belong to the joined part; a, or that corner among them which is seen from v nearest to the ray, is
//! visible.
//!
//! **Ears.** Then ear clipping with exact orientations. An ear is a place of the line, with the places before
//! and after it, that turns left, whose triangle holds no other remaining corner, not even on its boundary,
//! and whose third edge starts at both of its ends inside the angle of the table at that place (without
//! bridges the last follows from the rest). No other edge enters such a triangle: it would cross the two edges
//! of the line, or leave from a corner of the triangle within an angle that belongs to another place. A disc
//! that is not a triangle always has an ear: the dual tree of any triangulation has two leaves (Meisters,
//! Amer. Math. Monthly 82 (1975) 648–651, from memory), and a leaf passes this test. Clipping an ear leaves a
//! disc with positive area, perhaps with straight corners, so the search never gets stuck.
//!
//! Cost: k³ orientations at worst, for k corners.

use super::validity::Boundary;
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

/// Triangulates a table with h holes: k + 2h − 2 triangles. Without holes their dual graph is a tree.
pub fn triangulate(table: &Table) -> Vec<Triangle> {
    let corners = table.corners();
    let mut rest = joined_line(table);
    let bridged = table.holes() > 0;
    let mut triples = Vec::new();
    while rest.len() > 3 {
        let n = rest.len();
        let ear = (0..n)
            .find(|&i| is_ear(corners, &rest, i, bridged))
            .unwrap_or_else(|| unreachable!("a disc with more than 3 corners has an ear"));
        triples.push([rest[(ear + n - 1) % n], rest[ear], rest[(ear + 1) % n]]);
        rest.remove(ear);
    }
    triples.push([rest[0], rest[1], rest[2]]);
    join(&triples, |corner| table.after(corner))
}

/// The closed line along the outline and, over bridges, round every hole.
fn joined_line(table: &Table) -> Vec<usize> {
    let corners = table.corners();
    let mut rings = table.rings();
    let mut line: Vec<usize> = rings.next().expect("the outline").collect();
    let mut holes: Vec<(usize, std::ops::Range<usize>)> = rings
        .map(|ring| {
            let least = ring.clone().min_by(|&i, &j| {
                (&corners[i].x, &corners[i].y).cmp(&(&corners[j].x, &corners[j].y))
            });
            (least.expect("a ring has corners"), ring)
        })
        .collect();
    if holes.is_empty() {
        return line;
    }
    holes.sort_by(|(i, _), (j, _)| {
        (&corners[*i].x, &corners[*i].y).cmp(&(&corners[*j].x, &corners[*j].y))
    });
    let sizes: Vec<usize> = table.rings().map(|ring| ring.len()).collect();
    let boundary = Boundary::of(corners.iter().collect(), &sizes);
    let mut segments: Vec<[usize; 2]> = (0..table.sides()).map(|s| [s, table.after(s)]).collect();
    for (from, ring) in holes {
        let at = (0..line.len())
            .find(|&at| {
                let n = line.len();
                let (before, after) = (line[(at + n - 1) % n], line[(at + 1) % n]);
                let direction = corners[from].minus(&corners[line[at]]);
                in_angle(corners, [before, line[at], after], &direction)
                    && is_free(&boundary, &segments, [line[at], from])
            })
            .unwrap_or_else(|| unreachable!("the least corner sees the part that is joined"));
        segments.push([line[at], from]);
        let mut detour = vec![line[at]];
        detour.extend(from..ring.end);
        detour.extend(ring.start..=from);
        line.splice(at..at, detour);
    }
    line
}

/// True when the open segment between two corners meets no corner, and crosses none of the segments.
fn is_free(boundary: &Boundary<'_>, segments: &[[usize; 2]], [a, b]: [usize; 2]) -> bool {
    segments.iter().all(|&[c, d]| {
        let blocks =
            |corner: usize| corner != a && corner != b && boundary.on_segment(a, b, corner);
        !blocks(c) && !blocks(d) && !boundary.cross_properly([a, b], [c, d])
    })
}

/// True when a direction from the middle one of three places of the line points strictly into the table
/// between its two edges there.
fn in_angle(corners: &[Vector], [before, here, after]: [usize; 3], direction: &Vector) -> bool {
    let next = corners[after].minus(&corners[here]);
    let back = corners[before].minus(&corners[here]);
    let left_of = |u: &Vector, v: &Vector| u.cross(v).sign();
    match left_of(&next, &back) {
        Sign::Positive => {
            left_of(&next, direction) == Sign::Positive
                && left_of(direction, &back) == Sign::Positive
        }
        // A straight corner; the edges never lie on each other, because each has a triangle on its left.
        Sign::Zero => left_of(&next, direction) == Sign::Positive,
        Sign::Negative => {
            left_of(&next, direction) == Sign::Positive
                || left_of(direction, &back) == Sign::Positive
        }
    }
}

fn is_ear(corners: &[Vector], rest: &[usize], i: usize, bridged: bool) -> bool {
    let n = rest.len();
    let place = |steps: usize| rest[(i + n + steps - 2) % n];
    let (before, here, after) = (place(1), place(2), place(3));
    let (a, b, c) = (&corners[before], &corners[here], &corners[after]);
    if orientation(a, b, c) != Sign::Positive {
        return false;
    }
    let empty = rest
        .iter()
        .filter(|&&other| other != before && other != here && other != after)
        .all(|&other| {
            let p = &corners[other];
            orientation(a, b, p) == Sign::Negative
                || orientation(b, c, p) == Sign::Negative
                || orientation(c, a, p) == Sign::Negative
        });
    if !empty || !bridged {
        return empty;
    }
    let third = c.minus(a);
    in_angle(corners, [place(0), before, here], &third)
        && in_angle(corners, [here, after, place(4)], &third.times(&(-1).into()))
}

/// Finds what lies beyond each edge: the side of the table, or the one other triangle with that edge.
fn join(triples: &[[usize; 3]], after: impl Fn(usize) -> usize) -> Vec<Triangle> {
    let edge = |index: usize| {
        let triple = triples[index / 3];
        (triple[index % 3], triple[(index + 1) % 3])
    };
    let count = 3 * triples.len();
    let beyond = |index: usize| {
        let (from, to) = edge(index);
        if to == after(from) {
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
    use crate::table::{Ring, default_letters};

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
            check(table);
        }
    }

    fn check(table: &Table) {
        let triangles = triangulate(table);
        let k = table.sides();
        assert_eq!(triangles.len(), k + 2 * table.holes() - 2);
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
            // No corner of the table inside a triangle or on its edges.
            let [a, b, c] = triangle.corners.map(|c| table.corner(c.0 as usize));
            for p in table.corners() {
                let turns = [(a, b), (b, c), (c, a)].map(|(q, r)| orientation(q, r, p));
                assert!(p == a || p == b || p == c || turns.contains(&Sign::Negative));
            }
        }
        assert_eq!(sides, k);
        let whole = (0..k).fold(crate::number::Real::from(0), |sum, i| {
            sum + table.corner(i).cross(table.corner(table.after(i)))
        });
        assert_eq!(area, whole);
    }

    fn ring(coordinates: &[(i64, i64)]) -> Ring {
        Ring {
            corners: coordinates
                .iter()
                .map(|&(x, y)| Vector::new(x.into(), y.into()))
                .collect(),
            letters: default_letters(coordinates.len()),
        }
    }

    #[test]
    fn holes_are_left_out() {
        let square = |x: i64, y: i64, size: i64| {
            ring(&[(x, y), (x + size, y), (x + size, y + size), (x, y + size)])
        };
        let triangle = |x: i64, y: i64| ring(&[(x, y), (x + 2, y + 1), (x + 1, y + 2)]);
        // Many collinear corners, and bridges at corners that already have one.
        let mut lattice = Vec::new();
        for x in 0..4 {
            for y in 0..4 {
                lattice.push(square(2 * x + 1, 2 * y + 1, 1));
            }
        }
        let fan: Vec<Ring> = (0..6).map(|i| triangle(2 + 3 * i, 1 + 2 * i)).collect();
        // A comb whose teeth reach between the holes.
        let comb = ring(&[
            (0, 0),
            (20, 0),
            (20, 14),
            (15, 1),
            (10, 14),
            (5, 1),
            (0, 14),
        ]);
        let teeth = vec![
            square(1, 1, 1),
            square(9, 2, 2),
            square(16, 1, 1),
            triangle(9, 7),
        ];
        let cases = [
            (square(0, 0, 9), vec![square(3, 3, 3)]),
            (square(0, 0, 9), lattice),
            (square(0, 0, 30), fan),
            (comb, teeth),
            // A diamond in a diamond, and two holes on one height.
            (
                ring(&[(6, 0), (12, 6), (6, 12), (0, 6)]),
                vec![ring(&[(6, 4), (8, 6), (6, 8), (4, 6)])],
            ),
            (
                square(0, 0, 12),
                vec![triangle(1, 5), triangle(5, 5), triangle(8, 5)],
            ),
        ];
        for (outline, holes) in cases {
            for mirrored in [false, true] {
                let turn = |ring: &Ring| Ring {
                    corners: ring
                        .corners
                        .iter()
                        .map(|c| {
                            if mirrored {
                                Vector::new(-&c.y, c.x.clone())
                            } else {
                                c.clone()
                            }
                        })
                        .collect(),
                    letters: ring.letters.clone(),
                };
                let holes = holes.iter().map(turn).collect();
                check(&Table::with_holes("", turn(&outline), holes, 1.into()).unwrap());
            }
        }
    }
}
