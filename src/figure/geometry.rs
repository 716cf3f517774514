//! Plane geometry on pixels: rectangles, clipping, dashing, and a chooser of label places.
//!
//! Floating point is enough here: an error moves a label by a hair, never a result.

/// A point or a displacement.
pub(crate) type Point = [f64; 2];

/// An axis-parallel rectangle, `x0 <= x1`, `y0 <= y1`.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(crate) struct Rect {
    pub x0: f64,
    pub y0: f64,
    pub x1: f64,
    pub y1: f64,
}

impl Rect {
    pub fn around(centre: Point, width: f64, height: f64) -> Self {
        Rect {
            x0: centre[0] - width / 2.0,
            y0: centre[1] - height / 2.0,
            x1: centre[0] + width / 2.0,
            y1: centre[1] + height / 2.0,
        }
    }

    pub fn of_points<'a>(points: impl IntoIterator<Item = &'a Point>) -> Option<Self> {
        points.into_iter().fold(None, |found: Option<Rect>, p| {
            let r = found.unwrap_or(Rect {
                x0: p[0],
                y0: p[1],
                x1: p[0],
                y1: p[1],
            });
            Some(Rect {
                x0: r.x0.min(p[0]),
                y0: r.y0.min(p[1]),
                x1: r.x1.max(p[0]),
                y1: r.y1.max(p[1]),
            })
        })
    }

    pub fn width(&self) -> f64 {
        self.x1 - self.x0
    }

    pub fn height(&self) -> f64 {
        self.y1 - self.y0
    }

    pub fn centre(&self) -> Point {
        [(self.x0 + self.x1) / 2.0, (self.y0 + self.y1) / 2.0]
    }

    pub fn grown(&self, by: f64) -> Self {
        Rect {
            x0: self.x0 - by,
            y0: self.y0 - by,
            x1: self.x1 + by,
            y1: self.y1 + by,
        }
    }

    pub fn corners(&self) -> [Point; 4] {
        [
            [self.x0, self.y0],
            [self.x1, self.y0],
            [self.x1, self.y1],
            [self.x0, self.y1],
        ]
    }

    pub fn contains(&self, p: Point) -> bool {
        p[0] >= self.x0 && p[0] <= self.x1 && p[1] >= self.y0 && p[1] <= self.y1
    }

    pub fn contains_rect(&self, other: &Rect) -> bool {
        other.x0 >= self.x0 && other.x1 <= self.x1 && other.y0 >= self.y0 && other.y1 <= self.y1
    }

    pub fn overlap_area(&self, other: &Rect) -> f64 {
        let w = self.x1.min(other.x1) - self.x0.max(other.x0);
        let h = self.y1.min(other.y1) - self.y0.max(other.y0);
        if w > 0.0 && h > 0.0 { w * h } else { 0.0 }
    }

    /// The part of the segment inside the rectangle (Liang and Barsky's parameter clipping).
    pub fn clip_segment(&self, a: Point, b: Point) -> Option<(Point, Point)> {
        let (mut enter, mut leave) = (0.0f64, 1.0f64);
        let d = sub(b, a);
        for (delta, start, low, high) in [
            (d[0], a[0], self.x0, self.x1),
            (d[1], a[1], self.y0, self.y1),
        ] {
            if delta == 0.0 {
                if start < low || start > high {
                    return None;
                }
            } else {
                let (s, t) = ((low - start) / delta, (high - start) / delta);
                enter = enter.max(s.min(t));
                leave = leave.min(s.max(t));
            }
        }
        (enter <= leave).then(|| (along(a, b, enter), along(a, b, leave)))
    }

    /// The polyline cut to the rectangle, as the pieces that remain.
    pub fn clip_polyline(&self, points: &[Point]) -> Vec<Vec<Point>> {
        let mut pieces: Vec<Vec<Point>> = Vec::new();
        for pair in points.windows(2) {
            let Some((a, b)) = self.clip_segment(pair[0], pair[1]) else {
                continue;
            };
            match pieces.last_mut() {
                Some(piece) if piece.last() == Some(&a) => piece.push(b),
                _ => pieces.push(vec![a, b]),
            }
        }
        pieces
    }

    /// The polygon cut to the rectangle (Sutherland and Hodgman, one side of the rectangle after another).
    pub fn clip_polygon(&self, polygon: &[Point]) -> Vec<Point> {
        let sides = [
            (0, self.x0, 1.0),
            (0, self.x1, -1.0),
            (1, self.y0, 1.0),
            (1, self.y1, -1.0),
        ];
        sides
            .iter()
            .fold(polygon.to_vec(), |rest, &(axis, bound, sign)| {
                let depth = |p: Point| sign * (p[axis] - bound);
                let mut kept = Vec::new();
                for (i, &p) in rest.iter().enumerate() {
                    let q = rest[(i + 1) % rest.len()];
                    if depth(p) >= 0.0 {
                        kept.push(p);
                    }
                    if (depth(p) > 0.0 && depth(q) < 0.0) || (depth(p) < 0.0 && depth(q) > 0.0) {
                        kept.push(along(p, q, depth(p) / (depth(p) - depth(q))));
                    }
                }
                kept
            })
    }
}

pub(crate) fn add(a: Point, b: Point) -> Point {
    [a[0] + b[0], a[1] + b[1]]
}

pub(crate) fn sub(a: Point, b: Point) -> Point {
    [a[0] - b[0], a[1] - b[1]]
}

pub(crate) fn times(a: Point, factor: f64) -> Point {
    [a[0] * factor, a[1] * factor]
}

pub(crate) fn length(a: Point) -> f64 {
    a[0].hypot(a[1])
}

/// The direction of `a` with length 1; the zero vector stays zero.
pub(crate) fn unit(a: Point) -> Point {
    let l = length(a);
    if l > 0.0 {
        [a[0] / l, a[1] / l]
    } else {
        [0.0, 0.0]
    }
}

/// `a` turned by a quarter (x, y) → (y, −x).
pub(crate) fn normal(a: Point) -> Point {
    [a[1], -a[0]]
}

/// The point at parameter `t` from `a` to `b`.
pub(crate) fn along(a: Point, b: Point, t: f64) -> Point {
    add(a, times(sub(b, a), t))
}

/// Twice the signed area of a polygon.
pub(crate) fn double_area(polygon: &[Point]) -> f64 {
    edges(polygon).map(|(a, b)| a[0] * b[1] - a[1] * b[0]).sum()
}

/// The sides of a closed polygon; none for fewer than two corners.
pub(crate) fn edges(polygon: &[Point]) -> impl Iterator<Item = (Point, Point)> + '_ {
    let count = if polygon.len() < 2 { 0 } else { polygon.len() };
    (0..count).map(move |i| (polygon[i], polygon[(i + 1) % polygon.len()]))
}

/// The mean of the points; the origin for none.
pub(crate) fn mean(points: &[Point]) -> Point {
    let n = points.len().max(1) as f64;
    points
        .iter()
        .fold([0.0, 0.0], |s, &p| [s[0] + p[0] / n, s[1] + p[1] / n])
}

/// Even-odd test.
pub(crate) fn inside(polygon: &[Point], p: Point) -> bool {
    edges(polygon).fold(false, |odd, (a, b)| {
        let crosses = (a[1] > p[1]) != (b[1] > p[1])
            && p[0] < (b[0] - a[0]) * (p[1] - a[1]) / (b[1] - a[1]) + a[0];
        odd != crosses
    })
}

/// Whether the whole rectangle lies in the polygon.
pub(crate) fn rect_inside(polygon: &[Point], rect: &Rect) -> bool {
    rect.corners().iter().all(|&c| inside(polygon, c))
        && edges(polygon).all(|(a, b)| rect.clip_segment(a, b).is_none())
}

/// Cuts a polyline into dashes; `pattern` lists drawn and skipped lengths in turn, all positive.
pub(crate) fn dashes(points: &[Point], pattern: &[f64]) -> Vec<Vec<Point>> {
    let mut drawn: Vec<Vec<Point>> = Vec::new();
    let (mut index, mut left) = (0, pattern[0]);
    let mut current: Vec<Point> = points.first().map(|&p| vec![p]).unwrap_or_default();
    for pair in points.windows(2) {
        let (mut from, to) = (pair[0], pair[1]);
        // Ends: every round uses up `left`, which is then renewed with a positive length.
        loop {
            let rest = length(sub(to, from));
            if rest <= left {
                left -= rest;
                if index % 2 == 0 {
                    current.push(to);
                }
                break;
            }
            from = along(from, to, left / rest);
            if index % 2 == 0 {
                current.push(from);
                drawn.push(std::mem::take(&mut current));
            } else {
                current = vec![from];
            }
            index = (index + 1) % pattern.len();
            left = pattern[index];
        }
    }
    if index % 2 == 0 && current.len() > 1 {
        drawn.push(current);
    }
    drawn
}

/// Drops points that lie within `tolerance` of the line between those kept (Ramer, Douglas and Peucker).
pub(crate) fn simplified(points: &[Point], tolerance: f64) -> Vec<Point> {
    let mut keep = vec![false; points.len()];
    let mut spans = vec![(0, points.len().saturating_sub(1))];
    // Ends because every split makes both spans shorter.
    while let Some((first, last)) = spans.pop() {
        let Some((a, b)) = points.get(first).zip(points.get(last)) else {
            continue;
        };
        keep[first] = true;
        keep[last] = true;
        let far = (first + 1..last)
            .map(|i| (distance_to_segment(points[i], *a, *b), i))
            .max_by(|x, y| x.0.total_cmp(&y.0));
        if let Some((_, i)) = far.filter(|f| f.0 > tolerance) {
            spans.push((first, i));
            spans.push((i, last));
        }
    }
    points
        .iter()
        .zip(keep)
        .filter(|(_, keep)| *keep)
        .map(|(p, _)| *p)
        .collect()
}

/// The distance of `p` from the segment from `a` to `b`.
pub(crate) fn distance_to_segment(p: Point, a: Point, b: Point) -> f64 {
    let (d, q) = (sub(b, a), sub(p, a));
    let square = d[0] * d[0] + d[1] * d[1];
    let t = if square > 0.0 {
        ((q[0] * d[0] + q[1] * d[1]) / square).clamp(0.0, 1.0)
    } else {
        0.0
    };
    length(sub(p, along(a, b, t)))
}

/// Positions at least `gap` apart, in the order given, as near as possible to the wishes (least squares) and
/// inside `low..=high` as far as there is room. Wishes must be sorted. Pool-adjacent-violators.
pub(crate) fn spread(wishes: &[f64], gap: f64, low: f64, high: f64) -> Vec<f64> {
    let mut pools: Vec<(f64, usize)> = Vec::new();
    for (i, &wish) in wishes.iter().enumerate() {
        pools.push((wish - gap * i as f64, 1));
        while let [.., (a, m), (b, n)] = pools[..] {
            if a <= b {
                break;
            }
            pools.truncate(pools.len() - 2);
            let total = (m + n) as f64;
            pools.push(((a * m as f64 + b * n as f64) / total, m + n));
        }
    }
    let last = high - gap * wishes.len().saturating_sub(1) as f64;
    pools
        .iter()
        .flat_map(|&(value, count)| std::iter::repeat_n(value.min(last).max(low), count))
        .enumerate()
        .map(|(i, value)| value + gap * i as f64)
        .collect()
}

/// Chooses places for labels: each label takes the cheapest of its candidates, where running into
/// something costs more than being far away. Placed labels become obstacles for later ones.
#[derive(Debug, Default)]
pub(crate) struct Placer {
    segments: Vec<(Point, Point, f64)>,
    boxes: Vec<Rect>,
    regions: Vec<(Vec<Point>, f64)>,
    bounds: Option<Rect>,
}

/// Cost of covering a label or leaving the canvas.
const COLLISION: f64 = 10_000.0;

impl Placer {
    pub fn within(bounds: Rect) -> Self {
        Placer {
            bounds: Some(bounds),
            ..Placer::default()
        }
    }

    pub fn avoid_segment(&mut self, a: Point, b: Point, cost: f64) {
        self.segments.push((a, b, cost));
    }

    pub fn avoid_box(&mut self, rect: Rect) {
        self.boxes.push(rect);
    }

    pub fn avoid_region(&mut self, polygon: Vec<Point>, cost: f64) {
        self.regions.push((polygon, cost));
    }

    fn cost(&self, rect: &Rect) -> f64 {
        let outside = self
            .bounds
            .is_some_and(|bounds| !bounds.contains_rect(rect));
        let boxes: f64 = self
            .boxes
            .iter()
            .map(|other| rect.overlap_area(other))
            .filter(|&area| area > 0.0)
            .map(|area| COLLISION + area)
            .sum();
        let segments: f64 = self
            .segments
            .iter()
            .filter(|(a, b, _)| rect.clip_segment(*a, *b).is_some())
            .map(|s| s.2)
            .sum();
        let regions: f64 = self
            .regions
            .iter()
            .filter(|(polygon, _)| inside(polygon, rect.centre()))
            .map(|r| r.1)
            .sum();
        boxes + segments + regions + if outside { 2.0 * COLLISION } else { 0.0 }
    }

    /// The rectangle of the best candidate `(centre, own cost)` and whether it is free of labels and of the
    /// canvas edge. The rectangle is reserved only if it is free.
    pub fn place(&mut self, width: f64, height: f64, candidates: &[(Point, f64)]) -> Option<Rect> {
        let mut best: Option<(f64, Rect)> = None;
        for &(centre, own) in candidates {
            let rect = Rect::around(centre, width, height);
            let cost = own + self.cost(&rect);
            if best.is_none_or(|(least, _)| cost < least) {
                best = Some((cost, rect));
            }
        }
        let (cost, rect) = best?;
        (cost < COLLISION).then(|| {
            self.boxes.push(rect);
            rect
        })
    }
}
