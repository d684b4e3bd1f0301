//! A bench for stations and links: a design whose every station is ideal until a check says otherwise, and the instruments
//! that a check needs.

mod draft;
mod instruments;

pub use draft::{Draft, IDEAL_OPAMP};
pub use instruments::{
    Multisine, distortion, largest, phasor, quiet, reading, rms, run, station, tone,
};
