//! Light into, along and out of a step-index fibre of large core. Ray optics: cores of many wavelengths, all modes filled alike.

/// Refractive index of the core, for the reflection at its ends: acrylic (PMMA), as in plastic fibre at 650 nm. Glass (1.46) reflects 0.02 dB less.
pub const CORE_INDEX: f64 = 1.492;

/// Share of the flux of a Lambertian emitter of `order` m (> 0), smaller than the core and close to it, that is launched into a
/// numerical aperture `aperture` (0…1): 1 − (1 − NA²)^((m+1)/2), the flux inside the acceptance angle arcsin NA.
pub fn lambertian_launch(order: f64, aperture: f64) -> f64 {
    -((order + 1.0) / 2.0 * (-aperture * aperture).ln_1p()).exp_m1()
}

/// The same for a Gaussian beam of full `divergence` (rad, at 1/e² of the irradiance): 1 − exp(−2·tan²θ_NA/tan²(divergence/2)), its
/// far field inside the acceptance angle (Siegman, Lasers).
pub fn gaussian_launch(divergence: f64, aperture: f64) -> f64 {
    let accepted = aperture.asin().tan() / (divergence / 2.0).tan();
    -(-2.0 * accepted * accepted).exp_m1()
}

/// Share of an evenly lit source of `source` diameter (m, ≥ 0) that lies over the core of diameter `core` (m, > 0).
pub fn area_overlap(core: f64, source: f64) -> f64 {
    (core / source).powi(2).min(1.0)
}

/// Share that one face between air and `index` (≥ 1) reflects at normal incidence: ((n−1)/(n+1))² (Fresnel). Up to about 40° from
/// the axis, unpolarised, it stays within a tenth of this.
pub fn fresnel_reflection(index: f64) -> f64 {
    ((index - 1.0) / (index + 1.0)).powi(2)
}

#[cfg(test)]
mod tests {
    use super::*;

    fn close(got: f64, table: f64) {
        // The table has six digits.
        assert!((got / table - 1.0).abs() < 5e-6, "{got} {table}");
    }

    // Closed forms computed apart from this code.
    #[test]
    fn launch_and_faces_match_their_table() {
        close(lambertian_launch(1.0, 0.5), 0.25);
        close(lambertian_launch(1.0, 0.3), 0.09);
        close(lambertian_launch(20.0, 0.5), 0.951231);
        assert_eq!(lambertian_launch(2.0, 1.0), 1.0);
        close(fresnel_reflection(1.492), 0.0389793);
        close(
            -10.0 * (1.0 - fresnel_reflection(CORE_INDEX)).log10(),
            0.172673,
        );
        // Plastic fibre's numerical aperture from its two indices.
        close((1.492_f64.powi(2) - 1.402_f64.powi(2)).sqrt(), 0.510353);
    }

    #[test]
    fn a_beam_as_wide_as_the_acceptance_leaves_e_to_the_minus_two_outside() {
        let divergence = 2.0 * 0.5_f64.asin();
        close(gaussian_launch(divergence, 0.5), 1.0 - (-2.0_f64).exp());
        assert!(gaussian_launch(0.01, 0.5) > 1.0 - 1e-12);
        assert_eq!(area_overlap(1e-3, 0.0), 1.0);
        close(area_overlap(1e-3, 2e-3), 0.25);
    }
}
