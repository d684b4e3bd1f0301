//! The JSON document that outside programs rely on, and the terminal's text beside it.

use std::collections::BTreeSet;

use serde_json::Value;

use super::{Folder, config, tone};

/// The figures, all of them always there.
const FIGURES: [&str; 18] = [
    "thd_percent",
    "thd_db",
    "thd_n_percent",
    "sinad_db",
    "snr_db",
    "snr_a_db",
    "signal_rms_v",
    "noise_rms_v",
    "imd_smpte_percent",
    "imd_twin_tone_percent",
    "band_low_hz",
    "band_high_hz",
    "gain_db",
    "hum_db",
    "headroom_db",
    "sti",
    "loudness_lufs",
    "clipped_samples",
];

/// The document's own keys that the contract names.
const DOCUMENT: [&str; 12] = [
    "tool",
    "version",
    "design",
    "seed",
    "figures",
    "below_floor",
    "channels",
    "operating_point",
    "stations",
    "noise_budget",
    "require",
    "warnings",
];

fn keys(value: &Value) -> BTreeSet<&str> {
    let object = value.as_object().expect("an object");
    object.keys().map(String::as_str).collect()
}

fn number(value: &Value) -> f64 {
    value.as_f64().expect("a number")
}

/// `render` of half a second of 1 kHz through the dome's design, and what it printed.
fn dome(more: &[&str]) -> (Folder, super::Done) {
    let folder = Folder::new();
    folder.sent(48_000, &tone(48_000, 1000.0, 0.5, 24_000));
    let design = config("dome-talkback.toml");
    let args = [
        "render",
        &design,
        "--input",
        "sent.wav",
        "--output",
        "received.wav",
    ];
    let done = folder.run(&[&args, more].concat()).expect(0);
    (folder, done)
}

#[test]
fn the_document_holds_every_key_of_the_contract() {
    let (_folder, done) = dome(&["--json"]);
    let json = done.json();
    let found = keys(&json);
    for key in DOCUMENT {
        assert!(found.contains(key), "{key}");
    }
    assert_eq!(keys(&json["figures"]), BTreeSet::from(FIGURES));
    assert_eq!(json["tool"], "harklight");
    assert_eq!(json["version"], env!("CARGO_PKG_VERSION"));
    assert_eq!(
        keys(&json["design"]),
        BTreeSet::from(["title", "file", "sha256"])
    );
    assert_eq!(json["seed"], 1);
    for line in json["noise_budget"].as_array().expect("a list") {
        assert_eq!(keys(line), BTreeSet::from(["name", "rms_v", "share"]));
    }
    assert_eq!(json["require"].as_array().map(Vec::len), Some(6));
    assert_eq!(json["channels"].as_array().map(Vec::len), Some(1));
}

#[test]
fn the_designs_digest_is_that_of_its_bytes() {
    let folder = Folder::new();
    folder.write("empty-note.toml", super::STRAIGHT);
    let json = folder
        .run(&["measure", "empty-note.toml", "--json"])
        .expect(0)
        .json();
    use sha2::{Digest, Sha256};
    let digest = Sha256::digest(super::STRAIGHT);
    let text: String = digest.iter().map(|b| format!("{b:02x}")).collect();
    assert_eq!(json["design"]["sha256"], text.as_str());
    assert_eq!(json["design"]["file"], "empty-note.toml");
}

#[test]
fn figures_agree_with_one_another() {
    let (_folder, done) = dome(&["--json"]);
    let json = done.json();
    let figure = |key: &str| number(&json["figures"][key]);
    let db = |ratio: f64| 20.0 * ratio.log10();
    // By the contract's definitions.
    assert!((figure("thd_db") - db(figure("thd_percent") / 100.0)).abs() < 1e-9);
    assert!((figure("sinad_db") + db(figure("thd_n_percent") / 100.0)).abs() < 1e-9);
    assert!((figure("snr_db") - db(figure("signal_rms_v") / figure("noise_rms_v"))).abs() < 1e-9);
    // −6 dB of 1 V peak at the source, as rms.
    let source = 10f64.powf(-6.0 / 20.0) / 2f64.sqrt();
    assert!((figure("gain_db") - db(figure("signal_rms_v") / source)).abs() < 1e-9);
    let shares = json["noise_budget"].as_array().expect("a list").iter();
    let total: f64 = shares.map(|line| number(&line["share"])).sum();
    assert!((total - 1.0).abs() < 1e-9);
}

#[test]
fn what_does_not_apply_is_null_and_says_why() {
    let folder = Folder::new();
    let json = folder
        .run(&["measure", "straight.toml", "--json"])
        .expect(0)
        .json();
    let figures = json["figures"].as_object().expect("an object");
    assert_eq!(figures.len(), FIGURES.len());
    for key in [
        "hum_db",
        "sti",
        "loudness_lufs",
        "clipped_samples",
        "band_low_hz",
        "band_high_hz",
    ] {
        assert!(figures[key].is_null(), "{key}");
    }
    for (key, value) in figures {
        let reason = json["reasons"].get(key).and_then(Value::as_str);
        assert_eq!(
            value.is_null(),
            reason.is_some(),
            "{key}: {value}, {reason:?}"
        );
    }
    // An ideal link's distortion and noise are below what the methods can see: the floors are given and named.
    let below: BTreeSet<&str> = json["below_floor"]
        .as_array()
        .expect("a list")
        .iter()
        .filter_map(Value::as_str)
        .collect();
    let floored = [
        "thd_percent",
        "thd_db",
        "thd_n_percent",
        "sinad_db",
        "noise_rms_v",
        "snr_db",
        "snr_a_db",
    ];
    assert_eq!(below, BTreeSet::from(floored));
    for key in floored {
        assert!(number(&figures[key]) != 0.0, "{key}");
    }
    assert_eq!(json["channels"], Value::Array(Vec::new()));
}

#[test]
fn stems_give_the_programme_its_figures() {
    let (_folder, done) = dome(&["--json", "--stems"]);
    let json = done.json();
    let channel = &json["channels"][0];
    // A steady tone at the test level but for 0.02 dB: what the programme meters read is SNR and THD once more, in the whole band
    // instead of 80 Hz to 15 kHz, so the noise is a little more; harmonics lie inside both.
    let snr = number(&channel["snr_db"]);
    let measured = number(&json["figures"]["snr_db"]);
    assert!(
        snr < measured + 0.2 && snr > measured - 6.0,
        "{snr} against {measured}"
    );
    let distortion = number(&channel["distortion_percent"]);
    assert!(distortion > 0.0 && distortion < 10.0, "{distortion}");
    let (_folder, without) = dome(&["--json"]);
    let json = without.json();
    for key in ["snr_db", "distortion_db", "distortion_percent"] {
        assert!(json["channels"][0][key].is_null(), "{key} without stems");
    }
}

#[test]
fn the_figures_file_is_what_json_prints() {
    let (folder, done) = dome(&["--json", "--figures", "figures.json"]);
    assert_eq!(folder.bytes("figures.json"), done.out);
    assert_eq!(done.err, "", "no terminal text beside the document");
}

#[test]
fn the_terminal_says_what_the_document_says() {
    let (folder, done) = dome(&["--figures", "figures.json"]);
    let json: Value = serde_json::from_slice(&folder.bytes("figures.json")).expect("a document");
    let text = done.text();
    let thd = number(&json["figures"]["thd_db"]);
    let snr = number(&json["figures"]["snr_db"]);
    for words in [format!("{thd:.1} dB"), format!("{snr:.1} dB")] {
        assert!(text.contains(&words), "{words} is missing in:\n{text}");
    }
    for words in [
        "Dome talkback",
        "THD",
        "SNR",
        "headroom",
        "receiver.detector.shot",
        "received.wav",
    ] {
        assert!(text.contains(words), "{words} is missing in:\n{text}");
    }
    assert_eq!(text.matches(" met ").count(), 6, "each limit has its line");
    assert_eq!(done.err, "");
}

#[test]
fn limits_decide_the_exit_code() {
    let folder = Folder::new();
    folder.sent(48_000, &tone(48_000, 1000.0, 0.5, 480));
    let hurried = config("dome-talkback-hurried.toml");
    let args = [
        "render",
        &hurried,
        "--input",
        "sent.wav",
        "--output",
        "received.wav",
    ];
    let done = folder.run(&args).expect(1);
    assert!(done.text().contains("NOT MET"));
    assert!(folder.path("received.wav").exists(), "it ran all the same");
    let json = folder
        .run(&["measure", &hurried, "--json"])
        .expect(1)
        .json();
    let unmet = json["require"].as_array().expect("a list").iter();
    assert!(unmet.filter(|v| v["met"] == false).count() > 0);
    folder
        .run(&["measure", &config("dome-talkback.toml")])
        .expect(0);
}

#[test]
fn warnings_stand_on_standard_error_and_in_the_document() {
    let folder = Folder::new();
    let design = config("dome-talkback.toml");
    let args = [
        "measure",
        &design,
        "--json",
        "--set",
        "transmitter.driver.bias=120 mA",
    ];
    let done = folder.run(&args);
    let warnings = done.json()["warnings"].as_array().cloned().expect("a list");
    assert!(!warnings.is_empty());
    let lines: Vec<String> = warnings
        .iter()
        .filter_map(|w| w.as_str().map(|w| format!("warning: {w}")))
        .collect();
    assert_eq!(done.err.lines().collect::<Vec<_>>(), lines);
}

#[test]
fn help_and_version_are_no_errors() {
    let folder = Folder::new();
    for args in [
        &["--help"][..],
        &["render", "--help"],
        &["measure", "--help"],
        &["--version"],
    ] {
        let done = folder.run(args).expect(0);
        assert!(!done.out.is_empty() && done.err.is_empty());
    }
}
