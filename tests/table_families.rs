//! Families of tables: the triangles with rational angles in one file, and parameters of a base.

mod support;

use reboundary::table::facts::{Angle, facts};
use reboundary::table::file::{LoadedTable, TableFileError, load_with};
use rug::Rational;
use std::path::{Path, PathBuf};
use support::{p_by_beams, p_by_fans};

fn polygon(name: &str) -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR"))
        .join("polygons")
        .join(name)
}

fn with(path: &Path, settings: &[&str]) -> Result<LoadedTable, TableFileError> {
    let settings: Vec<String> = settings.iter().map(ToString::to_string).collect();
    load_with(path, &settings)
}

/// Every triangle whose angles are multiples of π/s for some s up to 12: sorted triples without a common divisor.
#[test]
fn all_triangles_with_angle_denominators_up_to_12() {
    let file = polygon("angles-by-pattern.toml");
    let mut seen = 0;
    for s in 3..=12_u32 {
        for p in 1..=s / 3 {
            for q in p..=(s - p) / 2 {
                let r = s - p - q;
                if [q, r].iter().fold(p, |a, b| gcd(a, *b)) != 1 {
                    continue;
                }
                seen += 1;
                let settings = [format!("p={p}"), format!("q={q}"), format!("r={r}")];
                let table = load_with(&file, &settings)
                    .unwrap_or_else(|e| panic!("{e}"))
                    .table;
                let angles = facts(&table).angles;
                for (angle, part) in angles.iter().zip([p, q, r]) {
                    let multiple = Rational::from((part, s));
                    assert_eq!(*angle, Angle::RationalMultipleOfPi(multiple), "{p} {q} {r}");
                }
                assert_eq!(p_by_beams(&table, 8), p_by_fans(&table, 8), "{p} {q} {r}");
            }
        }
    }
    // Partitions of s into three parts without a common divisor, s = 3 … 12: 1, 1, 2, 2, 4, 4, 6, 6, 10, 8 (OEIS
    // A023023, from memory; counted by hand up to 8).
    assert_eq!(seen, 44);
}

fn gcd(a: u32, b: u32) -> u32 {
    if b == 0 { a } else { gcd(b, a % b) }
}

#[test]
fn settings_reach_the_parameters_of_a_base() {
    let leaning = polygon("leaning-kite.toml");
    let kite = |t: &str| with(&polygon("kite-family.toml"), &[t]).unwrap().table;
    for t in ["t=3", "t=sqrt(7)", "t=1"] {
        let through = with(&leaning, &["lean=0", t]).unwrap();
        for (image, corner) in through.table.corners().iter().zip(kite(t).corners()) {
            assert_eq!(image.x.to_f64(), corner.x.to_f64(), "{t}");
            assert!((image.y.to_f64() - corner.y.to_f64() * 2_f64.sqrt()).abs() < 1e-12);
        }
    }
    let parameters = with(&leaning, &["t=3"]).unwrap().parameters;
    let told: Vec<_> = parameters
        .iter()
        .map(|p| (p.name.as_str(), p.expression.as_str(), p.set))
        .collect();
    assert_eq!(told, [("lean", "1/4", false), ("t", "3", true)]);
}

#[test]
fn a_name_of_the_file_itself_does_not_reach_its_base() {
    let folder = tempfile::tempdir().expect("a folder");
    let write = |name: &str, text: &str| {
        std::fs::write(folder.path().join(name), text).expect("written");
    };
    write(
        "inner.toml",
        "corners = [[0, 0], [\"t\", 0], [0, \"u\"]]\n[parameters]\nt = 2\nu = 3\n",
    );
    write(
        "outer.toml",
        "base = \"inner.toml\"\nstretch = [\"t\", 1]\n[parameters]\nt = 5\n",
    );
    write(
        "outermost.toml",
        "base = \"outer.toml\"\nstretch = [1, \"v\"]\n[parameters]\nv = 7\n[define]\nw = 1\n",
    );
    let at = |name: &str| folder.path().join(name);
    let sizes = |name: &str, settings: &[&str]| {
        let table = with(&at(name), settings)
            .unwrap_or_else(|e| panic!("{e}"))
            .table;
        (table.corner(1).x.to_f64(), table.corner(2).y.to_f64())
    };
    assert_eq!(sizes("outer.toml", &[]), (10.0, 3.0));
    assert_eq!(sizes("outer.toml", &["t=1", "u=4"]), (2.0, 4.0));
    assert_eq!(
        sizes("outermost.toml", &["t=1", "u=4", "v=1/2"]),
        (2.0, 2.0)
    );
    let told = |settings: &[&str]| {
        with(&at("outermost.toml"), settings)
            .unwrap_err()
            .to_string()
    };
    let unknown = told(&["z=1"]);
    for part in ["parameter `z`", "`v`", "`t`", "`t`, `u`", "--set:1:1"] {
        assert!(unknown.contains(part), "{unknown}");
    }
    assert!(told(&["w=1"]).contains("fixed by `[define]`"));
    assert!(told(&["u=1", "u=2"]).contains("set twice"));
    let wrong = told(&["u=sqrt("]);
    assert!(
        wrong.contains("--set:1:") && !wrong.contains("in the base table"),
        "{wrong}"
    );
}
