//! Noise against the statistics it must have and against closed forms of its integrals.
//!
//! Limits are five standard deviations of each estimate: a right generator fails one in two million times, and the seeds are fixed.

use harklight::signal::noise::{FlickerShaper, Gaussian};
use harklight::signal::spectrum::Analyser;

const COUNT: usize = 1_000_000;

fn draws(seed: u64, channel: usize, path: &str, cause: &str) -> Vec<f64> {
    let mut block = vec![0.0; COUNT];
    Gaussian::new(seed, channel, path, cause).fill(&mut block);
    block
}

fn mean(x: impl Iterator<Item = f64>) -> f64 {
    x.sum::<f64>() / COUNT as f64
}

/// Moments of the normal distribution: 0, 1, 0, 3; the variance of each estimate from the moments up to the eighth (1, 3, 15, 105).
#[test]
fn draws_are_gaussian_with_unit_variance() {
    let x = draws(1, 0, "receiver.detector", "shot");
    let root = (COUNT as f64).sqrt();
    assert!(mean(x.iter().copied()).abs() < 5.0 / root);
    assert!((mean(x.iter().map(|x| x * x)) - 1.0).abs() < 5.0 * 2f64.sqrt() / root);
    assert!(mean(x.iter().map(|x| x.powi(3))).abs() < 5.0 * 15f64.sqrt() / root);
    assert!((mean(x.iter().map(|x| x.powi(4))) - 3.0).abs() < 5.0 * 96f64.sqrt() / root);
    // Share beyond three standard deviations: 0.002 699 8.
    let beyond = mean(x.iter().map(|x| f64::from(x.abs() > 3.0)));
    assert!((beyond - 0.002_699_8).abs() < 5.0 * 0.0027f64.sqrt() / root);
}

#[test]
fn each_seed_channel_path_and_cause_has_its_own_stream() {
    let one = draws(1, 0, "receiver.detector", "shot");
    assert_eq!(one, draws(1, 0, "receiver.detector", "shot"));
    for other in [
        draws(2, 0, "receiver.detector", "shot"),
        draws(1, 1, "receiver.detector", "shot"),
        draws(1, 0, "receiver.front_end", "shot"),
        draws(1, 0, "receiver.detector", "thermal"),
    ] {
        let correlation = mean(one.iter().zip(&other).map(|(a, b)| a * b));
        assert!(correlation.abs() < 5.0 / (COUNT as f64).sqrt());
    }
}

#[test]
fn neighbouring_draws_do_not_depend_on_each_other() {
    let x = draws(3, 0, "source", "thermal");
    for lag in [1, 2, 3, 10, 1000] {
        let correlation = mean(x.iter().zip(&x[lag..]).map(|(a, b)| a * b));
        assert!(correlation.abs() < 5.0 / (COUNT as f64).sqrt(), "lag {lag}");
    }
}

#[test]
fn block_lengths_do_not_change_a_draw() {
    let whole = draws(4, 0, "a", "b");
    for length in [1, 7, 4096] {
        let mut stream = Gaussian::new(4, 0, "a", "b");
        let mut parts = vec![0.0; 10_000];
        parts.chunks_mut(length).for_each(|part| stream.fill(part));
        assert_eq!(parts, whole[..10_000]);
    }
}

/// White noise of unit variance has the one-sided density 2/fs.
#[test]
fn the_white_density_is_two_over_the_rate() {
    let rate = 48_000.0;
    let analyser = Analyser::new(rate, 48_000, 8.0);
    let x = draws(5, 0, "a", "b");
    let spectrum = analyser.average(&x);
    for (low, high) in [(20.0, 1020.0), (1000.0, 10_000.0), (10_000.0, 23_000.0)] {
        let density = spectrum.band_power(low, high) / (high - low);
        let error = density * rate / 2.0 - 1.0;
        assert!(
            error.abs() < 5.0 * analyser.scatter(COUNT, high - low),
            "{error}"
        );
    }
}

/// Integrals of white plus 1/f noise over a band, by the filter's own response: V = e·√(f_c·ln(f_h/f_l) + f_h − f_l) (handbook formula,
/// for example Motchenbacher and Connelly, Low-Noise Electronic System Design, 1993; from memory). The filter's 0.1 dB leaves 1.2 %.
#[test]
fn band_integrals_agree_with_the_closed_form() {
    let shaper = FlickerShaper::new(384_000.0);
    for (density, corner, low, high, expected) in [
        (5e-9, 100.0, 20.0, 20e3, 0.718_867e-6),
        (5e-9, 1000.0, 20.0, 20e3, 0.819_874e-6),
        (5e-9, 100.0, 0.1, 10.0, 0.108_445e-6),
    ] {
        // Trapezoids in logarithm of frequency.
        let steps = 20_000;
        let ratio = f64::powf(high / low, 1.0 / f64::from(steps));
        let power: f64 = (0..=steps)
            .map(|n| {
                let f = low * ratio.powi(n);
                let end = if n == 0 || n == steps { 0.5 } else { 1.0 };
                end * f * (1.0 + corner * shaper.density_gain(f))
            })
            .sum::<f64>()
            * ratio.ln();
        let volts = density * power.sqrt();
        assert!((volts / expected - 1.0).abs() < 0.012, "{volts} {expected}");
    }
}

#[test]
fn the_shaped_stream_has_the_density_of_one_over_f() {
    let rate = 8000.0;
    let mut x = draws(6, 0, "a", "b");
    let mut shaper = FlickerShaper::new(rate);
    shaper.process(&mut x);
    let analyser = Analyser::new(rate, 16_000, 8.0);
    let spectrum = analyser.average(&x);
    for octave in 3..12 {
        let (low, high) = (2f64.powi(octave), 1.9 * 2f64.powi(octave));
        let power = spectrum.band_power(low, high);
        let expected = 2.0 / rate * (high / low).ln();
        // Scatter as for white noise over half the band, since the low end carries most; the filter's 0.1 dB.
        let limit = 5.0 * analyser.scatter(COUNT, (high - low) / 2.0) + 0.023;
        let error = power / expected - 1.0;
        assert!(error.abs() < limit, "{error} from {low} Hz (limit {limit})");
    }
}

#[test]
fn shaping_does_not_depend_on_block_lengths() {
    let white = draws(7, 0, "a", "b")[..10_000].to_vec();
    let mut whole = white.clone();
    FlickerShaper::new(48_000.0).process(&mut whole);
    for length in [1, 7] {
        let mut shaper = FlickerShaper::new(48_000.0);
        let mut parts = white.clone();
        parts.chunks_mut(length).for_each(|p| shaper.process(p));
        assert_eq!(parts, whole);
    }
}
