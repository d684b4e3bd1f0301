//! Scintillation and sway in time, against the laws they are drawn from.

use harklight::link::Link;
use harklight::physics::turbulence::{Irradiance, log_variances, rytov_variance};
use harklight::signal::spectrum::Analyser;
use harklight::station::{Conditions, Curves};

use super::light_path::{link, path_of, reading, shares};

const RATE: f64 = 1000.0;

fn air(keys: &str, sets: &[&str]) -> Link {
    link(&format!("kind = \"air\"\n{keys}"), "", sets)
}

/// Unmodulated light at 1 kHz over the light at rest, the first second left out.
fn light(link: &Link, seed: u64, seconds: usize) -> Vec<f64> {
    let conditions = link.conditions(RATE, seed);
    let mut all = shares(link, &conditions, (seconds + 1) * RATE as usize);
    all.drain(..RATE as usize);
    all
}

fn mean(x: &[f64]) -> f64 {
    x.iter().sum::<f64>() / x.len() as f64
}

/// Weak (log-normal) and strong (gamma-gamma) turbulence, with a corner of 10 Hz.
const WEAK: &str = "distance = \"500 m\"\nturbulence = \"2e-14 m^-2/3\"\nwind = \"0.51677 m/s\"\n";
const STRONG: &str = "distance = \"1 km\"\nturbulence = \"1e-13 m^-2/3\"\nwind = \"0.73081 m/s\"\n";

#[test]
fn irradiance_has_the_law_s_mean_variance_and_fades() {
    for (keys, structure, distance) in [(WEAK, 2e-14, 500.0), (STRONG, 1e-13, 1000.0)] {
        // A detector so small that nothing is averaged out.
        let link = air(keys, &["receiver.detector.area=0.01 mm²"]);
        let path = path_of(&link);
        assert!((reading(path, "scintillation corner") / 10.0 - 1.0).abs() < 1e-4);
        let rytov = rytov_variance(structure, 850e-9, distance);
        assert!((reading(path, "Rytov variance") / rytov - 1.0).abs() < 1e-12);
        // Below a Rytov variance of 1 exp(σ²) − 1, above it 1/α + 1/β + 1/(αβ) = exp(σ²_x + σ²_y) − 1.
        let (x, y) = log_variances(rytov);
        let index = if rytov < 1.0 {
            rytov.exp_m1()
        } else {
            (x + y).exp_m1()
        };
        let got_index = reading(path, "scintillation index");
        assert!((got_index / index - 1.0).abs() < 1e-3);

        // Five seeds of 400 s. The variance of a mean over T is S(0)/T: a process of that spectrum is worth ∫(1 + (f/f₀)²)^(−4/3) df = 2.24·f₀
        // independent values a second, its squares rather more. Four deviations are allowed.
        let all: Vec<f64> = (1..=5).flat_map(|seed| light(&link, seed, 400)).collect();
        let values = 2000.0 * 22.4;
        let average = mean(&all);
        assert!(
            (average - 1.0).abs() < 4.0 * (index / values).sqrt(),
            "{average}"
        );
        let squares: Vec<f64> = all.iter().map(|i| (i - 1.0).powi(2)).collect();
        let fourth = mean(&squares.iter().map(|s| s * s).collect::<Vec<_>>());
        let scatter = ((fourth - index * index) / values).sqrt();
        let variance = mean(&squares);
        assert!(
            (variance - index).abs() < 4.0 * scatter,
            "{variance} {index} ± {scatter}"
        );

        // Fades under several depths, and surges.
        let law = Irradiance::new(rytov, 1.0);
        for depth in [0.1, 0.3, 0.7, 1.0, 2.0] {
            let p = law.below(depth);
            let got = all.iter().filter(|i| **i < depth).count() as f64 / all.len() as f64;
            let scatter = (p * (1.0 - p) / values).sqrt();
            assert!(
                (got - p).abs() < 4.0 * scatter + 2e-4,
                "{depth}: {got} {p} ± {scatter}"
            );
        }
        let deep = reading(path, "fades of 1 % of the time");
        assert!((law.below(10f64.powf(deep / 10.0)) - 0.01).abs() < 1e-3);
    }
}

#[test]
fn scintillation_falls_as_the_eighth_third_power_above_its_corner() {
    let link = air(WEAK, &["receiver.detector.area=0.01 mm²"]);
    let logs: Vec<f64> = light(&link, 3, 1500).iter().map(|i| i.ln()).collect();
    let average = mean(&logs);
    let centred: Vec<f64> = logs.iter().map(|l| l - average).collect();
    let spectrum = Analyser::new(RATE, 4096, 9.0).average(&centred);
    let density = |f: f64| spectrum.band_power(0.9 * f, 1.1 * f) / (0.2 * f);
    let level = spectrum.band_power(0.5, 2.0) / 1.5;
    for f in [5.0, 10.0, 20.0, 40.0] {
        let law = |f: f64| (1.0 + (f / 10.0_f64).powi(2)).powf(-4.0 / 3.0);
        let db = 10.0 * (density(f) / level * law(1.2) / law(f)).log10();
        // A tenth of a decade over 700 windows; the lowest band scatters by 0.1 dB.
        assert!(db.abs() < 0.5, "{f} Hz: {db} dB");
    }
}

#[test]
fn the_aperture_averages() {
    // Andrews 1992 at 25 mm, 1 km, 850 nm: 0.393021 of the index, which at a point is exp(0.401291) − 1 = 0.493752.
    let keys = "distance = \"1 km\"\nturbulence = \"1e-14 m^-2/3\"\nwind = \"2 m/s\"\n";
    let small = air(keys, &["receiver.optics.aperture=0.01 mm"]);
    let wide = air(keys, &["receiver.optics.aperture=25 mm"]);
    let index = |link: &Link| reading(path_of(link), "scintillation index");
    assert!((index(&small) / 0.493752 - 1.0).abs() < 1e-4);
    assert!((index(&wide) / index(&small) / 0.393021 - 1.0).abs() < 1e-4);
    assert!((reading(path_of(&wide), "scintillation corner") / 27.3672 - 1.0).abs() < 1e-5);
}

#[test]
fn fades_are_the_same_in_every_run_channel_block_and_rate() {
    let keys = STRONG.to_string() + "sway = \"5°\"\nsway_bandwidth = \"3 Hz\"\n";
    let link = air(&keys, &[]);
    let full = link.conditions(48e3, 7);
    let reference = shares(&link, &full, 48_000);
    let clean = Conditions {
        noise: false,
        lamps: false,
        curves: Curves::Straight,
        channel: 1,
        ..full.clone()
    };
    assert_eq!(reference, shares(&link, &clean, 48_000));
    assert_ne!(reference, shares(&link, &link.conditions(48e3, 8), 48_000));
    // Sample by sample instead of in blocks.
    let path = path_of(&link);
    let rest = reading(path, "on the detector");
    let mut runner = path.runner(&full);
    for share in &reference[..5000] {
        let mut one = [0.0];
        runner.run(&mut one, &[]);
        assert_eq!(1.0 + one[0] / rest, *share);
    }
    // Four times the rate: the same light at the same times.
    let fine = shares(&link, &link.conditions(192e3, 7), 192_000);
    for (n, share) in reference.iter().enumerate() {
        assert!((fine[4 * n] - share).abs() < 1e-9, "{n}");
    }
    // From rest, and without a step: neighbours four times closer differ four times less.
    assert_eq!(reference[0], 1.0);
    let step = |x: &[f64]| {
        x.windows(2)
            .map(|w| (w[1] - w[0]).abs())
            .fold(0.0, f64::max)
    };
    assert!(step(&fine) < 0.26 * step(&reference));
    assert!(fine.iter().all(|s| *s >= 0.0));
    assert!(
        shares(
            &link,
            &Conditions {
                fades: false,
                ..full
            },
            100
        )
        .iter()
        .all(|s| *s == 1.0)
    );
}

#[test]
fn sway_loses_its_mean_and_keeps_its_bandwidth() {
    // A narrow beam, onto an aperture far smaller than it: log of the light is −2(o/w)², o² = d²(θx² + θy²).
    let keys = "distance = \"20 m\"\nsway = \"0.1°\"\nsway_bandwidth = \"10 Hz\"\n";
    let beam = super::light_path::text(&format!("kind = \"air\"\n{keys}"), "")
        .replace("half_angle = \"60°\"", "divergence = \"0.5°\"").replace("source_diameter = 0", "source_diameter = \"20 mm\"")
        .replace("area = \"1 cm²\"", "area = \"1 mm²\"")
        .replace("part = \"ir-led-wide\"", "linewidth = \"40 nm\"\nlow_current = 0\ndroop_current = \"inf\"\nsaturation_current = \"1 pA\"\nideality = 1.5\nseries_resistance = 1\nbandwidth = \"10 MHz\"\nthermal_time = 0\nflux_temperature = 0\nmax_current = \"100 mA\"");
    let design =
        harklight::design::Design::from_text("t.toml", &beam, std::path::Path::new("."), &[]);
    let link = Link::new(&design.unwrap_or_else(|e| panic!("{e:?}"))).unwrap();
    let path = path_of(&link);
    let w = 0.01 + 20.0 * 0.25_f64.to_radians().tan();
    let stray = 20.0 * 0.1_f64.to_radians();
    let expected = 1.0 / (1.0 + 4.0 * (stray / w).powi(2));
    let told = 10f64.powf(-reading(path, "mean loss by sway") / 10.0);
    assert!((told / expected - 1.0).abs() < 1e-3, "{told} {expected}");
    let light: Vec<f64> = (1..=4).flat_map(|seed| light(&link, seed, 300)).collect();
    // Two poles of 15.54 Hz each: ∫(1 + (f/f_p)²)^(−2) df = 24.4 independent values a second, at the least.
    let squares = mean(&light.iter().map(|l| l * l).collect::<Vec<_>>());
    let scatter = ((squares - expected * expected) / (1200.0 * 24.4)).sqrt();
    let average = mean(&light);
    assert!(
        (average - expected).abs() < 4.0 * scatter,
        "{average} {expected} ± {scatter}"
    );
    // The offset squared has an exponential law of mean 2σ²d²: P(light < s) = P(o² > w²/2·ln 1/s).
    for depth in [0.1_f64, 0.4, 0.8] {
        let p = (w * w / 2.0 * depth.ln() / (2.0 * stray * stray)).exp();
        let got = light.iter().filter(|l| **l < depth).count() as f64 / light.len() as f64;
        let scatter = (p * (1.0 - p) / (1200.0 * 24.4)).sqrt();
        assert!((got - p).abs() < 4.0 * scatter + 1e-3, "{depth}: {got} {p}");
    }
}

#[test]
fn sway_of_a_lambertian_emitter_follows_the_cosine() {
    // Order 1: the light over the light at rest has the mean e^(−σ²) whatever the offset (closed form).
    let keys =
        "distance = \"3 m\"\noff_axis = \"20°\"\nsway = \"3°\"\nsway_bandwidth = \"10 Hz\"\n";
    let link = air(keys, &[]);
    let expected = (-(3.0_f64.to_radians().powi(2))).exp();
    let told = 10f64.powf(-reading(path_of(&link), "mean loss by sway") / 10.0);
    assert!((told / expected - 1.0).abs() < 1e-6, "{told} {expected}");
    let light = light(&link, 1, 400);
    // rms of the light: tan 20° times the sway along the offset, to the first order.
    let deviation = 20.0_f64.to_radians().tan() * 3.0_f64.to_radians();
    let average = mean(&light);
    let rms = mean(
        &light
            .iter()
            .map(|l| (l - average).powi(2))
            .collect::<Vec<_>>(),
    )
    .sqrt();
    assert!((rms / deviation - 1.0).abs() < 0.04, "{rms} {deviation}");
    // The band: −3 dB at 10 Hz.
    let centred: Vec<f64> = light.iter().map(|l| l - average).collect();
    let spectrum = Analyser::new(RATE, 8192, 9.0).average(&centred);
    // The law over the same bands as the measurement: two poles, together −3 dB at 10 Hz.
    let law = |f: f64| (1.0 + (f / 15.538_f64).powi(2)).powi(-2);
    let mean_law = |from: f64, to: f64| {
        let at = |k: i32| law(from + (to - from) * (f64::from(k) + 0.5) / 200.0);
        (0..200).map(at).sum::<f64>() / 200.0
    };
    assert!((law(10.0) - 0.5).abs() < 1e-3);
    let level = spectrum.band_power(0.5, 3.0) / 2.5 / mean_law(0.5, 3.0);
    for f in [10.0, 30.0, 60.0] {
        let (from, to) = (0.85 * f, 1.15 * f);
        let got = spectrum.band_power(from, to) / (to - from) / level;
        let db = 10.0 * (got / mean_law(from, to)).log10();
        // The lowest band holds 1000 values: 0.14 dB.
        assert!(db.abs() < 0.5, "{f} Hz: {db} dB");
    }
}

#[test]
fn what_is_out_of_range_is_warned_of() {
    let warns = |keys: &str, words: &str| {
        let link = air(keys, &[]);
        let all = link.warnings();
        assert!(all.iter().any(|w| w.contains(words)), "{all:?}");
    };
    warns(
        "distance = \"5 km\"\nturbulence = \"1e-12 m^-2/3\"\nwind = \"2 m/s\"\n",
        "Rytov variance",
    );
    warns(
        "distance = \"100 m\"\nturbulence = \"1e-14 m^-2/3\"\nwind = 0\n",
        "stands still",
    );
    warns(
        "distance = \"3 m\"\nsway = \"40°\"\nsway_bandwidth = \"2 Hz\"\n",
        "on the average",
    );
    // Nothing breaks out there.
    for keys in [
        "distance = \"100 km\"\nturbulence = 1\nwind = \"1e9 m/s\"\n",
        "distance = \"100 m\"\nturbulence = \"1e-14 m^-2/3\"\nwind = 0\nsway = \"80°\"\nsway_bandwidth = \"1 GHz\"\n",
        "distance = \"1 mm\"\nturbulence = 1e-300\nwind = \"1 m/s\"\n",
    ] {
        let link = air(keys, &[]);
        let mut runner = path_of(&link).runner(&link.conditions(48e3, 1));
        let mut block: Vec<f64> = (0..4800)
            .map(|n| if n % 7 == 0 { 1e6 } else { -1e6 })
            .collect();
        runner.run(&mut block, &[]);
        assert!(block.iter().all(|x| x.is_finite()), "{keys}");
    }
}
