//! The finite group of linear parts, tabulated.
//!
//! When every angle is a rational multiple of π, the linear part of each unfolded copy is one of 2r
//! elements. A copy is then an element and a translation, and reflecting it is one table look-up and one
//! addition: for the copy z ↦ A·z + t, the copy beyond side s is z ↦ (A·S)·z + (t + A·c) where
//! z ↦ S·z + c is the reflection in side s of the table itself.

use super::isometry::{Isometry, side_reflections};
use crate::number::Real;
use crate::table::{Table, Vector};
use rug::Integer;
use std::collections::HashMap;

/// Larger groups have no table of products.
pub const LARGEST_MULTIPLIED: usize = 512;

/// The group with its action on the corners and side reflections of one table.
#[derive(Debug)]
pub struct FiniteGroup {
    /// Parity of each element; element 0 is the identity.
    pub mirrored: Vec<bool>,
    /// Each element is z ↦ w·z, or z ↦ w·z̄ when it is mirrored.
    pub rotation: Vec<Vector>,
    /// `next[g·k + s]`: the element A·S.
    pub next: Vec<u16>,
    /// `shift[g·k + s]`: the vector A·c.
    pub shift: Vec<Vector>,
    /// `image[g·k + i]`: the vector A·v for corner v.
    pub image: Vec<Vector>,
}

impl FiniteGroup {
    /// Closes the linear parts under composition.
    ///
    /// Ends exactly when the group is finite, which the caller has proved.
    pub fn generate(table: &Table) -> FiniteGroup {
        let form = table.form();
        let k = table.sides();
        let reflections = side_reflections(table);
        let linear = |isometry: &Isometry| Isometry {
            t: Vector::new(0.into(), 0.into()),
            ..isometry.clone()
        };
        let mut elements = vec![Isometry::identity()];
        #[expect(
            clippy::mutable_key_type,
            reason = "the caches inside a field take no part in equality or hash"
        )]
        let mut index: HashMap<(Vector, bool), u16> = HashMap::new();
        index.insert((elements[0].w.clone(), false), 0);
        let mut next = Vec::new();
        let mut at = 0;
        while at < elements.len() {
            for reflection in &reflections {
                let product = elements[at].after(&linear(reflection), form);
                let key = (product.w.clone(), product.mirrored);
                let fresh = elements.len() as u16;
                let found = *index.entry(key).or_insert(fresh);
                if found == fresh {
                    elements.push(product);
                }
                next.push(found);
            }
            at += 1;
        }
        let act = |vectors: &[Vector]| -> Vec<Vector> {
            elements
                .iter()
                .flat_map(|g| vectors.iter().map(|v| g.turn(v, form)))
                .collect()
        };
        let shifts: Vec<Vector> = reflections.iter().map(|r| r.t.clone()).collect();
        debug_assert_eq!(next.len(), elements.len() * k);
        FiniteGroup {
            mirrored: elements.iter().map(|g| g.mirrored).collect(),
            rotation: elements.iter().map(|g| g.w.clone()).collect(),
            next,
            shift: act(&shifts),
            image: act(table.corners()),
        }
    }

    /// The order.
    pub fn order(&self) -> usize {
        self.mirrored.len()
    }

    /// `products[g·order + h]`: the element A_g·A_h. Empty for groups of more than [`LARGEST_MULTIPLIED`] elements.
    pub fn products(&self) -> Vec<u16> {
        let order = self.order();
        if order > LARGEST_MULTIPLIED {
            return Vec::new();
        }
        let k = self.next.len() / order;
        let mut products = vec![0; order * order];
        for g in 0..order {
            products[g * order] = g as u16;
        }
        // Elements are numbered as they are found, each as next[h·k + s] of an earlier one.
        let mut known = 1;
        for at in 0..order * k {
            let (h, found) = (at / k, self.next[at] as usize);
            if found < known {
                continue;
            }
            for g in 0..order {
                let before = products[g * order + h] as usize;
                products[g * order + found] = self.next[before * k + at % k];
            }
            known += 1;
        }
        products
    }

    /// The least positive integer whose product with every tabulated vector has integer coordinates.
    pub fn common_denominator(&self) -> Integer {
        let mut den = Integer::from(1);
        for vector in self.shift.iter().chain(&self.image) {
            den.lcm_mut(vector.x.denominator());
            den.lcm_mut(vector.y.denominator());
        }
        den
    }
}

/// The integer coordinates of `scale·value` over the powers of the generator, when they fit.
pub fn scaled_coordinates(value: &Real, scale: &Integer, degree: usize) -> Option<Vec<i64>> {
    let factor = Integer::from(scale / value.denominator());
    let mut coordinates: Vec<i64> = value
        .coordinates()
        .iter()
        .map(|c| Integer::from(c * &factor).to_i64())
        .collect::<Option<_>>()?;
    coordinates.resize(degree, 0);
    Some(coordinates)
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::table::default_letters;

    #[test]
    fn the_group_of_an_equilateral_triangle_has_order_6() {
        let corners = [(0, 0), (2, 0), (1, 1)]
            .map(|(x, y): (i64, i64)| Vector::new(x.into(), y.into()))
            .to_vec();
        let table = Table::new("", corners, 3.into(), default_letters(3)).unwrap();
        let group = FiniteGroup::generate(&table);
        assert_eq!(group.order(), 6);
        // Reflecting twice in the same side leads back.
        for g in 0..6 {
            for s in 0..3 {
                let there = group.next[g * 3 + s] as usize;
                assert_eq!(group.next[there * 3 + s] as usize, g);
                assert_ne!(group.mirrored[g], group.mirrored[there]);
            }
        }
    }
}
