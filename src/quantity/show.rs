//! Values for people: four significant digits with their unit.

use super::{Dimension, format};

impl Dimension {
    /// Text of `value` (SI) rounded to four significant digits: "33.86 Hz". For exact text there is [`format`].
    pub fn show(self, value: f64) -> String {
        if value == 0.0 || !value.is_finite() {
            return format(value, self);
        }
        // Angles are shown in degrees: round there.
        let scale = if self == Dimension::Angle {
            180.0 / std::f64::consts::PI
        } else {
            1.0
        };
        let shown = value * scale;
        let rounded: f64 = format!("{shown:.3e}").parse().unwrap_or(shown);
        if self == Dimension::Angle {
            format!("{rounded}°")
        } else {
            format(rounded, self)
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn four_digits_and_a_unit() {
        assert_eq!(Dimension::Hertz.show(33.862_753_8), "33.86 Hz");
        assert_eq!(Dimension::Volt.show(0.0), format(0.0, Dimension::Volt));
        assert_eq!(Dimension::Angle.show(0.349_065_850_398), "20°");
    }
}
