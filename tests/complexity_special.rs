//! Trees of special words, from the definitions, and the law by which they grow.

mod support;

use reboundary::complexity::special_tree::{End, Strength, bispecial_words, special_tree};
use reboundary::language::Language;
use reboundary::table::file::load;
use reboundary::table::{LetterId, Table};
use std::collections::{BTreeMap, BTreeSet};
use std::path::Path;
use support::{diagonals, language, named_tables, words};

const LONGEST: usize = 7;

fn tables() -> Vec<Table> {
    let mut tables = named_tables();
    for name in ["square-two-letters", "square-in-square"] {
        let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("polygons");
        let loaded = load(&folder.join(format!("{name}.toml")));
        tables.push(loaded.unwrap_or_else(|fault| panic!("{fault}")).table);
    }
    tables
}

/// For each word of length n the letters that can follow it, found by listing the longer words.
fn followers(language: &Language, n: usize) -> BTreeMap<Vec<u8>, BTreeSet<u8>> {
    let mut found: BTreeMap<Vec<u8>, BTreeSet<u8>> = BTreeMap::new();
    for word in words(language, n + 1) {
        found.entry(word[..n].to_vec()).or_default().insert(word[n]);
    }
    found
}

fn reversed(word: &[u8]) -> Vec<u8> {
    word.iter().rev().copied().collect()
}

#[test]
fn special_words_are_those_with_a_choice() {
    for table in tables() {
        let language = language(&table, LONGEST + 1);
        let right = special_tree(&language, End::Right, LONGEST);
        let left = special_tree(&language, End::Left, LONGEST);
        for n in 0..=LONGEST {
            let title = format!("length {n} of {}", table.title());
            let expected: BTreeMap<Vec<u8>, u32> = followers(&language, n)
                .into_iter()
                .filter(|(_, letters)| letters.len() > 1)
                .map(|(word, letters)| (word, letters.len() as u32))
                .collect();
            let found = right.levels[n].iter();
            let found: BTreeMap<Vec<u8>, u32> = found
                .map(|w| (language.word(n, w.word), w.extensions))
                .collect();
            assert_eq!(found, expected, "{title}");
            // The language is closed under reversal, which exchanges the two trees.
            let mirrored = left.levels[n].iter();
            let mirrored: BTreeMap<Vec<u8>, u32> = mirrored
                .map(|w| (reversed(&language.word(n, w.word)), w.extensions))
                .collect();
            assert_eq!(mirrored, expected, "{title}");
            let more: u32 = expected.values().map(|count| count - 1).sum();
            assert_eq!(
                u64::from(more) + language.count(n) as u64,
                language.count(n + 1) as u64
            );
        }
    }
}

#[test]
fn parents_lose_one_letter() {
    for table in tables() {
        let language = language(&table, LONGEST + 1);
        for end in [End::Right, End::Left] {
            let tree = special_tree(&language, end, LONGEST);
            assert_eq!(tree.levels[0].len(), 1);
            assert_eq!(tree.levels[0][0].parent, None);
            for n in 1..=LONGEST {
                for special in &tree.levels[n] {
                    let word = language.word(n, special.word);
                    let parent = &tree.levels[n - 1][special.parent.expect("a parent")];
                    let expected = match end {
                        End::Right => &word[1..],
                        End::Left => &word[..n - 1],
                    };
                    assert_eq!(language.word(n - 1, parent.word), expected);
                }
            }
        }
    }
}

/// Over the children of a right special word w: Σ (followers − 1) = (followers of w − 1) + m(w), and m(w) is 0 when w is
/// not bispecial (Cassaigne, Bull. Belg. Math. Soc. 4 (1997) 67–88). The same on the left.
#[test]
fn branches_grow_by_the_multiplicity() {
    for table in tables() {
        let language = language(&table, LONGEST + 2);
        let bispecial = bispecial_words(&language, LONGEST, &[], |side| table.letter_id(side));
        for end in [End::Right, End::Left] {
            let tree = special_tree(&language, end, LONGEST + 1);
            for (n, bispecial) in bispecial.iter().enumerate() {
                for (at, special) in tree.levels[n].iter().enumerate() {
                    let children = tree.levels[n + 1].iter().filter(|c| c.parent == Some(at));
                    let sum: i64 = children.map(|c| i64::from(c.extensions) - 1).sum();
                    let m = bispecial.iter().find(|b| b.word == special.word);
                    let m = m.map_or(0, |b| b.multiplicity);
                    let word = language.word(n, special.word);
                    assert_eq!(
                        sum,
                        i64::from(special.extensions) - 1 + m,
                        "{word:?} of {}",
                        table.title()
                    );
                }
            }
        }
    }
}

#[test]
fn bispecial_words_name_the_diagonals_that_make_them() {
    for table in tables() {
        let language = language(&table, LONGEST + 2);
        let listed = diagonals(&table, LONGEST);
        let found = bispecial_words(&language, LONGEST, &listed, |side| table.letter_id(side));
        let p = language.complexity();
        let mut named = 0;
        for (n, level) in found.iter().enumerate() {
            let sum: i64 = level.iter().map(|w| w.multiplicity).sum();
            assert_eq!(sum, p[n + 2] as i64 - 2 * p[n + 1] as i64 + p[n] as i64);
            let right = followers(&language, n);
            for word in level {
                let letters = language.word(n, word.word);
                assert_eq!(word.right as usize, right[&letters].len());
                assert_eq!(word.left as usize, right[&reversed(&letters)].len());
                for diagonal in &word.diagonals {
                    let code = listed[*diagonal].code.iter();
                    let spelled: Vec<u8> = code.map(|s| table.letter_id(*s).0).collect();
                    assert_eq!(spelled, letters);
                }
                named += word.diagonals.len();
                if table.has_one_beam_a_word() {
                    let count = word.multiplicity - i64::from(n == 0);
                    assert_eq!(word.diagonals.len() as i64, count, "{letters:?}");
                    assert_ne!(word.strength(), Strength::Weak);
                }
            }
        }
        // Every diagonal makes a bispecial word where words are single beams.
        if table.has_one_beam_a_word() {
            assert_eq!(named, listed.len(), "{}", table.title());
        }
    }
}

/// s(n) falls from 4 to 2 at n = 3 (p: Brlek 1989; de Luca and Varricchio 1989), so words of length 3 are weak. By hand: 010
/// stands between two letters only in 00101 and 10100, so m = 2 − 2 − 2 + 1 = −1, and so does 101 with letters exchanged.
#[test]
fn thue_morse_has_weak_words() {
    let word: Vec<u8> = (0..4096u32).map(|i| (i.count_ones() % 2) as u8).collect();
    let language = Language::from_factors(2, [&word[..]], 12).expect("a language");
    let found = bispecial_words(&language, 8, &[], |side| LetterId(side.0));
    let of = |n: usize, strength| -> Vec<Vec<u8>> {
        let level = found[n].iter().filter(|w| w.strength() == strength);
        level.map(|w| language.word(n, w.word)).collect()
    };
    assert_eq!(of(2, Strength::Strong), [[0, 1], [1, 0]]);
    assert_eq!(of(3, Strength::Weak), [[0, 1, 0], [1, 0, 1]]);
    assert!(of(2, Strength::Weak).is_empty());
    assert!(found.iter().flatten().all(|w| w.diagonals.is_empty()));
}
