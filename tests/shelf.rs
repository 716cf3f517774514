//! Every table of the shelf: both routes agree, and the measures of each level sum to twice the perimeter.

use reboundary::complexity::counts::p_from_diagonals;
use reboundary::complexity::diagonals;
use reboundary::language::{measure::measure, walk};
use reboundary::run::Control;
use reboundary::table::Table;
use reboundary::table::facts::facts;
use reboundary::table::file::load;
use reboundary::unfold::Mesh;
use reboundary::unfold::engine::{AnyEngine, Arithmetic};
use std::collections::BTreeSet;
use std::path::Path;

fn shelf() -> Vec<(String, Table)> {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("polygons");
    let mut files: Vec<_> = std::fs::read_dir(folder)
        .expect("the shelf")
        .map(|entry| entry.expect("an entry").path())
        .filter(|path| path.extension().is_some_and(|e| e == "toml"))
        .collect();
    files.sort();
    files
        .iter()
        .map(|path| load(path).unwrap_or_else(|e| panic!("{e}")))
        .map(|loaded| (loaded.stem, loaded.table))
        .collect()
}

#[test]
fn both_routes_agree_on_the_whole_shelf() {
    let control = Control::new();
    let mut compared = 0;
    for (name, table) in shelf() {
        let length = if table.sides() <= 6 { 16 } else { 12 };
        let engine = AnyEngine::new(&table, length, Arithmetic::Tiered);
        let mesh = Mesh::new(&table);
        let (language, _) = walk::grow(&engine, &mesh, length, &control).expect("nobody stops it");
        let by_beams: Vec<u64> = (0..=length).map(|n| language.count(n) as u64).collect();
        // With holes or shared letters p does not follow from the diagonals; those tables have tests of their own.
        if !table.has_one_beam_a_word() {
            continue;
        }
        compared += 1;
        let found = diagonals::count(&engine, &mesh, length - 2, &control);
        let (found, _) = found.expect("nobody stops it");
        let by_fans = p_from_diagonals(table.sides() as u64, &found, length);
        assert_eq!(by_beams, by_fans, "{name}");
    }
    assert!(compared >= 40);
}

#[test]
fn measures_sum_to_twice_the_perimeter_on_the_whole_shelf() {
    let control = Control::new();
    for (name, table) in shelf() {
        let length = if table.sides() <= 6 { 8 } else { 5 };
        let engine = AnyEngine::new(&table, length, Arithmetic::Tiered);
        let measures = measure(&table, &engine, &Mesh::new(&table), length, 2, &control);
        let measures = measures.expect("nobody stops it");
        assert_eq!(measures.levels.len(), length, "{name}");
        for level in &measures.levels {
            assert!(level.holds, "{name} at length {}", level.length);
        }
    }
}

#[test]
fn the_shelf_has_tables_of_every_kind() {
    let tables = shelf();
    assert!(tables.len() >= 40);
    let titles: BTreeSet<&str> = tables.iter().map(|(_, t)| t.title()).collect();
    assert_eq!(titles.len(), tables.len(), "no title twice");
    let count = |test: &dyn Fn(&Table) -> bool| tables.iter().filter(|(_, t)| test(t)).count();
    assert!(count(&|t| facts(t).integrable) >= 6);
    assert!(count(&|t| facts(t).right_angled && !facts(t).integrable) >= 6);
    assert!(count(&|t| !facts(t).convex) >= 12);
    for degree in 1..=6 {
        assert!(
            count(&|t| t.field().degree() == degree) >= 1,
            "degree {degree}"
        );
    }
}
