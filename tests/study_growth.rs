//! Growth in the verdict: known constants against exact counts, which table gets which, trends of languages that are built to
//! violate a claim, and stated bounds against a slow twin.

mod support;

use reboundary::complexity::claim::{Checked, Sequences, check, parse};
use reboundary::complexity::constant::known_constant;
use reboundary::complexity::counts::Counts;
use reboundary::complexity::estimate::{SHORTEST_ESTIMATE, limit};
use reboundary::factor_graph::census::count_graphs;
use reboundary::factor_graph::criterion::{LineFigures, line_figures};
use reboundary::language::Language;
use reboundary::run::Control;
use reboundary::study::growth::GrowthFigures;
use reboundary::study::results::{Request, Results, compute};
use reboundary::study::statement::{Standing, Statement};
use reboundary::study::trend::{RatioTrend, ratio_trend};
use reboundary::study::verdict::{Coding, Evidence, verdict};
use reboundary::table::Table;
use reboundary::table::facts::facts;
use reboundary::table::file;
use reboundary::unfold::engine::Arithmetic;
use std::f64::consts::PI;
use support::{
    crooked, equilateral, half_equilateral, integer_table, l_of_three_squares, legs_three_and_four,
    p_by_fans, regular_pentagon, right_isosceles, unit_square,
};

fn from_text(text: &str) -> Table {
    file::parse("quay.toml", text).expect("a table").table
}

/// Limits of p(n)/n³: square 4/π², equilateral 3/(4π²), right isosceles 2/(3π²), 30°-60°-90° 19/(30π²), derived from
/// lattice counts; regular pentagon about 1.0041 (numerical). Cubic asymptotics: Cassaigne, Hubert, Troubetzkoy 2002.
fn constants() -> Vec<(Table, f64, usize)> {
    vec![
        (unit_square(), 4.0 / (PI * PI), 200),
        (equilateral(), 3.0 / (4.0 * PI * PI), 300),
        (right_isosceles(), 2.0 / (3.0 * PI * PI), 300),
        (half_equilateral(), 19.0 / (30.0 * PI * PI), 300),
        (regular_pentagon(), 1.0041, 120),
    ]
}

/// Every length from the shortest that has an estimate: the error that the estimate states covers the truth.
#[test]
fn known_constants_are_reproduced_within_the_stated_error() {
    for (table, constant, length) in constants() {
        let known = known_constant(&table, &facts(&table)).expect("a known constant");
        assert!((known.value - constant).abs() <= known.slack, "{known:?}");
        let p = p_by_fans(&table, length);
        for n in SHORTEST_ESTIMATE..=length {
            let found = limit(&p, n).expect("long enough");
            let off = (found.limit - constant).abs();
            assert!(
                off <= found.error + known.slack,
                "{} {n}: {found:?}",
                table.title()
            );
        }
        // The error is of use: at the end it is below 3% of the constant.
        let last = limit(&p, length).expect("long enough");
        assert!(last.error < 0.03 * constant, "{}: {last:?}", table.title());
        // A constant that is off by a tenth would be noticed.
        assert!((last.limit - 1.1 * constant).abs() > last.error + known.slack);
    }
}

#[test]
fn constants_are_given_to_the_right_tables_alone() {
    let constant = |table: &Table| known_constant(table, &facts(table)).map(|k| k.text);
    let rectangle = integer_table("rectangle", 1, &[(0, 0), (5, 0), (5, 3), (0, 3)]);
    assert_eq!(constant(&rectangle), Some("4/π²"));
    // The angles of a regular pentagon, and sides of different lengths.
    let equiangular = "outline = [[\"3\", \"0\"], [\"2+cos(4/5*pi)\", \"2/5\"], [\"2+cos(8/5*pi)\", \"4/5\"], [\"2+cos(12/5*pi)\", \"6/5\"], [\"2+cos(16/5*pi)\", \"8/5\"]]";
    let shared = "corners = [[\"0\",\"0\"],[\"1\",\"0\"],[\"1\",\"1\"],[\"0\",\"1\"]]\nsides = [\"a\",\"b\",\"a\",\"b\"]";
    let hole = "corners = [[\"0\",\"0\"],[\"1\",\"0\"],[\"1\",\"1\"],[\"0\",\"1\"]]\n[[holes]]\ncorners = [[\"1/4\",\"1/4\"],[\"1/2\",\"1/4\"],[\"1/4\",\"1/2\"]]";
    for table in [
        from_text(equiangular),
        from_text(shared),
        from_text(hole),
        l_of_three_squares(),
        legs_three_and_four(),
        crooked(),
        from_text("regular = 6"),
        from_text("triangle = [\"1\", \"1\", \"3\"]"),
    ] {
        assert_eq!(constant(&table), None, "{}", table.title());
    }
}

fn study(table: &Table, length: usize) -> Results {
    let request = Request {
        length: Some(length),
        radii: 2,
        arithmetic: Arithmetic::Tiered,
        memory: None,
    };
    compute(table, &request, &Control::new(), |_| {}).expect("the study is done")
}

fn find<'a>(statements: &'a [Statement], id: &str) -> &'a Statement {
    let mut found = statements.iter().filter(|s| s.id == id);
    found.next().unwrap_or_else(|| panic!("no statement {id}"))
}

/// A right-angled table with a hole is rational, but no theorem used here is stated for holes.
#[test]
fn holes_get_no_theorem_on_growth() {
    let table = from_text(
        "corners = [[\"0\",\"0\"],[\"3\",\"0\"],[\"3\",\"3\"],[\"0\",\"3\"]]\n[[holes]]\ncorners = [[\"1\",\"1\"],[\"2\",\"1\"],[\"2\",\"2\"],[\"1\",\"2\"]]",
    );
    let results = study(&table, 8);
    for id in [
        "subexponential",
        "cubic_bounds",
        "growth_exponent",
        "diagonals_quadratic",
        "sufficient_small",
        "sufficient_bounds",
        "sufficient_asymptotic",
        "ratio_criterion",
        "line_limit",
    ] {
        assert_ne!(
            find(&results.statements, id).standing,
            Standing::Proved,
            "{id}"
        );
    }
    assert!(results.statements.iter().all(|s| s.id != "limit_constant"));
}

#[test]
fn standings_of_the_limit() {
    let at = |table: &Table, length| {
        let results = study(table, length);
        ["limit_constant", "constant_reproduced"].map(|id| {
            let statement = find(&results.statements, id);
            (statement.standing, statement.holds)
        })
    };
    let computed = (Standing::Computed, Some(true));
    assert_eq!(
        at(&right_isosceles(), 30),
        [(Standing::Proved, Some(true)), computed]
    );
    // The value is known, that the limit exists is no theorem used here.
    assert_eq!(
        at(&regular_pentagon(), 18),
        [(Standing::NotDecided, None), computed]
    );
    assert_eq!(at(&unit_square(), 9)[1], (Standing::NotDecided, None));
}

/// A wrong constant is told as such.
#[test]
fn a_wrong_constant_is_violated() {
    let table = right_isosceles();
    let results = study(&table, 40);
    let mut known = known_constant(&table, &results.facts).expect("known");
    known.value *= 1.2;
    let growth = GrowthFigures::new(&results.counts.p, Some(&results.diagonals), Some(known));
    let found = verdict(&evidence(
        &results,
        &results.counts.p,
        &results.line,
        &growth,
    ));
    let statement = find(&found, "constant_reproduced");
    assert_eq!(
        (statement.standing, statement.at),
        (Standing::Violated, Some(40))
    );
}

fn evidence<'a>(
    results: &'a Results,
    p: &'a [u64],
    line: &'a [LineFigures],
    growth: &'a GrowthFigures,
) -> Evidence<'a> {
    Evidence {
        facts: &results.facts,
        coding: Coding::of(&results.table),
        p,
        disagreement: None,
        measure_fault: None,
        bi_extendable: true,
        reversal_fault: None,
        line,
        growth,
    }
}

/// All words over the blocks, cut at every place, as one sequence that holds each concatenation of so many blocks.
fn free_product(blocks: [&[u8]; 2], count: u32, longest: usize) -> Language {
    let sequences: Vec<Vec<u8>> = (0..1u32 << count)
        .map(|choice| {
            let block = |i: u32| blocks[(choice >> i & 1) as usize].iter().copied();
            (0..count).flat_map(block).collect()
        })
        .collect();
    let slices = sequences.iter().map(Vec::as_slice);
    Language::from_factors(2, slices, longest).expect("a language")
}

/// Languages of positive entropy: p(n+1)/p(n) cannot tend to 1, and the verdict says that the figures speak against it.
#[test]
fn languages_that_violate_the_ratio_criterion_are_told_as_a_trend() {
    let results = study(&crooked(), 6);
    for (blocks, count, longest) in [
        ([&[0][..], &[1][..]], 14, 12),
        ([&[0, 0, 1][..], &[0, 1, 1][..]], 8, 14),
    ] {
        let language = free_product(blocks, count, longest);
        let p = language.complexity();
        let line: Vec<LineFigures> = count_graphs(&language, 1, 2)
            .iter()
            .map(line_figures)
            .collect();
        assert!(
            matches!(ratio_trend(&line), RatioTrend::Stays(_)),
            "{line:?}"
        );
        let growth = GrowthFigures::new(&p, None, None);
        let found = verdict(&evidence(&results, &p, &line, &growth));
        for id in ["ratio_criterion", "line_limit"] {
            let statement = find(&found, id);
            assert_eq!(
                (statement.standing, statement.holds),
                (Standing::Trend, Some(false)),
                "{id}"
            );
            assert!(statement.sentence().contains("seems not to hold"));
        }
    }
}

fn figures(growth: impl Fn(usize) -> f64, orders: usize) -> Vec<LineFigures> {
    (1..=orders)
        .map(|order| LineFigures {
            order,
            growth: growth(order),
            path_share: vec![],
            branch_free_share: vec![],
            bound: vec![],
            within_bound: true,
        })
        .collect()
}

#[test]
fn trends_of_the_ratio() {
    let falls = |t| matches!(t, RatioTrend::Falls(_));
    let stays = |t| matches!(t, RatioTrend::Stays(_));
    assert!(falls(ratio_trend(&figures(|n| 3.0 / n as f64, 40))));
    assert!(falls(ratio_trend(&figures(|n| 1.0 / n as f64, 10))));
    // Jumps at the powers of two and nothing between: it must not pass for a falling ratio, wherever the study ends.
    let jumps = |n: usize| {
        if n.is_power_of_two() {
            0.5
        } else {
            0.1 / n as f64
        }
    };
    for orders in [34, 40, 50, 63, 70, 100] {
        assert!(stays(ratio_trend(&figures(jumps, orders))), "{orders}");
    }
    // Too short, or too small to speak of a jump.
    assert_eq!(ratio_trend(&figures(|_| 1.0, 7)), RatioTrend::Unclear);
    assert_eq!(ratio_trend(&figures(|_| 0.01, 40)), RatioTrend::Unclear);
}

/// A slow twin: cross-multiplied in whole numbers, written for these claims alone.
#[test]
fn claims_agree_with_whole_number_arithmetic() {
    for table in [unit_square(), right_isosceles(), crooked()] {
        let counts = Counts::from_p(p_by_fans(&table, 24));
        let diagonals = support::diagonal_counts(&table, 22);
        let sequences = Sequences {
            words: &counts.p,
            first: &counts.first_difference,
            second: &counts.second_difference,
            diagonals: Some(&diagonals),
        };
        for percent in [5i128, 8, 9, 10, 20, 45, 60, 70, 300] {
            for from in [1u64, 4, 10, 24] {
                let text = format!("p(n) <= 0.{percent:03}*n^3 for n >= {from}");
                let first = (from..=24).find(|&n| {
                    i128::from(counts.p[n as usize]) * 1000 > percent * i128::from(n).pow(3)
                });
                match check(&parse(&text).expect("a claim"), &sequences) {
                    Checked::Fails(violation) => assert_eq!(Some(violation.n), first, "{text}"),
                    Checked::HoldsTo {
                        last: 24,
                        whole: false,
                    } => assert_eq!(first, None, "{text}"),
                    other => panic!("{text}: {other:?}"),
                }
            }
        }
        // Identities that hold for every table with letters of their own: b(n) = N(n), and the definitions of s and b.
        for (text, last) in [
            ("b(n) = N(n)", 22),
            ("s(n) = p(n+1) - p(n)", 23),
            ("b(n) = p(n+2) - 2*p(n+1) + p(n)", 22),
            ("0 < p(n) < p(n+1)", 23),
            ("(p(n) - 1)*(p(n) + 1) = p(n)^2 - 1", 24),
            ("-p(n)^2 < 0 - 2*p(n) + 2*(1/2)", 24),
        ] {
            let found = check(&parse(text).expect("a claim"), &sequences);
            assert_eq!(found, Checked::HoldsTo { last, whole: false }, "{text}");
        }
        // At equality each comparison has its own answer.
        for (sign, holds) in [
            ("<=", true),
            (">=", true),
            ("=", true),
            ("<", false),
            (">", false),
            ("!=", false),
        ] {
            let found = check(&parse(&format!("n {sign} n")).expect("a claim"), &sequences);
            assert_eq!(matches!(found, Checked::HoldsTo { .. }), holds, "{sign}");
        }
        let whole = check(
            &parse("p(n) > 1 for 3 <= n < 9").expect("a claim"),
            &sequences,
        );
        assert_eq!(
            whole,
            Checked::HoldsTo {
                last: 8,
                whole: true
            }
        );
        for (text, part) in [
            ("p(n) > 1 for n > 24", "do not reach"),
            ("1/(n - 3) < 2", "not defined at n = 3"),
            ("p(n - 2) > 0", "not defined at n = 1"),
            ("2^(n*n*n*n*n*n) > 1 for n >= 20", "too large"),
        ] {
            match check(&parse(text).expect("a claim"), &sequences) {
                Checked::Undecided(why) => assert!(why.contains(part), "{text}: {why}"),
                other => panic!("{text}: {other:?}"),
            }
        }
        let without = Sequences {
            diagonals: None,
            ..sequences
        };
        let unknown = check(&parse("N(n) > 0").expect("a claim"), &without);
        assert!(matches!(unknown, Checked::Undecided(why) if why.contains("not counted")));
    }
}
