//! Which load is which, and what became of it.

use std::collections::BTreeMap;

use super::{Change, What, same, same_length};
use crate::outcome::{Load, MagnitudeFrom, Span, Units, Xy};
use crate::tolerance;
use crate::write::text::{force, metres, millimetres};

/// All changes of the loads of a span.
pub fn loads(old: &Span, new: &Span, units: &Units, found: &mut Vec<Change>) {
    weights(old, new, units, found);
    let (before, after) = (drawn(old), drawn(new));
    let pairs = pairs(&before, &after, new.axis.span.abs() * tolerance::REVISION_NEAR);
    let scale = before.iter().chain(&after).map(|l| size(l.force)).fold(0.0, f64::max);
    for (j, load) in after.iter().enumerate() {
        match pairs.iter().find(|p| p.1 == j) {
            Some(&(i, _)) => found.extend(changed(before[i], load, new, units, scale)),
            None => found.push(one(What::LoadAdded, load, new, units, "was added").values(
                serde_json::Value::Null,
                load.force.to_vec(),
                &units.force,
            )),
        }
    }
    for (i, load) in before.iter().enumerate() {
        if pairs.iter().all(|p| p.0 != i) {
            found.push(one(What::LoadRemoved, load, new, units, "is gone").values(
                load.force.to_vec(),
                serde_json::Value::Null,
                &units.force,
            ));
        }
    }
}

/// Loads that somebody drew; pieces of weighed parts and of line loads are compared by their sums.
fn drawn(span: &Span) -> Vec<&Load> {
    span.loads.iter().filter(|l| !weighed(l)).collect()
}

fn weighed(load: &Load) -> bool {
    matches!(load.magnitude_from, MagnitudeFrom::SelfWeight | MagnitudeFrom::Area) || load.over.is_some()
}

fn weights(old: &Span, new: &Span, units: &Units, found: &mut Vec<Change>) {
    let sums = |span: &Span| {
        let mut sums: BTreeMap<String, f64> = BTreeMap::new();
        for load in span.loads.iter().filter(|l| weighed(l)) {
            *sums.entry(load.set.clone()).or_default() -= load.force[1];
        }
        sums
    };
    let (before, after) = (sums(old), sums(new));
    let mut sets: Vec<&String> = before.keys().chain(after.keys()).collect();
    sets.sort();
    sets.dedup();
    for set in sets {
        let (was, is) = (before.get(set).copied().unwrap_or(0.0), after.get(set).copied().unwrap_or(0.0));
        if !same(was, is, 0.0) {
            let words =
                format!("{}: weight of {set} {}, was {}", new.name, force(is, units), force(was, units));
            found.push(Change::new(What::LoadChanged, words).of(&new.name).named(set).values(
                was,
                is,
                &units.force,
            ));
        }
    }
}

fn one(what: What, load: &Load, span: &Span, units: &Units, became: &str) -> Change {
    let words = format!(
        "{}: load {} of {} on {} at x {} m {became}",
        span.name,
        load.label,
        force_words(load.force, units),
        load.set,
        metres(load.at[0])
    );
    Change::new(what, words).of(&span.name).named(&load.label).at(load.at)
}

fn force_words(f: Xy, units: &Units) -> String {
    if f[0] == 0.0 {
        let sense = if f[1] > 0.0 { " upward" } else { "" };
        format!("{}{sense}", force(f[1].abs(), units))
    } else {
        format!("{} to the right and {} upward", force(f[0], units), force(f[1], units))
    }
}

fn changed(old: &Load, new: &Load, span: &Span, units: &Units, scale: f64) -> Option<Change> {
    let mut parts = Vec::new();
    let mut values = (serde_json::Value::Null, serde_json::Value::Null, "");
    let moved = distance(old.at, new.at);
    if !same_length(moved, 0.0) {
        parts.push(format!(
            "moved by {} mm from x {} m, y {} m",
            millimetres(moved),
            metres(old.at[0]),
            metres(old.at[1])
        ));
        values = (old.at.to_vec().into(), new.at.to_vec().into(), "m");
    }
    if !(same(old.force[0], new.force[0], scale) && same(old.force[1], new.force[1], scale)) {
        parts.push(format!(
            "is {} now, was {}",
            force_words(new.force, units),
            force_words(old.force, units)
        ));
        values = (old.force.to_vec().into(), new.force.to_vec().into(), &units.force);
    }
    // A number that only counts the loads says nothing.
    if old.label != new.label && (given(old) || given(new)) {
        parts.push(format!("was called {}", old.label));
        if values.2.is_empty() {
            values = (old.label.as_str().into(), new.label.as_str().into(), "");
        }
    }
    if old.set != new.set {
        parts.push(format!("stands on {} now, stood on {}", new.set, old.set));
        if values.2.is_empty() {
            values = (old.set.as_str().into(), new.set.as_str().into(), "");
        }
    }
    if parts.is_empty() {
        return None;
    }
    let words =
        format!("{}: load {} at x {} m {}", span.name, new.label, metres(new.at[0]), parts.join("; "));
    let change = Change::new(What::LoadChanged, words).of(&span.name).named(&new.label).at(new.at);
    Some(change.values(values.0, values.1, values.2))
}

/// Whether the drawing itself names the load.
fn given(load: &Load) -> bool {
    load.text.as_deref().is_some_and(|text| text.contains(&load.label))
}

fn size(v: Xy) -> f64 {
    v[0].hypot(v[1])
}

fn distance(a: Xy, b: Xy) -> f64 {
    (a[0] - b[0]).hypot(a[1] - b[1])
}

/// Loads that are one, as (old, new): by place, name and layer; by a name that the drawings give once each; by place
/// alone; then those that are nearest, within `near`.
fn pairs(old: &[&Load], new: &[&Load], near: f64) -> Vec<(usize, usize)> {
    let here = |a: &Load, b: &Load| same_length(distance(a.at, b.at), 0.0);
    let once = |loads: &[&Load], label: &str| loads.iter().filter(|l| l.label == label).count() == 1;
    let named = |a: &Load, b: &Load| {
        a.label == b.label && given(a) && given(b) && once(old, &a.label) && once(new, &b.label)
    };
    type Fits<'f> = &'f dyn Fn(&Load, &Load) -> bool;
    let passes: [Fits; 5] = [
        &|a, b| here(a, b) && a.label == b.label && a.set == b.set,
        &named,
        &|a, b| here(a, b) && a.set == b.set,
        &here,
        &|a, b| distance(a.at, b.at) <= near,
    ];
    let mut pairs: Vec<(usize, usize)> = Vec::new();
    for fits in passes {
        let mut fitting = Vec::new();
        for (i, a) in old.iter().enumerate().filter(|(i, _)| pairs.iter().all(|p| p.0 != *i)) {
            for (j, b) in new.iter().enumerate().filter(|(j, _)| pairs.iter().all(|p| p.1 != *j)) {
                if fits(a, b) {
                    fitting.push((distance(a.at, b.at), i, j));
                }
            }
        }
        fitting.sort_by(|a, b| a.0.total_cmp(&b.0).then((a.1, a.2).cmp(&(b.1, b.2))));
        for (_, i, j) in fitting {
            if pairs.iter().all(|p| p.0 != i && p.1 != j) {
                pairs.push((i, j));
            }
        }
    }
    pairs
}
