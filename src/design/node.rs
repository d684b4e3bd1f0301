//! The file as a tree in which every name and value knows its place. `--set` edits this tree before anything is checked.

use std::ops::Range;
use std::sync::Arc;

use toml::Spanned;
use toml::de::{DeTable, DeValue};

use super::error::{DesignError, Place, SourceText};

/// A value with its place.
#[derive(Clone, Debug)]
pub(super) struct Node {
    pub tree: Tree,
    pub place: Place,
}

/// What a value is.
#[derive(Clone, Debug)]
pub(super) enum Tree {
    Text(String),
    /// A number without quotes, as written (decimal).
    Number(String),
    Bool,
    Date,
    List(Vec<Node>),
    Table(Vec<Field>),
}

/// One `name = value` of a table.
#[derive(Clone, Debug)]
pub(super) struct Field {
    pub name: String,
    pub name_place: Place,
    pub node: Node,
}

impl Field {
    /// From the start of the name to the end of the value, where both stand in one text; else the value (a table with a
    /// header starts before its name: then the header).
    pub fn place(&self) -> Place {
        let (name, value) = (&self.name_place, &self.node.place);
        if Arc::ptr_eq(&name.source, &value.source) && name.range.start < value.range.start {
            Place {
                source: name.source.clone(),
                range: name.range.start..value.range.end,
            }
        } else {
            value.clone()
        }
    }
}

impl Node {
    /// What the value is, in words.
    pub fn words(&self) -> &'static str {
        match self.tree {
            Tree::Text(_) => "a text",
            Tree::Number(_) => "a number",
            Tree::Bool => "true or false",
            Tree::Date => "a date",
            Tree::List(_) => "a list",
            Tree::Table(_) => "a table",
        }
    }

    /// The fields of a table; none of anything else.
    pub fn fields(&self) -> &[Field] {
        match &self.tree {
            Tree::Table(fields) => fields,
            _ => &[],
        }
    }

    /// The value of this name in a table.
    pub fn get(&self, name: &str) -> Option<&Node> {
        self.fields()
            .iter()
            .find(|field| field.name == name)
            .map(|field| &field.node)
    }

    /// The items of a list; none of anything else.
    pub fn items(&self) -> &[Node] {
        match &self.tree {
            Tree::List(items) => items,
            _ => &[],
        }
    }

    /// The text of a text.
    pub fn text(&self) -> Option<&str> {
        match &self.tree {
            Tree::Text(text) => Some(text),
            _ => None,
        }
    }
}

/// Parses a whole document.
pub(super) fn document(source: &Arc<SourceText>) -> Result<Node, DesignError> {
    match DeTable::parse(&source.text) {
        Ok(table) => Ok(Node {
            tree: fields(table.get_ref(), source),
            place: place(source, 0..0),
        }),
        Err(error) => Err(not_toml(&error, source)),
    }
}

/// Parses one value, as it stands right of an equals sign; `None` when it is no TOML value.
pub(super) fn value(text: &str, at: &Place) -> Option<Node> {
    let parsed = DeValue::parse(text).ok()?;
    let scratch = Arc::new(SourceText {
        name: String::new(),
        text: text.to_string(),
    });
    let mut node = node(&parsed, &scratch);
    move_to(&mut node, at);
    Some(node)
}

fn not_toml(error: &toml::de::Error, source: &Arc<SourceText>) -> DesignError {
    let place = error.span().map(|span| place(source, span));
    let reason = error.message().trim().replace('\n', ", ");
    DesignError::new(
        place.as_ref(),
        format!("{} is not a TOML file: {reason}", source.name),
        "a line is a comment (#), a section ([name]) or key = value; texts stand in double quotes",
    )
}

fn move_to(node: &mut Node, at: &Place) {
    node.place = at.clone();
    match &mut node.tree {
        Tree::List(items) => items.iter_mut().for_each(|item| move_to(item, at)),
        Tree::Table(fields) => fields.iter_mut().for_each(|field| {
            field.name_place = at.clone();
            move_to(&mut field.node, at);
        }),
        _ => {}
    }
}

fn place(source: &Arc<SourceText>, range: Range<usize>) -> Place {
    Place {
        source: source.clone(),
        range,
    }
}

fn fields(table: &DeTable<'_>, source: &Arc<SourceText>) -> Tree {
    let mut fields: Vec<Field> = table
        .iter()
        .map(|(name, value)| Field {
            name: name.get_ref().to_string(),
            name_place: place(source, name.span()),
            node: node(value, source),
        })
        .collect();
    // The parser sorts by name; the order of the file reads better in errors and reports.
    fields.sort_by_key(|field| field.name_place.range.start);
    Tree::Table(fields)
}

fn node(value: &Spanned<DeValue<'_>>, source: &Arc<SourceText>) -> Node {
    let tree = match value.get_ref() {
        DeValue::String(text) => Tree::Text(text.to_string()),
        DeValue::Integer(number) if number.radix() == 10 => {
            Tree::Number(number.as_str().to_string())
        }
        DeValue::Integer(number) => match i128::from_str_radix(number.as_str(), number.radix()) {
            Ok(number) => Tree::Number(number.to_string()),
            Err(_) => Tree::Text(number.to_string()),
        },
        DeValue::Float(number) => Tree::Number(number.as_str().to_string()),
        DeValue::Boolean(_) => Tree::Bool,
        DeValue::Datetime(_) => Tree::Date,
        DeValue::Array(items) => Tree::List(items.iter().map(|item| node(item, source)).collect()),
        DeValue::Table(table) => fields(table, source),
    };
    Node {
        tree,
        place: place(source, value.span()),
    }
}
