//! The certificate file: one JSON object a line.
//!
//! The first line is a [`Header`] with the whole table, then one [`Entry`] for each word, then an [`End`]. Numbers are
//! text: a rational as `3/7`, an element of the table's field as its coordinates in the powers of the generator,
//! separated by spaces, constant first; those after the last that is not zero may be left out.
//!
//! The corners are the table's own, translated or not; positions of corner images are named by the number of sides
//! crossed before the copy that they belong to, and the corner.

use serde::{Deserialize, Serialize};

/// The format and its version.
pub const SCHEMA: &str = "reboundary-certificate/1";

/// What a file claims.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum Kind {
    /// The entries are all words of one length, in the order of the letters: nothing is missing.
    Language,
    /// Each entry says of one word whether it is in the language.
    Answers,
}

/// The first line.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Header {
    /// [`SCHEMA`].
    pub schema: String,
    /// What the file claims.
    pub kind: Kind,
    /// The program that made it, with its version; for people.
    pub program: String,
    /// The length of the words, for [`Kind::Language`].
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub length: Option<usize>,
    /// The table.
    pub table: TableText,
    /// A triangulation of the table by inner diagonals: the corners of each triangle, counterclockwise.
    pub triangles: Vec<[usize; 3]>,
}

/// A table written out.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct TableText {
    /// The title, for people.
    pub title: String,
    /// The field of all coordinates.
    pub field: FieldText,
    /// g of the plane form x² + g·y².
    pub form: String,
    /// The corners of each ring: the outline counterclockwise, holes clockwise.
    pub rings: Vec<Vec<[String; 2]>>,
    /// The letters in their order.
    pub letters: Vec<char>,
    /// The letter of the side that starts at each corner, ring after ring.
    pub sides: Vec<char>,
}

/// A real number field.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct FieldText {
    /// The minimal polynomial of the generator, monic with integer coefficients, constant term first.
    pub polynomial: Vec<String>,
    /// Rational bounds: the generator is the one root above the first and at most the second.
    pub root: [String; 2],
}

/// What is claimed of one word.
#[derive(Clone, Debug, Default, PartialEq, Eq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Entry {
    /// The word.
    pub word: String,
    /// For a word outside the language: the length of its longest prefix that is in it.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub prefix: Option<usize>,
    /// An orbit with this word, or with that prefix when it is not empty.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub witness: Option<Witness>,
    /// The measure of the word's cylinder, cut off after [`PLACES`] places.
    #[serde(default, skip_serializing_if = "Option::is_none")]
    pub measure: Option<String>,
    /// For a word outside the language: why the prefix cannot be continued.
    #[serde(default, skip_serializing_if = "Vec::is_empty")]
    pub refutations: Vec<Refutation>,
}

/// Places after the point of a measure.
pub const PLACES: u32 = 30;

/// An exact start of an orbit.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Witness {
    /// The starting side, by the number of its first corner.
    pub side: usize,
    /// The fraction of the way along it: a rational number.
    pub start: String,
    /// The direction in table coordinates: integers.
    pub aim: [String; 2],
}

/// Corner images that no line separates: those that should be on its left, and those on its right, have a point of their
/// convex hulls in common, given by the weights. At most four.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(transparent)]
pub struct Refutation {
    /// The images.
    pub pins: Vec<Pin>,
}

/// A corner image with its side and weight.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct Pin {
    /// How many sides are crossed before the copy of the table that it belongs to.
    pub crossings: usize,
    /// The corner.
    pub corner: usize,
    /// True when lines with the word have it on their left.
    pub left: bool,
    /// A positive number of the field. The weights of both sides have the same sum, and the weighted images too.
    pub weight: String,
}

/// The last line.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
#[serde(deny_unknown_fields)]
pub struct End {
    /// The number of entries.
    pub entries: u64,
}
