//! Cylinder measures: worked values, exact sums, additivity, and frequencies along random orbits.

mod oracle;
mod support;

use oracle::shapes::Random;
use reboundary::language::measure::{Measures, RootSum, exact_measure, largest_width, measure};
use reboundary::language::walk::{Part, Visit, Visitor, walk_beams};
use reboundary::number::{Enclosure, Real};
use reboundary::run::Control;
use reboundary::table::{Table, Vector};
use reboundary::unfold::engine::{Engine, Trail};
use reboundary::unfold::with_engine;
use rug::ops::Pow;
use rug::{Integer, Rational};
use std::collections::BTreeMap;
use support::{language, named_tables, prepared, rational_table, table_of, words};

type MeasureByWord = BTreeMap<Vec<u8>, RootSum>;

/// Exact measures of short words, which the walk visits level by level.
struct Collector {
    form: Real,
    levels: Vec<Vec<Vec<u8>>>,
    measures: MeasureByWord,
}

impl<E: Engine> Visitor<E> for Collector {
    fn visit(&mut self, visit: &Visit<'_, E>, trail: &mut Trail<E::Exact>) {
        self.levels
            .resize(self.levels.len().max(visit.length + 1), Vec::new());
        let mut word = match visit.length {
            1 => Vec::new(),
            n => self.levels[n - 1][visit.parent as usize].clone(),
        };
        word.push(visit.letter.0);
        self.levels[visit.length].push(word.clone());
        let measure = exact_measure(visit, trail, &self.form);
        assert!(
            self.measures.insert(word, measure).is_none(),
            "no word twice"
        );
    }
}

fn exact_measures(table: &Table, longest: usize) -> MeasureByWord {
    let (engine, mesh) = prepared(table, longest);
    let new = |part| {
        assert_eq!(part, Part::Head, "too many words for this test");
        Collector {
            form: table.form().clone(),
            levels: vec![Vec::new()],
            measures: BTreeMap::new(),
        }
    };
    let (mut visitors, _) = with_engine!(&engine, engine => {
        walk_beams(engine, &mesh, longest, &Control::new(), new).expect("nobody stops it")
    });
    visitors.swap_remove(0).measures
}

/// Σ coefficient·√radicand.
fn roots(terms: &[(i64, i64)]) -> RootSum {
    let mut sum = RootSum::default();
    for (coefficient, radicand) in terms {
        sum.add(*coefficient, Real::from(*radicand));
    }
    sum
}

/// The words of one length, each with the first word of its class under the symmetries of a regular table
/// (turns and mirror images) and reversal.
fn class_of(word: &[u8], k: u8) -> Vec<u8> {
    let renamings = (0..k).flat_map(|turn| {
        let turned: Vec<u8> = word.iter().map(|s| (s + turn) % k).collect();
        let mirrored = turned.iter().map(|s| (k - s) % k).collect();
        [turned, mirrored]
    });
    renamings
        .flat_map(|w: Vec<u8>| [w.iter().rev().copied().collect(), w])
        .min()
        .expect("not empty")
}

fn assert_classes(table: &Table, longest: usize, classes: &[(&[u8], RootSum)]) {
    let k = table.sides() as u8;
    let expected: BTreeMap<Vec<u8>, &RootSum> = classes
        .iter()
        .map(|(word, sum)| (class_of(word, k), sum))
        .collect();
    assert_eq!(expected.len(), classes.len(), "classes differ");
    let found = exact_measures(table, longest);
    assert_eq!(
        found.len(),
        (1..=longest)
            .map(|n| language(table, n).count(n))
            .sum::<usize>()
    );
    for (word, sum) in &found {
        let expected = expected.get(&class_of(word, k));
        assert_eq!(Some(&sum), expected, "{word:?} of {}", table.title());
    }
}

/// m(02) = 2√2 − 2, m(01) = 2 − √2, m(020) = 2√5 − 4, m(021) = 1 + √2 − √5, m(012) = 1 + √5 − 2√2, recomputed;
/// m(0) is twice the side.
#[test]
fn unit_square_measures_recomputed() {
    let classes = [
        (&[0u8][..], roots(&[(2, 1)])),
        (&[0, 2], roots(&[(2, 2), (-2, 1)])),
        (&[0, 1], roots(&[(2, 1), (-1, 2)])),
        (&[0, 2, 0], roots(&[(2, 5), (-4, 1)])),
        (&[0, 2, 1], roots(&[(1, 1), (1, 2), (-1, 5)])),
        (&[0, 1, 2], roots(&[(1, 1), (1, 5), (-2, 2)])),
    ];
    // 013 backwards is 310, a mirror image of 021 up to a turn, so that these are all classes.
    assert_eq!(class_of(&[0, 1, 3], 4), class_of(&[0, 2, 1], 4));
    assert_classes(&support::unit_square(), 3, &classes);
}

/// m(01) = 1, m(012) = √3 − 1, m(010) = 2 − √3, recomputed. The plane form 3 keeps the coordinates rational.
#[test]
fn unit_equilateral_measures_recomputed() {
    let half = Rational::from((1, 2));
    let corners = [
        (Rational::new(), Rational::new()),
        (Rational::from(1), Rational::new()),
        (half.clone(), half),
    ];
    let classes = [
        (&[0u8][..], roots(&[(2, 1)])),
        (&[0, 1], roots(&[(1, 1)])),
        (&[0, 1, 2], roots(&[(1, 3), (-1, 1)])),
        (&[0, 1, 0], roots(&[(2, 1), (-1, 3)])),
    ];
    assert_classes(
        &rational_table("unit equilateral", 3, &corners),
        3,
        &classes,
    );
}

/// The sum over each level cancels to twice the perimeter, term by term.
#[test]
fn exact_sums_are_twice_the_perimeter() {
    let tables = [
        support::unit_square(),
        support::equilateral(),
        support::right_isosceles(),
        support::half_equilateral(),
        support::legs_three_and_four(),
        support::l_of_three_squares(),
        support::crooked(),
    ];
    for table in tables {
        let mut whole = RootSum::default();
        for i in 0..table.sides() {
            whole.add(2, table.side_vector(i).squared_length(table.form()));
        }
        let longest = 4;
        let mut sums = vec![RootSum::default(); longest + 1];
        for (word, measure) in exact_measures(&table, longest) {
            for (coefficient, radicand) in measure.terms() {
                // Coefficients may be fractions: bring them under the root, with their sign.
                let square = Real::from(Rational::from(coefficient * coefficient));
                let sign = if *coefficient < 0 { -1 } else { 1 };
                sums[word.len()].add(sign, &square * radicand);
            }
        }
        for (n, sum) in sums.iter().enumerate().skip(1) {
            assert_eq!(*sum, whole, "length {n} of {}", table.title());
        }
    }
}

/// The named tables, random ones, and one with a passage 10⁻⁹ wide.
fn tables() -> Vec<Table> {
    let mut tables = named_tables();
    for seed in 700..720 {
        let corners = oracle::random_polygon(seed, 3 + seed as usize % 6, seed % 3 == 0);
        tables.push(rational_table(&format!("seed {seed}"), 1, &corners));
    }
    let billion = 1_000_000_000;
    let corners = [
        (0, 0),
        (2 * billion, 0),
        (2 * billion, 2 * billion),
        (billion, 1),
        (0, 2 * billion),
    ];
    tables.push(support::integer_table("narrow passage", 1, &corners));
    tables
}

fn measures(table: &Table, longest: usize, kept: usize) -> Measures {
    let (engine, mesh) = prepared(table, longest);
    measure(table, &engine, &mesh, longest, kept, &Control::new()).expect("nobody stops it")
}

#[test]
fn level_sums_hold() {
    for table in tables() {
        let found = measures(&table, 9, 9);
        let lengths: Vec<usize> = found.levels.iter().map(|level| level.length).collect();
        assert_eq!(lengths, (1..=9).collect::<Vec<_>>());
        for level in &found.levels {
            assert!(level.holds, "length {} of {}", level.length, table.title());
        }
        // 2·perimeter in floating point, from the corners alone.
        let perimeter: f64 = (0..table.sides())
            .map(|i| {
                table
                    .side_vector(i)
                    .squared_length(table.form())
                    .to_f64()
                    .sqrt()
            })
            .sum();
        let error = found.whole.to_f64() / (2.0 * perimeter) - 1.0;
        assert!(error.abs() < 1e-12, "{}", table.title());
        assert!(found.whole.width() <= largest_width(), "{}", table.title());
    }
}

/// A cell of lines is open and not empty, so its measure is positive.
#[test]
fn every_word_has_positive_measure() {
    for table in tables() {
        let found = measures(&table, 8, 8);
        assert_eq!(
            found.kept.len(),
            language(&table, 8).count(8),
            "{}",
            table.title()
        );
        for (id, m) in found.kept.iter().enumerate() {
            assert!(*m.lo() > 0, "word {id} of {}", table.title());
            assert!(m.width() <= largest_width());
        }
    }
}

/// m(w) = Σ m(wa) = Σ m(aw), and m(w) = m(w reversed), as enclosures less than 10⁻³⁰ wide that meet.
#[test]
fn measures_are_additive_and_reversible() {
    for table in tables() {
        let longest = 7;
        let language = language(&table, longest);
        let by_length: Vec<Vec<Enclosure>> = (1..=longest)
            .map(|kept| measures(&table, kept, kept).kept)
            .collect();
        for n in 1..longest {
            let (short, long) = (&by_length[n - 1], &by_length[n]);
            let mut right = vec![Enclosure::zero(192); short.len()];
            let mut left = right.clone();
            for (id, m) in (0..).zip(long) {
                right[language.prefix(n + 1, id) as usize].add_assign(m);
                left[language.suffix(n + 1, id) as usize].add_assign(m);
            }
            for id in 0..short.len() {
                let word = language.word(n, id as u32);
                for (side, sum) in [("right", &right[id]), ("left", &left[id])] {
                    assert!(sum.width() <= largest_width());
                    assert!(
                        sum.meets(&short[id]),
                        "{side} of {word:?}, {}",
                        table.title()
                    );
                }
                let reversed: Vec<u8> = word.iter().rev().copied().collect();
                let back = language.find(&reversed).expect("closed under reversal");
                assert!(
                    short[id].meets(&short[back as usize]),
                    "{word:?}, {}",
                    table.title()
                );
            }
        }
    }
}

/// Leaving out any one word, or counting it twice, breaks the sum.
#[test]
fn a_missing_word_breaks_the_sum() {
    for table in tables() {
        let found = measures(&table, 5, 5);
        let sum_without = |skipped: Option<usize>| {
            let mut sum = Enclosure::zero(192);
            for (id, m) in found.kept.iter().enumerate() {
                if Some(id) != skipped {
                    sum.add_assign(m);
                }
            }
            sum
        };
        assert!(sum_without(None).meets(&found.whole), "{}", table.title());
        for id in 0..found.kept.len() {
            let sum = sum_without(Some(id));
            assert!(
                !sum.meets(&found.whole),
                "without word {id} of {}",
                table.title()
            );
            let mut twice = sum_without(None);
            twice.add_assign(&found.kept[id]);
            assert!(
                !twice.meets(&found.whole),
                "word {id} twice in {}",
                table.title()
            );
        }
    }
}

/// Exact sums and enclosures are two computations of the same numbers.
#[test]
fn exact_measures_lie_in_the_enclosures() {
    for table in tables() {
        let exact = exact_measures(&table, 3);
        let kept = measures(&table, 3, 3).kept;
        for (word, enclosure) in words(&language(&table, 3), 3).iter().zip(&kept) {
            let sum = exact[word].enclosure(192);
            assert!(
                sum.width() <= largest_width(),
                "{word:?} of {}",
                table.title()
            );
            assert!(sum.meets(enclosure), "{word:?} of {}", table.title());
        }
    }
}

/// Scaling by 5/3 scales every measure; turning and moving leave it.
#[test]
fn measures_scale_like_lengths() {
    let turn = Vector::new(3.into(), 4.into());
    for table in named_tables() {
        let form = table.form();
        let squared = turn.squared_length(form);
        // The turn scales lengths by √(9 + 16g), a whole number for g = 1.
        let Some(scale) = squared.to_rational().filter(|s| *s == 25) else {
            continue;
        };
        assert_eq!(scale, 25);
        let third = Real::from(Rational::from((1, 3)));
        let corners = table
            .corners()
            .iter()
            .map(|c| c.product(&turn, form).times(&third))
            .collect();
        let turned = table_of(table.title(), corners, form.clone());
        let (before, after) = (measures(&table, 6, 6).kept, measures(&turned, 6, 6).kept);
        for (small, large) in before.iter().zip(&after) {
            assert!(
                small
                    .mul_integer(&5.into())
                    .meets(&large.mul_integer(&3.into()))
            );
        }
    }
}

/// The check must neither fail on a huge table nor be empty on a tiny one.
#[test]
fn level_sums_are_checked_at_every_scale() {
    for table in [
        support::legs_three_and_four(),
        support::crooked(),
        support::regular_pentagon(),
    ] {
        for exponent in [40u32, 80] {
            let power = Integer::from(10).pow(exponent);
            for factor in [Rational::from(&power), Rational::from((1, &power))] {
                let factor = Real::from(factor);
                let corners = table.corners().iter().map(|c| c.times(&factor)).collect();
                let scaled = table_of(table.title(), corners, table.form().clone());
                let found = measures(&scaled, 5, 5);
                assert!(
                    found.levels.iter().all(|level| level.holds),
                    "{}",
                    table.title()
                );
                for missing in &found.kept {
                    let mut sum = found.levels[4].sum.clone();
                    sum.sub_assign(missing);
                    assert!(
                        !sum.meets(&found.whole),
                        "{} at 10^±{exponent}",
                        table.title()
                    );
                }
            }
        }
    }
}

/// Random orbits, uniform in the invariant measure, have each word of length 3 with the frequency that its
/// measure says. The orbits are the oracle's, so nothing of the walk is shared. With a fixed seed the test is
/// deterministic; five standard deviations leave room for the number of words.
#[test]
fn frequencies_along_random_orbits_are_the_measures() {
    let tables = [
        vec![(0, 0), (7, 1), (3, 2), (5, 6), (1, 5)],
        vec![(0, 0), (2, 0), (2, 1), (1, 1), (1, 2), (0, 2)],
        vec![(0, 0), (4, 0), (0, 3)],
    ];
    for corners in tables {
        let corners = oracle::lattice_table(&corners);
        let table = rational_table("sampled", 1, &corners);
        let exact = exact_measures(&table, 3);
        let whole = table.perimeter(64).to_f64() * 2.0;
        let orbits = 20_000;
        let mut seen: BTreeMap<Vec<u8>, f64> = BTreeMap::new();
        let mut random = Random(77);
        for _ in 0..orbits {
            let word = random_word(&mut random, &table, &corners);
            *seen.entry(word).or_default() += 1.0;
        }
        for (word, sum) in exact.iter().filter(|(word, _)| word.len() == 3) {
            let share = sum.enclosure(64).to_f64() / whole;
            let expected = share * orbits as f64;
            let deviation = (expected * (1.0 - share)).sqrt();
            let count = seen.remove(word).unwrap_or(0.0);
            assert!(
                (count - expected).abs() < 5.0 * deviation + 1.0,
                "{word:?}: {count}, not {expected}"
            );
        }
        assert!(seen.is_empty(), "words outside the language: {seen:?}");
    }
}

/// The first three sides of an orbit with a random start: uniform in arc length and in the sine of the angle.
fn random_word(random: &mut Random, table: &Table, corners: &[oracle::Point]) -> Vec<u8> {
    let mut uniform = || (random.bits() >> 11) as f64 / (1u64 << 53) as f64;
    let lengths: Vec<f64> = (0..table.sides())
        .map(|i| table.length(&table.side_vector(i), 64).to_f64())
        .collect();
    loop {
        let mut at = uniform() * lengths.iter().sum::<f64>();
        let mut side = 0;
        while side + 1 < lengths.len() && at > lengths[side] {
            at -= lengths[side];
            side += 1;
        }
        let fraction = at / lengths[side];
        let sine = 2.0 * uniform() - 1.0;
        let cosine = (1.0 - sine * sine).sqrt();
        let along = table.side_vector(side);
        let (x, y) = (
            along.x.to_f64() / lengths[side],
            along.y.to_f64() / lengths[side],
        );
        let aim = [x * sine - y * cosine, y * sine + x * cosine];
        let exact = |value: f64| Rational::from_f64(value).expect("finite");
        let (fraction, aim_x, aim_y) = (exact(fraction), exact(aim[0]), exact(aim[1]));
        if fraction <= 0 || fraction >= 1 || cosine < 1e-9 {
            continue;
        }
        let orbit = oracle::trace(corners, side, &fraction, (&aim_x, &aim_y), 3);
        if orbit.corner.is_none() && orbit.sides.len() == 3 {
            return orbit.sides.iter().map(|s| *s as u8).collect();
        }
    }
}
