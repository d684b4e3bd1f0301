//! What is written, by an independent reader and by the promises of the writer.

use std::fs;
use std::path::Path;

use harklight::signal::wav::{SampleFormat, WavError, WavReader, WavSpec, WavWriter};
use harklight::whole_file::same_file;
use tempfile::TempDir;

use super::read_all;

fn spec(rate: u32, channels: u16, format: SampleFormat) -> WavSpec {
    WavSpec {
        rate,
        channels,
        format,
    }
}

fn write_all(path: &Path, spec: WavSpec, seed: u64, channels: &[&[f64]]) -> u64 {
    let mut writer = WavWriter::create(path, spec, seed).unwrap();
    writer.write(channels).unwrap();
    let clipped = writer.clipped();
    writer.finish().unwrap();
    clipped
}

#[test]
fn an_independent_reader_finds_what_was_written() {
    let wave: Vec<f64> = (0..4001)
        .map(|n| 0.9 * (0.01 * f64::from(n)).sin())
        .collect();
    for format in [
        SampleFormat::Int8,
        SampleFormat::Int16,
        SampleFormat::Int24,
        SampleFormat::Int32,
        SampleFormat::Float32,
    ] {
        for channels in [1usize, 2] {
            let folder = TempDir::new().unwrap();
            let path = folder.path().join("ours.wav");
            let ours = spec(48_000, channels as u16, format);
            write_all(&path, ours, 5, &vec![wave.as_slice(); channels]);

            let mut reader = hound::WavReader::open(&path).unwrap();
            assert_eq!(reader.spec().sample_rate, 48_000);
            assert_eq!(usize::from(reader.spec().channels), channels);
            assert_eq!(u32::from(reader.spec().bits_per_sample), format.bits());
            let (theirs, step): (Vec<f64>, f64) = if format.is_float() {
                let all = reader.samples::<f32>().map(|x| f64::from(x.unwrap()));
                (all.collect(), 1e-7)
            } else {
                let step = 2f64.powi(1 - format.bits() as i32);
                let all = reader
                    .samples::<i32>()
                    .map(|x| f64::from(x.unwrap()) * step);
                (all.collect(), step)
            };
            assert_eq!(theirs.len(), channels * wave.len());
            for (n, x) in theirs.iter().enumerate() {
                // Half a step of rounding and one of dither.
                assert!((x - wave[n / channels]).abs() <= 1.5 * step);
            }
            // Every chunk has an even length on disk.
            assert_eq!(fs::metadata(&path).unwrap().len() % 2, 0);
        }
    }
}

/// Rounding with triangular dither of ±1 step has an error whose mean is 0 and whose variance is (1/12 + 2/12) step², whatever the signal
/// (Lipshitz, Wannamaker, Vanderkooy, J. Audio Eng. Soc. 40 (1992) 355: from memory).
#[test]
fn dither_makes_the_error_independent_of_the_signal() {
    for level in [0.0, 0.25, 0.5] {
        let step = 2f64.powi(-15);
        let still = vec![level * step; 200_000];
        let folder = TempDir::new().unwrap();
        let path = folder.path().join("dither.wav");
        write_all(&path, spec(48_000, 1, SampleFormat::Int16), 9, &[&still]);
        let errors: Vec<f64> = read_all(&path, 4096).unwrap()[0]
            .iter()
            .map(|x| x / step - level)
            .collect();
        let count = errors.len() as f64;
        let mean = errors.iter().sum::<f64>() / count;
        let power = errors.iter().map(|e| e * e).sum::<f64>() / count;
        // Five standard deviations of each estimate.
        assert!(mean.abs() < 5.0 * 0.5 / count.sqrt(), "{mean}");
        assert!((power - 0.25).abs() < 5.0 * 0.4 / count.sqrt(), "{power}");
    }
}

#[test]
fn the_dither_is_a_function_of_the_seed_and_differs_between_channels() {
    let folder = TempDir::new().unwrap();
    let silence = vec![0.0; 1000];
    let mut files = Vec::new();
    for seed in [1, 1, 2] {
        let path = folder.path().join("seed.wav");
        let stereo = spec(48_000, 2, SampleFormat::Int16);
        write_all(&path, stereo, seed, &[&silence, &silence]);
        files.push(read_all(&path, 4096).unwrap());
    }
    assert_eq!(files[0], files[1]);
    assert_ne!(files[0], files[2]);
    assert_ne!(files[0][0], files[0][1]);
}

#[test]
fn samples_at_or_beyond_full_scale_are_counted_and_integers_clipped() {
    let folder = TempDir::new().unwrap();
    let path = folder.path().join("clip.wav");
    let wave = [0.5, 1.0, -1.0, 1.7, -2.0, 0.999];
    let clipped = write_all(&path, spec(48_000, 1, SampleFormat::Int16), 1, &[&wave]);
    assert_eq!(clipped, 4);
    let read = read_all(&path, 100).unwrap();
    assert_eq!(read[0][3], 32767.0 / 32768.0);
    assert_eq!(read[0][4], -1.0);

    let clipped = write_all(&path, spec(48_000, 1, SampleFormat::Float32), 1, &[&wave]);
    assert_eq!(clipped, 4);
    assert_eq!(read_all(&path, 100).unwrap()[0][3], f64::from(1.7f32));
}

#[test]
fn an_output_appears_whole_or_not_at_all() {
    let folder = TempDir::new().unwrap();
    let path = folder.path().join("out.wav");
    let mono = spec(48_000, 1, SampleFormat::Int16);
    let mut writer = WavWriter::create(&path, mono, 1).unwrap();
    writer.write(&[&[0.1; 100]]).unwrap();
    assert!(!path.exists());
    drop(writer);
    assert_eq!(fs::read_dir(folder.path()).unwrap().count(), 0);

    write_all(&path, mono, 1, &[&[0.1; 100]]);
    let before = fs::read(&path).unwrap();
    let mut writer = WavWriter::create(&path, mono, 1).unwrap();
    writer.write(&[&[0.2; 50]]).unwrap();
    drop(writer);
    assert_eq!(fs::read(&path).unwrap(), before);
    assert_eq!(fs::read_dir(folder.path()).unwrap().count(), 1);
}

#[test]
fn outputs_that_may_not_be_written_are_refused() {
    let folder = TempDir::new().unwrap();
    let mono = spec(48_000, 1, SampleFormat::Int16);
    let missing = folder.path().join("nowhere/out.wav");
    for path in [folder.path(), missing.as_path(), Path::new("")] {
        let error = WavWriter::create(path, mono, 1).err().unwrap();
        assert!(matches!(error, WavError::Output { .. }), "{error}");
        assert!(!error.is_machine_fault());
    }
    let out = folder.path().join("out.wav");
    let too_fast = spec(384_000, 1, SampleFormat::Int16);
    assert!(matches!(
        WavWriter::create(&out, too_fast, 1).err().unwrap(),
        WavError::Rate { .. }
    ));
    let mut writer = WavWriter::create(&out, mono, 1).unwrap();
    assert!(matches!(
        writer.write(&[&[0.0, f64::NAN]]),
        Err(WavError::NotFinite { frame: 1, .. })
    ));
}

#[cfg(unix)]
#[test]
fn a_device_is_refused_a_link_is_followed_and_links_are_one_file() {
    let mono = spec(48_000, 1, SampleFormat::Int16);
    let error = WavWriter::create("/dev/null", mono, 1).err().unwrap();
    assert!(matches!(error, WavError::Output { .. }));

    let folder = TempDir::new().unwrap();
    let (path, soft, hard) = (
        folder.path().join("a.wav"),
        folder.path().join("soft.wav"),
        folder.path().join("hard.wav"),
    );
    write_all(&path, mono, 1, &[&[0.1; 10]]);
    std::os::unix::fs::symlink(&path, &soft).unwrap();
    fs::hard_link(&path, &hard).unwrap();
    assert!(same_file(&path, &soft) && same_file(&path, &hard));
    assert!(same_file(&path, folder.path().join("./a.wav")));
    assert!(!same_file(&path, folder.path().join("b.wav")));
    assert!(!same_file("-", "-"));

    write_all(&soft, mono, 1, &[&[0.1; 20]]);
    assert!(soft.symlink_metadata().unwrap().is_symlink());
    assert_eq!(WavReader::open(&path).unwrap().frames(), 20);
}
