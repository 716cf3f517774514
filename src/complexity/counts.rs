//! The complexity p(n) and its differences.

use serde::Serialize;

/// p with its first and second differences.
#[derive(Clone, Debug, PartialEq, Eq, Serialize)]
pub struct Counts {
    /// p(0), p(1), …
    pub p: Vec<u64>,
    /// s(n) = p(n+1) − p(n).
    pub first_difference: Vec<i64>,
    /// b(n) = s(n+1) − s(n).
    pub second_difference: Vec<i64>,
}

impl Counts {
    /// Differences of a sequence p(0), p(1), …
    pub fn from_p(p: Vec<u64>) -> Counts {
        let first_difference: Vec<i64> = p.windows(2).map(|w| w[1] as i64 - w[0] as i64).collect();
        let second_difference = first_difference.windows(2).map(|w| w[1] - w[0]).collect();
        Counts {
            p,
            first_difference,
            second_difference,
        }
    }
}

/// p(0), …, p(longest) from the numbers N(n) of oriented generalized diagonals that cross n sides.
///
/// For n ≥ 1, b(n) = N(n) (Cassaigne, Hubert, Troubetzkoy, Ann. Inst. Fourier 52 (2002) 835–847, for
/// convex tables; in any simple polygon with distinct letters by the same argument, because each word is
/// one convex cell of lines and m(w) counts the corner images that cut it on both sides).
///
/// The start is p(1) = k and p(2) = 2k + N(0): look back from each corner V. The corners that V sees
/// strictly inside its angle divide the rays from V into 1 + (their number) intervals, each of which hits
/// one side; each interval is one cut of the set of lines that start on that side. So the words of length
/// 2 number k + Σ_V (1 + seen from V) = 2k + N(0).
///
/// # Panics
/// Unless N(0), …, N(longest − 2) are given.
pub fn p_from_diagonals(sides: u64, diagonals: &[u64], longest: usize) -> Vec<u64> {
    let mut p = vec![1, sides];
    if longest >= 2 {
        p.push(2 * sides + diagonals[0]);
    }
    for n in 3..=longest {
        // p(n) = 2p(n−1) − p(n−2) + b(n−2); p is not decreasing here, so nothing goes below zero.
        p.push(2 * p[n - 1] + diagonals[n - 2] - p[n - 2]);
    }
    p.truncate(longest + 1);
    p
}

/// The first length at which two counts of the same thing differ.
pub fn first_disagreement(a: &[u64], b: &[u64]) -> Option<usize> {
    let shared = a.len().min(b.len());
    (0..shared).find(|&n| a[n] != b[n])
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::table::facts::totient;

    #[test]
    fn square_from_lattice_counts_oeis_a005598() {
        // N(n) = 4φ(n+2) and p(n) = 4A(n) − 4 with A(n) = 1 + Σ (n+1−i)φ(i): OEIS A005598.
        let diagonals: Vec<u64> = (0..60).map(|n| 4 * totient(n + 2)).collect();
        let p = p_from_diagonals(4, &diagonals, 60);
        for n in 1..=60u64 {
            let a = 1 + (1..=n).map(|i| (n + 1 - i) * totient(i)).sum::<u64>();
            assert_eq!(p[n as usize], 4 * a - 4);
        }
    }

    #[test]
    fn differences() {
        let counts = Counts::from_p(vec![1, 4, 12, 28]);
        assert_eq!(counts.first_difference, [3, 8, 16]);
        assert_eq!(counts.second_difference, [5, 8]);
        assert_eq!(first_disagreement(&[1, 2, 3], &[1, 2]), None);
        assert_eq!(first_disagreement(&[1, 2, 3], &[1, 5, 3]), Some(1));
    }
}
