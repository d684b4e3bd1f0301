//! The phototransistor: a base–collector photodiode into the base of the transistor around it.

/// Currents and charges of a junction transistor against its two junction voltages.
///
/// Transport form of Ebers and Moll (1954; Getreu 1976), with e_x = e^(V_BE/V_T) and e_y = e^(V_BC/V_T):
/// - transport, collector to emitter: I_s·(e_x − e_y)·E, E = 1 − V_BC/V_A in reverse bias (Early 1952), 1/(1 + V_BC/V_A) in forward
///   bias, where the first form would change sign (the two differ by (V_BC/V_A)²);
/// - base to emitter: I_F/β(I), I = I_s·e_x, I_F = I − I_s, β = gain·I/(I + low)/(1 + I/high). That is (I_F + low·(1 − 1/e_x))(1 + I/high)/gain,
///   continued below V_BE = 0 as the odd function it is near by;
/// - base to collector: I_s·(e_y − 1)/β_R.
///
/// Charges: base–emitter τ_F·I_F + C_je·V_BE, base–collector τ_R·I_s·(e_y − 1) + C_µ·V_BC, both capacitances constant (as stated
/// for the working voltage). τ_R = τ_F·gain/β_R: recombination empties the base with one lifetime τ_F·gain, whichever junction
/// filled it (charge control, Beaufoy and Sparkes 1957).
///
/// The primary photocurrent is not part of these: it flows from collector to base beside them.
///
/// Range: β falls in proportion to the current below `low`, so that a base current under low/gain lifts the collector current
/// hardly at all; a device's gain falls more slowly there (as the root of the current or less, common practice).
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Transistor {
    /// kT/q, V.
    pub thermal_voltage: f64,
    /// I_s, A (> 0).
    pub saturation: f64,
    /// Largest forward current gain.
    pub gain: f64,
    /// Collector current where the gain has halved, downwards, A (≥ 0).
    pub low: f64,
    /// Reciprocal of the one where it has halved upwards, 1/A (≥ 0).
    pub inverse_high: f64,
    /// β_R.
    pub reverse_gain: f64,
    /// Reciprocal of the Early voltage, 1/V (≥ 0).
    pub inverse_early: f64,
    /// τ_F, s (≥ 0).
    pub transit_time: f64,
    /// C_je, F (≥ 0).
    pub emitter_capacitance: f64,
    /// C_µ, F (≥ 0).
    pub collector_capacitance: f64,
}

/// The transistor at one pair of junction voltages; slopes are with respect to V_BE (`_x`) and V_BC (`_y`).
#[derive(Debug, Clone, Copy, Default, PartialEq)]
pub struct Flows {
    /// Collector to emitter, A, and its slopes, S.
    pub transport: f64,
    pub transport_x: f64,
    pub transport_y: f64,
    /// Base to emitter, A, and its slope, S.
    pub base_emitter: f64,
    pub base_emitter_x: f64,
    /// Base to collector, A, and its slope, S.
    pub base_collector: f64,
    pub base_collector_y: f64,
    /// Charge of the base–emitter side, C, and its slope, F.
    pub emitter_charge: f64,
    pub emitter_charge_x: f64,
    /// Charge of the base–collector side, C, and its slope, F.
    pub collector_charge: f64,
    pub collector_charge_y: f64,
}

/// Exponent beyond which an exponential goes on as a straight line (I_s·e^200 is nobody's current).
const STEEPEST: f64 = 200.0;
/// Exponent below which an exponential is no longer seen beside 1 in an f64.
const DEEP: f64 = -38.0;

/// e^u and its slope, continued as a straight line beyond [`STEEPEST`] and as 0 below [`DEEP`].
#[inline]
fn grown(u: f64) -> (f64, f64) {
    if u < DEEP {
        (0.0, 0.0)
    } else if u > STEEPEST {
        let top = STEEPEST.exp();
        (top * (1.0 + u - STEEPEST), top)
    } else {
        let e = u.exp();
        (e, e)
    }
}

impl Transistor {
    /// Currents, charges and slopes at `v_be` and `v_bc` (V).
    #[inline]
    pub fn at(&self, v_be: f64, v_bc: f64) -> Flows {
        let per_volt = 1.0 / self.thermal_voltage;
        let (ex, sx) = grown(v_be * per_volt);
        let (ey, sy) = grown(v_bc * per_volt);
        let is = self.saturation;
        let (forward, forward_x) = (is * (ex - 1.0), is * sx * per_volt);
        let (backward, backward_y) = (is * (ey - 1.0), is * sy * per_volt);
        let (early, early_y) = self.early(v_bc);
        let across = is * (ex - ey);

        // Share of `low` that recombines, −1…1.
        let (lost, lost_x) = if v_be >= 0.0 {
            let inverse = 1.0 / ex;
            (1.0 - inverse, sx * inverse * inverse * per_volt)
        } else {
            (ex - 1.0, sx * per_volt)
        };
        let crowding = 1.0 + is * ex * self.inverse_high;
        let recombining = forward + self.low * lost;
        let ideal = 1.0 / self.gain;

        let reverse_ideal = 1.0 / self.reverse_gain;
        let tau_r = self.transit_time * self.gain * reverse_ideal;
        Flows {
            transport: across * early,
            transport_x: forward_x * early,
            transport_y: across * early_y - backward_y * early,
            base_emitter: recombining * crowding * ideal,
            base_emitter_x: ((forward_x + self.low * lost_x) * crowding
                + recombining * forward_x * self.inverse_high)
                * ideal,
            base_collector: backward * reverse_ideal,
            base_collector_y: backward_y * reverse_ideal,
            emitter_charge: self.transit_time * forward + self.emitter_capacitance * v_be,
            emitter_charge_x: self.transit_time * forward_x + self.emitter_capacitance,
            collector_charge: tau_r * backward + self.collector_capacitance * v_bc,
            collector_charge_y: tau_r * backward_y + self.collector_capacitance,
        }
    }

    /// Early factor at `v_bc` (V) and its slope.
    #[inline]
    fn early(&self, v_bc: f64) -> (f64, f64) {
        let a = self.inverse_early;
        if v_bc <= 0.0 {
            (1.0 - v_bc * a, -a)
        } else {
            let e = 1.0 / (1.0 + v_bc * a);
            (e, -a * e * e)
        }
    }

    /// τ_R, s.
    pub fn reverse_transit_time(&self) -> f64 {
        self.transit_time * self.gain / self.reverse_gain
    }

    /// Static gain β at the collector current `current` (A).
    pub fn gain_at(&self, current: f64) -> f64 {
        if current <= 0.0 {
            return if self.low > 0.0 { 0.0 } else { self.gain };
        }
        self.gain * current / (current + self.low) / (1.0 + current * self.inverse_high)
    }

    /// Collector current that a base current of `base` (A) sets up without saturation and Early effect, A: I = β(I)·base.
    pub fn collector_current(&self, base: f64) -> f64 {
        // (I + low)(1 + I/high) = gain·base.
        let h = self.inverse_high;
        let (b, c) = (1.0 + self.low * h, self.gain * base - self.low);
        if c <= 0.0 {
            return 0.0;
        }
        2.0 * c / (b + (b * b + 4.0 * h * c).sqrt())
    }

    /// Currents whose shot noise 2q·I the transistor makes, A: transport, base–emitter, base–collector. Each is the sum of two
    /// opposed flows, which do not cancel as noises (van der Ziel), so that without bias they are the Johnson noise of the slopes.
    pub fn shot_currents(&self, v_be: f64, v_bc: f64) -> [f64; 3] {
        let per_volt = 1.0 / self.thermal_voltage;
        let (ex, _) = grown(v_be * per_volt);
        let (ey, _) = grown(v_bc * per_volt);
        let is = self.saturation;
        let low = if v_be >= 0.0 {
            1.0 + 1.0 / ex
        } else {
            1.0 + ex
        };
        [
            is * (ex + ey) * self.early(v_bc).0,
            (is * (ex + 1.0) + self.low * low) * (1.0 + is * ex * self.inverse_high) / self.gain,
            is * (ey + 1.0) / self.reverse_gain,
        ]
    }
}

/// Collector–emitter voltage in saturation, V, at a `forced` gain I_C/I_B below `gain`, by Ebers and Moll:
/// V_T·ln[(1/α_R + β_f/β_R)/(1 − β_f/β_F)], α_R = β_R/(1 + β_R).
pub fn saturation_voltage(thermal_voltage: f64, gain: f64, reverse_gain: f64, forced: f64) -> f64 {
    let inverse_alpha = (1.0 + reverse_gain) / reverse_gain;
    thermal_voltage * ((inverse_alpha + forced / reverse_gain) / (1.0 - forced / gain)).ln()
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::physics::constants::thermal_voltage;

    fn part() -> Transistor {
        Transistor {
            thermal_voltage: thermal_voltage(300.0),
            saturation: 1e-14,
            gain: 200.0,
            low: 2e-6,
            inverse_high: 1.0 / 30e-3,
            reverse_gain: 5.0,
            inverse_early: 1.0 / 60.0,
            transit_time: 1e-9,
            emitter_capacitance: 6e-12,
            collector_capacitance: 4e-12,
        }
    }

    #[test]
    fn slopes_are_the_derivatives() {
        let t = part();
        for (x, y) in [
            (0.55, -4.0),
            (0.6, 0.55),
            (0.02, -0.01),
            (-0.03, 0.02),
            (-0.4, -5.0),
            (0.3, 0.6),
        ] {
            let at = t.at(x, y);
            let h = 1e-6;
            let dx = |f: fn(&Flows) -> f64| (f(&t.at(x + h, y)) - f(&t.at(x - h, y))) / (2.0 * h);
            let dy = |f: fn(&Flows) -> f64| (f(&t.at(x, y + h)) - f(&t.at(x, y - h))) / (2.0 * h);
            let near = |a: f64, b: f64, floor: f64| {
                assert!(
                    (a - b).abs() < 1e-6 * a.abs() + floor,
                    "({x}, {y}): {a} {b}"
                );
            };
            near(at.transport_x, dx(|f| f.transport), 1e-14);
            near(at.transport_y, dy(|f| f.transport), 1e-14);
            near(at.base_emitter_x, dx(|f| f.base_emitter), 1e-14);
            near(at.base_collector_y, dy(|f| f.base_collector), 1e-14);
            near(at.emitter_charge_x, dx(|f| f.emitter_charge), 1e-22);
            near(at.collector_charge_y, dy(|f| f.collector_charge), 1e-22);
        }
        let dark = t.at(0.0, 0.0);
        assert_eq!(
            (dark.transport, dark.base_emitter, dark.base_collector),
            (0.0, 0.0, 0.0)
        );
    }

    #[test]
    fn gain_follows_the_stated_law() {
        let t = part();
        assert!((t.gain_at(2e-6) / 200.0 - 0.5).abs() < 1e-4);
        assert!((t.gain_at(30e-3) / 200.0 - 0.5).abs() < 1e-4);
        for current in [1e-6, 1e-4, 1e-2] {
            let base = current / t.gain_at(current);
            assert!((t.collector_current(base) / current - 1.0).abs() < 1e-12);
            let v_be = t.thermal_voltage * (current / t.saturation).ln_1p();
            assert!((t.at(v_be, 0.0).base_emitter / base - 1.0).abs() < 1e-6);
        }
        assert_eq!(t.collector_current(1e-9), 0.0);
    }

    #[test]
    fn saturation_voltage_matches_table_and_law() {
        // Closed form of Ebers and Moll at 300 K, (β_F, β_R, I_C/I_B): reference values computed apart.
        let vt = thermal_voltage(300.0);
        for (gain, reverse, forced, millivolts) in [
            (200.0, 5.0, 10.0, 31.3958),
            (100.0, 1.0, 10.0, 66.9636),
            (300.0, 3.0, 50.0, 79.4353),
        ] {
            let v = saturation_voltage(vt, gain, reverse, forced);
            assert!((v * 1e3 - millivolts).abs() < 1e-4, "{v}");
            // The law itself: base and collector current at that voltage stand in the forced ratio.
            let t = Transistor {
                gain,
                reverse_gain: reverse,
                low: 0.0,
                inverse_high: 0.0,
                inverse_early: 0.0,
                ..part()
            };
            let f = t.at(0.65, 0.65 - v);
            let ratio = (f.transport - f.base_collector) / (f.base_emitter + f.base_collector);
            assert!((ratio / forced - 1.0).abs() < 1e-6, "{ratio}");
        }
    }

    #[test]
    fn without_bias_the_shot_noise_is_johnson_noise() {
        // 2q·(sum of flows) = 4kT·slope at V_BE = V_BC = 0 (Nyquist 1928).
        let t = part();
        let (f, [transport, emitter, collector]) = (t.at(0.0, 0.0), t.shot_currents(0.0, 0.0));
        let twice = 2.0 * t.thermal_voltage;
        assert!((transport / (twice * f.transport_x) - 1.0).abs() < 1e-12);
        assert!((emitter / (twice * f.base_emitter_x) - 1.0).abs() < 1e-12);
        assert!((collector / (twice * f.base_collector_y) - 1.0).abs() < 1e-12);
    }
}
