//! `[require]`: the limits of a design held against its figures.

use crate::design::{Design, Relation, Requirement};
use crate::figures::Figures;
use crate::quantity::Dimension;

/// One limit, judged.
#[derive(Debug, Clone, PartialEq)]
pub struct Verdict {
    /// The figure's name under `[require]`.
    pub key: String,
    /// The limit as written.
    pub limit: String,
    /// The figure, in the limit's own unit; none where it does not apply.
    pub value: Option<f64>,
    pub unit: Dimension,
    pub met: bool,
    /// Why there is no figure.
    pub reason: Option<String>,
}

/// Judges every limit of `design`. A figure that could not be had meets no limit, except that an upper limit on hum is met
/// where no lamp flickers (`lamps`).
pub fn judge(design: &Design, figures: &Figures, lamps: bool) -> Vec<Verdict> {
    design
        .require
        .iter()
        .map(|limit| verdict(limit, figures, lamps))
        .collect()
}

fn verdict(limit: &Requirement, figures: &Figures, lamps: bool) -> Verdict {
    let percent = |p: Option<f64>, db: Option<f64>| match limit.unit {
        Dimension::Decibel => (db, "db"),
        _ => (p.map(|p| p / 100.0), "percent"),
    };
    let (value, key) = match limit.key.as_str() {
        "snr" => (figures.snr_db, "snr_db"),
        "snr_a" => (figures.snr_a_db, "snr_a_db"),
        "thd" => (percent(figures.thd_percent, figures.thd_db).0, "thd_db"),
        "thd_n" => (
            percent(figures.thd_n_percent, figures.sinad_db.map(|db| -db)).0,
            "thd_n_percent",
        ),
        "sinad" => (figures.sinad_db, "sinad_db"),
        "gain" => (figures.gain_db, "gain_db"),
        "hum" => (figures.hum_db, "hum_db"),
        "headroom" => (figures.headroom_db, "headroom_db"),
        "band_low" => (figures.band_low_hz, "band_low_hz"),
        "band_high" => (figures.band_high_hz, "band_high_hz"),
        "sti" => (figures.sti, "sti"),
        "imd_smpte" => (
            figures.imd_smpte_percent.map(|p| p / 100.0),
            "imd_smpte_percent",
        ),
        "imd_twin_tone" => (
            figures.imd_twin_tone_percent.map(|p| p / 100.0),
            "imd_twin_tone_percent",
        ),
        "loudness" => (figures.loudness_lufs, "loudness_lufs"),
        "signal" => (figures.signal_rms_v, "signal_rms_v"),
        "noise" => (figures.noise_rms_v, "noise_rms_v"),
        _ => (figures.clipped_samples.map(|n| n as f64), "clipped_samples"),
    };
    let no_hum = limit.key == "hum" && !lamps && limit.relation == Relation::AtMost;
    Verdict {
        key: limit.key.clone(),
        limit: limit.text.clone(),
        value,
        unit: limit.unit,
        met: value.map_or(no_hum, |v| limit.met_by(v)),
        reason: value.is_none().then(|| {
            figures
                .reasons
                .get(key)
                .cloned()
                .unwrap_or_else(|| "not asked for".into())
        }),
    }
}
