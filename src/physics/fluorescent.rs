//! The light of fluorescent tubes: the interference series of Moreira, Valadas and de Oliveira Duarte (1995; "Optical interference produced by
//! artificial light", Wireless Networks 3 (1997) 131), fitted to measured lamps at 50 Hz. Coefficients read in a public listing of the textbook by
//! Ghassemlooy, Popoola and Rajbhandari (2012).
//!
//! A tube's light over its mean is 1 + low(t), on an electronic ballast 1 + low(t) + high(t):
//! low = (1/5.9)·Σ b·cos(2π(100i − 50)t + φ) + c·cos(2π·100i·t + ψ), i = 1…20, with b = 10^((−13.1·ln(100i − 50) + 27.1)/20) and
//! c = 10^((−20.8·ln(100i) + 92.4)/20); high = (1/2.1)·Σ d·cos(2π·37 500·j·t + θ). The table of d is in decibels of amplitude and is taken
//! as 10^(dB/20); some listings raise 10 to dB/10.

use std::f64::consts::TAU;
use std::sync::OnceLock;

/// Phases φ of the odd multiples of the mains frequency, rad.
const ODD: [f64; 20] = [
    4.65, 2.86, 5.43, 3.90, 2.00, 5.98, 2.38, 4.35, 5.87, 0.70, 1.26, 1.29, 1.28, 0.63, 6.06, 5.49,
    4.45, 3.24, 2.07, 0.87,
];
/// Phases ψ of the even multiples, rad.
const EVEN: [f64; 20] = [
    0.00, 0.08, 6.00, 5.31, 2.27, 5.70, 2.07, 3.44, 5.01, 6.00, 6.00, 6.17, 5.69, 5.37, 4.00, 3.69,
    1.86, 1.38, 5.91, 4.88,
];
/// The ballast's multiples: j, d in dB, θ in rad.
const BALLAST: [(u32, f64, f64); 12] = [
    (1, -22.2, 5.09),
    (2, 0.0, 0.00),
    (4, -11.5, 2.37),
    (6, -30.0, 5.86),
    (8, -33.9, 2.04),
    (10, -35.3, 2.75),
    (12, -39.3, 3.55),
    (14, -42.7, 4.15),
    (16, -46.4, 1.64),
    (18, -48.1, 4.51),
    (20, -53.1, 3.55),
    (22, -54.9, 1.78),
];
const LOW_SCALE: f64 = 5.9;
const HIGH_SCALE: f64 = 2.1;

/// One line of a periodic light: amplitude over the mean at a multiple of the fundamental, and its phase (cosine), rad.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Line {
    pub multiple: u32,
    pub amplitude: f64,
    pub phase: f64,
}

/// A sum of lines with what its scaling needs.
#[derive(Debug)]
pub struct Series {
    pub lines: Vec<Line>,
    /// Largest and smallest value.
    pub highest: f64,
    pub lowest: f64,
    /// Share of a period at which it rises through 0.
    pub crossing: f64,
}

/// Points a period at which extremes are looked for; a parabola refines them to 1e-7.
const POINTS: usize = 4096;

impl Series {
    fn new(lines: Vec<Line>) -> Self {
        let mut series = Self {
            lines,
            highest: 0.0,
            lowest: 0.0,
            crossing: 0.0,
        };
        let at = |k: usize| series.value(k as f64 / POINTS as f64);
        let values: Vec<f64> = (0..POINTS).map(at).collect();
        let value = |k: usize| values[k % POINTS];
        let peak = |sign: f64| {
            let best = (0..POINTS)
                .max_by(|a, b| (sign * values[*a]).total_cmp(&(sign * values[*b])))
                .unwrap_or(0);
            let (a, b, c) = (value(best + POINTS - 1), value(best), value(best + 1));
            b - (a - c) * (a - c) / (8.0 * (a - 2.0 * b + c))
        };
        let crossing = (0..POINTS)
            .find(|k| value(*k) < 0.0 && value(k + 1) >= 0.0)
            .map_or(0.0, |k| {
                (k as f64 + value(k) / (value(k) - value(k + 1))) / POINTS as f64
            });
        let (highest, lowest) = (peak(1.0), peak(-1.0));
        series.highest = highest;
        series.lowest = lowest;
        series.crossing = crossing;
        series
    }

    /// Value at a time of `periods` of the fundamental.
    pub fn value(&self, periods: f64) -> f64 {
        self.lines
            .iter()
            .map(|l| l.amplitude * (TAU * f64::from(l.multiple) * periods + l.phase).cos())
            .sum()
    }
}

/// The part at multiples of the mains frequency.
pub fn low() -> &'static Series {
    static LOW: OnceLock<Series> = OnceLock::new();
    LOW.get_or_init(|| {
        let level = |db: f64| 10f64.powf(db / 20.0) / LOW_SCALE;
        let lines = (0..20u32).flat_map(|i| {
            let even = f64::from(100 * (i + 1));
            [
                Line {
                    multiple: 2 * i + 1,
                    amplitude: level(-13.1 * (even - 50.0).ln() + 27.1),
                    phase: ODD[i as usize],
                },
                Line {
                    multiple: 2 * i + 2,
                    amplitude: level(-20.8 * even.ln() + 92.4),
                    phase: EVEN[i as usize],
                },
            ]
        });
        Series::new(lines.collect())
    })
}

/// The part at multiples of the ballast's frequency, published at 37.5 kHz.
pub fn high() -> &'static Series {
    static HIGH: OnceLock<Series> = OnceLock::new();
    HIGH.get_or_init(|| {
        let lines = BALLAST.iter().map(|&(multiple, db, phase)| Line {
            multiple,
            amplitude: 10f64.powf(db / 20.0) / HIGH_SCALE,
            phase,
        });
        Series::new(lines.collect())
    })
}

/// Factor that gives a light 1 + k·s, s between `lowest` (< 0) and `highest`, the modulation depth (max − min)/(max + min) `depth` (0…1).
pub fn scale_to_depth(highest: f64, lowest: f64, depth: f64) -> f64 {
    2.0 * depth / ((highest - lowest) - depth * (highest + lowest))
}

#[cfg(test)]
mod tests {
    use super::*;

    fn rms(series: &Series) -> f64 {
        let power: f64 = series
            .lines
            .iter()
            .map(|l| l.amplitude * l.amplitude / 2.0)
            .sum();
        power.sqrt()
    }

    // The published coefficients summed apart from this code.
    #[test]
    fn the_sums_have_their_published_values() {
        let low = low();
        for (seconds, value) in [(0.0, 0.144628), (1e-3, 0.101593), (2.5e-3, -0.0186621)] {
            let got = low.value(50.0 * seconds);
            assert!((got - value).abs() < 1e-6, "{seconds}: {got}");
        }
        assert!((low.lines[0].amplitude * 5.9 / 0.0620333 - 1.0).abs() < 1e-5);
        assert!((low.lines[1].amplitude * 5.9 / 0.677054 - 1.0).abs() < 1e-5);
        assert!((low.lines[3].amplitude * 5.9 / 0.128751 - 1.0).abs() < 1e-5);
        assert!((rms(low) - 0.0832398).abs() < 1e-6);
        assert!((low.highest - 0.149180).abs() < 2e-6, "{}", low.highest);
        assert!((low.lowest + 0.111950).abs() < 2e-6, "{}", low.lowest);
        let high = high();
        assert!((high.value(0.0) - 0.392545).abs() < 1e-6);
        assert!((rms(high) - 0.349723).abs() < 1e-6);
    }

    #[test]
    fn scaling_reaches_the_depth_and_never_goes_below_dark() {
        let (high, low) = (0.149180, -0.111950);
        for depth in [0.0, 0.1, 0.5, 1.0] {
            let k = scale_to_depth(high, low, depth);
            let (max, min) = (1.0 + k * high, 1.0 + k * low);
            assert!(((max - min) / (max + min) - depth).abs() < 1e-12);
            assert!(min > -1e-12);
        }
        for series in [super::low(), super::high()] {
            assert!(series.value(series.crossing).abs() < 1e-4);
        }
    }
}
