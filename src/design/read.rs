//! A node of the file into a section: kinds, keys, units, ranges.

use super::catalogue::Catalogue;
use super::complete::complete;
use super::error::{DesignError, Place};
use super::keys::{Key, Kind, Range, Spec, What};
use super::node::{Field, Node, Tree};
use super::section::{Entry, Origin, Section, Value};
use super::suggest::did_you_mean;
use crate::quantity::{self, Dimension, QuantityError};

/// Reads a section and fills it from its part. `apart` names fields that are sections of their own and are skipped here.
pub(super) fn section(
    node: &Node,
    spec: &'static Spec,
    path: String,
    catalogue: &Catalogue,
    apart: &[&str],
) -> Result<Section, DesignError> {
    let Tree::Table(fields) = &node.tree else {
        let help = format!("write the header [{}] and its keys below it", spec.path);
        return Err(DesignError::new(
            Some(&node.place),
            format!("{path} is a section, found {}", node.words()),
            help,
        ));
    };
    let kind = kind_of(node, spec, &path)?;
    let keys: Vec<&'static Key> = spec.keys_of(kind).collect();
    let mut section = Section {
        path,
        kind: spec.has_kinds().then(|| kind.name.to_string()),
        keys,
        place: Some(node.place.clone()),
        kind_place: fields
            .iter()
            .find(|field| field.name == "kind")
            .map(Field::place),
        ..Section::default()
    };
    for field in fields {
        let understood = field.name == "kind" && spec.has_kinds();
        if understood || apart.contains(&field.name.as_str()) {
            continue;
        }
        let Some(key) = section.key(&field.name) else {
            return Err(unknown_key(field, spec, kind, &section, apart));
        };
        let value = value(&field.node, key, &section.path)?;
        section.entries.insert(
            key.name,
            Entry {
                value,
                origin: Origin::Design,
                place: field.place(),
            },
        );
    }
    if let Some(class) = kind.class {
        catalogue.fill(&mut section, class, kind.choices)?;
    }
    Ok(section)
}

fn kind_of(node: &Node, spec: &'static Spec, path: &str) -> Result<&'static Kind, DesignError> {
    if !spec.has_kinds() {
        return Ok(&spec.kinds[0]);
    }
    let names = || spec.kinds.iter().map(|kind| kind.name);
    let Some(given) = node.get("kind") else {
        let list: Vec<&str> = names().collect();
        let help = format!(
            "add kind = \"{}\"; the kinds are {}",
            list[0],
            list.join(", ")
        );
        return Err(DesignError::new(
            Some(&node.place),
            format!("{path} has no `kind`"),
            help,
        ));
    };
    let word = given.text().unwrap_or_default();
    spec.kind(word).ok_or_else(|| {
        let message = match given.text() {
            Some(word) => format!("{path} has no kind `{word}`"),
            None => format!("{path}.kind is a word, found {}", given.words()),
        };
        DesignError::new(Some(&given.place), message, did_you_mean(word, names()))
    })
}

fn unknown_key(
    field: &Field,
    spec: &'static Spec,
    kind: &'static Kind,
    section: &Section,
    apart: &[&str],
) -> DesignError {
    let path = if section.path.is_empty() {
        "the design"
    } else {
        &section.path
    };
    let name = &field.name;
    let owners: Vec<&str> = spec
        .kinds
        .iter()
        .filter(|k| spec.key_of(k, name).is_some())
        .map(|k| k.name)
        .collect();
    let known = section
        .keys
        .iter()
        .map(|key| key.name)
        .chain(apart.iter().copied());
    let message = if owners.is_empty() {
        let what = if matches!(field.node.tree, Tree::Table(_)) {
            "section"
        } else {
            "key"
        };
        format!("{path} has no {what} `{name}`")
    } else {
        format!(
            "{path} of kind {} has no key `{name}`; it belongs to {}",
            kind.name,
            owners.join(", ")
        )
    };
    DesignError::new(Some(&field.name_place), message, did_you_mean(name, known))
}

/// Reads one value as its key asks for.
pub(super) fn value(node: &Node, key: &'static Key, path: &str) -> Result<Value, DesignError> {
    let name = dotted(path, key.name);
    let example = || format!("write for example: {}", key.line());
    let wrong = |expected: String| {
        DesignError::new(
            Some(&node.place),
            format!("{name} takes {expected}, found {}", node.words()),
            example(),
        )
    };
    match key.what {
        What::Number(dimension, range) => Ok(Value::Numbers(vec![number(
            node, dimension, range, &name, key,
        )?])),
        What::Numbers {
            dimension,
            range,
            fewest,
            most,
        } => {
            let items = list(node);
            if items.len() < fewest || items.len() > most {
                let expected = if fewest == most {
                    format!("{fewest} values")
                } else {
                    format!("{fewest} to {most} values")
                };
                return Err(DesignError::new(
                    Some(&node.place),
                    format!("{name} takes {expected}, found {}", items.len()),
                    example(),
                ));
            }
            let values = items
                .iter()
                .map(|item| number(item, dimension, range, &name, key))
                .collect::<Result<Vec<f64>, _>>()?;
            Ok(Value::Numbers(values))
        }
        What::Supply => supply(node, &name, key),
        What::Pairs(columns) => pairs(node, columns, &name, key),
        What::Word(words) => {
            let word = node.text().ok_or_else(|| wrong("a word".into()))?;
            if !words.contains(&word) {
                let message = format!("{name} cannot be `{word}`");
                return Err(DesignError::new(
                    Some(&node.place),
                    message,
                    did_you_mean(word, words.iter().copied()),
                ));
            }
            Ok(Value::Word(word.to_string()))
        }
        What::Text => match &node.tree {
            Tree::Text(text) => Ok(Value::Word(text.clone())),
            _ => Err(wrong("a text in double quotes".into())),
        },
        What::Table(keys) => table(node, keys, name),
    }
}

/// A nested table; its keys are all its own, required or not as the key table says.
fn table(node: &Node, keys: &'static [Key], path: String) -> Result<Value, DesignError> {
    let Tree::Table(fields) = &node.tree else {
        let lines: Vec<String> = keys.iter().map(Key::line).collect();
        let message = format!("{path} is a table, found {}", node.words());
        return Err(DesignError::new(
            Some(&node.place),
            message,
            format!("write {{ {} }}", lines.join(", ")),
        ));
    };
    let mut section = Section {
        path,
        keys: keys.iter().collect(),
        place: Some(node.place.clone()),
        ..Section::default()
    };
    for field in fields {
        let Some(key) = section.key(&field.name) else {
            let message = format!("{} has no key `{}`", section.path, field.name);
            return Err(DesignError::new(
                Some(&field.name_place),
                message,
                did_you_mean(&field.name, keys.iter().map(|k| k.name)),
            ));
        };
        let value = value(&field.node, key, &section.path)?;
        section.entries.insert(
            key.name,
            Entry {
                value,
                origin: Origin::Design,
                place: field.place(),
            },
        );
    }
    complete(&section, &[], None)?;
    Ok(Value::Table(section))
}

/// The items of a list, or the value itself as a list of one.
fn list(node: &Node) -> Vec<&Node> {
    match &node.tree {
        Tree::List(items) => items.iter().collect(),
        _ => vec![node],
    }
}

fn number(
    node: &Node,
    dimension: Dimension,
    range: Range,
    name: &str,
    key: &Key,
) -> Result<f64, DesignError> {
    let example = || format!("write for example: {}", key.line());
    let (read, written) = match &node.tree {
        Tree::Text(text) => (quantity::parse(text, dimension), text),
        Tree::Number(text) => (quantity::bare(text, dimension), text),
        _ => {
            let message = format!("{name} takes {dimension}, found {}", node.words());
            return Err(DesignError::new(Some(&node.place), message, example()));
        }
    };
    let value = read.map_err(|error| unread(&error, &node.place, name))?;
    if !range.holds(value) {
        let message = format!(
            "{name} = {written} is out of range: it takes {}",
            range.words(dimension)
        );
        return Err(DesignError::new(Some(&node.place), message, example()));
    }
    Ok(value)
}

/// A quantity that could not be read, at its place.
pub(super) fn unread(error: &QuantityError, place: &Place, name: &str) -> DesignError {
    DesignError::new(Some(place), format!("{name}: {error}"), error.help())
}

fn supply(node: &Node, name: &str, key: &Key) -> Result<Value, DesignError> {
    let any = Range {
        low: f64::MIN,
        with_low: true,
        high: f64::MAX,
        with_high: true,
        infinite: false,
    };
    let items = list(node);
    let volts = items
        .iter()
        .map(|item| number(item, Dimension::Volt, any, name, key))
        .collect::<Result<Vec<f64>, _>>()?;
    match volts[..] {
        [single] if single > 0.0 => Ok(Value::Numbers(vec![single])),
        [one, other] if one != other => Ok(Value::Numbers(vec![one.min(other), one.max(other)])),
        _ => {
            let help =
                "write one positive voltage (\"9 V\") or two different rails ([\"-5 V\", \"5 V\"])";
            Err(DesignError::new(
                Some(&node.place),
                format!("{name} leaves no room between the rails"),
                help,
            ))
        }
    }
}

fn pairs(
    node: &Node,
    columns: [(Dimension, Range); 2],
    name: &str,
    key: &Key,
) -> Result<Value, DesignError> {
    let fail = |place: &Place, what: &str| {
        DesignError::new(
            Some(place),
            format!("{name} {what}"),
            format!("write for example: {}", key.line()),
        )
    };
    let mut pairs: Vec<[f64; 2]> = Vec::new();
    for item in node.items() {
        let [first, second] = item.items() else {
            return Err(fail(&item.place, "is a list of pairs"));
        };
        let pair = [
            number(first, columns[0].0, columns[0].1, name, key)?,
            number(second, columns[1].0, columns[1].1, name, key)?,
        ];
        if pairs.last().is_some_and(|last| last[0] >= pair[0]) {
            return Err(fail(&item.place, "must rise from pair to pair"));
        }
        pairs.push(pair);
    }
    if pairs.len() < 2 {
        return Err(fail(&node.place, "takes at least two pairs"));
    }
    Ok(Value::Pairs(pairs))
}

/// "path.key", or the key alone at the top level.
pub(super) fn dotted(path: &str, key: &str) -> String {
    if path.is_empty() {
        key.to_string()
    } else {
        format!("{path}.{key}")
    }
}

#[cfg(test)]
mod tests {
    use std::sync::Arc;

    use super::super::error::SourceText;
    use super::super::keys::{Absent, SECTIONS};
    use super::super::node;
    use super::*;

    #[test]
    fn every_example_of_the_key_table_is_accepted_by_its_own_key() {
        for key in SECTIONS
            .iter()
            .flat_map(|spec| spec.all_keys())
            .filter(|key| key.name != "silence")
        {
            let source = Arc::new(SourceText {
                name: "example".into(),
                text: key.line(),
            });
            let root =
                node::document(&source).unwrap_or_else(|error| panic!("{}: {error:?}", key.line()));
            value(&root.fields()[0].node, key, "")
                .unwrap_or_else(|error| panic!("{}: {error:?}", key.line()));
        }
    }

    #[test]
    fn every_default_lies_in_its_own_range() {
        for key in SECTIONS.iter().flat_map(|spec| spec.all_keys()) {
            match (key.what, key.absent) {
                (What::Number(_, range), Absent::Value(value)) => {
                    assert!(range.holds(value), "{}", key.name)
                }
                (What::Number(_, range), Absent::Infinite) => {
                    assert!(range.holds(f64::INFINITY), "{}", key.name)
                }
                (What::Numbers { range, .. }, Absent::Values(values)) => {
                    assert!(values.iter().all(|v| range.holds(*v)))
                }
                (What::Word(words), Absent::Word(word)) => {
                    assert!(words.contains(&word), "{}", key.name)
                }
                (_, Absent::Required | Absent::Nothing) => {}
                (what, absent) => panic!("{}: {what:?} cannot default to {absent:?}", key.name),
            }
        }
    }

    #[test]
    fn no_key_stands_twice_in_one_kind() {
        for spec in SECTIONS {
            for kind in spec.kinds {
                let mut names: Vec<&str> = spec.keys_of(kind).map(|key| key.name).collect();
                names.sort_unstable();
                assert!(
                    names.windows(2).all(|pair| pair[0] != pair[1]),
                    "{} {}: {names:?}",
                    spec.path,
                    kind.name
                );
            }
        }
    }
}
