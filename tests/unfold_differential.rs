//! The fast engines against each other, against big integers alone, and against the oracle: on random tables,
//! on degenerate ones and on slightly disturbed ones.

mod oracle;
mod support;

use oracle::{lattice_table, random_polygon};
use reboundary::complexity::diagonals::Diagonal;
use reboundary::number::Real;
use reboundary::table::{CornerId, SideId, Table, Vector};
use reboundary::unfold::engine::Arithmetic;
use rug::Rational;
use std::collections::BTreeSet;
use support::{
    diagonal_counts, diagonals_by, language, language_by, over_root_field, p_by_beams, p_by_fans,
    rational_table, table_of, words,
};

type Corners = Vec<(Rational, Rational)>;

/// Tables of 3 … 8 corners, every other one convex.
fn random_corners(seeds: std::ops::Range<u64>) -> impl Iterator<Item = (u64, Corners)> {
    seeds.map(|seed| {
        (
            seed,
            random_polygon(seed, 3 + (seed / 2) as usize % 6, seed % 2 == 0),
        )
    })
}

fn rational(text: &str) -> Rational {
    text.parse().expect("a fraction")
}

/// Corners from fractions, "x y" each.
fn fractions(corners: &[&str]) -> Corners {
    corners
        .iter()
        .map(|c| c.split_once(' ').expect("two numbers"))
        .map(|(x, y)| (rational(x), rational(y)))
        .collect()
}

/// By hand: what random tables may miss. Each is a table; the name says why it is here.
fn degenerate_corners() -> Vec<(&'static str, Corners)> {
    let comb = [
        (0, 0),
        (9, 0),
        (9, 3),
        (7, 3),
        (7, 1),
        (5, 1),
        (5, 3),
        (3, 3),
        (3, 1),
        (1, 1),
        (1, 3),
        (0, 3),
    ];
    let star_of_collinear_corners = [
        (0, 0),
        (2, 1),
        (4, 0),
        (3, 2),
        (4, 4),
        (2, 3),
        (0, 4),
        (1, 2),
    ];
    let spiral = [
        (0, 0),
        (5, 0),
        (5, 4),
        (1, 4),
        (1, 2),
        (3, 2),
        (3, 3),
        (4, 3),
        (4, 1),
        (0, 1),
    ];
    vec![
        ("comb: rows of collinear corners", lattice_table(&comb)),
        (
            "star: each long diagonal meets two corners",
            lattice_table(&star_of_collinear_corners),
        ),
        ("spiral: visible only round corners", lattice_table(&spiral)),
        (
            "tiny angles",
            fractions(&["0 0", "1000000 1", "2000000 0", "1000000 1000"]),
        ),
        ("needle", fractions(&["0 0", "1000000000 0", "1 1/1000000"])),
        (
            "nearly straight corner",
            fractions(&["0 0", "1 -1/1000000000000", "2 0", "1 1"]),
        ),
        (
            "coordinates near 10^12 with denominators",
            fractions(&[
                "1000000000000/7 999999999989/13",
                "1000000000039 999999999961/11",
                "1500000000001/2 1000000000000",
                "999999999999/5 2000000000003/3",
            ]),
        ),
        (
            "small table far from the origin",
            fractions(&[
                "1000000000000 -1000000000000",
                "1000000000001 -1000000000000",
                "3000000000002/3 -999999999999",
                "1000000000000 -1999999999999/2",
            ]),
        ),
        (
            "square disturbed by 10^-30",
            fractions(&[
                "0 0",
                "1 0",
                "1000000000000000000000000000001/1000000000000000000000000000000 1",
                "0 1",
            ]),
        ),
        (
            "right isosceles triangle disturbed by 10^-30",
            fractions(&["0 0", "1 0", "1/1000000000000000000000000000000 1"]),
        ),
        (
            "L with a corner disturbed by 10^-30",
            fractions(&[
                "0 0",
                "2 0",
                "2 1",
                "1 999999999999999999999999999999/1000000000000000000000000000000",
                "1 2",
                "0 2",
            ]),
        ),
        (
            "star with a corner disturbed by 10^-30",
            fractions(&[
                "0 0",
                "2 1000000000000000000000000000001/1000000000000000000000000000000",
                "4 0",
                "3 2",
                "4 4",
                "2 3",
                "0 4",
                "1 2",
            ]),
        ),
    ]
}

/// Words, p and the diagonals' lists agree between the tiers and big integers alone.
fn assert_arithmetics_agree(table: &Table, longest: usize) {
    let (tiered, big) = (Arithmetic::Tiered, Arithmetic::BigOnly);
    let grown = language_by(table, longest, tiered);
    assert_eq!(
        grown,
        language_by(table, longest, big),
        "words of {}",
        table.title()
    );
    assert_eq!(
        grown.complexity(),
        p_by_beams(table, longest),
        "{}",
        table.title()
    );
    let found = diagonals_by(table, longest, tiered);
    assert_eq!(
        found,
        diagonals_by(table, longest, big),
        "diagonals of {}",
        table.title()
    );
    for (n, expected) in diagonal_counts(table, longest).iter().enumerate() {
        let listed = found.iter().filter(|d| d.code.len() == n).count() as u64;
        assert_eq!(listed, *expected, "N({n}) of {}", table.title());
    }
}

/// Words as sets, and N(n), agree with the oracle.
fn assert_oracle_agrees(title: &str, corners: &Corners, longest: usize) {
    let table = rational_table(title, 1, corners);
    assert!(
        !table.turned_round(),
        "the oracle wants counterclockwise corners"
    );
    let grown = language(&table, longest);
    for (n, expected) in oracle::languages(corners, longest).iter().enumerate() {
        let found: Vec<Vec<u8>> = words(&grown, n);
        assert_eq!(
            found.len(),
            expected.len(),
            "p({n}) of {title}: {corners:?}"
        );
        let found: BTreeSet<Vec<u8>> = found.into_iter().collect();
        assert_eq!(found, *expected, "L_{n} of {title}: {corners:?}");
    }
    let expected: Vec<u64> = oracle::diagonals(corners, longest - 1)
        .iter()
        .map(|n| *n as u64)
        .collect();
    assert_eq!(
        diagonal_counts(&table, longest - 1),
        expected,
        "N of {title}: {corners:?}"
    );
}

#[test]
fn random_tables_routes_agree() {
    for (seed, corners) in random_corners(0..200) {
        let table = rational_table(&format!("seed {seed}"), 1, &corners);
        assert_eq!(
            p_by_beams(&table, 8),
            p_by_fans(&table, 8),
            "seed {seed}: {corners:?}"
        );
    }
}

#[test]
fn random_tables_arithmetics_agree() {
    for (seed, corners) in random_corners(1000..1040) {
        assert_arithmetics_agree(&rational_table(&format!("seed {seed}"), 1, &corners), 6);
    }
}

#[test]
fn random_tables_agree_with_the_oracle() {
    for (seed, corners) in random_corners(2000..2040) {
        let longest = if corners.len() <= 4 { 5 } else { 4 };
        assert_oracle_agrees(&format!("seed {seed}"), &corners, longest);
    }
}

#[test]
fn degenerate_tables_routes_agree() {
    for (title, corners) in degenerate_corners() {
        let table = rational_table(title, 1, &corners);
        assert_eq!(p_by_beams(&table, 9), p_by_fans(&table, 9), "{title}");
    }
}

#[test]
fn degenerate_tables_arithmetics_agree() {
    for (title, corners) in degenerate_corners() {
        assert_arithmetics_agree(&rational_table(title, 1, &corners), 5);
    }
}

#[test]
fn degenerate_tables_agree_with_the_oracle() {
    for (title, corners) in degenerate_corners() {
        let longest = if corners.len() <= 6 { 4 } else { 3 };
        assert_oracle_agrees(title, &corners, longest);
    }
}

#[test]
fn named_tables_arithmetics_agree() {
    for table in support::named_tables() {
        assert_arithmetics_agree(&table, 6);
    }
}

/// A disturbance of 10⁻³⁰ must be seen: somewhere the words differ from those of the undisturbed table.
#[test]
fn tiny_disturbances_are_seen() {
    let disturbed = degenerate_corners();
    let find = |title: &str| {
        let (_, corners) = disturbed
            .iter()
            .find(|(t, _)| *t == title)
            .expect("is listed");
        rational_table(title, 1, corners)
    };
    let star = find("star: each long diagonal meets two corners");
    let moved = find("star with a corner disturbed by 10^-30");
    assert_ne!(language(&star, 3), language(&moved, 3));
    let moved = find("square disturbed by 10^-30");
    assert_ne!(language(&support::unit_square(), 6), language(&moved, 6));
}

/// The same plane figure, once over the field of its form and once with √n adjoined and form 1: same words,
/// same diagonals, displacements that differ by the factor √n in the second coordinate.
fn assert_same_over_root_field(table: &Table, n: i64, longest: usize) {
    let lifted = over_root_field(table, n);
    assert_eq!(*lifted.form(), Real::from(1), "the form is used up");
    assert_eq!(
        language(table, longest),
        language(&lifted, longest),
        "{}",
        table.title()
    );
    let root = lifted.field().generator();
    let most = longest - 1;
    let stretched: Vec<Diagonal> = diagonals_by(table, most, Arithmetic::Tiered)
        .into_iter()
        .map(|d| Diagonal {
            displacement: Vector::new(d.displacement.x, &d.displacement.y * &root),
            ..d
        })
        .collect();
    let found = diagonals_by(&lifted, most, Arithmetic::Tiered);
    assert_eq!(stretched, found, "{}", table.title());
}

#[test]
fn tables_with_a_form_agree_with_tables_over_a_root() {
    assert_same_over_root_field(&support::equilateral(), 3, 9);
    assert_same_over_root_field(&support::half_equilateral(), 3, 9);
    for (seed, corners) in random_corners(3000..3030) {
        let form = [2, 3, 5, 6, 7][seed as usize % 5];
        let table = rational_table(&format!("seed {seed}, form {form}"), form, &corners);
        assert_same_over_root_field(&table, form, 5);
        assert_eq!(p_by_beams(&table, 7), p_by_fans(&table, 7), "seed {seed}");
    }
}

/// A form that is a square is a scale of the second coordinate.
#[test]
fn square_forms_are_scales() {
    let mut tables: Vec<(u64, Corners)> = random_corners(4000..4020).collect();
    tables.push((0, lattice_table(&[(0, 0), (3, 0), (3, 1), (0, 1)])));
    for (seed, corners) in tables {
        let formed = rational_table(&format!("seed {seed}"), 9, &corners);
        let scaled = corners
            .iter()
            .map(|(x, y)| (x.clone(), Rational::from(y * 3)))
            .collect::<Corners>();
        let scaled = rational_table(&format!("seed {seed}"), 1, &scaled);
        assert_eq!(language(&formed, 6), language(&scaled, 6), "seed {seed}");
        let stretched: Vec<_> = diagonals_by(&formed, 5, Arithmetic::Tiered)
            .into_iter()
            .map(|d| Diagonal {
                displacement: Vector::new(d.displacement.x, &d.displacement.y * &Real::from(3)),
                ..d
            })
            .collect();
        assert_eq!(
            stretched,
            diagonals_by(&scaled, 5, Arithmetic::Tiered),
            "seed {seed}"
        );
    }
}

/// Coordinates so large or so small that floating point, or its products, cannot hold them: the filter must
/// give way, and rounding an irrational number beyond the range must end.
#[test]
fn scales_beyond_floating_point_change_nothing() {
    let star = degenerate_corners().swap_remove(1);
    let tables = [
        rational_table(star.0, 1, &star.1),
        support::crooked(),
        support::regular_pentagon(),
        support::irrational_kite(),
    ];
    for table in tables {
        let expected = language(&table, 6);
        for exponent in [30, 150, 157, 160, 162, 320] {
            let large = Real::from(rational(&format!("1{}", "0".repeat(exponent))));
            let small = large.inverse().expect("not zero");
            for factor in [large, small] {
                let corners = table.corners().iter().map(|c| c.times(&factor)).collect();
                let scaled = table_of(table.title(), corners, table.form().clone());
                assert!(
                    language(&scaled, 6) == expected,
                    "{}, 10^±{exponent}",
                    table.title()
                );
            }
        }
    }
}

/// The filter's bound grows with the depth: far down, where it matters, big integers must agree.
#[test]
fn deep_walks_agree_with_big_integers() {
    for (table, longest) in [
        (support::crooked(), 9),
        (support::regular_pentagon(), 11),
        (support::irrational_kite(), 11),
        (
            rational_table("needle", 1, &fractions(&["0 0", "100 0", "1 1/7"])),
            24,
        ),
        (
            rational_table("triangle", 1, &fractions(&["0 0", "5 0", "1 3"])),
            18,
        ),
    ] {
        let tiered = language_by(&table, longest, Arithmetic::Tiered);
        assert!(
            tiered == language_by(&table, longest, Arithmetic::BigOnly),
            "{}",
            table.title()
        );
        assert_eq!(
            tiered.complexity(),
            p_by_fans(&table, longest),
            "{}",
            table.title()
        );
    }
}

/// Over a field of degree 2 whose elements are all rational by chance, the walk is that of the rationals.
#[test]
fn rational_corners_in_a_larger_field_change_nothing() {
    let root = support::root_field(2).generator();
    for (seed, corners) in random_corners(5000..5015) {
        let plain = rational_table(&format!("seed {seed}"), 1, &corners);
        // Scaling by √2 is a similarity whose corners are not rational.
        let scaled = plain.corners().iter().map(|c| c.times(&root)).collect();
        let scaled = table_of(plain.title(), scaled, 1.into());
        assert_eq!(language(&plain, 6), language(&scaled, 6), "seed {seed}");
        assert_eq!(
            diagonal_counts(&plain, 6),
            diagonal_counts(&scaled, 6),
            "seed {seed}"
        );
    }
}

/// Every listed diagonal, unfolded anew from the definition: its displacement, the sides it crosses, in order
/// and strictly inside, and no corner of the copies it runs through on its way.
#[test]
fn diagonals_unfold_as_listed() {
    let mut tables: Vec<(String, Corners)> = random_corners(6000..6030)
        .map(|(seed, corners)| (format!("seed {seed}"), corners))
        .collect();
    let by_hand = degenerate_corners().into_iter();
    tables.extend(by_hand.map(|(title, corners)| (title.to_string(), corners)));
    for (title, corners) in tables {
        let table = rational_table(&title, 1, &corners);
        let found = diagonals_by(&table, 4, Arithmetic::Tiered);
        let distinct: BTreeSet<(CornerId, CornerId, &[SideId])> = found
            .iter()
            .map(|d| (d.start, d.end, &d.code[..]))
            .collect();
        assert_eq!(distinct.len(), found.len(), "no diagonal twice: {title}");
        for diagonal in &found {
            assert_unfolds(&title, &corners, diagonal);
        }
    }
}

fn assert_unfolds(title: &str, corners: &Corners, diagonal: &Diagonal) {
    let k = corners.len();
    let origin = corners[diagonal.start.0 as usize].clone();
    let vector = (
        diagonal.displacement.x.to_rational().expect("rational"),
        diagonal.displacement.y.to_rational().expect("rational"),
    );
    let one = Rational::from(1);
    let mut copy = corners.clone();
    let mut entry = (Rational::new(), None);
    let code = diagonal.code.iter().map(|side| Some(side.0 as usize));
    for exit_side in code.chain([None]) {
        let exit = match exit_side {
            None => one.clone(),
            Some(side) => crossing(&copy, side, &origin, &vector)
                .unwrap_or_else(|| panic!("{title}: {diagonal:?} misses side {side}")),
        };
        assert!(
            entry.0 < exit && exit <= 1,
            "{title}: {diagonal:?} crosses in order"
        );
        // The segment runs inside this copy from entry to exit: it starts inside and meets nothing.
        let middle = Rational::from(&entry.0 + &exit) / 2u32;
        let middle = oracle::along(&origin, &middle, &vector);
        assert!(
            is_inside(&copy, &middle),
            "{title}: {diagonal:?} leaves the table"
        );
        for (i, corner) in copy.iter().enumerate() {
            let to_corner = oracle::between(&origin, corner);
            if oracle::cross(&vector, &to_corner).is_zero() {
                let at = oracle::dot(&vector, &to_corner) / oracle::dot(&vector, &vector);
                let is_end = at == 0 && entry.1.is_none() || at == 1 && exit_side.is_none();
                let meets = entry.0 <= at && at <= exit && !is_end;
                assert!(!meets, "{title}: {diagonal:?} meets corner {i}");
            }
        }
        for side in (0..k).filter(|side| Some(*side) != entry.1 && Some(*side) != exit_side) {
            if let Some(at) = crossing(&copy, side, &origin, &vector) {
                assert!(
                    at < entry.0 || at > exit,
                    "{title}: {diagonal:?} crosses side {side}"
                );
            }
        }
        let Some(side) = exit_side else { break };
        let (a, along) = (
            copy[side].clone(),
            oracle::between(&copy[side], &copy[(side + 1) % k]),
        );
        copy = copy
            .iter()
            .map(|corner| {
                let mirrored = oracle::mirrored(&oracle::between(&a, corner), &along);
                oracle::along(&a, &one, &mirrored)
            })
            .collect();
        entry = (exit, Some(side));
    }
    let end = oracle::between(&origin, &copy[diagonal.end.0 as usize]);
    assert_eq!(end, vector, "{title}: {diagonal:?}");
}

/// Where the line from `origin` along `vector` crosses a side strictly inside it.
fn crossing(
    copy: &Corners,
    side: usize,
    origin: &oracle::Point,
    vector: &oracle::Point,
) -> Option<Rational> {
    let to_a = oracle::between(origin, &copy[side]);
    let to_b = oracle::between(origin, &copy[(side + 1) % copy.len()]);
    let (turn_a, turn_b) = (oracle::cross(vector, &to_a), oracle::cross(vector, &to_b));
    if turn_a.is_zero() || turn_a.cmp0() != turn_b.cmp0().reverse() {
        return None;
    }
    let along = oracle::between(&to_a, &to_b);
    Some(oracle::cross(&to_a, &along) / oracle::cross(vector, &along))
}

/// Crossing parity of the ray to the right; the point is on no side.
fn is_inside(polygon: &Corners, point: &oracle::Point) -> bool {
    let k = polygon.len();
    (0..k)
        .filter(|&i| {
            let (a, b) = (&polygon[i], &polygon[(i + 1) % k]);
            if (a.1 > point.1) == (b.1 > point.1) {
                return false;
            }
            let turn = oracle::cross(&oracle::between(a, b), &oracle::between(a, point));
            (turn > 0) == (b.1 > a.1)
        })
        .count()
        % 2
        == 1
}
