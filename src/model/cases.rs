//! Load cases: which factor each part of what acts has in each of them.

use std::collections::BTreeMap;

use super::Model;
use crate::job::{Pattern, Settings, best_match};
use crate::refusal::Refusal;

/// The name of the one case that a job without cases has.
pub const DRAWN: &str = "drawn";

/// What the rib's own weight is called in a case.
pub const OWN_WEIGHT: &str = "self";

/// One load case of a drawing.
#[derive(Debug, Clone, PartialEq)]
pub struct Case {
    /// Its name.
    pub name: String,
    /// Factor of each part by its name: load layers as the drawing spells them, `self`, areas. What is left out has 0.
    pub factors: BTreeMap<String, f64>,
    /// Parts that the load factor multiplies.
    pub varies: Vec<String>,
    /// Parts that act in the drawing and are not named in the case, or have the factor 0.
    pub left_out: Vec<String>,
    /// Names in the case that stand for nothing in this drawing.
    pub unknown: Vec<String>,
}

impl Case {
    /// Factor of a part.
    pub fn factor(&self, part: &str) -> f64 {
        self.factors.get(part).copied().unwrap_or(0.0)
    }

    /// Whether the load factor multiplies a part.
    pub fn varies(&self, part: &str) -> bool {
        self.varies.iter().any(|v| v == part)
    }
}

/// What acts in a drawing: the layers of its loads, the rib's own weight, areas.
pub fn parts(model: &Model, settings: &Settings) -> Vec<String> {
    let mut parts: Vec<String> =
        model.spans.iter().flat_map(|s| &s.loads).chain(&model.off_span).map(|l| l.set.clone()).collect();
    parts.extend(model.spans.iter().flat_map(|s| &s.line_loads).map(|l| l.set.clone()));
    if model.own_weight(settings).is_some() {
        parts.push(OWN_WEIGHT.into());
    }
    parts.extend(model.areas.iter().map(|a| a.name.clone()));
    parts.sort();
    parts.dedup();
    parts
}

/// The cases of a job for a drawing; without any, one of everything as drawn.
///
/// # Errors
/// When two patterns of a case stand for one layer.
pub fn cases(model: &Model, settings: &Settings) -> Result<Vec<Case>, Refusal> {
    let parts = parts(model, settings);
    if settings.case.is_empty() {
        return Ok(vec![Case {
            name: DRAWN.into(),
            factors: parts.iter().map(|p| (p.clone(), 1.0)).collect(),
            varies: Vec::new(),
            left_out: Vec::new(),
            unknown: Vec::new(),
        }]);
    }
    let named_only = |part: &str| part == OWN_WEIGHT || model.areas.iter().any(|a| a.name == part);
    settings
        .case
        .iter()
        .map(|stated| {
            let keys: Vec<Pattern> = stated.factors.keys().map(Pattern::new).collect();
            let values: Vec<f64> = stated.factors.values().copied().collect();
            let vary: Vec<Pattern> = stated.vary.iter().map(Pattern::new).collect();
            let mut used = vec![false; keys.len()];
            let mut varying = vec![false; vary.len()];
            let mut case = Case {
                name: stated.name.clone(),
                factors: BTreeMap::new(),
                varies: Vec::new(),
                left_out: Vec::new(),
                unknown: Vec::new(),
            };
            for part in &parts {
                let factor = match find(part, named_only(part), &keys, &stated.name)? {
                    Some(place) => {
                        used[place] = true;
                        values[place]
                    }
                    None => 0.0,
                };
                if factor.abs() > 0.0 {
                    case.factors.insert(part.clone(), factor);
                    if let Some(place) = find(part, named_only(part), &vary, &stated.name)? {
                        varying[place] = true;
                        case.varies.push(part.clone());
                    }
                } else {
                    case.left_out.push(part.clone());
                }
            }
            let unused = |patterns: &[Pattern], used: &[bool]| -> Vec<String> {
                patterns.iter().zip(used).filter(|p| !p.1).map(|p| p.0.as_str().to_owned()).collect()
            };
            case.unknown = unused(&keys, &used);
            for name in unused(&vary, &varying) {
                if !case.unknown.contains(&name) {
                    case.unknown.push(name);
                }
            }
            Ok(case)
        })
        .collect()
}

/// The entry that stands for a part; the rib's own weight and areas only by their own names.
fn find(part: &str, by_name: bool, entries: &[Pattern], case: &str) -> Result<Option<usize>, Refusal> {
    if by_name {
        return Ok(entries.iter().position(|e| e.is_exact() && e.matches(part)));
    }
    best_match(part, entries).map_err(|two| {
        let [a, b] = two.entries.map(|i| entries[i].as_str().to_owned());
        Refusal::new(
            "case-names",
            format!("case {case}: \"{a}\" and \"{b}\" both stand for layer {part}"),
            "Name the layer itself: a name beats a pattern",
        )
        .on_layer(part)
    })
}
