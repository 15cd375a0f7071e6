use super::Lifetimes;
use crate::statistics::Interval;
use crate::statistics::intervals::NORMAL_QUANTILE;
use serde::{Deserialize, Serialize};

/// The share without event as a function of time: 1 before the first step, and constant
/// between steps.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct SurvivalCurve {
    /// One step at each distinct time of an event, in order; none without events.
    pub steps: Vec<SurvivalStep>,
    /// The longest time that anybody was watched; beyond it nothing is known, unless no one is
    /// left.
    pub longest: f64,
}

/// A time at which events came, and the share without event from then on.
#[derive(Clone, Copy, Debug, PartialEq, Serialize, Deserialize)]
pub struct SurvivalStep {
    /// Time of the events.
    pub time: f64,
    /// Those without event and still watched just before.
    pub at_risk: usize,
    /// Events at this time.
    pub events: usize,
    /// Share without event.
    pub survival: f64,
    /// Standard error of that share; 0 where it is nought, the limit of the formula there.
    pub standard_error: f64,
    /// 95 % interval of that share; none where it is nought.
    pub interval: Option<Interval>,
}

/// The time by which half have met the event.
#[derive(Clone, Copy, Debug, Default, PartialEq, Serialize, Deserialize)]
pub struct SurvivalMedian {
    /// The median; none if the curve stays above one half.
    pub time: Option<f64>,
    /// Lower 95 % limit; none if the data set none.
    pub low: Option<f64>,
    /// Upper 95 % limit; none if the data set none.
    pub high: Option<f64>,
}

/// Estimates the share without event from lifetimes of which some are censored
/// (Kaplan & Meier 1958, J. Am. Stat. Assoc. 53:457): S = Π (1 - d/n) over the times of
/// events, with d events among n at risk.
///
/// Standard errors are Greenwood's, S √(Σ d/(n(n-d))) (Greenwood 1926, Reports on Public
/// Health and Medical Subjects 33:1); intervals are symmetric for ln(-ln S), so that they
/// stay between 0 and 1 (Kalbfleisch & Prentice 1980, The Statistical Analysis of Failure
/// Time Data, ch. 1). Sources from memory.
pub fn kaplan_meier(lifetimes: &Lifetimes) -> SurvivalCurve {
    let (mut survival, mut variance) = (1.0_f64, 0.0_f64);
    let step = |time: f64| {
        let (at_risk, events) = (lifetimes.at_risk(time), lifetimes.events_at(time));
        let (n, d) = (at_risk as f64, events as f64);
        survival *= (n - d) / n;
        variance += d / (n * (n - d));
        let some_left = events < at_risk;
        SurvivalStep {
            time,
            at_risk,
            events,
            survival,
            standard_error: if some_left { survival * variance.sqrt() } else { 0.0 },
            interval: some_left.then(|| log_log_interval(survival, variance)),
        }
    };
    SurvivalCurve {
        steps: lifetimes.event_times().into_iter().map(step).collect(),
        longest: lifetimes.longest(),
    }
}

/// `variance` is that of ln S.
fn log_log_interval(survival: f64, variance: f64) -> Interval {
    let spread = (NORMAL_QUANTILE * variance.sqrt() / survival.ln().abs()).exp();
    Interval { low: survival.powf(spread), high: survival.powf(1.0 / spread) }
}

/// One half, with what rounding may add to a product that comes to it.
const HALF: f64 = 0.5 + 1e-12;

impl SurvivalCurve {
    /// Share without event at a time; `None` beyond the longest time watched, if some were
    /// left then.
    pub fn at(&self, time: f64) -> Option<f64> {
        let passed = self.steps.partition_point(|step| step.time <= time);
        let survival = passed.checked_sub(1).map_or(1.0, |last| self.steps[last].survival);
        (time <= self.longest || survival == 0.0).then_some(survival)
    }

    /// The median: the first time at which the curve is at one half or below. (A curve that is
    /// at one half exactly stays there until the next event; some take the middle of that
    /// stretch.)
    ///
    /// Its limits are the first times at which the lower and the upper limit of the curve are
    /// at one half or below (Brookmeyer & Crowley 1982, Biometrics 38:29, from memory).
    pub fn median(&self) -> SurvivalMedian {
        let first = |value: fn(&SurvivalStep) -> Option<f64>| {
            self.steps
                .iter()
                .find(|step| value(step).is_some_and(|value| value <= HALF))
                .map(|step| step.time)
        };
        SurvivalMedian {
            time: first(|step| Some(step.survival)),
            low: first(|step| step.interval.map(|interval| interval.low)),
            high: first(|step| step.interval.map(|interval| interval.high)),
        }
    }
}

#[cfg(test)]
mod tests {
    use super::super::remission::{group, treated, untreated};
    use super::*;

    /// Time, at risk, events, share, its standard error and its limits for the treated group;
    /// statsmodels and the printed formulas agree.
    const TREATED: [(f64, usize, usize, f64, f64, f64, f64); 7] = [
        (6.0, 21, 3, 0.857143, 0.076360, 0.619718, 0.951552),
        (7.0, 17, 1, 0.806723, 0.086935, 0.563147, 0.922809),
        (10.0, 15, 1, 0.752941, 0.096350, 0.503200, 0.889362),
        (13.0, 12, 1, 0.690196, 0.106815, 0.431610, 0.849066),
        (16.0, 11, 1, 0.627451, 0.114054, 0.367511, 0.804912),
        (22.0, 7, 1, 0.537815, 0.128234, 0.267779, 0.746791),
        (23.0, 6, 1, 0.448179, 0.134591, 0.188052, 0.680143),
    ];

    #[test]
    fn every_row_of_the_remission_data_agrees_to_its_last_digit() {
        let curve = kaplan_meier(&treated());
        assert_eq!(curve.steps.len(), TREATED.len());
        for (step, (time, at_risk, events, survival, error, low, high)) in curve.steps.iter().zip(TREATED) {
            assert_eq!((step.time, step.at_risk, step.events), (time, at_risk, events));
            let interval = step.interval.unwrap();
            for (value, reference) in [
                (step.survival, survival),
                (step.standard_error, error),
                (interval.low, low),
                (interval.high, high),
            ] {
                assert!((value - reference).abs() < 0.51e-6, "week {time}: {value} for {reference}");
            }
        }
    }

    #[test]
    fn without_censoring_the_curve_is_the_share_left() {
        // Then Greenwood's error is the binomial one.
        let weeks = [1, 2, 3, 4, 5, 8, 11, 12, 15, 17, 22, 23];
        let left = [19.0, 17.0, 16.0, 14.0, 12.0, 8.0, 6.0, 4.0, 3.0, 2.0, 1.0, 0.0];
        let curve = kaplan_meier(&untreated());
        assert_eq!(curve.steps.len(), weeks.len());
        for ((step, week), left) in curve.steps.iter().zip(weeks).zip(left) {
            let share: f64 = left / 21.0;
            assert_eq!(step.time, f64::from(week));
            approx::assert_abs_diff_eq!(step.survival, share, epsilon = 1e-14);
            let binomial = (share * (1.0 - share) / 21.0).sqrt();
            approx::assert_abs_diff_eq!(step.standard_error, binomial, epsilon = 1e-14);
            assert_eq!(step.interval.is_some(), left > 0.0);
        }
    }

    #[test]
    fn limits_of_the_untreated_agree_with_the_printed_formula() {
        let limits = [
            (0.670_046, 0.975_294),
            (0.568_905, 0.923_889),
            (0.519_391, 0.893_257),
            (0.425_350, 0.825_044),
            (0.337_977, 0.749_241),
            (0.183_067, 0.577_789),
            (0.116_561, 0.481_820),
            (0.059_482, 0.377_435),
            (0.035_657, 0.321_162),
            (0.016_259, 0.261_250),
            (0.003_324, 0.197_045),
        ];
        let curve = kaplan_meier(&untreated());
        for (step, (low, high)) in curve.steps.iter().zip(limits) {
            let interval = step.interval.unwrap();
            approx::assert_abs_diff_eq!(interval.low, low, epsilon = 0.51e-6);
            approx::assert_abs_diff_eq!(interval.high, high, epsilon = 0.51e-6);
        }
    }

    #[test]
    fn medians_and_their_limits_agree_with_statsmodels() {
        let median = |group| kaplan_meier(&group).median();
        assert_eq!(median(treated()), SurvivalMedian { time: Some(23.0), low: Some(13.0), high: None });
        assert_eq!(median(untreated()), SurvivalMedian { time: Some(8.0), low: Some(4.0), high: Some(11.0) });
    }

    #[test]
    fn a_curve_that_comes_to_one_half_has_its_median_there() {
        // 1 - 1/6, 4/5, 3/4 multiply to one half but for rounding.
        let curve = kaplan_meier(&group(&[1, 2, 3, 4], &[5, 6]));
        assert_eq!(curve.median().time, Some(3.0));
        assert_eq!(kaplan_meier(&group(&[1, 2], &[3, 4, 5])).median().time, None);
    }

    #[test]
    fn all_censored_is_a_curve_that_never_falls_and_ends() {
        let curve = kaplan_meier(&group(&[], &[2, 3]));
        assert_eq!(curve, SurvivalCurve { steps: Vec::new(), longest: 3.0 });
        assert_eq!((curve.at(0.0), curve.at(3.0), curve.at(3.1)), (Some(1.0), Some(1.0), None));
        assert_eq!(curve.median(), SurvivalMedian::default());
    }

    #[test]
    fn a_curve_is_read_from_its_last_step_on() {
        let curve = kaplan_meier(&group(&[2, 4], &[]));
        let read = [1.9, 2.0, 3.9, 4.0, 9.0].map(|time| curve.at(time));
        assert_eq!(read, [Some(1.0), Some(0.5), Some(0.5), Some(0.0), Some(0.0)]);
    }
}
