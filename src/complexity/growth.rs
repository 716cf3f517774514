//! How fast p(n) grows, in figures.

use serde::Serialize;

/// The smallest and largest value of p(n)/n³ over a range, with the n where they occur.
#[derive(Clone, Debug, PartialEq, Serialize)]
pub struct CubicRange {
    /// First n of the range.
    pub from: usize,
    /// Last n of the range.
    pub to: usize,
    /// Smallest p(n)/n³.
    pub smallest: f64,
    /// Where it is first attained.
    pub smallest_at: usize,
    /// Largest p(n)/n³.
    pub largest: f64,
    /// Where it is first attained.
    pub largest_at: usize,
}

/// The extremes of p(n)/n³ for `from` ≤ n ≤ `to`, compared exactly. `None` for an empty range.
///
/// # Panics
/// If `from` is 0 or p is shorter than `to`.
pub fn cubic_range(p: &[u64], from: usize, to: usize) -> Option<CubicRange> {
    assert!(from > 0, "p(0)/0³ is undefined");
    // p(m)/m³ < p(n)/n³, cross-multiplied: below 2^64·2^63 for n < 2^21.
    let less = |m: usize, n: usize| p[m] as u128 * cube(n) < p[n] as u128 * cube(m);
    let first = (from..=to).next()?;
    let (mut smallest_at, mut largest_at) = (first, first);
    for n in from..=to {
        if less(n, smallest_at) {
            smallest_at = n;
        }
        if less(largest_at, n) {
            largest_at = n;
        }
    }
    Some(CubicRange {
        from,
        to,
        smallest: over_cube(p, smallest_at),
        smallest_at,
        largest: over_cube(p, largest_at),
        largest_at,
    })
}

fn cube(n: usize) -> u128 {
    (n as u128).pow(3)
}

/// p(n)/n³.
pub fn over_cube(p: &[u64], n: usize) -> f64 {
    p[n] as f64 / (n as f64).powi(3)
}

/// The local exponent log₂(p(2n)/p(n)).
pub fn local_exponent(p: &[u64], n: usize) -> f64 {
    (p[2 * n] as f64 / p[n] as f64).log2()
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn extremes_and_exponents_of_a_cubic() {
        let p: Vec<u64> = (0..=40u64).map(|n| 2 * n * n * n + 5 * n + 1).collect();
        let range = cubic_range(&p, 2, 40).unwrap();
        assert_eq!((range.smallest_at, range.largest_at), (40, 2));
        assert!((local_exponent(&p, 20) - 3.0).abs() < 0.02);
        assert_eq!(cubic_range(&p, 5, 4), None);
    }
}
