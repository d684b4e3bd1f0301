//! What one section alone cannot know: names, shared supplies, what fits what.

use super::Design;
use super::error::DesignError;
use super::section::{Entry, Origin, Section, Value};
use crate::quantity::{Dimension, format};

/// Gives every stage without a supply of its own the one of its side.
pub(super) fn share_supply(stages: &mut [Section], from: &Section) {
    for stage in stages
        .iter_mut()
        .filter(|stage| stage.key("supply").is_some() && !stage.given("supply"))
    {
        if let Some(entry) = from.entry("supply") {
            let origin = Origin::Shared(from.path.clone());
            stage.entries.insert(
                "supply",
                Entry {
                    value: entry.value.clone(),
                    origin,
                    place: entry.place.clone(),
                },
            );
        }
    }
}

/// Where the load of a `load` front end sits when it is not said.
pub(super) fn place_load(front_end: &mut Section, detector: &Section) -> Result<(), DesignError> {
    let detector = detector.kind.as_deref().unwrap_or_default();
    if front_end.kind.as_deref() == Some("transimpedance") {
        if detector == "photodiode" {
            return Ok(());
        }
        let message =
            format!("a {detector} works into a load, not into a transimpedance amplifier");
        return Err(front_end.fault(
            Some("kind"),
            message,
            "write kind = \"load\", or use a photodiode",
        ));
    }
    let ways: &[&str] = match detector {
        "photodiode" => &["anode", "cathode"],
        "phototransistor" => &["collector", "emitter"],
        _ => &[],
    };
    match (front_end.optional_word("load_at"), ways) {
        (Some(_), []) => Err(front_end.fault(
            Some("load_at"),
            format!("a {detector} has its load across it"),
            "leave load_at out",
        )),
        (Some(word), ways) if !ways.contains(&word) => {
            let message = format!("a {detector} has no {word}");
            Err(front_end.fault(
                Some("load_at"),
                message,
                format!("load_at is {}", ways.join(" or ")),
            ))
        }
        (None, [default, ..]) => {
            let place = front_end.place.clone();
            if let Some(place) = place {
                let value = Value::Word((*default).to_string());
                front_end.entries.insert(
                    "load_at",
                    Entry {
                        value,
                        origin: Origin::Shared("receiver.detector".into()),
                        place,
                    },
                );
            }
            Ok(())
        }
        _ => Ok(()),
    }
}

/// Names of stages: words, no two alike.
pub(super) fn names(stages: &[Section]) -> Result<(), DesignError> {
    for (index, stage) in stages.iter().enumerate() {
        let Some(name) = stage.optional_word("name") else {
            continue;
        };
        let word = name.starts_with(|c: char| c.is_ascii_alphabetic())
            && name
                .chars()
                .all(|c| c.is_ascii_alphanumeric() || c == '-' || c == '_');
        if !word {
            let help = "a name begins with a letter and holds letters, digits, - and _, so that a path can hold it";
            return Err(stage.fault(
                Some("name"),
                format!("a stage cannot be named `{name}`"),
                help,
            ));
        }
        if stages[..index]
            .iter()
            .any(|other| other.optional_word("name") == Some(name))
        {
            let help = "give each stage a name of its own; noise and paths are told apart by it";
            return Err(stage.fault(Some("name"), format!("two stages are named `{name}`"), help));
        }
    }
    Ok(())
}

/// The checks of the finished design.
pub(super) fn all(design: &Design) -> Result<(), DesignError> {
    names(&design.transmitter_stages)?;
    names(&design.receiver_stages)?;
    for stage in design
        .transmitter_stages
        .iter()
        .chain(&design.receiver_stages)
    {
        electrical(stage)?;
        if stage.kind.as_deref() == Some("filter") {
            filter(stage)?;
        }
        let inverting = stage.optional_word("connection") == Some("inverting");
        if inverting && stage.number("ground").is_infinite() {
            let help = "it is the input resistor of an inverting stage; write for example ground = \"10 kΩ\"";
            return Err(stage.fault(
                Some("ground"),
                format!("{}: ground cannot be infinite when inverting", stage.path),
                help,
            ));
        }
    }
    light_curve(&design.emitter)?;
    electrical(&design.front_end)?;
    light(design)?;
    measurable(&design.measure)
}

/// Half the rate of the test signals, Hz: no band reaches beyond.
const HIGHEST_BAND: f64 = 192_000.0;

/// A band that the test signals span, with the tone inside.
fn measurable(measure: &Section) -> Result<(), DesignError> {
    let band = measure.numbers("band");
    let tone = measure.number("tone");
    let hertz = |f: f64| format(f, Dimension::Hertz);
    if band[0] >= band[1] {
        return Err(measure.fault(
            Some("band"),
            "measure.band ends below its start",
            "write the lower edge first",
        ));
    }
    if band[1] > HIGHEST_BAND {
        return Err(measure.fault(
            Some("band"),
            format!(
                "measure.band ends at {}, beyond what the test signals reach",
                hertz(band[1])
            ),
            format!("its upper edge may be {} at most", hertz(HIGHEST_BAND)),
        ));
    }
    if !(band[0]..=band[1]).contains(&tone) {
        let key = if measure.given("tone") {
            "tone"
        } else {
            "band"
        };
        return Err(measure.fault(
            Some(key),
            format!(
                "measure.tone of {} lies outside the band of {} to {}",
                hertz(tone),
                hertz(band[0]),
                hertz(band[1])
            ),
            "give a tone inside the band, or a wider band",
        ));
    }
    Ok(())
}

/// A reference inside the rails, and room left for the output to swing.
fn electrical(section: &Section) -> Result<(), DesignError> {
    let (low, high) = match section.numbers("supply") {
        [single] => (0.0, *single),
        [low, high] => (*low, *high),
        _ => return Ok(()),
    };
    let volts = |value: f64| format(value, Dimension::Volt);
    if let Some(reference) = section
        .key("reference")
        .and_then(|_| section.optional("reference"))
        && !(low..=high).contains(&reference)
    {
        let message = format!(
            "{}: reference {} lies outside the rails",
            section.path,
            volts(reference)
        );
        return Err(section.fault(
            Some("reference"),
            message,
            format!("the rails are {} and {}", volts(low), volts(high)),
        ));
    }
    if section.given("swing_low")
        && section.number("swing_low") + section.number("swing_high") >= high - low
    {
        let lost = volts(section.number("swing_low") + section.number("swing_high"));
        let message = format!(
            "{}: the output cannot move: it keeps {lost} from rails {} apart",
            section.path,
            volts(high - low)
        );
        let key = section
            .entry("swing_low")
            .filter(|entry| entry.origin == Origin::Design)
            .map(|_| "swing_low");
        return Err(section.fault(
            Some(key.unwrap_or("supply")),
            message,
            "raise the supply or choose a part that swings closer",
        ));
    }
    Ok(())
}

/// A measured light–current curve that an emitter can follow.
fn light_curve(emitter: &Section) -> Result<(), DesignError> {
    let points = emitter.pairs("curve");
    let fault = |message: String, help: &str| {
        let message = format!("{}: {message}", emitter.path);
        Err(emitter.fault(Some("curve"), message, help))
    };
    let (amperes, watts) = (
        |value: f64| format(value, Dimension::Ampere),
        |value: f64| format(value, Dimension::Watt),
    );
    if let Some([_, flux]) = points.iter().find(|p| p[0] == 0.0 && p[1] > 0.0) {
        return fault(
            format!("curve gives {} at no current", watts(*flux)),
            "take the offset of the meter away from every point",
        );
    }
    if let Some([one, next]) = points
        .windows(2)
        .filter_map(|pair| <[[f64; 2]; 2]>::try_from(pair).ok())
        .find(|[one, next]| next[1] < one[1])
    {
        return fault(
            format!(
                "curve falls from {} at {} to {} at {}",
                watts(one[1]),
                amperes(one[0]),
                watts(next[1]),
                amperes(next[0])
            ),
            "give the light at one junction temperature, with flux_temperature for its fall; the flux may not fall from pair to pair",
        );
    }
    if points.last().is_some_and(|last| last[1] == 0.0) {
        return fault(
            "curve has no light in it".into(),
            "give each current's flux",
        );
    }
    Ok(())
}

/// What each shape of filter needs.
fn filter(stage: &Section) -> Result<(), DesignError> {
    let shape = stage.word("shape");
    let family = stage.optional_word("family");
    let needed: &[&str] = match (shape, family) {
        ("emphasis" | "de-emphasis", _) => &["time_constant", "second_time_constant"],
        ("low-pass" | "high-pass", Some("rc")) => &["resistor", "capacitor"],
        ("low-pass" | "high-pass", Some("chebyshev")) => &["family", "order", "corner", "ripple"],
        ("low-pass" | "high-pass", _) => &["family", "order", "corner"],
        (_, Some("rc")) => {
            let help = "an rc filter is low-pass or high-pass";
            return Err(stage.fault(
                Some("family"),
                format!("{}: there is no rc {shape}", stage.path),
                help,
            ));
        }
        (_, Some("chebyshev")) => &["family", "order", "corner", "width", "ripple"],
        _ => &["family", "order", "corner", "width"],
    };
    for name in needed {
        if let Some(key) = stage.key(name).filter(|_| !stage.given(name)) {
            let message = format!("{}: a {shape} filter has no `{name}`", stage.path);
            return Err(stage.fault(
                None,
                message,
                format!("add for example: {} ({})", key.line(), key.meaning),
            ));
        }
    }
    let idle = [
        "family",
        "order",
        "corner",
        "width",
        "ripple",
        "resistor",
        "capacitor",
        "time_constant",
        "second_time_constant",
    ];
    match idle
        .iter()
        .find(|name| stage.given(name) && !needed.contains(name) && **name != "family")
    {
        Some(name) => {
            let message = format!(
                "{}: `{name}` says nothing about this {shape} filter",
                stage.path
            );
            Err(stage.fault(
                Some(name),
                message,
                format!("it takes {}", needed.join(", ")),
            ))
        }
        None => Ok(()),
    }
}

/// Light: what needs a filter, a field of view, a wind.
fn light(design: &Design) -> Result<(), DesignError> {
    let optics = &design.optics;
    for lamp in design
        .ambient
        .iter()
        .filter(|lamp| lamp.given("spectral_irradiance"))
    {
        if optics.table("filter").is_none() {
            let message = format!(
                "{}: spectral_irradiance needs the width of an optical filter",
                lamp.path
            );
            let help = "add receiver.optics.filter, or give irradiance in W/m²";
            return Err(lamp.fault(Some("spectral_irradiance"), message, help));
        }
    }
    if optics
        .optional("concentrator_index")
        .is_some_and(|index| index > 1.0)
        && !optics.given("field_of_view")
    {
        let message = "receiver.optics: a concentrator's gain follows from its field of view";
        return Err(optics.fault(
            Some("concentrator_index"),
            message,
            "add for example: field_of_view = \"30°\"",
        ));
    }
    for (effect, needs) in [("turbulence", "wind"), ("sway", "sway_bandwidth")] {
        let path = &design.path;
        if let Some(key) = path.key(needs)
            && path.optional(effect).is_some_and(|value| value > 0.0)
            && !path.given(needs)
        {
            let message = format!("path: {effect} needs {needs}, which sets how fast it moves");
            return Err(path.fault(
                Some(effect),
                message,
                format!("add for example: {}", key.line()),
            ));
        }
    }
    Ok(())
}
