//! A run is a function of design, input and seed; every cause of noise stands alone.

use std::path::{Path, PathBuf};
use std::process::Command;

use crate::bench::{Multisine, largest, rms};
use harklight::design::Design;
use harklight::link::Link;
use harklight::render::programme::{Job, render, stem_path};
use harklight::signal::wav::SampleFormat;
use harklight::station::{Conditions, Curves};

fn dome() -> PathBuf {
    Path::new(env!("CARGO_MANIFEST_DIR")).join("configs/dome-talkback.toml")
}

fn link() -> Link {
    Link::new(&Design::load(&dome(), &[]).unwrap()).unwrap()
}

/// Every contributor's name, each once.
fn contributors(link: &Link) -> Vec<String> {
    let own = link.stations().iter().flat_map(|s| s.noise(1000.0));
    let hums = link.lamps().iter().filter(|l| l.lines().next().is_some());
    let mut names: Vec<String> = own
        .filter(|share| share.density > 0.0)
        .map(|share| share.name)
        .chain(hums.map(|l| l.hum_name()))
        .collect();
    names.sort();
    names.dedup();
    names
}

fn record(link: &Link, conditions: &Conditions, input: &[f64]) -> Vec<f64> {
    let mut block = input.to_vec();
    link.chain(conditions).run(&mut block);
    block
}

#[test]
fn a_seed_is_a_run() {
    let link = link();
    let input = Multisine::new(384e3, 20e3).samples(0.5, 0.05);
    let run = |seed, channel| {
        let conditions = Conditions {
            channel,
            ..link.conditions(384e3, seed)
        };
        record(&link, &conditions, &input)
    };
    assert_eq!(run(1, 0), run(1, 0));
    assert_ne!(run(1, 0), run(2, 0));
    assert_ne!(run(1, 0), run(1, 1));
}

/// On an idle straight link noises add: any two contributors together are the sum of each alone, sample by sample. A draw that moved
/// because another cause sounds would stand out whole; what is left is that shot and intensity noise ride on the light, which
/// the other noise and the lamps move by less than a hundredth.
#[test]
fn silencing_one_cause_leaves_the_others_as_they_were() {
    let link = link();
    let names = contributors(&link);
    assert!(names.len() > 10, "{names:?}");
    let idle = vec![0.0; 4000];
    let only = |kept: &[&String]| {
        let conditions = Conditions {
            curves: Curves::Straight,
            silence: names
                .iter()
                .filter(|n| !kept.contains(n))
                .cloned()
                .collect(),
            ..link.conditions(384e3, 1)
        };
        record(&link, &conditions, &idle)
    };
    let alone: Vec<Vec<f64>> = names.iter().map(|n| only(&[n])).collect();
    for (i, a) in names.iter().enumerate() {
        assert!(rms(&alone[i]) > 0.0, "{a} does not sound");
        for (j, b) in names.iter().enumerate().skip(i + 1) {
            let both = only(&[a, b]);
            let left: Vec<f64> = both
                .iter()
                .zip(&alone[i])
                .zip(&alone[j])
                .map(|((both, a), b)| both - a - b)
                .collect();
            let smaller = rms(&alone[i]).min(rms(&alone[j]));
            assert!(
                rms(&left) < 0.01 * smaller,
                "{a} and {b}: {} of {smaller}",
                rms(&left)
            );
        }
    }
    assert!(largest(&only(&[])) == 0.0);
}

/// A stereo file of 0.2 s, both channels alike.
fn stereo(folder: &Path) -> PathBuf {
    let path = folder.join("sent.wav");
    let spec = hound::WavSpec {
        channels: 2,
        sample_rate: 48_000,
        bits_per_sample: 32,
        sample_format: hound::SampleFormat::Float,
    };
    let mut writer = hound::WavWriter::create(&path, spec).unwrap();
    for x in Multisine::new(48e3, 16e3).samples(0.8, 0.2) {
        writer.write_sample(x as f32).unwrap();
        writer.write_sample(x as f32).unwrap();
    }
    writer.finalize().unwrap();
    path
}

fn channels(path: &Path) -> [Vec<f64>; 2] {
    let mut reader = hound::WavReader::open(path).unwrap();
    let samples: Vec<f64> = reader
        .samples::<f32>()
        .map(|x| f64::from(x.unwrap()))
        .collect();
    [0, 1].map(|c| samples.iter().skip(c).step_by(2).copied().collect())
}

/// The received file is clean + noise + distortion to the rounding of four 32-bit floats; channels differ in nothing but noise.
#[test]
fn stems_add_up_and_channels_have_noises_of_their_own() {
    let folder = tempfile::tempdir().unwrap();
    let output = folder.path().join("received.wav");
    let job = Job {
        input: stereo(folder.path()),
        output: output.clone(),
        format: Some(SampleFormat::Float32),
        mono: false,
        stems: true,
        drive: 0.0,
        oversample: None,
        cold: false,
        seed: 1,
    };
    render(&link(), &job, |_, _| {}).unwrap();
    let received = channels(&output);
    let [clean, noise, distortion] =
        ["clean", "noise", "distortion"].map(|name| channels(&stem_path(&output, name)));
    for c in 0..2 {
        assert_eq!(received[c].len(), 9600);
        let ulp = 2f64.powi(-24) * 4.0 * largest(&received[c]).max(largest(&clean[c]));
        for n in 0..9600 {
            let sum = clean[c][n] + noise[c][n] + distortion[c][n];
            assert!(
                (received[c][n] - sum).abs() <= ulp,
                "channel {c}, sample {n}"
            );
        }
        assert!(rms(&noise[c]) > 0.0 && rms(&distortion[c]) > 0.0);
    }
    assert_eq!(clean[0], clean[1]);
    assert_eq!(distortion[0], distortion[1]);
    assert_ne!(noise[0], noise[1]);
}

/// The same bytes whatever the number of threads.
#[test]
fn threads_do_not_matter() {
    let folder = tempfile::tempdir().unwrap();
    let input = stereo(folder.path());
    let run = |threads: &str| {
        let output = folder.path().join(format!("received-{threads}.wav"));
        let done = Command::new(env!("CARGO_BIN_EXE_harklight"))
            .env("RAYON_NUM_THREADS", threads)
            .args(["render", "--stems"])
            .arg(dome())
            .arg("--input")
            .arg(&input)
            .arg("--output")
            .arg(&output)
            .output()
            .unwrap();
        let text = String::from_utf8_lossy(&done.stderr);
        assert!(matches!(done.status.code(), Some(0 | 1)), "{text}");
        let stems = ["clean", "noise", "distortion"].map(|s| stem_path(&output, s));
        let mut bytes = std::fs::read(&output).unwrap();
        stems
            .iter()
            .for_each(|s| bytes.extend(std::fs::read(s).unwrap()));
        bytes
    };
    let one = run("1");
    assert!(one == run("2") && one == run("5"));
}
