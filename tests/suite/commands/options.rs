//! The options of `render`, each by what it does to the received file.

use hound::{SampleFormat, WavSpec};

use super::{Folder, burst, config, largest_difference, read_wav, tone, write_wav};

/// A folder with a burst of 1 kHz as `sent.wav`, and the burst.
fn with_burst() -> (Folder, Vec<f64>) {
    let folder = Folder::new();
    let sent = burst(48_000, 1000.0, 0.25, 2400);
    folder.sent(48_000, &sent);
    (folder, sent)
}

fn received(folder: &Folder) -> (WavSpec, Vec<f64>) {
    read_wav(&folder.path("received.wav"))
}

fn dome(folder: &Folder, more: &[&str]) {
    let design = config("dome-talkback.toml");
    let args = [
        "render",
        &design,
        "--input",
        "sent.wav",
        "--output",
        "received.wav",
    ];
    folder.run(&[&args, more].concat()).expect(0);
}

#[test]
fn bits_set_the_sample_format() {
    let (folder, sent) = with_burst();
    for (bits, expected, format) in [
        ("16", 16, SampleFormat::Int),
        ("24", 24, SampleFormat::Int),
        ("32f", 32, SampleFormat::Float),
    ] {
        folder.render(&["--bits", bits]).expect(0);
        let (spec, samples) = received(&folder);
        assert_eq!(
            (spec.bits_per_sample, spec.sample_format),
            (expected, format)
        );
        // Triangular dither of a step either way and half a step of rounding.
        let apart = largest_difference(&sent, &samples);
        assert!(
            apart < 1e-5 + 1.5 * 2f64.powi(1 - expected as i32),
            "{apart}"
        );
    }
}

#[test]
fn mono_is_the_mean_of_the_channels() {
    let folder = Folder::new();
    let (left, right) = (
        burst(48_000, 1000.0, 0.5, 2400),
        burst(48_000, 400.0, 0.3, 2400),
    );
    let both: Vec<f64> = left
        .iter()
        .zip(&right)
        .flat_map(|(l, r)| [*l, *r])
        .collect();
    let spec = WavSpec {
        channels: 2,
        sample_rate: 48_000,
        bits_per_sample: 32,
        sample_format: SampleFormat::Float,
    };
    write_wav(&folder.path("sent.wav"), spec, &both);
    folder.render(&["--mono"]).expect(0);
    let (spec, samples) = received(&folder);
    assert_eq!(spec.channels, 1);
    let mean: Vec<f64> = left
        .iter()
        .zip(&right)
        .map(|(l, r)| (l + r) / 2.0)
        .collect();
    assert!(largest_difference(&mean, &samples) < 1e-5);
}

#[test]
fn mono_leaves_a_mono_input_alone() {
    let (folder, sent) = with_burst();
    folder.render(&["--mono"]).expect(0);
    assert!(largest_difference(&sent, &received(&folder).1) < 1e-5);
}

#[test]
fn drive_changes_the_level_at_the_source() {
    let (folder, sent) = with_burst();
    for (drive, gain) in [("-6", -6.0), ("6 dB", 6.0), ("-12.5dB", -12.5)] {
        folder.render(&["--drive", drive]).expect(0);
        let expected: Vec<f64> = sent.iter().map(|x| x * 10f64.powf(gain / 20.0)).collect();
        assert!(
            largest_difference(&expected, &received(&folder).1) < 1e-5,
            "{drive}"
        );
    }
}

#[test]
fn drive_and_cold_are_said_in_the_result() {
    let (folder, _) = with_burst();
    let done = folder
        .render(&["--drive", "-6", "--cold", "--json"])
        .expect(0);
    assert_eq!(done.json()["programme"]["drive_db"], -6.0);
    assert_eq!(done.json()["programme"]["cold"], true);
    let text = folder.render(&["--drive", "-6"]).expect(0);
    assert!(text.text().contains("-6 dB"), "{}", text.text());
}

#[test]
fn samples_beyond_full_scale_are_counted_and_clipped_in_integers_only() {
    let folder = Folder::new();
    folder.sent(48_000, &burst(48_000, 1000.0, 1.0, 4800));
    for (bits, float) in [("16", false), ("32f", true)] {
        let more = ["--drive", "6", "--bits", bits, "--json"];
        let json = folder.render(&more).expect(0).json();
        let (_, samples) = received(&folder);
        let beyond = json["figures"]["clipped_samples"]
            .as_u64()
            .expect("a count");
        assert!(beyond > 0);
        assert_eq!(
            json["channels"][0]["clipped_samples"].as_u64(),
            Some(beyond)
        );
        let peak = samples.iter().fold(0.0f64, |m, x| m.max(x.abs()));
        if float {
            assert!(peak > 1.9);
            let found = samples.iter().filter(|x| x.abs() >= 1.0).count();
            assert_eq!(found as u64, beyond);
        } else {
            assert!(peak <= 1.0);
        }
    }
}

#[test]
fn every_oversampling_gives_the_straight_link_the_same_file() {
    let (folder, sent) = with_burst();
    for factor in ["1", "2", "4", "8", "16", "32", "auto"] {
        folder.render(&["--oversample", factor]).expect(0);
        let apart = largest_difference(&sent, &received(&folder).1);
        assert!(apart < 1e-5, "{factor}: {apart}");
    }
}

#[test]
fn oversampling_is_said_in_the_result() {
    let (folder, _) = with_burst();
    for (asked, factor) in [("2", 2), ("auto", 8)] {
        let json = folder
            .render(&["--oversample", asked, "--json"])
            .expect(0)
            .json();
        assert_eq!(json["programme"]["oversample"], factor);
        assert_eq!(
            json["programme"]["link_rate_hz"],
            48_000.0 * f64::from(factor)
        );
    }
}

#[test]
fn a_cold_start_differs_at_first_and_comes_to_rest() {
    let folder = Folder::new();
    folder.sent(8_000, &[0.0; 8_000]);
    let quiet = ["--set", "source.noise=0", "--stems"];
    dome(&folder, &quiet);
    let (_, warm) = read_wav(&folder.path("received.clean.wav"));
    dome(&folder, &[&quiet[..], &["--cold"]].concat());
    let (_, cold) = read_wav(&folder.path("received.clean.wav"));
    assert!(
        warm.iter().all(|x| x.abs() < 1e-6),
        "a settled link is silent"
    );
    let largest = |part: &[f64]| part.iter().fold(0.0f64, |m, x| m.max(x.abs()));
    let (first, last) = (largest(&cold[..800]), largest(&cold[7_200..]));
    assert!(first > 1e-3, "charging is seen: {first}");
    // The slowest of its couplings, 220 nF into 47 kΩ or 1 µF into 10 kΩ, take 10 ms; the LED warms in 15 ms.
    assert!(last < 1e-3 * first, "and over after 0.9 s: {last}");
}

#[test]
fn the_seed_sets_the_noise_and_nothing_else() {
    let folder = Folder::new();
    folder.sent(48_000, &tone(48_000, 1000.0, 0.25, 2400));
    let mut noises = Vec::new();
    let mut cleans = Vec::new();
    for more in [
        &["--seed", "7"][..],
        &["--seed", "8"],
        &["--seed", "7"],
        &["--set", "seed=7"],
        &["--set", "seed=8", "--seed", "7"],
    ] {
        dome(&folder, &[more, &["--stems"]].concat());
        noises.push(folder.bytes("received.noise.wav"));
        cleans.push(folder.bytes("received.clean.wav"));
    }
    assert!(noises[0] != noises[1], "another seed, another noise");
    assert!(noises[0] == noises[2], "the same seed, the same noise");
    assert!(noises[0] == noises[3], "the design may give the seed");
    assert!(
        noises[0] == noises[4],
        "the command line goes before the design"
    );
    assert!(cleans.iter().all(|c| *c == cleans[0]));
}

#[test]
fn a_value_is_set_by_the_number_or_the_name_of_its_stage() {
    let folder = Folder::new();
    folder.sent(48_000, &burst(48_000, 1000.0, 0.1, 2400));
    let mut heard = Vec::new();
    for set in [
        "receiver.stage.2.feedback=10k",
        "receiver.stage.preamp.feedback=10 kΩ",
        "path.distance=3 m",
    ] {
        dome(&folder, &["--set", set]);
        heard.push(received(&folder).1);
    }
    assert_eq!(heard[0], heard[1]);
    // 1 + 22/10 becomes 1 + 10/10.
    let power = |x: &[f64]| x.iter().map(|x| x * x).sum::<f64>().sqrt();
    let ratio = power(&heard[0]) / power(&heard[2]);
    assert!((ratio / (2.0 / 3.2) - 1.0).abs() < 0.01, "{ratio}");
}

#[test]
fn the_last_of_two_settings_counts() {
    let (folder, sent) = with_burst();
    folder
        .render(&[
            "--set",
            "source.full_scale=1 mV",
            "--set",
            "source.full_scale=2 V",
        ])
        .expect(0);
    let twice: Vec<f64> = sent.iter().map(|x| 2.0 * x).collect();
    assert!(largest_difference(&twice, &received(&folder).1) < 1e-5);
}
