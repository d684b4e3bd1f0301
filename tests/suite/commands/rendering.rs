//! The main job: the received file has the input's length, format and time axis, whatever the input is.

use hound::{SampleFormat, WavSpec};

use super::{Folder, burst, config, largest_difference, read_wav, tone, write_wav};

/// Frames of the short inputs: an odd number, so that no block or pad byte hides a lost one.
const FRAMES: usize = 1237;

fn spec(rate: u32, channels: u16, bits: u16, sample_format: SampleFormat) -> WavSpec {
    WavSpec {
        channels,
        sample_rate: rate,
        bits_per_sample: bits,
        sample_format,
    }
}

#[test]
fn every_format_comes_back_in_its_format_and_length() {
    let folder = Folder::new();
    for bits in [8, 16, 24, 32] {
        for channels in [1, 2] {
            let sent = spec(48_000, channels, bits, SampleFormat::Int);
            // What `hound` writes: a plain header up to two channels of 16 bits, an extensible one beyond.
            comes_back(&folder, sent);
        }
    }
    for channels in [1, 2] {
        comes_back(&folder, spec(48_000, channels, 32, SampleFormat::Float));
    }
}

#[test]
fn every_sample_rate_comes_back() {
    let folder = Folder::new();
    let rates = [
        8_000, 11_025, 16_000, 22_050, 32_000, 44_100, 88_200, 96_000, 176_400, 192_000,
    ];
    for rate in rates {
        comes_back(&folder, spec(rate, 1, 16, SampleFormat::Int));
    }
}

/// Sends a tone through the straight link and asserts that header, length and samples are the sent ones.
#[track_caller]
fn comes_back(folder: &Folder, sent: WavSpec) {
    let channels = usize::from(sent.channels);
    let left = burst(sent.sample_rate, 1000.0, 0.5, FRAMES);
    let right = burst(sent.sample_rate, 500.0, 0.25, FRAMES);
    let samples: Vec<f64> = left
        .iter()
        .zip(&right)
        .flat_map(|(l, r)| [*l, *r].into_iter().take(channels))
        .collect();
    write_wav(&folder.path("sent.wav"), sent, &samples);
    let done = folder.render(&[]).expect(0);
    assert_eq!(done.err, "", "a clean run has nothing to say");
    let (spec, received) = read_wav(&folder.path("received.wav"));
    assert_eq!(spec, sent);
    assert_eq!(received.len(), samples.len());
    // The sent file's rounding, up to half a step, and the output's triangular dither with its rounding, up to a step and a half.
    // The converters' pass band is flat within 0.05 dB only at its far end; here 1e-5.
    let step = if sent.sample_format == SampleFormat::Float {
        0.0
    } else {
        2f64.powi(1 - i32::from(sent.bits_per_sample))
    };
    let apart = largest_difference(&samples, &received);
    assert!(
        apart <= 2.0 * step + 1e-5,
        "{sent:?}: samples are {apart} apart"
    );
}

#[test]
fn a_plain_header_of_24_bits_is_read() {
    // `hound` writes 24 bits with an extensible header only: this one is laid out by hand (44 bytes, RIFF "fmt " of 16 bytes).
    let folder = Folder::new();
    let samples = burst(48_000, 1000.0, 0.5, 1000);
    let data: Vec<u8> = samples
        .iter()
        .flat_map(|x| ((x * 8_388_608.0).round() as i32).to_le_bytes()[..3].to_vec())
        .collect();
    let mut bytes = Vec::new();
    bytes.extend(b"RIFF");
    bytes.extend((36 + data.len() as u32).to_le_bytes());
    bytes.extend(b"WAVEfmt ");
    bytes.extend(16u32.to_le_bytes());
    bytes.extend(1u16.to_le_bytes());
    bytes.extend(1u16.to_le_bytes());
    bytes.extend(48_000u32.to_le_bytes());
    bytes.extend((3 * 48_000u32).to_le_bytes());
    bytes.extend(3u16.to_le_bytes());
    bytes.extend(24u16.to_le_bytes());
    bytes.extend(b"data");
    bytes.extend((data.len() as u32).to_le_bytes());
    bytes.extend(&data);
    folder.write("sent.wav", bytes);
    folder.render(&[]).expect(0);
    let (spec, received) = read_wav(&folder.path("received.wav"));
    assert_eq!((spec.bits_per_sample, spec.sample_rate), (24, 48_000));
    assert!(largest_difference(&samples, &received) < 1e-5);
}

#[test]
fn an_impulse_comes_out_at_its_sample() {
    let folder = Folder::new();
    for (rate, at) in [
        (8_000, 0),
        (44_100, 517),
        (48_000, 1),
        (96_000, 4095),
        (192_000, 4999),
    ] {
        let mut sent = vec![0.0; 5000];
        sent[at] = 0.5;
        folder.sent(rate, &sent);
        folder.render(&[]).expect(0);
        let (_, received) = read_wav(&folder.path("received.wav"));
        let top = (0..received.len())
            .max_by(|a, b| received[*a].total_cmp(&received[*b]))
            .unwrap_or_default();
        assert_eq!(top, at, "at {rate} Hz");
        // Whole at the file's very ends too: what the converters ring beyond them is not cut off. 0.05 dB of flatness to 0.45 of the rate leave
        // at least 0.97 of the peak.
        assert!(received[at] > 0.97 * 0.5, "at {rate} Hz: {}", received[at]);
        // No delay of part of a sample either: the response is even about its sample, as far as the file goes.
        for k in 1..=at.min(4999 - at).min(400) {
            let (before, after) = (received[at - k], received[at + k]);
            assert!(
                (before - after).abs() < 1e-6,
                "{rate} Hz, {k} from the impulse: {before} and {after}"
            );
        }
    }
}

#[test]
fn without_oversampling_the_straight_link_is_a_wire() {
    let folder = Folder::new();
    let sent = tone(48_000, 997.0, 0.7, FRAMES);
    folder.sent(48_000, &sent);
    folder.render(&["--oversample", "1"]).expect(0);
    let (_, received) = read_wav(&folder.path("received.wav"));
    // Single precision carries 24 bits: half a step of 2^-24 below 1, twice.
    assert!(largest_difference(&sent, &received) < 2f64.powi(-24));
}

#[test]
fn channels_carry_the_same_signal_and_noises_of_their_own() {
    let folder = Folder::new();
    let frames = tone(48_000, 1000.0, 0.5, 4800);
    let both: Vec<f64> = frames.iter().flat_map(|x| [*x, *x]).collect();
    let sent = spec(48_000, 2, 32, SampleFormat::Float);
    write_wav(&folder.path("sent.wav"), sent, &both);
    let design = config("dome-talkback.toml");
    let args = ["--input", "sent.wav", "--output", "received.wav", "--stems"];
    folder
        .run(&[&["render", design.as_str()], &args[..]].concat())
        .expect(0);
    let side = |name: &str, at: usize| -> Vec<f64> {
        let (_, samples) = read_wav(&folder.path(name));
        samples.iter().skip(at).step_by(2).copied().collect()
    };
    for stem in ["received.clean.wav", "received.distortion.wav"] {
        assert_eq!(side(stem, 0), side(stem, 1), "{stem}");
    }
    let (left, right) = (side("received.noise.wav", 0), side("received.noise.wav", 1));
    // Lamps shine on both alike; the random part differs.
    let differing = left.iter().zip(&right).filter(|(l, r)| l != r).count();
    assert!(differing > 9 * left.len() / 10);
}

#[test]
fn the_same_run_gives_the_same_bytes() {
    let folder = Folder::new();
    let sent = spec(44_100, 2, 16, SampleFormat::Int);
    write_wav(
        &folder.path("sent.wav"),
        sent,
        &tone(44_100, 700.0, 0.5, 2 * 3000),
    );
    let design = config("dome-talkback.toml");
    let mut made = Vec::new();
    // On one thread and on many.
    for threads in ["1", "2", "7"] {
        let args = [
            "render",
            &design,
            "--input",
            "sent.wav",
            "--output",
            "received.wav",
        ];
        let done = folder
            .command(&args)
            .args(["--stems", "--bits", "16", "--figures", "figures.json"])
            .env("RAYON_NUM_THREADS", threads)
            .output()
            .expect("the program starts");
        assert_eq!(done.status.code(), Some(0));
        made.push((folder.content(), done.stdout));
    }
    assert!(made[0] == made[1] && made[1] == made[2]);
}
