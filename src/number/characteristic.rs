//! Characteristic polynomials of integer matrices.
//!
//! Modulo enough primes by reduction to Hessenberg form (Cohen, *A Course in Computational Algebraic
//! Number Theory*, algorithm 2.2.9, from memory), then put together by the Chinese remainder theorem. The
//! number of primes is proved to be enough: every eigenvalue is at most R, the largest sum of absolute
//! values in a row, so the coefficients are at most (1+R)^n. Cost: n³ machine operations a prime, about
//! n·log₂(1+R)/30 primes.

use super::effort::{charge, charge_with, weight, weights};
use super::modular::{MODULAR_STEP, PrimeField, primes_from};
use rug::Integer;
use rug::ops::Pow;

/// det(x − M), constant term first; monic.
///
/// # Panics
/// If the matrix is not square.
pub(crate) fn characteristic_polynomial(matrix: &[Vec<Integer>]) -> Vec<Integer> {
    let n = matrix.len();
    assert!(matrix.iter().all(|row| row.len() == n), "a square matrix");
    let radius = matrix
        .iter()
        .map(|row| row.iter().map(|c| c.clone().abs()).sum::<Integer>())
        .max()
        .unwrap_or_default();
    let bound = (radius + 1u32).pow(n as u32) * 2u32;
    let mut modulus = Integer::from(1);
    let mut result = vec![Integer::new(); n + 1];
    for field in primes_from(1_500_000_000) {
        if modulus > bound {
            break;
        }
        let image = modulo_prime(matrix, field);
        // result + modulus·t ≡ image modulo the prime.
        let step = field.inverse(field.reduce(&modulus));
        charge_with(|| 8 * (n as u64 + 1) * weight(&modulus));
        for (c, residue) in result.iter_mut().zip(image) {
            let t = field.mul(field.sub(residue, field.reduce(c)), step);
            *c += Integer::from(&modulus * t);
        }
        modulus *= field.prime;
    }
    let half = Integer::from(&modulus >> 1);
    for c in &mut result {
        if *c > half {
            *c -= &modulus;
        }
    }
    result
}

fn modulo_prime(matrix: &[Vec<Integer>], field: PrimeField) -> Vec<u64> {
    let n = matrix.len();
    // Hessenberg form takes at most n³ steps twice, the chain n³/6.
    charge(MODULAR_STEP * 2 * (n as u64).pow(3));
    charge_with(|| 4 * matrix.iter().map(|row| weights(row)).sum::<u64>());
    let mut h: Vec<Vec<u64>> = matrix
        .iter()
        .map(|row| row.iter().map(|c| field.reduce(c)).collect())
        .collect();
    for column in 0..n.saturating_sub(2) {
        let Some(pivot) = (column + 1..n).find(|&i| h[i][column] != 0) else {
            continue;
        };
        if pivot != column + 1 {
            h.swap(pivot, column + 1);
            h.iter_mut().for_each(|row| row.swap(pivot, column + 1));
        }
        let inverse = field.inverse(h[column + 1][column]);
        for i in column + 2..n {
            let factor = field.mul(h[i][column], inverse);
            if factor == 0 {
                continue;
            }
            let pivot_row = h[column + 1].clone();
            for (c, p) in h[i].iter_mut().zip(pivot_row) {
                *c = field.sub(*c, field.mul(factor, p));
            }
            for row in h.iter_mut() {
                row[column + 1] = field.add(row[column + 1], field.mul(factor, row[i]));
            }
        }
    }
    // chain[m] is the characteristic polynomial of the leading m×m block.
    let mut chain: Vec<Vec<u64>> = vec![vec![1]];
    for m in 0..n {
        let mut next = vec![0; m + 2];
        for (i, c) in chain[m].iter().enumerate() {
            next[i + 1] = field.add(next[i + 1], *c);
            next[i] = field.sub(next[i], field.mul(h[m][m], *c));
        }
        let mut weight = 1;
        for i in (0..m).rev() {
            weight = field.mul(weight, h[i + 1][i]);
            let factor = field.mul(weight, h[i][m]);
            for (j, c) in chain[i].iter().enumerate() {
                next[j] = field.sub(next[j], field.mul(factor, *c));
            }
        }
        chain.push(next);
    }
    chain.pop().expect("nonempty")
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn companion_matrices_give_their_polynomial_back() {
        let p: Vec<Integer> = [-7_i64, 0, 123_456_789_012_345, -3, 5, 1]
            .map(Integer::from)
            .to_vec();
        let n = p.len() - 1;
        let mut m = vec![vec![Integer::new(); n]; n];
        for i in 0..n {
            if i > 0 {
                m[i][i - 1] = Integer::from(1);
            }
            m[i][n - 1] = Integer::from(-&p[i]);
        }
        assert_eq!(characteristic_polynomial(&m), p);
    }

    #[test]
    fn a_triangular_matrix_has_its_diagonal_as_roots() {
        let m = [[2, 5, 7], [0, 3, 11], [0, 0, -4]].map(|row| row.map(Integer::from).to_vec());
        // (x−2)(x−3)(x+4) = x³ − x² − 14x + 24
        let expected = [24, -14, -1, 1].map(Integer::from).to_vec();
        assert_eq!(characteristic_polynomial(&m), expected);
    }
}
