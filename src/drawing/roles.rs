//! Which layers serve as what: named by the job, by the usual names, or guessed.

use super::names;
use super::note::Role;
use crate::job::{Role as JobRole, Settings};
use crate::refusal::Refusal;
use crate::tags::{LayerCensus, Outline, fold};

/// Kinds of entities that can make an axis.
pub const CURVES: [&str; 6] = ["LINE", "ARC", "LWPOLYLINE", "POLYLINE", "ELLIPSE", "SPLINE"];

/// Kinds of entities that stand for a load.
pub const POINTS: [&str; 3] = ["POINT", "CIRCLE", "INSERT"];

/// Kinds of entities that make a layer one of loads: points, and lines that may be arrows or line loads.
pub const LOADS: [&str; 7] = ["POINT", "CIRCLE", "INSERT", "LINE", "LWPOLYLINE", "POLYLINE", "LEADER"];

/// How many of the entities counted are of these kinds.
pub fn count(counts: &std::collections::BTreeMap<String, u64>, kinds: &[&str]) -> u64 {
    kinds.iter().filter_map(|k| counts.get(*k)).sum()
}

/// Layers that may be read: not ours, and with something in model space.
fn usable(outline: &Outline) -> impl Iterator<Item = &LayerCensus> {
    outline.census.iter().filter(|c| !c.model.is_empty() && !outline.layer(&c.name).is_some_and(|l| l.ours))
}

/// The layers that the patterns of a role match and that hold something of the kinds.
///
/// # Errors
/// When two roles claim a layer; when the job names the role and nothing usable is there.
pub fn named(
    outline: &Outline,
    settings: &Settings,
    role: Role,
    kinds: &[&str],
) -> Result<Vec<String>, Refusal> {
    let wanted = match role {
        Role::Axis => JobRole::Axis,
        Role::Loads => JobRole::Loads,
        Role::Intrados => JobRole::Intrados,
        Role::Extrados => JobRole::Extrados,
        Role::Hinges => JobRole::Hinges,
        Role::Road => JobRole::Road,
        Role::Posts => JobRole::Posts,
        Role::Plan => JobRole::Plan,
        // Areas have tables of their own.
        Role::Areas => return Ok(Vec::new()),
    };
    let mut found = Vec::new();
    let mut unusable = Vec::new();
    for layer in usable(outline) {
        if role_of(settings, &layer.name)? != Some(wanted) {
            continue;
        }
        if count(&layer.model, kinds) > 0 {
            found.push(layer.name.clone());
        } else {
            unusable.push(layer);
        }
    }
    let path = format!("layers.{}", role.key());
    if found.is_empty()
        && (settings.states(&path)
            || !matches!(role, Role::Loads | Role::Hinges | Role::Posts | Role::Plan) && !unusable.is_empty())
    {
        return Err(nothing_on(outline, settings, role, wanted, kinds, &unusable));
    }
    Ok(found)
}

/// What a layer holds by the patterns in force.
pub fn role_of(settings: &Settings, layer: &str) -> Result<Option<JobRole>, Refusal> {
    settings.layers.role_of(layer).map_err(|roles| {
        Refusal::new(
            "layer-roles",
            format!("layer {layer} is claimed by `[layers] {}` and `[layers] {}`", roles[0], roles[1]),
            "Name the layer itself in one of the two: a name beats a pattern",
        )
        .on_layer(layer)
    })
}

/// The refusal of a role whose layer is missing or empty.
fn nothing_on(
    outline: &Outline,
    settings: &Settings,
    role: Role,
    wanted: JobRole,
    kinds: &[&str],
    unusable: &[&LayerCensus],
) -> Refusal {
    let patterns: Vec<&str> = settings.layers.of(wanted).0.iter().map(|p| p.as_str()).collect();
    let asked = patterns.join(", ");
    let key = role.key();
    if let Some(layer) = unusable.first() {
        let holds: Vec<String> = layer.model.iter().map(|(kind, n)| format!("{n} {kind}")).collect();
        return Refusal::new(
            "layer-unusable",
            format!("layer {} for `[layers] {key}` holds nothing of type {}: only {}", layer.name, kinds.join(", "), holds.join(", ")),
            "Draw axis and ring lines with lines, arcs and polylines and the loads with points, circles, blocks and arrows, or name another layer",
        )
        .on_layer(layer.name.clone());
    }
    let matching = |name: &str| settings.layers.of(wanted).0.iter().any(|p| p.matches(name));
    // It may be there, but not where anything counts.
    for layer in &outline.census {
        if !matching(&layer.name) {
            continue;
        }
        let place = match (count(&layer.blocks, kinds), count(&layer.paper, kinds)) {
            (0, 0) => continue,
            (0, _) => "in paper space, where nothing counts",
            _ => "inside blocks that are not inserted in model space",
        };
        return Refusal::new(
            "layer-elsewhere",
            format!("layer {} for `[layers] {key}` has its entities only {place}", layer.name),
            "Insert the blocks that hold them in model space, or draw there",
        )
        .on_layer(layer.name.clone());
    }
    if let Some(layer) = outline.layers.iter().find(|l| matching(&l.name)) {
        return Refusal::new(
            "layer-empty",
            format!("layer {} for `[layers] {key}` holds nothing", layer.name),
            "Draw on it, or name another layer",
        )
        .on_layer(layer.name.clone());
    }
    Refusal::new(
        "layer-missing",
        format!("no layer matches `[layers] {key} = {asked}`{}", nearest(outline, &patterns)),
        "Name the layer as the drawing does; `thrustmark list` shows all layers",
    )
}

/// The names nearest to what was asked, as a clause.
fn nearest(outline: &Outline, patterns: &[&str]) -> String {
    let mut names: Vec<(f64, String)> = all_names(outline)
        .into_iter()
        .map(|name| {
            let best =
                patterns.iter().map(|p| strsim::jaro_winkler(&fold(&name), &fold(p))).fold(0.0, f64::max);
            (best, name)
        })
        .filter(|n| n.0 > 0.6)
        .collect();
    names.sort_by(|a, b| b.0.total_cmp(&a.0).then_with(|| a.1.cmp(&b.1)));
    let shown: Vec<String> = names.into_iter().take(3).map(|n| n.1).collect();
    if shown.is_empty() { String::new() } else { format!("; the nearest names are {}", shown.join(", ")) }
}

fn all_names(outline: &Outline) -> Vec<String> {
    let mut names: Vec<String> = outline.layers.iter().filter(|l| !l.ours).map(|l| l.name.clone()).collect();
    for layer in &outline.census {
        if !names.iter().any(|n| fold(n) == fold(&layer.name)) {
            names.push(layer.name.clone());
        }
    }
    names
}

/// Layers whose names say that they hold the axis, those with the same and best right, with the word.
pub fn axis_by_name(outline: &Outline) -> Vec<(u8, String, &'static str)> {
    let mut found: Vec<_> = usable(outline)
        .filter(|l| count(&l.model, &CURVES) > 0)
        .filter_map(|l| names::axis_word(&l.name).map(|(rank, word)| (rank, l.name.clone(), word)))
        .collect();
    found.sort_by_key(|f| std::cmp::Reverse(f.0));
    found
}

/// Layers whose names say that they hold loads, with the word.
pub fn loads_by_name(outline: &Outline, axis: &[String]) -> Vec<(String, &'static str)> {
    usable(outline)
        .filter(|l| count(&l.model, &LOADS) > 0 && !axis.contains(&l.name))
        .filter_map(|l| names::loads_word(&l.name).map(|word| (l.name.clone(), word)))
        .collect()
}

/// Layers that hold some, but not too many, of the kinds.
pub fn holding(outline: &Outline, kinds: &[&str], most: u64, but_not: &[String]) -> Vec<String> {
    usable(outline)
        .filter(|l| (1..=most).contains(&count(&l.model, kinds)) && !but_not.contains(&l.name))
        .map(|l| l.name.clone())
        .collect()
}

/// The refusal when no axis was found; `candidates` are layers that could all be it.
pub fn no_axis(outline: &Outline, candidates: &[String]) -> Refusal {
    let mut holding: Vec<(u64, &str)> =
        usable(outline).map(|l| (count(&l.model, &CURVES), l.name.as_str())).filter(|l| l.0 > 0).collect();
    holding.sort_by(|a, b| b.0.cmp(&a.0).then(a.1.cmp(b.1)));
    let what = if candidates.is_empty() {
        "no layer could be told to hold the axis".to_owned()
    } else {
        format!("more than one layer could hold the axis: {}", candidates.join(", "))
    };
    let listed = if holding.is_empty() {
        "; no layer holds lines, arcs or polylines in model space".to_owned()
    } else {
        let shown: Vec<String> = holding.iter().take(8).map(|(n, name)| format!("{name} ({n})")).collect();
        let more = holding.len() - shown.len();
        let more = if more > 0 { format!(" and {more} more") } else { String::new() };
        format!("; layers with lines, arcs or polylines: {}{more}", shown.join(", "))
    };
    let references: Vec<&str> = outline.blocks.iter().filter_map(|b| b.path.as_deref()).collect();
    let referred = if references.is_empty() {
        String::new()
    } else {
        format!("; parts of the drawing stand in other files ({}), which are not read", references.join(", "))
    };
    Refusal::new(
        "no-axis",
        format!("{what}{listed}{referred}"),
        "Name the layer of the axis in the job file: `[layers]` `axis = \"NAME\"`",
    )
}

/// The refusal of an entity on the layer of axis or ring line that cannot be read.
pub fn not_readable(record: &crate::tags::Record, role: Role) -> Refusal {
    let source = super::convert::source(record);
    source.refuse(
        "axis-kind",
        format!(
            "layer {} of the {} holds a {}: it is read from LINE, ARC, LWPOLYLINE, POLYLINE, ELLIPSE and SPLINE",
            record.layer,
            role.key(),
            record.kind
        ),
        "Draw it with lines, arcs and polylines, or move what is no part of it to another layer",
    )
}
