//! A link run on something: a WAV to a WAV with its stems, or test signals to figures.

mod headroom;
mod lane;
pub mod programme;
pub mod test_signals;

/// Rate at which test signals run, Hz: 8 × 48 kHz, whatever a file's rate.
pub const TEST_RATE: f64 = 8.0 * 48_000.0;
