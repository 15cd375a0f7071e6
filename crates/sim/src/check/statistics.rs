use super::CheckLine;
use super::line::Subject;
use crate::statistics::{treated, untreated};
use crate::{
    Strength, clopper_pearson, kaplan_meier, log_rank, mean_strength, strength_ratio, tear_probability,
    wilson,
};

const NEWCOMBE: &str = "Newcombe 1998 Table I (from memory) to 4 digits; scipy, statsmodels";
const SCIPY: &str = "scipy and statsmodels";
const WEIBULL: &str = "Weibull 1951 (from memory), worked with scipy";
const REMISSION: &str = "data of Freireich et al. 1963, worked with statsmodels";

const SUBJECT: Subject = Subject("statistics");

pub(super) const LINES: &[fn() -> CheckLine] = &[
    || {
        SUBJECT.line(
            "Wilson interval of 81/263, lower limit",
            wilson(81, 263).low,
            0.255_288_52,
            NEWCOMBE,
            2e-8,
        )
    },
    || SUBJECT.line("Wilson interval of 1/29, upper limit", wilson(1, 29).high, 0.171_755_22, NEWCOMBE, 3e-8),
    || {
        SUBJECT.line(
            "Clopper-Pearson interval of 15/148, upper limit",
            clopper_pearson(15.0, 148.0).high,
            0.161_650_49,
            NEWCOMBE,
            3e-8,
        )
    },
    || {
        SUBJECT.line(
            "Clopper-Pearson interval of 0/20, upper limit",
            clopper_pearson(0.0, 20.0).high,
            0.168_433_47,
            NEWCOMBE,
            3e-8,
        )
    },
    || {
        SUBJECT.line(
            "Clopper-Pearson interval of 3/200, lower limit",
            clopper_pearson(3.0, 200.0).low,
            0.003_104_11,
            SCIPY,
            2e-6,
        )
    },
    || {
        let value = tear_probability(&[1.0, 2.0, 0.5], &[0.5, 0.8, 1.1], &of_modulus(5.0));
        SUBJECT.line("weakest-link probability of three parts, m 5", value, 0.775_047_272_8, WEIBULL, 1e-10)
    },
    || {
        SUBJECT.line(
            "mean strength over scale, m 8",
            mean_strength(1.0, &of_modulus(8.0)),
            0.941_743,
            WEIBULL,
            6e-7,
        )
    },
    || {
        SUBJECT.line(
            "strength at 1000 times the volume, m 10",
            strength_ratio(1000.0, &of_modulus(10.0)),
            0.501_187,
            WEIBULL,
            1e-6,
        )
    },
    || {
        let share = kaplan_meier(&treated()).at(23.0).unwrap_or(f64::NAN);
        SUBJECT.line("Kaplan-Meier share of treated children at week 23", share, 0.448_179, REMISSION, 2e-6)
    },
    || {
        let error = kaplan_meier(&treated()).steps.last().map_or(f64::NAN, |step| step.standard_error);
        SUBJECT.line("its standard error by Greenwood", error, 0.134_591, REMISSION, 4e-6)
    },
    || {
        let compared = log_rank(&[treated(), untreated()]);
        let statistic = compared.map_or(f64::NAN, |compared| compared.chi_squared);
        SUBJECT.line("log-rank statistic, treated or not", statistic, 16.792_941, REMISSION, 1e-7)
    },
];

fn of_modulus(modulus: f64) -> Strength {
    Strength { scale: 1.0, modulus, volume: 1.0, length: None }
}
