//! Generalized diagonals up to a geometric length.
//!
//! Fans are followed as for [`diagonals`](super::diagonals), but a fan is given up when the gate that it goes through
//! next is farther than L from its corner: everything later lies beyond that gate. The gate is measured in
//! floating point, with the pose of its copy as a product of n tabulated reflections. A product is off by at most
//! n·2⁻⁴⁸ relative to the distances on the way, so a gate that measures more than L + 10⁻⁹·(L + D) is farther than L as
//! long as n < 10⁵; D is the table's diameter. Which diagonals are within L is decided in the field.
//!
//! A fan crosses finitely many sides within L, so the walk ends; how many is not known beforehand. The engine is
//! made for a number of crossings, and for twice as many when they were not enough.
//!
//! Cost: one fan step for each gate within L + D of a corner, times the crossings on the way for each diagonal found.

use super::diagonals::Diagonal;
use crate::number::Real;
use crate::run::control::STEPS_PER_TICK;
use crate::run::{Control, Stopped};
use crate::table::{CornerId, SideId, Table};
use crate::unfold::engine::{AnyEngine, Arithmetic, Engine};
use crate::unfold::fan::{self, Fan, Step};
use crate::unfold::isometry::side_reflections;
use crate::unfold::mesh::{Exit, GateId, Mesh, Wedge};
use crate::unfold::with_engine;
use rayon::prelude::*;
use thiserror::Error;

/// Why the diagonals were not found.
#[derive(Clone, Debug, PartialEq, Eq, Error)]
pub enum DistanceFault {
    /// Asked to stop.
    #[error(transparent)]
    Stopped(#[from] Stopped),
    /// More crossings than the bound on floating point covers.
    #[error(
        "a line crosses more than {MOST_CROSSINGS} sides within this distance; ask for a shorter one"
    )]
    TooFar,
}

/// The most crossings for which gates are measured.
pub const MOST_CROSSINGS: usize = 100_000;

/// Crossings that are tried first.
const FIRST_CROSSINGS: usize = 64;

/// All oriented generalized diagonals of length at most L, by length, then start corner, then code.
///
/// `squared` is L².
///
/// # Errors
/// When the control asks to stop, or a line crosses too many sides within L.
pub fn list_within(
    table: &Table,
    mesh: &Mesh,
    squared: &Real,
    arithmetic: Arithmetic,
    control: &Control,
) -> Result<Vec<Diagonal>, DistanceFault> {
    let meter = Meter::new(table, squared);
    let mut crossings = FIRST_CROSSINGS;
    loop {
        let engine = AnyEngine::new(table, crossings, arithmetic);
        let found = with_engine!(&engine, engine => {
            let search = Search { engine, mesh, meter: &meter, table, squared, crossings, control };
            search.run()?
        });
        if let Some(mut found) = found {
            let length = |d: &Diagonal| d.displacement.squared_length(table.form());
            found.sort_by_cached_key(|d| (length(d), d.start, d.code.clone(), d.end));
            return Ok(found);
        }
        if crossings >= MOST_CROSSINGS {
            return Err(DistanceFault::TooFar);
        }
        crossings = (2 * crossings).min(MOST_CROSSINGS);
    }
}

/// Copies in floating point, in the true plane, with the fan's corner at (0, 0).
#[derive(Clone, Copy)]
struct NearPose {
    w: [f64; 2],
    t: [f64; 2],
    mirrored: bool,
}

struct Meter {
    corners: Vec<[f64; 2]>,
    reflections: Vec<([f64; 2], [f64; 2])>,
    /// Gates that measure more are farther than L.
    limit: f64,
}

fn product(a: [f64; 2], b: [f64; 2]) -> [f64; 2] {
    [a[0] * b[0] - a[1] * b[1], a[0] * b[1] + a[1] * b[0]]
}

impl Meter {
    fn new(table: &Table, squared: &Real) -> Meter {
        let home = table.moved_to_origin();
        let root = table.form().to_f64().sqrt();
        let flat = |v: &crate::table::Vector| [v.x.to_f64(), v.y.to_f64() * root];
        let corners: Vec<[f64; 2]> = home.corners().iter().map(flat).collect();
        let size = corners.iter().map(|c| c[0].hypot(c[1])).fold(0.0, f64::max);
        let wanted = squared.to_f64().sqrt();
        Meter {
            reflections: side_reflections(&home)
                .iter()
                .map(|r| (flat(&r.w), flat(&r.t)))
                .collect(),
            corners,
            // The diameter is at most twice the largest distance from corner 0.
            limit: wanted + 1e-9 * (wanted + 2.0 * size),
        }
    }

    fn home(&self, corner: CornerId) -> NearPose {
        let [x, y] = self.corners[corner.0 as usize];
        NearPose {
            w: [1.0, 0.0],
            t: [-x, -y],
            mirrored: false,
        }
    }

    fn turned(pose: &NearPose, v: [f64; 2]) -> [f64; 2] {
        let v = if pose.mirrored { [v[0], -v[1]] } else { v };
        product(pose.w, v)
    }

    fn reflect(&self, pose: &NearPose, side: SideId) -> NearPose {
        let (w, c) = self.reflections[side.0 as usize];
        let moved = Meter::turned(pose, c);
        NearPose {
            w: Meter::turned(pose, w),
            t: [pose.t[0] + moved[0], pose.t[1] + moved[1]],
            mirrored: !pose.mirrored,
        }
    }

    /// True when the gate of a copy is proved to be farther than L from the origin.
    fn is_beyond(&self, mesh: &Mesh, pose: &NearPose, gate: GateId) -> bool {
        let (left, right) = mesh.ends(gate, pose.mirrored);
        let place = |corner: CornerId| {
            let v = Meter::turned(pose, self.corners[corner.0 as usize]);
            [pose.t[0] + v[0], pose.t[1] + v[1]]
        };
        let (a, b) = (place(left), place(right));
        let u = [b[0] - a[0], b[1] - a[1]];
        let along = -(a[0] * u[0] + a[1] * u[1]) / (u[0] * u[0] + u[1] * u[1]);
        let along = along.clamp(0.0, 1.0);
        (a[0] + along * u[0]).hypot(a[1] + along * u[1]) > self.limit
    }
}

struct Search<'a, E: Engine> {
    engine: &'a E,
    mesh: &'a Mesh,
    meter: &'a Meter,
    table: &'a Table,
    squared: &'a Real,
    crossings: usize,
    control: &'a Control,
}

struct Waiting<E: Engine> {
    fan: Fan<E>,
    near: NearPose,
    crossings: usize,
    /// The last side crossed.
    side: Option<SideId>,
}

impl<E: Engine> Search<'_, E> {
    /// `None` when the crossings were not enough.
    fn run(&self) -> Result<Option<Vec<Diagonal>>, Stopped> {
        let parts: Vec<Option<Vec<Diagonal>>> = self
            .mesh
            .wedges()
            .par_iter()
            .map(|wedge| self.walk(wedge))
            .collect::<Result<_, Stopped>>()?;
        let all: Option<Vec<Vec<Diagonal>>> = parts.into_iter().collect();
        Ok(all.map(|parts| parts.into_iter().flatten().collect()))
    }

    fn walk(&self, wedge: &Wedge) -> Result<Option<Vec<Diagonal>>, Stopped> {
        let (engine, mesh) = (self.engine, self.mesh);
        let (pose, left, right) = fan::start(engine, wedge);
        let origin = engine.place(&pose, wedge.corner);
        let mut trail = engine.trail(Some(wedge.corner));
        let mut found = Vec::new();
        let mut report = |trail: &mut _, code: &[SideId], end, apex: &E::Point| {
            let displacement = engine.displacement(trail, &origin, apex);
            if displacement.squared_length(self.table.form()) <= *self.squared {
                found.push(Diagonal {
                    start: wedge.corner,
                    end,
                    code: code.to_vec(),
                    displacement,
                });
            }
        };
        if wedge.right_is_inner {
            report(&mut trail, &[], wedge.right, &right);
        }
        let mut stack: Vec<Waiting<E>> = Vec::new();
        let first = Waiting {
            fan: Fan {
                pose,
                // Replaced by the gate of the exit.
                gate: GateId(0),
                left,
                right,
            },
            near: self.meter.home(wedge.corner),
            crossings: 0,
            side: None,
        };
        if !self.send(&first, wedge.exit, left, right, &mut stack) {
            return Ok(None);
        }
        let mut steps = 0u64;
        while let Some(waiting) = stack.pop() {
            if let Some(side) = waiting.side {
                trail.cross(waiting.crossings - 1, side);
            }
            steps += 1;
            if steps.is_multiple_of(STEPS_PER_TICK) {
                self.control.tick(STEPS_PER_TICK)?;
            }
            let (l, r) = (waiting.fan.left, waiting.fan.right);
            let enough = match fan::step(engine, mesh, &mut trail, &waiting.fan) {
                Step::Through(exit) => self.send(&waiting, exit, l, r, &mut stack),
                Step::Split {
                    apex,
                    corner,
                    left,
                    right,
                } => {
                    let code = trail.path()[..waiting.crossings].to_vec();
                    report(&mut trail, &code, corner, &apex);
                    self.send(&waiting, left, l, apex, &mut stack)
                        && self.send(&waiting, right, apex, r, &mut stack)
                }
            };
            if !enough {
                return Ok(None);
            }
        }
        Ok(Some(found))
    }

    /// Takes a fan through an exit unless the gate is too far. False when a crossing is one too many.
    fn send(
        &self,
        from: &Waiting<E>,
        exit: Exit,
        left: E::Point,
        right: E::Point,
        stack: &mut Vec<Waiting<E>>,
    ) -> bool {
        let (side, gate) = match exit {
            Exit::Pass(gate) => (None, gate),
            Exit::Bounce(side, gate) => (Some(side), gate),
        };
        let (mut pose, mut near, mut crossings) = (from.fan.pose, from.near, from.crossings);
        if let Some(side) = side {
            near = self.meter.reflect(&near, side);
            crossings += 1;
        }
        if self.meter.is_beyond(self.mesh, &near, gate) {
            return true;
        }
        if crossings > self.crossings {
            return false;
        }
        if let Some(side) = side {
            pose = self.engine.reflect(&pose, side);
        }
        stack.push(Waiting {
            fan: Fan {
                pose,
                gate,
                left,
                right,
            },
            near,
            crossings,
            side: side.or(from.side),
        });
        true
    }
}
