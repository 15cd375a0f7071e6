//! Figures as people write them: scaled units, three digits.

use crate::Estimate;

/// Three significant digits, without an exponent where that stays readable.
pub fn digits(value: f64) -> String {
    // Rounded first, so that 0.9999 becomes 1.00 and not 1.000.
    let value: f64 = format!("{value:.2e}").parse().unwrap_or(value);
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

/// A probability; one that no number of packs could tell from nought is not spelled out.
pub fn probability(value: f64) -> String {
    if 0.0 < value && value < 1e-4 { "below 0.0001".into() } else { digits(value) }
}

/// A length (m) in m, mm or µm.
pub fn length(metres: f64) -> String {
    scaled(metres, &[(1.0, 1.0, "m"), (1e-5, 1e-3, "mm"), (0.0, 1e-6, "µm")])
}

/// A stress (Pa) in MPa, kPa or Pa.
pub fn stress(pascals: f64) -> String {
    scaled(pascals, &[(1e6, 1e6, "MPa"), (1e2, 1e3, "kPa"), (0.0, 1.0, "Pa")])
}

/// A force (N) in N, mN or µN.
pub fn force(newtons: f64) -> String {
    scaled(newtons, &[(1.0, 1.0, "N"), (1e-4, 1e-3, "mN"), (0.0, 1e-6, "µN")])
}

/// In the first unit, given as (least value, size, name), whose least value is reached.
fn scaled(value: f64, units: &[(f64, f64, &str)]) -> String {
    match units.iter().find(|(least, ..)| value.abs() >= *least) {
        Some((_, size, name)) => format!("{} {name}", digits(value / size)),
        None => digits(value),
    }
}

/// A duration (s) as one says it: whole seconds, minutes, or hours with a decimal.
pub fn duration(seconds: f64) -> String {
    match seconds {
        ..1.0 => "1 s".into(),
        ..90.0 => format!("{seconds:.0} s"),
        ..5400.0 => format!("{:.0} min", seconds / 60.0),
        ..172_800.0 => format!("{:.1} h", seconds / 3600.0),
        _ => format!("{:.1} days", seconds / 86_400.0),
    }
}

/// Memory (bytes) as one says it, in MB or GB.
pub fn memory(bytes: f64) -> String {
    if bytes < 1e9 { format!("{:.0} MB", bytes / 1e6) } else { format!("{:.1} GB", bytes / 1e9) }
}

/// A mean and its interval, each in words by `show`.
pub fn estimate(estimate: Option<Estimate>, show: fn(f64) -> String) -> String {
    match estimate {
        None => "not known".into(),
        Some(Estimate { mean, low: Some(low), high: Some(high) }) => {
            format!("{}   ({} to {})", show(mean), show(low), show(high))
        }
        Some(Estimate { mean, .. }) => format!("{}   (limits need a second pack)", show(mean)),
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
        assert_eq!(digits(0.99999), "1.00");
        assert_eq!(probability(3e-9), "below 0.0001");
        assert_eq!(digits(2.346e-7), "2.35e-7");
        assert_eq!(length(5.04e-3), "5.04 mm");
        assert_eq!(length(0.9e-3), "0.900 mm");
        assert_eq!(length(0.0), "0 µm");
        assert_eq!(stress(-2300.0), "-2.30 kPa");
        assert_eq!(stress(300.0), "0.300 kPa");
        assert_eq!(force(3.21e-4), "0.321 mN");
        assert_eq!(duration(600.0), "10 min");
        assert_eq!(duration(36_000.0), "10.0 h");
        assert_eq!(duration(259_200.0), "3.0 days");
    }
}
