//! The transmit head: a driver and its emitter, which share one current. Volts in, emitted watts out.

mod driver;
mod emitter;
mod in_time;
mod servo;

use num_complex::Complex64;

use super::noise::Contributor;
use super::wiring::{Drive, Load};
use super::{Conditions, Limit, Model, Reading, Runner, Share};
use crate::design::Section;
use crate::physics::constants::thermal_voltage;
use crate::quantity::Dimension;
use crate::signal::pole::FirstOrderLaw;
use driver::Driver;
use emitter::Emitter;
use servo::Servo;

/// Driver and emitter on paper.
///
/// Self-heating is one thermal pole for the junction: ΔT' = (R_th·(V_f·i − P) − ΔT)/τ; flux falls with it by
/// `flux_temperature` and the forward voltage by the band gap's law. Good from 250 K to 400 K of junction temperature; the
/// flux never falls below nought.
pub struct TransmitHead {
    path: String,
    driver: Driver,
    emitter: Emitter,
    /// Share of the voltage before that reaches the driver's input.
    division: f64,
    rest: Rest,
    tangent: Tangent,
    /// Low-pass of the driver's own input.
    input_pole: FirstOrderLaw,
    /// Noise voltages in series with the driver's input, before that pole and behind it.
    at_input: Vec<Contributor>,
    behind_pole: Vec<Contributor>,
    /// Relative noise of the light, 1/Hz.
    intensity: Contributor,
    servo: Option<Servo>,
    supply: f64,
    warnings: Vec<String>,
}

/// Where the head rests.
#[derive(Debug, Clone, Copy)]
struct Rest {
    /// Voltage of rest at the driver's input, V.
    input: f64,
    /// A
    current: f64,
    /// Heating of the junction, K.
    heating: f64,
    /// All junctions together, V.
    forward_voltage: f64,
    /// W
    flux: f64,
}

/// Slopes at rest.
#[derive(Debug, Clone, Copy)]
struct Tangent {
    /// Flux against driver volts: the direct way and the slow way through the junction's heat.
    heated: FirstOrderLaw,
    /// Current against driver volts, S.
    current: f64,
    /// Whether the junction's heat feeds itself.
    runs_away: bool,
}

impl TransmitHead {
    /// What the driver shows to the stage before it; `temperature` in K.
    pub fn input_load(driver: &Section, temperature: f64) -> Load {
        Driver::input_load(driver, temperature)
    }

    /// From `[transmitter.driver]` and `[transmitter.emitter]`, behind `before`; `temperature` in K.
    pub fn new(
        driver_section: &Section,
        emitter_section: &Section,
        before: &Drive,
        temperature: f64,
    ) -> Self {
        let load = Self::input_load(driver_section, temperature);
        let input = if before.blocked.is_some() {
            before.rest
        } else {
            before.loaded_rest(&load)
        };
        let vt = thermal_voltage(temperature);
        let mut emitter = Emitter::new(emitter_section, vt, temperature);
        let mut driver = Driver::new(driver_section, &emitter, before, vt, temperature);
        let division = driver
            .input_gain()
            .unwrap_or_else(|| before.division(load.signal_conductance()));

        let current = driver.current(input, input, 0.0, 0.0).0;
        let forward_voltage = emitter.forward_voltage(current, 0.0);
        emitter.set_drift(current, temperature);
        let cold_flux = emitter.flux(current, 0.0);
        let heating = emitter.heating_at_rest(forward_voltage * current, cold_flux);
        driver.set_coldest(emitter.drift().abs() * heating.max(0.0));
        let flux = emitter.flux(current, heating);
        let rest = Rest {
            input,
            current,
            heating,
            forward_voltage,
            flux,
        };
        let tangent = tangent(&driver, &emitter, &rest);

        let servo = Servo::new(driver_section, &driver, &emitter, &rest, &tangent);

        let driver_name = &driver_section.path;
        let [outer, behind_pole] = driver.noises();
        let at_input = driver
            .noisy_resistances(&emitter)
            .into_iter()
            .map(|(cause, r)| {
                Contributor::white(
                    format!("{driver_name}.{cause}"),
                    crate::physics::noise::johnson(r, temperature),
                )
            })
            .chain(outer)
            .collect();
        let intensity = Contributor::white(
            format!("{}.intensity", emitter_section.path),
            emitter_section
                .optional("intensity_noise")
                .map_or(0.0, |db| 10f64.powf(db / 10.0)),
        );
        let mut warnings = driver.warnings();
        let limit = emitter.max_current;
        if current > limit {
            warnings.push(format!(
                "{}: it rests at {}, above the emitter's maximum of {}",
                emitter_section.path,
                Dimension::Ampere.show(current),
                Dimension::Ampere.show(limit)
            ));
        }
        if let Some(limit) = emitter.measured_to()
            && current > limit
        {
            warnings.push(format!(
                "{}: it rests at {}, beyond its curve, which ends at {}",
                emitter_section.path,
                Dimension::Ampere.show(current),
                Dimension::Ampere.show(limit)
            ));
        }
        if current < driver.asked_at_rest() * 0.99 {
            warnings.push(format!(
                "{driver_name}: the supply has too little room for the bias; the emitter rests at {} instead of {}",
                Dimension::Ampere.show(current),
                Dimension::Ampere.show(driver.asked_at_rest())
            ));
        }
        if tangent.runs_away {
            warnings.push(format!(
                "{}: the junction runs away: its heat lowers the forward voltage by more than it takes to keep itself up; small-signal figures leave the heat out",
                emitter_section.path
            ));
        }
        if current <= 0.0 {
            warnings.push(format!(
                "{driver_name}: no current flows at rest; the emitter is dark"
            ));
        }
        match &servo {
            Some(servo) => warnings.extend(servo.warnings()),
            None if driver_section.given("servo") => warnings.push(format!(
                "{driver_name}: the servo has no slope of light at rest to compare with and does nothing"
            )),
            None => {}
        }
        Self {
            path: "transmitter.emitter".into(),
            supply: driver.supply,
            input_pole: driver.input_pole(),
            driver,
            emitter,
            division,
            rest,
            tangent,
            at_input,
            behind_pole,
            intensity,
            servo,
            warnings,
        }
    }

    /// Emitted flux at rest, W.
    pub fn flux(&self) -> f64 {
        self.rest.flux
    }

    /// Largest current that the emitter may carry, A.
    pub fn max_current(&self) -> f64 {
        self.emitter.max_current
    }

    /// The current up to which the emitter's light was measured, A, where it is given by a curve.
    pub fn measured_to(&self) -> Option<f64> {
        self.emitter.measured_to()
    }

    /// Quasi-static current at a deviation `x` (V) of the voltage before, A.
    pub fn current(&self, x: f64) -> f64 {
        let rest = &self.rest;
        let current = |volts: f64| {
            self.driver
                .current(rest.input, rest.input + volts, 0.0, rest.current)
                .0
        };
        let asked = self.division * x;
        let flux = |volts| self.emitter.flux(current(volts), rest.heating) - rest.flux;
        current(
            self.servo
                .as_ref()
                .map_or(asked, |servo| servo.settle(asked, flux)),
        )
    }

    /// Whether the junction's heat moves.
    fn heats(&self) -> bool {
        let (resistance, time) = self.emitter.thermal();
        resistance > 0.0 && time > 0.0
    }

    /// Flux for driver volts at `frequency` (Hz) without the servo, W/V.
    fn open(&self, frequency: f64) -> Complex64 {
        self.tangent.heated.at(frequency) * self.emitter.carriers().at(frequency)
    }
}

/// Slopes of flux against driver voltage, with the junction's heat as one pole.
fn tangent(driver: &Driver, emitter: &Emitter, rest: &Rest) -> Tangent {
    let current = driver.slope(rest.input, rest.current);
    let by_heat = current * driver.heat_voltage(emitter);
    let flux_by_current = emitter.flux_slope(rest.current, rest.heating);
    let flux_by_heat = emitter.flux_by_heat(rest.current);
    // Heat W = V_f·i − P of all junctions; dW = a·dv + b·dΔT.
    let heat_by_current =
        rest.forward_voltage + rest.current * emitter.voltage_slope(rest.current) - flux_by_current;
    let a = heat_by_current * current;
    let b = heat_by_current * by_heat + rest.current * emitter.drift() - flux_by_heat;
    let (resistance, time) = emitter.thermal();
    let direct = flux_by_current * current;
    let slow = flux_by_current * by_heat + flux_by_heat;
    // At a loop gain of 1 and more the heat feeds itself: there is no tangent to settle on.
    let runs_away = resistance * b >= 1.0;
    let heated = if resistance > 0.0 && time > 0.0 && !runs_away {
        FirstOrderLaw {
            direct,
            residue: slow * resistance * a / time,
            rate: (1.0 - resistance * b) / time,
        }
    } else {
        FirstOrderLaw {
            direct,
            residue: 0.0,
            rate: 1.0,
        }
    };
    Tangent {
        heated,
        current,
        runs_away,
    }
}

impl Model for TransmitHead {
    fn path(&self) -> &str {
        &self.path
    }

    fn title(&self) -> String {
        let servo = if self.servo.is_some() {
            " with a monitor loop"
        } else {
            ""
        };
        format!("{}{servo} and LED", self.driver.title())
    }

    fn operating_point(&self) -> Vec<Reading> {
        let r = &self.rest;
        let mut readings = vec![
            Reading {
                name: "bias current",
                value: r.current,
                dimension: Dimension::Ampere,
            },
            Reading {
                name: "forward voltage",
                value: r.forward_voltage,
                dimension: Dimension::Volt,
            },
            Reading {
                name: "flux",
                value: r.flux,
                dimension: Dimension::Watt,
            },
            Reading {
                name: "junction heating",
                value: r.heating,
                dimension: Dimension::Kelvin,
            },
            Reading {
                name: "current per volt",
                value: self.tangent.current,
                dimension: Dimension::Transconductance,
            },
            Reading {
                name: "supply power",
                value: self.supply * r.current,
                dimension: Dimension::Watt,
            },
        ];
        readings.extend(self.servo.iter().flat_map(Servo::readings));
        readings
    }

    fn curve(&self, x: f64) -> f64 {
        self.emitter.flux(self.current(x), self.rest.heating) - self.rest.flux
    }

    fn transfer(&self, frequency: f64) -> Complex64 {
        let open = self.open(frequency);
        let follows = self
            .servo
            .as_ref()
            .map_or(1.0.into(), |s| s.follows(frequency, open));
        self.division * self.input_pole.at(frequency) * open * follows
    }

    fn noise(&self, frequency: f64) -> Vec<Share> {
        let open = self.open(frequency);
        let left = self
            .servo
            .as_ref()
            .map_or(1.0, |s| s.leaves(frequency, open).norm_sqr());
        let behind = open.norm_sqr() * left;
        let by_input = behind * self.input_pole.at(frequency).norm_sqr();
        let at_input = self.at_input.iter().map(|c| c.share(frequency, by_input));
        let mut shares: Vec<Share> = at_input
            .chain(self.behind_pole.iter().map(|c| c.share(frequency, behind)))
            .collect();
        shares.push(
            self.intensity
                .share(frequency, self.rest.flux * self.rest.flux * left),
        );
        shares
    }

    fn limits(&self) -> Vec<Limit> {
        vec![Limit::Level {
            cause: "emitter dark",
            at: -self.rest.flux,
        }]
    }

    fn warnings(&self) -> Vec<String> {
        self.warnings.clone()
    }

    fn slowest_time(&self) -> f64 {
        let heat = &self.tangent.heated;
        if let Some(servo) = &self.servo {
            return servo.slowest_time(heat);
        }
        if heat.residue == 0.0 {
            0.0
        } else {
            1.0 / heat.rate
        }
    }

    fn runner(&self, conditions: &Conditions) -> Box<dyn Runner> {
        in_time::runner(self, conditions)
    }
}
