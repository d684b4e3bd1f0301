//! The dimensions a value may have, and how their units are spelled.

/// What a number measures. The value inside is always in the SI unit named here.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub enum Dimension {
    /// Voltage, V.
    Volt,
    /// Current, A.
    Ampere,
    /// Resistance, Ω.
    Ohm,
    /// Capacitance, F.
    Farad,
    /// Frequency, Hz.
    Hertz,
    /// Time, s.
    Second,
    /// Length, m.
    Metre,
    /// Area, m².
    SquareMetre,
    /// Volume, m³.
    CubicMetre,
    /// Optical or electrical power, W.
    Watt,
    /// Irradiance, W/m².
    Irradiance,
    /// Spectral irradiance, inside in W/m³ (1 W/m²/nm is 1e9 of it). A bare number is refused: it could be either.
    SpectralIrradiance,
    /// Responsivity, A/W.
    Responsivity,
    /// Transconductance, A/V.
    Transconductance,
    /// Temperature, K ("20 °C" is understood).
    Kelvin,
    /// Thermal resistance, K/W.
    KelvinPerWatt,
    /// Relative change for each kelvin, 1/K ("-0.5 %/K").
    PerKelvin,
    /// Angle, inside in radians. Text needs its degree sign (or `rad`); a bare number is refused.
    Angle,
    /// Level or ratio, dB.
    Decibel,
    /// Relative intensity noise, dB/Hz.
    DecibelPerHertz,
    /// Attenuation of a fibre, inside in dB/m; a bare number is dB/m.
    DecibelPerMetre,
    /// Attenuation of weather, inside in dB/m; a bare number is dB/km.
    DecibelPerKilometre,
    /// Loudness, LUFS (ITU-R BS.1770).
    Loudness,
    /// A share; a bare number is a fraction, "2 %" is 0.02.
    Share,
    /// Slew rate, V/s.
    SlewRate,
    /// Noise voltage density, V/√Hz.
    VoltNoise,
    /// Noise current density, A/√Hz.
    AmpereNoise,
    /// Refractive-index structure parameter C_n², m^(-2/3).
    Cn2,
    /// Speed, m/s.
    Speed,
    /// A plain number without a unit.
    Number,
    /// A whole number from 0.
    Count,
}

/// One spelling of a unit: its text (in the plain form of `parse::plain_unit`), the power of ten that takes it to SI, and the
/// power to which a prefix before it is raised (0: takes none; 2: "mm2" is (1e-3)²).
pub(super) struct Unit {
    pub text: &'static str,
    pub exponent: i32,
    pub prefix_power: i32,
}

const fn unit(text: &'static str, exponent: i32, prefix_power: i32) -> Unit {
    Unit {
        text,
        exponent,
        prefix_power,
    }
}

/// SI prefixes with their powers of ten; `u` stands for µ. Centi and deci are read before metres only.
pub(super) const PREFIXES: [(&str, i32); 11] = [
    ("f", -15),
    ("p", -12),
    ("n", -9),
    ("µ", -6),
    ("u", -6),
    ("m", -3),
    ("c", -2),
    ("d", -1),
    ("k", 3),
    ("M", 6),
    ("G", 9),
];

impl Dimension {
    /// Every dimension, in the order of declaration.
    pub const ALL: [Dimension; 31] = [
        Self::Volt,
        Self::Ampere,
        Self::Ohm,
        Self::Farad,
        Self::Hertz,
        Self::Second,
        Self::Metre,
        Self::SquareMetre,
        Self::CubicMetre,
        Self::Watt,
        Self::Irradiance,
        Self::SpectralIrradiance,
        Self::Responsivity,
        Self::Transconductance,
        Self::Kelvin,
        Self::KelvinPerWatt,
        Self::PerKelvin,
        Self::Angle,
        Self::Decibel,
        Self::DecibelPerHertz,
        Self::DecibelPerMetre,
        Self::DecibelPerKilometre,
        Self::Loudness,
        Self::Share,
        Self::SlewRate,
        Self::VoltNoise,
        Self::AmpereNoise,
        Self::Cn2,
        Self::Speed,
        Self::Number,
        Self::Count,
    ];

    /// The dimension in words, its unit as printed, and a value as an engineer would write it.
    const fn words(self) -> (&'static str, &'static str, &'static str) {
        match self {
            Self::Volt => ("a voltage", "V", "2.5 V"),
            Self::Ampere => ("a current", "A", "20 mA"),
            Self::Ohm => ("a resistance", "Ω", "47 kΩ"),
            Self::Farad => ("a capacitance", "F", "100 nF"),
            Self::Hertz => ("a frequency", "Hz", "1 kHz"),
            Self::Second => ("a time", "s", "150 ms"),
            Self::Metre => ("a length", "m", "6 m"),
            Self::SquareMetre => ("an area", "m²", "7 mm²"),
            Self::CubicMetre => ("a volume", "m³", "60 m³"),
            Self::Watt => ("a power", "W", "15 mW"),
            Self::Irradiance => ("an irradiance", "W/m²", "0.5 W/m²"),
            Self::SpectralIrradiance => ("a spectral irradiance", "W/m²/nm", "0.1 W/m²/nm"),
            Self::Responsivity => ("a responsivity", "A/W", "0.6 A/W"),
            Self::Transconductance => ("a transconductance", "A/V", "16 mA/V"),
            Self::Kelvin => ("a temperature", "K", "293.15 K"),
            Self::KelvinPerWatt => ("a thermal resistance", "K/W", "300 K/W"),
            Self::PerKelvin => ("a temperature coefficient", "%/K", "-0.5 %/K"),
            Self::Angle => ("an angle", "°", "60°"),
            Self::Decibel => ("a level", "dB", "-6 dB"),
            Self::DecibelPerHertz => ("a relative intensity noise", "dB/Hz", "-150 dB/Hz"),
            Self::DecibelPerMetre => ("an attenuation by length", "dB/m", "0.2 dB/m"),
            Self::DecibelPerKilometre => ("an attenuation by length", "dB/km", "6 dB/km"),
            Self::Loudness => ("a loudness", "LUFS", "-23 LUFS"),
            Self::Share => ("a share", "%", "2 %"),
            Self::SlewRate => ("a slew rate", "V/s", "0.5 V/µs"),
            Self::VoltNoise => ("a noise voltage density", "V/√Hz", "12 nV/√Hz"),
            Self::AmpereNoise => ("a noise current density", "A/√Hz", "0.5 pA/√Hz"),
            Self::Cn2 => (
                "a structure parameter of turbulence",
                "m^-2/3",
                "1e-14 m^-2/3",
            ),
            Self::Speed => ("a speed", "m/s", "3 m/s"),
            Self::Number => ("a plain number", "", "1.5"),
            Self::Count => ("a whole number", "", "2"),
        }
    }

    /// The dimension in words: "a resistance".
    pub const fn name(self) -> &'static str {
        self.words().0
    }

    /// The unit as printed in tables: "Ω"; empty for plain numbers.
    pub const fn unit(self) -> &'static str {
        self.words().1
    }

    /// A value of this dimension as an engineer would write it: "47 kΩ".
    pub const fn example(self) -> &'static str {
        self.words().2
    }

    /// The power of ten of a number without a unit; `None` where such a number is refused.
    pub(super) const fn bare_exponent(self) -> Option<i32> {
        match self {
            Self::Angle | Self::SpectralIrradiance => None,
            Self::DecibelPerKilometre => Some(-3),
            _ => Some(0),
        }
    }

    /// Every spelling that is read. Angles and degrees Celsius, which no power of ten converts, are in `parse`.
    pub(super) const fn units(self) -> &'static [Unit] {
        const VOLT: &[Unit] = &[unit("V", 0, 1)];
        const AMPERE: &[Unit] = &[unit("A", 0, 1)];
        const OHM: &[Unit] = &[unit("Ω", 0, 1)];
        const FARAD: &[Unit] = &[unit("F", 0, 1)];
        const HERTZ: &[Unit] = &[unit("Hz", 0, 1)];
        const SECOND: &[Unit] = &[unit("s", 0, 1)];
        const METRE: &[Unit] = &[unit("m", 0, 1)];
        const SQUARE: &[Unit] = &[unit("m2", 0, 2)];
        const CUBIC: &[Unit] = &[unit("m3", 0, 3), unit("l", -3, 0), unit("L", -3, 0)];
        const WATT: &[Unit] = &[unit("W", 0, 1)];
        const IRRADIANCE: &[Unit] = &[unit("W/m2", 0, 1), unit("W/cm2", 4, 1), unit("W/mm2", 6, 1)];
        const SPECTRAL: &[Unit] = &[
            unit("W/m2/nm", 9, 1),
            unit("W/(m2nm)", 9, 1),
            unit("W/cm2/nm", 13, 1),
            unit("W/m2/µm", 6, 1),
            unit("W/m2/um", 6, 1),
            unit("W/m3", 0, 1),
        ];
        const RESPONSIVITY: &[Unit] = &[
            unit("A/W", 0, 1),
            unit("A/mW", 3, 1),
            unit("A/µW", 6, 1),
            unit("A/uW", 6, 1),
        ];
        const TRANSCONDUCTANCE: &[Unit] = &[unit("A/V", 0, 1), unit("S", 0, 1)];
        const KELVIN: &[Unit] = &[unit("K", 0, 0), unit("mK", -3, 0)];
        const THERMAL: &[Unit] = &[unit("K/W", 0, 1), unit("K/mW", 3, 0), unit("°C/W", 0, 0)];
        const PER_KELVIN: &[Unit] = &[
            unit("%/K", -2, 0),
            unit("%/°C", -2, 0),
            unit("1/K", 0, 0),
            unit("/K", 0, 0),
            unit("ppm/K", -6, 0),
        ];
        const RADIAN: &[Unit] = &[unit("rad", 0, 1)];
        const DECIBEL: &[Unit] = &[unit("dB", 0, 0)];
        const PER_HERTZ: &[Unit] = &[unit("dB/Hz", 0, 0)];
        const PER_METRE: &[Unit] = &[unit("dB/m", 0, 0), unit("dB/km", -3, 0)];
        const LOUDNESS: &[Unit] = &[unit("LUFS", 0, 0), unit("LKFS", 0, 0)];
        const SHARE: &[Unit] = &[unit("%", -2, 0)];
        const SLEW: &[Unit] = &[
            unit("V/s", 0, 1),
            unit("V/ms", 3, 1),
            unit("V/µs", 6, 1),
            unit("V/us", 6, 1),
            unit("V/ns", 9, 1),
        ];
        const VOLT_NOISE: &[Unit] = &[unit("V/√Hz", 0, 1)];
        const AMPERE_NOISE: &[Unit] = &[unit("A/√Hz", 0, 1)];
        const CN2: &[Unit] = &[unit("m-2/3", 0, 0), unit("m(-2/3)", 0, 0)];
        const SPEED: &[Unit] = &[unit("m/s", 0, 1)];
        match self {
            Self::Volt => VOLT,
            Self::Ampere => AMPERE,
            Self::Ohm => OHM,
            Self::Farad => FARAD,
            Self::Hertz => HERTZ,
            Self::Second => SECOND,
            Self::Metre => METRE,
            Self::SquareMetre => SQUARE,
            Self::CubicMetre => CUBIC,
            Self::Watt => WATT,
            Self::Irradiance => IRRADIANCE,
            Self::SpectralIrradiance => SPECTRAL,
            Self::Responsivity => RESPONSIVITY,
            Self::Transconductance => TRANSCONDUCTANCE,
            Self::Kelvin => KELVIN,
            Self::KelvinPerWatt => THERMAL,
            Self::PerKelvin => PER_KELVIN,
            Self::Angle => RADIAN,
            Self::Decibel => DECIBEL,
            Self::DecibelPerHertz => PER_HERTZ,
            Self::DecibelPerMetre | Self::DecibelPerKilometre => PER_METRE,
            Self::Loudness => LOUDNESS,
            Self::Share => SHARE,
            Self::SlewRate => SLEW,
            Self::VoltNoise => VOLT_NOISE,
            Self::AmpereNoise => AMPERE_NOISE,
            Self::Cn2 => CN2,
            Self::Speed => SPEED,
            Self::Number | Self::Count => &[],
        }
    }
}

impl std::fmt::Display for Dimension {
    fn fmt(&self, f: &mut std::fmt::Formatter<'_>) -> std::fmt::Result {
        match self.unit() {
            "" => f.write_str(self.name()),
            unit => write!(f, "{} ({unit})", self.name()),
        }
    }
}
