//! Pictures of the partition of phase space into cells: the position on the boundary to the right, the
//! direction from 0 to π upwards, one filled area for each word.
//!
//! A word is written inside its cell where the text fits entirely, level or upright; otherwise it is left out,
//! since a word across a border would name two cells.

use super::canvas::{Align, Canvas, Words};
use super::font::{shorten, text_width};
use super::geometry::{Point, Rect, length, mean, rect_inside, sub};
use super::style::{
    BLACK, HAIR_STROKE, INKS, SMALL_TEXT, STROKE, TEXT, THIN_STROKE, TICK_TEXT, WIDTH, tint,
};
use super::{Caption, FigureError, check_points};
use std::f64::consts::PI;

/// One cell of the partition.
#[derive(Debug, Clone, Default, PartialEq)]
pub struct CellShape {
    /// Its outline: position on the boundary, direction in radians.
    pub outline: Vec<[f64; 2]>,
    /// Its word.
    pub word: String,
    /// Number of its filling, see [`style::tint`](super::style::tint); neighbours should differ, for
    /// which [`shade_apart`](super::shade_apart) can provide.
    pub shade: usize,
}

/// A partition into cells.
#[derive(Debug, Clone, Default, PartialEq)]
pub struct Cells {
    /// Positions of the corners along the boundary, with their names.
    pub boundary_marks: Vec<(f64, String)>,
    /// Positions of the names of the sides.
    pub side_labels: Vec<(f64, String)>,
    /// Length of the boundary: the horizontal axis runs from 0 to here.
    pub width: f64,
    /// The cells.
    pub cells: Vec<CellShape>,
    /// Name of the horizontal axis.
    pub x_label: String,
    /// Name of the vertical axis.
    pub y_label: String,
}

const PLOT: Rect = Rect {
    x0: 112.0,
    y0: 22.0,
    x1: WIDTH - 22.0,
    y1: 522.0,
};
/// Candidate places for a word in each direction of the cell's box.
const GRID_STEPS: usize = 18;

/// Draws a partition into cells.
///
/// # Errors
/// [`FigureError::BadWidth`], [`FigureError::BadCoordinate`], and what the backend reports.
pub fn cells_picture(cells: &Cells, caption: &Caption) -> Result<String, FigureError> {
    let (canvas, size) = compose_cells(cells)?;
    canvas.finish(size[0], size[1], caption)
}

pub(crate) fn compose_cells(cells: &Cells) -> Result<(Canvas, Point), FigureError> {
    if !(cells.width.is_finite() && cells.width >= f64::MIN_POSITIVE) {
        return Err(FigureError::BadWidth { width: cells.width });
    }
    for cell in &cells.cells {
        check_points("a cell", &cell.outline)?;
    }
    for &(position, _) in cells.boundary_marks.iter().chain(&cells.side_labels) {
        check_points("a mark of the boundary", &[[position, 0.0]])?;
    }
    let mut canvas = Canvas::default();
    let outlines: Vec<Vec<Point>> = cells
        .cells
        .iter()
        .map(|cell| {
            let pixels: Vec<Point> = cell
                .outline
                .iter()
                .map(|&[s, angle]| pixel(cells, s, angle))
                .collect();
            PLOT.clip_polygon(&pixels)
        })
        .collect();
    for (cell, outline) in cells.cells.iter().zip(&outlines) {
        canvas.fill(outline, tint(cell.shade), 1.0);
    }
    for outline in &outlines {
        canvas.outline(outline, BLACK, THIN_STROKE - 0.3);
    }
    for (cell, outline) in cells.cells.iter().zip(&outlines) {
        write_word(&mut canvas, &cell.word, outline);
    }
    let height = draw_frame(&mut canvas, cells);
    Ok((canvas, [WIDTH, height]))
}

/// The pixel of a position and a direction.
pub(crate) fn pixel(cells: &Cells, s: f64, angle: f64) -> Point {
    [
        PLOT.x0 + s / cells.width * PLOT.width(),
        PLOT.y1 - angle / PI * PLOT.height(),
    ]
}

/// Writes the word at the place nearest to the middle of the cell where it fits, as large as possible.
fn write_word(canvas: &mut Canvas, word: &str, outline: &[Point]) {
    let Some(bounds) = Rect::of_points(outline).filter(|_| !word.is_empty()) else {
        return;
    };
    let middle = mean(outline);
    for (size, upward) in [
        (TEXT, false),
        (SMALL_TEXT, false),
        (TEXT, true),
        (SMALL_TEXT, true),
    ] {
        let width = text_width(word, size) + 4.0;
        let (w, h) = if upward {
            (size * 0.86, width)
        } else {
            (width, size * 0.86)
        };
        let (free_x, free_y) = (bounds.width() - w, bounds.height() - h);
        if free_x < 0.0 || free_y < 0.0 {
            continue;
        }
        let places = (0..=GRID_STEPS).flat_map(|i| (0..=GRID_STEPS).map(move |j| (i, j)));
        let best = places
            .map(|(i, j)| {
                let part = |free: f64, k: usize| free * k as f64 / GRID_STEPS as f64;
                [
                    bounds.x0 + w / 2.0 + part(free_x, i),
                    bounds.y0 + h / 2.0 + part(free_y, j),
                ]
            })
            .chain([middle])
            .filter(|&centre| rect_inside(outline, &Rect::around(centre, w + 4.0, h + 2.0)))
            .min_by(|a, b| length(sub(*a, middle)).total_cmp(&length(sub(*b, middle))));
        if let Some(at) = best {
            let text = word.to_owned();
            canvas.text(Words {
                text,
                at,
                size,
                ink: BLACK,
                align: Align::Middle,
                upward,
            });
            return;
        }
    }
}

fn draw_frame(canvas: &mut Canvas, cells: &Cells) -> f64 {
    for (i, label) in ["0", "π/4", "π/2", "3π/4", "π"].into_iter().enumerate() {
        let y = PLOT.y1 - PLOT.height() * i as f64 / 4.0;
        canvas.stroke(&[[PLOT.x0 - 6.0, y], [PLOT.x0, y]], BLACK, THIN_STROKE);
        canvas.side_label(label, [PLOT.x0 - 10.0, y], TICK_TEXT, BLACK, Align::Right);
    }
    let first_row = PLOT.y1 + 12.0 + SMALL_TEXT / 2.0;
    let mut last_end = f64::NEG_INFINITY;
    for (position, name) in sorted(&cells.boundary_marks) {
        let x = pixel(cells, *position, 0.0)[0].clamp(PLOT.x0, PLOT.x1);
        canvas.stroke(&[[x, PLOT.y0], [x, PLOT.y1]], BLACK, HAIR_STROKE);
        canvas.stroke(&[[x, PLOT.y1], [x, PLOT.y1 + 8.0]], BLACK, THIN_STROKE);
        let half = text_width(name, SMALL_TEXT) / 2.0;
        if x - half > last_end + 6.0 {
            canvas.label(name, [x, first_row], SMALL_TEXT, BLACK);
            last_end = x + half;
        }
    }
    let second_row = first_row + SMALL_TEXT / 2.0 + TEXT / 2.0 + 3.0;
    let mut last_end = f64::NEG_INFINITY;
    for (position, name) in sorted(&cells.side_labels) {
        let x = pixel(cells, *position, 0.0)[0].clamp(PLOT.x0, PLOT.x1);
        let half = text_width(name, TEXT) / 2.0;
        if x - half > last_end + 6.0 {
            canvas.label(name, [x, second_row], TEXT, INKS[0]);
            last_end = x + half;
        }
    }
    canvas.outline(&PLOT.corners(), BLACK, STROKE);
    let name_row = second_row + TEXT * 1.3;
    canvas.label(
        &shorten(&cells.x_label, TEXT, PLOT.width()),
        [PLOT.centre()[0], name_row],
        TEXT,
        BLACK,
    );
    canvas.text(Words {
        text: shorten(&cells.y_label, TEXT, PLOT.height()),
        at: [18.0 + TEXT / 2.0, PLOT.centre()[1]],
        size: TEXT,
        ink: BLACK,
        align: Align::Middle,
        upward: true,
    });
    name_row + TEXT / 2.0 + 16.0
}

fn sorted(marks: &[(f64, String)]) -> Vec<&(f64, String)> {
    let mut order: Vec<&(f64, String)> = marks.iter().collect();
    order.sort_by(|a, b| a.0.total_cmp(&b.0));
    order
}
