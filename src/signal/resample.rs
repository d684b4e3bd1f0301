//! The change between a file's sample rate and a whole multiple of it, without delay.
//!
//! The conversion is block convolution by FFT (the `rubato` library) with a squared Blackman–Harris window: flat within
//! 0.05 dB to min(20 kHz, 0.45 of the lower rate), images and aliases more than 110 dB down. Its delay of half a block is removed here,
//! and the length is exact, so that what comes down again lines up with what went up, sample for sample.

use rubato::audioadapter_buffers::direct::InterleavedSlice;
use rubato::{Fft, FixedSync, Indexing, Resampler, ResamplerConstructionError, WindowFunction};
use thiserror::Error;

/// Samples of one block at the lower rate. It sets the width of the anti-alias filter: with 1024 the pass band ends at
/// 0.97 of the lower rate's half.
const BLOCK: usize = 1024;

/// A conversion that cannot be set up.
#[derive(Debug, Error)]
#[non_exhaustive]
pub enum RatioError {
    /// The factor is zero or too large.
    #[error("an oversampling factor of {0} is out of range: 1 to {max} are accepted", max = MAX_FACTOR)]
    Factor(u32),
    /// The library refused the rates.
    #[error("the sample rate cannot be converted")]
    Rates(#[from] ResamplerConstructionError),
}

/// Largest oversampling factor.
pub const MAX_FACTOR: u32 = 64;

/// Converts a mono stream to a whole multiple of its rate.
pub struct Upsampler(Option<Converter>);

impl Upsampler {
    /// From `rate` Hz (1 or more) to `factor` (1 … 64) times as much. Factor 1 passes samples through.
    pub fn new(rate: u32, factor: u32) -> Result<Self, RatioError> {
        check(factor)?;
        if factor == 1 {
            return Ok(Upsampler(None));
        }
        let (low, high) = (rate as usize, rate as usize * factor as usize);
        Ok(Upsampler(Some(Converter::new(low, high, BLOCK)?)))
    }

    /// Takes a block of any length and appends what is ready to `output`.
    pub fn process(&mut self, input: &[f64], output: &mut Vec<f64>) {
        run(&mut self.0, input, output);
    }

    /// Appends what is left: the stream then has `factor` samples for each one put in. Ready for a new stream afterwards.
    pub fn finish(&mut self, output: &mut Vec<f64>) {
        if let Some(converter) = &mut self.0 {
            converter.finish(output);
        }
    }
}

/// Converts a mono stream from a whole multiple of a rate down to that rate.
pub struct Downsampler(Option<Converter>);

impl Downsampler {
    /// From `factor` (1 … 64) times `rate` Hz (1 or more) down to `rate`. Factor 1 passes samples through.
    pub fn new(rate: u32, factor: u32) -> Result<Self, RatioError> {
        check(factor)?;
        if factor == 1 {
            return Ok(Downsampler(None));
        }
        let (low, high) = (rate as usize, rate as usize * factor as usize);
        let block = BLOCK * factor as usize;
        Ok(Downsampler(Some(Converter::new(high, low, block)?)))
    }

    /// Takes a block of any length and appends what is ready to `output`.
    pub fn process(&mut self, input: &[f64], output: &mut Vec<f64>) {
        run(&mut self.0, input, output);
    }

    /// Appends what is left: the stream then has one sample for each `factor` put in (rounded up). Ready for a new stream afterwards.
    pub fn finish(&mut self, output: &mut Vec<f64>) {
        if let Some(converter) = &mut self.0 {
            converter.finish(output);
        }
    }
}

fn check(factor: u32) -> Result<(), RatioError> {
    match factor {
        1..=MAX_FACTOR => Ok(()),
        _ => Err(RatioError::Factor(factor)),
    }
}

fn run(converter: &mut Option<Converter>, input: &[f64], output: &mut Vec<f64>) {
    match converter {
        Some(converter) => converter.process(input, output),
        None => output.extend_from_slice(input),
    }
}

/// One direction. The blocks it works in start at fixed places of the stream, so the lengths it is fed in do not matter.
struct Converter {
    fft: Fft<f64>,
    up: u64,
    down: u64,
    pending: Vec<f64>,
    block_out: Vec<f64>,
    /// Output samples still to drop: the delay.
    skip: usize,
    taken: u64,
    given: u64,
}

impl Converter {
    fn new(from: usize, to: usize, block: usize) -> Result<Self, RatioError> {
        let fft = Fft::new_custom(
            from,
            to,
            block,
            1,
            1,
            WindowFunction::BlackmanHarris2,
            FixedSync::Input,
        )?;
        let common = if from < to { from } else { to };
        Ok(Converter {
            block_out: vec![0.0; fft.output_frames_max()],
            pending: Vec::with_capacity(block),
            skip: fft.output_delay(),
            up: (to / common) as u64,
            down: (from / common) as u64,
            taken: 0,
            given: 0,
            fft,
        })
    }

    fn process(&mut self, mut input: &[f64], output: &mut Vec<f64>) {
        self.taken += input.len() as u64;
        while !input.is_empty() {
            let need = self.fft.input_frames_next() - self.pending.len();
            let (now, later) = input.split_at(need.min(input.len()));
            self.pending.extend_from_slice(now);
            input = later;
            if now.len() == need {
                self.convert(output, u64::MAX);
            }
        }
    }

    fn finish(&mut self, output: &mut Vec<f64>) {
        let total = (self.taken * self.up).div_ceil(self.down);
        while self.given < total {
            self.convert(output, total - self.given);
        }
        self.fft.reset();
        self.pending.clear();
        self.skip = self.fft.output_delay();
        self.taken = 0;
        self.given = 0;
    }

    /// Converts what is pending (with silence after it where it is short of a block) and appends at most `most` samples.
    fn convert(&mut self, output: &mut Vec<f64>, most: u64) {
        let frames = self.pending.len();
        let indexing = Indexing::new().partial_len(frames);
        let room = self.block_out.len();
        let source = InterleavedSlice::new(&self.pending, 1, frames)
            .expect("one channel, as many frames as samples");
        let mut sink = InterleavedSlice::new_mut(&mut self.block_out, 1, room)
            .expect("one channel, as many frames as samples");
        let (_, came) = self
            .fft
            .process_into_buffer(&source, &mut sink, Some(&indexing))
            .expect("the buffers have the sizes the converter asked for");
        self.pending.clear();
        let dropped = self.skip.min(came);
        self.skip -= dropped;
        let ready = &self.block_out[dropped..came];
        let ready = &ready[..ready.len().min(usize::try_from(most).unwrap_or(usize::MAX))];
        output.extend_from_slice(ready);
        self.given += ready.len() as u64;
    }
}
