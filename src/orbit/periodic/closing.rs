//! Whether the lines of a beam close up after one turn of its word, decided exactly.
//!
//! Everything is read from exact corner images: those that bound the beam, and those of the copy that the
//! return enters. An isometry is known from the images of two points, up to orientation, which is the parity
//! of the word. Coordinates are relative to corner 0 of the table.
//!
//! A floating-point filter keeps most even words away from the exact test. The product for an even word turns by
//! twice the alternating sum of the headings of its sides. Headings are off by less than 10⁻¹⁴ each: a
//! coordinate of a side is exact before it is rounded, and the few operations that follow are good to a
//! few units in the last place. So a sum that stays farther than 10⁻¹³ times the number of letters from the
//! multiples of π proves that the word does not close.

use crate::number::{Real, Sign};
use crate::table::{CornerId, SideId, Table, Vector};
use crate::unfold::engine::{Engine, Trail};
use rug::Rational;
use std::f64::consts::PI;

/// Parallel lines with direction `d`, by their moments d × p.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Strip {
    /// The moment of the middle line.
    pub middle: Real,
    /// The greatest moment minus the least; positive. The strip's width is this times √g, divided by |d|.
    pub breadth: Real,
}

/// How a periodic word closes.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Closing {
    /// From the start to where one turn ends in the unfolded plane: the translation of an even word, the glide of
    /// an odd one.
    pub displacement: Vector,
    /// The lines in this direction that close: all of the strip after one turn of an even word; for an odd
    /// word the axis after one turn, the others after two.
    pub strip: Strip,
    /// The moment of the axis of an odd word: the middle of the strip, or outside of it, when it does not close.
    pub axis: Option<Real>,
}

/// What the return to the first side says about a beam.
pub enum Returned {
    /// An even word closes.
    Closed(Closing),
    /// An odd word has an axis, and lines of the beam are parallel to it.
    Gliding(Gliding),
}

/// How the lines of a beam of an odd word that are parallel to its axis lie.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Gliding {
    /// The glide.
    pub glide: Vector,
    /// The moment of the axis.
    pub axis: Real,
    /// The least moment of the lines, less that of the axis.
    pub low: Real,
    /// The greatest, less that of the axis; more than `low`.
    pub high: Real,
}

impl Gliding {
    /// The closing round the axis, when it is in the beam.
    pub fn axis_closing(&self) -> Option<Closing> {
        let (up, down) = (self.high.clone(), -&self.low);
        let reach = if up < down { up } else { down };
        (reach.sign() == Sign::Positive).then(|| Closing {
            displacement: self.glide.clone(),
            strip: Strip {
                middle: self.axis.clone(),
                breadth: reach * Real::from(2),
            },
            axis: Some(self.axis.clone()),
        })
    }

    /// The closing of the lines of this beam that are lines of another one of the same word after one turn, and back
    /// in this one after two. Of the two mirror images the one on the left of the axis is given.
    pub fn beside(&self, other: &Gliding) -> Option<Closing> {
        let (turned_low, turned_high) = (-&other.high, -&other.low);
        let low = self.low.clone().max(turned_low);
        let high = self.high.clone().min(turned_high);
        let breadth = &high - &low;
        if breadth.sign() != Sign::Positive {
            return None;
        }
        let middle = (low + high) * Real::from(Rational::from((1, 2)));
        let left = if middle.sign() == Sign::Negative {
            -middle
        } else {
            middle
        };
        Some(Closing {
            displacement: self.glide.clone(),
            strip: Strip {
                middle: &self.axis + &left,
                breadth,
            },
            axis: Some(self.axis.clone()),
        })
    }
}

/// Tests words of one table.
pub struct Closer {
    form: Real,
    corners: [Vector; 3],
    headings: Vec<f64>,
}

impl Closer {
    /// Prepares a table.
    pub fn new(table: &Table) -> Closer {
        let root_form = table.form().to_f64().sqrt();
        let heading = |v: Vector| (v.y.to_f64() * root_form).atan2(v.x.to_f64());
        let origin = table.corner(0);
        Closer {
            form: table.form().clone(),
            corners: [0, 1, 2].map(|i| table.corner(i).minus(origin)),
            headings: (0..table.sides())
                .map(|s| heading(table.side_vector(s)))
                .collect(),
        }
    }

    /// False when floating point proves that an even word turns.
    pub fn may_close(&self, word: &[SideId]) -> bool {
        if word.len() % 2 == 1 {
            return true;
        }
        let alternating: f64 = word
            .chunks(2)
            .map(|pair| self.headings[pair[0].0 as usize] - self.headings[pair[1].0 as usize])
            .sum();
        let turns = alternating / PI;
        (turns - turns.round()).abs() * PI <= 1e-13 * word.len() as f64
    }

    /// What the return of the word on the trail says, whose cell has the given left and right corner
    /// images and enters the copy `pose`. `None` when no line of the beam is parallel to the translation or the glide.
    pub fn close<E: Engine>(
        &self,
        engine: &E,
        trail: &mut Trail<E::Exact>,
        odd: bool,
        pose: &E::Pose,
        (lefts, rights): (&[E::Point], &[E::Point]),
    ) -> Option<Returned> {
        let origin = engine.place(&engine.home(None), CornerId(0));
        let mut at = |point: &E::Point| engine.displacement(trail, &origin, point);
        let images = [0, 1, 2].map(|i| at(&engine.place(pose, CornerId(i))));
        let (displacement, axis) = if odd {
            let (glide, moment) = self.glide(&images)?;
            (glide, Some(moment))
        } else {
            (self.translation(&images)?, None)
        };
        let mut moments = |points: &[E::Point]| -> Vec<Real> {
            points.iter().map(|p| displacement.cross(&at(p))).collect()
        };
        // From the greatest moment on the right to the least on the left.
        let high = least(moments(lefts));
        let low = -least(moments(rights).iter().map(|m| -m).collect());
        let breadth = &high - &low;
        if breadth.sign() != Sign::Positive {
            return None;
        }
        Some(match axis {
            None => Returned::Closed(Closing {
                displacement,
                strip: Strip {
                    middle: (&high + &low) * Real::from(Rational::from((1, 2))),
                    breadth,
                },
                axis: None,
            }),
            Some(axis) => Returned::Gliding(Gliding {
                glide: displacement,
                low: low - &axis,
                high: high - &axis,
                axis,
            }),
        })
    }

    /// The translation that takes the corners to their images, when it is one and moves them.
    fn translation(&self, images: &[Vector; 3]) -> Option<Vector> {
        let moved = images[0].minus(&self.corners[0]);
        let same = images[1].minus(&self.corners[1]) == moved;
        (same && !moved.is_zero()).then_some(moved)
    }

    /// Glide and moment of the axis (with the glide as direction) of the reversing isometry that takes the
    /// corners to their images; `None` for a reflection.
    ///
    /// The midpoints between points and their images lie on the axis. Those of three corners are not all the
    /// same: then the corners would be on one line across the axis.
    fn glide(&self, images: &[Vector; 3]) -> Option<(Vector, Real)> {
        let half = Real::from(Rational::from((1, 2)));
        let middle = |i: usize| self.corners[i].plus(&images[i]).times(&half);
        let first = middle(0);
        let along = [1, 2]
            .map(|i| middle(i).minus(&first))
            .into_iter()
            .find(|v| !v.is_zero())
            .expect("three corners of a triangle are not on one line");
        let moved = images[0].minus(&self.corners[0]);
        let share = &along.dot(&moved, &self.form) / &along.squared_length(&self.form);
        let glide = along.times(&share);
        let moment = glide.cross(&first);
        (!glide.is_zero()).then_some((glide, moment))
    }
}

fn least(values: Vec<Real>) -> Real {
    values
        .into_iter()
        .reduce(|a, b| if b < a { b } else { a })
        .expect("a cell has corner images on both sides")
}
