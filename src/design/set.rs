//! `--set PATH=VALUE`: edits the tree of the file before anything is checked, so that a set value meets the same checks.

use std::sync::Arc;

use super::address::Address;
use super::error::{DesignError, Place, SourceText};
use super::keys::What;
use super::node::{self, Field, Node, Tree};
use super::suggest::did_you_mean;

/// Applies one `PATH=VALUE`.
pub(super) fn apply(root: &mut Node, set: &str) -> Result<(), DesignError> {
    let source = Arc::new(SourceText {
        name: "--set".into(),
        text: set.to_string(),
    });
    let at = |from: usize, to: usize| Place {
        source: source.clone(),
        range: from..to,
    };
    let Some(equals) = set.find('=') else {
        let help = "write PATH=VALUE, for example path.distance=\"12 m\"";
        return Err(DesignError::new(
            Some(&at(0, set.len())),
            format!("`{set}` sets nothing"),
            help,
        ));
    };
    let (path, value_text) = (set[..equals].trim(), &set[equals + 1..]);
    let (path_place, value_place) = (at(0, equals), at(equals + 1, set.len()));
    let mut value = read_value(value_text, &value_place)?;

    for free in ["require", "tolerance"] {
        if let Some(key) = path
            .strip_prefix(free)
            .and_then(|rest| rest.strip_prefix('.'))
        {
            let key = key.trim().trim_matches('"');
            let table = child(root, free, &path_place)?;
            return put(table, key, value, &path_place);
        }
    }
    let address = Address::parse(path).map_err(|error| placed(&error, &path_place))?;
    if let Some(key) = address.row()
        && matches!(key.what, What::Text | What::Word(_))
        && !matches!(value.tree, Tree::List(_))
    {
        value.tree = Tree::Text(value_text.trim().trim_matches('"').to_string());
    }
    let mut table = root;
    if address.spec.many {
        let (outer, list) = address
            .spec
            .path
            .rsplit_once('.')
            .unwrap_or(("", address.spec.path));
        for piece in outer.split('.').filter(|piece| !piece.is_empty()) {
            table = child(table, piece, &path_place)?;
        }
        let which = address.which.as_deref().unwrap_or_default();
        table = item(table, list, which, address.spec.path, &path_place)?;
    } else {
        for piece in address
            .spec
            .path
            .split('.')
            .filter(|piece| !piece.is_empty())
        {
            table = child(table, piece, &path_place)?;
        }
    }
    match &address.inner {
        Some(inner) => put(
            child(table, &address.key, &path_place)?,
            inner,
            value,
            &path_place,
        ),
        None => put(table, &address.key, value, &path_place),
    }
}

/// The same error at a place.
pub(super) fn placed(error: &DesignError, place: &Place) -> DesignError {
    DesignError::new(Some(place), error.to_string(), error.help_text())
}

/// The table behind a name, made when it is absent.
fn child<'a>(table: &'a mut Node, name: &str, place: &Place) -> Result<&'a mut Node, DesignError> {
    let words = table.words();
    let Tree::Table(fields) = &mut table.tree else {
        return Err(DesignError::new(
            Some(place),
            format!("`{name}` cannot be set inside {words}"),
            "set it in a section",
        ));
    };
    let index = fields
        .iter()
        .position(|field| field.name == name)
        .unwrap_or_else(|| {
            let node = Node {
                tree: Tree::Table(Vec::new()),
                place: place.clone(),
            };
            fields.push(Field {
                name: name.to_string(),
                name_place: place.clone(),
                node,
            });
            fields.len() - 1
        });
    Ok(&mut fields[index].node)
}

/// One of a list of sections, by number from 1 or by name.
fn item<'a>(
    table: &'a mut Node,
    list: &str,
    which: &str,
    path: &str,
    place: &Place,
) -> Result<&'a mut Node, DesignError> {
    let fail = |message: String, help: String| DesignError::new(Some(place), message, help);
    let Tree::Table(fields) = &mut table.tree else {
        return Err(fail(format!("there is no {path}"), String::new()));
    };
    let items = match fields
        .iter_mut()
        .find(|field| field.name == list)
        .map(|field| &mut field.node.tree)
    {
        Some(Tree::List(items)) => items,
        _ => {
            return Err(fail(
                format!("the design has no {path}"),
                format!("add [[{path}]] to the file first"),
            ));
        }
    };
    let names: Vec<String> = items
        .iter()
        .filter_map(|item| item.get("name")?.text().map(str::to_string))
        .collect();
    let index = match which.parse::<usize>() {
        Ok(number) => number.checked_sub(1).filter(|index| *index < items.len()),
        Err(_) => items
            .iter()
            .position(|item| item.get("name").and_then(Node::text) == Some(which)),
    };
    match index {
        Some(index) => Ok(&mut items[index]),
        None if which.parse::<usize>().is_ok() || names.is_empty() => Err(fail(
            format!("the design has no {path}.{which}"),
            format!("they are {path}.1 to {path}.{}", items.len()),
        )),
        None => {
            let help = did_you_mean(which, names.iter().map(String::as_str));
            Err(fail(
                format!("the design has no {path} named `{which}`"),
                help,
            ))
        }
    }
}

fn put(table: &mut Node, name: &str, node: Node, name_place: &Place) -> Result<(), DesignError> {
    let words = table.words();
    let Tree::Table(fields) = &mut table.tree else {
        return Err(DesignError::new(
            Some(name_place),
            format!("`{name}` cannot be set inside {words}"),
            "set it in a section",
        ));
    };
    fields.retain(|field| field.name != name);
    fields.push(Field {
        name: name.to_string(),
        name_place: name_place.clone(),
        node,
    });
    Ok(())
}

/// The value as TOML where it is that, else the words as they stand: `12 m`, `[20 Hz, 20 kHz]`.
fn read_value(text: &str, place: &Place) -> Result<Node, DesignError> {
    let text = text.trim();
    if let Some(node) = node::value(text, place)
        && !matches!(node.tree, Tree::Bool | Tree::Date)
    {
        return Ok(node);
    }
    if let Some(inside) = text
        .strip_prefix('[')
        .and_then(|rest| rest.strip_suffix(']'))
    {
        let items = split(inside)
            .into_iter()
            .map(|item| read_value(item, place))
            .collect::<Result<Vec<Node>, _>>()?;
        return Ok(Node {
            tree: Tree::List(items),
            place: place.clone(),
        });
    }
    if text.starts_with(['[', '{', '"', '\'']) {
        let help = "a list is [a, b], a text may stand without quotes";
        return Err(DesignError::new(
            Some(place),
            format!("`{text}` is not closed or not well formed"),
            help,
        ));
    }
    Ok(Node {
        tree: Tree::Text(text.to_string()),
        place: place.clone(),
    })
}

/// Splits at commas outside brackets; an empty last item is dropped.
fn split(text: &str) -> Vec<&str> {
    let (mut items, mut depth, mut from) = (Vec::new(), 0i32, 0);
    for (at, c) in text.char_indices() {
        match c {
            '[' | '{' => depth += 1,
            ']' | '}' => depth -= 1,
            ',' if depth == 0 => {
                items.push(text[from..at].trim());
                from = at + 1;
            }
            _ => {}
        }
    }
    items.push(text[from..].trim());
    if items.last().is_some_and(|item| item.is_empty()) {
        items.pop();
    }
    items
}
