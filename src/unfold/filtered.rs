//! The engine for every table: floating point with a proved error bound, exact behind it.
//!
//! **What is decided**: the sign of (b − a) × (v − a) for corner images a, b, v of one path.
//!
//! **The filter.** Let u = 2^−53. R bounds the lengths of all corner vectors and of the translation parts
//! of all side reflections (the caller moves the table so that corner 0 is at the origin, which keeps R small).
//! Tabulated numbers are rounded from exact ones with relative error below η = 2^−48. After n crossings:
//!
//! - a rotation w (|w| = 1) is a product of n rounded factors. One rounded complex product adds at most
//!   4u + 2η to the error of w (Brent, Percival, Zimmermann, Math. Comp. 76 (2007): a complex product
//!   has relative error at most √5·u). So its error is at most δ_n = n·(4u + 2η)·(1 + small);
//! - a translation grows by w·c: |t_n| ≤ X_n = (2n + 1)·2R and its error e_n satisfies
//!   e_{n+1} ≤ e_n + 2R·δ_n + 4R·(η + 2u) + u·X_{n+1};
//! - a corner image w·v + t has an error at most p_n, one more such term.
//!
//! Where the group is tabulated the rotations are not products, so δ_n = η: the same bounds hold.
//! A leap over m crossings adds w·τ to the translation, w tabulated and τ a translation of a walk of m crossings
//! itself; a corner image ahead is w·v + t in the same way. Leaps of m₁ + m₂ + … = n crossings give an error of at
//! most Σ e_{m_j} ≤ 2·e_n (each has its own start, whose error is less than one step's), Σ 2R·(2m_j + 1)·2η ≤ 2·e_n
//! for w, and u·X_n for each sum, at most 2·e_n for n of them. One more such term gives a corner image. So with a
//! tabulated group all errors are taken `LEAPS` times.
//!
//! A cross product of two differences, each of magnitude at most D = 2X_n + f with error at most
//! f = 2p_n + 2u·X_n, is off by at most 4Df + 2f² + 8u·D². The table `bound[n]` holds this, inflated by
//! one part in 1000 for the rounding of the bound's own computation. v is the latest of the three
//! images, so n is its number of crossings.
//!
//! **The exact route** is [`exact_path`](super::exact_path); zeros always end there.

use super::engine::{Engine, Leaping, Trail};
use super::exact_path::{ExactPath, ExactTables, ImageName};
use super::group::FiniteGroup;
use super::isometry::side_reflections;
use crate::number::{Enclosure, Real, Sign};
use crate::table::{CornerId, SideId, Table, Vector};

/// Relative error of tabulated numbers: `Real::to_f64` is within 2 units in the last place, and the
/// factor √g with its product adds at most 3 more; 2^−48 is 32 units.
const TABULATED: f64 = 1.0 / (1u64 << 48) as f64;
/// The errors of a walk in leaps against those of one in steps.
const LEAPS: f64 = 8.0;
/// Half a unit in the last place of 1.
const UNIT: f64 = f64::EPSILON / 2.0;

/// See the module.
#[derive(Debug)]
pub struct Filtered {
    k: usize,
    linear: Linear,
    /// Corner coordinates (not rotated) in the true Euclidean plane.
    corners: Vec<[f64; 2]>,
    /// Error bound of a cross product whose latest point has n crossings.
    bound: Vec<f64>,
    exact: ExactTables,
}

/// How linear parts are kept.
#[derive(Debug)]
enum Linear {
    /// One of finitely many, by index.
    Tabulated {
        mirrored: Vec<bool>,
        /// `steps[g·k + s]`: element beyond the side and translation added.
        steps: Vec<(u16, [f64; 2])>,
        /// `image[g·k + i]`.
        image: Vec<[f64; 2]>,
        /// The rotation of each element.
        rotation: Vec<[f64; 2]>,
        /// `products[g·order + h]`.
        products: Vec<u16>,
    },
    /// A product of rotations: the reflections as (w, c).
    Product {
        reflections: Vec<([f64; 2], [f64; 2])>,
    },
}

/// A copy of the table.
#[derive(Clone, Copy, Debug)]
pub struct FilteredPose {
    w: [f64; 2],
    t: [f64; 2],
    element: u16,
    mirrored: bool,
    crossings: u32,
}

/// A corner image: floating-point position and exact name.
#[derive(Clone, Copy, Debug)]
pub struct FilteredPoint {
    /// Approximate position.
    pub at: [f64; 2],
    /// Exact name on the current path.
    pub name: ImageName,
}

impl Filtered {
    /// Prepares walks of at most `deepest` crossings.
    pub fn new(table: &Table, group: Option<&FiniteGroup>, deepest: usize) -> Filtered {
        let k = table.sides();
        let root_form = table.form().to_f64().sqrt();
        let round = |v: &Vector| [v.x.to_f64(), v.y.to_f64() * root_form];
        let corners: Vec<[f64; 2]> = table.corners().iter().map(round).collect();
        let linear = match group {
            Some(group) => Linear::Tabulated {
                mirrored: group.mirrored.clone(),
                steps: group
                    .next
                    .iter()
                    .copied()
                    .zip(group.shift.iter().map(round))
                    .collect(),
                image: group.image.iter().map(round).collect(),
                rotation: group.rotation.iter().map(round).collect(),
                products: group.products(),
            },
            None => Linear::Product {
                reflections: side_reflections(table)
                    .iter()
                    .map(|r| (round(&r.w), round(&r.t)))
                    .collect(),
            },
        };
        let reach = side_reflections(table)
            .iter()
            .map(|r| modulus(&r.t, table.form()))
            .chain(table.corners().iter().map(|c| modulus(c, table.form())))
            .fold(0.0, f64::max);
        Filtered {
            k,
            linear,
            corners,
            bound: error_bounds(
                reach * 1.001,
                deepest,
                if group.is_some() { LEAPS } else { 1.0 },
            ),
            exact: ExactTables::new(table, group),
        }
    }

    /// The same walks without the filter and without machine integers: every sign from big arithmetic.
    pub fn big_only(table: &Table, deepest: usize) -> Filtered {
        let mut engine = Filtered::new(table, None, deepest);
        engine.bound.fill(f64::INFINITY);
        engine.exact = engine.exact.without_shortcuts();
        engine
    }

    /// One line for reports.
    pub fn describe(&self) -> &'static str {
        if self.bound.first() == Some(&f64::INFINITY) {
            "integers of any size only"
        } else if self.exact.has_machine_integers() {
            "floating point with a proved bound, machine integers behind it (finite reflection group)"
        } else {
            "floating point with a proved bound, integers of any size behind it"
        }
    }

    #[inline(always)]
    fn decide(&self, value: f64, bound: f64) -> Option<Sign> {
        if value > bound {
            Some(Sign::Positive)
        } else if value < -bound {
            Some(Sign::Negative)
        } else {
            None
        }
    }
}

fn modulus(v: &Vector, form: &Real) -> f64 {
    v.squared_length(form).to_f64().sqrt()
}

/// The table of the module's formula: entry n for a latest point after n crossings.
fn error_bounds(reach: f64, deepest: usize, times: f64) -> Vec<f64> {
    let mut translation_error = 2.0 * reach * TABULATED;
    (0..=deepest + 1)
        .map(|n| {
            let n = n as f64;
            let rotation_error = n * (4.0 * UNIT + 2.0 * TABULATED) * 1.01 + TABULATED;
            let extent = (2.0 * n + 1.0) * 2.0 * reach;
            let growth = 2.0 * reach * rotation_error
                + 4.0 * reach * (TABULATED + 2.0 * UNIT)
                + UNIT * (extent + 4.0 * reach);
            let point_error = times * (translation_error + growth);
            translation_error += growth;
            let f = 2.0 * point_error + 2.0 * UNIT * extent;
            let size = 2.0 * extent + f;
            // Below the normal numbers roundings are absolute, and the reach may have lost its places or
            // be zero; every product that this can spoil is less than the smallest normal number.
            1.001 * (4.0 * size * f + 2.0 * f * f + 8.0 * UNIT * size * size) + f64::MIN_POSITIVE
        })
        .collect()
}

#[inline(always)]
fn complex_product(a: [f64; 2], b: [f64; 2]) -> [f64; 2] {
    [a[0] * b[0] - a[1] * b[1], a[0] * b[1] + a[1] * b[0]]
}

#[inline(always)]
fn turned(w: [f64; 2], mirrored: bool, v: [f64; 2]) -> [f64; 2] {
    complex_product(w, if mirrored { [v[0], -v[1]] } else { v })
}

#[inline(always)]
fn plus(a: [f64; 2], b: [f64; 2]) -> [f64; 2] {
    [a[0] + b[0], a[1] + b[1]]
}

impl Engine for Filtered {
    type Pose = FilteredPose;
    type Point = FilteredPoint;
    type Exact = ExactPath;

    fn home(&self, origin: Option<CornerId>) -> FilteredPose {
        let t = origin.map_or([0.0, 0.0], |corner| {
            let [x, y] = self.corners[corner.0 as usize];
            [-x, -y]
        });
        FilteredPose {
            w: [1.0, 0.0],
            t,
            element: 0,
            mirrored: false,
            crossings: 0,
        }
    }

    fn trail(&self, origin: Option<CornerId>) -> Trail<ExactPath> {
        Trail::new(self.exact.path(origin))
    }

    #[inline(always)]
    fn reflect(&self, pose: &FilteredPose, side: SideId) -> FilteredPose {
        let s = side.0 as usize;
        match &self.linear {
            Linear::Tabulated {
                mirrored, steps, ..
            } => {
                let (element, shift) = steps[pose.element as usize * self.k + s];
                FilteredPose {
                    w: pose.w,
                    t: plus(pose.t, shift),
                    element,
                    mirrored: mirrored[element as usize],
                    crossings: pose.crossings + 1,
                }
            }
            Linear::Product { reflections } => {
                let (w, c) = reflections[s];
                FilteredPose {
                    w: turned(pose.w, pose.mirrored, w),
                    t: plus(pose.t, turned(pose.w, pose.mirrored, c)),
                    element: 0,
                    mirrored: !pose.mirrored,
                    crossings: pose.crossings + 1,
                }
            }
        }
    }

    #[inline(always)]
    fn is_mirrored(&self, pose: &FilteredPose) -> bool {
        pose.mirrored
    }

    #[inline(always)]
    fn place(&self, pose: &FilteredPose, corner: CornerId) -> FilteredPoint {
        let i = corner.0 as usize;
        let v = match &self.linear {
            Linear::Tabulated { image, .. } => image[pose.element as usize * self.k + i],
            Linear::Product { .. } => turned(pose.w, pose.mirrored, self.corners[i]),
        };
        FilteredPoint {
            at: plus(v, pose.t),
            name: ImageName {
                crossings: pose.crossings,
                corner,
            },
        }
    }

    #[inline(always)]
    fn turn(
        &self,
        trail: &mut Trail<ExactPath>,
        a: &FilteredPoint,
        b: &FilteredPoint,
        v: &FilteredPoint,
    ) -> Sign {
        let (bx, by) = (b.at[0] - a.at[0], b.at[1] - a.at[1]);
        let (vx, vy) = (v.at[0] - a.at[0], v.at[1] - a.at[1]);
        if let Some(sign) = self.decide(bx * vy - by * vx, self.bound[v.name.crossings as usize]) {
            trail.tiers.float += 1;
            return sign;
        }
        let points = (Some(a.name), b.name, v.name);
        self.exact_turn(trail, points)
    }

    #[inline(always)]
    fn turn_from_origin(
        &self,
        trail: &mut Trail<ExactPath>,
        b: &FilteredPoint,
        v: &FilteredPoint,
    ) -> Sign {
        let value = b.at[0] * v.at[1] - b.at[1] * v.at[0];
        if let Some(sign) = self.decide(value, self.bound[v.name.crossings as usize]) {
            trail.tiers.float += 1;
            return sign;
        }
        self.exact_turn(trail, (None, b.name, v.name))
    }

    fn displacement(
        &self,
        trail: &mut Trail<ExactPath>,
        a: &FilteredPoint,
        b: &FilteredPoint,
    ) -> Vector {
        let (sides, path) = trail.split();
        let a = self.exact.position(path, sides, a.name);
        self.exact.position(path, sides, b.name).minus(&a)
    }

    fn squared_distance(
        &self,
        trail: &mut Trail<ExactPath>,
        a: &FilteredPoint,
        b: &FilteredPoint,
        precision: u32,
    ) -> Enclosure {
        let (sides, path) = trail.split();
        self.exact
            .squared_distance(path, sides, (a.name, b.name), precision)
    }

    fn deepest(&self) -> usize {
        self.bound.len() - 2
    }
}

impl Filtered {
    #[cold]
    #[inline(never)]
    fn exact_turn(
        &self,
        trail: &mut Trail<ExactPath>,
        points: (Option<ImageName>, ImageName, ImageName),
    ) -> Sign {
        let mut tiers = trail.tiers;
        let (sides, path) = trail.split();
        let sign = self.exact.turn(path, sides, &mut tiers, points);
        trail.tiers = tiers;
        sign
    }
}

impl Leaping for Filtered {
    type Ahead = [f64; 2];

    fn can_leap(&self) -> bool {
        match &self.linear {
            Linear::Tabulated { products, .. } => !products.is_empty(),
            Linear::Product { .. } => false,
        }
    }

    fn point_ahead(&self, point: &FilteredPoint) -> [f64; 2] {
        point.at
    }

    fn pose_ahead(&self, pose: &FilteredPose) -> (u16, [f64; 2]) {
        (pose.element, pose.t)
    }

    #[inline(always)]
    fn place_ahead(
        &self,
        pose: &FilteredPose,
        ahead: &[f64; 2],
        crossings: u32,
        corner: CornerId,
    ) -> FilteredPoint {
        FilteredPoint {
            at: plus(pose.t, self.turned_ahead(pose, ahead)),
            name: ImageName {
                crossings: pose.crossings + crossings,
                corner,
            },
        }
    }

    #[inline(always)]
    fn leap(
        &self,
        pose: &FilteredPose,
        element: u16,
        ahead: &[f64; 2],
        crossings: u32,
    ) -> FilteredPose {
        let Linear::Tabulated {
            mirrored,
            rotation,
            products,
            ..
        } = &self.linear
        else {
            unreachable!("only tabulated groups leap")
        };
        let element = products[pose.element as usize * rotation.len() + element as usize];
        FilteredPose {
            w: pose.w,
            t: plus(pose.t, self.turned_ahead(pose, ahead)),
            element,
            mirrored: mirrored[element as usize],
            crossings: pose.crossings + crossings,
        }
    }
}

impl Filtered {
    #[inline(always)]
    fn turned_ahead(&self, pose: &FilteredPose, ahead: &[f64; 2]) -> [f64; 2] {
        match &self.linear {
            Linear::Tabulated { rotation, .. } => {
                turned(rotation[pose.element as usize], pose.mirrored, *ahead)
            }
            Linear::Product { .. } => unreachable!("only tabulated groups leap"),
        }
    }
}
