//! Why a word is not in the language.
//!
//! The lines with a word have certain corner images on their left and others on their right. When no line has, then by
//! Kirchberger's theorem (Math. Ann. 57 (1903) 509–540; from Helly's theorem for the dual cone) at most four of the images
//! show it: the convex hull of the left ones among them meets that of the right ones. One may be the image at which the
//! cell of the lines becomes empty; the others are then found among the faces of the cell before.

use super::format::{Pin, Refutation};
use super::make::write_number;
use super::verify::cells::{self, Cell, Face};
use super::verify::plane::{Plane, Point, cross, minus};
use crate::number::{Real, Sign};

/// Refutations that close every way of a word of letters, given by their places in the alphabet. When the word is in the
/// language some ways stay open, and the answer is `None`.
///
/// Cost: an exact cut of a cell for each letter and corner passed, and at most some hundred determinants for each
/// refutation.
pub fn refute(plane: &Plane, word: &[usize]) -> Option<Vec<Refutation>> {
    let mut refutations = Vec::new();
    let mut ways = cells::starts(plane, *word.first()?);
    for (n, letter) in word.iter().enumerate().skip(1) {
        let mut longer = Vec::new();
        for way in &ways {
            longer.extend(cells::longer(plane, way, n - 1, *letter, |cell, face| {
                refutations.push(separate(cell, face));
            }));
        }
        ways = longer;
    }
    ways.is_empty().then_some(refutations)
}

/// At most three faces of a cell that no line separates from a further image as it should be.
fn separate(cell: &Cell, last: &Face) -> Refutation {
    let faces = &cell.faces;
    let m = faces.len();
    let one = (0..m).map(|a| vec![a]);
    let two = (0..m).flat_map(|a| (a + 1..m).map(move |b| vec![a, b]));
    let three =
        (0..m).flat_map(|a| (a + 1..m).flat_map(move |b| (b + 1..m).map(move |c| vec![a, b, c])));
    let mut candidates = one.chain(two).chain(three);
    let found = candidates.find_map(|chosen| {
        let mut all: Vec<&Face> = chosen.into_iter().map(|i| &faces[i]).collect();
        all.push(last);
        weights(&all).map(|weights| (all, weights))
    });
    let (all, weights) = found.expect("four images show that a cell is empty");
    let pins = all.iter().zip(&weights).map(|(face, weight)| Pin {
        crossings: face.bound.0,
        corner: face.bound.1,
        left: face.bound.2,
        weight: write_number(weight),
    });
    Refutation {
        pins: pins.collect(),
    }
}

/// Positive weights for which the weighted left images have the same sum as the weighted right ones, and the weights too.
fn weights(faces: &[&Face]) -> Option<Vec<Real>> {
    let at = |i: usize| &faces[i].image;
    let raw: Vec<Real> = match faces.len() {
        2 => {
            if at(0) != at(1) {
                return None;
            }
            vec![Real::from(1), Real::from(-1)]
        }
        3 => {
            let axis = along(at(0), at(1), at(2))?;
            let x = |i: usize| &at(i)[axis];
            vec![x(1) - x(2), x(2) - x(0), x(0) - x(1)]
        }
        _ => (0..4)
            .map(|i| {
                let [a, b, c] = [(i + 1) % 4, (i + 2) % 4, (i + 3) % 4].map(at);
                let area = cross(&minus(b, a), &minus(c, a));
                // Leaving out each point in turn gives cofactors of alternating sign.
                if i % 2 == 0 { area } else { -area }
            })
            .collect(),
    };
    // The dependency counts images on the right negatively; its overall sign is free.
    let signed: Vec<Real> = raw
        .into_iter()
        .zip(faces)
        .map(|(weight, face)| if face.bound.2 { weight } else { -weight })
        .collect();
    let all = |sign: Sign| signed.iter().all(|weight| weight.sign() == sign);
    if all(Sign::Positive) {
        Some(signed)
    } else if all(Sign::Negative) {
        Some(signed.into_iter().map(|weight| -weight).collect())
    } else {
        None
    }
}

/// A coordinate in which three collinear points differ, if they are collinear and not all the same.
fn along(a: &Point, b: &Point, c: &Point) -> Option<usize> {
    if !cross(&minus(b, a), &minus(c, a)).is_zero() {
        return None;
    }
    (0..2).find(|axis| a[*axis] != b[*axis] || a[*axis] != c[*axis])
}
