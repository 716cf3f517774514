//! Many orbits from random exact starts.
//!
//! Starts follow the invariant measure (the cosine law): a side with probability proportional to its length,
//! a point uniform on it, and a direction whose component along the side, for unit length, is uniform on
//! (−1, 1). The drawn numbers are dyadic, so each start is exact: fractions are odd multiples of 2^−32, and
//! aims have coordinates that are multiples of 2^−30 in the table's plane
//! (second coordinates of a finer dyadic step when the plane form exceeds 4). The law is that of the measure up to
//! this rounding.
//!
//! Orbit i of seed s uses stream i of the ChaCha8 generator with seed s, so it depends on nothing else. A
//! start whose orbit meets a corner within the wanted length is drawn again from the same stream.

use super::line::point_on;
use super::trace::{Start, Step, TraceTables, trace};
use crate::number::{Real, Sign};
use crate::table::{SideId, Table, Vector};
use rand::{Rng, RngExt, SeedableRng};
use rand_chacha::ChaCha8Rng;
use rug::{Integer, Rational};

/// Draws random starts on one table.
#[derive(Debug)]
pub struct StartLaw {
    /// Cumulative side lengths, in units of the longest side.
    cumulative: Vec<f64>,
    /// Unit vectors along the sides, in the true Euclidean plane.
    along: Vec<[f64; 2]>,
    root_form: f64,
}

impl StartLaw {
    /// Prepares a table.
    pub fn new(table: &Table) -> StartLaw {
        // Quotients of exact numbers have no size, so every table keeps its law, however large or small.
        let form = table.form();
        let squares: Vec<Real> = (0..table.sides())
            .map(|i| table.side_vector(i).squared_length(form))
            .collect();
        let longest = squares.iter().max().expect("a table has sides").clone();
        let root = |part: &Real, whole: &Real| {
            let share = part.checked_div(whole).expect("sides have positive length");
            share.to_f64().sqrt()
        };
        let mut total = 0.0;
        let mut cumulative = Vec::new();
        let mut along = Vec::new();
        for (i, square) in squares.iter().enumerate() {
            let v = table.side_vector(i);
            let signed = |root: f64, sign: Sign| match sign {
                Sign::Negative => -root,
                _ => root,
            };
            total += root(square, &longest);
            cumulative.push(total);
            along.push([
                signed(root(&v.x.pow(2), square), v.x.sign()),
                signed(root(&(v.y.pow(2) * form), square), v.y.sign()),
            ]);
        }
        let root_form = form.to_f64().sqrt().clamp(1e-250, 1e250);
        StartLaw {
            cumulative,
            along,
            root_form,
        }
    }

    /// One start.
    pub fn draw(&self, random: &mut impl Rng) -> Start {
        let total = self.cumulative[self.cumulative.len() - 1];
        loop {
            let target = random.random::<f64>() * total;
            let side = self.cumulative.partition_point(|c| *c <= target);
            let side = side.min(self.cumulative.len() - 1);
            let side = SideId(side as u8);
            let fraction = odd_fraction(random);
            let along: f64 = 2.0 * random.random::<f64>() - 1.0;
            if let Some(aim) = dyadic_aim(self, side, along) {
                return Start {
                    side,
                    fraction,
                    aim,
                };
            }
        }
    }
}

/// A random odd multiple of 2^−32 between 0 and 1.
pub(super) fn odd_fraction(random: &mut impl Rng) -> Real {
    let odd = Integer::from(random.random::<u32>() | 1);
    Real::from(Rational::from((odd, Integer::from(1) << 32)))
}

/// The aim from a side whose component along it is `along` for unit length, with coordinates that are multiples
/// of 2^−30 (finer ones of a wide second unit). `None` when the rounding could turn it along the side or out of the table.
pub(super) fn dyadic_aim(law: &StartLaw, side: SideId, along: f64) -> Option<Vector> {
    let across = (1.0 - along * along).sqrt();
    let [x, y] = law.along[side.0 as usize];
    // The inner normal of a counterclockwise side is to its left.
    let aim = [
        along * x - across * y,
        (along * y + across * x) / law.root_form,
    ];
    // A wide second unit needs more places for the same precision.
    let places = 30 + law.root_form.log2().floor().max(0.0) as u32;
    let [x, y] = [dyadic(aim[0], 30), dyadic(aim[1], places)];
    (across > 1e-8).then(|| Vector::new(x, y))
}

fn dyadic(value: f64, bits: u32) -> Real {
    let scaled = (value * 2f64.powi(bits as i32)).round();
    Real::from(Rational::from((
        Integer::from_f64(scaled).expect("a finite coordinate"),
        Integer::from(1) << bits,
    )))
}

/// One orbit of an ensemble: its exact start and its word.
#[derive(Clone, Debug)]
pub struct Sample {
    /// The start.
    pub start: Start,
    /// The word, of the wanted length.
    pub word: Vec<SideId>,
}

/// The first start that orbit `index` of a seed draws.
pub fn random_start(law: &StartLaw, seed: u64, index: u64) -> Start {
    law.draw(&mut generator(seed, index))
}

pub(super) fn generator(seed: u64, index: u64) -> ChaCha8Rng {
    let mut random = ChaCha8Rng::seed_from_u64(seed);
    random.set_stream(index);
    random
}

/// Orbit `index` of a seed: a word of `letters` letters from a random exact start. A periodic orbit is
/// continued round its period.
pub fn sample(
    tables: &TraceTables,
    law: &StartLaw,
    seed: u64,
    index: u64,
    letters: usize,
) -> Sample {
    let mut random = generator(seed, index);
    loop {
        let start = law.draw(&mut random);
        let Ok(orbit) = trace(tables, start.clone(), letters) else {
            continue;
        };
        let mut word = orbit.word;
        match orbit.end {
            Some(Step::Corner(_)) => continue,
            Some(Step::Period(period)) => {
                while word.len() < letters {
                    word.push(word[word.len() - period]);
                }
            }
            _ => {}
        }
        return Sample { start, word };
    }
}

/// The starting point of a sample in the plane of the table.
pub fn start_point(table: &Table, start: &Start) -> Vector {
    point_on(table, start.side.0 as usize, &start.fraction)
}
