//! Following one word through the table.

use super::walk::{Visit, sides_by_letter};
use crate::table::LetterId;
use crate::unfold::Mesh;
use crate::unfold::beam::{self, Front, Spread};
use crate::unfold::engine::{Engine, Trail};

/// Shows the beams of every prefix of a word, shortest first along each way, and returns the length of the longest
/// prefix that is in the language. Where sides share letters or there are holes, a prefix may have several beams.
///
/// Cost: one beam step for each letter and beam.
///
/// # Panics
/// If the engine was prepared for fewer crossings.
pub fn follow<E: Engine>(
    engine: &E,
    mesh: &Mesh,
    word: &[LetterId],
    mut see: impl FnMut(&Visit<'_, E>, &mut Trail<E::Exact>),
) -> usize {
    assert!(
        word.len() <= engine.deepest() + 1,
        "the engine must reach the end of the word"
    );
    let Some(first) = word.first() else {
        return 0;
    };
    let mut reached = 0;
    for side in sides_by_letter(mesh) {
        if mesh.letter(side) != *first {
            continue;
        }
        let mut trail = engine.trail(None);
        let (front, cell) = beam::start(engine, mesh, side);
        let visit = Visit {
            engine,
            length: 1,
            start: side,
            letter: *first,
            first: true,
            lefts: front.lefts,
            cell: &cell,
            cut: true,
            parent: 0,
        };
        see(&visit, &mut trail);
        let mut open = vec![(front, cell.to_vec(), 1, None)];
        let mut out = Spread::default();
        reached = reached.max(1);
        while let Some((front, cell, length, crossed)) = open.pop() {
            if let Some(side) = crossed {
                trail.cross(length - 2, side);
                let visit = Visit {
                    length,
                    letter: word[length - 1],
                    lefts: front.lefts,
                    cell: &cell,
                    ..visit
                };
                see(&visit, &mut trail);
                reached = reached.max(length);
            }
            if length == word.len() {
                continue;
            }
            beam::spread(engine, mesh, &mut trail, &front, &cell, &mut out);
            for piece in out.pieces.iter().rev() {
                if mesh.letter(piece.side) == word[length] {
                    let front = Front {
                        pose: engine.reflect(&front.pose, piece.side),
                        gate: piece.gate,
                        lefts: piece.lefts,
                    };
                    let cell = out.points[piece.start..piece.end].to_vec();
                    open.push((front, cell, length + 1, Some(piece.side)));
                }
            }
        }
    }
    reached
}
