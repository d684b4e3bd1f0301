//! Sunlight's spectrum at the ground.

/// Wavelength (nm) and global spectral irradiance (W/m²/nm) on a surface tilted 37° to the sun, air mass 1.5: points of
/// ASTM G173-03, read in a public copy of the table.
const GLOBAL: [(f64, f64); 34] = [
    (400.0, 1.1141),
    (450.0, 1.5595),
    (470.0, 1.5077),
    (500.0, 1.5451),
    (520.0, 1.5236),
    (525.0, 1.5781),
    (550.0, 1.5399),
    (590.0, 1.3709),
    (620.0, 1.4739),
    (630.0, 1.3924),
    (640.0, 1.434),
    (650.0, 1.3594),
    (660.0, 1.3992),
    (700.0, 1.2823),
    (750.0, 1.2341),
    (760.0, 0.26604),
    (761.0, 0.15396),
    (780.0, 1.1636),
    (800.0, 1.0725),
    (820.0, 0.86188),
    (830.0, 0.91601),
    (850.0, 0.89372),
    (870.0, 0.96755),
    (880.0, 0.93957),
    (900.0, 0.7426),
    (905.0, 0.81709),
    (930.0, 0.4321),
    (935.0, 0.25084),
    (940.0, 0.47181),
    (950.0, 0.14726),
    (980.0, 0.60468),
    (1000.0, 0.73532),
    (1050.0, 0.65463),
    (1100.0, 0.48577),
];

/// Share of the global irradiance that the sky alone sends, the sun itself out of view: 10 % to 15 % (from memory).
const SKY_SHARE: f64 = 0.12;

/// Spectral irradiance of full daylight, W/m²/m, at `wavelength` (m); `sun_in_view`: with the sun's disc, else the sky alone.
///
/// Straight lines between the points of ASTM G173-03; `None` outside 400 nm to 1100 nm. Within the water band of 930 nm to
/// 960 nm the true curve swings by a factor of three inside 10 nm, so a narrow filter there deserves a value of its own.
pub fn spectral_irradiance(wavelength: f64, sun_in_view: bool) -> Option<f64> {
    let nm = wavelength * 1e9;
    let above = GLOBAL.iter().position(|&(w, _)| w >= nm)?;
    let (w1, e1) = GLOBAL[above];
    let per_nm = match above.checked_sub(1).map(|i| GLOBAL[i]) {
        Some((w0, e0)) => e0 + (e1 - e0) * (nm - w0) / (w1 - w0),
        None if nm == w1 => e1,
        None => return None,
    };
    let share = if sun_in_view { 1.0 } else { SKY_SHARE };
    Some(per_nm * 1e9 * share)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn points_and_range() {
        let at = |nm: f64| spectral_irradiance(nm * 1e-9, true);
        assert!((at(850.0).unwrap() / 0.89372e9 - 1.0).abs() < 1e-9);
        assert!((at(875.0).unwrap() / 0.95356e9 - 1.0).abs() < 1e-5);
        assert_eq!(at(399.0), None);
        assert_eq!(at(1101.0), None);
    }
}
