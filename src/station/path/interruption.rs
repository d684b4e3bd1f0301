//! Cuts of the beam: at set times, or at random.

use crate::design::Section;
use crate::signal::noise::Gaussian;

/// One cause of interruptions.
#[derive(Debug, Clone)]
pub struct Interruption {
    name: String,
    when: When,
    /// s
    lasts: f64,
    /// How long the light takes to go and to come, s.
    edge: f64,
}

#[derive(Debug, Clone, Copy)]
enum When {
    At(f64),
    /// At random, so many a second on the average.
    Rate(f64),
}

impl Interruption {
    /// From `[[path.interruption]]`.
    pub fn new(section: &Section) -> Self {
        Self {
            name: section.path.clone(),
            when: section
                .optional("at")
                .map_or_else(|| When::Rate(section.number("rate")), When::At),
            lasts: section.number("lasts"),
            edge: section.number("edge"),
        }
    }
}

/// One cause of interruptions in time; the beam is the same for every channel and every run of a seed.
pub struct Cut {
    cause: Interruption,
    draws: Gaussian,
    /// When the current or next cut begins, s.
    begins: f64,
    begun: bool,
}

/// Cuts that may pass between two samples; more are not told apart.
const MOST_A_SAMPLE: usize = 100;

impl Cut {
    /// Under the run's `seed`.
    pub fn new(cause: &Interruption, seed: u64) -> Self {
        let draws = Gaussian::new(seed, 0, &cause.name, "times");
        let mut cut = Self {
            cause: cause.clone(),
            draws,
            begins: 0.0,
            begun: false,
        };
        cut.begins = match cut.cause.when {
            When::At(at) => at,
            When::Rate(rate) => cut.wait(rate),
        };
        cut
    }

    /// An exponential waiting time, s: half the sum of two squared normal draws has the unit exponential distribution.
    fn wait(&mut self, rate: f64) -> f64 {
        let (a, b) = (self.draws.draw(), self.draws.draw());
        (a * a + b * b) / (2.0 * rate)
    }

    /// Share of the beam that passes at `time` (s, rising from call to call), and whether a cut begins with this call.
    pub fn passes(&mut self, time: f64) -> (f64, bool) {
        let Interruption {
            when, lasts, edge, ..
        } = self.cause;
        if let When::Rate(rate) = when {
            // The next one is awaited from the end of this one.
            for _ in 0..MOST_A_SAMPLE {
                if time < self.begins + lasts + edge {
                    break;
                }
                self.begins += lasts + edge + self.wait(rate);
                self.begun = false;
            }
        }
        let since = time - self.begins;
        let begins = since >= 0.0 && !self.begun;
        self.begun |= begins;
        (
            1.0 - shade(since, edge) + shade(since - lasts, edge),
            begins,
        )
    }
}

/// How dark a cut is `since` seconds after its edge began: a raised cosine over `edge` seconds.
fn shade(since: f64, edge: f64) -> f64 {
    if since < 0.0 {
        0.0
    } else if since >= edge {
        1.0
    } else {
        0.5 - 0.5 * (std::f64::consts::PI * since / edge).cos()
    }
}
