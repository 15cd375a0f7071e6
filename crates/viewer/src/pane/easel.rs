use bedswell_painter::{Camera, Drawing, Image, Pose, Quality, Size, paint};
use std::sync::{Arc, Condvar, Mutex, MutexGuard, PoisonError};
use std::thread::JoinHandle;
use std::time::{Duration, Instant};

/// How long the view must be at rest before the fine picture is painted.
const REST: Duration = Duration::from_millis(120);

/// Longest time for a picture while the view moves; beyond it pictures get coarser.
const QUICK: Duration = Duration::from_millis(45);

/// How pictures are painted while the view moves.
const QUICKLY: Quality = Quality { samples: 1, outlines: true };

/// What to paint.
#[derive(Clone, Debug)]
pub(crate) struct View {
    /// The things.
    pub(crate) drawing: Arc<Drawing>,
    /// Where one looks from.
    pub(crate) pose: Pose,
    /// Size of the picture.
    pub(crate) size: Size,
}

/// A thread that paints the latest view: quickly at first, finely once nothing changes.
pub(crate) struct Easel {
    shared: Arc<Shared>,
    thread: Option<JoinHandle<()>>,
}

#[derive(Default)]
struct Shared {
    desk: Mutex<Desk>,
    changed: Condvar,
    painted: Condvar,
}

#[derive(Default)]
struct Desk {
    view: Option<View>,
    picture: Option<Image>,
    /// Whether somebody waits for a picture.
    awaited: bool,
    closed: bool,
}

impl PartialEq for View {
    fn eq(&self, other: &Self) -> bool {
        Arc::ptr_eq(&self.drawing, &other.drawing) && self.pose == other.pose && self.size == other.size
    }
}

impl Easel {
    /// Starts the thread; it calls `wake` when a picture is ready that nobody waits for.
    pub(crate) fn new(wake: impl Fn() + Send + 'static) -> Self {
        let shared = Arc::<Shared>::default();
        let theirs = shared.clone();
        let thread = std::thread::spawn(move || work(&theirs, wake));
        Self { shared, thread: Some(thread) }
    }

    /// Asks for a picture; whatever else was asked for and not begun is forgotten.
    pub(crate) fn show(&self, view: View) {
        self.shared.desk().view = Some(view);
        self.shared.changed.notify_one();
    }

    /// The newest picture, once; waits for one at most for a time.
    pub(crate) fn take(&self, wait: Duration) -> Option<Image> {
        let mut desk = self.shared.desk();
        desk.awaited = true;
        let nothing = |desk: &mut Desk| desk.picture.is_none();
        let waited = self.shared.painted.wait_timeout_while(desk, wait, nothing);
        desk = waited.unwrap_or_else(PoisonError::into_inner).0;
        desk.awaited = false;
        desk.picture.take()
    }
}

impl Drop for Easel {
    fn drop(&mut self) {
        self.shared.desk().closed = true;
        self.shared.changed.notify_one();
        if let Some(thread) = self.thread.take() {
            let _ = thread.join();
        }
    }
}

impl Shared {
    fn desk(&self) -> MutexGuard<'_, Desk> {
        self.desk.lock().unwrap_or_else(PoisonError::into_inner)
    }

    /// Waits for the next view, at most for a time; `None` after that, and when closed.
    fn next(&self, at_most: Option<Duration>) -> Option<View> {
        let nothing = |desk: &mut Desk| desk.view.is_none() && !desk.closed;
        let mut desk = match at_most {
            Some(time) => {
                self.changed
                    .wait_timeout_while(self.desk(), time, nothing)
                    .unwrap_or_else(PoisonError::into_inner)
                    .0
            }
            None => self.changed.wait_while(self.desk(), nothing).unwrap_or_else(PoisonError::into_inner),
        };
        desk.view.take()
    }

    /// Hands a picture over, and wakes the window unless it waits anyway.
    fn finish(&self, picture: Image, wake: impl Fn()) {
        let mut desk = self.desk();
        desk.picture = Some(picture);
        if desk.awaited {
            self.painted.notify_one();
        } else {
            wake();
        }
    }
}

/// Paints until closed.
fn work(shared: &Shared, wake: impl Fn()) {
    let mut coarseness = 1;
    while let Some(mut view) = shared.next(None) {
        loop {
            let start = Instant::now();
            let coarse = paint(&view.drawing, &camera(&view, coarseness), QUICKLY);
            shared.finish(enlarged(coarse, coarseness, view.size), &wake);
            coarseness = coarser(coarseness, start.elapsed());
            match shared.next(Some(REST)) {
                Some(next) => view = next,
                None => break,
            }
        }
        if shared.desk().closed {
            return;
        }
        shared.finish(paint(&view.drawing, &camera(&view, 1), Quality::default()), &wake);
    }
}

/// A picture of a size, every pixel of the coarse one repeated.
fn enlarged(coarse: Image, coarseness: u32, size: Size) -> Image {
    if coarse.size == size {
        return coarse;
    }
    let last = |place: u32, size: u32| (place / coarseness).min(size - 1) as usize;
    let mut pixels = Vec::with_capacity((size.width * size.height * 4) as usize);
    for y in 0..size.height {
        let row = last(y, coarse.size.height) * coarse.size.width as usize;
        for x in 0..size.width {
            let at = 4 * (row + last(x, coarse.size.width));
            pixels.extend_from_slice(&coarse.pixels[at..at + 4]);
        }
    }
    Image { size, pixels }
}

/// The camera for a picture with a fraction of the pixels in each direction.
fn camera(view: &View, coarseness: u32) -> Camera {
    let Size { width, height } = view.size;
    let size = Size { width: (width / coarseness).max(1), height: (height / coarseness).max(1) };
    Camera::new(&view.pose, size)
}

/// The coarseness to try next after a picture took a time: 1 to 3.
fn coarser(coarseness: u32, took: Duration) -> u32 {
    if took > QUICK {
        (coarseness + 1).min(3)
    } else if took < QUICK / 4 {
        (coarseness - 1).max(1)
    } else {
        coarseness
    }
}
