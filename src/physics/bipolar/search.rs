//! The search for the state of a common emitter.

use super::{Collector, CommonEmitter, Region, State};

/// Logarithm of the junction's drive beyond which nothing physical happens any more; keeps the powers of it finite.
const HIGHEST: f64 = 230.0;
/// Longest step that the search from the last state takes in the logarithm of the drive.
const LONGEST: f64 = 0.2;
/// Step below which the terms left out of the inverse series lie under 1e-13.
const CLOSE: f64 = 5e-4;
/// Logarithm of the drive below which its exponential bends nothing that a double could hold beside the rest.
const DEEP: f64 = -40.0;

impl CommonEmitter {
    /// What the base loop needs beyond `v` at ln j = `w`, V, and its slope against w, V.
    #[inline]
    fn excess(&self, w: f64, j: f64, v: f64, c: &Collector) -> (f64, f64) {
        let both = self.base_resistance + self.emitter_resistance;
        let value = self.thermal_voltage * w
            + both * self.base_rest * (j - 1.0)
            + self.emitter_resistance * c.current
            - v;
        let steep =
            self.thermal_voltage + j * (both * self.base_rest + self.emitter_resistance * c.slope);
        (value, steep)
    }

    /// The state under the base voltage `v` (V) with Δv_C = `k` − `z`·ΔI_C (V, Ω; `z` > 0), searched from `near`.
    ///
    /// Newton's method in ln j with the next two terms of the inverse series, the exponential carried along by its own: a signal
    /// that moves smoothly between samples costs one evaluation and no library function. Where that does not settle, closed
    /// forms start it anew. Good to 1e-13 of V_T.
    #[inline]
    pub fn solve(&self, v: f64, k: f64, z: f64, near: &State) -> State {
        let mut w = near.log_drive + near.moved.0;
        let mut j = near.drive * near.moved.1;
        for _ in 0..6 {
            let c = self.collector(j, k, z);
            let (value, steep) = self.excess(w, j, v, &c);
            let per = 1.0 / steep;
            let t = value * per;
            if t.abs() <= LONGEST {
                // The exponential is its own derivative; the Early effect bends it by a rational law, whose third derivative
                // follows from its second.
                let bend = self.emitter_resistance * j * j * c.bend;
                let second = 1.0 + (bend - self.thermal_voltage) * per;
                let third = second + bend * (2.0 - 3.0 * j * c.hold) * per;
                let step =
                    -t * (1.0 + t * (0.5 * second + t * (0.5 * second * second - third / 6.0)));
                let factor = exp_near(step);
                let last = j;
                w += step;
                j *= factor;
                if t.abs() < CLOSE {
                    let there = self.carried(&c, last, j, k, z);
                    // The step holds inside one region, not across the corner between two.
                    if there.region == c.region || t.abs() < 1e-13 {
                        // Made anew each time: a factor carried along would gather roundings twice over.
                        let moved = w - near.log_drive;
                        let smooth = moved.abs() < LONGEST;
                        return State {
                            log_drive: w,
                            drive: j,
                            collector: there.current,
                            region: there.region,
                            moved: if smooth {
                                (moved, exp_near(moved))
                            } else {
                                (0.0, 1.0)
                            },
                        };
                    }
                }
            } else if w < DEEP && w - t < DEEP {
                // No current to speak of on either side: a straight line.
                w -= t;
                j = w.exp();
            } else {
                break;
            }
        }
        self.solve_from_anywhere(v, k, z)
    }

    /// The collector at the drive `j` from `c` at the drive `from` close by.
    #[inline]
    fn carried(&self, c: &Collector, from: f64, j: f64, k: f64, z: f64) -> Collector {
        let rise = j - from;
        let current = c.current + rise * (c.slope + 0.5 * rise * c.bend);
        let limit = k + self.room - self.emitter_resistance * self.base_rest * (j - 1.0);
        if c.region == Region::Active && current * (z + self.emitter_resistance) <= limit {
            Collector { current, ..*c }
        } else {
            self.collector(j, k, z)
        }
    }

    fn state(&self, log_drive: f64, drive: f64, k: f64, z: f64) -> State {
        let c = self.collector(drive, k, z);
        State {
            log_drive,
            drive,
            collector: c.current,
            region: c.region,
            moved: (0.0, 1.0),
        }
    }

    /// As [`Self::solve`], without a start.
    #[cold]
    fn solve_from_anywhere(&self, v: f64, k: f64, z: f64) -> State {
        let Self {
            thermal_voltage: vt,
            base_resistance: rb,
            emitter_resistance: re,
            base_rest: ib,
            asked,
            collector_rest: ic,
            ..
        } = *self;
        // Without the Early effect each region is a loop vt·w + a·(e^w − 1) = drive, and the least or largest root is the one.
        let active = junction_loop(vt, ib * (rb + re) + asked * re, v + re * (ic - asked));
        let saturated = if self.room.is_finite() {
            let share = re / (z + re);
            let a = ib * (rb + re * (1.0 - share));
            junction_loop(vt, a, v - share * (k + self.room))
        } else {
            f64::NEG_INFINITY
        };
        let reversed = junction_loop(vt, ib * rb, v + re * (ic + ib));
        let mut w = active.max(saturated).min(reversed).min(HIGHEST);
        let (mut low, mut high) = (f64::NEG_INFINITY, f64::INFINITY);
        for _ in 0..200 {
            let j = w.exp();
            let (value, steep) = self.excess(w, j, v, &self.collector(j, k, z));
            if value > 0.0 {
                high = w;
            } else {
                low = w;
            }
            // The Early effect moves the root by a few units at most.
            let step = (value / steep).clamp(-2.0, 2.0);
            let mut next = (w - step).min(HIGHEST);
            if (next - w).abs() <= 1e-15 * w.abs().max(1.0) {
                break;
            }
            if next <= low || next >= high {
                next = low + (high - low) / 2.0;
            }
            w = next;
        }
        self.state(w, w.exp(), k, z)
    }
}

/// Root of `vt`·w + `a`·(e^w − 1) = `drive` (V): Newton's method from above, as the left side is convex.
fn junction_loop(vt: f64, a: f64, drive: f64) -> f64 {
    let target = drive / vt;
    let a = a / vt;
    if a <= 0.0 || target < -HIGHEST {
        return target + a.max(0.0);
    }
    let mut w = if target > 0.0 {
        target.min((1.0 + target / a).ln())
    } else {
        // e^w > 0 leaves at most the second.
        (target + a).min(0.0)
    };
    w = w.min(HIGHEST * 3.0);
    for _ in 0..100 {
        let e = w.exp();
        let step = (w + a * (e - 1.0) - target) / (1.0 + a * e);
        w -= step;
        if step.abs() <= 1e-9 * w.abs().max(1.0) {
            break;
        }
    }
    w
}

/// e^x for |x| < 0.26, by its series to the last place.
#[inline]
fn exp_near(x: f64) -> f64 {
    const F: [f64; 13] = {
        let mut inverse = [1.0; 13];
        let mut k = 1;
        while k < 13 {
            inverse[k] = inverse[k - 1] / k as f64;
            k += 1;
        }
        inverse
    };
    let x2 = x * x;
    let low = (1.0 + x) + x2 * (F[2] + x * F[3]);
    if x.abs() < 1e-3 {
        return low + x2 * x2 * (F[4] + x * F[5]);
    }
    let x4 = x2 * x2;
    let middle = (F[4] + x * F[5]) + x2 * (F[6] + x * F[7]);
    if x.abs() < 0.02 {
        return low + x4 * middle;
    }
    let high = (F[8] + x * F[9]) + x2 * (F[10] + x * F[11]) + x4 * F[12];
    low + x4 * (middle + x4 * high)
}

#[cfg(test)]
mod tests {
    use super::super::tests::{some, stage};
    use super::*;

    #[test]
    fn a_stiff_base_gives_the_plain_exponential() {
        let law = CommonEmitter {
            room: f64::INFINITY,
            ..stage(0.0, 0.0, 0.0)
        };
        for v in [-0.4f64, -0.05, -1e-9, 1e-9, 0.03, 0.3] {
            let i = law.solve(v, 0.0, 1e3, &State::REST).collector;
            let expected = 1e-3 * (v / 0.025).exp_m1();
            assert!((i / expected - 1.0).abs() < 1e-6, "{v}: {i} {expected}");
            assert!((i - expected).abs() < 1e-12 * (1e-3 + expected.abs()));
        }
    }

    /// The solution put back into the three equations as they stand, whatever the region.
    #[test]
    fn solutions_satisfy_the_circuit() {
        for law in some() {
            for z in [10.0, 5e3, 1e6] {
                for k in [0.0, 1.0, -2.0, 60.0, -60.0] {
                    let mut near = State::REST;
                    for v in [0.0, 1e-6, 0.01, -0.02, 0.3, -5.0, 7.0, 200.0, -1e6, 1e6] {
                        let s = law.solve(v, k, z, &near);
                        let fresh = law.solve_from_anywhere(v, k, z);
                        let close = |a: f64, b: f64| (a - b).abs() < 1e-9 * (1e-3 + b.abs());
                        assert!(close(s.collector, fresh.collector), "{law:?} {z} {k} {v}");
                        near = s;
                        if s.log_drive >= HIGHEST {
                            continue;
                        }
                        let base = law.base_rest * (s.drive - 1.0);
                        let emitter = base + s.collector;
                        let around = law.base_resistance * base
                            + law.thermal_voltage * s.log_drive
                            + law.emitter_resistance * emitter;
                        assert!(
                            (around - v).abs() < 1e-11 * (1.0 + v.abs()),
                            "{law:?} {z} {k} {v}: {around}"
                        );
                        let across = k - z * s.collector - law.emitter_resistance * emitter;
                        let collector = law.collector_rest + s.collector;
                        let free = law.asked * s.drive * (1.0 + law.early * across);
                        let size = 1e-12 + 1e-9 * (free.abs() + collector.abs());
                        match s.region {
                            Region::Active => {
                                assert!(
                                    (collector - free).abs() < size,
                                    "{law:?} {z} {k} {v}: {collector} {free}"
                                );
                                assert!(across >= -law.room - 1e-6);
                            }
                            Region::Saturated => {
                                assert!((across + law.room).abs() < 1e-9 * (1.0 + z + k.abs()));
                                assert!(collector <= free + size);
                            }
                            Region::Reversed => {
                                assert!((collector + law.base_rest * s.drive).abs() < size);
                            }
                        }
                    }
                }
            }
        }
    }

    #[test]
    fn the_carried_exponential_is_exact() {
        for k in -249..250 {
            let x = f64::from(k) * 1e-3;
            assert!((exp_near(x) / x.exp() - 1.0).abs() < 4e-16, "{x}");
        }
    }
}
