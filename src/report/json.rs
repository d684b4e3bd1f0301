//! The JSON contract: one document for a command's whole result. SI units or decibels, named in the keys.

use serde_json::{Map, Value, json};

use super::{Findings, cautions};
use crate::figures::distortion::{THD_FLOOR, THD_N_FLOOR};
use crate::figures::{NOISE_FLOOR, decibels};
use crate::link::StationEvents;
use crate::quantity::Dimension;
use crate::render::programme::ChannelOutcome;
use crate::station::{Limit, Reading};

/// The document of `findings`.
pub fn document(findings: &Findings) -> Value {
    let Findings {
        design,
        link,
        measured,
        ..
    } = findings;
    let figures = &measured.figures;
    let stations: Vec<Value> = link
        .stations()
        .iter()
        .map(|s| {
            json!({
                "path": s.path(),
                "title": s.title(),
                "operating_point": readings(&s.operating_point()),
                "limits": s.limits().iter().filter_map(limit).collect::<Vec<_>>(),
            })
        })
        .chain(link.lamps().iter().map(|l| {
            json!({
                "path": l.path(),
                "title": l.kind(),
                "operating_point": readings(&l.operating_point()),
                "limits": [],
            })
        }))
        .collect();
    let mut operating_point = Map::new();
    for station in &stations {
        let (Some(path), Some(Value::Object(values))) =
            (station["path"].as_str(), station.get("operating_point"))
        else {
            continue;
        };
        if !operating_point.contains_key(path) {
            operating_point.insert(path.to_owned(), Value::Object(values.clone()));
        }
    }
    json!({
        "tool": "harklight",
        "version": env!("CARGO_PKG_VERSION"),
        "design": { "title": design.title, "file": design.file, "sha256": design.sha256 },
        "seed": findings.seed,
        "test": {
            "tone_hz": findings.bench.tone,
            "level_db": findings.bench.level,
            "band_hz": [findings.bench.band.0, findings.bench.band.1],
            "noise_scatter_db": measured.noise_scatter_db,
            "events": events(&measured.events),
            "floors": {
                "thd_db": decibels(THD_FLOOR),
                "thd_n_db": decibels(THD_N_FLOOR),
                "noise_over_signal_db": decibels(NOISE_FLOOR),
            },
        },
        "figures": figures,
        "reasons": figures.reasons,
        "below_floor": figures.below_floor,
        "channels": findings.programme.map_or(Vec::new(), |p| p.channels.iter().map(|c| channel(findings, c)).collect()),
        "programme": findings.programme.map(|p| json!({
            "frames": p.frames,
            "rate_hz": p.spec.rate,
            "drive_db": p.drive,
            "cold": p.cold,
            "oversample": p.oversample,
            "link_rate_hz": p.link_rate,
            "files": p.files.iter().map(|f| f.to_string_lossy()).collect::<Vec<_>>(),
        })),
        "operating_point": operating_point,
        "stations": stations,
        "noise_budget": findings.budget.iter().map(|line| json!({
            "name": line.name, "rms_v": line.rms, "share": line.share,
        })).collect::<Vec<_>>(),
        "require": findings.verdicts.iter().map(|v| json!({
            "key": v.key, "limit": v.limit, "value": v.value, "met": v.met, "reason": v.reason,
        })).collect::<Vec<_>>(),
        "warnings": findings.warnings,
        "sound": cautions::levels(findings).map(|l| json!({
            "tone_level_db": l.tone.and_then(finite),
            "full_scale_level_db": finite(l.full_scale),
        })),
        "cautions": cautions::texts(findings),
    })
}

/// The programme figures of one channel.
fn channel(findings: &Findings, c: &ChannelOutcome) -> Value {
    json!({
        "sound_level_db": cautions::programme_level(findings, c),
        "sent_dbfs": c.sent.rms_dbfs(),
        "sent_peak_dbfs": c.sent.peak_dbfs(),
        "received_dbfs": c.received.rms_dbfs(),
        "received_peak_dbfs": c.received.peak_dbfs(),
        "clipped_samples": c.received.clipped(),
        "interruptions": c.events.iter().map(|e| e.events.interruptions).sum::<u64>(),
        "snr_db": c.noise.and_then(|r| r.ratio_db()),
        "distortion_db": c.distortion.and_then(|r| r.ratio_db()).map(|db| -db),
        "distortion_percent": c.distortion.and_then(|r| r.share()).map(|s| 100.0 * s),
        "events": events(&c.events),
    })
}

/// Where something happened, station by station, in samples of the link's rate.
fn events(all: &[StationEvents]) -> Vec<Value> {
    all.iter()
        .filter(|e| {
            e.events.clipped + e.events.slewing + e.events.cut_off > 0 || e.events.peak.is_some()
        })
        .map(|e| {
            json!({
                "path": e.path,
                "clipped": e.events.clipped,
                "slewing": e.events.slewing,
                "cut_off": e.events.cut_off,
                "peak_current_a": e.events.peak,
            })
        })
        .collect()
}

/// Readings keyed by their name and unit: `bias_current_a`.
fn readings(all: &[Reading]) -> Map<String, Value> {
    all.iter()
        .map(|r| {
            let name: String = r
                .name
                .chars()
                .filter(|c| *c != ',')
                .map(|c| if c == ' ' { '_' } else { c })
                .collect();
            (
                format!("{name}{}", unit_suffix(r.dimension)),
                json!(finite(r.value)),
            )
        })
        .collect()
}

fn unit_suffix(dimension: Dimension) -> &'static str {
    match dimension {
        Dimension::Volt => "_v",
        Dimension::Ampere => "_a",
        Dimension::Ohm => "_ohm",
        Dimension::Farad => "_f",
        Dimension::Hertz => "_hz",
        Dimension::Second => "_s",
        Dimension::Watt => "_w",
        Dimension::Kelvin => "_k",
        Dimension::Transconductance => "_a_per_v",
        Dimension::Decibel => "_db",
        _ => "",
    }
}

/// JSON has no infinity: a value without bound is null. Nor is there any use in its minus nought.
fn finite(value: f64) -> Option<f64> {
    value.is_finite().then_some(value + 0.0)
}

fn limit(limit: &Limit) -> Option<Value> {
    let (kind, cause, at) = match *limit {
        Limit::Level { cause, at } => ("level", cause, at),
        Limit::Slope { cause, at } => ("slope", cause, at),
    };
    at.is_finite()
        .then(|| json!({ "kind": kind, "cause": cause, "at": at }))
}
