//! The built-in catalogue against physics. Constants: SI exact values of 2019; everything at 293.15 K.

use harklight::design::{Catalogue, Part};

const Q: f64 = 1.602176634e-19;
const H: f64 = 6.62607015e-34;
const C: f64 = 299792458.0;
const V_T: f64 = 1.380649e-23 * 293.15 / Q;

fn of_class(class: &str) -> Vec<&'static Part> {
    Catalogue::built_in()
        .parts()
        .filter(|part| part.class.name == class)
        .collect()
}

fn number(part: &Part, key: &str) -> f64 {
    part.values.number(key)
}

#[test]
fn the_catalogue_has_every_class_and_says_where_its_values_come_from() {
    Catalogue::from_text("parts.toml", include_str!("../../../configs/parts.toml")).unwrap();
    for (class, least) in [
        ("emitter", 5),
        ("photodiode", 3),
        ("op-amp", 5),
        ("bipolar", 2),
        ("phototransistor", 2),
        ("photocell", 2),
    ] {
        assert!(of_class(class).len() >= least, "{class}");
    }
    for part in Catalogue::built_in().parts() {
        assert!(
            !part.about.is_empty() && part.basis.len() > 30,
            "{}",
            part.name
        );
    }
}

/// Forward voltages of LEDs at their rated current: common practice (infrared 1.1 to 1.6 V, red 1.7 to 2.2 V, blue 2.8 to 3.5 V).
#[test]
fn forward_voltages_follow_the_colour() {
    for part in of_class("emitter") {
        let i = number(part, "at_current");
        let junction =
            number(part, "ideality") * V_T * (1.0 + i / number(part, "saturation_current")).ln();
        let forward = junction + i * number(part, "series_resistance");
        let range = match number(part, "wavelength") {
            w if w > 800e-9 => 1.1..1.6,
            w if w > 600e-9 => 1.7..2.2,
            _ => 2.8..3.5,
        };
        assert!(range.contains(&forward), "{}: {forward} V", part.name);
    }
}

/// No LED gives more than one photon for an electron; its line is no narrower than 1.8 kT of photon energy (E. F. Schubert,
/// Light-Emitting Diodes, from memory); its intensity noise is no less than the shot noise of its light, 2hν/P.
#[test]
fn emitters_keep_to_the_quantum_limits() {
    for part in of_class("emitter") {
        let (wavelength, flux, current) = (
            number(part, "wavelength"),
            number(part, "flux"),
            number(part, "at_current"),
        );
        let photon = H * C / wavelength;
        let efficiency = flux / current * Q / photon;
        assert!(
            (0.05..0.8).contains(&efficiency),
            "{}: {efficiency}",
            part.name
        );
        let narrowest = 1.8 * V_T * Q * wavelength / photon;
        assert!(number(part, "linewidth") > narrowest, "{}", part.name);
        let shot = 10.0 * (2.0 * photon / flux).log10();
        let noise = part.values.optional("intensity_noise").unwrap();
        assert!(
            noise > shot && noise <= -150.0,
            "{}: {noise} against {shot}",
            part.name
        );
        assert!(
            number(part, "low_current") < current && current <= number(part, "max_current"),
            "{}",
            part.name
        );
        assert!(
            (-0.01..0.0).contains(&number(part, "flux_temperature")),
            "{}",
            part.name
        );
    }
}

/// R = η q λ / (h c); silicon detectors reach η of 0.6 to 0.9 between 850 and 940 nm (common practice).
#[test]
fn detectors_stay_below_the_quantum_limit() {
    for part in of_class("photodiode")
        .into_iter()
        .chain(of_class("phototransistor"))
        .chain(of_class("photocell"))
    {
        let limit = Q * 940e-9 / (H * C);
        let efficiency = number(part, "responsivity") / limit;
        assert!(
            (0.6..0.9).contains(&efficiency),
            "{}: {efficiency}",
            part.name
        );
    }
}

/// Silicon PIN junctions: 5 to 20 pF for each mm² at zero bias (common practice); at zero volts the slope of the diode law and
/// the shunt resistance are of one size.
#[test]
fn junctions_scale_with_their_area() {
    for part in of_class("photodiode") {
        let per_area = number(part, "capacitance") / number(part, "area");
        assert!(
            (5e-6..20e-6).contains(&per_area),
            "{}: {per_area} F/m²",
            part.name
        );
        let slope = number(part, "ideality") * V_T / number(part, "saturation_current");
        let shunt = number(part, "shunt_resistance");
        assert!(
            (0.5..2.0).contains(&(shunt / slope)),
            "{}: {shunt} against {slope}",
            part.name
        );
    }
    for part in of_class("phototransistor") {
        let per_area = number(part, "collector_capacitance") / number(part, "area");
        assert!(
            (5e-6..20e-6).contains(&per_area),
            "{}: {per_area} F/m²",
            part.name
        );
        assert!(
            number(part, "gain_low_current") < number(part, "gain_high_current"),
            "{}",
            part.name
        );
    }
}

/// Silicon cells give 0.5 to 0.6 V open in full sun, 30 mA for each cm² (common practice).
#[test]
fn photocells_give_half_a_volt_in_the_sun() {
    for part in of_class("photocell") {
        let sun = 300.0 * number(part, "area");
        let open =
            number(part, "ideality") * V_T * (1.0 + sun / number(part, "saturation_current")).ln();
        assert!((0.5..0.6).contains(&open), "{}: {open} V", part.name);
    }
}

/// An undegenerated bipolar pair is linear over 2 V_T, the least any input stage has (slew = 2 V_T·2π·gbw); input current noise
/// is no less than the shot noise of the bias current.
#[test]
fn op_amps_are_consistent_in_themselves() {
    for part in of_class("op-amp") {
        let linear = number(part, "slew") / (std::f64::consts::TAU * number(part, "gbw"));
        assert!(
            (2.0 * V_T..1.0).contains(&linear),
            "{}: {linear} V",
            part.name
        );
        let shot = (2.0 * Q * number(part, "bias_current")).sqrt();
        assert!(
            number(part, "noise_current") >= shot,
            "{}: {shot}",
            part.name
        );
    }
}

/// V_BE of small-signal silicon transistors is 0.6 to 0.7 V at 1 mA (common practice).
#[test]
fn bipolars_turn_on_where_silicon_does() {
    for part in of_class("bipolar") {
        let on = V_T * (1e-3 / number(part, "saturation_current")).ln();
        assert!((0.6..0.7).contains(&on), "{}: {on} V", part.name);
    }
}
