//! What the window is about, and how it looks.

mod act;
mod cards;
mod course;
mod head;
mod help;
mod measure;
mod runs;
mod scene;

use crate::args::Arguments;
use crate::bed::Bed;
use crate::keys;
use crate::live::Live;
use crate::pane::{Orbit, View};
use crate::settings::{Settings, settings_file};
use crate::study::{Packs, Table};
use crate::subject::Subject;
use crate::theme::{Palette, dress};
use bedswell_painter::{Colour, Pose, Size};
use bedswell_picture::{Look, Pick};
use bevy::prelude::Resource;
use bevy_egui::egui::{Context, Frame, LayerId, Margin, Panel, ScrollArea, TextureId, Ui, UiBuilder};
use measure::Measure;
use runs::Wanted;
use std::path::PathBuf;
use std::time::Instant;

/// Everything the window is about.
#[derive(Resource)]
pub(crate) struct Viewer {
    settings: Settings,
    settings_file: Option<PathBuf>,
    look: Look,
    /// The look of the window that egui has.
    dressed: Option<Look>,
    study: Option<(Packs, Table)>,
    bed: Option<Bed>,
    live: Option<Live>,
    /// A run that is to be opened or started with the next frame.
    wanted: Option<Wanted>,
    orbit: Orbit,
    /// Whether somebody chose where to look from.
    steered: bool,
    size: Size,
    corner: [u32; 2],
    /// What the pane is to show, until a renderer takes it.
    asked: Option<View>,
    shown: Option<View>,
    playing: bool,
    under_pointer: Option<Pick>,
    /// What was clicked on; it stays until let go.
    held: Option<Pick>,
    help: bool,
    message: Option<String>,
    pictures: Option<PathBuf>,
    window_shot: Option<PathBuf>,
    measure: Measure,
    done: bool,
}

impl Viewer {
    /// A window on something.
    pub(crate) fn new(arguments: &Arguments, subject: Subject, start: Instant) -> Self {
        let file = settings_file(arguments.remember.as_deref());
        let mut settings = Settings::read(file.as_deref());
        if let Some(theme) = arguments.theme {
            settings.theme = theme;
        }
        let mut viewer = Self {
            look: Look { theme: settings.theme, text: settings.text_size, ..Look::default() },
            settings,
            settings_file: file,
            dressed: None,
            study: None,
            bed: None,
            live: None,
            wanted: None,
            orbit: Orbit::new(Pose { target: [0.0; 3], azimuth: 0.0, elevation: 0.0, distance: 1.0 }),
            steered: false,
            size: Size { width: 1, height: 1 },
            corner: [0; 2],
            asked: None,
            shown: None,
            playing: false,
            under_pointer: None,
            held: None,
            help: false,
            message: None,
            pictures: arguments.pictures.clone(),
            window_shot: None,
            measure: Measure::new(arguments.measure, start),
            done: false,
        };
        match subject {
            Subject::Run(run, folder) => viewer.open(Bed::new(*run, folder)),
            Subject::Scene(to_run) => viewer.wanted = Some(Wanted::Run(to_run)),
            Subject::Study(packs) => {
                let table = Table::default();
                let first = table.beside(&packs, 0);
                viewer.study = Some((*packs, table));
                // A study that is only planned starts with nothing open.
                if viewer.study.as_ref().is_some_and(|(packs, _)| packs.summary.is_some()) {
                    viewer.wanted = first.map(Wanted::Pack);
                }
            }
        }
        viewer
    }

    /// What stands on the window's frame.
    pub(crate) fn title(&self) -> String {
        let name = self.bed.as_ref().map(|bed| bed.run.scene.name.as_str());
        let study = self.study.as_ref().map(|(packs, _)| packs.name.as_str());
        format!("{} – bedswell", study.or(name).unwrap_or("run"))
    }

    /// Behind the bed.
    pub(crate) fn background(&self) -> Colour {
        self.look.theme.background()
    }

    /// Whether the window is to be closed.
    pub(crate) fn done(&self) -> bool {
        self.done
    }

    /// Top left of the pane (pixels of the window).
    pub(crate) fn corner(&self) -> [u32; 2] {
        self.corner
    }

    /// What is to be drawn into the pane, once whenever it changes.
    pub(crate) fn take_view(&mut self) -> Option<View> {
        self.asked.take()
    }

    /// Notes that a picture came into the pane.
    pub(crate) fn count_picture(&mut self) {
        self.measure.count();
    }

    /// Where a picture of the window is to be written, once.
    pub(crate) fn take_window_shot(&mut self) -> Option<PathBuf> {
        self.window_shot.take()
    }

    /// Tells something in the head line.
    pub(crate) fn tell(&mut self, message: String) {
        self.message = Some(message);
    }

    /// The whole window, once per frame. `picture` is given where egui is to draw it.
    pub(crate) fn look(&mut self, context: &Context, picture: Option<TextureId>) {
        self.follow(context);
        for action in context.input(keys::pressed) {
            self.act(action, context);
        }
        self.move_on(context);
        if self.measure.turn(context) {
            self.steered = true;
            self.orbit.turn(1.5, 0.0);
        }
        self.dress(context);
        self.prepare();
        let palette = Palette::of(self.look.theme);
        let whole = UiBuilder::new().layer_id(LayerId::background()).max_rect(context.viewport_rect());
        let mut ui = Ui::new(context.clone(), "window".into(), whole);
        let bar = Frame::new().fill(palette.column).inner_margin(Margin::symmetric(12, 7));
        Panel::top("head").frame(bar).show(&mut ui, |ui| self.head(ui, &palette));
        Panel::bottom("course").frame(bar).exact_size(126.0).show(&mut ui, |ui| self.course(ui, &palette));
        if self.study.is_some() && !self.settings.folded.contains(&cards::STUDY) {
            let width = 0.5 * ui.available_width() - 60.0;
            Panel::left("study").frame(bar).exact_size(width).show(&mut ui, |ui| self.packs(ui, &palette));
        }
        let column = Frame::new().fill(palette.column).inner_margin(Margin::same(8));
        Panel::right("cards").frame(column).exact_size(272.0).resizable(false).show(&mut ui, |ui| {
            ScrollArea::vertical().auto_shrink(false).show(ui, |ui| self.cards(ui, &palette));
        });
        self.scene(&mut ui, &palette, picture);
        self.show_help(context, &palette);
        self.done |= self.measure.done();
    }

    /// Gives the window its theme and text size.
    fn dress(&mut self, context: &Context) {
        self.look.theme = self.settings.theme;
        self.look.text = self.settings.text_size;
        let dressed = self.dressed.as_ref().map(|look| (look.theme, look.text));
        if dressed != Some((self.look.theme, self.look.text)) {
            dress(context, self.look.theme);
            context.set_zoom_factor(self.look.text);
            self.dressed = Some(self.look.clone());
        }
    }

    /// Keeps settings for the next time.
    fn remember(&self) {
        self.settings.write(self.settings_file.as_deref());
    }
}
