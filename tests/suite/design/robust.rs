//! Damaged designs: an error or a design, never a panic, and a design always answers what the checks promise.

use std::path::Path;

use harklight::design::keys::{Absent, What};
use harklight::design::{Design, DesignError};
use proptest::prelude::*;

use super::{LINK, read};

fn answers(read: &Result<Design, DesignError>) {
    match read {
        Ok(design) => {
            for (section, _) in design.sections() {
                for key in section
                    .keys()
                    .iter()
                    .filter(|key| section.given(key.name) || key.absent != Absent::Required)
                {
                    match (key.what, key.absent) {
                        (
                            What::Number(..),
                            Absent::Required | Absent::Value(_) | Absent::Infinite,
                        ) => {
                            assert!(!section.number(key.name).is_nan());
                        }
                        (What::Word(_), Absent::Required | Absent::Word(_)) => {
                            assert!(!section.word(key.name).is_empty())
                        }
                        _ => _ = section.optional(key.name),
                    }
                }
            }
        }
        Err(error) => {
            let mut shown = String::new();
            miette::GraphicalReportHandler::new()
                .render_report(&mut shown, error)
                .unwrap();
            assert!(!error.to_string().is_empty());
        }
    }
}

const WORDS: [&str; 22] = [
    "",
    "inf",
    "nan",
    "-1",
    "\"\"",
    "\"é\"",
    "[]",
    "[[1]]",
    "{}",
    "{ a = 1 }",
    "true",
    "1979-05-27",
    "\"4k7\"",
    "\"472\"",
    "0x10",
    "1e999",
    "\"5 %\"",
    "\"inf\"",
    "[\"1 V\", \"2 V\"]",
    "\"coupling\"",
    "\"load\"",
    "\"jfet-input\"",
];

proptest! {
    #![proptest_config(ProptestConfig::with_cases(2000))]

    #[test]
    fn a_line_lost_or_a_value_replaced_never_panics(line in 0..110usize, other in 0..110usize, word in 0..WORDS.len(), lose in any::<bool>()) {
        let mut lines: Vec<String> = LINK.lines().map(str::to_string).collect();
        let count = lines.len();
        let line = line % count;
        if lose {
            lines.remove(line);
        }
        let other = other % lines.len();
        if let Some((key, _)) = lines[other].clone().split_once('=') {
            lines[other] = format!("{key}= {}", WORDS[word]);
        }
        answers(&read(&lines.join("\n"), &[]));
    }

    #[test]
    fn characters_cut_or_inserted_never_panic(at in 0..2000usize, length in 0..12usize, insert in "[\\[\\]{}=\".a-z0-9 °µ]{0,4}") {
        let mut characters: Vec<char> = LINK.chars().collect();
        let at = at % characters.len();
        let end = (at + length).min(characters.len());
        characters.splice(at..end, insert.chars());
        answers(&read(&characters.into_iter().collect::<String>(), &[]));
    }

    #[test]
    fn any_set_is_an_edit_or_an_error(path in "[a-z_.0-9]{0,24}", value in ".{0,12}") {
        answers(&read(LINK, &[&format!("{path}={value}")]));
    }

    #[test]
    fn a_known_path_takes_any_value_or_refuses_it(index in 0..9usize, value in ".{0,12}") {
        let paths = [
            "path.windows", "receiver.front_end.supply", "transmitter.emitter.curve", "measure.band", "title", "require.thd",
            "tolerance.path.distance", "receiver.optics.filter", "receiver.stage.2.connection",
        ];
        answers(&read(LINK, &[&format!("{}={value}", paths[index])]));
    }
}

#[test]
fn line_ends_and_marks_of_other_systems_are_read() {
    let text = LINK.replace('\n', "\r\n");
    assert!(Design::from_text("link.toml", &text, Path::new("."), &[]).is_ok());
    assert!(
        Design::from_text("link.toml", &format!("\u{feff}{LINK}"), Path::new("."), &[]).is_ok()
    );
    assert!(Design::from_text("empty.toml", "", Path::new("."), &[]).is_err());
}
