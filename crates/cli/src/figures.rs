//! Figures as people write them: scaled units, three digits.

use bedswell_sim::Estimate;

/// Three significant digits, without an exponent where that stays readable.
pub(crate) fn digits(value: f64) -> String {
    if value == 0.0 {
        return "0".into();
    }
    let magnitude = value.abs().log10().floor();
    if !(-4.0..6.0).contains(&magnitude) {
        return format!("{value:.2e}");
    }
    let decimals = (2.0 - magnitude).max(0.0) as usize;
    format!("{value:.decimals$}")
}

/// A length (m) in µm, mm, cm or m.
pub(crate) fn length(metres: f64) -> String {
    scaled(metres, &[(1.0, "m"), (1e-2, "cm"), (1e-3, "mm"), (1e-6, "µm")])
}

/// A stress (Pa) in Pa, kPa or MPa.
pub(crate) fn stress(pascals: f64) -> String {
    scaled(pascals, &[(1e6, "MPa"), (1e3, "kPa"), (1.0, "Pa")])
}

/// A force (N) in N, mN or µN.
pub(crate) fn force(newtons: f64) -> String {
    scaled(newtons, &[(1.0, "N"), (1e-3, "mN"), (1e-6, "µN")])
}

/// A duration (s) in s, min or h.
pub(crate) fn duration(seconds: f64) -> String {
    scaled(seconds, &[(3600.0, "h"), (60.0, "min"), (1.0, "s")])
}

/// Memory (bytes) in MB or GB.
pub(crate) fn memory(bytes: f64) -> String {
    scaled(bytes, &[(1e9, "GB"), (1e6, "MB")])
}

/// In the largest unit of which there is at least one, else in the smallest.
fn scaled(value: f64, units: &[(f64, &str)]) -> String {
    let fits = |(scale, _): &&(f64, &str)| value.abs() >= *scale;
    match units.iter().find(fits).or(units.last()) {
        Some((scale, unit)) => format!("{} {unit}", digits(value / scale)),
        None => digits(value),
    }
}

/// A mean and its interval, each in words by `show`.
pub(crate) fn estimate(estimate: Option<Estimate>, show: fn(f64) -> String) -> String {
    match estimate {
        None => "not known".into(),
        Some(Estimate { mean, low, high }) => format!("{}   ({} to {})", show(mean), show(low), show(high)),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn figures_keep_three_digits_and_a_readable_unit() {
        assert_eq!(digits(0.0), "0");
        assert_eq!(digits(0.04567), "0.0457");
        assert_eq!(digits(123.4), "123");
        assert_eq!(digits(2.345e-7), "2.35e-7");
        assert_eq!(length(5.04e-3), "5.04 mm");
        assert_eq!(length(0.15), "15.0 cm");
        assert_eq!(stress(-2300.0), "-2.30 kPa");
        assert_eq!(force(3.21e-4), "321 µN");
        assert_eq!(duration(90.0), "1.50 min");
    }
}
