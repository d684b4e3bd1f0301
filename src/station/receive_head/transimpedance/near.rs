//! A stage of the loop near rest: with the diode little more than its tangent and the input pair in the middle of its range, the equation
//! is a line with a small bend, and Newton's method from the line's own root is there in a step or two.

use super::in_time::{Known, State};
use super::servo::Integrator;
use super::{Detector, SlopeLaw};
use crate::physics::photodiode::Depletion;

/// Deviation over built-in and reverse voltage up to which the depletion's series is taken: its remainder is below 1e-14.
const DEPLETION: f64 = 0.01;
/// Deviation over n·V_T up to which the exponential's series is taken: likewise.
const EXPONENTIAL: f64 = 0.1;
/// Share of the input pair's half-width up to which its bend is a series (see [`SlopeLaw::bend`]).
const PAIR: f64 = 0.03;
/// Output volts that count as nothing.
const NOTHING: f64 = 1e-14;

/// The stage's constants.
pub(super) struct Near {
    /// Weight of the implicit stages, s.
    k: f64,
    /// k·2π·GBW: how far the output falls as the input rises.
    follows: f64,
    /// What the equation takes from a volt of the output, F, and of the input (outputs following), F.
    by_output: f64,
    /// 1/(what it takes from a volt of the input, the output following), 1/F, and that times `by_output`.
    root: f64,
    pull: f64,
    /// 1/`pull`.
    stiffness: f64,
    feedback_capacitor: f64,
    /// All capacitance at the input, F.
    capacitance: f64,
    low: f64,
    high: f64,
    servo: Integrator,
    /// The servo's limits; infinite without one.
    servo_low: f64,
    servo_high: f64,
    /// k times the servo's rate and conductance, and what its push adds to the equation, C.
    integrates: f64,
    by_servo: f64,
    pushed: f64,
    bends: Option<Bends>,
}

/// What diode and input pair add to their tangents.
struct Bends {
    /// 2π·GBW, rad/s, and 1/V_L, 1/V.
    unity: f64,
    steep: f64,
    /// Largest differential input, V.
    pair: f64,
    /// Largest deviation of the inverting input, V.
    reach: f64,
    charge: ChargeSeries,
    current: Option<CurrentSeries>,
    /// Bound on half the equation's second derivative over `by_output`, 1/V.
    curvature: f64,
}

/// Charge of the depletion layer beyond its tangent.
struct ChargeSeries {
    /// F at rest.
    capacitance: f64,
    /// 1/(built-in + reverse), 1/V.
    inverse: f64,
    /// Binomial series of (1 + s)^−m, and of its integral over s, from the first power of s.
    slopes: [f64; 6],
    charges: [f64; 6],
}

impl ChargeSeries {
    fn new(depletion: &Depletion, reverse: f64) -> Option<Self> {
        let across = depletion.built_in + reverse;
        // Below half the built-in voltage the law is another.
        if across * (1.0 - DEPLETION) < 0.5 * depletion.built_in {
            return None;
        }
        let mut slopes = [0.0; 6];
        let mut binomial = 1.0;
        for (j, slope) in slopes.iter_mut().enumerate() {
            binomial *= -(depletion.grading + j as f64) / (j + 1) as f64;
            *slope = binomial;
        }
        let mut charges = slopes;
        for (j, charge) in charges.iter_mut().enumerate() {
            *charge /= (j + 2) as f64;
        }
        Some(Self {
            capacitance: depletion.capacitance(reverse),
            inverse: 1.0 / across,
            slopes,
            charges,
        })
    }

    /// Charge, C, and capacitance, F, beyond the tangent's.
    #[inline]
    fn beyond(&self, x: f64) -> (f64, f64) {
        let s = x * self.inverse;
        let s2 = s * s;
        // Pairs first, so that the processor need not wait for one term after the other.
        let sum = |c: &[f64; 6]| {
            s * ((c[0] + s * c[1]) + s2 * ((c[2] + s * c[3]) + s2 * (c[4] + s * c[5])))
        };
        (
            self.capacitance * x * sum(&self.charges),
            self.capacitance * sum(&self.slopes),
        )
    }
}

/// Current of the junction beyond its tangent.
struct CurrentSeries {
    reverse: f64,
    /// 1/(n·V_T), 1/V.
    thermal: f64,
    saturation: f64,
    dark: f64,
    /// e^(−V/n·V_T) at rest.
    rest: f64,
}

impl CurrentSeries {
    /// Whether the dark current flows at a deviation: it has a kink at zero bias.
    #[inline]
    fn biased(&self, x: f64) -> bool {
        self.reverse + x > 0.0
    }

    /// Current, A, and conductance, S, beyond the tangent's.
    #[inline]
    fn beyond(&self, x: f64) -> (f64, f64) {
        let t = x * self.thermal;
        // e^−t − 1 + t
        let t2 = t * t;
        let h = t2
            * (((1.0 / 2.0 - t * (1.0 / 6.0)) + t2 * (1.0 / 24.0 - t * (1.0 / 120.0)))
                + t2 * t2 * ((1.0 / 720.0 - t * (1.0 / 5040.0)) + t2 * (1.0 / 40320.0)));
        let (biased, at_rest) = (self.biased(x), self.biased(0.0));
        let flowing = self.rest * (self.saturation + if at_rest { self.dark } else { 0.0 });
        let mut current = -flowing * h;
        let mut conductance = -flowing * self.thermal * (t - h);
        if biased != at_rest {
            // Across the kink the dark current and its tangent part.
            let sign = if biased { self.dark } else { -self.dark };
            let e = self.rest * (1.0 - t + h);
            current += sign * (1.0 - e);
            conductance += sign * self.thermal * e;
        }
        (current, conductance)
    }
}

impl Bends {
    fn new(
        law: SlopeLaw,
        detector: &Detector,
        reverse: f64,
        feedback: f64,
        near: &Near,
    ) -> Option<Self> {
        let (junction, depletion) = (&detector.junction, &detector.depletion);
        let charge = ChargeSeries::new(depletion, reverse)?;
        let thermal = 1.0 / junction.slope_voltage;
        let mut reach = DEPLETION / charge.inverse;
        let rest = (-reverse * thermal).exp();
        let flowing = rest * (junction.saturation + junction.dark);
        let seen = flowing * (reach * thermal).exp() > NOTHING * feedback;
        let current = seen.then_some(CurrentSeries {
            reverse,
            thermal,
            saturation: junction.saturation,
            dark: junction.dark,
            rest,
        });
        let mut curvature = depletion.grading * charge.capacitance * charge.inverse;
        if seen {
            reach = reach.min(EXPONENTIAL / thermal);
            curvature += near.k * flowing * thermal * thermal;
        } else if junction.dark > 0.0 {
            // The kink lies where nothing of it is seen only while the junction stays in reverse.
            reach = reach.min(reverse);
        }
        Some(Self {
            unity: law.unity,
            steep: 1.0 / law.linear,
            pair: (PAIR * law.linear).min(0.99 * law.slew / law.unity),
            reach,
            charge,
            current,
            // A tenth for the series' further terms.
            curvature: 0.55 * (curvature / near.by_output + near.follows * 2.0 * PAIR / law.linear),
        })
    }

    /// What the input pair takes away from its line, V/s, and the slope of that: the series of [`SlopeLaw::bend`].
    #[inline(always)]
    fn pair(&self, u: f64) -> (f64, f64) {
        let t = u * self.steep;
        let t2 = t * t;
        let bend = (-1.0 / 3.0 + t2 * (2.0 / 15.0)) - t2 * t2 * (17.0 / 315.0);
        let bent = (-1.0 + t2 * (2.0 / 3.0)) - t2 * t2 * (17.0 / 45.0);
        (self.unity * u * t2 * bend, self.unity * t2 * bent)
    }
}

impl Near {
    /// For the stage weight `k`, the detector's reverse voltage at rest, feedback and input capacitance, and the output's `limits`. None where the rest itself is not near a tangent.
    pub fn new(
        (detector, reverse): (&Detector, f64),
        law: SlopeLaw,
        (feedback, feedback_capacitor, own_capacitance): (f64, f64, f64),
        servo: Integrator,
        limits: (f64, f64),
        k: f64,
        straight: bool,
    ) -> Option<Self> {
        let tangent = detector.around(reverse, true);
        let follows = k * law.unity;
        let present = servo.conductance > 0.0;
        let by_output = feedback_capacitor + k * (feedback + k * servo.rate * servo.conductance);
        let by_input = tangent.capacitance
            + own_capacitance
            + feedback_capacitor
            + k * (tangent.conductance + feedback + servo.conductance)
            + follows * by_output;
        let mut near = Self {
            k,
            follows,
            by_output,
            root: 1.0 / by_input,
            pull: by_output / by_input,
            stiffness: by_input / by_output,
            feedback_capacitor,
            capacitance: tangent.capacitance + own_capacitance + feedback_capacitor,
            low: limits.0,
            high: limits.1,
            servo,
            servo_low: if present {
                servo.low
            } else {
                f64::NEG_INFINITY
            },
            servo_high: if present { servo.high } else { f64::INFINITY },
            integrates: k * servo.rate,
            by_servo: k * servo.conductance,
            pushed: k * servo.conductance * k * servo.rate * servo.push,
            bends: None,
        };
        if !straight {
            let bends = Bends::new(law, detector, reverse, feedback, &near)?;
            near.bends = Some(bends);
        }
        Some(near)
    }

    /// One sample from `was`, under light (A) and noise (V) midway and at its end; none where a stage is not near enough. Nothing is held
    /// and nothing slews on this way.
    #[inline(always)]
    pub fn step(&self, was: &State, midway: (f64, f64), now: (f64, f64)) -> Option<State> {
        let middle = self.solve(&was.onwards(), midway)?;
        self.solve(&middle.after(was), now)
    }

    /// A stage from its known parts.
    #[inline(always)]
    fn solve(&self, known: &Known, (i, e): (f64, f64)) -> Option<State> {
        let servo = &self.servo;
        let driven = self.follows * e;
        let early = self.by_output * driven + self.pushed - self.k * i;
        let free = known.output + driven;
        let root =
            (self.by_output * known.output + known.charge + (self.by_servo * known.servo + early))
                * self.root;
        let (mut x, mut output) = (root, free - self.follows * root);
        let mut charge = self.capacitance * x - self.feedback_capacitor * output;
        if let Some(bends) = &self.bends {
            let u = e - root;
            if root.abs() > bends.reach || u.abs() > bends.pair {
                return None;
            }
            let (bend, bent) = bends.pair(u);
            let beyond = bends.charge.beyond(root);
            let (current, conductance) = match &bends.current {
                Some(series) => series.beyond(root),
                None => (0.0, 0.0),
            };
            // What the step is made of is gathered so that little waits for it.
            let kick = self.k * bend;
            let miss = (beyond.0 + self.k * current) * self.root - self.pull * kick;
            // 1/(1 + a) = 1 − a + a² − …: no division on the way.
            let a = (beyond.1 + self.k * conductance) * self.root + self.pull * (self.k * bent);
            let step = miss * (1.0 - a * (1.0 - a));
            let left = bends.curvature * step * step + (self.stiffness * a * a * a * step).abs();
            x = root - step;
            let crossed = |s: &CurrentSeries| s.biased(x) != s.biased(root);
            if left > NOTHING || bends.current.as_ref().is_some_and(crossed) {
                return None;
            }
            let rise = self.follows + self.k * bent;
            let fall = self.capacitance + self.feedback_capacitor * rise + beyond.1;
            let before = output + kick;
            output = before + step * rise;
            charge = (self.capacitance * root - self.feedback_capacitor * before + beyond.0)
                - step * fall;
        }
        let servo_move = self.integrates * output + servo.push * self.integrates;
        let z = known.servo + servo_move;
        let inside = |v: f64, low: f64, high: f64| low < v && v < high;
        if !inside(output, self.low, self.high) || !inside(z, self.servo_low, self.servo_high) {
            return None;
        }
        Some(State {
            input: x,
            output,
            charge,
            servo: z,
            output_move: output - known.output,
            charge_move: charge - known.charge,
            servo_move,
        })
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::physics::photodiode::Junction;

    /// The series against the laws themselves, which lose digits to the difference: 1e-15 of the whole charge, or current.
    #[test]
    fn the_series_are_the_laws_less_their_tangents() {
        for grading in [0.0, 0.33, 0.5, 0.9] {
            let law = Depletion {
                zero_bias: 70e-12,
                built_in: 0.6,
                grading,
            };
            for reverse in [-0.2, 0.0, 1.0, 12.0] {
                let series = ChargeSeries::new(&law, reverse).unwrap();
                let (charge, capacitance) = law.charge_and_capacitance(reverse);
                for share in [-1.0, -0.3, 1e-3, 1.0] {
                    let x = share * DEPLETION / series.inverse;
                    let (q, c) = law.charge_and_capacitance(reverse + x);
                    let (beyond, slope) = series.beyond(x);
                    let whole = 70e-12 * (1.0 + reverse.abs());
                    assert!((q - charge - capacitance * x - beyond).abs() < 2e-15 * whole);
                    assert!((c - capacitance - slope).abs() < 1e-14 * capacitance);
                }
            }
            assert!(ChargeSeries::new(&law, -0.31).is_none());
        }
        let law = Junction {
            dark: 2e-9,
            saturation: 1e-10,
            slope_voltage: 0.03,
            shunt: 1e-9,
        };
        for reverse in [-1e-3, 0.0, 1e-3, 0.3] {
            let series = CurrentSeries {
                reverse,
                thermal: 1.0 / 0.03,
                saturation: 1e-10,
                dark: 2e-9,
                rest: (-reverse / 0.03).exp(),
            };
            let (current, conductance) = law.reverse_current(reverse);
            for share in [-1.0, -0.5, -0.01, 0.01, 0.5, 1.0] {
                let x = share * EXPONENTIAL * 0.03;
                let (i, g) = law.reverse_current(reverse + x);
                let (beyond, slope) = series.beyond(x);
                assert!(
                    (i - current - conductance * x - beyond).abs() < 1e-14 * 2e-9,
                    "{reverse} {x}"
                );
                assert!(
                    (g - conductance - slope).abs() < 1e-13 * 2e-9 / 0.03,
                    "{reverse} {x}"
                );
            }
        }
    }
}
