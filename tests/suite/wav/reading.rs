//! Files laid out byte by byte as the format says (IBM and Microsoft, Multimedia Programming Interface and Data Specifications 1.0, 1991; EBU
//! Tech 3306 for RF64), and files of an independent writer.

use std::fs;
use std::path::PathBuf;

use harklight::signal::wav::{WavError, WavReader};
use tempfile::TempDir;

use super::read_all;

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
