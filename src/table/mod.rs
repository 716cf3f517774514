//! Tables: simple polygons with exact corners and a letter on each side, perhaps with holes.
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

/// The index of a corner: 0 … k−1, the outline's counterclockwise, then each hole's clockwise. So the table
/// lies to the left of every side.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct CornerId(pub u8);

/// The index of a side: side i runs from corner i to the next corner of its ring.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct SideId(pub u8);

/// The index of a letter: letters are numbered in the order in which they first appear in the file. Sides
/// with the same letter have the same one.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct LetterId(pub u8);

/// The most sides that a table can have, holes included: an index must fit in a byte.
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

/// A closed polygonal line: the outline of a table or of a hole.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Ring {
    /// Its corners, either way round.
    pub corners: Vec<Vector>,
    /// The letter of the side from each corner to the next; sides of a table may share a letter.
    pub letters: Vec<char>,
}

/// A checked polygon table: simple, perhaps with holes, without straight corners.
///
/// Invariants: at least three corners in each ring; the outline counterclockwise, holes clockwise, disjoint
/// from each other and the outline, each inside the outline and outside the others; all coordinates and the
/// form are written in `field`; the form is positive.
#[derive(Clone, Debug)]
pub struct Table {
    title: String,
    field: Field,
    corners: Vec<Vector>,
    /// The first corner of each ring, the outline's (0) first; then the number of corners.
    rings: Vec<usize>,
    form: Real,
    alphabet: Vec<char>,
    /// The letter of each side.
    letter_ids: Vec<LetterId>,
    turned_round: bool,
}

impl Table {
    /// Checks a polygon without holes and makes it a table. Corners in clockwise order are turned round: the
    /// order is reversed, keeping corner 0 first and each letter on its side.
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
        Table::with_holes(title, Ring { corners, letters }, Vec::new(), form)
    }

    /// Checks a polygon with holes and makes it a table. Rings that run the wrong way are turned round:
    /// corners are reversed, the first one stays, and each letter stays on its side.
    ///
    /// # Errors
    /// The first fault found. Corners and sides in it are numbered through as given: those of the outline,
    /// then those of each hole.
    pub fn with_holes(
        title: &str,
        outline: Ring,
        holes: Vec<Ring>,
        form: Real,
    ) -> Result<Table, TableFault> {
        let mut all = vec![outline];
        all.extend(holes);
        let turns = validity::check(&all, &form)?;
        // Letters are numbered as given, before anything is turned round.
        let mut alphabet: Vec<char> = Vec::new();
        for letter in all.iter().flat_map(|ring| &ring.letters) {
            if !alphabet.contains(letter) {
                alphabet.push(*letter);
            }
        }
        let turned_round = turns[0] == validity::Turn::Clockwise;
        for (i, (ring, turn)) in all.iter_mut().zip(&turns).enumerate() {
            if (*turn == validity::Turn::Clockwise) == (i == 0) {
                ring.corners[1..].reverse();
                ring.letters.reverse();
            }
        }
        let mut rings = vec![0];
        for ring in &all {
            rings.push(rings[rings.len() - 1] + ring.corners.len());
        }
        let letter_ids = all
            .iter()
            .flat_map(|ring| &ring.letters)
            .map(|letter| {
                let index = alphabet.iter().position(|known| known == letter);
                LetterId(index.expect("collected above") as u8)
            })
            .collect();
        let corners: Vec<Vector> = all.into_iter().flat_map(|ring| ring.corners).collect();
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
            rings,
            form: form.lifted_to(&field),
            field,
            alphabet,
            letter_ids,
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

    /// The number of sides, which is the number of corners, holes included.
    pub fn sides(&self) -> usize {
        self.corners.len()
    }

    /// The corners: the outline's counterclockwise, then each hole's clockwise.
    pub fn corners(&self) -> &[Vector] {
        &self.corners
    }

    /// A corner by its index, which is also the corner that the side of this index starts from. Indices are
    /// taken modulo the number of corners; with holes the next corner is not always that of the next index, but
    /// that of [`Table::after`].
    pub fn corner(&self, index: usize) -> &Vector {
        &self.corners[index % self.corners.len()]
    }

    /// The indices of the corners of each ring, the outline first.
    pub fn rings(&self) -> impl Iterator<Item = std::ops::Range<usize>> + '_ {
        self.rings.windows(2).map(|ends| ends[0]..ends[1])
    }

    /// The number of holes.
    pub fn holes(&self) -> usize {
        self.rings.len() - 2
    }

    fn ring_of(&self, index: usize) -> std::ops::Range<usize> {
        self.rings()
            .find(|ring| ring.contains(&index))
            .expect("a corner belongs to a ring")
    }

    /// The next corner on the same ring: where the side of this index ends.
    pub fn after(&self, index: usize) -> usize {
        let ring = self.ring_of(index);
        if index + 1 < ring.end {
            index + 1
        } else {
            ring.start
        }
    }

    /// The corner before on the same ring, which is also the index of the side that ends at this corner.
    pub fn before(&self, index: usize) -> usize {
        let ring = self.ring_of(index);
        if index > ring.start {
            index - 1
        } else {
            ring.end - 1
        }
    }

    /// The vector along side i, from corner i to the next on its ring.
    pub fn side_vector(&self, index: usize) -> Vector {
        self.corner(self.after(index)).minus(self.corner(index))
    }

    /// g of the plane form x² + g·y².
    pub fn form(&self) -> &Real {
        &self.form
    }

    /// The letters, by [`LetterId`]: each once, in the order in which they first appear in the file.
    pub fn letters(&self) -> &[char] {
        &self.alphabet
    }

    /// The letter of a side as an index into [`Table::letters`].
    pub fn letter_id(&self, side: SideId) -> LetterId {
        self.letter_ids[side.0 as usize]
    }

    /// The letter of a side.
    pub fn letter(&self, side: SideId) -> char {
        self.alphabet[self.letter_id(side).0 as usize]
    }

    /// True when every side has a letter of its own.
    pub fn has_distinct_letters(&self) -> bool {
        self.alphabet.len() == self.corners.len()
    }

    /// True when each word is one beam: a polygon without holes whose sides have letters of their own. Then
    /// p(n) follows from the numbers of generalized diagonals; otherwise words are bundles of beams.
    pub fn has_one_beam_a_word(&self) -> bool {
        self.has_distinct_letters() && self.holes() == 0
    }

    /// True when the corners of the outline were given clockwise and have been turned round.
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

    /// The same table with each coordinate multiplied by a positive number and the form by a third: the same
    /// figure up to its size when the form's factor times the square of the second is the square of the first.
    pub fn in_units(&self, units: &[Real; 2], form: &Real) -> Table {
        let scaled = |c: &Vector| Vector::new(&c.x * &units[0], &c.y * &units[1]);
        Table {
            corners: self.corners.iter().map(scaled).collect(),
            form: &self.form * form,
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

    /// An enclosure of the perimeter: of the lengths of all sides together, those of holes included.
    pub fn perimeter(&self, precision: u32) -> Enclosure {
        let mut sum = Enclosure::zero(precision);
        for i in 0..self.sides() {
            sum.add_assign(&self.length(&self.side_vector(i), precision));
        }
        sum
    }

    /// The sides with a letter.
    pub fn sides_of_letter(&self, letter: char) -> Vec<SideId> {
        (0..self.sides() as u8)
            .map(SideId)
            .filter(|side| self.letter(*side) == letter)
            .collect()
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
