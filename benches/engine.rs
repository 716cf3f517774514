//! How much does exactness cost?
//!
//! For each table and route, the time per step of the exact engine and of an uncertified twin in plain
//! floating point, measured in one run: the same walks, generic over the engine, on the same table. The twin
//! treats values below 1e-9 as zero, which is what a careful user without exact arithmetic would do; its counts
//! are compared too, since its answers are only probably right. The comparison is fair in that both run the same
//! compiled walking code; it favours the twin in that the twin does no bookkeeping of paths or tiers.
//!
//! Also: the exponent of time against n, the speed-up by threads, fans in leaps against fans in steps, the peak memory
//! of each route in a process of its own, and what sampling finds in the same time.
//!
//! Run: `cargo bench --bench engine --features fast-gmp-build`, or with a word to select tables.

use rand::{RngExt, SeedableRng};
use reboundary::complexity::diagonals::{self, count_with};
use reboundary::language::walk::{Visit, Visitor, walk_beams};
use reboundary::number::{Enclosure, Sign, Tiers};
use reboundary::run::Control;
use reboundary::table::file::load;
use reboundary::table::{CornerId, SideId, Table, Vector};
use reboundary::unfold::engine::{AnyEngine, Arithmetic, Engine, Trail};
use reboundary::unfold::isometry::side_reflections;
use reboundary::unfold::{Mesh, with_engine};
use std::collections::HashSet;
use std::path::Path;
use std::time::{Duration, Instant};

/// Plain floating point: no bound, no path, no proof.
struct Uncertified {
    corners: Vec<[f64; 2]>,
    reflections: Vec<([f64; 2], [f64; 2])>,
}

#[derive(Clone, Copy, Debug)]
struct Pose {
    w: [f64; 2],
    t: [f64; 2],
    mirrored: bool,
}

const NOTHING: f64 = 1e-9;

fn turned(w: [f64; 2], mirrored: bool, v: [f64; 2]) -> [f64; 2] {
    let y = if mirrored { -v[1] } else { v[1] };
    [w[0] * v[0] - w[1] * y, w[0] * y + w[1] * v[0]]
}

fn sign(value: f64) -> Sign {
    if value > NOTHING {
        Sign::Positive
    } else if value < -NOTHING {
        Sign::Negative
    } else {
        Sign::Zero
    }
}

impl Uncertified {
    fn new(table: &Table) -> Uncertified {
        let root = table.form().to_f64().sqrt();
        let flat = |v: &Vector| [v.x.to_f64(), v.y.to_f64() * root];
        let table = table.moved_to_origin();
        Uncertified {
            corners: table.corners().iter().map(flat).collect(),
            reflections: side_reflections(&table)
                .iter()
                .map(|r| (flat(&r.w), flat(&r.t)))
                .collect(),
        }
    }
}

impl Engine for Uncertified {
    type Pose = Pose;
    type Point = [f64; 2];
    type Exact = ();

    fn home(&self, origin: Option<CornerId>) -> Pose {
        let t = origin.map_or([0.0, 0.0], |c| self.corners[c.0 as usize].map(|x| -x));
        Pose {
            w: [1.0, 0.0],
            t,
            mirrored: false,
        }
    }
    fn trail(&self, _: Option<CornerId>) -> Trail<()> {
        Trail::new(())
    }
    #[inline(always)]
    fn reflect(&self, pose: &Pose, side: SideId) -> Pose {
        let (w, c) = self.reflections[side.0 as usize];
        let shift = turned(pose.w, pose.mirrored, c);
        Pose {
            w: turned(pose.w, pose.mirrored, w),
            t: [pose.t[0] + shift[0], pose.t[1] + shift[1]],
            mirrored: !pose.mirrored,
        }
    }
    #[inline(always)]
    fn is_mirrored(&self, pose: &Pose) -> bool {
        pose.mirrored
    }
    #[inline(always)]
    fn place(&self, pose: &Pose, corner: CornerId) -> [f64; 2] {
        let v = turned(pose.w, pose.mirrored, self.corners[corner.0 as usize]);
        [v[0] + pose.t[0], v[1] + pose.t[1]]
    }
    #[inline(always)]
    fn turn(&self, _: &mut Trail<()>, a: &[f64; 2], b: &[f64; 2], v: &[f64; 2]) -> Sign {
        sign((b[0] - a[0]) * (v[1] - a[1]) - (b[1] - a[1]) * (v[0] - a[0]))
    }
    #[inline(always)]
    fn turn_from_origin(&self, _: &mut Trail<()>, b: &[f64; 2], v: &[f64; 2]) -> Sign {
        sign(b[0] * v[1] - b[1] * v[0])
    }
    fn displacement(&self, _: &mut Trail<()>, _: &[f64; 2], _: &[f64; 2]) -> Vector {
        unreachable!("counting needs no displacements")
    }
    fn squared_distance(&self, _: &mut Trail<()>, _: &[f64; 2], _: &[f64; 2], _: u32) -> Enclosure {
        unreachable!("counting needs no distances")
    }
    fn deepest(&self) -> usize {
        usize::MAX - 1
    }
}

#[derive(Default)]
struct Counter(Vec<u64>);

impl<E: Engine> Visitor<E> for Counter {
    #[inline]
    fn visit(&mut self, visit: &Visit<'_, E>, _: &mut Trail<E::Exact>) {
        if self.0.len() <= visit.length {
            self.0.resize(visit.length + 1, 0);
        }
        self.0[visit.length] += 1;
    }
}

fn fans<E: Engine>(engine: &E, mesh: &Mesh, n: usize, control: &Control) -> (Vec<u64>, Tiers) {
    count_with(engine, mesh, n, control).expect("nobody stops a bench")
}

fn beams<E: Engine>(engine: &E, mesh: &Mesh, n: usize, control: &Control) -> (Vec<u64>, Tiers) {
    let (parts, tiers) =
        walk_beams(engine, mesh, n, control, |_| Counter::default()).expect("nobody stops a bench");
    let mut p = vec![0; n + 1];
    for part in parts {
        for (sum, count) in p.iter_mut().zip(part.0) {
            *sum += count;
        }
    }
    (p, tiers)
}

/// The best of a few runs: the least disturbed one.
fn best<T>(work: impl FnMut() -> T) -> (Duration, T) {
    best_pair(work, || ()).0
}

/// The best of a few runs of each of two works, by turns, so that what disturbs one disturbs the other as well.
fn best_pair<A, B>(
    mut first: impl FnMut() -> A,
    mut second: impl FnMut() -> B,
) -> ((Duration, A), (Duration, B)) {
    fn run<T>(work: &mut impl FnMut() -> T, least: &mut Option<(Duration, T)>) {
        let start = Instant::now();
        let result = work();
        let time = start.elapsed();
        if least.as_ref().is_none_or(|(t, _)| time < *t) {
            *least = Some((time, result));
        }
    }
    let (mut a, mut b) = (None, None);
    let begun = Instant::now();
    let mut runs = 0;
    while runs < 2 || (runs < 25 && begun.elapsed() < Duration::from_millis(2500)) {
        run(&mut first, &mut a);
        run(&mut second, &mut b);
        runs += 1;
    }
    let ran = "at least two runs";
    (a.expect(ran), b.expect(ran))
}

struct Case {
    file: &'static str,
    fans_to: usize,
    beams_to: usize,
    /// Targets of exact ÷ twin for fans and beams.
    targets: (f64, f64),
}

const CASES: &[Case] = &[
    Case {
        file: "right-isosceles",
        fans_to: 500,
        beams_to: 120,
        targets: (1.2, 1.5),
    },
    Case {
        file: "regular-pentagon",
        fans_to: 150,
        beams_to: 50,
        targets: (2.0, 2.5),
    },
    Case {
        file: "heptagonal-triangle",
        fans_to: 300,
        beams_to: 100,
        targets: (2.0, 2.5),
    },
    Case {
        file: "regular-15-gon",
        fans_to: 40,
        beams_to: 18,
        targets: (2.0, 2.5),
    },
    Case {
        file: "legs-3-4",
        fans_to: 300,
        beams_to: 100,
        targets: (3.0, 4.0),
    },
    Case {
        file: "irrational-quadrilateral",
        fans_to: 200,
        beams_to: 60,
        targets: (3.0, 4.0),
    },
    Case {
        file: "cube-root-triangle",
        fans_to: 300,
        beams_to: 100,
        targets: (3.0, 4.0),
    },
];

fn table(file: &str) -> Table {
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join(format!("polygons/{file}.toml"));
    load(&path).expect("a table of the library").table
}

fn ratio_rows(case: &Case, control: &Control) {
    let table = table(case.file);
    let mesh = Mesh::new(&table);
    let twin = Uncertified::new(&table);
    let exact = AnyEngine::new(&table, case.fans_to.max(case.beams_to), Arithmetic::Tiered);
    let one = rayon::ThreadPoolBuilder::new()
        .num_threads(1)
        .build()
        .expect("a thread");
    one.install(|| {
        let row = |route: &str, n: usize, target: f64, exact: (Duration, (Vec<u64>, Tiers)), twin: (Duration, (Vec<u64>, Tiers)), steps: u64| {
            let ratio = exact.0.as_secs_f64() / twin.0.as_secs_f64();
            let tiers = exact.1.1;
            println!(
                "{:<26} {route:<5} n={n:<4} exact {:>8.2} ns/step  twin {:>8.2} ns/step  ratio {ratio:>6.2} (target {target})  {:>7.2} M steps/s  tiers f {} i {} s {} e {} b {}  twin {}",
                case.file,
                exact.0.as_secs_f64() * 1e9 / steps as f64,
                twin.0.as_secs_f64() * 1e9 / steps as f64,
                steps as f64 / exact.0.as_secs_f64() / 1e6,
                tiers.float, tiers.integer, tiers.symmetry, tiers.enclosure, tiers.big,
                if exact.1.0 == twin.1.0 { "agrees" } else { "DIFFERS" },
            );
        };
        // A fan step takes up to two decisions; both walks take the same steps, counted as decisions / 2.
        let n = case.fans_to;
        let (e, t) = with_engine!(&exact, engine => {
            best_pair(|| fans(engine, &mesh, n, control), || fans(&twin, &mesh, n, control))
        });
        let steps = e.1.1.total() / 2;
        row("fans", n, case.targets.0, e, t, steps);
        let n = case.beams_to;
        let (e, t) = with_engine!(&exact, engine => {
            best_pair(|| beams(engine, &mesh, n, control), || beams(&twin, &mesh, n, control))
        });
        let steps = e.1.0.iter().sum();
        row("beams", n, case.targets.1, e, t, steps);
    });
}

fn scaling(case: &Case, control: &Control) {
    let table = table(case.file);
    let mesh = Mesh::new(&table);
    let time = |n: usize| {
        let exact = AnyEngine::new(&table, n, Arithmetic::Tiered);
        with_engine!(&exact, engine => best(|| fans(engine, &mesh, n, control))).0
    };
    let n = case.fans_to;
    let exponent = (time(n).as_secs_f64() / time(n / 2).as_secs_f64()).log2();
    let pool = |threads| {
        rayon::ThreadPoolBuilder::new()
            .num_threads(threads)
            .build()
            .expect("threads")
    };
    let exact = AnyEngine::new(&table, n, Arithmetic::Tiered);
    let (one, two) = (pool(1), pool(2));
    let ((one, _), (two, _)) = with_engine!(&exact, engine => best_pair(
        || one.install(|| fans(engine, &mesh, n, control)),
        || two.install(|| fans(engine, &mesh, n, control)),
    ));
    println!(
        "{:<26} fans  time ~ n^{exponent:.2} between n={} and n={n}; two threads {:.2} times one",
        case.file,
        n / 2,
        one.as_secs_f64() / two.as_secs_f64()
    );
}

/// Fans step by step and in leaps, for doubling n: times and fitted exponents. Both give the same counts.
fn leaps(file: &str, longest: usize, control: &Control) {
    let table = table(file);
    let mesh = Mesh::new(&table);
    let one = rayon::ThreadPoolBuilder::new()
        .num_threads(1)
        .build()
        .expect("a thread");
    let mut before: Option<(f64, f64)> = None;
    for n in [longest / 8, longest / 4, longest / 2, longest] {
        let exact = AnyEngine::new(&table, n, Arithmetic::Tiered);
        let (steps, leaps) = one.install(|| {
            with_engine!(&exact, engine => {
                let (steps, leaps) = best_pair(
                    || fans(engine, &mesh, n, control),
                    || diagonals::count(&exact, &mesh, n, control).expect("nobody stops a bench"),
                );
                assert_eq!(steps.1.0, leaps.1.0);
                (steps.0.as_secs_f64(), leaps.0.as_secs_f64())
            })
        });
        let exponents = before.map_or(String::new(), |(s, l)| {
            format!(
                "time ~ n^{:.2} and n^{:.2}",
                (steps / s).log2(),
                (leaps / l).log2()
            )
        });
        println!(
            "{file:<26} fans  n={n:<5} in steps {steps:>9.4} s, in leaps {leaps:>9.4} s, ratio {:>5.2}  {exponents}",
            steps / leaps
        );
        before = Some((steps, leaps));
    }
}

/// The variable that asks a child process for one route: table, route, n.
const PEAK: &str = "REBOUNDARY_BENCH_PEAK";

/// Peak memory of a route, in a process of its own.
fn peak_of(file: &str, route: &str, n: usize) {
    let this = std::env::current_exe().expect("a path");
    let mut child = std::process::Command::new(this);
    let output = child.env(PEAK, format!("{file} {route} {n}")).output();
    let output = output.expect("the bench starts itself");
    print!("{}", String::from_utf8_lossy(&output.stdout));
}

/// The child's part.
fn peak_here(asked: &str, control: &Control) {
    let [file, route, n] = asked.split(' ').collect::<Vec<_>>()[..] else {
        panic!("{PEAK} holds a table, a route and n")
    };
    let n: usize = n.parse().expect("a number");
    let table = table(file);
    let mesh = Mesh::new(&table);
    let engine = AnyEngine::new(&table, n, Arithmetic::Tiered);
    let words = match route {
        "fans" => with_engine!(&engine, engine => fans(engine, &mesh, n, control))
            .0
            .len() as u64,
        "leaps" => diagonals::count(&engine, &mesh, n, control)
            .expect("not stopped")
            .0
            .len() as u64,
        "beams" => with_engine!(&engine, engine => beams(engine, &mesh, n, control))
            .0
            .iter()
            .sum(),
        "tree" => {
            let grown = reboundary::language::walk::grow(&engine, &mesh, n, control);
            grown.expect("not stopped").0.complexity().iter().sum()
        }
        other => panic!("no route {other}"),
    };
    let counted = match route {
        "fans" | "leaps" => String::new(),
        _ => format!(" for {words} words"),
    };
    let peak = peak_memory().unwrap_or("unknown".into());
    println!("{file:<26} {route:<5} n={n:<5} peak memory {peak}{counted}");
}

/// What a user would write without this program: random orbits in floating point, words in a hash set.
fn sampling(file: &str, n: usize, control: &Control) {
    let table = table(file);
    let mesh = Mesh::new(&table);
    let engine = AnyEngine::new(&table, n, Arithmetic::Tiered);
    let start = Instant::now();
    let (language, _) =
        reboundary::language::walk::grow(&engine, &mesh, n, control).expect("nobody stops a bench");
    let budget = start.elapsed();
    let root = table.form().to_f64().sqrt();
    let corners: Vec<[f64; 2]> = table
        .corners()
        .iter()
        .map(|c| [c.x.to_f64(), c.y.to_f64() * root])
        .collect();
    let mut random = rand_chacha::ChaCha8Rng::seed_from_u64(1);
    let mut found: HashSet<Vec<u8>> = HashSet::new();
    let start = Instant::now();
    let mut orbits = 0u64;
    while start.elapsed() < budget {
        let word = float_orbit(&corners, &mut random, n + 200);
        for factor in word.windows(n) {
            if !found.contains(factor) {
                found.insert(factor.to_vec());
            }
        }
        orbits += 1;
    }
    let wrong = found.iter().filter(|w| language.find(w).is_none()).count();
    println!(
        "{file:<26} sampling for {:.0} ms, the time of all {} words of length {n}: {orbits} orbits found {:.1}% of them, and {wrong} false words",
        budget.as_secs_f64() * 1e3,
        language.count(n),
        100.0 * (found.len() - wrong) as f64 / language.count(n) as f64,
    );
}

/// A random orbit by folding in plain floating point.
fn float_orbit(corners: &[[f64; 2]], random: &mut impl rand::Rng, hits: usize) -> Vec<u8> {
    let k = corners.len();
    let mut side = random.random_range(0..k);
    let at = |i: usize| corners[i % k];
    let s: f64 = random.random();
    let (a, b) = (at(side), at(side + 1));
    let mut p = [a[0] + s * (b[0] - a[0]), a[1] + s * (b[1] - a[1])];
    let angle = random.random::<f64>() * std::f64::consts::PI;
    let heading = (b[1] - a[1]).atan2(b[0] - a[0]) + angle;
    let mut d = [heading.cos(), heading.sin()];
    let mut word = vec![side as u8];
    while word.len() < hits {
        let mut nearest = (f64::INFINITY, side);
        for i in (0..k).filter(|i| *i != side) {
            let (a, b) = (at(i), at(i + 1));
            let e = [b[0] - a[0], b[1] - a[1]];
            let denominator = d[0] * e[1] - d[1] * e[0];
            let q = [a[0] - p[0], a[1] - p[1]];
            let t = (q[0] * e[1] - q[1] * e[0]) / denominator;
            let u = (q[0] * d[1] - q[1] * d[0]) / denominator;
            if t > 0.0 && (0.0..=1.0).contains(&u) && t < nearest.0 {
                nearest = (t, i);
            }
        }
        if !nearest.0.is_finite() {
            break;
        }
        side = nearest.1;
        p = [p[0] + nearest.0 * d[0], p[1] + nearest.0 * d[1]];
        let (a, b) = (at(side), at(side + 1));
        let e = [b[0] - a[0], b[1] - a[1]];
        let scale = 2.0 * (d[0] * e[0] + d[1] * e[1]) / (e[0] * e[0] + e[1] * e[1]);
        d = [scale * e[0] - d[0], scale * e[1] - d[1]];
        word.push(side as u8);
    }
    word
}

/// Peak memory of this process, where the system tells.
fn peak_memory() -> Option<String> {
    let status = std::fs::read_to_string("/proc/self/status").ok()?;
    let line = status.lines().find(|l| l.starts_with("VmHWM:"))?;
    Some(line.trim_start_matches("VmHWM:").trim().to_string())
}

fn main() {
    if let Ok(asked) = std::env::var(PEAK) {
        return peak_here(&asked, &Control::new());
    }
    let wanted = std::env::args().skip(1).find(|a| !a.starts_with('-'));
    let control = Control::new();
    let chosen: Vec<&Case> = CASES
        .iter()
        .filter(|case| {
            wanted
                .as_ref()
                .is_none_or(|w| case.file.contains(w.as_str()))
        })
        .collect();
    for case in &chosen {
        ratio_rows(case, &control);
    }
    for case in &chosen {
        scaling(case, &control);
    }
    for (file, longest) in [
        ("right-isosceles", 2000),
        ("regular-pentagon", 400),
        ("heptagonal-triangle", 1600),
        ("regular-15-gon", 100),
    ] {
        if chosen.iter().any(|case| case.file == file) {
            leaps(file, longest, &control);
        }
    }
    for case in &chosen {
        for n in [case.beams_to / 2, case.beams_to] {
            peak_of(case.file, "beams", n);
            peak_of(case.file, "tree", n);
        }
        for n in [case.fans_to / 2, case.fans_to] {
            peak_of(case.file, "fans", n);
            peak_of(case.file, "leaps", n);
        }
    }
    if wanted.is_none() {
        sampling("right-isosceles", 60, &control);
        sampling("irrational-quadrilateral", 30, &control);
    }
}
