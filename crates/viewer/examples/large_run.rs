//! Writes the folder of a made-up run of any size, to measure the window with:
//! `large_run DIR GRAINS VOXELS_ACROSS`.

use bedswell_gel::{Bead, Lattice};
use bedswell_geometry::Vector;
use bedswell_sim::{
    BeadState, Observer, Quality, State, StateRecorder, Step, prepare_run_folder, read_scene,
};
use std::error::Error;
use std::path::Path;
use std::sync::Arc;

fn main() -> Result<(), Box<dyn Error>> {
    let arguments: Vec<String> = std::env::args().skip(1).collect();
    let [folder, grains, across] = &arguments[..] else { return Err("give DIR GRAINS VOXELS_ACROSS".into()) };
    let (folder, grains, across) = (Path::new(folder), grains.parse()?, across.parse()?);
    let text =
        include_str!("../../../scenes/tree-pit.toml").replacen("increments = 30 ", "increments = 2 ", 1);
    let file = std::env::temp_dir().join("large-run.toml");
    std::fs::write(&file, text)?;
    let scene = read_scene(&file)?;
    prepare_run_folder(folder, &scene, 0)?;
    let mut nobody = ();
    let mut recorder = StateRecorder::new(folder, &mut nobody);
    for increment in 0..=2 {
        let _ = recorder.look(state(grains, across, increment));
    }
    recorder.finish()?;
    Ok(())
}

/// Grains on a shaken cubic lattice, 2 mm apart, and a bead that has pushed none aside.
fn state(grains: usize, across: usize, increment: usize) -> State {
    let side = (grains as f64).cbrt().ceil() as usize;
    let mut seed = 1_u64;
    let mut shake = || {
        seed = seed.wrapping_mul(6_364_136_223_846_793_005).wrapping_add(1_442_695_040_888_963_407);
        (seed >> 40) as f32 / (1_u64 << 24) as f32 - 0.5
    };
    let mut centres = Vec::with_capacity(grains);
    let mut radii = Vec::with_capacity(grains);
    for grain in 0..grains {
        let place = [grain % side, grain / side % side, grain / (side * side)];
        centres.push(place.map(|c| 2e-3 * (c as f32 + 0.5) + 4e-4 * shake()));
        radii.push(1e-3 * (0.9 + 0.3 * shake()));
    }
    let edge = 2e-3 * side as f32;
    let lattice = Arc::new(Lattice::new(across));
    let stretch = 1.5 + 1.5 * increment as f64;
    let bead = Bead::new(Arc::clone(&lattice), 0.5e-3, Vector::repeat(0.5 * f64::from(edge)), stretch);
    let mut pull = |scale: f32| scale * shake();
    State {
        fingerprint: "made up".into(),
        pack: 0,
        increments: 2,
        step: Step {
            increment,
            free_stretch: stretch,
            uptake_g_per_g: stretch.powi(3),
            heave_m: 0.0,
            tension_q99_pa: 0.0,
            tear_probability: 0.0,
            quality: Quality::default(),
        },
        cell: [edge; 3],
        periodic: [true, true, false],
        centres,
        radii,
        contacts: Vec::new(),
        beads: vec![BeadState {
            across: across as u16,
            dry_radius: 0.5e-3,
            nodes: (0..lattice.node_count()).map(|node| bead.node(node).map(|x| x as f32).into()).collect(),
            stress: (0..lattice.voxel_count()).map(|_| std::array::from_fn(|_| pull(1e3))).collect(),
            swelling: vec![stretch.powi(3) as f32; lattice.voxel_count()],
            bonds: (0..lattice.bonds().len()).map(|_| pull(1e3)).collect(),
            touches: Vec::new(),
        }],
        wall: None,
        open: false,
        time_s: None,
        ruptured: Vec::new(),
    }
}
