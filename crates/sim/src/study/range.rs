use super::Variation;
use super::design::Setting;
use super::latin_hypercube::Stratum;
use super::quantity::number_and_unit;
use crate::SceneError;
use crate::scene::{Entry, Node, Place, Value};

/// The range of a continuous factor, in its own unit.
#[derive(Clone, Debug)]
pub(super) struct Range {
    from: f64,
    to: f64,
    /// Empty for plain numbers.
    unit: String,
    logarithmic: bool,
    /// Whether only whole numbers are meant, as both ends are written as such.
    whole: bool,
    /// Where the range stands in the study file.
    place: Place,
}

impl Range {
    /// Reads `from`, `to` and `logarithmic` of a factor.
    pub(super) fn read(from: &Entry<'_>, to: &Entry<'_>, logarithmic: bool) -> Result<Self, SceneError> {
        let ((low, unit), (high, other)) = (end(from)?, end(to)?);
        if unit != other {
            let needed = if unit.is_empty() { "no unit".to_owned() } else { format!("the unit {unit}") };
            return Err(to.refuse(format!("must have {needed}, as `from` has")));
        }
        if low >= high {
            return Err(
                from.refuse(format!("must be below `to`, which is {}; swap the two", to.node.written()))
            );
        }
        if logarithmic && low <= 0.0 {
            return Err(from.refuse(
                "a logarithmic range needs both ends above zero; raise it, or leave `logarithmic` out",
            ));
        }
        let whole = [from, to].iter().all(|end| matches!(end.node.value, Value::Integer(_)));
        let place = from.node.place.clone();
        Ok(Self { from: low, to: high, unit: unit.to_owned(), logarithmic, whole, place })
    }

    /// The range as a summary tells it.
    pub(super) fn variation(&self) -> Variation {
        Variation::Range {
            from: self.written(self.from),
            to: self.written(self.to),
            logarithmic: self.logarithmic,
        }
    }

    /// The value of one of so many samples.
    pub(super) fn setting(&self, stratum: Stratum, samples: usize) -> Setting {
        let value = if self.whole {
            let beyond = Self { to: self.to + 1.0, ..self.clone() };
            beyond.at(stratum.place).floor().clamp(self.from, self.to)
        } else {
            let edge = |number: usize| self.at(number as f64 / samples as f64);
            rounded(self.at(stratum.place), edge(stratum.number), edge(stratum.number + 1))
        };
        let written = self.written(value);
        let node_value = match (self.whole, self.unit.is_empty()) {
            (true, _) => Value::Integer(value as i64),
            (false, true) => Value::Number(value),
            (false, false) => Value::Text(written.clone()),
        };
        Setting {
            node: Node { value: node_value, place: self.place.clone() },
            position: self.position(value),
            value: written,
        }
    }

    fn at(&self, place: f64) -> f64 {
        if self.logarithmic {
            self.from * (self.to / self.from).powf(place)
        } else {
            self.from + place * (self.to - self.from)
        }
    }

    fn position(&self, value: f64) -> f64 {
        if self.logarithmic {
            (value / self.from).ln() / (self.to / self.from).ln()
        } else {
            (value - self.from) / (self.to - self.from)
        }
    }

    fn written(&self, value: f64) -> String {
        if self.unit.is_empty() { value.to_string() } else { format!("{value} {}", self.unit) }
    }
}

/// The number and unit of one end.
fn end<'a>(entry: &Entry<'a>) -> Result<(f64, &'a str), SceneError> {
    match &entry.node.value {
        Value::Integer(integer) => Ok((*integer as f64, "")),
        Value::Number(number) if number.is_finite() => Ok((*number, "")),
        Value::Text(text) => match number_and_unit(text) {
            Some((number, unit)) if !unit.is_empty() => Ok((number, unit)),
            Some(_) => Err(entry.refuse("the unit is missing; a number without one stands without quotes")),
            None => Err(entry.refuse("not a number with a unit; write for example \"3 cm\"")),
        },
        _ => Err(entry.refuse("must be a number, or text with a unit such as \"3 cm\"")),
    }
}

/// The value with as many decimals as matter in a stratum from `low` to `high`, so that it
/// reads well; it stays in its stratum.
fn rounded(value: f64, low: f64, high: f64) -> f64 {
    let decimals = (-((high - low) / 1000.0).log10()).ceil().clamp(0.0, 300.0) as usize;
    let rounded = format!("{value:.decimals$}").parse().unwrap_or(value);
    if (low..=high).contains(&rounded) { rounded } else { value }
}

#[cfg(test)]
mod tests {
    use super::*;
    use std::path::Path;

    fn range(from: f64, to: f64, logarithmic: bool, whole: bool) -> Range {
        let place = Place { file: Path::new("study.toml").into(), line: 1 };
        Range { from, to, unit: if whole { "" } else { "mm" }.into(), logarithmic, whole, place }
    }

    #[test]
    fn places_are_spread_over_the_range_or_its_logarithm() {
        let middle = Stratum { number: 0, place: 0.5 };
        let at = |range: Range| range.setting(middle, 1);
        assert_eq!(at(range(2.0, 4.0, false, false)).value, "3 mm");
        // The geometric mean of 1 and 100.
        let ten = at(range(1.0, 100.0, true, false));
        assert_eq!(ten.value, "10 mm");
        approx::assert_abs_diff_eq!(ten.position, 0.5, epsilon = 1e-12);
    }

    #[test]
    fn samples_have_few_digits_and_stay_in_their_stratum() {
        let sample = range(1.0, 2.0, false, false).setting(Stratum { number: 2, place: 0.312_345_678_9 }, 8);
        assert_eq!(sample.value, "1.3123 mm");
        assert_eq!(rounded(0.299_999_99, 0.2, 0.299_999_995), 0.299_999_99);
    }

    #[test]
    fn whole_ends_give_each_whole_number_as_often() {
        let three = range(1.0, 3.0, false, true);
        let counts = (0..9)
            .map(|number| three.setting(Stratum { number, place: (number as f64 + 0.5) / 9.0 }, 9).value);
        assert_eq!(counts.collect::<String>(), "111222333");
    }
}
