//! An oriented line in the coordinates of the table, and what a bounce does to it.
//!
//! A line with direction d through a point p is the triple (d, μ) with μ = d × p. A point v is on its
//! left exactly when d × v − μ > 0. The reflection z ↦ S·z + c in a side turns it into (S·d, S·d × c − μ),
//! because S reverses areas. So a bounce is linear and needs no division, and the orbit is followed in the
//! table itself, not in an unfolding.
//!
//! Three followers keep the same line:
//!
//! - [`FloatLine`], in the true Euclidean plane with |d| about 1, with a running bound on its errors;
//! - [`WideLine`], enclosures with 256-bit bounds;
//! - [`ExactLine`], elements of the field.
//!
//! **Bound of the float follower.** Let u = 2^−53, η = 2^−48 the relative error of tabulated numbers, R a
//! bound on |c| and on the lengths of corner vectors; then |μ| ≤ R, since the line meets the table. Let the
//! vector d be off by at most a (Euclidean length) and μ by at most m. A bounce is one rounded complex
//! product with a tabulated factor of modulus 1, so it leaves d off by at most a′ = a + 4u + 2η, and μ by at
//! most m′ = m + R·a′ + R·(8η + 16u). The value d × v − μ is then off by at most R·(a + 4η) + 1.01·m.
//! All this holds while roundings are relative: the follower starts only when R, √g and the length of the direction
//! lie between 10^−60 and 10^60, so that what underflow spoils is less than 10^−180, far below η·R. Otherwise its errors
//! are infinite, and the enclosures decide.

use crate::number::{Enclosure, Real, Sign};
use crate::table::{Table, Vector};
use crate::unfold::isometry::{Isometry, side_reflections};

/// Bits of the bounds of a [`WideLine`].
pub const WIDE: u32 = 256;

const UNIT: f64 = f64::EPSILON / 2.0;
const TABULATED: f64 = 1.0 / (1u64 << 48) as f64;

/// A table prepared for all three followers.
#[derive(Debug)]
pub struct LineTables {
    form: Real,
    reflections: Vec<Isometry>,
    corners: Vec<Vector>,
    /// Where each side ends.
    ends: Vec<usize>,
    wide_form: Enclosure,
    wide_reflections: Vec<[Enclosure; 4]>,
    wide_corners: Vec<[Enclosure; 2]>,
    root_form: f64,
    float_reflections: Vec<[f64; 4]>,
    float_corners: Vec<[f64; 2]>,
    reach: f64,
}

impl LineTables {
    /// Tabulates the side reflections and corners of a table.
    pub fn new(table: &Table) -> LineTables {
        let form = table.form().clone();
        let reflections = side_reflections(table);
        let corners = table.corners().to_vec();
        let wide = |v: &Vector| [v.x.enclosure_within(WIDE), v.y.enclosure_within(WIDE)];
        let root_form = form.to_f64().sqrt();
        let float = |v: &Vector| [v.x.to_f64(), v.y.to_f64() * root_form];
        let length = |v: &Vector| v.squared_length(&form).to_f64().sqrt();
        let reach = reflections
            .iter()
            .map(|r| length(&r.t))
            .chain(corners.iter().map(length))
            .fold(0.0, f64::max);
        let four = |r: &Isometry| {
            let ([a, b], [c, d]) = (float(&r.w), float(&r.t));
            [a, b, c, d]
        };
        LineTables {
            wide_form: form.enclosure_within(WIDE),
            wide_reflections: reflections
                .iter()
                .map(|r| {
                    let ([a, b], [c, d]) = (wide(&r.w), wide(&r.t));
                    [a, b, c, d]
                })
                .collect(),
            wide_corners: corners.iter().map(wide).collect(),
            float_reflections: reflections.iter().map(four).collect(),
            float_corners: corners.iter().map(float).collect(),
            reach: reach * 1.001,
            root_form,
            form,
            reflections,
            corners,
            ends: (0..table.sides()).map(|side| table.after(side)).collect(),
        }
    }

    /// g of the plane form.
    pub fn form(&self) -> &Real {
        &self.form
    }
}

/// A line in floating point.
#[derive(Clone, Copy, Debug)]
pub struct FloatLine {
    d: [f64; 2],
    moment: f64,
    direction_error: f64,
    moment_error: f64,
}

impl FloatLine {
    /// The line nearest to an enclosed one, scaled to a direction of length about 1.
    pub fn from_wide(line: &WideLine, tables: &LineTables) -> FloatLine {
        let (x, y) = (line.d[0].to_f64(), line.d[1].to_f64() * tables.root_form);
        // The cross product of true coordinates is √g times that of table coordinates.
        let moment = line.moment.to_f64() * tables.root_form;
        let length = x.hypot(y);
        let scale = 1.0 / length;
        if ![length, tables.reach, tables.root_form]
            .iter()
            .all(|size| (1e-60..1e60).contains(size))
        {
            return FloatLine {
                d: [x, y],
                moment,
                direction_error: f64::INFINITY,
                moment_error: f64::INFINITY,
            };
        }
        FloatLine {
            d: [x * scale, y * scale],
            moment: moment * scale,
            // The wide bounds are far narrower than 2^−60 relative; roundings here stay within 2η. The
            // common scale may be off, which changes no sign.
            direction_error: 2.0 * TABULATED,
            moment_error: 4.0 * TABULATED * tables.reach,
        }
    }

    /// The side of the line on which a corner of the table lies, when the bound settles it.
    #[inline(always)]
    pub fn side_of(&self, tables: &LineTables, corner: usize) -> Option<Sign> {
        let v = tables.float_corners[corner];
        let value = self.d[0] * v[1] - self.d[1] * v[0] - self.moment;
        let bound =
            tables.reach * (self.direction_error + 4.0 * TABULATED) + 1.01 * self.moment_error;
        if value > bound {
            Some(Sign::Positive)
        } else if value < -bound {
            Some(Sign::Negative)
        } else {
            None
        }
    }

    /// Bounces off a side.
    #[inline(always)]
    pub fn bounce(&mut self, tables: &LineTables, side: usize) {
        let [a, b, c0, c1] = tables.float_reflections[side];
        let [x, y] = self.d;
        // w·conj(d)
        self.d = [a * x + b * y, b * x - a * y];
        self.moment = self.d[0] * c1 - self.d[1] * c0 - self.moment;
        self.direction_error += 4.0 * UNIT + 2.0 * TABULATED;
        self.moment_error += tables.reach * (self.direction_error + 8.0 * TABULATED + 16.0 * UNIT);
    }

    /// True when the two lines may be the same, within a loose tolerance; always when the errors are infinite.
    #[inline(always)]
    pub fn is_near(&self, other: &FloatLine, tables: &LineTables) -> bool {
        let slack = 1e-9 + self.direction_error + other.direction_error;
        let moment_slack = 1e-9 * tables.reach + self.moment_error + other.moment_error;
        // What is not a number counts as near.
        let far = |a: f64, b: f64, slack: f64| (a - b).abs() > slack;
        !(far(self.d[0], other.d[0], slack)
            || far(self.d[1], other.d[1], slack)
            || far(self.moment, other.moment, moment_slack))
    }

    /// The direction, of length about 1, in the true Euclidean plane.
    pub fn direction(&self) -> [f64; 2] {
        self.d
    }
}

/// A line in enclosures, in table coordinates.
#[derive(Clone, Debug)]
pub struct WideLine {
    d: [Enclosure; 2],
    moment: Enclosure,
}

impl WideLine {
    /// Encloses an exact line.
    pub fn from_exact(line: &ExactLine) -> WideLine {
        // Relative to the direction's length, so that short aims lose nothing.
        let scale = line.d.x.to_f64().abs().max(line.d.y.to_f64().abs());
        // Out of the range of floating point the bounds are merely too wide to decide.
        let places = if scale.is_normal() {
            scale.log2().abs().ceil() as u32
        } else {
            0
        };
        let bits = WIDE + places + 8;
        WideLine {
            d: [
                line.d.x.enclosure_within(bits),
                line.d.y.enclosure_within(bits),
            ],
            moment: line.moment.enclosure_within(bits),
        }
    }

    /// The side of the line on which a corner of the table lies, when the bounds settle it.
    pub fn side_of(&self, tables: &LineTables, corner: usize) -> Option<Sign> {
        let [x, y] = &tables.wide_corners[corner];
        let value = self.d[0].mul(y).sub(&self.d[1].mul(x)).sub(&self.moment);
        value.sign().filter(|s| *s != Sign::Zero)
    }

    /// Bounces off a side.
    pub fn bounce(&mut self, tables: &LineTables, side: usize) {
        let [a, b, c0, c1] = &tables.wide_reflections[side];
        let [x, y] = &self.d;
        let turned_x = a.mul(x).add(&tables.wide_form.mul(b).mul(y));
        let turned_y = b.mul(x).sub(&a.mul(y));
        self.moment = turned_x.mul(c1).sub(&turned_y.mul(c0)).sub(&self.moment);
        self.d = [turned_x, turned_y];
    }
}

/// A line with exact coordinates, up to a positive factor.
#[derive(Clone, Debug)]
pub struct ExactLine {
    /// Direction.
    pub d: Vector,
    /// d × p for each point p of the line.
    pub moment: Real,
}

impl ExactLine {
    /// The line through a point.
    pub fn new(point: &Vector, direction: &Vector) -> ExactLine {
        ExactLine {
            d: direction.clone(),
            moment: direction.cross(point),
        }
    }

    /// d × v − μ for a corner v: positive on the left.
    pub fn offset(&self, tables: &LineTables, corner: usize) -> Real {
        self.d.cross(&tables.corners[corner]) - &self.moment
    }

    /// Bounces off a side.
    pub fn bounce(&mut self, tables: &LineTables, side: usize) {
        let reflection = &tables.reflections[side];
        self.d = reflection.turn(&self.d, &tables.form);
        self.moment = self.d.cross(&reflection.t) - &self.moment;
    }

    /// True when both are the same oriented line with the same scale of direction.
    pub fn same(&self, other: &ExactLine) -> bool {
        self.d == other.d && self.moment == other.moment
    }

    /// Where the line crosses side `side`, as the fraction of the way from its first corner.
    ///
    /// # Panics
    /// If the line is parallel to the side.
    pub fn fraction_on(&self, tables: &LineTables, side: usize) -> Real {
        let next = tables.ends[side];
        let (first, second) = (self.offset(tables, side), self.offset(tables, next));
        &first / &(&first - &second)
    }
}

/// The point at a fraction of a side.
pub fn point_on(table: &Table, side: usize, fraction: &Real) -> Vector {
    table
        .corner(side)
        .plus(&table.side_vector(side).times(fraction))
}

#[cfg(test)]
mod tests {
    use super::*;

    /// The bound after n bounces is that of the module, computed anew, and decides exactly outside of it.
    #[test]
    fn bounds_grow_as_derived() {
        let corners = [(0, 0), (7, 1), (3, 5)].map(|(x, y)| Vector::new(x.into(), y.into()));
        let table =
            Table::new("t", corners.to_vec(), 3.into(), vec!['a', 'b', 'c']).expect("a table");
        let tables = LineTables::new(&table);
        let start = point_on(&table, 0, &Real::from(rug::Rational::from((1, 3))));
        let exact = ExactLine::new(&start, &Vector::new(1.into(), 2.into()));
        let mut line = FloatLine::from_wide(&WideLine::from_exact(&exact), &tables);
        let (unit, tabulated, reach) = (2f64.powi(-53), 2f64.powi(-48), tables.reach);
        let (mut a, mut m) = (2.0 * tabulated, 4.0 * tabulated * reach);
        for n in 0..5000 {
            line.bounce(&tables, n % 3);
            a += 4.0 * unit + 2.0 * tabulated;
            m += reach * (a + 8.0 * tabulated + 16.0 * unit);
            assert!(
                line.direction_error >= 0.999 * a && line.moment_error >= 0.999 * m,
                "{n}"
            );
        }
        // The corner's value is placed just inside and just outside of the bound.
        let bound = reach * (a + 4.0 * tabulated) + 1.01 * m;
        let v = tables.float_corners[1];
        let at = line.d[0] * v[1] - line.d[1] * v[0];
        for (share, decided) in [
            (0.99, None),
            (-0.99, None),
            (1.01, Some(Sign::Positive)),
            (-1.01, Some(Sign::Negative)),
        ] {
            line.moment = at - share * bound;
            assert_eq!(line.side_of(&tables, 1), decided, "{share}");
        }
    }
}
