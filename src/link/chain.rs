//! The link in time: every station's runner in a row.

use super::Link;
use crate::station::ambient::Flicker;
use crate::station::{Conditions, Events, Runner};

/// Samples that pass the whole row at a time: small enough to stay in the nearest cache.
const SLICE: usize = 512;

/// All runners of a link.
pub struct Chain {
    runners: Vec<Box<dyn Runner>>,
    places: Vec<String>,
    flickers: Vec<Flicker>,
    ambient: Vec<f64>,
}

/// What happened at one station.
#[derive(Debug, Clone, PartialEq)]
pub struct StationEvents {
    pub path: String,
    pub events: Events,
}

impl Chain {
    pub(super) fn new(link: &Link, conditions: &Conditions) -> Self {
        Self {
            runners: link
                .stations()
                .iter()
                .map(|s| s.runner(conditions))
                .collect(),
            places: link
                .stations()
                .iter()
                .map(|s| s.path().to_owned())
                .collect(),
            flickers: link
                .lamps()
                .iter()
                .filter_map(|l| l.flicker(conditions))
                .collect(),
            ambient: Vec::new(),
        }
    }

    /// Takes source samples (1 is full scale) and leaves the output's volts away from rest in their place.
    pub fn run(&mut self, block: &mut [f64]) {
        for slice in block.chunks_mut(SLICE) {
            self.ambient.clear();
            if !self.flickers.is_empty() {
                self.ambient.resize(slice.len(), 0.0);
                self.flickers
                    .iter_mut()
                    .for_each(|f| f.add_to(&mut self.ambient));
            }
            for runner in &mut self.runners {
                runner.run(slice, &self.ambient);
            }
        }
    }

    /// What has happened at the stations so far, those of one place together.
    pub fn events(&self) -> Vec<StationEvents> {
        let mut all: Vec<StationEvents> = Vec::new();
        for (path, runner) in self.places.iter().zip(&self.runners) {
            let events = runner.events();
            match all.last_mut().filter(|last| last.path == *path) {
                Some(last) => last.events.add(&events),
                None => all.push(StationEvents {
                    path: path.clone(),
                    events,
                }),
            }
        }
        all
    }
}
