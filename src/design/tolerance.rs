//! `[tolerance]`: what varies in a spread study.

use super::Design;
use super::error::DesignError;
use super::keys::What;
use super::node::{Node, Tree};
use super::read::{self, dotted};
use super::section::Value;
use super::suggest::did_you_mean;
use crate::quantity::{self, Dimension};

/// How far something varies.
#[derive(Clone, Copy, Debug, PartialEq)]
pub enum Tolerance {
    /// By this share of its value, either way.
    Share(f64),
    /// Between these values, SI.
    Span([f64; 2]),
}

/// Groups that vary together in kind, not in amount.
pub const GROUPS: [&str; 2] = ["resistors", "capacitors"];

/// Reads the section; its paths are looked up in the finished design.
pub(super) fn read(node: &Node, design: &Design) -> Result<Vec<(String, Tolerance)>, DesignError> {
    if !matches!(node.tree, Tree::Table(_)) {
        return Err(DesignError::new(
            Some(&node.place),
            "tolerance is a section",
            "write [tolerance] and what varies below it",
        ));
    }
    let mut found = Vec::new();
    collect(node, "", design, &mut found)?;
    Ok(found)
}

/// Paths may be written as one quoted key or as dotted TOML keys, which are nested tables.
fn collect(
    node: &Node,
    prefix: &str,
    design: &Design,
    found: &mut Vec<(String, Tolerance)>,
) -> Result<(), DesignError> {
    for field in node.fields() {
        let path = dotted(prefix, &field.name);
        if matches!(field.node.tree, Tree::Table(_)) {
            collect(&field.node, &path, design, found)?;
            continue;
        }
        if !path.contains('.')
            && !GROUPS.contains(&path.as_str())
            && design.value_at(&path).is_err()
        {
            let message = format!("tolerance has no group `{path}`");
            let help = format!(
                "{}; or a dotted path in quotes",
                did_you_mean(&path, GROUPS)
            );
            return Err(DesignError::new(Some(&field.name_place), message, help));
        }
        let tolerance = one(&path, &field.node, design).map_err(|error| match error.place() {
            Some(_) => error,
            None => super::set::placed(&error, &field.name_place),
        })?;
        found.push((path, tolerance));
    }
    Ok(())
}

fn one(path: &str, node: &Node, design: &Design) -> Result<Tolerance, DesignError> {
    let group = GROUPS.contains(&path);
    let key = if group {
        None
    } else {
        Some(design.value_at(path)?.key)
    };
    let name = format!("tolerance.{path}");
    if let Tree::List(items) = &node.tree {
        let Some((key, dimension)) = key.and_then(|key| Some((key, key.dimension()?))) else {
            let help = "write a share, for example \"5 %\"";
            return Err(DesignError::new(
                Some(&node.place),
                format!("{name} varies by a share, not between two values"),
                help,
            ));
        };
        if items.len() != 2 || !matches!(key.what, What::Number(..)) {
            let message = format!("{name} takes a share or two values");
            return Err(DesignError::new(
                Some(&node.place),
                message,
                "write \"5 %\" or [lowest, highest]",
            ));
        }
        let mut span = [0.0; 2];
        for (slot, item) in span.iter_mut().zip(items) {
            if let Value::Numbers(values) = read::value(item, key, "tolerance")? {
                *slot = values[0];
            }
        }
        if span[0] > span[1] || !span.iter().all(|value| value.is_finite()) {
            let ends = span.map(|value| quantity::format(value, dimension));
            let message = format!("{name} runs from {} down to {}", ends[0], ends[1]);
            return Err(DesignError::new(
                Some(&node.place),
                message,
                "write the smaller value first",
            ));
        }
        return Ok(Tolerance::Span(span));
    }
    if key.is_some_and(|key| key.dimension().is_none()) {
        return Err(DesignError::new(
            None,
            format!("`{path}` is no number and cannot vary"),
            "name a number",
        ));
    }
    let share = match &node.tree {
        Tree::Text(text) => quantity::parse(text, Dimension::Share),
        Tree::Number(text) => quantity::bare(text, Dimension::Share),
        _ => {
            let message = format!("{name} is {}", node.words());
            return Err(DesignError::new(
                Some(&node.place),
                message,
                "write \"5 %\" or [lowest, highest]",
            ));
        }
    };
    let share = share.map_err(|error| read::unread(&error, &node.place, &name))?;
    if !(0.0..1.0).contains(&share) {
        let message = format!("{name} is out of range: a tolerance is from 0 to below 100 %");
        return Err(DesignError::new(
            Some(&node.place),
            message,
            "write for example \"5 %\"",
        ));
    }
    Ok(Tolerance::Share(share))
}
