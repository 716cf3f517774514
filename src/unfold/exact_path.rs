//! Exact answers along a path, computed only when a cheaper tier could not decide.
//!
//! A corner image is named by (crossings, corner). Its exact coordinates follow from the path; the poses
//! along the path are kept, so a depth-first walk that asks often pays for each crossing once.
//!
//! - *Finite group*: a pose is a group element and a translation with machine-integer coordinates over
//!   1, θ, …, θ^(d−1). They grow linearly with the crossings. The orientation is a polynomial in θ of
//!   degree at most 2d − 2 with `i128` coefficients, reduced by the minimal polynomial; it is zero
//!   exactly when all reduced coefficients are. Every operation is checked; an overflow falls through.
//! - *Any group*: a symmetry of the path may prove a zero ([`symmetry`](super::symmetry)); enclosures of [`WIDE`] bits
//!   settle most other signs ([`wide_path`](super::wide_path)); integers of any size settle all
//!   ([`big_path`](super::big_path)).
//!
//! Distances are wanted as enclosures only, so they have a path of their own: enclosed isometries, which
//! cost the same at every depth.

use super::big_path::{BigPath, BigTables};
use super::engine::ExactTrail;
use super::group::{FiniteGroup, scaled_coordinates};
use super::isometry::{Isometry, side_reflections};
use super::symmetry::Symmetries;
use super::wide_path::{WidePath, WideTables};
use crate::number::{Enclosure, Field, Real, Sign, Tiers};
use crate::table::{CornerId, SideId, Table, Vector};
use rug::Integer;

/// Bits of the enclosures that are tried before integers of any size.
pub const WIDE: u32 = 192;

/// The name of a corner image on a path.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub struct ImageName {
    /// Crossings before the copy is reached.
    pub crossings: u32,
    /// Corner of the copy.
    pub corner: CornerId,
}

/// Tables for exact answers.
#[derive(Debug)]
pub struct ExactTables {
    field: Field,
    form: Real,
    corners: Vec<Vector>,
    reflections: Vec<Isometry>,
    finite: Option<FiniteTables>,
    symmetries: Symmetries,
    big: BigTables,
    /// False to leave out everything but integers of any size.
    shortcuts: bool,
}

/// The finite group over the integer lattice of the field.
#[derive(Debug)]
struct FiniteTables {
    k: usize,
    degree: usize,
    /// Reduction: θ^(d+i) in the powers below d, row i.
    reduction: Vec<Vec<i128>>,
    /// The same in half the width, when it fits.
    narrow_reduction: Option<Vec<Vec<i64>>>,
    /// While the differences of coordinates stay below this, an orientation is exact in `i64`: see [`narrow_bound`].
    narrow_below: u64,
    /// Enclosures of θ^i: value and a bound on its error.
    powers: Vec<(f64, f64)>,
    scale: Integer,
    next: Vec<u16>,
    /// After so many crossings, and one image more, no coordinate has left the `i64`.
    deepest: usize,
    /// Rows of 2d numbers: x coordinates, then y coordinates.
    shift: Vec<i64>,
    image: Vec<i64>,
}

/// Poses along the current path.
#[derive(Debug)]
pub struct ExactPath {
    origin: Option<CornerId>,
    elements: Vec<u16>,
    translations: Vec<i64>,
    row: usize,
    scratch: Scratch,
    big: BigPath,
    wide: WidePath,
}

/// Room for one orientation, kept so that asking often does not allocate.
#[derive(Debug, Default)]
struct Scratch {
    /// b − a, then v − a.
    differences: [Vec<i64>; 2],
    product: Vec<i64>,
}

impl ExactTrail for ExactPath {
    #[inline(always)]
    fn keep(&mut self, crossings: usize) {
        if self.elements.len() > crossings + 1 {
            self.elements.truncate(crossings + 1);
            self.translations.truncate((crossings + 1) * self.row);
        }
        self.big.keep(crossings);
        self.wide.keep(crossings);
    }
}

impl ExactTables {
    /// Prepares exact answers for a table; with a group, machine integers come first.
    pub fn new(table: &Table, group: Option<&FiniteGroup>) -> ExactTables {
        let reflections = side_reflections(table);
        ExactTables {
            field: table.field().clone(),
            form: table.form().clone(),
            corners: table.corners().to_vec(),
            finite: group.and_then(|group| FiniteTables::new(table, group)),
            symmetries: Symmetries::new(table),
            big: BigTables::new(table.field(), table.form(), table.corners(), &reflections),
            shortcuts: true,
            reflections,
        }
    }

    /// Leaves out everything but integers of any size.
    pub fn without_shortcuts(self) -> ExactTables {
        ExactTables {
            finite: None,
            shortcuts: false,
            ..self
        }
    }

    /// An empty path.
    pub fn path(&self, origin: Option<CornerId>) -> ExactPath {
        ExactPath {
            origin,
            elements: Vec::new(),
            translations: Vec::new(),
            row: self.finite.as_ref().map_or(0, |f| 2 * f.degree),
            scratch: Scratch::default(),
            big: BigPath::default(),
            wide: WidePath::default(),
        }
    }

    /// True when machine integers are tried before big ones.
    pub fn has_machine_integers(&self) -> bool {
        self.finite.is_some()
    }

    /// The sign of the cross product (b − a) × (v − a); `None` for `a` means the origin.
    #[cold]
    pub fn turn(
        &self,
        path: &mut ExactPath,
        sides: &[SideId],
        tiers: &mut Tiers,
        points: (Option<ImageName>, ImageName, ImageName),
    ) -> Sign {
        if let Some(finite) = &self.finite
            && let Some(sign) = finite.turn(self, path, sides, points)
        {
            tiers.integer += 1;
            return sign;
        }
        let (a, b, v) = points;
        // A walk that asks about the origin has a corner there.
        let a = a.unwrap_or_else(|| ImageName {
            crossings: 0,
            corner: path.origin.expect("a walk of rays has an origin"),
        });
        if self.shortcuts {
            if self.symmetries.prove_collinear(sides, a, b, v) {
                tiers.symmetry += 1;
                debug_assert_eq!(self.big.turn(&mut path.big, sides, [a, b, v]), Sign::Zero);
                return Sign::Zero;
            }
            if let Some(sign) = self.wide_turn(path, sides, [a, b, v]) {
                tiers.enclosure += 1;
                return sign;
            }
        }
        tiers.big += 1;
        self.big.turn(&mut path.big, sides, [a, b, v])
    }

    /// The exact position of a corner image, up to a translation that is the same for the whole path.
    pub fn position(&self, path: &mut ExactPath, sides: &[SideId], name: ImageName) -> Vector {
        if let Some(finite) = &self.finite
            && let Some(row) = finite.position(path, sides, name)
        {
            return finite.vector(&self.field, &row);
        }
        self.big.position(&mut path.big, sides, name)
    }

    /// The orientation, when enclosures of [`WIDE`] bits settle it.
    fn wide_turn(
        &self,
        path: &mut ExactPath,
        sides: &[SideId],
        images: [ImageName; 3],
    ) -> Option<Sign> {
        let form = self.form.enclosure(WIDE);
        let tables = self.wide_tables(&form);
        let [a, b, v] = images.map(|name| path.wide.position(&tables, sides, name, WIDE));
        let minus = |p: &[Enclosure; 2]| [p[0].sub(&a[0]), p[1].sub(&a[1])];
        let (b, v) = (minus(&b), minus(&v));
        let cross = b[0].mul(&v[1]).sub(&b[1].mul(&v[0]));
        cross.sign().filter(|sign| *sign != Sign::Zero)
    }

    fn wide_tables<'a>(&'a self, form: &'a Enclosure) -> WideTables<'a> {
        WideTables {
            corners: &self.corners,
            reflections: &self.reflections,
            form,
        }
    }
}

impl ExactTables {
    /// An enclosure of the squared distance of two corner images.
    pub fn squared_distance(
        &self,
        path: &mut ExactPath,
        sides: &[SideId],
        (a, b): (ImageName, ImageName),
        precision: u32,
    ) -> Enclosure {
        let form = self.form.enclosure(precision);
        if let Some(finite) = &self.finite
            && let Some(a) = finite.position(path, sides, a)
            && let Some(b) = finite.position(path, sides, b)
            && let Some(difference) = checked_difference(&b, &a)
        {
            let powers = self.field.powers(precision);
            let (x, y) = difference.split_at(finite.degree);
            let coordinate = |coordinates: &[i64]| {
                let mut sum = Enclosure::zero(precision);
                for (c, power) in coordinates.iter().zip(powers.iter()) {
                    sum.add_assign(&power.mul_integer(&Integer::from(*c)));
                }
                sum
            };
            let square = norm(&coordinate(x), &coordinate(y), &form);
            return square.div_integer(&finite.scale).div_integer(&finite.scale);
        }
        let tables = self.wide_tables(&form);
        let [ax, ay] = path.wide.position(&tables, sides, a, precision);
        let [bx, by] = path.wide.position(&tables, sides, b, precision);
        norm(&bx.sub(&ax), &by.sub(&ay), &form)
    }
}

fn norm(x: &Enclosure, y: &Enclosure, form: &Enclosure) -> Enclosure {
    x.square().add(&form.mul(&y.square()))
}

fn checked_difference(a: &[i64], b: &[i64]) -> Option<Vec<i64>> {
    a.iter().zip(b).map(|(a, b)| a.checked_sub(*b)).collect()
}

impl FiniteTables {
    fn new(table: &Table, group: &FiniteGroup) -> Option<FiniteTables> {
        let field = table.field();
        let degree = field.degree();
        let scale = group.common_denominator();
        let rows = |vectors: &[Vector]| -> Option<Vec<i64>> {
            let mut flat = Vec::with_capacity(vectors.len() * 2 * degree);
            for v in vectors {
                flat.extend(scaled_coordinates(&v.x.lifted_to(field), &scale, degree)?);
                flat.extend(scaled_coordinates(&v.y.lifted_to(field), &scale, degree)?);
            }
            Some(flat)
        };
        let reduction: Vec<Vec<i128>> = (degree..2 * degree - 1)
            .map(|i| {
                let power = field.generator().pow(i as u32).lifted_to(field);
                power.coordinates().iter().map(Integer::to_i128).collect()
            })
            .collect::<Option<_>>()?;
        let powers = (0..degree)
            .map(|i| {
                let value = field.generator().pow(i as u32).to_f64();
                // `to_f64` is within 2 units in the last place; 2^-50 leaves room.
                (value, value.abs() * 2f64.powi(-50))
            })
            .collect();
        let (shift, image) = (rows(&group.shift)?, rows(&group.image)?);
        let largest = |row: &[i64]| row.iter().map(|c| c.unsigned_abs()).max().unwrap_or(0);
        // The start is an image, and so is the end.
        let room = (i64::MAX as u64).checked_sub(largest(&image).checked_mul(2)?)?;
        Some(FiniteTables {
            k: table.sides(),
            degree,
            deepest: (room / largest(&shift).max(1)) as usize,
            narrow_below: narrow_bound(&reduction),
            narrow_reduction: narrowed(&reduction),
            reduction,
            powers,
            shift,
            image,
            next: group.next.clone(),
            scale,
        })
    }

    /// Extends the machine-integer poses to a crossing; `None` when coordinates might not fit.
    fn reach(&self, path: &mut ExactPath, sides: &[SideId], crossings: usize) -> Option<()> {
        let row = path.row;
        if path.elements.is_empty() {
            path.elements.push(0);
            match path.origin {
                Some(corner) => {
                    let at = corner.0 as usize * row;
                    path.translations
                        .extend(self.image[at..at + row].iter().map(|c| -c));
                }
                None => path.translations.extend(std::iter::repeat_n(0, row)),
            }
        }
        if crossings > self.deepest {
            return None;
        }
        while path.elements.len() <= crossings {
            let here = path.elements.len() - 1;
            let at = path.elements[here] as usize * self.k + sides[here].0 as usize;
            let shift = &self.shift[at * row..(at + 1) * row];
            let from = here * row;
            for (c, step) in shift.iter().enumerate() {
                let sum = path.translations[from + c] + step;
                path.translations.push(sum);
            }
            path.elements.push(self.next[at]);
        }
        Some(())
    }

    fn position(
        &self,
        path: &mut ExactPath,
        sides: &[SideId],
        name: ImageName,
    ) -> Option<Vec<i64>> {
        let crossings = name.crossings as usize;
        self.reach(path, sides, crossings)?;
        let row = path.row;
        let at = (path.elements[crossings] as usize * self.k + name.corner.0 as usize) * row;
        (0..row)
            .map(|c| path.translations[crossings * row + c].checked_add(self.image[at + c]))
            .collect()
    }

    fn vector(&self, field: &Field, row: &[i64]) -> Vector {
        let real = |coordinates: &[i64]| {
            let coordinates = coordinates.iter().map(|c| Integer::from(*c)).collect();
            Real::from_coordinates(field, coordinates, self.scale.clone())
        };
        let (x, y) = row.split_at(self.degree);
        Vector::new(real(x), real(y))
    }

    fn turn(
        &self,
        tables: &ExactTables,
        path: &mut ExactPath,
        sides: &[SideId],
        points: (Option<ImageName>, ImageName, ImageName),
    ) -> Option<Sign> {
        let mut scratch = std::mem::take(&mut path.scratch);
        let narrow = self.narrow_turn(tables, path, &mut scratch, sides, points);
        path.scratch = scratch;
        match narrow {
            Some(sign) => Some(sign),
            None => self.wide_integer_turn(tables, path, sides, points),
        }
    }

    /// The orientation in `i64`, when the differences are small enough for all of it to fit.
    fn narrow_turn(
        &self,
        tables: &ExactTables,
        path: &mut ExactPath,
        scratch: &mut Scratch,
        sides: &[SideId],
        (a, b, v): (Option<ImageName>, ImageName, ImageName),
    ) -> Option<Sign> {
        let d = self.degree;
        let reduction = self.narrow_reduction.as_ref()?;
        let latest = b.crossings.max(v.crossings);
        let latest = a.map_or(latest, |a| a.crossings.max(latest));
        self.reach(path, sides, latest as usize)?;
        let mut largest = 0;
        for (point, difference) in [b, v].into_iter().zip(&mut scratch.differences) {
            difference.clear();
            for c in 0..2 * d {
                let from = match a {
                    Some(a) => self.coordinate(path, a, c)?,
                    None => 0,
                };
                let value = self.coordinate(path, point, c)?.checked_sub(from)?;
                largest = largest.max(value.unsigned_abs());
                difference.push(value);
            }
        }
        if largest >= self.narrow_below {
            return None;
        }
        let [b, v] = &scratch.differences;
        let product = &mut scratch.product;
        product.clear();
        product.resize(2 * d - 1, 0);
        for i in 0..d {
            for j in 0..d {
                product[i + j] += b[i] * v[d + j] - b[d + i] * v[j];
            }
        }
        let (low, high) = product.split_at_mut(d);
        for (top, row) in high.iter().zip(reduction) {
            for (sum, weight) in low.iter_mut().zip(row) {
                *sum += top * weight;
            }
        }
        Some(self.sign(tables, low))
    }

    /// One coordinate of a corner image whose crossing is reached.
    #[inline]
    fn coordinate(&self, path: &ExactPath, name: ImageName, c: usize) -> Option<i64> {
        let (crossings, row) = (name.crossings as usize, path.row);
        let at = (path.elements[crossings] as usize * self.k + name.corner.0 as usize) * row;
        path.translations[crossings * row + c].checked_add(self.image[at + c])
    }

    /// The orientation in `i128`, when nothing overflows.
    fn wide_integer_turn(
        &self,
        tables: &ExactTables,
        path: &mut ExactPath,
        sides: &[SideId],
        (a, b, v): (Option<ImageName>, ImageName, ImageName),
    ) -> Option<Sign> {
        let d = self.degree;
        let b = self.position(path, sides, b)?;
        let v = self.position(path, sides, v)?;
        let a = match a {
            Some(a) => self.position(path, sides, a)?,
            None => vec![0; 2 * d],
        };
        // Differences of i64 fit in i128, and so does one product; sums are checked.
        let difference = |p: &[i64], c: usize| p[c] as i128 - a[c] as i128;
        let mut product = vec![0i128; 2 * d - 1];
        for i in 0..d {
            for j in 0..d {
                let plus = difference(&b, i).checked_mul(difference(&v, d + j))?;
                let minus = difference(&b, d + i).checked_mul(difference(&v, j))?;
                let term = plus.checked_sub(minus)?;
                product[i + j] = product[i + j].checked_add(term)?;
            }
        }
        for i in (d..2 * d - 1).rev() {
            let top = product[i];
            for (c, weight) in self.reduction[i - d].iter().enumerate() {
                product[c] = product[c].checked_add(top.checked_mul(*weight)?)?;
            }
        }
        product.truncate(d);
        Some(self.sign(tables, &product))
    }

    /// The sign of Σ c_i θ^i.
    fn sign<C: Copy + Into<i128>>(&self, tables: &ExactTables, coordinates: &[C]) -> Sign {
        let coordinates = || coordinates.iter().map(|c| (*c).into());
        if coordinates().all(|c: i128| c == 0) {
            return Sign::Zero;
        }
        // Floating point: each term c·θ^i is off by at most |c|·(error of θ^i) plus two roundings, and
        // each of the d additions by one rounding of a sum of magnitude at most Σ|c·θ^i|.
        let (mut sum, mut slack, mut magnitude) = (0.0, 0.0, 0.0);
        for (c, (power, error)) in coordinates().zip(&self.powers) {
            let c = c as f64;
            sum += c * power;
            slack += c.abs() * error;
            magnitude += (c * power).abs();
        }
        let bound = 1.01 * (slack + magnitude * (self.degree as f64 + 3.0) * f64::EPSILON);
        if sum > bound {
            return Sign::Positive;
        }
        if sum < -bound {
            return Sign::Negative;
        }
        let coordinates = coordinates().map(Integer::from).collect();
        Real::from_coordinates(&tables.field, coordinates, Integer::from(1)).sign()
    }
}

/// Below this bound M of all differences, an orientation is exact in `i64`.
///
/// A coefficient of the product is a sum of at most d terms b_x·v_y − b_y·v_x, so at most 2d·M². The reduction
/// adds to each of the d low coefficients the d − 1 high ones times their weights, so a reduced coefficient, and
/// every sum on the way, is at most 2d·M²·(1 + W), W the largest sum of absolute weights of one column. The
/// bound keeps this below 2^62.
fn narrow_bound(reduction: &[Vec<i128>]) -> u64 {
    let degree = reduction.len() + 1;
    let column = |c: usize| -> f64 { reduction.iter().map(|row| row[c].abs() as f64).sum() };
    let weights = (0..degree)
        .filter(|_| !reduction.is_empty())
        .map(column)
        .fold(0.0, f64::max);
    // Half of the root leaves room for the rounding of this computation.
    (2f64.powi(62) / (2.0 * degree as f64 * (1.0 + weights))).sqrt() as u64 / 2
}

/// The reduction in half the width, when it fits.
fn narrowed(reduction: &[Vec<i128>]) -> Option<Vec<Vec<i64>>> {
    let narrow = |row: &Vec<i128>| row.iter().map(|w| i64::try_from(*w).ok()).collect();
    reduction.iter().map(narrow).collect()
}
