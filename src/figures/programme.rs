//! Figures of a programme as it streams by.

/// Levels of one channel of a programme. Decibels are re full scale as rms value 1: a sine whose peaks touch full scale reads −3.01 dB, a
/// square wave 0 dB.
#[derive(Debug, Clone, Copy, Default, PartialEq)]
pub struct LevelMeter {
    samples: u64,
    power: f64,
    peak: f64,
    clipped: u64,
}

impl LevelMeter {
    /// Takes the next block, full scale 1.
    pub fn add(&mut self, block: &[f64]) {
        self.samples += block.len() as u64;
        self.power += block.iter().map(|x| x * x).sum::<f64>();
        self.peak = block.iter().fold(self.peak, |m, x| m.max(x.abs()));
        self.clipped += block.iter().filter(|x| x.abs() >= 1.0).count() as u64;
    }

    /// Samples so far.
    pub fn samples(&self) -> u64 {
        self.samples
    }

    /// Root mean square, 0 of nothing.
    pub fn rms(&self) -> f64 {
        (self.power / self.samples.max(1) as f64).sqrt()
    }

    /// Largest magnitude.
    pub fn peak(&self) -> f64 {
        self.peak
    }

    /// Rms level, dB re full scale; `None` of silence.
    pub fn rms_dbfs(&self) -> Option<f64> {
        level(self.rms())
    }

    /// Sample-peak level, dB re full scale; `None` of silence.
    pub fn peak_dbfs(&self) -> Option<f64> {
        level(self.peak)
    }

    /// Samples at or beyond full scale.
    pub fn clipped(&self) -> u64 {
        self.clipped
    }
}

fn level(value: f64) -> Option<f64> {
    (value > 0.0).then(|| super::decibels(value))
}

/// A programme beside what was added to it: with the noise stem its signal-to-noise ratio, with the distortion stem its distortion. Both count
/// as they are, over the whole spectrum of the file, without weighting.
#[derive(Debug, Clone, Copy, Default, PartialEq)]
pub struct ResidualMeter {
    clean: f64,
    residual: f64,
}

impl ResidualMeter {
    /// Takes the next block of the clean programme and of the residual: equally long.
    ///
    /// # Panics
    /// If they are not: a fault of the caller.
    pub fn add(&mut self, clean: &[f64], residual: &[f64]) {
        assert_eq!(clean.len(), residual.len());
        self.clean += clean.iter().map(|x| x * x).sum::<f64>();
        self.residual += residual.iter().map(|x| x * x).sum::<f64>();
    }

    /// Clean programme over residual, dB (10 lg of their powers); `None` where either is silent.
    pub fn ratio_db(&self) -> Option<f64> {
        self.share().map(|share| -super::decibels(share))
    }

    /// Residual over clean programme as an amplitude ratio; `None` where either is silent.
    pub fn share(&self) -> Option<f64> {
        (self.clean > 0.0 && self.residual > 0.0).then(|| (self.residual / self.clean).sqrt())
    }
}
