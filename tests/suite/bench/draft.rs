//! Designs as text, section by section.

use std::path::Path;

use harklight::design::{Design, DesignError};
use harklight::link::Link;

/// An op-amp without limits and without noise, as keys of a section.
pub const IDEAL_OPAMP: &str = r#"gbw = "inf"
slew = "inf"
noise_voltage = 0
noise_voltage_corner = 0
noise_current = 0
noise_current_corner = 0
swing_low = 0
swing_high = 0
output_current = "inf"
offset = 0
bias_current = 0
input_capacitance = 0
"#;

/// A design on its way: sections as text, then edits.
#[derive(Debug, Clone)]
pub struct Draft {
    transmitter: String,
    driver: String,
    emitter: String,
    path: String,
    extra: String,
    detector: String,
    front_end: String,
    receiver: String,
    edits: Vec<String>,
}

impl Draft {
    /// 10 mA moved by 1 mA/V; 10 µW at 10 mA on a straight line, all of it caught by 1 A/W; 100 kΩ of transimpedance: 1 V at
    /// rest and a tenth of the source's volts at the output. Nothing is noisy but the 100 kΩ and the light itself.
    pub fn ideal() -> Self {
        Self {
            transmitter: String::new(),
            driver: r#"kind = "current-sink"
supply = "1 MV"
bias = "10 mA"
slope = "1 mA/V"
sense = 0
saturation = 0
"#
            .into(),
            emitter: r#"wavelength = "940 nm"
linewidth = 0
flux = "10 µW"
at_current = "10 mA"
low_current = 0
droop_current = "inf"
saturation_current = "1 pA"
ideality = 1
series_resistance = 0
half_angle = "60°"
bandwidth = "inf"
thermal_resistance = 0
thermal_time = 0
flux_temperature = 0
max_current = "inf"
"#
            .into(),
            path: "kind = \"air\"\ndistance = \"1 m\"\n".into(),
            extra: String::new(),
            detector: r#"kind = "photodiode"
area = "1 cm²"
responsivity = "1 A/W"
dark_current = 0
capacitance = 0
built_in = "0.6 V"
grading = 0.5
saturation_current = "1e-30 A"
ideality = 1
"#
            .into(),
            front_end: format!(
                r#"kind = "transimpedance"
supply = ["-1 kV", "1 kV"]
bias = "5 V"
feedback = "100 kΩ"
feedback_capacitor = 0
{IDEAL_OPAMP}"#
            ),
            receiver: String::new(),
            edits: Vec::new(),
        }
    }

    /// `[[transmitter.stage]]` sections, headers included.
    pub fn transmitter(mut self, stages: &str) -> Self {
        self.transmitter = stages.into();
        self
    }

    /// `[[receiver.stage]]` sections, headers included.
    pub fn receiver(mut self, stages: &str) -> Self {
        self.receiver = stages.into();
        self
    }

    /// Keys of `[transmitter.driver]`.
    pub fn driver(mut self, keys: &str) -> Self {
        self.driver = keys.into();
        self
    }

    /// Keys of `[transmitter.emitter]`.
    pub fn emitter(mut self, keys: &str) -> Self {
        self.emitter = keys.into();
        self
    }

    /// Keys of `[path]`.
    pub fn path(mut self, keys: &str) -> Self {
        self.path = keys.into();
        self
    }

    /// Keys of `[receiver.detector]`.
    pub fn detector(mut self, keys: &str) -> Self {
        self.detector = keys.into();
        self
    }

    /// Keys of `[receiver.front_end]`.
    pub fn front_end(mut self, keys: &str) -> Self {
        self.front_end = keys.into();
        self
    }

    /// Further sections, headers included: lamps, interruptions, optics.
    pub fn with(mut self, sections: &str) -> Self {
        self.extra.push_str(sections);
        self.extra.push('\n');
        self
    }

    /// One edit, `path=value`.
    pub fn set(mut self, edit: impl Into<String>) -> Self {
        self.edits.push(edit.into());
        self
    }

    /// The text before the edits.
    pub fn text(&self) -> String {
        // Four square metres at one metre: more than the beam holds, so all of it is caught.
        format!(
            r#"[source]
full_scale = "1 V"
resistance = 0

{}
[transmitter.driver]
{}
[transmitter.emitter]
{}
[path]
{}
{}
[receiver.optics]
area = "4 m²"

[receiver.detector]
{}
[receiver.front_end]
{}
{}
[output]
kind = "line"
full_scale = "1 V"
"#,
            self.transmitter,
            self.driver,
            self.emitter,
            self.path,
            self.extra,
            self.detector,
            self.front_end,
            self.receiver
        )
    }

    /// The design, or what is wrong with it.
    pub fn try_design(&self) -> Result<Design, DesignError> {
        Design::from_text("draft.toml", &self.text(), Path::new("."), &self.edits)
    }

    /// The design.
    pub fn design(&self) -> Design {
        self.try_design()
            .unwrap_or_else(|e| panic!("{:?}\n{}", miette::Report::new(e), self.text()))
    }

    /// The link.
    pub fn link(&self) -> Link {
        Link::new(&self.design()).unwrap_or_else(|e| panic!("{:?}", miette::Report::new(e)))
    }
}
