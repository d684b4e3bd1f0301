//! The operational amplifier's input pair and integrator.

/// Slope of the output against the differential input: dv/dt = clamp(2π·GBW·V_L·tanh(u/V_L), ±slew).
///
/// A bipolar pair is the tanh with V_L its linear half-width (Gray and Meyer); an infinite V_L is linear up to the clamp.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct SlopeLaw {
    /// 2π·GBW, rad/s (> 0, finite; the unlimited amplifier is a static law of its own).
    pub unity: f64,
    /// Half-width V_L of the input pair's linear range, V (> 0, may be infinite).
    pub linear: f64,
    /// Slew rate, V/s (> 0, may be infinite).
    pub slew: f64,
}

impl SlopeLaw {
    /// dv/dt, V/s, at the differential input `u` (V).
    pub fn rate(&self, u: f64) -> f64 {
        let pair = if self.linear.is_finite() {
            self.linear * (u / self.linear).tanh()
        } else {
            u
        };
        (self.unity * pair).clamp(-self.slew, self.slew)
    }

    /// What the curve takes away from the straight line, S(u) − 2π·GBW·u, V/s, and its derivative with respect to `u`.
    ///
    /// Near the middle the difference of two nearly equal numbers is its series instead (error below 1e-13 of the line).
    #[inline]
    pub fn bend(&self, u: f64) -> (f64, f64) {
        const NEAR: f64 = 0.03;
        let line = self.unity * u;
        let x = u / self.linear;
        if x.abs() < NEAR && line.abs() < self.slew {
            // tanh x = x − x³/3 + 2x⁵/15 − 17x⁷/315 …
            let x2 = x * x;
            let series = x2 * (-1.0 / 3.0 + x2 * (2.0 / 15.0 - x2 * (17.0 / 315.0)));
            let slope = x2 * (-1.0 + x2 * (2.0 / 3.0 - x2 * (17.0 / 45.0)));
            return (line * series, self.unity * slope);
        }
        let (rate, slope) = self.rate_and_slope(u);
        (rate - line, slope - self.unity)
    }

    /// dv/dt and its derivative with respect to `u`.
    pub fn rate_and_slope(&self, u: f64) -> (f64, f64) {
        let (pair, slope) = if self.linear.is_finite() {
            let t = (u / self.linear).tanh();
            (self.linear * t, 1.0 - t * t)
        } else {
            (u, 1.0)
        };
        let rate = self.unity * pair;
        if rate.abs() >= self.slew {
            (rate.clamp(-self.slew, self.slew), 0.0)
        } else {
            (rate, self.unity * slope)
        }
    }
}

/// Closed-loop −3 dB bandwidth GBW / noise gain, Hz (Bode; Gray and Meyer).
pub fn closed_loop_bandwidth(gain_bandwidth: f64, noise_gain: f64) -> f64 {
    gain_bandwidth / noise_gain
}

/// What a class-B gap of half-width `half` (V, ≥ 0) leaves of a voltage: v − clamp(v, ±half).
#[inline]
pub fn gap(v: f64, half: f64) -> f64 {
    v - v.clamp(-half, half)
}

/// Full-power bandwidth slew/(2π·peak), Hz, of a sine of `peak` volts.
pub fn full_power_bandwidth(slew: f64, peak: f64) -> f64 {
    slew / (std::f64::consts::TAU * peak)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_bend_joins_its_series() {
        for linear in [0.08, f64::INFINITY] {
            let law = SlopeLaw {
                unity: 6e6,
                linear,
                slew: 5e5,
            };
            for u in [1e-6, 1e-3, 0.02999 * 0.08, 0.03001 * 0.08, 0.05, 1.0] {
                let (rate, slope) = law.rate_and_slope(u);
                let (bend, bent) = law.bend(u);
                assert!((bend - (rate - law.unity * u)).abs() < 1e-12 * law.unity * u);
                assert!(
                    (bent - (slope - law.unity)).abs() < 1e-11 * law.unity,
                    "{linear} {u}"
                );
            }
        }
    }
}
