//! Films and stills of a run, made without a window, a display or a graphics driver.

use crate::support::{TestEnv, root};
use std::path::Path;
use std::process::Command;
use std::sync::OnceLock;

/// One run for all of these tests.
fn run_folder() -> &'static Path {
    static RUN: OnceLock<TestEnv> = OnceLock::new();
    let env = RUN.get_or_init(|| {
        let env = TestEnv::new();
        env.write_fast_scene("scene.toml");
        env.succeed(&["run", "scene.toml", "--out", "run", "--pack", "1"]);
        env
    });
    static FOLDER: OnceLock<std::path::PathBuf> = OnceLock::new();
    FOLDER.get_or_init(|| env.path("run"))
}

/// The command's first words for a run: `verb DIR`.
fn of_run<'a>(verb: &'a str, rest: &[&'a str]) -> Vec<&'a str> {
    [&[verb, run_folder().to_str().unwrap()], rest].concat()
}

/// A short film; as many frames as asked for.
const SHORT: [&str; 6] = ["--length", "1", "--frame-rate", "10", "--size", "320x180"];

/// What `ffprobe` says of the first stream: codec, width, height, pixel format, frames, seconds.
fn probe(path: &Path) -> Vec<String> {
    let output = Command::new("ffprobe")
        .args(["-v", "error", "-count_frames", "-select_streams", "v:0", "-of", "csv=p=0"])
        .args(["-show_entries", "stream=codec_name,width,height,pix_fmt,nb_read_frames:format=duration"])
        .arg(path)
        .output()
        .expect("ffprobe must be installed: see the README's set-up");
    assert!(output.status.success(), "{}", String::from_utf8_lossy(&output.stderr));
    let text = String::from_utf8(output.stdout).unwrap();
    text.split([',', '\n']).filter(|word| !word.is_empty()).map(str::to_owned).collect()
}

#[test]
fn a_film_plays_everywhere() {
    let env = TestEnv::new();
    let ended = env.succeed(&of_run("film", &[&SHORT[..], &["--out", "clip.mp4"]].concat()));
    assert!(ended.stdout.contains("10 frames of 320x180"), "{}", ended.stdout);
    let found = probe(&env.path("clip.mp4"));
    assert_eq!(found[..5], ["h264", "320", "180", "yuv420p", "10"]);
    assert!((found[5].parse::<f64>().unwrap() - 1.0).abs() < 0.05, "{found:?}");
    assert_eq!(env.files().len(), 1, "nothing else may lie about");
}

#[test]
fn a_gif_moves_and_tells_what_it_left_out() {
    let env = TestEnv::new();
    let arguments = ["--length", "1", "--frame-rate", "30", "--size", "800x450", "--out", "clip.gif"];
    let ended = env.succeed(&of_run("film", &arguments));
    assert!(ended.stderr.contains("640x360 instead of 800x450"), "{}", ended.stderr);
    assert!(ended.stderr.contains("15 instead of 30 frames per second"), "{}", ended.stderr);
    let found = probe(&env.path("clip.gif"));
    assert_eq!((found[0].as_str(), found[1].as_str(), found[2].as_str()), ("gif", "640", "360"));
    assert_eq!(found[4], "15");
    // A second of it; twelve must stay under 12 MB.
    assert!(env.read("clip.gif").len() < 1_000_000);
}

#[test]
fn the_same_film_is_the_same_bytes_with_any_number_of_threads() {
    let env = TestEnv::new();
    for (out, threads) in [("one.mp4", "1"), ("two.mp4", "2"), ("frames-one/", "1"), ("frames-two/", "2")] {
        env.succeed(&of_run("film", &[&SHORT[..], &["--out", out, "--threads", threads]].concat()));
    }
    assert!(env.read("one.mp4") == env.read("two.mp4"), "the films differ");
    for frame in 1..=10 {
        let name = |folder| format!("{folder}/frame-{frame:04}.png");
        assert!(env.read(&name("frames-one")) == env.read(&name("frames-two")), "frame {frame} differs");
    }
}

#[test]
fn an_odd_size_is_rounded_and_told() {
    let env = TestEnv::new();
    let arguments = ["--length", "0.2", "--size", "321x181", "--out", "clip.mp4"];
    let ended = env.succeed(&of_run("film", &arguments));
    assert!(ended.stderr.contains("320x180 instead of 321x181 pixels"), "{}", ended.stderr);
    assert_eq!(probe(&env.path("clip.mp4"))[1..3], ["320", "180"]);
}

#[test]
fn a_full_disk_leaves_no_half_film() {
    let env = TestEnv::new();
    let limit = "trap '' XFSZ; ulimit -f 3; exec \"$0\" \"$@\"";
    for out in ["clip.mp4", "clip.gif", "picture.png"] {
        let verb = if out.ends_with("png") { "still" } else { "film" };
        let sizes: &[&str] = if verb == "film" { &SHORT } else { &["--size", "320x180"] };
        let output = Command::new("sh")
            .args(["-c", limit, crate::support::COMMAND])
            .args(of_run(verb, &[sizes, &["--out", out]].concat()))
            .current_dir(env.path("."))
            .output()
            .unwrap();
        let ended = crate::support::ended(output);
        assert_eq!(ended.code, 3, "{out}: {}", ended.stderr);
        assert!(ended.stderr.contains(&format!("cannot write {out}")), "{}", ended.stderr);
        assert!(env.files().is_empty(), "{:?}", env.files());
    }
}

#[test]
fn a_still_has_its_size_and_may_have_no_background() {
    let env = TestEnv::new();
    let picture = |arguments: &[&str]| {
        env.succeed(&of_run("still", &[&["--out", "picture.png"], arguments].concat()));
        let decoder = png::Decoder::new(std::io::Cursor::new(env.read("picture.png")));
        let mut reader = decoder.read_info().unwrap();
        let mut pixels = vec![0; reader.output_buffer_size().unwrap()];
        let info = reader.next_frame(&mut pixels).unwrap();
        assert_eq!(info.color_type, png::ColorType::Rgba);
        (info.width, info.height, pixels)
    };
    let (width, height, pixels) = picture(&["--size", "3840x2160"]);
    assert_eq!((width, height), (3840, 2160));
    assert!(pixels.chunks(4).all(|pixel| pixel[3] == 255), "not opaque");

    let (.., pixels) = picture(&[
        "--size",
        "320x180",
        "--transparent",
        "--bare",
        "--beads",
        "skin",
        "--grains",
        "hidden",
        "--look-at",
        "bead-0",
    ]);
    assert_eq!(pixels[3], 0, "the corner shows a background");
    let middle = 4 * (90 * 320 + 160);
    assert_eq!(pixels[middle + 3], 255, "the bead is not solid");

    let ended = env.run(&of_run("still", &["--out", "picture.bmp"]));
    assert_eq!(ended.code, 2);
    assert!(ended.stderr.contains(".png"), "{}", ended.stderr);
}

#[test]
fn a_scene_goes_to_other_programs_as_gltf() {
    let env = TestEnv::new();
    env.succeed(&of_run("still", &["--out", "scene.glb", "--beads", "skin", "--grains", "plain"]));
    let bytes = env.read("scene.glb");
    assert_eq!(&bytes[..4], b"glTF");
    let length = u32::from_le_bytes(bytes[12..16].try_into().unwrap()) as usize;
    let document: serde_json::Value = serde_json::from_slice(&bytes[20..20 + length]).unwrap();
    assert_eq!(document["asset"]["version"], "2.0");
    // Eight spheres, and a skin with colours at its points.
    assert!(document["nodes"].as_array().unwrap().len() >= 9);
    assert!(document.to_string().contains("COLOR_0"));
}

#[test]
fn a_shot_list_of_ones_own() {
    let env = TestEnv::new();
    env.succeed(&["new", "shots.toml", "--film"]);
    let text = String::from_utf8(env.read("shots.toml")).unwrap();
    let quick = text.replace("1280x720", "160x90").replace("per_second = 30", "per_second = 1");
    env.write("shots.toml", &quick);
    let ended = env.succeed(&of_run("film", &["--shots", "shots.toml", "--out", "frames/", "--json"]));
    let told: serde_json::Value = serde_json::from_str(&ended.stdout).unwrap();
    assert_eq!((told["frames"].as_u64(), told["width"].as_u64()), (Some(12), Some(160)));

    let refused = |from: &str, to: &str, words: &[&str]| {
        let wrong = crate::support::replace_once(&quick, from, to);
        let line = 1 + wrong.lines().position(|line| line.contains(to)).unwrap();
        env.write("wrong.toml", &wrong);
        let place = format!("wrong.toml, line {line}:");
        let arguments = of_run("film", &["--shots", "wrong.toml", "--out", "clip.mp4"]);
        env.refuse(&arguments, 2, &[&[place.as_str()], words].concat());
        assert!(!env.path("clip.mp4").exists());
    };
    refused("caption", "captoin", &["captoin", "caption"]);
    refused("grains = \"ghosted\"", "grains = \"ghostly\"", &["did you mean \"ghosted\"", "hidden"]);
    refused("rank = 1", "rank = 99", &["99", "this run has"]);
    refused("\"largest principal stress\"", "\"largest stress\"", &["smallest principal stress"]);
}

#[test]
fn a_folder_that_is_no_run() {
    let env = TestEnv::new();
    std::fs::create_dir(env.path("empty")).unwrap();
    for (folder, words) in [("nowhere", "no such folder"), ("empty", "no scene.toml")] {
        env.refuse(&["still", folder, "--out", "p.png"], 2, &[folder, "is no run folder", words]);
        env.refuse(&["film", folder, "--out", "c.mp4"], 2, &[folder, "is no run folder", words]);
    }
    env.refuse(&of_run("film", &["--out", "clip.avi"]), 2, &["clip.avi", ".mp4", ".gif"]);
}

/// A copy of the run whose states can be spoilt.
fn copied_run(env: &TestEnv) {
    std::fs::create_dir_all(env.path("copy/states")).unwrap();
    for part in ["", "states"] {
        for entry in std::fs::read_dir(run_folder().join(part)).unwrap() {
            let entry = entry.unwrap();
            if entry.file_type().unwrap().is_file() {
                std::fs::copy(entry.path(), env.path("copy").join(part).join(entry.file_name())).unwrap();
            }
        }
    }
}

#[test]
fn a_half_written_state_is_left_out_and_told() {
    let env = TestEnv::new();
    copied_run(&env);
    let state = env.read("copy/states/0007.state");
    std::fs::write(env.path("copy/states/0007.state"), &state[..state.len() / 2]).unwrap();
    let ended = env.succeed(&["still", "copy", "--out", "p.png", "--size", "160x90"]);
    assert!(ended.stderr.contains("showing increments up to 6"), "{}", ended.stderr);
    assert!(ended.stderr.contains("0007.state"), "{}", ended.stderr);

    std::fs::write(env.path("copy/states/0000.state"), b"").unwrap();
    env.refuse(&["still", "copy", "--out", "q.png"], 2, &["0000.state", "incomplete or was altered"]);
}

#[test]
fn a_state_in_a_newer_form_is_refused() {
    let env = TestEnv::new();
    copied_run(&env);
    let mut state = env.read("copy/states/0000.state");
    let known = state[8];
    state[8] += 1;
    std::fs::write(env.path("copy/states/0000.state"), state).unwrap();
    let (newer, known) = (format!("format {}", known + 1), format!("knows {known}"));
    env.refuse(&["still", "copy", "--out", "p.png"], 2, &["0000.state", &newer, &known]);
}

#[test]
fn a_stopped_run_can_be_looked_at_and_finished() {
    let env = TestEnv::new();
    copied_run(&env);
    let summary = env.read("copy/summary.json");
    for name in ["summary.json", "states/0009.state", "states/0010.state"] {
        std::fs::remove_file(env.path("copy").join(name)).unwrap();
    }
    let ended = env.succeed(&["still", "copy", "--out", "p.png", "--size", "160x90"]);
    assert!(ended.stderr.contains("stands at increment 8 of 10"), "{}", ended.stderr);
    env.succeed(&["run", "copy/scene.toml", "--out", "copy", "--pack", "1"]);
    assert!(env.read("copy/summary.json") == summary, "the finished run differs");
}

#[test]
fn a_window_without_a_display_says_what_to_do() {
    let env = TestEnv::new();
    let output = env
        .command(&of_run("view", &[]))
        .env_remove("DISPLAY")
        .env_remove("WAYLAND_DISPLAY")
        .output()
        .unwrap();
    let ended = crate::support::ended(output);
    assert_eq!(ended.code, 2, "{}", ended.stderr);
    assert!(ended.stderr.contains("display"), "{}", ended.stderr);
    assert!(!ended.stderr.contains("panicked"), "{}", ended.stderr);
}

#[test]
fn the_readme_has_its_pictures() {
    let text = std::fs::read_to_string(root().join("README.md")).unwrap();
    let pictures: Vec<&str> = text
        .split("](")
        .skip(1)
        .filter_map(|rest| rest.split(')').next())
        .filter(|link| link.starts_with("assets/"))
        .collect();
    assert!(pictures.len() >= 3, "{pictures:?}");
    let mut bytes = 0;
    for picture in pictures {
        bytes += std::fs::metadata(root().join(picture)).expect(picture).len();
    }
    assert!(bytes < 4_000_000, "{bytes} bytes of pictures");
}
