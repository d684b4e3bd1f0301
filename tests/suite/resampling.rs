//! The change of sample rate against what it must be: the same signal, sampled more or less often, at the same instants.

use std::f64::consts::TAU;

use harklight::signal::resample::{Downsampler, Upsampler};

const RATES: [u32; 9] = [
    8_000, 11_025, 16_000, 22_050, 32_000, 44_100, 48_000, 96_000, 192_000,
];
const FACTORS: [u32; 3] = [2, 4, 8];

fn up(rate: u32, factor: u32, input: &[f64], block: usize) -> Vec<f64> {
    let mut converter = Upsampler::new(rate, factor).unwrap();
    let mut output = Vec::new();
    for part in input.chunks(block) {
        converter.process(part, &mut output);
    }
    converter.finish(&mut output);
    output
}

fn down(rate: u32, factor: u32, input: &[f64], block: usize) -> Vec<f64> {
    let mut converter = Downsampler::new(rate, factor).unwrap();
    let mut output = Vec::new();
    for part in input.chunks(block) {
        converter.process(part, &mut output);
    }
    converter.finish(&mut output);
    output
}

fn sine(frequency: f64, rate: f64, samples: usize) -> Vec<f64> {
    (0..samples)
        .map(|n| (TAU * frequency / rate * n as f64).sin())
        .collect()
}

/// Largest difference in the middle half, where no edge of the record is felt.
fn worst(a: &[f64], b: &[f64]) -> f64 {
    assert_eq!(a.len(), b.len());
    let middle = a.len() / 4..a.len() * 3 / 4;
    middle.map(|i| (a[i] - b[i]).abs()).fold(0.0, f64::max)
}

fn db(ratio: f64) -> f64 {
    20.0 * ratio.log10()
}

#[test]
fn an_impulse_stays_at_its_sample() {
    for rate in RATES {
        for factor in FACTORS {
            let mut impulse = vec![0.0; 6000];
            impulse[2999] = 1.0;
            let high = up(rate, factor, &impulse, 512);
            let centre = 2999 * factor as usize;
            // A delay free of phase means symmetry about the sample itself.
            for lag in 0..2000 {
                let error = (high[centre + lag] - high[centre - lag]).abs();
                assert!(error < 1e-9, "{rate} x{factor}: {error} at lag {lag}");
            }
            assert!(high.iter().all(|x| x.abs() <= high[centre]));

            let mut impulse = vec![0.0; 6000 * factor as usize];
            impulse[2999 * factor as usize] = 1.0;
            let low = down(rate, factor, &impulse, 512);
            for lag in 0..500 {
                let error = (low[2999 + lag] - low[2999 - lag]).abs();
                assert!(error < 1e-9, "{rate} /{factor}: {error} at lag {lag}");
            }
            assert!(low.iter().all(|x| x.abs() <= low[2999]));
        }
    }
}

#[test]
fn lengths_are_exact() {
    for length in [0, 1, 2, 511, 1023, 1024, 1025, 44_100] {
        let input = vec![0.5; length];
        for factor in [1, 2, 4, 8] {
            let high = up(44_100, factor, &input, 1000);
            assert_eq!(high.len(), length * factor as usize);
            assert_eq!(down(44_100, factor, &high, 1000).len(), length);
        }
    }
}

#[test]
fn block_lengths_do_not_change_a_bit() {
    let input = sine(997.0, 48_000.0, 10_000);
    let high = up(48_000, 8, &input, 4096);
    let low = down(48_000, 8, &high, 4096);
    for block in [1, 7] {
        assert_eq!(up(48_000, 8, &input, block), high);
        assert_eq!(down(48_000, 8, &high, block), low);
    }
}

#[test]
fn a_converter_that_has_finished_starts_afresh() {
    let input = sine(997.0, 48_000.0, 5000);
    let mut converter = Upsampler::new(48_000, 4).unwrap();
    let (mut first, mut second) = (Vec::new(), Vec::new());
    converter.process(&input, &mut first);
    converter.finish(&mut first);
    converter.process(&input, &mut second);
    converter.finish(&mut second);
    assert_eq!(first, second);
}

/// Images are part of the difference from the true sine, so the difference bounds them all at once.
#[test]
fn images_of_high_tones_are_110_db_down() {
    for tone in [15_000.0, 19_000.0] {
        for factor in FACTORS {
            let rate = 48_000.0 * f64::from(factor);
            let high = up(48_000, factor, &sine(tone, 48_000.0, 16_384), 4096);
            let ideal = sine(tone, rate, high.len());
            let error = db(worst(&high, &ideal));
            assert!(error < -110.0, "{tone} Hz x{factor}: {error} dB");
        }
    }
}

#[test]
fn the_response_is_flat_to_the_edge_of_the_band() {
    for rate in RATES {
        let edge = f64::min(20_000.0, 0.45 * f64::from(rate));
        for share in [0.01, 0.25, 0.5, 0.75, 0.9, 1.0] {
            let tone = edge * share;
            for factor in FACTORS {
                let fast = f64::from(rate * factor);
                let low = sine(tone, f64::from(rate), 16_384);
                let high = sine(tone, fast, low.len() * factor as usize);
                // 0.05 dB of level, at the right phase.
                let limit = 10f64.powf(0.05 / 20.0) - 1.0;
                assert!(worst(&up(rate, factor, &low, 4096), &high) < limit);
                assert!(worst(&down(rate, factor, &high, 4096), &low) < limit);
            }
        }
    }
}

/// Whatever would fold to min(20 kHz, 0.45 of the rate) or below is 110 dB down.
#[test]
fn aliases_are_110_db_down() {
    for rate in [8_000, 44_100, 48_000, 96_000] {
        let low = f64::from(rate);
        let edge = f64::min(20_000.0, 0.45 * low);
        for factor in FACTORS {
            let fast = low * f64::from(factor);
            for tone in [low - edge, low, low * 1.3, fast / 2.0 - 100.0] {
                let high = sine(tone.max(low - edge), fast, 16_384 * factor as usize);
                let folded = down(rate, factor, &high, 4096);
                let error = db(worst(&folded, &vec![0.0; folded.len()]));
                let tone_inside = tone.max(low - edge) < fast / 2.0;
                assert!(
                    !tone_inside || error < -110.0,
                    "{tone} Hz /{factor}: {error} dB"
                );
            }
        }
    }
}

#[test]
fn up_and_down_again_gives_the_sent_signal() {
    let input: Vec<f64> = sine(997.0, 44_100.0, 20_000)
        .iter()
        .zip(sine(17_321.0, 44_100.0, 20_000))
        .map(|(a, b)| 0.5 * a + 0.3 * b)
        .collect();
    let back = down(44_100, 8, &up(44_100, 8, &input, 4096), 4096);
    assert!(worst(&back, &input) < 1e-6);
}

#[test]
fn a_factor_out_of_range_is_refused() {
    assert!(Upsampler::new(48_000, 0).is_err());
    assert!(Downsampler::new(48_000, 65).is_err());
}
