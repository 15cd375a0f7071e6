use crate::picture_args::{Film, Still, View};
use clap::{Args, Parser, Subcommand};
use clap_complete::Shell;
use std::path::PathBuf;

/// Which absorbent bead for which soil: swells gel beads in a random bed of grains
/// and tells how much water they take up, how far they lift the bed and how likely
/// they are to tear.
#[derive(Debug, Parser)]
#[command(name = "bedswell", version, after_help = EXIT_CODES)]
pub(crate) struct Arguments {
    /// Print results as JSON (and errors as JSON on the error stream)
    #[arg(long, global = true)]
    pub(crate) json: bool,
    #[command(subcommand)]
    pub(crate) verb: Verb,
}

const EXIT_CODES: &str = "Exit codes: 0 done; 1 a pack found no equilibrium or a check failed; \
2 the command line, scene or study cannot be used; 3 the output cannot be written";

/// What to do.
#[derive(Debug, Subcommand)]
pub(crate) enum Verb {
    /// Write a commented scene, or a shot list for films, to start from
    New {
        /// File to write; it must not exist yet
        file: PathBuf,
        /// Write a shot list
        #[arg(long)]
        film: bool,
    },
    /// Say what a scene comes to, without running it
    Describe {
        /// Scene file
        scene: PathBuf,
    },
    /// Take one pack of a scene from dry to equilibrium
    Run(Run),
    /// Run many packs and count torn beads; carries on where it was stopped
    Study(Study),
    /// Fit the strength of a gel to beads that tore or stayed whole on the bench
    Calibrate(Calibrate),
    /// Look at a run, a study, or a scene that runs while you look
    View(View),
    /// Film a run: a clip for a slide, without a window or graphics hardware
    Film(Film),
    /// Draw one picture of a run, or write its scene as glTF 2.0
    Still(Still),
    /// Recompute known results and compare them with outside sources
    Check,
    /// Print a completion script for a shell
    Completions {
        /// Shell to complete for
        shell: Shell,
    },
}

/// Arguments of `run`.
#[derive(Debug, Args)]
pub(crate) struct Run {
    /// Scene file
    pub(crate) scene: PathBuf,
    /// Folder for the results: new, empty, or holding the same run
    #[arg(long, value_name = "DIR")]
    pub(crate) out: PathBuf,
    /// Which of the scene's random packs
    #[arg(long, default_value_t = 0, value_name = "N")]
    pub(crate) pack: u64,
    /// Write the tables as CSV too
    #[arg(long)]
    pub(crate) csv: bool,
}

/// Arguments of `study`.
#[derive(Debug, Args)]
pub(crate) struct Study {
    /// Study file, or a scene file for a study of that scene alone
    pub(crate) file: PathBuf,
    /// Folder for the results: new, empty, or holding the same study
    #[arg(long, value_name = "DIR")]
    pub(crate) out: PathBuf,
    /// Packs at each level, instead of what the file says
    #[arg(long, value_name = "N", value_parser = clap::value_parser!(u64).range(1..=1_000_000))]
    pub(crate) packs: Option<u64>,
    /// Packs computed at once; all cores if left out
    #[arg(long, value_name = "N", value_parser = clap::value_parser!(u16).range(1..=1024))]
    pub(crate) threads: Option<u16>,
    /// Write the table as CSV too
    #[arg(long)]
    pub(crate) csv: bool,
}

/// Arguments of `calibrate`.
#[derive(Debug, Args)]
pub(crate) struct Calibrate {
    /// Table with a row per bead: geometry (its array, a scene file), grade (a name), torn (yes or no)
    pub(crate) outcomes: PathBuf,
    /// Grade to fit; all of them if left out
    #[arg(long, value_name = "NAME")]
    pub(crate) grade: Option<String>,
    /// File for the tables of gel and strength, to take over into scenes; it must not exist yet
    #[arg(long, value_name = "FILE")]
    pub(crate) out: Option<PathBuf>,
}
