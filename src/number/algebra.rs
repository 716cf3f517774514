//! The algebra K\[x\]/f over a number field K = ℚ(θ), computed with in integer coordinates.
//!
//! Multiplication by jθ + kx is an integer matrix of size d·deg f; its characteristic polynomial, and
//! θ as a polynomial in a generator comes from a linear system. Cost: n³ for each, on
//! machine words for the characteristic polynomial and on growing integers for the last.

use super::characteristic::characteristic_polynomial;
use super::field::Field;
use super::over_field::trim;
use super::poly;
use super::real::{Real, reduce_powers, solve_fraction_free};
use rug::{Integer, Rational};

/// K\[x\]/f for a monic f with coefficients in ℤ[θ]. Elements are coordinates over θ^a·x^b at place
/// a + d·b; those with integer coordinates form a ring.
pub(crate) struct Algebra<'a> {
    field: &'a Field,
    /// Integer coordinates of the coefficients below the leading one.
    f: Vec<Vec<Integer>>,
}

impl<'a> Algebra<'a> {
    pub(crate) fn new(field: &'a Field, f: &[Real]) -> Algebra<'a> {
        let below = &f[..f.len() - 1];
        debug_assert!(
            below.iter().all(|c| *c.denominator() == 1),
            "coefficients in ℤ[θ]"
        );
        Algebra {
            field,
            f: below
                .iter()
                .map(|c| c.lifted_to(field).coordinates().to_vec())
                .collect(),
        }
    }

    fn dimension(&self) -> usize {
        self.field.degree() * self.f.len()
    }

    fn times_theta(&self, element: &[Integer]) -> Vec<Integer> {
        let d = self.field.degree();
        if d == 1 {
            let theta = Integer::from(-&self.field.minimal_polynomial()[0]);
            return element.iter().map(|c| Integer::from(c * &theta)).collect();
        }
        let shifted = |part: &[Integer]| {
            let mut longer = vec![Integer::new()];
            longer.extend_from_slice(part);
            reduce_powers(self.field, longer)
        };
        element.chunks(d).flat_map(shifted).collect()
    }

    fn times_x(&self, element: &[Integer]) -> Vec<Integer> {
        let d = self.field.degree();
        let top = &element[element.len() - d..];
        let mut result = vec![Integer::new(); d];
        result.extend_from_slice(&element[..element.len() - d]);
        if top.iter().all(|c| *c == 0) {
            return result;
        }
        for (place, coefficient) in result.chunks_mut(d).zip(&self.f) {
            let product = reduce_powers(self.field, poly::multiply(top, coefficient));
            for (c, p) in place.iter_mut().zip(product) {
                *c -= p;
            }
        }
        result
    }

    /// The product with jθ + kx.
    fn times_gamma(&self, element: &[Integer], j: &Integer, k: &Integer) -> Vec<Integer> {
        let mut result: Vec<Integer> = self.times_x(element).into_iter().map(|c| c * k).collect();
        if *j != 0 {
            for (c, t) in result.iter_mut().zip(self.times_theta(element)) {
                *c += t * j;
            }
        }
        result
    }

    fn unit(&self, place: usize) -> Vec<Integer> {
        let mut unit = vec![Integer::new(); self.dimension()];
        unit[place] = Integer::from(1);
        unit
    }

    /// The characteristic polynomial of multiplication by jθ + kx.
    pub(crate) fn characteristic(&self, j: &Integer, k: &Integer) -> Vec<Integer> {
        // Rows instead of columns: the transpose has the same characteristic polynomial.
        let rows: Vec<_> = (0..self.dimension())
            .map(|i| self.times_gamma(&self.unit(i), j, k))
            .collect();
        characteristic_polynomial(&rows)
    }

    /// h(x + kθ) modulo f, as a polynomial over K.
    pub(crate) fn evaluate(&self, h: &[Integer], k: &Integer) -> Vec<Real> {
        let one = Integer::from(1);
        let mut value = vec![Integer::new(); self.dimension()];
        for c in h.iter().rev() {
            value = self.times_gamma(&value, k, &one);
            value[0] += c;
        }
        let element =
            |part: &[Integer]| Real::from_coordinates(self.field, part.to_vec(), Integer::from(1));
        trim(value.chunks(self.field.degree()).map(element).collect())
    }

    /// The coordinates of θ over the powers of γ = jθ + kx, for a γ that generates.
    pub(crate) fn theta_in_powers(&self, j: &Integer, k: &Integer) -> Vec<Rational> {
        let n = self.dimension();
        let mut matrix = vec![vec![Integer::new(); n + 1]; n];
        let mut power = self.unit(0);
        for column in 0..n {
            for (row, c) in matrix.iter_mut().zip(&power) {
                row[column] = c.clone();
            }
            if column + 1 < n {
                power = self.times_gamma(&power, j, k);
            }
        }
        matrix[1][n] = Integer::from(1);
        let (numerators, denominator) = solve_fraction_free(matrix);
        numerators
            .into_iter()
            .map(|c| Rational::from((c, denominator.clone())))
            .collect()
    }
}
