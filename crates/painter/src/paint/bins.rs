use super::tile::{APRON, SIDE};

/// Distance between the corners of tiles (samples): what is left inside their aprons.
pub(super) const STEP: usize = SIDE - 2 * APRON;

/// A rectangle of samples, both ends included.
#[derive(Clone, Copy, Debug)]
pub(super) struct Bounds {
    pub(super) left: i32,
    pub(super) right: i32,
    pub(super) top: i32,
    pub(super) bottom: i32,
}

impl Bounds {
    /// No samples at all.
    pub(super) const NOTHING: Self =
        Self { left: i32::MAX, right: i32::MIN, top: i32::MAX, bottom: i32::MIN };
}

/// The tiles of a picture, row by row.
#[derive(Clone, Copy)]
pub(super) struct Grid {
    across: usize,
    down: usize,
}

impl Grid {
    /// The tiles of a picture of this many samples.
    pub(super) fn new(width: usize, height: usize) -> Self {
        let (across, down) = (width.div_ceil(STEP), height.div_ceil(STEP));
        Self { across, down: if across == 0 { 0 } else { down } }
    }

    pub(super) fn across(&self) -> usize {
        self.across
    }

    pub(super) fn count(&self) -> usize {
        self.across * self.down
    }

    pub(super) fn step(&self) -> usize {
        STEP
    }

    /// The first column and row of samples of a tile, apron included.
    pub(super) fn corner(&self, place: usize) -> [i32; 2] {
        [place % self.across, place / self.across].map(|tile| (tile * STEP) as i32 - APRON as i32)
    }

    /// Calls for each tile that a rectangle touches.
    #[inline(always)]
    fn touched(&self, bounds: &Bounds, mut call: impl FnMut(usize)) {
        let range = |from: i32, to: i32, count: usize| {
            let (step, apron) = (STEP as i32, APRON as i32);
            let first = from.saturating_sub(apron).div_euclid(step).max(0);
            let last = to.saturating_add(apron).div_euclid(step).min(count as i32 - 1);
            first as usize..(last + 1).max(first) as usize
        };
        let columns = range(bounds.left, bounds.right, self.across);
        for row in range(bounds.top, bounds.bottom, self.down) {
            for column in columns.clone() {
                call(row * self.across + column);
            }
        }
    }
}

/// For each tile, which of a list of things touch it, in the order of the list.
pub(super) struct Bins {
    starts: Vec<u32>,
    things: Vec<u32>,
}

impl Bins {
    pub(super) fn new<T>(grid: &Grid, things: &[T], bounds: impl Fn(&T) -> Bounds) -> Self {
        let mut starts = vec![0; grid.count() + 1];
        for thing in things {
            grid.touched(&bounds(thing), |place| starts[place + 1] += 1);
        }
        for place in 1..starts.len() {
            starts[place] += starts[place - 1];
        }
        let mut next = starts.clone();
        let mut sorted = vec![0; starts[grid.count()] as usize];
        for (number, thing) in things.iter().enumerate() {
            grid.touched(&bounds(thing), |place| {
                sorted[next[place] as usize] = number as u32;
                next[place] += 1;
            });
        }
        Self { starts, things: sorted }
    }

    /// The numbers of the things that touch a tile.
    pub(super) fn at(&self, place: usize) -> impl Iterator<Item = usize> {
        self.things[self.starts[place] as usize..self.starts[place + 1] as usize]
            .iter()
            .map(|&number| number as usize)
    }
}
