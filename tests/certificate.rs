//! Certificates: made for every table that comes with the project, accepted by the verifier, and rejected once altered.

mod support;

use rand::RngExt;
use reboundary::certificate::format::{Entry, Header, Refutation};
use reboundary::certificate::make::{certify_answers, certify_language};
use reboundary::certificate::verify::{Rejection, Verdict, verify};
use reboundary::language::follow::follow;
use reboundary::run::Control;
use reboundary::table::file::load;
use reboundary::table::{LetterId, Table};
use reboundary::unfold::engine::{AnyEngine, Arithmetic};
use reboundary::unfold::{Mesh, with_engine};
use std::path::{Path, PathBuf};
use support::p_by_beams;

fn files() -> Vec<PathBuf> {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("polygons");
    let entries = std::fs::read_dir(&folder).expect("the folder is there");
    let mut files: Vec<PathBuf> = entries
        .map(|entry| entry.expect("an entry").path())
        .filter(|path| path.extension().is_some_and(|e| e == "toml"))
        .collect();
    files.sort();
    assert!(files.len() >= 40);
    files
}

fn table(name: &str) -> Table {
    let path = Path::new(env!("CARGO_MANIFEST_DIR"))
        .join("polygons")
        .join(name);
    load(&path).unwrap().table
}

fn language_certificate(table: &Table, length: usize) -> String {
    let engine = AnyEngine::new(table, length, Arithmetic::Tiered);
    let mut out = Vec::new();
    certify_language(
        table,
        &engine,
        &Mesh::new(table),
        length,
        &Control::new(),
        &mut out,
    )
    .unwrap();
    String::from_utf8(out).unwrap()
}

fn check(text: &str) -> Result<Verdict, Rejection> {
    verify(text.as_bytes())
}

/// A length whose words are not too many for exact arithmetic in a test.
fn modest_length(table: &Table) -> usize {
    match table.sides() {
        3 => 7,
        4 => 5,
        5..=8 => 4,
        _ => 3,
    }
}

#[test]
fn every_language_is_certified() {
    for file in files() {
        let table = load(&file).unwrap().table;
        let length = modest_length(&table);
        let verdict = check(&language_certificate(&table, length));
        let verdict = verdict.unwrap_or_else(|e| panic!("{}: {e}", file.display()));
        let p = p_by_beams(&table, length);
        assert_eq!(verdict.complexity, p[1..], "{}", file.display());
        assert_eq!((verdict.inside, verdict.outside), (p[length], 0));
    }
}

/// Lines of a certificate: header, entries, end.
fn lines(text: &str) -> Vec<String> {
    text.lines().map(String::from).collect()
}

fn altered(text: &str, change: impl FnOnce(&mut Vec<String>)) -> String {
    let mut all = lines(text);
    change(&mut all);
    all.join("\n")
}

/// Changes one entry.
fn with_entry(text: &str, at: usize, change: impl FnOnce(&mut Entry)) -> String {
    altered(text, |all| {
        let mut entry: Entry = serde_json::from_str(&all[at]).unwrap();
        change(&mut entry);
        all[at] = serde_json::to_string(&entry).unwrap();
    })
}

/// Makes the end announce as many entries as there are.
fn announce(all: &mut [String]) {
    let entries = all.len() - 2;
    *all.last_mut().unwrap() = format!("{{\"entries\":{entries}}}");
}

#[test]
fn altered_languages_are_rejected() {
    for name in [
        "right-isosceles.toml",
        "regular-pentagon.toml",
        "legs-3-4.toml",
        "l-of-three-squares.toml",
    ] {
        let table = table(name);
        let good = language_certificate(&table, 4);
        check(&good).unwrap();
        let count = lines(&good).len();
        for at in [1, 2, count / 2, count - 2] {
            // Dropped, with the end saying so.
            let dropped = altered(&good, |all| {
                all.remove(at);
                announce(all);
            });
            assert!(
                matches!(check(&dropped), Err(Rejection::Incomplete { .. })),
                "{name} {at}"
            );
            // Dropped, with the end as it was.
            let dropped = altered(&good, |all| {
                all.remove(at);
            });
            assert!(matches!(check(&dropped), Err(Rejection::Line { .. })));
            let doubled = altered(&good, |all| {
                all.insert(at, all[at].clone());
                announce(all);
            });
            assert!(matches!(check(&doubled), Err(Rejection::Line { .. })));
            let renamed = with_entry(&good, at, |entry| {
                let first = entry.word.remove(0);
                entry.word.push(first);
            });
            assert!(check(&renamed).is_err());
            for digit in [5, 20] {
                let remeasured = with_entry(&good, at, |entry| {
                    let measure = entry.measure.as_mut().unwrap();
                    let old = measure.as_bytes()[digit];
                    let new = if old == b'5' { "6" } else { "5" };
                    measure.replace_range(digit..digit + 1, new);
                });
                assert!(
                    matches!(check(&remeasured), Err(Rejection::Line { .. })),
                    "{name} {at}"
                );
            }
            let unmeasured = with_entry(&good, at, |entry| entry.measure = None);
            assert!(check(&unmeasured).is_err());
            let astray = with_entry(&good, at, |entry| {
                let witness = entry.witness.as_mut().unwrap();
                witness.aim = witness.aim.clone().map(|c| match c.strip_prefix('-') {
                    Some(rest) => rest.into(),
                    None => format!("-{c}"),
                });
            });
            assert!(check(&astray).is_err());
            let orbitless = with_entry(&good, at, |entry| entry.witness = None);
            assert!(check(&orbitless).is_err());
        }
        let swapped = altered(&good, |all| all.swap(1, 2));
        assert!(check(&swapped).is_err());
        let torn = altered(&good, |all| {
            all.pop();
        });
        assert!(check(&torn).is_err());
        let longer = altered(&good, |all| all.push(all[1].clone()));
        assert!(check(&longer).is_err());
    }
}

#[test]
fn orbits_through_corners_are_rejected() {
    // From the bottom of the L through its inner corner (1, 1) to the top: the corner is only touched, the sides hit are
    // those of the word.
    let table = table("l-of-three-squares.toml");
    let good = language_certificate(&table, 2);
    let at = lines(&good)
        .iter()
        .position(|line| line.contains("\"ae\""))
        .unwrap();
    let through = |start: &str| {
        with_entry(&good, at, |entry| {
            let witness = entry.witness.as_mut().unwrap();
            witness.start = start.into();
            witness.aim = ["-1", "2"].map(String::from);
        })
    };
    check(&through("2/3")).unwrap();
    let rejected = check(&through("3/4")).unwrap_err();
    assert!(
        rejected.to_string().contains("meets a corner"),
        "{rejected}"
    );
    // Starts that are none.
    for start in ["0", "1", "-1/2", "3/2", "1/0", "x"] {
        assert!(check(&through(start)).is_err(), "{start}");
    }
}

#[test]
fn a_swapped_table_is_rejected() {
    let names = ["square.toml", "golden-rectangle.toml"];
    let [square, rectangle] = names.map(|name| language_certificate(&table(name), 5));
    let header = |text: &str| lines(text)[0].clone();
    // Both have the same words, but other measures.
    let swapped = altered(&square, |all| all[0] = header(&rectangle));
    assert!(check(&swapped).is_err());
    let swapped = altered(&rectangle, |all| all[0] = header(&square));
    assert!(check(&swapped).is_err());
    let triangle = language_certificate(&table("equilateral.toml"), 5);
    let swapped = altered(&triangle, |all| {
        all[0] = header(&language_certificate(&table("right-isosceles.toml"), 5))
    });
    assert!(check(&swapped).is_err());
}

#[test]
fn headers_are_checked() {
    let good = language_certificate(&table("dart.toml"), 3);
    let with_header = |change: &dyn Fn(&mut Header)| {
        altered(&good, |all| {
            let mut header: Header = serde_json::from_str(&all[0]).unwrap();
            change(&mut header);
            all[0] = serde_json::to_string(&header).unwrap();
        })
    };
    check(&with_header(&|_| {})).unwrap();
    let changes: [&dyn Fn(&mut Header); 12] = [
        &|h| h.schema = "another".into(),
        &|h| h.length = None,
        &|h| h.length = Some(4),
        &|h| h.triangles.truncate(1),
        &|h| h.triangles[0].reverse(),
        &|h| h.triangles.push(h.triangles[0]),
        &|h| h.triangles[0][0] = 99,
        &|h| h.table.rings[0].reverse(),
        &|h| h.table.rings[0][1] = h.table.rings[0][2].clone(),
        &|h| h.table.form = "-1".into(),
        &|h| h.table.field.polynomial = ["0", "0", "1"].map(String::from).to_vec(),
        &|h| h.table.letters.swap(0, 1),
    ];
    for (i, change) in changes.iter().enumerate() {
        assert!(check(&with_header(*change)).is_err(), "change {i}");
    }
}

/// Words of random letters up to a length that are not in the language.
fn non_words(
    table: &Table,
    count: usize,
    longest: usize,
    rng: &mut impl RngExt,
) -> Vec<Vec<LetterId>> {
    let mesh = Mesh::new(table);
    let engine = AnyEngine::new(table, longest, Arithmetic::Tiered);
    let letters = table.letters().len() as u8;
    let reached =
        |word: &[LetterId]| with_engine!(&engine, engine => follow(engine, &mesh, word, |_, _| {}));
    let mut found = Vec::new();
    while found.len() < count {
        // Letters that keep the word in the language, then letters as they come: many words go wrong late.
        let (length, kept) = (rng.random_range(2..=longest), rng.random_range(0..longest));
        let mut word: Vec<LetterId> = Vec::new();
        while word.len() < length {
            word.push(LetterId(rng.random_range(0..letters)));
            if word.len() < kept && reached(&word) < word.len() {
                word.pop();
            }
        }
        if reached(&word) < word.len() {
            found.push(word);
        }
    }
    found
}

fn answers(table: &Table, words: &[Vec<LetterId>], longest: usize) -> String {
    let engine = AnyEngine::new(table, longest, Arithmetic::Tiered);
    let mut out = Vec::new();
    let words = words.iter().map(|word| Ok(word.clone()));
    certify_answers(
        table,
        (&engine, &Mesh::new(table)),
        words,
        &Control::new(),
        &mut out,
    )
    .unwrap();
    String::from_utf8(out).unwrap()
}

fn refute_random_words(for_each_table: usize) {
    let mut rng = rng();
    let mut sizes = [0; 5];
    for file in files() {
        let table = load(&file).unwrap().table;
        let words = non_words(&table, for_each_table, 10, &mut rng);
        let text = answers(&table, &words, 10);
        let verdict = check(&text).unwrap_or_else(|e| panic!("{}: {e}", file.display()));
        assert_eq!((verdict.inside, verdict.outside), (0, words.len() as u64));
        for line in &lines(&text)[1..=words.len()] {
            let entry: Entry = serde_json::from_str(line).unwrap();
            for refutation in &entry.refutations {
                sizes[refutation.pins.len()] += 1;
            }
        }
    }
    // Kirchberger's bound is needed, and often fewer do.
    assert!(sizes[3] > 0 && sizes[4] > 0, "{sizes:?}");
}

fn rng() -> rand_chacha::ChaCha8Rng {
    use rand_chacha::rand_core::SeedableRng;
    rand_chacha::ChaCha8Rng::seed_from_u64(20)
}

#[test]
fn random_non_words_are_refuted() {
    refute_random_words(40);
}

/// A hundred thousand words: `cargo test --release --test certificate -- --ignored`.
#[test]
#[ignore = "takes minutes unoptimized"]
fn a_hundred_thousand_non_words_are_refuted() {
    refute_random_words(1400);
}

#[test]
fn altered_refutations_are_rejected() {
    let table = table("irrational-quadrilateral.toml");
    let words = non_words(&table, 60, 8, &mut rng());
    let good = answers(&table, &words, 8);
    check(&good).unwrap();
    let changes: [&dyn Fn(&mut Entry); 8] = [
        &|e| e.refutations.clear(),
        &|e| e.refutations[0] = Refutation { pins: Vec::new() },
        &|e| e.refutations[0].pins[0].weight = "0".into(),
        &|e| e.refutations[0].pins[0].weight = "1/7".into(),
        &|e| e.refutations[0].pins[0].left ^= true,
        &|e| {
            e.refutations[0].pins.pop();
        },
        &|e| e.prefix = None,
        &|e| e.prefix = e.prefix.map(|n| n + 1),
    ];
    let refuted = |at: &usize| {
        let entry: Entry = serde_json::from_str(&lines(&good)[*at]).unwrap();
        // A word with a letter twice in a row has no way at all, and needs no refutation.
        !entry.refutations.is_empty()
    };
    let refuted: Vec<usize> = (1..=words.len()).filter(refuted).collect();
    assert!(refuted.len() > 15);
    for at in refuted {
        for (i, change) in changes.iter().enumerate() {
            let bad = with_entry(&good, at, |entry| change(entry));
            assert!(check(&bad).is_err(), "change {i} of entry {at}");
        }
    }
}
