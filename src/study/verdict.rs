//! What a study says, and how firmly.
//!
//! Every statement has one standing. *Proved*: by a named theorem whose hypotheses this program checked
//! exactly for this table (or by the definition). *Computed*: exact for every n up to the length of the study.
//! *Trend*: figures that suggest it and prove nothing. *Not decided*: neither. *Violated*: computed to be
//! false at a named n.

use super::growth::{self, GrowthFigures};
use super::statement::{Standing, Statement};
use super::theorem;
use super::trend::{RatioTrend, ratio_trend};
use crate::complexity::growth::{CubicRange, cubic_range, local_exponent};
use crate::factor_graph::criterion::LineFigures;
use crate::table::Table;
use crate::table::facts::{Facts, ReflectionGroup};

/// What about the coding decides which theorems apply.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct Coding {
    /// Every side has a letter of its own.
    pub distinct_letters: bool,
    /// The table has holes.
    pub holes: bool,
}

impl Coding {
    /// That of a table.
    pub fn of(table: &Table) -> Coding {
        Coding {
            distinct_letters: table.has_distinct_letters(),
            holes: table.holes() > 0,
        }
    }

    /// True when each word is one beam.
    pub fn has_one_beam_a_word(self) -> bool {
        self.distinct_letters && !self.holes
    }

    /// Why words are bundles of beams.
    pub fn why_bundles(self) -> &'static str {
        match (self.distinct_letters, self.holes) {
            (true, true) => "the table has holes",
            (false, true) => "sides share letters and the table has holes",
            (false, false) => "sides share letters",
            (true, false) => "nothing",
        }
    }
}

/// What the verdict is drawn from.
#[derive(Clone, Copy, Debug)]
pub struct Evidence<'a> {
    /// Proved facts about the table.
    pub facts: &'a Facts,
    /// The coding.
    pub coding: Coding,
    /// p(0), …, p(N).
    pub p: &'a [u64],
    /// The first n where the two routes differ.
    pub disagreement: Option<usize>,
    /// The first n where the measure sum fails.
    pub measure_fault: Option<usize>,
    /// True when every word was seen to extend both ways.
    pub bi_extendable: bool,
    /// The first length with a word whose reversal is missing.
    pub reversal_fault: Option<usize>,
    /// Line figures for the orders 1 … N − 1.
    pub line: &'a [LineFigures],
    /// Estimates from p and N, and what is known from outside.
    pub growth: &'a GrowthFigures,
}

/// Where the ranges of p(n)/n³ start: below, p is dominated by the number of sides.
pub const CUBIC_FROM: usize = 4;

impl Evidence<'_> {
    pub(super) fn longest(&self) -> usize {
        self.p.len() - 1
    }

    pub(super) fn is_rational(&self) -> bool {
        matches!(self.facts.group, ReflectionGroup::Finite { .. })
    }

    /// Convex and rational, every side with a letter of its own: what the theorems on cubic growth ask for.
    pub(super) fn is_convex_rational(&self) -> bool {
        self.facts.convex && self.is_rational() && self.coding.distinct_letters
    }

    /// Why the theorems for convex rational tables do not apply.
    pub(super) fn missing(&self) -> String {
        let mut reasons = Vec::new();
        if !self.facts.convex {
            reasons.push(if self.coding.holes {
                "the table has holes"
            } else {
                "the table is not convex"
            });
        }
        if !self.is_rational() {
            reasons.push("not every angle is a rational multiple of π");
        }
        if !self.coding.distinct_letters {
            reasons.push("sides share letters");
        }
        reasons.join(", and ")
    }

    /// The first n from which on p is constant: where p(n+1) = p(n) every word of length n extends in one way only.
    pub(super) fn constant_from(&self) -> Option<usize> {
        (1..self.longest()).find(|&n| self.p[n + 1] == self.p[n])
    }

    /// The range of p(n)/n³ over the whole study.
    pub fn range(&self) -> Option<CubicRange> {
        cubic_range(self.p, CUBIC_FROM, self.longest())
    }
}

pub(super) const CUBIC_SOURCE: &str =
    "Cassaigne, Hubert, Troubetzkoy, Ann. Inst. Fourier 52 (2002) 835–847";
pub(super) const CRITERION_SOURCE: &str = "arXiv 2402.15877";
const CHECKED_CONVEX_RATIONAL: &str =
    "checked exactly: convex, every angle a rational multiple of π, every side a letter of its own";
const CHECKED_INTEGRABLE: &str =
    "checked exactly: every angle is π divided by an integer, so reflected copies tile the plane";

const SMALL_CLAIM: &str = "p(n) = o(n^(4/3))";
const BOUNDS_CLAIM: &str = "c₁nᵃ ≤ p(n) ≤ c₂nᵃ with a < 3/2";

pub(super) fn statement(
    id: &'static str,
    claim: impl Into<String>,
    standing: Standing,
    at: Option<usize>,
    grounds: impl Into<String>,
) -> Statement {
    Statement {
        id,
        claim: claim.into(),
        standing,
        holds: match standing {
            Standing::Proved | Standing::Computed | Standing::Trend => Some(true),
            Standing::NotDecided => None,
            Standing::Violated => Some(false),
        },
        at,
        grounds: grounds.into(),
        theorem: None,
        cannot_decide: None,
    }
}

/// All statements of a study, checks of the computation first.
pub fn verdict(evidence: &Evidence<'_>) -> Vec<Statement> {
    let mut all = checks(evidence);
    all.extend(language_laws(evidence));
    all.extend(cubic_growth(evidence));
    all.extend(growth::statements(evidence));
    all.extend(sufficient_conditions(evidence));
    all.extend(line_limit(evidence));
    for statement in &mut all {
        match statement.standing {
            Standing::Proved => statement.theorem = Some(theorem::behind(statement.id, evidence)),
            Standing::Trend | Standing::NotDecided => {
                statement.cannot_decide = theorem::cannot_decide(statement.id);
            }
            Standing::Computed | Standing::Violated => {}
        }
    }
    all
}

fn computed_or_violated(
    id: &'static str,
    claim: &str,
    fault: Option<usize>,
    to: usize,
    grounds: &str,
) -> Statement {
    let (standing, at) = match fault {
        Some(n) => (Standing::Violated, n),
        None => (Standing::Computed, to),
    };
    statement(id, claim, standing, Some(at), grounds)
}

fn checks(evidence: &Evidence<'_>) -> Vec<Statement> {
    let longest = evidence.longest();
    let routes_claim = "p(n) counted by beams equals p(n) counted by generalized diagonals";
    let routes = if evidence.coding.has_one_beam_a_word() {
        computed_or_violated(
            "routes_agree",
            routes_claim,
            evidence.disagreement,
            longest,
            "two routes without common counting code, compared value by value",
        )
    } else {
        statement(
            "routes_agree",
            routes_claim,
            Standing::NotDecided,
            None,
            format!(
                "not applicable: {}, so a word is a bundle of beams, and generalized diagonals count beams; p(n) was counted by beams alone",
                evidence.coding.why_bundles()
            ),
        )
    };
    vec![
        routes,
        computed_or_violated(
            "measure_sum",
            "the cylinder measures of the words of length n sum to 2·perimeter",
            evidence.measure_fault,
            longest,
            "certified enclosures no wider than 10⁻³⁰ of 2·perimeter that share a point; a missing word would break the sum",
        ),
        computed_or_violated(
            "branch_bound",
            "the share of words with a special word nearer than r is at most (6r − 4)·s(n)/p(n)",
            evidence
                .line
                .iter()
                .find(|f| !f.within_bound)
                .map(|f| f.order),
            longest.saturating_sub(1),
            "compared in integers for every order and radius of the study; an elementary count, true of every bi-extendable language",
        ),
    ]
}

fn language_laws(evidence: &Evidence<'_>) -> Vec<Statement> {
    let longest = evidence.longest();
    let prolongable = if evidence.bi_extendable {
        statement(
            "prolongable",
            "every word extends to the left and to the right",
            Standing::Proved,
            None,
            format!(
                "the lines of a beam that meet a corner form countably many curves, so most go on for ever both ways; also seen for every word shorter than {longest}"
            ),
        )
    } else {
        computed_or_violated(
            "prolongable",
            "every word extends to the left and to the right",
            Some(longest),
            longest,
            "a word without extension was found, which no billiard language has",
        )
    };
    vec![
        statement(
            "factorial",
            "every factor of a word is a word",
            Standing::Proved,
            None,
            format!(
                "a stretch of a corner-free orbit is one; also seen for every word to length {longest}, by its suffix link"
            ),
        ),
        prolongable,
        computed_or_violated(
            "reversible",
            "the language is closed under reversal",
            evidence.reversal_fault,
            longest,
            "every reversed word was looked up",
        ),
        subexponential(evidence),
    ]
}

fn subexponential(evidence: &Evidence<'_>) -> Statement {
    let (standing, grounds) = if evidence.coding.holes {
        (
            Standing::NotDecided,
            "this program relies on Katok, Comm. Math. Phys. 111 (1987), for simple polygons only, and the table has holes",
        )
    } else if evidence.coding.distinct_letters {
        (
            Standing::Proved,
            "Katok, Comm. Math. Phys. 111 (1987), for every polygon; checked exactly: the table is a simple polygon",
        )
    } else {
        (
            Standing::Proved,
            "Katok, Comm. Math. Phys. 111 (1987), for every polygon with a letter of its own for each side, and sharing letters makes no more words; checked exactly: the table is a simple polygon",
        )
    };
    statement(
        "subexponential",
        "p(n) grows more slowly than every exponential",
        standing,
        None,
        grounds,
    )
}

fn cubic_growth(evidence: &Evidence<'_>) -> Vec<Statement> {
    let longest = evidence.longest();
    let bounds = if evidence.is_convex_rational() {
        statement(
            "cubic_bounds",
            "c₁n³ ≤ p(n) ≤ c₂n³ for some positive c₁, c₂ and all large n",
            Standing::Proved,
            None,
            format!("{CUBIC_SOURCE}; {CHECKED_CONVEX_RATIONAL}"),
        )
    } else {
        statement(
            "cubic_bounds",
            "c₁n³ ≤ p(n) ≤ c₂n³ for some positive c₁, c₂ and all large n",
            Standing::NotDecided,
            None,
            format!(
                "the theorem for convex rational tables does not apply: {}",
                evidence.missing()
            ),
        )
    };
    let mut all = vec![bounds];
    if let Some(range) = evidence.range() {
        all.push(statement(
            "cubic_range",
            format!(
                "{:.6} ≤ p(n)/n³ ≤ {:.6} for {} ≤ n ≤ {}, with equality up to rounding at n = {} and n = {}",
                floor6(range.smallest), ceil6(range.largest), range.from, range.to, range.smallest_at, range.largest_at
            ),
            Standing::Computed,
            Some(longest),
            "extremes of exact counts, compared in integers",
        ));
    }
    if longest >= 4 {
        let n = longest / 2;
        all.push(statement(
            "local_exponent",
            format!(
                "log₂(p({})/p({n})) = {:.4}",
                2 * n,
                local_exponent(evidence.p, n)
            ),
            Standing::Computed,
            Some(2 * n),
            format!(
                "the local exponent at n = {n}; at n = {} it is {:.4}",
                (n / 2).max(1),
                local_exponent(evidence.p, (n / 2).max(1))
            ),
        ));
    }
    all
}

fn floor6(x: f64) -> f64 {
    (x * 1e6).floor() / 1e6
}

fn ceil6(x: f64) -> f64 {
    (x * 1e6).ceil() / 1e6
}

/// The three conditions of arXiv 2402.15877 that each imply the line limit.
fn sufficient_conditions(evidence: &Evidence<'_>) -> Vec<Statement> {
    if let Some(n) = evidence.constant_from() {
        let open = |id, claim: &str| {
            let grounds = format!(
                "not applied: p is constant from n = {n} on, and the factor graphs are cycles of one size"
            );
            statement(id, claim, Standing::NotDecided, None, grounds)
        };
        return vec![
            open("sufficient_small", SMALL_CLAIM),
            open("sufficient_bounds", BOUNDS_CLAIM),
            open("sufficient_asymptotic", "p(n) ~ c·nᵃ for some c and a"),
        ];
    }
    let exponent =
        (evidence.longest() >= 4).then(|| local_exponent(evidence.p, evidence.longest() / 2));
    let too_fast = |id, claim: &str, least: f64| {
        if evidence.is_convex_rational() {
            return statement(
                id,
                claim,
                Standing::Proved,
                None,
                format!("p(n) ≥ c₁n³ with c₁ > 0: {CUBIC_SOURCE}; {CHECKED_CONVEX_RATIONAL}"),
            )
            .negated();
        }
        match exponent {
            Some(e) if e > least + 0.5 => statement(
                id,
                claim,
                Standing::Trend,
                None,
                format!(
                    "the local exponent at the end of the study is {e:.4}, well above {least:.4}"
                ),
            )
            .negated(),
            _ => statement(
                id,
                claim,
                Standing::NotDecided,
                None,
                "the study is too short for its exponent to suggest an answer",
            ),
        }
    };
    let asymptotic = if evidence.facts.integrable && evidence.coding.distinct_letters {
        statement(
            "sufficient_asymptotic",
            "p(n) ~ c·nᵃ for some c and a (here a = 3)",
            Standing::Proved,
            None,
            format!("cubic asymptotics of tables that tile, {CUBIC_SOURCE}; {CHECKED_INTEGRABLE}"),
        )
    } else {
        let figures = evidence
            .range()
            .map(|_| drift(evidence.p))
            .unwrap_or_default();
        statement(
            "sufficient_asymptotic",
            "p(n) ~ c·nᵃ for some c and a",
            Standing::NotDecided,
            None,
            format!(
                "no theorem known to this program gives a limit of p(n)/n³ for this table{figures}"
            ),
        )
    };
    vec![
        too_fast("sufficient_small", SMALL_CLAIM, 4.0 / 3.0),
        too_fast("sufficient_bounds", BOUNDS_CLAIM, 1.5),
        asymptotic,
    ]
}

/// How much p(n)/n³ moved over the last half of the study.
fn drift(p: &[u64]) -> String {
    let last = p.len() - 1;
    let half = last / 2;
    match cubic_range(p, half.max(1), last) {
        Some(range) => format!(
            "; over {} ≤ n ≤ {} the quotient p(n)/n³ lies between {:.6} and {:.6}",
            range.from,
            range.to,
            floor6(range.smallest),
            ceil6(range.largest)
        ),
        None => String::new(),
    }
}

fn line_limit(evidence: &Evidence<'_>) -> Vec<Statement> {
    let ratio_claim = "p(n+1)/p(n) → 1";
    let line_claim = "the factor graphs converge locally (Benjamini–Schramm) to the line";
    if evidence.is_convex_rational() {
        return vec![
            statement(
                "ratio_criterion",
                ratio_claim,
                Standing::Proved,
                None,
                format!(
                    "s(n) = O(n²), because s(n) − s(1) = N(1) + … + N(n−1) counts generalized diagonals, those crossing at most n sides have length O(n), and their number is quadratic in the length (Masur 1988, 1990); p(n) ≥ c₁n³ ({CUBIC_SOURCE}); so s(n)/p(n) = O(1/n); {CHECKED_CONVEX_RATIONAL}"
                ),
            ),
            statement(
                "line_limit",
                line_claim,
                Standing::Proved,
                None,
                format!(
                    "the ratio criterion of {CRITERION_SOURCE} for factorial, prolongable languages of subexponential complexity, all proved above"
                ),
            ),
        ];
    }
    if let Some(n) = evidence.constant_from() {
        return vec![
            statement(
                "ratio_criterion",
                ratio_claim,
                Standing::Proved,
                None,
                format!(
                    "p({}) = p({n}), so every word of length {n} or more extends in one way only, and p is constant",
                    n + 1
                ),
            ),
            statement(
                "line_limit",
                line_claim,
                Standing::Violated,
                Some(n),
                format!(
                    "p is constant from n = {n} on, so all later factor graphs are cycles of the same finite sizes"
                ),
            ),
        ];
    }
    let trend = ratio_trend(evidence.line);
    let (standing, figures) = match &trend {
        RatioTrend::Falls(figures) | RatioTrend::Stays(figures) => {
            (Standing::Trend, figures.as_str())
        }
        RatioTrend::Unclear => (
            Standing::NotDecided,
            "the figures of this study do not suggest an answer",
        ),
    };
    let told = |statement: Statement| match trend {
        RatioTrend::Stays(_) => statement.negated(),
        _ => statement,
    };
    vec![
        told(statement(
            "ratio_criterion",
            ratio_claim,
            standing,
            None,
            format!("no theorem applies: {}; {figures}", evidence.missing()),
        )),
        told(statement(
            "line_limit",
            line_claim,
            standing,
            None,
            if evidence.coding.holes {
                format!(
                    "equivalent to the ratio criterion ({CRITERION_SOURCE}) if the language, which is factorial and prolongable, is subexponential; {figures}"
                )
            } else {
                format!(
                    "equivalent to the ratio criterion ({CRITERION_SOURCE}), since the language is factorial, prolongable and subexponential; {figures}"
                )
            },
        )),
    ]
}
