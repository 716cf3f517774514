//! Every table file that comes with the project: it loads fast, both routes to p(n) agree, the measures fill
//! the phase space, and p doesn't depend on how the table is written down.

mod support;

use reboundary::language::measure::measure;
use reboundary::number::Real;
use reboundary::run::Control;
use reboundary::table::file::{LoadedTable, load};
use reboundary::table::{Table, Vector};
use std::path::{Path, PathBuf};
use std::time::{Duration, Instant};
use support::{p_by_beams, p_by_fans, prepared};

/// Compare the routes to this length.
const LONGEST: usize = 24;

fn files(folder: &str) -> Vec<PathBuf> {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join(folder);
    let entries = std::fs::read_dir(&folder).expect("the folder is there");
    let mut files: Vec<PathBuf> = entries
        .map(|entry| entry.expect("an entry").path())
        .filter(|path| path.extension().is_some_and(|e| e == "toml"))
        .collect();
    files.sort();
    files
}

fn all_files() -> Vec<PathBuf> {
    let (polygons, rooms) = (files("polygons"), files("demo-data/marrowquay"));
    assert!(polygons.len() >= 15, "{polygons:?}");
    assert!(rooms.len() >= 5, "{rooms:?}");
    polygons.into_iter().chain(rooms).collect()
}

fn loaded(file: &Path) -> LoadedTable {
    load(file).unwrap_or_else(|fault| panic!("{fault}"))
}

/// A readable second is far more than any of these fields needs, unoptimized and on a busy machine.
#[test]
fn every_file_loads_at_once_and_without_notices() {
    for file in all_files() {
        let begun = Instant::now();
        let found = loaded(&file);
        let taken = begun.elapsed();
        assert!(
            taken < Duration::from_secs(1),
            "{}: {taken:?}",
            file.display()
        );
        assert!(found.notices.is_empty(), "{:?}", found.notices);
        let told = std::fs::read_to_string(file.with_file_name("README.md")).expect("a README");
        let name = file.file_name().expect("a name").to_string_lossy();
        assert!(told.contains(&*name), "the README does not list {name}");
    }
}

/// The tables whose words are single beams, so that generalized diagonals lead to p too.
fn files_with_one_beam_a_word() -> Vec<PathBuf> {
    let mut files = all_files();
    files.retain(|file| loaded(file).table.has_one_beam_a_word());
    assert!(files.len() >= 20, "{files:?}");
    files
}

#[test]
fn both_routes_agree_on_every_file() {
    for file in files_with_one_beam_a_word() {
        let table = loaded(&file).table;
        assert_eq!(
            p_by_beams(&table, LONGEST),
            p_by_fans(&table, LONGEST),
            "{}",
            file.display()
        );
    }
}

/// To length 12, or to the last one with fewer than 20 000 words.
#[test]
fn measures_fill_the_phase_space_on_every_file() {
    for file in all_files() {
        let table = loaded(&file).table;
        // Words that are bundles of beams have tests of their own.
        if !table.has_one_beam_a_word() {
            continue;
        }
        let by_fans = p_by_fans(&table, 12);
        let length = by_fans.iter().take_while(|p| **p < 20_000).count() - 1;
        assert!(length >= 8, "{}: {by_fans:?}", file.display());
        let (engine, mesh) = prepared(&table, length);
        let measures = measure(&table, &engine, &mesh, length, 2, &Control::new())
            .unwrap_or_else(|fault| panic!("{}: {fault}", file.display()));
        assert_eq!(measures.levels.len(), length);
        for level in &measures.levels {
            assert!(level.holds, "{}, length {}", file.display(), level.length);
        }
        assert_eq!(measures.kept.len() as u64, p_by_beams(&table, 2)[2]);
    }
}

/// The same letters on other corners.
fn rewritten(table: &Table, corners: Vec<Vector>) -> Table {
    let letters = table.letters().to_vec();
    Table::new(table.title(), corners, table.form().clone(), letters)
        .unwrap_or_else(|fault| panic!("{}: {fault}", table.title()))
}

#[test]
fn p_does_not_depend_on_how_a_table_is_written() {
    for file in files_with_one_beam_a_word() {
        let table = loaded(&file).table;
        // Words that are bundles of beams have tests of their own.
        if !table.has_one_beam_a_word() {
            continue;
        }
        let expected = p_by_beams(&table, 8);
        let mut renumbered = table.corners().to_vec();
        renumbered.rotate_left(1);
        let each =
            |change: &dyn Fn(&Vector) -> Vector| table.corners().iter().map(change).collect();
        // Mirrored corners run clockwise and are turned round.
        let mirrored: Vec<Vector> = each(&|c| Vector::new(-&c.x, c.y.clone()));
        let factor = Real::from(rug::Rational::from((355, 113)));
        let scaled = each(&|c| c.times(&factor));
        let moved = each(&|c| c.plus(&Vector::new(Real::from(-1000), Real::from(12_345))));
        let turned = each(&|c| {
            // 3 + 4·√(−g) times c: a turn and a stretching of the table's plane.
            let turn = Vector::new(Real::from(3), Real::from(4));
            c.product(&turn, table.form())
        });
        for (what, corners) in [
            ("renumbered", renumbered),
            ("mirrored", mirrored),
            ("scaled", scaled),
            ("moved", moved),
            ("turned", turned),
        ] {
            let other = rewritten(&table, corners);
            assert_eq!(other.turned_round(), what == "mirrored");
            assert_eq!(
                p_by_beams(&other, 8),
                expected,
                "{what}, {}",
                file.display()
            );
            assert_eq!(p_by_fans(&other, 8), expected, "{what}, {}", file.display());
        }
    }
}

/// The time that both routes to length 40 take.
fn both_routes(name: &str) -> Duration {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("polygons");
    let table = loaded(&folder.join(name)).table;
    let begun = Instant::now();
    assert_eq!(p_by_beams(&table, 40), p_by_fans(&table, 40));
    begun.elapsed()
}

/// Walking over a cubic field, with a finite group and with an infinite one, against rational corners with irrational
/// angles. All in turns and the least time of each, since other work may come between.
#[test]
fn cubic_triangles_take_at_most_five_times_as_long_as_rational_ones() {
    let files = [
        "irrational-acute.toml",
        "heptagonal-triangle.toml",
        "cube-root-triangle.toml",
    ];
    let mut least = [Duration::MAX; 3];
    for _ in 0..40 {
        for (least, file) in least.iter_mut().zip(files) {
            *least = both_routes(file).min(*least);
        }
    }
    let [rational, cubic @ ..] = least;
    println!("rational {rational:?}, cubic {cubic:?}");
    assert!(
        cubic.iter().all(|taken| *taken <= 5 * rational),
        "{cubic:?} against {rational:?}"
    );
}
