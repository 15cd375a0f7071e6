//! A virtual display with the viewer on it, and a run for it to show.

use bedswell_sim::{
    StateRecorder, Study, StudyObserver, StudyOptions, prepare_run_folder, read_scene, read_study, run_pack,
    run_study, write_run_folder,
};
use std::ffi::OsStr;
use std::io::{BufRead, BufReader};
use std::path::{Path, PathBuf};
use std::process::{Child, Command, Stdio};
use std::sync::{Mutex, MutexGuard, PoisonError};
use std::time::{Duration, Instant};
use x11rb::protocol::xproto::{ClientMessageEvent, ConnectionExt, EventMask};

const PATIENCE: Duration = Duration::from_secs(120);

/// The default scene, small and coarse: a few seconds.
pub(crate) fn quick_scene() -> String {
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join("../../scenes/tree-pit.toml");
    let mut text = std::fs::read_to_string(path).unwrap();
    let changes = [
        ("grains = 600 ", "grains = 120 "),
        ("across = 12 ", "across = 8 "),
        ("increments = 30 ", "increments = 12 "),
    ];
    for (from, to) in changes {
        assert!(text.contains(from), "the scene no longer holds {from:?}");
        text = text.replacen(from, to, 1);
    }
    text
}

/// A finished run below a folder.
pub(crate) fn run_folder(below: &Path) -> PathBuf {
    let file = below.join("scene.toml");
    std::fs::write(&file, quick_scene()).unwrap();
    let scene = read_scene(&file).unwrap();
    let folder = below.join("run");
    prepare_run_folder(&folder, &scene, 0).unwrap();
    let mut nobody = ();
    let mut recorder = StateRecorder::new(&folder, &mut nobody);
    let outcome = run_pack(&scene, 0, &mut recorder).unwrap();
    recorder.finish().unwrap();
    write_run_folder(&folder, &scene, &outcome, false).unwrap();
    folder
}

/// A finished study of a number of packs below a folder.
pub(crate) fn study_folder(below: &Path, packs: u64) -> PathBuf {
    let file = below.join("scene.toml");
    std::fs::write(&file, quick_scene()).unwrap();
    let study = Study { packs, ..read_study(&file).unwrap() };
    let folder = below.join("study");
    let options = StudyOptions { threads: 2, csv: false };
    run_study(&study, &folder, options, &|scene, pack| run_pack(scene, pack, &mut ()), &mut Nobody).unwrap();
    folder
}

/// Does not watch.
struct Nobody;

impl StudyObserver for Nobody {
    fn progress(&mut self, _: u64, _: u64) {}

    fn failed(&mut self, _: usize, _: u64, reason: &str) {
        panic!("{reason}");
    }
}

/// A display of 1280 by 720 pixels with the viewer filling it.
pub(crate) struct Desk {
    server: Child,
    viewer: Child,
    display: String,
    window: u32,
    /// One desk at a time: several would starve each other of the processor.
    _turn: MutexGuard<'static, ()>,
}

static TURN: Mutex<()> = Mutex::new(());

impl Desk {
    /// Starts display and viewer, and waits for the window. A machine that is short of
    /// processors may lose a display that is just coming up: there is a second try.
    pub(crate) fn open(arguments: &[&OsStr]) -> Self {
        Self::try_open(arguments).or_else(|_| Self::try_open(arguments)).unwrap()
    }

    fn try_open(arguments: &[&OsStr]) -> Result<Self, String> {
        let turn = TURN.lock().unwrap_or_else(PoisonError::into_inner);
        let mut server = Command::new("Xvfb")
            .args(["-displayfd", "1", "-screen", "0", "1280x720x24", "-nolisten", "tcp"])
            .stdout(Stdio::piped())
            .stderr(Stdio::null())
            .spawn()
            .expect("Xvfb must be installed: see the README's set-up");
        let mut number = String::new();
        BufReader::new(server.stdout.take().unwrap()).read_line(&mut number).unwrap();
        let display = format!(":{}", number.trim());
        let viewer = Command::new(env!("CARGO_BIN_EXE_bedswell-viewer"))
            .args(arguments)
            .env("DISPLAY", &display)
            .env_remove("WAYLAND_DISPLAY")
            .spawn()
            .unwrap();
        let mut desk = Self { server, viewer, display, window: 0, _turn: turn };
        let start = Instant::now();
        while desk.window == 0 {
            if start.elapsed() > PATIENCE {
                let ended = desk.viewer.try_wait();
                return Err(format!("no window on display {}; the viewer: {ended:?}", desk.display));
            }
            std::thread::sleep(Duration::from_millis(100));
            let found = desk.tool(&["search", "--onlyvisible", "--class", "bedswell"]);
            desk.window = found.and_then(|found| found.lines().next()?.parse().ok()).unwrap_or(0);
        }
        // There is no window manager to give it the keyboard.
        desk.must(&["windowfocus", &desk.window.to_string()]);
        Ok(desk)
    }

    /// Presses a key, such as `k` or `shift+period`.
    pub(crate) fn key(&self, key: &str) {
        self.must(&["key", key]);
    }

    pub(crate) fn move_to(&self, (x, y): (i32, i32)) {
        self.must(&["mousemove", &x.to_string(), &y.to_string()]);
    }

    pub(crate) fn click(&self, at: (i32, i32)) {
        self.move_to(at);
        self.must(&["mousedown", "1"]);
        std::thread::sleep(Duration::from_millis(150));
        self.must(&["mouseup", "1"]);
    }

    /// Drags with the left button, in steps as a hand does.
    pub(crate) fn drag(&self, from: (i32, i32), to: (i32, i32)) {
        self.move_to(from);
        self.must(&["mousedown", "1"]);
        for step in 1..=8 {
            self.move_to((from.0 + (to.0 - from.0) * step / 8, from.1 + (to.1 - from.1) * step / 8));
            std::thread::sleep(Duration::from_millis(60));
        }
        self.must(&["mouseup", "1"]);
    }

    /// The screen once it no longer changes.
    pub(crate) fn settled(&mut self) -> Screen {
        let start = Instant::now();
        let mut last = self.screen();
        let mut same = 0;
        while same < 3 {
            assert!(start.elapsed() < PATIENCE, "the window never comes to rest");
            assert!(self.viewer.try_wait().unwrap().is_none(), "the viewer ended by itself");
            std::thread::sleep(Duration::from_millis(300));
            let now = self.screen();
            same = if now.pixels == last.pixels { same + 1 } else { 0 };
            last = now;
        }
        last
    }

    /// The screen once there is something to see in an area, and it no longer changes.
    pub(crate) fn opened(&mut self, area: Area) -> Screen {
        let start = Instant::now();
        while self.screen().colours(area) < 200 {
            assert!(start.elapsed() < PATIENCE, "nothing is ever drawn");
            std::thread::sleep(Duration::from_millis(200));
        }
        self.settled()
    }

    pub(crate) fn wait_until(&mut self, what: &str, mut come: impl FnMut() -> bool) {
        let start = Instant::now();
        while !come() {
            assert!(start.elapsed() < PATIENCE, "waited in vain for {what}");
            assert!(self.viewer.try_wait().unwrap().is_none(), "the viewer ended by itself");
            std::thread::sleep(Duration::from_millis(50));
        }
    }

    /// Closes the window as a window manager does, and gives the exit code.
    pub(crate) fn close(&mut self) -> i32 {
        let (server, _) = x11rb::connect(Some(&self.display)).unwrap();
        let atom = |name: &[u8]| server.intern_atom(false, name).unwrap().reply().unwrap().atom;
        let data = [atom(b"WM_DELETE_WINDOW"), 0, 0, 0, 0];
        let message = ClientMessageEvent::new(32, self.window, atom(b"WM_PROTOCOLS"), data);
        server.send_event(false, self.window, EventMask::NO_EVENT, message).unwrap().check().unwrap();
        let start = Instant::now();
        loop {
            if let Some(status) = self.viewer.try_wait().unwrap() {
                return status.code().unwrap_or(-1);
            }
            assert!(start.elapsed() < PATIENCE, "the window does not close");
            std::thread::sleep(Duration::from_millis(50));
        }
    }

    fn screen(&self) -> Screen {
        let output = Command::new("import")
            .args(["-display", &self.display, "-window", "root", "-depth", "8", "rgb:-"])
            .output()
            .expect("imagemagick must be installed: see the README's set-up");
        assert_eq!(output.stdout.len(), 3 * WIDTH * HEIGHT, "{}", String::from_utf8_lossy(&output.stderr));
        Screen { pixels: output.stdout }
    }

    fn must(&self, arguments: &[&str]) {
        assert!(self.tool(arguments).is_some(), "xdotool {arguments:?} failed");
    }

    /// What the tool prints, if it succeeds.
    fn tool(&self, arguments: &[&str]) -> Option<String> {
        let output = Command::new("xdotool").args(arguments).env("DISPLAY", &self.display).output();
        let output = output.expect("xdotool must be installed: see the README's set-up");
        output.status.success().then(|| String::from_utf8_lossy(&output.stdout).into_owned())
    }
}

impl Drop for Desk {
    fn drop(&mut self) {
        for child in [&mut self.viewer, &mut self.server] {
            let _ = child.kill();
            let _ = child.wait();
        }
    }
}

const WIDTH: usize = 1280;
const HEIGHT: usize = 720;

/// A rectangle of the screen (pixels).
#[derive(Clone, Copy)]
pub(crate) struct Area {
    pub(crate) left: i32,
    pub(crate) top: i32,
    pub(crate) right: i32,
    pub(crate) bottom: i32,
}

/// A screenshot: red, green, blue.
pub(crate) struct Screen {
    pixels: Vec<u8>,
}

impl Screen {
    fn area(&self, area: Area) -> impl Iterator<Item = [u8; 3]> + '_ {
        (area.top..area.bottom).flat_map(move |y| {
            (area.left..area.right).map(move |x| {
                let first = 3 * (y as usize * WIDTH + x as usize);
                [self.pixels[first], self.pixels[first + 1], self.pixels[first + 2]]
            })
        })
    }

    /// Share of the pixels of an area that differ from those of another screen.
    pub(crate) fn differs(&self, other: &Self, area: Area) -> f64 {
        let apart =
            |(one, other): &([u8; 3], [u8; 3])| one.iter().zip(other).any(|(a, b)| a.abs_diff(*b) > 8);
        let different = self.area(area).zip(other.area(area)).filter(apart).count();
        different as f64 / self.area(area).count() as f64
    }

    /// How many colours there are in an area.
    pub(crate) fn colours(&self, area: Area) -> usize {
        self.area(area).collect::<std::collections::BTreeSet<_>>().len()
    }

    /// How many pixels of an area have about this colour.
    pub(crate) fn count(&self, colour: [u8; 3], area: Area) -> usize {
        self.area(area).filter(|pixel| pixel.iter().zip(&colour).all(|(a, b)| a.abs_diff(*b) < 12)).count()
    }

    /// Mean of all channels in an area.
    pub(crate) fn mean(&self, area: Area) -> f64 {
        let sum: f64 = self.area(area).flatten().map(f64::from).sum();
        sum / (3.0 * self.area(area).count() as f64)
    }
}
