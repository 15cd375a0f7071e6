use crate::args::Study;
use crate::exit::Exit;
use crate::output::{say, say_json};
use crate::progress::Progress;
use bedswell_sim::figures::{digits, estimate, length, probability, stress};
use bedswell_sim::{LevelSummary, StudyOptions, StudySummary, read_study, run_pack, run_study};
use std::path::Path;

/// Runs the packs of a study and tells the tear probability.
pub(super) fn study(arguments: &Study, json: bool) -> anyhow::Result<Exit> {
    let mut study = read_study(&arguments.file)?;
    study.packs = arguments.packs.unwrap_or(study.packs);
    let threads = match arguments.threads {
        Some(threads) => threads.into(),
        None => std::thread::available_parallelism().map_or(1, usize::from),
    };
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

fn in_words(study: &StudySummary, folder: &Path) -> String {
    let mut text = format!("{}\n", study.name);
    for level in &study.levels {
        if let Some(factor) = &study.factor {
            text += &format!("\n{factor} = {}\n", level.value);
        } else {
            text.push('\n');
        }
        text += &level_in_words(level);
    }
    text += &format!("\nIn brackets: 95 % limits. Table and summary are in {}", folder.display());
    text
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
        estimate(level.tear_probability, probability),
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
    text += &format!(
        "  water taken up    {} g/g; {} of the free volume\n  tension, 99 %     {}\n  rise of the lid   {}\n",
        estimate(level.uptake_g_per_g, digits),
        estimate(level.volume_ratio, digits),
        estimate(level.tension_q99_pa, stress),
        estimate(level.heave_m, length),
    );
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
