//! The discriminant of the polynomial that defines a field.
//!
//! For a monic f with roots θ_1 … θ_d it is ∏_{i<j} (θ_i − θ_j)² = (−1)^{d(d−1)/2}·∏ f′(θ_i), and the last product is
//! the norm of f′(θ): the determinant of multiplication by f′(θ). It is the field's own discriminant times a
//! square (the squared index of ℤ\[θ\] in the integers of the field), and this program does not factor it.

use super::characteristic::characteristic_polynomial;
use super::field::Field;
use super::poly;
use super::real::reduce_powers;
use rug::Integer;

/// The discriminant of the field's minimal polynomial. Cost: one characteristic polynomial of size d.
pub fn polynomial_discriminant(field: &Field) -> Integer {
    let d = field.degree();
    let mut row = reduce_powers(field, poly::derivative(field.minimal_polynomial()));
    let mut matrix = Vec::with_capacity(d);
    for _ in 0..d {
        matrix.push(row.clone());
        row.insert(0, Integer::new());
        row = reduce_powers(field, row);
    }
    // det M = (−1)^d·det(0 − M).
    let determinant = characteristic_polynomial(&matrix).swap_remove(0);
    let negative = (d + d * (d - 1) / 2) % 2 == 1;
    if negative { -determinant } else { determinant }
}

#[cfg(test)]
mod tests {
    use super::*;
    use rug::Rational;

    fn of(p: &[i64], lo: i64, hi: i64) -> Integer {
        let p = p.iter().map(|c| Integer::from(*c)).collect();
        polynomial_discriminant(&Field::from_isolated_root(
            p,
            Rational::from(lo),
            Rational::from(hi),
        ))
    }

    #[test]
    fn school_formulas() {
        assert_eq!(of(&[-1, 1], 0, 2), 1);
        // x² + bx + c: b² − 4c.
        assert_eq!(of(&[-1, -1, 1], 1, 2), 5);
        assert_eq!(of(&[-2, 0, 1], 1, 2), 8);
        // x³ + px + q: −4p³ − 27q².
        assert_eq!(of(&[-2, 0, 0, 1], 1, 2), -108);
        // 2cos(2π/7): the cyclic cubic field of conductor 7 has discriminant 49 (from memory).
        assert_eq!(of(&[-1, -2, 1, 1], 1, 2), 49);
        // x⁴ − 10x² + 1, roots ±√2 ± √3: the product of the squared differences is 8²·12²·16 = 147456
        // (differences 2√2 twice, 2√3 twice, 2(√3 ± √2)).
        assert_eq!(of(&[1, 0, -10, 0, 1], 3, 4), 147_456);
    }
}
