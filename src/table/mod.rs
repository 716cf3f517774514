//! Tables: simple polygons with exact corners and a letter on each side.
//!
//! - [`validity`]: which polygons are tables; every refusal names the corners or sides at fault.
//! - [`triangulation`]: cutting a table into triangles by exact predicates.
//! - [`facts`]: angles, reflection group, area, perimeter, convexity, each proved.
//! - [`symmetry`]: isometries that keep a table, exactly.
//! - [`surface`]: the closed surface of a finite reflection group.
//! - [`frame`]: coordinates that need the smallest field.
//! - [`summary`]: a table and its facts, ready to be written.
//! - [`expression`]: the exact expressions of a table file.
//! - [`file`](mod@file): the TOML table file.
//! - [`shape`]: regular polygons and triangles by their angles, in the smallest field.
//! - [`diagnostic`]: messages that point into a table file.

pub mod diagnostic;
pub mod expression;
pub mod facts;
pub mod file;
pub mod frame;
pub mod shape;
pub mod summary;
pub mod surface;
pub mod symmetry;
pub mod triangulation;
pub mod validity;

use crate::number::{Enclosure, Field, Real, Sign};
pub use validity::TableFault;

/// The index of a corner: 0 … k−1 counterclockwise.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct CornerId(pub u8);

/// The index of a side: side i runs from corner i to corner i+1.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct SideId(pub u8);

/// The most sides that a table can have: an index must fit in a byte.
pub const MOST_SIDES: usize = 255;

/// A point or vector of the plane with exact coordinates.
#[derive(Clone, Debug, PartialEq, Eq, Hash)]
pub struct Vector {
    /// First coordinate.
    pub x: Real,
    /// Second coordinate, in units of √g where g is the table's plane form.
    pub y: Real,
}

impl Vector {
    /// A vector from its coordinates.
    pub fn new(x: Real, y: Real) -> Vector {
        Vector { x, y }
    }

    /// The sum.
    pub fn plus(&self, other: &Vector) -> Vector {
        Vector::new(&self.x + &other.x, &self.y + &other.y)
    }

    /// The difference.
    pub fn minus(&self, other: &Vector) -> Vector {
        Vector::new(&self.x - &other.x, &self.y - &other.y)
    }

    /// The vector times a number.
    pub fn times(&self, factor: &Real) -> Vector {
        Vector::new(&self.x * factor, &self.y * factor)
    }

    /// `x₁y₂ − y₁x₂`: positive when `other` points to the left. The true area form is √g times this.
    pub fn cross(&self, other: &Vector) -> Real {
        &self.x * &other.y - &self.y * &other.x
    }

    /// `x₁x₂ + g·y₁y₂`, the inner product of the plane form g.
    pub fn dot(&self, other: &Vector, form: &Real) -> Real {
        &self.x * &other.x + form * &(&self.y * &other.y)
    }

    /// The square of the length.
    pub fn squared_length(&self, form: &Real) -> Real {
        self.dot(self, form)
    }

    /// The product of the two as numbers x + y√(−g), whose squared modulus is the plane form.
    pub fn product(&self, other: &Vector, form: &Real) -> Vector {
        Vector::new(
            &self.x * &other.x - form * &(&self.y * &other.y),
            &self.x * &other.y + &self.y * &other.x,
        )
    }

    /// The conjugate x − y√(−g).
    pub fn conjugate(&self) -> Vector {
        Vector::new(self.x.clone(), -&self.y)
    }

    /// True for the zero vector.
    pub fn is_zero(&self) -> bool {
        self.x.is_zero() && self.y.is_zero()
    }
}

/// Which side of the line from `a` to `b` the point `c` is on: positive for left, zero exactly when the
/// three are collinear.
pub fn orientation(a: &Vector, b: &Vector, c: &Vector) -> Sign {
    b.minus(a).cross(&c.minus(a)).sign()
}

/// A checked polygon table: simple, counterclockwise, without straight corners.
///
/// Invariants: at least three corners; all coordinates and the form are written in `field`; the form is
/// positive; letters are distinct, one for each side.
#[derive(Clone, Debug)]
pub struct Table {
    title: String,
    field: Field,
    corners: Vec<Vector>,
    form: Real,
    letters: Vec<char>,
    turned_round: bool,
}

impl Table {
    /// Checks a polygon and makes it a table. Corners in clockwise order are turned round: the order is
    /// reversed, keeping corner 0 first and each letter on its side.
    ///
    /// `form` is the g of the plane form x² + g·y²: the second coordinates are in units of √g.
    ///
    /// # Errors
    /// The first fault found, with the corners or sides that show it.
    pub fn new(
        title: &str,
        corners: Vec<Vector>,
        form: Real,
        letters: Vec<char>,
    ) -> Result<Table, TableFault> {
        let mut corners = corners;
        let mut letters = letters;
        let turned_round = validity::check(&corners, &letters, &form)? == validity::Turn::Clockwise;
        if turned_round {
            corners[1..].reverse();
            letters.reverse();
        }
        let field = corners
            .iter()
            .flat_map(|c| [&c.x, &c.y])
            .chain([&form])
            .map(Real::field)
            .find(|f| !f.is_rational())
            .cloned()
            .unwrap_or_else(Field::rationals);
        let corners = corners
            .iter()
            .map(|c| Vector::new(c.x.lifted_to(&field), c.y.lifted_to(&field)))
            .collect();
        Ok(Table {
            title: title.into(),
            corners,
            form: form.lifted_to(&field),
            field,
            letters,
            turned_round,
        })
    }

    /// The title.
    pub fn title(&self) -> &str {
        &self.title
    }

    /// The field that all coordinates and the form are written in.
    pub fn field(&self) -> &Field {
        &self.field
    }

    /// The number of sides, which is the number of corners.
    pub fn sides(&self) -> usize {
        self.corners.len()
    }

    /// The corners, counterclockwise.
    pub fn corners(&self) -> &[Vector] {
        &self.corners
    }

    /// Corner i, indices taken modulo the number of corners.
    pub fn corner(&self, index: usize) -> &Vector {
        &self.corners[index % self.corners.len()]
    }

    /// The vector along side i, from corner i to corner i+1.
    pub fn side_vector(&self, index: usize) -> Vector {
        self.corner(index + 1).minus(self.corner(index))
    }

    /// g of the plane form x² + g·y².
    pub fn form(&self) -> &Real {
        &self.form
    }

    /// The letter of each side.
    pub fn letters(&self) -> &[char] {
        &self.letters
    }

    /// True when the corners were given clockwise and have been turned round.
    pub fn turned_round(&self) -> bool {
        self.turned_round
    }

    /// The same table written in a larger field. `lift` takes each number of the old field to the same number
    /// in the new one.
    pub fn in_field(&self, field: &Field, lift: impl Fn(&Real) -> Real) -> Table {
        let lift = |number: &Real| lift(number).lifted_to(field);
        Table {
            corners: self
                .corners
                .iter()
                .map(|c| Vector::new(lift(&c.x), lift(&c.y)))
                .collect(),
            form: lift(&self.form),
            field: field.clone(),
            ..self.clone()
        }
    }

    /// The same table with corner 0 at the origin.
    pub fn moved_to_origin(&self) -> Table {
        let first = &self.corners[0];
        Table {
            corners: self.corners.iter().map(|c| c.minus(first)).collect(),
            ..self.clone()
        }
    }

    /// An enclosure of the length of a vector of this table's plane.
    pub fn length(&self, vector: &Vector, precision: u32) -> Enclosure {
        vector
            .squared_length(&self.form)
            .enclosure(precision)
            .sqrt()
    }

    /// An enclosure of the perimeter.
    pub fn perimeter(&self, precision: u32) -> Enclosure {
        let mut sum = Enclosure::zero(precision);
        for i in 0..self.sides() {
            sum.add_assign(&self.length(&self.side_vector(i), precision));
        }
        sum
    }

    /// The side with a letter.
    pub fn side_of_letter(&self, letter: char) -> Option<SideId> {
        let index = self.letters.iter().position(|l| *l == letter)?;
        Some(SideId(index as u8))
    }
}

/// The letters that sides get when the file names none: a–z, A–Z, then Greek and Cyrillic lower case,
/// digits and accented Latin: enough for [`MOST_SIDES`].
pub fn default_letters(count: usize) -> Vec<char> {
    ('a'..='z')
        .chain('A'..='Z')
        .chain('α'..='ω')
        .chain('а'..='я')
        .chain('0'..='9')
        .chain('\u{100}'..='\u{1bf}')
        .take(count)
        .collect()
}
