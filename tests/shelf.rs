//! The shelf as a whole: tables of every kind.

use reboundary::table::Table;
use reboundary::table::facts::facts;
use reboundary::table::file::load;
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
