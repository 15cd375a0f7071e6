use crate::exit::Exit;
use crate::output::{say, say_json};
use bedswell_sim::figures::{digits, duration, length, memory, stress};
use bedswell_sim::{Grading, Scene, SceneEstimate, read_scene};
use std::path::Path;

/// What every user must know before mixing gel into soil.
const CAUTIONS: [&str; 6] = [
    "Swallowed beads swell in the gut and can kill children and animals; keep dry and swollen beads from both.",
    "Dust of dry gel harms the lungs: do not breathe it, wear a mask when dosing fine grades.",
    "Spilled gel is extremely slippery, the more so when wet.",
    "Putting synthetic polymers on land is regulated: ask what the local rules on soil improvers and microplastics allow.",
    "No dose here is a recommendation; plant response is for the local agronomist.",
    "Results are estimates of a model of round grains and beads; confirm them in a pot trial.",
];

/// Says what a scene comes to, without running it.
pub(super) fn describe(path: &Path, json: bool) -> anyhow::Result<Exit> {
    let scene = read_scene(path)?;
    let estimate = scene.estimate()?;
    let concerns: Vec<String> = scene.concerns()?.iter().map(ToString::to_string).collect();
    let grading = if estimate.grains > 0 { Some(scene.soil.grading()?) } else { None };
    if json {
        let sizes = grading.as_ref().map(|grading| grading.soil.numbers());
        say_json(&serde_json::json!({
            "name": scene.name,
            "seed": scene.seed,
            "estimate": estimate,
            "d10_m": sizes.and_then(|sizes| sizes.d10),
            "d30_m": sizes.and_then(|sizes| sizes.d30),
            "d50_m": sizes.and_then(|sizes| sizes.d50),
            "d60_m": sizes.and_then(|sizes| sizes.d60),
            "coefficient_of_uniformity": sizes.and_then(|sizes| sizes.uniformity),
            "coefficient_of_curvature": sizes.and_then(|sizes| sizes.curvature),
            "fines_left_out": grading.as_ref().map(|grading| grading.left_out),
            "friction": scene.soil.friction,
            "rolling_friction": scene.soil.rolling_friction,
            "porosity": scene.bed.porosity,
            "pot_m": scene.bed.pot,
            "open": scene.bed.open,
            "flooded": scene.bed.flooded,
            "lid_stress_pa": scene.bed.lid_stress,
            "across_asked": scene.beads.across,
            "voxel_budget": scene.beads.voxel_budget,
            "concerns": concerns,
            "gel": scene.gel,
            "regime": regime(&scene, &estimate),
            "cautions": CAUTIONS,
        }))?;
    } else {
        say(&in_words(&scene, &estimate, grading.as_ref(), &concerns))?;
    }
    Ok(Exit::Done)
}

fn in_words(
    scene: &Scene,
    estimate: &SceneEstimate,
    grading: Option<&Grading>,
    concerns: &[String],
) -> String {
    let mut text = format!("{} (seed {})\n\n", scene.name, scene.seed);
    let mut part = |name: &str, lines: &[String]| {
        for (index, line) in lines.iter().enumerate() {
            text += &format!("{:<8} {line}\n", if index == 0 { name } else { "" });
        }
    };
    part("soil", &grading.map_or(vec!["none".into()], |grading| soil(scene, estimate, grading)));
    part("bed", &[bed(scene, estimate)]);
    part(
        "beads",
        &[format!(
            "{} of {} dry, free-swollen {}; {} voxels across, {:.0} of the {} allowed in all",
            estimate.beads,
            length(scene.beads.dry_diameter),
            length(estimate.swollen_diameter_m),
            estimate.across,
            estimate.voxels,
            scene.beads.voxel_budget,
        )],
    );
    part(
        "gel",
        &[
            format!(
                "crosslinks {}, charges {} per solvent volume, chi {}",
                digits(scene.gel.crosslinks),
                digits(scene.gel.charges),
                digits(scene.gel.chi)
            ),
            format!(
                "free-swollen in this water: {} g/g, stretch {}, shear modulus {}",
                digits(estimate.free_uptake_g_per_g),
                digits(estimate.free_stretch),
                stress(estimate.swollen_modulus_pa)
            ),
        ],
    );
    part("load", &[regime(scene, estimate)]);
    part(
        "cost",
        &[format!(
            "about {} a pack on one core, {} of memory",
            duration(estimate.seconds_per_pack),
            memory(estimate.memory_bytes)
        )],
    );
    part("mind", concerns);
    text += "\nCautions\n";
    for caution in CAUTIONS {
        text += &format!("- {caution}\n");
    }
    text.trim_end().to_owned()
}

fn soil(scene: &Scene, estimate: &SceneEstimate, grading: &Grading) -> Vec<String> {
    let known = |size: Option<f64>| size.map_or("unknown".into(), length);
    let plain = |number: Option<f64>| number.map_or("unknown".into(), digits);
    let sizes = grading.soil.numbers();
    vec![
        format!(
            "{} grains; D10 {}, D30 {}, D50 {}, D60 {}; Cu {}, Cc {}",
            estimate.grains,
            known(sizes.d10),
            known(sizes.d30),
            known(sizes.d50),
            known(sizes.d60),
            plain(sizes.uniformity),
            plain(sizes.curvature)
        ),
        format!(
            "friction {}, rolling friction {}; {}",
            digits(scene.soil.friction),
            digits(scene.soil.rolling_friction),
            if grading.left_out > 0.0 {
                format!("{} % of the mass is left out as fines", digits(100.0 * grading.left_out))
            } else {
                "no fines are left out".into()
            }
        ),
    ]
}

fn bed(scene: &Scene, estimate: &SceneEstimate) -> String {
    let bed = &scene.bed;
    let width = length(estimate.bed_edge_m);
    let mut text = match bed.pot {
        Some(_) => format!("in a pot {width} wide, about {} high when dry", length(estimate.bed_height_m)),
        None => format!("about {width} wide"),
    };
    text += &format!("; porosity {}", bed.porosity.map_or("as prepared".into(), digits));
    text += &if bed.open {
        "; open at the top".into()
    } else {
        format!("; {} under the lid", stress(bed.lid_stress))
    };
    for (is, what) in [
        (bed.lid_held, ", which is then held"),
        (bed.flooded, "; flooded"),
        (bed.fixed_grains, "; grains held in place"),
    ] {
        text += if is { what } else { "" };
    }
    text
}

/// What the load does to a swelling bead, by trial runs of beds of 900 grains.
fn regime(scene: &Scene, estimate: &SceneEstimate) -> String {
    let ratio = digits(estimate.load_ratio);
    if scene.bed.fixed_grains {
        return format!("{ratio} of the gel's modulus, of no effect on grains that are held in place");
    }
    if scene.bed.open {
        return "none but the weight of what lies above".into();
    }
    if estimate.grains == 0 {
        return format!("{ratio} of the gel's modulus, on beads alone");
    }
    let meaning = match estimate.load_ratio {
        ..0.02 => "light: beads swell almost freely and lift the bed",
        0.02..0.06 => "moderate: grains move aside, uptake some nine tenths of free",
        0.06..0.2 => "heavy: uptake some three quarters of free, the gel bulges into the pores",
        _ => {
            "very heavy: grains hardly move, the gel fills the pores between them and presses on itself there"
        }
    };
    format!("{ratio} of the gel's modulus, {meaning}")
}
