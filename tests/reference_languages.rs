//! Languages of reference files: published counts, and slow twins that share nothing with the fast routes.

use proptest::prelude::*;
use reboundary::language::Language;
use reboundary::language::suffixes::factors_of_words;
use reboundary::reference::file::{Reference, load, parse};
use reboundary::reference::finite_type::FiniteType;
use reboundary::reference::substitution::{Directive, Substitution};
use reboundary::reference::toeplitz::Pattern;
use reboundary::reference::{ReferenceFault, Rule};
use std::collections::BTreeSet;
use std::path::Path;

fn reference(text: &str) -> Reference {
    parse("test.toml", text, &[]).unwrap_or_else(|fault| panic!("{fault}"))
}

fn language(text: &str, longest: usize) -> Language {
    reference(text)
        .rule
        .language(longest, 1 << 24)
        .expect("a language")
}

fn demo(name: &str) -> Reference {
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join("demo-data/reference");
    load(&path.join(name), &[]).unwrap_or_else(|fault| panic!("{name}: {fault}"))
}

fn demo_language(name: &str, longest: usize) -> Language {
    demo(name)
        .rule
        .language(longest, 1 << 24)
        .expect("a language")
}

fn assert_complexity(language: &Language, expected: impl Fn(u64) -> u64) {
    for (n, p) in (0..).zip(language.complexity()) {
        assert_eq!(p, if n == 0 { 1 } else { expected(n) }, "p({n})");
    }
    assert!(language.is_bi_extendable());
}

/// Recomputed; n + 1 is the complexity of every Sturmian word (Morse and Hedlund [from memory]).
#[test]
fn fibonacci_recomputed() {
    assert_complexity(&demo_language("bell-buoy.toml", 200), |n| n + 1);
}

/// Recomputed.
#[test]
fn tribonacci_recomputed() {
    assert_complexity(&demo_language("three-piers.toml", 200), |n| 2 * n + 1);
}

/// Recomputed. One letter keeps its length for ever, so the bound by letters alone would not do.
#[test]
fn chacon_recomputed() {
    let expected = |n| if n == 1 { 2 } else { 2 * n - 1 };
    assert_complexity(&demo_language("ferry-rests.toml", 300), expected);
}

/// Brlek 1989; de Luca and Varricchio 1989.
#[test]
fn thue_morse_brlek() {
    let language = demo_language("ebb-and-flood.toml", 60);
    let listed = [2, 4, 6, 10, 12, 16, 20, 22, 24, 28, 32, 36];
    assert_eq!(language.complexity()[1..=12], listed);
    assert!(language.is_bi_extendable());
}

/// Recomputed for n ≤ 10, as a Toeplitz pattern and as a substitution.
#[test]
fn period_doubling_recomputed_two_ways() {
    let language = demo_language("lamp-periods.toml", 100);
    assert_eq!(
        language.complexity()[1..=10],
        [2, 3, 5, 6, 8, 10, 11, 12, 14, 16]
    );
    let other = self::language("[substitution]\n0 = \"01\"\n1 = \"00\"", 100);
    assert_eq!(language, other);
}

/// Allouche 1992.
#[test]
fn paperfolding_allouche() {
    let language = demo_language("chart-folds.toml", 100);
    assert_complexity(&language, |n| match n {
        1..=6 => [2, 4, 8, 12, 18, 23][n as usize - 1],
        _ => 4 * n,
    });
}

/// OEIS A005943: the substitution a → ab, b → ac, c → db, d → dc, and then a, b ↦ 0 and c, d ↦ 1.
#[test]
fn rudin_shapiro_oeis_a005943() {
    let four = demo_language("net-counts.toml", 61);
    let merged: Vec<Vec<u8>> = (0..four.count(61) as u32)
        .map(|w| four.word(61, w).iter().map(|a| a / 2).collect())
        .collect();
    let texts = merged.iter().map(Vec::as_slice);
    let language = factors_of_words(2, texts, 61, u64::MAX)
        .expect("factors")
        .language;
    assert_complexity(&language, |n| match n {
        1..=7 => [2, 4, 8, 16, 24, 36, 46][n as usize - 1],
        _ => 8 * n - 8,
    });
}

/// Keane 1975 [from memory]; recomputed: (d − 1)n + 1 when the lengths are independent over the rationals and the
/// permutation is irreducible.
#[test]
fn exchanges_keane_1975() {
    assert_complexity(&demo_language("lock-gates.toml", 80), |n| 2 * n + 1);
    let four = "lengths = [\"1\", \"sqrt(2)\", \"sqrt(3)\", \"sqrt(6)\"]\npermutation = \"dbca\"";
    assert_complexity(&language(four, 60), |n| 3 * n + 1);
    let two = "lengths = [\"1\", \"sqrt(2)\"]\npermutation = \"ba\"";
    assert_complexity(&language(two, 100), |n| n + 1);
}

/// The rotation by the golden number codes the Fibonacci language (from memory): 0 has the longer interval.
#[test]
fn a_rotation_is_the_fibonacci_language() {
    let text =
        "letters = \"01\"\nlengths = [\"(sqrt(5)-1)/2\", \"(3-sqrt(5))/2\"]\npermutation = \"10\"";
    assert_eq!(language(text, 90), demo_language("bell-buoy.toml", 90));
}

/// A rational exchange is periodic: lengths 3 and 5 give one cycle of 8 points.
#[test]
fn a_rational_rotation_has_as_many_words_as_points() {
    let periodic = language("lengths = [\"3\", \"5\"]\npermutation = \"ba\"", 30);
    assert_complexity(&periodic, |n| (n + 1).min(8));
}

/// A map whose pieces are moved on one another: the attractor is smaller than the interval. The twin traces the points of
/// a fine grid in integers (halves of a unit), after the transient, with multiplicities forgotten.
#[test]
fn a_translation_map_against_traced_points() {
    let lengths = [7i64, 5, 9];
    let shifts = [11i64, -3, -10];
    let text = "lengths = [\"7\", \"5\", \"9\"]\nshifts = [\"11\", \"-3\", \"-10\"]";
    let fast = language(text, 20);
    let piece = |x: i64| {
        if x < 7 {
            0u8
        } else if x < 12 {
            1
        } else {
            2
        }
    };
    let total: i64 = lengths.iter().sum();
    let mut words: BTreeSet<Vec<u8>> = BTreeSet::new();
    for start in 0..total {
        let mut x = start;
        let mut word = Vec::new();
        for step in 0..200 + 20 {
            if step >= 200 {
                word.push(piece(x));
            }
            x += shifts[piece(x) as usize];
        }
        words.insert(word);
    }
    let found: BTreeSet<Vec<u8>> = (0..fast.count(20) as u32)
        .map(|w| fast.word(20, w))
        .collect();
    assert_eq!(found, words);
    assert!(fast.is_bi_extendable());
}

#[test]
fn the_demonstration_map_has_a_smaller_attractor() {
    let map = demo("silted-lock.toml");
    let Rule::Translations(translations) = &map.rule else {
        panic!("a translation map");
    };
    let attractor = translations.attractor().expect("finite type");
    let size: f64 = attractor.iter().map(|(a, b)| (b - a).to_f64()).sum();
    assert!(size < 1.0 - 1e-9, "{size}");
    assert!(
        map.rule
            .language(40, 1 << 20)
            .expect("a language")
            .is_bi_extendable()
    );
}

/// Fibonacci numbers: words without 11 (from memory). The full shift: powers.
#[test]
fn finite_types_with_known_counts() {
    let fibonacci = |n: u64| (0..n).fold((1u64, 2u64), |(a, b), _| (b, a + b)).0;
    assert_complexity(&demo_language("flag-hoist.toml", 25), fibonacci);
    assert_complexity(&language("letters = \"ab\"\nforbidden = []", 12), |n| {
        1 << n
    });
    // No way back from b to a: only constant and once-changing words; with ab forbidden as well, two loops.
    assert_complexity(
        &language("letters = \"ab\"\nforbidden = [\"ba\"]", 30),
        |n| n + 1,
    );
    assert_complexity(
        &language("letters = \"ab\"\nforbidden = [\"ba\", \"ab\"]", 30),
        |_| 2,
    );
    // b has no continuation: it and all words with it disappear.
    let pruned = language("letters = \"ab\"\nforbidden = [\"ba\", \"bb\"]", 10);
    assert_complexity(&pruned, |_| 1);
    let none = FiniteType::new(1, vec![vec![0, 0]])
        .language(5, 100)
        .unwrap_err();
    assert_eq!(none, ReferenceFault::Empty);
}

/// Factors of σ₀…σ_{m−1}(a) for one depth, by writing the images out.
fn slow_directive(directive: &[&Substitution], alphabet: usize, longest: usize) -> Language {
    let mut words: Vec<Vec<u8>> = (0..alphabet as u8).map(|a| vec![a]).collect();
    for sigma in directive.iter().rev() {
        words = words.iter().map(|w| sigma.apply(w)).collect();
    }
    Language::from_factors(alphabet, words.iter().map(Vec::as_slice), longest).expect("factors")
}

fn images(alphabet: u8, longest: usize) -> impl Strategy<Value = Substitution> {
    let image = prop::collection::vec(0..alphabet, 1..=longest);
    prop::collection::vec(image, alphabet as usize).prop_map(Substitution::new)
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(64))]

    /// Primitive or not: words that occur at infinitely many depths are those of two deep consecutive runs of depths,
    /// once images are long or stay as they are. Depths 12·k, k even and odd, cover periods of letters up to 4.
    #[test]
    fn substitutions_against_written_images(sigma in images(3, 3), longest in 1usize..9) {
        let deep: Vec<usize> = (24..36).collect();
        // Images that explode are compared on the letters' growth up to a size; skip those.
        let mut size = vec![1u64; 3];
        for _ in 0..36 {
            size = (0..3u8).map(|a| sigma.apply(&[a]).iter().map(|b| size[*b as usize]).fold(0u64, u64::saturating_add)).collect();
        }
        prop_assume!(size.iter().all(|s| *s < 20_000));
        let mut union: BTreeSet<Vec<u8>> = BTreeSet::new();
        for depth in deep {
            let slow = slow_directive(&vec![&sigma; depth], 3, longest);
            for n in 1..=longest {
                union.extend((0..slow.count(n) as u32).map(|w| slow.word(n, w)));
            }
        }
        let fast = Directive::new(vec![], sigma).language(longest, 1 << 24).expect("a language");
        let mut found: BTreeSet<Vec<u8>> = BTreeSet::new();
        for n in 1..=longest {
            found.extend((0..fast.count(n) as u32).map(|w| fast.word(n, w)));
        }
        prop_assert_eq!(found, union);
    }

    /// Growing ones: at depth 7 the images have at least 128 letters, so one more depth adds nothing new
    /// below length 9 when two consecutive depths agree.
    #[test]
    fn directives_against_written_images(
        first in prop::collection::vec(images(2, 4), 0..3),
        tail in images(2, 3),
        longest in 1usize..9,
    ) {
        let growing = |s: &Substitution| (0..2u8).all(|a| s.apply(&[a]).len() >= 2 && s.apply(&[a]).contains(&(1 - a)));
        prop_assume!(growing(&tail));
        let written = |depth: usize| {
            let all: Vec<&Substitution> = first.iter().chain(std::iter::repeat_n(&tail, depth)).collect();
            slow_directive(&all, 2, longest)
        };
        let slow = written(8);
        prop_assert_eq!(&slow, &written(9));
        let fast = Directive::new(first.clone(), tail.clone()).language(longest, 1 << 24).expect("a language");
        prop_assert_eq!(fast, slow);
    }

    /// The word itself, filled place by place.
    #[test]
    fn toeplitz_against_the_filled_word(
        places in prop::collection::vec(prop::option::weighted(0.6, 0u8..2), 1..7),
        longest in 1usize..12,
    ) {
        let Ok(pattern) = Pattern::new(2, places.clone()) else {
            return Ok(());
        };
        let holes = places.iter().filter(|c| c.is_none()).count();
        let mut word: Vec<u8> = Vec::new();
        for i in 0..60_000 {
            let (k, phase) = (i / places.len(), i % places.len());
            let before = places[..phase].iter().filter(|c| c.is_none()).count();
            word.push(places[phase].unwrap_or_else(|| word[k * holes + before]));
        }
        let slow = factors_of_words(2, [&word[..]], longest, u64::MAX).expect("factors").language;
        let fast = pattern.language(longest, 1 << 24).expect("a language");
        // A finite word can lack rare factors, never have more.
        for n in 1..=longest {
            for w in 0..slow.count(n) as u32 {
                prop_assert!(fast.find(&slow.word(n, w)).is_some());
            }
        }
        let density = holes as f64 / places.len() as f64;
        if density < 0.7 {
            prop_assert_eq!(fast, slow);
        }
    }

    /// All words, filtered, that can be continued by 12 letters on both sides.
    #[test]
    fn finite_types_against_filtered_words(
        forbidden in prop::collection::vec(prop::collection::vec(0u8..2, 1..4), 0..4),
    ) {
        let reach = 4;
        let margin = 6;
        let n = reach + 2 * margin;
        let allowed = |w: &[u8]| !forbidden.iter().any(|f| w.windows(f.len()).any(|x| x == &f[..]));
        // The graph has at most 4 states, so 6 letters of margin are enough for a cycle on either side.
        let mut middles: BTreeSet<Vec<u8>> = BTreeSet::new();
        for bits in 0..1u32 << n {
            let word: Vec<u8> = (0..n).map(|i| (bits >> i & 1) as u8).collect();
            if allowed(&word) {
                middles.insert(word[margin..margin + reach].to_vec());
            }
        }
        match FiniteType::new(2, forbidden.clone()).language(reach, 1 << 20) {
            Ok(found) => {
                let words: BTreeSet<Vec<u8>> = (0..found.count(reach) as u32).map(|w| found.word(reach, w)).collect();
                prop_assert_eq!(words, middles);
                prop_assert!(found.is_bi_extendable());
            }
            Err(fault) => {
                prop_assert_eq!(fault, ReferenceFault::Empty);
                prop_assert!(middles.is_empty());
            }
        }
    }
}

/// A fixed word read through a directive sequence: σ₀ = (0 → 01, 1 → 1) then Fibonacci for ever is Sturmian again.
#[test]
fn a_directive_of_sturmian_morphisms_is_sturmian() {
    let text = "directive = [\"p^2\", \"q\"]\nrepeat = [\"f\"]\n[substitutions.p]\n0 = \"01\"\n1 = \"1\"\n\
                [substitutions.q]\n0 = \"0\"\n1 = \"10\"\n[substitutions.f]\n0 = \"01\"\n1 = \"0\"";
    assert_complexity(&language(text, 100), |n| n + 1);
}

/// Every fault points at a line and says what to write.
#[test]
fn faults_point_and_help() {
    let cases = [
        ("title = \"x\"", "describes no language", 1),
        ("pattern = \"0?\"\nforbidden = []", "more than once", 2),
        ("pattern = \"0?\"\nlength = 3", "unknown key `length`", 2),
        (
            "pattern = \"0?\"\nrepeat = []",
            "does not go with `pattern`",
            2,
        ),
        ("pattern = \"?0\"", "does not begin with a letter", 1),
        (
            "pattern = \"0\u{20}1\"\nletters = \"01\"",
            "is no letter",
            1,
        ),
        ("pattern = \"0????1\"", "does not divide 6", 1),
        ("pattern = 5", "must be a string", 1),
        ("letters = \"001\"\nforbidden = []", "names `0` twice", 1),
        ("forbidden = []", "needs `letters`", 1),
        (
            "letters = \"01\"\nforbidden = [\"12\"]",
            "`2` is no letter",
            2,
        ),
        ("letters = \"01\"\nforbidden = [\"\"]", "is empty", 2),
        ("[substitution]\n0 = \"01\"", "`1` is no letter", 2),
        (
            "letters = \"01\"\n[substitution]\n0 = \"01\"",
            "no image for the letter `1`",
            2,
        ),
        ("[substitution]\n0 = \"\"", "is empty", 2),
        ("[substitution]\nab = \"a\"", "not one letter", 2),
        ("substitution = 3", "must be a table", 1),
        ("directive = [\"a\"]", "needs `substitutions`", 1),
        (
            "directive = [\"b\"]\n[substitutions.a]\n0 = \"00\"",
            "no substitution `b`",
            1,
        ),
        (
            "directive = [\"a^0\"]\n[substitutions.a]\n0 = \"00\"",
            "out of range",
            1,
        ),
        (
            "directive = []\n[substitutions.a]\n0 = \"00\"",
            "names no substitution",
            1,
        ),
        (
            "lengths = [\"1\"]\npermutation = \"ab\"",
            "`b` is no letter",
            2,
        ),
        (
            "lengths = [\"1\", \"2\"]\npermutation = \"aa\"",
            "each letter once",
            2,
        ),
        (
            "lengths = [\"1\", \"-2\"]\npermutation = \"ba\"",
            "length 1 is not positive",
            1,
        ),
        (
            "lengths = [\"1\", 0.5]\npermutation = \"ba\"",
            "not exact",
            1,
        ),
        (
            "lengths = [\"1\", \"2\"]\nshifts = [\"1\", \"1\"]",
            "moved out",
            2,
        ),
        (
            "lengths = [\"1\", \"2\"]\nshifts = [\"1\"]",
            "2 lengths and 1 shifts",
            2,
        ),
        ("permutation = \"ab\"", "needs `lengths`", 1),
        (
            "letters = \"abc\"\nlengths = [\"1\"]\npermutation = \"a\"",
            "1 lengths and 3 letters",
            2,
        ),
        ("lengths = [\"1\", \"t\"]\npermutation = \"ba\"", "t", 1),
        ("pattern = ", "not valid TOML", 1),
    ];
    for (text, message, line) in cases {
        let fault = parse("quay.toml", text, &[])
            .err()
            .unwrap_or_else(|| panic!("{text} was taken"));
        let shown = fault.to_string();
        assert!(shown.contains(message), "{text}\n{shown}");
        assert_eq!(fault.line(), line, "{text}\n{shown}");
        assert!(!fault.help.is_empty(), "{text}\n{shown}");
    }
    let set = parse("quay.toml", "pattern = \"0?\"", &["t=1".to_string()]).unwrap_err();
    assert!(set.to_string().contains("no parameters"), "{set}");
}

#[test]
fn parameters_can_be_set() {
    let text = "lengths = [\"1\", \"t\"]\npermutation = \"ba\"\n[parameters]\nt = \"1\"";
    let count = |settings: &[String]| {
        let reference = parse("quay.toml", text, settings).expect("a reference");
        reference
            .rule
            .language(10, 1000)
            .expect("a language")
            .count(10)
    };
    assert_eq!(count(&[]), 2);
    assert_eq!(count(&["t=sqrt(2)".to_string()]), 11);
}

#[test]
fn too_many_words_are_refused() {
    for name in [
        "flag-hoist.toml",
        "bell-buoy.toml",
        "lock-gates.toml",
        "chart-folds.toml",
    ] {
        let fault = demo(name).rule.language(30, 50).unwrap_err();
        assert_eq!(
            fault,
            ReferenceFault::TooManyWords {
                longest: 30,
                allowed: 50
            },
            "{name}"
        );
    }
}
