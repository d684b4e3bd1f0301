//! Filters.

use super::Hold::{Never, Settled};
use super::{BIASED, Case, FIRST, case, coupling, large_input, slow, stage};

fn filter(keys: &str) -> String {
    format!("[[transmitter.stage]]\nkind = \"filter\"\n{keys}")
}

pub fn cases() -> Vec<Case> {
    vec![
        case(
            "low-pass, buffered",
            stage(&filter(
                "shape = \"low-pass\"\nfamily = \"bessel\"\norder = 5\ncorner = \"3.4 kHz\"\n",
            )),
            FIRST,
            0.1,
            (-1.0, 1.0),
            Settled,
        ),
        case(
            "notch, buffered",
            stage(&filter(
                "shape = \"notch\"\nfamily = \"butterworth\"\norder = 2\ncorner = \"150 Hz\"\nwidth = \"90 Hz\"\n",
            )),
            FIRST,
            0.1,
            (-1.0, 1.0),
            Settled,
        ),
        case(
            "high-pass, buffered",
            stage(&filter(
                "shape = \"high-pass\"\nfamily = \"chebyshev\"\norder = 4\nripple = \"1 dB\"\ncorner = \"100 Hz\"\n",
            )),
            FIRST,
            0.1,
            (-1.0, 1.0),
            Never,
        ),
        case(
            "band-pass, buffered",
            stage(&filter(
                "shape = \"band-pass\"\nfamily = \"butterworth\"\norder = 3\ncorner = \"1 kHz\"\nwidth = \"2.4 kHz\"\n",
            )),
            FIRST,
            0.1,
            (-1.0, 1.0),
            Never,
        ),
        case(
            "emphasis",
            stage(&filter(
                "shape = \"emphasis\"\ntime_constant = \"50 µs\"\nsecond_time_constant = \"3 µs\"\n",
            )),
            FIRST,
            0.1,
            (-1.0, 1.0),
            Settled,
        ),
        case(
            "low-pass, rc",
            stage(
                &(filter(
                    "shape = \"low-pass\"\nfamily = \"rc\"\nresistor = \"4k7\"\ncapacitor = \"1 nF\"\n",
                ) + &slow(BIASED)),
            ),
            FIRST,
            0.1,
            (-1.0, 1.0),
            Settled,
        ),
        case(
            "low-pass, rc, before a coupling",
            stage(
                &(filter(
                    "shape = \"low-pass\"\nfamily = \"rc\"\nresistor = \"4k7\"\ncapacitor = \"1 nF\"\n",
                ) + &coupling("1 µF")
                    + &slow(BIASED)),
            ),
            FIRST,
            0.1,
            (-1.0, 1.0),
            Never,
        ),
        case(
            "high-pass, rc",
            stage(
                &(filter(
                    "shape = \"high-pass\"\nfamily = \"rc\"\nresistor = \"4k7\"\ncapacitor = \"100 nF\"\n",
                ) + &large_input(slow(BIASED))),
            ),
            FIRST,
            0.1,
            (-1.0, 1.0),
            Never,
        ),
        case(
            "de-emphasis",
            stage(&filter(
                "shape = \"de-emphasis\"\ntime_constant = \"75 µs\"\nsecond_time_constant = \"5 µs\"\n",
            )),
            FIRST,
            0.1,
            (-1.0, 1.0),
            Settled,
        ),
    ]
}
