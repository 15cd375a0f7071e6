use bedswell_painter::Size;
use clap::{Parser, ValueEnum};
use std::path::PathBuf;

/// Opens the window on a run, a study, or a scene that runs while one looks.
#[derive(Clone, Debug, Parser)]
#[command(name = "bedswell-viewer", version)]
pub struct Arguments {
    /// Folder of a run or a study, or a scene file to run and follow
    pub path: PathBuf,
    /// Colours of the window; the last ones used if left out
    #[arg(long, value_enum)]
    pub theme: Option<ThemeName>,
    /// Who draws the bed: the painter needs no graphics card
    #[arg(long, value_enum, default_value_t = DrawnBy::Auto)]
    pub drawn_by: DrawnBy,
    /// Size of the window (pixels)
    #[arg(long, value_name = "WxH", default_value = "1280x720", value_parser = parse_size)]
    pub size: Size,
    /// File that remembers theme, text size and folded cards, or `none`; the user's
    /// configuration folder if left out
    #[arg(long, value_name = "FILE|none")]
    pub remember: Option<PathBuf>,
    /// Folder for pictures taken of the window; the run's own if left out
    #[arg(long, value_name = "DIR")]
    pub pictures: Option<PathBuf>,
    /// Turn the bed for so long, say how fast pictures came, and close
    #[arg(long, value_name = "SECONDS")]
    pub measure: Option<f64>,
}

/// Colours of the window.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq, ValueEnum, serde::Serialize, serde::Deserialize)]
#[serde(rename_all = "lowercase")]
pub enum ThemeName {
    /// Light on dark grey.
    #[default]
    Dark,
    /// Dark on light grey.
    Light,
    /// Black on white, for paper.
    Print,
}

/// Who draws the bed.
#[derive(Clone, Copy, Debug, PartialEq, Eq, ValueEnum)]
pub enum DrawnBy {
    /// Bevy on a graphics card, the painter otherwise
    Auto,
    /// The painter, on the processor
    Painter,
    /// Bevy
    Bevy,
}

/// Reads a size written as `1280x720`.
fn parse_size(text: &str) -> Result<Size, String> {
    let read = |text: &str| text.trim().parse::<u32>().ok().filter(|n| (200..=8192).contains(n));
    text.split_once('x')
        .and_then(|(width, height)| Some(Size { width: read(width)?, height: read(height)? }))
        .ok_or_else(|| "write it as 1280x720, each between 200 and 8192".to_owned())
}
