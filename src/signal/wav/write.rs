//! Writing a WAV file that appears whole or not at all.

use std::fs::File;
use std::io::{self, BufWriter, Seek, SeekFrom, Write};
use std::path::Path;

use rand::RngExt;
use rand::rngs::Xoshiro256PlusPlus;

use super::{SampleFormat, WavError, WavSpec, shown};
use crate::signal::noise::stream;
use crate::whole_file::{Refusal, WholeFile};

/// A WAV file being written. It is built in a temporary file beside its target (or, for standard output, in an unnamed one) and
/// takes its name in [`WavWriter::finish`]; dropped before that, nothing appears.
///
/// Integer samples get triangular dither of ±1 step, the sum of two uniform draws (Lipshitz, Wannamaker, Vanderkooy 1992), from a
/// stream of their own, one per channel, and are clipped to the range. Float samples are written as they are.
pub struct WavWriter {
    inner: waveadapter::WavWriter<BufWriter<File>>,
    place: Place,
    name: String,
    spec: WavSpec,
    dither: Vec<Xoshiro256PlusPlus>,
    frames: u64,
    clipped: u64,
    bytes: Vec<u8>,
}

enum Place {
    File(WholeFile),
    StandardOutput,
}

impl WavWriter {
    /// Starts a file for `path`; `-` is standard output. The same `dither_seed` gives the same dither.
    ///
    /// # Errors
    /// An existing target that is no regular file, a folder that is missing, a rate or channel count out of range, or a machine that fails.
    pub fn create(
        path: impl AsRef<Path>,
        spec: WavSpec,
        dither_seed: u64,
    ) -> Result<Self, WavError> {
        let path = path.as_ref();
        let name = shown(path, "standard output");
        spec.check(&name)?;
        let failed = |e| WavError::io(&name, "written", e);
        let (file, place) = if path.as_os_str() == "-" {
            (tempfile::tempfile().map_err(failed)?, Place::StandardOutput)
        } else {
            let (whole, file) = WholeFile::create(path).map_err(|e| match e {
                Refusal::Path(reason) => WavError::Output {
                    name: name.clone(),
                    reason,
                },
                Refusal::Machine(e) => failed(e),
            })?;
            (file, Place::File(whole))
        };
        let header = waveadapter::WavSpec::new(
            usize::from(spec.channels),
            spec.rate as usize,
            container(spec.format),
        );
        let inner = waveadapter::WavWriter::new(BufWriter::new(file), header)
            .map_err(|e| WavError::io(&name, "written", plain(e)))?;
        let dither = (0..usize::from(spec.channels))
            .map(|channel| stream(dither_seed, channel, "output", "dither"))
            .collect();
        Ok(WavWriter {
            inner,
            place,
            name,
            spec,
            dither,
            frames: 0,
            clipped: 0,
            bytes: Vec::new(),
        })
    }

    /// Writes one block: as many samples of each channel, full scale 1.
    ///
    /// # Errors
    /// A sample that is no finite number, a file that would pass 4 GiB (found before it happens), or a machine that fails.
    ///
    /// # Panics
    /// If the channels differ in length or are not as many as the file's: a fault of the caller, not of the input.
    pub fn write(&mut self, channels: &[&[f64]]) -> Result<(), WavError> {
        assert_eq!(channels.len(), usize::from(self.spec.channels));
        let frames = channels[0].len();
        assert!(channels.iter().all(|c| c.len() == frames));
        // One frame is kept back, so that a pad byte never passes the limit.
        let room = self.inner.remaining_frames().unwrap_or(0).saturating_sub(1);
        if frames > room {
            return Err(WavError::TooLong {
                name: self.name.clone(),
                frame: self.frames + room as u64,
            });
        }
        self.bytes.clear();
        for frame in 0..frames {
            for (index, samples) in channels.iter().enumerate() {
                let x = samples[frame];
                if !x.is_finite() || !(x as f32).is_finite() {
                    return Err(WavError::NotFinite {
                        name: self.name.clone(),
                        frame: self.frames + frame as u64,
                        channel: index + 1,
                        value: x,
                    });
                }
                self.clipped += u64::from(x.abs() >= 1.0);
                encode(
                    x,
                    self.spec.format,
                    &mut self.dither[index],
                    &mut self.bytes,
                );
            }
        }
        self.inner
            .write_raw_interleaved(&self.bytes)
            .map_err(|e| WavError::io(&self.name, "written", plain(e)))?;
        self.frames += frames as u64;
        Ok(())
    }

    /// Samples so far, over all channels, that were at or beyond full scale (magnitude 1 or more, before dither).
    pub fn clipped(&self) -> u64 {
        self.clipped
    }

    /// Frames so far.
    pub fn frames(&self) -> u64 {
        self.frames
    }

    /// Completes the header, brings the file to the disk and gives it its name in one step; or copies it to standard output,
    /// where a reader that has gone away is no error.
    pub fn finish(self) -> Result<(), WavError> {
        let WavWriter {
            inner, place, name, ..
        } = self;
        let failed = |e| WavError::io(&name, "written", e);
        let odd = inner.data_bytes() % 2 == 1;
        let mut file = inner
            .finalize()
            .map_err(|e| failed(plain(e)))?
            .into_inner()
            .map_err(|e| failed(e.into_error()))?;
        if odd {
            pad(&mut file).map_err(failed)?;
        }
        match place {
            Place::File(whole) => whole.finish(file).map_err(failed),
            Place::StandardOutput => {
                file.seek(SeekFrom::Start(0)).map_err(failed)?;
                let mut out = io::stdout().lock();
                match io::copy(&mut file, &mut out).and_then(|_| out.flush()) {
                    Err(e) if e.kind() != io::ErrorKind::BrokenPipe => Err(failed(e)),
                    _ => Ok(()),
                }
            }
        }
    }
}

/// Puts the pad byte after an odd run of data, which the library leaves out, and counts it in the length of the whole.
fn pad(file: &mut File) -> io::Result<()> {
    file.write_all(&[0])?;
    let length = file.stream_position()? - 8;
    file.seek(SeekFrom::Start(4))?;
    // The room kept below 4 GiB makes this fit.
    file.write_all(&(length as u32).to_le_bytes())
}

fn container(format: SampleFormat) -> waveadapter::SampleFormat {
    match format {
        SampleFormat::Int8 => waveadapter::SampleFormat::U8,
        SampleFormat::Int16 => waveadapter::SampleFormat::I16,
        SampleFormat::Int24 => waveadapter::SampleFormat::I24_3,
        SampleFormat::Int32 => waveadapter::SampleFormat::I32,
        SampleFormat::Float32 => waveadapter::SampleFormat::F32,
        SampleFormat::Float64 => waveadapter::SampleFormat::F64,
    }
}

/// The library's error as an I/O error: the header is valid and the size is checked, so nothing else is left.
fn plain(error: waveadapter::WavError) -> io::Error {
    match error {
        waveadapter::WavError::Io(e) => e,
        other => io::Error::other(other),
    }
}

fn encode(x: f64, format: SampleFormat, dither: &mut Xoshiro256PlusPlus, out: &mut Vec<u8>) {
    match format {
        SampleFormat::Float32 => out.extend_from_slice(&(x as f32).to_le_bytes()),
        SampleFormat::Float64 => out.extend_from_slice(&x.to_le_bytes()),
        _ => {
            let full = 2f64.powi(format.bits() as i32 - 1);
            let triangular = dither.random::<f64>() - dither.random::<f64>();
            let code = (x * full + triangular).round().clamp(-full, full - 1.0) as i32;
            match format {
                SampleFormat::Int8 => out.push((code + 128) as u8),
                SampleFormat::Int16 => out.extend_from_slice(&code.to_le_bytes()[..2]),
                SampleFormat::Int24 => out.extend_from_slice(&code.to_le_bytes()[..3]),
                _ => out.extend_from_slice(&code.to_le_bytes()),
            }
        }
    }
}
