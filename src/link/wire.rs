//! Wiring: each stage sees what loads it, found from the far end, and what drives it, found from the source.

use std::collections::BTreeSet;

use super::Link;
use crate::design::{Design, DesignError, Section};
use crate::station::Model;
use crate::station::ambient::Lamp;
use crate::station::coupling::Coupling;
use crate::station::filter::{ActiveFilter, RcFilter};
use crate::station::opamp::OpampStage;
use crate::station::optics::Optics;
use crate::station::output::Output;
use crate::station::path::LightPath;
use crate::station::power::PowerAmplifier;
use crate::station::receive_head::{LightAtRest, Sensitivity, receive_head};
use crate::station::source::Source;
use crate::station::transistor::TransistorStage;
use crate::station::transmit_head::TransmitHead;
use crate::station::trim::Trim;
use crate::station::wiring::{Drive, Load};

/// Compiles `design` into a link.
pub fn wire(design: &Design) -> Result<Link, DesignError> {
    let t = design.temperature;
    let mut stations: Vec<Box<dyn Model>> = Vec::new();

    let source = Source::new(&design.source, t);
    let mut drive = source.drive();
    let source_full_scale = source.full_scale();
    stations.push(Box::new(source));
    drive = stages(
        &design.transmitter_stages,
        TransmitHead::input_load(&design.driver, t),
        drive,
        t,
        &mut stations,
    )?;

    let head = TransmitHead::new(&design.driver, &design.emitter, &drive, t);
    let (flux, max_current) = (head.flux(), head.max_current());
    let measured_to = head.measured_to();
    stations.push(Box::new(head));

    let wavelength = design.emitter.number("wavelength");
    let sensitivity = Sensitivity::new(&design.detector, wavelength);
    let responsivity = sensitivity.responsivity;
    let optics = Optics::new(&design.optics, sensitivity.area);
    let path = LightPath::new(
        &design.path,
        &design.interruptions,
        &design.emitter,
        &optics,
        flux,
    )?;
    let received = path.received();
    stations.push(Box::new(path));

    let lamps = design
        .ambient
        .iter()
        .map(|section| Lamp::new(section, &optics, responsivity))
        .collect::<Result<Vec<_>, _>>()?;
    let light = LightAtRest {
        signal: received * responsivity,
        ambient: lamps.iter().fold(0.0, |sum, lamp| sum + lamp.mean()),
    };
    let receiver_at = stations.len();
    let receiver = &design.receiver_stages;
    let next = input_load(receiver, Output::input_load(&design.output), t);
    let (head, offers) = receive_head(
        &design.front_end,
        &design.detector,
        (sensitivity, wavelength),
        light,
        &next,
        t,
    );
    drive = offers;
    stations.push(head);
    drive = stages(
        receiver,
        Output::input_load(&design.output),
        drive,
        t,
        &mut stations,
    )?;
    let output = Output::new(&design.output, &drive);
    let output_full_scale = output.full_scale();
    let sound = output.sound();
    stations.push(Box::new(output));

    let mut link = Link {
        stations,
        lamps,
        source_full_scale,
        output_full_scale,
        sound,
        max_current,
        measured_to,
        receiver: receiver_at,
        responsivity,
        silence: design.silence.clone(),
        warnings: Vec::new(),
    };
    if received <= 0.0 {
        link.warnings
            .push("no light arrives at the detector: the output holds noise alone".into());
    }
    if design.path.kind.as_deref() == Some("fibre") {
        let outside = design.ambient.iter().filter(|a| !a.given("photocurrent"));
        link.warnings.extend(outside.map(|a| {
            format!(
                "{}: it falls on the detector as if there were no fibre before it; a closed connector would keep it out",
                a.path
            )
        }));
    }
    link.warnings.extend(unknown_silence(&link));
    Ok(link)
}

/// Each section with the number of each of its equal amplifiers.
fn units(sections: &[Section]) -> Vec<(&Section, usize)> {
    sections
        .iter()
        .flat_map(|s| {
            let count = if s.kind.as_deref() == Some("opamp") {
                s.number("stages") as usize
            } else {
                1
            };
            (0..count.max(1)).map(move |unit| (s, unit))
        })
        .collect()
}

/// What one stage shows to what drives it, with `next` behind it.
fn stage_load(section: &Section, next: &Load, temperature: f64) -> Load {
    match section.kind.as_deref() {
        Some("coupling") => Coupling::input_load(section, next),
        Some("trim") => Trim::input_load(section, next),
        Some("transistor") => TransistorStage::input_load(section, next, temperature),
        Some("filter") if ActiveFilter::describes(section) => ActiveFilter::input_load(next),
        Some("filter") => RcFilter::input_load(section, next),
        Some("power") => PowerAmplifier::input_load(),
        _ => OpampStage::input_load(section),
    }
}

/// What a row of stages shows to what drives it, `end` behind the last.
fn input_load(sections: &[Section], end: Load, temperature: f64) -> Load {
    units(sections)
        .iter()
        .rev()
        .fold(end, |next, (section, _)| {
            stage_load(section, &next, temperature)
        })
}

/// Adds a row of stages between `drive` and the load `end`; gives what the last one offers.
fn stages(
    sections: &[Section],
    end: Load,
    mut drive: Drive,
    temperature: f64,
    stations: &mut Vec<Box<dyn Model>>,
) -> Result<Drive, DesignError> {
    let row = units(sections);
    let mut loads = vec![end];
    for (section, _) in row.iter().rev() {
        let next = loads[loads.len() - 1];
        loads.push(stage_load(section, &next, temperature));
    }
    loads.pop();
    for ((section, unit), next) in row.into_iter().zip(loads.iter().rev()) {
        match section.kind.as_deref() {
            Some("coupling") => {
                let stage = Coupling::new(section, &drive, next);
                drive = stage.drive();
                stations.push(Box::new(stage));
            }
            Some("trim") => {
                let stage = Trim::new(section, &drive, next, temperature);
                drive = stage.drive();
                stations.push(Box::new(stage));
            }
            Some("transistor") => {
                let stage = TransistorStage::new(section, &drive, next, temperature);
                drive = stage.drive();
                stations.push(Box::new(stage));
            }
            Some("filter") if ActiveFilter::describes(section) => {
                let stage = ActiveFilter::new(section, &drive, next);
                drive = stage.drive();
                stations.push(Box::new(stage));
            }
            Some("filter") => {
                let stage = RcFilter::new(section, &drive, next, temperature);
                drive = stage.drive();
                stations.push(Box::new(stage));
            }
            Some("power") => {
                let stage = PowerAmplifier::new(section, next);
                drive = stage.drive();
                stations.push(Box::new(stage));
            }
            _ => {
                let stage = OpampStage::new(section, unit, &drive, next, temperature)?;
                drive = stage.drive();
                stations.push(Box::new(stage));
            }
        }
    }
    Ok(drive)
}

/// Warnings for names under `silence` that no contributor of this link bears.
fn unknown_silence(link: &Link) -> Vec<String> {
    let mut names: BTreeSet<String> = link.lamps.iter().map(Lamp::hum_name).collect();
    names.extend(
        link.stations
            .iter()
            .flat_map(|s| s.noise(1e3))
            .map(|share| share.name),
    );
    link.silence
        .iter()
        .filter(|s| !names.contains(*s))
        .map(|s| {
            let all: Vec<&str> = names.iter().map(String::as_str).collect();
            format!(
                "silence: \"{s}\" is no noise contributor of this link; there are {}",
                all.join(", ")
            )
        })
        .collect()
}
