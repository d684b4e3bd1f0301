//! Stations against closed forms. Values with six digits were computed from the stated formula outside this project; the formulas are
//! textbook ones (named beside each), many from memory.

mod amplifier;
mod clipping;
mod detector;
mod exponential;
mod loading;
mod noise;
mod passive;
mod transimpedance;

use harklight::station::Model;

/// Whether two values agree to `relative`.
fn near(a: f64, b: f64, relative: f64) {
    assert!((a / b - 1.0).abs() < relative, "{a} against {b}");
}

fn db(ratio: f64) -> f64 {
    20.0 * ratio.log10()
}

/// Integral of `density` over 1 mHz to 10 THz, by the trapezoid rule in the logarithm; the laws here are of one or two poles and need no
/// more than 200 points a decade for six digits.
fn integral(density: impl Fn(f64) -> f64) -> f64 {
    let (decades, per_decade) = (16, 200);
    let width = std::f64::consts::LN_10 / f64::from(per_decade);
    (0..=decades * per_decade)
        .map(|k| 1e-3 * 10f64.powf(f64::from(k) / f64::from(per_decade)))
        .map(|f| density(f) * f * width)
        .sum()
}

/// Density of the contributor whose name ends in `cause`.
fn share(model: &dyn Model, cause: &str, frequency: f64) -> f64 {
    let shares = model.noise(frequency);
    let found = shares.iter().find(|s| s.name.ends_with(cause));
    found.unwrap_or_else(|| panic!("no {cause}")).density
}
