//! The methods of measurement against closed forms and published tables.

use std::f64::consts::{PI, TAU};

use harklight::figures::Conditions;
use harklight::figures::band::{NoEdge, band_edges};
use harklight::figures::distortion::{DistortionMeter, THD_FLOOR, THD_N_FLOOR};
use harklight::figures::hum::hum_rms;
use harklight::figures::noise::{idle_noise, snr_db};
use harklight::figures::programme::{LevelMeter, ResidualMeter};
use harklight::figures::weighting::a_weighting;
use harklight::figures::{Unmeasurable, decibels};
use harklight::signal::noise::Gaussian;
use harklight::signal::tone::Tone;

/// A tone that shares no period with the sample rate: what folds back from beyond half the rate falls beside the harmonics, not on them.
const TONE: f64 = 997.13;
const RATE: f64 = 384_000.0;
const SAMPLES: usize = 384_000;

fn conditions(rate: f64, tone: f64, low: f64, high: f64) -> Conditions {
    Conditions {
        rate,
        tone,
        band: (low, high),
    }
}

fn tone(rate: f64, frequency: f64, peak: f64, samples: usize) -> Vec<f64> {
    let mut record = vec![0.0; samples];
    Tone::new(rate, frequency, peak, 0.0)
        .unwrap()
        .fill(&mut record);
    record
}

fn white(sigma: f64, seed: u64, samples: usize) -> Vec<f64> {
    let mut record = vec![0.0; samples];
    Gaussian::new(seed, 0, "test", "white").fill(&mut record);
    record.iter().map(|x| sigma * x).collect()
}

fn sum(a: &[f64], b: &[f64]) -> Vec<f64> {
    a.iter().zip(b).map(|(a, b)| a + b).collect()
}

/// Rows of a table under tests/data: lines that start with # are its source.
fn table(name: &str) -> Vec<Vec<String>> {
    let path = format!("{}/tests/data/{name}", env!("CARGO_MANIFEST_DIR"));
    std::fs::read_to_string(path)
        .unwrap()
        .lines()
        .filter(|line| !line.starts_with('#'))
        .skip(1)
        .map(|line| line.split(',').map(str::to_owned).collect())
        .collect()
}

/// What a memoryless law makes of a unit sine.
fn law(case: &str, p: f64) -> Option<Box<dyn Fn(f64) -> f64>> {
    Some(match case {
        "square" => Box::new(|s: f64| s.signum()),
        "triangle" => Box::new(|s: f64| s.asin()),
        "halfwave" => Box::new(|s: f64| s.max(0.0)),
        "hardclip_sym" => Box::new(move |s: f64| s.clamp(-p, p)),
        "clip_onesided" => Box::new(move |s: f64| s.max(-p)),
        "crossover_deadzone" => Box::new(move |s: f64| s - s.clamp(-p, p)),
        "exp" => Box::new(move |s: f64| (p * s).exp()),
        "tanh_pair" => Box::new(move |s: f64| (p / 2.0 * s).tanh()),
        _ => return None,
    })
}

/// tests/data/harmonics.csv: closed forms by Fourier series (Clarke and Hess, Communication Circuits, 1971; Gray and Meyer, Analysis and Design of
/// Analog Integrated Circuits), formulas from memory.
///
/// A harmonic near the top of the 192 kHz seen is left out or folds, which these laws make smaller than 2·10⁻⁵ of the fundamental, but for
/// the square, whose figures in a band are taken.
#[test]
fn distorted_sines_read_their_closed_forms() {
    let wide = DistortionMeter::new(conditions(RATE, TONE, 20.0, 190e3), SAMPLES).unwrap();
    let audio = DistortionMeter::new(conditions(RATE, TONE, 20.0, 20e3), SAMPLES).unwrap();
    let five = DistortionMeter::new(conditions(RATE, TONE, 20.0, 5.5e3), SAMPLES).unwrap();
    let sine = tone(RATE, TONE, 1.0, SAMPLES);
    let mut checked = 0;
    for row in table("harmonics.csv") {
        let (case, rest) = (row[0].as_str(), row[1].as_str());
        let (parameter, quantity) = match rest.split_once(' ') {
            Some((p, q)) if p.contains('=') => (p, q),
            _ => ("", rest),
        };
        let p = parameter.split_once('=').map_or("0", |(_, v)| v);
        let Some(law) = law(case, p.parse().unwrap_or(0.0)) else {
            continue;
        };
        let expected: f64 = row[2].parse().unwrap();
        let meter = match (case, quantity) {
            ("square", "THD_F_1k_in_20k_(3..19)") => &audio,
            ("square", "THD_F_to_H5") => &five,
            ("square", _) => continue,
            _ => &wide,
        };
        let record: Vec<f64> = sine.iter().map(|s| law(*s)).collect();
        let read = meter.harmonics(&record).unwrap();
        let over = |n: usize| read.harmonics[n - 2] / read.fundamental;
        let value = match quantity {
            q if q.starts_with("THD_F") => read.thd(),
            "THD_R_inf" => read.thd_over_total(),
            q if q.starts_with("H2/") || q.starts_with("HD2") => over(2),
            q if q.starts_with("H3/") || q.starts_with("HD3") => over(3),
            q if q.starts_with("H4/") => over(4),
            q if q.starts_with("H5/") || q == "HD5" => over(5),
            q if q.starts_with("H7/") => over(7),
            "b1" | "fund" => read.fundamental * 2f64.sqrt(),
            _ => continue,
        };
        let error = (value - expected.abs()).abs();
        assert!(
            error < 2e-5 + 2e-5 * expected.abs(),
            "{case} {rest}: {value}, expected {expected}"
        );
        checked += 1;
    }
    assert!(checked > 90, "only {checked} rows were checked");
}

/// THD_R = THD_F/√(1 + THD_F²); a full square wave: √(π²/8 − 1) and its ratio, in the limit of all harmonics. Seen to 192 kHz, harmonics up to
/// 191 hold all but a share 1/(2·192) of the sum of odd 1/n².
#[test]
fn the_two_definitions_of_thd_differ_as_they_should() {
    let meter = DistortionMeter::new(conditions(RATE, TONE, 20.0, 192e3), SAMPLES).unwrap();
    let sine = tone(RATE, TONE, 1.0, SAMPLES);
    let square: Vec<f64> = sine.iter().map(|s| s.signum()).collect();
    let read = meter.harmonics(&square).unwrap();
    let tail = 1.0 / (2.0 * 192.0);
    let thd = (PI * PI / 8.0 - 1.0 - tail).sqrt();
    assert!((read.thd() - thd).abs() < 2e-4, "{} {thd}", read.thd());
    assert!((read.thd_over_total() - thd / (1.0 + thd * thd).sqrt()).abs() < 2e-4);
}

#[test]
fn a_pure_tone_reads_below_the_floor_wherever_it_lies() {
    let mut worst = (0f64, 0f64);
    for (rate, samples) in [(384_000.0, 384_000), (48_000.0, 48_000), (48_000.0, 4800)] {
        for frequency in [
            20.3, 180.01, 440.017, 997.0, 997.13, 1000.0, 1000.5, 3150.49, 8999.9,
        ] {
            let at = conditions(rate, frequency, 20.0, 20e3);
            // A tone of too few periods for this length is refused.
            let Ok(meter) = DistortionMeter::new(at, samples) else {
                continue;
            };
            let mut record = tone(rate, frequency, 0.5, samples);
            record.iter_mut().for_each(|x| *x += 2.5);
            let thd = meter.harmonics(&record).unwrap().thd();
            let thd_n = meter.residue(&record).unwrap().thd_n();
            assert!(thd < THD_FLOOR, "{frequency} Hz: {}", decibels(thd));
            assert!(thd_n < THD_N_FLOOR, "{frequency} Hz: {}", decibels(thd_n));
            worst = (worst.0.max(thd), worst.1.max(thd_n));
        }
    }
    println!(
        "floors: THD {:.1} dB, THD+N {:.1} dB",
        decibels(worst.0),
        decibels(worst.1)
    );
}

/// Where the floor ends the method sees: a second harmonic at −180 dB reads as such.
#[test]
fn a_harmonic_above_the_floor_is_read() {
    let at = conditions(48_000.0, TONE, 20.0, 20e3);
    let meter = DistortionMeter::new(at, 48_000).unwrap();
    let record = sum(
        &tone(48_000.0, TONE, 1.0, 48_000),
        &tone(48_000.0, 2.0 * TONE, 1e-9, 48_000),
    );
    let thd = meter.harmonics(&record).unwrap().thd();
    assert!((thd / 1e-9 - 1.0).abs() < 0.01, "{thd}");
}

/// An ideal quantiser of N bits: 6.0206·N + 1.7609 dB for a full-scale sine, 98.09 dB for 16 (Bennett, Bell Syst. Tech. J. 27 (1948) 446:
/// error uniform and independent of the signal, which holds within 0.1 dB at 16 bits).
#[test]
fn an_ideal_16_bit_quantiser_reads_98_db() {
    let at = conditions(48_000.0, 997.0, 0.0, 24e3);
    let meter = DistortionMeter::new(at, 48_000).unwrap();
    let record: Vec<f64> = tone(48_000.0, 997.0, 32_768.0, 48_000)
        .iter()
        .map(|x| x.round())
        .collect();
    let sinad = meter.residue(&record).unwrap().sinad_db();
    assert!(
        (sinad - (6.020_60 * 16.0 + 1.760_91)).abs() < 0.1,
        "{sinad}"
    );
}

/// IEC 61672-1, table 3 (A weighting), 34 nominal frequencies: the formula rounds to the table. The exact frequency of a band is 1000·10^(n/10) Hz.
#[test]
fn a_weighting_agrees_with_the_whole_table() {
    let rows = table("a_weighting.csv");
    assert_eq!(rows.len(), 34);
    for row in rows {
        let nominal: f64 = row[0].parse().unwrap();
        let exact = 1000.0 * 10f64.powf((10.0 * (nominal / 1000.0).log10()).round() / 10.0);
        let expected: f64 = row[4].parse().unwrap();
        let value = decibels(a_weighting(exact));
        assert!(
            (value - expected).abs() <= 0.05,
            "{nominal} Hz: {value}, table {expected}"
        );
    }
}

/// White noise from 20 Hz to 20 kHz reads 2.048 dB less with the A weighting (integral of the formula, computed apart from this program).
#[test]
fn white_noise_reads_its_power_flat_and_weighted() {
    let rate = 48_000.0;
    for sigma in [1e-6, 0.3] {
        let record = white(sigma, 11, 10 * 48_000);
        let read = idle_noise(&record, &conditions(rate, 1000.0, 20.0, 20e3)).unwrap();
        let expected = sigma * (2.0 * 19_980.0 / rate).sqrt();
        let flat = decibels(read.rms / expected);
        assert!(flat.abs() < 5.0 * read.scatter_db, "{flat} dB");
        assert!(read.scatter_db < 0.02);
        // The weighted band is about half as wide, and shares most of its noise with the flat one.
        let difference = decibels(read.rms_a / read.rms);
        assert!(
            (difference + 2.048).abs() < 5.0 * read.scatter_db,
            "{difference} dB"
        );
    }
}

/// The scatter the method states is the scatter it has: over 60 records the estimate of a deviation is good to 9 %.
#[test]
fn the_stated_scatter_of_noise_is_its_scatter() {
    for seconds in [1, 3] {
        let at = conditions(16_000.0, 1000.0, 300.0, 3400.0);
        let reads: Vec<_> = (0..60)
            .map(|seed| idle_noise(&white(1.0, 100 + seed, seconds * 16_000), &at).unwrap())
            .collect();
        let levels: Vec<f64> = reads.iter().map(|r| decibels(r.rms)).collect();
        let mean = levels.iter().sum::<f64>() / 60.0;
        let deviation = (levels.iter().map(|l| (l - mean).powi(2)).sum::<f64>() / 59.0).sqrt();
        let ratio = deviation / reads[0].scatter_db;
        assert!((ratio - 1.0).abs() < 0.36, "{seconds} s: {ratio}");
    }
}

#[test]
fn a_tone_in_known_noise_reads_its_ratio() {
    let (rate, samples) = (384_000.0, 384_000);
    let noise = white(1e-3, 21, samples);
    let signal = tone(rate, 1000.0, 2f64.sqrt(), samples);
    let at = conditions(rate, 1000.0, 20.0, 20e3);
    let idle = idle_noise(&noise, &at).unwrap();
    let in_band = 1e-3 * (2.0 * 19_980.0 / rate).sqrt();
    let expected = -decibels(in_band);

    let ratio = snr_db(1.0, idle.rms).unwrap();
    assert!(
        (ratio - expected).abs() < 5.0 * idle.scatter_db,
        "{ratio} {expected}"
    );
    // A record of 1 s under the narrow window of the distortion method scatters twice as much as a rectangle's, 0.03 dB; the total is in the ratio.
    let meter = DistortionMeter::new(at, samples).unwrap();
    let sinad = meter.residue(&sum(&signal, &noise)).unwrap().sinad_db();
    assert!((sinad - expected).abs() < 5.0 * 0.07, "{sinad} {expected}");
    assert_eq!(snr_db(1.0, 0.0), None);
}

#[test]
fn what_lies_outside_the_band_does_not_count() {
    let (rate, samples) = (384_000.0, 384_000);
    let noise = white(1e-6, 31, samples);
    let at = conditions(rate, 1000.0, 20.0, 20e3);
    let alone = idle_noise(&noise, &at).unwrap();
    // A line at 37.5 kHz a hundred thousand times as strong as the noise, and a quiescent value.
    let mut record = sum(&noise, &tone(rate, 37_500.0, 0.1, samples));
    record.iter_mut().for_each(|x| *x += 4.5);
    let beside = idle_noise(&record, &at).unwrap();
    assert!(decibels(beside.rms / alone.rms).abs() < 0.01);
}

#[test]
fn hum_is_the_root_sum_square_of_mains_multiples_in_the_band() {
    let (rate, samples) = (48_000.0, 48_000);
    let mut record = vec![1.0; samples];
    for (frequency, rms) in [
        (100.0, 3e-3),
        (200.0, 4e-3),
        (10.0, 1.0),
        (21_000.0, 1.0),
        (1025.0, 1.0),
    ] {
        record = sum(&record, &tone(rate, frequency, rms * 2f64.sqrt(), samples));
    }
    let at = conditions(rate, 1000.0, 20.0, 20e3);
    let hum = hum_rms(&record, &at, 50.0).unwrap();
    assert!((hum - 5e-3).abs() < 1e-9, "{hum}");
    assert!(hum_rms(&record[..10_000], &at, 50.0).is_err());
}

/// First-order corners: −3.0103 dB at f_c = 1/(2πRC), 47 kΩ with 100 nF 33.8628 Hz; a second-order low-pass of quality Q against its closed form.
#[test]
fn band_edges_of_known_responses() {
    let (low, high) = (33.8628, 15_915.5);
    let magnitude = |f: f64| (f / low) / (f / low).hypot(1.0) / (f / high).hypot(1.0);
    let edges = band_edges(magnitude, (20.0, 20e3));
    // The two corners are far apart: each moves the other by less than their ratio squared.
    assert!((edges.low.unwrap() / low - 1.0).abs() < 0.01);
    assert!((edges.high.unwrap() / high - 1.0).abs() < 0.01);
    assert!((edges.peak_hz / (low * high).sqrt() - 1.0).abs() < 1e-3);

    let single = |f: f64| 1.0 / (f / 1000.0).hypot(1.0);
    let edges = band_edges(single, (20.0, 20e3));
    assert_eq!(edges.low, Err(NoEdge::Below));
    // The largest value inside the band is at 20 Hz, where 1/√(1 + 0.0004) is left.
    let exact = 1000.0 * (2.0 * (1.0 + 0.0004f64) - 1.0).sqrt();
    assert!((edges.high.unwrap() / exact - 1.0).abs() < 1e-6);

    // A resonance: peak Q/√(1 − 1/4Q²) at f0·√(1 − 1/2Q²).
    let (f0, q) = (5000.0, 4.0);
    let resonance = |f: f64| {
        let x = f / f0;
        1.0 / (1.0 - x * x).hypot(x / q)
    };
    let edges = band_edges(resonance, (20.0, 20e3));
    assert!((edges.peak / (q / (1.0 - 0.25 / (q * q)).sqrt()) - 1.0).abs() < 1e-9);
    for (edge, sign) in [(edges.low, -1.0), (edges.high, 1.0)] {
        // (1 − y)² + y/Q² = 2·(1/peak²) for y = x².
        let (b, c) = (1.0 - 0.5 / (q * q), 1.0 - 2.0 / edges.peak.powi(2));
        let y = b + sign * (b * b - c).sqrt();
        assert!((edge.unwrap() / (f0 * y.sqrt()) - 1.0).abs() < 1e-6);
    }
    // The response at any edge is 3.0103 dB down.
    let edge = band_edges(resonance, (20.0, 20e3)).high.unwrap();
    assert!((decibels(resonance(edge) / edges.peak) + 3.0103).abs() < 1e-6);

    let flat = band_edges(|_| 2.0, (20.0, 20e3));
    assert_eq!(
        (flat.low, flat.high),
        (Err(NoEdge::Below), Err(NoEdge::Above))
    );
    assert_eq!(band_edges(|_| 0.0, (20.0, 20e3)).high, Err(NoEdge::Nothing));
}

#[test]
fn levels_are_relative_to_an_rms_value_of_one() {
    let mut meter = LevelMeter::default();
    let sine: Vec<f64> = (0..48_000)
        .map(|n| (TAU * f64::from(n) / 48.0).sin())
        .collect();
    for part in sine.chunks(777) {
        meter.add(part);
    }
    assert!((meter.rms_dbfs().unwrap() + 3.0103).abs() < 1e-4);
    assert!(meter.peak_dbfs().unwrap().abs() < 1e-9);
    assert_eq!(LevelMeter::default().rms_dbfs(), None);

    let mut residual = ResidualMeter::default();
    residual.add(&sine, &sine.iter().map(|x| 0.01 * x).collect::<Vec<_>>());
    assert!((residual.ratio_db().unwrap() - 40.0).abs() < 1e-9);
    assert!((residual.share().unwrap() - 0.01).abs() < 1e-12);
    assert_eq!(ResidualMeter::default().ratio_db(), None);
}

#[test]
fn what_cannot_be_measured_says_why() {
    let short = DistortionMeter::new(conditions(48_000.0, 50.0, 20.0, 20e3), 4800);
    assert!(matches!(
        short,
        Err(Unmeasurable::TooShort { needed: 17_280, .. })
    ));
    let outside = DistortionMeter::new(conditions(48_000.0, 10.0, 20.0, 20e3), 480_000);
    assert!(matches!(outside, Err(Unmeasurable::ToneOutsideBand { .. })));
    let wide = DistortionMeter::new(conditions(16_000.0, 1000.0, 20.0, 20e3), 16_000);
    assert!(matches!(wide, Err(Unmeasurable::Band { .. })));
    let meter = DistortionMeter::new(conditions(48_000.0, 1000.0, 20.0, 20e3), 48_000).unwrap();
    assert_eq!(
        meter.harmonics(&vec![4.5; 48_000]),
        Err(Unmeasurable::NoTone)
    );
    let mut broken = tone(48_000.0, 1000.0, 1.0, 48_000);
    broken[17] = f64::INFINITY;
    assert_eq!(meter.harmonics(&broken), Err(Unmeasurable::NotFinite(17)));
}
