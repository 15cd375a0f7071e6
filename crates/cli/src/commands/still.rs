use super::view::renderer;
use crate::exit::{Exit, Usage};
use crate::output::{note, say, say_json};
use crate::picture_args::Still;
use anyhow::bail;
use bedswell_film::{draw_still, still_drawing, write_gltf, write_png};
use bedswell_picture::{Look, Run};
use serde_json::json;

/// Draws one picture of a run, or writes its scene for other programs.
pub(super) fn still(arguments: &Still, json: bool) -> anyhow::Result<Exit> {
    let run = Run::open(&arguments.run)?;
    run.notes.iter().for_each(|text| note(text));
    let wanted = wanted(arguments, &run);
    match arguments.out.extension().and_then(|end| end.to_str()) {
        Some("png") => {
            write_png(&arguments.out, &draw_still(&run, &wanted, &mut *renderer(arguments.drawn_by)?)?)?
        }
        Some("glb") => write_gltf(&arguments.out, &still_drawing(&run, &wanted)?)?,
        _ => bail!(Usage(format!(
            "--out {}: pictures are written as .png, scenes as .glb (glTF 2.0); choose a name that ends so",
            arguments.out.display()
        ))),
    }
    if json {
        say_json(&json!({ "out": arguments.out }))?;
    } else {
        say(&format!("written to {}", arguments.out.display()))?;
    }
    Ok(Exit::Done)
}

fn wanted(arguments: &Still, run: &Run) -> bedswell_film::Still {
    let part = |name: &str| arguments.beads.iter().any(|part| part == name);
    bedswell_film::Still {
        size: arguments.size,
        time: arguments.increment.unwrap_or(f64::INFINITY).min(run.end().unwrap_or(0.0)),
        look: Look {
            grains: arguments.grains,
            shade: arguments.shade,
            force_chains: arguments.force_chains,
            bonds: part("bonds"),
            skin: part("skin"),
            crosses: part("crosses"),
            field: arguments.field,
            range: arguments.range,
            cut: arguments.cut,
            theme: arguments.theme,
            text: arguments.text,
            ..Look::default()
        },
        subject: arguments.look_at,
        azimuth: arguments.azimuth,
        elevation: arguments.elevation,
        zoom: arguments.zoom,
        transparent: arguments.transparent,
        words: !arguments.bare,
    }
}
