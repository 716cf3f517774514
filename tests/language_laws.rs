//! Laws that every billiard language obeys, and what must not depend on how a table is written down.

mod oracle;
mod support;

use reboundary::complexity::diagonals;
use reboundary::language::{Language, walk};
use reboundary::number::{Real, Tiers};
use reboundary::run::Control;
use reboundary::table::{CornerId, SideId, Table, Vector, default_letters};
use rug::Rational;
use std::collections::{BTreeMap, BTreeSet};
use support::{
    diagonals as listed_diagonals, language, named_tables, p_by_beams, p_by_fans, prepared,
    rational_table, words,
};

/// The named tables and some random ones, convex and not.
fn tables() -> Vec<Table> {
    let mut tables = named_tables();
    for seed in 300..320 {
        let corners = oracle::random_polygon(seed, 3 + seed as usize % 6, seed % 3 == 0);
        tables.push(rational_table(&format!("seed {seed}"), 1, &corners));
    }
    tables
}

/// Words that carry the table's letters.
fn spelled(table: &Table, longest: usize) -> Vec<BTreeSet<String>> {
    let language = language(table, longest);
    let spell = |word: &Vec<u8>| {
        word.iter()
            .map(|side| table.letters()[*side as usize])
            .collect()
    };
    (0..=longest)
        .map(|n| words(&language, n).iter().map(spell).collect())
        .collect()
}

/// The table again from changed corners, letters kept with their sides by the caller.
fn rebuilt(table: &Table, corners: Vec<Vector>, letters: Vec<char>) -> Table {
    Table::new(table.title(), corners, table.form().clone(), letters)
        .unwrap_or_else(|fault| panic!("{}: {fault}", table.title()))
}

fn moved(table: &Table, change: impl Fn(&Vector) -> Vector) -> Table {
    let corners = table.corners().iter().map(change).collect();
    rebuilt(table, corners, table.letters().to_vec())
}

/// An orbit piece that meets no corner goes on both ways.
#[test]
fn languages_are_prolongable() {
    for table in tables() {
        assert!(language(&table, 9).is_bi_extendable(), "{}", table.title());
    }
}

/// An orbit run backwards is an orbit.
#[test]
fn languages_are_closed_under_reversal() {
    for table in tables() {
        let language = language(&table, 9);
        assert_eq!(language.first_without_reversal(), None, "{}", table.title());
        // The same from the definition, on one level.
        let level: BTreeSet<Vec<u8>> = words(&language, 7).into_iter().collect();
        let reversed = level
            .iter()
            .map(|w| w.iter().rev().copied().collect())
            .collect();
        assert_eq!(level, reversed, "{}", table.title());
    }
}

/// Levels are sorted, words are found again under their numbers, and all factors are there.
#[test]
fn levels_are_sorted_and_searchable() {
    for table in tables() {
        let language = language(&table, 8);
        assert_eq!(
            language.complexity(),
            p_by_beams(&table, 8),
            "{}",
            table.title()
        );
        for n in 1..=8 {
            let level = words(&language, n);
            assert!(
                level.is_sorted_by(|a, b| a < b),
                "length {n} of {}",
                table.title()
            );
            for (id, word) in (0..).zip(&level) {
                assert_eq!(language.find(word), Some(id));
                let (prefix, suffix) = (language.prefix(n, id), language.suffix(n, id));
                assert_eq!(language.word(n - 1, prefix), word[..n - 1]);
                assert_eq!(language.word(n - 1, suffix), word[1..]);
            }
        }
    }
}

/// No orbit hits the same side twice in a row.
#[test]
fn no_letter_follows_itself() {
    for table in tables() {
        for word in words(&language(&table, 6), 6) {
            assert!(
                word.windows(2).all(|w| w[0] != w[1]),
                "{word:?} of {}",
                table.title()
            );
        }
    }
}

/// Numbering the corners from another one on renames nothing when the letters move along.
#[test]
fn renumbering_the_corners_changes_no_word() {
    for table in tables() {
        let expected = spelled(&table, 7);
        for turn in 1..table.sides() {
            let (mut corners, mut letters) = (table.corners().to_vec(), table.letters().to_vec());
            corners.rotate_left(turn);
            letters.rotate_left(turn);
            let turned = rebuilt(&table, corners, letters);
            assert_eq!(
                spelled(&turned, 7),
                expected,
                "{} from corner {turn}",
                table.title()
            );
        }
    }
}

/// A mirror image has the same words when each letter stays with its side. Side i of the reversed list joins
/// the corners of side k − 2 − i.
#[test]
fn mirroring_changes_no_word() {
    for table in tables() {
        let expected = spelled(&table, 7);
        let mirror = |c: &Vector| Vector::new(c.x.clone(), -&c.y);
        let clockwise = moved(&table, mirror);
        assert!(clockwise.turned_round(), "{}", table.title());
        assert_eq!(spelled(&clockwise, 7), expected, "{}", table.title());

        let k = table.sides();
        let corners = table.corners().iter().rev().map(mirror).collect();
        let letters = (0..k)
            .map(|i| table.letters()[(2 * k - 2 - i) % k])
            .collect();
        let reversed = rebuilt(&table, corners, letters);
        assert!(!reversed.turned_round(), "{}", table.title());
        assert_eq!(spelled(&reversed, 7), expected, "{}", table.title());
    }
}

#[test]
fn similarities_change_no_word() {
    let shift = Vector::new(
        Rational::from((1_000_000_007, 3)).into(),
        Rational::from((-22, 7)).into(),
    );
    for table in tables() {
        let expected = language(&table, 7);
        let p = p_by_fans(&table, 9);
        for (factor, shifted) in [
            ((355, 113), false),
            ((-1, 1_000_003), false),
            ((1, 1), true),
            ((10_000_000, 3), true),
        ] {
            let factor = Real::from(Rational::from(factor));
            let changed = moved(&table, |c| {
                let scaled = c.times(&factor);
                if shifted { scaled.plus(&shift) } else { scaled }
            });
            assert_eq!(
                language(&changed, 7),
                expected,
                "{} times {factor}",
                table.title()
            );
            assert_eq!(
                p_by_fans(&changed, 9),
                p,
                "{} times {factor}",
                table.title()
            );
        }
    }
}

/// Turning by the angle of the vector 3 + 4√(−g) (times its length) is a similarity that no axis survives.
#[test]
fn turning_changes_no_word() {
    let turn = Vector::new(3.into(), 4.into());
    for table in tables() {
        let changed = moved(&table, |c| c.product(&turn, table.form()));
        assert_eq!(
            language(&changed, 7),
            language(&table, 7),
            "{}",
            table.title()
        );
        assert_eq!(
            p_by_fans(&changed, 9),
            p_by_fans(&table, 9),
            "{}",
            table.title()
        );
    }
}

/// m(w) counts the generalized diagonals with code w, word by word (Cassaigne, Hubert, Troubetzkoy, Ann. Inst.
/// Fourier 52 (2002) 835–847, for convex tables), so their sum b(n) is N(n).
#[test]
fn multiplicities_are_diagonals_word_by_word() {
    for table in tables() {
        let language = language(&table, 10);
        let mut with_code: BTreeMap<Vec<u8>, i64> = BTreeMap::new();
        for diagonal in listed_diagonals(&table, 8) {
            let code = diagonal.code.iter().map(|side| side.0).collect();
            *with_code.entry(code).or_default() += 1;
        }
        let p = language.complexity();
        for n in 1..=8 {
            let multiplicities = language.bilateral_multiplicities(n);
            for (word, m) in words(&language, n).iter().zip(&multiplicities) {
                let expected = with_code.remove(word).unwrap_or(0);
                assert_eq!(*m, expected, "{word:?} of {}", table.title());
                assert_eq!(bilateral_multiplicity(&language, word), expected);
            }
            let b = p[n + 2] as i64 - 2 * p[n + 1] as i64 + p[n] as i64;
            assert_eq!(
                multiplicities.iter().sum::<i64>(),
                b,
                "b({n}) of {}",
                table.title()
            );
        }
        with_code.remove(&Vec::new());
        assert!(
            with_code.is_empty(),
            "codes outside the language of {}",
            table.title()
        );
    }
}

/// |awb| − |aw| − |wb| + 1 by looking words up.
fn bilateral_multiplicity(language: &Language, word: &[u8]) -> i64 {
    let letters = || (0..language.alphabet() as u8).map(|a| vec![a]);
    let present = |parts: [&[u8]; 3]| language.find(&parts.concat()).is_some() as i64;
    let left: i64 = letters().map(|a| present([&a, word, &[]])).sum();
    let right: i64 = letters().map(|b| present([&[], word, &b])).sum();
    let both: i64 = letters()
        .flat_map(|a| letters().map(move |b| (a.clone(), b)))
        .map(|(a, b)| present([&a, word, &b]))
        .sum();
    both - left - right + 1
}

/// What a run finds, with the record of the tiers.
type Findings = (
    Language,
    Tiers,
    Vec<u64>,
    Tiers,
    Vec<(CornerId, CornerId, Vec<SideId>)>,
);

fn findings(table: &Table, longest: usize, threads: usize) -> Findings {
    let pool = rayon::ThreadPoolBuilder::new()
        .num_threads(threads)
        .build()
        .expect("a pool");
    pool.install(|| {
        let (engine, mesh) = prepared(table, longest);
        let control = Control::new();
        let (language, walked) = walk::grow(&engine, &mesh, longest, &control).expect("grown");
        let (n, fanned) = diagonals::count(&engine, &mesh, longest, &control).expect("counted");
        let (list, _) = diagonals::list(&engine, &mesh, longest, &control).expect("listed");
        let list = list.into_iter().map(|d| (d.start, d.end, d.code)).collect();
        (language, walked, n, fanned, list)
    })
}

/// Words, counts, the order of lists and the record of the tiers are the same for 1, 2 and 7 threads, on
/// languages long enough to be divided.
#[test]
fn results_do_not_depend_on_threads() {
    for table in named_tables() {
        let longest = 14;
        let one = findings(&table, longest, 1);
        assert!(
            one.0.count(longest) > 256,
            "{} is not divided",
            table.title()
        );
        assert!(one.1.total() > 0 && one.3.total() > 0, "{}", table.title());
        for threads in [2, 7] {
            let more = findings(&table, longest, threads);
            assert!(one == more, "{} by {threads} threads", table.title());
        }
    }
}

/// Where the work is divided must not show: every length is a prefix of every longer run.
#[test]
fn shorter_runs_are_beginnings_of_longer_ones() {
    for table in named_tables() {
        let p = p_by_beams(&table, 13);
        let all = language(&table, 13);
        for longest in 0..13 {
            assert_eq!(
                p_by_beams(&table, longest),
                p[..=longest],
                "{}",
                table.title()
            );
            assert_eq!(
                p_by_fans(&table, longest),
                p[..=longest],
                "{}",
                table.title()
            );
            let shorter = language(&table, longest);
            for n in 0..=longest {
                assert_eq!(words(&shorter, n), words(&all, n), "{}", table.title());
            }
        }
    }
}

/// A control that is asked to stop ends every walk with `Stopped`, never with a short answer.
#[test]
fn a_stopped_walk_gives_no_answer() {
    let table = support::crooked();
    let (engine, mesh) = prepared(&table, 30);
    let control = Control::new();
    control.stop();
    assert!(walk::count(&engine, &mesh, 30, &control).is_err());
    assert!(walk::grow(&engine, &mesh, 30, &control).is_err());
    assert!(diagonals::count(&engine, &mesh, 30, &control).is_err());
    assert!(diagonals::list(&engine, &mesh, 30, &control).is_err());
}

/// The letters of a table are as many as its sides, whatever the number.
#[test]
fn many_sided_tables_walk() {
    // Corners on a parabola, closed by a chord: convex, rational, no two sides parallel.
    let corners: Vec<(i64, i64)> = (0..40).map(|i| (i, i * i)).collect();
    let table = support::integer_table("forty sides", 1, &corners);
    assert_eq!(table.letters(), default_letters(40));
    let p = p_by_beams(&table, 4);
    assert_eq!(p, p_by_fans(&table, 4));
    // Any two sides of a convex table see each other.
    assert_eq!(p[..3], [1, 40, 40 * 39]);
    assert_eq!(language(&table, 4).complexity(), p);
}
