//! Comparing languages: tables that must agree, tables that must not, and a slow twin that tries every renaming.

mod oracle;
mod support;

use reboundary::language::compare::{Renaming, compare_under, compare_up_to_renaming, differences};
use reboundary::language::{Language, WordId};
use reboundary::number::Real;
use reboundary::run::Control;
use reboundary::table::file::load;
use reboundary::table::{Table, Vector};
use std::collections::BTreeSet;
use std::path::Path;
use std::time::{Duration, Instant};
use support::{integer_table, language, named_tables, rational_table, words};

fn agree_to(a: &Language, b: &Language) -> usize {
    let found = compare_up_to_renaming(a, b, &Control::new()).expect("nobody stops it");
    found.agree_to
}

fn polygon(name: &str) -> Table {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("polygons");
    let loaded = load(&folder.join(format!("{name}.toml")));
    loaded.unwrap_or_else(|fault| panic!("{fault}")).table
}

/// All words of one length after a change of letters, or `None` when a letter has no image.
fn image(language: &Language, n: usize, map: &[Option<u8>]) -> BTreeSet<Vec<Option<u8>>> {
    let rename = |word: Vec<u8>| word.iter().map(|l| map[*l as usize]).collect();
    words(language, n).into_iter().map(rename).collect()
}

fn as_set(language: &Language, n: usize) -> BTreeSet<Vec<Option<u8>>> {
    let letters: Vec<Option<u8>> = (0..language.alphabet() as u8).map(Some).collect();
    image(language, n, &letters)
}

/// All ways to give the letters 0 … k − 1 different images below `targets`.
fn permutations(k: usize, targets: usize) -> Vec<Vec<Option<u8>>> {
    let mut all = vec![Vec::new()];
    for _ in 0..k {
        let longer = |map: Vec<Option<u8>>| {
            (0..targets as u8)
                .map(Some)
                .filter(|t| !map.contains(t))
                .map(|t| [&map[..], &[t]].concat())
                .collect::<Vec<_>>()
        };
        all = all.into_iter().flat_map(longer).collect();
    }
    all
}

/// The slow twin: the longest length to which some renaming of all letters turns one language into the other.
fn agree_to_by_trying_everything(a: &Language, b: &Language) -> usize {
    if a.alphabet() != b.alphabet() {
        return 0;
    }
    let longest = a.longest().min(b.longest());
    let lengths = |map: Vec<Option<u8>>| {
        let same = |n: &usize| image(a, *n, &map) == as_set(b, *n);
        (1..=longest).take_while(same).count()
    };
    let all = permutations(a.alphabet(), b.alphabet());
    all.into_iter().map(lengths).max().expect("some renaming")
}

/// A renaming that is handed out must do what is said of it, and no length more.
fn check_certificate(a: &Language, b: &Language) {
    let found = compare_up_to_renaming(a, b, &Control::new()).expect("nobody stops it");
    let Some(renaming) = &found.renaming else {
        assert_ne!(a.alphabet(), b.alphabet());
        return;
    };
    let mut map = vec![None; a.alphabet()];
    for (letter, target) in renaming.pairs() {
        map[letter as usize] = Some(target);
    }
    for n in 0..=found.agree_to {
        assert_eq!(image(a, n, &map), as_set(b, n));
    }
    let under = compare_under(a, b, renaming, &Control::new()).expect("nobody stops it");
    assert_eq!(under.agree_to, found.agree_to);
    if let Some(n) = found.first_difference() {
        let (ours, theirs) = (image(a, n, &map), as_set(b, n));
        assert_ne!(ours, theirs);
        let lone = differences(a, b, renaming, n);
        let spelled = |language: &Language, list: &[WordId], map: &[Option<u8>]| {
            let rename = |w: &WordId| {
                language
                    .word(n, *w)
                    .iter()
                    .map(|l| map[*l as usize])
                    .collect()
            };
            list.iter()
                .map(rename)
                .collect::<BTreeSet<Vec<Option<u8>>>>()
        };
        let own: Vec<Option<u8>> = (0..b.alphabet() as u8).map(Some).collect();
        let only_ours: BTreeSet<_> = ours.difference(&theirs).cloned().collect();
        let only_theirs: BTreeSet<_> = theirs.difference(&ours).cloned().collect();
        assert_eq!(spelled(a, &lone.only_first, &map), only_ours);
        assert_eq!(spelled(b, &lone.only_second, &own), only_theirs);
    }
}

/// Every pair of the named tables and of some random triangles, quadrilaterals and pentagons, convex and not.
#[test]
fn the_search_agrees_with_trying_every_renaming() {
    let mut tables = named_tables();
    tables.retain(|table| table.sides() <= 5);
    for (seed, sides) in [(400, 3), (401, 3), (402, 4), (403, 4), (404, 5), (405, 5)] {
        let corners = oracle::random_polygon(seed, sides, seed % 2 == 0);
        tables.push(rational_table(&format!("seed {seed}"), 1, &corners));
    }
    let languages: Vec<Language> = tables.iter().map(|t| language(t, 6)).collect();
    let mut seen = BTreeSet::new();
    for (i, a) in languages.iter().enumerate() {
        for (j, b) in languages.iter().enumerate() {
            let expected = agree_to_by_trying_everything(a, b);
            let title = format!("{} and {}", tables[i].title(), tables[j].title());
            assert_eq!(agree_to(a, b), expected, "{title}");
            check_certificate(a, b);
            seen.insert(expected);
        }
    }
    // The pairs are of many kinds.
    assert!(seen.len() >= 5, "{seen:?}");
}

/// The corners in another order, so that no letter keeps its place, and mirrored every second time.
fn rewritten(table: &Table, turn: usize) -> Table {
    let mut corners = table.corners().to_vec();
    corners.rotate_left(turn % table.sides());
    if turn % 2 == 1 {
        corners
            .iter_mut()
            .for_each(|c| *c = Vector::new(-&c.x, c.y.clone()));
    }
    Table::new(
        table.title(),
        corners,
        table.form().clone(),
        table.letters().to_vec(),
    )
    .unwrap_or_else(|fault| panic!("{fault}"))
}

#[test]
fn similar_tables_agree() {
    for table in named_tables() {
        let first = language(&table, 8);
        let factor = Real::from(rug::Rational::from((355, 113)));
        let turn = Vector::new(Real::from(3), Real::from(4));
        let similar = |c: &Vector| c.times(&factor).product(&turn, table.form());
        for step in 0..table.sides() {
            let other = rewritten(&table, step);
            let corners = other.corners().iter().map(similar).collect();
            let letters = other.letters().to_vec();
            let other = Table::new("similar", corners, table.form().clone(), letters)
                .unwrap_or_else(|fault| panic!("{fault}"));
            let second = language(&other, 8);
            assert_eq!(
                agree_to(&first, &second),
                8,
                "{} from {step}",
                table.title()
            );
            check_certificate(&first, &second);
        }
    }
}

#[test]
fn rectangles_of_all_ratios_agree() {
    let square = language(&support::unit_square(), 12);
    for (a, b) in [(2, 1), (1, 2), (3, 7), (355, 113), (1, 1000)] {
        let corners = [(0, 0), (a, 0), (a, b), (0, b)];
        let rectangle = integer_table("rectangle", 1, &corners);
        assert_eq!(
            agree_to(&square, &language(&rectangle, 12)),
            12,
            "{a} by {b}"
        );
        // Irrational ratio too: second coordinates in units of the root of 2.
        let rectangle = integer_table("rectangle", 2, &corners);
        assert_eq!(
            agree_to(&square, &language(&rectangle, 12)),
            12,
            "{a} by {b}√2"
        );
    }
    for name in ["golden-rectangle", "turned-rectangle", "square-by-regular"] {
        assert_eq!(
            agree_to(&square, &language(&polygon(name), 12)),
            12,
            "{name}"
        );
    }
    // A parallelogram without right angles does not.
    assert!(agree_to(&square, &language(&polygon("rhombus-60"), 12)) < 4);
}

/// p(n) is the same for both up to n = 6, and yet no renaming exists at length 5.
#[test]
fn equal_counts_do_not_make_equal_languages() {
    let [a, b] = ["biquadratic-triangle", "sextic-triangle"].map(|n| language(&polygon(n), 6));
    assert_eq!(a.complexity(), b.complexity());
    assert_eq!(agree_to(&a, &b), 4);
    assert_eq!(agree_to_by_trying_everything(&a, &b), 4);
    let found = compare_up_to_renaming(&a, &b, &Control::new()).unwrap();
    let lone = differences(&a, &b, &found.renaming.unwrap(), 5);
    assert_eq!(lone.only_first.len(), lone.only_second.len());
    assert!(!lone.only_first.is_empty());
}

/// The factors of a Sturmian word: ⌊(i+1)α⌋ − ⌊iα⌋ for a rational α whose denominator exceeds all lengths.
fn sturmian(p: u64, q: u64, longest: usize) -> Language {
    let word: Vec<u8> = (0..4 * q)
        .map(|i| ((i + 1) * p / q - i * p / q) as u8)
        .collect();
    Language::from_factors(2, [&word[..]], longest).expect("a language")
}

/// All have n + 1 words of length n. Slopes α and 1 − α exchange the letters, other slopes give other words.
#[test]
fn sturmian_languages_have_equal_counts() {
    let golden = sturmian(377, 987, 20);
    let exchanged = sturmian(610, 987, 20);
    let silver = sturmian(408, 985, 20);
    for language in [&golden, &exchanged, &silver] {
        let expected: Vec<u64> = (1..=21).collect();
        assert_eq!(language.complexity(), expected);
    }
    let found = compare_up_to_renaming(&golden, &exchanged, &Control::new()).unwrap();
    assert_eq!(found.agree_to, 20);
    let map: Vec<(u8, u8)> = found.renaming.unwrap().pairs().collect();
    assert_eq!(map, [(0, 1), (1, 0)]);
    // Slopes between 1/3 and 1/2 agree until a fraction lies between them: 377/987 < 2/5 < 408/985.
    let found = agree_to(&golden, &silver);
    assert_eq!(found, agree_to_by_trying_everything(&golden, &silver));
    assert!((3..10).contains(&found), "{found}");
}

#[test]
fn different_numbers_of_letters_leave_no_renaming() {
    let [square, triangle] =
        [support::unit_square(), support::equilateral()].map(|t| language(&t, 5));
    let found = compare_up_to_renaming(&square, &triangle, &Control::new()).unwrap();
    assert_eq!((found.agree_to, found.renaming.clone()), (0, None));
    assert_eq!(found.first_difference(), Some(1));
    // Letters as they are: d is alone.
    let map = Renaming::new(vec![Some(0), Some(1), Some(2), None]).unwrap();
    let found = compare_under(&square, &triangle, &map, &Control::new()).unwrap();
    assert_eq!(found.agree_to, 0);
    let lone = differences(&square, &triangle, &map, 1);
    assert_eq!((lone.only_first, lone.only_second), (vec![3], vec![]));
    // The square with two letters has p(1) = 2.
    let two = language(&polygon("square-two-letters"), 5);
    assert_eq!(agree_to(&square, &two), 0);
}

#[test]
fn renamings_are_one_to_one() {
    let fault = Renaming::new(vec![Some(1), None, None, Some(1)]).unwrap_err();
    assert_eq!((fault.first, fault.second, fault.image), (0, 3, 1));
}

/// A language with its letters exchanged, without some words of the last length.
fn scrambled(language: &Language, letters: impl Fn(u8) -> u8, without: WordId) -> Language {
    let n = language.longest();
    let mut kept = words(language, n);
    kept.remove(without as usize);
    for word in &mut kept {
        word.iter_mut().for_each(|l| *l = letters(*l));
    }
    let kept = kept.iter().map(Vec::as_slice);
    Language::from_factors(language.alphabet(), kept, n).expect("a language")
}

/// There are 12! renamings of a regular 12-gon, 24 of them symmetries. Multiplying its sides by 5 modulo 12 is none of these,
/// so the search has to find its way. One word is taken out at length 6 on either side: the same word, which leaves the
/// languages equal, or words with other numbers of letters, which no renaming can match, though all counts are equal.
#[test]
fn twelve_sides_take_a_moment() {
    let full = language(&polygon("regular-dodecagon"), 6);
    let (left, right) = (
        full.left_extension_counts(5),
        full.right_extension_counts(5),
    );
    // Its factors of length 5 go on in other words too, so nothing shorter is lost with it.
    let spare = |w: &WordId| {
        right[full.prefix(6, *w) as usize] > 1 && left[full.suffix(6, *w) as usize] > 1
    };
    let letters_in = |w: WordId| full.word(6, w).into_iter().collect::<BTreeSet<u8>>().len();
    let spares: Vec<WordId> = (0..full.count(6) as WordId).filter(spare).collect();
    let one = spares[0];
    let other = spares.iter().find(|w| letters_in(**w) != letters_in(one));
    let other = *other.expect("words with other numbers of letters");
    let turned = |l: u8| 5 * l % 12;
    let begun = Instant::now();
    let first = scrambled(&full, |l| l, one);
    let equal = scrambled(&full, turned, one);
    let different = scrambled(&full, turned, other);
    assert_eq!(first.complexity(), equal.complexity());
    assert_eq!(first.complexity(), different.complexity());
    assert_eq!(agree_to(&first, &equal), 6);
    assert_eq!(agree_to(&first, &different), 5);
    check_certificate(&first, &equal);
    check_certificate(&first, &different);
    let taken = begun.elapsed();
    assert!(taken < Duration::from_secs(10), "{taken:?}");
}
