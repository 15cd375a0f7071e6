use bedswell_picture::Theme;
use serde::{Deserialize, Serialize};
use std::path::{Path, PathBuf};

/// What the window remembers from one time to the next.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
#[serde(default)]
pub(crate) struct Settings {
    /// Colours.
    pub(crate) theme: Theme,
    /// Size of text, over its usual size.
    pub(crate) text_size: f32,
    /// Numbers of the cards that are folded.
    pub(crate) folded: Vec<u8>,
}

impl Default for Settings {
    fn default() -> Self {
        Self { theme: Theme::Dark, text_size: 1.0, folded: Vec::new() }
    }
}

impl Settings {
    /// Reads what was remembered; a file that is missing or cannot be read counts as none.
    pub(crate) fn read(file: Option<&Path>) -> Self {
        let mut settings: Self = file
            .and_then(|file| std::fs::read_to_string(file).ok())
            .and_then(|text| toml::from_str(&text).ok())
            .unwrap_or_default();
        settings.resize_text(0.0);
        settings
    }

    /// Remembers; that it fails is no reason to disturb anybody.
    pub(crate) fn write(&self, file: Option<&Path>) {
        if let (Some(file), Ok(text)) = (file, toml::to_string(self)) {
            let _ = file.parent().map(std::fs::create_dir_all);
            let _ = std::fs::write(file, text);
        }
    }

    /// Makes text larger by a step, within what stays usable.
    pub(crate) fn resize_text(&mut self, step: f32) {
        let size = if self.text_size.is_finite() { self.text_size } else { 1.0 };
        self.text_size = (size + step).clamp(0.7, 2.0);
    }

    /// Folds a card or unfolds it.
    pub(crate) fn toggle(&mut self, card: u8) {
        match self.folded.iter().position(|folded| *folded == card) {
            Some(place) => drop(self.folded.remove(place)),
            None => self.folded.push(card),
        }
    }
}

/// The file to remember in: what the option says (`none` for nothing), else in the user's
/// configuration folder.
pub(crate) fn settings_file(option: Option<&Path>) -> Option<PathBuf> {
    match option {
        Some(file) if file == Path::new("none") => None,
        Some(file) => Some(file.to_owned()),
        None => {
            let variable = |name| std::env::var_os(name).filter(|v| !v.is_empty()).map(PathBuf::from);
            let folder = if cfg!(windows) {
                variable("APPDATA")?
            } else {
                variable("XDG_CONFIG_HOME").or_else(|| Some(variable("HOME")?.join(".config")))?
            };
            Some(folder.join("bedswell").join("window.toml"))
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn settings_come_back_and_a_damaged_file_is_no_trouble() {
        let folder = tempfile::tempdir().unwrap();
        let file = folder.path().join("deep/window.toml");
        let mut settings = Settings { theme: Theme::Print, ..Settings::default() };
        settings.resize_text(0.2);
        settings.toggle(3);
        settings.write(Some(&file));
        assert_eq!(Settings::read(Some(&file)), settings);
        std::fs::write(&file, "theme = 7").unwrap();
        assert_eq!(Settings::read(Some(&file)), Settings::default());
    }

    #[test]
    fn nothing_is_remembered_when_told_so() {
        assert_eq!(settings_file(Some(Path::new("none"))), None);
    }
}
