//! The ambient servo: an integrator that takes the mean photocurrent away from the inverting input.
//!
//! z' = (2π·f_s·R_s/R_f)·(y − offset), z and y counted from the reference, and the current (z − x)/R_s into the input x. The output so rests
//! at reference + offset whatever the ambient light, and the signal meets a high-pass s/(s + 2π·f_s). R_s is `servo_resistor`, as large as the
//! feedback unless given; its Johnson noise and the noise gain that it adds to the amplifier's voltage are reckoned with. The integrator has the part's rails and
//! output current (so that it takes at most that over R_s), stands still at them, and is otherwise ideal: its own noise and bias current are left out,
//! good while 4kT·R_s is well above its squared noise voltage.

use crate::design::Section;
use crate::quantity::Dimension;
use crate::signal::implicit::rising_root;
use crate::station::Reading;
use crate::station::opamp::{OpampPart, OutputRest};
use crate::station::wiring::Load;
use std::f64::consts::TAU;

/// Corner beyond which a servo counts as having this one, Hz.
const FASTEST: f64 = 1e12;

/// The integrator at rest.
#[derive(Debug, Clone)]
pub(super) struct AmbientServo {
    frequency: f64,
    /// 1/R_s, S.
    pub conductance: f64,
    /// R_s/R_f.
    ratio: f64,
    /// Its output at rest, counted from the reference, V, and the limits around it, counted from rest.
    output: f64,
    low: f64,
    high: f64,
    /// What stands at its input at rest, V: not 0 where it rests on a limit.
    excess: f64,
    /// Current that it sends at rest, A.
    current: f64,
}

/// The integrator in time: z' = rate·(y + push), from `low` to `high`, all from rest.
#[derive(Debug, Clone, Copy, Default)]
pub(super) struct Integrator {
    /// S
    pub conductance: f64,
    /// 1/s
    pub rate: f64,
    pub push: f64,
    pub low: f64,
    pub high: f64,
}

/// A stage at rest.
pub(super) struct Quiescent {
    pub output: OutputRest,
    /// Inverting input, counted from the reference, V.
    pub input: f64,
    pub servo: Option<AmbientServo>,
}

/// Solves the rest of `section`'s amplifier `part` with `feedback` (Ω) and `next` on its output; `drawn` is the current (A) that leaves the inverting
/// input at its voltage (V from the reference), and its slope (S).
pub(super) fn rest(
    section: &Section,
    part: &OpampPart,
    feedback: f64,
    next: &Load,
    drawn: impl Fn(f64) -> (f64, f64),
) -> Quiescent {
    let settle = |asked: f64| part.rest(part.reference + asked, 1.0 / feedback, next);
    // The loop holds the input at the offset, unless the output cannot follow: then the currents find it, with `also` through `conductance`.
    let input = |output: &OutputRest, also: f64, conductance: f64| {
        if !output.stuck() {
            return part.offset;
        }
        let held = output.rest - part.reference;
        rising_root(part.offset, 1e-12, |x| {
            let (i, g) = drawn(x);
            (
                i + (x - held) / feedback + (x - also) * conductance,
                g + 1.0 / feedback + conductance,
            )
        })
    };
    let Some(frequency) = section.optional("ambient_servo") else {
        let output = settle(part.offset + feedback * drawn(part.offset).0);
        return Quiescent {
            output,
            input: input(&output, 0.0, 0.0),
            servo: None,
        };
    };
    let resistance = section.optional("servo_resistor").unwrap_or(feedback);
    let conductance = 1.0 / resistance;
    let (bottom, top) = part.rails();
    let reach = part.output_current * resistance;
    let low = (bottom - part.reference).max(-reach);
    let high = (top - part.reference).min(reach).max(low);
    let balanced = part.offset + resistance * drawn(part.offset).0;
    let free = settle(part.offset);
    // An output that cannot come to the reference leaves the integrator at its end.
    let z = if free.excess < 0.0 {
        high
    } else if free.excess > 0.0 {
        low
    } else {
        balanced.clamp(low, high)
    };
    let output = if z == balanced {
        free
    } else {
        let left = drawn(part.offset).0 - (z - part.offset) * conductance;
        settle(part.offset + feedback * left)
    };
    let input = input(&output, z, conductance);
    Quiescent {
        input,
        servo: Some(AmbientServo {
            frequency: frequency.min(FASTEST),
            conductance,
            ratio: resistance / feedback,
            output: z,
            low: low - z,
            high: high - z,
            excess: if z == balanced {
                0.0
            } else {
                output.rest - part.reference - part.offset
            },
            current: (z - input) * conductance,
        }),
        output,
    }
}

impl AmbientServo {
    /// Whether it rests on a limit and takes no part in small signals.
    fn stuck(&self) -> bool {
        self.excess != 0.0
    }

    /// Corner of the high-pass that a small signal meets, Hz.
    pub fn corner(&self) -> f64 {
        if self.stuck() { 0.0 } else { self.frequency }
    }

    /// Time constant of that corner, s; 0 where it stands still.
    pub fn time(&self) -> f64 {
        if self.stuck() {
            0.0
        } else {
            1.0 / (TAU * self.frequency)
        }
    }

    pub fn bent(&self) -> Integrator {
        Integrator {
            conductance: self.conductance,
            rate: TAU * self.frequency * self.ratio,
            push: self.excess,
            low: self.low,
            high: self.high,
        }
    }

    /// The tangent at rest.
    pub fn straight(&self) -> Integrator {
        Integrator {
            conductance: self.conductance,
            rate: TAU * self.corner() * self.ratio,
            push: 0.0,
            low: f64::NEG_INFINITY,
            high: f64::INFINITY,
        }
    }

    /// Its output away from rest with its capacitor discharged, V.
    pub fn discharged(&self) -> f64 {
        (-self.output).clamp(self.low, self.high)
    }

    pub fn readings(&self) -> Vec<Reading> {
        vec![
            Reading {
                name: "ambient servo, current",
                value: self.current,
                dimension: Dimension::Ampere,
            },
            Reading {
                name: "ambient servo, most",
                value: self.current + self.high * self.conductance,
                dimension: Dimension::Ampere,
            },
        ]
    }

    pub fn warning(&self, path: &str) -> Option<String> {
        self.stuck().then(|| {
            format!(
                "{path}: the ambient servo is at its limit of {}; the output rests {} from the reference, and slow signals pass",
                Dimension::Ampere.show(self.current),
                Dimension::Volt.show(self.excess)
            )
        })
    }
}
