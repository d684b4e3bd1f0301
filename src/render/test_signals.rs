//! Figures from test signals: the link runs on a tone and on silence, and the records are measured.

use std::f64::consts::SQRT_2;

use super::{TEST_RATE, headroom};
use crate::design::Design;
use crate::figures::band::band_edges;
use crate::figures::distortion::DistortionMeter;
use crate::figures::hum::hum_rms;
use crate::figures::noise::idle_noise;
use crate::figures::{self, Figures, Unmeasurable, decibels};
use crate::link::{Link, StationEvents};
use crate::signal::tone::Tone;
use crate::station::Conditions;
use crate::station::ambient::Lamp;

/// The test conditions of a design, `[measure]`.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Bench {
    /// Hz
    pub tone: f64,
    /// dB re full scale at the source.
    pub level: f64,
    /// Hz
    pub band: (f64, f64),
}

impl Bench {
    /// Those of `design`.
    pub fn of(design: &Design) -> Self {
        let band = design.measure.numbers("band");
        Self {
            tone: design.measure.number("tone"),
            level: design.measure.number("level"),
            band: (band[0], band[1]),
        }
    }

    /// Peak of the tone in source samples.
    pub fn peak(&self) -> f64 {
        10f64.powf(self.level / 20.0)
    }
}

/// What the test signals gave.
pub struct Measured {
    pub figures: Figures,
    /// What happened at the stations while the tone ran with all noises.
    pub events: Vec<StationEvents>,
    /// Standard deviation that the noise record's length leaves on the noise level, dB.
    pub noise_scatter_db: Option<f64>,
}

/// Shortest record, s: bins 1 Hz apart.
const RECORD: f64 = 1.0;
/// Periods that a tone runs before its record, and the least time, s.
const SETTLING_PERIODS: f64 = 32.0;
const SETTLING: f64 = 0.1;
/// Time constants of the slowest station that pass before a record, and the most that is waited for, s. A junction that
/// warms for longer drifts on during the record; the window keeps that out of the harmonics.
const TIME_CONSTANTS: f64 = 10.0;
const PATIENCE: f64 = 1.0;

/// Measures `link` under `bench` with the noises of `seed`. The path is steady: no interruptions, scintillation or sway.
///
/// Four records of a second each, run side by side: the tone without noise (gain, THD), the tone with everything (THD+N), silence
/// with everything (noise), silence with the lamps alone (hum). The band's edges come from the Model faces.
pub fn measure(link: &Link, bench: &Bench, seed: u64) -> Measured {
    let all = Conditions {
        fades: false,
        ..link.conditions(TEST_RATE, seed)
    };
    let quiet = Conditions {
        noise: false,
        lamps: false,
        ..all.clone()
    };
    // Hum is what follows the mains: lamps with a clock of their own stand still for it.
    let (hums, others): (Vec<&Lamp>, Vec<&Lamp>) = link.lamps().iter().partition(|l| l.hums());
    let mut lamps = Conditions {
        noise: false,
        ..all.clone()
    };
    lamps.silence.extend(others.iter().map(|l| l.hum_name()));
    let flickers = !hums.is_empty();

    let ((pure, noisy), (idle, hum)) = rayon::join(
        || {
            rayon::join(
                || record(link, bench, &quiet, true),
                || record(link, bench, &all, true),
            )
        },
        || {
            rayon::join(
                || record(link, bench, &all, false),
                || flickers.then(|| record(link, bench, &lamps, false)),
            )
        },
    );

    let conditions = figures::Conditions {
        rate: TEST_RATE,
        tone: bench.tone,
        band: bench.band,
    };
    let mut figures = Figures::default();
    let mut noise_scatter_db = None;
    let mut fundamental = None;
    if let Err(reason) = tone_figures(
        &mut figures,
        &mut fundamental,
        link,
        bench,
        &conditions,
        &pure,
        &noisy,
    ) {
        for key in [
            "thd_percent",
            "thd_db",
            "thd_n_percent",
            "sinad_db",
            "gain_db",
            "signal_rms_v",
        ] {
            figures.explain(key, &reason);
        }
    }
    match idle
        .as_ref()
        .map_err(Clone::clone)
        .and_then(|r| Ok(idle_noise(&r.samples, &conditions)?))
    {
        Ok(noise) => {
            noise_scatter_db = Some(noise.scatter_db);
            figures.noise_rms_v = Some(noise.rms);
            match fundamental {
                Some(signal) => {
                    figures.set_signal_and_noise(signal, &noise);
                    if link.transfer(bench.tone).norm() == 0.0 {
                        // A tone may still shake a stuck output; its idle noise says nothing of the link's.
                        (figures.snr_db, figures.snr_a_db) = (None, None);
                        figures.below_floor.retain(|k| !k.starts_with("snr"));
                        for key in ["snr_db", "snr_a_db"] {
                            figures.explain(
                                key,
                                "no small signal passes: an output rests on its limit",
                            );
                        }
                    }
                }
                None => ["snr_db", "snr_a_db"]
                    .iter()
                    .for_each(|k| figures.explain(k, "no tone arrives")),
            }
        }
        Err(reason) => ["noise_rms_v", "snr_db", "snr_a_db"]
            .iter()
            .for_each(|k| figures.explain(k, &reason)),
    }
    hum_figure(&mut figures, link, &conditions, fundamental, hum);
    let edges = band_edges(|f| link.transfer(f).norm(), bench.band);
    match edges.low {
        Ok(f) => figures.band_low_hz = Some(f),
        Err(reason) => figures.explain("band_low_hz", reason),
    }
    match edges.high {
        Ok(f) => figures.band_high_hz = Some(f),
        Err(reason) => figures.explain("band_high_hz", reason),
    }
    match headroom::headroom(link, bench, &quiet) {
        Ok(db) => figures.headroom_db = Some(db),
        Err(reason) => figures.explain("headroom_db", reason),
    }
    for key in [
        "imd_smpte_percent",
        "imd_twin_tone_percent",
        "sti",
        "loudness_lufs",
    ] {
        figures.explain(key, "not asked for");
    }
    let events = noisy.map(|r| r.events).unwrap_or_default();
    Measured {
        figures,
        events,
        noise_scatter_db,
    }
}

/// Why a figure could not be had, in words.
type Reason = String;

struct Record {
    samples: Vec<f64>,
    events: Vec<StationEvents>,
}

impl From<Unmeasurable> for Reason {
    fn from(why: Unmeasurable) -> Self {
        why.to_string()
    }
}

/// A settled record of the link's output in volts, under the tone or idle.
fn record(
    link: &Link,
    bench: &Bench,
    conditions: &Conditions,
    tone: bool,
) -> Result<Record, Reason> {
    let period = 1.0 / bench.tone;
    let slow = (TIME_CONSTANTS * link.slowest_time()).min(PATIENCE);
    let settling = (SETTLING_PERIODS * period).max(SETTLING).max(slow);
    let length = (SETTLING_PERIODS * period).max(RECORD);
    let (before, during) = (
        (settling * TEST_RATE) as usize,
        (length * TEST_RATE).round() as usize,
    );
    let mut samples = vec![0.0; before + during];
    if tone {
        let onset = (settling / 2.0).min(SETTLING_PERIODS / 2.0 * period);
        Tone::new(TEST_RATE, bench.tone, bench.peak(), onset)
            .map_err(|e| e.to_string())?
            .fill(&mut samples);
    }
    let mut chain = link.chain(conditions);
    chain.run(&mut samples);
    samples.drain(..before);
    Ok(Record {
        samples,
        events: chain.events(),
    })
}

fn tone_figures(
    figures: &mut Figures,
    fundamental: &mut Option<f64>,
    link: &Link,
    bench: &Bench,
    conditions: &figures::Conditions,
    pure: &Result<Record, Reason>,
    noisy: &Result<Record, Reason>,
) -> Result<(), Reason> {
    let pure = pure.as_ref().map_err(Clone::clone)?;
    let meter = DistortionMeter::new(*conditions, pure.samples.len())?;
    let distortion = meter.harmonics(&pure.samples)?;
    figures.set_distortion(&distortion);
    figures.signal_rms_v = Some(distortion.fundamental);
    *fundamental = Some(distortion.fundamental);
    let source = link.source_full_scale() * bench.peak() / SQRT_2;
    figures.gain_db = Some(decibels(distortion.fundamental / source));
    let noisy = noisy.as_ref().map_err(Clone::clone)?;
    figures.set_residue(&meter.residue(&noisy.samples)?);
    Ok(())
}

/// Hum over the fundamental: the lamps alone, at the multiples of each mains frequency among them.
fn hum_figure(
    figures: &mut Figures,
    link: &Link,
    conditions: &figures::Conditions,
    fundamental: Option<f64>,
    record: Option<Result<Record, Reason>>,
) {
    let Some(record) = record else {
        return figures.explain("hum_db", "no lamp flickers with the mains");
    };
    let Some(signal) = fundamental else {
        return figures.explain("hum_db", "no tone arrives");
    };
    let mut mains: Vec<f64> = link
        .lamps()
        .iter()
        .filter(|l| l.hums())
        .filter_map(|l| l.mains())
        .collect();
    mains.sort_by(f64::total_cmp);
    mains.dedup();
    let power = record.and_then(|r| {
        mains.iter().try_fold(0.0, |sum, &f| {
            Ok(sum + hum_rms(&r.samples, conditions, f)?.powi(2))
        })
    });
    match power {
        Ok(power) if power > 0.0 => figures.hum_db = Some(decibels(power.sqrt() / signal)),
        Ok(_) => figures.explain(
            "hum_db",
            "no mains multiple reaches the output inside the band",
        ),
        Err(reason) => figures.explain("hum_db", reason),
    }
}
