//! The nearest known word to one that is not known.

/// The nearest of the known words, when one is near enough to have been meant.
pub(super) fn nearest<'a>(word: &str, known: impl IntoIterator<Item = &'a str>) -> Option<&'a str> {
    let plain = |text: &str| text.to_lowercase().replace(['-', ' '], "_");
    let word = plain(word);
    known
        .into_iter()
        .map(|candidate| (strsim::jaro_winkler(&word, &plain(candidate)), candidate))
        .filter(|(likeness, _)| *likeness >= 0.75)
        .max_by(|a, b| a.0.total_cmp(&b.0))
        .map(|(_, candidate)| candidate)
}

/// A help text: "did you mean `x`?" and the list, or the list alone.
pub(super) fn did_you_mean<'a>(word: &str, known: impl IntoIterator<Item = &'a str>) -> String {
    let mut list: Vec<&str> = Vec::new();
    for candidate in known {
        if !list.contains(&candidate) {
            list.push(candidate);
        }
    }
    let all = list.join(", ");
    match nearest(word, list.iter().copied()) {
        Some(meant) if list.len() > 1 => format!("did you mean `{meant}`? Known: {all}"),
        Some(meant) => format!("did you mean `{meant}`?"),
        None => format!("known: {all}"),
    }
}
