use super::view::renderer;
use crate::exit::Exit;
use crate::output::{note, say, say_json};
use crate::picture_args::Film;
use crate::progress::Progress;
use bedswell_film::{Format, ShotList, make_film};
use bedswell_picture::Run;
use serde_json::json;

/// Films a run.
pub(super) fn film(arguments: &Film, json: bool) -> anyhow::Result<Exit> {
    let run = Run::open(&arguments.run)?;
    run.notes.iter().for_each(|text| note(text));
    let shots = shots(arguments)?;
    let planned = Format::of(&arguments.out)?.stored(shots.size, shots.frames_per_second);
    if let Some(reduced) = planned.reduced_from(shots.size) {
        note(&format!("{}: {reduced}", arguments.out.display()));
    }
    let mut progress = Progress::new("frames");
    let mut tell = |done: u32, of: u32| progress.advance(done.into(), of.into());
    let threads = arguments.threads.map_or(0, usize::from);
    let pool = rayon::ThreadPoolBuilder::new().num_threads(threads).build()?;
    let mut renderer = renderer(arguments.drawn_by)?;
    let stored = pool.install(|| make_film(&run, &shots, &arguments.out, &mut *renderer, &mut tell))?;
    drop(progress);
    let frames = shots.frames().div_ceil(stored.every);
    let seconds = f64::from(frames) / stored.frames_per_second();
    if json {
        say_json(&json!({
            "out": arguments.out,
            "frames": frames,
            "seconds": seconds,
            "width": stored.size.width,
            "height": stored.size.height,
        }))?;
    } else {
        say(&format!(
            "{frames} frames of {}x{} pixels, {seconds:.1} s, written to {}",
            stored.size.width,
            stored.size.height,
            arguments.out.display()
        ))?;
    }
    Ok(Exit::Done)
}

/// The shot list that the arguments name, changed as they say.
fn shots(arguments: &Film) -> anyhow::Result<ShotList> {
    let mut shots = match &arguments.shots {
        Some(file) => ShotList::read(file)?,
        None => ShotList::standard(),
    };
    if let Some(size) = arguments.size {
        shots.size = size;
    }
    if let Some(rate) = arguments.frame_rate {
        shots.frames_per_second = rate;
    }
    if let Some(length) = arguments.length {
        let now: f64 = shots.shots.iter().map(|shot| shot.seconds).sum();
        shots.shots.iter_mut().for_each(|shot| shot.seconds *= length / now);
    }
    if let Some(title) = &arguments.title {
        shots.title = Some(title.clone());
    }
    Ok(shots)
}
