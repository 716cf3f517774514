//! The table file: every bad table is refused at its line with its reason, every polygon of the shelf loads
//! quickly, and no text whatever makes the reader panic.

use reboundary::number::Real;
use reboundary::table::file::{LARGEST_FILE, LoadedTable, TableFileError, load, parse};
use reboundary::table::{SideId, Vector};
use std::path::{Path, PathBuf};
use std::time::{Duration, Instant};

/// File in `bad_tables/`, line at fault, pieces of the rendered message.
const BAD: &[(&str, usize, &[&str])] = &[
    ("empty", 1, &["describes no table", "triangle ="]),
    ("only-title", 1, &["describes no table", "corners ="]),
    ("not-toml", 1, &["not valid TOML"]),
    ("unclosed-string", 1, &["not valid TOML", "quotes"]),
    ("unclosed-array", 2, &["not valid TOML", "brackets"]),
    ("duplicate-key", 2, &["not valid TOML"]),
    (
        "unknown-key-near",
        2,
        &["unknown key `corner`", "did you mean `corners`?"],
    ),
    (
        "unknown-key-case",
        1,
        &["unknown key `Title`", "did you mean `title`?"],
    ),
    (
        "unknown-key-far",
        2,
        &["unknown key `walls`", "known keys are"],
    ),
    ("two-shapes", 2, &["`corners` and `regular`", "exactly one"]),
    (
        "three-shapes",
        2,
        &["`regular` and `triangle` and `corners`", "exactly one"],
    ),
    (
        "define",
        3,
        &["`define` is reserved", "not supported in this version"],
    ),
    (
        "parameters",
        2,
        &["`parameters` is reserved", "write the values out"],
    ),
    ("outline", 1, &["`outline` is reserved", "corners"]),
    ("holes", 3, &["hole 0 (counting from 0)", "this one has 0"]),
    (
        "title-number",
        1,
        &["`title` must be a string", "an integer"],
    ),
    ("title-line-break", 1, &["line break", "about"]),
    ("about-array", 1, &["`about` must be a string"]),
    (
        "corners-string",
        1,
        &["`corners` must be an array", "a string"],
    ),
    ("corners-empty", 2, &["from 3 to 255 corners", "has 0"]),
    ("corners-two", 1, &["this one has 2", "each corner"]),
    ("corners-many", 1, &["this one has 256"]),
    (
        "corner-no-pair",
        4,
        &[
            "corner 1 (counting from 0) must be an array",
            "pair of numbers",
        ],
    ),
    (
        "corner-three-coordinates",
        4,
        &["corner 1 (counting from 0) must have 2 coordinates, here are 3"],
    ),
    (
        "corner-one-coordinate",
        5,
        &["corner 2 (counting from 0) must have 2 coordinates, here are 1"],
    ),
    (
        "float-coordinate",
        4,
        &["first coordinate of corner 1", "not exact", "\"0.5\""],
    ),
    (
        "float-exponent",
        4,
        &["second coordinate of corner 1", "\"1e3\""],
    ),
    ("float-infinite", 4, &["floating-point", "finite"]),
    (
        "truth-coordinate",
        4,
        &["must be a number", "a truth value"],
    ),
    ("date-coordinate", 4, &["must be a number", "a date"]),
    (
        "expression-unknown-name",
        4,
        &[
            "first coordinate of corner 1",
            "unknown name `phi`",
            "known are",
        ],
    ),
    ("expression-pi", 4, &["transcendental", "355/113"]),
    (
        "expression-division",
        5,
        &[
            "second coordinate of corner 2",
            "division by exact zero",
            "^^^^^^^^^^^^^",
        ],
    ),
    ("expression-negative-root", 4, &["negative", "at least 0"]),
    ("expression-no-root", 4, &["no real root"]),
    ("expression-tie", 4, &["equally near"]),
    ("expression-unbalanced", 4, &["never closed"]),
    ("expression-empty", 4, &["empty", "write a number"]),
    ("expression-character", 4, &["unexpected character", "sqrt"]),
    ("expression-comma", 4, &["unexpected `,`", "decimal point"]),
    (
        "expression-degrees",
        4,
        &["rational multiple of `pi`", "cos(2/7*pi)"],
    ),
    ("expression-tangent", 4, &["infinite"]),
    ("expression-degree", 4, &["degree 254", "at most 64"]),
    ("expression-degree-together", 4, &["degree", "at most 64"]),
    (
        "expression-exponent",
        4,
        &["exponent must be an integer", "sqrt"],
    ),
    ("expression-escaped", 4, &["ends too early"]),
    ("expression-multiline", 3, &["missing before `*`"]),
    ("expression-nested", 4, &["nested deeper", "simplify"]),
    (
        "form-zero",
        2,
        &["plane form must be positive", "form = \"3\""],
    ),
    (
        "form-negative",
        2,
        &["plane form must be positive", "-0.414"],
    ),
    (
        "form-with-regular",
        2,
        &["`form` goes with `corners`", "remove this line"],
    ),
    (
        "form-with-triangle",
        1,
        &["`form` goes with `corners`", "`triangle` chooses"],
    ),
    (
        "form-float",
        2,
        &["the plane form is a floating-point number", "\"0.75\""],
    ),
    (
        "repeated-corner",
        7,
        &[
            "corners 1 and 4 (counting from 0) are the same point",
            "corner 1",
        ],
    ),
    (
        "closed-by-hand",
        6,
        &["corners 0 and 3", "closes by itself"],
    ),
    (
        "doubled-corner",
        5,
        &["corners 1 and 2", "remove one of the two"],
    ),
    (
        "repeated-in-disguise",
        5,
        &["corners 1 and 2", "same point"],
    ),
    (
        "straight-corner",
        4,
        &[
            "corner 1 (counting from 0) is straight",
            "remove corner 1, [\"1\", \"0\"]",
        ],
    ),
    (
        "straight-corner-with-letters",
        4,
        &["straight", "remove a letter, `q`"],
    ),
    (
        "straight-in-disguise",
        4,
        &["corner 1 (counting from 0) is straight"],
    ),
    (
        "folded-corner",
        4,
        &[
            "at corner 1 (counting from 0) the boundary turns back",
            "side b",
            "side a",
        ],
    ),
    (
        "sides-cross",
        5,
        &[
            "side a, from corner 0 to corner 1",
            "side c, from corner 2 to corner 3",
            "cross",
            "order",
        ],
    ),
    (
        "sides-cross-named",
        5,
        &["side w, from corner 0 to corner 1", "side y"],
    ),
    (
        "corner-on-side",
        6,
        &[
            "corner 3 (counting from 0) lies on side a, from corner 0 to corner 1",
            "must not touch",
        ],
    ),
    ("zero-area", 2, &["zero area", "off the line"]),
    ("pentagram", 5, &["cross"]),
    ("letters-few", 2, &["3 letters for 4 sides"]),
    ("letters-many", 2, &["4 letters for 3 sides"]),
    (
        "letters-long",
        2,
        &["letter of side 1 must be one character, this is 2"],
    ),
    (
        "letters-empty",
        2,
        &["letter of side 1 must be one character, this is 0"],
    ),
    (
        "letters-space",
        2,
        &["cannot be the letter of side 1", "no space"],
    ),
    ("letters-comma", 2, &["`,` cannot be the letter", "comma"]),
    (
        "letters-quote",
        2,
        &["cannot be the letter of side 1", "quote"],
    ),
    (
        "letters-tab",
        2,
        &["cannot be the letter of side 1", "printable"],
    ),
    (
        "letters-invisible",
        2,
        &["cannot be the letter of side 1", "printable"],
    ),
    (
        "letters-number",
        2,
        &["letter of side 0 must be a string", "an integer"],
    ),
    (
        "letters-string",
        2,
        &["`sides` must be an array", "one character for each side"],
    ),
    (
        "triangle-two",
        1,
        &["3 angles, here are 2", "in proportion"],
    ),
    (
        "triangle-zero",
        1,
        &["angle at corner 1 (counting from 0) must be positive"],
    ),
    (
        "triangle-negative",
        1,
        &["angle at corner 2 (counting from 0) must be positive"],
    ),
    (
        "triangle-irrational",
        1,
        &["rational proportion", "corners"],
    ),
    ("triangle-float", 1, &["angle at corner 1", "\"2.5\""]),
    (
        "triangle-large-field",
        1,
        &["cannot be used", "degree 510", "common denominator"],
    ),
    ("triangle-string", 1, &["`triangle` must be an array"]),
    ("regular-two", 1, &["out of range", "from 3 to 255"]),
    ("regular-negative", 1, &["out of range"]),
    ("regular-many", 1, &["out of range", "255"]),
    ("regular-fraction", 1, &["out of range", "integer"]),
    ("regular-float", 1, &["floating-point"]),
    ("regular-large-field", 1, &["cannot be used", "degree 125"]),
    ("regular-array", 1, &["must be a number", "an array"]),
];

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
    for (name, line, pieces) in BAD {
        let path = folder("tests/bad_tables").join(format!("{name}.toml"));
        let start = Instant::now();
        let error = load(&path).expect_err(name);
        assert!(
            start.elapsed() < Duration::from_secs(2),
            "{name} took {:?}",
            start.elapsed()
        );
        let TableFileError::Fault(diagnostic) = &error else {
            panic!("{name}: {error}")
        };
        let shown = error.to_string();
        assert_eq!(diagnostic.line(), *line, "{name}\n{shown}");
        for piece in *pieces {
            assert!(shown.contains(piece), "{name}: no {piece:?} in\n{shown}");
        }
        let place = format!("{}:{}:{}", path.display(), line, diagnostic.column());
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
    let expected: Vec<&str> = BAD.iter().map(|(name, _, _)| *name).collect();
    for path in table_files("tests/bad_tables") {
        let stem = path.file_stem().unwrap().to_str().unwrap();
        assert!(expected.contains(&stem), "{stem} has no expectation");
    }
    assert!(expected.len() >= 60);
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
