use super::film::Sink;
use super::yuv::Yuv;
use super::{ClipError, Stored};
use crate::part::Part;
use bedswell_painter::Image;
use muxide::api::{Muxer, MuxerConfig, VideoCodec};
use openh264::OpenH264API;
use openh264::encoder::{
    BitRate, Encoder, EncoderConfig, FrameRate, FrameType, IntraFramePeriod, QpRange, RateControlMode,
    TransferCharacteristics, VuiConfig,
};
use std::io::Write;

/// H.264 in MP4, of even quality, with the index before the pictures so that it plays
/// while it loads.
pub(super) struct Mp4 {
    part: Part,
    frames_per_second: u32,
    encoder: Encoder,
    yuv: Yuv,
    muxer: Muxer<Vec<u8>>,
    packet: Vec<u8>,
    frames: u32,
}

/// Step of the quantiser, 0 (finest) to 51: text and thin lines stay clean.
const QUANTISER: u8 = 27;
/// Seconds between pictures that stand on their own, to which a player can jump.
const JUMP: u32 = 2;

impl Mp4 {
    pub(super) fn create(path: &std::path::Path, stored: Stored) -> Result<Self, ClipError> {
        let part = Part::create(path).map_err(ClipError::write(path))?;
        let rate = stored.given_per_second;
        let config = EncoderConfig::new()
            // The only mode that keeps one chosen step of the quantiser for all frames.
            .rate_control_mode(RateControlMode::Bufferbased)
            .qp(QpRange::new(QUANTISER, QUANTISER))
            .bitrate(BitRate::from_bps(50_000_000))
            .max_frame_rate(FrameRate::from_hz(rate as f32))
            .intra_frame_period(IntraFramePeriod::from_num_frames(JUMP * rate))
            .skip_frames(false)
            .adaptive_quantization(false)
            .background_detection(false)
            .scene_change_detect(false)
            .num_threads(1)
            .vui(VuiConfig::bt709().transfer_characteristics(TransferCharacteristics::Srgb));
        let encoder = Encoder::with_api_config(OpenH264API::from_source(), config)
            .map_err(|error| ClipError::encoder(path, error))?;
        let muxer = MuxerConfig::new(stored.size.width, stored.size.height, f64::from(rate))
            .with_fast_start(true)
            .into_builder(Vec::new(), VideoCodec::H264)
            .build()
            .map_err(|error| ClipError::encoder(path, error))?;
        let yuv = Yuv::new(stored.size);
        Ok(Self { part, frames_per_second: rate, encoder, yuv, muxer, packet: Vec::new(), frames: 0 })
    }
}

impl Sink for Mp4 {
    fn frame(&mut self, frame: &Image) -> Result<(), ClipError> {
        let path = self.part.path();
        self.yuv.fill(frame);
        let encoded = self.encoder.encode(&self.yuv).map_err(|error| ClipError::encoder(path, error))?;
        self.packet.clear();
        encoded.write_vec(&mut self.packet);
        let stands_alone = encoded.frame_type() == FrameType::IDR;
        let time = f64::from(self.frames) / f64::from(self.frames_per_second);
        self.muxer
            .write_video(time, &self.packet, stands_alone)
            .map_err(|error| ClipError::encoder(path, error))?;
        self.frames += 1;
        Ok(())
    }

    fn finish(mut self: Box<Self>) -> Result<(), ClipError> {
        let path = self.part.path().to_owned();
        match self.frames {
            0 => return Err(ClipError::Empty { path }),
            _ => self.muxer.finish_in_place().map_err(|error| ClipError::encoder(&path, error))?,
        }
        let Self { mut part, muxer, .. } = *self;
        part.write_all(&muxer.into_writer()).and_then(|()| part.commit()).map_err(ClipError::write(&path))
    }
}
