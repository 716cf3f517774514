//! Tests of what layout stands on: text widths, plane geometry, ticks.

use crate::figure::geometry::{
    Rect, dashes, distance_to_segment, length, rect_inside, simplified, spread, sub,
};
use crate::figure::scale::Axis;
use crate::figure::{Scale, font};
use proptest::prelude::*;

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
