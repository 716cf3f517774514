//! The table file: every bad table is refused at its line with its reason, every polygon of the shelf loads
//! quickly, and no text whatever makes the reader panic.

use reboundary::number::Real;
use reboundary::table::file::{LARGEST_FILE, LoadedTable, TableFileError, load, parse};
use reboundary::table::{SideId, Vector};
use std::path::{Path, PathBuf};
use std::time::{Duration, Instant};

/// A file in `tests/bad_tables/`, the line at fault, and pieces of the message.
struct Expected {
    name: String,
    line: usize,
    pieces: Vec<String>,
}

/// The lines of `tests/bad_tables/expected.txt`.
fn bad_tables() -> Vec<Expected> {
    let text = std::fs::read_to_string(folder("tests/bad_tables/expected.txt")).unwrap();
    let lines = text.lines().filter(|line| !line.starts_with('#'));
    lines
        .map(|line| {
            let mut parts = line.split(" | ").map(String::from);
            Expected {
                name: parts.next().unwrap(),
                line: parts.next().and_then(|n| n.parse().ok()).expect(line),
                pieces: parts.collect(),
            }
        })
        .collect()
}

fn folder(name: &str) -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join(name)
}

fn table_files(name: &str) -> Vec<PathBuf> {
    let mut files: Vec<PathBuf> = std::fs::read_dir(folder(name))
        .unwrap()
        .map(|entry| entry.unwrap().path())
        .filter(|path| path.extension().is_some_and(|e| e == "toml"))
        .collect();
    files.sort();
    files
}

fn parsed(text: &str) -> LoadedTable {
    parse("quay.toml", text).unwrap_or_else(|e| panic!("{text}\n{e}"))
}

#[test]
fn every_bad_table_is_refused_at_its_line_with_its_reason() {
    for Expected { name, line, pieces } in bad_tables() {
        assert!(!pieces.is_empty(), "{name}");
        let path = folder("tests/bad_tables").join(format!("{name}.toml"));
        let start = Instant::now();
        let error = load(&path).expect_err(&name);
        assert!(
            start.elapsed() < Duration::from_secs(2),
            "{name} took {:?}",
            start.elapsed()
        );
        let TableFileError::Fault(diagnostic) = &error else {
            panic!("{name}: {error}")
        };
        let shown = error.to_string();
        assert_eq!(diagnostic.line(), line, "{name}\n{shown}");
        for piece in &pieces {
            assert!(
                shown.contains(piece.as_str()),
                "{name}: no {piece:?} in\n{shown}"
            );
        }
        // A fault may lie in the base of the table.
        if !name.starts_with("base-") {
            assert_eq!(diagnostic.file, path.display().to_string());
        }
        let place = format!("{}:{}:{}", diagnostic.file, line, diagnostic.column());
        assert!(shown.contains(&place), "{name}: no {place} in\n{shown}");
        assert!(!diagnostic.help.is_empty(), "{name}");
        let first = diagnostic.message.chars().next().unwrap();
        assert!(
            !first.is_uppercase() && !diagnostic.message.ends_with('.'),
            "{}",
            diagnostic.message
        );
        assert!(!shown.contains('\u{1b}'), "{name}: colours");
    }
}

#[test]
fn every_bad_table_is_expected() {
    let expected: Vec<String> = bad_tables().into_iter().map(|e| e.name).collect();
    for path in table_files("tests/bad_tables") {
        let stem = path.file_stem().unwrap().to_str().unwrap();
        assert!(
            expected.iter().any(|name| name == stem),
            "{stem} has no expectation"
        );
    }
    assert!(expected.len() >= 150, "{}", expected.len());
}

#[test]
fn every_polygon_of_the_shelf_loads_in_less_than_a_second() {
    let files = table_files("polygons");
    assert!(files.len() >= 40);
    let index = std::fs::read_to_string(folder("polygons/README.md")).unwrap();
    for path in files {
        let start = Instant::now();
        let loaded = load(&path).unwrap_or_else(|e| panic!("{e}"));
        assert!(
            start.elapsed() < Duration::from_secs(1),
            "{} {:?}",
            path.display(),
            start.elapsed()
        );
        assert!(loaded.notices.is_empty(), "{:?}", loaded.notices);
        assert!(
            loaded.text.contains("about = "),
            "{} has no reason",
            path.display()
        );
        assert!(
            index.contains(&format!("[{}]", loaded.stem)),
            "{} is not in the index",
            loaded.stem
        );
        assert_ne!(loaded.table.title(), loaded.stem);
    }
}

#[test]
fn every_floor_plan_of_the_demo_town_loads() {
    let files = table_files("demo-data/marrowquay");
    assert_eq!(files.len(), 5);
    for path in files {
        let loaded = load(&path).unwrap_or_else(|e| panic!("{e}"));
        assert!(loaded.notices.is_empty());
    }
}

/// Twice the area over √g, exactly.
fn double_area(loaded: &LoadedTable) -> Real {
    let corners = loaded.table.corners();
    let mut sum = Real::from(0);
    for (i, corner) in corners.iter().enumerate() {
        sum += corner.cross(&corners[(i + 1) % corners.len()]);
    }
    sum
}

#[test]
fn the_shelf_has_the_fields_and_forms_that_it_should() {
    let cases = [
        ("square", 1, 1),
        ("golden-rectangle", 2, 1),
        ("equilateral", 1, 3),
        ("right-isosceles", 1, 1),
        ("thirty-sixty-ninety", 1, 3),
        ("regular-hexagon", 1, 3),
        ("legs-3-4", 1, 1),
        ("irrational-acute", 1, 1),
        ("irrational-quadrilateral", 1, 1),
        ("l-of-three-squares", 1, 1),
        ("dart", 1, 1),
        ("cube-root-triangle", 3, 1),
    ];
    for (name, degree, form) in cases {
        let loaded = load(&folder("polygons").join(format!("{name}.toml"))).unwrap();
        assert_eq!(loaded.table.field().degree(), degree, "{name}");
        assert_eq!(*loaded.table.form(), Real::from(form), "{name}");
    }
    for (name, degree) in [
        ("regular-pentagon", 2),
        ("heptagonal-triangle", 3),
        ("regular-15-gon", 4),
    ] {
        let loaded = load(&folder("polygons").join(format!("{name}.toml"))).unwrap();
        assert_eq!(loaded.table.field().degree(), degree, "{name}");
    }
}

#[test]
fn the_three_ways_to_write_a_triangle_agree() {
    let by_angles = parsed("triangle = [1, 1, 1]");
    let by_corners = parsed("corners = [[0, 0], [1, 0], [\"1/2\", \"sqrt(3)/2\"]]");
    let by_form = parsed("form = 3\ncorners = [[0, 0], [1, 0], [\"1/2\", \"1/2\"]]");
    assert_eq!(by_angles.table.corners(), by_form.table.corners());
    assert_eq!(by_corners.table.field().degree(), 2);
    assert_eq!(by_angles.table.field().degree(), 1);
    for loaded in [&by_angles, &by_corners, &by_form] {
        let perimeter = loaded.table.perimeter(100);
        assert_eq!(perimeter.decimal(20).unwrap(), "3.00000000000000000000");
        let area = double_area(loaded).pow(2) * loaded.table.form();
        assert_eq!(area, Real::from(rug::Rational::from((3, 4))));
    }
}

#[test]
fn roots_that_cancel_leave_a_rational_table() {
    let loaded = parsed(
        "corners = [[0, 0], [\"sqrt(2)^2\", 0], [0, \"cos(pi/5)*sqrt(5) - 5/4 - sqrt(5)/4 + 1\"]]",
    );
    assert!(loaded.table.field().is_rational());
}

#[test]
fn plain_integers_decimals_and_letters_are_understood() {
    let loaded = parsed(
        "title = \"Loft\"\ncorners = [[0, 0], [1_000, 0x0], [\"0.25\", \"1e3\"]]\nsides = ['α', '\\', '#']\n",
    );
    assert_eq!(loaded.table.title(), "Loft");
    assert_eq!(loaded.table.letters(), ['α', '\\', '#']);
    assert_eq!(loaded.table.corners()[1].x, Real::from(1000));
    assert_eq!(
        loaded.table.corners()[2].x,
        Real::from(rug::Rational::from((1, 4)))
    );
    assert_eq!(loaded.stem, "quay");
}

#[test]
fn the_title_defaults_to_the_stem_and_letters_to_the_alphabet() {
    let loaded =
        parse("plans/sail-loft.toml", "regular = 255").map(|l| l.table.title().to_string());
    // 255 = 3·5·17 has degree φ(255)/2 = 64, the largest.
    assert_eq!(loaded.unwrap(), "sail-loft");
    let loaded = parsed("regular = \"3+2\"");
    assert_eq!(loaded.table.letters(), ['a', 'b', 'c', 'd', 'e']);
}

#[test]
fn a_clockwise_table_is_turned_round_with_a_notice() {
    let loaded = parsed("corners = [[0, 0], [0, 1], [1, 1], [1, 0]]\nsides = ['p', 'q', 'r', 's']");
    assert_eq!(loaded.notices.len(), 1);
    assert!(loaded.notices[0].contains("quay.toml") && loaded.notices[0].contains("clockwise"));
    // The letters keep the order of the file, and stay on their sides.
    assert_eq!(loaded.table.letters(), ['p', 'q', 'r', 's']);
    assert_eq!(side_letters(&loaded), "srqp");
    assert!(double_area(&loaded) > Real::from(0));
}

fn side_letters(loaded: &LoadedTable) -> String {
    let sides = (0..loaded.table.sides() as u8).map(SideId);
    sides.map(|side| loaded.table.letter(side)).collect()
}

#[test]
fn letters_may_repeat_and_are_numbered_by_their_first_appearance() {
    let loaded = parsed("regular = 4\nsides = [\"b\", \"a\", \"b\", \"a\"]");
    assert_eq!(loaded.table.letters(), ['b', 'a']);
    assert_eq!(side_letters(&loaded), "baba");
    assert!(!loaded.table.has_one_beam_a_word());
    assert_eq!(loaded.table.sides_of_letter('a'), [SideId(1), SideId(3)]);
}

#[test]
fn holes_are_read_in_the_coordinates_of_the_outline() {
    let loaded = parsed(
        "corners = [[0, 0], [9, 0], [9, 9], [0, 9]]\nsides = ['b', 'c', 'a', 'c']\n\
         [[holes]]\ncorners = [[1, 1], [\"1 + sqrt(2)\", 1], [1, 2]]\n\
         [[holes]]\ncorners = [[5, 5], [5, 6], [6, 5]]\nsides = ['x', 'c', 'y']\n",
    );
    let table = &loaded.table;
    assert_eq!(
        (table.sides(), table.holes(), table.field().degree()),
        (10, 2, 2)
    );
    // The first hole was given counterclockwise: reversed, its first corner stays.
    assert_eq!(side_letters(&loaded), "bcacfedxcy");
    assert_eq!(table.corner(4), &Vector::new(1.into(), 1.into()));
    assert_eq!(table.corner(5), &Vector::new(1.into(), 2.into()));
    assert_eq!(table.letters(), ['b', 'c', 'a', 'd', 'e', 'f', 'x', 'y']);
    // A hole in a shape that the program draws.
    let hexagon =
        parsed("regular = 6\n[[holes]]\ncorners = [[0, 0], [\"1/3\", 0], [0, \"sqrt(2)/9\"]]\n");
    assert_eq!(hexagon.table.field().degree(), 2);
    assert_eq!(*hexagon.table.form(), Real::from(3));
}

#[test]
fn a_byte_order_mark_is_left_out() {
    let loaded = parsed("\u{feff}regular = 4");
    assert_eq!(loaded.text, "regular = 4");
    let TableFileError::Fault(fault) = parse("q.toml", "\u{feff}regula = 4").unwrap_err() else {
        panic!("a fault in the text")
    };
    assert_eq!((fault.line(), fault.column()), (1, 1));
    // Windows line ends.
    let error = parse("q.toml", "title = \"x\"\r\nregula = 4\r\n").unwrap_err();
    assert!(error.to_string().contains("q.toml:2:1"), "{error}");
}

#[test]
fn files_that_are_no_text_are_refused() {
    let scratch = tempfile::tempdir().unwrap();
    let write = |name: &str, bytes: &[u8]| {
        let path = scratch.path().join(name);
        std::fs::write(&path, bytes).unwrap();
        load(&path).unwrap_err()
    };
    let binary = write("binary.toml", &[b'a', 0xff, 0xfe, 0]);
    assert!(
        matches!(binary, TableFileError::NotText { offset: 1, .. }),
        "{binary}"
    );
    let zero = write("zero.toml", b"regular = 4\0");
    assert!(
        matches!(zero, TableFileError::NotText { offset: 11, .. }),
        "{zero}"
    );
    let large = write("large.toml", &vec![b'#'; LARGEST_FILE + 1]);
    assert!(matches!(large, TableFileError::TooLarge { .. }), "{large}");
    let missing = load(&scratch.path().join("missing.toml")).unwrap_err();
    assert!(
        matches!(missing, TableFileError::Unreadable { .. })
            && missing.to_string().contains("missing.toml")
    );
    assert!(matches!(
        load(scratch.path()),
        Err(TableFileError::Unreadable { .. })
    ));
}

#[test]
fn ten_megabytes_are_refused_without_being_read_whole() {
    let scratch = tempfile::tempdir().unwrap();
    let path = scratch.path().join("heap.toml");
    let line = "about = \"The harbour wall of Marrowquay, stone by stone\"\n";
    std::fs::write(&path, line.repeat(10 << 20 >> 5)).unwrap();
    assert!(std::fs::metadata(&path).unwrap().len() > 10 << 20);
    let start = Instant::now();
    let error = load(&path).unwrap_err();
    assert!(matches!(error, TableFileError::TooLarge { .. }), "{error}");
    assert!(start.elapsed() < Duration::from_secs(1));
}

#[test]
fn a_corner_may_come_as_near_to_a_side_as_it_likes() {
    let square = |corner: &str| {
        format!("corners = [[0, 0], [1, 0], [1, 1], [\"1/2\", \"{corner}\"], [0, 1]]")
    };
    for near in [
        "1e-40",
        "1e-900",
        "sqrt(2) - 1.414213562373095048801688724209698",
    ] {
        let loaded = parsed(&square(near));
        assert_eq!(loaded.table.sides(), 5, "{near}");
    }
    for on in ["0", "1e-40 - 1e-40", "sqrt(8) - 2*sqrt(2)"] {
        let error = parse("q.toml", &square(on)).unwrap_err().to_string();
        assert!(
            error.contains("corner 3 (counting from 0) lies on side a"),
            "{error}"
        );
    }
    // A hole as near to the outline, and two holes as near to each other.
    let hole = |x: &str| format!("[[holes]]\ncorners = [[\"{x}\", 4], [3, 3], [3, 5]]\n");
    let frame = "corners = [[0, 0], [9, 0], [9, 9], [0, 9]]\n";
    assert_eq!(
        parsed(&(frame.to_string() + &hole("1e-40"))).table.holes(),
        1
    );
    assert!(parse("q.toml", &(frame.to_string() + &hole("1e-40 - 1e-40"))).is_err());
    let other = "[[holes]]\ncorners = [[\"3 + 1e-40\", 4], [5, 3], [5, 5]]\n";
    assert_eq!(
        parsed(&(frame.to_string() + &hole("1") + other))
            .table
            .holes(),
        2
    );
}

#[test]
fn the_largest_file_is_still_read() {
    let mut text = String::from("regular = 4\n");
    text.push_str(&"#".repeat(LARGEST_FILE - text.len()));
    assert!(parse("q.toml", &text).is_ok());
}

#[test]
fn no_change_of_one_byte_makes_the_reader_panic() {
    let good = "title = \"é\"\ncorners = [[\"0\", 0], [\"sqrt(2)\", \"0\"], [\"1/3\", \"cos(pi/5)\"]]\nsides = [\"a\", \"b\", \"c\"]\nform = \"2\"\n";
    for place in 0..good.len() {
        for byte in b"\0\"'[](),=-^/.x9\n\x80\xff#" {
            let mut bytes = good.as_bytes().to_vec();
            bytes[place] = *byte;
            if let Ok(text) = String::from_utf8(bytes) {
                // Errors are fine, their text must be there.
                if let Err(error) = parse("q.toml", &text) {
                    assert!(error.to_string().contains("q.toml"));
                }
            }
        }
        let Some(cut) = good.get(..place) else {
            continue;
        };
        assert!(parse("q.toml", cut).is_err() || cut.contains("]]"), "{cut}");
    }
}
