//! `-` as a file, and a reader that leaves early.

use std::io::{Read, Write};
use std::process::{Child, Stdio};

use super::{Done, Folder, config, largest_difference, read_wav, tone};

fn start(folder: &Folder, args: &[&str]) -> Child {
    folder
        .command(args)
        .stdin(Stdio::piped())
        .stdout(Stdio::piped())
        .stderr(Stdio::piped())
        .spawn()
        .expect("the program starts")
}

/// Runs with `input` on standard input, a pipe.
fn fed(folder: &Folder, args: &[&str], input: &[u8]) -> Done {
    let mut child = start(folder, args);
    let mut pipe = child.stdin.take().expect("a pipe");
    // A program that refuses its arguments does not read.
    let _ = pipe.write_all(input);
    drop(pipe);
    child.wait_with_output().expect("it ends").into()
}

#[test]
fn a_wav_passes_from_standard_input_to_standard_output() {
    let folder = Folder::new();
    let sent = tone(48_000, 1000.0, 0.25, 4800);
    folder.sent(48_000, &sent);
    let input = folder.bytes("sent.wav");
    folder.render(&[]).expect(0);
    let by_name = folder.bytes("received.wav");
    let args = ["render", "straight.toml", "--input", "-", "--output", "-"];
    let done = fed(&folder, &args, &input).expect(0);
    assert!(done.out == by_name, "the same bytes as with file names");
    assert!(done.err.contains("THD"), "the text is on standard error");
    assert!(!folder.path("-").exists());
}

#[test]
fn figures_can_be_had_beside_a_stream() {
    let folder = Folder::new();
    folder.sent(48_000, &tone(48_000, 1000.0, 0.25, 4800));
    let args = [
        "render",
        "straight.toml",
        "--input",
        "sent.wav",
        "--output",
        "-",
        "--figures",
        "figures.json",
    ];
    let done = folder.run(&args).expect(0);
    folder.write("streamed.wav", &done.out);
    let (_, samples) = read_wav(&folder.path("streamed.wav"));
    assert_eq!(samples.len(), 4800);
    let json: serde_json::Value =
        serde_json::from_slice(&folder.bytes("figures.json")).expect("a document");
    assert_eq!(json["tool"], "harklight");
}

#[test]
fn a_stream_of_unknown_length_is_read_to_its_end() {
    // What a recorder writes into a pipe: lengths of 0xFFFFFFFF.
    let folder = Folder::new();
    let sent = tone(48_000, 1000.0, 0.25, 4800);
    folder.sent(48_000, &sent);
    let mut input = folder.bytes("sent.wav");
    let data = input
        .windows(4)
        .position(|w| w == b"data")
        .expect("a data chunk");
    input[4..8].fill(0xff);
    input[data + 4..data + 8].fill(0xff);
    let args = [
        "render",
        "straight.toml",
        "--input",
        "-",
        "--output",
        "received.wav",
        "--oversample",
        "1",
    ];
    fed(&folder, &args, &input).expect(0);
    let (_, samples) = read_wav(&folder.path("received.wav"));
    assert!(largest_difference(&sent, &samples) < 1e-6);
}

#[test]
fn standard_input_that_is_no_wav_is_refused() {
    let folder = Folder::new();
    let args = [
        "render",
        "straight.toml",
        "--input",
        "-",
        "--output",
        "received.wav",
    ];
    for input in [&b""[..], b"RIFF", b"no audio at all"] {
        let done = fed(&folder, &args, input).expect(2);
        assert!(done.err.contains("standard input"), "{}", done.err);
        assert!(!folder.path("received.wav").exists());
    }
}

#[test]
fn audio_and_json_do_not_share_standard_output() {
    let folder = Folder::new();
    folder.sent(48_000, &[0.0; 10]);
    let args = [
        "render",
        "straight.toml",
        "--input",
        "sent.wav",
        "--output",
        "-",
        "--json",
    ];
    folder.refuses(2, &args, &["--json", "standard output"]);
    let args = [
        "render",
        "straight.toml",
        "--input",
        "sent.wav",
        "--output",
        "-",
        "--stems",
    ];
    folder.refuses(2, &args, &["stems", "standard output"]);
}

#[test]
fn a_reader_that_leaves_early_is_no_failure() {
    let folder = Folder::new();
    // More than a pipe holds, so that the program meets the closed end.
    folder.sent(48_000, &tone(48_000, 1000.0, 0.25, 48_000));
    let stream = [
        "render",
        "straight.toml",
        "--input",
        "sent.wav",
        "--output",
        "-",
    ];
    let measure = ["measure", "straight.toml"];
    let json = ["measure", "straight.toml", "--json"];
    for args in [&stream[..], &measure, &json] {
        let mut child = start(&folder, args);
        let mut out = child.stdout.take().expect("a pipe");
        if args.len() > 4 {
            let mut some = [0; 16];
            out.read_exact(&mut some).expect("the first bytes");
        }
        drop(out);
        let done: Done = child.wait_with_output().expect("it ends").into();
        let done = done.expect(0);
        assert!(
            !done.err.contains("panicked") && !done.err.contains("Broken"),
            "{}",
            done.err
        );
    }
}

#[test]
fn a_closed_standard_error_is_no_failure() {
    let folder = Folder::new();
    let design = config("dome-talkback.toml");
    // Its warning meets the closed end.
    let set = "transmitter.driver.bias=120 mA";
    let mut child = start(&folder, &["measure", &design, "--set", set, "--json"]);
    drop(child.stderr.take());
    let done: Done = child.wait_with_output().expect("it ends").into();
    assert!(matches!(done.code, Some(0 | 1)), "{:?}", done.code);
    assert_eq!(done.json()["tool"], "harklight");
}

#[cfg(target_os = "linux")]
#[test]
fn a_full_disk_is_the_machines_fault() {
    // /dev/full answers every write with "no space left on device".
    let folder = Folder::new();
    let full = std::fs::OpenOptions::new()
        .write(true)
        .open("/dev/full")
        .expect("Linux has it");
    let output = folder
        .command(&["measure", "straight.toml"])
        .stdout(full)
        .output();
    let done: Done = output.expect("the program starts").into();
    let done = done.expect(3);
    assert!(
        done.err.contains("standard output could not be written"),
        "{}",
        done.err
    );
}
