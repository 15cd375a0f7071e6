use super::figure_table::{FigureTable, Group};
use bedswell_sim::figures::{digits, duration};
use bedswell_sim::{
    FactorSurvival, Measure, StudySummary, StudySurvival, SurvivalGroup, WeakestLinkAgreement,
};

/// What became of beads that might tear, and whether the weakest link foretold it; `None` where
/// none might.
pub(super) fn tears_in_words(study: &StudySummary) -> Option<String> {
    let survival = study.survival.as_ref()?;
    let mut parts: Vec<String> = survival.factors.iter().map(|factor| compared(survival, factor)).collect();
    if parts.is_empty() {
        parts.push(groups(survival, "", std::slice::from_ref(&survival.all)));
    }
    parts.extend(study.agreement.as_ref().map(agreement));
    Some(parts.join("\n\n"))
}

fn compared(survival: &StudySurvival, factor: &FactorSurvival) -> String {
    let test = match &factor.log_rank {
        None => "The log-rank test has nothing to compare.".into(),
        Some(test) => format!(
            "Log-rank: chi-squared {} with {} degree{} of freedom, p {}.",
            digits(test.chi_squared),
            test.degrees_of_freedom,
            if test.degrees_of_freedom == 1 { "" } else { "s" },
            probability(test.p_value),
        ),
    };
    format!("{}\n{test}", groups(survival, &factor.factor, &factor.groups))
}

fn groups(survival: &StudySurvival, factor: &str, groups: &[SurvivalGroup]) -> String {
    let in_time = survival.measured_in == "time_s";
    let heading = match factor {
        "" => "Beads that tore:".to_owned(),
        factor => format!("Beads that tore, by {factor}:"),
    };
    let row = |group: &SurvivalGroup| {
        let fraction = Measure {
            value: group.torn_fraction,
            low: group.torn_fraction_low,
            high: group.torn_fraction_high,
        };
        let half =
            group.median.map(|value| Measure { value, low: group.median_low, high: group.median_high });
        let labels = vec![group.value.clone(), format!("{} of {}", group.torn, group.beads)];
        (labels, vec![Some(fraction), half])
    };
    let show: Box<dyn Fn(f64) -> String> = if in_time { Box::new(duration) } else { Box::new(digits) };
    let half = if in_time { "half are torn after" } else { "half are torn at a stretch of" };
    let table = FigureTable {
        labels: vec![factor.rsplit('.').next().unwrap_or_default().into(), "torn".into()],
        groups: vec![
            Group { heading: "torn fraction".into(), show: Box::new(digits) },
            Group { heading: half.into(), show },
        ],
        figure: "at",
        rows: groups.iter().map(row).collect(),
    };
    format!("{heading}\n{}", table.lines().join("\n"))
}

fn agreement(judged: &WeakestLinkAgreement) -> String {
    let rows = judged.bins.iter().map(|judged| {
        let bin = &judged.bin;
        let [lowest, highest] = [bin.lowest, bin.highest].map(probability);
        let range = if lowest == highest { lowest } else { format!("{lowest} to {highest}") };
        let verdict = if judged.agrees { "" } else { "differ" };
        let observed =
            Measure { value: bin.observed, low: Some(bin.interval.low), high: Some(bin.interval.high) };
        let labels = vec![range, bin.count.to_string(), probability(bin.predicted), verdict.into()];
        (labels, vec![Some(observed)])
    });
    let labels = ["weakest link", "beads", "foretold", ""].map(str::to_owned);
    let table = FigureTable {
        labels: labels.into(),
        groups: vec![Group { heading: "torn".into(), show: Box::new(digits) }],
        figure: "share",
        rows: rows.collect(),
    };
    let test = judged.p_value.map_or(String::new(), |p| {
        let p = probability(p);
        format!("\nIf the weakest link were right, as large a difference would have p {p}.")
    });
    format!(
        "Tear probability by the weakest link against beads that tore:\n{}{test}",
        table.lines().join("\n")
    )
}

/// As short as a table wants it.
fn probability(value: f64) -> String {
    if value < 1e-4 { "<0.0001".into() } else { digits(value) }
}
