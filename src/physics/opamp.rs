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

/// Full-power bandwidth slew/(2π·peak), Hz, of a sine of `peak` volts.
pub fn full_power_bandwidth(slew: f64, peak: f64) -> f64 {
    slew / (std::f64::consts::TAU * peak)
}
