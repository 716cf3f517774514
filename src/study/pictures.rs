//! The pictures of a study: from exact results to the plain numbers that [`figure`](crate::figure) draws.
//!
//! Nothing here decides anything: coordinates are rounded for drawing only.

use super::results::Results;
use super::sheet::Sheet;
use crate::complexity::growth::cubic_range;
use crate::figure::{
    Caption, CellShape, Cells, Chart, Corridor, FigureError, HoleShape, Mark, Scale, Series,
    TableShape, cells_picture, corridor_picture, draw_chart, shade_apart, table_picture,
};
use crate::language::beams::WordBeam;
use crate::table::{SideId, Table, Vector};
use crate::unfold::isometry::{Isometry, side_reflections};
use nalgebra::Vector2;
use std::f64::consts::PI;

/// A picture of a study.
#[derive(Clone, Debug)]
pub struct Picture {
    /// File name.
    pub file: &'static str,
    /// One line for the reader.
    pub title: String,
    /// What is plotted.
    pub caption: String,
    /// The SVG text.
    pub svg: String,
}

pub(super) fn picture(
    file: &'static str,
    title: impl Into<String>,
    text: impl Into<String>,
    draw: impl FnOnce(&Caption) -> Result<String, FigureError>,
) -> Result<Picture, FigureError> {
    let caption = Caption::new(title, text);
    let svg = draw(&caption)?;
    Ok(Picture {
        file,
        title: caption.title,
        caption: caption.description,
        svg,
    })
}

/// All pictures, in the order of the report. `cells` are the beams of the words of
/// [`Results::shown_length`], `corridor` is one beam to unfold.
///
/// # Errors
/// When a coordinate is too large to draw.
pub fn pictures(
    results: &Results,
    cells: &[WordBeam],
    corridor: &WordBeam,
) -> Result<Vec<Picture>, FigureError> {
    let sheet = Sheet::new(&results.table);
    let table = &sheet.table;
    let cells = &sheet.beams(cells);
    let corridor = &sheet.beams(std::slice::from_ref(corridor))[0];
    let mut all = vec![picture(
        "table.svg",
        "The table",
        "The polygon with the letter of each side and the number of each corner.",
        |c| table_picture(&shape(table), c),
    )?];
    all.extend(growth_pictures(results)?);
    all.push(picture(
        "path-balls.svg",
        "Shares of words whose balls are paths",
        "For each radius r, the share of words of length n whose r-ball in the factor graph is a path (solid), and 1 − (6r − 4)·s(n)/p(n) where that is positive (dashed). The first tends to 1 for every r exactly when the graphs converge locally to the line.",
        |c| draw_chart(&ball_chart(results), c),
    )?);
    let word = spell(table, corridor);
    all.push(picture(
        "corridor.svg",
        format!("The unfolded corridor of the word {word}"),
        format!("Reflected copies of the table along the word {word}, the sides that it crosses, and the region swept by its beam: all lines with this coding. Dots are the corner images that bound the beam."),
        |c| corridor_picture(&corridor_shape(table, corridor), c),
    )?);
    let n = results.shown_length;
    all.push(picture(
        "cells.svg",
        format!("The cells of the words of length {n}"),
        format!("The set of starting positions on the boundary (horizontal) and directions (vertical, the angle with the side), divided into the cells of the {} words of length {n}. The borders are the states that run into a corner.", results.counts.p[n]),
        |c| cells_picture(&cell_shapes(table, cells), c),
    )?);
    Ok(all)
}

pub(super) fn series(
    name: impl Into<String>,
    points: Vec<(f64, f64)>,
    mark: Mark,
    ink: Option<usize>,
) -> Series {
    Series {
        name: name.into(),
        points,
        mark,
        ink,
    }
}

fn growth_pictures(results: &Results) -> Result<Vec<Picture>, FigureError> {
    let p = &results.counts.p;
    let last = results.length;
    let from = super::verdict::CUBIC_FROM.min(last);
    let mut curves = Vec::new();
    let mut text = String::from("Number p(n) of words of length n on logarithmic axes");
    if let Some(range) = cubic_range(p, from, last) {
        let cubic = |c: f64| {
            (from..=last)
                .map(|n| (n as f64, c * (n as f64).powi(3)))
                .collect()
        };
        curves.push(series(
            format!("{:.4}·n³", range.largest),
            cubic(range.largest),
            Mark::Dashed,
            Some(1),
        ));
        curves.push(series(
            format!("{:.4}·n³", range.smallest),
            cubic(range.smallest),
            Mark::Dotted,
            Some(2),
        ));
        text.push_str(&format!(
            ", between the smallest and the largest multiple of n³ that it touches for {from} ≤ n ≤ {last}"
        ));
    }
    text.push('.');
    curves.push(series(
        "p(n)",
        (1..=last).map(|n| (n as f64, p[n] as f64)).collect(),
        Mark::LineDots,
        Some(0),
    ));
    let growth = Chart {
        x_label: "length n".into(),
        y_label: "number of words".into(),
        x_scale: Scale::Log,
        y_scale: Scale::Log,
        series: curves,
        ..Chart::default()
    };
    let ratio = Chart {
        x_label: "length n".into(),
        y_label: "p(n+1)/p(n) − 1".into(),
        x_scale: Scale::Log,
        y_scale: Scale::Log,
        series: vec![
            series(
                "3/n",
                (1..last).map(|n| (n as f64, 3.0 / n as f64)).collect(),
                Mark::Dashed,
                Some(1),
            ),
            series(
                "p(n+1)/p(n) − 1",
                results
                    .line
                    .iter()
                    .map(|f| (f.order as f64, f.growth))
                    .collect(),
                Mark::LineDots,
                Some(0),
            ),
        ],
        ..Chart::default()
    };
    Ok(vec![
        picture("growth.svg", "Growth of the complexity", text, |c| {
            draw_chart(&growth, c)
        })?,
        super::growth_pictures::quotient(results, from)?,
        picture(
            "ratio.svg",
            "The ratio p(n+1)/p(n)",
            "p(n+1)/p(n) − 1 = s(n)/p(n) on logarithmic axes, beside 3/n, which it follows when p(n) is close to a multiple of n³. For a language of subexponential complexity it tends to 0 exactly when the factor graphs converge locally to the line.",
            |c| draw_chart(&ratio, c),
        )?,
        super::growth_pictures::diagonals(results)?,
    ])
}

fn ball_chart(results: &Results) -> Chart {
    let radii = results.graphs.first().map_or(0, |g| g.path_balls.len());
    let mut all = Vec::new();
    for r in 0..radii {
        let points = |value: &dyn Fn(usize) -> f64| -> Vec<(f64, f64)> {
            (0..results.line.len())
                .map(|i| (results.line[i].order as f64, value(i)))
                .filter(|(_, y)| *y >= 0.0)
                .collect()
        };
        let bound = points(&|i| 1.0 - results.line[i].bound[r]);
        // A lone point would show as a mark without a line.
        if bound.len() > 1 {
            all.push(series("", bound, Mark::Dashed, Some(r)));
        }
        all.push(series(
            format!("r = {}", r + 1),
            points(&|i| results.line[i].path_share[r]),
            Mark::LineDots,
            Some(r),
        ));
    }
    Chart {
        x_label: "length n".into(),
        y_label: "share of words".into(),
        y_range: Some((0.0, 1.0)),
        series: all,
        ..Chart::default()
    }
}

/// A point of the true Euclidean plane, for drawing.
type Point = Vector2<f64>;

fn flat(v: &Vector, root_form: f64) -> Point {
    Point::new(v.x.to_f64(), v.y.to_f64() * root_form)
}

fn array(p: Point) -> [f64; 2] {
    p.into()
}

fn root_form(table: &Table) -> f64 {
    table.form().to_f64().sqrt()
}

/// The table as a figure takes it.
pub fn shape(table: &Table) -> TableShape {
    let root = root_form(table);
    let ring = |ring: std::ops::Range<usize>| HoleShape {
        corners: ring
            .clone()
            .map(|i| array(flat(table.corner(i), root)))
            .collect(),
        letters: ring
            .map(|i| table.letter(SideId(i as u8)).to_string())
            .collect(),
    };
    let mut rings = table.rings().map(ring);
    let HoleShape { corners, letters } = rings.next().expect("the outline");
    TableShape {
        corners,
        letters,
        holes: rings.collect(),
    }
}

fn spell(table: &Table, beam: &WordBeam) -> String {
    beam.word.iter().map(|s| table.letter(*s)).collect()
}

/// The beam that shows most: among the words with the most different letters the one whose cell has the most
/// corner images, then the first.
pub fn telling_beam(beams: &[WordBeam]) -> Option<&WordBeam> {
    beams.iter().rev().max_by_key(|beam| {
        let mut letters = beam.word.clone();
        letters.sort();
        letters.dedup();
        (letters.len(), beam.images.len())
    })
}

/// The corridor of a word with its beam, as a figure takes it.
pub fn corridor_shape(table: &Table, beam: &WordBeam) -> Corridor {
    let root = root_form(table);
    let home = table.moved_to_origin();
    let reflections = side_reflections(&home);
    let mut pose = Isometry::identity();
    let place = |pose: &Isometry, i: usize| flat(&pose.apply(home.corner(i), home.form()), root);
    let letter = |side: SideId| table.letter(side).to_string();
    let mut corridor = Corridor::default();
    let mut gates = Vec::new();
    for (i, side) in beam.word.iter().enumerate() {
        let s = side.0 as usize;
        gates.push((place(&pose, s), place(&pose, home.after(s))));
        if i > 0 {
            pose = pose.after(&reflections[s], home.form());
        }
        // The last letter is the side where the word ends: the copy beyond it is not entered.
        if i + 1 < beam.word.len() {
            for (r, ring) in home.rings().enumerate() {
                let copy = ring.map(|c| array(place(&pose, c))).collect();
                if r == 0 {
                    corridor.copies.push(copy);
                } else {
                    corridor.holes.push(copy);
                }
            }
        }
    }
    let images: Vec<Point> = beam.images.iter().map(|v| flat(v, root)).collect();
    let (first, last) = (gates[0], gates[gates.len() - 1]);
    corridor.beam = vec![swept(&images, beam.lefts, first, last)];
    corridor.line = middle_line(&images, beam.lefts, first, last);
    corridor.pivots = images.into_iter().map(array).collect();
    corridor.gates = gates
        .into_iter()
        .zip(&beam.word)
        .map(|((from, to), side)| (array(from), array(to), letter(*side)))
        .collect();
    corridor
}

type Segment = (Point, Point);

/// The rightmost and the leftmost line of a beam, as pairs of corner images.
fn extreme_lines(images: &[Point], lefts: usize) -> (Segment, Segment) {
    let rightmost = (images[lefts - 1], images[lefts]);
    let leftmost = (images[images.len() - 1], images[0]);
    (rightmost, leftmost)
}

/// The region that the beam sweeps between two gates. On its left: the rightmost line from the first gate to
/// the nearest left image, the left images outward, then the leftmost line to the last gate; likewise on
/// its right.
fn swept(images: &[Point], lefts: usize, first: Segment, last: Segment) -> Vec<[f64; 2]> {
    let (left, right) = images.split_at(lefts);
    let (rightmost, leftmost) = extreme_lines(images, lefts);
    let mut outline = vec![meet(rightmost, first)];
    outline.extend(left.iter().rev());
    outline.push(meet(leftmost, last));
    outline.push(meet(rightmost, last));
    outline.extend(right.iter());
    outline.push(meet(leftmost, first));
    outline.into_iter().map(array).collect()
}

/// A line of the beam half way between its rightmost and its leftmost line.
fn middle_line(
    images: &[Point],
    lefts: usize,
    first: Segment,
    last: Segment,
) -> Option<([f64; 2], [f64; 2])> {
    let (rightmost, leftmost) = extreme_lines(images, lefts);
    let half = |gate| (meet(rightmost, gate) + meet(leftmost, gate)) / 2.0;
    let (from, to) = (half(first), half(last));
    (from != to).then_some((from.into(), to.into()))
}

/// Where two lines meet; the first point of the second line when they are parallel.
fn meet(line: Segment, other: Segment) -> Point {
    let (d, e) = (line.1 - line.0, other.1 - other.0);
    let denominator = d.perp(&e);
    if denominator.abs() < 1e-12 {
        return other.0;
    }
    other.0 + e * (d.perp(&(line.0 - other.0)) / denominator)
}

/// Points on each curved border of a cell.
const BORDER_POINTS: usize = 16;

fn cell_shapes(table: &Table, beams: &[WordBeam]) -> Cells {
    let root = root_form(table);
    let home = table.moved_to_origin();
    let corners: Vec<Point> = home.corners().iter().map(|c| flat(c, root)).collect();
    let k = corners.len();
    let mut at = vec![0.0];
    for i in 0..k {
        at.push(at[i] + (corners[home.after(i)] - corners[i]).norm());
    }
    // Where one ring ends and the next begins, both corners meet on the axis.
    let mark = |i: usize| match home.rings().find(|ring| ring.end == i) {
        Some(ring) if i < k => format!("{}|{i}", ring.start),
        Some(ring) => ring.start.to_string(),
        None => i.to_string(),
    };
    let mut cells = Cells {
        boundary_marks: (0..=k).map(|i| (at[i], mark(i))).collect(),
        side_labels: (0..k)
            .map(|i| {
                (
                    (at[i] + at[i + 1]) / 2.0,
                    table.letter(SideId(i as u8)).to_string(),
                )
            })
            .collect(),
        width: at[k],
        cells: beams
            .iter()
            .map(|beam| {
                let side = beam.word[0].0 as usize;
                let images: Vec<Point> = beam.images.iter().map(|v| flat(v, root)).collect();
                CellShape {
                    outline: cell_outline(
                        &images,
                        beam.lefts,
                        (corners[side], corners[home.after(side)]),
                        at[side],
                    ),
                    word: spell(table, beam),
                    shade: 0,
                }
            })
            .collect(),
        x_label: "position on the boundary, by side and corner".into(),
        y_label: "angle with the side".into(),
    };
    shade_apart(&mut cells);
    cells
}

/// The border of a cell in coordinates (position on the boundary, angle with the side): along each corner
/// image, the lines through it turn from one vertex of the cell to the next.
fn cell_outline(images: &[Point], lefts: usize, side: Segment, offset: f64) -> Vec<[f64; 2]> {
    let m = images.len();
    let along = side.1 - side.0;
    let length = along.norm();
    let along = along / length;
    // The angle of the vertex line through images i and i+1.
    let angle = |i: usize| {
        let (a, b) = (images[i], images[(i + 1) % m]);
        let crosses = i + 1 == lefts || i + 1 == m;
        let d = if crosses { b - a } else { a - b };
        // Rounding must not turn a line along the side round by a full turn.
        let raw = along.perp(&d).atan2(along.dot(&d));
        if raw < -1e-9 {
            raw + 2.0 * PI
        } else {
            raw.max(0.0)
        }
    };
    let mut outline = Vec::new();
    for (i, image) in images.iter().enumerate() {
        let (from, to) = (angle((i + m - 1) % m), angle(i));
        let p = image - side.0;
        let (position, height) = (along.dot(&p), along.perp(&p));
        for step in 0..=BORDER_POINTS {
            let theta = from + (to - from) * step as f64 / BORDER_POINTS as f64;
            // The line through p at this angle starts on the side height·cot θ before p.
            let start = if height.abs() < 1e-9 * length {
                position
            } else if theta.sin().abs() < 1e-12 {
                continue;
            } else {
                position - height * theta.cos() / theta.sin()
            };
            outline.push([offset + start.clamp(0.0, length), theta.clamp(0.0, PI)]);
        }
    }
    outline
}
