//! Studies: nothing lost, nothing done twice, and the same files however they were made.

use bedswell_sim::{
    BeadOutcome, FolderError, PackOutcome, Quality, RunError, Scene, Study, StudyOptions, StudySummary,
    read_study, run_study,
};
use std::path::Path;
use std::sync::atomic::{AtomicU64, Ordering};
use std::time::Duration;

/// A stand-in for the march: figures that depend on scene and pack as a real pack's do.
fn stand_in(scene: &Scene, pack: u64) -> Result<PackOutcome, RunError> {
    use rand::RngExt;
    let mut random = bedswell_geometry::stream(scene.seed, &[pack]);
    // Packs finish in an order of their own.
    std::thread::sleep(Duration::from_micros(random.random_range(0..2000)));
    if pack % 11 == 10 {
        return Err(RunError::March { increment: 3, reason: "no equilibrium; use more increments".into() });
    }
    let mut bead = || BeadOutcome {
        uptake_g_per_g: random.random_range(60.0..90.0),
        volume_ratio: random.random(),
        mean_pressure_pa: random.random(),
        largest_tension_pa: random.random(),
        largest_tension_at: [random.random(), random.random(), random.random()],
        tension_q99_pa: random.random(),
        compression_q999_pa: random.random(),
        largest_contact_force_n: random.random(),
        contacts: random.random_range(4..12),
        asphericity: random.random(),
        tear_probability: random.random(),
        torn: random.random_bool(0.3),
    };
    Ok(PackOutcome {
        pack,
        grains: scene.bed.grains,
        porosity: 0.4,
        fines_left_out: 0.0,
        heave_m: 1e-4,
        contact_number: 4.5,
        beads: vec![bead(), bead()],
        quality: Quality::default(),
        history: Vec::new(),
        positions: Vec::new(),
    })
}

fn study(packs: u64, half_width: Option<f64>) -> Study {
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join("../../scenes/grain-size-study.toml");
    Study { packs, half_width, ..read_study(&path).unwrap() }
}

fn conduct(study: &Study, folder: &Path, threads: usize) -> StudySummary {
    run_study(study, folder, StudyOptions { threads, csv: true }, &stand_in, &mut ()).unwrap()
}

fn files(folder: &Path) -> [Vec<u8>; 3] {
    ["outcomes.parquet", "outcomes.csv", "summary.json"].map(|name| std::fs::read(folder.join(name)).unwrap())
}

#[test]
fn the_files_do_not_depend_on_the_number_of_threads() {
    let study = study(24, Some(0.12));
    let [one, four] = [1, 4].map(|threads| {
        let folder = tempfile::tempdir().unwrap();
        conduct(&study, folder.path(), threads);
        files(folder.path())
    });
    assert!(one == four);
}

#[test]
fn a_study_stopped_at_any_point_ends_in_the_same_files() {
    let study = study(6, None);
    let whole = tempfile::tempdir().unwrap();
    conduct(&study, whole.path(), 2);
    let journal = std::fs::read(whole.path().join("journal.txt")).unwrap();
    for cut in (0..journal.len()).step_by(997) {
        let folder = tempfile::tempdir().unwrap();
        std::fs::write(folder.path().join("journal.txt"), &journal[..cut]).unwrap();
        conduct(&study, folder.path(), 3);
        assert!(files(whole.path()) == files(folder.path()), "cut at byte {cut}");
    }
}

#[test]
fn a_finished_study_computes_nothing_again_and_a_larger_one_only_what_is_new() {
    let folder = tempfile::tempdir().unwrap();
    conduct(&study(5, None), folder.path(), 2);
    let computed = AtomicU64::new(0);
    let counting = |scene: &Scene, pack: u64| {
        computed.fetch_add(1, Ordering::Relaxed);
        stand_in(scene, pack)
    };
    let options = StudyOptions { threads: 2, csv: true };
    run_study(&study(5, None), folder.path(), options, &counting, &mut ()).unwrap();
    assert_eq!(computed.load(Ordering::Relaxed), 0);
    run_study(&study(7, None), folder.path(), options, &counting, &mut ()).unwrap();
    assert_eq!(computed.load(Ordering::Relaxed), 3 * 2);

    let at_once = tempfile::tempdir().unwrap();
    conduct(&study(7, None), at_once.path(), 1);
    assert!(files(folder.path()) == files(at_once.path()));
}

#[test]
fn a_level_stops_once_its_tear_fraction_is_known_well_enough() {
    let folder = tempfile::tempdir().unwrap();
    let summary = conduct(&study(400, Some(0.12)), folder.path(), 2);
    for level in &summary.levels {
        assert!(level.stopped_early, "{level:?}");
        let (low, high) =
            (level.tear_fraction_clustered_low.unwrap(), level.tear_fraction_clustered_high.unwrap());
        assert!(high - low <= 0.24, "{level:?}");
        // Some hundred beads are needed for ±0.12 at a fraction of 0.3: 0.3·0.7·(1.96/0.12)² = 56.
        assert!((40..150).contains(&level.beads), "{level:?}");
    }
    assert!(summary.complete);
}

#[test]
fn failed_packs_are_counted_and_named() {
    let folder = tempfile::tempdir().unwrap();
    let summary = conduct(&study(12, None), folder.path(), 2);
    assert_eq!(summary.overall.packs, 3 * 11);
    assert_eq!(summary.overall.failed.len(), 3);
    assert_eq!(summary.overall.failed[0].pack, 10);
    assert!(summary.overall.failed[0].reason.contains("increment 3"), "{:?}", summary.overall.failed);
    let csv = std::fs::read_to_string(folder.path().join("outcomes.csv")).unwrap();
    assert_eq!(csv.lines().count(), 1 + 3 * (11 * 2 + 1));
    assert_eq!(csv.lines().filter(|line| line.contains("no equilibrium")).count(), 3);
}

#[test]
fn an_outcome_that_is_not_finite_is_a_failure_not_a_figure() {
    let folder = tempfile::tempdir().unwrap();
    let broken = |scene: &Scene, pack: u64| {
        stand_in(scene, pack).map(|outcome| PackOutcome { heave_m: f64::NAN, ..outcome })
    };
    let options = StudyOptions { threads: 1, csv: false };
    let summary = run_study(&study(2, None), folder.path(), options, &broken, &mut ()).unwrap();
    assert_eq!((summary.overall.packs, summary.overall.failed.len()), (0, 6));
    assert_eq!(summary.overall.tear_fraction, None);
}

#[test]
fn the_folder_of_another_study_is_refused() {
    let folder = tempfile::tempdir().unwrap();
    conduct(&study(1, None), folder.path(), 1);
    let before = files(folder.path());
    let mut other = study(1, None);
    other.levels.pop();
    let options = StudyOptions { threads: 1, csv: false };
    let error = run_study(&other, folder.path(), options, &stand_in, &mut ()).unwrap_err();
    assert!(matches!(error, FolderError::Occupied { .. }), "{error}");
    assert!(files(folder.path()) == before);
}
