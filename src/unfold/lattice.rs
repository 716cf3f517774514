//! The engine for finite groups over the rationals: all corner images are lattice points.
//!
//! After scaling by a common denominator every coordinate is an integer, bounded by `home + n·shift`
//! after n crossings. The constructor checks that this bound stays below 2^29, so that a difference
//! of coordinates stays below 2^30, a product below 2^60 and the cross product below 2^61: plain `i64`
//! arithmetic is exact and needs no filter.

use super::engine::{Engine, Leaping, Trail};
use super::group::{FiniteGroup, scaled_coordinates};
use crate::number::{Enclosure, Real, Sign};
use crate::table::{CornerId, SideId, Table, Vector};
use rug::{Integer, Rational};

/// Largest absolute coordinate for which a cross product of differences certainly fits in an `i64`.
const LARGEST_COORDINATE: i64 = 1 << 29;

/// See the module.
#[derive(Debug)]
pub struct Lattice {
    k: usize,
    mirrored: Vec<bool>,
    /// `steps[g·k + s]`: the element beyond side s, and the translation added.
    steps: Vec<(u16, [i64; 2])>,
    image: Vec<[i64; 2]>,
    /// `turns[g]`: rows of `stretch` times the matrix of an element.
    turns: Vec<[[i64; 2]; 2]>,
    /// The common denominator of the matrices. Every coordinate seen from the unreflected copy is a multiple of it.
    stretch: i64,
    order: usize,
    products: Vec<u16>,
    scale: Integer,
    form: Real,
    deepest: usize,
}

/// A copy: group element and translation.
#[derive(Clone, Copy, Debug)]
pub struct LatticePose {
    element: u16,
    t: [i64; 2],
}

impl Lattice {
    /// Tabulates the group over the integers; `None` when the field is larger than ℚ or a coordinate
    /// could leave the safe range within `deepest` crossings.
    pub fn new(table: &Table, group: &FiniteGroup, deepest: usize) -> Option<Lattice> {
        let k = table.sides();
        let (turns, stretch) = matrices(group, table.form())?;
        let scale = group.common_denominator() * stretch;
        let integral = |v: &Vector| -> Option<[i64; 2]> {
            v.x.to_rational()?;
            v.y.to_rational()?;
            Some([
                scaled_coordinates(&v.x, &scale, 1)?[0],
                scaled_coordinates(&v.y, &scale, 1)?[0],
            ])
        };
        let shift: Vec<[i64; 2]> = group.shift.iter().map(integral).collect::<Option<_>>()?;
        let image: Vec<[i64; 2]> = group.image.iter().map(integral).collect::<Option<_>>()?;
        let largest =
            |vectors: &[[i64; 2]]| vectors.iter().flatten().map(|c| c.unsigned_abs()).max();
        let (far, step) = (largest(&image)?, largest(&shift)?);
        // Home translation at most `far`, then one shift a crossing, then the image itself.
        let bound = (deepest as u64)
            .checked_mul(step)?
            .checked_add(far.checked_mul(2)?)?;
        if bound > LARGEST_COORDINATE as u64 {
            return None;
        }
        Some(Lattice {
            k,
            mirrored: group.mirrored.clone(),
            steps: group.next.iter().copied().zip(shift).collect(),
            image,
            turns,
            stretch,
            order: group.order(),
            products: group.products(),
            scale,
            form: table.form().clone(),
            deepest,
        })
    }

    fn exact(&self, value: i64) -> Real {
        Real::from(Rational::from((Integer::from(value), self.scale.clone())))
    }
}

/// The matrices of a group in whole numbers, with their common denominator.
fn matrices(group: &FiniteGroup, form: &Real) -> Option<(Vec<[[i64; 2]; 2]>, i64)> {
    let entries: Vec<[Rational; 4]> = (group.rotation.iter().zip(&group.mirrored))
        .map(|(w, mirrored)| {
            let (x, y) = (w.x.to_rational()?, w.y.to_rational()?);
            let form_y = &y * form.to_rational()?;
            // (x + y·√−g)(u + v·√−g), with −v for v when mirrored.
            Some(match mirrored {
                false => [x.clone(), -form_y, y, x],
                true => [x.clone(), form_y, y, -x],
            })
        })
        .collect::<Option<_>>()?;
    let mut stretch = Integer::from(1);
    for entry in entries.iter().flatten() {
        stretch.lcm_mut(entry.denom());
    }
    let whole = |entry: &Rational| Rational::from(entry * &stretch).numer().to_i64();
    let turns = entries
        .iter()
        .map(|[a, b, c, d]| Some([[whole(a)?, whole(b)?], [whole(c)?, whole(d)?]]))
        .collect::<Option<_>>()?;
    Some((turns, stretch.to_i64()?))
}

#[inline(always)]
fn cross(a: [i64; 2], b: [i64; 2]) -> i64 {
    a[0] * b[1] - a[1] * b[0]
}

#[inline(always)]
fn minus(a: &[i64; 2], b: &[i64; 2]) -> [i64; 2] {
    [a[0] - b[0], a[1] - b[1]]
}

#[inline(always)]
fn sign(value: i64) -> Sign {
    value.cmp(&0).into()
}

impl Engine for Lattice {
    type Pose = LatticePose;
    type Point = [i64; 2];
    type Exact = ();

    fn home(&self, origin: Option<CornerId>) -> LatticePose {
        let t = origin.map_or([0, 0], |corner| {
            let [x, y] = self.image[corner.0 as usize];
            [-x, -y]
        });
        LatticePose { element: 0, t }
    }

    fn trail(&self, _: Option<CornerId>) -> Trail<()> {
        Trail::new(())
    }

    #[inline(always)]
    fn reflect(&self, pose: &LatticePose, side: SideId) -> LatticePose {
        let (element, shift) = self.steps[pose.element as usize * self.k + side.0 as usize];
        LatticePose {
            element,
            t: [pose.t[0] + shift[0], pose.t[1] + shift[1]],
        }
    }

    #[inline(always)]
    fn is_mirrored(&self, pose: &LatticePose) -> bool {
        self.mirrored[pose.element as usize]
    }

    #[inline(always)]
    fn place(&self, pose: &LatticePose, corner: CornerId) -> [i64; 2] {
        let v = self.image[pose.element as usize * self.k + corner.0 as usize];
        [pose.t[0] + v[0], pose.t[1] + v[1]]
    }

    #[inline(always)]
    fn turn(&self, trail: &mut Trail<()>, a: &[i64; 2], b: &[i64; 2], v: &[i64; 2]) -> Sign {
        trail.tiers.integer += 1;
        sign(cross(minus(b, a), minus(v, a)))
    }

    #[inline(always)]
    fn turn_from_origin(&self, trail: &mut Trail<()>, b: &[i64; 2], v: &[i64; 2]) -> Sign {
        trail.tiers.integer += 1;
        sign(cross(*b, *v))
    }

    fn displacement(&self, _: &mut Trail<()>, a: &[i64; 2], b: &[i64; 2]) -> Vector {
        let [x, y] = minus(b, a);
        Vector::new(self.exact(x), self.exact(y))
    }

    fn squared_distance(
        &self,
        _: &mut Trail<()>,
        a: &[i64; 2],
        b: &[i64; 2],
        precision: u32,
    ) -> Enclosure {
        let [x, y] = minus(b, a).map(|c| Integer::from(c as i128 * c as i128));
        let square = Enclosure::from_integer(&x, precision)
            .add(&self.form.enclosure(precision).mul_integer(&y));
        square.div_integer(&self.scale).div_integer(&self.scale)
    }

    fn deepest(&self) -> usize {
        self.deepest
    }
}

impl Lattice {
    #[inline(always)]
    fn turned(&self, element: u16, v: &[i64; 2]) -> [i64; 2] {
        let [x, y] = &self.turns[element as usize];
        [x[0] * v[0] + x[1] * v[1], y[0] * v[0] + y[1] * v[1]]
    }
}

impl Leaping for Lattice {
    type Ahead = [i64; 2];

    fn can_leap(&self) -> bool {
        !self.products.is_empty()
    }

    fn point_ahead(&self, point: &[i64; 2]) -> [i64; 2] {
        debug_assert!(point.iter().all(|c| c % self.stretch == 0));
        point.map(|c| c / self.stretch)
    }

    fn pose_ahead(&self, pose: &LatticePose) -> (u16, [i64; 2]) {
        (pose.element, self.point_ahead(&pose.t))
    }

    #[inline(always)]
    fn place_ahead(&self, pose: &LatticePose, ahead: &[i64; 2], _: u32, _: CornerId) -> [i64; 2] {
        let v = self.turned(pose.element, ahead);
        [pose.t[0] + v[0], pose.t[1] + v[1]]
    }

    #[inline(always)]
    fn leap(&self, pose: &LatticePose, element: u16, ahead: &[i64; 2], _: u32) -> LatticePose {
        let shift = self.turned(pose.element, ahead);
        LatticePose {
            element: self.products[pose.element as usize * self.order + element as usize],
            t: [pose.t[0] + shift[0], pose.t[1] + shift[1]],
        }
    }
}
