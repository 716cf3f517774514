//! What a walk needs of arithmetic.
//!
//! An [`Engine`] places corner images and decides on which side of a line a corner image lies. Every
//! decision is exact: an engine may answer fast when a proved bound allows, and answers slowly otherwise,
//! from the path that led to the images. That path, with what has been computed along it, is the
//! [`Trail`]; a depth-first walk keeps one.

use super::filtered::Filtered;
use super::framed::Framed;
use super::group::FiniteGroup;
use super::lattice::Lattice;
use crate::number::{Enclosure, Sign, Tiers};
use crate::table::facts::{ReflectionGroup, facts};
use crate::table::frame::Frame;
use crate::table::{CornerId, SideId, Table, Vector};

/// The sides crossed so far, and what an engine keeps to answer exactly along them.
#[derive(Debug)]
pub struct Trail<X> {
    path: Vec<SideId>,
    /// Decisions made on this trail, by tier.
    pub tiers: Tiers,
    exact: X,
}

impl<X: ExactTrail> Trail<X> {
    /// An empty trail from the unreflected copy.
    pub fn new(exact: X) -> Trail<X> {
        Trail {
            path: Vec::new(),
            tiers: Tiers::default(),
            exact,
        }
    }

    /// The sides crossed so far, first to last.
    pub fn path(&self) -> &[SideId] {
        &self.path
    }

    /// Records several crossings, of which the first has this number; later ones are forgotten.
    ///
    /// # Panics
    /// If an earlier crossing is missing.
    #[inline]
    pub fn cross_all(&mut self, crossing: usize, sides: &[SideId]) {
        assert!(
            crossing <= self.path.len(),
            "crossings are recorded in order"
        );
        self.path.truncate(crossing);
        self.path.extend_from_slice(sides);
        self.exact.keep(crossing);
    }

    /// The path and the exact part, to be used together.
    pub(super) fn split(&mut self) -> (&[SideId], &mut X) {
        (&self.path, &mut self.exact)
    }

    /// Records that the crossing with this number (0 for the first) is of `side`; later ones are
    /// forgotten.
    ///
    /// # Panics
    /// If an earlier crossing is missing.
    #[inline]
    pub fn cross(&mut self, crossing: usize, side: SideId) {
        assert!(
            crossing <= self.path.len(),
            "crossings are recorded in order"
        );
        self.path.truncate(crossing);
        self.path.push(side);
        self.exact.keep(crossing);
    }
}

/// The exact part of a trail: results for a prefix of the path.
pub trait ExactTrail: Send {
    /// False when no decision looks at the path.
    const NEEDS_PATH: bool = true;

    /// Forgets what depends on crossings after the first `crossings`.
    fn keep(&mut self, crossings: usize);
}

impl ExactTrail for () {
    const NEEDS_PATH: bool = false;

    #[inline(always)]
    fn keep(&mut self, _: usize) {}
}

/// Exact placement and orientation of corner images.
pub trait Engine: Sync {
    /// A reflected copy of the table.
    type Pose: Copy + Send + Sync + std::fmt::Debug;
    /// A corner image.
    type Point: Copy + Send + Sync + std::fmt::Debug;
    /// What exact answers need along a path.
    type Exact: ExactTrail;

    /// The copy that walks start in; with an origin, translated so that this corner is at (0, 0).
    fn home(&self, origin: Option<CornerId>) -> Self::Pose;

    /// An empty trail for walks from that copy.
    fn trail(&self, origin: Option<CornerId>) -> Trail<Self::Exact>;

    /// The copy beyond a side.
    fn reflect(&self, pose: &Self::Pose, side: SideId) -> Self::Pose;

    /// True for copies of reversed orientation.
    fn is_mirrored(&self, pose: &Self::Pose) -> bool;

    /// A corner of a copy.
    fn place(&self, pose: &Self::Pose, corner: CornerId) -> Self::Point;

    /// On which side of the line from `a` to `b` the corner image `v` lies: positive for left. The copy
    /// of `v` is on the trail, no earlier than those of `a` and `b`.
    fn turn(
        &self,
        trail: &mut Trail<Self::Exact>,
        a: &Self::Point,
        b: &Self::Point,
        v: &Self::Point,
    ) -> Sign;

    /// The same for the ray from (0, 0) to `b`.
    fn turn_from_origin(
        &self,
        trail: &mut Trail<Self::Exact>,
        b: &Self::Point,
        v: &Self::Point,
    ) -> Sign;

    /// The exact vector from `a` to `b` in the table's coordinates.
    fn displacement(
        &self,
        trail: &mut Trail<Self::Exact>,
        a: &Self::Point,
        b: &Self::Point,
    ) -> Vector;

    /// An enclosure of the squared distance of two corner images, with bounds of about `precision` bits.
    fn squared_distance(
        &self,
        trail: &mut Trail<Self::Exact>,
        a: &Self::Point,
        b: &Self::Point,
        precision: u32,
    ) -> Enclosure;

    /// The most crossings for which answers are certified.
    fn deepest(&self) -> usize;
}

/// An engine that goes many crossings at once, along a path that it knows from a copy of the same parity.
///
/// Positions ahead are kept as seen from the unreflected copy; the linear part of the present copy turns them.
pub trait Leaping: Engine {
    /// A vector from the unreflected copy.
    type Ahead: Copy + Send + Sync + std::fmt::Debug;

    /// False when linear parts are not tabulated; then nothing else here may be called.
    fn can_leap(&self) -> bool;

    /// A corner image of a walk that began in [`Engine::home`] without an origin.
    fn point_ahead(&self, point: &Self::Point) -> Self::Ahead;

    /// A copy of such a walk: its linear part and its translation.
    fn pose_ahead(&self, pose: &Self::Pose) -> (u16, Self::Ahead);

    /// A corner image as many crossings ahead as it was from home.
    fn place_ahead(
        &self,
        pose: &Self::Pose,
        ahead: &Self::Ahead,
        crossings: u32,
        corner: CornerId,
    ) -> Self::Point;

    /// A copy as many crossings ahead as it was from home.
    fn leap(
        &self,
        pose: &Self::Pose,
        element: u16,
        ahead: &Self::Ahead,
        crossings: u32,
    ) -> Self::Pose;
}

/// Which tiers may decide.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub enum Arithmetic {
    /// The cheapest that suffices.
    #[default]
    Tiered,
    /// Integers of any size only: the slow twin of every other tier.
    BigOnly,
}

/// The engine that suits a table.
#[derive(Debug)]
pub enum AnyEngine {
    /// Finite group over the rationals, if need be in a frame.
    Lattice(Box<Framed<Lattice>>),
    /// Everything else.
    Filtered(Box<Framed<Filtered>>),
}

/// Runs an expression with the concrete engine inside an [`AnyEngine`] bound to a name.
#[macro_export]
macro_rules! with_engine {
    ($any:expr, $engine:ident => $body:expr) => {
        match $any {
            $crate::unfold::engine::AnyEngine::Lattice($engine) => {
                let $engine = &**$engine;
                $body
            }
            $crate::unfold::engine::AnyEngine::Filtered($engine) => {
                let $engine = &**$engine;
                $body
            }
        }
    };
}
pub use with_engine;

/// The largest finite group that is tabulated; beyond it the table is walked as if it were infinite.
const LARGEST_TABULATED_GROUP: u64 = 4096;

impl AnyEngine {
    /// Chooses and prepares the engine for walks of at most `deepest` crossings.
    ///
    /// When another frame needs a smaller field, the engine works there (see [`Frame`]), except for
    /// [`Arithmetic::BigOnly`], which stays in the table's own coordinates.
    ///
    /// Cost: one look for the frame; for a finite group of order 2r, 2r·k exact products; otherwise k.
    pub fn new(table: &Table, deepest: usize, arithmetic: Arithmetic) -> AnyEngine {
        // Orientations do not depend on where the table lies, but the sizes of coordinates do.
        let moved = table.moved_to_origin();
        if arithmetic == Arithmetic::BigOnly {
            let engine = Filtered::big_only(&moved, deepest);
            return AnyEngine::Filtered(Box::new(Framed::new(engine, None)));
        }
        let frame = Frame::smaller(table);
        let table = frame.as_ref().map_or(&moved, |frame| &frame.table);
        let group = match facts(table).group {
            ReflectionGroup::Finite { r } if r <= LARGEST_TABULATED_GROUP => {
                Some(FiniteGroup::generate(table))
            }
            _ => None,
        };
        if let Some(group) = &group
            && let Some(lattice) = Lattice::new(table, group, deepest)
        {
            return AnyEngine::Lattice(Box::new(Framed::new(lattice, frame)));
        }
        let engine = Filtered::new(table, group.as_ref(), deepest);
        AnyEngine::Filtered(Box::new(Framed::new(engine, frame)))
    }

    /// One line for reports: how signs are decided.
    pub fn describe(&self) -> &'static str {
        match self {
            AnyEngine::Lattice(_) => {
                "machine integers (finite reflection group over the rationals)"
            }
            AnyEngine::Filtered(filtered) => filtered.inner().describe(),
        }
    }
}
