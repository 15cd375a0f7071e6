use bedswell_painter::Size;
use bedswell_picture::Theme;
use clap::{Parser, ValueEnum};
use std::path::PathBuf;

/// Look at a run, a study, or a scene that runs while you look
#[derive(Clone, Debug, Parser)]
#[command(name = "bedswell view", version)]
pub struct Arguments {
    /// Folder of a run or a study, or a scene or study file to run and follow
    #[arg(required_unless_present = "draw")]
    pub path: Option<PathBuf>,
    /// Folder for the run of a scene; out/NAME-pack-N if left out
    #[arg(long, value_name = "DIR")]
    pub out: Option<PathBuf>,
    /// Which of a scene's random packs to run
    #[arg(long, default_value_t = 0, value_name = "N")]
    pub pack: u64,
    /// Colours: dark, light or print; the last ones used if left out
    #[arg(long, value_parser = theme)]
    pub theme: Option<Theme>,
    /// Who draws the bed
    #[arg(long, value_enum, value_name = "WHO", default_value_t = DrawnBy::Auto)]
    pub drawn_by: DrawnBy,
    /// Size of the window in pixels
    #[arg(long, value_name = "SIZE", value_parser = size, default_value = "1280x720")]
    pub size: Size,
    /// File to remember theme, text size and folded cards in, or `none`; the user's
    /// configuration folder if left out
    #[arg(long, value_name = "FILE")]
    pub remember: Option<PathBuf>,
    /// Folder for pictures taken of the window; `pictures` in the run's if left out
    #[arg(long, value_name = "DIR")]
    pub pictures: Option<PathBuf>,
    /// Turn the bed for so long, say how fast pictures came, and close
    #[arg(long, value_name = "SECONDS")]
    pub measure: Option<f64>,
    /// Draw what another program asks for on the standard input, without a window
    #[arg(long, hide = true)]
    pub draw: bool,
}

/// Who draws the bed.
#[derive(Clone, Copy, Debug, PartialEq, Eq, ValueEnum)]
pub enum DrawnBy {
    /// Bevy where there is a graphics card, the painter elsewhere
    Auto,
    /// The painter, on the processor
    Painter,
    /// Bevy, on whatever driver there is
    Bevy,
}

fn size(text: &str) -> Result<Size, String> {
    let read = |text: &str| text.parse::<u32>().ok().filter(|n| (320..=8192).contains(n));
    text.split_once('x')
        .and_then(|(width, height)| Some(Size { width: read(width)?, height: read(height)? }))
        .ok_or_else(|| "write width and height in pixels, 320 to 8192, as 1280x720".to_owned())
}

fn theme(text: &str) -> Result<Theme, String> {
    Theme::ALL
        .into_iter()
        .find_map(|(theme, name)| (name == text).then_some(theme))
        .ok_or_else(|| "choose dark, light or print".to_owned())
}
