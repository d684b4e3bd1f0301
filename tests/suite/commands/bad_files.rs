//! WAV files and arguments that are wrong: one message, exit code 2, and no file made or changed.

use std::fs;

use hound::{SampleFormat, WavSpec};

use super::{Folder, tone, write_wav};

/// A folder with a good `sent.wav` of 1000 frames, 16 bits.
fn with_sent() -> Folder {
    let folder = Folder::new();
    let spec = WavSpec {
        channels: 1,
        sample_rate: 48_000,
        bits_per_sample: 16,
        sample_format: SampleFormat::Int,
    };
    write_wav(
        &folder.path("sent.wav"),
        spec,
        &tone(48_000, 1000.0, 0.5, 1000),
    );
    folder
}

fn render<'a>(input: &'a str, output: &'a str) -> [&'a str; 6] {
    [
        "render",
        "straight.toml",
        "--input",
        input,
        "--output",
        output,
    ]
}

#[track_caller]
fn refuses_with(folder: &Folder, more: &[&str], words: &[&str]) {
    folder.refuses(
        2,
        &[&render("sent.wav", "received.wav"), more].concat(),
        words,
    );
}

#[test]
fn inputs_that_are_no_wav() {
    let folder = with_sent();
    let whole = folder.bytes("sent.wav");
    folder.write("text.wav", "a text that someone gave the wrong name\n");
    folder.write("empty.wav", "");
    folder.write("header.wav", &whole[..30]);
    folder.write("cut.wav", &whole[..1500]);
    folder.write("odd.wav", &whole[..1501]);
    fs::create_dir(folder.path("folder")).expect("a folder");
    for (input, words) in [
        ("none.wav", &["there is no file none.wav"][..]),
        ("text.wav", &["text.wav is not a WAV file"]),
        ("empty.wav", &["empty.wav is not a WAV file"]),
        ("header.wav", &["header.wav is not a WAV file"]),
        // 44 bytes of header, two bytes a frame.
        (
            "cut.wav",
            &[
                "cut.wav is cut short",
                "promises 1000 frames",
                "byte 1500",
                "728 whole frames",
            ],
        ),
        (
            "odd.wav",
            &["odd.wav is cut short", "byte 1501", "728 whole frames"],
        ),
        ("folder", &["it is a folder"]),
        ("straight.toml", &["straight.toml is not a WAV file"]),
    ] {
        folder.refuses(2, &render(input, "received.wav"), words);
    }
}

#[test]
fn inputs_of_a_kind_that_is_not_taken() {
    let folder = Folder::new();
    for (name, rate, channels, frames, words) in [
        ("silent.wav", 48_000, 1, 0, "zero frames"),
        ("four.wav", 48_000, 4, 10, "4 channels"),
        ("slow.wav", 7_999, 1, 10, "7999 Hz"),
        ("fast.wav", 192_001, 1, 10, "192001 Hz"),
    ] {
        let spec = WavSpec {
            channels,
            sample_rate: rate,
            bits_per_sample: 16,
            sample_format: SampleFormat::Int,
        };
        write_wav(
            &folder.path(name),
            spec,
            &vec![0.0; frames * usize::from(channels)],
        );
        folder.refuses(2, &render(name, "received.wav"), &[name, words]);
    }
}

#[test]
fn a_sample_that_is_no_number() {
    let folder = Folder::new();
    let mut samples = vec![0.0; 10_000];
    samples[9_000] = f64::NAN;
    folder.sent(48_000, &samples);
    let args = [&render("sent.wav", "received.wav")[..], &["--stems"]].concat();
    folder.refuses(2, &args, &["sent.wav", "NaN", "frame 9000", "channel 1"]);
}

#[test]
fn an_output_that_is_an_input() {
    let folder = with_sent();
    let refuses = |input: &str, output: &str, more: &[&str], words: &[&str]| {
        folder.refuses(2, &[&render(input, output), more].concat(), words);
    };
    refuses("sent.wav", "sent.wav", &[], &["sent.wav is the input"]);
    refuses("sent.wav", "./sent.wav", &[], &["./sent.wav is the input"]);
    refuses(
        "sent.wav",
        "straight.toml",
        &[],
        &["straight.toml is the design file"],
    );
    refuses(
        "sent.wav",
        "received.wav",
        &["--figures", "sent.wav"],
        &["--figures sent.wav is the input"],
    );
    refuses(
        "sent.wav",
        "received.wav",
        &["--figures", "straight.toml"],
        &["is the design file"],
    );
    // The input stands where a stem would go.
    fs::copy(folder.path("sent.wav"), folder.path("received.noise.wav")).expect("a copy");
    refuses(
        "received.noise.wav",
        "received.wav",
        &["--stems"],
        &["received.noise.wav is the input"],
    );
}

#[test]
fn an_output_that_is_the_designs_catalogue() {
    let folder = with_sent();
    folder.write("mine.toml", "");
    let text = super::STRAIGHT.replace("format = 1", "format = 1\nparts = \"mine.toml\"");
    folder.write("straight.toml", text);
    let args = render("sent.wav", "mine.toml");
    folder.refuses(2, &args, &["mine.toml is the design's catalogue"]);
}

#[cfg(unix)]
#[test]
fn an_output_that_leads_to_the_input() {
    use std::os::unix::fs::symlink;
    let folder = with_sent();
    symlink("sent.wav", folder.path("soft.wav")).expect("a link");
    fs::hard_link(folder.path("sent.wav"), folder.path("hard.wav")).expect("a link");
    folder.refuses(
        2,
        &render("sent.wav", "soft.wav"),
        &["soft.wav is the input"],
    );
    folder.refuses(
        2,
        &render("soft.wav", "sent.wav"),
        &["sent.wav is the input"],
    );
    folder.refuses(
        2,
        &render("sent.wav", "hard.wav"),
        &["hard.wav is the input"],
    );
    symlink("sent.wav", folder.path("received.clean.wav")).expect("a link");
    let args = [&render("sent.wav", "received.wav")[..], &["--stems"]].concat();
    folder.refuses(2, &args, &["received.clean.wav is the input"]);
    symlink("nowhere.wav", folder.path("loose.wav")).expect("a link");
    folder.refuses(
        2,
        &render("sent.wav", "loose.wav"),
        &["loose.wav", "leads nowhere"],
    );
}

#[test]
fn outputs_that_cannot_be_made() {
    let folder = with_sent();
    fs::create_dir(folder.path("folder")).expect("a folder");
    for (output, words) in [
        (
            "nowhere/received.wav",
            &["nowhere/received.wav", "no folder nowhere"][..],
        ),
        ("folder", &["folder", "it is a folder"]),
        ("sent.wav/received.wav", &["no folder sent.wav"]),
    ] {
        folder.refuses(2, &render("sent.wav", output), words);
    }
    // A stem's place is taken by a folder: found before anything is written.
    fs::create_dir(folder.path("received.distortion.wav")).expect("a folder");
    refuses_with(
        &folder,
        &["--stems"],
        &["received.distortion.wav", "it is a folder"],
    );
}

#[cfg(unix)]
#[test]
fn an_output_that_is_no_regular_file() {
    let folder = with_sent();
    folder.refuses(
        2,
        &render("sent.wav", "/dev/null"),
        &["/dev/null", "no regular file"],
    );
}

#[test]
fn a_figures_file_that_cannot_be_made_is_found_before_the_work() {
    let folder = with_sent();
    fs::create_dir(folder.path("folder")).expect("a folder");
    for (figures, words) in [
        (
            "nowhere/figures.json",
            &["nowhere/figures.json", "no folder nowhere"][..],
        ),
        ("folder", &["folder", "it is a folder"]),
        ("received.wav", &["received.wav", "--output"]),
        ("./received.wav", &["received.wav", "--output"]),
        ("received.noise.wav", &["received.noise.wav", "stem"]),
        ("-", &["--figures", "--json"]),
    ] {
        refuses_with(&folder, &["--stems", "--figures", figures], words);
    }
}

#[test]
fn options_with_values_that_are_not_taken() {
    let folder = with_sent();
    for (option, value, words) in [
        ("--drive", "loud", &["--drive", "loud", "decibels"][..]),
        ("--drive", "1000", &["--drive", "1000", "-200 to 200"]),
        ("--drive", "NaN", &["--drive", "NaN"]),
        ("--drive", "inf", &["--drive", "inf"]),
        ("--drive", "-inf", &["--drive", "-inf"]),
        ("--drive", "3 V", &["--drive", "3 V"]),
        ("--oversample", "3", &["--oversample", "3", "auto"]),
        ("--oversample", "0", &["--oversample", "0", "auto"]),
        ("--oversample", "64", &["--oversample", "64", "auto"]),
        ("--oversample", "two", &["--oversample", "two", "auto"]),
        ("--bits", "12", &["--bits", "12", "16, 24, 32f"]),
        ("--seed", "-1", &["--seed", "-1"]),
        ("--seed", "1.5", &["--seed", "1.5"]),
        ("--colour", "red", &["--colour"]),
    ] {
        refuses_with(&folder, &[option, value], words);
    }
}

#[test]
fn missing_arguments() {
    let folder = with_sent();
    folder.refuses(
        2,
        &["render", "straight.toml", "--input", "sent.wav"],
        &["--output"],
    );
    folder.refuses(
        2,
        &["render", "straight.toml", "--output", "received.wav"],
        &["--input"],
    );
    folder.refuses(2, &["measure"], &["DESIGN"]);
    folder.refuses(2, &["meassure"], &["meassure", "measure"]);
}

#[test]
fn an_existing_output_stays_when_the_run_fails() {
    let folder = with_sent();
    folder.write("received.wav", "what was here before");
    folder.write("text.wav", "no audio");
    folder.refuses(2, &render("text.wav", "received.wav"), &["text.wav"]);
    folder.run(&render("sent.wav", "received.wav")).expect(0);
    assert!(
        folder.bytes("received.wav").starts_with(b"RIFF"),
        "and is replaced when it succeeds"
    );
}
