//! Walks in a frame against walks in the table's own coordinates by big integers alone: the same words, diagonals
//! with the same exact vectors, and certified measures of the same levels.

mod support;

use reboundary::language::measure::measure;
use reboundary::run::Control;
use reboundary::table::Table;
use reboundary::table::file::parse;
use reboundary::table::frame::Frame;
use reboundary::unfold::Mesh;
use reboundary::unfold::engine::{AnyEngine, Arithmetic};
use support::{diagonals_by, language_by, p_by_beams, p_by_fans, unit_square, words};

fn table(title: &str, corners: &str) -> Table {
    let text = format!("title = \"{title}\"\ncorners = [{corners}]");
    let loaded = parse("test.toml", &text).unwrap_or_else(|fault| panic!("{title}: {fault}"));
    loaded.table
}

/// Title, corners, whether machine integers suffice in the frame. Each needs a smaller field in its frame than in
/// its coordinates.
fn tables() -> Vec<(Table, bool)> {
    let entry = |title: &str, machine: bool, corners: &str| (table(title, corners), machine);
    vec![
        entry(
            "golden rectangle",
            true,
            r#"["0","0"], ["(1+sqrt(5))/2","0"], ["(1+sqrt(5))/2","1"], ["0","1"]"#,
        ),
        entry(
            "rectangle turned by an irrational angle",
            true,
            r#"["1","0"], ["1+sqrt(2)","sqrt(3)"], ["1+sqrt(2)-sqrt(3)","sqrt(3)+sqrt(2)"], ["1-sqrt(3)","sqrt(2)"]"#,
        ),
        entry(
            "equilateral triangle with its height written out",
            true,
            r#"["0","0"], ["1","0"], ["1/2","sqrt(3)/2"]"#,
        ),
        entry(
            "L of a rational ratio in both directions, stretched",
            true,
            r#"["0","0"], ["2*sqrt(2)","0"], ["2*sqrt(2)","sqrt(3)"], ["sqrt(2)","sqrt(3)"], ["sqrt(2)","3*sqrt(3)"], ["0","3*sqrt(3)"]"#,
        ),
        entry(
            "L with a golden arm, stretched",
            false,
            r#"["0","0"], ["sqrt(2)*(1+sqrt(5))","0"], ["sqrt(2)*(1+sqrt(5))","1"], ["2*sqrt(2)","1"], ["2*sqrt(2)","2"], ["0","2"]"#,
        ),
        entry(
            "irrational triangle, rational in its frame",
            false,
            r#"["0","0"], ["sqrt(2)","0"], ["sqrt(2)/3","sqrt(2)"]"#,
        ),
        entry(
            "nonconvex, irrational, over the root of 3 in its frame",
            false,
            r#"["0","0"], ["3*sqrt(2)","0"], ["sqrt(2)","sqrt(2)"], ["sqrt(6)","3*sqrt(2)"]"#,
        ),
    ]
}

#[test]
fn words_and_diagonals_are_those_of_the_tables_own_coordinates() {
    for (table, machine) in tables() {
        let title = table.title();
        let frame = Frame::smaller(&table).unwrap_or_else(|| panic!("{title}: a smaller field"));
        assert!(frame.field().degree() < table.field().degree(), "{title}");
        let engine = AnyEngine::new(&table, 12, Arithmetic::Tiered);
        let on_machine_integers = matches!(engine, AnyEngine::Lattice(_));
        assert_eq!(on_machine_integers, machine, "{title}");
        let length = 7;
        let fast = language_by(&table, length, Arithmetic::Tiered);
        let slow = language_by(&table, length, Arithmetic::BigOnly);
        for n in 1..=length {
            assert_eq!(words(&fast, n), words(&slow, n), "{title}");
        }
        let fast = diagonals_by(&table, length, Arithmetic::Tiered);
        let slow = diagonals_by(&table, length, Arithmetic::BigOnly);
        assert_eq!(fast, slow, "{title}");
        assert_eq!(p_by_beams(&table, 12), p_by_fans(&table, 12), "{title}");
    }
}

#[test]
fn measures_sum_to_twice_the_perimeter_in_every_frame() {
    for (table, _) in tables() {
        let (mesh, control) = (Mesh::new(&table), Control::new());
        let measured = |arithmetic| {
            let engine = AnyEngine::new(&table, 8, arithmetic);
            measure(&table, &engine, &mesh, 8, 4, &control).expect("nobody stops it")
        };
        let framed = measured(Arithmetic::Tiered);
        assert!(
            framed.levels.iter().all(|level| level.holds),
            "{}",
            table.title()
        );
        let own = measured(Arithmetic::BigOnly);
        assert_eq!(framed.kept.len(), own.kept.len());
        for (a, b) in framed.kept.iter().zip(&own.kept) {
            assert!(a.meets(b), "{}", table.title());
        }
    }
}

#[test]
fn a_rectangle_with_irrational_sides_costs_no_more_than_the_square() {
    let (golden, _) = tables().swap_remove(0);
    let tiers = |table: &Table| {
        let engine = AnyEngine::new(table, 24, Arithmetic::Tiered);
        let mesh = Mesh::new(table);
        let found = reboundary::complexity::diagonals::count(&engine, &mesh, 24, &Control::new());
        found.expect("nobody stops it")
    };
    let ((n, golden), (expected, square)) = (tiers(&golden), tiers(&unit_square()));
    assert_eq!(n, expected);
    assert_eq!(golden, square);
    assert_eq!((golden.float, golden.big), (0, 0));
}
