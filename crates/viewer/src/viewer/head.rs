use super::Viewer;
use crate::live::Will;
use crate::theme::Palette;
use bedswell_sim::figures::digits;
use bevy_egui::egui::{Align, Label, Layout, RichText, Ui};

impl Viewer {
    /// What is looked at, in a line of words; news at its right end.
    pub(super) fn head(&mut self, ui: &mut Ui, palette: &Palette) {
        ui.horizontal(|ui| {
            let quiet = |words: &str| RichText::new(words).color(palette.quiet);
            if let Some(bed) = &self.bed {
                ui.label(RichText::new(&bed.run.scene.name).size(15.0).strong());
                let mut words = vec![format!("pack {}", bed.run.pack)];
                if let Some(frame) = bed.frame() {
                    words.push(format!("increment {} of {}", increment(bed.time()), bed.run.increments()));
                    words.push(format!("free stretch {:.2}", frame.step.free_stretch));
                    words.push(format!("uptake {} g/g", digits(frame.step.uptake_g_per_g)));
                }
                for words in words {
                    ui.label(quiet("·"));
                    ui.label(words);
                }
            } else if let Some((packs, _)) = &self.study {
                ui.label(RichText::new(&packs.name).size(15.0).strong());
            }
            ui.with_layout(Layout::right_to_left(Align::Center), |ui| {
                ui.label(quiet("? for keys"));
                ui.add_space(10.0);
                if let Some(news) = self.news() {
                    ui.add(Label::new(RichText::new(news).color(palette.accent)).truncate());
                }
            });
        });
    }

    /// The latest news.
    fn news(&self) -> Option<String> {
        self.message.clone().or_else(|| {
            let (live, bed) = (self.live.as_ref()?, self.bed.as_ref()?);
            let count = bed.run.increments();
            Some(match (live.will(), bed.run.end()) {
                (Will::Stop, _) => "stopping after this increment".to_owned(),
                (Will::Wait, Some(end)) => format!("waiting after increment {end} of {count}"),
                (_, Some(end)) => format!("computing increment {} of {count}", end + 1.0),
                (_, None) => "packing the grains".to_owned(),
            })
        })
    }
}

/// A time in increments: whole ones without a decimal.
pub(super) fn increment(time: f64) -> String {
    if time.fract() == 0.0 { format!("{time:.0}") } else { format!("{time:.1}") }
}
