//! Names and parameters, outlines, and affine images in table files.

use reboundary::number::Real;
use reboundary::table::file::{LoadedTable, TableFileError, load, load_with, parse, parse_with};
use reboundary::table::{SideId, Vector};
use rug::Rational;
use std::path::Path;

fn parsed(text: &str) -> LoadedTable {
    parse("quay.toml", text).unwrap_or_else(|e| panic!("{text}\n{e}"))
}

fn set(text: &str, settings: &[&str]) -> Result<LoadedTable, TableFileError> {
    let settings: Vec<String> = settings.iter().map(|s| s.to_string()).collect();
    parse_with("quay.toml", text, &settings)
}

fn q(n: i64, d: i64) -> Real {
    Real::from(Rational::from((n, d)))
}

const LOFT: &str = "corners = [[0, 0], [1, 0], [\"t\", \"h*phi\"]]
[define]
h = \"t + 1/3\"
phi = \"(1 + sqrt(5))/2\"
slant = \"2/7*pi\"
[parameters]
t = \"1/3\"
s = 7
";

#[test]
fn names_stand_for_their_values_in_any_order() {
    let loaded = parsed(LOFT);
    let written = parsed("corners = [[0, 0], [1, 0], [\"1/3\", \"2/3*(1 + sqrt(5))/2\"]]");
    assert_eq!(loaded.table.corners(), written.table.corners());
    // The angle that the table does not use enlarges no field.
    assert_eq!(loaded.table.field().degree(), 2);
    let angle = parsed(
        "corners = [[0, 0], [1, 0], [\"cos(a)\", \"2*sin(a/2)\"]]\n[define]\na = \"pi/3\"\n",
    );
    assert_eq!(angle.table.corner(2), &Vector::new(q(1, 2), q(1, 1)));
    // In `regular`, in a hole, in the form.
    let all = parsed(
        "regular = \"n + 3\"\n[[holes]]\ncorners = [[0, 0], [\"r\", 0], [0, \"r\"]]\n[define]\nn = 1\nr = \"n/9\"\n",
    );
    assert_eq!((all.table.sides(), all.table.holes()), (7, 1));
    assert_eq!(all.table.corner(5), &Vector::new(q(0, 1), q(1, 9)));
}

#[test]
fn settings_override_parameters_and_are_recorded() {
    let loaded = set(LOFT, &["t = 2/5"]).unwrap();
    assert_eq!(loaded.table.corner(2).x, q(2, 5));
    let recorded: Vec<_> = loaded
        .parameters
        .iter()
        .map(|p| (p.name.as_str(), p.expression.as_str(), p.set))
        .collect();
    assert_eq!(recorded, [("t", "2/5", true), ("s", "7", false)]);
    // A setting may use names, and the equals sign splits once.
    assert_eq!(set(LOFT, &["t=s/14"]).unwrap().table.corner(2).x, q(1, 2));
    // A fault in the file's value does not matter when it is set.
    let broken = "corners = [[0, 0], [\"t\", 0], [0, 1]]\n[parameters]\nt = \"1/0\"\n";
    assert!(parse("q.toml", broken).is_err());
    assert_eq!(set(broken, &["t=3"]).unwrap().table.corner(1).x, q(3, 1));
}

#[test]
fn faults_of_settings_point_into_their_text() {
    let cases: [(&[&str], usize, &str); 11] = [
        (&["t"], 1, "no `=`"),
        (&["=3"], 1, "a name is missing"),
        (&["r=3"], 1, "no parameter `r`"),
        (&["phi=3"], 1, "`phi` is fixed by `[define]`"),
        (&["t=1", "t=2"], 1, "`t` is set twice"),
        (&["t="], 3, "the expression is empty"),
        (&["t=1/0"], 5, "division by exact zero"),
        (&["t=0.5.2"], 6, "operator is missing"),
        (&["t=h"], 3, "leads back to itself: t → h → t"),
        (&["s=2", "t=wall"], 3, "unknown name `wall`"),
        (&["t=2=3"], 4, "unexpected character `=`"),
    ];
    for (settings, column, piece) in cases {
        let error = set(LOFT, settings).unwrap_err();
        let shown = error.to_string();
        let TableFileError::Fault(fault) = error else {
            panic!("{shown}")
        };
        assert!(shown.contains(piece), "{piece} in\n{shown}");
        assert_eq!(
            (fault.file.as_str(), fault.column()),
            ("--set", column),
            "{shown}"
        );
        assert!(!fault.help.is_empty());
    }
    assert!(
        set("regular = 5", &["t=1"])
            .unwrap_err()
            .to_string()
            .contains("no `[parameters]`")
    );
}

#[test]
fn an_outline_is_the_polygon_that_its_sides_make_in_a_small_field() {
    // Outline, the same by other means, degree and form.
    let cases = [
        (
            "[[\"1\", 0], [\"sqrt(2)\", \"3/4\"], [1, \"3/2\"]]",
            "corners = [[0, 0], [1, 0], [0, 1]]",
            1,
        ),
        (
            "[[1, 0], [1, \"2/3\"], [1, \"-2/3\"]]",
            "triangle = [1, 1, 1]",
            1,
        ),
        (
            "[[1, 0], [\"sqrt(3)\", \"1/2\"], [2, \"4/3\"]]",
            "form = 3\ncorners = [[0, 0], [1, 0], [1, 1]]",
            1,
        ),
        (
            "[[3, 0], [2, \"1/2\"], [3, 1], [2, \"7/2\"]]",
            "corners = [[0, 0], [3, 0], [3, 2], [0, 2]]",
            1,
        ),
        (
            "[[1, 0], [1, \"1/4\"], [1, \"1/2\"], [1, \"3/4\"], [1, 1], [1, \"5/4\"], [1, \"3/2\"], [1, \"7/4\"]]",
            "corners = [[0, 0], [1, 0], [\"1+sqrt(2)/2\", \"sqrt(2)/2\"], [\"1+sqrt(2)/2\", \"1+sqrt(2)/2\"], [1, \"1+sqrt(2)\"], [0, \"1+sqrt(2)\"], [\"-sqrt(2)/2\", \"1+sqrt(2)/2\"], [\"-sqrt(2)/2\", \"sqrt(2)/2\"]]",
            2,
        ),
    ];
    for (outline, other, degree) in cases {
        let drawn = parsed(&format!("outline = {outline}")).table;
        let other = parsed(other).table;
        assert_eq!(drawn.field().degree(), degree, "{outline}");
        assert_eq!(drawn.form(), other.form(), "{outline}");
        assert_eq!(drawn.corners(), other.corners(), "{outline}");
    }
    // The regular pentagon: all sides 1, in the field of √5.
    let pentagon =
        parsed("outline = [[1, 0], [1, \"2/5\"], [1, \"4/5\"], [1, \"6/5\"], [1, \"8/5\"]]");
    assert_eq!(pentagon.table.field().degree(), 2);
    for side in 0..5 {
        let length = pentagon
            .table
            .side_vector(side)
            .squared_length(pentagon.table.form());
        assert_eq!(length, q(1, 1));
    }
    // Clockwise headings are turned round with their letters.
    let clockwise = parsed(
        "outline = [[1, \"1/2\"], [2, 0], [1, \"3/2\"], [2, 1]]\nsides = ['p', 'q', 'r', 's']",
    );
    let letters: String = (0..4).map(|s| clockwise.table.letter(SideId(s))).collect();
    assert_eq!(letters, "srqp");
}

#[test]
fn an_outline_that_does_not_close_tells_its_exact_gap() {
    let gap = |outline: &str| {
        let error = parse("q.toml", &format!("outline = {outline}")).unwrap_err();
        error.to_string()
    };
    let shown = gap("[[1, 0], [1, \"1/2\"], [1, 1], [\"3/4\", \"3/2\"]]");
    assert!(
        shown.contains("exactly (0, 1/4);") && shown.contains("about (0.000000, 0.25"),
        "{shown}"
    );
    // Off by less than any decimal shows; with t = √2 the ordinate is t − (a rational number).
    let shown =
        gap("[[1, 0], [\"sqrt(2)\", \"1/2\"], [1, 1], [\"1.4142135623730950488016887\", \"3/2\"]]");
    assert!(
        shown.contains("t = 1.414214 is a root of t^2 - 2"),
        "{shown}"
    );
    assert!(shown.contains("0.000000"), "{shown}");
    let shown = gap("[[1, 0], [1, \"2/3\"], [2, \"4/3\"]]");
    assert!(shown.contains("exactly (-1/2, (-1/2)·√(3));"), "{shown}");
    assert!(shown.contains("-0.866025"), "{shown}");
}

fn scratch(files: &[(&str, &str)]) -> tempfile::TempDir {
    let folder = tempfile::tempdir().unwrap();
    for (name, text) in files {
        let path = folder.path().join(name);
        std::fs::create_dir_all(path.parent().unwrap()).unwrap();
        std::fs::write(path, text).unwrap();
    }
    folder
}

fn at(folder: &tempfile::TempDir, name: &str) -> LoadedTable {
    load(&folder.path().join(name)).unwrap_or_else(|e| panic!("{name}\n{e}"))
}

#[test]
fn an_affine_image_is_mirrored_then_stretched_then_turned() {
    let folder = scratch(&[
        (
            "plans/ell.toml",
            "corners = [[0, 0], [2, 0], [2, 1], [1, 1], [1, 2], [0, 2]]\nsides = ['p', 'q', 'p', 'r', 's', 't']\n",
        ),
        (
            "stretched.toml",
            "base = \"plans/ell.toml\"\nstretch = [\"sqrt(2)\", \"a\"]\n[parameters]\na = \"1/3\"\n",
        ),
        ("turned.toml", "base = \"plans/ell.toml\"\nturn = \"1/2\"\n"),
        (
            "all.toml",
            "base = \"plans/ell.toml\"\nmirror = true\nstretch = [2, 3]\nturn = \"1/2\"\n",
        ),
        ("triangle.toml", "triangle = [1, 1, 1]\n"),
        (
            "sixth.toml",
            "base = \"triangle.toml\"\nturn = \"1/3\"\nsides = ['x', 'y', 'z']\n",
        ),
        ("back.toml", "base = \"sixth.toml\"\nturn = \"-1/3\"\n"),
        ("five.toml", "base = \"triangle.toml\"\nturn = \"2/5\"\n"),
        (
            "holed.toml",
            "base = \"frame.toml\"\nstretch = [2, 1]\n[[holes]]\ncorners = [[12, 6], [14, 6], [12, 8]]\n",
        ),
        (
            "frame.toml",
            "corners = [[0, 0], [9, 0], [9, 9], [0, 9]]\n[[holes]]\ncorners = [[1, 1], [1, 2], [2, 1]]\nsides = ['h', 'h', 'a']\n",
        ),
    ]);
    let ell = at(&folder, "plans/ell.toml").table;
    let stretched = at(&folder, "stretched.toml");
    assert_eq!(stretched.table.field().degree(), 2);
    assert_eq!(stretched.table.corner(4).y, q(2, 3));
    assert_eq!(stretched.table.corner(1).x.pow(2), q(8, 1));
    assert_eq!(stretched.table.letters(), ell.letters());
    assert_eq!(stretched.bases.len(), 1);
    assert!(stretched.bases[0].text.starts_with("corners"));
    let path = folder.path().join("stretched.toml");
    let set = load_with(&path, &["a=5".to_string()]).unwrap();
    assert_eq!(set.table.corner(4).y, q(10, 1));

    let turned = at(&folder, "turned.toml").table;
    assert_eq!(turned.corner(1), &Vector::new(q(0, 1), q(2, 1)));
    assert_eq!(turned.corner(4), &Vector::new(q(-2, 1), q(1, 1)));
    // (x, y) → (x, −y) → (2x, −3y) → (3y, 2x), which keeps the order of the corners' reverse.
    let all = at(&folder, "all.toml").table;
    for (i, corner) in ell.corners().iter().enumerate() {
        let image = Vector::new(&corner.y * Real::from(3), &corner.x * Real::from(2));
        assert_eq!(all.corner((6 - i) % 6), &image);
    }
    let spelled: String = (0..6).map(|s| all.letter(SideId(s))).collect();
    assert_eq!(spelled, "tsrpqp");

    let sixth = at(&folder, "sixth.toml");
    assert!(sixth.table.field().is_rational());
    assert_eq!(sixth.table.corner(2), &Vector::new(q(-1, 2), q(1, 2)));
    assert_eq!(sixth.table.letters(), ['x', 'y', 'z']);
    let back = at(&folder, "back.toml");
    assert_eq!(
        back.table.corners(),
        at(&folder, "triangle.toml").table.corners()
    );
    assert_eq!(back.bases.len(), 2);
    // A turn keeps the lengths in any field.
    let five = at(&folder, "five.toml").table;
    for side in 0..3 {
        assert_eq!(five.side_vector(side).squared_length(five.form()), q(1, 1));
    }
    let corner = five.corner(1);
    assert!((corner.x.to_f64() - (std::f64::consts::TAU / 5.0).cos()).abs() < 1e-12);
    assert!(corner.y.to_f64() > 0.0);

    let holed = at(&folder, "holed.toml").table;
    assert_eq!((holed.holes(), holed.sides()), (2, 10));
    assert_eq!(holed.corner(6), &Vector::new(q(4, 1), q(1, 1)));
    let spelled: String = (0..10).map(|s| holed.letter(SideId(s))).collect();
    // Sides without letters get those that no side has: b to e for the frame, f, g, i for its second hole,
    // which is turned round.
    assert_eq!(spelled, "bcdehhaigf");
}

#[test]
fn chains_of_bases_end() {
    let mut files = vec![("t0.toml".to_string(), "regular = 4\n".to_string())];
    for i in 1..=20 {
        files.push((
            format!("t{i}.toml"),
            format!("base = \"t{}.toml\"\n", i - 1),
        ));
    }
    let files: Vec<(&str, &str)> = files
        .iter()
        .map(|(n, t)| (n.as_str(), t.as_str()))
        .collect();
    let folder = scratch(&files);
    assert_eq!(at(&folder, "t15.toml").bases.len(), 15);
    let error = load(&folder.path().join("t20.toml"))
        .unwrap_err()
        .to_string();
    assert!(
        error.contains("more than 16 tables stand on each other"),
        "{error}"
    );
}

#[test]
fn a_base_that_is_no_text_is_refused_at_its_name() {
    let folder = scratch(&[("image.toml", "title = \"x\"\nbase = \"raw.toml\"\n")]);
    std::fs::write(folder.path().join("raw.toml"), [0xff, 0xfe]).unwrap();
    let error = load(&folder.path().join("image.toml")).unwrap_err();
    let TableFileError::Fault(fault) = &error else {
        panic!("{error}")
    };
    assert_eq!((fault.line(), fault.column()), (2, 8));
    assert!(Path::new(&fault.file).ends_with("image.toml"));
    assert!(error.to_string().contains("not a text file"), "{error}");
}
