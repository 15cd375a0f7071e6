//! Drawing by another program: requests go to its standard input, pictures come from its
//! standard output, each behind its length in bytes (u64, little-endian).

use super::renderer::{RenderError, Renderer};
use bedswell_painter::{Camera, Drawing, Image};
use std::io::{self, BufReader, BufWriter, Read, Write};
use std::process::{Child, ChildStdin, ChildStdout, Command, Stdio};

/// A renderer that runs as a program of its own, so that who does not need it does not
/// build it.
pub struct OtherProgram {
    child: Child,
    requests: Option<BufWriter<ChildStdin>>,
    answers: BufReader<ChildStdout>,
}

impl OtherProgram {
    /// Starts a program that calls [`serve`].
    ///
    /// # Errors
    /// When it cannot be started.
    pub fn start(command: &mut Command) -> Result<Self, RenderError> {
        let gone = |error: io::Error| RenderError(format!("the drawing program did not start: {error}"));
        let mut child = command.stdin(Stdio::piped()).stdout(Stdio::piped()).spawn().map_err(gone)?;
        let (Some(requests), Some(answers)) = (child.stdin.take(), child.stdout.take()) else {
            return Err(gone(io::ErrorKind::BrokenPipe.into()));
        };
        Ok(Self { child, requests: Some(BufWriter::new(requests)), answers: BufReader::new(answers) })
    }

    fn ask(&mut self, request: &[u8]) -> io::Result<Vec<u8>> {
        let requests = self.requests.as_mut().ok_or(io::ErrorKind::BrokenPipe)?;
        write_block(requests, request)?;
        read_block(&mut self.answers)?.ok_or_else(|| io::ErrorKind::UnexpectedEof.into())
    }
}

impl Renderer for OtherProgram {
    fn render(&mut self, drawing: &Drawing, camera: &Camera) -> Result<Image, RenderError> {
        let request =
            postcard::to_stdvec(&(drawing, camera)).map_err(|error| RenderError(error.to_string()))?;
        // The program has said on the error stream why it ended.
        let gone = |_| RenderError("the drawing program ended before its picture was done".into());
        let answer = self.ask(&request).map_err(gone)?;
        let answer: Result<Vec<u8>, String> =
            postcard::from_bytes(&answer).map_err(|error| RenderError(error.to_string()))?;
        Ok(Image { size: camera.size, pixels: answer.map_err(RenderError)? })
    }
}

impl Drop for OtherProgram {
    fn drop(&mut self) {
        // The end of its input ends the program.
        self.requests = None;
        let _ = self.child.wait();
    }
}

/// Answers requests until there are no more.
///
/// # Errors
/// When a request cannot be read or an answer not be written.
pub fn serve(renderer: &mut dyn Renderer, input: &mut dyn Read, output: &mut dyn Write) -> io::Result<()> {
    while let Some(request) = read_block(input)? {
        let (drawing, camera): (Drawing, Camera) = postcard::from_bytes(&request)
            .map_err(|error| io::Error::new(io::ErrorKind::InvalidData, error))?;
        let answer = renderer.render(&drawing, &camera).map(|image| image.pixels).map_err(|error| error.0);
        write_block(output, &postcard::to_stdvec(&answer).map_err(io::Error::other)?)?;
    }
    Ok(())
}

fn write_block(to: &mut (impl Write + ?Sized), block: &[u8]) -> io::Result<()> {
    to.write_all(&(block.len() as u64).to_le_bytes())?;
    to.write_all(block)?;
    to.flush()
}

/// The next block; `None` at the end.
fn read_block(from: &mut (impl Read + ?Sized)) -> io::Result<Option<Vec<u8>>> {
    let mut length = [0; 8];
    match from.read_exact(&mut length) {
        Err(error) if error.kind() == io::ErrorKind::UnexpectedEof => return Ok(None),
        other => other?,
    }
    let length = u64::from_le_bytes(length);
    let mut block = Vec::new();
    from.take(length).read_to_end(&mut block)?;
    if block.len() as u64 == length { Ok(Some(block)) } else { Err(io::ErrorKind::UnexpectedEof.into()) }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::show::Painter;
    use bedswell_painter::{Ball, Colour, Point, Pose, Size};

    #[test]
    fn requests_are_answered_in_turn_until_the_input_ends() {
        let pose = Pose { target: [0.0; 3], azimuth: 20.0, elevation: 10.0, distance: 8.0 };
        let camera = Camera::new(&pose, Size { width: 40, height: 30 });
        let ball = Ball { centre: Point::zeros(), radius: 1.0, colour: Colour::new(200, 100, 50) };
        let drawing = Drawing { balls: vec![ball], ..Drawing::default() };
        let request = postcard::to_stdvec(&(&drawing, &camera)).unwrap();
        let mut input = Vec::new();
        for _ in 0..2 {
            write_block(&mut input, &request).unwrap();
        }
        let mut output = Vec::new();
        serve(&mut Painter, &mut &input[..], &mut output).unwrap();
        let mut answers = &output[..];
        let expected = Painter.render(&drawing, &camera).unwrap();
        for _ in 0..2 {
            let answer = read_block(&mut answers).unwrap().unwrap();
            let pixels: Result<Vec<u8>, String> = postcard::from_bytes(&answer).unwrap();
            assert!(pixels.unwrap() == expected.pixels);
        }
        assert!(read_block(&mut answers).unwrap().is_none());
    }
}
