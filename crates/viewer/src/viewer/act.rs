use super::runs::Wanted;
use super::{Viewer, cards};
use crate::keys::Action;
use crate::picture_file::keep;
use crate::strip::PLAY_SECONDS;
use bedswell_painter::{Camera, Quality, paint, paint_overlay};
use bedswell_picture::{Cut, Field, GrainLook, GrainShade, Theme};
use bevy_egui::egui::Context;
use std::path::PathBuf;

/// Degrees that an arrow key turns.
const TURN: f32 = 6.0;
/// Pixels that an arrow key shifts.
const SHIFT: f32 = 40.0;
/// Factor by which a key comes nearer.
const NEARER: f32 = 1.2;
/// Steps of a cut's distance across the bed.
const CUT_STEPS: f32 = 40.0;

impl Viewer {
    /// Does what a key asks for.
    pub(super) fn act(&mut self, action: Action, context: &Context) {
        let now = context.input(|input| input.time);
        self.message = None;
        match action {
            Action::Turn(right, up) => self.orbit.turn(TURN * f32::from(right), TURN * f32::from(up)),
            Action::Shift(right, down) => {
                self.orbit.shift(SHIFT * f32::from(right), SHIFT * f32::from(down), self.size);
            }
            Action::Nearer(sign) => {
                let middle = [0.5 * self.size.width as f32, 0.5 * self.size.height as f32];
                self.orbit.approach(NEARER.powi(sign.into()), middle, self.size);
            }
            Action::WholeBed => {
                if let Some(pose) = self.bed.as_ref().and_then(|bed| bed.whole(self.size)) {
                    self.orbit.fly(pose, now);
                }
                if let Some(bed) = &mut self.bed {
                    bed.place = None;
                }
            }
            Action::Play => self.play(),
            Action::Step(by) => self.step(by),
            Action::FirstStep => self.go(0.0),
            Action::LastStep => self.go(f64::INFINITY),
            Action::Fold(card) => self.fold(card),
            Action::NextGrains => {
                self.look.grains = next(&GrainLook::ALL.map(|(look, _)| look), self.look.grains)
            }
            Action::NextShade => {
                self.look.shade = next(&GrainShade::ALL.map(|(shade, _)| shade), self.look.shade)
            }
            Action::ForceChains => self.look.force_chains ^= true,
            Action::Bonds => self.look.bonds ^= true,
            Action::Skin => self.look.skin ^= true,
            Action::Crosses => self.look.crosses ^= true,
            Action::NextField => self.look.field = next(&Field::ALL, self.look.field),
            Action::CutOnOff => self.cut_on_off(now),
            Action::MoveCut(sign) => self.move_cut(sign),
            Action::TurnCut => self.turn_cut(),
            Action::HotPlace(by) => self.next_place(by, now),
            Action::PaneShot => self.keep_pane(),
            Action::WindowShot => self.window_shot = Some(self.pictures_folder()),
            Action::NextTheme => {
                self.settings.theme = next(&Theme::ALL.map(|(theme, _)| theme), self.settings.theme)
            }
            Action::TextSize(sign) => self.settings.resize_text(0.1 * f32::from(sign)),
            Action::Pause => self.pause(),
            Action::Stop => self.stop(),
            Action::Pack(by) => {
                let row = self.study.as_ref().and_then(|(packs, table)| table.beside(packs, by.into()));
                self.wanted = row.map(Wanted::Pack);
                context.request_repaint();
            }
            Action::SortPacks => {
                if let Some((_, table)) = &mut self.study {
                    table.sort_by_next();
                }
            }
            Action::Help => self.help = !self.help,
            Action::Leave => {
                if !std::mem::take(&mut self.help) {
                    self.let_go();
                }
            }
        }
        self.steered |= matches!(action, Action::Turn(..) | Action::Shift(..) | Action::Nearer(_));
        if matches!(action, Action::NextTheme | Action::TextSize(_) | Action::Fold(_)) {
            self.remember();
        }
    }

    /// Folds a card or unfolds it.
    pub(super) fn fold(&mut self, card: u8) {
        if card != cards::STUDY || self.study.is_some() {
            self.settings.toggle(card);
        }
    }

    /// Nothing is picked or marked any more.
    pub(super) fn let_go(&mut self) {
        self.held = None;
        self.under_pointer = None;
        if let Some(bed) = &mut self.bed {
            bed.place = None;
        }
    }

    /// Plays on, from the start if it was at the end, or holds still.
    pub(super) fn play(&mut self) {
        let Some(bed) = &mut self.bed else { return };
        self.playing = !self.playing;
        if self.playing && bed.run.end().is_some_and(|end| bed.time() >= end) {
            bed.go(0.0);
        }
    }

    /// Goes to the increment before or after.
    pub(super) fn step(&mut self, by: i8) {
        let time = self.bed.as_ref().map_or(0.0, |bed| bed.time());
        self.go(if by < 0 { time.ceil() - 1.0 } else { time.floor() + 1.0 });
    }

    /// Goes to a time (increments) and stays there.
    pub(super) fn go(&mut self, time: f64) {
        self.playing = false;
        if let Some(bed) = &mut self.bed {
            bed.go(time);
        }
    }

    /// Lets time pass while playing, and the camera fly.
    pub(super) fn move_on(&mut self, context: &Context) {
        let (now, passed) = context.input(|input| (input.time, f64::from(input.stable_dt.min(0.2))));
        if self.orbit.advance(now) {
            context.request_repaint();
        }
        let Some(bed) = self.bed.as_mut().filter(|_| self.playing) else { return };
        bed.go(bed.time() + passed * bed.run.increments() as f64 / PLAY_SECONDS);
        self.playing = bed.run.end().is_some_and(|end| bed.time() < end);
        context.request_repaint();
    }

    /// Cuts through the middle of the beads, facing the eye sideways, or through the likely
    /// place that is marked; or takes the cut away.
    pub(super) fn cut_on_off(&mut self, now: f64) {
        if self.look.cut.take().is_none() {
            let towards = (self.orbit.pose().azimuth / 90.0).round() * 90.0;
            self.look.cut = Some(Cut { azimuth: towards.rem_euclid(360.0), elevation: 0.0, offset: 0.0 });
        }
        if let Some(place) = self.bed.as_ref().and_then(|bed| bed.place) {
            self.fly_to_place(place, now);
        }
    }

    fn move_cut(&mut self, sign: i8) {
        let reach = self.cut_reach();
        if let Some(cut) = &mut self.look.cut {
            let step = 2.0 * reach / CUT_STEPS * f32::from(sign);
            cut.offset = (cut.offset + step).clamp(-reach, reach);
        }
    }

    /// How far the cut can be moved either way (m).
    pub(super) fn cut_reach(&self) -> f32 {
        let bounds = self.bed.as_ref().and_then(|bed| bed.run.bounds());
        bounds.map_or(0.0, |[(_, bed), _]| bed)
    }

    /// Turns the cut on: along x, along y, from above.
    fn turn_cut(&mut self) {
        if let Some(cut) = &mut self.look.cut {
            (cut.azimuth, cut.elevation) = match (cut.azimuth, cut.elevation) {
                (_, elevation) if elevation != 0.0 => (0.0, 0.0),
                (azimuth, _) if azimuth < 270.0 => (((azimuth / 90.0).floor() + 1.0) * 90.0, 0.0),
                _ => (0.0, 90.0),
            };
        }
    }

    fn next_place(&mut self, by: i8, now: f64) {
        let Some(bed) = self.bed.as_ref().filter(|bed| !bed.places.is_empty()) else { return };
        let count = bed.places.len() as isize;
        let place = bed.place.map_or(if by > 0 { 0 } else { count - 1 }, |place| {
            (place as isize + isize::from(by)).rem_euclid(count)
        });
        self.fly_to_place(place as usize, now);
    }

    /// Marks a likely place of rupture and flies there.
    pub(super) fn fly_to_place(&mut self, place: usize, now: f64) {
        let Some(bed) = &mut self.bed else { return };
        let Some(likely) = bed.places.get(place) else { return };
        let pose = if self.look.cut.is_some() {
            let opened = bed.opened(likely, self.size);
            self.look.cut = opened.map(|(cut, _)| cut);
            opened.map(|(_, pose)| pose)
        } else {
            bed.over(likely, self.size)
        };
        let Some(pose) = pose else { return };
        bed.place = Some(place);
        self.steered = true;
        self.orbit.fly(pose, now);
    }

    /// Writes a picture of the bed alone, painted finely, with its legends.
    fn keep_pane(&mut self) {
        let camera = Camera::new(&self.orbit.pose(), self.size);
        let Some(drawing) = self.bed.as_ref().and_then(|bed| bed.drawing()) else { return };
        let mut image = paint(drawing, &camera, Quality::default());
        if let Some(overlay) = self.overlay(&camera) {
            paint_overlay(&mut image, &overlay);
        }
        self.message = Some(match keep(&self.pictures_folder(), "bed", &image) {
            Ok(path) => format!("picture written to {}", path.display()),
            Err(error) => format!("the picture cannot be written: {error}"),
        });
    }

    /// The folder for pictures.
    fn pictures_folder(&self) -> PathBuf {
        let beside_run = || self.bed.as_ref().map(|bed| bed.folder.join("pictures"));
        self.pictures.clone().or_else(beside_run).unwrap_or_default()
    }
}

/// The one after in a list, round and round.
fn next<T: Copy + PartialEq>(all: &[T], now: T) -> T {
    let place = all.iter().position(|one| *one == now).unwrap_or(0);
    all[(place + 1) % all.len()]
}
