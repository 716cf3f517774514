//! Stored languages against the tree of words, which shares neither the file nor the automaton.

use rand::{RngExt, SeedableRng};
use rand_chacha::ChaCha8Rng;
use reboundary::language::store::{
    Origin, PatternFault, QueryFault, Side, Special, StoreFault, StoredLanguage, choose_order,
    open, store_language, store_table,
};
use reboundary::language::{Language, WordId, walk};
use reboundary::run::Control;
use reboundary::table::Table;
use reboundary::table::file::load;
use reboundary::unfold::Mesh;
use reboundary::unfold::engine::{AnyEngine, Arithmetic};
use std::ops::ControlFlow;
use std::path::{Path, PathBuf};
use tempfile::TempDir;

fn files() -> Vec<PathBuf> {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("polygons");
    let mut files: Vec<PathBuf> = std::fs::read_dir(folder)
        .expect("the shelf")
        .map(|entry| entry.expect("an entry").path())
        .filter(|path| path.extension().is_some_and(|e| e == "toml"))
        .collect();
    files.sort();
    files
}

fn table(name: &str) -> Table {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("polygons");
    let loaded = load(&folder.join(format!("{name}.toml")));
    loaded.unwrap_or_else(|fault| panic!("{fault}")).table
}

fn grown(table: &Table, length: usize) -> Language {
    let engine = AnyEngine::new(table, length, Arithmetic::Tiered);
    let grown = walk::grow(&engine, &Mesh::new(table), length, &Control::new());
    grown.expect("not stopped").0
}

fn origin(table: &Table) -> Origin {
    Origin {
        title: table.title().into(),
        letters: table.letters().to_vec(),
        table: "the text of the table".into(),
        settings: vec!["t=1/3".into()],
    }
}

fn stored(table: &Table, length: usize, order: usize, path: &Path) -> StoredLanguage {
    let engine = AnyEngine::new(table, length, Arithmetic::Tiered);
    let parts = (&engine, &Mesh::new(table));
    let (origin, control) = (origin(table), Control::new());
    let written = store_table(path, &origin, parts, (length, order), &control);
    let described = written.unwrap_or_else(|fault| panic!("{}: {fault}", table.title()));
    let language = open(path).unwrap_or_else(|fault| panic!("{fault}"));
    assert_eq!(*language.description(), described);
    language
}

fn place() -> (TempDir, PathBuf) {
    let folder = tempfile::tempdir().expect("a temporary folder");
    let path = folder.path().join("words.lang");
    (folder, path)
}

/// All words of a level.
fn level(language: &Language, n: usize) -> Vec<Vec<u8>> {
    let words = 0..language.count(n) as WordId;
    words.map(|word| language.word(n, word)).collect()
}

/// The special words of a length, from counts of the tree.
fn special_by_tree(language: &Language, side: Side, n: usize) -> Vec<Special> {
    let left = language.left_extension_counts(n);
    let right = language.right_extension_counts(n);
    let letters = 0..language.alphabet() as u8;
    (0..language.count(n))
        .filter(|w| match side {
            Side::Left => left[*w] > 1,
            Side::Right => right[*w] > 1,
            Side::Both => left[*w] > 1 && right[*w] > 1,
        })
        .map(|w| {
            let word = language.word(n, w as WordId);
            let found = |w: Vec<u8>| language.find(&w).is_some();
            let before = |a: &u8| found([&[*a], &word[..]].concat());
            let behind = |a: &u8| found([&word[..], &[*a]].concat());
            Special {
                left: letters.clone().filter(before).collect(),
                right: letters.clone().filter(behind).collect(),
                word,
            }
        })
        .collect()
}

fn special(stored: &StoredLanguage, side: Side, n: usize) -> Vec<Special> {
    let mut found = Vec::new();
    let visited = stored.special(side, n, |word| {
        found.push(word);
        ControlFlow::Continue(())
    });
    visited.expect("short enough");
    found
}

/// Every answer about every word and length, from the tree.
fn agrees(name: &str, stored: &StoredLanguage, language: &Language) {
    let longest = language.longest();
    assert_eq!(stored.to_language(longest).as_ref(), Ok(language), "{name}");
    assert_eq!(stored.description().complexity, language.complexity());
    for n in 0..=longest {
        let words = level(language, n);
        let mut of_length = stored.words_of_length(n).expect("stored");
        assert_eq!(of_length.total(), words.len() as u64, "{name} {n}");
        for (index, word) in words.iter().enumerate() {
            let index = index as u64;
            assert_eq!(of_length.nth(index).as_ref(), Ok(word), "{name} {index}");
            assert_eq!(of_length.place(word), Some(index), "{name} {index}");
            let cursor = stored.find(word).expect("short").expect("in the language");
            assert_eq!(cursor.length(), n);
            if n < longest {
                let followers = language.extensions(n, index as WordId);
                let followers = followers.map(|w| language.last_letter(n + 1, w));
                let expected: Vec<u8> = followers.collect();
                assert_eq!(stored.continuations(&cursor), Ok(expected), "{name}");
            }
        }
        let none = of_length.nth(words.len() as u64);
        assert!(matches!(none, Err(QueryFault::NoSuchWord { .. })), "{name}");
    }
    // Numbers of words behind every prefix, for every length.
    for n in 0..=longest {
        let words = level(language, n);
        let mut of_length = stored.words_of_length(n).expect("stored");
        for m in 0..=longest {
            for prefix in level(language, m)
                .iter()
                .step_by(1 + language.count(m) / 50)
            {
                let begin = words.partition_point(|w| w < prefix);
                let all = words[begin..].iter().take_while(|w| w.starts_with(prefix));
                let cursor = stored.find(prefix).expect("short").expect("a word");
                let expected = all.count() as u64;
                assert_eq!(of_length.count(&cursor), expected, "{name} {n} {prefix:?}");
                if n == longest {
                    let begin = begin as u64;
                    assert_eq!(cursor.places(), begin..begin + expected, "{name}");
                }
            }
        }
    }
    for n in 0..longest {
        for side in [Side::Left, Side::Right, Side::Both] {
            let expected = special_by_tree(language, side, n);
            assert_eq!(special(stored, side, n), expected, "{name} {n} {side:?}");
        }
    }
}

/// Random strings, words, and words with one letter altered.
fn membership_agrees(name: &str, stored: &StoredLanguage, language: &Language, cases: usize) {
    let mut random = ChaCha8Rng::seed_from_u64(20);
    let (longest, alphabet) = (language.longest(), language.alphabet() as u8);
    let (mut inside, mut outside) = (0, 0);
    for case in 0..cases {
        let n = random.random_range(1..=longest);
        let mut word: Vec<u8> = match case % 3 {
            0 => (0..n).map(|_| random.random_range(0..alphabet)).collect(),
            _ => language.word(n, random.random_range(0..language.count(n) as WordId)),
        };
        if case % 3 == 1 {
            word[random.random_range(0..n)] = random.random_range(0..alphabet);
        }
        let expected = language.find(&word).is_some();
        let found = stored.find(&word).expect("short enough");
        assert_eq!(found.is_some(), expected, "{name}: {word:?}");
        if expected {
            inside += 1;
        } else {
            outside += 1;
            let prefix = stored.longest_prefix(&word).length();
            assert!(language.find(&word[..prefix]).is_some(), "{name}: {word:?}");
            assert_eq!(language.find(&word[..=prefix]), None, "{name}: {word:?}");
        }
    }
    assert!(
        inside > cases / 4 && outside > cases / 20,
        "{name}: {inside} {outside}"
    );
}

#[test]
fn every_table_of_the_shelf_answers_as_its_tree() {
    let (_folder, path) = place();
    for file in files() {
        let loaded = load(&file).unwrap_or_else(|fault| panic!("{fault}"));
        let length = if loaded.table.sides() > 6 { 4 } else { 7 };
        let language = grown(&loaded.table, length);
        // Keys that are the words, keys in between, keys as short as can be.
        for order in [0, 2, length - 1] {
            let stored = stored(&loaded.table, length, order, &path);
            agrees(&loaded.stem, &stored, &language);
        }
    }
}

#[test]
fn membership_agrees_on_words_and_non_words_to_length_8() {
    let (_folder, path) = place();
    for file in files() {
        let loaded = load(&file).unwrap_or_else(|fault| panic!("{fault}"));
        let language = grown(&loaded.table, 8);
        let order = choose_order(&language.complexity());
        let stored = stored(&loaded.table, 8, order, &path);
        assert_eq!(
            stored.to_language(8).as_ref(),
            Ok(&language),
            "{}",
            loaded.stem
        );
        membership_agrees(&loaded.stem, &stored, &language, 3000);
    }
}

/// Long words: graphs of a larger order, keys with long forced runs, deep counts.
#[test]
fn long_words_answer_as_their_tree() {
    let (_folder, path) = place();
    for (name, length) in [
        ("right-isosceles", 40),
        ("square-two-letters", 30),
        ("slit", 9),
    ] {
        let table = table(name);
        let language = grown(&table, length);
        // The slit's words grow so fast that the shortest file has no graph.
        let order = choose_order(&language.complexity()).max(3);
        let stored = stored(&table, length, order, &path);
        membership_agrees(name, &stored, &language, 20_000);
        assert_eq!(stored.to_language(length).as_ref(), Ok(&language), "{name}");
        assert_eq!(
            stored.to_language(length / 2),
            Ok(grown(&table, length / 2))
        );
        for n in [length / 2, length - 1] {
            for side in [Side::Left, Side::Right, Side::Both] {
                let expected = special_by_tree(&language, side, n);
                assert_eq!(special(&stored, side, n), expected, "{name} {n} {side:?}");
            }
            let mut of_length = stored.words_of_length(n).expect("stored");
            for (index, word) in level(&language, n).iter().enumerate().step_by(7) {
                assert_eq!(of_length.nth(index as u64).as_ref(), Ok(word), "{name}");
                assert_eq!(of_length.place(word), Some(index as u64), "{name}");
            }
        }
    }
}

/// The shortest lengths, where a graph of order 0 has no or one arc a letter.
#[test]
fn the_shortest_lengths_are_stored() {
    let (_folder, path) = place();
    for name in ["square", "square-in-square"] {
        let table = table(name);
        for length in 0..=2 {
            let stored = stored(&table, length, 0, &path);
            agrees(name, &stored, &grown(&table, length));
        }
    }
}

/// Files from the walk and from the tree are the same, whatever the number of threads.
#[test]
fn files_do_not_depend_on_threads_or_on_where_words_come_from() {
    let (_folder, path) = place();
    for (name, length, order) in [("regular-pentagon", 12, 3), ("square-in-square", 7, 2)] {
        let table = table(name);
        let language = grown(&table, length);
        store_language(&path, &origin(&table), &language, order).expect("stored");
        let expected = std::fs::read(&path).expect("written");
        for threads in [1, 2, 7] {
            let pool = rayon::ThreadPoolBuilder::new().num_threads(threads);
            let pool = pool.build().expect("threads");
            pool.install(|| stored(&table, length, order, &path));
            assert!(
                std::fs::read(&path).expect("written") == expected,
                "{name} {threads}"
            );
        }
    }
}

/// The definition, by recursion.
fn fits(pattern: &[char], word: &[char]) -> bool {
    match pattern {
        [] => word.is_empty(),
        ['*', rest @ ..] => (0..=word.len()).any(|skip| fits(rest, &word[skip..])),
        [first, rest @ ..] => {
            let here = word.first().is_some_and(|w| *first == '.' || first == w);
            here && fits(rest, &word[1..])
        }
    }
}

#[test]
fn patterns_find_what_the_definition_says() {
    let (_folder, path) = place();
    let table = table("legs-3-4");
    let language = grown(&table, 9);
    let stored = stored(&table, 9, 3, &path);
    let mut random = ChaCha8Rng::seed_from_u64(3);
    let mut matched = 0;
    for _ in 0..400 {
        let signs = ['.', '.', '.', '*', '*', 'a', 'b', 'c'];
        let length = random.random_range(0..9);
        let pattern: String = (0..length)
            .map(|_| signs[random.random_range(0..signs.len())])
            .collect();
        let n = random.random_range(0..=9);
        let parsed = stored.pattern(&pattern).expect("a pattern");
        let mut found = Vec::new();
        let visited = stored.matches(&parsed, n, |word| {
            found.push(word.to_vec());
            ControlFlow::Continue(())
        });
        visited.expect("short enough");
        let signs: Vec<char> = pattern.chars().collect();
        let mut expected = level(&language, n);
        expected.retain(|word| fits(&signs, &stored.spell(word).chars().collect::<Vec<_>>()));
        assert_eq!(found, expected, "{pattern} {n}");
        matched += usize::from(!found.is_empty());
    }
    assert!(matched > 100, "{matched}");
    assert!(matches!(stored.pattern("a\\"), Err(PatternFault::OpenEnd)));
    assert!(matches!(
        stored.pattern("axb"),
        Err(PatternFault::Letter(_))
    ));
    assert!(matches!(
        stored.pattern("\\*"),
        Err(PatternFault::Letter(_))
    ));
}

/// 14 words of length 3; with 14 000 draws each is expected 1000 times, standard deviation 30.5. All within six of them.
#[test]
fn random_words_are_uniform() {
    let (_folder, path) = place();
    let table = table("right-isosceles");
    let stored = stored(&table, 12, 2, &path);
    for n in [3, 5, 12] {
        let mut of_length = stored.words_of_length(n).expect("stored");
        let p = of_length.total();
        let mut counts = vec![0i64; p as usize];
        let mut random = ChaCha8Rng::seed_from_u64(n as u64);
        for _ in 0..1000 * p {
            let word = of_length.random(&mut random);
            counts[of_length.place(&word).expect("a word") as usize] += 1;
        }
        let spread = counts.iter().map(|c| (c - 1000).abs()).max();
        assert!(spread.expect("words") < 190, "{n}: {counts:?}");
        // Some spread there must be: about 30.
        assert!(spread.expect("words") > 5, "{n}: {counts:?}");
    }
}

#[test]
fn unknown_letters_and_lengths_are_refused() {
    let (_folder, path) = place();
    let stored = stored(&table("square"), 5, 1, &path);
    let word = stored.parse("abab").expect("letters");
    assert_eq!(stored.spell(&word), "abab");
    assert!(matches!(
        stored.parse("abxd"),
        Err(QueryFault::NotALetter { letter: 'x', .. })
    ));
    assert!(matches!(
        stored.find(&[0; 6]),
        Err(QueryFault::TooLong {
            length: 6,
            longest: 5
        })
    ));
    assert!(matches!(
        stored.words_of_length(6),
        Err(QueryFault::TooLong { .. })
    ));
    assert!(matches!(
        stored.to_language(6),
        Err(QueryFault::TooLong { .. })
    ));
    let first = stored
        .words_of_length(5)
        .expect("stored")
        .nth(0)
        .expect("a word");
    let cursor = stored.find(&first).expect("short").expect("a word");
    assert!(matches!(
        stored.continuations(&cursor),
        Err(QueryFault::NeedsLonger { .. })
    ));
    assert_eq!(stored.advance(&cursor, 0), None);
    let asked = stored.special(Side::Left, 5, |_| ControlFlow::Continue(()));
    assert!(matches!(
        asked,
        Err(QueryFault::NeedsLonger {
            length: 5,
            longest: 4
        })
    ));
}

#[test]
fn languages_that_their_longest_words_do_not_hold_are_refused() {
    let (folder, path) = place();
    // ab is followed by nothing.
    let language = Language::from_factors(2, [&[0u8, 0, 1][..]], 3).expect("a language");
    let origin = Origin {
        title: "a word".into(),
        letters: vec!['a', 'b'],
        table: String::new(),
        settings: Vec::new(),
    };
    let fault = store_language(&path, &origin, &language, 0).unwrap_err();
    assert!(
        matches!(fault, StoreFault::NotProlongable { length: 1 }),
        "{fault}"
    );
    assert_eq!(
        std::fs::read_dir(folder.path()).expect("a folder").count(),
        0
    );
}

/// Full languages are the worst for keys: every letter is open.
#[test]
fn a_language_from_elsewhere_round_trips() {
    let (_folder, path) = place();
    let thue_morse: Vec<u8> = (0..8192u32).map(|i| (i.count_ones() % 2) as u8).collect();
    let language = Language::from_factors(2, [&thue_morse[..]], 40).expect("a language");
    let origin = Origin {
        title: "Thue-Morse".into(),
        letters: vec!['0', '1'],
        table: String::new(),
        settings: Vec::new(),
    };
    for order in [0, 5, 39] {
        store_language(&path, &origin, &language, order).expect("stored");
        let stored = open(&path).expect("opened");
        assert_eq!(stored.to_language(40).as_ref(), Ok(&language));
        membership_agrees("Thue-Morse", &stored, &language, 5000);
    }
}

#[test]
fn a_stopped_walk_leaves_the_old_file() {
    let (folder, path) = place();
    std::fs::write(&path, "old").expect("written");
    let table = table("regular-pentagon");
    let engine = AnyEngine::new(&table, 20, Arithmetic::Tiered);
    let control = Control::new();
    control.stop();
    let parts = (&engine, &Mesh::new(&table));
    let fault = store_table(&path, &origin(&table), parts, (20, 4), &control).unwrap_err();
    assert!(matches!(fault, StoreFault::Growth(_)), "{fault}");
    assert_eq!(std::fs::read(&path).expect("kept"), b"old");
    assert_eq!(
        std::fs::read_dir(folder.path()).expect("a folder").count(),
        1
    );
}

#[test]
fn altered_and_torn_files_are_refused() {
    let (_folder, path) = place();
    let table = table("right-isosceles");
    let whole = {
        stored(&table, 9, 3, &path);
        std::fs::read(&path).expect("written")
    };
    // Another file, so that none is altered while it is mapped.
    let refused = |bytes: &[u8], what: &str| {
        let (_folder, path) = place();
        std::fs::write(&path, bytes).expect("written");
        match open(&path) {
            Ok(_) => panic!("{what} was opened"),
            Err(fault) => fault,
        }
    };
    for at in 0..whole.len() {
        for change in [0xff, 0x01, 0x80] {
            let mut altered = whole.clone();
            altered[at] ^= change;
            let fault = refused(&altered, &format!("byte {at} ^ {change}"));
            let expected = match at {
                0..8 => matches!(fault, StoreFault::NotStored { .. }),
                8..12 => matches!(fault, StoreFault::Version { .. }),
                _ => matches!(fault, StoreFault::Damaged { .. }),
            };
            assert!(expected, "byte {at}: {fault}");
        }
        let fault = refused(&whole[..at], &format!("{at} bytes"));
        let expected = match at {
            0..8 => matches!(fault, StoreFault::NotStored { .. }),
            _ => matches!(fault, StoreFault::Damaged { .. }),
        };
        assert!(expected, "{at} bytes: {fault}");
    }
    let doubled = [&whole[..], &whole[..]].concat();
    assert!(matches!(
        refused(&doubled, "doubled"),
        StoreFault::Damaged { .. }
    ));
    let longer = [&whole[..], b"\n"].concat();
    assert!(matches!(
        refused(&longer, "longer"),
        StoreFault::Damaged { .. }
    ));
    let mut swapped = whole.clone();
    swapped[16..].rotate_left(4);
    assert!(matches!(
        refused(&swapped, "rotated"),
        StoreFault::Damaged { .. }
    ));
    let text = refused(b"abc\nbca\n", "a text").to_string();
    assert!(text.contains("--format stored"), "{text}");
    let mut other = whole.clone();
    other[8] = 2;
    let text = refused(&other, "layout 2").to_string();
    assert!(
        text.contains("layout 2") && text.contains("layout 1"),
        "{text}"
    );
    let (_folder, missing) = place();
    assert!(matches!(open(&missing), Err(StoreFault::System { .. })));
    assert!(matches!(
        open(_folder.path()),
        Err(StoreFault::NotStored { .. })
    ));
}

/// A file that was altered and given the right sum is no accident; what can be checked still is.
#[test]
fn parts_that_do_not_fit_each_other_are_refused() {
    let (_folder, path) = place();
    stored(&table("right-isosceles"), 6, 2, &path);
    let whole = std::fs::read(&path).expect("written");
    let end = whole.len();
    let size = |bytes: &[u8]| u64::from_le_bytes(bytes.try_into().expect("eight")) as usize;
    let graph_end = 16 + size(&whole[end - 32..end - 24]);
    let refused = |alter: &dyn Fn(&mut Vec<u8>)| {
        let mut altered = whole.clone();
        alter(&mut altered);
        let sum = crc32fast::hash(&altered[..altered.len() - 8]);
        let at = altered.len() - 8;
        altered[at..at + 4].copy_from_slice(&sum.to_le_bytes());
        let (_folder, path) = place();
        std::fs::write(&path, altered).expect("written");
        open(&path).map(|language| language.bytes())
    };
    assert_eq!(refused(&|_| ()).expect("unaltered"), end as u64);
    for alter in [
        // The last target, the number of states, the letter of the first arc, the first arc of a state.
        &(|bytes: &mut Vec<u8>| bytes[graph_end - 1] = 255) as &dyn Fn(&mut Vec<u8>),
        &|bytes| bytes[20] += 1,
        &|bytes| bytes[28] = 1,
        // The root of the automaton and its number of words; the brace of the description; sizes of the parts.
        &|bytes| {
            let json = end - 32 - size(&bytes[end - 16..end - 8]);
            bytes[json - 20] ^= 1;
        },
        &|bytes| {
            let json = end - 32 - size(&bytes[end - 16..end - 8]);
            bytes[json] = b'[';
        },
        &|bytes| bytes[end - 32] += 1,
        &|bytes| bytes[end - 17] = 255,
    ] {
        let fault = refused(alter).expect_err("altered");
        assert!(matches!(fault, StoreFault::Damaged { .. }), "{fault}");
    }
}
