//! Light that is not ours.

use super::*;
use Dimension::*;

const AMOUNT: &[Choice] = &[Choice {
    ways: &[&["irradiance"], &["spectral_irradiance"], &["photocurrent"]],
    needed: true,
}];
const RIPPLE: Key = number(
    "ripple",
    Share,
    SHARE,
    "\"10 %\"",
    "modulation depth (max − min)/(max + min) of its light",
);

const fn lamp(name: &'static str, meaning: &'static str, keys: &'static [Key]) -> Kind {
    Kind {
        name,
        meaning,
        keys,
        choices: AMOUNT,
        class: None,
    }
}

pub(super) static AMBIENT: Spec = Spec {
    path: "ambient",
    meaning: "A light that is not ours",
    many: true,
    required: false,
    common: &[
        number(
            "irradiance",
            Irradiance,
            NON_NEGATIVE,
            "\"0.5 W/m²\"",
            "mean at the receiver, inside the field of view, before the filter",
        ),
        number(
            "spectral_irradiance",
            SpectralIrradiance,
            NON_NEGATIVE,
            "\"0.1 W/m²/nm\"",
            "mean in the filter's band; times its width",
        ),
        number(
            "photocurrent",
            Ampere,
            NON_NEGATIVE,
            "\"2 µA\"",
            "mean in the detector, set directly",
        ),
        number(
            "mains",
            Hertz,
            Range::new(0.0, false, 1000.0, true),
            "\"50 Hz\"",
            "mains frequency",
        )
        .or(50.0),
        number(
            "phase",
            Angle,
            ANY,
            "\"90°\"",
            "of the mains; of a pwm-lamp's pulses",
        )
        .or(0.0),
    ],
    kinds: &[
        lamp(
            "daylight",
            "sky and sun",
            &[word(
                "sun",
                &["in", "out"],
                "\"out\"",
                "whether the sun itself is in view",
            )
            .or_word("out")],
        ),
        lamp("incandescent", "a filament lamp", &[RIPPLE]),
        lamp(
            "tube-magnetic",
            "a fluorescent tube on a magnetic ballast",
            &[RIPPLE],
        ),
        lamp(
            "tube-electronic",
            "a fluorescent tube on an electronic ballast",
            &[
                RIPPLE,
                number(
                    "frequency",
                    Hertz,
                    POSITIVE,
                    "\"38 kHz\"",
                    "at which the ballast switches; the light's largest line is at twice it",
                ),
            ],
        ),
        lamp(
            "pwm-lamp",
            "an LED lamp dimmed by pulses",
            &[
                number("frequency", Hertz, POSITIVE, "\"1 kHz\"", "of the pulses"),
                number(
                    "duty",
                    Share,
                    Range::new(1e-6, true, 1.0, true),
                    "\"40 %\"",
                    "share of each period that is lit",
                ),
                number(
                    "edge",
                    Second,
                    NON_NEGATIVE,
                    "\"1 µs\"",
                    "rise and fall of a pulse",
                ),
            ],
        ),
        lamp("steady", "light without ripple", &[]),
    ],
};
