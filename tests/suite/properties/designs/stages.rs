//! Electrical stages at random.

use proptest::prelude::*;

use super::{FARADS, OHMS, OHMS_OR_NONE, OPAMPS, words};

/// Keys of a bipolar transistor.
pub fn bipolar() -> BoxedStrategy<String> {
    words(&[
        "part = \"small-signal-npn\"\n",
        "part = \"high-gain-npn\"\n",
        "part = \"small-signal-npn\"\ntransition_frequency = \"inf\"\ncollector_capacitance = 0\nbase_resistance = 0\nearly_voltage = \"inf\"\nsaturation = 0\n",
        "part = \"small-signal-npn\"\ngain = 1\ntransition_frequency = \"1 kHz\"\ncollector_capacitance = \"1 µF\"\nbase_resistance = \"1 MΩ\"\n",
        "part = \"small-signal-npn\"\ngain = 1e6\nearly_voltage = \"1 V\"\nsaturation = \"2 V\"\nsaturation_current = \"1 µA\"\n",
    ])
}

/// A filter of any shape.
fn filter() -> BoxedStrategy<String> {
    let shaped = (
        words(&["low-pass", "high-pass", "band-pass", "notch"]),
        words(&["butterworth", "bessel", "chebyshev"]),
        1..=8usize,
        words(&["1 µHz", "20 Hz", "1 kHz", "20 kHz", "1 THz"]),
        words(&["1 µHz", "10 Hz", "3 kHz", "1 THz"]),
        words(&["0.01 dB", "12 dB"]),
    )
        .prop_map(|(shape, family, order, corner, width, ripple)| {
            let band = matches!(&*shape, "band-pass" | "notch");
            let width = if band { format!("width = \"{width}\"\n") } else { String::new() };
            let ripple = if family == "chebyshev" { format!("ripple = \"{ripple}\"\n") } else { String::new() };
            format!("shape = \"{shape}\"\nfamily = \"{family}\"\norder = {order}\ncorner = \"{corner}\"\n{width}{ripple}")
        });
    let plain = (
        words(&["low-pass", "high-pass"]),
        words(OHMS),
        words(FARADS),
    )
        .prop_map(|(shape, r, c)| {
            format!(
                "shape = \"{shape}\"\nfamily = \"rc\"\nresistor = \"{r}\"\ncapacitor = \"{c}\"\n"
            )
        });
    let shelf = (
        words(&["emphasis", "de-emphasis"]),
        words(&["1 ns", "50 µs", "1 s"]),
        words(&["1 fs", "5 µs", "1 ks"]),
    )
        .prop_map(|(shape, first, second)| {
            format!("shape = \"{shape}\"\ntime_constant = \"{first}\"\nsecond_time_constant = \"{second}\"\n")
        });
    prop_oneof![shaped, plain, shelf].boxed()
}

/// One electrical stage of `side`.
fn stage(side: &'static str) -> BoxedStrategy<String> {
    let head = move |kind: &str| format!("[[{side}.stage]]\nkind = \"{kind}\"\n");
    let coupling =
        words(FARADS).prop_map(move |c| format!("{}capacitor = \"{c}\"\n", head("coupling")));
    let trim =
        (words(OHMS), 0.0..=1.0f64, words(&["linear", "audio"])).prop_map(move |(r, w, taper)| {
            format!(
                "{}resistance = \"{r}\"\nwiper = {w}\ntaper = \"{taper}\"\n",
                head("trim")
            )
        });
    let opamp = (
        words(&["non-inverting", "inverting"]),
        words(OHMS_OR_NONE),
        words(&["1 Ω", "1 kΩ", "100 kΩ", "100 MΩ", "inf"]),
        words(&["1 Ω", "47 kΩ", "100 MΩ", "inf"]),
        words(OPAMPS),
        1..4usize,
        words(&["", "gbw = \"inf\"\n", "slew = \"inf\"\n", "gbw = \"1 kHz\"\n", "input_capacitance = 0\n", "output_current = \"1 µA\"\n", "input_linear = \"inf\"\n", "supply = [\"-15 V\", \"15 V\"]\n"]),
    )
        .prop_map(move |(connection, feedback, ground, bias, part, stages, more)| {
            format!(
                "{}connection = \"{connection}\"\nfeedback = \"{feedback}\"\n\
                 ground = \"{ground}\"\nbias_resistance = \"{bias}\"\npart = \"{part}\"\nstages = {stages}\n{more}",
                head("opamp")
            )
        });
    let transistor = (
        words(&["1 pA", "10 µA", "1 mA", "1 A"]),
        words(OHMS),
        words(OHMS_OR_NONE),
        0.0..=1.0f64,
        words(&["1 Ω", "47 kΩ", "100 MΩ", "inf"]),
        bipolar(),
        words(&["", "supply = \"9 V\"\n", "supply = \"1 kV\"\n"]),
    )
        .prop_map(move |(bias, collector, emitter, bypassed, divider, part, supply)| {
            format!(
                "{}bias = \"{bias}\"\ncollector_resistor = \"{collector}\"\nemitter_resistor = \"{emitter}\"\nbypassed = {bypassed}\n\
                 bias_resistance = \"{divider}\"\n{part}{supply}",
                head("transistor")
            )
        });
    let filter = filter().prop_map(move |keys| head("filter") + &keys);
    let power = (
        words(&["-100 dB", "0 dB", "26 dB", "200 dB"]),
        words(&["1 nA", "1 A", "inf"]),
        words(&["0 V", "1 mV", "100 V"]),
        words(&["1 Hz", "3 MHz", "inf"]),
        words(&["1 V/s", "8 V/µs", "inf"]),
        words(&["", "supply = [\"-15 V\", \"15 V\"]\n"]),
    )
        .prop_map(move |(gain, current, gap, gbw, slew, supply)| {
            format!(
                "{}gain = \"{gain}\"\noutput_current = \"{current}\"\ndead_zone = \"{gap}\"\ngbw = \"{gbw}\"\nslew = \"{slew}\"\n\
                 noise_voltage = \"20 nV/√Hz\"\n{supply}",
                head("power")
            )
        });
    prop_oneof![coupling, trim, opamp, transistor, filter, power].boxed()
}

pub fn stages(side: &'static str) -> BoxedStrategy<String> {
    prop::collection::vec(stage(side), 0..4)
        .prop_map(|all| all.concat())
        .boxed()
}
