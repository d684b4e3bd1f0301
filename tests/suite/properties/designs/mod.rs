//! Designs at random: every kind of every section, with values from the usual to the absurd.

mod stages;

use proptest::prelude::*;
use proptest::sample::select;

use crate::bench::Draft;
use stages::{bipolar, stages};

fn words(list: &'static [&'static str]) -> BoxedStrategy<String> {
    select(list).prop_map(str::to_owned).boxed()
}

const OHMS: &[&str] = &["1 mΩ", "1 Ω", "600 Ω", "10 kΩ", "1 MΩ", "100 MΩ"];
const OHMS_OR_NONE: &[&str] = &["0 Ω", "1 Ω", "600 Ω", "10 kΩ", "1 MΩ", "100 MΩ"];
const FARADS: &[&str] = &["1 fF", "10 pF", "1 nF", "100 nF", "10 µF", "1 F"];
const FARADS_OR_NONE: &[&str] = &["0 F", "0.1 pF", "10 pF", "1 nF", "1 µF"];
const SUPPLIES: &[&str] = &["1 V", "3.3 V", "9 V", "48 V", "1 kV"];
const OPAMPS: &[&str] = &[
    "slow-bipolar",
    "low-noise-bipolar",
    "jfet-input",
    "micropower",
];

fn driver() -> BoxedStrategy<String> {
    let resistor = (words(SUPPLIES), words(OHMS_OR_NONE)).prop_map(|(v, r)| {
        format!("kind = \"series-resistor\"\nsupply = \"{v}\"\nresistor = \"{r}\"\n")
    });
    let sink = (
        words(SUPPLIES),
        words(&["1 nA", "1 mA", "50 mA", "10 A"]),
        words(&["1 µA/V", "20 mA/V", "10 A/V"]),
        words(OHMS_OR_NONE),
        words(&["0 V", "0.4 V", "5 V"]),
    )
        .prop_map(|(v, bias, slope, sense, saturation)| {
            format!(
                "kind = \"current-sink\"\nsupply = \"{v}\"\nbias = \"{bias}\"\nslope = \"{slope}\"\nsense = \"{sense}\"\n\
                 saturation = \"{saturation}\"\n"
            )
        });
    let transistor = (
        words(SUPPLIES),
        words(&["1 nA", "1 mA", "50 mA", "10 A"]),
        words(OHMS_OR_NONE),
        words(&["1 Ω", "10 kΩ", "inf"]),
        bipolar(),
    )
        .prop_map(|(v, bias, r, divider, part)| {
            format!(
                "kind = \"transistor\"\nsupply = \"{v}\"\nbias = \"{bias}\"\nemitter_resistor = \"{r}\"\nbias_resistance = \"{divider}\"\n{part}"
            )
        });
    (
        prop_oneof![resistor, sink, transistor],
        words(&[
            "",
            "input_resistance = \"1 Ω\"\n",
            "input_resistance = \"47 kΩ\"\n",
        ]),
        words(&[
            "",
            "",
            "servo = { bandwidth = \"100 kHz\", gain = 20 }\n",
            "servo = { bandwidth = \"1 mHz\", gain = 1e9 }\n",
            "servo = { bandwidth = \"1 THz\", gain = 0.01 }\n",
        ]),
    )
        .prop_map(|(driver, load, servo)| driver + &load + &servo)
        .boxed()
}

fn emitter() -> BoxedStrategy<String> {
    words(&[
        "part = \"ir-led-narrow\"\n",
        "part = \"ir-led-wide\"\ncount = 3\n",
        "part = \"blue-led\"\ndivergence = \"1°\"\n",
        "part = \"ir-led-narrow\"\nthermal_resistance = \"5000 K/W\"\nthermal_time = \"1 µs\"\n",
        "part = \"ir-led-narrow\"\nthermal_resistance = 0\nlow_current = 0\ndroop_current = \"inf\"\nbandwidth = \"inf\"\nseries_resistance = 0\n",
        "part = \"ir-led-narrow\"\nflux_temperature = \"10 %/K\"\nbandwidth = \"1 kHz\"\nintensity_noise = \"-10 dB/Hz\"\n",
        "part = \"ir-led-narrow\"\nsaturation_current = \"1 mA\"\nideality = 10\n",
        "part = \"red-led\"\ncurve = [[\"0 mA\", \"0 mW\"], [\"5 mA\", \"0.4 mW\"], [\"20 mA\", \"3.2 mW\"], [\"80 mA\", \"11 mW\"]]\n",
        "part = \"red-led\"\ncurve = [[\"0 mA\", \"1 µW\"], [\"1 nA\", \"1 kW\"]]\n",
    ])
}

fn path() -> BoxedStrategy<String> {
    let air = (
        words(&["1 mm", "3 m", "10 km"]),
        words(&[
            "",
            "off_axis = \"89°\"\n",
            "tilt = \"80°\"\n",
            "visibility = \"1 m\"\nrain = \"100 dB/km\"\n",
        ]),
        words(&[
            "",
            "turbulence = \"1e-15 m^-2/3\"\nwind = \"3 m/s\"\n",
            "turbulence = \"1e-3 m^-2/3\"\nwind = 0\n",
            "turbulence = \"1e-9 m^-2/3\"\nwind = \"1e6 m/s\"\n",
        ]),
        words(&[
            "",
            "sway = \"0.1°\"\nsway_bandwidth = \"2 Hz\"\n",
            "sway = \"80°\"\nsway_bandwidth = \"1 MHz\"\n",
        ]),
    )
        .prop_map(|(distance, way, turbulence, sway)| {
            format!("kind = \"air\"\ndistance = \"{distance}\"\n{way}{turbulence}{sway}")
        });
    let fibre = (words(&["1 mm", "35 m", "1000 km"]), words(&["1 µm", "1 mm", "10 m"]), words(&["0.001", "0.5", "1"])).prop_map(
        |(length, core, aperture)| {
            format!(
                "kind = \"fibre\"\nlength = \"{length}\"\nattenuation = \"0.2 dB/m\"\ncore = \"{core}\"\naperture = {aperture}\n\
                 connectors = 2\nconnector_loss = \"1.5 dB\"\n"
            )
        },
    );
    let diffuse = (words(&["1 m²", "90 m²", "1e6 m²"]), words(&["1e-9", "0.6", "0.999999999"]), words(&["1e-6 m³", "0.05 m³", "60 m³"])).prop_map(
        |(surface, reflectance, volume)| {
            format!("kind = \"diffuse\"\nsurface = \"{surface}\"\nreflectance = {reflectance}\nvolume = \"{volume}\"\n")
        },
    );
    prop_oneof![2 => air, 1 => fibre, 1 => diffuse].boxed()
}

fn light() -> BoxedStrategy<String> {
    let lamp = words(&[
        "kind = \"steady\"\nphotocurrent = \"1 mA\"\n",
        "kind = \"steady\"\nphotocurrent = \"1 A\"\n",
        "kind = \"incandescent\"\nirradiance = \"500 W/m²\"\nripple = 1\n",
        "kind = \"daylight\"\nirradiance = \"1000 W/m²\"\nsun = \"in\"\n",
        "kind = \"daylight\"\nspectral_irradiance = \"1 W/m²/nm\"\n",
        "kind = \"tube-magnetic\"\nphotocurrent = \"1 µA\"\nripple = 0.4\nmains = \"1 kHz\"\n",
        "kind = \"tube-electronic\"\nphotocurrent = \"1 µA\"\nripple = 0.2\nfrequency = \"38 kHz\"\n",
        "kind = \"tube-electronic\"\nphotocurrent = \"1 mA\"\nripple = 1\nfrequency = \"1 mHz\"\nmains = \"0.001 Hz\"\n",
        "kind = \"pwm-lamp\"\nphotocurrent = \"1 µA\"\nfrequency = \"1 kHz\"\nduty = 0.4\nedge = \"1 µs\"\n",
        "kind = \"pwm-lamp\"\nphotocurrent = \"1 mA\"\nfrequency = \"10 MHz\"\nduty = 1e-6\nedge = 0\n",
    ]);
    let lamps = prop::collection::vec(lamp, 0..3).prop_map(|all| {
        all.iter()
            .map(|keys| format!("[[ambient]]\n{keys}"))
            .collect::<String>()
    });
    let cuts = words(&[
        "",
        "[[path.interruption]]\nat = 0\nlasts = \"1 ms\"\nedge = 0\n",
        "[[path.interruption]]\nrate = \"1 kHz\"\nlasts = \"100 µs\"\n",
        "[[path.interruption]]\nat = 0\nlasts = \"1 h\"\nedge = \"1 h\"\n",
        "[[path.interruption]]\nrate = \"1 GHz\"\nlasts = \"1 fs\"\nedge = 0\n",
    ]);
    (lamps, cuts).prop_map(|(a, b)| a + &b).boxed()
}

fn front_end() -> BoxedStrategy<String> {
    let load = (words(SUPPLIES), words(OHMS), words(FARADS_OR_NONE)).prop_map(|(v, r, c)| {
        format!("kind = \"load\"\nsupply = \"{v}\"\nload = \"{r}\"\ncapacitance = \"{c}\"\n")
    });
    let amplifier = (
        words(SUPPLIES),
        words(&["0 V", "1 V", "100 V"]),
        words(OHMS),
        words(FARADS_OR_NONE),
        words(OPAMPS),
        words(&["", "gbw = \"inf\"\n", "slew = \"inf\"\n", "slew = \"1 V/s\"\n", "input_capacitance = 0\n", "output_current = \"1 nA\"\n", "bias_current = \"1 mA\"\n"]),
        words(&["", "", "ambient_servo = \"30 Hz\"\n", "ambient_servo = \"1 THz\"\nservo_resistor = \"1 mΩ\"\n"]),
    )
        .prop_map(|(v, bias, r, c, part, more, servo)| {
            format!(
                "kind = \"transimpedance\"\nsupply = \"{v}\"\nbias = \"{bias}\"\nfeedback = \"{r}\"\n\
                 feedback_capacitor = \"{c}\"\npart = \"{part}\"\n{more}{servo}"
            )
        });
    prop_oneof![load, amplifier].boxed()
}

/// The detector with the front end that it can have.
fn receiver() -> BoxedStrategy<(String, String)> {
    let photodiode = words(&[
        "kind = \"photodiode\"\npart = \"pin-7mm2\"\n",
        "kind = \"photodiode\"\npart = \"pin-7mm2\"\ncapacitance = 0\ndark_current = 0\n",
        "kind = \"photodiode\"\npart = \"pin-7mm2\"\ncapacitance = \"10 nF\"\ngrading = 0.99\nshunt_resistance = \"1 Ω\"\ncount = 10\n",
        "kind = \"photodiode\"\npart = \"pin-7mm2\"\nsaturation_current = \"1 µA\"\ndark_current = \"1 mA\"\nideality = 0.5\n",
    ]);
    let other = words(&[
        "kind = \"phototransistor\"\npart = \"phototransistor-small\"\n",
        "kind = \"phototransistor\"\npart = \"phototransistor-small\"\nbase_resistor = \"1 kΩ\"\ncount = 10\n",
        "kind = \"phototransistor\"\npart = \"phototransistor-small\"\ngain = 1\ntransit_time = 0\nemitter_capacitance = 0\ncollector_capacitance = 0\n",
        "kind = \"phototransistor\"\npart = \"phototransistor-small\"\ngain = 1e6\ngain_low_current = 0\ngain_high_current = \"1 µA\"\nreverse_gain = 0.01\nearly_voltage = \"1 V\"\n",
        "kind = \"phototransistor\"\npart = \"phototransistor-small\"\ntransit_time = \"1 ms\"\nsaturation_current = \"1 µA\"\nearly_voltage = \"inf\"\n",
        "kind = \"photocell\"\npart = \"cell-1cm2\"\n",
        "kind = \"photocell\"\npart = \"cell-1cm2\"\ncapacitance = 0\nseries_resistance = 0\nshunt_resistance = \"inf\"\n",
        "kind = \"photocell\"\npart = \"cell-1cm2\"\ncapacitance = \"1 F\"\nseries_resistance = \"1 MΩ\"\nshunt_resistance = \"1 mΩ\"\nsaturation_current = \"1 A\"\n",
    ]);
    let at = words(&["anode", "cathode"]);
    let diode = (photodiode, front_end(), at).prop_map(|(detector, front, at)| {
        let at = if front.contains("\"load\"") {
            format!("load_at = \"{at}\"\n")
        } else {
            String::new()
        };
        (detector, front + &at)
    });
    let load = (
        words(SUPPLIES),
        words(OHMS),
        words(FARADS_OR_NONE),
        words(&["collector", "emitter"]),
    );
    let other = (other, load).prop_map(|(detector, (v, r, c, at))| {
        let at = if detector.contains("transistor") {
            format!("load_at = \"{at}\"\n")
        } else {
            String::new()
        };
        let front = format!(
            "kind = \"load\"\nsupply = \"{v}\"\nload = \"{r}\"\ncapacitance = \"{c}\"\n{at}"
        );
        (detector, front)
    });
    prop_oneof![diode, other].boxed()
}

/// Settings of the output.
const OUTPUTS: &[&[&str]] = &[
    &["output.impedance=1 Ω"],
    &["output.impedance=10 kΩ"],
    &["output.impedance=inf"],
    &[
        "output.kind=loudspeaker",
        "output.impedance=8 Ω",
        "output.resonance=80 Hz",
        "output.quality=0.7",
        "output.voice_coil=5 kHz",
        "output.sensitivity=88 dB",
        "output.distance=1 m",
    ],
    &[
        "output.kind=loudspeaker",
        "output.impedance=1 mΩ",
        "output.resonance=1 GHz",
        "output.quality=1e6",
        "output.voice_coil=1 mHz",
        "output.sensitivity=-300 dB",
        "output.distance=1 µm",
    ],
    &[
        "output.kind=loudspeaker",
        "output.impedance=8 Ω",
        "output.resonance=1 mHz",
        "output.quality=1e-6",
        "output.voice_coil=inf",
        "output.sensitivity=300 dB",
        "output.distance=1 km",
    ],
    &[
        "output.kind=headphone",
        "output.impedance=64 Ω",
        "output.sensitivity=100 dB",
    ],
    &[
        "output.kind=headphone",
        "output.impedance=64 Ω",
        "output.sensitivity=100 dB",
        "output.resonance=60 Hz",
        "output.quality=0.7",
        "output.voice_coil=15 kHz",
    ],
];

prop_compose! {
    /// A draft in which anything may stand beside anything.
    pub fn draft()(
        electrical in (stages("transmitter"), driver(), emitter(), stages("receiver")),
        optical in (path(), light(), receiver()),
        full_scale in words(&["1 µV", "1 V", "100 V"]),
        resistance in words(OHMS_OR_NONE),
        output in select(OUTPUTS),
        temperature in words(&["100 K", "293.15 K", "600 K"]),
    ) -> Draft {
        let (transmitter, driver, emitter, receiver) = electrical;
        let (path, light, (detector, front_end)) = optical;
        let draft = Draft::ideal()
            .transmitter(&transmitter)
            .driver(&driver)
            .emitter(&emitter)
            .path(&path)
            .with(&light)
            .detector(&detector)
            .front_end(&front_end)
            .receiver(&receiver)
            .set(format!("source.full_scale={full_scale}"))
            .set(format!("source.resistance={resistance}"))
            .set(format!("temperature={temperature}"));
        output.iter().fold(draft, |draft, edit| draft.set(*edit))
    }
}
