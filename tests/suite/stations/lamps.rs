//! Lamps in time and on paper against the published series and Fourier's.

use harklight::link::{Link, budget};
use harklight::physics::fluorescent;
use harklight::render::test_signals::{Bench, measure};
use harklight::signal::spectrum::Analyser;
use harklight::station::Conditions;

use super::light_path::link;

const AIR: &str = "kind = \"air\"\ndistance = \"3 m\"\n";

fn with_lamp(keys: &str) -> Link {
    link(
        AIR,
        &format!("[[ambient]]\nphotocurrent = \"1 µA\"\n{keys}"),
        &[],
    )
}

/// The lamp's light over its mean, less 1.
fn flicker(link: &Link, rate: f64, samples: usize) -> Vec<f64> {
    let mut all = vec![0.0; samples];
    if let Some(mut flicker) = link.lamps()[0].flicker(&link.conditions(rate, 1)) {
        // Blocks of any length give the same.
        let (first, rest) = all.split_at_mut(samples.min(777));
        flicker.add_to(first);
        rest.chunks_mut(512).for_each(|b| flicker.add_to(b));
    }
    all.iter_mut().for_each(|x| *x /= 1e-6);
    all
}

/// Modulation depth (max − min)/(max + min) of 1 + x.
fn depth(x: &[f64]) -> f64 {
    let max = x.iter().copied().fold(f64::MIN, f64::max);
    let min = x.iter().copied().fold(f64::MAX, f64::min);
    (max - min) / (2.0 + max + min)
}

#[test]
fn a_tube_on_a_magnetic_ballast_is_the_published_series() {
    for mains in [50.0, 60.0, 49.7] {
        let keys = format!("kind = \"tube-magnetic\"\nripple = \"30 %\"\nmains = {mains}\n");
        let x = flicker(&with_lamp(&keys), 384e3, 384_000);
        assert!((depth(&x) - 0.3).abs() < 1e-6, "{}", depth(&x));
        assert!(x[0].abs() < 1e-4, "starts at its mean: {}", x[0]);
        let series = fluorescent::low();
        let scale = fluorescent::scale_to_depth(0.149180, -0.111950, 0.3);
        for n in (0..384_000).step_by(997) {
            let periods = mains * n as f64 / 384e3 + series.crossing;
            // The extremes above have six digits.
            assert!(
                (x[n] - scale * series.value(periods)).abs() < 1e-5,
                "{mains} {n}"
            );
        }
    }
}

#[test]
fn the_phase_of_the_mains_moves_the_whole_light() {
    let keys = "kind = \"tube-magnetic\"\nripple = \"30 %\"\n";
    let still = flicker(&with_lamp(keys), 384e3, 10_000);
    let moved = flicker(&with_lamp(&format!("{keys}phase = \"90°\"\n")), 384e3, 8000);
    // A quarter of 20 ms is 1920 samples.
    for n in 0..8000 {
        assert!((moved[n] - still[n + 1920]).abs() < 1e-9);
    }
}

#[test]
fn an_electronic_ballast_adds_its_lines_and_none_folds() {
    let keys = "kind = \"tube-electronic\"\nripple = \"40 %\"\nfrequency = \"37.5 kHz\"\n";
    let link = with_lamp(keys);
    // At 4.8 MHz all twelve lines are there.
    let x = flicker(&link, 4.8e6, 4_800_000);
    assert!((depth(&x) - 0.4).abs() < 0.004, "{}", depth(&x));
    let line = |link: &Link, f: f64| {
        let found = link.lamps()[0].lines().find(|l| (l.0 - f).abs() < 1e-6);
        found.map(|l| l.1 / 1e-6)
    };
    let spectrum = Analyser::new(4.8e6, 4_800_000, 20.0).analyse(&x);
    for (f, published) in [
        (100.0, 0.677054 / 5.9),
        (37.5e3, 0.0776247 / 2.1),
        (75e3, 1.0 / 2.1),
        (825e3, 0.00179887 / 2.1),
    ] {
        let paper = line(&link, f).unwrap();
        let scale = line(&link, 75e3).unwrap() * 2.1;
        assert!((paper / (scale * published) - 1.0).abs() < 1e-5, "{f}");
        let heard = 2f64.sqrt() * spectrum.tone_rms(f);
        assert!((heard / paper - 1.0).abs() < 1e-4, "{f}: {heard} {paper}");
    }
    // At 384 kHz three are left; nothing of the others is folded back.
    let x = flicker(&link, 384e3, 384_000);
    let spectrum = Analyser::new(384e3, 384_000, 20.0).analyse(&x);
    let above: f64 = spectrum.band_power_without(2100.0, 190e3, &[37.5e3, 75e3, 150e3]);
    // What the table's cubic leaves is 177 dB under the mean.
    assert!(above.sqrt() < 3e-9, "{above:e}");
    // All of them count on paper: 40 and 12.
    assert_eq!(link.lamps()[0].lines().count(), 52);
}

/// Harmonics 2·sinc(nD)·sinc(n·f·edge) found in time, and what else there is below a quarter of the rate.
fn check_pulses(rate: f64, frequency: f64, duty: f64, edge: f64, phase: f64) {
    let keys = format!(
        "kind = \"pwm-lamp\"\nfrequency = {frequency}\nduty = {duty}\nedge = {edge}\nphase = \"{phase}°\"\n"
    );
    let link = with_lamp(&keys);
    let samples = (rate * 0.5) as usize;
    let x = flicker(&link, rate, samples);
    let spectrum = Analyser::new(rate, samples, 20.0).analyse(&x);
    let sinc = |x: f64| {
        if x == 0.0 {
            1.0
        } else {
            (std::f64::consts::PI * x).sin() / (std::f64::consts::PI * x)
        }
    };
    let mut lines = Vec::new();
    let mut n = 1.0;
    while n * frequency < 0.25 * rate {
        lines.push(n * frequency);
        let law = 2.0 * sinc(n * duty).abs() * sinc(n * frequency * edge).abs();
        let got = 2f64.sqrt() * spectrum.tone_rms(n * frequency);
        assert!((got - law).abs() < 1e-5, "{keys} harmonic {n}: {got} {law}");
        n += 1.0;
    }
    let rest = spectrum
        .band_power_without(20.0, 0.25 * rate, &lines)
        .sqrt();
    assert!(rest < 1e-6, "{keys} aliases {:.1} dB", 20.0 * rest.log10());
    // On paper the same lines, those left out that the duty silences.
    let paper = link.lamps()[0]
        .lines()
        .take_while(|(f, _)| *f < 0.25 * rate);
    for (f, amplitude) in paper {
        let n = (f / frequency).round();
        assert!((f / (n * frequency) - 1.0).abs() < 1e-12);
        let law = 2.0 * sinc(n * duty).abs() * sinc(f * edge).abs();
        assert!((amplitude / 1e-6 - law).abs() < 1e-9);
    }
}

#[test]
fn pulses_are_fourier_s_and_do_not_fold() {
    let rate = 384e3;
    // Steps at frequencies that are no divisors of the rate; then edges, short, long and longer than the pulse.
    check_pulses(rate, 997.0, 0.5, 0.0, 0.0);
    check_pulses(rate, 1013.7, 0.25, 0.0, 70.0);
    check_pulses(rate, 243.1, 0.1, 1e-6, 0.0);
    check_pulses(rate, 3001.0, 0.9, 8e-6, -200.0);
    check_pulses(rate, 1301.0, 0.4, 50e-6, 0.0);
    check_pulses(rate, 1301.0, 0.1, 300e-6, 0.0);
    check_pulses(rate, 1301.0, 0.1, 1.5e-3, 33.0);
    // Few samples a period: lines one by one.
    check_pulses(rate, 25_013.0, 0.3, 1e-6, 0.0);
    check_pulses(16e3, 997.0, 0.3, 0.0, 0.0);
    // Nothing is left of a lamp that pulses above half the rate, or never goes dark.
    let fast = with_lamp("kind = \"pwm-lamp\"\nfrequency = \"1 MHz\"\nduty = 0.5\nedge = 0\n");
    assert!(flicker(&fast, 384e3, 1000).iter().all(|x| *x == 0.0));
    let whole = with_lamp("kind = \"pwm-lamp\"\nfrequency = \"1 kHz\"\nduty = 1\nedge = 0\n");
    assert!(flicker(&whole, 384e3, 1000).iter().all(|x| *x == 0.0));
}

#[test]
fn a_pulse_is_mean_over_duty_high_and_dark_between() {
    let keys = "kind = \"pwm-lamp\"\nfrequency = \"200 Hz\"\nduty = 0.2\nedge = \"20 µs\"\n";
    let x = flicker(&with_lamp(keys), 384e3, 1920 * 3);
    // From the first rise 384 samples of light at five times the mean, then dark; away from the corners' ringing.
    for (n, value) in x.iter().enumerate() {
        let place = n % 1920;
        if (24..360).contains(&place) {
            assert!((value - 4.0).abs() < 1e-3, "{n}: {value}");
        }
        if (410..1890).contains(&place) {
            assert!((value + 1.0).abs() < 1e-3, "{n}: {value}");
        }
    }
    // It starts on its way up, at its mean.
    assert!(x[0].abs() < 0.3 && x[1] > 0.5, "{} {}", x[0], x[1]);
}

#[test]
fn extreme_lamps_stay_finite() {
    for keys in [
        "kind = \"pwm-lamp\"\nfrequency = 1e-300\nduty = 0.5\nedge = 0\n",
        "kind = \"pwm-lamp\"\nfrequency = 0.001\nduty = 1e-6\nedge = 1e-12\n",
        "kind = \"pwm-lamp\"\nfrequency = 5000\nduty = 0.999999\nedge = 1e9\n",
        "kind = \"tube-electronic\"\nripple = 1\nfrequency = 1e300\nmains = 1000\n",
        "kind = \"tube-magnetic\"\nripple = 0\n",
    ] {
        for rate in [8e3, 384e3] {
            let x = flicker(&with_lamp(keys), rate, 4000);
            assert!(x.iter().all(|v| v.is_finite()), "{keys}");
        }
    }
}

#[test]
fn pulses_count_as_noise_but_not_as_hum() {
    let bench = Bench {
        tone: 1000.0,
        level: -6.0,
        band: (20.0, 20e3),
    };
    let pulsed = "kind = \"pwm-lamp\"\nfrequency = \"1 kHz\"\nduty = 0.5\nedge = 0\n";
    let link = with_lamp(pulsed);
    let figures = measure(&link, &bench, 1).figures;
    assert_eq!(figures.hum_db, None);
    assert!(figures.reasons["hum_db"].contains("mains"));
    let names: Vec<String> = budget(&link, bench.band)
        .into_iter()
        .map(|l| l.name)
        .collect();
    assert_eq!(names[0], "ambient.1.pulses");
    // Idle noise is the pulses': harmonics 1, 3 … 19 of 2·sinc(n/2), 1 µA into 10 kΩ.
    let power: f64 = (1..20)
        .step_by(2)
        .map(|n| 0.5 * (4.0 / (std::f64::consts::PI * f64::from(n))).powi(2))
        .sum();
    let expected = 1e-6 * 10e3 * power.sqrt();
    let got = figures.noise_rms_v.unwrap();
    assert!((got / expected - 1.0).abs() < 2e-3, "{got} {expected}");
    let paper = budget(&link, bench.band)[0].rms;
    assert!((paper / expected - 1.0).abs() < 2e-3, "{paper} {expected}");

    // Beside a filament at 50 Hz the hum is the filament's alone, though 1 kHz is a multiple of 50 Hz.
    let filament =
        "[[ambient]]\nkind = \"incandescent\"\nphotocurrent = \"1 µA\"\nripple = \"10 %\"\n";
    let both = with_lamp(&format!("{pulsed}{filament}"));
    let alone = with_lamp(
        &filament
            .replace("[[ambient]]\n", "")
            .replace("photocurrent = \"1 µA\"\n", ""),
    );
    let hum = |link: &Link| measure(link, &bench, 1).figures.hum_db.unwrap();
    assert!((hum(&both) - hum(&alone)).abs() < 0.01);
    let silent = Conditions {
        lamps: false,
        ..both.conditions(384e3, 1)
    };
    assert!(both.lamps().iter().all(|l| l.flicker(&silent).is_none()));
}
