//! Beds in time: where they end, how far they depend on the step, and that a run which was
//! stopped goes on to the same bits.

#![allow(clippy::print_stdout, reason = "the measured figures are worth reading")]

mod support;

use bedswell_sim::{BeadAmount, PackOutcome, RunError, Scene, read_scene, run_pack};
use support::{HOUR, Resuming, Stopping, in_time, scenes};

fn example(name: &str) -> Scene {
    read_scene(&scenes().join(name)).unwrap()
}

/// A bead that lifts a few grains under a light lid.
fn light_bed() -> Scene {
    let mut scene = example("tree-pit.toml");
    scene.bed.grains = 120;
    scene.bed.lid_stress = 30.0;
    scene.beads.across = 8;
    scene.march.increments = 8;
    scene
}

fn uptake(outcome: &PackOutcome) -> f64 {
    outcome.beads.iter().map(|bead| bead.uptake_g_per_g).sum::<f64>() / outcome.beads.len() as f64
}

#[test]
fn a_bead_among_held_spheres_ends_in_its_equilibrium() {
    let mut scene = example("bench-array.toml");
    scene.beads.across = 10;
    scene.march.increments = 8;
    let rest = uptake(&run_pack(&scene, 0, &mut ()).unwrap());
    let outcome = run_pack(&in_time(scene, 200.0 * HOUR, &[(0.0, 0.0)]), 0, &mut ()).unwrap();
    let timing = outcome.beads[0].timing.unwrap();
    println!("uptake {:.5} of that at rest, {timing:?}", uptake(&outcome) / rest);
    assert!((uptake(&outcome) / rest - 1.0).abs() < 5e-3);
    assert!(0.0 < timing.half_time_s && timing.half_time_s < timing.ninety_time_s);
    // On its way the outside pulls at the core more than the spheres do at the end.
    assert!(timing.most_tension_q99_pa > 2.0 * outcome.beads[0].tension_q99_pa);
}

#[test]
fn a_long_wetting_of_a_light_bed_ends_in_its_equilibrium() {
    let rest = uptake(&run_pack(&light_bed(), 0, &mut ()).unwrap());
    let outcome = run_pack(&in_time(light_bed(), 100.0 * HOUR, &[(0.0, 0.0)]), 0, &mut ()).unwrap();
    println!("uptake {:.5} of that at rest, {:?}", uptake(&outcome) / rest, outcome.quality);
    assert!((uptake(&outcome) / rest - 1.0).abs() < 5e-3);
    assert!(outcome.quality.grain_residual < 1e-2 && outcome.quality.swallowed < 1e-2);
}

#[test]
fn halved_steps_change_the_half_time_by_less_than_a_hundredth() {
    let half = |step_error: f64| {
        let mut scene = in_time(light_bed(), 6.0 * HOUR, &[(0.0, 0.0)]);
        scene.time.as_mut().unwrap().step_error = step_error;
        let outcome = run_pack(&scene, 0, &mut ()).unwrap();
        println!("step error {step_error}: {:?}", outcome.beads[0].timing);
        outcome.beads[0].timing.as_ref().unwrap().half_time_s
    };
    // Steps are as long as the root of their error.
    let (usual, halved) = (half(0.02), half(0.005));
    assert!((usual / halved - 1.0).abs() < 1e-2, "{usual} {halved}");
}

/// Two beads that are wetted, dried and wetted again.
fn two_beads() -> Scene {
    let mut scene = light_bed();
    scene.bed.grains = 200;
    scene.bed.lid_stress = 300.0;
    scene.bed.porosity = None;
    scene.beads.amount = BeadAmount::Count(2);
    scene.beads.across = 6;
    scene.march.increments = 6;
    in_time(scene, 3.0 * HOUR, &[(0.0, 0.0), (HOUR, -3e5), (2.0 * HOUR, 0.0)])
}

#[test]
fn a_bed_dries_under_suction_and_drinks_again() {
    let outcome = run_pack(&two_beads(), 0, &mut ()).unwrap();
    let seconds = outcome.timing.as_ref().unwrap().seconds.clone();
    let uptakes: Vec<f64> = outcome.history.iter().map(|step| step.uptake_g_per_g).collect();
    let heaves: Vec<f64> = outcome.history.iter().map(|step| step.heave_m).collect();
    println!("{seconds:?}\n{uptakes:?}\n{heaves:?}");
    assert_eq!(seconds, [0.25, 1.0, 1.25, 2.0, 2.25, 3.0].map(|hours| hours * HOUR));
    assert!(uptakes[3] < 0.2 * uptakes[1] && uptakes[5] > 3.0 * uptakes[3]);
    assert!(heaves[3] < heaves[1] && heaves[5] > heaves[3]);
}

#[test]
fn a_run_that_was_stopped_goes_on_to_the_same_bits() {
    let scene = two_beads();
    let whole = run_pack(&scene, 1, &mut ()).unwrap();
    let mut stopping = Stopping { after: 2, kept: None };
    let stopped = run_pack(&scene, 1, &mut stopping).unwrap_err();
    assert!(matches!(stopped, RunError::Stopped { increment: 2 }), "{stopped}");
    let mut resuming = Resuming { kept: stopping.kept, seen: Vec::new() };
    let resumed = run_pack(&scene, 1, &mut resuming).unwrap();
    assert_eq!(resuming.seen, [3, 4, 5, 6]);
    assert!(resumed == whole, "the run that was stopped differs");
}

#[test]
fn what_was_kept_of_another_pack_is_not_used() {
    let mut scene = example("bench-array.toml");
    scene.beads.across = 6;
    scene.march.increments = 2;
    let scene = in_time(scene, HOUR, &[(0.0, 0.0)]);
    let mut stopping = Stopping { after: 1, kept: None };
    run_pack(&scene, 1, &mut stopping).unwrap_err();
    for (pack, seen) in [(1, vec![2]), (0, vec![1, 2])] {
        let mut resuming = Resuming { kept: stopping.kept.clone(), seen: Vec::new() };
        run_pack(&scene, pack, &mut resuming).unwrap();
        assert_eq!(resuming.seen, seen, "pack {pack}");
    }
}

/// What a scene with this `[time]` section is refused for.
fn refusal(time: &str) -> String {
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("scene.toml");
    let text = std::fs::read_to_string(scenes().join("tree-pit.toml")).unwrap();
    std::fs::write(&path, format!("{text}\n{time}")).unwrap();
    read_scene(&path).unwrap_err().to_string()
}

#[test]
fn histories_that_cannot_be_are_refused_by_line() {
    let lines = std::fs::read_to_string(scenes().join("tree-pit.toml")).unwrap().lines().count();
    let head = "[time]\nuntil = \"3 days\"\ndiffusion = \"2e-10 m2/s\"\n";
    let entries = |entries: &[&str]| -> String {
        let entries = entries.iter().map(|entry| format!("[[time.outside]]\n{entry}\n"));
        format!("{head}{}", entries.collect::<String>())
    };
    for (time, line, words) in [
        ("[time]\nuntil = \"0 h\"".to_owned(), 3, "above zero"),
        ("[time]\nuntil = \"1 h\"".to_owned(), 2, "time.diffusion"),
        (format!("{head}step = 1"), 5, "time.step"),
        (entries(&["at = \"-1 h\""]), 6, "zero or later"),
        (entries(&["at = \"2 h\"", "at = \"1 h\""]), 8, "later than the entry before it"),
        (entries(&["at = \"4 days\""]), 6, "not before the end"),
        (entries(&["at = \"0 h\"\npotential = \"-20 MPa\""]), 7, "-10000000 to 0"),
        (entries(&["at = \"0 h\"\npotential = \"1 kPa\""]), 7, "-10000000 to 0"),
        (entries(&["at = \"1 h\"\nsalt = \"9 mol/L\""]), 7, "0 to 6.2 mol/L"),
        (entries(&["at = \"0 h\"\nsupply = \"-1 mm3/h\""]), 7, "0 m³/s or more"),
        (entries(&["at = \"0 h\"\nrain = true"]), 7, "time.outside.rain"),
        (entries(&["salt = \"0 mol/L\""]), 5, "time.outside.at"),
    ] {
        let error = refusal(&time);
        assert!(error.contains(words) && error.contains(&format!("{}", lines + line)), "{time}\n{error}");
    }
}
