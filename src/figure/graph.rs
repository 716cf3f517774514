//! Pictures of small directed graphs whose nodes have positions.
//!
//! Arcs are quadratic Bézier curves that bulge to the left of their way, so an arc and its reverse stay
//! apart; each takes the flattest bulge that misses the other nodes. Loops stand on the side of their node
//! that faces away from the rest. Legible up to about 20 nodes.

use super::canvas::Canvas;
use super::font::text_width;
use super::geometry::{Placer, Point, Rect, add, along, length, mean, normal, sub, times, unit};
use super::plane::Frame;
use super::style::{BLACK, GREY, INKS, PAPER, SMALL_TEXT, STROKE, THIN_STROKE, TICK_TEXT, WHITE};
use super::{Caption, FigureError, check_points};

/// A directed graph to draw.
#[derive(Debug, Clone, Default, PartialEq)]
pub struct GraphDrawing {
    /// Nodes: name, position, whether it is emphasised.
    pub nodes: Vec<(String, [f64; 2], bool)>,
    /// Arcs: from, to (indices of nodes), label.
    pub arcs: Vec<(usize, usize, String)>,
}

/// Positions of `n` nodes on the unit circle, the first on top, then clockwise.
pub fn circle_layout(n: usize) -> Vec<[f64; 2]> {
    (0..n)
        .map(|i| {
            let angle = std::f64::consts::TAU * i as f64 / n as f64;
            [angle.sin(), angle.cos()]
        })
        .collect()
}

/// Half the height of a node's box.
const NODE_HALF: f64 = 18.0;
const ARROW: f64 = 15.0;
/// Points on a drawn curve.
const CURVE_STEPS: usize = 40;

/// Draws a directed graph.
///
/// # Errors
/// [`FigureError::BadCoordinate`], [`FigureError::NoSuchNode`], and what the backend reports.
pub fn graph_picture(graph: &GraphDrawing, caption: &Caption) -> Result<String, FigureError> {
    let (canvas, size) = compose_graph(graph)?;
    canvas.finish(size[0], size[1], caption)
}

pub(crate) fn compose_graph(graph: &GraphDrawing) -> Result<(Canvas, Point), FigureError> {
    let positions: Vec<Point> = graph.nodes.iter().map(|n| n.1).collect();
    check_points("a node", &positions)?;
    let nodes = graph.nodes.len();
    for (arc, &(from, to, _)) in graph.arcs.iter().enumerate() {
        if let Some(node) = [from, to].into_iter().find(|&node| node >= nodes) {
            return Err(FigureError::NoSuchNode { arc, node, nodes });
        }
    }
    let widest = graph
        .nodes
        .iter()
        .map(|n| node_width(&n.0))
        .fold(0.0, f64::max);
    let has_loops = graph.arcs.iter().any(|arc| arc.0 == arc.1);
    let room = if has_loops { 112.0 } else { 44.0 };
    let margin = [(widest / 2.0 + room).min(240.0), NODE_HALF + room];
    let frame = Frame::fitting(&positions, 900.0 - 2.0 * margin[0], 520.0, margin, 520.0);
    let centres = frame.pixels(&positions);
    let boxes: Vec<Rect> = graph
        .nodes
        .iter()
        .zip(&centres)
        .map(|(node, &c)| Rect::around(c, node_width(&node.0), 2.0 * NODE_HALF))
        .collect();
    let curves = arc_curves(graph, &centres, &boxes);
    let mut canvas = Canvas::default();
    for curve in &curves {
        draw_arc(&mut canvas, curve);
    }
    for (node, bounds) in graph.nodes.iter().zip(&boxes) {
        draw_node(&mut canvas, &node.0, bounds, node.2);
    }
    label_arcs(&mut canvas, graph, &curves, &boxes, &frame);
    Ok((canvas, frame.size))
}

fn node_width(name: &str) -> f64 {
    (text_width(name, TICK_TEXT) + 18.0).max(2.0 * NODE_HALF)
}

fn quadratic(a: Point, control: Point, b: Point) -> Vec<Point> {
    (0..=CURVE_STEPS)
        .map(|i| {
            let t = i as f64 / CURVE_STEPS as f64;
            along(along(a, control, t), along(control, b, t), t)
        })
        .collect()
}

/// The visible part of every arc, from the border of its first node to the border of its last.
fn arc_curves(graph: &GraphDrawing, centres: &[Point], boxes: &[Rect]) -> Vec<Vec<Point>> {
    let middle = mean(centres);
    let mut curves = Vec::new();
    for (index, &(from, to, _)) in graph.arcs.iter().enumerate() {
        let earlier = graph.arcs[..index]
            .iter()
            .filter(|a| a.0 == from && a.1 == to)
            .count();
        if from == to {
            let clear = |direction: Point| loop_clearance(direction, from, centres);
            let away = unit(sub(centres[from], middle));
            let direction = super::plane::compass()
                .max_by(|a, b| {
                    let score = |d: Point| clear(d) + 0.6 * (d[0] * away[0] + d[1] * away[1]);
                    score(*a).total_cmp(&score(*b))
                })
                .unwrap_or([0.0, -1.0]);
            curves.push(loop_curve(&boxes[from], direction, earlier));
            continue;
        }
        let (a, b) = (centres[from], centres[to]);
        let side = normal(sub(b, a));
        let bulges = [0.1, 0.16, 0.24, -0.16, 0.34, -0.26, 0.46, -0.4, 0.6];
        let best = bulges
            .iter()
            .map(|&bulge| {
                let bulge = bulge + 0.14 * earlier as f64 * f64::signum(bulge);
                let control = add(along(a, b, 0.5), times(side, 2.0 * bulge));
                let curve = quadratic(a, control, b);
                let hits = boxes
                    .iter()
                    .enumerate()
                    .filter(|(i, _)| *i != from && *i != to);
                let crossed = hits.filter(|(_, r)| crosses(&curve, &r.grown(7.0))).count();
                (10.0 * crossed as f64 + bulge.abs(), curve)
            })
            .min_by(|x, y| x.0.total_cmp(&y.0));
        curves.push(best.map_or(Vec::new(), |(_, curve)| {
            visible(curve, &boxes[from], &boxes[to])
        }));
    }
    curves
}

/// Cosine-like score: how far the nearest other node's direction is from this one, −1 to 1.
fn loop_clearance(direction: Point, node: usize, centres: &[Point]) -> f64 {
    let others = centres.iter().enumerate().filter(|(i, _)| *i != node);
    others
        .map(|(_, &c)| {
            let way = unit(sub(c, centres[node]));
            -(way[0] * direction[0] + way[1] * direction[1])
        })
        .fold(1.0, f64::min)
}

fn crosses(curve: &[Point], rect: &Rect) -> bool {
    curve
        .windows(2)
        .any(|w| rect.clip_segment(w[0], w[1]).is_some())
}

/// A drop-shaped loop on the border of a node, in the given direction; further loops are larger.
fn loop_curve(bounds: &Rect, direction: Point, rank: usize) -> Vec<Point> {
    let c = bounds.centre();
    let grow = 1.0 + 0.35 * rank as f64;
    let reach =
        78.0 * grow + (direction[0] * bounds.width() / 2.0).abs() - 18.0 * direction[0].abs();
    let side = times(normal(direction), 46.0 * grow);
    let far = add(c, times(direction, 1.35 * reach));
    let (p, q) = (add(far, side), sub(far, side));
    let curve: Vec<Point> = (0..=CURVE_STEPS)
        .map(|i| {
            let t = i as f64 / CURVE_STEPS as f64;
            let (ab, bc, cd) = (along(c, p, t), along(p, q, t), along(q, c, t));
            along(along(ab, bc, t), along(bc, cd, t), t)
        })
        .collect();
    visible(curve, bounds, bounds)
}

/// Removes the ends that lie in the boxes of the two nodes.
fn visible(curve: Vec<Point>, from: &Rect, to: &Rect) -> Vec<Point> {
    let (from, to) = (from.grown(2.0), to.grown(4.0));
    let first = curve.iter().position(|&p| !from.contains(p));
    let last = curve.iter().rposition(|&p| !to.contains(p));
    let (Some(first), Some(last)) = (first, last) else {
        return Vec::new();
    };
    if first >= last {
        return Vec::new();
    }
    let mut kept = curve[first..=last].to_vec();
    // The borders themselves: clip the segments that were cut.
    if first > 0
        && let Some((_, exit)) = from.clip_segment(curve[first - 1], curve[first])
    {
        kept.insert(0, exit);
    }
    if last + 1 < curve.len()
        && let Some((entry, _)) = to.clip_segment(curve[last], curve[last + 1])
    {
        kept.push(entry);
    }
    kept
}

fn draw_arc(canvas: &mut Canvas, curve: &[Point]) {
    let Some(&tip) = curve.last() else { return };
    // The direction of the head is that of the curve one arrow length before its end.
    let back = curve
        .iter()
        .rev()
        .find(|&&p| length(sub(tip, p)) >= ARROW)
        .or(curve.first());
    let way = unit(sub(tip, *back.unwrap_or(&tip)));
    let base = sub(tip, times(way, ARROW * 0.8));
    let mut line: Vec<Point> = curve
        .iter()
        .copied()
        .filter(|&p| length(sub(tip, p)) > ARROW * 0.8)
        .collect();
    line.push(base);
    canvas.stroke(&line, GREY, STROKE - 0.5);
    canvas.arrowhead(tip, way, ARROW, GREY);
}

fn draw_node(canvas: &mut Canvas, name: &str, bounds: &Rect, emphasis: bool) {
    let r = NODE_HALF;
    let arc = |centre: Point, from: f64| {
        (0..=12).map(move |i| {
            let angle = from + std::f64::consts::PI * f64::from(i) / 12.0;
            [centre[0] + r * angle.cos(), centre[1] + r * angle.sin()]
        })
    };
    let quarter = std::f64::consts::FRAC_PI_2;
    let [_, y] = bounds.centre();
    let pill: Vec<Point> = arc([bounds.x1 - r, y], -quarter)
        .chain(arc([bounds.x0 + r, y], quarter))
        .collect();
    let (ground, border, width, ink) = if emphasis {
        (INKS[0], INKS[0], STROKE, WHITE)
    } else {
        (PAPER, BLACK, THIN_STROKE, BLACK)
    };
    canvas.fill(&pill, ground, 1.0);
    canvas.outline(&pill, border, width);
    canvas.label(name, bounds.centre(), TICK_TEXT, ink);
}

fn label_arcs(
    canvas: &mut Canvas,
    graph: &GraphDrawing,
    curves: &[Vec<Point>],
    boxes: &[Rect],
    frame: &Frame,
) {
    let mut placer = Placer::within(frame.canvas_bounds());
    boxes.iter().for_each(|b| placer.avoid_box(b.grown(2.0)));
    for curve in curves {
        curve
            .windows(2)
            .step_by(2)
            .for_each(|w| placer.avoid_segment(w[0], w[1], 25.0));
        if let Some(&tip) = curve.last() {
            placer.avoid_box(Rect::around(tip, 12.0, 12.0));
        }
    }
    for (arc, curve) in graph.arcs.iter().zip(curves) {
        if arc.2.is_empty() || curve.len() < 3 {
            continue;
        }
        let width = text_width(&arc.2, SMALL_TEXT);
        // A loop runs so that its normal points out of it.
        let enclosed = if arc.0 == arc.1 { 30.0 } else { 0.0 };
        let mut candidates = Vec::new();
        for t in [0.5, 0.42, 0.58, 0.34, 0.66, 0.26, 0.74, 0.82] {
            let i = ((t * (curve.len() - 1) as f64) as usize).clamp(1, curve.len() - 2);
            let n = unit(normal(sub(curve[i + 1], curve[i - 1])));
            for (gap, own) in [(5.0, 0.0), (9.0, 4.0), (15.0, 9.0)] {
                let reach = gap + (n[0].abs() * width + n[1].abs() * SMALL_TEXT * 0.8) / 2.0;
                let off = 40.0 * f64::abs(t - 0.5) + own;
                candidates.push((add(curve[i], times(n, reach)), off));
                candidates.push((sub(curve[i], times(n, reach)), off + 3.0 + enclosed));
            }
        }
        if let Some(rect) = placer.place(width + 3.0, SMALL_TEXT * 0.84, &candidates) {
            canvas.rect(&rect, WHITE, 0.8);
            canvas.label(&arc.2, rect.centre(), SMALL_TEXT, BLACK);
        }
    }
}
