//! Films are read back and compared with the frames they were made of.

mod support;

use bedswell_film::{Clip, ClipError, Format};
use bedswell_painter::{Image, Size};
use std::path::Path;
use support::{CARD, Mp4File, composed_gif, frame, left_in, write};

const SIZE: Size = Size { width: 320, height: 180 };

#[test]
fn an_mp4_has_every_frame_the_right_length_and_its_index_first() {
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("film.mp4");
    write(&path, SIZE, 25, 60);
    let file = Mp4File::read(&path);
    assert_eq!(file.boxes, ["ftyp", "moov", "mdat"]);
    assert_eq!((file.frames, file.size), (60, SIZE));
    assert!((file.seconds - 2.4).abs() < 1e-3, "{} s", file.seconds);
    assert_eq!(left_in(folder.path()), ["film.mp4"]);
}

#[test]
fn colours_of_an_mp4_are_those_painted() {
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("film.mp4");
    write(&path, SIZE, 30, 20);
    let decoded = Mp4File::read(&path).decoded();
    assert_eq!(decoded.len(), 20);
    for (number, decoded) in decoded.iter().enumerate() {
        for (patch, colour) in CARD.iter().enumerate() {
            let seen = support::patch_mean(decoded, patch);
            for channel in 0..3 {
                let apart = (seen[channel] - f64::from(colour[channel])).abs();
                assert!(apart < 3.0, "frame {number}: {seen:?} for {colour:?}");
            }
        }
    }
}

#[test]
fn an_odd_size_loses_a_row_and_a_column() {
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("film.mp4");
    let odd = Size { width: 321, height: 181 };
    assert_eq!(Clip::create(&path, odd, 30).unwrap().stored().size, SIZE);
    write(&path, odd, 30, 3);
    assert_eq!(Mp4File::read(&path).size, SIZE);
}

#[test]
fn a_gif_keeps_the_time_and_comes_close_in_colour() {
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("film.gif");
    write(&path, SIZE, 30, 47);
    let (frames, hundredths) = composed_gif(&path);
    assert_eq!((frames.len(), hundredths), (24, 157), "every second of 47 frames, which last 1.567 s");
    for (kept, shown) in frames.iter().enumerate() {
        let given = frame(SIZE, 2 * kept as u32);
        let apart: Vec<u8> = shown
            .iter()
            .zip(given.pixels.as_chunks::<4>().0)
            .flat_map(|(shown, given)| (0..3).map(|c| shown[c].abs_diff(given[c])))
            .collect();
        let mean = apart.iter().map(|&apart| f64::from(apart)).sum::<f64>() / apart.len() as f64;
        assert!(mean < 1.5, "frame {kept} is off by {mean} levels on average");
        assert!(apart.iter().all(|&apart| apart < 40), "frame {kept} is off by {:?}", apart.iter().max());
    }
}

#[test]
fn a_gif_is_scaled_and_a_frame_that_stays_costs_next_to_nothing() {
    let folder = tempfile::tempdir().unwrap();
    let (once, long) = (folder.path().join("once.gif"), folder.path().join("long.gif"));
    let large = Size { width: 1280, height: 720 };
    let still = frame(large, 0);
    for (path, frames) in [(&once, 2), (&long, 60)] {
        let mut clip = Clip::create(path, large, 30).unwrap();
        assert_eq!(clip.stored().size, Size { width: 640, height: 360 });
        (0..frames).for_each(|_| clip.push(still.clone()).unwrap());
        clip.finish().unwrap();
    }
    let size = |path| std::fs::metadata(path).unwrap().len();
    assert!(size(&long) < size(&once) + 29 * 40, "{} bytes grow to {}", size(&once), size(&long));
}

#[test]
fn frames_are_kept_to_the_bit_and_replace_those_of_an_earlier_film() {
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("frames");
    write(&path, SIZE, 30, 12);
    write(&path, SIZE, 30, 3);
    assert_eq!(left_in(folder.path()), ["frames"]);
    assert_eq!(left_in(&path), ["frame-0001.png", "frame-0002.png", "frame-0003.png"]);
    let file = std::fs::File::open(path.join("frame-0003.png")).unwrap();
    let mut reader = png::Decoder::new(std::io::BufReader::new(file)).read_info().unwrap();
    let mut pixels = vec![0; reader.output_buffer_size().unwrap()];
    reader.next_frame(&mut pixels).unwrap();
    let given = frame(SIZE, 2);
    let rgb: Vec<u8> = given.pixels.as_chunks::<4>().0.iter().flat_map(|&[r, g, b, _]| [r, g, b]).collect();
    assert_eq!(pixels, rgb);
}

#[test]
fn a_folder_with_other_things_is_left_alone() {
    let folder = tempfile::tempdir().unwrap();
    std::fs::write(folder.path().join("thesis.tex"), "precious").unwrap();
    let refused = Clip::create(folder.path(), SIZE, 30).err().unwrap();
    assert!(matches!(&refused, ClipError::Occupied { found, .. } if found == "thesis.tex"), "{refused}");
    // What comes while the film is painted is safe too.
    let path = folder.path().join("frames");
    let mut clip = Clip::create(&path, SIZE, 30).unwrap();
    clip.push(frame(SIZE, 0)).unwrap();
    std::fs::create_dir(&path).unwrap();
    std::fs::write(path.join("notes.txt"), "precious").unwrap();
    assert!(matches!(clip.finish(), Err(ClipError::Occupied { .. })));
    assert_eq!(left_in(&path), ["notes.txt"]);
    assert_eq!(left_in(folder.path()), ["frames", "thesis.tex"]);
}

#[test]
fn a_film_that_is_given_up_leaves_the_earlier_one() {
    let folder = tempfile::tempdir().unwrap();
    for name in ["film.mp4", "film.gif", "frames"] {
        let path = folder.path().join(name);
        write(&path, SIZE, 30, 2);
        let mut clip = Clip::create(&path, SIZE, 30).unwrap();
        clip.push(frame(SIZE, 0)).unwrap();
        drop(clip);
        assert!(path.exists(), "{name} is gone");
        let empty = Clip::create(&path, SIZE, 30).unwrap().finish().unwrap_err();
        assert!(matches!(empty, ClipError::Empty { .. }), "{empty}");
    }
    assert_eq!(left_in(folder.path()), ["film.gif", "film.mp4", "frames"]);
}

#[test]
#[cfg(target_os = "linux")]
fn a_full_disk_is_told_with_the_name_and_leaves_nothing() {
    let folder = tempfile::tempdir().unwrap();
    for name in ["film.mp4", "film.gif"] {
        let path = folder.path().join(name);
        std::os::unix::fs::symlink("/dev/full", folder.path().join(format!("{name}.part"))).unwrap();
        let mut clip = Clip::create(&path, SIZE, 30).unwrap();
        (0..8).for_each(|number| clip.push(frame(SIZE, number)).unwrap());
        let told = clip.finish().unwrap_err().to_string();
        assert!(told.starts_with(&format!("cannot write {}: No space left", path.display())), "{told}");
    }
    assert_eq!(left_in(folder.path()), [""; 0]);
}

#[test]
fn a_failed_frame_is_told_once_and_the_film_is_over() {
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("frames");
    let mut clip = Clip::create(&path, SIZE, 30).unwrap();
    std::fs::remove_dir(folder.path().join("frames.part")).unwrap();
    let mut told = (0..20).filter_map(|number| clip.push(frame(SIZE, number)).err());
    let first = told.next().unwrap().to_string();
    assert!(first.starts_with(&format!("cannot write {}", path.join("frame-0001.png").display())), "{first}");
    assert!(told.all(|later| matches!(later, ClipError::GivenUp { .. })));
    assert!(matches!(clip.finish(), Err(ClipError::GivenUp { .. })));
    assert_eq!(left_in(folder.path()), [""; 0]);
}

#[test]
fn what_cannot_be_is_refused_at_the_start() {
    let folder = tempfile::tempdir().unwrap();
    let at = |name: &str| folder.path().join(name);
    let refusal = |path: &Path, width, height, rate| {
        Clip::create(path, Size { width, height }, rate).err().unwrap().to_string()
    };
    assert!(refusal(&at("film.avi"), 320, 180, 30).contains(".mp4 (H.264), .gif, or a folder"));
    assert!(
        refusal(&at("film.mp4"), 320, 8, 30)
            .contains("320x8 pixels do not fit this format; it takes 16 to 3840")
    );
    assert!(
        refusal(&at("film.mp4"), 320, 180, 0)
            .contains("0 frames per second cannot be written; choose 1 to 60")
    );
    assert!(refusal(&at("none/film.mp4"), 320, 180, 30).contains("none/film.mp4: No such file"));
    let mut clip = Clip::create(&at("film.mp4"), SIZE, 30).unwrap();
    let uneven = clip.push(frame(Size { width: 2, height: 2 }, 0)).unwrap_err().to_string();
    assert!(uneven.contains("a frame of 2x2 pixels in a film of 320x180"), "{uneven}");
}

#[test]
fn the_same_frames_make_the_same_bytes() {
    let folder = tempfile::tempdir().unwrap();
    for name in ["film.mp4", "film.gif"] {
        let path = folder.path().join(name);
        let bytes = || {
            write(&path, SIZE, 30, 10);
            std::fs::read(&path).unwrap()
        };
        assert!(bytes() == bytes(), "{name} differs");
    }
}

#[test]
fn clear_pixels_are_white() {
    let folder = tempfile::tempdir().unwrap();
    let path = folder.path().join("film.gif");
    let mut clip = Clip::create(&path, SIZE, 15).unwrap();
    let pixels = vec![0; 4 * 320 * 180];
    clip.push(Image { size: SIZE, pixels }).unwrap();
    clip.finish().unwrap();
    assert!(composed_gif(&path).0[0].iter().all(|pixel| *pixel == [255; 3]));
    assert_eq!(Format::of(&path).unwrap(), Format::Gif);
}
