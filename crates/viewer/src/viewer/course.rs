use super::Viewer;
use super::head::increment;
use crate::strip::{Curve, strip};
use crate::theme::Palette;
use bedswell_sim::Step;
use bevy_egui::egui::{RichText, Ui};

impl Viewer {
    /// The course of swelling: four curves that share the cursor.
    pub(super) fn course(&mut self, ui: &mut Ui, palette: &Palette) {
        let Some(bed) = &self.bed else { return };
        let curves = curves(bed.run.steps());
        let (last, time) = (bed.run.increments(), bed.time());
        ui.horizontal_top(|ui| {
            ui.vertical(|ui| {
                ui.set_width(118.0);
                ui.label(RichText::new("Course of swelling").strong());
                ui.horizontal(|ui| {
                    if ui.button(if self.playing { "Pause" } else { "Play" }).clicked() {
                        self.play();
                    }
                    if ui.button("Back").clicked() {
                        self.step(-1);
                    }
                    if ui.button("On").clicked() {
                        self.step(1);
                    }
                });
                let words = format!("increment {} of {last}", increment(time));
                ui.label(RichText::new(words).color(palette.quiet));
            });
            ui.add_space(8.0);
            if let Some(asked) = strip(ui, palette, &curves, last, time) {
                self.go(asked as f64);
            }
        });
    }
}

/// What happened so far.
fn curves<'a>(steps: impl Iterator<Item = &'a Step>) -> [Curve; 4] {
    let steps: Vec<&Step> = steps.collect();
    let curve = |name, unit, value: fn(&Step) -> f64| Curve {
        name,
        unit,
        values: steps.iter().map(|step| value(step)).collect(),
    };
    [
        curve("water uptake", "g/g", |step| step.uptake_g_per_g),
        curve("heave", "mm", |step| 1e3 * step.heave_m),
        curve("99 % tension", "kPa", |step| 1e-3 * step.tension_q99_pa),
        curve("tear probability", "%", |step| 100.0 * step.tear_probability),
    ]
}
