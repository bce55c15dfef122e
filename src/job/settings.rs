//! The settings in force for one drawing, table by table, as the job file states them.
//!
//! Lengths in m, forces in kN, stresses in MPa, unit weights in kN/m³ unless said otherwise. `None` means *not given*.
//! Serialised, what was not given is absent.

use std::collections::BTreeMap;
use std::path::PathBuf;

use serde::{Serialize, Serializer};

use super::actions::{Area, Case, Range, Traffic};
use super::choice::{Choice, choice};
use super::layers::{Layers, Patterns, Role};
use super::limits::{Accept, Limits};
use super::rib::Rib;
use crate::units::{ForceUnit, LengthUnit};

/// Everything that the job says about one drawing.
#[derive(Debug, Clone, PartialEq, Default, Serialize)]
pub struct Settings {
    /// Where the settings came from.
    #[serde(skip)]
    pub origin: Origin,
    /// `[drawing]`
    pub drawing: Drawing,
    /// `[layers]`
    pub layers: Layers,
    /// `[rib]`
    pub rib: Rib,
    /// `[loads]`
    pub loads: Loads,
    /// `[[area]]`
    #[serde(skip_serializing_if = "Vec::is_empty")]
    pub area: Vec<Area>,
    /// `[[case]]`; empty: one case `drawn` with all factors 1.
    #[serde(skip_serializing_if = "Vec::is_empty")]
    pub case: Vec<Case>,
    /// `[[traffic]]`
    #[serde(skip_serializing_if = "Vec::is_empty")]
    pub traffic: Vec<Traffic>,
    /// `[[range]]`
    #[serde(skip_serializing_if = "Vec::is_empty")]
    pub range: Vec<Range>,
    /// `[line]`
    pub line: Line,
    /// `[limits]`
    pub limits: Limits,
    /// `[accept]`
    pub accept: Accept,
    /// `[mark]`
    pub mark: Mark,
    /// `[title]`
    pub title: Title,
    /// `[report]`
    pub report: Report,
}

/// Where settings came from.
#[derive(Debug, Clone, PartialEq, Eq, Default)]
pub struct Origin {
    /// The job file; `None` without one.
    pub file: Option<PathBuf>,
    /// SHA-256 of the bytes of the job file, lower-case hexadecimal; `None` without one.
    pub sha256: Option<String>,
    /// The `match` patterns of the `[[sheet]]` tables that applied, in their order.
    pub sheets: Vec<String>,
    /// Line of every key that was stated, by its path (`rib.depth`, `accept.finding[0].check`).
    pub lines: BTreeMap<String, u64>,
}

impl Settings {
    /// Line of the job file that states the key with this path, such as `rib.depth`; `None` when it is a default.
    pub fn line_of(&self, path: &str) -> Option<u64> {
        self.origin.lines.get(path).copied()
    }

    /// Whether the job file states the key with this path.
    pub fn states(&self, path: &str) -> bool {
        self.line_of(path).is_some()
    }

    /// The settings in force as JSON, keys in a fixed order; what was not given is absent.
    pub fn to_json(&self) -> serde_json::Value {
        // Cannot fail: every key is a text and every number was checked to be finite. Should a later type break that,
        // the results show null and the tests of this function fail.
        serde_json::to_value(self).unwrap_or_default()
    }

    /// The settings in force as a job file; reading it gives equal settings. Every key is stated but the layers that
    /// nobody stated: a stated layer must be in the drawing, a default one need not, and the written job has to give
    /// the same run again.
    pub fn to_toml(&self) -> String {
        let default = Layers::default();
        let layers = Role::NAMES
            .iter()
            .filter(|&&(name, role)| {
                self.states(&format!("layers.{name}")) || self.layers.of(role) != default.of(role)
            })
            .map(|&(name, role)| (name, self.layers.of(role)))
            .collect();
        let written = Written {
            drawing: &self.drawing,
            layers,
            rib: &self.rib,
            loads: &self.loads,
            area: &self.area,
            case: &self.case,
            traffic: &self.traffic,
            range: &self.range,
            line: &self.line,
            limits: &self.limits,
            accept: &self.accept,
            mark: &self.mark,
            title: &self.title,
            report: &self.report,
        };
        // Cannot fail, for the same reasons as above.
        toml::to_string(&written).unwrap_or_default()
    }
}

/// [`Settings`] with only some of the layers.
#[derive(Serialize)]
struct Written<'a> {
    drawing: &'a Drawing,
    layers: BTreeMap<&'static str, &'a Patterns>,
    rib: &'a Rib,
    loads: &'a Loads,
    #[serde(skip_serializing_if = "<[_]>::is_empty")]
    area: &'a [Area],
    #[serde(skip_serializing_if = "<[_]>::is_empty")]
    case: &'a [Case],
    #[serde(skip_serializing_if = "<[_]>::is_empty")]
    traffic: &'a [Traffic],
    #[serde(skip_serializing_if = "<[_]>::is_empty")]
    range: &'a [Range],
    line: &'a Line,
    limits: &'a Limits,
    accept: &'a Accept,
    mark: &'a Mark,
    title: &'a Title,
    report: &'a Report,
}

choice! {
    /// Vertical plane of the elevation in a drawing's own axes.
    Plane {
        /// Found out from the drawing.
        Auto = "auto",
        /// x to the right, y upward.
        Xy = "xy",
        /// x to the right, z upward.
        Xz = "xz",
        /// y to the right, z upward.
        Yz = "yz",
    }
}

/// `[drawing]`
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Drawing {
    /// Unit of the drawing; `None`: what the drawing says.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub unit: Option<LengthUnit>,
    /// Real length over drawn length.
    pub scale: f64,
    /// Plane of the elevation.
    pub plane: Plane,
}

impl Default for Drawing {
    fn default() -> Self {
        Self { unit: None, scale: 1.0, plane: Plane::Auto }
    }
}

/// A force of the job: a number in `[loads] unit`, or one with its own unit.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct JobForce {
    /// The number as written.
    pub value: f64,
    /// Its own unit; `None`: in `[loads] unit`.
    pub unit: Option<ForceUnit>,
}

impl Serialize for JobForce {
    fn serialize<S: Serializer>(&self, serializer: S) -> Result<S::Ok, S::Error> {
        match self.unit {
            None => serializer.serialize_f64(self.value),
            Some(unit) => serializer.collect_str(&format_args!("{} {unit}", self.value)),
        }
    }
}

choice! {
    /// Decimal sign of the figures on labels.
    Decimal {
        /// Either; a lone separator before exactly three digits is an error.
        Auto = "auto",
        /// A comma.
        Comma = ",",
        /// A point.
        Point = ".",
    }
}

/// `[loads]`
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Loads {
    /// Unit of figures that state none.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub unit: Option<ForceUnit>,
    /// Force of a load with no figure.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub unlabelled: Option<JobForce>,
    /// Length of an arrow per unit of force, m.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub arrow_scale: Option<f64>,
    /// Decimal sign of the labels.
    pub decimal: Decimal,
}

impl Default for Loads {
    fn default() -> Self {
        Self { unit: None, unlabelled: None, arrow_scale: None, decimal: Decimal::Auto }
    }
}

impl Loads {
    /// Force of a load with no figure, kN. `None` when it is not given, or when it states no unit and neither does
    /// `[loads]` (which settings from a job file never do: they are refused).
    pub fn unlabelled_kn(&self) -> Option<f64> {
        let force = self.unlabelled?;
        Some(force.unit.or(self.unit)?.to_kilonewtons(force.value))
    }
}

choice! {
    /// Which line of thrust governs.
    Govern {
        /// Chosen by the kind of rib.
        Auto = "auto",
        /// Least possible largest eccentricity over depth.
        Closest = "closest",
        /// Through three points.
        Through = "through",
        /// Least push inside the ring.
        LeastThrust = "least-thrust",
        /// Greatest push inside the ring.
        GreatestThrust = "greatest-thrust",
        /// Of the elastic arch.
        Elastic = "elastic",
    }
}

choice! {
    /// A line of thrust to draw beside the governing one.
    Draw {
        /// Least possible largest eccentricity over depth.
        Closest = "closest",
        /// Through three points.
        Through = "through",
        /// Least push inside the ring.
        LeastThrust = "least-thrust",
        /// Greatest push inside the ring.
        GreatestThrust = "greatest-thrust",
        /// Of the elastic arch.
        Elastic = "elastic",
    }
}

/// `[line]`
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Line {
    /// The governing line.
    pub govern: Govern,
    /// Lines drawn beside it, each once.
    pub draw: Vec<Draw>,
    /// Three points that are not in one straight line, m, in the drawing's origin; `None`: springings and crown.
    #[serde(serialize_with = "points_or_empty")]
    pub through: Option<[[f64; 2]; 3]>,
}

impl Default for Line {
    fn default() -> Self {
        Self { govern: Govern::Auto, draw: Vec::new(), through: None }
    }
}

fn points_or_empty<S: Serializer>(points: &Option<[[f64; 2]; 3]>, serializer: S) -> Result<S::Ok, S::Error> {
    points.as_ref().map_or(&[][..], |points| &points[..]).serialize(serializer)
}

/// Height of the texts of the mark. Serialised as a number or `auto`.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum TextHeight {
    /// From the viewports or the drawing's own texts.
    Auto,
    /// In the elevation, m.
    Metres(f64),
}

impl Serialize for TextHeight {
    fn serialize<S: Serializer>(&self, serializer: S) -> Result<S::Ok, S::Error> {
        match self {
            Self::Auto => serializer.serialize_str("auto"),
            Self::Metres(height) => serializer.serialize_f64(*height),
        }
    }
}

/// `[mark]`
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Mark {
    /// What the names of the new layers begin with.
    pub prefix: String,
    /// Whether the new layers are frozen.
    pub frozen: bool,
    /// Height of the texts.
    pub text_height: TextHeight,
    /// Whether the suggested axis is drawn on a layer that is switched off.
    pub suggest: bool,
}

impl Default for Mark {
    fn default() -> Self {
        Self { prefix: "THRUST-".to_owned(), frozen: false, text_height: TextHeight::Auto, suggest: false }
    }
}

/// `[title]`: attribute tags of the title block.
#[derive(Debug, Clone, PartialEq, Eq, Default, Serialize)]
pub struct Title {
    /// Of the sheet number.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub sheet: Option<String>,
    /// Of the revision.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub revision: Option<String>,
}

choice! {
    /// Units of report and terminal.
    ReportUnits {
        /// m, kN, MPa.
        Si = "si",
        /// kip and ft.
        Us = "us",
    }
}

/// `[report]`
#[derive(Debug, Clone, PartialEq, Eq, Serialize)]
pub struct Report {
    /// Units of report and terminal.
    pub units: ReportUnits,
}

impl Default for Report {
    fn default() -> Self {
        Self { units: ReportUnits::Si }
    }
}
