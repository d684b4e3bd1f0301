//! Every design of `configs/` with every demo clip.

use std::collections::{BTreeMap, BTreeSet};
use std::fs;
use std::path::{Path, PathBuf};

use hound::{SampleFormat, WavSpec};

use super::{Folder, read_wav, write_wav};

/// The WAVs or TOMLs of a folder of the project.
fn files(folder: &str, extension: &str) -> BTreeSet<PathBuf> {
    let folder = Path::new(env!("CARGO_MANIFEST_DIR")).join(folder);
    let entries = fs::read_dir(folder).expect("a folder");
    let paths = entries.map(|entry| entry.expect("an entry").path());
    paths
        .filter(|p| p.extension().is_some_and(|e| e == extension))
        .collect()
}

/// 0.3 s of a clip around its largest sample.
fn excerpt(samples: &[f64], rate: u32) -> &[f64] {
    let length = rate as usize * 3 / 10;
    let size = |n: &usize| samples[*n].abs();
    let loudest = (0..samples.len())
        .max_by(|a, b| size(a).total_cmp(&size(b)))
        .expect("a clip that is not empty");
    let start = loudest
        .saturating_sub(length / 2)
        .min(samples.len() - length);
    &samples[start..start + length]
}

/// Exit code 0, or 1 with a limit that is not met; sent format and length; a sound that is heard.
#[test]
fn every_design_carries_every_clip() {
    let designs: Vec<PathBuf> = files("configs", "toml")
        .into_iter()
        .filter(|p| !p.ends_with("parts.toml"))
        .collect();
    let clips = files("demo-audio", "wav");
    assert!(designs.len() >= 9 && clips.len() == 5);
    // Two clips of one rate are the channels of one file: a run measures the design only once.
    let folder = Folder::new();
    let mut by_rate: BTreeMap<u32, Vec<Vec<f64>>> = BTreeMap::new();
    for clip in &clips {
        let (spec, samples) = read_wav(clip);
        let pieces = by_rate.entry(spec.sample_rate).or_default();
        pieces.push(excerpt(&samples, spec.sample_rate).to_vec());
    }
    let mut sent = Vec::new();
    for (rate, pieces) in by_rate {
        for pair in pieces.chunks(2) {
            let name = format!("sent-{}.wav", sent.len());
            let spec = WavSpec {
                channels: pair.len() as u16,
                sample_rate: rate,
                bits_per_sample: 16,
                sample_format: SampleFormat::Int,
            };
            let frames = pair[0].len();
            let samples: Vec<f64> = (0..frames)
                .flat_map(|n| pair.iter().map(move |piece| piece[n]))
                .collect();
            write_wav(&folder.path(&name), spec, &samples);
            sent.push((name, spec, samples.len()));
        }
    }
    for design in &designs {
        let path = design.to_str().expect("a path of text");
        for (name, spec, length) in &sent {
            let what = format!("{path}, {name}");
            let args = ["render", path, "--input", name];
            let done = folder.run(&[&args[..], &["--output", "received.wav", "--json"]].concat());
            let code = done.code;
            assert!(matches!(code, Some(0 | 1)), "{what}: {code:?} {}", done.err);
            let document = done.json();
            let limits = document["require"].as_array().expect("limits");
            let met = limits.iter().all(|limit| limit["met"] == true);
            assert_eq!(met, code == Some(0), "{what}: {limits:?}");
            let (received, samples) = read_wav(&folder.path("received.wav"));
            assert_eq!(received, *spec, "{what}");
            assert_eq!(samples.len(), *length, "{what}");
            // Integers are finite; their dither alone would stay near −96 dBFS.
            for channel in 0..usize::from(spec.channels) {
                let one = samples.iter().skip(channel).step_by(spec.channels.into());
                let power = one.map(|x| x * x).sum::<f64>() / samples.len() as f64;
                let level = 10.0 * power.log10();
                assert!(level > -60.0, "{what}, channel {channel}: {level} dBFS");
            }
        }
    }
}
