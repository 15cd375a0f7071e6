use bedswell_sim::{
    FolderError, Observer, RunSummary, Scene, State, StateRecorder, Step, prepare_run_folder,
    remove_run_files, run_pack, write_run_folder,
};
use std::collections::VecDeque;
use std::ops::ControlFlow;
use std::path::{Path, PathBuf};
use std::sync::{Arc, Condvar, Mutex, MutexGuard, PoisonError};

/// A run that is computed while one looks.
pub(crate) struct Live {
    /// Its folder.
    pub(crate) folder: PathBuf,
    shared: Arc<Shared>,
}

/// What a run has to tell.
pub(crate) enum News {
    /// The next state.
    State(Box<State>),
    /// It is finished.
    Done(Box<RunSummary>),
    /// It ended without a result, and why.
    Ended(String),
}

/// What a run is told to do.
#[derive(Clone, Copy, Debug, Default, PartialEq, Eq)]
pub(crate) enum Will {
    /// Go on.
    #[default]
    Run,
    /// Wait after the increment.
    Wait,
    /// End after the increment; what is in the folder stays.
    Stop,
}

/// What the window and the run share.
#[derive(Default)]
struct Shared {
    will: Mutex<Will>,
    changed: Condvar,
    news: Mutex<VecDeque<News>>,
}

impl Shared {
    fn will(&self) -> MutexGuard<'_, Will> {
        self.will.lock().unwrap_or_else(PoisonError::into_inner)
    }

    fn news(&self) -> MutexGuard<'_, VecDeque<News>> {
        self.news.lock().unwrap_or_else(PoisonError::into_inner)
    }
}

impl Live {
    /// Starts a pack of a scene into a folder; calls `wake` with all news.
    ///
    /// # Errors
    /// When the folder cannot be written or holds something else.
    pub(crate) fn start(
        scene: Scene,
        pack: u64,
        folder: &Path,
        wake: impl Fn() + Send + 'static,
    ) -> Result<Self, FolderError> {
        prepare_run_folder(folder, &scene, pack)?;
        let shared = Arc::<Shared>::default();
        let mut reporter = Reporter { shared: shared.clone(), wake };
        let path = folder.to_owned();
        std::thread::spawn(move || {
            let last = conduct(&scene, pack, &path, &mut reporter);
            reporter.send(last);
        });
        Ok(Self { folder: folder.to_owned(), shared })
    }

    /// The next news, if there are any.
    pub(crate) fn next(&self) -> Option<News> {
        self.shared.news().pop_front()
    }

    /// What the run is told to do.
    pub(crate) fn will(&self) -> Will {
        *self.shared.will()
    }

    /// Tells the run what to do.
    pub(crate) fn tell(&self, will: Will) {
        *self.shared.will() = will;
        self.shared.changed.notify_one();
    }
}

impl Drop for Live {
    fn drop(&mut self) {
        self.tell(Will::Stop);
    }
}

/// Runs the pack; returns its last news.
fn conduct<W: Fn() + Send>(scene: &Scene, pack: u64, folder: &Path, reporter: &mut Reporter<W>) -> News {
    let mut recorder = StateRecorder::new(folder, reporter);
    let outcome = run_pack(scene, pack, &mut recorder);
    if let Err(error) = recorder.finish() {
        remove_run_files(folder);
        return News::Ended(error.to_string());
    }
    match outcome.map(|outcome| write_run_folder(folder, scene, &outcome, false)) {
        Ok(Ok(summary)) => News::Done(Box::new(summary)),
        Ok(Err(error)) => News::Ended(error.to_string()),
        Err(error) => News::Ended(error.to_string()),
    }
}

/// Passes states on, and waits or stops when told to.
struct Reporter<W> {
    shared: Arc<Shared>,
    wake: W,
}

impl<W: Fn()> Reporter<W> {
    fn send(&self, news: News) {
        self.shared.news().push_back(news);
        (self.wake)();
    }
}

impl<W: Fn() + Send> Observer for Reporter<W> {
    fn step(&mut self, _: &Step, _: usize) -> ControlFlow<()> {
        ControlFlow::Continue(())
    }

    fn looks(&self) -> bool {
        true
    }

    fn look(&mut self, state: State) -> ControlFlow<()> {
        self.send(News::State(Box::new(state)));
        let will = self.shared.changed.wait_while(self.shared.will(), |will| *will == Will::Wait);
        match *will.unwrap_or_else(PoisonError::into_inner) {
            Will::Stop => ControlFlow::Break(()),
            _ => ControlFlow::Continue(()),
        }
    }
}
