//! `new` and `parts`: the first steps of someone who has no design yet.

use super::{Folder, tone};

#[test]
fn the_starter_design_renders_as_it_is() {
    let folder = Folder::new();
    folder.sent(48_000, &tone(48_000, 1000.0, 0.5, 4800));
    let made = folder.run(&["new", "balcony"]).expect(0);
    assert!(made.text().contains("balcony.toml"), "{}", made.text());
    let args = [
        "render",
        "balcony.toml",
        "--input",
        "sent.wav",
        "--output",
        "received.wav",
    ];
    let done = folder.run(&args).expect(0);
    assert!(done.text().contains("balcony"));
    assert_eq!(done.err, "", "a starter gives no cause for warnings");
}

#[test]
fn a_new_design_replaces_nothing() {
    let folder = Folder::new();
    folder.refuses(2, &["new", "straight"], &["straight.toml", "exists"]);
    folder.refuses(2, &["new", "nowhere/mine"], &["nowhere/mine.toml"]);
    folder.refuses(2, &["new"], &["NAME"]);
}

#[test]
fn parts_lists_the_catalogue() {
    let folder = Folder::new();
    let all = folder.run(&["parts"]).expect(0);
    for part in ["ir-led-narrow", "pin-7mm2", "jfet-input"] {
        assert!(all.text().contains(part), "{part}");
    }
    let one = folder.run(&["parts", "pin-7mm2"]).expect(0);
    assert!(one.text().contains("responsivity"));
    let json = folder.run(&["parts", "--json"]).expect(0).json();
    let listed = json["parts"].as_array().map_or(0, Vec::len);
    let lines = all.text().lines().filter(|l| l.starts_with("  "));
    assert_eq!(listed, lines.count(), "the same parts in both");
    folder.refuses(
        2,
        &["parts", "pin-7mm"],
        &["pin-7mm", "did you mean `pin-7mm2`?"],
    );
}

#[test]
fn every_key_of_a_section_is_printed() {
    let folder = Folder::new();
    let keys = folder.run(&["parts", "--keys", "path"]).expect(0);
    for key in ["distance", "off_axis", "visibility"] {
        assert!(keys.text().contains(key), "{key}");
    }
    folder.refuses(2, &["parts", "--keys", "paht"], &["paht"]);
}
