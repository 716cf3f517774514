//! The generalized diagonals with a given code.

use super::diagonals::Diagonal;
use crate::table::{CornerId, LetterId, SideId};
use crate::unfold::engine::{AnyEngine, Engine};
use crate::unfold::fan::{self, Fan, Step};
use crate::unfold::mesh::{Exit, Mesh};
use crate::unfold::with_engine;

/// A fan on the stack: sides crossed so far, and the side that was just crossed, if any was.
struct Waiting<E: Engine> {
    fan: Fan<E>,
    crossings: usize,
    crossed: Option<SideId>,
}

/// All oriented generalized diagonals that cross sides with the given letters, in this order; by start corner, then sides.
///
/// Cost: a fan step for each corner of the triangulation, each letter, and each part of a fan that goes on along the code.
///
/// # Panics
/// If the code is empty, or the engine was prepared for fewer crossings.
pub fn with_code(engine: &AnyEngine, mesh: &Mesh, code: &[LetterId]) -> Vec<Diagonal> {
    assert!(
        !code.is_empty(),
        "diagonals without crossings are inner edges, not found by fans"
    );
    let mut found = with_engine!(engine, engine => along(engine, mesh, code));
    found.sort_by(|a, b| (a.start, &a.code, a.end).cmp(&(b.start, &b.code, b.end)));
    found
}

fn along<E: Engine>(engine: &E, mesh: &Mesh, code: &[LetterId]) -> Vec<Diagonal> {
    assert!(
        code.len() <= engine.deepest(),
        "the engine must reach the end of the code"
    );
    let mut found = Vec::new();
    for wedge in mesh.wedges() {
        let mut trail = engine.trail(Some(wedge.corner));
        let (pose, left, right) = fan::start(engine, wedge);
        let mut open: Vec<Waiting<E>> = Vec::new();
        let send =
            |open: &mut Vec<Waiting<E>>, fan: Fan<E>, crossings: usize, exit: Exit| match exit {
                Exit::Pass(gate) => open.push(Waiting {
                    fan: Fan { gate, ..fan },
                    crossings,
                    crossed: None,
                }),
                Exit::Bounce(side, gate) if code.get(crossings) == Some(&mesh.letter(side)) => {
                    let pose = engine.reflect(&fan.pose, side);
                    open.push(Waiting {
                        fan: Fan { pose, gate, ..fan },
                        crossings: crossings + 1,
                        crossed: Some(side),
                    });
                }
                Exit::Bounce(..) => {}
            };
        // The gate is set by the exit.
        let gate = mesh.gate_of_side(SideId(0));
        send(
            &mut open,
            Fan {
                pose,
                gate,
                left,
                right,
            },
            0,
            wedge.exit,
        );
        while let Some(Waiting {
            fan,
            crossings,
            crossed,
        }) = open.pop()
        {
            if let Some(side) = crossed {
                trail.cross(crossings - 1, side);
            }
            match fan::step(engine, mesh, &mut trail, &fan) {
                Step::Through(exit) => send(&mut open, fan, crossings, exit),
                Step::Split {
                    apex,
                    corner,
                    left,
                    right,
                } => {
                    if crossings == code.len() {
                        let origin = engine.place(&engine.home(Some(wedge.corner)), wedge.corner);
                        found.push(Diagonal {
                            start: wedge.corner,
                            end: CornerId(corner.0),
                            code: trail.path()[..crossings].to_vec(),
                            displacement: engine.displacement(&mut trail, &origin, &apex),
                        });
                    }
                    // The part that stays in this copy is followed first, while the trail ends here.
                    let parts = [
                        (Fan { right: apex, ..fan }, left),
                        (Fan { left: apex, ..fan }, right),
                    ];
                    let (stay, leave): (Vec<_>, Vec<_>) = parts
                        .into_iter()
                        .partition(|(_, exit)| matches!(exit, Exit::Pass(_)));
                    for (fan, exit) in leave.into_iter().chain(stay) {
                        send(&mut open, fan, crossings, exit);
                    }
                }
            }
        }
    }
    found
}
