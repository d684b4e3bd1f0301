//! Frequency weighting of noise.

/// Corner frequencies of the A weighting, Hz: IEC 61672-1:2013, annex E (f1 to f4), from memory.
const CORNERS: [f64; 4] = [20.598_997, 107.652_65, 737.862_23, 12_194.217];

/// A weighting at `frequency` Hz as an amplitude ratio, 1 at 1 kHz (IEC 61672-1:2013, annex E.4).
///
/// The standard's own table is this formula rounded to 0.1 dB.
pub fn a_weighting(frequency: f64) -> f64 {
    response(frequency) / response(1000.0)
}

fn response(f: f64) -> f64 {
    let [f1, f2, f3, f4] = CORNERS.map(|c| c * c);
    let f = f * f;
    f4 * f * f / ((f + f1) * ((f + f2) * (f + f3)).sqrt() * (f + f4))
}
