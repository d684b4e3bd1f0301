//! WAV files against an independent library (`hound`) and against files laid out byte by byte as the format says
//! (IBM and Microsoft, Multimedia Programming Interface and Data Specifications 1.0, 1991; EBU Tech 3306 for RF64).

use std::fs;
use std::path::{Path, PathBuf};

use harklight::signal::wav::{SampleFormat, WavError, WavReader, WavSpec, WavWriter, same_file};
use tempfile::TempDir;

fn spec(rate: u32, channels: u16, format: SampleFormat) -> WavSpec {
    WavSpec {
        rate,
        channels,
        format,
    }
}

fn read_all(path: &Path, block: usize) -> Result<Vec<Vec<f64>>, WavError> {
    let mut reader = WavReader::open(path)?;
    let count = usize::from(reader.spec().channels);
    let (mut part, mut whole) = (vec![Vec::new(); count], vec![Vec::new(); count]);
    while reader.read(&mut part, block)? > 0 {
        for (all, some) in whole.iter_mut().zip(&part) {
            all.extend_from_slice(some);
        }
    }
    Ok(whole)
}

fn write_all(path: &Path, spec: WavSpec, seed: u64, channels: &[&[f64]]) -> u64 {
    let mut writer = WavWriter::create(path, spec, seed).unwrap();
    writer.write(channels).unwrap();
    let clipped = writer.clipped();
    writer.finish().unwrap();
    clipped
}

/// One chunk with its pad byte.
fn chunk(id: &[u8; 4], body: &[u8]) -> Vec<u8> {
    let mut bytes = [id.as_slice(), &(body.len() as u32).to_le_bytes(), body].concat();
    bytes.resize(bytes.len().next_multiple_of(2), 0);
    bytes
}

fn format(tag: u16, channels: u16, rate: u32, container: u16, bits: u16) -> Vec<u8> {
    let frame = channels * container;
    let mut body = Vec::new();
    body.extend(tag.to_le_bytes());
    body.extend(channels.to_le_bytes());
    body.extend(rate.to_le_bytes());
    body.extend((rate * u32::from(frame)).to_le_bytes());
    body.extend(frame.to_le_bytes());
    body.extend(bits.to_le_bytes());
    body
}

fn extensible(tag: u16, channels: u16, rate: u32, container: u16, valid: u16) -> Vec<u8> {
    let mut body = format(0xfffe, channels, rate, container, 8 * container);
    body.extend(22u16.to_le_bytes());
    body.extend(valid.to_le_bytes());
    body.extend(0u32.to_le_bytes());
    body.extend(tag.to_le_bytes());
    body.extend([0, 0, 0, 0, 0x10, 0, 0x80, 0, 0, 0xaa, 0, 0x38, 0x9b, 0x71]);
    body
}

fn riff(chunks: &[Vec<u8>]) -> Vec<u8> {
    let body = [b"WAVE".as_slice(), &chunks.concat()].concat();
    chunk(b"RIFF", &body)
}

fn fixture(folder: &TempDir, bytes: &[u8]) -> PathBuf {
    let path = folder.path().join("fixture.wav");
    fs::write(&path, bytes).unwrap();
    path
}

fn fails(bytes: &[u8]) -> WavError {
    let folder = TempDir::new().unwrap();
    read_all(&fixture(&folder, bytes), 100).unwrap_err()
}

#[test]
fn each_width_reads_at_its_own_scale() {
    let cases: [(Vec<u8>, Vec<u8>, [f64; 2]); 10] = [
        (format(1, 1, 8000, 1, 8), vec![0, 192], [-1.0, 0.5]),
        (
            format(1, 1, 8000, 2, 16),
            vec![0, 0x80, 0, 0x40],
            [-1.0, 0.5],
        ),
        (
            format(1, 1, 192_000, 3, 24),
            vec![0, 0, 0x80, 0, 0, 0x40],
            [-1.0, 0.5],
        ),
        (
            format(1, 1, 48_000, 4, 32),
            vec![0, 0, 0, 0x80, 0, 0, 0, 0x40],
            [-1.0, 0.5],
        ),
        (
            format(3, 1, 48_000, 4, 32),
            [(-1.5f32).to_le_bytes(), 0.25f32.to_le_bytes()].concat(),
            [-1.5, 0.25],
        ),
        (
            format(3, 1, 48_000, 8, 64),
            [(-1.5f64).to_le_bytes(), 0.1f64.to_le_bytes()].concat(),
            [-1.5, 0.1],
        ),
        (
            extensible(1, 1, 48_000, 2, 16),
            vec![0, 0x80, 0, 0x40],
            [-1.0, 0.5],
        ),
        // Twenty bits stand at the top of three bytes.
        (
            extensible(1, 1, 48_000, 3, 20),
            vec![0, 0, 0x80, 0, 0, 0x40],
            [-1.0, 0.5],
        ),
        // Twenty-four bits stand at the top of four.
        (
            extensible(1, 1, 48_000, 4, 24),
            vec![0, 0, 0, 0x80, 0, 0, 0, 0x40],
            [-1.0, 0.5],
        ),
        (
            extensible(3, 1, 48_000, 4, 32),
            [(-1.5f32).to_le_bytes(), 0.25f32.to_le_bytes()].concat(),
            [-1.5, 0.25],
        ),
    ];
    for (fmt, data, expected) in cases {
        let folder = TempDir::new().unwrap();
        let path = fixture(
            &folder,
            &riff(&[chunk(b"fmt ", &fmt), chunk(b"data", &data)]),
        );
        assert_eq!(read_all(&path, 100).unwrap(), [expected.to_vec()]);
    }
}

#[test]
fn odd_chunks_lengths_to_the_end_and_64_bit_lengths_are_read() {
    let fmt = chunk(b"fmt ", &format(1, 1, 8000, 2, 16));
    let data = chunk(b"data", &[0, 0x40, 0, 0xc0]);
    let odd = riff(&[
        chunk(b"LIST", b"odd"),
        fmt.clone(),
        chunk(b"note", b"x"),
        data.clone(),
    ]);

    let mut endless = riff(&[fmt.clone(), data.clone()]);
    let at = endless.len() - 8;
    endless[4..8].fill(0xff);
    endless[at..at + 4].fill(0xff);

    let ds64 = [80u64, 4, 2].map(u64::to_le_bytes).concat();
    let ds64 = [ds64.as_slice(), &[0; 4]].concat();
    let mut large = riff(&[chunk(b"ds64", &ds64), fmt, data]);
    large[..4].copy_from_slice(b"RF64");
    large[4..8].fill(0xff);
    let at = large.len() - 8;
    large[at..at + 4].fill(0xff);

    for bytes in [odd, endless, large] {
        let folder = TempDir::new().unwrap();
        let path = fixture(&folder, &bytes);
        assert_eq!(WavReader::open(&path).unwrap().frames(), 2);
        assert_eq!(read_all(&path, 1).unwrap(), [vec![0.5, -0.5]]);
    }
}

#[test]
fn files_of_an_independent_writer_read_the_same() {
    for (bits, sample_format) in [
        (8, hound::SampleFormat::Int),
        (16, hound::SampleFormat::Int),
        (24, hound::SampleFormat::Int),
        (32, hound::SampleFormat::Int),
        (32, hound::SampleFormat::Float),
    ] {
        let folder = TempDir::new().unwrap();
        let path = folder.path().join("hound.wav");
        let theirs = hound::WavSpec {
            channels: 2,
            sample_rate: 44_100,
            bits_per_sample: bits,
            sample_format,
        };
        let full = 2f64.powi(i32::from(bits) - 1);
        let mut writer = hound::WavWriter::create(&path, theirs).unwrap();
        let (mut left, mut right) = (Vec::new(), Vec::new());
        for n in 0..1000i32 {
            let (l, r) = ((n * 37) % 128 - 64, 63 - (n * 11) % 128);
            match sample_format {
                hound::SampleFormat::Int => {
                    writer.write_sample(l).unwrap();
                    writer.write_sample(r).unwrap();
                    left.push(f64::from(l) / full);
                    right.push(f64::from(r) / full);
                }
                hound::SampleFormat::Float => {
                    let (l, r) = (l as f32 / 99.0, r as f32 / 99.0);
                    writer.write_sample(l).unwrap();
                    writer.write_sample(r).unwrap();
                    left.push(f64::from(l));
                    right.push(f64::from(r));
                }
            }
        }
        writer.finalize().unwrap();
        for block in [1, 7, 4096] {
            assert_eq!(
                read_all(&path, block).unwrap(),
                [left.clone(), right.clone()]
            );
        }
    }
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

#[test]
fn broken_files_are_named_for_what_is_wrong_with_them() {
    let fmt = chunk(b"fmt ", &format(1, 1, 8000, 2, 16));
    let data = chunk(b"data", &[0; 8]);

    let mut cut = riff(&[fmt.clone(), data.clone()]);
    cut.truncate(cut.len() - 3);
    let end = cut.len() as u64;
    match fails(&cut) {
        WavError::Truncated {
            promised,
            got,
            end: at,
            ..
        } => assert_eq!((promised, got, at), (4, 2, end)),
        other => panic!("{other}"),
    }
    let partial = riff(&[fmt.clone(), chunk(b"data", &[0; 7])]);
    assert!(matches!(
        fails(&partial),
        WavError::PartialFrame {
            bytes: 7,
            frame: 2,
            ..
        }
    ));
    let empty = riff(&[fmt.clone(), chunk(b"data", &[])]);
    assert!(matches!(fails(&empty), WavError::Empty { .. }));
    for bytes in [
        b"RIFF".to_vec(),
        Vec::new(),
        b"this is no WAV file, only a line of text".to_vec(),
        riff(std::slice::from_ref(&fmt)),
        riff(std::slice::from_ref(&data)),
    ] {
        assert!(matches!(fails(&bytes), WavError::NotWav { .. }));
    }
    let law = riff(&[chunk(b"fmt ", &format(7, 1, 8000, 1, 8)), data.clone()]);
    assert!(matches!(fails(&law), WavError::Format { .. }));
    let slow = riff(&[chunk(b"fmt ", &format(1, 1, 7999, 2, 16)), data.clone()]);
    assert!(matches!(fails(&slow), WavError::Rate { rate: 7999, .. }));
    let six = riff(&[chunk(b"fmt ", &format(1, 6, 8000, 2, 16)), data]);
    assert!(matches!(
        fails(&six),
        WavError::Channels { channels: 6, .. }
    ));

    let float = chunk(b"fmt ", &format(3, 1, 8000, 4, 32));
    let samples = [0.0, 0.5, f32::NAN].map(f32::to_le_bytes).concat();
    assert!(matches!(
        fails(&riff(&[float, chunk(b"data", &samples)])),
        WavError::NotFinite {
            frame: 2,
            channel: 1,
            ..
        }
    ));

    let folder = TempDir::new().unwrap();
    let missing = read_all(&folder.path().join("none.wav"), 1).unwrap_err();
    assert!(matches!(missing, WavError::Missing { .. }));
    let folder = read_all(folder.path(), 1).unwrap_err();
    assert!(matches!(folder, WavError::NotWav { .. }));
}
