use bedswell_painter::{Camera, Drawing, Image, Overlay, Pose, Quality, Size, paint, paint_overlay};
use std::sync::{Arc, Condvar, Mutex, MutexGuard, PoisonError};
use std::thread::JoinHandle;
use std::time::{Duration, Instant};

/// How long the view must be at rest before the fine picture is painted.
const REST: Duration = Duration::from_millis(120);

/// Longest time for a picture while the view moves; beyond it pictures get coarser.
const QUICK: Duration = Duration::from_millis(50);

/// Pixels of the window, in each direction, for one of the coarsest picture.
const COARSEST: u32 = 2;

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
    /// What lies flat over it.
    pub(crate) overlay: Overlay,
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
        Arc::ptr_eq(&self.drawing, &other.drawing)
            && self.pose == other.pose
            && self.size == other.size
            && self.overlay == other.overlay
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

    /// Asks for a picture, and waits for one at most for a time; whatever else was asked for
    /// and not begun is forgotten.
    pub(crate) fn show(&self, view: View, wait: Duration) -> Option<Image> {
        let mut desk = self.shared.desk();
        desk.view = Some(view);
        desk.awaited = true;
        self.shared.changed.notify_one();
        let nothing = |desk: &mut Desk| desk.picture.is_none();
        let waited = self.shared.painted.wait_timeout_while(desk, wait, nothing);
        desk = waited.unwrap_or_else(PoisonError::into_inner).0;
        desk.awaited = false;
        desk.picture.take()
    }

    /// The newest picture, if it was not taken before.
    pub(crate) fn take(&self) -> Option<Image> {
        self.shared.desk().picture.take()
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
            shared.finish(picture(&view, coarseness, QUICKLY), &wake);
            coarseness = coarser(coarseness, start.elapsed());
            match shared.next(Some(REST)) {
                Some(next) => view = next,
                None => break,
            }
        }
        if shared.desk().closed {
            return;
        }
        shared.finish(picture(&view, 1, Quality::default()), &wake);
    }
}

/// Paints a view with a fraction of the pixels in each direction.
fn picture(view: &View, coarseness: u32, quality: Quality) -> Image {
    let coarse = paint(&view.drawing, &camera(view, coarseness), quality);
    let mut image = enlarged(coarse, coarseness, view.size);
    paint_overlay(&mut image, &view.overlay);
    image
}

/// A picture of a size, evenly between the pixels of the coarse one.
fn enlarged(coarse: Image, coarseness: u32, size: Size) -> Image {
    if coarse.size == size {
        return coarse;
    }
    // Places of samples in the coarse picture: the one before, the one after, and parts of 256.
    let samples = |length: u32, coarse: u32| -> Vec<(usize, usize, u32)> {
        let place = |pixel: u32| 128 * (2 * pixel + 1) / coarseness;
        (0..length)
            .map(|pixel| {
                let place = place(pixel).saturating_sub(128);
                let before = (place / 256).min(coarse - 1);
                (before as usize, (before + 1).min(coarse - 1) as usize, place % 256)
            })
            .collect()
    };
    let columns = samples(size.width, coarse.size.width);
    let mut pixels = Vec::with_capacity((size.width * size.height * 4) as usize);
    for (above, below, down) in samples(size.height, coarse.size.height) {
        let row = |row: usize| &coarse.pixels[4 * row * coarse.size.width as usize..];
        let (above, below) = (row(above), row(below));
        for &(before, after, along) in &columns {
            let mix = |row: &[u8], channel: usize| {
                let part = |pixel: usize| u32::from(row[4 * pixel + channel]);
                part(before) * (256 - along) + part(after) * along
            };
            for channel in 0..4 {
                let mixed = mix(above, channel) * (256 - down) + mix(below, channel) * down;
                pixels.push((mixed >> 16) as u8);
            }
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

/// The coarseness to try next after a picture took a time.
fn coarser(coarseness: u32, took: Duration) -> u32 {
    if took > QUICK {
        (coarseness + 1).min(COARSEST)
    } else if took < QUICK / 4 {
        (coarseness - 1).max(1)
    } else {
        coarseness
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use bedswell_painter::{Ball, Colour, Point};

    fn view() -> View {
        let ball = Ball { centre: Point::zeros(), radius: 1.0, colour: Colour::new(200, 100, 50) };
        View {
            drawing: Arc::new(Drawing { balls: vec![ball], ..Drawing::default() }),
            pose: Pose { target: [0.0; 3], azimuth: 10.0, elevation: 10.0, distance: 8.0 },
            size: Size { width: 61, height: 40 },
            overlay: Overlay::default(),
        }
    }

    #[test]
    fn a_view_at_rest_ends_in_the_fine_picture() {
        let (woken, waked) = std::sync::mpsc::channel();
        let easel = Easel::new(move || woken.send(()).unwrap_or_default());
        let mut last = easel.show(view(), Duration::ZERO);
        let fine = paint(&view().drawing, &camera(&view(), 1), Quality::default());
        while last.as_ref() != Some(&fine) {
            waked.recv_timeout(Duration::from_secs(20)).expect("a picture");
            last = easel.take().or(last);
        }
    }

    #[test]
    fn who_waits_gets_the_picture_and_is_not_woken() {
        let (woken, waked) = std::sync::mpsc::channel();
        let easel = Easel::new(move || woken.send(()).unwrap_or_default());
        let quick = easel.show(view(), Duration::from_secs(20)).expect("a picture");
        assert_eq!(quick.size, view().size);
        drop(easel);
        // At most the fine picture that nobody waited for.
        assert!(waked.iter().count() <= 1);
    }

    #[test]
    fn a_coarse_picture_of_one_colour_keeps_it_and_edges_lie_between() {
        let grey = |width| Image::new(Size { width, height: 2 }, Colour::new(90, 90, 90));
        assert_eq!(enlarged(grey(3), 2, Size { width: 7, height: 5 }).pixels[..4], [90, 90, 90, 255]);
        let mut edge = grey(2);
        edge.pixels[4..8].copy_from_slice(&[190, 90, 90, 255]);
        let wide = enlarged(edge, 2, Size { width: 4, height: 4 });
        let reds: Vec<u8> = wide.pixels[..16].chunks_exact(4).map(|pixel| pixel[0]).collect();
        assert_eq!(reds, [90, 115, 165, 190]);
    }
}
