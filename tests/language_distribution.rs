//! The spread of the invariant measure: the square worked by hand, block frequencies counted one by one, and what
//! enclosures must hold.

mod support;

use reboundary::language::distribution::{
    block_distance, blocks, heaviest_first, level_measures, lightest_first, probabilities, spread,
    whole_measure,
};
use reboundary::language::measure::measure;
use reboundary::language::{Language, WordId};
use reboundary::number::Enclosure;
use reboundary::run::Control;
use reboundary::table::Table;
use reboundary::table::file::load;
use rug::{Float, Rational};
use std::path::Path;
use support::{language, named_tables, prepared, unit_square, words};

fn polygon(name: &str) -> Table {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("polygons");
    let loaded = load(&folder.join(format!("{name}.toml")));
    loaded.unwrap_or_else(|fault| panic!("{fault}")).table
}

/// The probabilities of all words, entry n − 1 for length n.
fn laws(table: &Table, longest: usize) -> (Language, Vec<Vec<Enclosure>>) {
    let (engine, mesh) = prepared(table, longest);
    let measures =
        level_measures(table, &engine, &mesh, longest, &Control::new()).expect("nobody stops it");
    let whole = whole_measure(table);
    let laws = measures.iter().map(|m| probabilities(m, &whole)).collect();
    (language(table, longest), laws)
}

/// `a + b·√2 + c·√5` with rational a, b, c, at 200 bits.
fn surd(a: (i64, i64), b: (i64, i64), c: (i64, i64)) -> Enclosure {
    let rational = |q: (i64, i64)| Enclosure::from_rational(&Rational::from(q), 200);
    let root = |n: i64| rational((n, 1)).sqrt();
    let mut sum = rational(a);
    sum.add_assign(&rational(b).mul(&root(2)));
    sum.add_assign(&rational(c).mul(&root(5)));
    sum
}

fn equal_to_45_places(a: &Enclosure, b: &Enclosure) -> bool {
    let narrow = Float::with_val(64, Float::parse("1e-45").expect("a number"));
    a.meets(b) && a.width() < narrow && b.width() < narrow
}

/// Unit square, 2·perimeter 8 (Santaló 1976 for the formula, the measures by hand). Of length 2: eight words of
/// neighbouring sides with 2 − √2, four of opposite sides with 2√2 − 2. Of length 3: four like aca with
/// 2√5 − 4, sixteen like acb or bca with 1 + √2 − √5, eight like abc with 1 + √5 − 2√2.
#[test]
fn square_laws_by_hand() {
    let (language, laws) = laws(&unit_square(), 3);
    let expected = |word: &[u8]| {
        let opposite = |i: usize| word[i].abs_diff(word[i + 1]) == 2;
        match (word.len(), opposite(0), word.len() == 3 && opposite(1)) {
            (2, false, _) => surd((2, 8), (-1, 8), (0, 1)),
            (2, true, _) => surd((-2, 8), (2, 8), (0, 1)),
            (_, true, true) => surd((-4, 8), (0, 1), (2, 8)),
            (_, false, false) => surd((1, 8), (-2, 8), (1, 8)),
            _ => surd((1, 8), (1, 8), (-1, 8)),
        }
    };
    for n in 2..=3 {
        for (word, law) in words(&language, n).iter().zip(&laws[n - 1]) {
            assert!(equal_to_45_places(law, &expected(word)), "{word:?}");
        }
    }
    // Counting gives opposite sides 1/3, the measure √2 − 1. At length 3 only the sixteen are counted too often.
    let distances = [
        surd((0, 1), (0, 1), (0, 1)),
        surd((-4, 3), (1, 1), (0, 1)),
        surd((-10, 7), (-2, 1), (2, 1)),
    ];
    let plain = |q: f64| -q * q.ln();
    let (two, five) = (2f64.sqrt(), 5f64.sqrt());
    let entropies = [
        4f64.ln(),
        8.0 * plain((2.0 - two) / 8.0) + 4.0 * plain((2.0 * two - 2.0) / 8.0),
        4.0 * plain((2.0 * five - 4.0) / 8.0)
            + 16.0 * plain((1.0 + two - five) / 8.0)
            + 8.0 * plain((1.0 + five - 2.0 * two) / 8.0),
    ];
    for n in 1..=3 {
        let found = spread(&laws[n - 1]);
        assert_eq!(found.words, [4, 12, 28][n - 1]);
        assert!(
            equal_to_45_places(&found.total_variation, &distances[n - 1]),
            "{n}"
        );
        assert!(
            (found.entropy.to_f64() - entropies[n - 1]).abs() < 1e-13,
            "{n}"
        );
        assert!(equal_to_45_places(&found.entropy, &found.entropy), "narrow");
        let largest = (found.words as f64).ln();
        assert!((found.largest_entropy.to_f64() - largest).abs() < 1e-14);
    }
}

/// Of the 56 places of blocks of length 2 in the words of length 3, 24 show opposite sides: two in each of the four words
/// like aca, one in each of the sixteen like acb or bca. So 3/7 against √2 − 1.
#[test]
fn square_blocks_by_hand() {
    let (language, laws) = laws(&unit_square(), 3);
    let found = blocks(&language, 3);
    assert_eq!(found.len(), 3);
    let distance = surd((10, 7), (-1, 1), (0, 1));
    for counts in [&found[1].places, &found[1].beginnings] {
        assert!(equal_to_45_places(
            &block_distance(counts, &laws[1]),
            &distance
        ));
    }
    assert_eq!(found[1].places.iter().sum::<u64>(), 56);
    assert_eq!(found[1].beginnings.iter().sum::<u64>(), 28);
    // Whole words are counted once each.
    assert_eq!(found[2].places, [1; 28]);
}

#[test]
fn blocks_are_counted_as_one_by_one() {
    let mut tables = named_tables();
    tables.push(polygon("square-two-letters"));
    for table in tables {
        let language = language(&table, 6);
        for n in 1..=6 {
            let found = blocks(&language, n);
            assert_eq!(found.len(), n);
            for (m, found) in (1..).zip(found) {
                let mut places = vec![0; language.count(m)];
                let mut beginnings = places.clone();
                for word in words(&language, n) {
                    for block in word.windows(m) {
                        places[language.find(block).expect("a factor") as usize] += 1;
                    }
                    beginnings[language.find(&word[..m]).expect("a factor") as usize] += 1;
                }
                assert_eq!(found.places, places, "{m} in {n}, {}", table.title());
                assert_eq!(
                    found.beginnings,
                    beginnings,
                    "{m} in {n}, {}",
                    table.title()
                );
            }
        }
    }
}

/// Single beams, bundles of beams and a hole: the same as the measures that the check of the sums keeps.
#[test]
fn all_levels_are_measured_as_one_level_is() {
    for name in [
        "right-isosceles",
        "dart",
        "square-two-letters",
        "square-in-square",
    ] {
        let table = polygon(name);
        let (engine, mesh) = prepared(&table, 5);
        let control = Control::new();
        let levels = level_measures(&table, &engine, &mesh, 5, &control).unwrap();
        let language = language(&table, 5);
        for n in 1..=5 {
            let kept = measure(&table, &engine, &mesh, n, n, &control)
                .unwrap()
                .kept;
            assert_eq!(levels[n - 1].len(), language.count(n), "{name}");
            assert_eq!(kept.len(), language.count(n), "{name}");
            for (one, other) in levels[n - 1].iter().zip(&kept) {
                assert!(equal_to_45_places(one, other), "{name}");
                assert!(
                    *one.lo() > 0,
                    "{name}: every cylinder has a positive measure"
                );
            }
        }
    }
}

fn point(n: i64, d: i64) -> Enclosure {
    Enclosure::from_rational(&Rational::from((n, d)), 120)
}

#[test]
fn spread_of_laws_in_closed_form() {
    // Uniform on 8 words.
    let found = spread(&vec![point(1, 8); 8]);
    assert!(found.entropy.meets(&found.largest_entropy));
    assert!(found.total_variation.contains_zero());
    // 1/2, 1/4, 1/4: entropy 3/2·log 2, distance ½(1/6 + 1/12 + 1/12) = 1/6.
    let found = spread(&[point(1, 2), point(1, 4), point(1, 4)]);
    let expected = 1.5 * 2f64.ln();
    assert!((found.entropy.to_f64() - expected).abs() < 1e-15);
    assert!(found.total_variation.contains(&Rational::from((1, 6))));
}

/// Where an enclosure does not keep q from zero, the entropy's enclosure still holds all that q may be.
#[test]
fn entropy_holds_when_a_probability_reaches_zero() {
    let wide = |hi: f64| Enclosure::between(Float::with_val(80, -1e-30), Float::with_val(80, hi));
    for hi in [1e-10, 0.1, 0.3, 0.37, 0.5, 1.0] {
        let found = spread(&[wide(hi)]).entropy;
        for step in 0..=50 {
            let q = hi * f64::from(step) / 50.0;
            let value = if q > 0.0 { -q * q.ln() } else { 0.0 };
            assert!(
                *found.lo() <= value + 1e-15 && *found.hi() >= value - 1e-15,
                "{hi} {q}"
            );
        }
    }
    let found = spread(&[wide(1e-10)]).entropy;
    assert!(*found.hi() < 1e-8, "and is no wider than it must be");
}

#[test]
fn words_by_weight() {
    let between =
        |lo: f64, hi: f64| Enclosure::between(Float::with_val(60, lo), Float::with_val(60, hi));
    // Word 3 is heaviest; 0, 2 and 4 cannot be told apart, because 4 meets both; 1 is lightest.
    let measures = [
        between(0.50, 0.52),
        between(0.10, 0.11),
        between(0.54, 0.56),
        between(0.70, 0.80),
        between(0.51, 0.55),
    ];
    assert_eq!(heaviest_first(&measures), [3, 0, 2, 4, 1]);
    assert_eq!(lightest_first(&measures), [1, 0, 2, 4, 3]);
    // A wide enclosure keeps together what lies beside it.
    let measures = [between(0.2, 0.3), between(0.4, 0.5), between(0.1, 0.9)];
    assert_eq!(heaviest_first(&measures), [0, 1, 2]);
    // On a table: never rising, and each class of the square's symmetries in the order of the letters.
    let (language, laws) = laws(&unit_square(), 4);
    let order = heaviest_first(&laws[3]);
    let mut sorted = order.clone();
    sorted.sort_unstable();
    assert_eq!(sorted, (0..language.count(4) as WordId).collect::<Vec<_>>());
    let value = |w: WordId| laws[3][w as usize].to_f64();
    for pair in order.windows(2) {
        let (a, b) = (value(pair[0]), value(pair[1]));
        assert!(
            a > b + 1e-12 || ((a - b).abs() < 1e-14 && pair[0] < pair[1]),
            "{pair:?}"
        );
    }
}
