//! The growth part of a verdict: running extremes, exponents with their uncertainty, second-order behaviour, the limit of p(n)/n³ beside
//! what is known of it, and generalized diagonals beside quadratic growth.
//!
//! A figure is never more than a trend. It becomes a theorem only for tables that satisfy the theorem's
//! hypotheses, checked exactly; a known constant is compared with the estimate whether or not the convergence is proved.

use super::statement::{Standing, Statement};
use super::verdict::{CUBIC_FROM, CUBIC_SOURCE, Evidence, statement};
use crate::complexity::constant::KnownConstant;
use crate::complexity::estimate::{
    self, ExponentEstimate, Extreme, LimitEstimate, SHORTEST_ESTIMATE, Window,
};
use serde::Serialize;

/// Estimates from p and N, and what is known from outside.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct GrowthFigures {
    /// New smallest and largest values of p(n)/n³, from n = 4.
    pub running_extremes: Vec<Extreme>,
    /// Dyadic windows, the last first.
    pub windows: Vec<Window>,
    /// The exponent of p; null for a short study.
    pub exponent: Option<ExponentEstimate>,
    /// The limit of p(n)/n³; null for a short study.
    pub limit: Option<LimitEstimate>,
    /// The limit, where it is known from outside.
    pub known_constant: Option<KnownConstant>,
}

impl GrowthFigures {
    /// The figures of p(0), …, p(N) and N(0), …
    pub fn new(
        p: &[u64],
        diagonals: Option<&[u64]>,
        known: Option<KnownConstant>,
    ) -> GrowthFigures {
        let last = p.len() - 1;
        GrowthFigures {
            running_extremes: estimate::running_extremes(p, CUBIC_FROM),
            windows: estimate::windows(p, diagonals, CUBIC_FROM),
            exponent: estimate::exponent(p, last),
            limit: estimate::limit(p, last),
            known_constant: known,
        }
    }
}

/// What the error and the uncertainty mean, for readers.
pub const ERROR_MEANS: &str = "the largest distance to five other fits (the half before, both halves, both halves with a term in 1/n², and n^(−2/3) and n^(−3/2) in the place of 1/n) plus the root mean square of the residuals: how much the answer depends on the model, not a confidence interval";

/// What the uncertainty of the exponent means, for readers.
pub const UNCERTAINTY_MEANS: &str = "the difference between the slopes over the last half and over the quarter before it, plus half the range of log₂(p(2n)/p(n)), plus the residuals divided by the spread of log n: drift and oscillation inside the study, not a confidence interval";

const TOO_SHORT: &str = "an estimate needs words of length 16 at least";

/// The statements on growth beyond the cubic bounds.
pub fn statements(evidence: &Evidence<'_>) -> Vec<Statement> {
    let figures = evidence.growth;
    let mut all = Vec::new();
    all.extend(extremes(evidence));
    all.push(exponent(evidence));
    all.push(second_order(figures));
    all.push(limit_estimate(figures));
    if let Some(known) = &figures.known_constant {
        all.push(limit_constant(known));
        all.push(reproduced(known, figures, evidence.longest()));
    }
    all.push(diagonals(evidence));
    all
}

fn extremes(evidence: &Evidence<'_>) -> Option<Statement> {
    let last = |largest: bool| {
        let all = evidence.growth.running_extremes.iter();
        all.rev().find(|e| e.largest == largest)
    };
    let (low, high) = (last(false)?, last(true)?);
    Some(statement(
        "running_extremes",
        format!(
            "from n = {CUBIC_FROM} on p(n)/n³ was last smaller than ever before at n = {}, and last larger at n = {}",
            low.n, high.n
        ),
        Standing::Computed,
        Some(evidence.longest()),
        "the running extremes of exact counts, compared in integers; all of them are in study.json",
    ))
}

fn exponent(evidence: &Evidence<'_>) -> Statement {
    let id = "growth_exponent";
    let figures = match &evidence.growth.exponent {
        Some(e) => format!(
            "the fit over {} ≤ n ≤ {} gives {:.4} ± {:.4}, and log₂(p(2n)/p(n)) lies between {:.4} and {:.4} there; the uncertainty is {UNCERTAINTY_MEANS}",
            e.from, e.to, e.exponent, e.uncertainty, e.local_smallest, e.local_largest
        ),
        None => TOO_SHORT.into(),
    };
    if evidence.is_convex_rational() {
        let claim = "log p(n)/log n → 3";
        let grounds = format!("by the cubic bounds, {CUBIC_SOURCE}; {figures}");
        return statement(id, claim, Standing::Proved, None, grounds);
    }
    match &evidence.growth.exponent {
        Some(e) => statement(
            id,
            format!(
                "p(n) grows like n^e with e = {:.4} ± {:.4}",
                e.exponent, e.uncertainty
            ),
            Standing::Trend,
            None,
            figures,
        ),
        None => statement(
            id,
            "p(n) grows like a power of n",
            Standing::NotDecided,
            None,
            figures,
        ),
    }
}

fn second_order(figures: &GrowthFigures) -> Statement {
    let id = "second_order";
    let (Some(limit), Some(window)) = (&figures.limit, figures.windows.first()) else {
        let claim = "p(n) ≈ a·n³ + b·n²";
        return statement(id, claim, Standing::NotDecided, None, TOO_SHORT);
    };
    let bends = window.curvature.map_or(String::new(), |c| {
        format!("; the mean of b(n)/(6n), which is a for a cubic, is {c:.6} over the last half")
    });
    statement(
        id,
        format!(
            "p(n) ≈ a·n³ + b·n² with a = {:.6} and b = {:.4}",
            limit.limit, limit.second_order
        ),
        Standing::Trend,
        None,
        format!(
            "least squares of p(n)/n³ against 1/n over {} ≤ n ≤ {}; the residuals have root mean square {:.1e}{bends}",
            limit.from, limit.to, limit.residual
        ),
    )
}

fn limit_estimate(figures: &GrowthFigures) -> Statement {
    let id = "limit_estimate";
    match &figures.limit {
        None => statement(
            id,
            "if p(n)/n³ has a limit, the data tell where it is",
            Standing::NotDecided,
            None,
            TOO_SHORT,
        ),
        Some(limit) => statement(
            id,
            format!(
                "if p(n)/n³ has a limit, it is {:.6} ± {:.6}",
                limit.limit, limit.error
            ),
            Standing::Trend,
            None,
            format!(
                "the fit a + b/n over {} ≤ n ≤ {}; the error is {ERROR_MEANS}",
                limit.from, limit.to
            ),
        ),
    }
}

fn limit_constant(known: &KnownConstant) -> Statement {
    let (claim, standing) = match known.proved {
        true => (
            format!(
                "p(n)/n³ → {} = {:.6}…",
                known.text,
                (known.value * 1e6).floor() / 1e6
            ),
            Standing::Proved,
        ),
        false => (format!("p(n)/n³ → {}", known.text), Standing::NotDecided),
    };
    let open = match known.proved {
        true => "",
        false => "; no theorem known to this program says that the limit exists",
    };
    statement(
        "limit_constant",
        claim,
        standing,
        None,
        format!("{}; checked exactly: {}{open}", known.source, known.table),
    )
}

fn reproduced(known: &KnownConstant, figures: &GrowthFigures, longest: usize) -> Statement {
    let id = "constant_reproduced";
    let claim = "the estimate of the limit agrees with the known value within its error";
    let Some(limit) = &figures.limit else {
        return statement(id, claim, Standing::NotDecided, None, TOO_SHORT);
    };
    let off = (limit.limit - known.value).abs();
    let standing = match off <= limit.error + known.slack {
        true => Standing::Computed,
        false => Standing::Violated,
    };
    let grounds = format!(
        "{:.6} ± {:.6} beside {}: {off:.6} apart",
        limit.limit, limit.error, known.text
    );
    statement(id, claim, standing, Some(longest), grounds)
}

fn diagonals(evidence: &Evidence<'_>) -> Statement {
    let id = "diagonals_quadratic";
    let claim = "c₁n² ≤ N(0) + … + N(n) ≤ c₂n² for some positive c₁, c₂ and all large n";
    let ranges: Vec<_> = (evidence.growth.windows.iter())
        .filter_map(|w| Some((w.quotient.from, w.quotient.to, w.diagonals_over_square?)))
        .collect();
    let figures = match ranges.first() {
        Some((from, to, (low, high))) => format!(
            "(N(0) + … + N(n))/n² lies between {low:.4} and {high:.4} for {from} ≤ n ≤ {to}"
        ),
        None => "the study is too short for figures".into(),
    };
    if evidence.is_rational() && !evidence.coding.holes {
        return statement(
            id,
            claim,
            Standing::Proved,
            None,
            format!(
                "quadratic bounds by length in rational polygons (Masur 1988, 1990), and length and number of sides crossed bound each other; checked exactly: a simple polygon, every angle a rational multiple of π; {figures}"
            ),
        );
    }
    // Two windows that overlap after a quarter's slack look the same; one that leaves the other does not.
    let steady = match ranges[..] {
        [(.., (low, high)), (.., (low_before, high_before)), ..] => {
            evidence.longest() >= SHORTEST_ESTIMATE
                && low > 0.75 * low_before
                && high < 1.25 * high_before
        }
        _ => false,
    };
    let why = if evidence.coding.holes {
        "this program relies on Masur's bounds for simple polygons only, and the table has holes"
    } else {
        "Masur's bounds do not apply: not every angle is a rational multiple of π"
    };
    let standing = match steady {
        true => Standing::Trend,
        false => Standing::NotDecided,
    };
    statement(id, claim, standing, None, format!("{why}; {figures}"))
}
