use crate::thermodynamics::Surroundings;
use serde::{Deserialize, Serialize};
use thiserror::Error;

/// Suction beyond which nothing dries (Pa): that of oven-dry soil, pF 7.
const MOST_SUCTION: f64 = 1e9;
/// Salt beyond which water takes up no more (mol/L), sodium chloride at 25 °C.
const MOST_SALT: f64 = 6.2;
/// Between freezing and boiling (K).
const TEMPERATURES: std::ops::RangeInclusive<f64> = 273.15..=373.15;

/// What a bead finds outside.
#[derive(Clone, Copy, Debug, Default, PartialEq, Serialize, Deserialize)]
pub struct Outside {
    /// The water there. Salt counts at once everywhere in the gel: small ions run ahead of
    /// the network.
    pub surroundings: Surroundings,
    /// Most water that reaches the bead (m³/s); without end where there is none. Water
    /// leaves the bead freely.
    pub supply: Option<f64>,
}

/// From when on something is outside.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct Change {
    /// Time (s).
    pub time: f64,
    /// What is outside from then on, until the next change.
    pub outside: Outside,
}

/// What a bead finds outside, over time: wetting, suction, salt, drying.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(try_from = "Vec<Change>", into = "Vec<Change>")]
pub struct History(Vec<Change>);

/// Why changes are no history.
#[derive(Clone, Copy, Debug, PartialEq, Error)]
pub enum HistoryError {
    /// There are no changes.
    #[error("a history without changes; the first says what is outside at the start")]
    Empty,
    /// A time is not a number, or not after the one before.
    #[error("change {index} is at {time} s; times must be finite and increase")]
    Time {
        /// Which change, from 0.
        index: usize,
        /// Its time (s).
        time: f64,
    },
    /// A value that the gel model does not know.
    #[error("change {index} has {name} {value} {unit}; {least} to {most} are possible")]
    OutOfRange {
        /// Which change, from 0.
        index: usize,
        /// Which value.
        name: &'static str,
        /// The value.
        value: f64,
        /// Its unit.
        unit: &'static str,
        /// Least possible.
        least: f64,
        /// Most possible.
        most: f64,
    },
}

impl History {
    /// The history of these changes. Before the first, what it brings is outside already.
    ///
    /// # Errors
    /// When there is none, times do not increase or a value is out of the model's range.
    pub fn new(changes: Vec<Change>) -> Result<Self, HistoryError> {
        if changes.is_empty() {
            return Err(HistoryError::Empty);
        }
        let mut last = f64::NEG_INFINITY;
        for (index, change) in changes.iter().enumerate() {
            if !change.time.is_finite() || change.time <= last {
                return Err(HistoryError::Time { index, time: change.time });
            }
            last = change.time;
            check(index, &change.outside)?;
        }
        Ok(Self(changes))
    }

    /// What is outside at a time (s).
    pub fn at(&self, time: f64) -> Outside {
        let past = self.0.partition_point(|change| change.time <= time);
        self.0[past.max(1) - 1].outside
    }

    /// When it changes next after a time (s).
    pub fn next_change(&self, time: f64) -> Option<f64> {
        self.0[1..].iter().map(|change| change.time).find(|&change| change > time)
    }
}

impl TryFrom<Vec<Change>> for History {
    type Error = HistoryError;

    fn try_from(changes: Vec<Change>) -> Result<Self, HistoryError> {
        Self::new(changes)
    }
}

impl From<History> for Vec<Change> {
    fn from(history: History) -> Self {
        history.0
    }
}

fn check(index: usize, outside: &Outside) -> Result<(), HistoryError> {
    let Surroundings { salt, potential, temperature } = outside.surroundings;
    let supply = outside.supply.unwrap_or(0.0);
    for (name, unit, value, least, most) in [
        ("salt", "mol/L", salt, 0.0, MOST_SALT),
        ("water potential", "Pa", potential, -MOST_SUCTION, 0.0),
        ("temperature", "K", temperature, *TEMPERATURES.start(), *TEMPERATURES.end()),
        ("supply", "m³/s", supply, 0.0, f64::MAX),
    ] {
        if !(least..=most).contains(&value) {
            return Err(HistoryError::OutOfRange { index, name, value, unit, least, most });
        }
    }
    Ok(())
}

#[cfg(test)]
mod tests {
    use super::*;

    fn at(time: f64, potential: f64) -> Change {
        let surroundings = Surroundings { potential, ..Surroundings::default() };
        Change { time, outside: Outside { surroundings, supply: None } }
    }

    #[test]
    fn a_change_holds_from_its_time_on() {
        let history = History::new(vec![at(0.0, 0.0), at(10.0, -1e4), at(20.0, -1e5)]).unwrap();
        let potential = |time| history.at(time).surroundings.potential;
        assert_eq!([-1.0, 0.0, 9.9, 10.0, 25.0].map(potential), [0.0, 0.0, 0.0, -1e4, -1e5]);
        assert_eq!([0.0, 10.0, 20.0].map(|time| history.next_change(time)), [Some(10.0), Some(20.0), None]);
    }

    #[test]
    fn what_is_no_history_says_why() {
        assert_eq!(History::new(vec![]), Err(HistoryError::Empty));
        let repeated = History::new(vec![at(0.0, 0.0), at(0.0, -1.0)]);
        assert_eq!(repeated, Err(HistoryError::Time { index: 1, time: 0.0 }));
        assert!(matches!(History::new(vec![at(f64::NAN, 0.0)]), Err(HistoryError::Time { index: 0, .. })));
        for potential in [-2e9, 1.0, f64::NAN] {
            let error = History::new(vec![at(0.0, potential)]).unwrap_err();
            assert!(error.to_string().contains("water potential"), "{error}");
        }
    }

    #[test]
    fn a_written_history_is_checked_when_read() {
        let history = History::new(vec![at(0.0, 0.0), at(10.0, -1e4)]).unwrap();
        let mut changes: Vec<Change> = history.clone().into();
        assert_eq!(History::try_from(changes.clone()), Ok(history));
        changes.reverse();
        assert!(History::try_from(changes).is_err());
    }
}
