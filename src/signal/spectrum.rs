//! The power spectrum of a record under a Kaiser window.
//!
//! Everything is one-sided density in units² per Hz, so a sum over bins is a power whether the record holds tones or noise (Parseval):
//! a tone is the power of its main lobe, a band is the power of its bins.

use std::f64::consts::PI;
use std::sync::Arc;

use realfft::{RealFftPlanner, RealToComplex};

/// Takes spectra of records of one length; the plan and the window are made once.
pub struct Analyser {
    rate: f64,
    beta: f64,
    window: Vec<f64>,
    /// Σ w and Σ w².
    sum: f64,
    energy: f64,
    fft: Arc<dyn RealToComplex<f64>>,
}

impl Analyser {
    /// For records of `samples` (1 or more) at `rate` Hz, with the Kaiser window of shape `beta` (0 or more; see [`sidelobe_db`]).
    pub fn new(rate: f64, samples: usize, beta: f64) -> Self {
        let window = kaiser(samples, beta);
        Analyser {
            rate,
            beta,
            sum: window.iter().sum(),
            energy: window.iter().map(|w| w * w).sum(),
            fft: RealFftPlanner::new().plan_fft_forward(samples),
            window,
        }
    }

    /// The length of a record, samples.
    pub fn samples(&self) -> usize {
        self.window.len()
    }

    /// The spectrum of the first [`samples`](Self::samples) of a record. Its mean (under the window) is taken out first, so that a large
    /// quiescent value leaks nowhere.
    ///
    /// # Panics
    /// If the record is shorter: a fault of the caller.
    pub fn analyse(&self, record: &[f64]) -> Spectrum {
        let mut density = vec![0.0; self.window.len() / 2 + 1];
        self.add(record, &mut density);
        self.spectrum(density)
    }

    /// The mean of the spectra of overlapping pieces (each a quarter of a piece after the last) of a longer record
    /// (Welch, IEEE Trans. Audio Electroacoust. 15 (1967) 70): less scatter for noise.
    ///
    /// # Panics
    /// If the record is shorter than a piece: a fault of the caller.
    pub fn average(&self, record: &[f64]) -> Spectrum {
        let pieces = self.pieces(record.len());
        let mut density = vec![0.0; self.window.len() / 2 + 1];
        for piece in 0..pieces {
            self.add(&record[piece * self.hop()..], &mut density);
        }
        density.iter_mut().for_each(|d| *d /= pieces as f64);
        self.spectrum(density)
    }

    /// The standard deviation of a band's power that [`average`](Self::average) finds in a record of white noise, over that power: for a band of
    /// `width` Hz and a record of `samples`. Neighbouring pieces share samples, which the sum over their windows' common energy counts.
    pub fn scatter(&self, samples: usize, width: f64) -> f64 {
        let pieces = self.pieces(samples);
        let power: Vec<f64> = self.window.iter().map(|w| w * w / self.energy).collect();
        let common = |lag: usize| -> f64 {
            let shift = (lag * self.hop()).min(power.len());
            power[shift..].iter().zip(&power).map(|(a, b)| a * b).sum()
        };
        let sum: f64 = (1..pieces.min(5))
            .map(|lag| 2.0 * (pieces - lag) as f64 * common(lag))
            .sum::<f64>()
            + pieces as f64 * common(0);
        // Band-limited Gaussian noise has `2·width` independent values a second, and a square's relative variance is 2.
        (sum / (pieces * pieces) as f64 * self.rate / width).sqrt()
    }

    fn hop(&self) -> usize {
        (self.window.len() / 4).max(1)
    }

    fn pieces(&self, samples: usize) -> usize {
        assert!(samples >= self.window.len(), "a record of a piece or more");
        (samples - self.window.len()) / self.hop() + 1
    }

    fn add(&self, record: &[f64], density: &mut [f64]) {
        let record = &record[..self.window.len()];
        let weighted: f64 = record.iter().zip(&self.window).map(|(x, w)| x * w).sum();
        let mean = weighted / self.sum;
        let mut windowed: Vec<f64> = record
            .iter()
            .zip(&self.window)
            .map(|(x, w)| (x - mean) * w)
            .collect();
        let mut bins = self.fft.make_output_vec();
        self.fft
            .process(&mut windowed, &mut bins)
            .expect("the buffers have the plan's own lengths");
        let scale = 2.0 / (self.rate * self.energy);
        for (sum, bin) in density.iter_mut().zip(&bins) {
            *sum += scale * bin.norm_sqr();
        }
    }

    fn spectrum(&self, density: Vec<f64>) -> Spectrum {
        let step = self.rate / self.window.len() as f64;
        Spectrum {
            step,
            lobe: step * (lobe_bins(self.beta) + 1.0),
            density,
        }
    }
}

/// A one-sided power density, units² per Hz, in steps of the record's inverse length.
#[derive(Debug, Clone)]
pub struct Spectrum {
    step: f64,
    lobe: f64,
    density: Vec<f64>,
}

impl Spectrum {
    /// Distance between bins, Hz.
    pub fn step(&self) -> f64 {
        self.step
    }

    /// Half the width of a tone's main lobe with a bin to spare, Hz: two tones twice this apart do not touch.
    pub fn lobe(&self) -> f64 {
        self.lobe
    }

    /// Highest frequency, Hz.
    pub fn top(&self) -> f64 {
        self.step * (self.density.len() - 1) as f64
    }

    /// Density of the bin nearest to `frequency` Hz, units² per Hz; 0 above the top.
    pub fn density(&self, frequency: f64) -> f64 {
        let bin = (frequency / self.step).round().max(0.0) as usize;
        self.density.get(bin).copied().unwrap_or(0.0)
    }

    /// Power between two frequencies, Hz, units². A bin counts for the share of it (half a step to each side) that lies inside.
    pub fn band_power(&self, low: f64, high: f64) -> f64 {
        self.weighted_power(low, high, |_| 1.0)
    }

    /// Power between two frequencies, each bin times `weight` of its frequency (a power ratio).
    pub fn weighted_power(&self, low: f64, high: f64, weight: impl Fn(f64) -> f64) -> f64 {
        let (low, high) = (low / self.step, high / self.step);
        let first = (low + 0.5).floor().max(0.0) as usize;
        let last = ((high + 0.5).floor().max(0.0) as usize).min(self.density.len() - 1);
        (first..=last)
            .map(|bin| {
                let at = bin as f64;
                let share = (high.min(at + 0.5) - low.max(at - 0.5)).max(0.0);
                share * self.density[bin] * weight(at * self.step)
            })
            .sum::<f64>()
            * self.step
    }

    /// Power between two frequencies but for the main lobes of tones at the frequencies given, units². Noise under those lobes is left out too.
    pub fn band_power_without(&self, low: f64, high: f64, tones: &[f64]) -> f64 {
        let mut cuts: Vec<(f64, f64)> = tones
            .iter()
            .map(|f| (f - self.lobe, f + self.lobe))
            .collect();
        cuts.sort_by(|a, b| a.0.total_cmp(&b.0));
        let (mut power, mut from) = (0.0, low);
        for (start, end) in cuts {
            if start > from {
                power += self.band_power(from, start.min(high));
            }
            from = from.max(end).min(high);
        }
        power + self.band_power(from, high)
    }

    /// Power of a tone: all of its main lobe, units². The tone must lie at least a [`lobe`](Self::lobe) above 0 Hz and below the top.
    pub fn tone_power(&self, frequency: f64) -> f64 {
        self.band_power(frequency - self.lobe, frequency + self.lobe)
    }

    /// The rms value of a tone, from its main lobe.
    pub fn tone_rms(&self, frequency: f64) -> f64 {
        self.tone_power(frequency).sqrt()
    }
}

/// The highest sidelobe of the Kaiser window of shape `beta` over its main lobe, dB. The window's transform is sinh(√(β² − x²))/√(β² − x²), with x
/// half the window's length times the angular frequency (Kaiser, Schafer, IEEE Trans. ASSP 28 (1980) 105), and beyond x = β the sine's sin(y)/y, whose first
/// sidelobe is 0.217234. Sidelobes further out fall as 1/f. β = 8: −58.7 dB; β = 24: −188 dB.
pub fn sidelobe_db(beta: f64) -> f64 {
    let peak = if beta == 0.0 { 1.0 } else { beta.sinh() / beta };
    20.0 * (0.217_234 / peak).log10()
}

/// Half the width of the main lobe between its zeros, in bins: √(β² + π²)/π (same source).
fn lobe_bins(beta: f64) -> f64 {
    beta.hypot(PI) / PI
}

/// I₀(β√(1 − u²))/I₀(β) for u from −1 to 1, as a period (the last point would be the first again).
fn kaiser(samples: usize, beta: f64) -> Vec<f64> {
    let peak = bessel_i0(beta);
    let mut window: Vec<f64> = (0..samples / 2 + 1)
        .map(|n| {
            let u = 2.0 * n as f64 / samples as f64 - 1.0;
            bessel_i0(beta * (1.0 - u * u).max(0.0).sqrt()) / peak
        })
        .collect();
    for n in window.len()..samples {
        window.push(window[samples - n]);
    }
    window
}

/// The modified Bessel function of the first kind and order 0, by its power series (Abramowitz, Stegun 9.6.12).
fn bessel_i0(x: f64) -> f64 {
    let quarter = x * x / 4.0;
    let (mut term, mut sum, mut k) = (1.0, 1.0, 1.0);
    while term > sum * 1e-17 {
        term *= quarter / (k * k);
        sum += term;
        k += 1.0;
    }
    sum
}

#[cfg(test)]
mod tests {
    use std::f64::consts::TAU;

    use super::*;

    fn sine(peak: f64, frequency: f64, rate: f64, samples: usize) -> Vec<f64> {
        (0..samples)
            .map(|n| peak * (TAU * frequency / rate * n as f64 + 0.3).sin())
            .collect()
    }

    #[test]
    fn the_bessel_function_has_its_tabulated_values() {
        // Abramowitz, Stegun, table 9.8: e^(−x)·I0(x) (from memory).
        assert!((bessel_i0(1.0) * (-1f64).exp() - 0.465_759_6).abs() < 1e-7);
        assert!((bessel_i0(10.0) * (-10f64).exp() - 0.127_833_4).abs() < 1e-7);
    }

    #[test]
    fn a_tone_between_bins_reads_its_rms_value() {
        let analyser = Analyser::new(48_000.0, 48_000, 24.0);
        for frequency in [20.5, 997.3, 12_345.678] {
            let spectrum = analyser.analyse(&sine(1.5, frequency, 48_000.0, 48_000));
            let rms = spectrum.tone_rms(frequency);
            assert!((rms * 2f64.sqrt() / 1.5 - 1.0).abs() < 1e-9, "{rms}");
        }
    }

    #[test]
    fn leakage_stays_under_the_stated_sidelobes() {
        for beta in [8.0, 16.0, 24.0] {
            let analyser = Analyser::new(48_000.0, 4800, beta);
            let spectrum = analyser.analyse(&sine(1.0, 5004.7, 48_000.0, 4800));
            let peak = (0..2400)
                .map(|bin| spectrum.density[bin])
                .fold(0.0, f64::max);
            let outside = (0..=2400)
                .filter(|&bin| (bin as f64 * spectrum.step - 5004.7).abs() > spectrum.lobe)
                .map(|bin| spectrum.density[bin])
                .fold(0.0, f64::max);
            let level = 10.0 * (outside / peak).log10();
            // The peak bin may lie up to half a bin off the tone: a few tenths of a decibel.
            assert!(level < sidelobe_db(beta) + 0.5, "beta {beta}: {level} dB");
            assert!(level > sidelobe_db(beta) - 12.0, "beta {beta}: {level} dB");
        }
    }

    #[test]
    fn a_large_mean_leaks_nowhere() {
        let analyser = Analyser::new(48_000.0, 48_000, 24.0);
        let spectrum = analyser.analyse(&vec![4.5; 48_000]);
        assert!(spectrum.band_power(0.0, 24_000.0).sqrt() < 1e-13);
    }

    #[test]
    fn bands_add_up_and_lobes_are_left_out() {
        let record = sine(1.0, 1000.0, 48_000.0, 48_000);
        let spectrum = Analyser::new(48_000.0, 48_000, 24.0).analyse(&record);
        let parts = spectrum.band_power(10.0, 997.3) + spectrum.band_power(997.3, 20_000.0);
        assert!((parts / spectrum.band_power(10.0, 20_000.0) - 1.0).abs() < 1e-12);
        let rest = spectrum.band_power_without(20.0, 20_000.0, &[1000.0, 1004.0]);
        assert!(rest < 1e-16);
        let all = spectrum.band_power_without(2000.0, 20_000.0, &[1000.0]);
        assert_eq!(all, spectrum.band_power(2000.0, 20_000.0));
    }
}
