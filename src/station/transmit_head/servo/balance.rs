//! The one equation that the loop solves, on paper and in each implicit stage.

/// lean·u + pull·p(u) = target for the driver volts u within `bounds`, p a flux that never falls.
pub(super) struct Balance {
    /// > 0
    pub lean: f64,
    /// 1/W, ≥ 0
    pub pull: f64,
    pub target: f64,
    pub bounds: (f64, f64),
}

/// The loop's answer.
#[derive(Debug, Clone, Copy)]
pub(super) struct Balanced {
    pub volts: f64,
    /// p there, W.
    pub flux: f64,
    /// dp/du near there, W/V.
    pub slope: f64,
    /// Whether a bound holds it.
    pub held: bool,
}

impl Balance {
    /// From `start` with the last known `slope` of p (W/V): the secant method, kept inside the bracket that its own signs have shown.
    ///
    /// It ends where the next step is below 1e-8 of `scale` (V) and its error, the product of the last two steps, below 1e-12 of it;
    /// that step is still taken, along the secant.
    #[inline]
    pub fn solve(
        &self,
        start: f64,
        slope: f64,
        scale: f64,
        mut p: impl FnMut(f64) -> f64,
    ) -> Balanced {
        let (mut low, mut high) = self.bounds;
        // Whether the ends of the bracket have been tried.
        let (mut low_tried, mut high_tried) = (false, false);
        let mut u = start.clamp(low, high);
        let mut slope = slope;
        let mut last: Option<(f64, f64)> = None;
        let mut last_step = f64::INFINITY;
        let mut flux = 0.0;
        for _ in 0..200 {
            flux = p(u);
            let value = self.lean * u + self.pull * flux - self.target;
            let span = match last {
                Some((v, q)) if u != v => {
                    let secant = (flux - q) / (u - v);
                    if secant >= 0.0 {
                        slope = secant;
                    }
                    (u - v).abs()
                }
                _ => scale,
            };
            last = Some((u, flux));
            let (at_low, at_high) = (u == self.bounds.0, u == self.bounds.1);
            if (at_low && value >= 0.0) || (at_high && value <= 0.0) {
                return Balanced {
                    volts: u,
                    flux,
                    slope,
                    held: value != 0.0,
                };
            }
            let step = -value / (self.lean + self.pull * slope);
            if value > 0.0 {
                (high, high_tried) = (u, true);
            } else {
                (low, low_tried) = (u, true);
            }
            let size = step.abs();
            if (size <= 1e-8 * scale && size * (span + size) <= 1e-12 * scale * scale)
                || (low_tried && high_tried && high - low <= 1e-15 * (scale + u.abs()))
            {
                let volts = (u + step).clamp(low, high);
                return Balanced {
                    volts,
                    flux: flux + slope * (volts - u),
                    slope,
                    held: false,
                };
            }
            let shrinks = size <= 0.5 * last_step || !(low_tried && high_tried);
            let next = u + step;
            let next = if next <= low && !low_tried {
                low
            } else if next >= high && !high_tried {
                high
            } else if next > low && next < high && shrinks {
                next
            } else {
                low + 0.5 * (high - low)
            };
            last_step = (next - u).abs();
            u = next;
        }
        Balanced {
            volts: u,
            flux,
            slope,
            held: false,
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn finds_its_point_on_curves_of_every_kind() {
        let soft = |u: f64| u.max(0.0) + 0.025 * ((-u.abs() / 0.025).exp().ln_1p() - 2f64.ln());
        let step = |u: f64| if u < 0.3 { 0.0 } else { 100.0 * (u - 0.3) };
        let flat = |u: f64| u.tanh();
        for (k, p) in [&soft as &dyn Fn(f64) -> f64, &step, &flat]
            .into_iter()
            .enumerate()
        {
            for gain in [1e-3, 1.0, 1e3, 1e12] {
                for asked in [-1e6, -3.0, -0.01, 0.0, 1e-9, 0.2, 2.0, 1e6] {
                    for start in [-4.0, 0.0, 4.0] {
                        let lean = 1.0 / (1.0 + gain);
                        let balance = Balance {
                            lean,
                            pull: gain * lean,
                            target: asked,
                            bounds: (asked.min(-5.0), asked.max(5.0)),
                        };
                        let mut tries = 0;
                        let found = balance.solve(start, 1.0, 1.0, |u| {
                            tries += 1;
                            p(u)
                        });
                        let value = |u: f64| lean * u + gain * lean * p(u) - asked;
                        let u = found.volts;
                        let what = format!("{k} {gain} {asked} {start}: {u} after {tries}");
                        assert!(tries < 100, "{what}");
                        assert!(
                            (found.flux - p(u)).abs() < 1e-10 * (1.0 + p(u).abs()),
                            "{what}"
                        );
                        if found.held {
                            assert!((u == balance.bounds.0) == (value(u) > 0.0), "{what}");
                        } else {
                            let h = 1e-10 * (1.0 + u.abs());
                            assert!(value(u - h) <= 0.0 && value(u + h) >= 0.0, "{what}");
                        }
                    }
                }
            }
        }
    }
}
