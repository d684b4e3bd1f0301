//! What must be said of a design's dangers: predicted sound levels beside published exposure guidance.

use std::f64::consts::SQRT_2;

use super::Findings;
use crate::physics::sound::{listening_time, occupational_time};
use crate::render::programme::ChannelOutcome;

/// Predicted sound pressure levels of the output, dB re 20 µPa, unweighted.
pub struct Levels {
    /// Of the test tone, where it arrives.
    pub tone: Option<f64>,
    /// Of a sine whose peaks touch the output's full scale.
    pub full_scale: f64,
}

/// The output's levels; none of a line.
pub fn levels(findings: &Findings) -> Option<Levels> {
    let sound = findings.link.sound()?;
    Some(Levels {
        tone: findings
            .measured
            .figures
            .signal_rms_v
            .map(|v| sound.level(v)),
        full_scale: sound.level(findings.link.output_full_scale() / SQRT_2),
    })
}

/// Predicted level of one channel of the programme, dB re 20 µPa; none of a line or of silence.
pub fn programme_level(findings: &Findings, channel: &ChannelOutcome) -> Option<f64> {
    let volts = channel.received.rms() * findings.link.output_full_scale();
    let level = findings.link.sound()?.level(volts);
    level.is_finite().then_some(level)
}

/// The cautions of `findings`, a sentence or two each.
pub fn texts(findings: &Findings) -> Vec<String> {
    let (Some(sound), Some(levels)) = (findings.link.sound(), levels(findings)) else {
        return Vec::new();
    };
    let place = match sound.distance {
        Some(_) => "at the listener",
        None => "at the ear",
    };
    let mut all = vec![exposure("a full-scale sine", place, levels.full_scale)];
    if let Some(tone) = levels.tone.filter(|level| level.is_finite()) {
        all.push(exposure("the test tone", place, tone));
    }
    let channels = findings.programme.map_or(&[][..], |p| &p.channels);
    for (n, channel) in channels.iter().enumerate() {
        if let Some(level) = programme_level(findings, channel) {
            let what = if channels.len() > 1 {
                format!("the programme's channel {}", n + 1)
            } else {
                "the programme".into()
            };
            all.push(exposure(&what, place, level));
        }
    }
    all.push(
        "These levels are estimates: unweighted, from sensitivity and nominal impedance, held against limits in dB(A). A link that comes back \
         from an interruption can be louder. Local codes and licensed practice decide."
            .into(),
    );
    all
}

/// One level beside the guidance.
fn exposure(what: &str, place: &str, level: f64) -> String {
    let times = if level < HARMLESS {
        "below what the guidance limits".to_owned()
    } else {
        format!(
            "NIOSH 98-126 (85 dB(A) for 8 h, 3 dB exchange) would allow {}, WHO/ITU-T H.870 (80 dB(A) for 40 h a week) {}",
            duration(occupational_time(level), 24.0, "day"),
            duration(listening_time(level), 168.0, "week")
        )
    };
    format!("Sound: {what} is predicted at {level:.1} dB SPL {place}: {times}.")
}

/// Level that both publications allow at any time, dB(A): 40 h at 80 dB(A) are a whole week below 73.8 dB(A).
const HARMLESS: f64 = 73.0;

/// A time, s, that a `span` of `most` hours may hold, in words.
fn duration(seconds: f64, most: f64, span: &str) -> String {
    let hours = seconds / 3600.0;
    let time = match seconds {
        _ if hours >= most => return format!("the whole {span}"),
        s if s >= 36e3 => format!("{hours:.0} h"),
        s if s >= 3600.0 => format!("{hours:.1} h"),
        s if s >= 60.0 => format!("{:.0} min", s / 60.0),
        s if s >= 1.0 => format!("{s:.0} s"),
        _ => "less than 1 s".into(),
    };
    format!("{time} a {span}")
}

#[cfg(test)]
mod tests {
    use super::*;

    // 85 dB(A): 8 h; 88: 4 h; 100: 15 min (NIOSH 98-126); 100 dB(A): 0.4 h a week (WHO/ITU-T H.870, exact power form).
    #[test]
    fn levels_stand_beside_their_times() {
        let text = exposure("it", "here", 100.0);
        assert!(
            text.contains("15 min a day") && text.contains("24 min a week"),
            "{text}"
        );
        assert!(exposure("it", "here", 88.0).contains("4.0 h a day"));
        assert!(exposure("it", "here", 79.0).contains("the whole day"));
        assert!(exposure("it", "here", 60.0).contains("below"));
    }
}
