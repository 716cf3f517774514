//! What a finite piece of p(n) suggests about its growth, and how far the suggestion can be trusted.
//!
//! Nothing here proves anything. Three questions are answered in floating point from exact counts:
//!
//! - **Exponent.** The slope of log p(n) against log n over the last three quarters of the lengths by least squares
//!   ([`exponent`]). Its uncertainty is the sum of three parts: the difference between the slopes over the last half and over the
//!   quarter before it; half the range of the local exponents log₂(p(2n)/p(n)) whose n and 2n both lie in the fitted range;
//!   and the root mean square of the residuals of the fit divided by the spread of log n. The first two see drift, the third
//!   oscillation. It is no confidence interval: a factor that varies as slowly as log n stays invisible.
//! - **Limit of p(n)/n³** ([`limit`]). The fit a + b/n over the last half of the lengths gives the estimate a and
//!   the second-order coefficient b of p(n) ≈ a·n³ + b·n². The error is the largest distance from a of
//!   five other fits (the half before, both halves, both halves with a further term c/n², the last half with
//!   n^(−2/3) and with n^(−3/2) in the place of 1/n), plus the root mean square of the residuals. It says how much the estimate depends
//!   on the model; if the true correction dies out more slowly than n^(−2/3), the truth may lie outside.
//! - **Windows** ([`windows`]). The same quantities over dyadic windows (N/2, N], (N/4, N/2], …, so that a reader
//!   sees whether they settle.
//!
//! Confidence intervals were considered and rejected: p(n) is not random, and its deviations from a fit are neither
//! independent nor centred. Cost: linear in N for each fit.

use super::growth::{CubicRange, cubic_range, over_cube};
use serde::Serialize;

/// The shortest data from which a limit or an exponent is estimated.
pub const SHORTEST_ESTIMATE: usize = 16;

/// A growth exponent with its uncertainty; see the module for what it means.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct ExponentEstimate {
    /// First n of the fit.
    pub from: usize,
    /// Last n of the fit.
    pub to: usize,
    /// Slope of log p(n) against log n.
    pub exponent: f64,
    /// Drift of the slope, half the range of the local exponents and the part of the residuals, added.
    pub uncertainty: f64,
    /// Difference between the slopes over the last half and over the quarter before it.
    pub drift: f64,
    /// Smallest log₂(p(2n)/p(n)) with n and 2n in the range.
    pub local_smallest: f64,
    /// Largest of them.
    pub local_largest: f64,
    /// Root mean square of the residuals of log p(n).
    pub residual: f64,
}

/// An estimate of lim p(n)/n³ with its error; see the module for what it means.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct LimitEstimate {
    /// First n of the main fit.
    pub from: usize,
    /// Last n of the fits.
    pub to: usize,
    /// The estimate.
    pub limit: f64,
    /// Largest distance to another fit, plus the residual.
    pub error: f64,
    /// The b of a + b/n: p(n) ≈ a·n³ + b·n².
    pub second_order: f64,
    /// Root mean square of the residuals of p(n)/n³.
    pub residual: f64,
    /// The five other fits, in the order of the module's description.
    pub other_fits: [f64; 5],
}

/// What is seen over one dyadic window.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct Window {
    /// Extremes of p(n)/n³.
    pub quotient: CubicRange,
    /// Slope of log p(n) against log n over the window.
    pub exponent: f64,
    /// Root mean square of the residuals of that fit.
    pub residual: f64,
    /// Mean of b(n)/(6n): the cubic coefficient that the second differences show.
    pub curvature: Option<f64>,
    /// Smallest and largest (N(0) + … + N(n))/n²; null without generalized diagonals.
    pub diagonals_over_square: Option<(f64, f64)>,
}

/// A new smallest or largest value of p(n)/n³.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct Extreme {
    /// Where it is attained.
    pub n: usize,
    /// True for a new largest value, false for a new smallest one.
    pub largest: bool,
    /// p(n)/n³.
    pub quotient: f64,
}

/// Least squares of y against 1, x, x², …: the coefficients and the root mean square of the residuals.
///
/// Columns are scaled by the caller so that |x| is about 1. Elimination with pivots ends because the normal
/// matrix of distinct x is positive definite.
fn least_squares(points: &[(f64, f64)], terms: usize) -> (Vec<f64>, f64) {
    let powers = |x: f64| (0..terms).map(move |j| x.powi(j as i32));
    let mut matrix = vec![vec![0.0; terms + 1]; terms];
    for &(x, y) in points {
        let row: Vec<f64> = powers(x).collect();
        for i in 0..terms {
            for j in 0..terms {
                matrix[i][j] += row[i] * row[j];
            }
            matrix[i][terms] += row[i] * y;
        }
    }
    for i in 0..terms {
        let pivot = (i..terms)
            .max_by(|&a, &b| matrix[a][i].abs().total_cmp(&matrix[b][i].abs()))
            .expect("a row is left");
        matrix.swap(i, pivot);
        let leading = matrix[i].clone();
        for (k, row) in matrix.iter_mut().enumerate() {
            if k != i {
                let factor = row[i] / leading[i];
                (row.iter_mut().zip(&leading)).for_each(|(a, b)| *a -= factor * b);
            }
        }
    }
    let coefficients: Vec<f64> = (0..terms)
        .map(|i| matrix[i][terms] / matrix[i][i])
        .collect();
    let square = |&(x, y): &(f64, f64)| {
        let fitted: f64 = powers(x).zip(&coefficients).map(|(u, c)| u * c).sum();
        (y - fitted).powi(2)
    };
    let residual = (points.iter().map(square).sum::<f64>() / points.len() as f64).sqrt();
    (coefficients, residual)
}

/// Fits p(n)/n³ = a + b·(to/n)^power + … over `from` ≤ n ≤ `to`.
fn fit(p: &[u64], from: usize, to: usize, power: f64, terms: usize) -> (Vec<f64>, f64) {
    let points: Vec<(f64, f64)> = (from..=to)
        .map(|n| ((to as f64 / n as f64).powf(power), over_cube(p, n)))
        .collect();
    least_squares(&points, terms)
}

/// The limit of p(n)/n³, if there is one, as the data up to p(`to`) suggest it. `None` below
/// [`SHORTEST_ESTIMATE`].
///
/// # Panics
/// If p is shorter than `to`.
pub fn limit(p: &[u64], to: usize) -> Option<LimitEstimate> {
    if to < SHORTEST_ESTIMATE {
        return None;
    }
    let (half, quarter) = (to / 2, to / 4);
    let (coefficients, residual) = fit(p, half, to, 1.0, 2);
    let first = |from, to, power, terms| fit(p, from, to, power, terms).0[0];
    let other_fits = [
        first(quarter, half, 1.0, 2),
        first(quarter, to, 1.0, 2),
        first(quarter, to, 1.0, 3),
        first(half, to, 2.0 / 3.0, 2),
        first(half, to, 1.5, 2),
    ];
    let limit = coefficients[0];
    let farthest = other_fits
        .iter()
        .fold(0.0, |most: f64, other| most.max((other - limit).abs()));
    Some(LimitEstimate {
        from: half,
        to,
        limit,
        error: farthest + residual,
        second_order: coefficients[1] * to as f64,
        residual,
        other_fits,
    })
}

/// Slope of log p(n) against log n, the residual, and the root mean square spread of log n.
fn slope(p: &[u64], from: usize, to: usize) -> (f64, f64, f64) {
    let logs = || (from..=to).map(|n| (n as f64).ln());
    let count = (to + 1 - from) as f64;
    let mean = logs().sum::<f64>() / count;
    let spread = (logs().map(|x| (x - mean).powi(2)).sum::<f64>() / count).sqrt();
    let points: Vec<(f64, f64)> = (from..=to)
        .map(|n| ((n as f64).ln() - mean, (p[n] as f64).ln()))
        .collect();
    let (coefficients, residual) = least_squares(&points, 2);
    (coefficients[1], residual, spread)
}

/// log₂(p(2n)/p(n)).
fn local(p: &[u64], n: usize) -> f64 {
    (p[2 * n] as f64 / p[n] as f64).log2()
}

/// The exponent that the data up to p(`to`) suggest. `None` below [`SHORTEST_ESTIMATE`].
///
/// # Panics
/// If p is shorter than `to`.
pub fn exponent(p: &[u64], to: usize) -> Option<ExponentEstimate> {
    if to < SHORTEST_ESTIMATE {
        return None;
    }
    let from = to / 4;
    let (exponent, residual, spread) = slope(p, from, to);
    let drift = (slope(p, to / 2, to).0 - slope(p, from, to / 2).0).abs();
    let locals = || (from..=to / 2).map(|n| local(p, n));
    let smallest = locals().fold(f64::INFINITY, f64::min);
    let largest = locals().fold(f64::NEG_INFINITY, f64::max);
    Some(ExponentEstimate {
        from,
        to,
        exponent,
        uncertainty: drift + (largest - smallest) / 2.0 + residual / spread,
        drift,
        local_smallest: smallest,
        local_largest: largest,
        residual,
    })
}

/// Dyadic windows, the last first: (N/2, N], (N/4, N/2], … while they begin at `least` or later and hold at least four n.
///
/// # Panics
/// If `least` is 0.
pub fn windows(p: &[u64], diagonals: Option<&[u64]>, least: usize) -> Vec<Window> {
    let mut sums = Vec::new();
    for &count in diagonals.unwrap_or_default() {
        sums.push(sums.last().copied().unwrap_or(0) + count);
    }
    let mut to = p.len().saturating_sub(1);
    let mut all = Vec::new();
    while to / 2 + 1 >= least && to - to / 2 >= 4 {
        let from = to / 2 + 1;
        let (exponent, residual, _) = slope(p, from, to);
        let second = |n: usize| p[n + 2] as f64 - 2.0 * p[n + 1] as f64 + p[n] as f64;
        let bends: Vec<f64> = (from..=to.min(p.len().saturating_sub(3)))
            .map(|n| second(n) / (6.0 * n as f64))
            .collect();
        let squares = || {
            let last = to.min(sums.len().saturating_sub(1));
            (from..=last).map(|n| sums[n] as f64 / (n as f64).powi(2))
        };
        all.push(Window {
            quotient: cubic_range(p, from, to).expect("a window is not empty"),
            exponent,
            residual,
            curvature: (!bends.is_empty()).then(|| bends.iter().sum::<f64>() / bends.len() as f64),
            diagonals_over_square: squares().next().map(|first| {
                squares().fold((first, first), |(low, high), x| (low.min(x), high.max(x)))
            }),
        });
        to /= 2;
    }
    all
}

/// The running extremes of p(n)/n³ from `from` on, compared exactly: each n with a new smallest or largest value. The first
/// is counted as both.
///
/// # Panics
/// If `from` is 0.
pub fn running_extremes(p: &[u64], from: usize) -> Vec<Extreme> {
    let mut all = Vec::new();
    let (mut low, mut high) = (from, from);
    for n in from..p.len() {
        let less = |a: usize, b: usize| {
            let cube = |m: usize| (m as u128).pow(3);
            p[a] as u128 * cube(b) < p[b] as u128 * cube(a)
        };
        let quotient = over_cube(p, n);
        if n == from || less(n, low) {
            low = n;
            let largest = false;
            all.push(Extreme {
                n,
                largest,
                quotient,
            });
        }
        if n == from || less(high, n) {
            high = n;
            let largest = true;
            all.push(Extreme {
                n,
                largest,
                quotient,
            });
        }
    }
    all
}

#[cfg(test)]
mod tests {
    use super::*;

    fn cubic(n: u64) -> u64 {
        3 * n.pow(3) + 7 * n.pow(2) + 5
    }

    #[test]
    fn a_cubic_is_recovered() {
        let p: Vec<u64> = (0..=200).map(cubic).collect();
        let found = limit(&p, 200).unwrap();
        assert!((found.limit - 3.0).abs() < 1e-4, "{found:?}");
        assert!((found.second_order - 7.0).abs() < 0.05, "{found:?}");
        assert!((found.limit - 3.0).abs() <= found.error);
        let exponent = exponent(&p, 200).unwrap();
        assert!((exponent.exponent - 3.0).abs() <= exponent.uncertainty);
        assert!(exponent.uncertainty < 0.05, "{exponent:?}");
        assert_eq!(limit(&p, SHORTEST_ESTIMATE - 1), None);
    }

    /// An exponent that changes on the way makes the uncertainty large: it must not pass for a clean power.
    #[test]
    fn drift_widens_the_uncertainty() {
        let bent = |n: u64| if n < 60 { n * n } else { n * n * n / 60 };
        let p: Vec<u64> = (0..=160).map(bent).collect();
        let found = exponent(&p, 160).unwrap();
        assert!(found.uncertainty > 0.3, "{found:?}");
    }

    #[test]
    fn windows_cover_the_lengths_and_see_the_second_difference() {
        let p: Vec<u64> = (0..=100).map(cubic).collect();
        let diagonals: Vec<u64> = (0..=98).map(|n| 18 * n).collect();
        let all = windows(&p, Some(&diagonals), 4);
        let ends: Vec<_> = all
            .iter()
            .map(|w| (w.quotient.from, w.quotient.to))
            .collect();
        assert_eq!(ends, [(51, 100), (26, 50), (13, 25), (7, 12)]);
        // b(n) = 18n + 32 and N(0) + … + N(n) = 9n(n+1).
        let curvature = all[0].curvature.unwrap();
        assert!(curvature > 3.0 && curvature < 3.1, "{curvature}");
        let (low, high) = all[0].diagonals_over_square.unwrap();
        assert!((low - 9.0 * 99.0 / 98.0).abs() < 1e-12);
        assert!((high - 9.0 * 52.0 / 51.0).abs() < 1e-12);
    }

    #[test]
    fn running_extremes_are_the_records() {
        let p = [1, 4, 8, 27, 128, 10];
        let found: Vec<_> = running_extremes(&p, 1)
            .iter()
            .map(|e| (e.n, e.largest))
            .collect();
        // p(n)/n³: 4, 1, 1, 2, 0.08.
        assert_eq!(found, [(1, false), (1, true), (2, false), (5, false)]);
    }
}
