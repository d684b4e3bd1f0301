//! The printed reference of the design file, straight from the key table.

use serde_json::{Value as Json, json};

use super::parts::{document, number};
use crate::design::keys::{Absent, Choice, Key, Kind, SECTIONS, Spec, What};
use crate::design::{DesignError, REQUIREMENTS};
use crate::quantity::format;

/// The reference of all sections, or of those whose path begins with `section` ("top" is the top level).
///
/// # Errors
/// A section that is not there.
pub(super) fn print(section: &str, as_json: bool) -> Result<String, DesignError> {
    let wanted = |path: &str| {
        section.is_empty()
            || path == section
            || path
                .strip_prefix(section)
                .is_some_and(|rest| rest.starts_with('.'))
    };
    let specs: Vec<&Spec> = SECTIONS
        .into_iter()
        .filter(|spec| wanted(name(spec)))
        .collect();
    let limits = wanted("require");
    if specs.is_empty() && !limits {
        let known: Vec<&str> = SECTIONS
            .iter()
            .map(|spec| name(spec))
            .chain(["require"])
            .collect();
        let help = std::format!("the sections are {}", known.join(", "));
        return Err(DesignError::new(
            None,
            std::format!("the design file has no section `{section}`"),
            help,
        ));
    }
    if as_json {
        let sections: Vec<Json> = specs.iter().map(|spec| section_json(spec)).collect();
        let require: Vec<Json> = REQUIREMENTS
            .iter()
            .filter(|_| limits)
            .map(|limit| json!({ "name": limit.name, "example": limit.example, "meaning": limit.meaning }))
            .collect();
        return Ok(document(
            json!({ "sections": sections, "require": require }),
        ));
    }
    let mut text: String = specs.iter().map(|spec| section_text(spec)).collect();
    if limits {
        text.push_str("[require]  Limits on figures\n");
        for limit in REQUIREMENTS {
            text.push_str(&std::format!(
                "  {:15}  {:13}  {}\n",
                limit.name,
                limit.example,
                limit.meaning
            ));
        }
    }
    Ok(text)
}

fn name(spec: &Spec) -> &'static str {
    if spec.path.is_empty() {
        "top"
    } else {
        spec.path
    }
}

fn section_text(spec: &Spec) -> String {
    let header = match (spec.path, spec.many) {
        ("", _) => "Top level".to_string(),
        (path, true) => std::format!("[[{path}]]"),
        (path, false) => std::format!("[{path}]"),
    };
    let presence = match (spec.required, spec.many) {
        (true, _) => "",
        (false, true) => ", any number",
        (false, false) => ", optional",
    };
    let mut text = std::format!("{header}  {}{presence}\n", spec.meaning);
    keys_text(&mut text, spec.common.iter(), &[]);
    for kind in spec.kinds {
        if spec.has_kinds() {
            text.push_str(&std::format!(
                "  kind = \"{}\"  {}\n",
                kind.name,
                kind.meaning
            ));
        }
        keys_text(&mut text, kind.keys.iter(), kind.choices);
        if let Some(class) = kind.class {
            text.push_str(&std::format!(
                "    filled by a part of class {}, or given here:\n",
                class.name
            ));
            keys_text(&mut text, class.keys.iter(), kind.choices);
        }
        for choice in kind.choices {
            text.push_str(&std::format!("    {}\n", choice_words(choice)));
        }
    }
    text.push('\n');
    text
}

fn choice_words(choice: &Choice) -> String {
    let ways: Vec<String> = choice.ways.iter().map(|way| way.join(" + ")).collect();
    std::format!(
        "{} of: {}",
        if choice.needed { "one" } else { "at most one" },
        ways.join(" | ")
    )
}

fn keys_text(text: &mut String, keys: impl Iterator<Item = &'static Key>, choices: &[Choice]) {
    for key in keys {
        text.push_str(&std::format!(
            "    {:22}  {}; {}. {}\n",
            key.name,
            takes(key),
            absent(key, choices),
            key.meaning
        ));
        if let What::Table(inner) = key.what {
            for key in inner {
                text.push_str(&std::format!(
                    "      .{:19}  {}; {}. {}\n",
                    key.name,
                    takes(key),
                    absent(key, &[]),
                    key.meaning
                ));
            }
        }
    }
}

/// What a key takes, in words.
fn takes(key: &Key) -> String {
    match key.what {
        What::Number(dimension, range) => std::format!("{dimension}, {}", range.words(dimension)),
        What::Numbers {
            dimension, range, ..
        } => std::format!("list: {dimension}, {}", range.words(dimension)),
        What::Supply => "a voltage (V), or two rails".into(),
        What::Pairs(columns) => std::format!("pairs: {}, {}", columns[0].0, columns[1].0),
        What::Word(words) => words.join(" | "),
        What::Text => "text".into(),
        What::Table(_) => "table".into(),
    }
}

/// What holds when it is absent, in words.
fn absent(key: &Key, choices: &[Choice]) -> String {
    let chosen = choices
        .iter()
        .flat_map(|choice| choice.ways)
        .any(|way| way.contains(&key.name));
    match (key.absent, key.dimension()) {
        (Absent::Required, _) if chosen => "one of several".into(),
        (Absent::Required, _) => "required".into(),
        (Absent::Nothing, _) => "optional".into(),
        (Absent::Infinite, _) => "default inf".into(),
        (Absent::Word(word), _) => std::format!("default {word}"),
        (Absent::Value(value), Some(dimension)) => {
            std::format!("default {}", format(value, dimension))
        }
        (Absent::Value(value), None) => std::format!("default {value}"),
        (Absent::Values([]), _) => "default none".into(),
        (Absent::Values(values), dimension) => {
            let shown: Vec<String> = values
                .iter()
                .map(|value| dimension.map_or(value.to_string(), |d| format(*value, d)))
                .collect();
            std::format!("default {}", shown.join(", "))
        }
    }
}

fn section_json(spec: &Spec) -> Json {
    let kinds: Vec<Json> = spec
        .kinds
        .iter()
        .map(|kind| kind_json(spec, kind))
        .collect();
    json!({ "path": spec.path, "many": spec.many, "required": spec.required, "meaning": spec.meaning, "kinds": kinds })
}

fn kind_json(spec: &Spec, kind: &'static Kind) -> Json {
    let keys: Vec<Json> = spec
        .keys_of(kind)
        .map(|key| key_json(key, kind.choices))
        .collect();
    let choices: Vec<String> = kind.choices.iter().map(choice_words).collect();
    json!({
        "name": kind.name, "meaning": kind.meaning, "part_class": kind.class.map(|class| class.name), "choices": choices, "keys": keys,
    })
}

fn key_json(key: &Key, choices: &[Choice]) -> Json {
    let mut row = json!({
        "name": key.name, "takes": takes(key), "unit": key.dimension().map(|dimension| dimension.unit()),
        "absent": absent(key, choices), "example": key.example, "meaning": key.meaning,
    });
    if let Absent::Value(value) = key.absent {
        row["default_si"] = number(value);
    }
    if let What::Table(inner) = key.what {
        row["keys"] = inner.iter().map(|key| key_json(key, &[])).collect();
    }
    row
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn the_reference_names_every_section_kind_and_key() {
        let text = print("", false).unwrap();
        for spec in SECTIONS {
            assert!(text.contains(spec.meaning));
            for kind in spec.kinds {
                assert!(
                    kind.name.is_empty()
                        || text.contains(&std::format!("kind = \"{}\"", kind.name))
                );
            }
            for key in spec.all_keys() {
                assert!(
                    text.contains(&std::format!("    {} ", key.name)),
                    "{}",
                    key.name
                );
            }
        }
        assert!(text.contains("imd_twin_tone"));
    }

    #[test]
    fn a_section_may_be_picked_out() {
        let text = print("receiver", false).unwrap();
        assert!(
            text.contains("[receiver.front_end]")
                && text.contains("[[receiver.stage]]")
                && !text.contains("[source]")
        );
        assert!(
            print("reciever", false)
                .unwrap_err()
                .help_text()
                .contains("receiver.stage")
        );
        let parsed: Json = serde_json::from_str(&print("path", true).unwrap()).unwrap();
        assert_eq!(
            parsed["sections"][0]["kinds"][0]["keys"][0]["name"],
            "distance"
        );
    }
}
