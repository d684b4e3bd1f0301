//! From the text of a design file to a checked [`Design`].

use std::path::Path;
use std::sync::Arc;

use sha2::{Digest, Sha256};

use super::Design;
use super::catalogue::Catalogue;
use super::complete::complete;
use super::error::{DesignError, SourceText};
use super::keys::{self, Spec};
use super::node::{self, Node, Tree};
use super::section::Section;
use super::suggest::did_you_mean;
use super::{checks, read, require, set, tolerance};

const GROUPS: [(&str, &[&str]); 2] = [
    ("transmitter", &["stage", "driver", "emitter"]),
    ("receiver", &["optics", "detector", "front_end", "stage"]),
];
/// What stands at the top level beside its keys.
const APART: [&str; 10] = [
    "source",
    "transmitter",
    "path",
    "ambient",
    "receiver",
    "output",
    "measure",
    "require",
    "tolerance",
    "silence",
];

pub(super) fn file(path: &Path, sets: &[String]) -> Result<Design, DesignError> {
    let name = path.display().to_string();
    let text = read_text(path, "design file")?;
    let folder = path
        .parent()
        .filter(|folder| !folder.as_os_str().is_empty())
        .unwrap_or(Path::new("."));
    text_of(&name, &text, folder, sets)
}

fn read_text(path: &Path, what: &str) -> Result<String, DesignError> {
    let bytes = std::fs::read(path).map_err(|error| {
        DesignError::new(
            None,
            format!("cannot read the {what} {}: {error}", path.display()),
            "check the file's name and rights",
        )
    })?;
    String::from_utf8(bytes).map_err(|error| {
        let at = error.utf8_error().valid_up_to();
        DesignError::new(
            None,
            format!("{} is not text: byte {at} is not UTF-8", path.display()),
            "save the file as UTF-8",
        )
    })
}

pub(super) fn text_of(
    name: &str,
    text: &str,
    folder: &Path,
    sets: &[String],
) -> Result<Design, DesignError> {
    let source = Arc::new(SourceText {
        name: name.to_string(),
        text: text.to_string(),
    });
    let mut root = node::document(&source)?;
    for one in sets {
        set::apply(&mut root, one)?;
    }
    let top_spec = spec("");
    let top = read::section(
        &root,
        top_spec,
        String::new(),
        Catalogue::built_in(),
        &APART,
    )?;
    let catalogue = match top.optional_word("parts") {
        None => Catalogue::built_in().clone(),
        Some(parts) => {
            let path = folder.join(parts);
            let text = read_text(&path, "catalogue")
                .map_err(|e| top.fault(Some("parts"), e.to_string(), e.help_text()))?;
            Catalogue::built_in().with(Catalogue::from_text(&path.display().to_string(), &text)?)
        }
    };
    for (group, known) in GROUPS {
        check_group(&root, group, known)?;
    }
    let file = File {
        root: &root,
        name,
        catalogue: &catalogue,
    };
    let mut design = Design {
        title: top
            .optional_word("title")
            .map_or_else(|| stem(name), str::to_string),
        note: top.optional_word("note").map(str::to_string),
        seed: seed(&root, &top)?,
        temperature: top.number("temperature"),
        silence: silence(&root)?,
        source: file.one("source")?,
        transmitter_stages: file.many("transmitter.stage")?,
        driver: file.one("transmitter.driver")?,
        emitter: file.one("transmitter.emitter")?,
        path: file.one("path")?,
        interruptions: file.many("path.interruption")?,
        ambient: file.many("ambient")?,
        optics: file.one("receiver.optics")?,
        detector: file.one("receiver.detector")?,
        front_end: file.one("receiver.front_end")?,
        receiver_stages: file.many("receiver.stage")?,
        output: file.one("output")?,
        measure: file.one("measure")?,
        require: Vec::new(),
        tolerance: Vec::new(),
        file: name.to_string(),
        sha256: Sha256::digest(text.as_bytes())
            .iter()
            .map(|byte| format!("{byte:02x}"))
            .collect(),
        top,
    };
    checks::share_supply(&mut design.transmitter_stages, &design.driver);
    checks::share_supply(&mut design.receiver_stages, &design.front_end);
    checks::place_load(&mut design.front_end, &design.detector)?;
    checks::all(&design)?;
    if let Some(node) = root.get("require") {
        design.require = require::read(node)?;
    }
    if let Some(node) = root.get("tolerance") {
        design.tolerance = tolerance::read(node, &design)?;
    }
    Ok(design)
}

fn spec(path: &str) -> &'static Spec {
    keys::section(path).unwrap_or_else(|| panic!("the key table has no section `{path}`"))
}

/// The file's tree while its sections are read.
struct File<'a> {
    root: &'a Node,
    name: &'a str,
    catalogue: &'a Catalogue,
}

impl File<'_> {
    fn find(&self, path: &str) -> Option<&Node> {
        path.split('.')
            .try_fold(self.root, |node, piece| node.get(piece))
    }

    fn one(&self, path: &str) -> Result<Section, DesignError> {
        let spec = spec(path);
        let Some(node) = self.find(path) else {
            if spec.required {
                return Err(self.missing(spec));
            }
            let keys = spec.keys_of(&spec.kinds[0]).collect();
            return Ok(Section {
                path: path.to_string(),
                keys,
                ..Section::default()
            });
        };
        if matches!(node.tree, Tree::List(_)) {
            let help = format!("write [{path}] in single brackets, once");
            return Err(DesignError::new(
                Some(&node.place),
                format!("there is one {path}, found a list"),
                help,
            ));
        }
        let apart: &[&str] = if path == "path" {
            &["interruption"]
        } else {
            &[]
        };
        self.read(node, spec, path.to_string(), apart)
    }

    fn many(&self, path: &str) -> Result<Vec<Section>, DesignError> {
        let spec = spec(path);
        let Some(node) = self.find(path) else {
            return Ok(Vec::new());
        };
        let Tree::List(items) = &node.tree else {
            let help = format!("write [[{path}]] in double brackets");
            return Err(DesignError::new(
                Some(&node.place),
                format!("{path} is a list, found {}", node.words()),
                help,
            ));
        };
        let mut sections = Vec::new();
        for (index, item) in items.iter().enumerate() {
            let name = item
                .get("name")
                .and_then(Node::text)
                .map_or_else(|| (index + 1).to_string(), str::to_string);
            sections.push(self.read(item, spec, format!("{path}.{name}"), &[])?);
        }
        Ok(sections)
    }

    fn read(
        &self,
        node: &Node,
        spec: &'static Spec,
        path: String,
        apart: &[&str],
    ) -> Result<Section, DesignError> {
        let section = read::section(node, spec, path, self.catalogue, apart)?;
        if let Some(kind) = spec.kind(section.kind.as_deref().unwrap_or_default()) {
            complete(&section, kind.choices, kind.class.map(|class| class.name))?;
        }
        Ok(section)
    }

    fn missing(&self, spec: &Spec) -> DesignError {
        let first = match spec.kinds {
            kinds if spec.has_kinds() => {
                let names: Vec<&str> = kinds.iter().map(|kind| kind.name).collect();
                format!("kind = \"{}\" (or {})", names[0], names[1..].join(", "))
            }
            _ => spec
                .all_keys()
                .next()
                .map(|key| key.line())
                .unwrap_or_default(),
        };
        let message = format!("{} has no section [{}]", self.name, spec.path);
        DesignError::new(
            None,
            message,
            format!(
                "add [{}] ({}), beginning with {first}",
                spec.path, spec.meaning
            ),
        )
    }
}

fn check_group(root: &Node, group: &str, known: &[&str]) -> Result<(), DesignError> {
    let Some(node) = root.get(group) else {
        return Ok(());
    };
    if !matches!(node.tree, Tree::Table(_)) {
        let help = format!("its sections are {}", known.join(", "));
        return Err(DesignError::new(
            Some(&node.place),
            format!("{group} is {}", node.words()),
            help,
        ));
    }
    match node
        .fields()
        .iter()
        .find(|field| !known.contains(&field.name.as_str()))
    {
        Some(field) => {
            let message = format!("{group} has no section `{}`", field.name);
            Err(DesignError::new(
                Some(&field.name_place),
                message,
                did_you_mean(&field.name, known.iter().copied()),
            ))
        }
        None => Ok(()),
    }
}

fn stem(name: &str) -> String {
    Path::new(name).file_stem().map_or_else(
        || name.to_string(),
        |stem| stem.to_string_lossy().into_owned(),
    )
}

/// The seed keeps all 64 bits, which a double would not.
fn seed(root: &Node, top: &Section) -> Result<Option<u64>, DesignError> {
    let Some(node) = root.get("seed") else {
        return Ok(None);
    };
    let (Tree::Number(text) | Tree::Text(text)) = &node.tree else {
        return Ok(None);
    };
    match text.trim().replace('_', "").parse::<u64>() {
        Ok(seed) => Ok(Some(seed)),
        Err(_) => {
            let message = format!("`{text}` is no seed");
            Err(top.fault(
                Some("seed"),
                message,
                format!("a seed is a whole number from 0 to {}", u64::MAX),
            ))
        }
    }
}

fn silence(root: &Node) -> Result<Vec<String>, DesignError> {
    let Some(node) = root.get("silence") else {
        return Ok(Vec::new());
    };
    let help = "write the names of the noise budget: silence = [\"receiver.detector.shot\"]";
    let Tree::List(items) = &node.tree else {
        return Err(DesignError::new(
            Some(&node.place),
            format!("silence is a list, found {}", node.words()),
            help,
        ));
    };
    items
        .iter()
        .map(|item| {
            let name = item.text().unwrap_or_default();
            let mut pieces = name.split('.');
            let side = pieces.next().is_some_and(|first| {
                [
                    "source",
                    "transmitter",
                    "path",
                    "ambient",
                    "receiver",
                    "output",
                ]
                .contains(&first)
            });
            let word = |piece: &str| {
                !piece.is_empty()
                    && piece
                        .chars()
                        .all(|c| c.is_ascii_alphanumeric() || "-_".contains(c))
            };
            let rest: Vec<&str> = pieces.collect();
            if side && !rest.is_empty() && rest.iter().all(|piece| word(piece)) {
                return Ok(name.to_string());
            }
            let message = if item.text().is_some() {
                format!("`{name}` is no name of a noise contributor")
            } else {
                format!("silence takes texts, found {}", item.words())
            };
            Err(DesignError::new(Some(&item.place), message, help))
        })
        .collect()
}
