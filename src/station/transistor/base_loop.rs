//! The base loop as its noises see it.

use crate::physics::bipolar::CommonEmitter;
use crate::physics::noise::{johnson, johnson_current, shot};
use crate::signal::pole::FirstOrderLaw;
use crate::station::noise::Contributor;
use crate::station::wiring::Drive;

/// What stands at a transistor's base, small-signal.
///
/// Below the corner of a coupling capacitor before the base only what hangs on the base stands there; every noise of the loop
/// moves at that one corner between its worth in mid-band and its worth below.
pub struct BaseLoop<'a> {
    path: &'a str,
    law: &'a CommonEmitter,
    temperature: f64,
    /// r_b, Ω.
    inner: f64,
    /// Conductance that hangs on the base besides the source, S.
    hung: f64,
    /// Resistance of source and what hangs there together, Ω.
    outside: f64,
    /// Input resistance behind what hangs there, Ω.
    input: f64,
    /// Corner of the coupling capacitor, rad/s.
    rate: Option<f64>,
}

impl<'a> BaseLoop<'a> {
    /// Of the transistor `law` of the section at `path`; `inner` its r_b (Ω), `hung` S, `temperature` K.
    pub fn new(
        path: &'a str,
        law: &'a CommonEmitter,
        inner: f64,
        hung: f64,
        before: &Drive,
        temperature: f64,
    ) -> Self {
        let input = inner + law.junction_resistance();
        Self {
            path,
            law,
            temperature,
            inner,
            hung,
            outside: law.base_resistance - inner,
            input,
            rate: before
                .blocked
                .map(|c| 1.0 / (c * (before.seen + 1.0 / (hung + 1.0 / input)))),
        }
    }

    /// Loop volts below the corner for each volt there in mid-band, times the impedance at the base over 1/hung.
    fn opened(&self) -> f64 {
        (self.outside + self.input) / (1.0 + self.hung * self.input)
    }

    fn entry(&self, cause: &str, density: f64, mid: f64, low: f64) -> Contributor {
        let name = format!("{}.{cause}", self.path);
        match self.rate {
            Some(rate) => Contributor::white(name, density).through(FirstOrderLaw {
                direct: mid,
                residue: (low - mid) * rate,
                rate,
            }),
            None => Contributor::white(name, density * mid * mid),
        }
    }

    /// Noises that enter outside the junction, as voltages in the loop: of the divider (S), of r_b, and the base current's shot.
    pub fn outer(&self, divider: f64) -> Vec<Contributor> {
        let opened = self.opened();
        let within = self.inner + self.law.emitter_resistance;
        vec![
            self.entry(
                "bias_resistance",
                johnson_current(divider, self.temperature),
                self.outside,
                opened,
            ),
            self.entry(
                "base_resistance",
                johnson(self.inner, self.temperature),
                1.0,
                opened * self.hung,
            ),
            self.entry(
                "base_shot",
                shot(self.law.base_rest),
                self.outside + within,
                opened * (1.0 + self.hung * within),
            ),
        ]
    }

    /// Noises behind the input's capacitance, each at a place of the caller's: `by_emitter` is what a volt in the emitter is
    /// worth there, `by_shot` what an ampere from collector to emitter is.
    pub fn behind(&self, by_emitter: f64, by_shot: f64) -> Vec<Contributor> {
        let below = self.law.emitter_resistance;
        // The collector's shot sees the loop without the transistor's gain around the emitter resistor.
        let bare = self.input - self.law.asked / self.law.base_rest * below;
        let ratio = (1.0 + self.hung * bare) / (1.0 + self.hung * self.input)
            * (self.outside + self.input)
            / (self.outside + bare);
        vec![
            self.entry(
                "emitter_resistor",
                johnson(below, self.temperature),
                by_emitter,
                by_emitter * self.opened() * self.hung,
            ),
            self.entry(
                "collector_shot",
                shot(self.law.collector_rest),
                by_shot,
                by_shot * ratio,
            ),
        ]
    }
}
