//! The law of random starts: sides by length, points uniform, directions by the cosine law.

mod support;

use rand::SeedableRng;
use rand_chacha::ChaCha8Rng;
use reboundary::orbit::Start;
use reboundary::orbit::ensemble::StartLaw;
use reboundary::table::{Table, Vector};
use support::{equilateral, l_of_three_squares, legs_three_and_four, regular_pentagon};

const DRAWS: usize = 100_000;

/// How many standard errors a mean of independent numbers is from what it should be.
fn score(values: &[f64], expected: f64) -> f64 {
    let n = values.len() as f64;
    let mean = values.iter().sum::<f64>() / n;
    let variance = values.iter().map(|v| (v - mean).powi(2)).sum::<f64>() / (n - 1.0);
    (mean - expected) / (variance / n).sqrt()
}

/// A table in true Euclidean coordinates.
struct Plane {
    root_form: f64,
    corners: Vec<[f64; 2]>,
}

impl Plane {
    fn new(table: &Table) -> Plane {
        let root_form = table.form().to_f64().sqrt();
        let mut plane = Plane {
            root_form,
            corners: Vec::new(),
        };
        plane.corners = table.corners().iter().map(|c| plane.place(c)).collect();
        plane
    }

    fn place(&self, v: &Vector) -> [f64; 2] {
        [v.x.to_f64(), v.y.to_f64() * self.root_form]
    }

    fn side(&self, i: usize) -> [[f64; 2]; 2] {
        let [a, b] = [self.corners[i], self.corners[(i + 1) % self.corners.len()]];
        [a, [b[0] - a[0], b[1] - a[1]]]
    }

    fn length(&self, i: usize) -> f64 {
        let [_, [x, y]] = self.side(i);
        x.hypot(y)
    }

    fn perimeter(&self) -> f64 {
        (0..self.corners.len()).map(|i| self.length(i)).sum()
    }

    fn area(&self) -> f64 {
        let k = self.corners.len();
        let corner = |i: usize| self.corners[i % k];
        (0..k).map(|i| cross(corner(i), corner(i + 1))).sum::<f64>() / 2.0
    }

    /// The length of the free path of a start.
    fn chord(&self, start: &Start) -> f64 {
        let [origin, along] = self.side(start.side.0 as usize);
        let t = start.fraction.to_f64();
        let point = [origin[0] + t * along[0], origin[1] + t * along[1]];
        let aim = self.place(&start.aim);
        let mut first = f64::INFINITY;
        for i in (0..self.corners.len()).filter(|i| *i != start.side.0 as usize) {
            let [foot, axis] = self.side(i);
            let to = [foot[0] - point[0], foot[1] - point[1]];
            let across = cross(aim, axis);
            let (time, fraction) = (cross(to, axis) / across, cross(to, aim) / across);
            if time > 0.0 && (0.0..=1.0).contains(&fraction) {
                first = first.min(time);
            }
        }
        first * aim[0].hypot(aim[1])
    }
}

fn cross(a: [f64; 2], b: [f64; 2]) -> f64 {
    a[0] * b[1] - a[1] * b[0]
}

/// Sides in proportion to their lengths; the mean chord is π·area/perimeter (Santaló, *Integral Geometry and
/// Geometric Probability*, 1976), nonconvex tables included, since free paths fill the area once; the point is
/// uniform on its side and the aim's component along it uniform on (−1, 1): means 1/2 and 0, mean squares 1/3.
///
/// With fixed seeds nothing here is left to chance; five standard errors leave room for every honest seed.
#[test]
fn starts_follow_the_invariant_measure() {
    for table in [
        equilateral(),
        legs_three_and_four(),
        l_of_three_squares(),
        regular_pentagon(),
    ] {
        let (law, plane) = (StartLaw::new(&table), Plane::new(&table));
        for seed in [1, 20, 300] {
            let mut random = ChaCha8Rng::seed_from_u64(seed);
            let starts: Vec<Start> = (0..DRAWS).map(|_| law.draw(&mut random)).collect();
            let check = |what: &str, value: &dyn Fn(&Start) -> f64, expected: f64| {
                let values: Vec<f64> = starts.iter().map(value).collect();
                let z = score(&values, expected);
                assert!(
                    z.abs() < 5.0,
                    "{}, seed {seed}, {what}: z = {z}",
                    table.title()
                );
            };
            for side in 0..table.sides() {
                let share = plane.length(side) / plane.perimeter();
                let hit = |s: &Start| f64::from(u8::from(s.side.0 as usize == side));
                check(&format!("side {side}"), &hit, share);
            }
            let chord = std::f64::consts::PI * plane.area() / plane.perimeter();
            check("chord", &|s| plane.chord(s), chord);
            check("point", &|s| s.fraction.to_f64(), 0.5);
            check("squared point", &|s| s.fraction.to_f64().powi(2), 1.0 / 3.0);
            let along = |s: &Start| {
                let ([_, [x, y]], [u, v]) = (plane.side(s.side.0 as usize), plane.place(&s.aim));
                (x * u + y * v) / x.hypot(y) / u.hypot(v)
            };
            check("along", &along, 0.0);
            check("squared along", &|s| along(s).powi(2), 1.0 / 3.0);
        }
    }
}
