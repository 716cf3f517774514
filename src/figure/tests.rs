//! Tests of the parts behind the pictures, and of the layout of text.

use super::canvas::Canvas;
use super::chart::{Layout, compose};
use super::geometry::{
    Point, Rect, dashes, distance_to_segment, length, rect_inside, simplified, spread, sub,
};
use super::scale::Axis;
use super::style::TINTS;
use super::{
    CellShape, Cells, Chart, Corridor, GraphDrawing, HoleShape, Mark, Scale, Series, TableShape,
    cells::compose_cells, circle_layout, corridor::compose_corridor, font, graph::compose_graph,
    plane::compose_orbit, plane::compose_table, shade_apart,
};
use proptest::prelude::*;

mod colours;

// ---- text and geometry ----

/// The advance of `n` in DejaVu Sans is 1298 of 2048 units (read from the font's `hmtx` table).
#[test]
fn text_width_is_that_of_the_font() {
    let expected = 10.0 * 1298.0 / 2048.0 * 20.0;
    let width = font::text_width("nnnnnnnnnn", 20.0);
    assert!((width - expected).abs() < 0.1, "{width} against {expected}");
}

/// A covered character that the font lacks would get the width of `.notdef`, 1229 of 2048 units.
#[test]
fn characters_that_pictures_use_are_in_the_font() {
    assert_eq!(
        font::text_width("\u{e000}", 20.0),
        20.0,
        "uncovered characters count one em"
    );
    for c in "0123456789−·×≤≥πφ∞√→₁₂₃⁰¹²³⁴⁵⁶⁷⁸⁹⁻абяλθäß…".chars()
    {
        let units = font::text_width(&c.to_string(), 2048.0);
        assert!(
            units > 300.0 && units <= 2049.0 && (units - 1229.0).abs() > 1.0,
            "{c} is {units} wide"
        );
    }
}

#[test]
fn shortened_text_fits() {
    for limit in [5.0, 40.0, 100.0, 1000.0] {
        let cut = font::shorten("the courtyards of Marrowquay", 20.0, limit);
        assert!(cut == "…" || font::text_width(&cut, 20.0) <= limit);
    }
    for line in font::wrap(
        "the courtyards of Marrowquay behind the Lantern Steps",
        20.0,
        150.0,
    ) {
        assert!(font::text_width(&line, 20.0) <= 150.0);
    }
}

#[test]
fn dashes_alternate_and_keep_their_lengths() {
    let line = [[0.0, 0.0], [10.0, 0.0], [10.0, 15.0]];
    let cut = dashes(&line, &[4.0, 2.0]);
    let total: f64 = cut
        .iter()
        .flat_map(|d| d.windows(2))
        .map(|w| length(sub(w[1], w[0])))
        .sum();
    // 25 = 4 periods of 6, then 1 more of a dash.
    assert!((total - 17.0).abs() < 1e-9, "{total}");
    assert_eq!(cut.len(), 5);
}

#[test]
fn rectangles_inside_a_notch_are_refused() {
    let notch = [
        [0.0, 0.0],
        [10.0, 0.0],
        [10.0, 10.0],
        [5.0, 1.0],
        [0.0, 10.0],
    ];
    // All four corners are inside, the notch reaches into the rectangle.
    let rect = Rect {
        x0: 2.9,
        y0: 0.5,
        x1: 7.1,
        y1: 4.0,
    };
    assert!(!rect_inside(&notch, &rect));
    assert!(rect_inside(
        &notch,
        &Rect {
            x0: 1.0,
            y0: 0.2,
            x1: 9.0,
            y1: 0.8
        }
    ));
}

proptest! {
    #[test]
    fn spread_keeps_order_gap_and_range(mut wishes in prop::collection::vec(-50.0..450.0f64, 0..12)) {
        wishes.sort_by(f64::total_cmp);
        let places = spread(&wishes, 20.0, 0.0, 400.0);
        prop_assert_eq!(places.len(), wishes.len());
        for pair in places.windows(2) {
            prop_assert!(pair[1] - pair[0] >= 20.0 - 1e-9);
        }
        prop_assert!(places.iter().all(|&p| (-1e-9..=400.0 + 1e-9).contains(&p)));
    }

    #[test]
    fn simplified_lines_stay_near(points in prop::collection::vec(prop::array::uniform2(0.0..100.0f64), 1..40)) {
        let kept = simplified(&points, 5.0);
        prop_assert_eq!(kept.first(), points.first());
        prop_assert_eq!(kept.last(), points.last());
        for &p in &points {
            let near = kept.windows(2).map(|w| distance_to_segment(p, w[0], w[1])).fold(f64::INFINITY, f64::min);
            prop_assert!(kept.len() < 2 || near <= 5.0 + 1e-9);
        }
    }

    #[test]
    fn clipped_segments_lie_in_the_rectangle(a in prop::array::uniform2(-9.0..9.0f64), b in prop::array::uniform2(-9.0..9.0f64)) {
        let rect = Rect { x0: -2.0, y0: -3.0, x1: 4.0, y1: 1.0 };
        let sampled = (0..=1000).any(|i| {
            let t = f64::from(i) / 1000.0;
            rect.contains([a[0] + t * (b[0] - a[0]), a[1] + t * (b[1] - a[1])])
        });
        match rect.clip_segment(a, b) {
            Some((p, q)) => for r in [p, q] {
                prop_assert!(rect.grown(1e-9).contains(r));
                prop_assert!(distance_to_segment(r, a, b) < 1e-9);
            },
            None => prop_assert!(!sampled),
        }
    }

    #[test]
    fn ticks_lie_in_range_and_differ(low in -1e6..1e6f64, size in -6.0..12.0f64, most in 2usize..10) {
        let high = low + 10f64.powf(size);
        let axis = Axis::holding(Scale::Linear, [low, high].into_iter());
        let ticks = axis.ticks(most);
        prop_assert!(ticks.len() >= 2 && ticks.len() <= most.max(4) + 1, "{} ticks", ticks.len());
        for pair in ticks.windows(2) {
            prop_assert!(pair[0].value < pair[1].value);
            prop_assert!(pair[0].label != pair[1].label, "{}", pair[0].label);
        }
        let slack = 1e-6 * (axis.high - axis.low);
        prop_assert!(ticks.iter().all(|t| t.value >= axis.low - slack && t.value <= axis.high + slack));
    }

    #[test]
    fn logarithmic_ticks_lie_in_range_and_differ(low in -300.0..299.0f64, decades in 0.0..400.0f64, most in 2usize..10) {
        let high = (low + decades).min(299.5);
        let axis = Axis::holding(Scale::Log, [10f64.powf(low), 10f64.powf(high)].into_iter());
        let ticks = axis.ticks(most);
        prop_assert!(!ticks.is_empty() && ticks.len() <= 3 * most, "{} ticks", ticks.len());
        for pair in ticks.windows(2) {
            prop_assert!(pair[0].value < pair[1].value);
            prop_assert!(pair[0].label != pair[1].label, "{}", pair[0].label);
        }
    }
}

fn labels(axis: &Axis, most: usize) -> Vec<String> {
    axis.ticks(most).into_iter().map(|t| t.label).collect()
}

#[test]
fn tick_labels_read_well() {
    let axis = |scale, low: f64, high: f64| Axis::holding(scale, [low, high].into_iter());
    let share = Axis::holding(Scale::Linear, [0.0, 0.5, 1.0].into_iter());
    assert_eq!(
        labels(&axis(Scale::Log, 1.0, 1e4), 7),
        ["1", "10", "100", "10³", "10⁴"]
    );
    assert_eq!(
        labels(&axis(Scale::Log, 1e-4, 1.0), 7),
        ["10⁻⁴", "10⁻³", "0.01", "0.1", "1"]
    );
    assert_eq!(
        labels(&axis(Scale::Log, 1.0, 100.0), 9),
        ["1", "2", "5", "10", "20", "50", "100"]
    );
    assert_eq!(labels(&share, 5), ["0", "0.2", "0.4", "0.6", "0.8", "1.0"]);
    assert_eq!(labels(&axis(Scale::Linear, -1.0, 1.0), 2), ["−1", "0", "1"]);
    assert_eq!(
        labels(&axis(Scale::Linear, 0.0, 3e6), 3),
        ["0", "1·10⁶", "2·10⁶", "3·10⁶"]
    );
    assert_eq!(
        labels(&axis(Scale::Linear, 1.0, 3.0), 9),
        ["1", "2", "3"],
        "no half word lengths"
    );
}

// ---- layout: no text runs into other text or leaves the canvas ----

fn assert_text_is_free(name: &str, canvas: &Canvas, size: Point) {
    let boxes = canvas.text_boxes();
    assert!(!boxes.is_empty(), "{name} has no text");
    let whole = Rect {
        x0: 0.0,
        y0: 0.0,
        x1: size[0],
        y1: size[1],
    };
    for (i, (text, rect)) in boxes.iter().enumerate() {
        assert!(
            whole.contains_rect(rect),
            "{name}: {text:?} leaves the canvas: {rect:?} in {size:?}"
        );
        for (other, second) in &boxes[..i] {
            // Boxes are as high as the em; letters are lower, so the rims may touch.
            let shrunk = Rect {
                y0: rect.y0 + 2.0,
                y1: rect.y1 - 2.0,
                ..*rect
            };
            assert!(
                shrunk.overlap_area(second) < 1.0,
                "{name}: {text:?} runs into {other:?}"
            );
        }
    }
}

fn text_of_chart_is_free(name: &str, chart: &Chart) {
    let layout = Layout::new(chart).expect("the range is good");
    let mut canvas = Canvas::default();
    let height = compose(chart, &layout, &mut canvas);
    assert_text_is_free(name, &canvas, [super::style::WIDTH, height]);
}

fn curve(name: &str, mark: Mark, f: impl Fn(f64) -> f64) -> Series {
    let points = (1..=60).map(f64::from).map(|n| (n, f(n))).collect();
    Series {
        name: name.to_owned(),
        points,
        mark,
        ink: None,
    }
}

#[test]
fn text_of_charts_is_free() {
    let labelled = Chart {
        x_label: "word length n".into(),
        y_label: "p(n)".into(),
        ..Chart::default()
    };
    let together = (1..=6).flat_map(|r| {
        let share = move |n: f64| 1.0 - f64::from(r) / (n + 20.0);
        [
            curve(&format!("r = {r}"), Mark::LineDots, share),
            curve("bound", Mark::Dashed, move |n| share(n) - 1e-3),
        ]
    });
    let shares = Chart {
        series: together.collect(),
        y_range: Some((0.0, 1.0)),
        ..labelled.clone()
    };
    text_of_chart_is_free("shares", &shares);
    let long = |i: u32| format!("a courtyard of Marrowquay with a very long name, number {i}");
    let wordy = (0..14).map(|i| curve(&long(i), Mark::Line, move |n| n.powi(3) * f64::from(i)));
    let note = Some("A remark that needs more than one line. ".repeat(5));
    let log = Chart {
        series: wordy.collect(),
        note,
        y_scale: Scale::Log,
        x_scale: Scale::Log,
        ..labelled.clone()
    };
    text_of_chart_is_free("wordy", &log);
    for scale in [Scale::Linear, Scale::Log] {
        for size in [1e-290, 1e-7, 1e-3, 1.0, 12345.0, 1e9, 1e290] {
            let series = vec![curve("p", Mark::Line, |n| n * size)];
            text_of_chart_is_free(
                "sizes",
                &Chart {
                    y_scale: scale,
                    series,
                    ..labelled.clone()
                },
            );
        }
    }
    text_of_chart_is_free("empty", &labelled);
}

fn lettered(corners: &[Point]) -> TableShape {
    let letters = (0..corners.len()).map(|i| format!("s{i}")).collect();
    TableShape {
        corners: corners.to_vec(),
        letters,
        holes: Vec::new(),
    }
}

#[test]
fn text_of_tables_is_free() {
    let mut holed = lettered(&[[0.0, 0.0], [5.0, 0.0], [5.0, 3.0], [0.0, 3.0]]);
    let corners = vec![[1.0, 1.0], [1.5, 2.2], [2.4, 1.2]];
    holed.holes.push(HoleShape {
        corners,
        letters: vec!["x".into(), "y".into(), "z".into()],
    });
    let comb = [
        [0.0, 0.0],
        [6.0, 0.0],
        [6.0, 3.0],
        [4.4, 3.0],
        [4.4, 0.8],
        [4.2, 0.8],
        [4.2, 3.0],
        [0.0, 3.0],
    ];
    let mut clockwise = comb;
    clockwise.reverse();
    let tables = [
        (
            "square",
            lettered(&[[0.0, 0.0], [1.0, 0.0], [1.0, 1.0], [0.0, 1.0]]),
        ),
        ("comb", lettered(&comb)),
        ("clockwise comb", lettered(&clockwise)),
        ("sliver", lettered(&[[0.0, 0.0], [10.0, 0.0], [9.0, 0.1]])),
        ("hole", holed),
        ("twelve sides", lettered(&circle_layout(12))),
    ];
    for (name, table) in tables {
        let (canvas, size) = compose_table(&table).expect("a good table");
        assert_text_is_free(name, &canvas, size);
        let sides =
            table.letters.len() + table.holes.iter().map(|h| h.letters.len()).sum::<usize>();
        assert_eq!(
            canvas.text_boxes().len(),
            2 * sides,
            "{name}: a letter and a number for each side"
        );
        let hits = [[0.5, 0.0], [1.0, 0.7], [0.2, 1.0], [0.0, 0.3]];
        let (canvas, size) = compose_orbit(&table, &hits).expect("a good orbit");
        assert_text_is_free(name, &canvas, size);
    }
}

/// A strip of unit squares crossed lengthwise.
fn strip(count: usize) -> Corridor {
    let square = |i: f64| vec![[i, 0.0], [i + 1.0, 0.0], [i + 1.0, 1.0], [i, 1.0]];
    let gate = |i: f64| ([i, 0.0], [i, 1.0], "d".to_owned());
    let end = count as f64;
    Corridor {
        copies: (0..count).map(|i| square(i as f64)).collect(),
        gates: (1..count).map(|i| gate(i as f64)).collect(),
        beam: vec![vec![
            [0.5, 0.2],
            [end - 0.5, 0.1],
            [end - 0.5, 0.9],
            [0.5, 0.8],
        ]],
        pivots: vec![[1.0, 0.0], [2.0, 1.0]],
        line: Some(([0.5, 0.4], [end - 0.5, 0.6])),
    }
}

#[test]
fn text_of_corridors_is_free() {
    for count in [2, 3, 7, 16, 30, 45, 100] {
        let (canvas, size) = compose_corridor(&strip(count)).expect("a good corridor");
        assert_text_is_free("corridor", &canvas, size);
        assert_eq!(
            canvas.text_boxes().len(),
            count - 1,
            "every gate has its letter"
        );
    }
}

/// A corridor that climbs steeply is laid down: the picture is wider than high.
#[test]
fn corridors_are_laid_down() {
    let mut standing = strip(12);
    let turn = |p: &mut Point| *p = [-p[1], p[0]];
    standing.copies.iter_mut().flatten().for_each(turn);
    standing.gates.iter_mut().for_each(|g| {
        turn(&mut g.0);
        turn(&mut g.1);
    });
    standing.beam.iter_mut().flatten().for_each(turn);
    standing.pivots.iter_mut().for_each(turn);
    standing.line = None;
    let (_, size) = compose_corridor(&standing).expect("a good corridor");
    assert!(size[0] > 2.0 * size[1], "{size:?}");
}

#[test]
fn text_of_cells_is_free_and_inside() {
    let cell = |i: u32, j: u32| {
        let (x, y) = (f64::from(i), f64::from(j) * 0.4);
        let outline = vec![[x, y], [x + 1.0, y + 0.2], [x + 1.0, y + 0.6], [x, y + 0.4]];
        CellShape {
            outline,
            word: "abcdabcd"[..(i + j) as usize % 8 + 1].to_owned(),
            shade: (i + j) as usize,
        }
    };
    let cells = Cells {
        boundary_marks: (0..=6).map(|i| (f64::from(i), i.to_string())).collect(),
        side_labels: (0..6)
            .map(|i| (f64::from(i) + 0.5, format!("side {i}")))
            .collect(),
        width: 6.0,
        cells: (0..6)
            .flat_map(|i| (0..7).map(move |j| cell(i, j)))
            .collect(),
        x_label: "position".into(),
        y_label: "direction".into(),
    };
    let (canvas, size) = compose_cells(&cells).expect("good cells");
    assert_text_is_free("cells", &canvas, size);
}

#[test]
fn text_of_graphs_is_free() {
    for n in [1, 2, 5, 9] {
        let nodes = circle_layout(n)
            .into_iter()
            .enumerate()
            .map(|(i, p)| (format!("word{i}"), p, i == 0));
        let around = (0..n).map(|i| (i, (i + 1) % n, "a".to_owned()));
        let back = (0..n).map(|i| ((i + 1) % n, i, "b".to_owned()));
        let graph = GraphDrawing {
            nodes: nodes.collect(),
            arcs: around.chain(back).collect(),
        };
        let (canvas, size) = compose_graph(&graph).expect("a good graph");
        assert_text_is_free("graph", &canvas, size);
    }
}

/// Bricks in shifted rows: every brick has six neighbours, known from its place.
#[test]
fn neighbouring_cells_get_different_shades() {
    let brick = |i: u32, j: u32| {
        let (x, y) = (f64::from(i) + 0.5 * f64::from(j % 2), f64::from(j) * 0.4);
        CellShape {
            outline: vec![[x, y], [x + 1.0, y], [x + 1.0, y + 0.4], [x, y + 0.4]],
            ..CellShape::default()
        }
    };
    let places: Vec<(u32, u32)> = (0..7).flat_map(|j| (0..6).map(move |i| (i, j))).collect();
    let cells = places.iter().map(|&(i, j)| brick(i, j)).collect();
    let mut wall = Cells {
        width: 7.0,
        cells,
        ..Cells::default()
    };
    shade_apart(&mut wall);
    let mut borders = 0;
    for (a, &(i, j)) in places.iter().enumerate() {
        for (b, &(k, l)) in places.iter().enumerate() {
            let right = j == l && k == i + 1;
            let above = l == j + 1 && (k == i || k + 1 == i + 2 * (j % 2));
            if right || above {
                borders += 1;
                assert_ne!(
                    wall.cells[a].shade,
                    wall.cells[b].shade,
                    "{:?} {:?}",
                    (i, j),
                    (k, l)
                );
            }
        }
    }
    assert!(borders > 90, "{borders}");
    let mut counts = [0; TINTS.len()];
    wall.cells.iter().for_each(|cell| counts[cell.shade] += 1);
    assert!(counts.iter().all(|&count| count >= 3), "{counts:?}");
    shade_apart(&mut Cells {
        width: 1.0,
        ..Cells::default()
    });
}
