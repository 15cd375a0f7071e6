mod factors_in_words;
mod figure_table;
mod tears_in_words;

use crate::args::Study;
use crate::exit::Exit;
use crate::output::{note, say, say_json};
use crate::progress::Progress;
use bedswell_sim::figures::{digits, estimate, probability};
use bedswell_sim::{
    LevelSummary, RESPONSES, Response, StudyOptions, StudySummary, TIMES, combination_in_words, read_study,
    run_pack, run_study,
};
use factors_in_words::factors_in_words;
use std::path::Path;
use tears_in_words::tears_in_words;

/// Runs the packs of a study and tells the tear probability.
pub(super) fn study(arguments: &Study, json: bool) -> anyhow::Result<Exit> {
    let mut study = read_study(&arguments.file)?;
    study.packs = arguments.packs.unwrap_or(study.packs);
    let threads = match arguments.threads {
        Some(threads) => threads.into(),
        None => std::thread::available_parallelism().map_or(1, usize::from),
    };
    note_concerns(&study)?;
    let options = StudyOptions { threads, csv: arguments.csv };
    let mut progress = Progress::new("packs");
    let runner = |scene: &_, pack| run_pack(scene, pack, &mut ());
    let summary = run_study(&study, &arguments.out, options, &runner, &mut progress)?;
    drop(progress);
    if json {
        say_json(&summary)?;
    } else {
        say(&in_words(&summary, &arguments.out))?;
    }
    Ok(if summary.overall.packs == 0 { Exit::Failed } else { Exit::Done })
}

/// Says what to know about the scenes of a study before believing its results.
fn note_concerns(study: &bedswell_sim::Study) -> anyhow::Result<()> {
    /// Lines that are read.
    const SHOWN: usize = 12;
    let mut lines = Vec::new();
    for level in &study.levels {
        let values = combination_in_words(&study.factors, &level.values);
        let place = if values.is_empty() { "mind".to_owned() } else { format!("mind, with {values}") };
        lines.extend(level.scene.concerns()?.iter().map(|concern| format!("{place}: {concern}")));
    }
    lines.iter().take(SHOWN).for_each(|line| note(line));
    if lines.len() > SHOWN {
        note(&format!("and {} more of the kind", lines.len() - SHOWN));
    }
    Ok(())
}

fn in_words(study: &StudySummary, folder: &Path) -> String {
    let text = match study.levels.as_slice() {
        [level] if study.factors.is_empty() => format!("{}\n\n{}", study.name, level_in_words(level)),
        _ => format!("{}\n", factors_in_words(study)),
    };
    let text = tears_in_words(study).map_or(text.clone(), |tears| format!("{text}\n{tears}\n"));
    format!("{text}\nWith 95 % limits. Tables and summary are in {}", folder.display())
}

fn level_in_words(level: &LevelSummary) -> String {
    let limits = |low: Option<f64>, high: Option<f64>| match (low, high) {
        (Some(low), Some(high)) => format!("({} to {})", digits(low), digits(high)),
        _ => "(not known)".into(),
    };
    let exact = limits(level.tear_fraction_clopper_pearson_low, level.tear_fraction_clopper_pearson_high);
    let score = limits(level.tear_fraction_wilson_low, level.tear_fraction_wilson_high);
    let mut text = format!(
        "  tear probability  {}\n  torn beads        {} of {} in {} packs: {} {exact}; Wilson {score}\n",
        estimate(level.responses.get("tear_probability").copied().flatten(), probability),
        level.torn,
        level.beads,
        level.packs,
        level.tear_fraction.map_or("not known".into(), digits),
    );
    if level.effective_beads.is_some_and(|effective| effective < level.beads as f64) {
        text += &format!(
            "                    beads of one pack are alike: {}\n",
            limits(level.tear_fraction_clustered_low, level.tear_fraction_clustered_high)
        );
    }
    // Tears are told above.
    let told = |response: &&Response| {
        level.responses.contains_key(response.name)
            && !["tear_probability", "torn_fraction"].contains(&response.name)
    };
    for response in RESPONSES.iter().chain(TIMES).filter(told) {
        let figure = level.figure(response);
        let unit = if figure.is_some() { response.unit } else { "" };
        text += format!("  {:<18}{} {unit}", response.title, estimate(figure, response.show)).trim_end();
        text.push('\n');
    }
    if level.stopped_early {
        text += "  stopped early     the tear fraction is known as well as asked\n";
    }
    if !level.failed.is_empty() {
        text += &format!(
            "  failed packs      {}, left out above; the first: {}\n",
            level.failed.len(),
            level.failed[0].reason
        );
    }
    text
}
