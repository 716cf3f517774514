//! The claims that `style` makes for its colours, recomputed.

use crate::figure::style::{BLACK, GREY, INKS, Ink, TINTS, WHITE};

/// Linear light of an sRGB channel (IEC 61966-2-1).
fn linear(channel: u8) -> f64 {
    let c = f64::from(channel) / 255.0;
    if c <= 0.04045 {
        c / 12.92
    } else {
        ((c + 0.055) / 1.055).powf(2.4)
    }
}

fn light(ink: Ink) -> [f64; 3] {
    [linear(ink.0), linear(ink.1), linear(ink.2)]
}

fn luminance([r, g, b]: [f64; 3]) -> f64 {
    0.2126 * r + 0.7152 * g + 0.0722 * b
}

/// Contrast ratio of WCAG 2.
fn contrast(a: Ink, b: Ink) -> f64 {
    let (x, y) = (luminance(light(a)) + 0.05, luminance(light(b)) + 0.05);
    x.max(y) / x.min(y)
}

/// CIE L*a*b* under D65.
fn lab([r, g, b]: [f64; 3]) -> [f64; 3] {
    let xyz = [
        (0.4124 * r + 0.3576 * g + 0.1805 * b) / 0.9505,
        0.2126 * r + 0.7152 * g + 0.0722 * b,
        (0.0193 * r + 0.1192 * g + 0.9505 * b) / 1.089,
    ];
    let [x, y, z] = xyz.map(|t: f64| {
        if t > 0.008856 {
            t.cbrt()
        } else {
            7.787 * t + 16.0 / 116.0
        }
    });
    [116.0 * y - 16.0, 500.0 * (x - y), 200.0 * (y - z)]
}

/// Full protanopia, deuteranopia and tritanopia on linear light: Machado, Oliveira, Fernandes 2009
/// (matrices from memory; each row must sum to 1, since white stays white).
const DEFICIENCIES: [[[f64; 3]; 3]; 3] = [
    [
        [0.152286, 1.052583, -0.204868],
        [0.114503, 0.786281, 0.099216],
        [-0.003882, -0.048116, 1.051998],
    ],
    [
        [0.367322, 0.860646, -0.227968],
        [0.280085, 0.672501, 0.047413],
        [-0.011820, 0.042940, 0.968881],
    ],
    [
        [1.255528, -0.076749, -0.178779],
        [-0.078411, 0.930809, 0.147602],
        [0.004733, 0.691367, 0.303900],
    ],
];

fn difference(a: [f64; 3], b: [f64; 3]) -> f64 {
    let (p, q) = (lab(a), lab(b));
    (0..3).map(|i| (p[i] - q[i]).powi(2)).sum::<f64>().sqrt()
}

#[test]
fn inks_contrast_with_the_ground() {
    for ink in INKS {
        assert!(
            contrast(ink, WHITE) >= 3.0,
            "{ink:?} has {}",
            contrast(ink, WHITE)
        );
    }
    assert!(contrast(GREY, WHITE) >= 4.5);
    for tint in TINTS {
        assert!(
            contrast(BLACK, tint) >= 4.5,
            "{tint:?} has {}",
            contrast(BLACK, tint)
        );
    }
}

#[test]
fn neighbouring_inks_and_tints_differ_in_lightness() {
    let lightness = |ink: Ink| lab(light(ink))[0];
    // Any two tints can be neighbours, whatever their numbers.
    for (i, &tint) in TINTS.iter().enumerate() {
        for &other in &TINTS[..i] {
            let gap = (lightness(tint) - lightness(other)).abs();
            assert!(gap >= 4.0, "{tint:?} and {other:?} differ by {gap} in L*");
        }
    }
    for list in [&INKS[..], &TINTS[..]] {
        for pair in list.windows(2) {
            let gap = (lightness(pair[0]) - lightness(pair[1])).abs();
            assert!(gap >= 10.0, "{pair:?} differ by {gap} in L*");
        }
    }
}

#[test]
fn inks_stay_apart_for_colour_deficiencies() {
    for matrix in DEFICIENCIES {
        for row in matrix {
            assert!((row.iter().sum::<f64>() - 1.0).abs() < 1e-5);
        }
        let seen = |ink: Ink| {
            let l = light(ink);
            matrix.map(|row| (0..3).map(|i| row[i] * l[i]).sum::<f64>().clamp(0.0, 1.0))
        };
        for pair in INKS.windows(2) {
            let d = difference(seen(pair[0]), seen(pair[1]));
            assert!(d >= 20.0, "{pair:?} are only {d} apart");
        }
    }
}
