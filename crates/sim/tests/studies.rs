//! Studies: nothing lost, nothing done twice, and the same files however they were made.

use bedswell_sim::{
    BeadAmount, BeadOutcome, BeadTears, Cracks, FolderError, ForceOutcome, Moment, PackOutcome, Quality,
    RESPONSES, RunError, Scene, Study, StudyOptions, StudySummary, read_study, run_study,
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
        timing: None,
        tears: None,
    };
    Ok(PackOutcome {
        pack,
        grains: scene.bed.grains,
        porosity: 0.4,
        fines_left_out: 0.0,
        heave_m: 1e-4,
        heave_strain: 0.01,
        beads_out: 0,
        water_l_per_m3: 30.0,
        porosity_left: 0.3,
        overburden_pa: 300.0,
        lid_stress_pa: 300.0,
        across: 12,
        across_asked: 12,
        chosen_overlap: 3e-4,
        contact_number: 4.5,
        forces_before: ForceOutcome::default(),
        forces_after: ForceOutcome::default(),
        beads: vec![bead(), bead()],
        quality: Quality::default(),
        history: Vec::new(),
        positions: Vec::new(),
        tensions: Vec::new(),
        timing: None,
        tears: None,
    })
}

fn study(packs: u64, half_width: Option<f64>) -> Study {
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join("../../scenes/grain-size-study.toml");
    Study { packs, half_width, ..read_study(&path).unwrap() }
}

/// A study of this text beside the example scenes.
fn study_of(factors: &str) -> Study {
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("study.toml");
    let scene = Path::new(env!("CARGO_MANIFEST_DIR")).join("../../scenes/dosed-mix.toml");
    std::fs::write(&path, format!("scene = {scene:?}\npacks = 4\n{factors}")).unwrap();
    read_study(&path).unwrap()
}

const DOSE_AND_LOAD: &str = "[[factor]]\nkey = \"beads.dose\"\nvalues = [\"0.6 g/kg\", \"1.2 g/kg\", \"1.8 g/kg\"]\n\
                             [[factor]]\nkey = \"bed.lid_stress\"\nvalues = [\"0.2 kPa\", \"0.4 kPa\"]\n";
const RANGES: &str = "samples = 20\n[[factor]]\nkey = \"beads.dose\"\nfrom = \"0.6 g/kg\"\nto = \"1.8 g/kg\"\n\
                      [[factor]]\nkey = \"bed.lid_stress\"\nfrom = \"0.1 kPa\"\nto = \"1 kPa\"\nlogarithmic = true\n\
                      [[factor]]\nkey = \"beads.across\"\nvalues = [8, 10]\n";

fn conduct(study: &Study, folder: &Path, threads: usize) -> StudySummary {
    run_study(study, folder, StudyOptions { threads, csv: true }, &stand_in, &mut ()).unwrap()
}

fn files(folder: &Path) -> [Vec<u8>; 5] {
    ["outcomes.parquet", "outcomes.csv", "levels.parquet", "levels.csv", "summary.json"]
        .map(|name| std::fs::read(folder.join(name)).unwrap())
}

#[test]
fn the_files_do_not_depend_on_the_number_of_threads() {
    for study in [study(24, Some(0.12)), study_of(DOSE_AND_LOAD), study_of(RANGES)] {
        let [one, four] = [1, 4].map(|threads| {
            let folder = tempfile::tempdir().unwrap();
            conduct(&study, folder.path(), threads);
            files(folder.path())
        });
        assert!(one == four, "{}", study.name);
    }
}

#[test]
fn a_study_stopped_at_any_point_ends_in_the_same_files() {
    let study = study_of(DOSE_AND_LOAD);
    let whole = tempfile::tempdir().unwrap();
    conduct(&study, whole.path(), 2);
    let journal = std::fs::read(whole.path().join("journal.txt")).unwrap();
    for cut in (0..journal.len()).step_by(1997) {
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

/// A stand-in whose heave follows the scene by a known law, with scatter from the pack's
/// number that is the same at every level.
fn lawful(scene: &Scene, pack: u64) -> Result<PackOutcome, RunError> {
    let BeadAmount::Dose(dose) = scene.beads.amount else { unreachable!("the scene has a dose") };
    let law = 1e3 * dose + (scene.bed.lid_stress / 100.0).ln();
    let outcome = stand_in(scene, pack)?;
    Ok(PackOutcome { heave_m: law + 0.1 * pack as f64, ..outcome })
}

fn heave_of(study: &Study) -> bedswell_sim::Effects {
    let folder = tempfile::tempdir().unwrap();
    let options = StudyOptions { threads: 2, csv: false };
    let summary = run_study(study, folder.path(), options, &lawful, &mut ()).unwrap();
    assert_eq!(summary.effects.len(), RESPONSES.len());
    summary.effects.into_iter().find(|effects| effects.response == "heave_m").unwrap()
}

#[test]
fn the_effects_of_a_full_factorial_are_those_of_the_law() {
    let heave = heave_of(&study_of(DOSE_AND_LOAD));
    let change = |factor: usize, level: usize| heave.factors[factor].levels[level].difference.unwrap();
    let expected = [(0, 1, 0.6), (0, 2, 1.2), (1, 1, 2_f64.ln())];
    for (factor, level, value) in expected {
        let change = change(factor, level);
        // What packs of one number share cancels in differences, so that no scatter is left.
        for figure in [change.value, change.low.unwrap(), change.high.unwrap()] {
            approx::assert_abs_diff_eq!(figure, value, epsilon = 1e-9);
        }
    }
    // In the means it is all there: packs 0 to 3 are 0.15 ± 0.1 apart from the law.
    let mean = heave.factors[0].levels[0].mean.unwrap();
    approx::assert_abs_diff_eq!(mean.mean, 0.6 + 0.5 * (2_f64.ln() + 4_f64.ln()) + 0.15, epsilon = 1e-9);
    assert!(mean.high.unwrap() - mean.low.unwrap() > 0.1, "{mean:?}");
    assert_eq!(heave.interactions.len(), 1);
    approx::assert_abs_diff_eq!(heave.interactions[0].deviation.value, 0.0, epsilon = 1e-9);
    assert_eq!(heave.explained, None);
}

#[test]
fn the_effects_over_a_latin_hypercube_are_those_of_the_law() {
    let heave = heave_of(&study_of(RANGES));
    approx::assert_abs_diff_eq!(heave.factors[0].over_range.unwrap().value, 1.2, epsilon = 1e-9);
    approx::assert_abs_diff_eq!(heave.factors[1].over_range.unwrap().value, 10_f64.ln(), epsilon = 1e-9);
    let across = &heave.factors[2].levels;
    approx::assert_abs_diff_eq!(across[1].difference.unwrap().value, 0.0, epsilon = 1e-9);
    assert!(across[0].mean.is_some() && across[0].difference.is_none());
    approx::assert_abs_diff_eq!(heave.explained.unwrap(), 1.0, epsilon = 1e-9);
    assert!(heave.factors[1].rank_correlation.unwrap().value > 0.5, "{heave:?}");
}

#[test]
fn every_combination_has_a_row_that_begins_with_its_values() {
    let folder = tempfile::tempdir().unwrap();
    conduct(&study_of(DOSE_AND_LOAD), folder.path(), 2);
    let table = |name: &str| -> Vec<String> {
        let text = std::fs::read_to_string(folder.path().join(name)).unwrap();
        text.lines().map(str::to_owned).collect()
    };
    let levels = table("levels.csv");
    let head = "beads.dose,beads.dose [g/kg],bed.lid_stress,bed.lid_stress [kPa],uptake_g_per_g,\
                uptake_g_per_g_low,uptake_g_per_g_high,";
    assert!(levels[0].starts_with(head) && levels[0].ends_with("packs,failed,level"), "{}", levels[0]);
    assert_eq!(levels.len(), 1 + 6);
    // The last factor changes fastest.
    assert!(levels[2].starts_with("\"0.6 g/kg\",6e-1,\"0.4 kPa\",4e-1,"), "{}", levels[2]);
    assert!(levels[6].ends_with(",4,0,5"), "{}", levels[6]);
    let outcomes = table("outcomes.csv");
    assert!(outcomes[0].starts_with("level,beads.dose,beads.dose [g/kg],bed.lid_stress,"), "{}", outcomes[0]);
    assert_eq!(outcomes.len(), 1 + 6 * 4 * 2);
}

#[test]
fn a_summary_reads_back_as_it_was_written() {
    for study in [study(2, None), study_of(RANGES)] {
        let folder = tempfile::tempdir().unwrap();
        let summary = conduct(&study, folder.path(), 2);
        let text = std::fs::read_to_string(folder.path().join("summary.json")).unwrap();
        assert_eq!(serde_json::from_str::<StudySummary>(&text).unwrap(), summary);
    }
}

/// A stand-in whose beads tear the sooner the larger the dose, or not at all.
fn tearing(scene: &Scene, pack: u64) -> Result<PackOutcome, RunError> {
    let BeadAmount::Dose(dose) = scene.beads.amount else { panic!("{:?}", scene.beads.amount) };
    let mut outcome = stand_in(scene, pack)?;
    for (index, bead) in outcome.beads.iter_mut().enumerate() {
        let free_stretch = 2.0 + f64::from(pack as u32) - 1e3 * dose + 0.1 * index as f64;
        let at = |free_stretch| Moment { increment: 1, free_stretch, time_s: 0.0 };
        bead.torn = free_stretch < 4.0;
        bead.tears = Some(BeadTears {
            ruptures: usize::from(bead.torn),
            cracks: Cracks::default(),
            crack_share: 0.0,
            first: None,
            torn_at: bead.torn.then(|| at(free_stretch.max(1.0))),
            watched_until: at(4.0),
        });
    }
    Ok(outcome)
}

#[test]
fn torn_beads_make_survival_curves_their_comparison_and_a_table_of_agreement() {
    let study = Study { packs: 8, ..study_of(DOSE_AND_LOAD) };
    let folder = tempfile::tempdir().unwrap();
    let options = StudyOptions { threads: 2, csv: true };
    let summary = run_study(&study, folder.path(), options, &tearing, &mut ()).unwrap();
    let survival = summary.survival.as_ref().unwrap();
    assert_eq!((survival.measured_in.as_str(), survival.factors.len()), ("free_stretch", 2));
    // Doses of 0.6, 1.2 and 1.8 g/kg, 2 loads, 8 packs of 2 beads: torn below a stretch of 4.
    let doses = &survival.factors[0];
    let torn: Vec<(u64, u64)> = doses.groups.iter().map(|group| (group.torn, group.beads)).collect();
    assert_eq!(torn, [(12, 32), (16, 32), (16, 32)]);
    let by_hand = 1.0 - 12.0 / 32.0;
    assert!((doses.groups[0].whole_at_end - by_hand).abs() < 1e-12 && doses.groups[0].median.is_none());
    let loads = survival.factors[1].log_rank.unwrap();
    assert!(
        loads.chi_squared < 1e-9 && (loads.p_value - 1.0).abs() < 1e-6,
        "the load does nothing: {loads:?}"
    );
    assert!(doses.log_rank.unwrap().chi_squared > loads.chi_squared);
    let judged = summary.agreement.as_ref().unwrap();
    assert_eq!(judged.bins.iter().map(|bin| bin.bin.count).sum::<u64>(), judged.beads);
    assert_eq!(judged.beads, 96);
    let rows = |name: &str| std::fs::read_to_string(folder.path().join(name)).unwrap().lines().count() - 1;
    assert_eq!(rows("agreement.csv"), judged.bins.len());
    let steps = std::fs::read_to_string(folder.path().join("survival.csv")).unwrap();
    assert!(steps.starts_with("factor,value,free_stretch,at_risk,torn,whole"), "{steps}");
    assert!(folder.path().join("survival.parquet").exists());
    // A study whose beads cannot tear has neither.
    let plain = conduct(&study_of(DOSE_AND_LOAD), tempfile::tempdir().unwrap().path(), 1);
    assert!(plain.survival.is_none() && plain.agreement.is_none());
}
