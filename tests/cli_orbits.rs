//! The commands about orbits as a user runs them: rows that can be traced again, pictures, signals, wrong input.

mod program;

use program::{done, entries, json, place, polygon, program, run_in, text};
use std::path::Path;

/// The rows of CSV text, without the header, and where a column stands.
fn rows(text: &str) -> (Vec<String>, Vec<Vec<String>>) {
    let mut reader = csv::Reader::from_reader(text.as_bytes());
    let header = reader
        .headers()
        .expect("a header")
        .iter()
        .map(String::from)
        .collect();
    let fields = |row: csv::StringRecord| row.iter().map(String::from).collect();
    (
        header,
        reader
            .records()
            .map(|r| fields(r.expect("a row")))
            .collect(),
    )
}

fn column(header: &[String], row: &[String], name: &str) -> String {
    let at = header.iter().position(|h| h == name);
    row[at.unwrap_or_else(|| panic!("a column {name} among {header:?}"))].clone()
}

fn word(table: &str, start: &str, aim: &str, hits: usize) -> String {
    let hits = hits.to_string();
    let mut arguments = vec!["trace", table, "--start", start, "--aim", aim];
    arguments.extend(["--hits", &hits, "--quiet"]);
    done(&arguments).trim().to_string()
}

/// Every row that a command writes, with start and aim, gives the same word in `trace`; so does the orbit from each hit.
#[test]
fn written_starts_are_read_again_exactly() {
    // Fields of degree 1 to 4 and 6, and numbers that need more than the table's field.
    for name in [
        "square",
        "regular-pentagon",
        "heptagonal-triangle",
        "biquadratic-triangle",
        "irrational-quadrilateral",
        "square-two-letters",
        "cube-root-triangle",
    ] {
        let table = polygon(name);
        let laws: [&[&str]; 3] = [
            &["--count", "3"],
            &["--count", "2", "--aim", "sqrt(2)+1/7,-3/5"],
            &["--count", "2", "--heading", "1/3"],
        ];
        for law in laws {
            if law.contains(&"--heading") && name == "heptagonal-triangle" {
                continue;
            }
            let mut arguments = vec!["orbits", &table, "--hits", "15", "--format", "csv"];
            arguments.extend(law);
            let (header, all) = rows(&done(&arguments));
            assert!(!all.is_empty());
            for row in all {
                let get = |name: &str| column(&header, &row, name);
                let start = format!("{}@{}", get("side"), get("fraction"));
                let aim = format!("{},{}", get("aim_x"), get("aim_y"));
                assert_eq!(
                    word(&table, &start, &aim, 15),
                    get("word"),
                    "{name} {start} {aim}"
                );
            }
        }
        // From each hit on, the direction after the bounce leads on.
        let (start, aim) = ("@sqrt(3)/5", "sqrt(2)+1/7,3/5");
        let side = if name == "square-two-letters" {
            "h1"
        } else {
            "a"
        };
        let start = format!("{side}{start}");
        let trace = [
            "trace", &table, "--start", &start, "--aim", aim, "--hits", "6",
        ];
        let place = place();
        let output = run_in(&place, &[&trace[..], &["--format", "csv"]].concat());
        let (output, aim) = match output.status.code() {
            Some(0) => (output, aim.to_string()),
            _ => {
                let aim = "-sqrt(2)-1/7,-3/5".to_string();
                let trace = [
                    "trace", &table, "--start", &start, "--aim", &aim, "--hits", "6",
                ];
                (
                    run_in(&place, &[&trace[..], &["--format", "csv"]].concat()),
                    aim,
                )
            }
        };
        assert_eq!(
            output.status.code(),
            Some(0),
            "{name}: {}",
            text(&output.stderr)
        );
        let whole = word(&table, &start, &aim, 6);
        let (header, all) = rows(&text(&output.stdout));
        assert_eq!(all.len(), whole.len(), "{name}");
        for (i, row) in all.iter().enumerate() {
            let get = |name: &str| column(&header, row, name);
            let here = format!("{}@{}", get("side"), get("fraction"));
            let aim = format!("{},{}", get("direction_x"), get("direction_y"));
            assert_eq!(
                word(&table, &here, &aim, 6 - i),
                whole[i..],
                "{name} {here} {aim}"
            );
            // Written in the same way, the numbers are the same numbers.
            let trace = [
                "trace", &table, "--start", &here, "--aim", &aim, "--hits", "1",
            ];
            let (header, again) = rows(&done(
                &[&trace[..], &["--format", "csv", "--quiet"]].concat(),
            ));
            for exact in ["fraction_decimal", "x_decimal", "y_decimal"] {
                assert_eq!(column(&header, &again[0], exact), get(exact), "{name}");
            }
        }
    }
}

#[test]
fn starts_of_periodic_words_and_strips_are_read_again() {
    for name in ["regular-pentagon", "heptagonal-triangle", "right-isosceles"] {
        let table = polygon(name);
        let (header, all) = rows(&done(&[
            "periodic", &table, "--length", "8", "--format", "csv",
        ]));
        assert!(all.len() >= 2, "{name}");
        for row in &all {
            let get = |name: &str| column(&header, row, name);
            let start = format!("{}@{}", get("start_side"), get("start_fraction"));
            let aim = format!("{},{}", get("aim_x"), get("aim_y"));
            let (once, hits) = (get("word"), get("hits").parse().expect("a number"));
            let turns = hits / once.len();
            assert_eq!(
                word(&table, &start, &aim, hits),
                once.repeat(turns),
                "{name}"
            );
        }
    }
    let table = polygon("square");
    let direction = [
        "direction",
        &table,
        "--aim",
        "sqrt(2),3*sqrt(2)",
        "--rows",
        "strips",
    ];
    let (header, all) = rows(&done(&[&direction[..], &["--format", "csv"]].concat()));
    assert!(!all.is_empty());
    for row in &all {
        let get = |name: &str| column(&header, row, name);
        let once = get("word");
        let aim = format!("{},{}", get("aim_x"), get("aim_y"));
        assert_eq!(word(&table, &get("start"), &aim, once.len()), once);
    }
}

/// Width and height that a PNG file states in its header (PNG specification, section 11.2.2).
fn png_size(path: &Path) -> (u32, u32) {
    let bytes = std::fs::read(path).expect("a file");
    assert_eq!(bytes[..8], *b"\x89PNG\r\n\x1a\n");
    let number = |at: usize| u32::from_be_bytes(bytes[at..at + 4].try_into().expect("four bytes"));
    (number(16), number(20))
}

#[test]
fn pictures_are_png_when_their_name_says_so() {
    let place = place();
    let table = polygon("dart");
    let trace = ["trace", &table, "--seed", "3", "--hits", "40", "--quiet"];
    let more = [
        "--picture",
        "orbit.png",
        "--unfolding",
        "line.PNG",
        "--picture-width",
        "700",
    ];
    let output = run_in(&place, &[&trace[..], &more].concat());
    assert_eq!(output.status.code(), Some(0), "{}", text(&output.stderr));
    let [orbit, line] = ["orbit.png", "line.PNG"].map(|f| png_size(&place.path().join(f)));
    assert_eq!((orbit.0, line.0), (700, 700));
    assert!(orbit.1 > 100 && line.1 > 10);
    let output = run_in(&place, &[&trace[..], &["--picture", "orbit.svg"]].concat());
    assert_eq!(output.status.code(), Some(0));
    let svg = std::fs::read_to_string(place.path().join("orbit.svg")).expect("a file");
    assert!(svg.starts_with("<svg"));
}

#[test]
#[cfg(unix)]
fn an_interrupted_trace_writes_what_it_has() {
    let place = place();
    let table = polygon("irrational-quadrilateral");
    let arguments = ["trace", &table, "--seed", "1", "--quiet", "--hits"];
    let long = [&arguments[..], &["1000000000", "--out", "word.txt"]].concat();
    let child = program(&place, &long)
        .stderr(std::process::Stdio::piped())
        .spawn();
    let child = child.expect("the program starts");
    std::thread::sleep(std::time::Duration::from_millis(1500));
    let kill = std::process::Command::new("kill")
        .args(["-INT", &child.id().to_string()])
        .status();
    assert!(kill.expect("kill is there").success());
    let output = child.wait_with_output().expect("it ends");
    let told = text(&output.stderr);
    assert_eq!(output.status.code(), Some(3), "{told}");
    assert!(told.starts_with("stopped: a signal came after "), "{told}");
    let word = std::fs::read_to_string(place.path().join("word.txt")).expect("written");
    let word = word.trim();
    assert!(
        told.contains(&format!("after {} letters", word.len())),
        "{told}"
    );
    let few = word.len().min(3000);
    assert!(few > 10);
    let again = done(&[&arguments[..], &[&few.to_string()]].concat());
    assert_eq!(again.trim(), &word[..few]);
}

/// Each number of diagonals in the rows is that of the list; N(L)/L² is what it says.
#[test]
fn diagonals_are_counted_by_sides_and_by_length() {
    let table = polygon("square");
    let list = rows(&done(&[
        "diagonals",
        &table,
        "--length",
        "6",
        "--format",
        "csv",
    ]));
    let by_sides = [
        "diagonals",
        &table,
        "--length",
        "6",
        "--format",
        "csv",
        "--rows",
        "by-sides",
    ];
    let mut total = 0;
    for row in rows(&done(&by_sides)).1 {
        let count = list.1.iter().filter(|d| d[0] == row[0]).count();
        total += count;
        assert_eq!(row[1..], [count.to_string(), total.to_string()]);
    }
    assert_eq!(total, list.1.len());
    // Corner images of the unit square are the integer points, and a primitive vector (p, q) off the axes is one
    // diagonal from each of two corners, run both ways by the others.
    let within = [
        "diagonals",
        &table,
        "--distance",
        "sqrt(61)",
        "--format",
        "csv",
        "--rows",
    ];
    let (header, lengths) = rows(&done(&[&within[..], &["by-length"]].concat()));
    assert_eq!(
        header,
        [
            "length",
            "squared_length",
            "diagonals",
            "up_to",
            "up_to_over_squared_length"
        ]
    );
    let gcd = |a: i64, b: i64| (1..=a.max(b)).rev().find(|d| a % d == 0 && b % d == 0);
    let mut up_to = 0;
    for row in &lengths {
        let squared: i64 = row[1].parse().expect("an integer");
        let vectors = (1..8i64).flat_map(|p| (1..8i64).map(move |q| (p, q)));
        let count = 4 * vectors
            .filter(|(p, q)| p * p + q * q == squared && gcd(*p, *q) == Some(1))
            .count();
        up_to += count;
        assert_eq!(
            row[2..4],
            [count.to_string(), up_to.to_string()],
            "{squared}"
        );
        let growth: f64 = row[4].parse().expect("a number");
        assert!((growth - up_to as f64 / squared as f64).abs() < 1e-6);
    }
    assert_eq!(lengths.last().expect("rows")[1], "61");
    let by_sides = rows(&done(&[&within[..], &["by-sides"]].concat())).1;
    assert_eq!(by_sides.last().expect("rows")[2], up_to.to_string());
}

#[test]
fn work_that_does_not_fit_is_refused_before_it_starts() {
    let table = polygon("square");
    for (arguments, says) in [
        (
            [
                "diagonals",
                &table,
                "--length",
                "60",
                "--budget-memory",
                "1K",
            ],
            "--rows by-sides",
        ),
        (
            ["graph", &table, "--length", "60", "--budget-memory", "1K"],
            "words to length 61",
        ),
    ] {
        refused(&arguments, 2, &[says, "only 1.0 KiB may be used"]);
    }
    let far = [
        "diagonals",
        &table,
        "--distance",
        "3000",
        "--budget-memory",
        "20M",
    ];
    refused(&far, 3, &["more memory was used than allowed"]);
}

fn refused(arguments: &[&str], code: i32, says: &[&str]) {
    let place = place();
    let output = run_in(&place, arguments);
    let told = text(&output.stderr);
    assert_eq!(output.status.code(), Some(code), "{arguments:?}: {told}");
    for part in says {
        assert!(
            told.contains(part),
            "{arguments:?} should say {part}: {told}"
        );
    }
    assert!(!told.contains("panicked"), "{told}");
    assert_eq!(text(&output.stdout), "", "{arguments:?}");
    assert!(entries(place.path()).is_empty(), "{arguments:?}");
}

/// A command, options that are good, and bad ones with what the message must hold.
type Case<'a> = (&'a str, &'a [&'a str], &'a [(&'a [&'a str], &'a str)]);

/// One wrong value for each option, and what the message must hold.
#[test]
fn every_wrong_option_is_told() {
    const START: [&str; 4] = ["--start", "a@1/3", "--aim", "1,2"];
    let cases: [Case; 5] = [
        (
            "trace",
            &START,
            &[
                (&["--hits", "0"], "at least 1"),
                (&["--hits", "-3"], "-3"),
                (&["--hits", "1.5"], "at least 1"),
                (&["--distance", "0"], "positive"),
                (&["--distance", "-1"], "positive"),
                (&["--distance", "far"], "far"),
                (&["--format", "parquet"], "possible values"),
                (&["--picture", "orbit.gif"], ".svg or .png"),
                (&["--picture", "orbit"], ".svg or .png"),
                (&["--picture", "nowhere/orbit.png"], "nowhere"),
                (&["--unfolding", "line.pdf"], ".svg or .png"),
                (&["--picture-width", "0"], "1 to 8192"),
                (&["--picture-width", "9000"], "1 to 8192"),
                (&["--out", "nowhere/x"], "nowhere"),
                (&["--set", "q=1"], "q"),
                (&["--seed", "1"], "cannot be used with"),
                (&["--from", "1/2,1/2"], "cannot be used with"),
                (&["--heading", "1/3"], "cannot be used with"),
            ],
        ),
        (
            "orbits",
            &[],
            &[
                (&["--count", "-1"], "-1"),
                (&["--hits", "0"], "at least 1"),
                (&["--seed", "-1"], "-1"),
                (&["--aim", "1"], "two coordinates"),
                (&["--aim", "0,0"], "zero vector"),
                (&["--heading", "sqrt(2)"], "rational multiple of pi"),
                (&["--start", "a"], "@"),
                (&["--start", "z@1/2"], "its sides are a, b, c, d"),
                (&["--grid", "0x5"], "PxQ"),
                (&["--grid", "3"], "PxQ"),
                (&["--blocks", "13"], "1 to 12"),
                (&["--blocks", "0"], "1 to 12"),
                (&["--statistics", "nowhere/s.csv"], "nowhere"),
                (
                    &["--statistics", "s.csv", "--aim", "1,2"],
                    "cannot be used with",
                ),
                (&["--starts", "missing.csv"], "missing.csv"),
                (&["--format", "xml"], "possible values"),
                (
                    &["--format", "parquet"],
                    if cfg!(feature = "parquet") {
                        "--out"
                    } else {
                        "--features parquet"
                    },
                ),
                (&["--out", "nowhere/x"], "nowhere"),
                (&["--threads", "0"], "--threads"),
            ],
        ),
        (
            "direction",
            &["--aim", "1,2"],
            &[
                (&["--length", "0"], "--length"),
                (&["--length", "x"], "--length"),
                (&["--reach", "0"], "--reach"),
                (&["--reach", "1000000000000"], "--reach"),
                (&["--transversal", "z"], "its sides are a, b, c, d"),
                (&["--transversal", "a:99"], "write a number from 0 to 3"),
                (&["--transversal", "a:x"], "write a number from 0 to 3"),
                (&["--rows", "all"], "possible values"),
                (&["--format", "jsonl"], "possible values"),
                (&["--heading", "1/3"], "cannot be used with"),
                (&["--out", "nowhere/x"], "nowhere"),
            ],
        ),
        (
            "periodic",
            &[],
            &[
                (&["--length", "0"], "--length"),
                (&["--length", "-1"], "-1"),
                (&["--length", "1e3"], "--length"),
                (&["--pictures", "nowhere/x"], "nowhere"),
                (&["--format", "jsonl"], "possible values"),
                (&["--out", "nowhere/x"], "nowhere"),
                (&["--stable-only", "yes"], "yes"),
                (&["--set", "q=1"], "q"),
            ],
        ),
        (
            "diagonals",
            &[],
            &[
                (&["--length", "-1"], "-1"),
                (&["--length", "x"], "--length"),
                (&["--distance", "0"], "positive"),
                (&["--distance", "-2"], "positive"),
                (&["--distance", "pi"], "pi"),
                (&["--distance", "3", "--length", "4"], "cannot be used with"),
                (&["--rows", "by-length"], "needs --distance"),
                (&["--rows", "all"], "possible values"),
                (&["--budget-memory", "lots"], "number of bytes"),
                (&["--format", "jsonl"], "possible values"),
                (&["--out", "nowhere/x"], "nowhere"),
            ],
        ),
    ];
    let table = polygon("square");
    for (command, required, wrong) in cases {
        for (more, says) in wrong {
            let arguments = [&[command, &table][..], required, more].concat();
            refused(&arguments, 2, &[says]);
        }
        let missing = [&[command, "missing.toml"][..], required].concat();
        refused(&missing, 2, &["missing.toml"]);
    }
}

/// Wrong starts and aims, alone.
#[test]
fn starts_and_aims_that_lead_nowhere_are_told() {
    let table = polygon("square");
    for (launch, says) in [
        (
            &["--start", "a@0", "--aim", "1,2"][..],
            "strictly between 0 and 1",
        ),
        (
            &["--start", "a@1", "--aim", "1,2"],
            "strictly between 0 and 1",
        ),
        (&["--start", "a@t", "--aim", "1,2"], "`t`"),
        (
            &["--start", "q@1/2", "--aim", "1,2"],
            "its sides are a, b, c, d",
        ),
        (&["--start", "a", "--aim", "1,2"], "LETTER@FRACTION"),
        (&["--start", "a@1/2", "--aim", "1,0"], "along the side"),
        (
            &["--start", "a@1/2", "--aim", "1,-2"],
            "points out of the table",
        ),
        (&["--start", "a@1/2", "--aim", "0,0"], "zero vector"),
        (&["--start", "a@1/2", "--aim", "1,2,3"], "two coordinates"),
        (&["--start", "a@1/2", "--heading", "1.5e"], "--heading"),
        (&["--from", "2,2", "--aim", "1,2"], "outside"),
        (&["--from", "0,0", "--aim", "1,2"], "corner 0"),
        (&["--from", "1/2,0", "--aim", "1,2"], "--start a@FRACTION"),
        (&["--from", "1/2", "--aim", "1,2"], "two coordinates"),
        (&["--aim", "1,2"], "--start"),
        (&["--start", "a@1/2"], "--aim"),
        (&["--seed", "x"], "--seed"),
    ] {
        refused(&[&["trace", &table][..], launch].concat(), 2, &[says]);
    }
}

/// On a table with holes `periodic` says that it is complete, and an orbit beside its axis closes after two turns.
#[test]
fn periodic_words_with_holes_are_complete() {
    let place = place();
    let table = "corners = [[\"0\", \"0\"], [\"2\", \"0\"], [\"1\", \"1\"]]\nform = \"3\"\n[[holes]]\ncorners = [\
        [\"0.97\", \"0.48\"], [\"0.97\", \"0.52\"], [\"1.03\", \"0.51\"], [\"1.02\", \"0.47\"]]\n";
    std::fs::write(place.path().join("pierced.toml"), table).expect("written");
    let arguments = [
        "periodic",
        "pierced.toml",
        "--length",
        "3",
        "--format",
        "json",
        "--quiet",
        "--pictures",
        "pictures",
    ];
    let output = run_in(&place, &arguments);
    assert_eq!(output.status.code(), Some(0), "{}", text(&output.stderr));
    let found: serde_json::Value = serde_json::from_slice(&output.stdout).expect("JSON");
    assert_eq!(found["complete"], true);
    let words = found["words"].as_array().expect("a list");
    let fagnano: Vec<_> = words.iter().filter(|w| w["word"] == "abc").collect();
    assert_eq!(fagnano.len(), 2, "two strips");
    assert!(
        fagnano
            .iter()
            .all(|w| w["hits"] == 6 && w["squared_orbit_length"]["exact"] == "36")
    );
    assert_eq!(
        found["by_length"][2]["classes"],
        words
            .iter()
            .filter(|w| w["length"] == 3)
            .map(|w| w["word"].to_string())
            .collect::<std::collections::BTreeSet<_>>()
            .len()
    );
    let square = json(&[
        "periodic",
        &polygon("square"),
        "--length",
        "4",
        "--format",
        "json",
    ]);
    assert_eq!(square["complete"], true);
}

/// Statistics of a table that floating point cannot square.
#[test]
fn statistics_of_a_huge_table_are_finite() {
    let place = place();
    let table = "corners = [[\"0\", \"0\"], [\"10^200\", \"0\"], [\"10^200\", \"10^-50\"], [\"0\", \"10^-50\"]]\n";
    std::fs::write(place.path().join("thin.toml"), table).expect("written");
    let arguments = [
        "orbits",
        "thin.toml",
        "--count",
        "200",
        "--hits",
        "20",
        "--statistics",
        "s.csv",
        "--quiet",
    ];
    let output = run_in(&place, &arguments);
    assert_eq!(output.status.code(), Some(0), "{}", text(&output.stderr));
    let (header, all) =
        rows(&std::fs::read_to_string(place.path().join("s.csv")).expect("written"));
    let chord = &all[0];
    assert_eq!(chord[0], "mean chord");
    // π·area/perimeter = π/2·10⁻⁵⁰.
    for name in ["exact", "observed"] {
        let value: f64 = column(&header, chord, name).parse().expect("a number");
        assert!(
            (0.5..2.0).contains(&(value * 1e50 / std::f64::consts::FRAC_PI_2)),
            "{name}: {value}"
        );
    }
    // A block that few orbits could show has no standard error, and no score.
    for row in &all {
        let z = column(&header, row, "z");
        assert!(
            z.is_empty() || z.parse::<f64>().is_ok_and(|z| z.abs() < 8.0),
            "{row:?}"
        );
    }
    assert!(!column(&header, chord, "z").is_empty());
}
