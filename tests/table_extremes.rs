//! Tables of extreme size: readable decimals, and a study with its pictures.

mod program;

use program::{done, entries, place, run_in, text};

fn triangle(unit: &str) -> String {
    format!(
        "title = \"Sail\"\ncorners = [[\"0\",\"0\"], [\"{unit}\",\"0\"], [\"0\",\"{unit}*sqrt(2)\"]]\n"
    )
}

#[test]
fn lengths_have_digits_at_every_size() {
    let place = place();
    let file = place.path().join("sail.toml").display().to_string();
    for (unit, side, area) in [
        (
            "1e-300",
            "1.73205080756887729353e-300",
            "7.07106781186547524401e-601",
        ),
        ("1", "1.73205080756887729353", "0.70710678118654752440"),
        (
            "1e300",
            "1.73205080756887729353e300",
            "7.07106781186547524401e599",
        ),
    ] {
        std::fs::write(&file, triangle(unit)).expect("written");
        let told = text(&run_in(&place, &["table", &file]).stdout);
        // √3 and 1/√2 to 20 places: OEIS A002194 and A010503.
        assert!(told.contains(&format!("length {side}\n")), "{told}");
        assert!(
            told.contains(&format!("area             {area}\n")),
            "{told}"
        );
    }
}

/// The shape decides the words, and its pictures are the same up to their size: those of extreme tables are one picture.
#[test]
fn a_study_draws_tables_of_every_size() {
    let drawn = |unit: &str, name: &str| {
        let place = place();
        let file = place.path().join("sail.toml");
        std::fs::write(&file, triangle(unit)).expect("written");
        let output = run_in(
            &place,
            &["study", "sail.toml", "--length", "8", "--out", "study"],
        );
        assert_eq!(output.status.code(), Some(0), "{}", text(&output.stderr));
        let svg = std::fs::read_to_string(place.path().join("study").join(name)).expect("drawn");
        assert!(!svg.contains("NaN") && !svg.contains("inf"), "{svg}");
        svg
    };
    for name in ["table.svg", "corridor.svg", "cells.svg"] {
        // Powers of two, so that the drawn tables are equal.
        let small = drawn("2^-1000*2^-1000", name);
        assert_eq!(small, drawn("2^1000*2^1000", name), "{name}");
        assert_eq!(small, drawn("2^-30", name), "{name}");
        drawn("1e-300", name);
        drawn("1e300", name);
    }
}

#[test]
fn a_square_far_from_the_origin_is_drawn() {
    let place = place();
    let at = |x: &str, y: &str| format!("[\"1e200+{x}\",\"{y}-1e200\"]");
    let corners = [at("0", "0"), at("1", "0"), at("1", "1"), at("0", "1")].join(",");
    std::fs::write(
        place.path().join("far.toml"),
        format!("corners = [{corners}]"),
    )
    .expect("written");
    let output = run_in(
        &place,
        &["study", "far.toml", "--length", "6", "--out", "study"],
    );
    assert_eq!(output.status.code(), Some(0), "{}", text(&output.stderr));
    assert!(entries(place.path()).len() > 8);
    let shown = done(&[
        "table",
        &place.path().join("far.toml").display().to_string(),
    ]);
    assert!(shown.contains(" = 1.00000000000000000000e200\n"), "{shown}");
}
