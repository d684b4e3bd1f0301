//! Driver with emitter, and the light's way.

use super::Hold::{Never, Settled};
use super::{BIPOLAR, Case, case, coupling, source};
use crate::bench::Draft;

const HEAD: &str = "transmitter.emitter";
const LED: &str = "part = \"ir-led-narrow\"\n";
const COLD_LED: &str = "part = \"ir-led-narrow\"\nthermal_resistance = 0\n";
const RESISTOR: &str = "kind = \"series-resistor\"\nsupply = \"5 V\"\nresistor = \"150 Ω\"\n";
const SINK: &str = "kind = \"current-sink\"\nsupply = \"5 V\"\nbias = \"30 mA\"\nslope = \"25 mA/V\"\nsense = \"33 Ω\"\nsaturation = \"0.4 V\"\n";
/// A measured curve with a threshold and a bend.
const CURVE: &str = "curve = [[\"0 mA\", \"0 mW\"], [\"5 mA\", \"0.4 mW\"], [\"20 mA\", \"3.2 mW\"], [\"40 mA\", \"6.6 mW\"], [\"80 mA\", \"11 mW\"]]\n";

fn sink(servo: &str) -> Draft {
    source().driver(&format!("{SINK}servo = {servo}\n"))
}

/// A transistor modulator of 20 mA behind `ohms`.
fn modulator(emitter_resistor: &str, ohms: &str) -> Draft {
    source()
        .set(format!("source.resistance={ohms}"))
        .driver(&format!(
            "kind = \"transistor\"\nsupply = \"9 V\"\nbias = \"20 mA\"\nemitter_resistor = \"{emitter_resistor}\"\n\
             bias_resistance = \"10 kΩ\"\n{BIPOLAR}"
        ))
        .emitter(COLD_LED)
}

pub fn cases() -> Vec<Case> {
    vec![
        case(
            "LED, series resistor, warming",
            source()
                .set("source.resistance=20 Ω")
                .driver(RESISTOR)
                .emitter(LED),
            HEAD,
            5e-3,
            (-2.0, 2.0),
            Never,
        ),
        case(
            "LED, series resistor",
            source()
                .set("source.resistance=20 Ω")
                .driver(RESISTOR)
                .emitter(COLD_LED),
            HEAD,
            5e-3,
            (-6.0, 6.0),
            Settled,
        ),
        case(
            "LED, current sink, warming",
            source().driver(SINK).emitter(LED),
            HEAD,
            5e-3,
            (-1.0, 1.0),
            Never,
        ),
        case(
            "LED, current sink",
            source().driver(SINK).emitter(COLD_LED),
            HEAD,
            5e-3,
            (-3.0, 8.0),
            Settled,
        ),
        case(
            "two LEDs, loaded source",
            source()
                .driver(&format!("{SINK}input_resistance = \"47 kΩ\"\n"))
                .emitter(&format!("{COLD_LED}count = 2\n")),
            HEAD,
            5e-3,
            (-3.0, 3.0),
            Settled,
        ),
        case(
            "air, Lambertian",
            source()
                .emitter(LED)
                .set("path.distance=3 m")
                .set("path.visibility=2 km"),
            "path",
            1e-3,
            (-1e-2, 1e-2),
            Settled,
        ),
        case(
            "air, beam",
            source()
                .emitter(LED)
                .set("path.distance=30 m")
                .emitter(&LED.replace("part", "divergence = \"1°\"\npart")),
            "path",
            1e-3,
            (-1e-2, 1e-2),
            Settled,
        ),
        case(
            "LED of a measured curve, current sink",
            source().driver(SINK).emitter(&format!("{COLD_LED}{CURVE}")),
            HEAD,
            5e-3,
            (-3.0, 8.0),
            Settled,
        ),
        case(
            "LED, transistor",
            modulator("33 Ω", "600 Ω").emitter(COLD_LED),
            HEAD,
            1e-3,
            (-3.0, 3.0),
            Settled,
        ),
        case(
            "LED, transistor without feedback behind a capacitor",
            modulator("0 Ω", "10 kΩ").transmitter(&coupling("1 µF")),
            HEAD,
            1e-5,
            (-1.0, 1.0),
            Settled,
        ),
        case(
            "LED, transistor, warming",
            modulator("33 Ω", "600 Ω").emitter(LED),
            HEAD,
            1e-3,
            (-3.0, 3.0),
            Never,
        ),
        case(
            "LED, current sink with servo",
            sink("{ bandwidth = \"100 kHz\", gain = 20 }").emitter(COLD_LED),
            HEAD,
            5e-3,
            (-3.0, 8.0),
            Settled,
        ),
        case(
            "LED, current sink with a slow servo, warming",
            sink("{ bandwidth = \"300 Hz\", gain = 50 }").emitter(LED),
            HEAD,
            5e-3,
            (-1.0, 1.0),
            Never,
        ),
        case(
            "LED, current sink with a fast servo",
            sink("{ bandwidth = \"1 MHz\", gain = 10000 }").emitter(COLD_LED),
            HEAD,
            5e-3,
            (-3.0, 8.0),
            Settled,
        ),
        case(
            "LED, series resistor with servo",
            source()
                .set("source.resistance=20 Ω")
                .driver(&format!(
                    "{RESISTOR}servo = {{ bandwidth = \"50 kHz\", gain = 15 }}\n"
                ))
                .emitter(COLD_LED),
            HEAD,
            5e-3,
            (-6.0, 6.0),
            Settled,
        ),
        case(
            "air that sways and flickers, without its fades",
            source()
                .emitter(&LED.replace("part", "divergence = \"1°\"\npart"))
                .set("path.distance=300 m")
                .set("path.turbulence=1e-14 m^-2/3")
                .set("path.wind=3 m/s")
                .set("path.sway=0.1°")
                .set("path.sway_bandwidth=2 Hz"),
            "path",
            1e-3,
            (-1e-2, 1e-2),
            Settled,
        ),
        case(
            "fibre",
            source().emitter(LED).path(
                "kind = \"fibre\"\nlength = \"35 m\"\nattenuation = \"0.18 dB/m\"\ncore = \"1 mm\"\naperture = 0.5\n\
                 connectors = 2\nconnector_loss = \"1.5 dB\"\n",
            ),
            "path",
            1e-3,
            (-1e-2, 1e-2),
            Settled,
        ),
        case(
            "diffuse room",
            source().emitter(LED).path(
                "kind = \"diffuse\"\nsurface = \"220 m²\"\nreflectance = 0.6\nvolume = \"180 m³\"\n",
            ),
            "path",
            1e-3,
            (-1e-2, 1e-2),
            Settled,
        ),
        case(
            "diffuse hall of mirrors",
            source().emitter(LED).path(
                "kind = \"diffuse\"\nsurface = \"4000 m²\"\nreflectance = 0.99\nvolume = \"12000 m³\"\n",
            ),
            "path",
            1e-3,
            (-1e-2, 1e-2),
            Settled,
        ),
    ]
}
