//! Counting diagonals in leaps gives what counting step by step gives.

use reboundary::complexity::diagonals::{count, count_leaping, count_with};
use reboundary::number::Tiers;
use reboundary::run::Control;
use reboundary::run::checkpoint::Unkept;
use reboundary::table::file::load;
use reboundary::unfold::engine::{AnyEngine, Arithmetic, Leaping};
use reboundary::unfold::{Mesh, with_engine};
use std::path::Path;

#[test]
fn leaps_of_every_depth_count_what_steps_count_on_every_table_with_a_finite_group() {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("polygons");
    let control = Control::new();
    let mut tables = 0;
    for entry in std::fs::read_dir(folder).expect("the shelf") {
        let path = entry.expect("an entry").path();
        if path.extension().is_none_or(|e| e != "toml") {
            continue;
        }
        let table = load(&path).unwrap_or_else(|e| panic!("{e}")).table;
        let mesh = Mesh::new(&table);
        let most = if table.sides() > 6 { 14 } else { 25 };
        let engine = AnyEngine::new(&table, most, Arithmetic::Tiered);
        with_engine!(&engine, engine => {
            if !engine.can_leap() {
                continue;
            }
            tables += 1;
            let (plain, _) = count_with(engine, &mesh, most, &control).expect("not stopped");
            for depth in [1, 2, 3, 5, 8, most] {
                let leaping = count_leaping(engine, &mesh, most, depth, &control, &Unkept);
                let (leaping, _) = leaping.expect("not stopped");
                assert_eq!(leaping, plain, "{} in leaps of {depth}", path.display());
            }
        });
    }
    assert!(tables >= 40, "{tables} tables have a finite group");
}

#[test]
fn far_counts_leap_and_ask_less() {
    for name in ["right-isosceles", "heptagonal-triangle"] {
        let path = format!("{}/polygons/{name}.toml", env!("CARGO_MANIFEST_DIR"));
        let table = load(Path::new(&path)).expect("a table of the shelf").table;
        let (mesh, control) = (Mesh::new(&table), Control::new());
        let engine = AnyEngine::new(&table, 200, Arithmetic::Tiered);
        let (leaping, asked) = count(&engine, &mesh, 200, &control).expect("not stopped");
        let (plain, steps): (Vec<u64>, Tiers) =
            with_engine!(&engine, engine => count_with(engine, &mesh, 200, &control))
                .expect("not stopped");
        assert_eq!(leaping, plain, "{name}");
        assert!(
            3 * asked.total() < 2 * steps.total(),
            "{name}: {asked:?} {steps:?}"
        );
    }
}

#[test]
fn threads_and_arithmetic_change_no_count_of_leaps() {
    for name in ["equilateral", "right-isosceles", "heptagonal-triangle"] {
        let path = format!("{}/polygons/{name}.toml", env!("CARGO_MANIFEST_DIR"));
        let table = load(Path::new(&path)).expect("a table of the shelf").table;
        let (mesh, control) = (Mesh::new(&table), Control::new());
        let counted = |threads: usize, arithmetic: Arithmetic| {
            let engine = AnyEngine::new(&table, 90, arithmetic);
            let pool = rayon::ThreadPoolBuilder::new().num_threads(threads).build();
            let pool = pool.expect("threads");
            pool.install(|| count(&engine, &mesh, 90, &control).expect("not stopped"))
        };
        let (expected, tiers) = counted(1, Arithmetic::Tiered);
        for threads in [2, 7] {
            assert_eq!(
                counted(threads, Arithmetic::Tiered),
                (expected.clone(), tiers)
            );
        }
        assert_eq!(counted(2, Arithmetic::BigOnly).0, expected, "{name}");
    }
}
