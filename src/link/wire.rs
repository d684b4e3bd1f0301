//! Wiring: each stage sees what loads it, found from the far end, and what drives it, found from the source.

use std::collections::BTreeSet;

use super::Link;
use crate::design::{Design, DesignError, Section};
use crate::physics::constants::thermal_voltage;
use crate::station::Model;
use crate::station::air::{AirPath, Optics};
use crate::station::ambient::Lamp;
use crate::station::coupling::Coupling;
use crate::station::opamp::OpampStage;
use crate::station::output::Output;
use crate::station::receive_head::{Detector, LightAtRest, LoadHead, TransimpedanceHead};
use crate::station::source::Source;
use crate::station::transmit_head::TransmitHead;
use crate::station::trim::Trim;
use crate::station::wiring::{Drive, Load};

/// Compiles `design` into a link.
pub fn wire(design: &Design) -> Result<Link, DesignError> {
    let t = design.temperature;
    let vt = thermal_voltage(t);
    let mut stations: Vec<Box<dyn Model>> = Vec::new();

    let source = Source::new(&design.source, t);
    let mut drive = source.drive();
    let source_full_scale = source.full_scale();
    stations.push(Box::new(source));
    drive = stages(
        &design.transmitter_stages,
        TransmitHead::input_load(&design.driver),
        drive,
        t,
        &mut stations,
    )?;

    let head = TransmitHead::new(&design.driver, &design.emitter, &drive, t);
    let (flux, max_current) = (head.flux(), head.max_current());
    let measured_to = head.measured_to();
    stations.push(Box::new(head));

    let wavelength = design.emitter.number("wavelength");
    let detector = Detector::new(&design.detector, wavelength, t, vt);
    let optics = Optics::new(&design.optics, detector.area);
    let path = AirPath::new(
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
        .map(|section| Lamp::new(section, &optics, detector.responsivity))
        .collect::<Result<Vec<_>, _>>()?;
    let light = LightAtRest {
        signal: received * detector.responsivity,
        ambient: lamps.iter().fold(0.0, |sum, lamp| sum + lamp.mean()),
    };
    let responsivity = detector.responsivity;
    let receiver_at = stations.len();
    let receiver = &design.receiver_stages;
    let next = input_load(receiver, Output::input_load(&design.output));
    if design.front_end.kind.as_deref() == Some("transimpedance") {
        let head = TransimpedanceHead::new(&design.front_end, detector, light, &next, t);
        drive = head.drive();
        stations.push(Box::new(head));
    } else {
        let head = LoadHead::new(&design.front_end, detector, light, &next, t);
        drive = head.drive();
        stations.push(Box::new(head));
    }
    drive = stages(
        receiver,
        Output::input_load(&design.output),
        drive,
        t,
        &mut stations,
    )?;
    let output = Output::new(&design.output, &drive);
    let output_full_scale = output.full_scale();
    stations.push(Box::new(output));

    let mut link = Link {
        stations,
        lamps,
        source_full_scale,
        output_full_scale,
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
fn stage_load(section: &Section, next: &Load) -> Load {
    match section.kind.as_deref() {
        Some("coupling") => Coupling::input_load(section, next),
        Some("trim") => Trim::input_load(section, next),
        _ => OpampStage::input_load(section),
    }
}

/// What a row of stages shows to what drives it, `end` behind the last.
fn input_load(sections: &[Section], end: Load) -> Load {
    units(sections)
        .iter()
        .rev()
        .fold(end, |next, (section, _)| stage_load(section, &next))
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
        loads.push(stage_load(section, &next));
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
