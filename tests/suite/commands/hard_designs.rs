//! Designs that ask too much: each is rendered or refused with the numbers, and nothing is passed over in silence.

use serde_json::Value;

use super::{Folder, config, read_wav, tone};

/// Frames that are sent: an eighth of a second.
const FRAMES: usize = 6000;

/// A rendered run: its document and the received samples.
struct Received {
    document: Value,
    samples: Vec<f64>,
}

impl Received {
    /// Asserts that one warning holds every one of `words`.
    #[track_caller]
    fn warns(self, words: &[&str]) -> Self {
        let warnings = self.document["warnings"].as_array().expect("warnings");
        let said = warnings.iter().filter_map(Value::as_str);
        assert!(
            said.clone().any(|w| words.iter().all(|x| w.contains(x))),
            "{words:?} in none of {:?}",
            said.collect::<Vec<_>>()
        );
        self
    }

    fn warnings(&self) -> usize {
        self.document["warnings"].as_array().map_or(0, Vec::len)
    }

    fn peak(&self) -> f64 {
        self.samples.iter().fold(0.0f64, |m, x| m.max(x.abs()))
    }

    fn figure(&self, key: &str) -> Option<f64> {
        self.document["figures"][key].as_f64()
    }
}

/// Renders a tone of −6 dBFS through `design` with `extra` sections and settings, and asserts what holds for every run: a code that
/// says whether the limits are met, the sent length, finite samples, a number or a reason for every figure, a word where nothing arrives.
#[track_caller]
fn received(design: &str, extra: &str, sets: &[&str]) -> Received {
    let folder = Folder::new();
    folder.sent(48_000, &tone(48_000, 1000.0, 0.5, FRAMES));
    let text = std::fs::read_to_string(config(design)).expect("a design of configs/");
    folder.write("hard.toml", text + extra);
    let mut args = vec!["render", "hard.toml", "--json"];
    args.extend(["--input", "sent.wav", "--output", "received.wav"]);
    args.extend(sets.iter().flat_map(|s| ["--set", s]));
    let done = folder.run(&args);
    assert!(
        matches!(done.code, Some(0 | 1)),
        "{:?}: {}",
        done.code,
        done.err
    );
    assert!(!done.err.contains("panicked"), "{}", done.err);
    let document = done.json();
    let figures = document["figures"].as_object().expect("figures");
    for (key, value) in figures {
        let reasoned = document["reasons"].get(key).is_some() || key == "clipped_samples";
        assert!(value.is_number() || reasoned, "{key} is {value}");
    }
    assert!(
        !done.text().contains("NaN") && !done.err.contains("NaN"),
        "{}",
        done.err
    );
    let (_, samples) = read_wav(&folder.path("received.wav"));
    assert_eq!(samples.len(), FRAMES);
    assert!(samples.iter().all(|x| x.is_finite()));
    let received = Received { document, samples };
    let nothing = received.figure("gain_db").is_none() || received.peak() == 0.0;
    assert!(
        !nothing || received.warnings() > 0,
        "nothing arrives and nothing is said"
    );
    received
}

#[test]
fn total_darkness() {
    // A receiver that looks away: not a photon, and the figures say why they are missing.
    let dark = received("dome-talkback.toml", "", &["path.tilt=60°"])
        .warns(&["60°", "20°", "no light arrives"])
        .warns(&["the output holds noise alone"]);
    assert!(dark.figure("snr_db").is_none() && dark.peak() > 0.0);
    // Fog and distance: a number for a signal far below the noise.
    for way in ["path.visibility=1 m", "path.distance=100 km"] {
        let dark = received("dome-talkback.toml", "", &[way]);
        assert!(dark.figure("snr_db").expect(way) < 0.0);
        assert!(dark.figure("gain_db").expect(way) < -100.0);
        assert!(
            dark.peak() > 0.0,
            "{way}: the receiver's own noise is heard"
        );
    }
    // No light even of the lamps, on the detector that has no bias of its own.
    let dark = received(
        "field-photocell.toml",
        "",
        &[
            "path.distance=1000 km",
            "ambient.1.irradiance=0",
            "ambient.2.irradiance=0",
        ],
    );
    assert!(dark.figure("gain_db").is_none_or(|gain| gain < -100.0));
}

#[test]
fn the_sun_in_the_field_of_view() {
    // Direct sunlight at the ground is about 1 kW/m² (common practice).
    let sun = ["ambient.1.kind=daylight", "ambient.1.sun=in"];
    let bright = ["ambient.1.irradiance=1000 W/m²"];
    let sets = [&sun[..], &bright].concat();
    // Some 58 mA through 470 kΩ.
    received("starter.toml", "", &sets).warns(&["receiver.front_end", "7.5 V", "27.11 kV"]);
    let sun = "\n[[ambient]]\nkind = \"daylight\"\nsun = \"in\"\nirradiance = \"1000 W/m²\"\n";
    received("shielded-room-intercom.toml", sun, &[]).warns(&["receiver.front_end", "saturated"]);
    received("weld-cell-fibre.toml", sun, &[]).warns(&["ambient.1", "closed connector"]);
    received("field-photocell.toml", sun, &[]).warns(&["the cell compresses", "ambient"]);
    received("reading-room-assist.toml", sun, &[]).warns(&["ambient servo", "limit"]);
}

#[test]
fn a_load_of_100_megohms() {
    let load = ["receiver.front_end.load=100 MΩ"];
    received("weld-cell-fibre.toml", "", &load).warns(&["uses up the reverse bias", "122.3 µA"]);
    // 9 V, less the few tens of millivolts of saturation, over 100 MΩ.
    received("shielded-room-intercom.toml", "", &load).warns(&["saturated", "lets 89.7"]);
    received("field-photocell.toml", "", &load).warns(&["the cell compresses", "21.59 µA"]);
    // So little light that it carries it, before an input as high: some 50 MΩ and tens of picofarads are a low-pass of tens of hertz.
    let faint = received(
        "weld-cell-fibre.toml",
        "",
        &[
            load[0],
            "path.length=300 m",
            "receiver.detector.count=8",
            "receiver.stage.gain.bias_resistance=100 MΩ",
        ],
    );
    assert_eq!(faint.warnings(), 0);
    let edge = faint.figure("band_high_hz").expect("a band edge");
    assert!((20.0..200.0).contains(&edge), "{edge} Hz");
}

#[test]
fn a_supply_of_one_volt() {
    // A part that keeps 1.5 V from each rail cannot live on it: refused, with the place.
    let folder = Folder::new();
    folder.sent(48_000, &tone(48_000, 1000.0, 0.5, FRAMES));
    let starter = config("starter.toml");
    for (side, stage) in [
        ("transmitter.driver", "transmitter.stage.buffer"),
        ("receiver.front_end", "receiver.stage.gain"),
    ] {
        let set = format!("{side}.supply=1 V");
        let mut args = vec!["render", &starter, "--set", &set];
        args.extend(["--input", "sent.wav", "--output", "received.wav"]);
        folder.refuses(2, &args, &[stage, "3 V", "1 V"]);
    }
    let both = [
        "transmitter.driver.supply=1 V",
        "receiver.front_end.supply=1 V",
    ];
    received("shielded-room-intercom.toml", "", &both)
        .warns(&["transmitter.driver", "instead of 18 mA"])
        .warns(&["receiver.front_end", "starved"]);
    received("field-photocell.toml", "", &both).warns(&[
        "receiver.stage.first",
        "500 µA",
        "no small signal passes",
    ]);
}

#[test]
fn a_gain_of_a_million_with_an_offset() {
    // 1 mV of offset and 300 nA in 47 kΩ become kilovolts.
    let gain = [
        "receiver.stage.gain.feedback=1 GΩ",
        "receiver.stage.gain.ground=1 kΩ",
        "receiver.stage.gain.offset=1 mV",
    ];
    received("starter.toml", "", &gain).warns(&["receiver.stage.gain", "1.5 V", "-12.8 kV"]);
    // Without bias current and offset it is a very noisy amplifier of a few hertz: 10 MHz of gain-bandwidth product leave 10 Hz.
    let level = [
        gain[0],
        gain[1],
        "receiver.stage.gain.offset=0",
        "receiver.stage.gain.bias_current=0",
    ];
    let noisy = received("starter.toml", "", &level);
    assert_eq!(noisy.warnings(), 0);
    assert!(noisy.figure("thd_percent").is_some() && noisy.peak() > 0.1);
}

#[test]
fn turbulence_beyond_the_range_of_the_models() {
    let strong = "path.turbulence=1e-10 m^-2/3";
    received("jetty-voice-link.toml", "", &[strong]).warns(&["Rytov variance of 173", "beyond 25"]);
    let absurd = [
        "path.turbulence=1e-3 m^-2/3",
        "path.distance=100 km",
        "path.wind=1e6 m/s",
        "path.sway=80°",
    ];
    received("jetty-voice-link.toml", "", &absurd).warns(&["Rytov variance", "beyond 25"]);
}

#[test]
fn an_interruption_from_the_start_that_outlasts_the_file() {
    let cut = |edge: &str| {
        format!("\n[[path.interruption]]\nat = 0\nlasts = \"3600 s\"\nedge = {edge}\n")
    };
    for design in [
        "dome-talkback.toml",
        "shielded-room-intercom.toml",
        "weld-cell-fibre.toml",
        "reading-room-assist.toml",
        "starter.toml",
    ] {
        // Without an edge the second half holds the fall's end and noise; the uncut link has the tone there.
        let half = |r: &Received| -> f64 {
            let turn = std::f64::consts::TAU * 1000.0 / 48_000.0;
            let (mut re, mut im) = (0.0, 0.0);
            for (n, x) in r.samples.iter().enumerate().skip(FRAMES / 2) {
                re += x * (turn * n as f64).cos();
                im += x * (turn * n as f64).sin();
            }
            re.hypot(im)
        };
        let (dark, whole) = (received(design, &cut("0"), &[]), received(design, "", &[]));
        assert_eq!(dark.document["channels"][0]["interruptions"], 1, "{design}");
        assert!(
            half(&dark) < 0.05 * half(&whole),
            "{design}: {} of {}",
            half(&dark),
            half(&whole)
        );
    }
    // An edge longer than the file: the light only begins to go.
    let dusk = received("dome-talkback.toml", &cut("\"10 s\""), &[]);
    assert_eq!(dusk.document["channels"][0]["interruptions"], 1);
}
