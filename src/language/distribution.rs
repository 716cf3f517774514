//! How the invariant measure is spread over the words of one length, beside the uniform law on them.
//!
//! The cylinder measures of the words of length n sum to 2·perimeter; divided by it they are the *invariant law* on
//! these words. The *uniform law* gives each the probability 1/p(n). Everything here is an enclosure computed with
//! outward rounding from the enclosed measures: entropy −Σ q·log q in natural units (nats), and total variation
//! ½·Σ |q − r| of two laws.
//!
//! **Block frequencies.** Draw a word of length n from the uniform law. Its blocks of length m ≤ n follow a law too;
//! two are given. *Averaged*: the number of places, among all n − m + 1 places of all words of length n, at which a
//! block stands, divided by (n − m + 1)·p(n). *At the beginning*: the number of words of length n that begin with the
//! block, divided by p(n). (Billiard languages are closed under reversal, so the end of a word gives the same as the
//! beginning, with blocks reversed.) Their distance to the invariant law on the words of length m tells whether
//! counting words forgets or keeps the measure as n grows; finite data suggests, and proves no limit.
//!
//! **Counting them.** With S_n = 1 on the words of length n, S_j(v) = Σ S_{j+1}(v') over the v' with suffix v counts
//! the words of length n that end with v, for each length j. A block u of length m stands at place n − j exactly in the words
//! whose end of length j begins with u. So A_n = S_n and A_j(v) = S_j(v) + Σ A_{j+1}(v') over the v' with prefix v
//! counts all places of v: one pass over the tree gives every m.

use super::measure::{enclosed_measure, precision_for};
use super::tree::{Language, WordId};
use super::walk::{Part, Visit, Visitor, walk_beams};
use crate::number::Enclosure;
use crate::run::{Control, Stopped};
use crate::table::Table;
use crate::unfold::engine::{AnyEngine, Engine, Trail};
use crate::unfold::{Mesh, with_engine};
use rug::{Float, Integer, Rational};

/// Bytes that the measure of a word takes: two bounds of about 200 bits and their headers.
pub const BYTES_PER_MEASURE: u64 = 136;

/// Measures of the words of one part of the walk, by length.
struct LevelMeasures {
    part: Part,
    precision: u32,
    levels: Vec<Vec<Enclosure>>,
    /// In a subtree: the measure of the beam visited last at each length.
    current: Vec<Option<Enclosure>>,
}

impl<E: Engine> Visitor<E> for LevelMeasures {
    fn visit(&mut self, visit: &Visit<'_, E>, trail: &mut Trail<E::Exact>) {
        let n = visit.length;
        if self.levels.len() < n {
            self.levels.resize_with(n, Vec::new);
            self.current.resize(n + 1, None);
        }
        // A word that is one beam with the cell of its prefix has the measure of its prefix.
        let inherited = match self.part {
            Part::Subtree if !visit.cut => self.current[n - 1].clone(),
            _ => None,
        };
        let measure = inherited.unwrap_or_else(|| enclosed_measure(visit, trail, self.precision));
        match self.levels[n - 1].last_mut() {
            Some(word) if !visit.first => word.add_assign(&measure),
            _ => self.levels[n - 1].push(measure.clone()),
        }
        self.current[n] = Some(measure);
    }
}

/// The cylinder measures of all words of length 1 … `longest`, entry n − 1 for length n, words in their order.
///
/// Cost: as [`measure`](super::measure::measure); memory [`BYTES_PER_MEASURE`] a word.
///
/// # Errors
/// When the control asks to stop.
pub fn level_measures(
    table: &Table,
    engine: &AnyEngine,
    mesh: &Mesh,
    longest: usize,
    control: &Control,
) -> Result<Vec<Vec<Enclosure>>, Stopped> {
    let precision = precision_for(table);
    let parts: Vec<LevelMeasures> = with_engine!(engine, engine => {
        let new = |part| LevelMeasures {
            part,
            precision,
            levels: Vec::new(),
            current: Vec::new(),
        };
        walk_beams(engine, mesh, longest, control, new)?.0
    });
    let mut levels = vec![Vec::new(); longest];
    for part in parts {
        for (level, more) in levels.iter_mut().zip(part.levels) {
            level.extend(more);
        }
    }
    Ok(levels)
}

/// The measure of all lines that meet the table, 2·perimeter, as precise as the measures of the words.
pub fn whole_measure(table: &Table) -> Enclosure {
    table
        .perimeter(precision_for(table))
        .mul_integer(&Integer::from(2))
}

/// The invariant law on the words of one length.
#[derive(Clone, Debug)]
pub struct Spread {
    /// Number of words.
    pub words: usize,
    /// −Σ q·log q, natural logarithm.
    pub entropy: Enclosure,
    /// log p(n), the entropy of the uniform law.
    pub largest_entropy: Enclosure,
    /// Total variation between the invariant and the uniform law.
    pub total_variation: Enclosure,
}

/// The probability of each word: its measure divided by that of all lines.
///
/// # Panics
/// If the whole measure's enclosure contains zero.
pub fn probabilities(measures: &[Enclosure], whole: &Enclosure) -> Vec<Enclosure> {
    measures
        .iter()
        .map(|m| m.div(whole).expect("a table has a positive perimeter"))
        .collect()
}

/// Entropy of the invariant law and its distance from the uniform law, from the probabilities of all words of a length.
///
/// Cost: one logarithm a word.
///
/// # Panics
/// Without words.
pub fn spread(probabilities: &[Enclosure]) -> Spread {
    let precision = probabilities[0].precision();
    let count = Integer::from(probabilities.len());
    let uniform = Enclosure::from_rational(&Rational::from((1, &count)), precision);
    let mut entropy = Enclosure::zero(precision);
    let mut distance = Enclosure::zero(precision);
    for q in probabilities {
        entropy.sub_assign(&times_logarithm(q));
        distance.add_assign(&q.sub(&uniform).abs());
    }
    Spread {
        words: probabilities.len(),
        entropy,
        largest_entropy: Enclosure::from_integer(&count, precision)
            .ln()
            .expect("at least one word"),
        total_variation: distance.div_integer(&Integer::from(2)),
    }
}

/// q·log q for a probability. Where the lower bound is not above zero, q·log q lies between −q's upper bound times its
/// logarithm's size and 0, because x·log x falls from 0 as x grows to 1/e.
fn times_logarithm(q: &Enclosure) -> Enclosure {
    if let Some(logarithm) = q.ln() {
        return q.mul(&logarithm);
    }
    let precision = q.precision();
    let inverse_of_e = Float::with_val(precision, 0.36);
    // Past 0.36 < 1/e the least value −1/e > −0.37 bounds all.
    let least = if *q.hi() < inverse_of_e && *q.hi() > 0 {
        let hi = Enclosure::between(q.hi().clone(), q.hi().clone());
        let product = hi.mul(&hi.ln().expect("positive"));
        product.lo().clone()
    } else {
        Float::with_val(precision, -0.37)
    };
    Enclosure::between(least, Float::new(precision))
}

/// The words by measure, heaviest first. Words whose measures the enclosures do not tell apart, such as those that a
/// symmetry of the table exchanges, stand in the order of the letters.
pub fn heaviest_first(measures: &[Enclosure]) -> Vec<WordId> {
    let mut order: Vec<WordId> = (0..measures.len() as WordId).collect();
    let at = |w: &WordId| &measures[*w as usize];
    order.sort_by(|a, b| at(b).hi().total_cmp(at(a).hi()).then(a.cmp(b)));
    // A group goes on while the next enclosure reaches up to the lowest bound in it.
    let mut start = 0;
    while start < order.len() {
        let mut lowest = at(&order[start]).lo();
        let mut end = start + 1;
        while end < order.len() && at(&order[end]).hi() >= lowest {
            let lo = at(&order[end]).lo();
            if lo < lowest {
                lowest = lo;
            }
            end += 1;
        }
        order[start..end].sort_unstable();
        start = end;
    }
    order
}

/// The words by measure, lightest first; ties as in [`heaviest_first`].
pub fn lightest_first(measures: &[Enclosure]) -> Vec<WordId> {
    let turned: Vec<Enclosure> = measures.iter().map(Enclosure::neg).collect();
    heaviest_first(&turned)
}

/// Blocks of one length in the words of another.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Blocks {
    /// For each block: at how many places of all words it stands.
    pub places: Vec<u64>,
    /// For each block: how many words begin with it.
    pub beginnings: Vec<u64>,
}

/// The blocks of length 1 … n in the words of length n; entry m − 1 for length m.
///
/// Cost: O(Σ p(j)), j ≤ n.
///
/// # Panics
/// If the language is shorter.
pub fn blocks(language: &Language, n: usize) -> Vec<Blocks> {
    let ones = vec![1u64; language.count(n)];
    let mut endings = ones.clone();
    let mut longer = Blocks {
        places: ones.clone(),
        beginnings: ones,
    };
    let mut found = Vec::new();
    for m in (1..n).rev() {
        endings = pushed(&endings, language.suffixes(m + 1), language.count(m));
        let mut places = pushed(&longer.places, language.prefixes(m + 1), language.count(m));
        places
            .iter_mut()
            .zip(&endings)
            .for_each(|(sum, more)| *sum += more);
        let beginnings = pushed(
            &longer.beginnings,
            language.prefixes(m + 1),
            language.count(m),
        );
        found.push(longer);
        longer = Blocks { places, beginnings };
    }
    if n > 0 {
        found.push(longer);
    }
    found.reverse();
    found
}

/// Sums of values over the words with the same link.
fn pushed(values: &[u64], links: &[WordId], count: usize) -> Vec<u64> {
    let mut sums = vec![0; count];
    for (value, link) in values.iter().zip(links) {
        sums[*link as usize] += value;
    }
    sums
}

/// Total variation between the frequencies of some blocks and their probabilities.
///
/// # Panics
/// Unless there is a count for each probability and their sum is positive.
pub fn block_distance(counts: &[u64], probabilities: &[Enclosure]) -> Enclosure {
    assert_eq!(counts.len(), probabilities.len(), "a count for each block");
    let total: Integer = counts.iter().map(|c| Integer::from(*c)).sum();
    let precision = probabilities[0].precision();
    let mut distance = Enclosure::zero(precision);
    for (count, q) in counts.iter().zip(probabilities) {
        let frequency = Rational::from((Integer::from(*count), total.clone()));
        let frequency = Enclosure::from_rational(&frequency, precision);
        distance.add_assign(&frequency.sub(q).abs());
    }
    distance.div_integer(&Integer::from(2))
}
