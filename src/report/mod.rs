//! Results as people and programs read them, from results alone.

mod cautions;
pub mod json;
pub mod terminal;

use crate::design::Design;
use crate::link::{BudgetLine, Link};
use crate::render::programme::Outcome;
use crate::render::test_signals::{Bench, Measured};
use crate::study::requirements::Verdict;

/// Everything that a run of `render` or `measure` found out.
pub struct Findings<'a> {
    pub design: &'a Design,
    pub link: &'a Link,
    pub bench: Bench,
    pub seed: u64,
    pub measured: &'a Measured,
    pub budget: &'a [BudgetLine],
    pub verdicts: &'a [Verdict],
    pub warnings: &'a [String],
    /// The rendered programme; none where only test signals ran.
    pub programme: Option<&'a Outcome>,
}
