//! The length unit of a drawing.

use super::note::Note;
use crate::tolerance;
use crate::units::{Insunits, LengthUnit, insunits};

/// Where the unit came from.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum UnitSource {
    /// `[drawing] unit` of the job.
    Job,
    /// The header variable `$INSUNITS`.
    Insunits,
    /// Assumed, from `$MEASUREMENT` (metric or English) and the size of the axis.
    Measurement,
    /// Assumed, from the size of the axis alone.
    Assumed,
}

impl UnitSource {
    /// As the results name it.
    pub fn name(self) -> &'static str {
        match self {
            Self::Job => "job",
            Self::Insunits => "$INSUNITS",
            Self::Measurement => "$MEASUREMENT",
            Self::Assumed => "assumed",
        }
    }
}

/// The unit of a drawing.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Unit {
    /// Its sign, such as `mm`.
    pub name: &'static str,
    /// Metres of the real thing in one drawing unit: the unit times the drawing's scale.
    pub metres: f64,
    /// Where it came from.
    pub source: UnitSource,
}

/// Why a drawing needs an assumption.
#[derive(Debug, Clone, PartialEq, Eq)]
pub enum NoUnit {
    /// The header has no `$INSUNITS`, or it says "no unit".
    Unstated,
    /// `$INSUNITS` names a unit in which no bridge is drawn, or none that exists.
    Unusable(i64, &'static str),
}

/// The unit by the job, else by `$INSUNITS`, else assumed: a metric drawing whose axis is 1000 drawing units wide or more
/// is in millimetres, else in metres; an English one whose axis is 1500 or more wide is in inches, else in feet. Without
/// `$MEASUREMENT` a drawing is taken for metric.
///
/// `width` is the horizontal extent of the axis in drawing units, `scale` the real length over the drawn one.
pub fn decide(
    job: Option<LengthUnit>,
    scale: f64,
    insunits_code: Option<i64>,
    measurement: Option<i64>,
    width: f64,
    notes: &mut Vec<Note>,
) -> Unit {
    if let Some(unit) = job {
        return Unit { name: unit.name(), metres: unit.metres() * scale, source: UnitSource::Job };
    }
    let why = match insunits_code.map(|code| (code, insunits(code))) {
        Some((_, Insunits::Known { name, metres })) => {
            return Unit { name, metres: metres * scale, source: UnitSource::Insunits };
        }
        Some((code, Insunits::Refused { name })) => NoUnit::Unusable(code, name),
        Some((_, Insunits::Unitless)) | None => NoUnit::Unstated,
    };
    let (source, english) = match measurement {
        Some(0) => (UnitSource::Measurement, true),
        Some(1) => (UnitSource::Measurement, false),
        _ => (UnitSource::Assumed, false),
    };
    let unit = match (english, width) {
        (true, w) if w >= tolerance::INCHES_FROM => LengthUnit::In,
        (true, _) => LengthUnit::Ft,
        (false, w) if w >= tolerance::MILLIMETRES_FROM => LengthUnit::Mm,
        (false, _) => LengthUnit::M,
    };
    notes.push(Note::UnitAssumed { unit, why, source, width });
    Unit { name: unit.name(), metres: unit.metres() * scale, source }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn unit(
        job: Option<LengthUnit>,
        ins: Option<i64>,
        measurement: Option<i64>,
        width: f64,
    ) -> (Unit, usize) {
        let mut notes = Vec::new();
        let unit = decide(job, 1.0, ins, measurement, width, &mut notes);
        (unit, notes.len())
    }

    #[test]
    fn job_then_header_then_size() {
        let (u, n) = unit(Some(LengthUnit::Ft), Some(4), Some(1), 40.0);
        assert_eq!((u.name, u.source, n), ("ft", UnitSource::Job, 0));
        let (u, n) = unit(None, Some(4), Some(0), 40.0);
        assert_eq!((u.name, u.source, n), ("mm", UnitSource::Insunits, 0));
        let (u, n) = unit(None, Some(0), Some(1), 40.0);
        assert_eq!((u.name, u.source, n), ("m", UnitSource::Measurement, 1));
        let (u, n) = unit(None, None, None, 40_000.0);
        assert_eq!((u.name, u.source, n), ("mm", UnitSource::Assumed, 1));
        let (u, n) = unit(None, Some(18), Some(0), 130.0);
        assert_eq!((u.name, u.source, n), ("ft", UnitSource::Measurement, 1));
        let (u, n) = unit(None, Some(21), None, 130.0);
        assert_eq!((u.name, n), ("US survey foot", 0));
    }

    #[test]
    fn scale_multiplies() {
        let mut notes = Vec::new();
        let u = decide(Some(LengthUnit::Mm), 50.0, None, None, 800.0, &mut notes);
        assert!((u.metres - 0.05).abs() < 1e-15);
    }
}
