//! A table and its proved facts, ready to be written as JSON or text.

use super::facts::{Angle, Facts, ReflectionGroup, angle_kind, squared_area};
use super::frame::Frame;
use super::surface::surface;
use super::symmetry::{Symmetry, symmetries};
use super::{SideId, Table, Vector};
use crate::number::discriminant::polynomial_discriminant;
use crate::number::poly;
use crate::number::{Field, Real};
use serde::Serialize;
use std::collections::BTreeMap;

/// Places after the point in the decimals of a summary.
const PLACES: usize = 20;

/// An exact number with its decimal value (less than one unit off in the last digit).
#[derive(Clone, Debug, PartialEq, Eq, Serialize)]
pub struct Exact {
    /// In the powers of the field's generator `t`.
    pub exact: String,
    /// To 20 places; very small and very large values with 21 digits and a power of ten.
    pub decimal: String,
}

impl Exact {
    /// Writes a number.
    pub fn new(value: &Real) -> Exact {
        Exact {
            exact: value.display_in("t"),
            decimal: decimal(|bits| value.enclosure_within(bits)),
        }
    }
}

/// A point or vector in table coordinates.
#[derive(Clone, Debug, PartialEq, Eq, Serialize)]
pub struct ExactVector {
    /// First coordinate.
    pub x: Exact,
    /// Second coordinate, in units of √g.
    pub y: Exact,
}

impl ExactVector {
    /// Writes a vector.
    pub fn new(value: &Vector) -> ExactVector {
        ExactVector {
            x: Exact::new(&value.x),
            y: Exact::new(&value.y),
        }
    }
}

/// One side.
#[derive(Clone, Debug, PartialEq, Eq, Serialize)]
pub struct SideSummary {
    /// Its letter.
    pub letter: String,
    /// The corners that it joins.
    pub corners: [usize; 2],
    /// The square of its length.
    pub squared_length: Exact,
    /// Its length, as a decimal.
    pub length: String,
}

/// The field that the coordinates live in.
#[derive(Clone, Debug, PartialEq, Eq, Serialize)]
pub struct FieldSummary {
    /// Degree over the rationals.
    pub degree: usize,
    /// Minimal polynomial of the generator t.
    pub minimal_polynomial: String,
    /// The generator, as a decimal.
    pub generator: String,
    /// The discriminant of the minimal polynomial: the field's own, times a square that is not determined.
    pub polynomial_discriminant: String,
}

impl FieldSummary {
    /// Describes a field.
    pub fn new(field: &Field) -> FieldSummary {
        FieldSummary {
            degree: field.degree(),
            minimal_polynomial: poly::display(field.minimal_polynomial(), "t"),
            generator: decimal(|bits| field.generator().enclosure_within(bits)),
            polynomial_discriminant: polynomial_discriminant(field).to_string(),
        }
    }
}

/// What is proved about one interior angle.
#[derive(Clone, Debug, PartialEq, Eq, Serialize)]
pub struct AngleStanding {
    /// `acute`, `right`, `obtuse` or `reflex`.
    pub kind: &'static str,
    /// True: proved to be a rational multiple of π; false: proved to be none.
    pub rational: bool,
}

/// The points that one corner gives on the surface.
#[derive(Clone, Debug, PartialEq, Eq, Serialize)]
pub struct ConeSummary {
    /// The corner.
    pub corner: usize,
    /// How many points.
    pub points: u64,
    /// The angle round each, in units of 2π; 1 where the surface is flat.
    pub turns: u64,
}

/// The closed surface of a finite reflection group (see [`surface`](super::surface)).
#[derive(Clone, Debug, PartialEq, Eq, Serialize)]
pub struct SurfaceSummary {
    /// Copies of the table.
    pub copies: u64,
    /// Genus.
    pub genus: u64,
    /// By corner.
    pub cone_points: Vec<ConeSummary>,
}

/// An isometry that keeps the table, other than the identity.
#[derive(Clone, Debug, PartialEq, Eq, Serialize)]
pub struct SymmetrySummary {
    /// `rotation` or `reflection`.
    pub kind: &'static str,
    /// The permutation of the letters in cycles; null when sides that share a letter go to different letters.
    pub cycles: Option<String>,
    /// Each letter and where it goes; null with `cycles`.
    pub letters: Option<BTreeMap<String, String>>,
}

/// A table with its facts.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct TableSummary {
    /// The title.
    pub title: String,
    /// The field.
    pub field: FieldSummary,
    /// The smallest field that walks need, in coordinates of their own (see [`frame`](super::frame)).
    pub walk_field: FieldSummary,
    /// g of the plane form x² + g·y².
    pub form: Exact,
    /// Corners: the outline's counterclockwise, then each hole's clockwise.
    pub corners: Vec<ExactVector>,
    /// Sides.
    pub sides: Vec<SideSummary>,
    /// The corners of each hole, clockwise.
    pub holes: Vec<Vec<usize>>,
    /// Interior angles by corner: a rational multiple of π such as `2π/7`, or that it is none.
    pub angles: Vec<String>,
    /// What is proved about each interior angle.
    pub angle_standing: Vec<AngleStanding>,
    /// All interior angles below π.
    pub convex: bool,
    /// All interior angles π/2 or 3π/2.
    pub right_angled: bool,
    /// Reflected copies tile the plane.
    pub integrable: bool,
    /// Order of the group generated by the linear parts of the side reflections; null when infinite.
    pub reflection_group_order: Option<u64>,
    /// The surface that unfolding closes up to; null when the group is infinite.
    pub surface: Option<SurfaceSummary>,
    /// The isometries that keep the table, without the identity; each that permutes the letters keeps the
    /// language.
    pub symmetries: Vec<SymmetrySummary>,
    /// The square of the area.
    pub squared_area: Exact,
    /// The area, as a decimal.
    pub area: String,
    /// The perimeter, as a decimal.
    pub perimeter: String,
    /// π·area/perimeter, as a decimal.
    pub mean_chord: String,
}

/// Gathers a summary.
pub fn summary(table: &Table, facts: &Facts) -> TableSummary {
    let k = table.sides();
    TableSummary {
        title: table.title().into(),
        walk_field: match Frame::smaller(table) {
            Some(frame) => FieldSummary::new(frame.field()),
            None => FieldSummary::new(table.field()),
        },
        field: FieldSummary::new(table.field()),
        form: Exact::new(table.form()),
        corners: table.corners().iter().map(ExactVector::new).collect(),
        sides: (0..k)
            .map(|i| {
                let squared = table.side_vector(i).squared_length(table.form());
                SideSummary {
                    letter: table.letter(SideId(i as u8)).to_string(),
                    corners: [i, table.after(i)],
                    length: root_decimal(&squared),
                    squared_length: Exact::new(&squared),
                }
            })
            .collect(),
        holes: table.rings().skip(1).map(Iterator::collect).collect(),
        angles: facts.angles.iter().map(|a| a.describe()).collect(),
        angle_standing: (facts.angles.iter().enumerate())
            .map(|(i, angle)| AngleStanding {
                kind: angle_kind(table, i).name(),
                rational: *angle != Angle::Irrational,
            })
            .collect(),
        surface: surface_summary(table, facts),
        symmetries: symmetries(table)
            .iter()
            .map(|symmetry| symmetry_summary(symmetry, table.letters()))
            .collect(),
        convex: facts.convex,
        right_angled: facts.right_angled,
        integrable: facts.integrable,
        reflection_group_order: match facts.group {
            ReflectionGroup::Finite { r } => Some(2 * r),
            ReflectionGroup::Infinite => None,
        },
        area: root_decimal(&squared_area(table, facts)),
        squared_area: Exact::new(&squared_area(table, facts)),
        perimeter: decimal(|bits| table.perimeter(bits)),
        mean_chord: decimal(|bits| {
            let area = squared_area(table, facts).enclosure_within(bits).sqrt();
            let chord = crate::number::Enclosure::pi(bits).mul(&area);
            chord
                .div(&table.perimeter(bits))
                .expect("a perimeter is positive")
        }),
    }
}

fn surface_summary(table: &Table, facts: &Facts) -> Option<SurfaceSummary> {
    let surface = surface(table.holes() as u64, facts)?;
    Some(SurfaceSummary {
        copies: surface.copies,
        genus: surface.genus,
        cone_points: (0..)
            .zip(surface.cone_points)
            .map(|(corner, cone)| ConeSummary {
                corner,
                points: cone.points,
                turns: cone.turns,
            })
            .collect(),
    })
}

fn symmetry_summary(symmetry: &Symmetry, letters: &[char]) -> SymmetrySummary {
    let moved = symmetry.letters.as_ref();
    SymmetrySummary {
        kind: match symmetry.mirrored {
            true => "reflection",
            false => "rotation",
        },
        cycles: symmetry.cycles(letters),
        letters: moved.map(|moved| {
            (letters.iter().zip(moved))
                .map(|(from, to)| (from.to_string(), letters[to.0 as usize].to_string()))
                .collect()
        }),
    }
}

/// The square root of a nonnegative number, as in [`Exact::decimal`].
pub fn root_decimal(square: &Real) -> String {
    decimal(|bits| square.enclosure_within(bits).sqrt())
}

/// Narrows an enclosure until it settles the decimals, which it does once it is narrower than a unit in the
/// last place.
fn decimal(enclose: impl Fn(u32) -> crate::number::Enclosure) -> String {
    let mut bits = 160;
    loop {
        if let Some(text) = enclose(bits).readable(PLACES) {
            return text;
        }
        bits *= 2;
    }
}
