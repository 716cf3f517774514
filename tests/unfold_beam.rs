//! The cells that beams carry: exactly the corner images that bound them, in their order.

mod oracle;
mod support;

use reboundary::language::walk::{Visit, Visitor, walk_beams};
use reboundary::number::Sign;
use reboundary::run::Control;
use reboundary::table::Table;
use reboundary::unfold::engine::{Engine, Trail};
use reboundary::unfold::with_engine;
use support::{named_tables, prepared, rational_table};

/// Checks every cell that it sees.
struct Inspector {
    title: String,
    cells: usize,
}

impl<E: Engine> Visitor<E> for Inspector {
    fn visit(&mut self, visit: &Visit<'_, E>, trail: &mut Trail<E::Exact>) {
        let (cell, lefts) = (visit.cell, visit.lefts);
        let title = &self.title;
        self.cells += 1;
        assert!(
            lefts >= 1 && lefts < cell.len(),
            "{title}: both kinds of corner images"
        );
        let m = cell.len();
        // Vertex i as a pair (tail, head): the leftmost and the rightmost line run from the nearer image, the others
        // from the nearer to the farther one of a chain that lists the farthest first.
        let vertices: Vec<(usize, usize)> = (0..m)
            .map(|i| {
                let next = (i + 1) % m;
                let between_sides = i + 1 == lefts || i + 1 == m;
                if between_sides { (i, next) } else { (next, i) }
            })
            .collect();
        for (v, (tail, head)) in vertices.iter().enumerate() {
            let along = visit.engine.displacement(trail, &cell[*tail], &cell[*head]);
            assert!(!along.is_zero(), "{title}: a vertex is a line");
            for (i, image) in cell.iter().enumerate() {
                let to_image = visit.engine.displacement(trail, &cell[*tail], image);
                let turn = along.cross(&to_image).sign();
                let on_line = i == v || i == (v + 1) % m;
                let expected = match (on_line, i < lefts) {
                    (true, _) => Sign::Zero,
                    (false, true) => Sign::Positive,
                    (false, false) => Sign::Negative,
                };
                assert_eq!(
                    turn, expected,
                    "{title}: vertex {v}, image {i} of {m} at length {}",
                    visit.length
                );
            }
        }
    }
}

fn inspect(table: &Table, longest: usize) {
    let (engine, mesh) = prepared(table, longest);
    let new = |_| Inspector {
        title: table.title().into(),
        cells: 0,
    };
    let cells: usize = with_engine!(&engine, engine => {
        let (inspectors, _) = walk_beams(engine, &mesh, longest, &Control::new(), new).expect("nobody stops it");
        inspectors.iter().map(|i| i.cells).sum()
    });
    let words: u64 = support::p_by_beams(table, longest)[1..].iter().sum();
    assert_eq!(cells as u64, words, "{}", table.title());
}

/// On each vertex of a cell lie exactly the two corner images that name it, and all other images of the cell are
/// strictly on their own side. So no image is listed that does not bound the cell, none twice, and the order is
/// that of the vertices; corners in line, of which the square has many, put it to the test.
#[test]
fn each_vertex_meets_its_two_images_alone() {
    for table in named_tables() {
        inspect(&table, 9);
    }
    for seed in 800..830 {
        let corners = oracle::random_polygon(seed, 3 + seed as usize % 6, seed % 3 == 0);
        inspect(&rational_table(&format!("seed {seed}"), 1, &corners), 6);
    }
}
