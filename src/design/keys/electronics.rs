//! The keys of op-amps and bipolar transistors.

use super::parts::{Class, JUNCTION, PART};
use super::*;
use Dimension::*;

pub(super) static OP_AMP: Class = Class {
    name: "op-amp",
    meaning: "an op-amp",
    keys: &[
        PART,
        number(
            "gbw",
            Hertz,
            POSITIVE_INF,
            "\"3 MHz\"",
            "gain-bandwidth product",
        ),
        number("slew", SlewRate, POSITIVE_INF, "\"5 V/µs\"", "slew rate"),
        number(
            "noise_voltage",
            VoltNoise,
            NON_NEGATIVE,
            "\"12 nV/√Hz\"",
            "input noise voltage density",
        )
        .or(0.0),
        number(
            "noise_voltage_corner",
            Hertz,
            NON_NEGATIVE,
            "\"50 Hz\"",
            "below it noise voltage rises as 1/f",
        )
        .or(0.0),
        number(
            "noise_current",
            AmpereNoise,
            NON_NEGATIVE,
            "\"10 fA/√Hz\"",
            "input noise current density",
        )
        .or(0.0),
        number(
            "noise_current_corner",
            Hertz,
            NON_NEGATIVE,
            "\"0 Hz\"",
            "below it noise current rises as 1/f",
        )
        .or(0.0),
        number(
            "swing_low",
            Volt,
            NON_NEGATIVE,
            "\"1.5 V\"",
            "least distance of the output from the low rail",
        ),
        number(
            "swing_high",
            Volt,
            NON_NEGATIVE,
            "\"1.5 V\"",
            "least distance of the output from the high rail",
        ),
        number(
            "output_current",
            Ampere,
            POSITIVE_INF,
            "\"20 mA\"",
            "most the output gives or takes",
        ),
        number("offset", Volt, ANY, "\"1 mV\"", "input offset voltage").or(0.0),
        number(
            "bias_current",
            Ampere,
            ANY,
            "\"30 pA\"",
            "input bias current",
        )
        .or(0.0),
        number(
            "input_capacitance",
            Farad,
            NON_NEGATIVE,
            "\"5 pF\"",
            "of each input",
        )
        .or(0.0),
        number(
            "input_linear",
            Volt,
            POSITIVE_INF,
            "\"50 mV\"",
            "half-width of the input pair's linear range; slew/(2π·gbw) when absent",
        )
        .optional(),
    ],
    choices: &[],
};

pub(super) static BIPOLAR: Class = Class {
    name: "bipolar",
    meaning: "a bipolar transistor",
    keys: &[
        PART,
        number("gain", Number, POSITIVE, "200", "current gain"),
        number(
            "transition_frequency",
            Hertz,
            POSITIVE_INF,
            "\"250 MHz\"",
            "where the current gain has fallen to 1",
        ),
        number(
            "collector_capacitance",
            Farad,
            NON_NEGATIVE,
            "\"4 pF\"",
            "base to collector",
        ),
        number(
            "base_resistance",
            Ohm,
            NON_NEGATIVE,
            "\"150 Ω\"",
            "of the base region",
        ),
        number(
            "early_voltage",
            Volt,
            POSITIVE_INF,
            "\"80 V\"",
            "Early voltage",
        ),
        number(
            "saturation",
            Volt,
            NON_NEGATIVE,
            "\"0.2 V\"",
            "least collector voltage",
        ),
        JUNCTION,
    ],
    choices: &[],
};
