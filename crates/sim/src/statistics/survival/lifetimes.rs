use serde::{Deserialize, Serialize};
use thiserror::Error;

/// How long one was watched, and how that ended.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct Lifetime {
    /// Time from the start of watching to its end, in any unit that the group shares.
    pub time: f64,
    /// The event came at that time; otherwise it had not come by then (right-censored).
    pub event: bool,
}

/// The lifetimes of a group, in order of time; at least one.
///
/// Watching must have ended for reasons of its own: who is censored must not be more or
/// less prone to the event than who is still watched.
#[derive(Clone, Debug, PartialEq)]
pub struct Lifetimes(Vec<Lifetime>);

/// Why lifetimes cannot be used.
#[derive(Clone, Debug, PartialEq, Error)]
pub enum SurvivalError {
    /// A group holds nobody.
    #[error("a group needs at least one lifetime")]
    Empty,
    /// A time that is none.
    #[error("lifetime {index} is {time}; times must be finite and not below zero")]
    Time {
        /// Place in the list, from 0.
        index: usize,
        /// The time given.
        time: f64,
    },
    /// A comparison of too few groups.
    #[error("a comparison needs at least two groups, not {groups}")]
    TooFewGroups {
        /// Groups given.
        groups: usize,
    },
    /// Chance had nothing to decide.
    #[error(
        "the groups cannot be compared: at no event were members of two groups at risk of which some were spared"
    )]
    NothingToCompare,
}

impl Lifetimes {
    /// The lifetimes of a group.
    ///
    /// # Errors
    /// When there are none, or a time is negative or no finite number.
    pub fn new(mut lifetimes: Vec<Lifetime>) -> Result<Self, SurvivalError> {
        let usable = |time: f64| time.is_finite() && time >= 0.0;
        if let Some(index) = lifetimes.iter().position(|lifetime| !usable(lifetime.time)) {
            return Err(SurvivalError::Time { index, time: lifetimes[index].time });
        }
        if lifetimes.is_empty() {
            return Err(SurvivalError::Empty);
        }
        lifetimes.sort_by(|a, b| a.time.total_cmp(&b.time));
        Ok(Self(lifetimes))
    }

    /// The longest time that anybody was watched.
    pub fn longest(&self) -> f64 {
        self.0[self.0.len() - 1].time
    }

    /// The distinct times of events, in order.
    pub(super) fn event_times(&self) -> Vec<f64> {
        let mut times: Vec<f64> =
            self.0.iter().filter(|lifetime| lifetime.event).map(|lifetime| lifetime.time).collect();
        times.dedup();
        times
    }

    /// How many were still watched, without event, just before this time. Who is censored at a
    /// time counts as at risk then, as if the event came first.
    pub(super) fn at_risk(&self, time: f64) -> usize {
        self.0.len() - self.0.partition_point(|lifetime| lifetime.time < time)
    }

    /// Events at this time.
    pub(super) fn events_at(&self, time: f64) -> usize {
        let first = self.0.partition_point(|lifetime| lifetime.time < time);
        self.0[first..].iter().take_while(|lifetime| lifetime.time == time).filter(|one| one.event).count()
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn watched(time: f64) -> Lifetime {
        Lifetime { time, event: false }
    }

    #[test]
    fn times_that_are_none_are_refused_with_their_place() {
        for time in [-1.0, f64::NAN, f64::INFINITY] {
            let error = Lifetimes::new(vec![watched(1.0), watched(time)]).unwrap_err();
            assert!(matches!(error, SurvivalError::Time { index: 1, .. }), "{time}: {error}");
        }
        assert_eq!(Lifetimes::new(Vec::new()), Err(SurvivalError::Empty));
        assert!(Lifetimes::new(vec![watched(0.0)]).is_ok());
    }

    #[test]
    fn who_is_censored_at_an_event_was_at_risk_of_it() {
        let group = Lifetimes::new(vec![watched(3.0), Lifetime { time: 3.0, event: true }, watched(2.0)]);
        let group = group.unwrap();
        assert_eq!((group.at_risk(3.0), group.events_at(3.0)), (2, 1));
        assert_eq!((group.at_risk(2.0), group.events_at(2.0)), (3, 0));
        assert_eq!(group.event_times(), [3.0]);
    }
}
