//! A real window under a virtual display, driven by real key and pointer events; every
//! screenshot is inspected for what changed and for what did not.

mod support;

use support::{Area, Desk, run_folder};

/// Where the bed is drawn, where the cards are, and where the course of swelling is, in a
/// window of 1280 by 720 pixels.
const BED: Area = Area { left: 4, top: 40, right: 880, bottom: 590 };
const CARDS: Area = Area { left: 1012, top: 40, right: 1276, bottom: 590 };
const COURSE: Area = Area { left: 140, top: 600, right: 1276, bottom: 716 };
const HEAD: Area = Area { left: 4, top: 4, right: 800, bottom: 32 };
/// The table of a study's packs, and the bed beside it.
const TABLE: Area = Area { left: 4, top: 210, right: 570, bottom: 590 };
const STUDY_BED: Area = Area { left: 590, top: 40, right: 870, bottom: 590 };
/// The middle of the bed's part of the window, where the bead is.
const BEAD: (i32, i32) = (504, 290);
/// Marks in the dark theme.
const ACCENT: [u8; 3] = [247, 221, 114];

#[test]
fn a_run_is_turned_cut_scrubbed_picked_and_photographed() {
    let folder = tempfile::tempdir().unwrap();
    let run = run_folder(folder.path());
    let pictures = folder.path().join("pictures");
    let mut desk = Desk::open(&[
        run.as_os_str(),
        "--remember".as_ref(),
        "none".as_ref(),
        "--pictures".as_ref(),
        pictures.as_os_str(),
    ]);

    let opened = desk.opened(BED);

    desk.drag(BEAD, (BEAD.0 + 160, BEAD.1 + 40));
    let turned = desk.settled();
    assert!(turned.differs(&opened, BED) > 0.1, "dragging does not turn the bed");
    assert_eq!(turned.differs(&opened, COURSE), 0.0, "turning moved the course");

    desk.key("k");
    let skinned = desk.settled();
    assert!(skinned.differs(&turned, BED) > 0.005, "no skin");
    assert!(skinned.differs(&turned, CARDS) > 0.001, "the card does not show the skin");
    desk.key("f");
    let other_field = desk.settled();
    assert!(other_field.differs(&skinned, BED) > 0.005, "another field looks the same");
    assert!(other_field.differs(&skinned, CARDS) > 0.005, "the card shows the same field");

    desk.key("c");
    let cut = desk.settled();
    assert!(cut.differs(&other_field, BED) > 0.05, "nothing is cut");
    desk.key("bracketright");
    assert!(desk.settled().differs(&cut, BED) > 0.005, "the cut does not move");
    desk.key("c");

    // The first of the four curves reaches from 148 to 418.
    let before = desk.settled();
    desk.click((200, 660));
    let scrubbed = desk.settled();
    assert!(scrubbed.differs(&before, BED) > 0.01, "another time looks the same");
    assert!(scrubbed.differs(&before, HEAD) > 0.005, "the head tells the same time");
    assert!(scrubbed.differs(&before, COURSE) > 0.001, "the cursors stayed");
    desk.key("End");
    assert_eq!(desk.settled().differs(&before, HEAD), 0.0, "the last increment is not where it was");

    let unpicked = desk.settled();
    desk.move_to(BEAD);
    let picked = desk.settled();
    let words = Area { left: BEAD.0 - 240, top: BEAD.1 - 200, right: BEAD.0 + 260, bottom: BEAD.1 + 240 };
    assert!(picked.differs(&unpicked, words) > 0.01, "no numbers under the pointer");

    desk.move_to((900, 20));
    let whole = desk.settled();
    desk.key("n");
    let flown = desk.settled();
    assert!(flown.differs(&whole, BED) > 0.1, "no flight to the likeliest place");
    let near = Area { left: BEAD.0 - 60, top: BEAD.1 - 60, right: BEAD.0 + 60, bottom: BEAD.1 + 60 };
    assert!(flown.count(ACCENT, near) > 20, "the place is not marked");

    desk.key("s");
    desk.settled();
    let taken: Vec<_> = std::fs::read_dir(&pictures).expect("a folder of pictures").collect();
    assert_eq!(taken.len(), 1, "{taken:?}");
    let bytes = std::fs::read(taken[0].as_ref().unwrap().path()).unwrap();
    assert_eq!(&bytes[1..4], b"PNG");

    desk.key("t");
    let light = desk.settled();
    assert!(light.mean(BED) > flown.mean(BED) + 60.0, "the theme did not turn light");

    assert_eq!(desk.close(), 0, "the viewer did not end well");
}

#[test]
fn a_scene_runs_while_one_looks_and_leaves_a_folder_that_can_be_finished() {
    let folder = tempfile::tempdir().unwrap();
    let scene = folder.path().join("scene.toml");
    std::fs::write(&scene, support::quick_scene()).unwrap();
    let out = folder.path().join("out");
    let mut desk = Desk::open(&[
        scene.as_os_str(),
        "--out".as_ref(),
        out.as_os_str(),
        "--remember".as_ref(),
        "none".as_ref(),
    ]);
    let states = out.join("states");
    desk.wait_until("the first states", || std::fs::read_dir(&states).is_ok_and(|found| found.count() > 3));
    assert_eq!(desk.close(), 0, "the viewer did not end well");

    let run = bedswell_sim::read_run_folder(&out).unwrap();
    assert!(run.states.len() >= 3, "{} states", run.states.len());
    bedswell_sim::prepare_run_folder(&out, &run.scene, run.pack)
        .expect("the folder takes the same run again");
}

#[test]
fn bevy_fills_the_window_with_the_same_picture_as_the_painter() {
    let folder = tempfile::tempdir().unwrap();
    let run = run_folder(folder.path());
    let screen = |by: &str| {
        let arguments =
            [run.as_os_str(), "--remember".as_ref(), "none".as_ref(), "--drawn-by".as_ref(), by.as_ref()];
        let mut desk = Desk::open(&arguments);
        desk.opened(BED);
        desk.move_to((1270, 5));
        desk.key("k");
        desk.key("g");
        let screen = desk.settled();
        assert_eq!(desk.close(), 0, "the viewer did not end well");
        screen
    };
    let (painted, drawn) = (screen("painter"), screen("bevy"));
    // Letters and the edges of things differ a little.
    assert!(drawn.differs(&painted, BED) < 0.02, "{} of the bed differs", drawn.differs(&painted, BED));
    assert!(drawn.differs(&painted, CARDS) < 0.001, "the cards differ");
}

#[test]
fn a_study_opens_with_its_packs_and_a_pack_that_is_chosen_is_run() {
    let folder = tempfile::tempdir().unwrap();
    let study = support::study_folder(folder.path(), 3);
    let mut desk = Desk::open(&[study.as_os_str(), "--remember".as_ref(), "none".as_ref()]);
    let first = study.join("packs");
    let runs = |count: usize| {
        let packs = std::fs::read_dir(&first).into_iter().flatten().flatten();
        packs.filter(|pack| pack.path().join("summary.json").is_file()).count() == count
    };
    desk.wait_until("the run of the first pack", || runs(1));
    desk.move_to((1270, 5));
    let opened = desk.settled();
    assert!(opened.colours(TABLE) > 20, "no table");

    desk.key("o");
    let sorted = desk.settled();
    assert!(sorted.differs(&opened, TABLE) > 0.002, "sorting by another outcome changes nothing");
    assert_eq!(sorted.differs(&opened, STUDY_BED), 0.0, "sorting changed the bed");

    desk.key("d");
    desk.wait_until("the run of another pack", || runs(2));
    desk.move_to((1270, 5));
    let other = desk.settled();
    assert!(other.differs(&sorted, STUDY_BED) > 0.05, "another pack looks the same");
    assert_eq!(desk.close(), 0, "the viewer did not end well");
}
