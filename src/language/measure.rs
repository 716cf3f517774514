//! Cylinder measures, and the check that they fill the phase space.
//!
//! The invariant measure of billiards is dp dφ on oriented lines. The set of lines with one itinerary is a
//! convex cell (see [`beam`](crate::unfold::beam)), and its measure is a signed sum of distances over the
//! cell's vertices: the crossed-belt formula (Santaló, *Integral Geometry and Geometric Probability*,
//! 1976). A vertex whose line passes between its two corner images, one left and one right, counts its
//! distance positively; a vertex with both images on one side counts it negatively.
//!
//! All lines that meet the table have measure 2·perimeter together, so the cylinder measures of the words
//! of one length sum to exactly that. A missing word, a word too many or a wrong cell breaks the sum,
//! and nothing in it counts words: the check shares only the cells with the walk.

use super::beams::WordBeam;
use super::walk::{GrowthFault, Part, Visit, Visitor, walk_in_ledger};
use crate::number::{Enclosure, Real, Tiers};
use crate::run::Control;
use crate::run::checkpoint::{Ledger, Unkept};
use crate::run::parts::{Kept, read_enclosure, take, write_enclosure};
use crate::table::Table;
use crate::unfold::engine::{AnyEngine, Engine, Trail};
use crate::unfold::{Mesh, with_engine};
use rug::{Float, Integer, Rational};
use std::collections::BTreeMap;

/// An exact sum of rational multiples of square roots of field elements.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct RootSum {
    /// Coefficient by radicand. Rational radicands are integers without a square factor below 2²⁰.
    terms: BTreeMap<Real, Rational>,
}

impl RootSum {
    /// Adds `coefficient·√radicand`; the radicand must not be negative.
    pub fn add(&mut self, coefficient: i64, radicand: Real) {
        self.add_multiple(&Rational::from(coefficient), radicand);
    }

    /// The same with a rational coefficient.
    pub fn add_multiple(&mut self, coefficient: &Rational, radicand: Real) {
        let (factor, radicand) = match radicand.to_rational() {
            Some(value) => extract_square(value),
            None => (Rational::from(1), radicand),
        };
        let sum = self.terms.entry(radicand.clone()).or_default();
        *sum += factor * coefficient;
        if *sum == 0 {
            self.terms.remove(&radicand);
        }
    }

    /// Adds another sum.
    pub fn add_sum(&mut self, other: &RootSum) {
        for (coefficient, radicand) in other.terms() {
            self.add_multiple(coefficient, radicand.clone());
        }
    }

    /// The terms as (coefficient, radicand), radicands increasing.
    pub fn terms(&self) -> impl Iterator<Item = (&Rational, &Real)> {
        self.terms
            .iter()
            .map(|(radicand, coefficient)| (coefficient, radicand))
    }

    /// An enclosure with bounds of `precision` bits; each root is first enclosed to within 2^−precision.
    pub fn enclosure(&self, precision: u32) -> Enclosure {
        let mut sum = Enclosure::zero(precision);
        for (coefficient, radicand) in self.terms() {
            let root = radicand.enclosure_within(2 * precision).sqrt();
            let term = root
                .mul_integer(coefficient.numer())
                .div_integer(coefficient.denom());
            sum.add_assign(&term);
        }
        sum
    }
}

/// `√value = factor·√rest` with an integer rest.
fn extract_square(value: Rational) -> (Rational, Real) {
    let (num, den) = value.into_numer_denom();
    let mut rest = num * &den;
    let mut factor = Rational::from((1, den));
    if rest == 0 {
        return (factor, Real::from(0));
    }
    if rest.is_perfect_square() {
        factor *= rest.sqrt();
        return (factor, Real::from(1));
    }
    // Exact whatever the bound: a square factor that is missed only stays under the root.
    let mut p = 2u32;
    while p < 1 << 10 && p * p <= rest {
        let square = Integer::from(p * p);
        while rest.is_divisible(&square) {
            rest.div_exact_mut(&square);
            factor *= p;
        }
        p += 1;
    }
    (factor, Real::from(rest))
}

/// The exact measure of a word's beam.
///
/// Cost: one exact distance for each vertex of the cell.
pub fn exact_measure<E: Engine>(
    visit: &Visit<'_, E>,
    trail: &mut Trail<E::Exact>,
    form: &Real,
) -> RootSum {
    let mut sum = RootSum::default();
    for (sign, a, b) in vertices(visit.cell, visit.lefts) {
        let vector = visit.engine.displacement(trail, a, b);
        sum.add(sign, vector.squared_length(form));
    }
    sum
}

/// The exact measure of a beam that was kept.
pub fn beam_measure(beam: &WordBeam, form: &Real) -> RootSum {
    let mut sum = RootSum::default();
    for (sign, a, b) in vertices(&beam.images, beam.lefts) {
        sum.add(sign, b.minus(a).squared_length(form));
    }
    sum
}

/// Sign and ends of the distance at each vertex of a cell.
fn vertices<P>(cell: &[P], lefts: usize) -> impl Iterator<Item = (i64, &P, &P)> {
    let m = cell.len();
    (0..m).map(move |i| {
        let between_sides = i + 1 == lefts || i + 1 == m;
        (
            if between_sides { 1 } else { -1 },
            &cell[i],
            &cell[(i + 1) % m],
        )
    })
}

/// An enclosure of the measure of a word's beam, with bounds of `precision` bits.
///
/// Cost: one enclosed distance for each vertex of the cell.
pub fn enclosed_measure<E: Engine>(
    visit: &Visit<'_, E>,
    trail: &mut Trail<E::Exact>,
    precision: u32,
) -> Enclosure {
    let mut sum = Enclosure::zero(precision);
    for (sign, a, b) in vertices(visit.cell, visit.lefts) {
        let distance = visit.engine.squared_distance(trail, a, b, precision).sqrt();
        if sign > 0 {
            sum.add_assign(&distance);
        } else {
            sum.sub_assign(&distance);
        }
    }
    sum
}

/// What the check of one level says.
#[derive(Clone, Debug)]
pub struct LevelSum {
    /// Length of the words.
    pub length: usize,
    /// Certified sum of their measures.
    pub sum: Enclosure,
    /// True when the sum's enclosure is at most 10⁻³⁰ of 2·perimeter wide and shares a point with that of
    /// 2·perimeter.
    pub holds: bool,
}

/// Cylinder measures of a language.
#[derive(Clone, Debug)]
pub struct Measures {
    /// 2·perimeter.
    pub whole: Enclosure,
    /// The sums for lengths 1, 2, …
    pub levels: Vec<LevelSum>,
    /// Measures of the words of the kept length, in their order.
    pub kept: Vec<Enclosure>,
    /// How the orientations on the way were decided.
    pub tiers: Tiers,
}

/// Bits of the bounds for a table of perimeter about 1. A sum must be known to about 100 places after the
/// point; the rest is room for many crossings and many terms.
const PRECISION: u32 = 192;

/// The same for any table: a perimeter of about 2^±e takes e more bits for lengths, 2e more for squares.
pub fn precision_for(table: &Table) -> u32 {
    let exponent = table.perimeter(64).hi().get_exp().unwrap_or(0);
    PRECISION + 2 * exponent.unsigned_abs()
}

/// The width that a level's sum must stay below, as a share of 2·perimeter: 10⁻³⁰.
pub fn largest_width() -> Float {
    Float::with_val(64, Float::parse("1e-30").expect("a number"))
}

/// Measures all words of length 1 … `longest`, checks the sum of each level and keeps the measures of one
/// length.
///
/// Only cells that a corner cut are measured anew; a word with the same cell as its prefix has the same
/// measure. So about p(longest) cells are measured, on Σ p(n) beam steps.
///
/// # Errors
/// When the control asks to stop.
pub fn measure(
    table: &Table,
    engine: &AnyEngine,
    mesh: &Mesh,
    longest: usize,
    kept: usize,
    control: &Control,
) -> Result<Measures, GrowthFault> {
    measure_kept(table, engine, mesh, (longest, kept), control, &Unkept)
}

/// The same, with the longest length and the kept one; parts that the ledger knows are taken from there.
///
/// # Errors
/// When the control asks to stop.
pub fn measure_kept(
    table: &Table,
    engine: &AnyEngine,
    mesh: &Mesh,
    (longest, kept): (usize, usize),
    control: &Control,
    ledger: &dyn Ledger,
) -> Result<Measures, GrowthFault> {
    let precision = precision_for(table);
    let (parts, tiers) = with_engine!(engine, engine => {
        let new = |part| Sums::new(part, kept, precision);
        walk_in_ledger(engine, mesh, longest, control, new, ledger)?
    });
    let whole = table.perimeter(precision).mul_integer(&Integer::from(2));
    let mut sums = vec![Enclosure::zero(precision); longest];
    let mut kept_measures = Vec::new();
    for part in parts {
        for (sum, more) in sums.iter_mut().zip(&part.sums) {
            sum.add_assign(more);
        }
        kept_measures.extend(part.kept_measures);
    }
    let narrow = largest_width() * whole.lo();
    let levels = (1..)
        .zip(sums)
        .map(|(length, sum)| LevelSum {
            length,
            holds: sum.width() <= narrow && sum.meets(&whole),
            sum,
        })
        .collect();
    Ok(Measures {
        whole,
        levels,
        kept: kept_measures,
        tiers,
    })
}

/// Sums per level of one part of the walk.
struct Sums {
    part: Part,
    kept: usize,
    precision: u32,
    sums: Vec<Enclosure>,
    /// In a subtree: the measure of the current word of each length.
    current: Vec<Option<Enclosure>>,
    kept_measures: Vec<Enclosure>,
}

impl Sums {
    fn new(part: Part, kept: usize, precision: u32) -> Sums {
        Sums {
            part,
            kept,
            precision,
            sums: Vec::new(),
            current: Vec::new(),
            kept_measures: Vec::new(),
        }
    }
}

/// The kept length and the precision, the number of sums and the sums, the number of kept measures and these.
impl Kept for Sums {
    fn write(&self, out: &mut Vec<u64>) -> bool {
        out.extend([self.kept as u64, u64::from(self.precision)]);
        [&self.sums, &self.kept_measures].into_iter().all(|list| {
            out.push(list.len() as u64);
            list.iter().all(|enclosure| write_enclosure(enclosure, out))
        })
    }

    fn read(numbers: &mut &[u64]) -> Option<Sums> {
        let kept = usize::try_from(take(numbers)?).ok()?;
        let precision = u32::try_from(take(numbers)?).ok()?;
        let mut list = || -> Option<Vec<Enclosure>> {
            (0..take(numbers)?)
                .map(|_| read_enclosure(numbers))
                .collect()
        };
        let (sums, kept_measures) = (list()?, list()?);
        Some(Sums {
            sums,
            kept_measures,
            ..Sums::new(Part::Subtree, kept, precision)
        })
    }
}

impl<E: Engine> Visitor<E> for Sums {
    fn visit(&mut self, visit: &Visit<'_, E>, trail: &mut Trail<E::Exact>) {
        let (n, precision) = (visit.length, self.precision);
        if self.sums.len() < n {
            self.sums.resize_with(n, || Enclosure::zero(precision));
            self.current.resize(n + 1, None);
        }
        let inherited = match self.part {
            Part::Subtree if !visit.cut => self.current[n - 1].clone(),
            _ => None,
        };
        let measure = inherited.unwrap_or_else(|| enclosed_measure(visit, trail, precision));
        self.sums[n - 1].add_assign(&measure);
        if n == self.kept {
            match self.kept_measures.last_mut() {
                Some(word) if !visit.first => word.add_assign(&measure),
                _ => self.kept_measures.push(measure.clone()),
            }
        }
        self.current[n] = Some(measure);
    }
}
