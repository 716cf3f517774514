//! The classical facts about billiard languages, from their definitions, on every table of `polygons/` to length 10:
//! factorial, prolongable, closed under reversal; measures add up under left and right extension; multiplicities
//! count generalized diagonals.

mod support;

use reboundary::language::distribution::{level_measures, whole_measure};
use reboundary::language::{Language, WordId};
use reboundary::number::Enclosure;
use reboundary::run::Control;
use reboundary::table::Table;
use reboundary::table::file::load;
use rug::Float;
use std::collections::{BTreeMap, HashSet};
use std::path::{Path, PathBuf};
use support::{diagonals, language, prepared, words};

const LONGEST: usize = 10;

fn files() -> Vec<PathBuf> {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("polygons");
    let entries = std::fs::read_dir(&folder).expect("the folder is there");
    let mut files: Vec<PathBuf> = entries
        .map(|entry| entry.expect("an entry").path())
        .filter(|path| path.extension().is_some_and(|e| e == "toml"))
        .collect();
    files.sort();
    assert!(files.len() >= 60, "{files:?}");
    files
}

fn tables() -> impl Iterator<Item = Table> {
    files().into_iter().map(|file| {
        let loaded = load(&file).unwrap_or_else(|fault| panic!("{fault}"));
        loaded.table
    })
}

type Word = Vec<u8>;

/// The words of each length, entry n for length n, and the same as sets.
fn levels(language: &Language) -> (Vec<Vec<Word>>, Vec<HashSet<Word>>) {
    let lists: Vec<Vec<Vec<u8>>> = (0..=language.longest())
        .map(|n| words(language, n))
        .collect();
    let sets = lists.iter().map(|l| l.iter().cloned().collect()).collect();
    (lists, sets)
}

#[test]
fn languages_are_factorial_prolongable_and_closed_under_reversal() {
    for table in tables() {
        let (lists, sets) = levels(&language(&table, LONGEST));
        for n in 1..=LONGEST {
            let title = format!("length {n} of {}", table.title());
            assert_eq!(lists[n].len(), sets[n].len(), "{title}: no word twice");
            let (mut prefixes, mut suffixes) = (HashSet::new(), HashSet::new());
            for word in &lists[n] {
                prefixes.insert(word[..n - 1].to_vec());
                suffixes.insert(word[1..].to_vec());
                let reversed: Vec<u8> = word.iter().rev().copied().collect();
                assert!(sets[n].contains(&reversed), "{title}: {word:?}");
            }
            // Factors are words (factorial), and every shorter word is such a factor (prolongable), on both sides.
            assert_eq!(prefixes, sets[n - 1], "{title}");
            assert_eq!(suffixes, sets[n - 1], "{title}");
        }
    }
}

/// Certified to 10⁻⁵⁰: the enclosures share a point, and neither is wider than half of that.
fn equal_to_fifty_places(a: &Enclosure, b: &Enclosure) -> bool {
    let half = Float::with_val(64, Float::parse("5e-51").expect("a number"));
    a.meets(b) && a.width() <= half && b.width() <= half
}

#[test]
fn measures_add_up_under_left_and_right_extension() {
    for table in tables() {
        let language = language(&table, LONGEST);
        let (engine, mesh) = prepared(&table, LONGEST);
        let measures = level_measures(&table, &engine, &mesh, LONGEST, &Control::new())
            .expect("nobody stops it");
        let whole = whole_measure(&table);
        let sum_of_all = |level: &[Enclosure]| {
            let mut sum = Enclosure::zero(whole.precision());
            level.iter().for_each(|m| sum.add_assign(m));
            sum
        };
        assert!(
            equal_to_fifty_places(&sum_of_all(&measures[0]), &whole),
            "{}",
            table.title()
        );
        for n in 1..LONGEST {
            let (level, longer) = (&measures[n - 1], &measures[n]);
            assert_eq!(level.len(), language.count(n));
            assert_eq!(longer.len(), language.count(n + 1));
            for links in [language.prefixes(n + 1), language.suffixes(n + 1)] {
                let mut sums = vec![Enclosure::zero(whole.precision()); level.len()];
                for (link, measure) in links.iter().zip(longer) {
                    sums[*link as usize].add_assign(measure);
                }
                for (word, (sum, measure)) in sums.iter().zip(level).enumerate() {
                    assert!(
                        equal_to_fifty_places(sum, measure),
                        "{:?} of {}: {measure:?} or {sum:?}",
                        language.word(n, word as WordId),
                        table.title()
                    );
                }
            }
        }
    }
}

/// m(w) from the definition: |awb| − |aw| − |wb| + 1 over letters a, b, by looking all of them up.
fn multiplicity(word: &[u8], letters: u8, sets: &[HashSet<Vec<u8>>]) -> i64 {
    let n = word.len();
    let is_word = |w: &[u8]| i64::from(sets[w.len()].contains(w));
    let mut sum = 1;
    let mut longer = vec![0; n + 2];
    longer[1..=n].copy_from_slice(word);
    for a in 0..letters {
        longer[0] = a;
        longer[n + 1] = a;
        sum -= is_word(&longer[..=n]) + is_word(&longer[1..]);
        for b in 0..letters {
            longer[n + 1] = b;
            sum += is_word(&longer);
        }
    }
    sum
}

/// Word by word, where every word is one beam. Where it is a bundle the law fails: diagonals in different beams of a
/// word can separate the same letters, and m(w) can even be negative.
#[test]
fn multiplicities_count_the_diagonals_with_this_code() {
    let mut bundled = Vec::new();
    for table in tables() {
        let language = language(&table, LONGEST + 2);
        let (lists, sets) = levels(&language);
        let mut found: BTreeMap<Vec<u8>, i64> = BTreeMap::new();
        for diagonal in diagonals(&table, LONGEST) {
            let spelled = diagonal.code.iter().map(|s| table.letter_id(*s).0);
            *found.entry(spelled.collect()).or_default() += 1;
        }
        let mut broken = 0;
        for (n, level) in lists.iter().enumerate().take(LONGEST + 1).skip(1) {
            let by_links = language.bilateral_multiplicities(n);
            for (word, by_links) in level.iter().zip(by_links) {
                let count = found.remove(word).unwrap_or(0);
                // Looking everything up is slow in tables with many sides; the links are the same definition.
                if n <= 3 || table.sides() <= 5 {
                    let letters = language.alphabet() as u8;
                    assert_eq!(multiplicity(word, letters, &sets), by_links, "{word:?}");
                }
                if table.has_one_beam_a_word() {
                    assert_eq!(by_links, count, "{word:?} of {}", table.title());
                }
                broken += usize::from(by_links != count);
            }
        }
        // All that is left has the empty code.
        let empty = found.remove(&Vec::new()).unwrap_or(0);
        assert!(found.is_empty(), "{}: {found:?}", table.title());
        if table.has_one_beam_a_word() {
            assert_eq!(language.bilateral_multiplicities(0), [empty + 1]);
        } else {
            bundled.push((table.title().to_string(), broken));
        }
    }
    // The law needs its hypothesis.
    assert!(bundled.iter().all(|(_, broken)| *broken > 0), "{bundled:?}");
    assert_eq!(bundled.len(), 2, "{bundled:?}");
}
