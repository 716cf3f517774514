//! Tests of the layout of text in all pictures, and of shades.

use super::canvas::Canvas;
use super::chart::{Layout, compose};
use super::geometry::{Point, Rect, distance_to_segment, edges, inside, rect_inside};
use super::style::TINTS;
use super::{
    CellShape, Cells, Chart, Corridor, GraphDrawing, HoleShape, Mark, Scale, Series, TableShape,
    cells::{compose_cells, pixel},
    circle_layout,
    corridor::compose_corridor,
    graph::compose_graph,
    plane::compose_orbit,
    plane::compose_table,
    shade_apart,
};

mod colours;
mod measures;
mod trees;

/// No text runs into other text or leaves the canvas.
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
    let far = (0..46)
        .map(|i| (1e6 + f64::from(i), f64::from(i)))
        .collect();
    let series = vec![Series {
        points: far,
        ..Series::default()
    }];
    text_of_chart_is_free(
        "long numbers",
        &Chart {
            series,
            ..labelled.clone()
        },
    );
    for size in [1e-290, 1e-4, 123.0, 12345678.0, 1e290] {
        let points = (0..50)
            .map(|i| (f64::from(i) * size, f64::from(i)))
            .collect();
        let series = vec![Series {
            points,
            ..Series::default()
        }];
        text_of_chart_is_free(
            "wide numbers",
            &Chart {
                series,
                ..labelled.clone()
            },
        );
    }
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
    let notched = |right: f64| {
        let left = 4.2;
        let floor = [[0.0, 0.0], [6.0, 0.0], [6.0, 3.0], [right, 3.0]];
        let rest = [[right, 0.8], [left, 0.8], [left, 3.0], [0.0, 3.0]];
        [floor, rest].concat()
    };
    let comb = notched(4.8);
    let mut clockwise = comb.clone();
    clockwise.reverse();
    let tables = [
        (
            "square",
            lettered(&[[0.0, 0.0], [1.0, 0.0], [1.0, 1.0], [0.0, 1.0]]),
        ),
        ("comb", lettered(&comb)),
        ("clockwise comb", lettered(&clockwise)),
        // The letters do not fit into the notch and may stand inside.
        ("narrow comb", lettered(&notched(4.3))),
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
        if table.holes.is_empty() && name != "narrow comb" {
            letters_are_outside(name, &table, &canvas);
        }
        let hits = [[0.5, 0.0], [1.0, 0.7], [0.2, 1.0], [0.0, 0.3]];
        let (canvas, size) = compose_orbit(&table, &hits).expect("a good orbit");
        assert_text_is_free(name, &canvas, size);
    }
}

/// The corner dots tell where the outline is.
fn letters_are_outside(name: &str, table: &TableShape, canvas: &Canvas) {
    let outline = canvas.disc_centres();
    assert_eq!(outline.len(), table.corners.len());
    let sides: Vec<(Point, Point)> = edges(&outline).collect();
    for (i, letter) in table.letters.iter().enumerate() {
        let found = canvas
            .text_boxes()
            .into_iter()
            .find(|(text, _)| text == letter);
        let (_, rect) = found.expect("the letter is drawn");
        assert!(
            !inside(&outline, rect.centre()),
            "{name}: {letter} is inside"
        );
        let (a, b) = sides[i];
        let far = distance_to_segment(rect.centre(), a, b);
        assert!(far < 60.0, "{name}: {letter} is {far} from its side");
    }
}

/// A strip of unit squares crossed lengthwise.
fn strip(count: usize) -> Corridor {
    let square = |i: f64| vec![[i, 0.0], [i + 1.0, 0.0], [i + 1.0, 1.0], [i, 1.0]];
    let gate = |i: f64| ([i, 0.0], [i, 1.0], "d".to_owned());
    let end = count as f64;
    Corridor {
        holes: Vec::new(),
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

/// Gates that are crossed close together still get a letter each, in the order of crossing.
#[test]
fn letters_of_crowded_gates_keep_their_order() {
    let mut corridor = strip(30);
    let names = "abcdefghijklmnopqrstuvwxy";
    corridor.gates = names
        .chars()
        .enumerate()
        .map(|(i, c)| (20.0 + 0.05 * i as f64, c))
        .map(|(x, c)| ([x, 0.0], [x, 1.0], c.to_string()))
        .collect();
    let (canvas, size) = compose_corridor(&corridor).expect("a good corridor");
    assert_text_is_free("crowded", &canvas, size);
    let mut boxes = canvas.text_boxes();
    boxes.sort_by(|a, b| a.1.x0.total_cmp(&b.1.x0));
    assert_eq!(boxes.into_iter().map(|b| b.0).collect::<String>(), names);
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
        let (x, y) = (f64::from(i), f64::from(j) * 0.25);
        let outline = vec![
            [x, y],
            [x + 1.0, y + 0.2],
            [x + 1.0, y + 0.45],
            [x, y + 0.25],
        ];
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
            .flat_map(|i| (0..11).map(move |j| cell(i, j)))
            .collect(),
        x_label: "position".into(),
        y_label: "direction".into(),
    };
    let (canvas, size) = compose_cells(&cells).expect("good cells");
    assert_text_is_free("cells", &canvas, size);
    let outlines: Vec<Vec<Point>> = cells
        .cells
        .iter()
        .map(|cell| {
            cell.outline
                .iter()
                .map(|p| pixel(&cells, p[0], p[1]))
                .collect()
        })
        .collect();
    let boxes = canvas.text_boxes();
    let words: Vec<_> = boxes
        .iter()
        .filter(|b| "abcdabcd".starts_with(&b.0))
        .collect();
    assert!(
        words.len() < 60,
        "long words do not fit, but {} are written",
        words.len()
    );
    assert!(
        words.len() > 20,
        "most words fit, but only {} are written",
        words.len()
    );
    for (word, rect) in words {
        let low = Rect {
            y0: rect.y0 + 3.0,
            y1: rect.y1 - 3.0,
            ..*rect
        };
        let home = outlines
            .iter()
            .position(|outline| rect_inside(outline, &low));
        let home = home.unwrap_or_else(|| panic!("{word} crosses a border"));
        assert_eq!(&cells.cells[home].word, word);
    }
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
