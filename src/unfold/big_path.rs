//! Exact poses along a path in integers of any size, without fractions.
//!
//! A pose after n crossings is z ↦ w·z + t or w·z̄ + t (see [`isometry`](super::isometry)) with coordinates in the field. With
//! q_s a common denominator of the reflection in side s, all four coordinates have the denominator
//! D_n = q_{s₁}·…·q_{s_n}, which is known without any greatest common divisor; only numerators are kept. One more crossing
//! multiplies them by the fixed small numbers of one reflection, so it takes O(d²) products of a long integer by
//! a short one, in a field of degree d. Lengths grow by a fixed number of bits with every crossing.

use super::exact_path::ImageName;
use super::isometry::Isometry;
use crate::number::real::{reduce_powers, sign_of_coordinates};
use crate::number::{Field, Real, Sign};
use crate::table::{CornerId, SideId, Vector};
use rug::Integer;

/// A field element's coordinates over 1, θ, …, θ^(d−1), with a denominator known from elsewhere.
type Row = Vec<Integer>;

/// A fixed field element as the matrix of multiplication by it, with integer entries; row j holds the coordinates of its
/// product with θ^j.
#[derive(Clone, Debug)]
struct Multiplier(Vec<Row>);

/// A vector (x, y) prepared for products with others in the plane form g.
#[derive(Clone, Debug)]
struct FixedVector {
    x: Multiplier,
    y: Multiplier,
    form_y: Multiplier,
}

/// A reflection with its denominator.
#[derive(Clone, Debug)]
struct FixedReflection {
    w: FixedVector,
    c: FixedVector,
    denominator: Integer,
}

/// A table prepared for exact poses.
#[derive(Debug)]
pub struct BigTables {
    field: Field,
    reflections: Vec<FixedReflection>,
    corners: Vec<FixedVector>,
    /// Common denominator of all corner coordinates and their products with g.
    corner_denominator: Integer,
}

/// Numerators of a pose over `denominator`.
#[derive(Clone, Debug)]
struct BigPose {
    w: [Row; 2],
    t: [Row; 2],
    denominator: Integer,
}

/// Poses along the current path.
#[derive(Debug, Default)]
pub struct BigPath {
    poses: Vec<BigPose>,
}

/// An exact point: numerators over a denominator.
#[derive(Clone, Debug)]
struct BigPoint {
    at: [Row; 2],
    denominator: Integer,
}

/// The least common denominator of some field elements.
fn common_denominator<'a>(values: impl IntoIterator<Item = &'a Real>) -> Integer {
    let mut denominator = Integer::from(1);
    for value in values {
        denominator.lcm_mut(value.denominator());
    }
    denominator
}

fn scaled(field: &Field, value: &Real, scale: &Integer) -> Row {
    let value = value.lifted_to(field);
    let factor = Integer::from(scale / value.denominator());
    value
        .coordinates()
        .iter()
        .map(|c| Integer::from(c * &factor))
        .collect()
}

fn multiplier(field: &Field, value: &Real, scale: &Integer) -> Multiplier {
    let mut rows = vec![scaled(field, value, scale)];
    for _ in 1..field.degree() {
        let mut next = rows[rows.len() - 1].clone();
        next.insert(0, Integer::new());
        rows.push(reduce_powers(field, next));
    }
    Multiplier(rows)
}

impl FixedVector {
    fn new(field: &Field, v: &Vector, form: &Real, scale: &Integer) -> FixedVector {
        FixedVector {
            x: multiplier(field, &v.x, scale),
            y: multiplier(field, &v.y, scale),
            form_y: multiplier(field, &(form * &v.y), scale),
        }
    }
}

/// `sum += sign · row · fixed`.
fn add_product(sum: &mut Row, row: &Row, fixed: &Multiplier, negative: bool) {
    for (coordinate, products) in row.iter().zip(&fixed.0) {
        if *coordinate == 0 {
            continue;
        }
        for (target, entry) in sum.iter_mut().zip(products) {
            if negative {
                *target -= coordinate * entry;
            } else {
                *target += coordinate * entry;
            }
        }
    }
}

/// w·z, or w·z̄ when mirrored, for a fixed z; added to `start`.
fn turned(w: &[Row; 2], z: &FixedVector, mirrored: bool, start: [Row; 2]) -> [Row; 2] {
    let [mut x, mut y] = start;
    // (w.x z.x − g w.y z.y, w.x z.y + w.y z.x), with z.y negated when mirrored.
    add_product(&mut x, &w[0], &z.x, false);
    add_product(&mut x, &w[1], &z.form_y, !mirrored);
    add_product(&mut y, &w[0], &z.y, mirrored);
    add_product(&mut y, &w[1], &z.x, false);
    [x, y]
}

fn zero(field: &Field) -> [Row; 2] {
    let row = vec![Integer::new(); field.degree()];
    [row.clone(), row]
}

fn times(rows: &[Row; 2], factor: &Integer) -> [Row; 2] {
    let scale = |row: &Row| row.iter().map(|c| Integer::from(c * factor)).collect();
    [scale(&rows[0]), scale(&rows[1])]
}

impl BigTables {
    /// Prepares the side reflections and corners of a table.
    pub fn new(
        field: &Field,
        form: &Real,
        corners: &[Vector],
        reflections: &[Isometry],
    ) -> BigTables {
        let with_form = |v: &Vector| [v.x.clone(), v.y.clone(), form * &v.y];
        let corner_values: Vec<Real> = corners.iter().flat_map(with_form).collect();
        let corner_denominator = common_denominator(&corner_values);
        BigTables {
            field: field.clone(),
            reflections: reflections
                .iter()
                .map(|r| {
                    let values: Vec<Real> =
                        with_form(&r.w).into_iter().chain(with_form(&r.t)).collect();
                    let denominator = common_denominator(&values);
                    FixedReflection {
                        w: FixedVector::new(field, &r.w, form, &denominator),
                        c: FixedVector::new(field, &r.t, form, &denominator),
                        denominator,
                    }
                })
                .collect(),
            corners: corners
                .iter()
                .map(|v| FixedVector::new(field, v, form, &corner_denominator))
                .collect(),
            corner_denominator,
        }
    }

    /// The sign of (b − a) × (v − a).
    pub fn turn(&self, path: &mut BigPath, sides: &[SideId], [a, b, v]: [ImageName; 3]) -> Sign {
        let a = self.point(path, sides, a);
        let b = difference(&self.point(path, sides, b), &a);
        let v = difference(&self.point(path, sides, v), &a);
        let product = |p: &Row, q: &Row| {
            let mut raw = vec![Integer::new(); p.len() + q.len() - 1];
            for (i, x) in p.iter().enumerate() {
                for (j, y) in q.iter().enumerate() {
                    raw[i + j] += x * y;
                }
            }
            raw
        };
        let (left, right) = (product(&b[0], &v[1]), product(&b[1], &v[0]));
        let cross = left.into_iter().zip(right).map(|(l, r)| l - r).collect();
        sign_of_coordinates(&self.field, &reduce_powers(&self.field, cross))
    }

    /// The exact position of a corner image, relative to the unmoved table.
    pub fn position(&self, path: &mut BigPath, sides: &[SideId], name: ImageName) -> Vector {
        let BigPoint {
            at: [x, y],
            denominator,
        } = self.point(path, sides, name);
        Vector::new(
            Real::from_coordinates(&self.field, x, denominator.clone()),
            Real::from_coordinates(&self.field, y, denominator),
        )
    }

    fn point(&self, path: &mut BigPath, sides: &[SideId], name: ImageName) -> BigPoint {
        let crossings = name.crossings as usize;
        self.reach(path, sides, crossings);
        let pose = &path.poses[crossings];
        let CornerId(corner) = name.corner;
        let start = times(&pose.t, &self.corner_denominator);
        BigPoint {
            at: turned(
                &pose.w,
                &self.corners[corner as usize],
                crossings % 2 == 1,
                start,
            ),
            denominator: Integer::from(&pose.denominator * &self.corner_denominator),
        }
    }

    fn reach(&self, path: &mut BigPath, sides: &[SideId], crossings: usize) {
        if path.poses.is_empty() {
            let mut w = zero(&self.field);
            w[0][0] = Integer::from(1);
            path.poses.push(BigPose {
                w,
                t: zero(&self.field),
                denominator: Integer::from(1),
            });
        }
        while path.poses.len() <= crossings {
            let here = path.poses.len() - 1;
            let pose = &path.poses[here];
            let reflection = &self.reflections[sides[here].0 as usize];
            let mirrored = here % 2 == 1;
            let next = BigPose {
                w: turned(&pose.w, &reflection.w, mirrored, zero(&self.field)),
                t: turned(
                    &pose.w,
                    &reflection.c,
                    mirrored,
                    times(&pose.t, &reflection.denominator),
                ),
                denominator: Integer::from(&pose.denominator * &reflection.denominator),
            };
            path.poses.push(next);
        }
    }
}

impl BigPath {
    /// Forgets what depends on crossings after the first `crossings`.
    #[inline]
    pub fn keep(&mut self, crossings: usize) {
        if self.poses.len() > crossings + 1 {
            self.poses.truncate(crossings + 1);
        }
    }
}

/// A positive multiple of p − a.
fn difference(p: &BigPoint, a: &BigPoint) -> [Row; 2] {
    let subtract = |p_row: &Row, a_row: &Row| {
        p_row
            .iter()
            .zip(a_row)
            .map(|(x, y)| Integer::from(x * &a.denominator) - y * &p.denominator)
            .collect()
    };
    [subtract(&p.at[0], &a.at[0]), subtract(&p.at[1], &a.at[1])]
}
