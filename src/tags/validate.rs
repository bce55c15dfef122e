//! What a strict reader demands of a drawing and lenient ones do not check.
//!
//! A drawing may break these rules before anything is added to it; what counts is that nothing added breaks one. So
//! either the problems of the source are held against those of the marked drawing ([`new_problems`]), or only what is
//! inserted is looked at, with what the outline of the source knows ([`check_inserted`]).

use std::collections::{HashMap, HashSet};

use crate::refusal::Refusal;
use crate::tags::codes::parse_handle;
use crate::tags::items::{Item, Items, Where};
use crate::tags::machine::Options;
use crate::tags::outline::{Outline, fold};
use crate::tags::place;
use crate::tags::scan::scan;
use crate::tags::source::{Edit, Source};
use crate::tags::tokens::{Form, SENTINEL, tokenize};

/// A rule that a record breaks.
#[derive(Debug, Clone, Copy, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum Rule {
    /// Two records have the same handle.
    HandleTwice,
    /// A record has no handle in a drawing whose records have them.
    HandleMissing,
    /// A handle is not below `$HANDSEED`.
    HandleNotBelowSeed,
    /// The owner (330) is no record of the drawing.
    OwnerMissing,
    /// The plot style, material or visual style (390, 347, 348) of a layer is no record of the drawing.
    StyleMissing,
    /// Extended data of an application that the table APPID does not list.
    ApplicationNotRegistered,
    /// An entity or table record without the subclass markers that R13 and later demand.
    MarkerMissing,
    /// A POLYLINE, or an INSERT with attributes, that no SEQEND ends.
    RunNotClosed,
    /// An entity on a layer that the table LAYER does not list.
    LayerMissing,
    /// A line type that the table LTYPE does not list.
    LineTypeMissing,
    /// The number of points (90) of an LWPOLYLINE is not the number of its points.
    PointCount,
}

/// One rule broken by one record.
#[derive(Debug, Clone, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct Problem {
    /// The rule.
    pub rule: Rule,
    /// Type of the record.
    pub kind: String,
    /// Its handle, as a number in capitals.
    pub handle: Option<String>,
    /// What exactly is missing or wrong: a name or a handle.
    pub detail: String,
    /// Line of the record; in a check of insertions, within the insertion.
    pub line: Option<u64>,
}

/// What the records are held against.
struct Known {
    rank: u32,
    seed: Option<u64>,
    handles: HashSet<u64>,
    /// Records of the drawing have handles.
    numbered: bool,
    applications: HashSet<String>,
    layers: HashSet<String>,
    line_types: HashSet<String>,
}

impl Known {
    fn of(outline: &Outline) -> Self {
        let mut known = Self {
            rank: outline.rank,
            seed: outline.handles.seed,
            handles: HashSet::new(),
            numbered: outline.numbered(),
            applications: HashSet::new(),
            layers: HashSet::new(),
            line_types: HashSet::new(),
        };
        for table in &outline.tables {
            let names = match table.name.as_str() {
                "APPID" => Some(&mut known.applications),
                "LAYER" => Some(&mut known.layers),
                "LTYPE" => Some(&mut known.line_types),
                _ => None,
            };
            if let Some(names) = names {
                names.extend(table.records.iter().map(|record| fold(&record.layer)));
            }
        }
        known
    }

    fn learn(&mut self, items: &[Item]) {
        for item in items {
            self.handles.extend(item.handle);
            let names = match item.kind.as_str() {
                "APPID" => &mut self.applications,
                "LAYER" => &mut self.layers,
                "LTYPE" => &mut self.line_types,
                _ => continue,
            };
            names.extend(item.name.iter().map(|name| fold(name)));
        }
    }
}

/// All rules that a drawing breaks. Takes memory for every record: some hundred bytes each.
///
/// # Errors
/// As [`scan`].
pub fn problems(source: &Source) -> Result<Vec<Problem>, Refusal> {
    let outline = scan(source, &Options { keep: None, hash: false })?;
    let mut items = Items::new(&outline.decoder, None);
    tokenize(source, &mut items)?;
    let items = items.finish();
    let mut known = Known::of(&outline);
    known.learn(&items);
    let mut problems = judge(&items, &known);
    problems.extend(twice(&items));
    Ok(problems)
}

/// The problems of the second list that the first does not have; lines do not count, for they move. A reference to a
/// record that is not there, copied from the source's own records, is no new problem.
pub fn new_problems(before: &[Problem], after: &[Problem]) -> Vec<Problem> {
    let key = |p: &Problem| (p.rule, p.kind.clone(), p.handle.clone(), p.detail.clone());
    let mut old: HashMap<_, usize> = HashMap::new();
    for problem in before {
        *old.entry(key(problem)).or_default() += 1;
    }
    let loose: HashSet<(Rule, &str)> = before
        .iter()
        .filter(|p| matches!(p.rule, Rule::OwnerMissing | Rule::StyleMissing))
        .map(|p| (p.rule, p.detail.as_str()))
        .collect();
    let is_new = |problem: &&Problem| match old.get_mut(&key(problem)) {
        Some(count) if *count > 0 => {
            *count -= 1;
            false
        }
        _ => !loose.contains(&(problem.rule, problem.detail.as_str())),
    };
    after.iter().filter(is_new).cloned().collect()
}

/// The rules that insertions break, told from the inserted bytes and the outline of the source alone; the rest of the
/// drawing is read only in the rare case that the new handles do not lie above all others.
///
/// # Errors
/// When the insertions are no tags, and as [`scan`].
pub fn check_inserted(source: &Source, outline: &Outline, edits: &[Edit]) -> Result<Vec<Problem>, Refusal> {
    let mut known = Known::of(outline);
    let seed = outline.header_value("$HANDSEED", 5);
    let mut items = Vec::new();
    for edit in edits {
        let in_seed = seed.is_some_and(|seed| seed.range.start <= edit.at && edit.at <= seed.range.end);
        if in_seed {
            known.seed = parse_handle(&edit.insert);
            continue;
        }
        let mut bytes = Vec::new();
        if outline.form != Form::Ascii {
            bytes.extend_from_slice(SENTINEL);
        }
        let line_end = edit.insert.iter().take_while(|b| b"\r\n".contains(b)).count();
        let skip = if outline.form == Form::Ascii { line_end } else { 0 };
        bytes.extend_from_slice(&edit.insert[skip..]);
        let place = if outline.section("TABLES").is_some_and(|s| s.end.at >= edit.at) {
            Where::Tables
        } else {
            Where::Entities
        };
        let mut part = Items::new(&outline.decoder, Some(place));
        tokenize(&Source::from_bytes(bytes), &mut part)?;
        items.extend(part.finish());
    }
    known.learn(&items);
    let spelled = |handle: Option<&str>| parse_handle(handle?.as_bytes());
    for table in &outline.tables {
        known.handles.extend(spelled(table.handle.as_deref()));
        known.handles.extend(table.records.iter().filter_map(|r| r.handle_number()));
    }
    known.handles.extend(spelled(place::model_space(outline)));
    known.handles.extend(spelled(outline.plot_style.as_deref()));
    if let Some(zero) = place::layer_zero(outline) {
        known.handles.extend([390, 347, 348].iter().filter_map(|code| spelled(zero.tags.word(*code))));
    }
    let mut problems = judge(&items, &known);
    let below = |handle: u64| handle <= outline.handles.highest;
    if items.iter().filter_map(|item| item.handle).any(below) {
        let marked = source.spliced(edits)?;
        let all = new_problems(&self::problems(source)?, &self::problems(&marked)?);
        problems.extend(all.into_iter().filter(|p| p.rule == Rule::HandleTwice));
    } else {
        problems.extend(twice(&items));
    }
    Ok(problems)
}

/// Handles that more than one record has.
fn twice(items: &[Item]) -> Vec<Problem> {
    let mut seen = HashSet::new();
    let mut problems = Vec::new();
    for item in items {
        if let Some(handle) = item.handle
            && !seen.insert(handle)
        {
            problems.push(problem(Rule::HandleTwice, item, format!("{handle:X}")));
        }
    }
    problems
}

fn problem(rule: Rule, item: &Item, detail: String) -> Problem {
    Problem {
        rule,
        kind: item.kind.clone(),
        handle: item.handle.map(|handle| format!("{handle:X}")),
        detail,
        line: item.line,
    }
}

fn judge(items: &[Item], known: &Known) -> Vec<Problem> {
    let mut problems = Vec::new();
    for (index, item) in items.iter().enumerate() {
        let mut add = |rule, detail: String| problems.push(problem(rule, item, detail));
        if let (Some(handle), Some(seed)) = (item.handle, known.seed)
            && handle >= seed
        {
            add(Rule::HandleNotBelowSeed, format!("{seed:X}"));
        }
        // R12 has handles on entities only; heads of tables got theirs with R13.
        let needs_handle = match item.place {
            Where::Entities | Where::Blocks => true,
            Where::Tables => known.rank >= 1012,
            Where::Objects => true,
            Where::Other => false,
        };
        if known.numbered && needs_handle && item.handle.is_none() {
            add(Rule::HandleMissing, String::new());
        }
        if let Some(owner) = item.owner.filter(|owner| *owner != 0 && !known.handles.contains(owner)) {
            add(Rule::OwnerMissing, format!("{owner:X}"));
        }
        for style in item.styles.iter().filter(|style| !known.handles.contains(style)) {
            add(Rule::StyleMissing, format!("{style:X}"));
        }
        for application in item.applications.iter().filter(|a| !known.applications.contains(&fold(a))) {
            add(Rule::ApplicationNotRegistered, application.clone());
        }
        if let Some(missing) = item.missing_marker(known.rank) {
            add(Rule::MarkerMissing, missing.to_owned());
        }
        if matches!(item.place, Where::Entities | Where::Blocks)
            && let Some(layer) = item.layer.as_ref().filter(|l| !known.layers.contains(&fold(l)))
        {
            add(Rule::LayerMissing, layer.clone());
        }
        if let Some(line_type) = &item.line_type {
            let name = fold(line_type);
            let built_in = matches!(name.as_str(), "continuous" | "bylayer" | "byblock");
            if !built_in && !known.line_types.contains(&name) {
                add(Rule::LineTypeMissing, line_type.clone());
            }
        }
        if item.kind == "LWPOLYLINE" && item.said_points != Some(item.points) {
            add(Rule::PointCount, item.points.to_string());
        }
        if item.opens_run() {
            let rest = items[index + 1..].iter();
            let after =
                rest.map(|item| item.kind.as_str()).find(|kind| !matches!(*kind, "VERTEX" | "ATTRIB"));
            if after != Some("SEQEND") {
                add(Rule::RunNotClosed, String::new());
            }
        }
    }
    problems
}
