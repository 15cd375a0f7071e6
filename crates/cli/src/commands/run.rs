use crate::args::Run;
use crate::exit::Exit;
use crate::output::{say, say_json};
use crate::progress::Progress;
use anyhow::Context;
use bedswell_sim::figures::{digits, duration, force, length, probability, stress};
use bedswell_sim::{
    BeadTears, Moment, Region, RunError, RunSummary, StateRecorder, prepare_run_folder, read_scene,
    remove_run_files, run_pack, write_run_folder,
};
use std::path::Path;

/// Takes one pack from dry to equilibrium, or through its history in time, and writes its
/// folder.
pub(super) fn run(arguments: &Run, json: bool) -> anyhow::Result<Exit> {
    let scene = read_scene(&arguments.scene)?;
    prepare_run_folder(&arguments.out, &scene, arguments.pack)?;
    let mut progress = Progress::new("increments");
    let mut recorder = StateRecorder::new(&arguments.out, &mut progress);
    let ended = run_pack(&scene, arguments.pack, &mut recorder);
    if let Err(error) = recorder.finish() {
        remove_run_files(&arguments.out);
        return Err(error.into());
    }
    let kept = match &ended {
        Err(RunError::March { increment, .. }) if *increment > 1 => {
            format!(" (the states before that are kept in {})", arguments.out.display())
        }
        _ => String::new(),
    };
    let outcome = ended.with_context(|| format!("{}{kept}", arguments.scene.display()))?;
    drop(progress);
    let summary = write_run_folder(&arguments.out, &scene, &outcome, arguments.csv)?;
    if json {
        say_json(&summary)?;
    } else {
        say(&in_words(&summary, &arguments.out))?;
    }
    Ok(Exit::Done)
}

fn in_words(run: &RunSummary, folder: &Path) -> String {
    let mut text = format!(
        "{}, pack {}: {} grains at porosity {:.3}\n  the top rose      {}\n  stress on it      {}\n  water in the bed  \
         {} L/m³\n  pores left        {:.3}\n  stress chains     {} before, {} after\n",
        run.name,
        run.pack,
        run.grains,
        run.porosity,
        length(run.heave_m),
        stress(run.lid_stress_pa),
        digits(run.water_l_per_m3),
        run.porosity_left,
        run.forces_before.chains,
        run.forces_after.chains,
    );
    if run.beads_out > 0 {
        text += &format!("  beads squeezed out {} of {}\n", run.beads_out, run.beads.len());
    }
    for concern in &run.concerns {
        text += &format!("  mind              {concern}\n");
    }
    for (index, bead) in run.beads.iter().enumerate() {
        text += &format!(
            "\nbead {index}\n  water taken up    {} g/g, {:.3} of the free volume\n  contacts          {}, the \
             largest force {}\n  tension, 99 %     {} (largest {})\n  compression       {} (99.9 %)\n  tear \
             probability  {}{}\n",
            digits(bead.uptake_g_per_g),
            bead.volume_ratio,
            bead.contacts,
            force(bead.largest_contact_force_n),
            stress(bead.tension_q99_pa),
            stress(bead.largest_tension_pa),
            stress(bead.compression_q999_pa),
            probability(bead.tear_probability),
            match (bead.torn, &bead.tears) {
                (true, None) => "; torn in this pack",
                (_, Some(_)) => " if it could not tear, by the weakest link",
                _ => "",
            },
        );
        if let Some(tears) = &bead.tears {
            text += &ruptures_in_words(tears);
        }
        if let Some(timing) = &bead.timing {
            text += &format!(
                "  half of the water after {}, 90 % after {}\n  most tension      {} (99 %), after {}\n",
                duration(timing.half_time_s),
                duration(timing.ninety_time_s),
                stress(timing.most_tension_q99_pa),
                duration(timing.most_tension_time_s),
            );
        }
    }
    text + &format!("\nwritten to {}", folder.display())
}

/// How a bead tore, or that it did not.
fn ruptures_in_words(tears: &BeadTears) -> String {
    let Some(first) = &tears.first else { return "  ruptures          none\n".into() };
    let when = |at: &Moment| match at.time_s {
        0.0 => format!("at a free stretch of {}", digits(at.free_stretch)),
        seconds => format!("after {}", duration(seconds)),
    };
    let place = match (first.region, first.to_contact_m) {
        (Region::Axis, Some(distance)) => format!("on the axis of a contact {} away", length(distance)),
        (_, Some(distance)) => format!("on the flank, {} from the nearest contact", length(distance)),
        (_, None) => "with nothing touching it".into(),
    };
    format!(
        "  ruptures          {}; the first {}, {} deep, {place}\n  cracks            {} of the mid-section, {} \
         {}{}\n",
        tears.ruptures,
        when(&first.at),
        length(first.depth_m),
        digits(tears.crack_share),
        tears.cracks.fragments,
        if tears.cracks.fragments == 1 { "piece" } else { "pieces" },
        tears.torn_at.map_or(String::new(), |at| format!("; torn {}", when(&at))),
    )
}
