//! How fast a link runs: whole chains, each station alone, the rate converters and the full set of figures.
//!
//! Throughput counts samples of the link's rate (384 kHz): 1 Melem/s there is 2.6 times real time. The converters count the file's samples.

use std::f64::consts::TAU;
use std::hint::black_box;
use std::path::Path;
use std::time::Duration;

use criterion::{Criterion, Throughput, criterion_group, criterion_main};
use harklight::design::Design;
use harklight::link::Link;
use harklight::render::TEST_RATE;
use harklight::render::test_signals::{Bench, measure};
use harklight::signal::resample::{Downsampler, Upsampler};
use harklight::station::ambient::Flicker;
use harklight::station::{Conditions, Curves};

const DESIGNS: [&str; 2] = ["dome-talkback", "dome-talkback-hurried"];
/// Samples that a chain takes through its stations at a time.
const SLICE: usize = 512;

fn link(name: &str) -> (Design, Link) {
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join(format!("configs/{name}.toml"));
    let design = Design::load(&path, &[]).expect("a demo design is good");
    let link = Link::new(&design).expect("a demo design can be wired");
    (design, link)
}

/// Like speech: harmonics of 120 Hz that fall by 6 dB an octave up to 6 kHz, under syllables of a quarter of a second, about −20 dBFS.
fn speech(rate: f64, count: usize) -> Vec<f64> {
    (0..count)
        .map(|n| {
            let t = n as f64 / rate;
            let voice: f64 = (1..=50)
                .map(|k| (TAU * 120.0 * f64::from(k) * t + f64::from(k * k)).sin() / f64::from(k))
                .sum();
            0.1 * voice * (0.5 - 0.5 * (TAU * 4.0 * t).cos())
        })
        .collect()
}

fn conditions(link: &Link) -> [(&'static str, Conditions); 3] {
    let full = link.conditions(TEST_RATE, 1);
    let noiseless = Conditions {
        noise: false,
        lamps: false,
        ..full.clone()
    };
    let straight = Conditions {
        curves: Curves::Straight,
        ..noiseless.clone()
    };
    [
        ("full", full),
        ("noiseless", noiseless),
        ("clean", straight),
    ]
}

fn chains(c: &mut Criterion) {
    let sent = speech(TEST_RATE, TEST_RATE as usize);
    let mut group = c.benchmark_group("chain");
    group.throughput(Throughput::Elements(sent.len() as u64));
    group
        .sample_size(10)
        .measurement_time(Duration::from_secs(4));
    for name in DESIGNS {
        let (_, link) = link(name);
        for (run, conditions) in conditions(&link) {
            let mut chain = link.chain(&conditions);
            let mut block = vec![0.0; sent.len()];
            group.bench_function(format!("{name}/{run}"), |b| {
                b.iter(|| {
                    block.copy_from_slice(&sent);
                    chain.run(black_box(&mut block));
                });
            });
        }
    }
    group.finish();
}

/// Every station on what really arrives at it, in slices as the chain hands them on.
fn stations(c: &mut Criterion) {
    for name in DESIGNS {
        let (_, link) = link(name);
        let full = link.conditions(TEST_RATE, 1);
        let mut ambient = vec![0.0; 16 * SLICE];
        let mut flickers: Vec<Flicker> = link
            .lamps()
            .iter()
            .filter_map(|l| l.flicker(&full))
            .collect();
        flickers.iter_mut().for_each(|f| f.add_to(&mut ambient));
        // From the loud middle of a syllable.
        let mut arriving = speech(TEST_RATE, 48_000 + ambient.len()).split_off(48_000);

        let mut group = c.benchmark_group(format!("station/{name}"));
        group.throughput(Throughput::Elements(arriving.len() as u64));
        for (n, station) in link.stations().iter().enumerate() {
            let mut runner = station.runner(&full);
            let mut block = vec![0.0; arriving.len()];
            group.bench_function(format!("{n}-{}", station.path()), |b| {
                b.iter(|| {
                    block.copy_from_slice(&arriving);
                    for (part, light) in block.chunks_mut(SLICE).zip(ambient.chunks(SLICE)) {
                        runner.run(black_box(part), light);
                    }
                });
            });
            station.runner(&full).run(&mut arriving, &ambient);
        }
        if !flickers.is_empty() {
            group.bench_function("lamps", |b| {
                b.iter(|| {
                    flickers
                        .iter_mut()
                        .for_each(|f| f.add_to(black_box(&mut ambient)))
                });
            });
        }
        group.finish();
    }
}

fn converters(c: &mut Criterion) {
    let low = speech(48_000.0, 48_000);
    let high = speech(TEST_RATE, TEST_RATE as usize);
    let mut group = c.benchmark_group("converter");
    group
        .throughput(Throughput::Elements(low.len() as u64))
        .sample_size(20);
    let mut out = Vec::with_capacity(high.len() + 1);
    let mut up = Upsampler::new(48_000, 8).expect("a factor in range");
    group.bench_function("up-8", |b| {
        b.iter(|| {
            out.clear();
            up.process(black_box(&low), &mut out);
        });
    });
    let mut down = Downsampler::new(48_000, 8).expect("a factor in range");
    group.bench_function("down-8", |b| {
        b.iter(|| {
            out.clear();
            down.process(black_box(&high), &mut out);
        });
    });
    group.finish();
}

fn figures(c: &mut Criterion) {
    let mut group = c.benchmark_group("measure");
    group
        .sample_size(10)
        .measurement_time(Duration::from_secs(6));
    for name in DESIGNS {
        let (design, link) = link(name);
        let bench = Bench::of(&design);
        group.bench_function(name, |b| b.iter(|| black_box(measure(&link, &bench, 1))));
    }
    group.finish();
}

criterion_group!(benches, chains, stations, converters, figures);
criterion_main!(benches);
