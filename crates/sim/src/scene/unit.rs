//! Quantities written with their units.

use std::ops::RangeInclusive;

/// What kind of quantity a key wants.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub(crate) enum Kind {
    Length,
    Volume,
    Stress,
    FractureEnergy,
    Density,
    MassRatio,
    Concentration,
    Temperature,
    Angle,
    Time,
    Diffusion,
    Flow,
}

/// A unit: its spelling, its kind, and its size (a power of ten times a factor) and zero
/// in the base unit of its kind.
struct Unit {
    name: &'static str,
    kind: Kind,
    power: i32,
    factor: f64,
    zero: f64,
}

const fn unit(name: &'static str, kind: Kind, power: i32) -> Unit {
    Unit { name, kind, power, factor: 1.0, zero: 0.0 }
}

const fn odd_unit(name: &'static str, kind: Kind, factor: f64) -> Unit {
    Unit { name, kind, power: 0, factor, zero: 0.0 }
}

const fn celsius(name: &'static str) -> Unit {
    Unit { name, kind: Kind::Temperature, power: 0, factor: 1.0, zero: 273.15 }
}

/// Pa in a pound-force per square inch, by the definitions of the pound (0.45359237 kg),
/// standard gravity (9.80665 m/s²) and the inch (0.0254 m).
const POUND_PER_SQUARE_INCH: f64 = 0.453_592_37 * 9.806_65 / (0.0254 * 0.0254);

/// Seconds in an hour and in a day.
const HOUR: f64 = 3600.0;
const DAY: f64 = 24.0 * HOUR;

/// Radians in a degree.
const DEGREE: f64 = std::f64::consts::PI / 180.0;

/// The first unit of each kind is the one resolved scenes are written in.
const UNITS: &[Unit] = &[
    unit("m", Kind::Length, 0),
    unit("cm", Kind::Length, -2),
    unit("mm", Kind::Length, -3),
    unit("um", Kind::Length, -6),
    unit("µm", Kind::Length, -6),
    unit("m3", Kind::Volume, 0),
    unit("cm3", Kind::Volume, -6),
    unit("mL", Kind::Volume, -6),
    unit("mm3", Kind::Volume, -9),
    unit("Pa", Kind::Stress, 0),
    unit("hPa", Kind::Stress, 2),
    unit("kPa", Kind::Stress, 3),
    unit("MPa", Kind::Stress, 6),
    unit("bar", Kind::Stress, 5),
    odd_unit("psi", Kind::Stress, POUND_PER_SQUARE_INCH),
    unit("J/m2", Kind::FractureEnergy, 0),
    unit("mJ/m2", Kind::FractureEnergy, -3),
    unit("N/m", Kind::FractureEnergy, 0),
    unit("kg/m3", Kind::Density, 0),
    unit("g/cm3", Kind::Density, 3),
    unit("t/m3", Kind::Density, 3),
    unit("kg/kg", Kind::MassRatio, 0),
    unit("g/g", Kind::MassRatio, 0),
    unit("g/kg", Kind::MassRatio, -3),
    unit("mol/L", Kind::Concentration, 0),
    unit("mmol/L", Kind::Concentration, -3),
    unit("K", Kind::Temperature, 0),
    celsius("degC"),
    celsius("°C"),
    unit("rad", Kind::Angle, 0),
    odd_unit("deg", Kind::Angle, DEGREE),
    odd_unit("°", Kind::Angle, DEGREE),
    unit("s", Kind::Time, 0),
    odd_unit("min", Kind::Time, 60.0),
    odd_unit("h", Kind::Time, HOUR),
    odd_unit("hours", Kind::Time, HOUR),
    odd_unit("d", Kind::Time, DAY),
    odd_unit("days", Kind::Time, DAY),
    odd_unit("weeks", Kind::Time, 7.0 * DAY),
    unit("m2/s", Kind::Diffusion, 0),
    unit("cm2/s", Kind::Diffusion, -4),
    unit("mm2/s", Kind::Diffusion, -6),
    unit("m3/s", Kind::Flow, 0),
    unit("mm3/s", Kind::Flow, -9),
    odd_unit("mm3/h", Kind::Flow, 1e-9 / HOUR),
    odd_unit("mL/h", Kind::Flow, 1e-6 / HOUR),
];

impl Kind {
    fn noun(self) -> &'static str {
        match self {
            Kind::Length => "a length",
            Kind::Volume => "a volume",
            Kind::Stress => "a stress",
            Kind::FractureEnergy => "a fracture energy",
            Kind::Density => "a density",
            Kind::MassRatio => "a mass ratio",
            Kind::Concentration => "a concentration",
            Kind::Temperature => "a temperature",
            Kind::Angle => "an angle",
            Kind::Time => "a time",
            Kind::Diffusion => "a diffusion coefficient",
            Kind::Flow => "a flow",
        }
    }

    fn units(self) -> impl Iterator<Item = &'static Unit> {
        UNITS.iter().filter(move |unit| unit.kind == self)
    }

    /// The base unit, in which resolved scenes are written.
    pub(crate) fn base(self) -> &'static str {
        self.units().next().map_or("", |unit| unit.name)
    }

    fn listed(self) -> String {
        self.units().map(|unit| unit.name).collect::<Vec<_>>().join(", ")
    }
}

/// Reads `"1.2 mm"` as a quantity of `kind` in its base unit; the error says what is wrong.
pub(crate) fn parse_quantity(text: &str, kind: Kind) -> Result<f64, String> {
    let text = text.trim();
    let (number, name) = match text.split_once(char::is_whitespace) {
        Some((number, name)) => (number, name.trim()),
        None => split_before_letters(text),
    };
    let Ok(value) = number.parse::<f64>() else {
        return Err(format!("not a number with a unit; write for example \"1.5 {}\"", kind.base()));
    };
    if name.is_empty() {
        return Err(format!("the unit is missing; {} needs one of {}", kind.noun(), kind.listed()));
    }
    let Some(unit) = UNITS.iter().find(|unit| unit.name == name) else {
        return Err(format!("unknown unit `{name}`; {} needs one of {}", kind.noun(), kind.listed()));
    };
    if unit.kind != kind {
        let got = unit.kind.noun();
        return Err(format!(
            "`{name}` is the unit of {got}, but {} is needed ({})",
            kind.noun(),
            kind.listed()
        ));
    }
    if !value.is_finite() {
        return Err("must be a finite number".to_owned());
    }
    // Only an exponent beyond 32 bits has no shifted form, and it makes any finite value zero.
    Ok(times_power_of_ten(number, unit.power).unwrap_or(value) * unit.factor + unit.zero)
}

/// The decimal number with its point moved, so that "3.6 mm" is 0.0036 m to the last bit.
fn times_power_of_ten(number: &str, power: i32) -> Option<f64> {
    let (digits, own) = number.split_once(['e', 'E']).unwrap_or((number, "0"));
    format!("{digits}e{}", own.parse::<i32>().ok()?.checked_add(power)?).parse().ok()
}

/// `"1.5mm"` is as good as `"1.5 mm"`; the exponent of `"1e-3m"` is part of the number.
fn split_before_letters(text: &str) -> (&str, &str) {
    let longest = text.char_indices().map(|(at, _)| at).chain([text.len()]).rev();
    longest
        .into_iter()
        .find(|&at| text[..at].parse::<f64>().is_ok())
        .map_or((text, ""), |at| text.split_at(at))
}

/// A range in words, in the base unit of `kind` or a plain number.
pub(crate) fn range_in_words(range: &RangeInclusive<f64>, kind: Option<Kind>) -> String {
    let unit = kind.map_or(String::new(), |kind| format!(" {}", kind.base()));
    match (range.start().is_finite(), range.end().is_finite()) {
        (true, true) => format!("{} to {}{unit}", range.start(), range.end()),
        (true, false) => format!("{}{unit} or more", range.start()),
        (false, true) => format!("{}{unit} or less", range.end()),
        (false, false) => "any finite number".to_owned(),
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn units_scale_to_the_international_system() {
        for (text, kind, value) in [
            ("1.5 mm", Kind::Length, 1.5e-3),
            ("30cm", Kind::Length, 0.3),
            ("1e-3m", Kind::Length, 1e-3),
            ("3.6 mm", Kind::Length, 3.6e-3),
            ("2.5E+1 um", Kind::Length, 2.5e-5),
            ("6 kPa", Kind::Stress, 6000.0),
            ("200 mJ/m2", Kind::FractureEnergy, 0.2),
            ("25 degC", Kind::Temperature, 298.15),
            ("3 g/kg", Kind::MassRatio, 3e-3),
            ("1 mm3", Kind::Volume, 1e-9),
            ("3 days", Kind::Time, 259_200.0),
            ("1.5 h", Kind::Time, 5400.0),
            ("2e-10 m2/s", Kind::Diffusion, 2e-10),
            ("20 mm3/s", Kind::Flow, 2e-8),
            ("34 deg", Kind::Angle, 34.0 * std::f64::consts::PI / 180.0),
        ] {
            assert_eq!(parse_quantity(text, kind), Ok(value), "{text}");
        }
    }

    #[test]
    fn pounds_per_square_inch_are_as_tabulated() {
        // NIST Special Publication 811, appendix B.8, from memory: 6.894 757 E+03.
        let pascals = parse_quantity("1 psi", Kind::Stress).unwrap();
        assert!((pascals - 6_894.757_293_168).abs() < 1e-8, "{pascals}");
    }

    #[test]
    fn wrong_and_missing_units_are_named() {
        assert!(parse_quantity("3 kPa", Kind::Length).unwrap_err().contains("`kPa` is the unit of a stress"));
        assert!(parse_quantity("3", Kind::Length).unwrap_err().contains("unit is missing"));
        assert!(parse_quantity("3 furlongs", Kind::Length).unwrap_err().contains("unknown unit `furlongs`"));
        assert!(parse_quantity("NaN mm", Kind::Length).unwrap_err().contains("finite"));
        assert!(parse_quantity("mm", Kind::Length).unwrap_err().contains("not a number"));
    }
}
