//! The laws that an ensemble's starts follow.
//!
//! Random laws draw dyadic numbers from stream i of the seed for orbit i, so that each start is exact and depends on
//! nothing but the seed and its number. The others do not use the seed.

use super::ensemble::{Sample, StartLaw, dyadic_aim, generator, odd_fraction};
use super::trace::{Start, StartFault, Step, TraceTables, trace};
use crate::number::{Real, Sign};
use crate::table::{SideId, Table, Vector};
use rand::RngExt;
use rand_chacha::ChaCha8Rng;
use rug::Rational;

/// How starts are chosen.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Law {
    /// The invariant measure: uniform along the boundary, with the cosine of the angle to the normal.
    Cosine,
    /// One direction, uniform across the table: a side in proportion to its width seen along the direction.
    Direction(Vector),
    /// One point, directions as under the invariant measure.
    Point {
        /// The side that the point lies on.
        side: SideId,
        /// The fraction of the way along it.
        fraction: Real,
    },
    /// On each side the fractions (2i + 1)/2p and the directions whose component along the side is (2j + 1)/q − 1 for
    /// unit length, to 30 bits; sides first, then fractions, then directions.
    Grid {
        /// Points on each side.
        places: u64,
        /// Directions from each point.
        directions: u64,
    },
    /// Given starts.
    List(Vec<Start>),
}

/// A law on one table.
#[derive(Debug)]
pub struct Ensemble<'a> {
    tables: &'a TraceTables,
    law: Law,
    cosine: StartLaw,
    /// For one direction: cumulative widths of the sides that it enters through.
    widths: Vec<(f64, SideId)>,
}

impl<'a> Ensemble<'a> {
    /// Prepares a law.
    ///
    /// # Panics
    /// If a direction is the zero vector.
    pub fn new(tables: &'a TraceTables, law: Law) -> Ensemble<'a> {
        let table = tables.table();
        let mut widths = Vec::new();
        if let Law::Direction(aim) = &law {
            assert!(!aim.is_zero(), "the zero vector has no direction");
            let mut total = 0.0;
            for side in 0..table.sides() {
                let width = table.side_vector(side).cross(aim);
                if width.sign() == Sign::Positive {
                    total += width.to_f64();
                    widths.push((total, SideId(side as u8)));
                }
            }
        }
        Ensemble {
            tables,
            law,
            cosine: StartLaw::new(table),
            widths,
        }
    }

    /// How many starts there are, when the law says.
    pub fn count(&self) -> Option<u64> {
        match &self.law {
            Law::Grid { places, directions } => {
                let sides = self.tables.table().sides() as u64;
                sides.checked_mul(*places)?.checked_mul(*directions)
            }
            Law::List(starts) => Some(starts.len() as u64),
            _ => None,
        }
    }

    fn draw(&self, random: &mut ChaCha8Rng, index: u64) -> Start {
        let table = self.tables.table();
        match &self.law {
            Law::Cosine => self.cosine.draw(random),
            Law::Direction(aim) => {
                let total = self.widths[self.widths.len() - 1].0;
                let target = random.random::<f64>() * total;
                let at = self.widths.partition_point(|(w, _)| *w <= target);
                Start {
                    side: self.widths[at.min(self.widths.len() - 1)].1,
                    fraction: odd_fraction(random),
                    aim: aim.clone(),
                }
            }
            Law::Point { side, fraction } => loop {
                let along = 2.0 * random.random::<f64>() - 1.0;
                if let Some(aim) = dyadic_aim(&self.cosine, *side, along) {
                    return Start {
                        side: *side,
                        fraction: fraction.clone(),
                        aim,
                    };
                }
            },
            Law::Grid { places, directions } => self.grid_start(table, *places, *directions, index),
            Law::List(starts) => starts[index as usize].clone(),
        }
    }

    fn grid_start(&self, table: &Table, places: u64, directions: u64, index: u64) -> Start {
        let (direction, rest) = (index % directions, index / directions);
        let (place, side) = (rest % places, rest / places);
        debug_assert!(side < table.sides() as u64);
        let side = SideId(side as u8);
        let along = (2.0 * direction as f64 + 1.0) / directions as f64 - 1.0;
        Start {
            side,
            fraction: Rational::from((2 * place + 1, 2 * places)).into(),
            aim: dyadic_aim(&self.cosine, side, along)
                .expect("fewer than 2^24 directions keep away from the side"),
        }
    }

    /// Orbit `index`: its start and its word of `letters` letters. Under a random law a start that meets a corner is
    /// drawn again; otherwise the word ends at the corner. A periodic orbit is continued round its period.
    ///
    /// # Errors
    /// For a given start that is none on this table.
    ///
    /// # Panics
    /// If the index is past the law's count.
    pub fn sample(&self, seed: u64, index: u64, letters: usize) -> Result<Sample, StartFault> {
        let mut random = generator(seed, index);
        let redraws = matches!(
            self.law,
            Law::Cosine | Law::Direction(_) | Law::Point { .. }
        );
        loop {
            let start = self.draw(&mut random, index);
            let orbit = match trace(self.tables, start.clone(), letters) {
                Ok(orbit) => orbit,
                Err(_) if redraws => continue,
                Err(fault) => return Err(fault),
            };
            let mut word = orbit.word;
            match orbit.end {
                Some(Step::Corner(_)) if redraws => continue,
                Some(Step::Period(period)) => {
                    while word.len() < letters {
                        word.push(word[word.len() - period]);
                    }
                }
                _ => {}
            }
            return Ok(Sample { start, word });
        }
    }
}
