//! WAV files in and out, in blocks, so that memory does not grow with the length of the file.
//!
//! The container (RIFF, RF64 and BW64 chunks, plain and extensible format headers) is the `waveadapter` library's
//! work both ways: it reads odd chunks with their pad byte, unknown lengths and 64-bit lengths, and it knows how much room is
//! left below 4 GiB before a block is written. Samples are turned into numbers here, so that the scale is one and stated:
//! an integer of b bits is divided by 2^(b−1), thus lies in −1 … 1 − 2^(1−b), and 8-bit files are offset by 128.

mod error;
mod read;
mod write;

pub use error::WavError;
pub use read::WavReader;
pub use write::WavWriter;

/// How a sample is stored.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum SampleFormat {
    /// 8 bits, unsigned in the file with its zero at 128.
    Int8,
    /// 16 bits, signed.
    Int16,
    /// 24 bits, signed, in three bytes or at the top of four.
    Int24,
    /// 32 bits, signed.
    Int32,
    /// IEEE 754 single precision.
    Float32,
    /// IEEE 754 double precision.
    Float64,
}

impl SampleFormat {
    /// Bits that carry the sample.
    pub fn bits(self) -> u32 {
        match self {
            SampleFormat::Int8 => 8,
            SampleFormat::Int16 => 16,
            SampleFormat::Int24 => 24,
            SampleFormat::Int32 | SampleFormat::Float32 => 32,
            SampleFormat::Float64 => 64,
        }
    }

    /// Whether samples are floating point: they are written without dither and never clipped.
    pub fn is_float(self) -> bool {
        matches!(self, SampleFormat::Float32 | SampleFormat::Float64)
    }
}

/// What a WAV file says of itself.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct WavSpec {
    /// Sample rate, Hz, 8000 … 192 000.
    pub rate: u32,
    /// Channels, 1 or 2.
    pub channels: u16,
    /// How each sample is stored.
    pub format: SampleFormat,
}

impl WavSpec {
    /// Lowest sample rate accepted, Hz.
    pub const MIN_RATE: u32 = 8_000;
    /// Highest sample rate accepted, Hz.
    pub const MAX_RATE: u32 = 192_000;

    /// Refuses a rate or a channel count that is out of range; `name` is the file's name for the message.
    fn check(&self, name: &str) -> Result<(), WavError> {
        if !(1..=2).contains(&self.channels) {
            return Err(WavError::Channels {
                name: name.to_owned(),
                channels: self.channels,
            });
        }
        if !(Self::MIN_RATE..=Self::MAX_RATE).contains(&self.rate) {
            return Err(WavError::Rate {
                name: name.to_owned(),
                rate: self.rate,
            });
        }
        Ok(())
    }
}

/// The name of a path in messages.
fn shown(path: &std::path::Path, dash: &str) -> String {
    if path.as_os_str() == "-" {
        dash.to_owned()
    } else {
        path.display().to_string()
    }
}
