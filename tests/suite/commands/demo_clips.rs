//! The demo clips are what their README says.

use std::path::Path;

use hound::SampleFormat;

use super::read_wav;

/// Name, sample rate (Hz), length (s), peak (dBFS; the staircase starts at full scale), as `demo-audio/README.md` has them.
const CLIPS: [(&str, u32, f64, f64); 5] = [
    ("dome-talkback.wav", 48_000, 8.9, -1.0),
    ("reading-desk.wav", 44_100, 6.0, -1.0),
    ("small-piece.wav", 48_000, 8.0, -1.0),
    ("staircase.wav", 48_000, 5.5, 0.0),
    ("sweep.wav", 48_000, 6.0, -6.0),
];

#[test]
fn the_demo_clips_are_what_their_readme_says() {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join("demo-audio");
    for (name, rate, seconds, peak) in CLIPS {
        let (spec, samples) = read_wav(&folder.join(name));
        assert_eq!((spec.channels, spec.bits_per_sample), (1, 16), "{name}");
        assert_eq!(spec.sample_format, SampleFormat::Int, "{name}");
        assert_eq!(spec.sample_rate, rate, "{name}");
        // As the README rounds them.
        let length = samples.len() as f64 / f64::from(rate);
        assert!((length - seconds).abs() <= 0.05, "{name} lasts {length} s");
        let largest = samples.iter().fold(0.0f64, |m, x| m.max(x.abs()));
        let level = 20.0 * largest.log10();
        assert!((level - peak).abs() < 0.05, "{name} peaks at {level} dBFS");
    }
}

#[test]
fn the_talkback_has_a_pause_of_digital_silence() {
    let clip = Path::new(env!("CARGO_MANIFEST_DIR")).join("demo-audio/dome-talkback.wav");
    let (spec, samples) = read_wav(&clip);
    let (mut longest, mut run) = (0usize, 0usize);
    for x in samples {
        run = if x == 0.0 { run + 1 } else { 0 };
        longest = longest.max(run);
    }
    let seconds = longest as f64 / f64::from(spec.sample_rate);
    assert!((seconds - 1.2).abs() < 0.1, "{seconds} s");
}
