//! The noise budget: each contributor's share of the output's noise, from the stations' Model faces.

use super::Link;

/// One contributor's part of the noise at the output inside a band.
#[derive(Debug, Clone, PartialEq)]
pub struct BudgetLine {
    pub name: String,
    /// V rms at the output.
    pub rms: f64,
    /// Its part of the whole power, 0…1.
    pub share: f64,
}

/// Points of the frequency grid: the densities are smooth, so that the trapezoid rule errs by less than 1e-4.
const POINTS: usize = 400;

/// Noise at the output inside `band` (Hz), by contributor, the largest first: random noise and the lamps' hum.
///
/// Contributors that the design silences are left out. Small-signal: a link that limits makes other noise than this.
pub fn budget(link: &Link, band: (f64, f64)) -> Vec<BudgetLine> {
    let (from, to) = (band.0.max(1e-3), band.1.max(1e-2));
    let grid: Vec<f64> = (0..POINTS)
        .map(|k| from * (to / from).powf(k as f64 / (POINTS - 1) as f64))
        .collect();
    let mut powers: Vec<(String, f64)> = Vec::new();
    let mut add = |name: &str, power: f64| match powers.iter_mut().find(|p| p.0 == name) {
        Some(line) => line.1 += power,
        None => powers.push((name.to_owned(), power)),
    };
    for (k, &f) in grid.iter().enumerate() {
        let left = grid[k.saturating_sub(1)];
        let right = grid[(k + 1).min(POINTS - 1)];
        let width = (right - left) / 2.0;
        // Walk from the output back, with the gain from each station's output onwards.
        let mut onwards = 1.0;
        for station in link.stations().iter().rev() {
            for share in station.noise(f) {
                add(&share.name, share.density * onwards * width);
            }
            onwards *= station.transfer(f).norm_sqr();
        }
    }
    for lamp in link.lamps() {
        let power = lamp
            .lines()
            .filter(|(f, _)| (from..=to).contains(f))
            .map(|(f, amplitude)| 0.5 * (amplitude * link.gain_after_light(f)).powi(2))
            .sum();
        add(&lamp.hum_name(), power);
    }
    powers.retain(|(name, power)| *power > 0.0 && !link.silence.contains(name));
    let total: f64 = powers.iter().map(|p| p.1).sum();
    let mut lines: Vec<BudgetLine> = powers
        .into_iter()
        .map(|(name, p)| BudgetLine {
            name,
            rms: p.sqrt(),
            share: p / total,
        })
        .collect();
    lines.sort_by(|a, b| b.rms.total_cmp(&a.rms));
    lines
}
