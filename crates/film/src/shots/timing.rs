use super::{Shot, ShotList};

/// What one frame of a film shows.
#[derive(Clone, Copy, Debug, PartialEq)]
pub struct Moment<'a> {
    /// The shot.
    pub shot: &'a Shot,
    /// Its place in the list, from 0.
    pub number: usize,
    /// Share of the shot that has passed, 0 on its first and 1 on its last frame.
    pub progress: f64,
    /// Share of the run that has passed, 0 to 1.
    pub run: f64,
}

impl ShotList {
    /// Frames of the whole film.
    pub fn frames(&self) -> u32 {
        self.first_frame(self.shots.len())
    }

    /// What a frame shows, counted from 0; `None` beyond the end.
    pub fn moment(&self, frame: u32) -> Option<Moment<'_>> {
        let number = (0..self.shots.len()).find(|&number| frame < self.first_frame(number + 1))?;
        let (first, next) = (self.first_frame(number), self.first_frame(number + 1));
        let shot = &self.shots[number];
        let progress = f64::from(frame - first) / f64::from((next - first - 1).max(1));
        let run = shot.span[0] + progress * (shot.span[1] - shot.span[0]);
        Some(Moment { shot, number, progress, run })
    }

    /// The frame a shot starts with; rounded from the whole time before it, so that roundings do not add up.
    fn first_frame(&self, shot: usize) -> u32 {
        let before: f64 = self.shots[..shot].iter().map(|shot| shot.seconds).sum();
        (before * f64::from(self.frames_per_second)).round() as u32
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn list(shots: &str) -> ShotList {
        ShotList::parse(&format!("[film]\nframes_per_second = 30\n{shots}"), "film.toml".as_ref()).unwrap()
    }

    #[test]
    fn shots_follow_each_other_without_gap() {
        let list =
            list("[[shot]]\nseconds = 0.55\nto = 0.4\n[[shot]]\nseconds = 0.55\nfrom = 0.8\nto = 0.6\n");
        assert_eq!(list.frames(), 33);
        let moments: Vec<_> = (0..33).map(|frame| list.moment(frame).unwrap()).collect();
        assert_eq!(list.moment(33), None);
        let of = |number| moments.iter().filter(move |moment| moment.number == number);
        assert_eq!((of(0).count(), of(1).count()), (17, 16));
        for (number, span) in [(0, [0.0, 0.4]), (1, [0.8, 0.6])] {
            let (first, last) = (of(number).next().unwrap(), of(number).next_back().unwrap());
            assert_eq!((first.progress, last.progress), (0.0, 1.0));
            assert!((first.run - span[0]).abs() < 1e-12 && (last.run - span[1]).abs() < 1e-12);
        }
        assert!((moments[8].run - 0.2).abs() < 1e-12);
    }
}
