//! Results as lines of text.

use std::fmt::Write as _;

use super::{Findings, cautions};
use crate::figures::Figures;
use crate::link::StationEvents;
use crate::quantity::Dimension;
use crate::render::programme::{ChannelOutcome, Outcome};

/// The whole text of `findings`.
pub fn text(findings: &Findings) -> String {
    let mut out = String::new();
    let f = findings;
    let _ = writeln!(out, "{}  ({})", f.design.title, f.design.file);
    if let Some(programme) = f.programme {
        programme_lines(&mut out, programme);
    }
    figure_lines(&mut out, f);
    operating_lines(&mut out, f);
    budget_lines(&mut out, f);
    requirement_lines(&mut out, f);
    caution_lines(&mut out, f);
    out
}

fn heading(out: &mut String, text: &str) {
    let _ = writeln!(out, "\n{text}");
}

/// One line: a name, a value, and what there is to say of it.
fn line(out: &mut String, name: &str, value: &str, remark: &str) {
    // A name or a value too long for its column keeps two spaces behind it.
    let text = format!("{:<24}", format!("  {name}  "));
    let text = format!("{text}{:<16}{remark}", format!("{value}  "));
    let _ = writeln!(out, "{}", text.trim_end());
}

fn decibels(value: Option<f64>) -> String {
    value.map_or("–".into(), |v| format!("{v:.1} dB"))
}

fn percent(value: Option<f64>) -> String {
    value.map_or("–".into(), |v| {
        if v != 0.0 && v.abs() < 1e-4 {
            return format!("{v:.1e} %");
        }
        // Three significant digits.
        let digits = (2 - v.abs().max(1e-9).log10().floor() as i32).clamp(0, 10) as usize;
        format!("{v:.digits$} %")
    })
}

fn quantity(value: Option<f64>, dimension: Dimension) -> String {
    value.map_or("–".into(), |v| dimension.show(v))
}

fn programme_lines(out: &mut String, p: &Outcome) {
    heading(out, "Programme");
    let seconds = p.frames as f64 / f64::from(p.spec.rate);
    line(
        out,
        "length",
        &format!("{seconds:.2} s"),
        &format!("{} frames at {} Hz", p.frames, p.spec.rate),
    );
    line(
        out,
        "link rate",
        &Dimension::Hertz.show(p.link_rate),
        &format!("{} samples of the link for each of the file", p.oversample),
    );
    if p.drive != 0.0 {
        let drive = Dimension::Decibel.show(p.drive);
        line(out, "drive", &drive, "change of level at the source");
    }
    for (n, c) in p.channels.iter().enumerate() {
        if p.channels.len() > 1 {
            let _ = writeln!(out, "  channel {}", n + 1);
        }
        channel_lines(out, c, p);
    }
    for file in &p.files {
        line(out, "written", &file.display().to_string(), "");
    }
}

fn channel_lines(out: &mut String, c: &ChannelOutcome, p: &Outcome) {
    let level = |db: Option<f64>| db.map_or("silent".into(), |v| format!("{v:.1} dBFS"));
    line(
        out,
        "sent",
        &level(c.sent.rms_dbfs()),
        &format!("peak {}", level(c.sent.peak_dbfs())),
    );
    line(
        out,
        "received",
        &level(c.received.rms_dbfs()),
        &format!("peak {}", level(c.received.peak_dbfs())),
    );
    line(
        out,
        "clipped samples",
        &c.received.clipped().to_string(),
        "at or beyond the file's full scale",
    );
    if let Some(noise) = c.noise {
        line(
            out,
            "programme SNR",
            &decibels(noise.ratio_db()),
            "clean programme over what the noise added",
        );
    }
    if let Some(distortion) = c.distortion {
        line(
            out,
            "programme distortion",
            &decibels(distortion.ratio_db().map(|db| -db)),
            &format!(
                "{} of the clean programme",
                percent(distortion.share().map(|s| 100.0 * s))
            ),
        );
    }
    event_lines(out, &c.events, p);
}

fn event_lines(out: &mut String, all: &[StationEvents], p: &Outcome) {
    let whole = p.frames as f64 * f64::from(p.oversample);
    for StationEvents { path, events } in all {
        for (count, what) in [
            (events.clipped, "at a limit"),
            (events.slewing, "slewing"),
            (events.cut_off, "dark"),
        ] {
            if count > 0 {
                let time = Dimension::Second.show(count as f64 / p.link_rate);
                let share = percent(Some(100.0 * count as f64 / whole));
                line(out, path, &time, &format!("{what}, {share} of the time"));
            }
        }
        if events.interruptions > 0 {
            line(
                out,
                path,
                &events.interruptions.to_string(),
                "interruptions",
            );
        }
    }
}

fn figure_lines(out: &mut String, f: &Findings) {
    let show = |v, d: Dimension| d.show(v);
    heading(
        out,
        &format!(
            "Figures at {}, {} re full scale, {} to {}",
            show(f.bench.tone, Dimension::Hertz),
            show(f.bench.level, Dimension::Decibel),
            show(f.bench.band.0, Dimension::Hertz),
            show(f.bench.band.1, Dimension::Hertz)
        ),
    );
    let figures = &f.measured.figures;
    let remark = |key: &str, otherwise: &str| remark(figures, key, otherwise);
    line(
        out,
        "gain",
        &decibels(figures.gain_db),
        &remark("gain_db", "output volts over source volts"),
    );
    line(
        out,
        "THD",
        &percent(figures.thd_percent),
        &remark("thd_db", &decibels(figures.thd_db)),
    );
    line(
        out,
        "THD+N",
        &percent(figures.thd_n_percent),
        &remark(
            "thd_n_percent",
            &format!("SINAD {}", decibels(figures.sinad_db)),
        ),
    );
    let scatter = f.measured.noise_scatter_db.map_or(String::new(), |s| {
        format!("; the record leaves ± {s:.2} dB on white noise")
    });
    line(
        out,
        "SNR",
        &decibels(figures.snr_db),
        &remark(
            "snr_db",
            &format!("A-weighted {}{scatter}", decibels(figures.snr_a_db)),
        ),
    );
    let noise = quantity(figures.noise_rms_v, Dimension::Volt);
    line(
        out,
        "signal",
        &quantity(figures.signal_rms_v, Dimension::Volt),
        &format!("rms; idle noise and hum {noise}"),
    );
    line(
        out,
        "hum",
        &decibels(figures.hum_db),
        &remark("hum_db", "mains multiples over the fundamental"),
    );
    let low = quantity(figures.band_low_hz, Dimension::Hertz);
    line(out, "band, low edge", &low, &remark("band_low_hz", "−3 dB"));
    let high = quantity(figures.band_high_hz, Dimension::Hertz);
    line(
        out,
        "band, high edge",
        &high,
        &remark("band_high_hz", "−3 dB"),
    );
    line(
        out,
        "headroom",
        &decibels(figures.headroom_db),
        &remark("headroom_db", "until the first station limits"),
    );
}

/// What to say beside a figure: its floor, or why it is missing, or `otherwise`.
fn remark(figures: &Figures, key: &str, otherwise: &str) -> String {
    if figures.below_floor.iter().any(|k| k == key) {
        return format!("{otherwise}; below the method's floor, which is shown");
    }
    figures
        .reasons
        .get(key)
        .cloned()
        .unwrap_or_else(|| otherwise.to_owned())
}

fn operating_lines(out: &mut String, f: &Findings) {
    heading(out, "At rest");
    for station in f.link.stations() {
        let values: Vec<String> = station
            .operating_point()
            .iter()
            .filter(|r| r.value.is_finite())
            .map(|r| format!("{} {}", r.name, r.dimension.show(r.value + 0.0)))
            .collect();
        if !values.is_empty() {
            let _ = writeln!(out, "  {}: {}", station.path(), values.join(", "));
        }
    }
    for lamp in f.link.lamps() {
        let _ = writeln!(
            out,
            "  {} ({}): photocurrent {}",
            lamp.path(),
            lamp.kind(),
            Dimension::Ampere.show(lamp.mean())
        );
    }
    let peak = f
        .programme
        .iter()
        .flat_map(|p| p.channels.iter().flat_map(|c| &c.events))
        .chain(&f.measured.events)
        .filter_map(|e| e.events.peak)
        .reduce(f64::max);
    if let Some(peak) = peak {
        line(
            out,
            "peak LED current",
            &Dimension::Ampere.show(peak),
            &match f.link.max_current() {
                most if most.is_finite() => format!("of {} allowed", Dimension::Ampere.show(most)),
                _ => "no limit is given".into(),
            },
        );
    }
}

/// Contributors shown; the rest is summed up.
const SHOWN: usize = 6;

fn budget_lines(out: &mut String, f: &Findings) {
    if f.budget.is_empty() {
        return;
    }
    heading(out, "What makes the noise");
    for part in f.budget.iter().take(SHOWN) {
        line(
            out,
            &format!("{:.1} %", 100.0 * part.share),
            &Dimension::Volt.show(part.rms),
            &part.name,
        );
    }
    let rest: f64 = f.budget.iter().skip(SHOWN).map(|p| p.share).sum();
    if f.budget.len() > SHOWN {
        line(
            out,
            &format!("{:.1} %", 100.0 * rest),
            "",
            &format!("{} others", f.budget.len() - SHOWN),
        );
    }
}

fn requirement_lines(out: &mut String, f: &Findings) {
    if f.verdicts.is_empty() {
        return;
    }
    heading(out, "Limits");
    for v in f.verdicts {
        let value = v.value.map_or_else(
            || v.reason.clone().unwrap_or_default(),
            |x| match v.unit {
                Dimension::Share => percent(Some(100.0 * x)),
                unit => unit.show(x),
            },
        );
        line(
            out,
            &format!("{} {}", v.key, v.limit),
            if v.met { "met" } else { "NOT MET" },
            &value,
        );
    }
}

fn caution_lines(out: &mut String, f: &Findings) {
    let texts = cautions::texts(f);
    if texts.is_empty() {
        return;
    }
    heading(out, "Cautions");
    for text in texts {
        let _ = writeln!(out, "  {text}");
    }
}
