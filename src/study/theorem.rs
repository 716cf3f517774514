//! By what a statement is proved: the theorem, its hypotheses, and how each was checked for this table. And for what is not
//! proved, what no finite data can tell.

use super::verdict::{CRITERION_SOURCE, CUBIC_SOURCE, Evidence};
use crate::table::facts::{Angle, ReflectionGroup};
use serde::Serialize;

/// A theorem as it was applied.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct Theorem {
    /// What it says.
    pub says: String,
    /// Where it is published, or `elementary` with the argument in `says`.
    pub source: String,
    /// Its hypotheses.
    pub hypotheses: Vec<Hypothesis>,
}

/// A hypothesis of a theorem.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct Hypothesis {
    /// What is asked for.
    pub asks: String,
    /// How it was checked for this table.
    pub checked: String,
}

fn hypothesis(asks: impl Into<String>, checked: impl Into<String>) -> Hypothesis {
    Hypothesis {
        asks: asks.into(),
        checked: checked.into(),
    }
}

fn simple(evidence: &Evidence<'_>) -> Hypothesis {
    let k = evidence.facts.angles.len();
    hypothesis(
        "the table is a simple polygon",
        format!(
            "every pair of its {k} sides was compared exactly when the file was read; it has no holes"
        ),
    )
}

fn convex(evidence: &Evidence<'_>) -> Hypothesis {
    let k = evidence.facts.angles.len();
    hypothesis(
        "the table is convex",
        format!("the cross products of the sides at its {k} corners are positive, by exact signs"),
    )
}

fn rational(evidence: &Evidence<'_>) -> Hypothesis {
    let angles: Vec<String> = evidence.facts.angles.iter().map(Angle::describe).collect();
    let order = match evidence.facts.group {
        ReflectionGroup::Finite { r } => format!("; the reflection group has order {}", 2 * r),
        ReflectionGroup::Infinite => String::new(),
    };
    hypothesis(
        "every angle is a rational multiple of π",
        format!(
            "for each corner an exact power of the rotation by twice its angle is 1: {}{order}",
            angles.join(", ")
        ),
    )
}

fn letters(evidence: &Evidence<'_>) -> Hypothesis {
    let k = evidence.facts.angles.len();
    hypothesis(
        "every side has a letter of its own",
        format!("the {k} sides have {k} different letters"),
    )
}

fn theorem(says: &str, source: &str, hypotheses: Vec<Hypothesis>) -> Theorem {
    Theorem {
        says: says.into(),
        source: source.into(),
        hypotheses,
    }
}

/// The theorem behind a proved statement.
///
/// # Panics
/// If no theorem is known for the statement: then it must not be called proved.
pub fn behind(id: &str, evidence: &Evidence<'_>) -> Theorem {
    let convex_rational = || vec![convex(evidence), rational(evidence), letters(evidence)];
    match id {
        "factorial" => theorem(
            "a stretch of a corner-free orbit is the stretch of a corner-free orbit",
            "elementary, by the definition of the language",
            vec![hypothesis(
                "the language is that of corner-free orbits",
                "by construction",
            )],
        ),
        "prolongable" => theorem(
            "the lines of a beam that meet a corner form countably many curves, so almost every line goes on for ever both ways",
            "elementary",
            vec![hypothesis(
                "each word is met by a beam of positive measure",
                "a cell of the walk is kept only with interior, by exact signs",
            )],
        ),
        "subexponential" => {
            let mut hypotheses = vec![simple(evidence)];
            if !evidence.coding.distinct_letters {
                hypotheses.push(hypothesis(
                    "every side has a letter of its own",
                    "not so here; sharing letters maps words to words and makes no more of them",
                ));
            }
            theorem(
                "p(n) grows more slowly than every exponential",
                "A. Katok, Comm. Math. Phys. 111 (1987)",
                hypotheses,
            )
        }
        "cubic_bounds" => theorem("c₁n³ ≤ p(n) ≤ c₂n³", CUBIC_SOURCE, convex_rational()),
        "growth_exponent" => theorem(
            "c₁n³ ≤ p(n) ≤ c₂n³, so log p(n)/log n → 3",
            CUBIC_SOURCE,
            convex_rational(),
        ),
        "sufficient_small" | "sufficient_bounds" => theorem(
            "p(n) ≥ c₁n³ with c₁ > 0, which contradicts the condition",
            CUBIC_SOURCE,
            convex_rational(),
        ),
        "sufficient_asymptotic" => theorem(
            "p(n) ~ c·n³ for tables whose reflected copies tile the plane",
            CUBIC_SOURCE,
            vec![
                hypothesis(
                    "every angle is π divided by an integer",
                    rational(evidence).checked,
                ),
                letters(evidence),
            ],
        ),
        "limit_constant" => {
            let known = evidence.growth.known_constant.as_ref();
            let (table, source) = known.map_or(("", ""), |known| (known.table, known.source));
            theorem(
                "the limit of p(n)/n³",
                source,
                vec![
                    hypothesis("the shape of the table", table),
                    letters(evidence),
                ],
            )
        }
        "diagonals_quadratic" => theorem(
            "the generalized diagonals up to length L number between two multiples of L²; a segment that crosses n sides is at most n + 1 diameters long, and one of length L crosses at most a multiple of L + 1 sides",
            "H. Masur (1988, 1990)",
            vec![simple(evidence), rational(evidence)],
        ),
        "ratio_criterion" if evidence.constant_from().is_some() => constant(evidence),
        "ratio_criterion" => theorem(
            "s(n) = O(n²) because s counts generalized diagonals, whose number is quadratic in the length (Masur 1988, 1990), and p(n) ≥ c₁n³",
            CUBIC_SOURCE,
            convex_rational(),
        ),
        "line_limit" => theorem(
            "for a factorial, prolongable language of subexponential complexity the factor graphs converge to the line exactly when p(n+1)/p(n) → 1",
            CRITERION_SOURCE,
            [
                "factorial",
                "prolongable",
                "of subexponential complexity",
                "p(n+1)/p(n) → 1",
            ]
            .map(|asks| hypothesis(asks, "proved above, with its own hypotheses"))
            .into(),
        ),
        other => unreachable!("{other} is called proved, and no theorem is named for it"),
    }
}

fn constant(evidence: &Evidence<'_>) -> Theorem {
    let n = evidence.constant_from().unwrap_or(0);
    theorem(
        "where p(n+1) = p(n) every word of length n or more extends in one way only, and p is constant",
        "elementary",
        vec![hypothesis(
            "p(n+1) = p(n) for some n",
            format!("computed: p({}) = p({n})", n + 1),
        )],
    )
}

/// What no finite data can tell about a statement, in one sentence. `None` when the question does not arise.
pub fn cannot_decide(id: &str) -> Option<&'static str> {
    Some(match id {
        "subexponential" => {
            "Finite counts cannot tell subexponential growth from an exponential with a base just above 1."
        }
        "cubic_bounds" => {
            "Finite counts cannot tell a bounded p(n)/n³ from one that grows as slowly as log log n, or that falls to 0 as slowly."
        }
        "growth_exponent" => {
            "Finite counts cannot tell a power of n from a power times a slowly varying factor, nor exclude that the exponent changes later."
        }
        "second_order" => {
            "Finite counts cannot tell a term of order n² from one of order n² log n, nor from an oscillation of a longer period than the study."
        }
        "limit_estimate" | "limit_constant" | "sufficient_asymptotic" => {
            "Finite counts cannot tell convergence of p(n)/n³ from oscillation that is slower than the study is long."
        }
        "sufficient_small" => {
            "Finite counts cannot exclude that the growth falls below n^(4/3) beyond the study."
        }
        "sufficient_bounds" => {
            "Finite counts cannot exclude that the growth falls below n^(3/2) beyond the study."
        }
        "diagonals_quadratic" => {
            "Finite counts of generalized diagonals cannot tell quadratic growth from n² log n, nor exclude that it changes later."
        }
        "ratio_criterion" => {
            "Finite counts cannot exclude that p(n+1)/p(n) jumps, or stops jumping, beyond the study."
        }
        "line_limit" => {
            "Finitely many factor graphs cannot decide their limit: a language can agree with this one to any length and branch everywhere later."
        }
        "claim" => "Nothing is known about the n that were not computed.",
        _ => return None,
    })
}
