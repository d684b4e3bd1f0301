//! Dotted paths: which section, which of several, which key.

use super::error::DesignError;
use super::keys::{self, Key, SECTIONS, Spec, What};
use super::suggest::did_you_mean;

/// A dotted path taken apart. It need not exist in a given design.
#[derive(Clone, Debug)]
pub(super) struct Address {
    pub spec: &'static Spec,
    /// Which of a list of sections: a number from 1 or a name.
    pub which: Option<String>,
    /// The key, and the key inside it where it is a table.
    pub key: String,
    pub inner: Option<String>,
}

impl Address {
    /// Takes a path apart.
    ///
    /// # Errors
    /// A path that no design could have; the help names the nearest. The error has no place yet.
    pub fn parse(path: &str) -> Result<Address, DesignError> {
        let fail = |message: String, help: String| Err(DesignError::new(None, message, help));
        let pieces: Vec<&str> = path.trim().split('.').collect();
        if pieces.iter().any(|piece| piece.trim().is_empty()) {
            return fail(
                format!("`{path}` is no path"),
                "a path is words joined by points: path.distance".into(),
            );
        }
        let longest = (1..=pieces.len())
            .rev()
            .find_map(|n| keys::section(&pieces[..n].join(".")).map(|spec| (n, spec)));
        let (mut used, spec) = match longest {
            Some(found) => found,
            None => (0, keys::section("").expect("the key table has a top level")),
        };
        let mut which = None;
        if spec.many {
            match pieces.get(used) {
                Some(piece) => which = Some((*piece).to_string()),
                None => {
                    return fail(
                        format!("`{path}` does not say which {}", spec.path),
                        format!(
                            "count from 1: {}.1, or use its name, then the key",
                            spec.path
                        ),
                    );
                }
            }
            used += 1;
        }
        let known = || {
            spec.all_keys()
                .map(|key| key.name)
                .chain(spec.has_kinds().then_some("kind"))
        };
        let Some(&key) = pieces.get(used) else {
            return fail(
                format!("`{path}` is a section; it names no key"),
                format!("its keys: {}", list(known())),
            );
        };
        if spec.path.is_empty() && !known().any(|name| name == key) {
            let sections = SECTIONS
                .iter()
                .map(|spec| spec.path)
                .filter(|path| !path.is_empty());
            let tried = pieces.iter().take(2).copied().collect::<Vec<_>>().join(".");
            let near = if pieces.len() > 1 {
                tried
            } else {
                key.to_string()
            };
            return fail(
                format!("`{path}` names nothing"),
                did_you_mean(&near, sections.chain(known())),
            );
        }
        if !known().any(|name| name == key) {
            let inside = pieces[..used].join(".");
            return fail(
                format!("`{path}` names nothing: {inside} has no key `{key}`"),
                did_you_mean(key, known()),
            );
        }
        let inner = pieces.get(used + 1).map(|piece| (*piece).to_string());
        if let Some(inner) = &inner {
            match spec
                .all_keys()
                .find(|known| known.name == key)
                .map(|key| key.what)
            {
                Some(What::Table(keys))
                    if keys.iter().any(|known| known.name == inner) && pieces.len() == used + 2 => {
                }
                Some(What::Table(keys)) => {
                    return fail(
                        format!("`{path}` names nothing"),
                        did_you_mean(inner, keys.iter().map(|key| key.name)),
                    );
                }
                _ => {
                    return fail(
                        format!("`{path}` names nothing: {key} has no keys inside"),
                        format!("leave `.{inner}` out"),
                    );
                }
            }
        }
        Ok(Address {
            spec,
            which,
            key: key.to_string(),
            inner,
        })
    }

    /// The key table's row (of the first kind that has the key); `None` for `kind`.
    pub fn row(&self) -> Option<&'static Key> {
        let key = self.spec.all_keys().find(|key| key.name == self.key)?;
        match (&self.inner, key.what) {
            (Some(inner), What::Table(keys)) => keys.iter().find(|key| key.name == inner),
            _ => Some(key),
        }
    }
}

fn list<'a>(names: impl Iterator<Item = &'a str>) -> String {
    let mut seen: Vec<&str> = Vec::new();
    for name in names {
        if !seen.contains(&name) {
            seen.push(name);
        }
    }
    seen.join(", ")
}
