use super::Viewer;
use super::runs::Wanted;
use crate::card::{card, choice, figure, list};
use crate::live::Will;
use crate::study::table;
use crate::theme::Palette;
use bedswell_picture::{Field, GrainLook, GrainShade};
use bedswell_sim::figures::{digits, force, length, probability, stress};
use bevy_egui::egui::{
    Align, Align2, FontId, Label, Layout, Response, RichText, Sense, Slider, Ui, pos2, vec2,
};

/// Numbers of the cards.
const GRAINS: u8 = 1;
const BEADS: u8 = 2;
const RUPTURE: u8 = 3;
const CUT: u8 = 4;
const HELD: u8 = 5;
const RESULT: u8 = 6;
const LIVE: u8 = 7;
/// The packs of a study, on the left.
pub(super) const STUDY: u8 = 9;

type Contents = fn(&mut Viewer, &mut Ui, &Palette);

impl Viewer {
    /// The column of cards.
    pub(super) fn cards(&mut self, ui: &mut Ui, palette: &Palette) {
        let all: [(u8, &str, bool, Contents); 7] = [
            (LIVE, "Computing", self.live.is_some(), Self::computing),
            (GRAINS, "Grains", true, Self::grains),
            (BEADS, "Beads", true, Self::beads),
            (RUPTURE, "Where rupture is likely", true, Self::rupture),
            (CUT, "Cut", true, Self::cut),
            (HELD, "What was clicked on", self.held.is_some(), Self::clicked),
            (RESULT, "What it came to", self.summary().is_some(), Self::result),
        ];
        for (number, title, shown, contents) in all {
            if shown {
                let folded = self.settings.folded.contains(&number);
                if card(ui, palette, number, title, folded, |ui| contents(self, ui, palette)) {
                    self.fold(number);
                    self.remember();
                }
            }
        }
    }

    /// The packs of a study.
    pub(super) fn packs(&mut self, ui: &mut Ui, palette: &Palette) {
        if let Some((packs, state)) = &mut self.study
            && let Some(row) = table(ui, palette, packs, state)
        {
            self.wanted = Some(Wanted::Pack(row));
            ui.ctx().request_repaint();
        }
    }

    fn computing(&mut self, ui: &mut Ui, palette: &Palette) {
        let (Some(live), Some(bed)) = (&self.live, &self.bed) else { return };
        let words = match bed.run.end() {
            Some(end) => format!("increment {end} of {} is there", bed.run.increments()),
            None => "packing the grains".to_owned(),
        };
        ui.label(words);
        ui.add(Label::new(RichText::new(live.folder.display().to_string()).color(palette.quiet)).truncate());
        let waits = live.will() == Will::Wait;
        ui.horizontal(|ui| {
            if ui.button(if waits { "Go on" } else { "Pause" }).clicked() {
                self.pause();
            }
            if ui.button("Stop").clicked() {
                self.stop();
            }
        });
    }

    fn grains(&mut self, ui: &mut Ui, palette: &Palette) {
        choice(ui, &mut self.look.grains, &GrainLook::ALL);
        ui.label(RichText::new("shaded by").color(palette.quiet));
        let words = GrainShade::ALL
            .map(|(shade, name)| (shade, if shade == GrainShade::Plain { "nothing" } else { name }));
        choice(ui, &mut self.look.shade, &words);
        ui.horizontal_wrapped(|ui| {
            ui.toggle_value(&mut self.look.force_chains, "forces between grains");
            ui.toggle_value(&mut self.look.frame, "edges of the cell");
        });
    }

    fn beads(&mut self, ui: &mut Ui, palette: &Palette) {
        ui.horizontal_wrapped(|ui| {
            ui.toggle_value(&mut self.look.bonds, "bonds");
            ui.toggle_value(&mut self.look.skin, "skin");
            ui.toggle_value(&mut self.look.section, "section");
            ui.toggle_value(&mut self.look.crosses, "crosses");
        });
        ui.label(RichText::new("skin and section coloured by").color(palette.quiet));
        list(ui, &mut self.look.field, &Field::ALL.map(|field| (field, field.name())));
        let range = Slider::new(&mut self.look.range, 0.1..=1.0)
            .logarithmic(true)
            .custom_formatter(|part, _| format!("{:.0} %", 100.0 * part));
        line(ui, palette, "colours span", range);
    }

    fn rupture(&mut self, ui: &mut Ui, palette: &Palette) {
        let Some(bed) = &self.bed else { return };
        if bed.places.is_empty() {
            ui.label(RichText::new("no tension yet").color(palette.quiet));
            return;
        }
        let several = bed.frame().is_some_and(|frame| frame.beads.len() > 1);
        let heads = ["", "tension", "tears here", if several { "bead" } else { "" }, "to contact"];
        let mut chosen = None;
        row(ui, palette, heads.map(str::to_owned), None);
        for (number, place) in bed.places.iter().enumerate() {
            let words = [
                format!("{}", number + 1),
                stress(place.tension.into()),
                format!("{:.0} %", 100.0 * place.share),
                if several { place.bead.to_string() } else { String::new() },
                place.to_contact.map_or_else(|| "–".to_owned(), |distance| length(distance.into())),
            ];
            if row(ui, palette, words, Some(bed.place == Some(number))).clicked() {
                chosen = Some(number);
            }
        }
        if let Some(place) = chosen {
            let now = ui.input(|input| input.time);
            self.fly_to_place(place, now);
        }
    }

    fn cut(&mut self, ui: &mut Ui, palette: &Palette) {
        let on = self.look.cut.is_some();
        if ui.selectable_label(on, "cut the bed open").clicked() {
            let now = ui.input(|input| input.time);
            self.cut_on_off(now);
        }
        let reach = 1e3 * self.cut_reach();
        let Some(cut) = &mut self.look.cut else { return };
        let mut offset = 1e3 * cut.offset;
        let distance = Slider::new(&mut offset, -reach..=reach).suffix(" mm").fixed_decimals(2);
        line(ui, palette, "distance", distance);
        let faces = Slider::new(&mut cut.azimuth, 0.0..=360.0).suffix("°").fixed_decimals(0);
        line(ui, palette, "faces", faces);
        let tilt = Slider::new(&mut cut.elevation, -90.0..=90.0).suffix("°").fixed_decimals(0);
        line(ui, palette, "tilt", tilt);
        cut.offset = 1e-3 * offset;
        ui.label(RichText::new("distance from the middle of the beads").small().color(palette.quiet));
    }

    fn clicked(&mut self, ui: &mut Ui, _: &Palette) {
        for line in self.held.map(|held| self.in_words(&held)).unwrap_or_default() {
            ui.label(line);
        }
    }

    fn summary(&self) -> Option<&bedswell_sim::RunSummary> {
        self.bed.as_ref()?.run.summary.as_deref()
    }

    fn result(&mut self, ui: &mut Ui, palette: &Palette) {
        let Some(run) = self.summary() else { return };
        let several = run.beads.len() > 1;
        for (number, bead) in run.beads.iter().enumerate() {
            if several {
                ui.label(RichText::new(format!("bead {number}")).strong());
            }
            let torn = if bead.torn { ", torn here" } else { "" };
            figure(ui, palette, "water uptake", &format!("{} g/g", digits(bead.uptake_g_per_g)));
            figure(ui, palette, "of the free volume", &format!("{} %", digits(100.0 * bead.volume_ratio)));
            figure(ui, palette, "99 % tension", &stress(bead.tension_q99_pa));
            figure(ui, palette, "tear probability", &format!("{}{torn}", probability(bead.tear_probability)));
            figure(ui, palette, "contacts", &bead.contacts.to_string());
            figure(ui, palette, "largest contact force", &force(bead.largest_contact_force_n));
        }
        figure(ui, palette, "heave", &length(run.heave_m));
        figure(ui, palette, "porosity when dry", &digits(run.porosity));
        figure(ui, palette, "contacts per grain", &digits(run.contact_number));
    }
}

/// A name and a slider that fills the line.
fn line(ui: &mut Ui, palette: &Palette, name: &str, slider: Slider<'_>) {
    ui.horizontal(|ui| {
        let name = Label::new(RichText::new(name).color(palette.quiet));
        ui.allocate_ui_with_layout(vec2(76.0, 20.0), Layout::left_to_right(Align::Center), |ui| {
            ui.set_min_width(76.0);
            ui.add(name);
        });
        ui.spacing_mut().slider_width = ui.available_width() - 66.0;
        ui.add(slider);
    });
}

/// Right edges of the columns of likely places, as parts of the width.
const COLUMNS: [f32; 5] = [0.06, 0.36, 0.62, 0.72, 1.0];

/// A line of the list of likely places, with whether it is chosen; without, its head.
fn row(ui: &mut Ui, palette: &Palette, words: [String; 5], chosen: Option<bool>) -> Response {
    let (rect, response) = ui.allocate_exact_size(vec2(ui.available_width(), 19.0), Sense::click());
    let marked = chosen == Some(true);
    if marked || chosen.is_some() && response.hovered() {
        let fill = if marked { palette.chosen } else { palette.button };
        ui.painter().rect_filled(rect.expand2(vec2(3.0, 0.0)), 3.0, fill);
    }
    let ink = if chosen.is_none() { palette.quiet } else { palette.text };
    let font = FontId::proportional(if chosen.is_none() { 11.0 } else { 13.0 });
    for (words, edge) in words.into_iter().zip(COLUMNS) {
        let at = pos2(rect.left() + edge * rect.width(), rect.center().y);
        ui.painter().text(at, Align2::RIGHT_CENTER, words, font.clone(), ink);
    }
    response
}
