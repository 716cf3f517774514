//! Draws every kind of picture with made-up and with simply computed data.
//!
//! `cargo run --example figures -- DIRECTORY` writes the SVG files. The tables are the courtyards of
//! Marrowquay, an invented harbour town.

use reboundary::figure::{
    Caption, CellShape, Cells, Chart, Corridor, FigureError, GraphDrawing, HoleShape, Mark, Scale,
    Series, TableShape, cells_picture, circle_layout, corridor_picture, draw_chart, graph_picture,
    orbit_picture, shade_apart, table_picture,
};
use std::f64::consts::PI;
use std::path::PathBuf;

type P = [f64; 2];

fn main() -> Result<(), Box<dyn std::error::Error>> {
    let folder = PathBuf::from(
        std::env::args()
            .nth(1)
            .ok_or("name a directory for the pictures")?,
    );
    std::fs::create_dir_all(&folder)?;
    for (name, picture) in charts()
        .into_iter()
        .chain(tables())
        .chain(corridors())
        .chain(others())
    {
        std::fs::write(folder.join(format!("{name}.svg")), picture?)?;
    }
    Ok(())
}

type Named = (&'static str, Result<String, FigureError>);

fn caption(title: &str) -> Caption {
    Caption::new(title, "An example picture.")
}

fn series(name: &str, mark: Mark, ink: usize, points: Vec<(f64, f64)>) -> Series {
    Series {
        name: name.to_owned(),
        points,
        mark,
        ink: Some(ink),
    }
}

fn over(range: std::ops::RangeInclusive<u32>, f: impl Fn(f64) -> f64) -> Vec<(f64, f64)> {
    range.map(|n| (f64::from(n), f(f64::from(n)))).collect()
}

/// A cubic with a wobble, in place of a complexity.
fn invented_complexity(n: f64) -> f64 {
    (0.27 * n.powi(3) + 1.4 * n * n + 2.0 * n + 1.0 + 0.3 * (n * 1.7).sin()).round()
}

fn charts() -> Vec<Named> {
    let p = invented_complexity;
    let growth = Chart {
        x_label: "word length n".into(),
        y_label: "number of words p(n)".into(),
        x_scale: Scale::Log,
        y_scale: Scale::Log,
        series: vec![
            series("p(n)", Mark::LineDots, 0, over(1..=200, p)),
            series(
                "0.27·n³",
                Mark::Dashed,
                1,
                over(1..=200, |n| 0.27 * n.powi(3)),
            ),
            series(
                "4.7·n³",
                Mark::Dotted,
                2,
                over(1..=200, |n| 4.7 * n.powi(3)),
            ),
        ],
        note: Some("Exact up to n = 200; the bounds hold for every n.".into()),
        ..Chart::default()
    };
    let cubic = Chart {
        x_label: "word length n".into(),
        y_label: "p(n) / n³".into(),
        series: vec![series(
            "p(n)/n³",
            Mark::Dots,
            0,
            over(5..=60, |n| p(n) / n.powi(3)),
        )],
        ..Chart::default()
    };
    let ratio = Chart {
        x_label: "word length n".into(),
        y_label: "p(n+1)/p(n) − 1".into(),
        y_scale: Scale::Log,
        series: vec![
            series(
                "p(n+1)/p(n) − 1",
                Mark::Line,
                0,
                over(1..=120, |n| p(n + 1.0) / p(n) - 1.0),
            ),
            series("bound", Mark::Dashed, 1, over(1..=120, |n| 4.0 / n)),
        ],
        note: Some("A ratio that tends to 1 makes the factor graphs converge to the line.".into()),
        ..Chart::default()
    };
    let mut shares = Vec::new();
    for r in 1..=6u32 {
        let share = |n: f64| 1.0 - f64::from(r) * 2.1 / (n + 2.0 * f64::from(r));
        let name = format!("r = {r}");
        shares.push(series(
            &name,
            Mark::LineDots,
            r as usize - 1,
            over(1..=80, share),
        ));
        let bound = over(1..=80, |n| (1.0 - f64::from(r) * 6.0 / (n + 1.0)).max(0.0));
        shares.push(series("", Mark::Dashed, r as usize - 1, bound));
    }
    let share_chart = Chart {
        x_label: "order n of the factor graph".into(),
        y_label: "share of path balls".into(),
        series: shares,
        y_range: Some((0.0, 1.0)),
        note: Some("Dashed: proved lower bound for the curve of the same colour.".into()),
        ..Chart::default()
    };
    let many = Chart {
        x_label: "n".into(),
        y_label: "s(n) of the courtyards".into(),
        x_scale: Scale::Linear,
        y_scale: Scale::Log,
        series: (0..9)
            .map(|k| Series {
                name: format!("Courtyard {} behind the Lantern Steps", k + 1),
                points: over(0..=40, |n| (n * 10f64.powi(k)).powf(1.4)),
                mark: [Mark::Line, Mark::LineDots, Mark::Dashed][k as usize % 3],
                ink: None,
            })
            .collect(),
        ..Chart::default()
    };
    let band = Chart {
        x_label: "hits".into(),
        y_label: "share visited".into(),
        series: vec![
            series(
                "two standard errors",
                Mark::Band,
                5,
                over(1..=50, |n| 1.0 - 0.8 / n.sqrt())
                    .into_iter()
                    .chain(over(1..=50, |n| 1.0 - 1.1 / n.sqrt()).into_iter().rev())
                    .collect(),
            ),
            series(
                "sampled",
                Mark::Line,
                0,
                over(1..=50, |n| 1.0 - 0.95 / n.sqrt()),
            ),
        ],
        ..Chart::default()
    };
    let constant = Chart {
        x_label: "n".into(),
        y_label: "b(n)".into(),
        series: vec![
            Series {
                name: "constant".into(),
                points: over(1..=9, |_| 7.0),
                ..Series::default()
            },
            Series {
                name: "empty".into(),
                ..Series::default()
            },
            Series {
                name: "alone".into(),
                points: vec![(4.0, 7.5)],
                ..Series::default()
            },
        ],
        ..Chart::default()
    };
    vec![
        (
            "chart_growth",
            draw_chart(&growth, &caption("Growth of p(n)")),
        ),
        ("chart_cubic", draw_chart(&cubic, &caption("p(n)/n³"))),
        (
            "chart_ratio",
            draw_chart(&ratio, &caption("Ratio of neighbours")),
        ),
        (
            "chart_shares",
            draw_chart(&share_chart, &caption("Path balls")),
        ),
        ("chart_many", draw_chart(&many, &caption("Many long names"))),
        ("chart_band", draw_chart(&band, &caption("A band"))),
        (
            "chart_constant",
            draw_chart(&constant, &caption("Degenerate series")),
        ),
    ]
}

fn lettered(corners: &[P]) -> TableShape {
    let letters = (0..corners.len())
        .map(|i| char::from(b'a' + i as u8).to_string())
        .collect();
    TableShape {
        corners: corners.to_vec(),
        letters,
        holes: Vec::new(),
    }
}

fn l_shape() -> TableShape {
    lettered(&[
        [0.0, 0.0],
        [2.0, 0.0],
        [2.0, 1.0],
        [1.0, 1.0],
        [1.0, 2.0],
        [0.0, 2.0],
    ])
}

fn tables() -> Vec<Named> {
    let square = lettered(&[[0.0, 0.0], [1.0, 0.0], [1.0, 1.0], [0.0, 1.0]]);
    let comb = lettered(&[
        [0.0, 0.0],
        [6.0, 0.0],
        [6.0, 3.0],
        [4.4, 3.0],
        [4.4, 0.8],
        [4.2, 0.8],
        [4.2, 3.0],
        [2.0, 3.0],
        [2.0, 1.0],
        [1.0, 2.4],
        [0.0, 3.0],
    ]);
    let sliver = lettered(&[[0.0, 0.0], [10.0, 0.0], [9.0, 0.35]]);
    let mut holed = lettered(&[[0.0, 0.0], [5.0, 0.0], [5.0, 3.0], [0.0, 3.0]]);
    holed.holes.push(HoleShape {
        corners: vec![[1.0, 1.0], [1.5, 2.2], [2.4, 1.2]],
        letters: vec!["x".into(), "y".into(), "z".into()],
    });
    let ring: Vec<P> = (0..20)
        .map(|i| f64::from(i) * PI / 10.0)
        .map(|t| [t.cos(), t.sin()])
        .collect();
    let mut hits = vec![[0.3, 0.0]];
    let mut way = [0.7, 1.0];
    for _ in 0..14 {
        let (hit, turned) = bounce(&l_shape().corners, hits[hits.len() - 1], way);
        hits.push(hit);
        way = turned;
    }
    vec![
        ("table_square", table_picture(&square, &caption("Square"))),
        ("table_l", table_picture(&l_shape(), &caption("L"))),
        (
            "table_comb",
            table_picture(&comb, &caption("A table with narrow notches")),
        ),
        ("table_sliver", table_picture(&sliver, &caption("A sliver"))),
        (
            "table_hole",
            table_picture(&holed, &caption("A table with a hole")),
        ),
        (
            "table_ring",
            table_picture(&lettered(&ring), &caption("Twenty sides")),
        ),
        (
            "orbit_l",
            orbit_picture(&l_shape(), &hits, &caption("An orbit")),
        ),
    ]
}

/// The next hit of a ray and its reflected direction.
fn bounce(corners: &[P], from: P, way: P) -> (P, P) {
    let mut best: Option<(f64, P)> = None;
    for i in 0..corners.len() {
        let (a, b) = (corners[i], corners[(i + 1) % corners.len()]);
        let side = [b[0] - a[0], b[1] - a[1]];
        let det = way[0] * side[1] - way[1] * side[0];
        let gap = [a[0] - from[0], a[1] - from[1]];
        let t = (gap[0] * side[1] - gap[1] * side[0]) / det;
        let u = (gap[0] * way[1] - gap[1] * way[0]) / det;
        if t > 1e-9 && (0.0..=1.0).contains(&u) && best.is_none_or(|(least, _)| t < least) {
            best = Some((t, side));
        }
    }
    let (t, side) = best.unwrap_or((0.0, [1.0, 0.0]));
    let turned = mirror([0.0, 0.0], side, way);
    ([from[0] + t * way[0], from[1] + t * way[1]], turned)
}

/// The mirror image of `p` in the line through `a` and `b`.
fn mirror(a: P, b: P, p: P) -> P {
    let d = [b[0] - a[0], b[1] - a[1]];
    let q = [p[0] - a[0], p[1] - a[1]];
    let f = 2.0 * (q[0] * d[0] + q[1] * d[1]) / (d[0] * d[0] + d[1] * d[1]);
    [a[0] + f * d[0] - q[0], a[1] + f * d[1] - q[1]]
}

/// Unfolds a convex table along a line and shades the widest parallel strip that crosses the same sides.
fn unfold(table: &TableShape, from: P, way: P, count: usize) -> Corridor {
    let k = table.corners.len();
    let mut copy = table.corners.clone();
    let mut corridor = Corridor::default();
    let offset = |p: P| way[0] * (p[1] - from[1]) - way[1] * (p[0] - from[0]);
    let mut came = k;
    for step in 0..count {
        corridor.copies.push(copy.clone());
        let exit = (0..k).filter(|&i| i != came).find(|&i| {
            let (a, b) = (copy[i], copy[(i + 1) % k]);
            let gap = [b[0] - a[0], b[1] - a[1]];
            let ahead = way[0] * gap[1] - way[1] * gap[0];
            let inner = copy
                .iter()
                .map(|&c| gap[0] * (c[1] - a[1]) - gap[1] * (c[0] - a[0]))
                .sum::<f64>();
            offset(a) * offset(b) < 0.0 && ahead * inner > 0.0
        });
        let Some(i) = exit.filter(|_| step + 1 < count) else {
            break;
        };
        let (a, b) = (copy[i], copy[(i + 1) % k]);
        corridor.gates.push((a, b, table.letters[i].clone()));
        copy = copy.iter().map(|&p| mirror(a, b, p)).collect();
        came = i;
    }
    let ends: Vec<P> = corridor.gates.iter().flat_map(|g| [g.0, g.1]).collect();
    let upper = ends
        .iter()
        .copied()
        .filter(|&p| offset(p) > 0.0)
        .min_by(|a, b| offset(*a).total_cmp(&offset(*b)));
    let lower = ends
        .iter()
        .copied()
        .filter(|&p| offset(p) < 0.0)
        .max_by(|a, b| offset(*a).total_cmp(&offset(*b)));
    if let (Some(u), Some(l)) = (upper, lower) {
        corridor.pivots = vec![u, l];
        let meet = |gate: &(P, P, String), through: P| -> P {
            let (s, t) = (
                offset(gate.0) - offset(through),
                offset(gate.1) - offset(through),
            );
            let f = s / (s - t);
            [
                gate.0[0] + f * (gate.1[0] - gate.0[0]),
                gate.0[1] + f * (gate.1[1] - gate.0[1]),
            ]
        };
        let (first, last) = (
            &corridor.gates[0],
            &corridor.gates[corridor.gates.len() - 1],
        );
        corridor.beam = vec![vec![
            meet(first, l),
            meet(last, l),
            meet(last, u),
            meet(first, u),
        ]];
        corridor.line = Some((meet(first, from), meet(last, from)));
    }
    corridor
}

fn corridors() -> Vec<Named> {
    let square = lettered(&[[0.0, 0.0], [1.0, 0.0], [1.0, 1.0], [0.0, 1.0]]);
    let triangle = lettered(&[[0.0, 0.0], [1.0, 0.0], [0.3, 0.8]]);
    let short = unfold(&square, [0.2, 0.3], [1.0, 0.62], 7);
    let middle = unfold(&triangle, [0.4, 0.25], [1.0, 0.37], 14);
    let long = unfold(&triangle, [0.35, 0.2], [0.2, 1.0], 30);
    vec![
        (
            "corridor_short",
            corridor_picture(&short, &caption("Seven squares")),
        ),
        (
            "corridor_middle",
            corridor_picture(&middle, &caption("Fourteen triangles")),
        ),
        (
            "corridor_long",
            corridor_picture(&long, &caption("Thirty triangles")),
        ),
    ]
}

/// The cells of all words of this length in a convex table, by sampling positions.
fn cells_of(table: &TableShape, word_length: usize) -> Cells {
    let k = table.corners.len();
    let mut cells = Cells {
        x_label: "position on the boundary".into(),
        y_label: "direction".into(),
        ..Cells::default()
    };
    for side in 0..k {
        let (a, b) = (table.corners[side], table.corners[(side + 1) % k]);
        let long = (b[0] - a[0]).hypot(b[1] - a[1]);
        cells.boundary_marks.push((cells.width, side.to_string()));
        cells
            .side_labels
            .push((cells.width + long / 2.0, table.letters[side].clone()));
        grow(
            table,
            &mut cells,
            (a, b, long),
            &[(side, table.corners.clone())],
            word_length,
        );
        cells.width += long;
    }
    cells.boundary_marks.push((cells.width, "0".into()));
    shade_apart(&mut cells);
    cells
}

fn grow(
    table: &TableShape,
    cells: &mut Cells,
    start: (P, P, f64),
    path: &[(usize, Vec<P>)],
    word_length: usize,
) {
    const SAMPLES: usize = 240;
    let k = table.corners.len();
    let (a, b, long) = start;
    if path.len() == word_length {
        let (mut low, mut high) = (Vec::new(), Vec::new());
        for i in 0..=SAMPLES {
            let t = (i as f64 / SAMPLES as f64).clamp(1e-6, 1.0 - 1e-6);
            let p = [a[0] + t * (b[0] - a[0]), a[1] + t * (b[1] - a[1])];
            let angle = |q: P| {
                let (d, e) = (
                    [q[0] - p[0], q[1] - p[1]],
                    [(b[0] - a[0]) / long, (b[1] - a[1]) / long],
                );
                let (along, up) = (e[0] * d[0] + e[1] * d[1], e[0] * d[1] - e[1] * d[0]);
                // Corners on the starting side itself: rounding must not turn 0 into a full turn.
                if up > 1e-9 {
                    up.atan2(along)
                } else if along > 0.0 {
                    0.0
                } else {
                    PI
                }
            };
            let window = path[1..].iter().fold((0.0f64, PI), |(l, h), (gate, copy)| {
                let (x, y) = (angle(copy[*gate]), angle(copy[(*gate + 1) % k]));
                (l.max(x.min(y)), h.min(x.max(y)))
            });
            if window.0 < window.1 {
                low.push([cells.width + t * long, window.0]);
                high.push([cells.width + t * long, window.1]);
            }
        }
        if low.len() > 1 {
            let word: String = path
                .iter()
                .map(|(i, _)| table.letters[*i].as_str())
                .collect();
            high.reverse();
            low.extend(high);
            cells.cells.push(CellShape {
                outline: low,
                word,
                shade: cells.cells.len(),
            });
        }
        return;
    }
    let (last, copy) = &path[path.len() - 1];
    let here: Vec<P> = if path.len() == 1 {
        copy.clone()
    } else {
        copy.iter()
            .map(|&p| mirror(copy[*last], copy[(*last + 1) % k], p))
            .collect()
    };
    for next in (0..k).filter(|next| next != last) {
        let mut longer = path.to_vec();
        longer.push((next, here.clone()));
        grow(table, cells, start, &longer, word_length);
    }
}

fn others() -> Vec<Named> {
    let square = lettered(&[[0.0, 0.0], [1.0, 0.0], [1.0, 1.0], [0.0, 1.0]]);
    let kite = lettered(&[[0.0, 0.0], [2.0, -0.3], [2.3, 1.2], [0.2, 1.6]]);
    let node = |(name, at): (&str, P)| (name.to_owned(), at, name == "ab");
    let names = ["ab", "ba", "bc", "cb", "ca", "ac"];
    let words = GraphDrawing {
        nodes: names.into_iter().zip(circle_layout(6)).map(node).collect(),
        arcs: [
            (0, 1, "a"),
            (1, 0, "b"),
            (0, 2, "c"),
            (2, 3, "b"),
            (3, 2, "c"),
            (3, 1, "a"),
            (2, 4, "a"),
            (4, 5, "c"),
            (5, 4, "a"),
            (4, 0, "b"),
            (1, 5, "c"),
            (5, 3, "b"),
        ]
        .map(|(u, v, l)| (u, v, l.to_owned()))
        .to_vec(),
    };
    let loops = GraphDrawing {
        nodes: ["s", "t", "a longer name"]
            .into_iter()
            .zip([[0.0, 0.0], [2.0, 0.0], [1.0, 1.2]])
            .map(node)
            .collect(),
        arcs: [
            (0, 0, "a"),
            (0, 1, "b"),
            (1, 1, "c"),
            (1, 2, "d"),
            (2, 0, "e"),
            (2, 2, "f"),
            (0, 1, "g"),
        ]
        .map(|(u, v, l)| (u, v, l.to_owned()))
        .to_vec(),
    };
    let big = GraphDrawing {
        nodes: (0..16)
            .map(|i| format!("w{i}"))
            .zip(circle_layout(16))
            .map(|(n, p)| (n, p, false))
            .collect(),
        arcs: (0..16)
            .map(|i| (i, (i + 1) % 16, "a".to_owned()))
            .chain([
                (0, 8, "b".to_owned()),
                (8, 0, "c".to_owned()),
                (3, 3, "d".to_owned()),
            ])
            .collect(),
    };
    vec![
        (
            "cells_square_2",
            cells_picture(&cells_of(&square, 2), &caption("Words of length 2")),
        ),
        (
            "cells_square_3",
            cells_picture(&cells_of(&square, 3), &caption("Words of length 3")),
        ),
        (
            "cells_kite_3",
            cells_picture(&cells_of(&kite, 3), &caption("Words of length 3")),
        ),
        (
            "cells_kite_4",
            cells_picture(&cells_of(&kite, 4), &caption("Words of length 4")),
        ),
        (
            "graph_words",
            graph_picture(&words, &caption("A factor graph")),
        ),
        ("graph_loops", graph_picture(&loops, &caption("Loops"))),
        ("graph_big", graph_picture(&big, &caption("Sixteen words"))),
    ]
}
