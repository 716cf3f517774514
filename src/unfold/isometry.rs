//! Exact isometries of the plane with form x² + g·y².
//!
//! Write a vector (x, y) as the number z = x + y·√(−g). Then |z|² = x² + g·y² is the plane form, and
//! the isometries are z ↦ w·z + t and z ↦ w·z̄ + t with |w| = 1. The reflection in a line with direction
//! u has w = u/ū = u²/|u|², whose two coordinates lie in the field of u and g; so nothing leaves the
//! field of the table.

use crate::number::Real;
use crate::table::{Table, Vector};

/// z ↦ w·z + t, or z ↦ w·z̄ + t when `mirrored`. Invariant: w.x² + g·w.y² = 1.
#[derive(Clone, Debug, PartialEq, Eq, Hash)]
pub struct Isometry {
    /// The linear part.
    pub w: Vector,
    /// The image of the origin.
    pub t: Vector,
    /// True when orientation is reversed.
    pub mirrored: bool,
}

impl Isometry {
    /// The identity.
    pub fn identity() -> Isometry {
        Isometry {
            w: Vector::new(1.into(), 0.into()),
            t: Vector::new(0.into(), 0.into()),
            mirrored: false,
        }
    }

    /// A translation.
    pub fn translation(t: Vector) -> Isometry {
        Isometry {
            t,
            ..Isometry::identity()
        }
    }

    /// The reflection in the line through `a` and `b`.
    ///
    /// # Panics
    /// If the points are the same.
    pub fn reflection(a: &Vector, b: &Vector, form: &Real) -> Isometry {
        let u = b.minus(a);
        let norm = u.squared_length(form);
        let scale = norm.inverse().expect("a line needs two points");
        let w = u.product(&u, form).times(&scale);
        let t = a.minus(&w.product(&a.conjugate(), form));
        Isometry {
            w,
            t,
            mirrored: true,
        }
    }

    /// The linear part applied to a vector.
    pub fn turn(&self, v: &Vector, form: &Real) -> Vector {
        if self.mirrored {
            self.w.product(&v.conjugate(), form)
        } else {
            self.w.product(v, form)
        }
    }

    /// The image of a point.
    pub fn apply(&self, v: &Vector, form: &Real) -> Vector {
        self.turn(v, form).plus(&self.t)
    }

    /// `self ∘ inner`.
    pub fn after(&self, inner: &Isometry, form: &Real) -> Isometry {
        Isometry {
            w: self.turn(&inner.w, form),
            t: self.apply(&inner.t, form),
            mirrored: self.mirrored != inner.mirrored,
        }
    }

    /// The inverse isometry.
    pub fn inverse(&self, form: &Real) -> Isometry {
        // z = w·z' + t: z' = w̄·(z − t). z = w·z̄' + t: z' = w·(z − t)‾.
        let w = if self.mirrored {
            self.w.clone()
        } else {
            self.w.conjugate()
        };
        let linear = Isometry {
            w,
            t: Vector::new(0.into(), 0.into()),
            mirrored: self.mirrored,
        };
        let t = linear.turn(&self.t, form).times(&(-1).into());
        Isometry { t, ..linear }
    }
}

/// The reflection in each side of a table.
pub fn side_reflections(table: &Table) -> Vec<Isometry> {
    (0..table.sides())
        .map(|i| {
            let next = table.corner(table.after(i));
            Isometry::reflection(table.corner(i), next, table.form())
        })
        .collect()
}

#[cfg(test)]
mod tests {
    use super::*;
    use rug::Rational;

    fn v(x: (i64, i64), y: (i64, i64)) -> Vector {
        Vector::new(Rational::from(x).into(), Rational::from(y).into())
    }

    #[test]
    fn a_reflection_fixes_its_line_and_undoes_itself() {
        let form = Real::from(3);
        let (a, b) = (v((1, 2), (0, 1)), v((2, 1), (5, 3)));
        let r = Isometry::reflection(&a, &b, &form);
        assert_eq!(r.apply(&a, &form), a);
        assert_eq!(r.apply(&b, &form), b);
        assert_eq!(r.after(&r, &form), Isometry::identity());
        let p = v((7, 3), (-1, 1));
        let image = r.apply(&p, &form);
        assert_ne!(image, p);
        // Equal distances to both points of the axis.
        for axis in [&a, &b] {
            assert_eq!(
                image.minus(axis).squared_length(&form),
                p.minus(axis).squared_length(&form)
            );
        }
    }

    #[test]
    fn inverses_undo_both_kinds() {
        let form = Real::from(2);
        let r = Isometry::reflection(&v((0, 1), (0, 1)), &v((1, 1), (1, 1)), &form);
        let s = Isometry::reflection(&v((1, 3), (0, 1)), &v((0, 1), (5, 1)), &form);
        let both = r.after(&s, &form);
        for isometry in [&r, &s, &both] {
            let undone = isometry.inverse(&form).after(isometry, &form);
            assert_eq!(undone, Isometry::identity());
        }
        assert!(!both.mirrored);
    }
}
