use super::Viewer;
use crate::bed::Bed;
use crate::live::{Live, News, Will};
use crate::study::PackFigures;
use crate::subject::{ToRun, finished};
use bedswell_picture::Run;
use bevy_egui::egui::Context;
use std::sync::Arc;

/// A run that is to be looked at.
pub(super) enum Wanted {
    /// A pack of a scene.
    Run(Box<ToRun>),
    /// A pack of the study, by its row.
    Pack(usize),
}

impl Viewer {
    /// Looks at a run.
    pub(super) fn open(&mut self, bed: Bed) {
        self.message = bed.run.notes.first().cloned();
        self.bed = Some(bed);
        self.live = None;
        self.playing = false;
        self.let_go();
    }

    /// Opens or starts what is wanted, and takes the news of a run under way.
    pub(super) fn follow(&mut self, context: &Context) {
        let to_run = match self.wanted.take() {
            Some(Wanted::Run(to_run)) => Some(*to_run),
            Some(Wanted::Pack(row)) => self.pack(row),
            None => None,
        };
        if let Some(to_run) = to_run {
            self.start(to_run, context);
        }
        while let Some(news) = self.live.as_ref().and_then(Live::next) {
            self.take(news);
        }
    }

    /// The pack in a row of the study's table, which is marked as open.
    fn pack(&mut self, row: usize) -> Option<ToRun> {
        let (packs, table) = self.study.as_mut()?;
        let pack = packs.rows.get(row)?;
        if table.open == Some(row) && self.live.is_some() {
            return None;
        }
        table.open = Some(row);
        let (_, scene) = packs.levels.get(pack.level)?;
        Some(ToRun { scene: scene.clone(), pack: pack.pack, folder: packs.folder_of(pack) })
    }

    /// Opens the run if it is finished, and else runs it while one looks.
    fn start(&mut self, to_run: ToRun, context: &Context) {
        // One run at a time; what there is of another stays in its folder.
        self.live = None;
        if let Some(run) = finished(&to_run) {
            return self.open(Bed::new(run, to_run.folder));
        }
        let ToRun { scene, pack, folder } = to_run;
        let context = context.clone();
        match Live::start(scene.clone(), pack, &folder, move || context.request_repaint()) {
            Ok(live) => {
                self.open(Bed::new(Run::new(scene, pack), folder));
                self.live = Some(live);
            }
            Err(error) => self.message = Some(error.to_string()),
        }
    }

    fn take(&mut self, news: News) {
        let Some(bed) = &mut self.bed else { return };
        match news {
            News::State(state) => bed.push(*state),
            News::Done(summary) => {
                if let Some((packs, table)) = &mut self.study
                    && let Some(row) = table.open.and_then(|row| packs.rows.get_mut(row))
                {
                    row.outcome = Ok(PackFigures::from(&*summary));
                }
                bed.run.summary = Some(Arc::new(*summary));
                self.message = Some(format!("finished; written to {}", bed.folder.display()));
                self.live = None;
            }
            News::Ended(reason) => {
                self.message = Some(format!("{reason}; what there is lies in {}", bed.folder.display()));
                self.live = None;
            }
        }
    }

    /// Lets the run under way wait, or go on.
    pub(super) fn pause(&mut self) {
        if let Some(live) = &self.live {
            live.tell(if live.will() == Will::Wait { Will::Run } else { Will::Wait });
        }
    }

    /// Ends the run under way; the same scene run into the same folder finishes it.
    pub(super) fn stop(&mut self) {
        if let Some(live) = &self.live {
            live.tell(Will::Stop);
        }
    }
}
