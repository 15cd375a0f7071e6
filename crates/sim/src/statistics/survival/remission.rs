//! Weeks of remission of 42 children with leukaemia, 21 under 6-mercaptopurine and 21 without
//! (Freireich et al. 1963, Blood 21:699), the classic example of censored times.

use super::{Lifetime, Lifetimes};

pub(crate) fn treated() -> Lifetimes {
    let relapsed = [6, 6, 6, 7, 10, 13, 16, 22, 23];
    let still_well = [6, 9, 10, 11, 17, 19, 20, 25, 32, 32, 34, 35];
    group(&relapsed, &still_well)
}

pub(crate) fn untreated() -> Lifetimes {
    group(&[1, 1, 2, 2, 3, 4, 4, 5, 5, 8, 8, 8, 8, 11, 11, 12, 12, 15, 17, 22, 23], &[])
}

/// A group with events and ends of watching at these times.
pub(super) fn group(events: &[u32], censored: &[u32]) -> Lifetimes {
    let lifetimes = |times: &[u32], event| {
        let lifetime = |&time: &u32| Lifetime { time: f64::from(time), event };
        times.iter().map(lifetime).collect::<Vec<_>>()
    };
    match Lifetimes::new([lifetimes(events, true), lifetimes(censored, false)].concat()) {
        Ok(group) => group,
        Err(error) => unreachable!("whole numbers are usable times: {error}"),
    }
}
