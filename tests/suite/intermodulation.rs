//! Intermodulation of two tones against closed forms of polynomial laws: y = x + a₂x² + a₃x³ with tones of amplitudes A₁, A₂.

use harklight::figures::intermodulation::{FLOOR, modulation, twin_tone};
use harklight::signal::tone::Tone;

const RATE: f64 = 384_000.0;

fn pair(first: (f64, f64), second: (f64, f64)) -> Vec<f64> {
    let tone = |(frequency, peak)| Tone::new(RATE, frequency, peak, 0.0).unwrap();
    let (mut a, mut b) = (tone(first), tone(second));
    (0..384_000)
        .map(|_| a.next_sample() + b.next_sample())
        .collect()
}

fn bent(record: &[f64], a2: f64, a3: f64) -> Vec<f64> {
    record
        .iter()
        .map(|x| x + a2 * x * x + a3 * x * x * x)
        .collect()
}

/// d₂ = 2a₂A₁. With a₃ each sideband f₂ ± 2f₁ is ¾a₃A₁²A₂ and the carrier A₂(1 + ¾a₃A₂² + 1½a₃A₁²).
#[test]
fn modulation_of_a_high_tone_by_a_low_one() {
    for (low, high) in [(60.0, 7000.0), (41.0, 7993.0), (250.0, 8000.0)] {
        let tones = pair((low, 0.8), (high, 0.2));
        let even = modulation(&bent(&tones, 0.02, 0.0), RATE, low, high).unwrap();
        assert!((even - 0.032).abs() < 1e-9, "{even}");
        let odd = modulation(&bent(&tones, 0.0, 0.05), RATE, low, high).unwrap();
        let exact: f64 = 1.5 * 0.05 * 0.64 / (1.0 + 0.75 * 0.05 * 0.04 + 1.5 * 0.05 * 0.64);
        assert!((exact - 0.045_736_1).abs() < 1e-7);
        assert!((odd - exact).abs() < 1e-9, "{odd}");
    }
}

/// d₂ = a₂A₁/2 for equal tones. With a₃ each product 2f₁ − f₂ is ¾a₃A³ and each tone A(1 + 2¼a₃A²).
#[test]
fn difference_tones_of_two_high_ones() {
    for (first, second) in [(19_000.0, 20_000.0), (18_000.0, 20_000.0), (3000.0, 3080.0)] {
        let tones = pair((first, 0.5), (second, 0.5));
        let even = twin_tone(&bent(&tones, 0.02, 0.0), RATE, first, second).unwrap();
        assert!((even - 0.005).abs() < 1e-9, "{even}");
        let odd = twin_tone(&bent(&tones, 0.0, 0.05), RATE, first, second).unwrap();
        let exact: f64 = 0.75 * 0.05 * 0.25 / (1.0 + 2.25 * 0.05 * 0.25);
        assert!((exact - 0.009_118_54).abs() < 1e-8);
        assert!((odd - exact).abs() < 1e-9, "{odd}");
    }
}

#[test]
fn pure_tones_read_below_the_floor() {
    let record = pair((60.3, 0.8), (7000.7, 0.2));
    let smpte = modulation(&record, RATE, 60.3, 7000.7).unwrap();
    let record = pair((19_000.3, 0.5), (20_000.7, 0.5));
    let twin = twin_tone(&record, RATE, 19_000.3, 20_000.7).unwrap();
    println!(
        "floors: {:.1} dB, {:.1} dB",
        20.0 * smpte.log10(),
        20.0 * twin.log10()
    );
    assert!(smpte < FLOOR && twin < FLOOR, "{smpte} {twin}");
}

#[test]
fn a_short_record_and_a_missing_tone_say_so() {
    let record = pair((60.0, 0.8), (7000.0, 0.2));
    assert!(modulation(&record[..100_000], RATE, 60.0, 7000.0).is_err());
    assert!(modulation(&vec![1.0; 384_000], RATE, 60.0, 7000.0).is_err());
}
