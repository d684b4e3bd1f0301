//! Light scattered by the surfaces of a room, taken as an integrating sphere (Jungnickel, Pohl, Nönnig and von Helmolt 2002,
//! "A physical model of the wireless infrared communication channel", IEEE J. Sel. Areas Commun. 20:631; formulas from memory).

use std::f64::consts::PI;

use super::constants::LIGHT_SPEED;

/// Irradiance on every surface for each watt emitted, 1/m²: ρ/(A(1 − ρ)), all reflections summed.
///
/// `surface` A in m² (> 0), `reflectance` ρ in 0…1 without its ends, the mean over the surfaces. It holds for light that has met a wall at
/// least once, in a room without dark corners; the measured spread about it is some decibels.
pub fn irradiance(surface: f64, reflectance: f64) -> f64 {
    reflectance / (surface * (1.0 - reflectance))
}

/// Time in which the scattered light dies to 1/e once the emitter is dark, s: −t/ln ρ, t = 4V/(cA) the mean time between two
/// reflections; `volume` V in m³. The room is one pole of this time.
pub fn decay_time(surface: f64, reflectance: f64, volume: f64) -> f64 {
    -4.0 * volume / (LIGHT_SPEED * surface) / reflectance.ln()
}

/// The largest volume that a `surface` (m²) can enclose, m³: that of the sphere.
pub fn largest_volume(surface: f64) -> f64 {
    (surface.powi(3) / (36.0 * PI)).sqrt()
}

#[cfg(test)]
mod tests {
    use super::*;

    // Diffuse sphere: 1 cm² of detector, 110 m² of room.
    #[test]
    fn irradiance_matches_table() {
        for (reflectance, gain) in [(0.3, 3.89610e-7), (0.6, 1.36364e-6), (0.8, 3.63636e-6)] {
            // The table has six digits.
            assert!((1e-4 * irradiance(110.0, reflectance) / gain - 1.0).abs() < 5e-6);
        }
    }

    #[test]
    fn decay_follows_the_mean_free_path() {
        // A 5 m × 5 m × 3 m room: mean path 4V/A = 2.72727 m, 9.09716 ns; at ρ = 1/e that is the decay time itself.
        let time = decay_time(110.0, (-1.0_f64).exp(), 75.0);
        assert!((time / 9.09718e-9 - 1.0).abs() < 1e-5, "{time}");
        // A sphere of radius 1 m.
        assert!((largest_volume(4.0 * PI) - 4.0 / 3.0 * PI).abs() < 1e-12);
    }
}
