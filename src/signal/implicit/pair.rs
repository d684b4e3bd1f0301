//! Two implicit equations at a time.

/// Values of two functions at a point (x, y), and their slopes: `slope[i]` = (∂/∂x, ∂/∂y) of the i-th.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Pair {
    pub value: [f64; 2],
    pub slope: [[f64; 2]; 2],
}

/// How far a step may trust the tangents: where the unknowns enter as exponentials, a tangent taken on the flat foot leads far
/// beyond the root.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Reach {
    /// Above these values of x and y the exponentials lead.
    pub knee: [f64; 2],
    /// Rise in which an exponential grows e times.
    pub fold: f64,
}

impl Reach {
    /// No exponentials: every step is taken whole.
    pub const UNBOUND: Self = Self {
        knee: [f64::INFINITY; 2],
        fold: 1.0,
    };

    /// `step` from `at` for the unknown `n`, a rise beyond the knee shortened to its logarithm.
    #[inline]
    fn bound(&self, n: usize, at: f64, step: f64) -> f64 {
        let free = (self.knee[n] - at).max(0.0) + self.fold;
        if step <= free {
            step
        } else {
            free + self.fold * (1.0 + (step - free) / self.fold).ln()
        }
    }
}

/// Newton steps before the bracketed search takes over.
const STEPS: usize = 40;

/// Point (x, y) where both functions vanish, the first rising in x and not falling in y, the second falling in x and rising
/// in y without bound. Such a pair has one root at most (Gale and Nikaido 1965).
///
/// Newton's method from `start`; should it not settle, y is eliminated by the second function and the first, which then rises
/// in x alone, is bracketed: slower, but it cannot miss. `scale` is the size of a step that no longer matters. Gives the point
/// at which `f` was last asked and the last step from there, for the caller to carry over by the tangents.
#[inline(always)]
pub fn paired_root(
    start: [f64; 2],
    scale: f64,
    reach: &Reach,
    mut f: impl FnMut(f64, f64) -> Pair,
) -> ([f64; 2], [f64; 2]) {
    let [mut x, mut y] = start;
    for _ in 0..STEPS {
        let Pair {
            value: [a, b],
            slope: [[ax, ay], [bx, by]],
        } = f(x, y);
        // Both products have one sign each: nothing cancels.
        let inverse = 1.0 / (ax * by - ay * bx);
        let (dx, dy) = ((ay * b - by * a) * inverse, (bx * a - ax * b) * inverse);
        if dx.abs() <= scale && dy.abs() <= scale {
            return ([x, y], [dx, dy]);
        }
        if !(dx.is_finite() && dy.is_finite()) {
            break;
        }
        x += reach.bound(0, x, dx);
        y += reach.bound(1, y, dy);
    }
    (bracketed(start, scale, &mut f), [0.0; 2])
}

/// The root by one bracketed search within another; `f` is asked there last.
#[cold]
#[inline(never)]
fn bracketed(start: [f64; 2], scale: f64, f: &mut dyn FnMut(f64, f64) -> Pair) -> [f64; 2] {
    let fine = scale / 16.0;
    let mut y = start[1];
    let x = bracketed_root(start[0], fine, |x| {
        y = bracketed_root(y, fine, |y| {
            let p = f(x, y);
            (p.value[1], p.slope[1][1])
        });
        let p = f(x, y);
        let [[ax, ay], [bx, by]] = p.slope;
        (p.value[0], ax - ay * bx / by)
    });
    let y = bracketed_root(y, fine, |y| {
        let p = f(x, y);
        (p.value[1], p.slope[1][1])
    });
    f(x, y);
    [x, y]
}

/// Root of a rising function: the range is widened until it holds the root, then halved wherever Newton's method does not do better.
fn bracketed_root(start: f64, scale: f64, mut f: impl FnMut(f64) -> (f64, f64)) -> f64 {
    let first = f(start).0;
    let (mut low, mut high) = (start, start);
    let mut width = 1e6 * scale;
    for _ in 0..200 {
        if first > 0.0 {
            low = start - width;
            if f(low).0 <= 0.0 {
                break;
            }
            high = low;
        } else {
            high = start + width;
            if f(high).0 >= 0.0 {
                break;
            }
            low = high;
        }
        width *= 4.0;
    }
    let mut x = low + (high - low) / 2.0;
    let mut last = high - low;
    // Where rounding alone decides the value's sign, the search may wander off again: the best point counts.
    let mut best = (f64::INFINITY, x);
    for _ in 0..200 {
        let (value, slope) = f(x);
        if value.abs() < best.0 {
            best = (value.abs(), x);
        }
        if value > 0.0 {
            high = x;
        } else {
            low = x;
        }
        let newton = x - value / slope;
        let next = if newton > low && newton < high && (newton - x).abs() < last / 2.0 {
            newton
        } else {
            low + (high - low) / 2.0
        };
        last = (next - x).abs();
        if value == 0.0 || last <= scale.max(4.0 * f64::EPSILON * x.abs()) {
            break;
        }
        x = next;
    }
    best.1
}

#[cfg(test)]
mod tests {
    use super::*;

    /// e^x + e^y − a and e^y − e^x + g(y − x) − b: the shape of a junction transistor's node equations.
    fn junctions(a: f64, b: f64, g: f64) -> impl FnMut(f64, f64) -> Pair {
        move |x, y| {
            let (ex, ey) = (x.min(300.0).exp(), y.min(300.0).exp());
            Pair {
                value: [ex + ey - a, ey - ex + g * (y - x) - b],
                slope: [[ex, ey], [-ex - g, ey + g]],
            }
        }
    }

    #[test]
    fn finds_the_root_from_afar() {
        let reach = Reach {
            knee: [0.0; 2],
            fold: 1.0,
        };
        for (x, y) in [
            (1.0, -200.0),
            (30.0, 29.5),
            (-3.0, -400.0),
            (5.0, -1.0),
            (0.0, 20.0),
        ] {
            for g in [1e-6, 1.0, 1e4] {
                let mut f = junctions(0.0, 0.0, g);
                let [a, b] = f(x, y).value;
                for start in [[0.0, 0.0], [x + 3.0, y - 30.0], [-50.0, 40.0]] {
                    let (p, d) = paired_root(start, 1e-9, &reach, junctions(a, b, g));
                    let found = [p[0] + d[0], p[1] + d[1]];
                    // Known to within `scale`: so are the values, to what that moves them, and to their rounding.
                    let Pair {
                        value,
                        slope: [[ax, ay], [bx, by]],
                    } = junctions(a, b, g)(found[0], found[1]);
                    let size = [a.abs(), b.abs() + g * (y - x).abs() + x.exp()];
                    assert!(
                        value[0].abs() <= 1e-9 * (ax + ay) + 1e-14 * size[0]
                            && value[1].abs() <= 1e-9 * (by - bx) + 1e-14 * size[1],
                        "({x}, {y}), g {g} from {start:?}: {found:?}, {value:?}"
                    );
                }
            }
        }
    }

    #[test]
    fn the_bracketed_search_finds_it_alone() {
        let mut f = junctions(0.0, 0.0, 0.5);
        let [a, b] = f(2.0, -7.0).value;
        let [x, y] = bracketed([-20.0, 30.0], 1e-10, &mut junctions(a, b, 0.5));
        assert!((x - 2.0).abs() < 1e-9 && (y + 7.0).abs() < 1e-8, "{x} {y}");
    }
}
