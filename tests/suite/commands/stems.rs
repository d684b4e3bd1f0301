//! `render --stems`: what the noise and the distortion added, each as a file.

use hound::SampleFormat;

use super::{Folder, config, largest_difference, read_wav, tone};

const STEMS: [&str; 3] = [
    "received.clean.wav",
    "received.noise.wav",
    "received.distortion.wav",
];

fn with_stems(folder: &Folder, design: &str, more: &[&str]) {
    let args = [
        "render",
        design,
        "--input",
        "sent.wav",
        "--output",
        "received.wav",
        "--stems",
    ];
    folder.run(&[&args, more].concat()).expect(0);
}

#[test]
fn the_stems_add_up_to_the_received_file() {
    let folder = Folder::new();
    // Beyond full scale at the output, where only float carries on: 12 dB up, the dome's amplifiers clip.
    folder.sent(48_000, &tone(48_000, 1000.0, 0.9, 9600));
    with_stems(&folder, &config("dome-talkback.toml"), &["--drive", "12"]);
    let (spec, full) = read_wav(&folder.path("received.wav"));
    assert_eq!(
        (spec.sample_format, spec.bits_per_sample),
        (SampleFormat::Float, 32)
    );
    let mut sum = vec![0.0; full.len()];
    for stem in STEMS {
        let (of_stem, samples) = read_wav(&folder.path(stem));
        assert_eq!(of_stem, spec, "{stem}");
        assert!(
            samples.iter().any(|x| x.abs() > 1e-4),
            "{stem} holds something"
        );
        sum.iter_mut().zip(&samples).for_each(|(s, x)| *s += x);
    }
    // Four values, each rounded to 24 bits, none above 8: half a step of 2^-21 at the most.
    assert!(full.iter().all(|x| x.abs() < 8.0));
    assert!(largest_difference(&sum, &full) <= 4.0 * 2f64.powi(-22));
}

#[test]
fn a_straight_link_adds_nothing() {
    let folder = Folder::new();
    folder.sent(48_000, &tone(48_000, 1000.0, 0.5, 4800));
    with_stems(&folder, "straight.toml", &[]);
    let (_, full) = read_wav(&folder.path("received.wav"));
    let (_, clean) = read_wav(&folder.path("received.clean.wav"));
    assert!(largest_difference(&full, &clean) < 1e-7);
    for stem in &STEMS[1..] {
        let (_, samples) = read_wav(&folder.path(stem));
        assert!(samples.iter().all(|x| x.abs() < 1e-7), "{stem}");
    }
}

#[test]
fn stems_do_not_change_the_received_file() {
    let folder = Folder::new();
    folder.sent(48_000, &tone(48_000, 1000.0, 0.5, 4800));
    let design = config("dome-talkback.toml");
    with_stems(&folder, &design, &[]);
    let (_, one) = read_wav(&folder.path("received.wav"));
    let args = [
        "render",
        &design,
        "--input",
        "sent.wav",
        "--output",
        "alone.wav",
    ];
    folder.run(&args).expect(0);
    assert_eq!(read_wav(&folder.path("alone.wav")).1, one);
}

#[test]
fn stems_take_the_asked_for_format() {
    let folder = Folder::new();
    folder.sent(48_000, &tone(48_000, 1000.0, 0.5, 480));
    with_stems(&folder, "straight.toml", &["--bits", "24"]);
    for name in ["received.wav"].iter().chain(&STEMS) {
        let (spec, _) = read_wav(&folder.path(name));
        assert_eq!(
            (spec.sample_format, spec.bits_per_sample),
            (SampleFormat::Int, 24),
            "{name}"
        );
    }
}
