//! Charts: curves over a pair of axes.
//!
//! The plotting area holds data and grid only. Names of curves stand in a column to its right, each as near as
//! possible to the end of its curve and with a sample of its stroke, so no name can cover data and none
//! depends on colour. If the names are too long or too many for a column, they stand below the axes.
//!
//! Stages of drawing: axes from data, margins from the measured labels, then grid, curves, names, note.

use super::canvas::{Align, Canvas, Words};
use super::font::{shorten, text_width, wrap};
use super::geometry::{Point, Rect, length, mean, spread, sub};
use super::scale::{Axis, Scale, Tick};
use super::style::{
    BLACK, BOLD_STROKE, DASHES, DOTS, GREY, GRID, HAIR_STROKE, Ink, LINE_SPACING, MARKER, MARKERS,
    PALE, SMALL_TEXT, TEXT, THIN_STROKE, TICK_TEXT, WIDTH, ink,
};
use super::{Caption, FigureError};

/// How a series is drawn.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Default)]
pub enum Mark {
    /// A solid line.
    #[default]
    Line,
    /// Markers, no line.
    Dots,
    /// A line with markers.
    LineDots,
    /// A dashed line.
    Dashed,
    /// A dotted line.
    Dotted,
    /// A light area; the points go round it.
    Band,
}

/// One curve.
#[derive(Debug, Clone, Default, PartialEq)]
pub struct Series {
    /// The name shown beside the curve; no name is shown if it is empty.
    pub name: String,
    /// The data in drawing order. Points that have no place on the axes are left out, and the line is
    /// interrupted there.
    pub points: Vec<(f64, f64)>,
    /// How it is drawn.
    pub mark: Mark,
    /// Number of its ink and marker, see [`style::ink`](super::style::ink); a bound can share the ink of its
    /// curve. `None` takes the position in the chart.
    pub ink: Option<usize>,
}

/// A chart with its axes.
#[derive(Debug, Clone, Default, PartialEq)]
pub struct Chart {
    /// Name of the horizontal axis.
    pub x_label: String,
    /// Name of the vertical axis.
    pub y_label: String,
    /// Scale of the horizontal axis.
    pub x_scale: Scale,
    /// Scale of the vertical axis.
    pub y_scale: Scale,
    /// The curves, later ones on top.
    pub series: Vec<Series>,
    /// The vertical range; data beyond it are cut off. `None` fits the data.
    pub y_range: Option<(f64, f64)>,
    /// A remark below the chart.
    pub note: Option<String>,
}

/// Height of the plotting area, pixels.
const PLOT_HEIGHT: f64 = 430.0;
/// Room between the frame of the plotting area and the extreme data.
const INSET: f64 = 10.0;
/// Length of the stroke sample beside a name.
const SAMPLE: f64 = 34.0;
/// Widest column of names.
const COLUMN_LIMIT: f64 = 330.0;
/// Outer margin.
const MARGIN: f64 = 18.0;

/// Draws a chart.
///
/// # Errors
/// [`FigureError::BadRange`] if `y_range` is empty, reversed, not finite, or not positive on a
/// logarithmic axis; [`FigureError::Font`] and [`FigureError::Backend`] if drawing fails. Empty charts and
/// points that cannot be shown are no errors.
pub fn draw_chart(chart: &Chart, caption: &Caption) -> Result<String, FigureError> {
    let layout = Layout::new(chart)?;
    let mut canvas = Canvas::default();
    let height = compose(chart, &layout, &mut canvas);
    canvas.finish(WIDTH, height, caption)
}

/// Draws everything on the canvas and returns the height used.
pub(crate) fn compose(chart: &Chart, layout: &Layout, canvas: &mut Canvas) -> f64 {
    draw_axes(canvas, chart, layout);
    for (i, series) in chart.series.iter().enumerate() {
        draw_series(canvas, layout, series, i, dash_rank(chart, i));
    }
    if layout.placeable(chart) == 0 {
        canvas.label("no data", layout.frame.centre(), TEXT, GREY);
    }
    let mut bottom = layout.labels_bottom;
    if layout.in_column {
        draw_column(canvas, chart, layout);
    } else {
        bottom = draw_rows(canvas, chart, bottom);
    }
    let notes = note_lines(chart);
    bottom += if notes.is_empty() { 0.0 } else { 10.0 };
    for line in notes {
        bottom += SMALL_TEXT * LINE_SPACING;
        canvas.side_label(
            &line,
            [MARGIN, bottom - SMALL_TEXT / 2.0],
            SMALL_TEXT,
            GREY,
            Align::Left,
        );
    }
    bottom + MARGIN
}

/// Axes, frame and margins of a chart.
#[derive(Debug)]
pub(crate) struct Layout {
    x: Axis,
    y: Axis,
    x_ticks: Vec<Tick>,
    y_ticks: Vec<Tick>,
    /// The plotting area, pixels.
    frame: Rect,
    /// Whether names stand to the right.
    in_column: bool,
    /// Lower end of the name of the horizontal axis.
    labels_bottom: f64,
}

impl Layout {
    pub fn new(chart: &Chart) -> Result<Self, FigureError> {
        let points = || chart.series.iter().flat_map(|s| s.points.iter().copied());
        let shown = || points().filter(|p| chart.x_scale.shows(p.0) && chart.y_scale.shows(p.1));
        let x = Axis::holding(chart.x_scale, shown().map(|p| p.0));
        let y = match chart.y_range {
            Some((low, high)) => given_range(chart.y_scale, low, high)?,
            None => Axis::holding(chart.y_scale, shown().map(|p| p.1)),
        };
        let y_ticks = y.ticks(7);
        let widest = |ticks: &[Tick]| {
            ticks
                .iter()
                .map(|t| text_width(&t.label, TICK_TEXT))
                .fold(0.0, f64::max)
        };
        let name_width = if chart.y_label.is_empty() {
            0.0
        } else {
            TEXT * 1.4
        };
        let left = MARGIN + name_width + widest(&y_ticks) + 12.0;
        let names: Vec<&Series> = named(chart).collect();
        let text = names
            .iter()
            .map(|s| text_width(&shown_name(s), TICK_TEXT))
            .fold(0.0, f64::max);
        let column = text + SAMPLE + 22.0;
        let room = (PLOT_HEIGHT / (TICK_TEXT * LINE_SPACING)).floor() as usize;
        let in_column = !names.is_empty() && column <= COLUMN_LIMIT && names.len() <= room;
        let right = if in_column {
            column + MARGIN
        } else {
            MARGIN + 24.0
        };
        let frame = Rect {
            x0: left,
            y0: MARGIN + 8.0,
            x1: WIDTH - right,
            y1: MARGIN + 8.0 + PLOT_HEIGHT,
        };
        let x_ticks = fitting_ticks(&x, frame.width() - 2.0 * INSET);
        let name_height = if chart.x_label.is_empty() {
            0.0
        } else {
            TEXT * 1.45
        };
        let labels_bottom = frame.y1 + 10.0 + TICK_TEXT + name_height;
        Ok(Layout {
            x,
            y,
            x_ticks,
            y_ticks,
            frame,
            in_column,
            labels_bottom,
        })
    }

    fn across(&self, position: f64) -> f64 {
        self.frame.x0 + INSET + position * (self.frame.width() - 2.0 * INSET)
    }

    fn up(&self, position: f64) -> f64 {
        self.frame.y1 - INSET - position * (self.frame.height() - 2.0 * INSET)
    }

    /// The pixel of a datum; `None` if it has no place on the axes.
    fn pixel(&self, (x, y): (f64, f64)) -> Option<Point> {
        let cut = |position: f64| position.clamp(-50.0, 50.0);
        Some([
            self.across(cut(self.x.position(x)?)),
            self.up(cut(self.y.position(y)?)),
        ])
    }

    fn placeable(&self, chart: &Chart) -> usize {
        chart
            .series
            .iter()
            .flat_map(|s| &s.points)
            .filter(|&&p| self.pixel(p).is_some())
            .count()
    }
}

fn given_range(scale: Scale, low: f64, high: f64) -> Result<Axis, FigureError> {
    if scale.shows(low)
        && scale.shows(high)
        && low < high
        && high - low > 1e-12 * high.abs().max(low.abs())
    {
        Ok(Axis {
            scale,
            low,
            high,
            whole: false,
        })
    } else {
        Err(FigureError::BadRange {
            low,
            high,
            scale: scale.name(),
        })
    }
}

/// As many ticks as have room for their labels side by side.
fn fitting_ticks(axis: &Axis, width: f64) -> Vec<Tick> {
    for most in (2..=9).rev() {
        let ticks = axis.ticks(most);
        let ends: Vec<(f64, f64)> = ticks
            .iter()
            .map(|t| {
                (
                    axis.position(t.value).unwrap_or(0.0) * width,
                    text_width(&t.label, TICK_TEXT) / 2.0,
                )
            })
            .collect();
        if ends
            .windows(2)
            .all(|w| w[0].0 + w[0].1 + 12.0 <= w[1].0 - w[1].1)
        {
            return ticks;
        }
    }
    axis.ticks(2).into_iter().take(1).collect()
}

fn named(chart: &Chart) -> impl Iterator<Item = &Series> {
    chart.series.iter().filter(|s| !s.name.is_empty())
}

fn shown_name(series: &Series) -> String {
    if series.points.is_empty() {
        format!("{} (no data)", series.name)
    } else {
        series.name.clone()
    }
}

fn series_ink(series: &Series, index: usize) -> (Ink, usize) {
    let number = series.ink.unwrap_or(index);
    (ink(number), number)
}

/// How many dashed series with other inks come before: neighbours get different patterns.
fn dash_rank(chart: &Chart, index: usize) -> usize {
    let dashed = chart.series[..index]
        .iter()
        .filter(|s| s.mark == Mark::Dashed && s.ink.is_none());
    if chart.series[index].ink.is_some() {
        0
    } else {
        dashed.count()
    }
}

fn note_lines(chart: &Chart) -> Vec<String> {
    let mut lines = chart
        .note
        .as_deref()
        .map_or(Vec::new(), |n| wrap(n, SMALL_TEXT, WIDTH - 2.0 * MARGIN));
    // A value that is no number is a gap that the caller means.
    let unshown =
        |p: &&(f64, f64)| !p.1.is_nan() && (!chart.x_scale.shows(p.0) || !chart.y_scale.shows(p.1));
    let count = chart
        .series
        .iter()
        .flat_map(|s| &s.points)
        .filter(unshown)
        .count();
    if count > 0 {
        let plural = if count == 1 {
            "point has"
        } else {
            "points have"
        };
        lines.push(format!(
            "{count} {plural} no place on these axes (zero, negative or infinite)."
        ));
    }
    lines
}

fn draw_axes(canvas: &mut Canvas, chart: &Chart, layout: &Layout) {
    let f = layout.frame;
    for tick in &layout.y_ticks {
        let y = layout.up(layout.y.position(tick.value).unwrap_or(0.0));
        canvas.stroke(&[[f.x0, y], [f.x1, y]], GRID, HAIR_STROKE);
        canvas.stroke(&[[f.x0 - 6.0, y], [f.x0, y]], BLACK, THIN_STROKE);
        canvas.side_label(
            &tick.label,
            [f.x0 - 10.0, y],
            TICK_TEXT,
            BLACK,
            Align::Right,
        );
    }
    for tick in &layout.x_ticks {
        let x = layout.across(layout.x.position(tick.value).unwrap_or(0.0));
        canvas.stroke(&[[x, f.y0], [x, f.y1]], GRID, HAIR_STROKE);
        canvas.stroke(&[[x, f.y1], [x, f.y1 + 6.0]], BLACK, THIN_STROKE);
        canvas.label(
            &tick.label,
            [x, f.y1 + 10.0 + TICK_TEXT / 2.0],
            TICK_TEXT,
            BLACK,
        );
    }
    for value in layout.x.minor() {
        let x = layout.across(layout.x.position(value).unwrap_or(0.0));
        canvas.stroke(&[[x, f.y1], [x, f.y1 + 4.0]], GREY, HAIR_STROKE);
    }
    for value in layout.y.minor() {
        let y = layout.up(layout.y.position(value).unwrap_or(0.0));
        canvas.stroke(&[[f.x0 - 4.0, y], [f.x0, y]], GREY, HAIR_STROKE);
    }
    canvas.stroke(
        &[[f.x0, f.y0], [f.x0, f.y1], [f.x1, f.y1]],
        BLACK,
        THIN_STROKE,
    );
    let x_name = shorten(&chart.x_label, TEXT, WIDTH - 2.0 * MARGIN);
    let half = text_width(&x_name, TEXT) / 2.0;
    let centre = f.centre()[0].clamp(MARGIN + half, (WIDTH - MARGIN - half).max(MARGIN + half));
    canvas.label(
        &x_name,
        [centre, layout.labels_bottom - TEXT / 2.0],
        TEXT,
        BLACK,
    );
    canvas.text(Words {
        text: shorten(&chart.y_label, TEXT, PLOT_HEIGHT),
        at: [MARGIN + TEXT / 2.0, f.centre()[1]],
        size: TEXT,
        ink: BLACK,
        align: Align::Middle,
        upward: true,
    });
}

/// Runs of consecutive points that have a place.
fn runs(layout: &Layout, series: &Series) -> Vec<Vec<Point>> {
    let pixels: Vec<Option<Point>> = series.points.iter().map(|&p| layout.pixel(p)).collect();
    pixels
        .split(Option::is_none)
        .map(|run| run.iter().flatten().copied().collect::<Vec<_>>())
        .filter(|run| !run.is_empty())
        .collect()
}

fn draw_series(canvas: &mut Canvas, layout: &Layout, series: &Series, index: usize, rank: usize) {
    let (colour, number) = series_ink(series, index);
    let mut last_marker: Option<Point> = None;
    for run in runs(layout, series) {
        if series.mark == Mark::Band {
            canvas.fill(&layout.frame.clip_polygon(&run), colour, 0.18);
            continue;
        }
        for piece in layout.frame.clip_polyline(&run) {
            draw_line(canvas, &piece, series.mark, colour, rank);
        }
        let alone = run.len() == 1;
        for &p in run.iter().filter(|&&p| layout.frame.contains(p)) {
            let crowded = last_marker.is_some_and(|q| length(sub(p, q)) < 2.6 * MARKER);
            let wanted = match series.mark {
                Mark::Dots => true,
                Mark::LineDots => !crowded,
                _ => alone,
            };
            if wanted {
                canvas.marker(p, MARKERS[number % MARKERS.len()], MARKER, colour);
                last_marker = Some(p);
            }
        }
    }
}

fn draw_line(canvas: &mut Canvas, points: &[Point], mark: Mark, colour: Ink, rank: usize) {
    match mark {
        Mark::Line => canvas.stroke(points, colour, BOLD_STROKE),
        Mark::LineDots => canvas.stroke(points, colour, THIN_STROKE),
        Mark::Dashed => canvas.dashed(
            points,
            colour,
            BOLD_STROKE - 0.5,
            DASHES[rank % DASHES.len()],
        ),
        Mark::Dotted => canvas.dashed(points, colour, BOLD_STROKE, DOTS),
        Mark::Dots | Mark::Band => {}
    }
}

/// The stroke sample and the name of a series, the sample starting at `at`.
fn draw_name(canvas: &mut Canvas, chart: &Chart, index: usize, at: Point, limit: f64) {
    let series = &chart.series[index];
    let (colour, number) = series_ink(series, index);
    let line = [at, [at[0] + SAMPLE, at[1]]];
    if series.mark == Mark::Band {
        canvas.rect(
            &Rect {
                x0: at[0],
                y0: at[1] - 8.0,
                x1: at[0] + SAMPLE,
                y1: at[1] + 8.0,
            },
            colour,
            0.18,
        );
    }
    if series.points.len() != 1 {
        draw_line(canvas, &line, series.mark, colour, dash_rank(chart, index));
    }
    // A single point is drawn as a marker whatever the mark, so its sample is one too.
    let lone = series.points.len() == 1 && series.mark != Mark::Band;
    if lone || matches!(series.mark, Mark::Dots | Mark::LineDots) {
        canvas.marker(
            [at[0] + SAMPLE / 2.0, at[1]],
            MARKERS[number % MARKERS.len()],
            MARKER,
            colour,
        );
    }
    let name = shorten(&shown_name(series), TICK_TEXT, limit);
    canvas.side_label(
        &name,
        [at[0] + SAMPLE + 8.0, at[1]],
        TICK_TEXT,
        BLACK,
        Align::Left,
    );
}

/// The last visible point of a curve; for a band the middle of its right edge.
fn curve_end(layout: &Layout, series: &Series) -> Option<Point> {
    let frame = layout.frame;
    let run = runs(layout, series).pop()?;
    if series.mark == Mark::Band {
        let area = frame.clip_polygon(&run);
        let right = Rect::of_points(&area)?.x1;
        let edge: Vec<Point> = area.into_iter().filter(|p| p[0] > right - 1.0).collect();
        return Some(mean(&edge));
    }
    let piece = frame.clip_polyline(&run).pop();
    piece
        .and_then(|piece| piece.last().copied())
        .or_else(|| run.last().copied().filter(|&p| frame.contains(p)))
}

/// Names to the right, in the order of the ends of their curves.
fn draw_column(canvas: &mut Canvas, chart: &Chart, layout: &Layout) {
    let f = layout.frame;
    let end = |i: usize| curve_end(layout, &chart.series[i]);
    let mut wishes: Vec<(f64, usize, Option<Point>)> = (0..chart.series.len())
        .filter(|&i| !chart.series[i].name.is_empty())
        .map(|i| (end(i).map_or(f.y1, |p| p[1]), i, end(i)))
        .collect();
    wishes.sort_by(|a, b| a.0.total_cmp(&b.0).then(a.1.cmp(&b.1)));
    let heights: Vec<f64> = wishes.iter().map(|w| w.0).collect();
    let half = TICK_TEXT / 2.0;
    let places = spread(&heights, TICK_TEXT * LINE_SPACING, f.y0 + half, f.y1 - half);
    let x = f.x1 + 14.0;
    for ((_, i, end), y) in wishes.into_iter().zip(places) {
        if let Some(p) = end.filter(|p| p[0] > f.x1 - INSET - 2.0) {
            canvas.stroke(&[[f.x1 + 1.0, p[1]], [x - 5.0, y]], PALE, HAIR_STROKE);
        }
        draw_name(canvas, chart, i, [x, y], COLUMN_LIMIT);
    }
}

/// Names below the axes, in rows.
fn draw_rows(canvas: &mut Canvas, chart: &Chart, top: f64) -> f64 {
    let limit = WIDTH - 2.0 * MARGIN - SAMPLE - 8.0;
    let step = TICK_TEXT * LINE_SPACING + 2.0;
    let (mut x, mut y) = (MARGIN, top + step / 2.0 + 4.0);
    let mut bottom = top;
    for (i, series) in chart
        .series
        .iter()
        .enumerate()
        .filter(|(_, s)| !s.name.is_empty())
    {
        let width = SAMPLE + 8.0 + text_width(&shown_name(series), TICK_TEXT).min(limit);
        if x > MARGIN && x + width > WIDTH - MARGIN {
            (x, y) = (MARGIN, y + step);
        }
        draw_name(canvas, chart, i, [x, y], limit);
        x += width + 28.0;
        bottom = y + step / 2.0;
    }
    bottom
}
