//! Beads that tear in beds, at rest and in time: where, when, what is told of it, and that a
//! run which was stopped goes on to the same bits.

#![allow(clippy::print_stdout, reason = "the measured figures are worth reading")]

mod support;

use bedswell_sim::{
    BeadAmount, Observer, PackOutcome, Region, RunError, Scene, State, Step, Time, Toughness, read_scene,
    run_pack, write_run_folder,
};
use std::ops::ControlFlow;
use support::{HOUR, Resuming, Stopping, scenes};

/// A closer array than the example's, with a bead of few voxels.
fn array() -> Scene {
    let changes =
        [("diameter = \"3.2 mm\"", "diameter = \"2.8 mm\""), ("gap = \"1.2 mm\"", "gap = \"1 mm\"")];
    let mut scene = read_with(&changes).unwrap();
    scene.beads.across = 12;
    scene.march.increments = 8;
    scene.toughness = Some(tough(0.02));
    scene
}

/// A toughness with a fracture energy (J/m²).
fn tough(energy: f64) -> Toughness {
    Toughness { energy, length: Some(0.9e-3), scatter: 0.1, torn_area: 0.05, torn_share: 0.01 }
}

/// The example with these words replaced, checked as a scene.
fn read_with(changes: &[(&str, &str)]) -> Result<Scene, String> {
    let mut text = std::fs::read_to_string(scenes().join("sphere-array.toml")).unwrap();
    for (from, to) in changes {
        assert_eq!(text.matches(from).count(), 1, "{from}");
        text = text.replace(from, to);
    }
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("scene.toml");
    std::fs::write(&path, text).unwrap();
    read_scene(&path).map_err(|error| error.to_string())
}

/// The same with steps as rough as these tests need.
fn in_time(scene: Scene, until: f64, potentials: &[(f64, f64)]) -> Scene {
    let scene = support::in_time(scene, until, potentials);
    Scene { time: scene.time.map(|time| Time { step_error: 0.1, ..time }), ..scene }
}

#[test]
fn a_toughness_that_cannot_be_is_refused_with_its_line_in_one_sentence() {
    let line = |key: &str| {
        let text = std::fs::read_to_string(scenes().join("sphere-array.toml")).unwrap();
        1 + text.lines().position(|line| line.starts_with(key)).unwrap()
    };
    let energy = "energy = \"0.02 J/m2\"";
    for (change, key, words) in [
        ((energy, "energy = \"0 J/m2\""), "energy", "above zero"),
        ((energy, "energy = \"-1 J/m2\""), "energy", "above zero"),
        ((energy, "energy = \"1 kPa\""), "energy", "a fracture energy is needed"),
        (("scatter = 0.3", "scatter = 0.6"), "scatter", "0 to 0.5"),
        (("scatter = 0.3", "scatter = 0.3\nmodulus = 8"), "", "given twice"),
        (("scatter = 0.3", "modulus = 1"), "", "2.2 to 100"),
        (("length = \"0.7 mm\"", "length = \"0.1 mm\""), "length", "voxels across"),
        (("length = \"0.7 mm\"", "length = \"4 mm\""), "length", "half the bead's free-swollen radius"),
        (("length = \"0.7 mm\"", "strength = 3"), "", "toughness.strength"),
    ] {
        let error = read_with(&[change]).unwrap_err();
        assert!(error.contains(words), "{change:?}: {error}");
        let place = if key.is_empty() { ", line ".to_owned() } else { format!(", line {}:", line(key)) };
        assert!(error.contains(&place) && !error.contains('\n'), "{change:?}: {error}");
    }
    // What the refusal advises is enough.
    let short = ("length = \"0.7 mm\"", "length = \"0.3 mm\"");
    let refused = read_with(&[short]).unwrap_err();
    let advised = refused.split("beads.across = ").nth(1).and_then(|rest| rest.split(' ').next()).unwrap();
    let mended = read_with(&[short, ("across = 16", &format!("across = {advised}"))]);
    assert!(mended.is_ok(), "{refused}\n{mended:?}");
}

#[test]
fn a_modulus_is_as_good_as_its_scatter_and_the_resolved_scene_reads_back() {
    // Weibull's distribution of modulus 5 has this standard deviation over its mean (scipy).
    let scene = read_with(&[("scatter = 0.3", "modulus = 5")]).unwrap();
    assert!((scene.toughness.unwrap().scatter - 0.229_053).abs() < 1e-6);
    let folder = tempfile::tempdir().unwrap();
    std::fs::write(folder.path().join("scene.toml"), scene.to_toml()).unwrap();
    std::fs::write(folder.path().join("spheres.csv"), scene.spheres_csv().unwrap()).unwrap();
    assert_eq!(read_scene(&folder.path().join("scene.toml")).unwrap(), scene);
}

#[test]
fn the_spheres_of_an_array_lie_at_its_corners_with_its_gap() {
    let scene = read_with(&[]).unwrap();
    let bedswell_sim::SoilGrading::Spheres { spheres, size, periodic } = &scene.soil.grading else {
        panic!("{:?}", scene.soil.grading)
    };
    assert_eq!((spheres.len(), *periodic), (8, false));
    let BeadAmount::At(centres) = &scene.beads.amount else { panic!("{:?}", scene.beads.amount) };
    for axis in 0..3 {
        assert!((size[axis] - 7.6e-3).abs() < 1e-12 && (centres[0][axis] - 3.8e-3).abs() < 1e-12);
    }
    let gap = (spheres[0].centre - spheres[1].centre).norm() - 2.0 * spheres[0].radius;
    assert!((gap - 1.2e-3).abs() < 1e-12, "{gap}");
    for (from, to) in
        [("gap = \"1.2 mm\"", "gap = \"-1 mm\""), ("friction = 0.0", "friction = 0.0\nmedian = \"1 mm\"")]
    {
        let error = read_with(&[(from, to)]).unwrap_err();
        assert!(error.contains("soil."), "{error}");
    }
}

#[test]
fn a_tough_bead_stays_whole_and_ends_as_one_that_cannot_tear() {
    let mut scene = array();
    scene.toughness = Some(tough(1e3));
    let tough = run_pack(&scene, 0, &mut ()).unwrap();
    let tears = tough.beads[0].tears.unwrap();
    assert_eq!((tears.ruptures, tears.cracks.fragments, tough.beads[0].torn), (0, 1, false));
    assert!(tears.first.is_none() && tears.torn_at.is_none() && tears.cracks.area_m2 == 0.0);
    scene.toughness = None;
    let plain = run_pack(&scene, 0, &mut ()).unwrap();
    assert!(plain.beads[0].tears.is_none() && plain.tears.is_none());
    assert_eq!(tough.history, plain.history);
    assert_eq!(tough.beads[0].tear_probability, plain.beads[0].tear_probability);
}

#[test]
fn a_weak_bead_tears_on_its_spheres_and_the_weakest_link_speaks_of_a_whole_one() {
    let mut scene = array();
    scene.toughness = Some(tough(2e-3));
    let weak = run_pack(&scene, 0, &mut ()).unwrap();
    let bead = &weak.beads[0];
    let tears = bead.tears.unwrap();
    println!("{tears:?}");
    assert!(bead.torn && tears.crack_share > 0.05 && tears.ruptures > 0);
    let first = tears.first.unwrap();
    let radius = 0.5 * scene.beads.dry_diameter * weak.history.last().unwrap().free_stretch;
    assert!(0.0 < first.depth_m && first.depth_m < radius);
    assert!(first.region != Region::Free && first.to_contact_m.unwrap() < radius);
    assert!(first.at.increment == tears.torn_at.unwrap().increment && first.at.time_s == 0.0);
    // What it does not bear itself any more, a whole bead still would.
    scene.toughness = None;
    let whole = run_pack(&scene, 0, &mut ()).unwrap();
    let foretold = whole.beads[0].tear_probability;
    assert!((bead.tear_probability - foretold).abs() < 1e-9, "{} {foretold}", bead.tear_probability);
    let told = weak.tears.as_ref().unwrap();
    assert_eq!(told.events.len(), tears.ruptures);
    assert_eq!(told.cracks.len(), scene.march.increments);
    let areas: Vec<f64> = told.cracks.iter().map(|beads| beads[0].area_m2).collect();
    assert!(areas.windows(2).all(|pair| pair[0] <= pair[1]), "{areas:?}");
    let sum: f64 = told.events.iter().map(|event| event.area_m2).sum();
    assert!((sum / areas[areas.len() - 1] - 1.0).abs() < 1e-9, "{sum} {areas:?}");
}

/// Keeps the last state.
struct Last(Option<State>);

impl Observer for Last {
    fn step(&mut self, _: &Step, _: usize) -> ControlFlow<()> {
        ControlFlow::Continue(())
    }

    fn looks(&self) -> bool {
        true
    }

    fn look(&mut self, state: State) -> ControlFlow<()> {
        self.0 = Some(state);
        ControlFlow::Continue(())
    }
}

#[test]
fn states_hold_the_cracks_and_the_folder_a_row_for_each_rupture() {
    let mut scene = array();
    scene.toughness = Some(tough(2e-3));
    let mut last = Last(None);
    let outcome = run_pack(&scene, 0, &mut last).unwrap();
    let state = last.0.unwrap();
    let lattice = bedswell_gel::Lattice::new(12).split(&state.ruptured[0]);
    assert!(!state.ruptured[0].is_empty());
    assert_eq!(state.beads[0].nodes.len(), lattice.node_count());
    assert_eq!(state.beads[0].bonds.len(), lattice.bonds().len());
    let folder = tempfile::tempdir().unwrap();
    write_run_folder(folder.path(), &scene, &outcome, true).unwrap();
    let lines = |name: &str| std::fs::read_to_string(folder.path().join(name)).unwrap().lines().count();
    assert_eq!(lines("events.csv"), 1 + outcome.beads[0].tears.unwrap().ruptures);
    assert!(folder.path().join("events.parquet").exists() && !folder.path().join("cycles.csv").exists());
    let beads = std::fs::read_to_string(folder.path().join("beads.csv")).unwrap();
    assert!(beads.lines().next().unwrap().contains("first_rupture_region"), "{beads}");
}

/// Two beads in a light bed that tear.
fn bed() -> Scene {
    let mut scene = read_scene(&scenes().join("tree-pit.toml")).unwrap();
    scene.bed.grains = 120;
    scene.bed.lid_stress = 300.0;
    scene.bed.porosity = None;
    scene.beads.amount = BeadAmount::Count(2);
    scene.beads.across = 10;
    scene.march.increments = 6;
    scene
}

#[test]
fn beads_among_grains_that_move_tear_and_come_to_rest_again() {
    let mut scene = bed();
    let plain = run_pack(&scene, 0, &mut ()).unwrap();
    scene.toughness = Some(Toughness { length: Some(1.1e-3), ..tough(3e-3) });
    let outcome = run_pack(&scene, 0, &mut ()).unwrap();
    for (bead, whole) in outcome.beads.iter().zip(&plain.beads) {
        println!("{:?}, uptake {} of {}", bead.tears, bead.uptake_g_per_g, whole.uptake_g_per_g);
    }
    assert!(outcome.beads.iter().any(|bead| bead.torn));
    assert!(
        outcome.quality.grain_residual < 1e-2 && outcome.quality.gel_residual < 1e-2,
        "{:?}",
        outcome.quality
    );
    assert!(outcome.quality.swallowed < 1e-2);
    let uptake = |outcome: &PackOutcome| outcome.beads.iter().map(|bead| bead.uptake_g_per_g).sum::<f64>();
    assert!((uptake(&outcome) / uptake(&plain) - 1.0).abs() < 0.1);
}

/// A bead in the array that is wetted, dried and wetted again, and tears.
fn cycled(energy: f64) -> Scene {
    let mut scene = array();
    scene.beads.across = 10;
    scene.march.increments = 6;
    scene.toughness = Some(Toughness { length: Some(1.1e-3), ..tough(energy) });
    in_time(scene, 9.0 * HOUR, &[(0.0, 0.0), (3.0 * HOUR, -2e4), (6.0 * HOUR, 0.0)])
}

#[test]
fn cracks_are_remembered_through_drying_and_a_stopped_run_goes_on_to_the_same_bits() {
    let scene = cycled(9.0);
    let whole = run_pack(&scene, 0, &mut ()).unwrap();
    let tears = whole.beads[0].tears.unwrap();
    let told = whole.tears.as_ref().unwrap();
    println!("{tears:?}\n{:?}", told.cycles);
    let first = tears.first.unwrap().at;
    assert!(first.increment <= 2 && 0.0 < first.time_s && first.time_s < 3.0 * HOUR);
    let areas: Vec<f64> = told.cracks.iter().map(|beads| beads[0].area_m2).collect();
    assert!(areas[1] > 0.0 && areas.windows(2).all(|pair| pair[0] <= pair[1]), "{areas:?}");
    let turns: Vec<(usize, bool)> = told.cycles.iter().map(|turn| (turn.cycle, turn.is_most)).collect();
    assert_eq!(turns, [(1, true), (1, false), (2, true)]);
    assert!(told.cycles[1].uptake_g_per_g < 0.5 * told.cycles[0].uptake_g_per_g);
    assert!(told.cycles.iter().all(|turn| turn.cracks.wetted_m2 > 0.0));

    // Stopped with cracks in it, before it dries.
    let mut stopping = Stopping { after: 2, kept: None };
    let stopped = run_pack(&scene, 0, &mut stopping).unwrap_err();
    assert!(matches!(stopped, RunError::Stopped { increment: 2 }), "{stopped}");
    let resumed = run_pack(&scene, 0, &mut Resuming { kept: stopping.kept, seen: Vec::new() }).unwrap();
    assert!(resumed == whole, "the run that was stopped differs");
}

#[test]
fn beads_in_time_among_grains_that_move_tear() {
    let mut scene = bed();
    scene.beads.amount = BeadAmount::Count(1);
    scene.march.increments = 2;
    scene.toughness = Some(Toughness { length: Some(1.1e-3), ..tough(12.0) });
    let outcome = run_pack(&in_time(scene, 0.5 * HOUR, &[(0.0, 0.0)]), 0, &mut ()).unwrap();
    outcome.beads.iter().for_each(|bead| println!("{:?}", bead.tears));
    let told = outcome.tears.as_ref().unwrap();
    assert!(!told.events.is_empty() && told.events.iter().all(|event| event.at.time_s > 0.0));
    let course = &outcome.timing.as_ref().unwrap().course;
    assert!(course.last().unwrap().cracks.is_some());
}
