//! Limits of p(n)/n³ that are known from outside the data.
//!
//! **Tables that tile.** p(1), s(1) and N determine p, and b(n) = N(n). A generalized diagonal of such a table is a
//! visible vector of the tiling, and the number of sides that it crosses is a linear function of its lattice coordinates in each sector,
//! so N(0) + … + N(n) is a count of primitive lattice points: about 3c·n², whence p(n) ~ c·n³ (the cubic asymptotics of
//! tables that tile are those of Cassaigne, Hubert, Troubetzkoy, Ann. Inst. Fourier 52 (2002) 835–847). Two cases in full:
//!
//! - Rectangles. N(n) = 4φ(n+2), because the diagonal along (a, b) with coprime a, b crosses a + b − 2 sides. With φ(1) + … + φ(n) ~ 3n²/π²,
//!   s(n) ~ 12n²/π² and p(n) ~ 4n³/π². This is OEIS A005598 (Lipatov 1982; Mignosi 1991; Berstel and Pocchiola 1993).
//! - Equilateral. N(2m − 3) = 3φ(m) and other N are 0, so s(n) ~ 3·(3/π²)·(n/2)² and p(n) ~ 3n³/(4π²).
//!
//! The right isosceles triangle and that with angles 30°, 60°, 90° have 2/(3π²) and 19/(30π²) by the same count with the parities of
//! (a, b) told apart, since corners of different angle sit on different classes of lattice points. The tests compare all four with exact
//! p(n) as far as 300.
//!
//! **Regular pentagon.** The outside value is about 1.0041. It agrees with (1/3)·K·A²·M = 1.00410…, where K·L² is the number
//! of oriented generalized diagonals up to length L, A the area and M the mean of 1/width² over all directions: K by the count of
//! saddle connections in the double pentagon (Veech, Invent. Math. 97 (1989), from memory), and A/width(θ) the length travelled for each side
//! crossed. That a long diagonal crosses sides at the mean rate was not proved here, so this value is no theorem of the verdict.

use crate::table::Table;
use crate::table::facts::{Angle, Facts};
use rug::Rational;
use serde::Serialize;
use std::f64::consts::PI;

/// A limit of p(n)/n³ that is known from outside the data.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct KnownConstant {
    /// As it is written: `4/π²`, or `about 1.0041`.
    pub text: &'static str,
    /// Its value.
    pub value: f64,
    /// How far the value may be off: rounding of the double for a closed form, half a unit of the last place otherwise.
    pub slack: f64,
    /// True when the convergence is a theorem for this table.
    pub proved: bool,
    /// What tells this table from others, and how it was checked.
    pub table: &'static str,
    /// Where it is from.
    pub source: &'static str,
}

const LATTICE: &str = "count of primitive lattice points with N(n) = b(n); cubic asymptotics of tables that tile: Cassaigne, Hubert, Troubetzkoy, Ann. Inst. Fourier 52 (2002) 835–847";

/// The known limit for a table, if there is one. All hypotheses are checked exactly: angles are proved multiples of π, lengths of
/// sides are compared as squares in the field. Every side must have its own letter, and the table no holes.
pub fn known_constant(table: &Table, facts: &Facts) -> Option<KnownConstant> {
    if !table.has_one_beam_a_word() || !facts.convex {
        return None;
    }
    let closed = |text, factor: f64, table, source| {
        Some(KnownConstant {
            text,
            value: factor / (PI * PI),
            slack: 1e-15,
            proved: true,
            table,
            source,
        })
    };
    let is = |expected: &[(u32, u32)]| has_angles(facts, expected);
    if facts.integrable && is(&[(1, 2); 4]) {
        return closed(
            "4/π²",
            4.0,
            "a rectangle: four angles, each exactly π/2",
            "p(n) = 4A(n) − 4 with OEIS A005598 (Lipatov 1982; Mignosi 1991; Berstel and Pocchiola, Int. J. Algebra Comput. 3 (1993)), and φ(1) + … + φ(n) ~ 3n²/π²",
        );
    }
    if is(&[(1, 3); 3]) {
        let table = "an equilateral triangle: three angles, each exactly π/3";
        return closed("3/(4π²)", 0.75, table, LATTICE);
    }
    if is(&[(1, 4), (1, 4), (1, 2)]) {
        let table = "a right isosceles triangle: angles exactly π/4, π/4, π/2";
        return closed("2/(3π²)", 2.0 / 3.0, table, LATTICE);
    }
    if is(&[(1, 6), (1, 3), (1, 2)]) {
        let table = "half an equilateral triangle: angles exactly π/6, π/3, π/2";
        return closed("19/(30π²)", 19.0 / 30.0, table, LATTICE);
    }
    if is(&[(3, 5); 5]) && has_equal_sides(table) {
        return Some(KnownConstant {
            text: "about 1.0041",
            value: 1.0041,
            slack: 0.00005,
            proved: false,
            table: "a regular pentagon: five angles, each exactly 3π/5, and five sides of equal squared length",
            source: "numerical value for the regular pentagon; it agrees with the count of saddle connections in the double pentagon",
        });
    }
    None
}

/// True when the angles, in some order, are these multiples of π; the expected ones are sorted.
fn has_angles(facts: &Facts, expected: &[(u32, u32)]) -> bool {
    let mut found = Vec::new();
    for angle in &facts.angles {
        match angle {
            Angle::RationalMultipleOfPi(q) => found.push(q.clone()),
            Angle::Irrational => return false,
        }
    }
    found.sort();
    found.len() == expected.len()
        && (found.iter().zip(expected)).all(|(q, e)| *q == Rational::from(*e))
}

fn has_equal_sides(table: &Table) -> bool {
    let square = |i| table.side_vector(i).squared_length(table.form());
    (1..table.sides()).all(|i| square(i) == square(0))
}
