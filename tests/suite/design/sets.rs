//! Dotted paths: `--set` and looking values up.

use super::{LINK, link, read};

#[test]
fn sets_edit_any_value_before_the_checks() {
    let design = link(&[
        "path.distance=12 m",
        "transmitter.stage.drive.feedback=100k",
        "receiver.stage.2.ground = 2k2",
        "receiver.optics.filter.width=40 nm",
        "measure.tone=400 Hz",
        "measure.band=[50 Hz, 15 kHz]",
        "seed=18446744073709551615",
        "temperature=20 °C",
        "title=Second try",
        "require.snr=>= 50 dB",
        "tolerance.receiver.front_end.feedback=5 %",
        "silence=[\"receiver.front_end.feedback\", 'source.resistance']",
        "receiver.front_end.supply=[-12, 12]",
        "transmitter.emitter.divergence=4°",
        "receiver.detector.quantum_efficiency=0.8",
        "path.windows=[]",
    ]);
    assert_eq!(design.path.number("distance"), 12.0);
    assert_eq!(design.transmitter_stages[1].number("feedback"), 100e3);
    assert_eq!(design.receiver_stages[1].number("ground"), 2200.0);
    assert_eq!(
        design.optics.table("filter").unwrap().number("width"),
        40e-9
    );
    assert_eq!(design.measure.number("tone"), 400.0);
    assert_eq!(design.measure.numbers("band"), [50.0, 15e3]);
    assert_eq!(design.seed, Some(u64::MAX));
    assert_eq!(
        (design.temperature, design.title.as_str()),
        (293.15, "Second try")
    );
    assert_eq!(
        design
            .require
            .iter()
            .find(|limit| limit.key == "snr")
            .unwrap()
            .value,
        50.0
    );
    assert_eq!(
        design.tolerance.last().unwrap().0,
        "receiver.front_end.feedback"
    );
    assert_eq!(
        design.silence,
        ["receiver.front_end.feedback", "source.resistance"]
    );
    assert_eq!(design.front_end.numbers("supply"), [-12.0, 12.0]);
    assert!(
        !design.emitter.given("half_angle"),
        "the part's other way of saying it gives way"
    );
    assert!(!design.detector.given("responsivity"));
    assert!(design.path.numbers("windows").is_empty());
}

#[test]
fn a_wrong_set_points_at_itself() {
    for (set, underlined, message, help) in [
        (
            "path.distance",
            "path.distance",
            "sets nothing",
            "PATH=VALUE",
        ),
        (
            "path.distanse=3 m",
            "path.distanse",
            "names nothing",
            "did you mean `distance`?",
        ),
        (
            "paht.distance=3 m",
            "paht.distance",
            "names nothing",
            "path",
        ),
        ("path.distance=3 V", "3 V", "found a voltage", "6 m"),
        ("path.distance=-3", "-3", "out of range", "distance"),
        ("path.distance.x=3", "path.distance.x", "no keys inside", ""),
        (
            "receiver.stage.3.feedback=1k",
            "receiver.stage.3.feedback",
            "no receiver.stage.3",
            "receiver.stage.2",
        ),
        (
            "receiver.stage.0.feedback=1k",
            "receiver.stage.0.feedback",
            "no receiver.stage.0",
            "receiver.stage.1",
        ),
        (
            "transmitter.stage.drve.feedback=1k",
            "transmitter.stage.drve.feedback",
            "named `drve`",
            "did you mean `drive`?",
        ),
        (
            "receiver.stage.feedback=1k",
            "receiver.stage.feedback",
            "is a section",
            "",
        ),
        (
            "receiver.front_end=load",
            "receiver.front_end",
            "is a section",
            "feedback",
        ),
        (
            "receiver.front_end.kind=loud",
            "loud",
            "no kind `loud`",
            "load",
        ),
        ("measure.band=[20 Hz", "[20 Hz", "not closed", "list"),
        (
            "source.resistance=\"472\"",
            "\"472\"",
            "could be read as",
            "4.7 kΩ",
        ),
        ("require.thd=1 %", "1 %", "does not begin with", "<="),
        ("seed=-1", "-1", "not a whole number", ""),
    ] {
        let error = read(LINK, &[set])
            .err()
            .unwrap_or_else(|| panic!("{set} was accepted"));
        assert!(error.to_string().contains(message), "{set}: {error:?}");
        assert!(error.help_text().contains(help), "{set}: {error:?}");
        assert_eq!(error.underlined(), Some(underlined), "{set}: {error:?}");
        assert_eq!(error.place().unwrap().source.name, "--set");
    }
}

#[test]
fn a_path_finds_any_value() {
    let design = link(&[]);
    for (path, value) in [
        ("path.distance", Some(4.0)),
        ("receiver.stage.2.feedback", Some(47e3)),
        ("transmitter.stage.drive.feedback", Some(10e3)),
        ("transmitter.stage.2.feedback", Some(10e3)),
        ("receiver.optics.filter.width", Some(60e-9)),
        ("receiver.detector.area", Some(7e-6)),
        ("output.impedance", Some(f64::INFINITY)),
        ("path.visibility", None),
        ("temperature", Some(300.0)),
        ("measure.level", Some(-6.0)),
        ("ambient.1.ripple", Some(0.12)),
    ] {
        assert_eq!(design.value_at(path).unwrap().number(), value, "{path}");
    }
    let error = design.value_at("receiver.stage.2.fedback").err().unwrap();
    assert!(error.help_text().contains("did you mean `feedback`?"));
}
