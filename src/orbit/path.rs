//! Following an orbit until one of several limits.

use super::trace::{Start, StartFault, State, Step, TraceTables, Tracer};
use crate::number::Real;
use crate::run::Control;
use crate::table::{CornerId, SideId};

/// When to stop.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Limits {
    /// Letters of the word.
    pub letters: usize,
    /// The square of the most that the path may measure, in lengths of the aim.
    pub squared_distance: Option<Real>,
    /// What the path measures already when it comes to the start, in lengths of the aim.
    pub gone: Real,
}

/// Why a path ended.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum PathEnd {
    /// The word has the wanted letters.
    Letters,
    /// The next hit is farther than allowed.
    Distance,
    /// The orbit runs into a corner.
    Corner(CornerId),
    /// The control asked to stop.
    Stopped,
}

/// A followed orbit.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Path {
    /// The starting side, then each side hit. A periodic orbit goes on round its period.
    pub word: Vec<SideId>,
    /// Where each letter was, when asked for.
    pub states: Vec<State>,
    /// Why it ended.
    pub end: PathEnd,
    /// The period in hits, when the orbit closed exactly within the path.
    pub period: Option<usize>,
}

/// Follows an orbit. States are kept when `wants_states` or a distance asks for them; each costs a bounce in
/// the field, with numbers that grow along the orbit when the reflection group is infinite.
///
/// # Errors
/// Those of [`Tracer::new`].
pub fn follow(
    tables: &TraceTables,
    start: Start,
    limits: &Limits,
    wants_states: bool,
) -> Result<Path, StartFault> {
    follow_until(tables, start, limits, wants_states, &Control::new())
}

/// The same, until a control asks to stop: what was followed before is complete, and ends with
/// [`PathEnd::Stopped`].
///
/// # Errors
/// Those of [`Tracer::new`].
pub fn follow_until(
    tables: &TraceTables,
    start: Start,
    limits: &Limits,
    wants_states: bool,
    control: &Control,
) -> Result<Path, StartFault> {
    let form = tables.table().form();
    let squared = start.aim.squared_length(form);
    // The way in lengths of the aim: every direction of the orbit has that length.
    let way = |from: &State, to: &State| {
        to.point.minus(&from.point).dot(&from.direction, form) / &squared
    };
    let mut tracer = Tracer::new(tables, start)?;
    let keeps_states = wants_states || limits.squared_distance.is_some();
    let mut path = Path {
        word: tracer.word().to_vec(),
        states: Vec::new(),
        end: PathEnd::Letters,
        period: None,
    };
    if keeps_states {
        path.states.push(tracer.state());
    }
    let mut gone = limits.gone.clone();
    let too_far = |gone: &Real| {
        let most = limits.squared_distance.as_ref();
        most.is_some_and(|most| gone * gone > *most)
    };
    while path.word.len() < limits.letters {
        if control.tick(1).is_err() {
            path.end = PathEnd::Stopped;
            break;
        }
        if path.period.is_none() {
            match tracer.advance() {
                Step::Hit(side) => path.word.push(side),
                Step::Corner(corner) => {
                    path.end = PathEnd::Corner(corner);
                    break;
                }
                Step::Period(period) => path.period = Some(period),
            }
        }
        if let Some(period) = path.period {
            path.word.push(path.word[path.word.len() - period]);
        }
        if keeps_states {
            let state = match path.period {
                None => tracer.state(),
                Some(period) => path.states[path.states.len() - period].clone(),
            };
            if limits.squared_distance.is_some() {
                gone += way(&path.states[path.states.len() - 1], &state);
            }
            if too_far(&gone) {
                path.word.pop();
                path.end = PathEnd::Distance;
                // A return that lies beyond the distance is not part of the path.
                path.period = path.period.filter(|period| *period < path.word.len());
                break;
            }
            path.states.push(state);
        }
    }
    Ok(path)
}
