use super::CheckLine;
use bedswell_grains::{Grading, SizeNumbers};

const SOURCE: &str = "published sieve exercise, worked with the logarithmic rule";

pub(super) const LINES: &[fn() -> CheckLine] = &[
    || line("D10 of a sieve analysis (mm)", |sizes| sizes.d10.map(|d| d * 1e3), 0.144_139),
    || line("coefficient of uniformity of the same", |sizes| sizes.uniformity, 2.942_881),
    || line("coefficient of curvature of the same", |sizes| sizes.curvature, 1.209_887),
];

/// The sieve analysis: 28, 42, 48, 128, 221, 86 and 40 g held back, 24 g in the pan.
fn line(quantity: &'static str, number: fn(SizeNumbers) -> Option<f64>, reference: f64) -> CheckLine {
    const OPENINGS_MM: [f64; 8] = [0.075, 0.150, 0.250, 0.425, 0.850, 2.0, 4.75, 9.5];
    const PASSING_G: [f64; 8] = [24.0, 64.0, 150.0, 371.0, 499.0, 547.0, 589.0, 617.0];
    let openings = OPENINGS_MM.map(|mm| mm * 1e-3);
    let percents = PASSING_G.map(|grams| 100.0 * grams / 617.0);
    let numbers = Grading::from_sieves(&openings, &percents, Some(openings[0])).map(|g| g.soil.numbers());
    let value = numbers.ok().and_then(number).unwrap_or(f64::NAN);
    CheckLine { subject: "soil", quantity, value, reference, source: SOURCE, tolerance: 5e-6 }
}
