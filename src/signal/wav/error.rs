//! What can go wrong with a WAV file.

use std::io;

use miette::Diagnostic;
use thiserror::Error;

/// A WAV file that cannot be read or written. `name` is the file's path, or standard input or output.
#[derive(Debug, Error, Diagnostic)]
#[non_exhaustive]
pub enum WavError {
    /// There is no such file.
    #[error("there is no file {name}")]
    #[diagnostic(help("give the path of a WAV file, or - for standard input"))]
    Missing { name: String },

    /// The bytes are not a WAV file.
    #[error("{name} is not a WAV file: {reason}")]
    #[diagnostic(help(
        "a RIFF or RF64 WAV file is accepted: 8, 16, 24 or 32-bit integer, 32 or 64-bit float"
    ))]
    NotWav { name: String, reason: String },

    /// The samples are stored in a way that is not read.
    #[error("{name} holds samples that are not read: {found}")]
    #[diagnostic(help("8, 16, 24 or 32-bit integer and 32 or 64-bit float samples are accepted"))]
    Format { name: String, found: String },

    /// Sample rate out of range.
    #[error("{name} has a sample rate of {rate} Hz")]
    #[diagnostic(help("8000 Hz to 192000 Hz are accepted"))]
    Rate { name: String, rate: u32 },

    /// Too many channels, or none.
    #[error("{name} has {channels} channels")]
    #[diagnostic(help("one channel (mono) or two (stereo) are accepted"))]
    Channels { name: String, channels: u16 },

    /// The header promises more audio than the file holds.
    #[error(
        "{name} is cut short: it promises {promised} frames and ends at byte {end}, after {got} whole frames"
    )]
    #[diagnostic(help("give a complete file"))]
    Truncated {
        name: String,
        promised: u64,
        got: u64,
        end: u64,
    },

    /// The audio ends inside a frame.
    #[error(
        "{name} ends inside a frame: {bytes} bytes of audio are no whole number of {frame}-byte frames"
    )]
    #[diagnostic(help("give a complete file"))]
    PartialFrame {
        name: String,
        bytes: u64,
        frame: u64,
    },

    /// There is no audio.
    #[error("{name} holds no audio: zero frames")]
    #[diagnostic(help("give a file with at least one frame"))]
    Empty { name: String },

    /// A sample that is no finite number.
    #[error("{name} has a sample that is {value} at frame {frame}, channel {channel}")]
    #[diagnostic(help("every sample must be a finite number"))]
    NotFinite {
        name: String,
        /// Counted from 0.
        frame: u64,
        /// Counted from 1.
        channel: usize,
        value: f64,
    },

    /// An output that may not be written.
    #[error("{name} cannot be the output: {reason}")]
    #[diagnostic(help(
        "give the path of a new file, or of a regular file to replace, in a folder that exists"
    ))]
    Output { name: String, reason: String },

    /// More audio than a WAV file's 32-bit lengths can count.
    #[error("{name} would grow past 4 GiB, the most a WAV file can hold, at frame {frame}")]
    #[diagnostic(help("write fewer bits per sample, or render the programme in parts"))]
    TooLong { name: String, frame: u64 },

    /// The machine failed: disk full, permission denied, a cable pulled.
    #[error("{name} could not be {action}")]
    Io {
        name: String,
        /// "opened", "read", "written"
        action: &'static str,
        #[source]
        source: io::Error,
    },
}

impl WavError {
    /// True where the machine failed; false where the input or the arguments are wrong.
    pub fn is_machine_fault(&self) -> bool {
        matches!(self, WavError::Io { .. })
    }

    pub(super) fn io(name: &str, action: &'static str, source: io::Error) -> Self {
        WavError::Io {
            name: name.to_owned(),
            action,
            source,
        }
    }
}
