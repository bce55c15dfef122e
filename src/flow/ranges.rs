//! Worst and best factors over the ranges that the job states, and the least thickness: what takes more than one analysis.

use std::collections::BTreeMap;

use super::{piers, problem};
use crate::job::{RibDepth, Settings, same_name};
use crate::model::{Case, Forces, Model, Span, areas, cases};
use crate::outcome::{RangeInput, RangedFactor, RangedValue, Ranges, Status};
use crate::refusal::Refusal;
use crate::statics::range::{self, Effect, Found, Input};
use crate::statics::{self, Analysis, Factor, LineKind};
use crate::verdict::Extra;

/// Ranges that one job may state: every one doubles the corners.
const MOST: usize = 8;

/// The extras of one span in one case.
///
/// # Errors
/// When a range has no value of its own to stand beside, or the span cannot be analysed at a corner of the ranges.
pub fn extra(
    model: &Model,
    span: &Span,
    case: &Case,
    settings: &Settings,
    analysis: &Analysis,
) -> Result<Extra, Refusal> {
    let thickness = match &analysis.safety {
        Some(_) => {
            let problem = problem::problem(model, span, case, settings)?;
            Some(statics::least_thickness(&problem).map_err(|u| problem::refusal(span, case, &u))?)
        }
        None => None,
    };
    let ranges = match settings.range.is_empty() {
        true => None,
        false => Some(ranges(model, span, case, settings, analysis)?),
    };
    let pushes = piers::pushes(model, span, case, settings, analysis)?;
    Ok(Extra { thickness, ranges, pushes })
}

/// The factors that ranges are worked out for.
const FACTORS: [(&str, Kind); 3] = [
    ("geometric_factor", Kind::Geometric),
    ("load_factor", Kind::Load),
    ("load_factor_least", Kind::LoadLeast),
];

#[derive(Debug, Clone, Copy, PartialEq, Eq)]
enum Kind {
    Geometric,
    Load,
    LoadLeast,
}

/// Why a factor has no value that could be the worst.
enum Stop {
    Refusal(Refusal),
    Factor(String),
}

/// Factors at one point of the ranges.
type Values = [Option<Factor>; 3];

fn ranges(
    model: &Model,
    span: &Span,
    case: &Case,
    settings: &Settings,
    analysis: &Analysis,
) -> Result<Ranges, Refusal> {
    let n = settings.range.len();
    if n > MOST {
        return Err(refuse(
            settings,
            MOST,
            format!(
                "{n} ranges are stated, and the factors are worked out for every corner of at most {MOST}"
            ),
            "Keep the ranges that matter most.",
        ));
    }
    let mut inputs = Vec::with_capacity(n);
    for (i, range) in settings.range.iter().enumerate() {
        if settings.range[..i].iter().any(|other| same_name(&other.what, &range.what)) {
            return Err(refuse(settings, i, format!("{} has two ranges", range.what), "Keep one of them."));
        }
        let (stated, unit) = stated(settings, &range.what).map_err(|(message, remedy)| {
            refuse(settings, i, format!("{} has a range and {message}", range.what), remedy)
        })?;
        let idle = idle(model, span, settings, analysis, &range.what);
        inputs.push(RangeInput {
            what: range.what.clone(),
            low: range.low,
            high: range.high,
            stated,
            unit,
            idle,
        });
    }
    let mut known: BTreeMap<Vec<u64>, Values> = BTreeMap::new();
    let mut at = |x: &[f64]| -> Result<Values, Refusal> {
        let key: Vec<u64> = x.iter().map(|v| v.to_bits()).collect();
        if let Some(values) = known.get(&key) {
            return Ok(values.clone());
        }
        let mut varied = settings.clone();
        for (input, &value) in inputs.iter().zip(x).filter(|(input, _)| input.idle.is_none()) {
            set(&mut varied, &input.what, value);
        }
        let standing;
        let model = if settings.area.is_empty() {
            model
        } else {
            standing = Model { areas: areas::weigh(model, &varied)?, ..model.clone() };
            &standing
        };
        let mut problem = problem::problem(model, span, case, &varied)?;
        problem.govern = Some(LineKind::Closest);
        problem.draw.clear();
        let safety = statics::analyse(&problem).map_err(|u| problem::refusal(span, case, &u))?.safety;
        let values = match safety {
            Some(s) => [Some(s.geometric), s.load, s.load_least],
            None => [None, None, None],
        };
        known.insert(key, values.clone());
        Ok(values)
    };
    let mut factors = Vec::new();
    for (index, (name, kind)) in FACTORS.into_iter().enumerate() {
        let boxed: Vec<Input> = inputs
            .iter()
            .map(|input| Input {
                low: input.low,
                high: input.high,
                effect: effect(case, settings, input, kind),
            })
            .collect();
        let first: Vec<f64> = boxed.iter().map(|input| input.low).collect();
        if at(&first)?[index].is_none() {
            continue;
        }
        // The least load factor is the worse the greater it is.
        let sign = if kind == Kind::LoadLeast { -1.0 } else { 1.0 };
        let found = range::extremes(&boxed, &mut |x| {
            let factor = at(x).map_err(Stop::Refusal)?[index].clone();
            score(factor, sign)
        });
        let told = |e: &range::Extreme| {
            let (status, value) = match e.value * sign {
                v if v.is_finite() => (Status::Found, Some(v)),
                _ if e.value > 0.0 => (Status::Unbounded, None),
                _ => (Status::None, None),
            };
            RangedValue {
                status,
                value,
                reason: None,
                inputs: inputs
                    .iter()
                    .zip(&boxed)
                    .zip(&e.at)
                    .filter(|((_, b), _)| b.effect != Effect::None)
                    .map(|((input, _), v)| (input.what.clone(), *v))
                    .collect(),
                found: match e.found {
                    Found::Corners => "corners",
                    Found::Sampling => "sampling",
                }
                .into(),
            }
        };
        let (worst, best) = match &found {
            Ok((worst, best)) => (told(worst), told(best)),
            Err(Stop::Refusal(refusal)) => return Err(refusal.clone()),
            Err(Stop::Factor(reason)) => {
                let none = RangedValue {
                    status: Status::Refused,
                    value: None,
                    reason: Some(reason.clone()),
                    inputs: BTreeMap::new(),
                    found: "corners".into(),
                };
                (none.clone(), none)
            }
        };
        factors.push(RangedFactor { name: name.into(), worst, best });
    }
    Ok(Ranges { inputs, factors })
}

fn score(factor: Option<Factor>, sign: f64) -> Result<f64, Stop> {
    match factor {
        Some(Factor { status: statics::Status::Found, value: Some(value), .. }) => Ok(sign * value),
        Some(Factor { status: statics::Status::Unbounded, .. }) => Ok(f64::INFINITY),
        Some(Factor { status: statics::Status::None, .. }) => Ok(f64::NEG_INFINITY),
        Some(Factor { reason, .. }) => {
            Err(Stop::Factor(reason.unwrap_or_else(|| "it was not found at every corner".into())))
        }
        None => Err(Stop::Factor("there is no such factor at every corner".into())),
    }
}

/// The value that the run as such has for an input, and its unit.
fn stated(settings: &Settings, what: &str) -> Result<(f64, String), (String, &'static str)> {
    let rib = &settings.rib;
    let give = "State it as well: the lines are drawn for that value, the range gives the worst and the best beside it.";
    let some = |value: Option<f64>, unit: &str| match value {
        Some(value) => Ok((value, unit.to_owned())),
        None => Err(("no value of its own".to_owned(), give)),
    };
    let (table, key) = what.rsplit_once('.').unwrap_or(("", what));
    if table != "rib" {
        let area = settings.area.iter().find(|a| same_name(&a.name, table));
        return match key {
            "level" => some(area.and_then(|a| a.level), "m"),
            _ => some(area.map(|a| a.unit_weight), "kN/m³"),
        };
    }
    match key {
        "depth" => match rib.depth {
            Some(RibDepth::Constant(d)) => Ok((d, "m".into())),
            Some(RibDepth::Linear(_)) => Err((
                "two values, at springing and crown".to_owned(),
                "State one depth, or remove the range: one number does not say which of the two it is.",
            )),
            None => some(None, "m"),
        },
        "width" => some(rib.width, "m"),
        "unit_weight" => some(rib.unit_weight, "kN/m³"),
        "strength" => some(rib.strength, "MPa"),
        "friction" => some(rib.friction, ""),
        "joint_loss" => Ok((rib.joint_loss, "m".into())),
        "backing" => some(rib.backing, "m"),
        "elastic_modulus" => some(rib.elastic_modulus, "MPa"),
        "creep" => Ok((rib.creep, String::new())),
        "imperfection" => some(rib.imperfection, "m"),
        "deck_inertia" => Ok((rib.deck_inertia, "m⁴".into())),
        "deck_modulus" => some(rib.deck_modulus, "MPa"),
        "temperature" => Ok((rib.temperature, "K".into())),
        "expansion" => some(rib.expansion, "1/K"),
        "shrinkage" => Ok((rib.shrinkage, String::new())),
        _ => some(None, ""),
    }
}

/// Puts a value in its place; as [`stated`] knows them.
fn set(settings: &mut Settings, what: &str, value: f64) {
    let (table, key) = what.rsplit_once('.').unwrap_or(("", what));
    if table != "rib" {
        if let Some(area) = settings.area.iter_mut().find(|a| same_name(&a.name, table)) {
            match key {
                "level" => area.level = Some(value),
                _ => area.unit_weight = value,
            }
        }
        return;
    }
    let rib = &mut settings.rib;
    match key {
        "depth" => rib.depth = Some(RibDepth::Constant(value)),
        "width" => rib.width = Some(value),
        "unit_weight" => rib.unit_weight = Some(value),
        "strength" => rib.strength = Some(value),
        "friction" => rib.friction = Some(value),
        "joint_loss" => rib.joint_loss = value,
        _ => {}
    }
}

/// Why no factor depends on an input here.
fn idle(model: &Model, span: &Span, settings: &Settings, analysis: &Analysis, what: &str) -> Option<String> {
    if analysis.safety.is_none() {
        return Some("factors are those of a ring without tension whose depth is known".into());
    }
    let sized = model.forces == Forces::Kilonewtons;
    let (table, key) = what.rsplit_once('.').unwrap_or(("", what));
    let weighs = model.own_weight(settings).is_some();
    let lends = settings.area.iter().any(|a| a.width.is_none());
    match (table, key) {
        ("rib", "depth") if settings.rib.backing.is_some() => Some(
            "the ring was cut at its backing for the depth stated, and is not cut anew for another".into(),
        ),
        ("rib", "depth") if span.ring.is_some() => Some("the depth was read from the ring lines".into()),
        ("rib", "unit_weight" | "strength" | "width") if !sized => {
            Some("beside loads of unknown size it has no measure".into())
        }
        ("rib", "unit_weight") if !weighs => Some("the rib was stated without weight".into()),
        ("rib", "width") if !weighs && !lends && settings.rib.strength.is_none() => {
            Some("neither weight nor strength of the rib counts".into())
        }
        // The spans were cut there before anything was worked out, and are not cut anew.
        ("rib", "backing") => {
            Some("the ring was cut at the level stated, and is not cut anew for another".into())
        }
        ("rib", "depth" | "width" | "unit_weight" | "strength" | "friction" | "joint_loss") => None,
        ("rib", _) => {
            Some("it counts in the elastic line, and not in a factor of a ring without tension".into())
        }
        _ if !sized => Some("beside loads of unknown size it has no measure".into()),
        _ => None,
    }
}

/// How a factor answers to an input; the reasons stand with [`range`].
fn effect(case: &Case, settings: &Settings, input: &RangeInput, kind: Kind) -> Effect {
    if input.idle.is_some() {
        return Effect::None;
    }
    let (table, key) = input.what.rsplit_once('.').unwrap_or(("", &input.what));
    // Cases know an area by its own spelling.
    let table = settings.area.iter().find(|a| same_name(&a.name, table)).map_or(table, |a| a.name.as_str());
    // Weights that the load factor multiplies meet it in a product.
    let scaled = |part: &str| {
        if case.varies(part) && kind != Kind::Geometric { Effect::Unknown } else { Effect::QuasiConcave }
    };
    let own = settings.rib.unit_weight.is_some_and(|w| w > 0.0) && case.factor(cases::OWN_WEIGHT).abs() > 0.0;
    match (table, key) {
        ("rib", "strength" | "friction") if kind == Kind::Geometric => Effect::None,
        ("rib", "strength" | "friction") => Effect::Rising,
        ("rib", "unit_weight") if !own => Effect::None,
        ("rib", "unit_weight") => scaled(cases::OWN_WEIGHT),
        ("rib", "width") if settings.area.iter().any(|a| a.width.is_none() && case.varies(&a.name)) => {
            Effect::Unknown
        }
        ("rib", "width") if own => scaled(cases::OWN_WEIGHT),
        ("rib", "width") if settings.area.iter().any(|a| a.width.is_none()) => Effect::QuasiConcave,
        ("rib", "width") if kind == Kind::Geometric => Effect::None,
        ("rib", "width") => Effect::Rising,
        ("rib", "depth") if !own && settings.area.is_empty() => Effect::Rising,
        ("rib", _) => Effect::Unknown,
        (area, _) if case.factor(area).abs() <= 0.0 => Effect::None,
        // Fill that the extrados rises through does not grow in proportion.
        (_, "level") => Effect::Unknown,
        (area, _) => scaled(area),
    }
}

/// A refusal that names the range.
fn refuse(settings: &Settings, place: usize, message: String, remedy: &str) -> Refusal {
    let mut refusal = Refusal::new("job-range", message, remedy);
    refusal.line = settings.line_of(&format!("range[{place}].what"));
    match &settings.origin.file {
        Some(file) => refusal.in_file(file),
        None => refusal,
    }
}
