//! Design files that are wrong: each ends with one message that names the place, and nothing is written.

use super::{Folder, STRAIGHT, config, errors, plain};

/// Asserts that the straight design with `from` replaced by `to` is refused at `line` of the file, with `words`.
#[track_caller]
fn refused(from: &str, to: &str, words: &[&str]) {
    assert_eq!(STRAIGHT.matches(from).count(), 1, "`{from}` stands once");
    let text = STRAIGHT.replace(from, to);
    let line = STRAIGHT[..STRAIGHT.find(from).unwrap_or_default()]
        .matches('\n')
        .count()
        + 1;
    let folder = Folder::new();
    folder.sent(48_000, &[0.0; 100]);
    folder.write("bad.toml", text);
    let args = [
        "render",
        "bad.toml",
        "--input",
        "sent.wav",
        "--output",
        "received.wav",
        "--stems",
    ];
    let done = folder.refuses(2, &args, words);
    let place = format!("[bad.toml:{line}:");
    assert!(
        done.err.contains(&place),
        "{place} is missing in:\n{}",
        done.err
    );
    // The same for `measure`, from the same reader.
    let measured = folder.refuses(2, &["measure", "bad.toml"], words);
    assert_eq!(measured.err, done.err);
}

#[test]
fn a_wrong_unit() {
    refused(
        "distance = \"1 m\"",
        "distance = \"1 V\"",
        &["path.distance", "1 V", "length"],
    );
}

#[test]
fn an_unknown_unit() {
    refused(
        "load = \"1 MΩ\"",
        "load = \"1 Mohn\"",
        &["receiver.front_end.load", "Mohn"],
    );
}

#[test]
fn an_unknown_key() {
    refused(
        "distance = \"1 m\"",
        "distanc = \"1 m\"",
        &["distanc", "did you mean `distance`?"],
    );
}

#[test]
fn an_unknown_kind() {
    refused(
        "kind = \"air\"",
        "kind = \"aether\"",
        &["aether", "air, fibre, diffuse"],
    );
}

#[test]
fn an_unknown_section() {
    refused("[path]", "[paht]", &["paht", "did you mean `path`?"]);
}

#[test]
fn an_unknown_part() {
    refused(
        "[path]",
        "part = \"ir-led-narow\"\n\n[path]\n",
        &["ir-led-narow", "did you mean `ir-led-narrow`?"],
    );
}

#[test]
fn a_negative_value() {
    refused(
        "distance = \"1 m\"",
        "distance = \"-1 m\"",
        &["path.distance", "more than 0"],
    );
}

#[test]
fn values_that_are_no_finite_numbers() {
    refused(
        "distance = \"1 m\"",
        "distance = nan",
        &["path.distance", "nan"],
    );
    refused(
        "distance = \"1 m\"",
        "distance = \"nan m\"",
        &["path.distance", "nan m"],
    );
    refused(
        "distance = \"1 m\"",
        "distance = \"inf\"",
        &["path.distance", "inf"],
    );
    refused(
        "distance = \"1 m\"",
        "distance = 1e999",
        &["path.distance", "1e999"],
    );
}

#[test]
fn a_wrong_type() {
    refused(
        "distance = \"1 m\"",
        "distance = [1, 2]",
        &["path.distance"],
    );
    refused("kind = \"air\"", "kind = 3", &["path.kind"]);
    refused("distance = \"1 m\"", "distance = true", &["path.distance"]);
}

#[test]
fn text_that_is_no_toml() {
    refused(
        "distance = \"1 m\"",
        "distance = ",
        &["bad.toml is not a TOML file"],
    );
    refused(
        "distance = \"1 m\"",
        "distance = \"1 m",
        &["bad.toml is not a TOML file"],
    );
}

#[test]
fn a_missing_key() {
    // The place is the section that lacks it.
    refused(
        "[path]\nkind = \"air\"\ndistance = \"1 m\"",
        "[path]\nkind = \"air\"",
        &["path has no `distance`"],
    );
}

#[test]
fn a_missing_section() {
    let folder = Folder::new();
    for section in [
        "source",
        "transmitter.driver",
        "transmitter.emitter",
        "path",
        "receiver.detector",
        "receiver.front_end",
        "output",
    ] {
        let start = STRAIGHT.find(&format!("[{section}]")).expect("it is there");
        let end = STRAIGHT[start + 1..]
            .find("\n[")
            .map_or(STRAIGHT.len(), |n| start + 1 + n);
        folder.write("bad.toml", [&STRAIGHT[..start], &STRAIGHT[end..]].concat());
        folder.refuses(
            2,
            &["measure", "bad.toml"],
            &["bad.toml", &format!("[{section}]")],
        );
    }
}

#[test]
fn an_empty_design() {
    let folder = Folder::new();
    folder.write("bad.toml", "");
    folder.refuses(2, &["measure", "bad.toml"], &["bad.toml", "[source]"]);
}

#[test]
fn a_design_that_is_no_readable_file() {
    let folder = Folder::new();
    folder.refuses(2, &["measure", "nothing.toml"], &["nothing.toml"]);
    std::fs::create_dir(folder.path("folder")).expect("a folder");
    folder.refuses(2, &["measure", "folder"], &["folder"]);
    folder.write("bad.toml", b"title = \"\xff\"\n");
    folder.refuses(2, &["measure", "bad.toml"], &["bad.toml", "UTF-8"]);
}

#[test]
fn settings_that_set_nothing() {
    let folder = Folder::new();
    for (set, words) in [
        ("path.distance", &["path.distance", "PATH=VALUE"][..]),
        (
            "path.distnace=3 m",
            &["distnace", "did you mean `distance`?"],
        ),
        ("path.distance=3 V", &["path.distance", "3 V", "length"]),
        ("path.distance=-3 m", &["path.distance", "more than 0"]),
        ("path.distance=", &["path.distance", "empty"]),
        ("=3", &["no path"]),
        ("receiver.stage.1.feedback=3k", &["receiver.stage"]),
    ] {
        folder.refuses(2, &["measure", "straight.toml", "--set", set], words);
    }
    let design = config("dome-talkback.toml");
    for set in [
        "receiver.stage.9.feedback=3k",
        "receiver.stage.pramp.feedback=3k",
    ] {
        folder.refuses(2, &["measure", &design, "--set", set], &["receiver.stage"]);
    }
}

#[test]
fn a_design_of_several_faults_ends_at_the_first() {
    let folder = Folder::new();
    let text = STRAIGHT
        .replace("resistance = \"0 Ω\"\n\n", "resistance = \"0 V\"\n\n")
        .replace("distance = \"1 m\"", "distance = \"1 V\"");
    folder.write("bad.toml", text);
    let done = folder.refuses(2, &["measure", "bad.toml"], &["source.resistance"]);
    assert_eq!(errors(&done.err), 1);
    assert!(!plain(&done.err).contains("path.distance:"));
}
