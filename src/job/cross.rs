//! What must fit together across the tables of the settings in force.

use super::choice::Choice;
use super::layers::{Layers, Role};
use super::names::same_name;
use super::rib::Support;
use super::section::Notes;
use super::settings::Settings;

/// Adds a problem for everything that contradicts something else.
pub(super) fn check(settings: &Settings, notes: &Notes) {
    let line = |path: &str| settings.line_of(path).unwrap_or(1);
    if settings.loads.unit.is_none() {
        if settings.loads.unlabelled.is_some_and(|force| force.unit.is_none()) {
            notes.add(
                "job-value",
                line("loads.unlabelled"),
                "`loads.unlabelled` is a number, and `loads.unit` does not say of what",
                "Add `unit` to [loads], or write the force with its unit, such as \"12 kN\"",
            );
        }
        if settings.loads.arrow_scale.is_some() {
            notes.add(
                "job-value",
                line("loads.arrow_scale"),
                "`loads.arrow_scale` is a length per unit of force, and `loads.unit` does not say which",
                "Add `unit` to [loads]",
            );
        }
    }
    if settings.rib.tension && settings.rib.support == Some(Support::None) {
        notes.add(
            "job-value",
            line("rib.support"),
            "`rib.support` = none is a ring without tension, but `rib.tension` = true",
            "Remove `support`, or `tension`",
        );
    }
    layers(&settings.layers, &line, notes);
    names(settings, &line, notes);
}

/// No layer is named for two roles, and no pattern stands for two.
fn layers(layers: &Layers, line: &dyn Fn(&str) -> u64, notes: &Notes) {
    let mut seen: Vec<(Role, &str)> = Vec::new();
    for &(_, role) in Role::NAMES {
        for pattern in &layers.of(role).0 {
            let text = pattern.as_str();
            if let Some((other, _)) = seen.iter().find(|(_, known)| same_name(known, text)) {
                let path = format!("layers.{role}");
                // The default of one role may be what the other states; the stated one has a line.
                let at = line(&path).max(line(&format!("layers.{other}")));
                notes.add(
                    "job-value",
                    at,
                    format!("`layers.{other}` and `layers.{role}` both name \"{text}\""),
                    "Give every kind of entity a layer of its own",
                );
            }
            seen.push((role, text));
        }
    }
}

/// Every name that points to another table has its table.
fn names(settings: &Settings, line: &dyn Fn(&str) -> u64, notes: &Notes) {
    let case_exists = |name: &str| match &settings.case[..] {
        [] => name == "drawn",
        cases => cases.iter().any(|case| same_name(&case.name, name)),
    };
    let missing = |path: String, table: &str, name: &str| {
        notes.add(
            "job-value",
            line(&path),
            format!("There is no [[{table}]] named \"{name}\""),
            format!("Correct the name, or add the [[{table}]]"),
        );
    };
    for (place, traffic) in settings.traffic.iter().enumerate() {
        if let Some(case) = &traffic.case
            && !case_exists(case)
        {
            missing(format!("traffic[{place}].case"), "case", case);
        }
        if traffic.case.is_none() && !case_exists("drawn") {
            notes.add(
                "job-missing",
                line(&format!("traffic[{place}].name")),
                format!("`traffic.case` of \"{}\" does not say which [[case]] it stands on", traffic.name),
                "Add `case` with the name of a [[case]]",
            );
        }
        for other in traffic.with.keys() {
            let known = |train: &super::actions::Traffic| same_name(&train.name, other);
            if !settings.traffic.iter().any(known) || known(traffic) {
                missing(format!("traffic[{place}].with"), "traffic", other);
            }
        }
    }
    for (place, range) in settings.range.iter().enumerate() {
        let Some((area, key)) = range.what.rsplit_once('.') else {
            continue;
        };
        let known = settings.area.iter().find(|known| same_name(&known.name, area));
        match known {
            _ if area == "rib" => {}
            None => missing(format!("range[{place}].what"), "area", area),
            Some(known) if key == "level" && known.level.is_none() => notes.add(
                "job-value",
                line(&format!("range[{place}].what")),
                format!("The [[area]] \"{area}\" has no `level` that could have a range"),
                "Give the area a `level`, or remove this range",
            ),
            Some(_) => {}
        }
    }
    for (place, finding) in settings.accept.finding.iter().enumerate() {
        if let Some(case) = &finding.case
            && !case_exists(case)
        {
            missing(format!("accept.finding[{place}].case"), "case", case);
        }
    }
}
