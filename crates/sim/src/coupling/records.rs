use bedswell_gel::History;

/// Times (s) of the states that a march in time records: `count` of them, shared out among
/// the spans between changes outside, and denser after each change, as water moves fastest
/// then: number i of n comes after (i/n)² of the span.
pub(super) fn record_times(history: &History, until: f64, count: usize) -> Vec<f64> {
    let starts = spans(history, until);
    let mut times = Vec::with_capacity(count);
    for (index, start) in starts.iter().enumerate() {
        let end = starts.get(index + 1).copied().unwrap_or(until);
        let own = (count + starts.len() - 1 - index) / starts.len();
        let time = |number: usize| start + (end - start) * (number as f64 / own as f64).powi(2);
        times.extend((1..own).map(time));
        times.push(end);
    }
    times
}

/// When the spans between changes outside begin (s).
pub(crate) fn spans(history: &History, until: f64) -> Vec<f64> {
    let mut starts = vec![0.0];
    while let Some(change) = history.next_change(starts[starts.len() - 1]).filter(|change| *change < until) {
        starts.push(change);
    }
    starts
}

#[cfg(test)]
mod tests {
    use super::*;
    use bedswell_gel::{Change, Outside};

    #[test]
    fn records_end_every_span_and_crowd_at_its_start() {
        let change = |time| Change { time, outside: Outside::default() };
        let history = History::new(vec![change(0.0), change(16.0), change(20.0), change(99.0)]).unwrap();
        let times = record_times(&history, 24.0, 7);
        assert_eq!(times.len(), 7);
        assert_eq!(times, [16.0 / 9.0, 64.0 / 9.0, 16.0, 17.0, 20.0, 21.0, 24.0]);
    }
}
