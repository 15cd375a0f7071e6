//! Colour scales can be read by eyes that lack one kind of cone, and in grey.

use bedswell_painter::Colour;
use bedswell_picture::Scale;

/// Linear light of an sRGB channel (IEC 61966-2-1).
fn linear(channel: u8) -> f64 {
    let c = f64::from(channel) / 255.0;
    if c <= 0.04045 { c / 12.92 } else { ((c + 0.055) / 1.055).powf(2.4) }
}

/// What eyes without long-wave (protanopia) or middle-wave cones (deuteranopia) see, in
/// linear light: Viénot, Brettel & Mollon 1999, Color Res. Appl. 24:243, as matrices in
/// linear RGB (values from memory).
const LACKING: [[[f64; 3]; 3]; 2] = [
    [[0.11238, 0.88762, 0.0], [0.11238, 0.88762, 0.0], [0.00401, -0.00401, 1.0]],
    [[0.29275, 0.70725, 0.0], [0.29275, 0.70725, 0.0], [-0.02234, 0.02234, 1.0]],
];

fn seen(colour: Colour, matrix: &[[f64; 3]; 3]) -> [f64; 3] {
    let light = [colour.r, colour.g, colour.b].map(linear);
    matrix.map(|row| row.iter().zip(light).map(|(weight, light)| weight * light).sum::<f64>().max(0.0))
}

/// CIE 1976 L*a*b* under D65 (CIE 15).
fn lab([r, g, b]: [f64; 3]) -> [f64; 3] {
    let xyz = [
        (0.4124 * r + 0.3576 * g + 0.1805 * b) / 0.9505,
        0.2126 * r + 0.7152 * g + 0.0722 * b,
        (0.0193 * r + 0.1192 * g + 0.9505 * b) / 1.089,
    ];
    let [x, y, z] = xyz.map(|t| if t > 0.008856 { t.cbrt() } else { 7.787 * t + 16.0 / 116.0 });
    [116.0 * y - 16.0, 500.0 * (x - y), 200.0 * (y - z)]
}

fn apart(one: [f64; 3], other: [f64; 3]) -> f64 {
    one.iter().zip(other).map(|(a, b)| (a - b).powi(2)).sum::<f64>().sqrt()
}

#[test]
fn tension_and_compression_differ_for_every_eye() {
    let scale = Scale::diverging(1.0);
    for matrix in &LACKING {
        for value in [0.3_f32, 0.5, 0.8, 1.0] {
            let [tension, compression] = [value, -value].map(|v| lab(seen(scale.colour(v), matrix)));
            let difference = apart(tension, compression);
            // 2.3 is just noticeable (Mahy et al. 1994, from memory).
            assert!(difference > 15.0, "at {value}: {difference}");
        }
    }
}

#[test]
fn lightness_falls_away_from_zero_and_along_a_rising_scale() {
    let lightness = |colour: Colour| lab([colour.r, colour.g, colour.b].map(linear))[0];
    let diverging = Scale::diverging(1.0);
    let rising = Scale::rising(0.0, 1.0);
    for step in 0..20 {
        let (near, far) = (step as f32 / 20.0, (step + 1) as f32 / 20.0);
        for side in [-1.0, 1.0] {
            assert!(lightness(diverging.colour(side * far)) < lightness(diverging.colour(side * near)));
        }
        assert!(lightness(rising.colour(far)) < lightness(rising.colour(near)));
    }
}

#[test]
fn colours_read_back_to_their_values() {
    for scale in [Scale::diverging(400.0), Scale::rising(2.0, 90.0)] {
        let range = scale.high - scale.low;
        for step in 0..=40 {
            let value = scale.low + range * step as f32 / 40.0;
            let (read, apart) = scale.value(scale.colour(value));
            assert_eq!(apart, 0);
            assert!((read - value).abs() < 0.01 * range, "{value} reads back as {read}");
        }
    }
}
