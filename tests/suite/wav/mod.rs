//! WAV files, read and written, against an independent library (`hound`) and against files laid out byte by byte.

mod reading;
mod writing;

use std::path::Path;

use harklight::signal::wav::{WavError, WavReader};

fn read_all(path: &Path, block: usize) -> Result<Vec<Vec<f64>>, WavError> {
    let mut reader = WavReader::open(path)?;
    let count = usize::from(reader.spec().channels);
    let (mut part, mut whole) = (vec![Vec::new(); count], vec![Vec::new(); count]);
    while reader.read(&mut part, block)? > 0 {
        for (all, some) in whole.iter_mut().zip(&part) {
            all.extend_from_slice(some);
        }
    }
    Ok(whole)
}
