use super::figure_table::{FigureTable, Group};
use bedswell_sim::{
    Effects, Factor, FactorEffect, Measure, RESPONSES, Response, StudySummary, Variation,
    combination_in_words,
};

/// The responses that fit side by side; the others are in the files.
const SHOWN: [&str; 3] = ["uptake_g_per_g", "heave_m", "tear_probability"];
/// Combinations up to which each has its line.
const MOST_LINES: usize = 24;

/// What a study with factors comes to: its combinations and the effects of its factors.
pub(super) fn factors_in_words(study: &StudySummary) -> String {
    let mut parts = vec![study.name.clone()];
    if study.levels.len() <= MOST_LINES {
        parts.push(combinations(study).lines().join("\n"));
    } else {
        parts.push(format!("{} combinations: levels.parquet has a row for each.", study.levels.len()));
    }
    let effects: Vec<&Effects> =
        SHOWN.iter().filter_map(|name| study.effects.iter().find(|one| one.response == *name)).collect();
    parts.extend(changes(study, &effects));
    parts.extend(interactions(study, &effects));
    parts.extend(rank_correlations(study, &effects));
    parts.extend(explained(&effects));
    parts.extend(remarks(study));
    parts.join("\n\n")
}

fn combinations(study: &StudySummary) -> FigureTable {
    let any_failed = !study.overall.failed.is_empty();
    let mut labels = short_names(study);
    labels.push("packs".into());
    let rows = study.levels.iter().map(|level| {
        let mut texts = level.values.clone();
        texts.push(if any_failed {
            format!("{} of {}", level.packs, level.packs + level.failed.len() as u64)
        } else {
            level.packs.to_string()
        });
        let figure = |response| {
            let estimate = level.figure(response)?;
            Some(Measure { value: estimate.mean, low: estimate.low, high: estimate.high })
        };
        (texts, shown().map(figure).collect())
    });
    let groups = shown().map(|response| in_unit(response, false)).collect();
    FigureTable { labels, groups, figure: "mean", rows: rows.collect() }
}

/// The last word of each factor's key, or the whole key where factors share that word.
fn short_names(study: &StudySummary) -> Vec<String> {
    let last = |key: &str| key.rsplit('.').next().unwrap_or(key).to_owned();
    let words: Vec<String> = study.factors.iter().map(|factor| last(&factor.key)).collect();
    let name = |(factor, word): (&Factor, &String)| {
        let shared = words.iter().filter(|other| *other == word).count() > 1;
        if shared { factor.key.clone() } else { word.clone() }
    };
    study.factors.iter().zip(&words).map(name).collect()
}

/// What the factors change, each by itself.
fn changes(study: &StudySummary, effects: &[&Effects]) -> Option<String> {
    let mut rows = Vec::new();
    for (index, (factor, name)) in study.factors.iter().zip(short_names(study)).enumerate() {
        let figures = |of: &dyn Fn(&FactorEffect) -> Option<Measure>| {
            effects.iter().map(|one| of(&one.factors[index])).collect::<Vec<_>>()
        };
        match &factor.variation {
            Variation::Range { from, to, .. } => {
                rows.push((vec![name, format!("{from} to {to}")], figures(&|effect| effect.over_range)))
            }
            Variation::Listed { values } => {
                rows.extend(values.iter().enumerate().skip(1).map(|(level, value)| {
                    let texts = vec![name.clone(), format!("to {value}")];
                    (texts, figures(&|effect| effect.levels[level].difference))
                }))
            }
        }
    }
    let sampled = study.factors.iter().any(|factor| matches!(factor.variation, Variation::Range { .. }));
    let heading = match (sampled, study.factors.len()) {
        (true, _) => "Change by each factor, the others held (linear model over the points):",
        (false, 1) => "Change against the first value:",
        (false, _) => "Change against the first value of each factor, averaged over the others:",
    };
    let groups = shown().map(|response| in_unit(response, true)).collect();
    let labels = vec!["factor".into(), "change".into()];
    titled(heading, FigureTable { labels, groups, figure: "by", rows })
}

fn interactions(study: &StudySummary, effects: &[&Effects]) -> Option<String> {
    let names = short_names(study);
    let pairs =
        (0..names.len()).flat_map(|first| (first + 1..names.len()).map(move |second| [first, second]));
    let rows = pairs.map(|pair| {
        let keys = pair.map(|index| &study.factors[index].key);
        let deviation = |one: &&Effects| {
            let own = one.interactions.iter().find(|own| own.factors.each_ref() == keys);
            own.map(|own| own.deviation)
        };
        let figures = effects.iter().map(deviation).collect();
        (vec![pair.map(|index| names[index].as_str()).join(" with ")], figures)
    });
    let groups = shown().map(|response| in_unit(response, true)).collect();
    let table = FigureTable { labels: vec!["factors".into()], groups, figure: "by", rows: rows.collect() };
    titled("Largest departure from both effects added up, with the place in summary.json:", table)
}

fn rank_correlations(study: &StudySummary, effects: &[&Effects]) -> Option<String> {
    let rows = short_names(study).into_iter().enumerate().map(|(index, name)| {
        (vec![name], effects.iter().map(|one| one.factors[index].rank_correlation).collect())
    });
    let group = |response: &Response| Group {
        heading: response.title.into(),
        show: Box::new(|value| signed(value, format!("{value:.2}"))),
    };
    let groups = shown().map(group).collect();
    let table = FigureTable { labels: vec!["factor".into()], groups, figure: "rank", rows: rows.collect() };
    titled("Rank correlation (Spearman), from -1 to 1:", table)
}

fn explained(effects: &[&Effects]) -> Option<String> {
    let shares = shown().zip(effects).filter_map(|(response, one)| {
        one.explained.map(|share| format!("{} {:.0} %", response.title, 100.0 * share))
    });
    let shares: Vec<String> = shares.collect();
    let text = format!("Of the variance over points, the linear model explains: {}.", shares.join(", "));
    (!shares.is_empty()).then_some(text)
}

fn remarks(study: &StudySummary) -> Option<String> {
    let mut lines = Vec::new();
    let stopped = study.levels.iter().filter(|level| level.stopped_early).count();
    if stopped > 0 {
        lines.push(format!(
            "Stopped early: {stopped} of {} combinations, whose tear fraction is known as well as asked.",
            study.levels.len()
        ));
    }
    if let Some(first) = study.overall.failed.first() {
        let at = combination_in_words(&study.factors, &study.levels[first.level].values);
        lines.push(format!(
            "Failed packs: {}, left out above. The first is pack {} at {at}: {}",
            study.overall.failed.len(),
            first.pack,
            first.reason
        ));
    }
    (!lines.is_empty()).then(|| lines.join("\n"))
}

/// The table under its heading; none if it knows no figure.
fn titled(heading: &str, mut table: FigureTable) -> Option<String> {
    table.rows.retain(|(_, figures)| figures.iter().any(Option::is_some));
    (!table.rows.is_empty()).then(|| format!("{heading}\n{}", table.lines().join("\n")))
}

fn shown() -> impl Iterator<Item = &'static Response> {
    SHOWN.iter().filter_map(|name| RESPONSES.iter().find(|response| response.name == *name))
}

fn in_unit(response: &'static Response, with_sign: bool) -> Group {
    let show = move |value: f64| {
        let text = (response.show)(value);
        if with_sign { signed(value, text) } else { text }
    };
    Group { heading: response.heading(), show: Box::new(show) }
}

fn signed(value: f64, text: String) -> String {
    if value > 0.0 && !text.starts_with('<') { format!("+{text}") } else { text }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn every_response_shown_is_one() {
        assert_eq!(shown().count(), SHOWN.len());
    }
}
