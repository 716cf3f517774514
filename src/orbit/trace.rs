//! Following one orbit from an exact start.
//!
//! The orbit's line is kept in table coordinates (see [`line`](super::line)). Each new corner of the
//! triangulation that the line passes is decided by the first follower that can: floating point, then
//! 256-bit enclosures, then the field. The slower two are brought up to date only when asked, along the
//! recorded sides; every 4096 hits the floating-point line is renewed from the enclosures, so its error
//! never grows past what that many bounces add. A corner hit is an exact zero, proved in the field.
//!
//! With a finite reflection group the first renewal puts the line on the [`surface`](super::surface) of the
//! copies instead, where nothing has to be caught up any more.
//!
//! A *period* is a return to the same side, the same point and the same direction, proved in the field
//! whenever floating point cannot exclude it.
//!
//! Cost: a few nanoseconds for each corner passed, plus one enclosure bounce for each hit. A question to the
//! exact follower costs one bounce in the field for each hit since the last; with a finite reflection group
//! its numbers stay bounded, otherwise they grow by a fixed number of bits with every hit.

use super::line::{ExactLine, FloatLine, LineTables, WideLine, point_on};
use super::surface::SurfaceLine;
use crate::number::{Real, Sign, Tiers};
use crate::table::facts::{ReflectionGroup, facts};
use crate::table::{CornerId, SideId, Table, Vector};
use crate::unfold::Mesh;
use crate::unfold::group::FiniteGroup;
use crate::unfold::mesh::{Exit, GateId};
use std::sync::OnceLock;
use thiserror::Error;

/// A table prepared for tracing.
#[derive(Debug)]
pub struct TraceTables {
    lines: LineTables,
    mesh: Mesh,
    table: Table,
    /// The group of the table moved to the origin, when it is finite; made for the first long orbit.
    group: OnceLock<Option<FiniteGroup>>,
}

impl TraceTables {
    /// Prepares a table.
    pub fn new(table: &Table) -> TraceTables {
        TraceTables {
            lines: LineTables::new(table),
            mesh: Mesh::new(table),
            table: table.clone(),
            group: OnceLock::new(),
        }
    }

    fn group(&self) -> Option<&FiniteGroup> {
        let make = || match facts(&self.table).group {
            ReflectionGroup::Finite { r } if 2 * r <= LARGEST_GROUP => {
                Some(FiniteGroup::generate(&self.table.moved_to_origin()))
            }
            _ => None,
        };
        self.group.get_or_init(make).as_ref()
    }

    /// The table.
    pub fn table(&self) -> &Table {
        &self.table
    }
}

/// An exact start: a point inside a side and a direction into the table.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Start {
    /// The side.
    pub side: SideId,
    /// Fraction of the way from the side's first corner, strictly between 0 and 1.
    pub fraction: Real,
    /// Direction, of any length, in table coordinates.
    pub aim: Vector,
}

/// Why a start was refused.
#[derive(Clone, Debug, PartialEq, Eq, Error)]
pub enum StartFault {
    /// The point is a corner or beyond one.
    #[error(
        "the start must lie inside its side: the fraction {fraction} is not strictly between 0 and 1"
    )]
    NotInsideSide {
        /// The fraction as a decimal.
        fraction: String,
    },
    /// The aim is the zero vector.
    #[error("the aim is the zero vector, which has no direction")]
    ZeroAim,
    /// The aim runs along the side.
    #[error("the aim runs along the side that the orbit starts on")]
    AlongSide,
    /// The aim leaves the table.
    #[error("the aim points out of the table; its negative points into it")]
    OutOfTable,
}

/// What comes next on an orbit.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Step {
    /// A side is hit.
    Hit(SideId),
    /// The orbit runs into a corner and ends.
    Corner(CornerId),
    /// The next hit repeats the start exactly: the orbit is periodic with this many hits.
    Period(usize),
}

/// An orbit under way.
#[derive(Debug)]
pub struct Tracer<'a> {
    tables: &'a TraceTables,
    start: Start,
    sides: Vec<SideId>,
    gate: GateId,
    float: FloatLine,
    first: FloatLine,
    wide: Follower<WideLine>,
    exact: Follower<ExactLine>,
    exact_start: ExactLine,
    /// On a table with a finite group, after the first renewal: takes the place of all the others.
    surface: Option<Box<SurfaceLine>>,
    /// Decisions so far: float, enclosure (as `integer`), exact (as `big`).
    pub tiers: Tiers,
}

/// A line that has made the bounces of the first `at` hits after the start.
#[derive(Clone, Debug)]
struct Follower<L> {
    line: L,
    at: usize,
}

/// Hits after which the floating-point line is renewed.
const RENEW: usize = 4096;
/// The same on the surface, where errors grow more slowly: (2·2¹⁸ + 3)·2⁻⁵² is about 10⁻¹⁰.
const RENEW_SURFACE: usize = 1 << 18;
/// The largest group whose copies are tabulated.
const LARGEST_GROUP: u64 = 4096;

impl<'a> Tracer<'a> {
    /// Checks a start and stands on it; the start's side is the first letter of the word.
    ///
    /// # Errors
    /// When the start is a corner, or the aim does not lead into the table.
    pub fn new(tables: &'a TraceTables, start: Start) -> Result<Tracer<'a>, StartFault> {
        let one = Real::from(1);
        if start.fraction.sign() != Sign::Positive || start.fraction >= one {
            return Err(StartFault::NotInsideSide {
                fraction: start.fraction.decimal(6),
            });
        }
        if start.aim.is_zero() {
            return Err(StartFault::ZeroAim);
        }
        let side = start.side.0 as usize;
        match tables.table.side_vector(side).cross(&start.aim).sign() {
            Sign::Zero => return Err(StartFault::AlongSide),
            Sign::Negative => return Err(StartFault::OutOfTable),
            Sign::Positive => {}
        }
        let point = point_on(&tables.table, side, &start.fraction);
        let line = ExactLine::new(&point, &start.aim);
        let wide = WideLine::from_exact(&line);
        let float = FloatLine::from_wide(&wide, &tables.lines);
        Ok(Tracer {
            tables,
            sides: vec![start.side],
            gate: tables.mesh.gate_of_side(start.side),
            float,
            first: float,
            wide: Follower { line: wide, at: 0 },
            exact: Follower {
                line: line.clone(),
                at: 0,
            },
            exact_start: line,
            surface: None,
            start,
            tiers: Tiers::default(),
        })
    }

    /// The word so far: the starting side, then each side hit.
    pub fn word(&self) -> &[SideId] {
        &self.sides
    }

    /// Goes on to the next hit. After [`Step::Corner`] and [`Step::Period`] the word has not grown and
    /// the same step comes again.
    pub fn advance(&mut self) -> Step {
        let mut gate = self.gate;
        let exit = loop {
            let entry = self.tables.mesh.enter(gate, false);
            let exit = match self.side_of(entry.apex) {
                Sign::Zero => return Step::Corner(entry.apex),
                Sign::Positive => entry.right,
                Sign::Negative => entry.left,
            };
            match exit {
                Exit::Pass(next) => gate = next,
                Exit::Bounce(side, next) => break (side, next),
            }
        };
        let (side, next) = exit;
        if let Some(surface) = &mut self.surface {
            if side == self.start.side && surface.would_return(side) {
                return Step::Period(self.sides.len());
            }
            surface.cross(side);
            self.gate = next;
            self.sides.push(side);
            if self.sides.len().is_multiple_of(RENEW_SURFACE) {
                surface.renew();
            }
            return Step::Hit(side);
        }
        let mut float = self.float;
        float.bounce(&self.tables.lines, side.0 as usize);
        if side == self.start.side
            && float.is_near(&self.first, &self.tables.lines)
            && self.returns_exactly(side)
        {
            return Step::Period(self.sides.len());
        }
        self.float = float;
        self.gate = next;
        self.sides.push(side);
        if self.sides.len().is_multiple_of(RENEW) {
            self.renew();
        }
        Step::Hit(side)
    }

    fn side_of(&mut self, corner: CornerId) -> Sign {
        if let Some(surface) = &self.surface {
            if let Some(sign) = surface.side_of(corner) {
                self.tiers.float += 1;
                return sign;
            }
            self.tiers.big += 1;
            return surface.exact_side_of(corner);
        }
        let corner = corner.0 as usize;
        let lines = &self.tables.lines;
        if let Some(sign) = self.float.side_of(lines, corner) {
            self.tiers.float += 1;
            return sign;
        }
        self.catch_up_wide();
        if let Some(sign) = self.wide.line.side_of(lines, corner) {
            self.tiers.integer += 1;
            return sign;
        }
        self.tiers.big += 1;
        self.catch_up_exact();
        self.exact.line.offset(lines, corner).sign()
    }

    #[cold]
    fn renew(&mut self) {
        if let Some(group) = self.tables.group() {
            let origin = self.tables.table.corner(0);
            let direction = &self.exact_start.d;
            let moment = &self.exact_start.moment - &direction.cross(origin);
            let mut surface =
                SurfaceLine::new(group, self.tables.table.sides(), direction, &moment);
            self.sides[1..].iter().for_each(|side| surface.cross(*side));
            surface.renew();
            self.surface = Some(Box::new(surface));
            return;
        }
        self.catch_up_wide();
        self.float = FloatLine::from_wide(&self.wide.line, &self.tables.lines);
    }

    fn catch_up_wide(&mut self) {
        for side in &self.sides[self.wide.at + 1..] {
            self.wide.line.bounce(&self.tables.lines, side.0 as usize);
        }
        self.wide.at = self.sides.len() - 1;
    }

    fn catch_up_exact(&mut self) {
        for side in &self.sides[self.exact.at + 1..] {
            self.exact.line.bounce(&self.tables.lines, side.0 as usize);
        }
        self.exact.at = self.sides.len() - 1;
    }

    #[cold]
    fn returns_exactly(&mut self, side: SideId) -> bool {
        self.catch_up_exact();
        let mut line = self.exact.line.clone();
        line.bounce(&self.tables.lines, side.0 as usize);
        line.same(&self.exact_start)
    }

    /// The exact state at the latest hit.
    pub fn state(&mut self) -> State {
        self.catch_up_exact();
        let side = self.sides[self.sides.len() - 1];
        let line = &self.exact.line;
        let fraction = line.fraction_on(&self.tables.lines, side.0 as usize);
        State {
            side,
            point: point_on(&self.tables.table, side.0 as usize, &fraction),
            fraction,
            direction: line.d.clone(),
        }
    }
}

/// Where an orbit is, exactly.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct State {
    /// The side just hit.
    pub side: SideId,
    /// Fraction of the way from the side's first corner.
    pub fraction: Real,
    /// The point of the boundary.
    pub point: Vector,
    /// The direction after the bounce, of the length of the aim.
    pub direction: Vector,
}

/// An orbit with at most a given number of letters, and why it ended.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Orbit {
    /// The starting side, then each side hit.
    pub word: Vec<SideId>,
    /// `None` when the number of letters was reached, else the last step.
    pub end: Option<Step>,
}

/// Traces until the word has `letters` letters, or the orbit meets a corner or closes up.
///
/// # Errors
/// Those of [`Tracer::new`].
pub fn trace(tables: &TraceTables, start: Start, letters: usize) -> Result<Orbit, StartFault> {
    let mut tracer = Tracer::new(tables, start)?;
    while tracer.word().len() < letters {
        let step = tracer.advance();
        if !matches!(step, Step::Hit(_)) {
            return Ok(Orbit {
                word: tracer.sides,
                end: Some(step),
            });
        }
    }
    Ok(Orbit {
        word: tracer.sides,
        end: None,
    })
}
