//! Arguments of the verbs that show a run.

use bedswell_film::Subject;
use bedswell_painter::Size;
use bedswell_picture::{Cut, Field, GrainLook, GrainShade, Theme};
use clap::{Args, ValueEnum};
use std::ffi::OsString;
use std::path::PathBuf;

/// Arguments of `view`: handed on to the viewer as they are.
#[derive(Debug, Args)]
#[command(disable_help_flag = true)]
pub(crate) struct View {
    /// Folder of a run or a study, or a scene to run and follow; `--help` for the options
    #[arg(trailing_var_arg = true, allow_hyphen_values = true, value_name = "DIR|SCENE")]
    pub(crate) arguments: Vec<OsString>,
}

/// Arguments of `film`.
#[derive(Debug, Args)]
pub(crate) struct Film {
    /// Folder of a run
    pub(crate) run: PathBuf,
    /// File for the film, .mp4 or .gif, or a folder for its frames
    #[arg(long, value_name = "FILE|FOLDER")]
    pub(crate) out: PathBuf,
    /// Shot list; `bedswell new --film FILE` writes one to start from
    #[arg(long, value_name = "FILE")]
    pub(crate) shots: Option<PathBuf>,
    /// Size in pixels, as 1280x720
    #[arg(long, value_parser = size)]
    pub(crate) size: Option<Size>,
    /// Frames per second
    #[arg(long, value_name = "N", value_parser = clap::value_parser!(u32).range(1..=60))]
    pub(crate) frame_rate: Option<u32>,
    /// Length of the whole film; every shot gets its share
    #[arg(long, value_name = "SECONDS", value_parser = seconds)]
    pub(crate) length: Option<f64>,
    /// Title, instead of the scene's name
    #[arg(long)]
    pub(crate) title: Option<String>,
    /// Who draws
    #[arg(long, value_enum, value_name = "WHO", default_value_t = DrawnBy::Painter)]
    pub(crate) drawn_by: DrawnBy,
    /// Threads to paint with; all cores if left out
    #[arg(long, value_name = "N", value_parser = clap::value_parser!(u16).range(1..=1024))]
    pub(crate) threads: Option<u16>,
}

/// Arguments of `still`.
#[derive(Debug, Args)]
pub(crate) struct Still {
    /// Folder of a run
    pub(crate) run: PathBuf,
    /// File for the picture (.png), or for the scene in glTF 2.0 (.glb)
    #[arg(long, value_name = "FILE")]
    pub(crate) out: PathBuf,
    /// Size in pixels
    #[arg(long, value_parser = size, default_value = "1920x1080")]
    pub(crate) size: Size,
    /// Time in increments, 0 for the dry bed; the end if left out
    #[arg(long, value_name = "T")]
    pub(crate) increment: Option<f64>,
    /// What is in the middle: bed, bead-0 and so on, or place-1 and so on where rupture is likeliest
    #[arg(long, value_name = "WHAT", value_parser = subject, default_value = "bed")]
    pub(crate) look_at: Subject,
    /// Compass direction of the eye in degrees, anticlockwise from x
    #[arg(long, value_name = "DEGREES", allow_negative_numbers = true)]
    pub(crate) azimuth: Option<f32>,
    /// Height of the eye above the horizon in degrees
    #[arg(long, value_name = "DEGREES", allow_negative_numbers = true)]
    pub(crate) elevation: Option<f32>,
    /// 2 is twice as close as where the whole fits
    #[arg(long, value_name = "FACTOR", value_parser = factor, default_value = "1")]
    pub(crate) zoom: f32,
    /// How grains appear: plain, ghosted or hidden
    #[arg(long, value_name = "HOW", value_parser = word(&GrainLook::ALL), default_value = "ghosted")]
    pub(crate) grains: GrainLook,
    /// What the grains' shade means: plain, size, displacement or contact-force
    #[arg(long, value_name = "WHAT", value_parser = word(&GrainShade::ALL), default_value = "plain")]
    pub(crate) shade: GrainShade,
    /// What is shown of the beads: bonds, skin, crosses, separated by commas
    #[arg(long, value_name = "PARTS", value_delimiter = ',', default_value = "bonds",
          value_parser = ["bonds", "skin", "crosses", "none"])]
    pub(crate) beads: Vec<String>,
    /// The contact forces between grains as rods
    #[arg(long)]
    pub(crate) force_chains: bool,
    /// Field on skin and section, such as largest-principal-stress
    #[arg(long, value_name = "FIELD", value_parser = field_word(), default_value = "largest-principal-stress")]
    pub(crate) field: Field,
    /// Factor on the range of the colour scales
    #[arg(long, value_name = "FACTOR", value_parser = factor, default_value = "1")]
    pub(crate) range: f32,
    /// Cutting plane: azimuth and elevation of its normal in degrees, and its distance in mm
    /// from the middle of the beads, as 90,0,0
    #[arg(long, value_name = "A,E,MM", value_parser = cut, allow_hyphen_values = true)]
    pub(crate) cut: Option<Cut>,
    /// Colours: dark, light or print
    #[arg(long, value_parser = word(&Theme::ALL), default_value = "light")]
    pub(crate) theme: Theme,
    /// Size of letters over the usual
    #[arg(long, value_name = "FACTOR", value_parser = factor, default_value = "1")]
    pub(crate) text: f32,
    /// No background
    #[arg(long)]
    pub(crate) transparent: bool,
    /// No title, legends, scale bar and axes
    #[arg(long)]
    pub(crate) bare: bool,
    /// Who draws
    #[arg(long, value_enum, value_name = "WHO", default_value_t = DrawnBy::Painter)]
    pub(crate) drawn_by: DrawnBy,
}

/// Who draws.
#[derive(Clone, Copy, Debug, PartialEq, Eq, ValueEnum)]
pub(crate) enum DrawnBy {
    /// The painter: needs no graphics card, draws the same everywhere
    Painter,
    /// Bevy, through the viewer program
    Bevy,
}

/// Most pixels either way.
const LARGEST: u32 = 8192;

fn size(text: &str) -> Result<Size, String> {
    let sides =
        text.split_once('x').and_then(|(width, height)| Some((width.parse().ok()?, height.parse().ok()?)));
    match sides {
        Some((width, height)) if (16..=LARGEST).contains(&width) && (16..=LARGEST).contains(&height) => {
            Ok(Size { width, height })
        }
        _ => Err(format!("write width and height in pixels, 16 to {LARGEST}, as 1280x720")),
    }
}

fn seconds(text: &str) -> Result<f64, String> {
    let parsed = text.parse().ok().filter(|seconds| (0.1..=3600.0).contains(seconds));
    parsed.ok_or_else(|| "a number of seconds from 0.1 to 3600".into())
}

fn factor(text: &str) -> Result<f32, String> {
    let parsed = text.parse().ok().filter(|factor| (0.01..=100.0).contains(factor));
    parsed.ok_or_else(|| "a factor from 0.01 to 100".into())
}

fn subject(text: &str) -> Result<Subject, String> {
    let numbered = |prefix: &str| text.strip_prefix(prefix).and_then(|number| number.parse().ok());
    match text {
        "bed" => Ok(Subject::Bed),
        _ => numbered("bead-")
            .map(Subject::Bead)
            .or_else(|| numbered("place-").map(Subject::Place))
            .ok_or_else(|| "choose bed, bead-0 or another bead, place-1 or another place".into()),
    }
}

fn cut(text: &str) -> Result<Cut, String> {
    let numbers: Option<Vec<f32>> = text.split(',').map(|part| part.trim().parse().ok()).collect();
    match numbers.as_deref() {
        Some(&[azimuth, elevation, offset]) if numbers.iter().flatten().all(|number| number.is_finite()) => {
            Ok(Cut { azimuth, elevation, offset: 1e-3 * offset })
        }
        _ => {
            Err("three numbers separated by commas: azimuth and elevation in degrees, distance in mm".into())
        }
    }
}

/// A parser of the names in a list, with hyphens for spaces.
fn word<T: Copy + Send + Sync + 'static, const N: usize>(
    known: &'static [(T, &'static str); N],
) -> impl Fn(&str) -> Result<T, String> + Clone {
    move |text| choose(text, known.iter().copied())
}

fn field_word() -> impl Fn(&str) -> Result<Field, String> + Clone {
    |text| choose(text, Field::ALL.into_iter().map(|field| (field, field.name())))
}

fn choose<T>(text: &str, known: impl Iterator<Item = (T, &'static str)>) -> Result<T, String> {
    let mut names = Vec::new();
    for (value, name) in known {
        let name = name.replace(' ', "-");
        if name == text {
            return Ok(value);
        }
        names.push(name);
    }
    Err(format!("choose one of {}", names.join(", ")))
}
