//! The SVG text of pictures: well formed, deterministic, escaped, finite, and total on degenerate input.

use proptest::prelude::*;
use quick_xml::Reader;
use quick_xml::events::Event;
use reboundary::figure::{
    Caption, CellShape, Cells, Chart, Corridor, FigureError, GraphDrawing, HoleShape, Mark, Scale,
    Series, TableShape, cells_picture, circle_layout, corridor_picture, draw_chart, graph_picture,
    orbit_picture, table_picture,
};

/// What a reader finds in a picture.
#[derive(Debug, Default)]
struct Seen {
    elements: Vec<String>,
    texts: Vec<String>,
    attributes: Vec<(String, String)>,
}

/// Reads the whole document; fails on anything that is not well formed.
fn read(svg: &str) -> Seen {
    let mut reader = Reader::from_str(svg);
    reader.config_mut().check_end_names = true;
    let mut seen = Seen::default();
    let (mut depth, mut text) = (0usize, String::new());
    loop {
        match reader.read_event().expect("well-formed XML") {
            Event::Start(tag) => {
                depth += 1;
                note_tag(&mut seen, &tag);
                text.clear();
            }
            Event::Empty(tag) => note_tag(&mut seen, &tag),
            Event::End(_) => {
                depth -= 1;
                if !text.trim().is_empty() {
                    seen.texts.push(text.trim().to_owned());
                }
                text.clear();
            }
            Event::Text(piece) => text += &*piece,
            Event::GeneralRef(name) => {
                let entity = format!("&{};", &*name);
                text += &quick_xml::escape::unescape(&entity).expect("a known entity");
            }
            Event::Eof => break,
            other => panic!("unexpected {other:?}"),
        }
    }
    assert_eq!(depth, 0, "every element is closed");
    let allowed = |c: char| matches!(c, '\t' | '\n' | '\r' | ' '..='\u{d7ff}' | '\u{e000}'..='\u{fffd}' | '\u{10000}'..);
    assert!(
        svg.chars().all(allowed),
        "only characters that XML 1.0 permits"
    );
    seen
}

fn note_tag(seen: &mut Seen, tag: &quick_xml::events::BytesStart) {
    seen.elements.push(tag.name().as_ref().to_owned());
    for attribute in tag.attributes() {
        let attribute = attribute.expect("a good attribute");
        let key = attribute.key.as_ref().to_owned();
        let value = attribute.value.to_string();
        seen.attributes.push((
            key,
            quick_xml::escape::unescape(&value)
                .expect("escaped")
                .into_owned(),
        ));
    }
}

/// Everything that must hold for every picture.
fn check(svg: &str) -> Seen {
    let seen = read(svg);
    assert_eq!(
        seen.elements[..2],
        ["svg", "title"],
        "the title comes first"
    );
    let has = |key: &str| {
        seen.attributes
            .iter()
            .find(|a| a.0 == key)
            .map(|a| a.1.as_str())
    };
    assert_eq!(has("role"), Some("img"));
    assert!(has("viewBox").is_some());
    assert_eq!(
        has("id"),
        None,
        "ids would clash between pictures on one page"
    );
    for (key, value) in &seen.attributes {
        if [
            "x",
            "y",
            "x1",
            "y1",
            "x2",
            "y2",
            "cx",
            "cy",
            "r",
            "points",
            "viewBox",
            "stroke-width",
            "font-size",
        ]
        .contains(&key.as_str())
        {
            for number in value.split([' ', ',']).filter(|n| !n.is_empty()) {
                let parsed: f64 = number
                    .parse()
                    .unwrap_or_else(|_| panic!("{key} has {number:?}"));
                assert!(
                    parsed.is_finite() && parsed.abs() <= 1e7,
                    "{key} has {number}"
                );
            }
        }
    }
    seen
}

fn caption() -> Caption {
    Caption::new("A picture", "What it shows.")
}

/// A text that needs care everywhere, and the same after drawing.
const NASTY: &str = "a<b>&\"c'</text>\u{1}";
const SHOWN: &str = "a<b>&\"c'</text>\u{fffd}";

fn nasty(n: usize) -> Vec<String> {
    vec![NASTY.to_owned(); n]
}

fn chart() -> Chart {
    Chart {
        x_label: NASTY.into(),
        y_label: NASTY.into(),
        series: vec![
            Series {
                name: NASTY.into(),
                points: vec![(0.0, 1.0), (2.0, 5.0)],
                ..Series::default()
            },
            Series {
                points: vec![(0.0, 2.0), (2.0, 3.0)],
                mark: Mark::Dashed,
                ..Series::default()
            },
        ],
        note: Some(NASTY.into()),
        ..Chart::default()
    }
}

fn table() -> TableShape {
    TableShape {
        corners: vec![[0.0, 0.0], [4.0, 0.0], [4.0, 3.0], [0.0, 3.0]],
        letters: nasty(4),
        holes: vec![HoleShape {
            corners: vec![[1.0, 1.0], [2.0, 1.0], [2.0, 2.0]],
            letters: nasty(3),
        }],
    }
}

fn corridor() -> Corridor {
    let square = |i: f64| vec![[i, 0.0], [i + 1.0, 0.0], [i + 1.0, 1.0], [i, 1.0]];
    Corridor {
        holes: Vec::new(),
        copies: vec![square(0.0), square(1.0)],
        gates: vec![([1.0, 0.0], [1.0, 1.0], NASTY.to_owned())],
        beam: vec![vec![[0.5, 0.2], [1.5, 0.1], [1.5, 0.9], [0.5, 0.8]]],
        pivots: vec![[1.0, 0.0]],
        line: Some(([0.5, 0.4], [1.5, 0.6])),
    }
}

fn cells() -> Cells {
    let outline = vec![[0.0, 0.0], [4.0, 0.0], [4.0, 2.0], [0.0, 2.0]];
    Cells {
        boundary_marks: vec![(1.0, NASTY.to_owned())],
        side_labels: vec![(2.0, NASTY.to_owned())],
        width: 4.0,
        cells: vec![CellShape {
            outline,
            word: NASTY.to_owned(),
            shade: 1,
        }],
        x_label: NASTY.to_owned(),
        y_label: NASTY.to_owned(),
    }
}

fn graph() -> GraphDrawing {
    GraphDrawing {
        nodes: vec![
            (NASTY.to_owned(), [0.0, 0.0], false),
            (NASTY.to_owned(), [1.0, 0.0], true),
        ],
        arcs: vec![(0, 1, NASTY.to_owned()), (0, 0, String::new())],
    }
}

/// One picture of each kind and how many of its texts are nasty.
fn gallery(caption: &Caption) -> Vec<(&'static str, Result<String, FigureError>, usize)> {
    vec![
        ("chart", draw_chart(&chart(), caption), 4),
        ("table", table_picture(&table(), caption), 7),
        (
            "orbit",
            orbit_picture(&table(), &[[1.0, 0.0], [4.0, 2.0]], caption),
            7,
        ),
        ("corridor", corridor_picture(&corridor(), caption), 1),
        ("cells", cells_picture(&cells(), caption), 5),
        ("graph", graph_picture(&graph(), caption), 3),
    ]
}

#[test]
fn every_text_is_escaped_and_comes_back() {
    for (name, picture, expected) in gallery(&Caption::new(NASTY, NASTY)) {
        let seen = check(&picture.expect("a picture"));
        let count = seen.texts.iter().filter(|t| *t == SHOWN).count();
        // Title and description come on top.
        assert_eq!(count, expected + 2, "{name}: {:?}", seen.texts);
    }
}

#[test]
fn same_input_gives_the_same_bytes() {
    let draw = || {
        gallery(&caption())
            .into_iter()
            .map(|p| p.1.expect("a picture"))
            .collect::<Vec<_>>()
    };
    let first = draw();
    let elsewhere = std::thread::spawn(move || {
        gallery(&caption())
            .into_iter()
            .map(|p| p.1)
            .collect::<Vec<_>>()
    });
    for (i, other) in elsewhere.join().expect("no panic").into_iter().enumerate() {
        assert_eq!(Ok(&first[i]), other.as_ref());
    }
    assert_eq!(first, draw());
}

#[test]
fn caption_without_description_has_no_desc() {
    let svg = draw_chart(&Chart::default(), &Caption::new("t", "")).expect("an empty chart");
    assert!(!check(&svg).elements.contains(&"desc".to_owned()));
    assert!(
        read(&gallery(&caption())[0].1.clone().expect("a chart"))
            .elements
            .contains(&"desc".to_owned())
    );
}

#[test]
fn empty_pictures_are_drawn() {
    check(&draw_chart(&Chart::default(), &caption()).expect("chart"));
    check(&table_picture(&TableShape::default(), &caption()).expect("table"));
    check(&orbit_picture(&TableShape::default(), &[], &caption()).expect("orbit"));
    check(&corridor_picture(&Corridor::default(), &caption()).expect("corridor"));
    check(
        &cells_picture(
            &Cells {
                width: 1.0,
                ..Cells::default()
            },
            &caption(),
        )
        .expect("cells"),
    );
    check(&graph_picture(&GraphDrawing::default(), &caption()).expect("graph"));
    assert!(circle_layout(0).is_empty());
}

#[test]
fn flat_and_tiny_and_huge_shapes_are_drawn() {
    for size in [0.0, 1e-300, 1e-12, 1.0, 1e12, 9e149] {
        for corners in [
            vec![[size, size]; 4],
            vec![[0.0, 0.0], [size, 0.0]],
            vec![[0.0, 0.0], [0.0, size], [size, -size]],
        ] {
            let letters = vec!["a".to_owned(); corners.len()];
            let table = TableShape {
                corners: corners.clone(),
                letters,
                holes: Vec::new(),
            };
            check(&table_picture(&table, &caption()).expect("table"));
            check(&orbit_picture(&table, &corners, &caption()).expect("orbit"));
            let gates = vec![(corners[0], corners[1], "a".to_owned()); 3];
            let copies = vec![corners.clone(), corners.clone()];
            let line = Some((corners[0], corners[1]));
            let corridor = Corridor {
                copies,
                holes: Vec::new(),
                gates,
                beam: vec![corners.clone()],
                pivots: corners.clone(),
                line,
            };
            check(&corridor_picture(&corridor, &caption()).expect("corridor"));
            let nodes = corners
                .iter()
                .map(|&p| ("n".to_owned(), p, false))
                .collect();
            let arcs = vec![(0, 1, "x".to_owned()), (1, 1, "y".to_owned())];
            check(&graph_picture(&GraphDrawing { nodes, arcs }, &caption()).expect("graph"));
            let cell = CellShape {
                outline: corners.clone(),
                word: "w".into(),
                shade: 99,
            };
            let cells = Cells {
                width: size.max(1e-300),
                cells: vec![cell],
                ..Cells::default()
            };
            check(&cells_picture(&cells, &caption()).expect("cells"));
        }
    }
}

#[test]
fn bad_input_is_named() {
    let mut bad = table();
    bad.corners[1][0] = f64::NAN;
    assert!(matches!(
        table_picture(&bad, &caption()),
        Err(FigureError::BadCoordinate { .. })
    ));
    let mut short = table();
    short.letters.pop();
    let mismatch = FigureError::LengthMismatch {
        what: "letters of the sides",
        expected: 4,
        found: 3,
    };
    assert_eq!(table_picture(&short, &caption()), Err(mismatch));
    assert!(matches!(
        orbit_picture(&table(), &[[f64::INFINITY, 0.0]], &caption()),
        Err(FigureError::BadCoordinate { .. })
    ));
    let mut lost = graph();
    lost.arcs[1].1 = 7;
    assert_eq!(
        graph_picture(&lost, &caption()),
        Err(FigureError::NoSuchNode {
            arc: 1,
            node: 7,
            nodes: 2
        })
    );
    for width in [0.0, -1.0, f64::NAN, f64::INFINITY] {
        assert!(matches!(
            cells_picture(&Cells { width, ..cells() }, &caption()),
            Err(FigureError::BadWidth { .. })
        ));
    }
    for (range, scale) in [
        ((1.0, 1.0), Scale::Linear),
        ((2.0, 1.0), Scale::Linear),
        ((0.0, 1.0), Scale::Log),
        ((f64::NAN, 1.0), Scale::Linear),
    ] {
        let chart = Chart {
            y_range: Some(range),
            y_scale: scale,
            ..chart()
        };
        assert!(
            matches!(
                draw_chart(&chart, &caption()),
                Err(FigureError::BadRange { .. })
            ),
            "{range:?}"
        );
    }
}

/// A zero on a logarithmic axis is left out, interrupts the line, and the picture says so.
#[test]
fn zeros_on_logarithmic_axes_are_left_out_and_counted() {
    let points = vec![(1.0, 1.0), (2.0, 2.0), (3.0, 0.0), (4.0, 4.0), (5.0, 5.0)];
    let series = vec![Series {
        points,
        ..Series::default()
    }];
    let logarithmic = Chart {
        series,
        y_scale: Scale::Log,
        ..Chart::default()
    };
    let seen = check(&draw_chart(&logarithmic, &caption()).expect("a chart"));
    assert!(
        seen.texts
            .iter()
            .any(|t| t.starts_with("1 point has no place")),
        "{:?}",
        seen.texts
    );
    let curves = |chart: &Chart| {
        let svg = draw_chart(chart, &caption()).expect("a chart");
        svg.lines()
            .filter(|l| l.contains("stroke-width=\"35\""))
            .count()
    };
    assert_eq!(curves(&logarithmic), 2);
    assert_eq!(
        curves(&Chart {
            y_scale: Scale::Linear,
            ..logarithmic
        }),
        1
    );
}

/// A number of any size, special values included.
fn any_value() -> impl Strategy<Value = f64> {
    prop_oneof![
        any::<f64>(),
        -10.0..10.0f64,
        Just(0.0),
        Just(f64::NAN),
        Just(f64::INFINITY),
        Just(f64::MIN_POSITIVE / 4.0),
        Just(f64::MAX),
    ]
}

fn any_scale() -> impl Strategy<Value = Scale> {
    prop_oneof![Just(Scale::Linear), Just(Scale::Log)]
}

fn any_mark() -> impl Strategy<Value = Mark> {
    prop_oneof![
        Just(Mark::Line),
        Just(Mark::Dots),
        Just(Mark::LineDots),
        Just(Mark::Dashed),
        Just(Mark::Dotted),
        Just(Mark::Band)
    ]
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(200))]

    #[test]
    fn any_chart_is_drawn(
        data in prop::collection::vec((prop::collection::vec((any_value(), any_value()), 0..12), any_mark(), ".{0,12}"), 0..5),
        scales in (any_scale(), any_scale()),
    ) {
        let series = data.into_iter().map(|(points, mark, name)| Series { name, points, mark, ink: None }).collect();
        let chart = Chart { series, x_scale: scales.0, y_scale: scales.1, ..Chart::default() };
        check(&draw_chart(&chart, &caption()).expect("a chart"));
    }

    #[test]
    fn any_polygon_is_drawn(corners in prop::collection::vec(prop::array::uniform2(-1e3..1e3f64), 0..9), text in ".{0,8}") {
        let letters = vec![text; corners.len()];
        let table = TableShape { corners: corners.clone(), letters, holes: Vec::new() };
        check(&table_picture(&table, &caption()).expect("a table"));
        let cell = CellShape { outline: corners, word: "word".into(), shade: 0 };
        check(&cells_picture(&Cells { width: 100.0, cells: vec![cell], ..Cells::default() }, &caption()).expect("cells"));
    }
}
