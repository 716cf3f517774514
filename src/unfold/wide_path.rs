//! Enclosed poses along a path: for distances, where certified decimals are wanted and no signs.
//!
//! A pose is z ↦ w·z + t or w·z̄ + t with enclosures for w and t (see [`isometry`](super::isometry)). Since |w| = 1, the
//! widths grow linearly with the number of crossings, so a few dozen bits beyond the wanted ones last for
//! every length that can be walked; how wide a result really is shows in the result.

use super::exact_path::ImageName;
use super::isometry::Isometry;
use crate::number::Enclosure;
use crate::table::{SideId, Vector};

type Pair = [Enclosure; 2];

/// What the poses are made from.
#[derive(Debug)]
pub struct WideTables<'a> {
    /// Corners of the table.
    pub corners: &'a [Vector],
    /// Reflections in its sides.
    pub reflections: &'a [Isometry],
    /// g of the plane form.
    pub form: &'a Enclosure,
}

/// Poses along the current path.
#[derive(Debug, Default)]
pub struct WidePath {
    poses: Vec<(Pair, Pair)>,
    reflections: Vec<(Pair, Pair)>,
    corners: Vec<Pair>,
    /// Positions found so far: entry crossings·k + corner.
    positions: Vec<Option<Pair>>,
}

fn enclose(v: &Vector, precision: u32) -> Pair {
    [
        v.x.enclosure_within(precision),
        v.y.enclosure_within(precision),
    ]
}

/// w·z, or w·z̄ when mirrored.
fn turned(w: &Pair, z: &Pair, mirrored: bool, form: &Enclosure) -> Pair {
    let y = if mirrored { z[1].neg() } else { z[1].clone() };
    [
        w[0].mul(&z[0]).sub(&form.mul(&w[1].mul(&y))),
        w[0].mul(&y).add(&w[1].mul(&z[0])),
    ]
}

fn plus(a: &Pair, b: &Pair) -> Pair {
    [a[0].add(&b[0]), a[1].add(&b[1])]
}

impl WidePath {
    /// Forgets what depends on crossings after the first `crossings`.
    #[inline]
    pub fn keep(&mut self, crossings: usize) {
        if self.poses.len() > crossings + 1 {
            self.poses.truncate(crossings + 1);
        }
        let kept = (crossings + 1) * self.corners.len();
        if self.positions.len() > kept {
            self.positions.truncate(kept);
        }
    }

    /// The position of a corner image, relative to the unmoved table.
    pub fn position(
        &mut self,
        tables: &WideTables<'_>,
        sides: &[SideId],
        name: ImageName,
        precision: u32,
    ) -> Pair {
        let k = tables.corners.len();
        let index = name.crossings as usize * k + name.corner.0 as usize;
        if let Some(Some(found)) = self.positions.get(index) {
            return found.clone();
        }
        if self.reflections.is_empty() {
            let pairs = |r: &Isometry| (enclose(&r.w, precision), enclose(&r.t, precision));
            self.reflections = tables.reflections.iter().map(pairs).collect();
            self.corners = tables
                .corners
                .iter()
                .map(|c| enclose(c, precision))
                .collect();
        }
        if self.poses.is_empty() {
            let identity = Isometry::identity();
            self.poses.push((
                enclose(&identity.w, precision),
                enclose(&identity.t, precision),
            ));
        }
        while self.poses.len() <= name.crossings as usize {
            let here = self.poses.len() - 1;
            let mirrored = here % 2 == 1;
            let (w, t) = &self.poses[here];
            let (step_w, step_t) = &self.reflections[sides[here].0 as usize];
            let next = (
                turned(w, step_w, mirrored, tables.form),
                plus(&turned(w, step_t, mirrored, tables.form), t),
            );
            self.poses.push(next);
        }
        let (w, t) = &self.poses[name.crossings as usize];
        let corner = &self.corners[name.corner.0 as usize];
        let position = plus(&turned(w, corner, name.crossings % 2 == 1, tables.form), t);
        if self.positions.len() <= index {
            self.positions.resize(index + 1, None);
        }
        self.positions[index] = Some(position.clone());
        position
    }
}
