//! Cells of lines, cut corner by corner.
//!
//! The oriented lines that cross the same edges of the unfolded triangles are those with certain corner images on their
//! left and certain others on their right. With a line as its direction u and moment μ = u × p, each image is a linear
//! condition on (u, μ); so the lines of a word are an open convex cone in space, and a cell here is the cyclic list of its
//! faces (the images) with an extreme line, its direction, between each two neighbours.
//!
//! A line along which the cell ends passes its two images in the order in which they joined the cell: it passes the closed
//! edges in their order, and a new image lies strictly beyond the edge through which its triangle is entered. So the
//! extreme line through an old image and the new one runs from the old to the new.
//!
//! **Measure.** Of the lines of a cell, in dp dφ: Σ (p_i − p_{i+1})·u_i / |u_i| over the extreme lines (the crossed-belt
//! formula: Santaló, *Integral Geometry and Geometric Probability*, 1976). Each term is an element of the field times
//! the length of a vector that the line alone determines.

use super::plane::{Beyond, Plane, Point, cross, minus};
use crate::number::{Real, Sign};
use std::collections::HashMap;

/// A corner image that bounds the lines of a word: crossings before its copy, corner, and true when it is on the left.
pub type Bound = (usize, usize, bool);

/// A corner image where it lies.
#[derive(Clone)]
pub struct Face {
    pub image: Point,
    pub bound: Bound,
}

/// Faces and extreme lines: `lines[i]` passes `faces[i]` and the next face.
#[derive(Clone)]
pub struct Cell {
    pub faces: Vec<Face>,
    lines: Vec<Point>,
}

impl Cell {
    /// All lines that enter the table through a side.
    fn of_side(plane: &Plane, side: usize) -> Cell {
        let (start, end) = (&plane.corners[side], &plane.corners[plane.next[side]]);
        Cell {
            faces: vec![
                Face {
                    image: start.clone(),
                    bound: (0, side, true),
                },
                Face {
                    image: end.clone(),
                    bound: (0, plane.next[side], false),
                },
            ],
            lines: vec![minus(start, end), minus(end, start)],
        }
    }

    /// The lines that have a new image on their left, or on their right; `None` when there are none.
    fn cut(&self, face: &Face) -> Option<Cell> {
        let m = self.faces.len();
        let image = &face.image;
        let wanted = if face.bound.2 {
            Sign::Positive
        } else {
            Sign::Negative
        };
        let sides: Vec<Sign> = (0..m)
            .map(|i| cross(&self.lines[i], &minus(image, &self.faces[i].image)).sign())
            .collect();
        let inside = |i: usize| sides[i % m] == wanted;
        if sides.iter().all(|s| *s == wanted || *s == Sign::Zero) && sides.contains(&wanted) {
            return Some(self.clone());
        }
        // The first extreme line inside, going round; convexity makes those inside consecutive.
        let first = (0..m).find(|&i| inside(i) && !inside(i + m - 1))?;
        let count = (0..m).take_while(|j| inside(first + j)).count();
        let mut cell = Cell {
            faces: Vec::with_capacity(count + 2),
            lines: Vec::with_capacity(count + 2),
        };
        for j in first..first + count {
            cell.faces.push(self.faces[j % m].clone());
            cell.lines.push(self.lines[j % m].clone());
        }
        let last = &self.faces[(first + count) % m];
        cell.faces.push(last.clone());
        cell.lines.push(minus(image, &last.image));
        cell.faces.push(face.clone());
        cell.lines.push(minus(image, &self.faces[first].image));
        Some(cell)
    }

    /// The terms of the measure, as an oriented line with its part of the field.
    pub fn terms(&self) -> impl Iterator<Item = (Line, Real)> + '_ {
        let m = self.faces.len();
        (0..m).map(move |i| {
            let (from, to) = (&self.faces[i].image, &self.faces[(i + 1) % m].image);
            let (line, axis) = Line::through(from, &self.lines[i]);
            let step = minus(from, to);
            let along = if axis == 0 { &step[0] } else { &step[1] };
            let along = if line.forward { along.clone() } else { -along };
            (line, along)
        })
    }
}

/// An oriented line, written in one way.
#[derive(Clone, Debug, PartialEq, Eq, Hash)]
pub struct Line {
    /// Slope, unless the first coordinate is the same all along the line.
    slope: Option<Real>,
    /// Where it meets the second axis, or the first.
    at: Real,
    /// True when the coordinate along the line grows.
    forward: bool,
}

impl Line {
    /// The line through a point, and the coordinate that its unit vector counts.
    fn through(point: &Point, direction: &Point) -> (Line, usize) {
        if direction[0].is_zero() {
            let line = Line {
                slope: None,
                at: point[0].clone(),
                forward: direction[1].sign() == Sign::Positive,
            };
            return (line, 1);
        }
        let slope = direction[1].checked_div(&direction[0]).expect("not zero");
        let line = Line {
            at: &point[1] - &(&slope * &point[0]),
            slope: Some(slope),
            forward: direction[0].sign() == Sign::Positive,
        };
        (line, 0)
    }

    /// The squared length of the vector of which a term of this line is a multiple.
    pub fn unit_square(&self, plane: &Plane) -> Real {
        match &self.slope {
            None => plane.form.clone(),
            Some(slope) => Real::from(1) + &plane.form * &(slope * slope),
        }
    }
}

/// The lines that enter through each side alone, as the ledger must add up to them.
#[expect(
    clippy::mutable_key_type,
    reason = "the caches inside a field take no part in equality or hash"
)]
pub fn whole(plane: &Plane) -> HashMap<(usize, Line), Real> {
    let mut whole = HashMap::new();
    for side in 0..plane.corners.len() {
        for (line, part) in Cell::of_side(plane, side).terms() {
            whole.insert((side, line), part);
        }
    }
    whole
}

/// Lines with one word, about to cross the side of its last letter (for one letter: the side that they start on).
#[derive(Clone)]
pub struct Way {
    /// The side that they start on.
    pub start: usize,
    /// The side of the last letter.
    side: usize,
    /// The copy beyond that side.
    pose: Pose,
    pub cell: Cell,
}

/// A copy of the table: z ↦ w·z + t, or w·z̄ + t, for z = x + y·√(−g).
#[derive(Clone)]
pub struct Pose {
    w: Point,
    t: Point,
    mirrored: bool,
}

impl Pose {
    fn home() -> Pose {
        let zero = || Real::from(0);
        Pose {
            w: [Real::from(1), zero()],
            t: [zero(), zero()],
            mirrored: false,
        }
    }

    fn turned(&self, plane: &Plane, v: &Point) -> Point {
        let y = if self.mirrored { -&v[1] } else { v[1].clone() };
        let [a, b] = &self.w;
        [a * &v[0] - &plane.form * &(b * &y), a * &y + b * &v[0]]
    }

    /// A corner of this copy.
    pub fn corner(&self, plane: &Plane, corner: usize) -> Point {
        let v = self.turned(plane, &plane.corners[corner]);
        [&v[0] + &self.t[0], &v[1] + &self.t[1]]
    }

    /// The copy reflected in its own image of a side.
    fn across(&self, plane: &Plane, side: usize) -> Pose {
        let foot = &plane.corners[side];
        // The reflection of the table: z ↦ s·z̄ + (foot − s·foot̄).
        let one: Point = [Real::from(1), Real::from(0)];
        let s = plane.reflect(&one, side);
        let reflected = plane.reflect(foot, side);
        let shift = minus(foot, &reflected);
        let moved = self.turned(plane, &shift);
        Pose {
            w: self.turned(plane, &s),
            t: [&moved[0] + &self.t[0], &moved[1] + &self.t[1]],
            mirrored: !self.mirrored,
        }
    }
}

/// The ways of the one-letter words.
pub fn starts(plane: &Plane, letter: usize) -> Vec<Way> {
    (0..plane.corners.len())
        .filter(|side| plane.letter[*side] == letter)
        .map(|side| Way {
            start: side,
            side,
            pose: Pose::home(),
            cell: Cell::of_side(plane, side),
        })
        .collect()
}

/// A walk through the triangles of one copy.
struct Crossing {
    triangle: usize,
    edge: usize,
    seen: Vec<usize>,
    bounds: Vec<(usize, bool)>,
}

/// All routes through one copy from the inside of a side to the sides with a letter: the side, and the corners that the
/// lines pass, with true for those on the left. Straight lines enter no triangle twice.
fn routes(
    plane: &Plane,
    mirrored: bool,
    from: usize,
    letter: usize,
) -> Vec<(usize, Vec<(usize, bool)>)> {
    let (triangle, edge) = plane.inside[from];
    let mut found = Vec::new();
    let mut open = vec![Crossing {
        triangle,
        edge,
        seen: Vec::new(),
        bounds: Vec::new(),
    }];
    while let Some(crossing) = open.pop() {
        let Crossing {
            triangle,
            edge,
            seen,
            bounds,
        } = crossing;
        let corners = plane.triangles[triangle];
        for onward in [(edge + 1) % 3, (edge + 2) % 3] {
            // The edge after the entry leads from its end to the apex; a line that leaves there has the apex on the
            // left, as the end of the entry is on the right; in a mirrored copy the other way round.
            let left = (onward == (edge + 1) % 3) != mirrored;
            let mut bounds = bounds.clone();
            bounds.push((corners[(edge + 2) % 3], left));
            match plane.beyond[triangle][onward] {
                Beyond::Side(side) if plane.letter[side] == letter => found.push((side, bounds)),
                Beyond::Side(_) => {}
                Beyond::Triangle(next, entry) => {
                    if !seen.contains(&next) {
                        let mut seen = seen.clone();
                        seen.push(triangle);
                        open.push(Crossing {
                            triangle: next,
                            edge: entry,
                            seen,
                            bounds,
                        });
                    }
                }
            }
        }
    }
    found
}

/// The ways of a word one letter longer, where `crossings` sides are crossed before the copy that the lines are in. Each
/// way that ends because no line of a cell passes a face as it should is shown to `closed`.
pub fn longer(
    plane: &Plane,
    way: &Way,
    crossings: usize,
    letter: usize,
    mut closed: impl FnMut(&Cell, &Face),
) -> Vec<Way> {
    let mut found = Vec::new();
    for (side, bounds) in routes(plane, way.pose.mirrored, way.side, letter) {
        let mut cell = way.cell.clone();
        let passed = bounds.into_iter().all(|(corner, left)| {
            let face = Face {
                image: way.pose.corner(plane, corner),
                bound: (crossings, corner, left),
            };
            let cut = cell.cut(&face);
            match cut {
                Some(cut) => cell = cut,
                None => {
                    closed(&cell, &face);
                    return false;
                }
            }
            true
        });
        if passed {
            found.push(Way {
                start: way.start,
                side,
                pose: way.pose.across(plane, side),
                cell,
            });
        }
    }
    found
}

/// A way of a word known only by the conditions on its lines, whether or not any line meets them.
#[derive(Clone)]
pub struct Conditions {
    side: usize,
    copies: Vec<Pose>,
    bounds: Vec<Bound>,
}

impl Conditions {
    /// Of the words of one letter.
    pub fn starts(plane: &Plane, letter: usize) -> Vec<Conditions> {
        (0..plane.corners.len())
            .filter(|side| plane.letter[*side] == letter)
            .map(|side| Conditions {
                side,
                copies: vec![Pose::home()],
                bounds: vec![(0, side, true), (0, plane.next[side], false)],
            })
            .collect()
    }

    /// Of the words one letter longer.
    pub fn longer(&self, plane: &Plane, letter: usize) -> Vec<Conditions> {
        let crossings = self.copies.len() - 1;
        let here = &self.copies[crossings];
        routes(plane, here.mirrored, self.side, letter)
            .into_iter()
            .map(|(side, bounds)| {
                let mut longer = self.clone();
                longer.side = side;
                longer.bounds.extend(
                    bounds
                        .into_iter()
                        .map(|(corner, left)| (crossings, corner, left)),
                );
                longer.copies.push(here.across(plane, side));
                longer
            })
            .collect()
    }

    /// True when the lines must have this image on this side.
    pub fn demand(&self, bound: &Bound) -> bool {
        self.bounds.contains(bound)
    }

    /// The position of an image.
    pub fn image(&self, plane: &Plane, crossings: usize, corner: usize) -> Point {
        self.copies[crossings].corner(plane, corner)
    }
}
