//! The stations under test.

mod electrical;
mod filtering;
mod receiving;
mod transmitting;

use crate::bench::{Draft, station};
use harklight::link::Link;
use harklight::station::Model;

/// How the static law can be seen in time.
#[derive(Clone, Copy, PartialEq)]
pub enum Hold {
    /// By a held input, once everything has settled.
    Settled,
    /// Not at all: a capacitor or a servo blocks DC, or heat moves the law, and the Model's curve is the one before that.
    Never,
}

/// One station with what it is driven by.
pub struct Case {
    pub name: &'static str,
    pub draft: Draft,
    /// Every station at this path is checked.
    pub path: &'static str,
    /// Peak of a small signal, in the input's unit.
    pub small: f64,
    /// Inputs between which the static law is compared.
    pub span: (f64, f64),
    pub hold: Hold,
}

impl Case {
    pub fn link(&self) -> Link {
        self.draft.link()
    }

    pub fn stations<'a>(&self, link: &'a Link) -> Vec<&'a dyn Model> {
        station(link, self.path);
        let all = link.stations().iter().map(AsRef::as_ref);
        all.filter(|s: &&dyn Model| s.path() == self.path).collect()
    }
}

fn case(
    name: &'static str,
    draft: Draft,
    path: &'static str,
    small: f64,
    span: (f64, f64),
    hold: Hold,
) -> Case {
    Case {
        name,
        draft,
        path,
        small,
        span,
        hold,
    }
}

/// A source of 2 V behind 10 kΩ that is not quiet.
fn source() -> Draft {
    Draft::ideal()
        .set("source.full_scale=2 V")
        .set("source.resistance=10 kΩ")
        .set("source.noise=30 nV/√Hz")
}

/// A stage before the driver, behind that source.
fn stage(text: &str) -> Draft {
    source().transmitter(text)
}

fn coupling(farads: &str) -> String {
    format!("[[transmitter.stage]]\nkind = \"coupling\"\ncapacitor = \"{farads}\"\n")
}

fn opamp(keys: &str, part: &str) -> String {
    format!(
        "[[transmitter.stage]]\nname = \"amp\"\nkind = \"opamp\"\nsupply = [\"-9 V\", \"9 V\"]\n{keys}part = \"{part}\"\n"
    )
}

/// The slow op-amp with `keys`.
fn slow(keys: &str) -> String {
    opamp(keys, "slow-bipolar")
}

/// The same, its input as large as a cable.
fn large_input(text: String) -> String {
    format!("{text}input_capacitance = \"200 pF\"\n")
}

const FIRST: &str = "transmitter.stage.1";
const AMP: &str = "transmitter.stage.amp";
/// An op-amp that shows 47 kΩ.
const BIASED: &str = "connection = \"non-inverting\"\nfeedback = \"22 kΩ\"\nground = \"4.7 kΩ\"\nbias_resistance = \"47 kΩ\"\n";
/// A bipolar transistor with all it has.
const BIPOLAR: &str = "gain = 200\ntransition_frequency = \"50 MHz\"\ncollector_capacitance = \"4 pF\"\n\
base_resistance = \"200 Ω\"\nearly_voltage = \"80 V\"\nsaturation = \"0.2 V\"\nsaturation_current = \"7 fA\"\n";

/// Every kind of station, by the ways in which it can stand.
pub fn all() -> Vec<Case> {
    [
        electrical::cases(),
        filtering::cases(),
        transmitting::cases(),
        receiving::cases(),
    ]
    .into_iter()
    .flatten()
    .collect()
}
