//! Fans: all rays from one corner with one itinerary.
//!
//! A fan is the open set of rays from a corner image at the origin between two boundary rays, each
//! through a corner image. Entering a triangle meets its apex V: strictly between the boundary rays, the
//! segment from the origin to V is a generalized diagonal (no corner lies on it before V, since it is
//! inside the fan), and the fan splits there; on or beyond a boundary ray, the whole fan passes V on one
//! side. Rays that end in a corner belong to no fan, so a corner on a boundary ray is hidden by the one
//! that made the boundary.
//!
//! Cost of a step: at most two orientations about the origin.

use super::engine::{Engine, Trail};
use super::mesh::{Exit, GateId, Mesh, Wedge};
use crate::number::Sign;

/// A fan about to enter a triangle.
#[derive(Debug)]
pub struct Fan<E: Engine + ?Sized> {
    /// The copy that the triangle belongs to.
    pub pose: E::Pose,
    /// The gate through which the rays enter.
    pub gate: GateId,
    /// A corner image on the left boundary ray.
    pub left: E::Point,
    /// A corner image on the right boundary ray.
    pub right: E::Point,
}

/// What one step does to a fan.
#[derive(Debug)]
pub enum Step<E: Engine + ?Sized> {
    /// The whole fan leaves through this exit.
    Through(Exit),
    /// The apex is seen from the origin.
    Split {
        /// The corner image at the end of the generalized diagonal.
        apex: E::Point,
        /// The corner that it is an image of.
        corner: crate::table::CornerId,
        /// Exit of the rays to the left of the apex.
        left: Exit,
        /// Exit of the rays to the right of the apex.
        right: Exit,
    },
}

/// The boundary rays of a wedge at the start of a fan; its exit is in the wedge.
pub fn start<E: Engine>(engine: &E, wedge: &Wedge) -> (E::Pose, E::Point, E::Point) {
    let pose = engine.home(Some(wedge.corner));
    (
        pose,
        engine.place(&pose, wedge.left),
        engine.place(&pose, wedge.right),
    )
}

/// Meets the apex of the next triangle.
#[inline(always)]
pub fn step<E: Engine>(
    engine: &E,
    mesh: &Mesh,
    trail: &mut Trail<E::Exact>,
    fan: &Fan<E>,
) -> Step<E> {
    let entry = mesh.enter(fan.gate, engine.is_mirrored(&fan.pose));
    let apex = engine.place(&fan.pose, entry.apex);
    // On or to the right of the right ray: every ray has the apex on its right.
    if engine.turn_from_origin(trail, &fan.right, &apex) != Sign::Positive {
        return Step::Through(entry.left);
    }
    if engine.turn_from_origin(trail, &fan.left, &apex) != Sign::Negative {
        return Step::Through(entry.right);
    }
    Step::Split {
        apex,
        corner: entry.apex,
        left: entry.left,
        right: entry.right,
    }
}

// Derived copies would ask the engine itself to be copied.
impl<E: Engine> Clone for Fan<E> {
    fn clone(&self) -> Fan<E> {
        *self
    }
}

impl<E: Engine> Copy for Fan<E> {}

// Derived copies would ask the engine itself to be copied.
impl<E: Engine> Clone for Step<E> {
    fn clone(&self) -> Step<E> {
        *self
    }
}

impl<E: Engine> Copy for Step<E> {}
