//! The beams of all words of one length, with exact corner images.

use super::walk::{Visit, Visitor, walk_beams};
use crate::run::{Control, Stopped};
use crate::table::{CornerId, SideId, Vector};
use crate::unfold::engine::{AnyEngine, Engine, Trail};
use crate::unfold::{Mesh, with_engine};

/// The sides of a word and the cell of lines that hit them in this order, one beam of the word.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct WordBeam {
    /// The starting side, then each side crossed.
    pub word: Vec<SideId>,
    /// How many of the corner images are left ones.
    pub lefts: usize,
    /// The corner images that bound the cell, in the order of [`beam`](crate::unfold::beam), as vectors from
    /// corner 0 of the unreflected table.
    pub images: Vec<Vector>,
}

struct Collector {
    length: usize,
    beams: Vec<WordBeam>,
}

impl<E: Engine> Visitor<E> for Collector {
    fn visit(&mut self, visit: &Visit<'_, E>, trail: &mut Trail<E::Exact>) {
        if visit.length != self.length {
            return;
        }
        let origin = visit.engine.place(&visit.engine.home(None), CornerId(0));
        let mut word = vec![visit.start];
        word.extend_from_slice(&trail.path()[..visit.length - 1]);
        self.beams.push(WordBeam {
            word,
            lefts: visit.lefts,
            images: visit
                .cell
                .iter()
                .map(|p| visit.engine.displacement(trail, &origin, p))
                .collect(),
        });
    }
}

/// The beams of all words of a length, the words in lexicographic order. When sides share letters or the table
/// has holes, a word may have several.
///
/// Memory: a word, and two exact numbers for each of about four corner images, for each word.
///
/// # Errors
/// When the control asks to stop.
pub fn beams_of_length(
    engine: &AnyEngine,
    mesh: &Mesh,
    length: usize,
    control: &Control,
) -> Result<Vec<WordBeam>, Stopped> {
    let collectors = with_engine!(engine, engine => {
        let new = |_| Collector { length, beams: Vec::new() };
        walk_beams(engine, mesh, length, control, new)?.0
    });
    Ok(collectors.into_iter().flat_map(|c| c.beams).collect())
}
