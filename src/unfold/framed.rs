//! An engine that works in a frame of its own and answers in the table's coordinates.
//!
//! Orientations are those of the inner engine, since they do not depend on the frame (see
//! [`frame`](crate::table::frame)). Vectors and distances are brought back.

use super::engine::{Engine, Leaping, Trail};
use crate::number::{Enclosure, Sign};
use crate::table::frame::Frame;
use crate::table::{CornerId, SideId, Vector};

/// An engine with the frame that it works in; without a frame it works in the table's own coordinates.
#[derive(Debug)]
pub struct Framed<E> {
    inner: E,
    frame: Option<Box<Frame>>,
}

impl<E> Framed<E> {
    /// An engine that was made for `frame.table`, or for the table itself.
    pub fn new(inner: E, frame: Option<Frame>) -> Framed<E> {
        Framed {
            inner,
            frame: frame.map(Box::new),
        }
    }

    /// The engine inside.
    pub fn inner(&self) -> &E {
        &self.inner
    }

    /// The frame.
    pub fn frame(&self) -> Option<&Frame> {
        self.frame.as_deref()
    }
}

impl<E: Engine> Engine for Framed<E> {
    type Pose = E::Pose;
    type Point = E::Point;
    type Exact = E::Exact;

    #[inline(always)]
    fn home(&self, origin: Option<CornerId>) -> E::Pose {
        self.inner.home(origin)
    }

    fn trail(&self, origin: Option<CornerId>) -> Trail<E::Exact> {
        self.inner.trail(origin)
    }

    #[inline(always)]
    fn reflect(&self, pose: &E::Pose, side: SideId) -> E::Pose {
        self.inner.reflect(pose, side)
    }

    #[inline(always)]
    fn is_mirrored(&self, pose: &E::Pose) -> bool {
        self.inner.is_mirrored(pose)
    }

    #[inline(always)]
    fn place(&self, pose: &E::Pose, corner: CornerId) -> E::Point {
        self.inner.place(pose, corner)
    }

    #[inline(always)]
    fn turn(&self, trail: &mut Trail<E::Exact>, a: &E::Point, b: &E::Point, v: &E::Point) -> Sign {
        self.inner.turn(trail, a, b, v)
    }

    #[inline(always)]
    fn turn_from_origin(&self, trail: &mut Trail<E::Exact>, b: &E::Point, v: &E::Point) -> Sign {
        self.inner.turn_from_origin(trail, b, v)
    }

    fn displacement(&self, trail: &mut Trail<E::Exact>, a: &E::Point, b: &E::Point) -> Vector {
        let vector = self.inner.displacement(trail, a, b);
        match &self.frame {
            Some(frame) => frame.to_table(&vector),
            None => vector,
        }
    }

    fn squared_distance(
        &self,
        trail: &mut Trail<E::Exact>,
        a: &E::Point,
        b: &E::Point,
        precision: u32,
    ) -> Enclosure {
        let Some(frame) = &self.frame else {
            return self.inner.squared_distance(trail, a, b, precision);
        };
        let [along, across] = frame.squared_units();
        if frame.keeps_proportions {
            let inner = self.inner.squared_distance(trail, a, b, precision);
            return inner.mul(&along.enclosure(precision));
        }
        // Sides parallel to the axes: the group is finite and exact vectors are cheap at every depth.
        let vector = self.inner.displacement(trail, a, b);
        let x = vector.x.enclosure(precision).square();
        let y = vector.y.enclosure(precision).square();
        let along = along.enclosure(precision).mul(&x);
        along.add(&across.enclosure(precision).mul(&y))
    }

    fn deepest(&self) -> usize {
        self.inner.deepest()
    }
}

impl<E: Leaping> Leaping for Framed<E> {
    type Ahead = E::Ahead;

    fn can_leap(&self) -> bool {
        self.inner.can_leap()
    }

    fn point_ahead(&self, point: &E::Point) -> E::Ahead {
        self.inner.point_ahead(point)
    }

    fn pose_ahead(&self, pose: &E::Pose) -> (u16, E::Ahead) {
        self.inner.pose_ahead(pose)
    }

    #[inline(always)]
    fn place_ahead(
        &self,
        pose: &E::Pose,
        ahead: &E::Ahead,
        crossings: u32,
        corner: CornerId,
    ) -> E::Point {
        self.inner.place_ahead(pose, ahead, crossings, corner)
    }

    #[inline(always)]
    fn leap(&self, pose: &E::Pose, element: u16, ahead: &E::Ahead, crossings: u32) -> E::Pose {
        self.inner.leap(pose, element, ahead, crossings)
    }
}
