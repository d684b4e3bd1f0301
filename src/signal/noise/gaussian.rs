//! White Gaussian noise, eight numbers at a time.

use rand::Rng;

use super::stream;

/// Generators side by side: two vectors of four with AVX2.
const LANES: usize = 8;
/// Numbers made at a time.
const BATCH: usize = 8 * LANES;

/// White Gaussian noise of mean 0 and variance 1, drawn in order: the length of the blocks it is drawn in does not matter.
///
/// At a sample rate fs its one-sided density is 2/fs per Hz. Box and Muller's transform (1958) of eight xoshiro256++ generators
/// (Blackman, Vigna 2019) side by side. Nothing but the basic operations of IEEE 754 and its square root is used, and none is
/// fused, so that every instruction set gives the same bits. The largest possible draw is 8.5.
#[derive(Debug, Clone)]
pub struct Gaussian {
    state: [[u64; LANES]; 4],
    batch: [f64; BATCH],
    used: usize,
}

impl Gaussian {
    /// The stream of one cause: see [`super::stream`].
    pub fn new(seed: u64, channel: usize, path: &str, cause: &str) -> Self {
        let mut seeds = stream(seed, channel, path, cause);
        let mut state = [[0; LANES]; 4];
        for lane in 0..LANES {
            state
                .iter_mut()
                .for_each(|word| word[lane] = seeds.next_u64());
        }
        Self {
            state,
            batch: [0.0; BATCH],
            used: BATCH,
        }
    }

    /// The next draw.
    #[inline]
    pub fn draw(&mut self) -> f64 {
        if self.used == BATCH {
            refill(&mut self.state, &mut self.batch);
            self.used = 0;
        }
        self.used += 1;
        self.batch[self.used - 1]
    }

    /// Fills a block with the next draws.
    pub fn fill(&mut self, block: &mut [f64]) {
        let mut rest = block;
        while !rest.is_empty() {
            if self.used == BATCH {
                refill(&mut self.state, &mut self.batch);
                self.used = 0;
            }
            let count = rest.len().min(BATCH - self.used);
            let (now, later) = rest.split_at_mut(count);
            now.copy_from_slice(&self.batch[self.used..self.used + count]);
            self.used += count;
            rest = later;
        }
    }
}

/// Makes the next batch, with the widest instructions that this machine has.
fn refill(state: &mut [[u64; LANES]; 4], batch: &mut [f64; BATCH]) {
    #[cfg(target_arch = "x86_64")]
    if std::arch::is_x86_feature_detected!("avx2") {
        // SAFETY: the instructions are there, as was just asked.
        return unsafe { refill_avx2(state, batch) };
    }
    make(state, batch);
}

/// [`make`], compiled for AVX2. Without fused operations the bits stay the same.
#[cfg(target_arch = "x86_64")]
#[target_feature(enable = "avx2")]
fn refill_avx2(state: &mut [[u64; LANES]; 4], batch: &mut [f64; BATCH]) {
    make(state, batch);
}

#[inline(always)]
fn make(state: &mut [[u64; LANES]; 4], batch: &mut [f64; BATCH]) {
    for pair in batch.chunks_exact_mut(2 * LANES) {
        let (a, b) = (next(state), next(state));
        let (cosines, sines) = pair.split_at_mut(LANES);
        for lane in 0..LANES {
            // Uniform in (0, 1] and [−½, ½), 52 bits each.
            let size = 2.0 - one_to_two(a[lane]);
            let turn = one_to_two(b[lane]) - 1.5;
            let radius = (-2.0 * ln(size)).sqrt();
            let (sine, cosine) = sin_cos_turn(turn);
            cosines[lane] = radius * cosine;
            sines[lane] = radius * sine;
        }
    }
}

/// One step of every xoshiro256++.
#[inline(always)]
fn next(s: &mut [[u64; LANES]; 4]) -> [u64; LANES] {
    let mut out = [0; LANES];
    for lane in 0..LANES {
        let [a, b, c, d] = [s[0][lane], s[1][lane], s[2][lane], s[3][lane]];
        out[lane] = a.wrapping_add(d).rotate_left(23).wrapping_add(a);
        let c = c ^ a;
        let d = d ^ b;
        s[1][lane] = b ^ c;
        s[0][lane] = a ^ d;
        s[2][lane] = c ^ (b << 17);
        s[3][lane] = d.rotate_left(45);
    }
    out
}

/// A number in [1, 2) from the upper 52 bits.
#[inline(always)]
fn one_to_two(bits: u64) -> f64 {
    f64::from_bits((bits >> 12) | 0x3ff0_0000_0000_0000)
}

/// Natural logarithm of a normal number in (0, 1], within 1e-12.
#[inline(always)]
fn ln(x: f64) -> f64 {
    // x = m·2^e with m in [√½, √2); the exponent becomes a number by standing in the mantissa of 2^52.
    let bits = x
        .to_bits()
        .wrapping_add(0x3ff0_0000_0000_0000 - 0x3fe6_a09e_667f_3bcd);
    let exponent =
        f64::from_bits((bits >> 52) | 0x4330_0000_0000_0000) - (4_503_599_627_370_496.0 + 1023.0);
    let m = f64::from_bits((bits & 0x000f_ffff_ffff_ffff) + 0x3fe6_a09e_667f_3bcd);
    // ln m = 2·artanh t, t = (m − 1)/(m + 1), |t| < 0.172.
    let t = (m - 1.0) / (m + 1.0);
    let u = t * t;
    let series = 1.0 / 3.0
        + u * (1.0 / 5.0 + u * (1.0 / 7.0 + u * (1.0 / 9.0 + u * (1.0 / 11.0 + u * (1.0 / 13.0)))));
    exponent * std::f64::consts::LN_2 + 2.0 * (t + t * u * series)
}

/// Sine and cosine of a number of turns in [−½, ½), within 2e-11: Taylor's series of half the angle, then doubled.
#[inline(always)]
fn sin_cos_turn(turn: f64) -> (f64, f64) {
    let x = std::f64::consts::PI * turn;
    let u = x * x;
    let mut sine = -1.0 / 1_307_674_368_000.0;
    for c in [
        6_227_020_800.0,
        -39_916_800.0,
        362_880.0,
        -5_040.0,
        120.0,
        -6.0,
        1.0,
    ] {
        sine = sine * u + 1.0 / c;
    }
    sine *= x;
    let mut cosine = 1.0 / 20_922_789_888_000.0;
    for c in [
        -87_178_291_200.0,
        479_001_600.0,
        -3_628_800.0,
        40_320.0,
        -720.0,
        24.0,
        -2.0,
        1.0,
    ] {
        cosine = cosine * u + 1.0 / c;
    }
    (2.0 * sine * cosine, cosine * cosine - sine * sine)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_laws_inside_are_the_standard_ones() {
        for k in 1..=2000 {
            let x = f64::from(k) / 2000.0;
            for x in [x, x * 1e-10, x * f64::EPSILON] {
                assert!((ln(x) - x.ln()).abs() < 1e-12, "{x}");
            }
            let turn = x - 0.5;
            let (s, c) = sin_cos_turn(turn);
            let (s0, c0) = (std::f64::consts::TAU * turn).sin_cos();
            assert!((s - s0).abs() < 2e-11 && (c - c0).abs() < 2e-11, "{turn}");
        }
    }

    #[test]
    fn every_instruction_set_gives_the_same_bits() {
        let mut fast = Gaussian::new(7, 0, "a", "b");
        let mut plain = fast.clone();
        for _ in 0..1000 {
            refill(&mut fast.state, &mut fast.batch);
            make(&mut plain.state, &mut plain.batch);
            assert_eq!(fast.batch.map(f64::to_bits), plain.batch.map(f64::to_bits));
        }
    }
}
