//! The standings of a verdict: what is proved, for which tables, and that tampering is told at the right n.

mod support;

use reboundary::factor_graph::census::count_graphs;
use reboundary::factor_graph::criterion::{LineFigures, line_figures};
use reboundary::run::Control;
use reboundary::study::growth::GrowthFigures;
use reboundary::study::results::{Request, Results, compute};
use reboundary::study::statement::{Standing, Statement};
use reboundary::study::verdict::{Coding, Evidence, verdict};
use reboundary::table::Table;
use reboundary::table::facts::{Facts, ReflectionGroup, facts};
use reboundary::unfold::engine::Arithmetic;
use support::{
    crooked, equilateral, half_equilateral, integer_table, irrational_kite, irrational_l,
    l_of_three_squares, language, legs_three_and_four, regular_pentagon, right_isosceles,
    unit_square,
};

fn study(table: &Table, length: usize) -> Results {
    let request = Request {
        length: Some(length),
        radii: 3,
        arithmetic: Arithmetic::Tiered,
        memory: None,
    };
    compute(table, &request, &Control::new(), |_| {}).expect("the study is done")
}

fn find<'a>(statements: &'a [Statement], id: &str) -> &'a Statement {
    let mut found = statements.iter().filter(|s| s.id == id);
    let statement = found.next().unwrap_or_else(|| panic!("no statement {id}"));
    assert!(found.next().is_none(), "{id} twice");
    statement
}

const CONVEX_RATIONAL: [&str; 4] = [
    "cubic_bounds",
    "growth_exponent",
    "ratio_criterion",
    "line_limit",
];
/// Proved not to hold by the cubic lower bound.
const TOO_FAST: [&str; 2] = ["sufficient_small", "sufficient_bounds"];
const CHECKS: [&str; 4] = ["routes_agree", "measure_sum", "branch_bound", "reversible"];
const EVERY_TABLE: [&str; 3] = ["factorial", "prolongable", "subexponential"];

/// Tables with whether they are convex and rational, and whether they tile.
fn cases() -> Vec<(Table, bool, bool)> {
    let rectangle = integer_table("rectangle", 1, &[(0, 0), (5, 0), (5, 3), (0, 3)]);
    let hexagon = [(2, 0), (1, 1), (-1, 1), (-2, 0), (-1, -1), (1, -1)];
    let dart = integer_table("dart", 1, &[(0, 0), (4, 1), (1, 1), (1, 4)]);
    vec![
        (unit_square(), true, true),
        (rectangle, true, true),
        (equilateral(), true, true),
        (right_isosceles(), true, true),
        (half_equilateral(), true, true),
        (regular_pentagon(), true, false),
        (integer_table("regular hexagon", 3, &hexagon), true, false),
        // Rational but not convex.
        (l_of_three_squares(), false, false),
        (irrational_l(), false, false),
        // Convex but not rational, then neither.
        (legs_three_and_four(), false, false),
        (irrational_kite(), false, false),
        (dart, false, false),
        (crooked(), false, false),
    ]
}

#[test]
fn theorems_are_used_exactly_where_they_hold() {
    for (table, convex_rational, tiles) in cases() {
        let results = study(&table, 9);
        let standing = |id: &str| find(&results.statements, id).standing;
        for id in CONVEX_RATIONAL.iter().chain(&TOO_FAST) {
            let proved = standing(id) == Standing::Proved;
            assert_eq!(proved, convex_rational, "{}: {id}", table.title());
        }
        for id in TOO_FAST {
            let statement = find(&results.statements, id);
            let sentence = statement.sentence();
            assert_eq!(
                sentence.contains("does not hold"),
                convex_rational,
                "{sentence}"
            );
            // A script that reads id, standing and `holds` must not take the negation for the claim.
            assert!(!statement.claim.contains("not hold"));
            if convex_rational {
                assert_eq!(statement.holds, Some(false));
            }
        }
        let asymptotic = find(&results.statements, "sufficient_asymptotic");
        let expected = match tiles {
            true => Standing::Proved,
            false => Standing::NotDecided,
        };
        assert_eq!(asymptotic.standing, expected, "{}", table.title());
        for id in CHECKS {
            let last = if id == "branch_bound" { 8 } else { 9 };
            let found = find(&results.statements, id);
            assert_eq!(
                found.standing,
                Standing::Computed,
                "{}: {id}",
                table.title()
            );
            assert_eq!(found.at, Some(last), "{}: {id}", table.title());
        }
        for id in EVERY_TABLE {
            assert_eq!(standing(id), Standing::Proved, "{}: {id}", table.title());
        }
        let rational = matches!(results.facts.group, ReflectionGroup::Finite { .. });
        let quadratic = standing("diagonals_quadratic") == Standing::Proved;
        assert_eq!(quadratic, rational, "{}", table.title());
        // Nothing else is proved.
        let may_be_proved = |s: &Statement| {
            EVERY_TABLE.contains(&s.id)
                || (convex_rational
                    && (CONVEX_RATIONAL.contains(&s.id) || TOO_FAST.contains(&s.id)))
                || (tiles && ["sufficient_asymptotic", "limit_constant"].contains(&s.id))
                || (rational && s.id == "diagonals_quadratic")
        };
        for statement in &results.statements {
            assert_ne!(statement.standing, Standing::Violated, "{statement:?}");
            assert!(!statement.grounds.is_empty(), "{statement:?}");
            // What is proved names its theorem and how each hypothesis was checked; what is open says what data cannot tell.
            let open = [Standing::Trend, Standing::NotDecided].contains(&statement.standing);
            assert_eq!(
                statement.theorem.is_some(),
                statement.standing == Standing::Proved
            );
            if open && !["routes_agree", "constant_reproduced"].contains(&statement.id) {
                assert!(statement.cannot_decide.is_some(), "{statement:?}");
            }
            if let Some(theorem) = &statement.theorem {
                assert!(!theorem.hypotheses.is_empty() && !theorem.source.is_empty());
                assert!(
                    theorem
                        .hypotheses
                        .iter()
                        .all(|h| !h.asks.is_empty() && !h.checked.is_empty())
                );
            }
            if statement.standing == Standing::Proved {
                assert!(may_be_proved(statement), "{}: {statement:?}", table.title());
            }
        }
    }
}

/// What is missing for the theorems is named.
#[test]
fn the_missing_hypothesis_is_named() {
    for (table, convex, rational) in [
        (l_of_three_squares(), false, true),
        (legs_three_and_four(), true, false),
        (crooked(), false, false),
    ] {
        let results = study(&table, 8);
        let grounds = &find(&results.statements, "cubic_bounds").grounds;
        assert_eq!(grounds.contains("not convex"), !convex, "{grounds}");
        assert_eq!(
            grounds.contains("rational multiple of π"),
            !rational,
            "{grounds}"
        );
    }
}

/// The evidence of an honest study, owned, to be tampered with.
struct Honest {
    facts: Facts,
    coding: Coding,
    p: Vec<u64>,
    line: Vec<LineFigures>,
    growth: GrowthFigures,
}

impl Honest {
    fn new(table: &Table, length: usize) -> Honest {
        let language = language(table, length);
        Honest {
            facts: facts(table),
            coding: Coding::of(table),
            growth: GrowthFigures::new(&language.complexity(), None, None),
            p: language.complexity(),
            line: count_graphs(&language, 1, 3)
                .iter()
                .map(line_figures)
                .collect(),
        }
    }

    fn evidence(&self) -> Evidence<'_> {
        Evidence {
            facts: &self.facts,
            coding: self.coding,
            p: &self.p,
            disagreement: None,
            measure_fault: None,
            bi_extendable: true,
            reversal_fault: None,
            line: &self.line,
            growth: &self.growth,
        }
    }
}

/// Each fault makes its own statement violated, at its n, and no other.
#[test]
fn faults_are_told_where_they_are() {
    for table in [unit_square(), crooked()] {
        let honest = Honest::new(&table, 10);
        let mut tampered_line = honest.line.clone();
        tampered_line[6].within_bound = false;
        tampered_line[8].within_bound = false;
        let base = honest.evidence();
        for (id, at, evidence) in [
            (
                "routes_agree",
                4,
                Evidence {
                    disagreement: Some(4),
                    ..base
                },
            ),
            (
                "measure_sum",
                7,
                Evidence {
                    measure_fault: Some(7),
                    ..base
                },
            ),
            (
                "reversible",
                3,
                Evidence {
                    reversal_fault: Some(3),
                    ..base
                },
            ),
            (
                "prolongable",
                10,
                Evidence {
                    bi_extendable: false,
                    ..base
                },
            ),
            (
                "branch_bound",
                7,
                Evidence {
                    line: &tampered_line,
                    ..base
                },
            ),
        ] {
            let found = verdict(&evidence);
            let violated: Vec<_> = found
                .iter()
                .filter(|s| s.standing == Standing::Violated)
                .map(|s| (s.id, s.at))
                .collect();
            assert_eq!(violated, [(id, Some(at))], "{}", table.title());
        }
        let honestly = verdict(&base);
        assert!(honestly.iter().all(|s| s.standing != Standing::Violated));
    }
}

/// A wrong p is seen by the comparison of the routes and moves the computed figures.
#[test]
fn a_wrong_p_shows() {
    use reboundary::complexity::counts::first_disagreement;
    let mut honest = Honest::new(&unit_square(), 12);
    let right = honest.p.clone();
    honest.p[6] = 4;
    let evidence = Evidence {
        disagreement: first_disagreement(&honest.p, &right),
        ..honest.evidence()
    };
    let found = verdict(&evidence);
    let routes = find(&found, "routes_agree");
    assert_eq!((routes.standing, routes.at), (Standing::Violated, Some(6)));
    let range = find(&found, "cubic_range");
    assert!(range.claim.contains("n = 6 and"), "{}", range.claim);
}

/// Short studies say that they are too short; they suggest nothing.
#[test]
fn a_short_study_suggests_nothing() {
    let results = study(&crooked(), 3);
    for statement in &results.statements {
        assert_ne!(statement.standing, Standing::Trend, "{statement:?}");
    }
    let long = study(&crooked(), 14);
    for id in ["ratio_criterion", "line_limit"] {
        assert_eq!(find(&long.statements, id).standing, Standing::Trend, "{id}");
    }
}

#[test]
fn a_language_of_one_word_a_length_has_no_line_limit() {
    let corners = (0..4).map(|i| unit_square().corner(i).clone()).collect();
    let table = Table::new("one letter", corners, 1.into(), vec!['a'; 4]).unwrap();
    let results = study(&table, 9);
    let at = |id: &str| {
        let statement = find(&results.statements, id);
        (statement.standing, statement.at)
    };
    assert_eq!(at("ratio_criterion"), (Standing::Proved, None));
    assert_eq!(at("line_limit"), (Standing::Violated, Some(1)));
    assert_eq!(at("sufficient_small"), (Standing::NotDecided, None));
}
