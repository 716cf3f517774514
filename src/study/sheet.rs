//! A table at a size that floating point can draw.
//!
//! Tables have no unit: corners may lie at 10⁻⁴⁰⁰⁰ or 10⁴⁰⁰⁰, and the plane form may be as extreme. Pictures are made of
//! floating-point numbers, whose squares and products must neither overflow nor vanish. So a table is brought exactly,
//! by powers of two, to an ordinary size before anything is rounded: first the second unit, so that the form lies
//! between 1/4 and 4, then both units, so that the table is about as large as 1. Tables of ordinary size
//! and place stay as they are. One that lies far from the origin for its size is moved there, since rounding would
//! merge its corners.

use crate::language::beams::WordBeam;
use crate::number::{Real, Sign};
use crate::table::{Table, Vector};
use rug::{Integer, Rational};

/// Tables with extents from 2 to this power stay as they are …
const SMALLEST: i32 = -4;
/// … up to 2 to this one.
const LARGEST: i32 = 14;
/// The form stays as it is when its exponent is at most this, up or down.
const FORM: i32 = 40;
/// Corners may lie 2 to this power times further out than the table is large.
const FARTHEST: i32 = 20;

/// A table for drawing, and how vectors of the original get there.
#[derive(Clone, Debug)]
pub struct Sheet {
    /// The table as it is drawn.
    pub table: Table,
    /// What coordinates of vectors are multiplied by.
    units: [Real; 2],
}

impl Sheet {
    /// Chooses the size.
    pub fn new(table: &Table) -> Sheet {
        let form = exponent(table.form()).expect("a form is positive");
        let lift = if form.abs() > FORM {
            form.div_euclid(2)
        } else {
            0
        };
        let home = table.moved_to_origin();
        let extent = |t: &Table| {
            let size = |c: &Vector| {
                let across = exponent(&c.y).map(|y| y + lift);
                exponent(&c.x).max(across)
            };
            t.corners().iter().filter_map(size).max()
        };
        let size = extent(&home).expect("corners differ");
        let far = extent(table).is_some_and(|e| e > size + FARTHEST);
        let shrink = if (SMALLEST..=LARGEST).contains(&size) {
            0
        } else {
            size
        };
        let units = [power_of_two(-shrink), power_of_two(lift - shrink)];
        let placed = if far { &home } else { table };
        let table = if lift == 0 && shrink == 0 {
            placed.clone()
        } else {
            placed.in_units(&units, &power_of_two(-2 * lift))
        };
        Sheet { table, units }
    }

    /// A vector of the original as it is drawn.
    pub fn vector(&self, vector: &Vector) -> Vector {
        Vector::new(&vector.x * &self.units[0], &vector.y * &self.units[1])
    }

    /// Beams with their corner images as they are drawn.
    pub fn beams(&self, beams: &[WordBeam]) -> Vec<WordBeam> {
        let drawn = |beam: &WordBeam| WordBeam {
            images: beam.images.iter().map(|v| self.vector(v)).collect(),
            ..beam.clone()
        };
        beams.iter().map(drawn).collect()
    }
}

/// e with 2^(e−1) ≤ |value| < 2^e, or one more; `None` for zero.
fn exponent(value: &Real) -> Option<i32> {
    if value.sign() == Sign::Zero {
        return None;
    }
    let mut precision = 64;
    // Not zero, so that a narrow enough interval keeps away from it.
    loop {
        let found = value.enclosure(precision);
        if !found.contains_zero() {
            return found.lo().get_exp().max(found.hi().get_exp());
        }
        precision *= 2;
    }
}

fn power_of_two(exponent: i32) -> Real {
    let power = Integer::from(1) << exponent.unsigned_abs();
    Real::from(match exponent < 0 {
        true => Rational::from((Integer::from(1), power)),
        false => Rational::from(power),
    })
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::table::file::parse;

    fn sheet(corners: &str) -> (Table, Sheet) {
        let table = parse("sheet.toml", corners)
            .unwrap_or_else(|e| panic!("{e}"))
            .table;
        let sheet = Sheet::new(&table);
        (table, sheet)
    }

    #[test]
    fn ordinary_tables_stay_as_they_are() {
        let (table, sheet) = sheet(r#"corners = [["3","1"], ["40","0"], ["1/7","sqrt(2)"]]"#);
        assert_eq!(table.corners(), sheet.table.corners());
        assert_eq!(table.form(), sheet.table.form());
    }

    /// Shapes are kept exactly: squared lengths in proportion.
    #[test]
    fn extreme_tables_become_drawable() {
        for text in [
            r#"corners = [["0","0"], ["1e-900","0"], ["0","sqrt(2)*1e-900"]]"#,
            r#"corners = [["0","0"], ["1e900","0"], ["0","sqrt(2)*1e900"]]"#,
            r#"form = "1e-600"
               corners = [["0","0"], ["1","0"], ["0","1e300"]]"#,
            r#"form = "2e601"
               corners = [["0","0"], ["1","0"], ["0","1e-300"]]"#,
        ] {
            let (table, sheet) = sheet(text);
            let length = |t: &Table, i: usize| t.side_vector(i).squared_length(t.form());
            for i in 0..3 {
                assert_eq!(
                    length(&table, i) * length(&sheet.table, 0),
                    length(&table, 0) * length(&sheet.table, i)
                );
                assert_eq!(
                    sheet.vector(&table.side_vector(i)),
                    sheet.table.side_vector(i)
                );
                let drawn = length(&sheet.table, i).to_f64();
                assert!((1e-3..1e3).contains(&drawn), "{text}: {drawn}");
            }
        }
    }

    #[test]
    fn tables_far_away_are_moved_home() {
        let (_, sheet) =
            sheet(r#"corners = [["1e40","1e40"], ["1e40+1","1e40"], ["1e40","1e40+1"]]"#);
        assert!(sheet.table.corner(0).is_zero());
        assert_eq!(sheet.table.corner(1).x, Real::from(1));
    }
}
