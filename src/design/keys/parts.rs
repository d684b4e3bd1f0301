//! The classes of parts, and the keys of those that make or catch light.

use super::electronics::{BIPOLAR, OP_AMP};
use super::*;
use Dimension::*;

/// A class of catalogue parts.
#[derive(Debug)]
pub struct Class {
    /// The word after `class =` in a catalogue.
    pub name: &'static str,
    /// What it is, in the singular with its article.
    pub meaning: &'static str,
    /// What a part of it carries.
    pub keys: &'static [Key],
    /// Keys that stand for one another inside a part.
    pub choices: &'static [Choice],
}

pub(super) const PART: Key = text(
    "part",
    "\"…\"",
    "catalogue entry that fills the keys not given",
);
pub(super) const JUNCTION: Key = number(
    "saturation_current",
    Ampere,
    POSITIVE,
    "\"1 pA\"",
    "saturation current of the junction",
);
const IDEALITY: Key = number(
    "ideality",
    Number,
    Range::new(0.5, true, 10.0, true),
    "1.5",
    "ideality factor of the junction",
);
const AREA: Key = number(
    "area",
    SquareMetre,
    POSITIVE,
    "\"7 mm²\"",
    "light-sensitive area",
);
const RESPONSIVITY: Key = number(
    "responsivity",
    Responsivity,
    POSITIVE,
    "\"0.6 A/W\"",
    "at the emitter's wavelength",
);

/// The classes, in the order they are listed.
pub static CLASSES: [&Class; 6] = [
    &EMITTER_PART,
    &PHOTODIODE,
    &PHOTOTRANSISTOR,
    &PHOTOCELL,
    &OP_AMP,
    &BIPOLAR,
];

pub(super) static EMITTER_PART: Class = Class {
    name: "emitter",
    meaning: "an emitter",
    keys: &[
        PART,
        number(
            "wavelength",
            Metre,
            Range::new(200e-9, true, 2e-6, true),
            "\"940 nm\"",
            "peak wavelength",
        ),
        number(
            "linewidth",
            Metre,
            NON_NEGATIVE,
            "\"45 nm\"",
            "full width at half maximum",
        ),
        number(
            "flux",
            Watt,
            POSITIVE,
            "\"15 mW\"",
            "total flux at at_current",
        ),
        number(
            "at_current",
            Ampere,
            POSITIVE,
            "\"50 mA\"",
            "current of the flux point",
        ),
        number(
            "low_current",
            Ampere,
            NON_NEGATIVE,
            "\"0.3 mA\"",
            "below it light falls faster than current",
        ),
        number(
            "droop_current",
            Ampere,
            POSITIVE_INF,
            "\"1 A\"",
            "where droop has halved the light",
        ),
        JUNCTION,
        IDEALITY,
        number(
            "series_resistance",
            Ohm,
            NON_NEGATIVE,
            "\"1.5 Ω\"",
            "in series with the junction",
        ),
        number(
            "half_angle",
            Angle,
            POSITIVE_ACUTE,
            "\"20°\"",
            "of half intensity",
        ),
        number(
            "divergence",
            Angle,
            Range::new(0.0, false, 180.0 * DEGREE, false),
            "\"2°\"",
            "full angle at 1/e², of a lens",
        ),
        number(
            "bandwidth",
            Hertz,
            POSITIVE_INF,
            "\"5 MHz\"",
            "−3 dB electrical of the light",
        ),
        number(
            "thermal_resistance",
            KelvinPerWatt,
            NON_NEGATIVE,
            "\"300 K/W\"",
            "junction to ambient",
        ),
        number(
            "thermal_time",
            Second,
            NON_NEGATIVE,
            "\"20 ms\"",
            "thermal time constant",
        ),
        number(
            "flux_temperature",
            PerKelvin,
            Range::new(-0.1, true, 0.1, true),
            "\"-0.5 %/K\"",
            "change of flux with temperature",
        ),
        number(
            "max_current",
            Ampere,
            POSITIVE_INF,
            "\"100 mA\"",
            "most the LED may carry",
        ),
        number(
            "intensity_noise",
            DecibelPerHertz,
            Range::new(f64::MIN, true, 0.0, true),
            "\"-155 dB/Hz\"",
            "relative intensity noise; none when absent",
        )
        .optional(),
        number(
            "source_diameter",
            Metre,
            NON_NEGATIVE,
            "\"5 mm\"",
            "of the lit surface or lens",
        )
        .or(0.0),
    ],
    choices: &[Choice {
        ways: &[&["half_angle"], &["divergence"]],
        needed: true,
    }],
};

pub(super) static PHOTODIODE: Class = Class {
    name: "photodiode",
    meaning: "a photodiode",
    keys: &[
        PART,
        AREA,
        RESPONSIVITY,
        number(
            "quantum_efficiency",
            Share,
            POSITIVE_SHARE,
            "0.8",
            "electrons for each photon, in place of responsivity",
        ),
        number(
            "dark_current",
            Ampere,
            NON_NEGATIVE,
            "\"2 nA\"",
            "dark current",
        ),
        number(
            "capacitance",
            Farad,
            NON_NEGATIVE,
            "\"70 pF\"",
            "at zero bias",
        ),
        number("built_in", Volt, POSITIVE, "\"0.6 V\"", "built-in voltage"),
        number(
            "grading",
            Number,
            Range::new(0.0, true, 1.0, false),
            "0.5",
            "exponent of the junction capacitance",
        ),
        JUNCTION,
        IDEALITY,
        number(
            "shunt_resistance",
            Ohm,
            POSITIVE_INF,
            "\"1 GΩ\"",
            "across the junction; infinite when absent",
        )
        .or_infinite(),
    ],
    choices: &[Choice {
        ways: &[&["responsivity"], &["quantum_efficiency"]],
        needed: true,
    }],
};

pub(super) static PHOTOTRANSISTOR: Class = Class {
    name: "phototransistor",
    meaning: "a phototransistor",
    keys: &[
        PART,
        AREA,
        number(
            "responsivity",
            Responsivity,
            POSITIVE,
            "\"0.5 A/W\"",
            "of the base photodiode, at the emitter's wavelength",
        ),
        number("gain", Number, POSITIVE, "300", "largest current gain"),
        number(
            "gain_low_current",
            Ampere,
            NON_NEGATIVE,
            "\"5 µA\"",
            "collector current where gain has halved, downwards",
        ),
        number(
            "gain_high_current",
            Ampere,
            POSITIVE_INF,
            "\"50 mA\"",
            "collector current where gain has halved, upwards",
        ),
        JUNCTION,
        number(
            "reverse_gain",
            Number,
            POSITIVE,
            "2",
            "current gain with emitter and collector exchanged",
        ),
        number(
            "early_voltage",
            Volt,
            POSITIVE_INF,
            "\"80 V\"",
            "Early voltage",
        ),
        number(
            "transit_time",
            Second,
            NON_NEGATIVE,
            "\"1 ns\"",
            "forward transit time of the base",
        ),
        number(
            "emitter_capacitance",
            Farad,
            NON_NEGATIVE,
            "\"8 pF\"",
            "base to emitter",
        ),
        number(
            "collector_capacitance",
            Farad,
            NON_NEGATIVE,
            "\"5 pF\"",
            "base to collector",
        ),
    ],
    choices: &[],
};

pub(super) static PHOTOCELL: Class = Class {
    name: "photocell",
    meaning: "a photocell",
    keys: &[
        PART,
        AREA,
        RESPONSIVITY,
        JUNCTION,
        IDEALITY,
        number(
            "series_resistance",
            Ohm,
            NON_NEGATIVE,
            "\"1 Ω\"",
            "in series with the cell",
        ),
        number(
            "shunt_resistance",
            Ohm,
            POSITIVE_INF,
            "\"100 kΩ\"",
            "across the cell; infinite when absent",
        )
        .or_infinite(),
        number(
            "capacitance",
            Farad,
            NON_NEGATIVE,
            "\"30 nF\"",
            "across the cell",
        ),
    ],
    choices: &[],
};
