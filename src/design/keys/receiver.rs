//! The optics, the detector and the front end.

use super::electronics::OP_AMP;
use super::parts::{PHOTOCELL, PHOTODIODE, PHOTOTRANSISTOR};
use super::*;
use Dimension::*;

const FILTER: &[Key] = &[
    number("centre", Metre, POSITIVE, "\"940 nm\"", "of the pass band"),
    number(
        "width",
        Metre,
        POSITIVE,
        "\"50 nm\"",
        "full width at half transmission",
    ),
    number(
        "transmission",
        Share,
        POSITIVE_SHARE,
        "0.85",
        "inside the pass band",
    ),
];

pub(super) static OPTICS: Spec = Spec {
    path: "receiver.optics",
    meaning: "What stands before the detector",
    many: false,
    required: false,
    common: &[],
    kinds: &[Kind {
        name: "",
        meaning: "",
        keys: &[
            number(
                "aperture",
                Metre,
                POSITIVE,
                "\"12 mm\"",
                "diameter of the lens or window",
            )
            .optional(),
            number(
                "area",
                SquareMetre,
                POSITIVE,
                "\"1 cm²\"",
                "of the lens or window, in place of its diameter",
            )
            .optional(),
            number(
                "field_of_view",
                Angle,
                HALF_SPACE,
                "\"20°\"",
                "half angle; the whole half-space when absent",
            )
            .optional(),
            table(
                "filter",
                FILTER,
                "{ centre = \"940 nm\", width = \"50 nm\", transmission = 0.85 }",
                "optical filter; none when absent",
            ),
            number(
                "concentrator_index",
                Number,
                FROM_ONE,
                "1.5",
                "refractive index of a concentrator; 1 is none",
            )
            .or(1.0),
        ],
        choices: &[Choice {
            ways: &[&["aperture"], &["area"]],
            needed: false,
        }],
        class: None,
    }],
};

pub(super) static DETECTOR: Spec = Spec {
    path: "receiver.detector",
    meaning: "What turns light back into current",
    many: false,
    required: true,
    common: &[number(
        "count",
        Count,
        PIECES,
        "1",
        "identical detectors in parallel",
    )
    .or(1.0)],
    kinds: &[
        Kind {
            name: "photodiode",
            meaning: "a photodiode",
            keys: &[],
            choices: &[Choice {
                ways: &[&["responsivity"], &["quantum_efficiency"]],
                needed: true,
            }],
            class: Some(&PHOTODIODE),
        },
        Kind {
            name: "phototransistor",
            meaning: "a phototransistor",
            keys: &[number(
                "base_resistor",
                Ohm,
                POSITIVE_INF,
                "\"1 MΩ\"",
                "from base to emitter; infinite when absent",
            )
            .or_infinite()],
            choices: &[],
            class: Some(&PHOTOTRANSISTOR),
        },
        Kind {
            name: "photocell",
            meaning: "a photovoltaic cell",
            keys: &[],
            choices: &[],
            class: Some(&PHOTOCELL),
        },
    ],
};

pub(super) const SUPPLY: Key = Key {
    name: "supply",
    what: What::Supply,
    absent: Absent::Required,
    example: "\"9 V\"",
    meaning: "one voltage (rails 0 and it) or two rails [\"-5 V\", \"5 V\"]",
};
pub(super) const REFERENCE: Key = number(
    "reference",
    Volt,
    ANY,
    "\"4.5 V\"",
    "half a single supply, 0 of a split one when absent",
)
.optional();

pub(super) static FRONT_END: Spec = Spec {
    path: "receiver.front_end",
    meaning: "Turns the detector's current into volts",
    many: false,
    required: true,
    common: &[SUPPLY],
    kinds: &[
        Kind {
            name: "load",
            meaning: "a load resistor",
            keys: &[
                number("load", Ohm, POSITIVE, "\"10 kΩ\"", "load resistor"),
                number("capacitance", Farad, NON_NEGATIVE, "\"10 pF\"", "across the load: wiring and what follows").or(0.0),
                word(
                    "load_at",
                    &["collector", "emitter", "cathode", "anode"],
                    "\"anode\"",
                    "collector (default) or emitter of a phototransistor; cathode or anode (default) of a photodiode",
                )
                .optional(),
            ],
            choices: &[],
            class: None,
        },
        Kind {
            name: "transimpedance",
            meaning: "an op-amp that holds the detector's voltage",
            keys: &[
                REFERENCE,
                number("bias", Volt, NON_NEGATIVE, "\"2 V\"", "reverse voltage on the diode"),
                number("feedback", Ohm, POSITIVE, "\"100 kΩ\"", "feedback resistor"),
                number("feedback_capacitor", Farad, NON_NEGATIVE, "\"4.7 pF\"", "across the feedback resistor"),
                number("ambient_servo", Hertz, POSITIVE, "\"30 Hz\"", "corner of a loop that takes the ambient light's current away").optional(),
                number("servo_resistor", Ohm, POSITIVE, "\"47 kΩ\"", "through which that loop sends its current; as large as the feedback when absent").optional(),
            ],
            choices: &[],
            class: Some(&OP_AMP),
        },
    ],
};
