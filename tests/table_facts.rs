//! Facts against independent computations: the surface by gluing copies of the table, the symmetries by what they do to
//! the language.

mod support;

use reboundary::table::Table;
use reboundary::table::facts::{Angle, facts};
use reboundary::table::file::{load, parse};
use reboundary::table::surface::surface;
use reboundary::table::symmetry::symmetries;
use reboundary::unfold::group::FiniteGroup;
use std::collections::{BTreeMap, BTreeSet};
use std::path::Path;
use support::{language, words};

/// All tables of the shelf with at most so many sides.
fn shelf(most_sides: usize) -> Vec<Table> {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("polygons");
    let mut files: Vec<_> = std::fs::read_dir(folder)
        .expect("the shelf")
        .map(|entry| entry.expect("an entry").path())
        .filter(|path| path.extension().is_some_and(|e| e == "toml"))
        .collect();
    files.sort();
    let tables = files.iter().map(|path| load(path).expect("a table").table);
    tables.filter(|t| t.sides() <= most_sides).collect()
}

/// The class of each item under a relation given by pairs.
fn classes(count: usize, pairs: impl Iterator<Item = (usize, usize)>) -> Vec<usize> {
    let mut class: Vec<usize> = (0..count).collect();
    fn root(class: &[usize], mut at: usize) -> usize {
        while class[at] != at {
            at = class[at];
        }
        at
    }
    for (a, b) in pairs {
        let (a, b) = (root(&class, a), root(&class, b));
        class[a.max(b)] = a.min(b);
    }
    (0..count).map(|i| root(&class, i)).collect()
}

/// Genus and cone points by gluing: copy g is glued along side s to copy g·s, so corner i of copy g is the same
/// point as corner i of the two copies beyond the sides at it.
fn glue(table: &Table) -> (i64, Vec<(u64, u64)>) {
    let k = table.sides();
    let group = FiniteGroup::generate(table);
    let copies = group.order();
    let beyond = |g: usize, side: usize| group.next[g * k + side % k] as usize;
    let pairs =
        (0..copies).flat_map(|g| (0..k).flat_map(move |i| [(g, i, i), (g, i, table.before(i))]));
    let class = classes(
        copies * k,
        pairs.map(|(g, corner, side)| (g * k + corner, beyond(g, side) * k + corner)),
    );
    let mut size: BTreeMap<usize, u64> = BTreeMap::new();
    for c in &class {
        *size.entry(*c).or_default() += 1;
    }
    let connected: BTreeSet<usize> = classes(
        copies,
        (0..copies)
            .flat_map(|g| (0..k).map(move |s| (g, s)))
            .map(|(g, s)| (g, beyond(g, s))),
    )
    .into_iter()
    .collect();
    assert_eq!(connected.len(), 1, "{}", table.title());
    // Each copy is a disc with holes: its interior counts 1 less the number of holes.
    let interiors = copies as i64 * (1 - table.holes() as i64);
    let euler = size.len() as i64 - (copies * k / 2) as i64 + interiors;
    assert_eq!(euler % 2, 0, "{}", table.title());
    let angles = facts(table).angles;
    let cones = (0..k)
        .map(|i| {
            let Angle::RationalMultipleOfPi(angle) = &angles[i] else {
                panic!("a finite group has rational angles");
            };
            let points: Vec<u64> = size
                .iter()
                .filter(|(c, _)| *c % k == i)
                .map(|(_, n)| *n)
                .collect();
            let turns = angle.clone() * points[0] / 2u32;
            assert_eq!(*turns.denom(), 1, "{}", table.title());
            assert!(points.iter().all(|n| *n == points[0]));
            (points.len() as u64, turns.numer().to_u64().unwrap())
        })
        .collect();
    (1 - euler / 2, cones)
}

#[test]
fn the_surface_is_what_gluing_all_copies_gives() {
    let mut tables = shelf(20);
    for triangle in [
        [1, 2, 4],
        [2, 3, 5],
        [1, 1, 5],
        [3, 4, 5],
        [1, 4, 7],
        [2, 3, 6],
        [1, 1, 10],
    ] {
        let [a, b, c] = triangle.map(|n: i32| format!("\"{n}\""));
        let text = format!("triangle = [{a}, {b}, {c}]");
        tables.push(parse("test.toml", &text).unwrap().table);
    }
    for hole in [
        r#"["-1","-1"],["1","-1"],["1","1"],["-1","1"]"#,
        r#"["-1","0"],["0","-1"],["1","0"],["0","1"]"#,
    ] {
        let outline = r#"["-5","-5"],["5","-5"],["5","5"],["-5","5"]"#;
        let text = format!("corners = [{outline}]\n[[holes]]\ncorners = [{hole}]");
        tables.push(parse("test.toml", &text).unwrap().table);
    }
    let mut finite = 0;
    for table in &tables {
        let Some(found) = surface(table.holes() as u64, &facts(table)) else {
            continue;
        };
        finite += 1;
        let (genus, cones) = glue(table);
        assert_eq!(found.genus as i64, genus, "{}", table.title());
        let stated: Vec<(u64, u64)> = found
            .cone_points
            .iter()
            .map(|c| (c.points, c.turns))
            .collect();
        assert_eq!(stated, cones, "{}", table.title());
    }
    assert!(finite >= 15);
}

#[test]
fn the_language_is_invariant_under_every_symmetry_of_the_table() {
    let mut seen = 0;
    for table in shelf(12) {
        let length = if table.sides() <= 6 { 8 } else { 4 };
        let language = language(&table, length);
        let found = words(&language, length);
        for symmetry in symmetries(&table) {
            let moved = symmetry.letters.as_ref().expect("letters of their own");
            let mut image: Vec<Vec<u8>> = found
                .iter()
                .map(|word| word.iter().map(|s| moved[*s as usize].0).collect())
                .collect();
            image.sort();
            assert_eq!(image, found, "{} {symmetry:?}", table.title());
            seen += 1;
        }
    }
    assert!(seen > 50);
}

#[test]
fn a_permutation_that_is_no_symmetry_changes_the_language() {
    // Guards the test above: exchanging two letters of the legs 3 and 4 is seen.
    let text = r#"corners = [["0","0"],["3","0"],["0","4"]]"#;
    let table = parse("test.toml", text).unwrap().table;
    assert!(symmetries(&table).is_empty());
    let found = words(&language(&table, 8), 8);
    let swap = [2, 1, 0];
    let mut image: Vec<Vec<u8>> = found
        .iter()
        .map(|word| word.iter().map(|s| swap[*s as usize]).collect())
        .collect();
    image.sort();
    assert_ne!(image, found);
}
