//! A line on the surface of the copies of a table with a finite reflection group.
//!
//! As in [`flow`](super::direction::flow), the line of an orbit keeps one direction d on the surface, and crossing
//! side s from copy g adds a tabulated constant to its height. So the height after any number of hits is the first one
//! plus Σ n(g, s)·shift(g, s), where n counts the crossings: its exact value costs |G|·k products however long the
//! orbit is, and its floating-point value gains an error of a few units in the last place a hit.
//!
//! **Bound.** Let R bound the heights of corners and all shifts; a line that meets a copy has a height of at most R.
//! Tabulated values are within 2⁻⁵²·R of the truth and so is a renewed height; one addition is off by at most 2⁻⁵²·R
//! (the sum is at most 2R) and takes in a shift off by 2⁻⁵²·R. After n additions a difference of heights is off by less
//! than (2n + 3)·2⁻⁵²·R.

use crate::number::{Real, Sign};
use crate::table::{CornerId, SideId, Vector};
use crate::unfold::group::FiniteGroup;
use rug::Integer;

/// See the module.
#[derive(Debug)]
pub struct SurfaceLine {
    k: usize,
    mirrored: Vec<bool>,
    next: Vec<u16>,
    heights: Vec<Real>,
    shifts: Vec<Real>,
    near_heights: Vec<f64>,
    near_shifts: Vec<f64>,
    /// R·2⁻⁵².
    unit: f64,
    /// The reflection that keeps the direction, when the group has one.
    mirror: Option<u16>,
    first: Real,
    near_first: f64,
    counts: Vec<u64>,
    copy: u16,
    near: f64,
    bound: f64,
}

impl SurfaceLine {
    /// The line with direction d and moment d × p, both with corner 0 of the table as origin, in the table itself.
    /// The group acts on the table moved there.
    pub fn new(group: &FiniteGroup, k: usize, direction: &Vector, moment: &Real) -> SurfaceLine {
        let heights: Vec<Real> = group.image.iter().map(|v| direction.cross(v)).collect();
        let shifts: Vec<Real> = group.shift.iter().map(|c| -direction.cross(c)).collect();
        let near = |values: &[Real]| values.iter().map(Real::to_f64).collect::<Vec<f64>>();
        let (near_heights, near_shifts) = (near(&heights), near(&shifts));
        let largest = near_heights.iter().chain(&near_shifts).map(|v| v.abs());
        let unit = 1.001 * largest.fold(0.0, f64::max) * f64::EPSILON;
        // A reflection A keeps d exactly when d × A(v) = −(d × v) for all v, since it reverses areas.
        let keeps =
            |g: &usize| group.mirrored[*g] && (1..3).all(|i| heights[g * k + i] == -&heights[i]);
        let mirror = (0..group.order()).find(keeps).map(|g| g as u16);
        let near_first = moment.to_f64();
        SurfaceLine {
            k,
            mirrored: group.mirrored.clone(),
            next: group.next.clone(),
            counts: vec![0; shifts.len()],
            heights,
            shifts,
            near_heights,
            near_shifts,
            unit,
            mirror,
            first: moment.clone(),
            near_first,
            copy: 0,
            near: near_first,
            bound: 3.0 * unit,
        }
    }

    fn at(&self, index: u8) -> usize {
        self.copy as usize * self.k + index as usize
    }

    /// The side of the line on which a corner of the table lies, seen in the table; `None` when floating point
    /// leaves it open.
    #[inline(always)]
    pub fn side_of(&self, corner: CornerId) -> Option<Sign> {
        let difference = self.near_heights[self.at(corner.0)] - self.near;
        let sign = if difference > self.bound {
            Sign::Positive
        } else if difference < -self.bound {
            Sign::Negative
        } else {
            return None;
        };
        Some(self.in_table(sign))
    }

    /// The same, always decided, in the field.
    #[cold]
    pub fn exact_side_of(&self, corner: CornerId) -> Sign {
        let sign = (&self.heights[self.at(corner.0)] - &self.height()).sign();
        self.in_table(sign)
    }

    #[inline(always)]
    fn in_table(&self, sign: Sign) -> Sign {
        if self.mirrored[self.copy as usize] {
            sign.flip()
        } else {
            sign
        }
    }

    /// Crosses a side.
    #[inline(always)]
    pub fn cross(&mut self, side: SideId) {
        let at = self.at(side.0);
        self.near += self.near_shifts[at];
        self.bound += 2.0 * self.unit;
        self.counts[at] += 1;
        self.copy = self.next[at];
    }

    /// The exact height.
    pub fn height(&self) -> Real {
        let mut height = self.first.clone();
        for (count, shift) in self.counts.iter().zip(&self.shifts) {
            if *count > 0 {
                height += shift * &Real::from(Integer::from(*count));
            }
        }
        height
    }

    /// Renews the floating-point height from the exact one.
    pub fn renew(&mut self) {
        self.near = self.height().to_f64();
        self.bound = 3.0 * self.unit;
    }

    /// True when, after crossing `side` next, the line would be the first one again, in the table.
    pub fn would_return(&self, side: SideId) -> bool {
        let at = self.at(side.0);
        let near = self.near + self.near_shifts[at];
        let copy = self.next[at];
        let bound = self.bound + 4.0 * self.unit;
        // The reflection turns the height round.
        let turned = self.mirror == Some(copy);
        if copy != 0 && !turned {
            return false;
        }
        let near = if turned { -near } else { near };
        if (near - self.near_first).abs() > bound {
            return false;
        }
        let height = self.height() + &self.shifts[at];
        let height = if turned { -height } else { height };
        height == self.first
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::table::Table;

    /// The bound after n crossings is (2n + 3)·2⁻⁵²·R.
    #[test]
    fn bounds_grow_as_derived() {
        let corners =
            [(0, 0), (3, 0), (3, 1), (0, 1)].map(|(x, y)| Vector::new(x.into(), y.into()));
        let table =
            Table::new("t", corners.to_vec(), 1.into(), vec!['a', 'b', 'c', 'd']).expect("a table");
        let group = FiniteGroup::generate(&table);
        let direction = Vector::new(1.into(), 2.into());
        let mut line = SurfaceLine::new(&group, 4, &direction, &Real::from(-1));
        // The greatest height or shift: the direction across the shift by twice the table's width, 2·6.
        let largest = 12.0;
        for n in 0..10_000u32 {
            let expected = f64::from(2 * n + 3) * f64::EPSILON * largest;
            assert!(
                line.bound >= expected && line.bound <= 1.01 * expected,
                "{n}"
            );
            line.cross(SideId((n % 4) as u8));
        }
        line.renew();
        assert!(line.bound <= 1.01 * 3.0 * f64::EPSILON * largest);
    }
}
