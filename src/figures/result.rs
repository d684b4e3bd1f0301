//! The figures of one channel as outside programs read them.

use std::collections::BTreeMap;

use serde::Serialize;

use super::decibels;
use super::distortion::{Distortion, Residue, THD_FLOOR, THD_N_FLOOR};
use super::intermodulation;
use super::noise::{IdleNoise, snr_db};

/// Idle noise below this part of the signal (−240 dB) is the arithmetic's own rounding.
pub const NOISE_FLOOR: f64 = 1e-12;

/// The figures, each under its contract's name with its unit. One that does not apply or was not asked for is `None` (null), never 0.
#[derive(Debug, Clone, Default, PartialEq, Serialize)]
pub struct Figures {
    /// Harmonics inside the band over the fundamental, per cent and dB.
    pub thd_percent: Option<f64>,
    pub thd_db: Option<f64>,
    /// Everything inside the band but the fundamental over the total, per cent; and its inverse, dB.
    pub thd_n_percent: Option<f64>,
    pub sinad_db: Option<f64>,
    /// Fundamental over idle noise, flat and A-weighted, dB.
    pub snr_db: Option<f64>,
    pub snr_a_db: Option<f64>,
    /// Fundamental and idle noise at the output, volts rms.
    pub signal_rms_v: Option<f64>,
    pub noise_rms_v: Option<f64>,
    /// Intermodulation of a low and a high tone, and of two high tones, per cent.
    pub imd_smpte_percent: Option<f64>,
    pub imd_twin_tone_percent: Option<f64>,
    /// Half-power edges, Hz.
    pub band_low_hz: Option<f64>,
    pub band_high_hz: Option<f64>,
    /// Output volts over source volts at the tone, dB.
    pub gain_db: Option<f64>,
    /// Mains multiples over the fundamental, dB.
    pub hum_db: Option<f64>,
    /// Rise of the tone to the first limit, dB.
    pub headroom_db: Option<f64>,
    /// Speech transmission index, 0 … 1.
    pub sti: Option<f64>,
    /// Loudness of the programme, LUFS.
    pub loudness_lufs: Option<f64>,
    /// Samples of the rendered programme at or beyond full scale.
    pub clipped_samples: Option<u64>,
    /// Figures that are under their method's floor, which then is their number. Shown beside the figures, not among them.
    #[serde(skip)]
    pub below_floor: Vec<String>,
    /// Why a figure is null, by its name.
    #[serde(skip)]
    pub reasons: BTreeMap<String, String>,
}

impl Figures {
    /// Takes over the harmonic distortion, at the method's floor where it is below.
    pub fn set_distortion(&mut self, distortion: &Distortion) {
        let thd = self.floored(distortion.thd(), THD_FLOOR, &["thd_percent", "thd_db"]);
        self.thd_percent = Some(100.0 * thd);
        self.thd_db = Some(decibels(thd));
    }

    /// Takes over distortion and noise, at the method's floor where it is below.
    pub fn set_residue(&mut self, residue: &Residue) {
        let thd_n = self.floored(residue.thd_n(), THD_N_FLOOR, &["thd_n_percent", "sinad_db"]);
        self.thd_n_percent = Some(100.0 * thd_n);
        self.sinad_db = Some(-decibels(thd_n));
    }

    /// Takes over the two kinds of intermodulation (ratios), each at the method's floor where it is below.
    pub fn set_intermodulation(&mut self, modulation: Option<f64>, twin_tone: Option<f64>) {
        let mut percent = |value: Option<f64>, key| {
            value.map(|v| 100.0 * self.floored(v, intermodulation::FLOOR, &[key]))
        };
        let smpte = percent(modulation, "imd_smpte_percent");
        let twin = percent(twin_tone, "imd_twin_tone_percent");
        self.imd_smpte_percent = smpte;
        self.imd_twin_tone_percent = twin;
    }

    /// Takes over the fundamental (volts rms) and the idle noise, and their ratios, the noise at [`NOISE_FLOOR`] where it is below.
    pub fn set_signal_and_noise(&mut self, signal: f64, noise: &IdleNoise) {
        self.signal_rms_v = Some(signal);
        let floor = NOISE_FLOOR * signal;
        let rms = self.floored(noise.rms, floor, &["noise_rms_v", "snr_db"]);
        let rms_a = self.floored(noise.rms_a, floor, &["snr_a_db"]);
        self.noise_rms_v = Some(rms);
        self.snr_db = snr_db(signal, rms);
        self.snr_a_db = snr_db(signal, rms_a);
        if self.snr_db.is_none() {
            self.explain("snr_db", "no signal reaches the output");
            self.explain("snr_a_db", "no signal reaches the output");
        }
    }

    /// Says why a figure is null.
    pub fn explain(&mut self, key: &str, reason: impl ToString) {
        self.reasons.insert(key.to_owned(), reason.to_string());
    }

    fn floored(&mut self, value: f64, floor: f64, keys: &[&str]) -> f64 {
        self.below_floor.retain(|k| !keys.contains(&k.as_str()));
        if value >= floor {
            return value;
        }
        self.below_floor
            .extend(keys.iter().map(|k| (*k).to_owned()));
        floor
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn nothing_measured_is_null_under_every_key() {
        let json = serde_json::to_value(Figures::default()).unwrap();
        let object = json.as_object().unwrap();
        assert_eq!(object.len(), 18);
        assert!(object.values().all(serde_json::Value::is_null));
    }

    #[test]
    fn a_figure_under_its_floor_gives_the_floor_and_its_name() {
        let mut figures = Figures::default();
        figures.set_distortion(&Distortion {
            fundamental: 1.0,
            harmonics: vec![1e-15],
        });
        assert_eq!(figures.thd_percent, Some(100.0 * THD_FLOOR));
        assert_eq!(figures.below_floor, ["thd_percent", "thd_db"]);
        figures.set_distortion(&Distortion {
            fundamental: 1.0,
            harmonics: vec![0.01],
        });
        assert_eq!(figures.thd_db, Some(-40.0));
        assert!(figures.below_floor.is_empty());
    }
}
