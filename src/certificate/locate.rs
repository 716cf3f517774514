//! Where the beams of a word lie.

use crate::language::beams::WordBeam;
use crate::language::follow::follow;
use crate::language::measure::{RootSum, enclosed_measure, exact_measure};
use crate::number::{Enclosure, Real};
use crate::table::{CornerId, LetterId};
use crate::unfold::engine::{AnyEngine, Engine};
use crate::unfold::{Mesh, with_engine};

/// A word found, or not.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Located {
    /// Length of the longest prefix in the language; that of the word when it is there itself.
    pub longest_prefix: usize,
    /// The beams of that prefix, in exact numbers: one, where sides have letters of their own and there is no hole.
    pub beams: Vec<WordBeam>,
    /// The measure of the prefix's cylinder.
    pub measure: RootSum,
}

/// Looks for a word, given by letters.
///
/// Cost: a walk along the word, and an exact distance for each face of a cell at its end.
pub fn locate(engine: &AnyEngine, mesh: &Mesh, word: &[LetterId], form: &Real) -> Located {
    with_engine!(engine, engine => {
        let reached = follow(engine, mesh, word, |_, _| {});
        let mut found = Located {
            longest_prefix: reached,
            beams: Vec::new(),
            measure: RootSum::default(),
        };
        follow(engine, mesh, &word[..reached], |visit, trail| {
            if visit.length < reached {
                return;
            }
            let origin = engine.place(&engine.home(None), CornerId(0));
            let mut word = vec![visit.start];
            word.extend_from_slice(&trail.path()[..reached - 1]);
            found.beams.push(WordBeam {
                word,
                lefts: visit.lefts,
                images: visit.cell.iter().map(|p| engine.displacement(trail, &origin, p)).collect(),
            });
            found.measure.add_sum(&exact_measure(visit, trail, form));
        });
        found
    })
}

/// The length of the longest prefix of a word that is in the language, and an enclosure of that prefix's measure with
/// bounds of `precision` bits: what is wanted of words by the million.
///
/// Cost: a walk along the word, and an enclosed distance for each face of a cell at its end.
pub fn measure_of(
    engine: &AnyEngine,
    mesh: &Mesh,
    word: &[LetterId],
    precision: u32,
) -> (usize, Enclosure) {
    with_engine!(engine, engine => {
        let mut measures = vec![Enclosure::zero(precision); word.len() + 1];
        let reached = follow(engine, mesh, word, |visit, trail| {
            // Only the end of a way counts; shorter words keep their sum in case the word ends there.
            if visit.length == word.len() {
                measures[visit.length].add_assign(&enclosed_measure(visit, trail, precision));
            }
        });
        if reached < word.len() {
            follow(engine, mesh, &word[..reached], |visit, trail| {
                if visit.length == reached {
                    measures[reached].add_assign(&enclosed_measure(visit, trail, precision));
                }
            });
        }
        (reached, measures.swap_remove(reached))
    })
}
