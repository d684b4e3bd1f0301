//! Reading a WAV file block by block.

use std::fs::File;
use std::io::{self, Read, Seek, SeekFrom};
use std::path::Path;

use waveadapter::header::read_wav_header;
use waveadapter::{FmtChunk, WavError as HeaderError, WavParams};

use super::{SampleFormat, WavError, WavSpec, shown};

/// `WAVE_FORMAT_PCM`, `WAVE_FORMAT_IEEE_FLOAT` (the registered format tags of RFC 2361, appendix A).
const TAG_PCM: u16 = 1;
const TAG_FLOAT: u16 = 3;

/// A WAV file being read from its start to its end.
#[derive(Debug)]
pub struct WavReader {
    file: File,
    name: String,
    spec: WavSpec,
    container: usize,
    frames: u64,
    done: u64,
    bytes: Vec<u8>,
}

impl WavReader {
    /// Opens the file at `path`; `-` is standard input. Input that cannot be sought in (a pipe) is first copied to an unnamed
    /// temporary file, so memory stays constant.
    ///
    /// # Errors
    /// Whatever makes the file unfit is found here: see [`WavError`]. Only samples that are no finite
    /// numbers, and a machine that fails, are found later.
    pub fn open(path: impl AsRef<Path>) -> Result<Self, WavError> {
        let path = path.as_ref();
        let name = shown(path, "standard input");
        if path.as_os_str() == "-" {
            let file = spool(io::stdin().lock()).map_err(|e| WavError::io(&name, "read", e))?;
            return Self::from_file(file, name);
        }
        let file = File::open(path).map_err(|e| match e.kind() {
            io::ErrorKind::NotFound => WavError::Missing { name: name.clone() },
            _ => WavError::io(&name, "opened", e),
        })?;
        let kind = file
            .metadata()
            .map_err(|e| WavError::io(&name, "opened", e))?
            .file_type();
        if kind.is_dir() {
            let reason = "it is a folder".to_owned();
            return Err(WavError::NotWav { name, reason });
        }
        let file = if kind.is_file() {
            file
        } else {
            spool(file).map_err(|e| WavError::io(&name, "read", e))?
        };
        Self::from_file(file, name)
    }

    fn from_file(mut file: File, name: String) -> Result<Self, WavError> {
        let params = read_wav_header(&mut file).map_err(|e| match e {
            HeaderError::Io(e) if e.kind() != io::ErrorKind::UnexpectedEof => {
                WavError::io(&name, "read", e)
            }
            HeaderError::Io(_) => WavError::NotWav {
                name: name.clone(),
                reason: "it ends inside its header".to_owned(),
            },
            HeaderError::InvalidHeader(reason)
            | HeaderError::UnsupportedFormat(reason)
            | HeaderError::InvalidSpec(reason) => WavError::NotWav {
                name: name.clone(),
                reason,
            },
        })?;
        let (format, container) = stored_as(&params.fmt).ok_or_else(|| WavError::Format {
            name: name.clone(),
            found: describe(&params.fmt),
        })?;
        let spec = WavSpec {
            rate: params.fmt.sample_rate,
            channels: params.fmt.channels,
            format,
        };
        spec.check(&name)?;
        let frame = u64::from(spec.channels) * container as u64;
        let end = file
            .seek(SeekFrom::End(0))
            .map_err(|e| WavError::io(&name, "read", e))?;
        let frames = count_frames(&params, end, frame, &name)?;
        file.seek(SeekFrom::Start(params.data_offset))
            .map_err(|e| WavError::io(&name, "read", e))?;
        Ok(WavReader {
            file,
            name,
            spec,
            container,
            frames,
            done: 0,
            bytes: Vec::new(),
        })
    }

    /// Rate, channels and sample format.
    pub fn spec(&self) -> WavSpec {
        self.spec
    }

    /// Length in frames (a frame is one sample of each channel).
    pub fn frames(&self) -> u64 {
        self.frames
    }

    /// Reads up to `max_frames` frames: each channel's vector is cleared and filled with samples (full scale is 1).
    /// Returns how many frames came; 0 at the end.
    ///
    /// # Panics
    /// If `channels` does not hold one vector per channel of the file: a fault of the caller, not of the input.
    pub fn read(
        &mut self,
        channels: &mut [Vec<f64>],
        max_frames: usize,
    ) -> Result<usize, WavError> {
        let count = usize::from(self.spec.channels);
        assert_eq!(channels.len(), count, "one vector per channel");
        let left = self.frames - self.done;
        let frames = left.min(max_frames as u64) as usize;
        let frame = count * self.container;
        self.bytes.resize(frames * frame, 0);
        self.file.read_exact(&mut self.bytes).map_err(|e| {
            // The length was checked on opening: the file shrank meanwhile.
            WavError::io(&self.name, "read", e)
        })?;
        for (index, samples) in channels.iter_mut().enumerate() {
            samples.clear();
            decode(
                &self.bytes[(index * self.container).min(self.bytes.len())..],
                frame,
                self.container,
                self.spec.format,
                samples,
            );
            if let Some(at) = samples.iter().position(|x| !x.is_finite()) {
                return Err(WavError::NotFinite {
                    name: self.name.clone(),
                    frame: self.done + at as u64,
                    channel: index + 1,
                    value: samples[at],
                });
            }
        }
        self.done += frames as u64;
        Ok(frames)
    }
}

/// Copies a stream into a temporary file that has no name and goes away with its handle.
fn spool(mut from: impl Read) -> io::Result<File> {
    let mut file = tempfile::tempfile()?;
    io::copy(&mut from, &mut file)?;
    Ok(file)
}

/// The sample format and the bytes each sample takes, or `None` where it is not read.
fn stored_as(fmt: &FmtChunk) -> Option<(SampleFormat, usize)> {
    let channels = fmt.channels.max(1);
    if !fmt.block_align.is_multiple_of(channels) {
        return None;
    }
    let container = fmt.block_align / channels;
    // The first two bytes of an extensible header's sub-format are the plain format tag.
    let tag = match (fmt.is_extensible(), fmt.sub_format()) {
        (true, Some(guid)) => u16::from_le_bytes([guid[0], guid[1]]),
        _ => fmt.format_code,
    };
    let bits = valid_bits(fmt);
    // Fewer valid bits than the container holds stand at its top, zeros below (Microsoft, WAVEFORMATEXTENSIBLE):
    // the container's own scale is right for them.
    let format = match (tag, container, bits) {
        (TAG_PCM, 1, 1..=8) => SampleFormat::Int8,
        (TAG_PCM, 2, 9..=16) => SampleFormat::Int16,
        (TAG_PCM, 3, 17..=24) | (TAG_PCM, 4, 24) => SampleFormat::Int24,
        (TAG_PCM, 4, 25..=32) => SampleFormat::Int32,
        (TAG_FLOAT, 4, 32) => SampleFormat::Float32,
        (TAG_FLOAT, 8, 64) => SampleFormat::Float64,
        _ => return None,
    };
    Some((format, usize::from(container)))
}

/// Bits that carry the sample; an extensible header that leaves the field at 0 means all of them.
fn valid_bits(fmt: &FmtChunk) -> u16 {
    match fmt.valid_bits_per_sample() {
        Some(bits) if bits > 0 => bits,
        _ => fmt.bits_per_sample,
    }
}

fn describe(fmt: &FmtChunk) -> String {
    format!(
        "format tag {:#06x}, {} bits in frames of {} bytes",
        fmt.format_code,
        valid_bits(fmt),
        fmt.block_align
    )
}

/// The frames the file holds, after checking that what the header promises is there. `end` is the file's length, bytes.
fn count_frames(params: &WavParams, end: u64, frame: u64, name: &str) -> Result<u64, WavError> {
    let name = name.to_owned();
    let held = end.saturating_sub(params.data_offset);
    let bytes = if params.length_is_unknown() {
        // Written to a pipe: the audio runs to the end, and an odd run of it may be followed by its pad byte.
        match held % frame {
            1 if (held - 1) % 2 == 1 => held - 1,
            _ => held,
        }
    } else if params.data_length > held {
        return Err(WavError::Truncated {
            name,
            promised: params.data_length / frame,
            got: held / frame,
            end,
        });
    } else {
        params.data_length
    };
    match bytes {
        0 => Err(WavError::Empty { name }),
        _ if bytes % frame != 0 => Err(WavError::PartialFrame { name, bytes, frame }),
        _ => Ok(bytes / frame),
    }
}

/// Appends every `stride`-th sample of `bytes` (the first at its start) to `out`, full scale 1.
fn decode(bytes: &[u8], stride: usize, container: usize, format: SampleFormat, out: &mut Vec<f64>) {
    const INT32: f64 = 1.0 / 2_147_483_648.0;
    let samples = bytes.chunks(stride).map(|frame| &frame[..container]);
    match (format, container) {
        (SampleFormat::Int8, _) => out.extend(samples.map(|b| (f64::from(b[0]) - 128.0) / 128.0)),
        (SampleFormat::Float32, _) => {
            out.extend(samples.map(|b| f64::from(f32::from_le_bytes([b[0], b[1], b[2], b[3]]))));
        }
        (SampleFormat::Float64, _) => out.extend(
            samples.map(|b| f64::from_le_bytes([b[0], b[1], b[2], b[3], b[4], b[5], b[6], b[7]])),
        ),
        // Every other integer is put at the top of 32 bits, which keeps its share of full scale.
        (_, 2) => {
            out.extend(samples.map(|b| f64::from(i32::from_le_bytes([0, 0, b[0], b[1]])) * INT32))
        }
        (_, 3) => out
            .extend(samples.map(|b| f64::from(i32::from_le_bytes([0, b[0], b[1], b[2]])) * INT32)),
        (_, _) => out.extend(
            samples.map(|b| f64::from(i32::from_le_bytes([b[0], b[1], b[2], b[3]])) * INT32),
        ),
    }
}
