//! What tables with holes need beyond the search of single beams: strips of odd words beside their axes, and strips that are
//! each other run backward.

use super::closing::{Closing, Gliding};
use super::{PeriodicWord, least_rotation_of_reversed};
use crate::number::Real;
use crate::orbit::launch::backward;
use crate::orbit::{Start, TraceTables, Tracer};
use crate::table::{SideId, Table};

/// The strips of odd words between two beams, from how all beams of all odd words lie beside their axes.
///
/// Cost: the square of the number of beams of a word.
pub fn beside_axes(mut glidings: Vec<(Vec<SideId>, Gliding)>) -> Vec<PeriodicWord> {
    glidings.sort_by(|a, b| a.0.cmp(&b.0).then_with(|| a.1.low.cmp(&b.1.low)));
    let mut found = Vec::new();
    for beams in glidings.chunk_by(|a, b| a.0 == b.0) {
        for (i, (word, beam)) in beams.iter().enumerate() {
            let strips = beams[i + 1..].iter().filter_map(|(_, b)| beam.beside(b));
            found.extend(strips.map(|closing| PeriodicWord {
                word: word.clone(),
                closing,
                // Its double is balanced.
                stable: true,
            }));
        }
    }
    found
}

/// Leaves out each strip that is an earlier one of the same word run backward.
///
/// Only a word that is a cyclic shift of its reversal has such strips. Whether two strips are each other's reversals is
/// told by their middle orbits, followed exactly.
pub fn without_reversals(table: &Table, found: Vec<PeriodicWord>) -> Vec<PeriodicWord> {
    let tables = TraceTables::new(table);
    let mut kept: Vec<PeriodicWord> = Vec::new();
    for word in found {
        let alike = kept.iter().rev().take_while(|w| w.word == word.word);
        let known: Vec<&Closing> = alike.map(|w| &w.closing).collect();
        let again = !known.is_empty() && {
            let reversed = reversed_middle(&tables, &word);
            reversed.is_some_and(|m| known.iter().any(|c| runs_along(c, &m)))
        };
        if !again {
            kept.push(word);
        }
    }
    kept
}

/// True when the middle orbit of a closing has a line of this moment over the first side, on one of its turns.
fn runs_along(closing: &Closing, moment: &Real) -> bool {
    let middle = &closing.strip.middle;
    let mirrored = closing.axis.as_ref().map(|a| (a + a) - middle);
    moment == middle || mirrored.is_some_and(|m| m == *moment)
}

/// The moment of the middle orbit run backward, from where its word is the same again; `None` when the word is no
/// cyclic shift of its reversal.
fn reversed_middle(tables: &TraceTables, word: &PeriodicWord) -> Option<Real> {
    let sides = &word.word;
    if least_rotation_of_reversed(sides) != *sides {
        return None;
    }
    let n = sides.len();
    let reads_back = |at: &usize| (0..n).all(|i| sides[(at + n - i) % n] == sides[i]);
    let at = (0..n)
        .find(reads_back)
        .expect("some shift of the reversal is the word");
    let table = tables.table();
    let mut tracer = Tracer::new(tables, word.start(table)).expect("a start inside a side");
    for _ in 0..at {
        tracer.advance();
    }
    let state = tracer.state();
    let here = Start {
        side: state.side,
        fraction: state.fraction,
        aim: state.direction,
    };
    let aim = backward(table, &here).aim;
    Some(aim.cross(&state.point.minus(table.corner(0))))
}
