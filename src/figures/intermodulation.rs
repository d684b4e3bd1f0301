//! Intermodulation of two tones, by the definitions of IEC 60268-3 (from memory). Records are settled, random noise off.

use super::distortion::{line_spectrum, samples_to_resolve};
use super::{Unmeasurable, check_finite};
use crate::signal::spectrum::Spectrum;

/// Intermodulation that the method itself shows for two pure tones, as a ratio: −190 dB. The tests measure −209.7 dB at worst.
pub const FLOOR: f64 = 3.162_277_660_168_379_5e-10;

/// Modulation distortion of a small high tone by a large low one (the SMPTE method, RP 120: 60 Hz and 7 kHz, amplitudes 4:1), as a ratio.
///
/// d₂ = [U(f₂−f₁) + U(f₂+f₁)]/U(f₂), d₃ the same with 2f₁, and the figure is √(d₂² + d₃²). `rate`, `low` (f₁) and `high` (f₂) in Hz; the record must
/// hold 18 periods of f₁ or more. A product above half the sample rate does not count.
pub fn modulation(record: &[f64], rate: f64, low: f64, high: f64) -> Result<f64, Unmeasurable> {
    let spectrum = lines(record, rate, low)?;
    let carrier = present(&spectrum, record, high)?;
    let order = |n: f64| line(&spectrum, high - n * low) + line(&spectrum, high + n * low);
    Ok(order(1.0).hypot(order(2.0)) / carrier)
}

/// Difference-frequency distortion of two equal high tones (twin-tone method: 19 kHz and 20 kHz), as a ratio.
///
/// The reference is 2·U(f₂): d₂ = U(f₂−f₁)/2U(f₂), d₃ = [U(2f₁−f₂) + U(2f₂−f₁)]/2U(f₂), and the figure is √(d₂² + d₃²). `rate`, `first` (f₁) and
/// `second` (f₂ > f₁) in Hz; the record must hold 18 periods of their difference or more. A product above half the sample rate does not count.
pub fn twin_tone(record: &[f64], rate: f64, first: f64, second: f64) -> Result<f64, Unmeasurable> {
    let spectrum = lines(record, rate, second - first)?;
    let reference = 2.0 * present(&spectrum, record, second)?;
    let even = line(&spectrum, second - first);
    let odd = line(&spectrum, 2.0 * first - second) + line(&spectrum, 2.0 * second - first);
    Ok(even.hypot(odd) / reference)
}

fn lines(record: &[f64], rate: f64, spacing: f64) -> Result<Spectrum, Unmeasurable> {
    check_finite(record)?;
    let needed = samples_to_resolve(spacing, rate);
    if record.len() < needed {
        return Err(Unmeasurable::TooShort {
            got: record.len(),
            needed,
            spacing,
        });
    }
    Ok(line_spectrum(rate, record))
}

fn present(spectrum: &Spectrum, record: &[f64], frequency: f64) -> Result<f64, Unmeasurable> {
    let largest = record.iter().fold(0.0f64, |m, x| m.max(x.abs()));
    let rms = line(spectrum, frequency);
    if rms > super::distortion::ABSENT * largest {
        Ok(rms)
    } else {
        Err(Unmeasurable::NoTone)
    }
}

/// Rms value of a line; 0 where its lobe passes half the sample rate.
fn line(spectrum: &Spectrum, frequency: f64) -> f64 {
    if frequency + spectrum.lobe() > spectrum.top() {
        0.0
    } else {
        spectrum.tone_rms(frequency)
    }
}
