//! Every key of the job file, and whether what it asks for is built.
//!
//! The one place where keys are listed: the reader knows no others. When the mechanics behind a key are built, its
//! entry here becomes [`Built::All`] (or its list of values grows), and nothing else changes.

use std::collections::BTreeMap;

use serde_json::Value;

use super::problem::Problem;
use super::settings::Settings;

/// What of a key is built.
#[derive(Debug, Clone, Copy)]
pub(super) enum Built {
    /// Every value.
    All,
    /// These values (for an array: every element is one of them).
    Only(&'static [&'static str]),
    /// Nothing but the default value.
    Later,
    /// Nothing but the default value and 0, which means the same.
    LaterZero,
}
use Built::{All, Later, LaterZero, Only};

/// A table by its path, with its keys in the order in which they are listed to the user. The empty path is the file.
/// The keys of a table that is itself not built are listed as built: the table is refused as a whole.
pub(super) const TABLES: &[(&str, &[(&str, Built)])] = &[
    (
        "",
        &[
            ("drawing", All),
            ("layers", All),
            ("rib", All),
            ("loads", All),
            ("area", All),
            ("case", All),
            ("traffic", All),
            ("range", All),
            ("line", All),
            ("limits", All),
            ("accept", All),
            ("mark", All),
            ("title", All),
            ("report", All),
            ("sheet", All),
        ],
    ),
    ("drawing", &[("unit", All), ("scale", All), ("plane", All)]),
    (
        "layers",
        &[
            ("axis", All),
            ("intrados", All),
            ("extrados", All),
            ("loads", All),
            ("posts", All),
            ("joints", Later),
            ("hinges", All),
            ("road", All),
            ("plan", All),
        ],
    ),
    (
        "rib",
        &[
            ("depth", All),
            ("width", All),
            ("unit_weight", All),
            ("voussoirs", All),
            ("strength", All),
            ("friction", All),
            ("tension", All),
            ("joint_loss", Later),
            ("backing", All),
            ("support", All),
            ("elastic_modulus", All),
            ("creep", All),
            ("imperfection", All),
            ("deck_inertia", All),
            ("deck_modulus", All),
            ("temperature", All),
            ("expansion", All),
            ("shrinkage", All),
            ("movement", All),
        ],
    ),
    ("rib.movement", &[("left", All), ("right", All)]),
    ("loads", &[("unit", All), ("unlabelled", All), ("arrow_scale", All), ("decimal", All)]),
    (
        "area",
        &[
            ("name", All),
            ("layer", All),
            ("level", All),
            ("unit_weight", All),
            ("width", All),
            ("earth_pressure", All),
            ("passive", LaterZero),
        ],
    ),
    ("case", &[("name", All), ("factors", All), ("vary", All)]),
    (
        "traffic",
        &[
            ("name", All),
            ("axles", All),
            ("through", All),
            ("deck", All),
            ("effective_width", All),
            ("share", All),
            ("dispersal", All),
            ("contact", All),
            ("dynamic", All),
            ("braking", All),
            ("step", All),
            ("both_ways", All),
            ("case", All),
            ("with", All),
            ("uniform", All),
            ("knife", All),
            ("influence", All),
        ],
    ),
    ("range", &[("what", All), ("low", All), ("high", All)]),
    ("line", &[("govern", All), ("draw", All), ("through", All)]),
    (
        "limits",
        &[
            ("offset", All),
            ("kern", All),
            ("ring", All),
            ("stress", All),
            ("geometric_factor", All),
            ("load_factor", All),
            ("pier_push", All),
            ("dimension", All),
        ],
    ),
    ("accept", &[("assumed", All), ("finding", All)]),
    (
        "accept.finding",
        &[
            (
                "check",
                Only(&[
                    "offset",
                    "ring",
                    "kern",
                    "geometric-factor",
                    "stress",
                    "load-factor",
                    "pier-push",
                    "dimension",
                ]),
            ),
            ("span", All),
            ("case", All),
            ("up_to", All),
            ("reason", All),
            ("by", All),
            ("until", All),
        ],
    ),
    ("mark", &[("prefix", All), ("frozen", All), ("text_height", All), ("suggest", All)]),
    ("title", &[("sheet", All), ("revision", All)]),
    ("report", &[("units", All)]),
];

/// The keys of the table with this path; empty for a table whose keys the user chooses (`case.factors`).
pub(super) fn keys_of(table: &str) -> &'static [(&'static str, Built)] {
    TABLES.iter().find(|(path, _)| *path == table).map_or(&[], |(_, keys)| keys)
}

/// `accept.finding[0].check` as `accept.finding.check`.
pub(super) fn without_indices(path: &str) -> String {
    let mut depth = 0_u32;
    path.chars()
        .filter(|&character| {
            if character == '[' {
                depth += 1;
            }
            let keep = depth == 0;
            if character == ']' {
                depth = depth.saturating_sub(1);
            }
            keep
        })
        .collect()
}

/// One problem for every stated key (by its path, with its line) that asks for what is not built.
pub(super) fn not_built(settings: &Settings, lines: &BTreeMap<String, u64>) -> Vec<Problem> {
    let stated = settings.to_json();
    let default = Settings::default().to_json();
    lines
        .iter()
        .filter_map(|(path, &line)| {
            let plain = without_indices(path);
            let (table, key) = plain.rsplit_once('.').unwrap_or(("", &plain));
            let built = keys_of(table).iter().find(|(name, _)| *name == key)?.1;
            // Not in the tree: it was refused for its type, and that is told elsewhere.
            let value = look_up(&stated, path)?;
            let built_values = match built {
                All => return None,
                Only(values) if all_among(value, values) => return None,
                Later | LaterZero if look_up(&default, path) == Some(value) => return None,
                LaterZero if value.as_f64() == Some(0.0) => return None,
                Only(values) => Some(values),
                Later | LaterZero => None,
            };
            Some(refuse(&plain, value, built_values, line))
        })
        .collect()
}

fn refuse(key: &str, value: &Value, built: Option<&[&str]>, line: u64) -> Problem {
    let (message, remedy) = match built {
        Some(values) => {
            let given = value.to_string().replace('"', "");
            (
                format!("`{key}` = {given} is not built in this version"),
                format!("Remove the key, or use one of: {}", values.join(", ")),
            )
        }
        None => (
            format!("`{key}` is not built in this version, and no key is passed over in silence"),
            format!("Remove `{key}`; the result then leaves it out"),
        ),
    };
    Problem { check: "not-built", line, message, remedy }
}

fn all_among(value: &Value, names: &[&str]) -> bool {
    match value {
        Value::String(name) => names.contains(&name.as_str()),
        Value::Array(values) => values.iter().all(|value| all_among(value, names)),
        _ => false,
    }
}

/// The value at a path such as `accept.finding[0].check`.
fn look_up<'v>(mut value: &'v Value, path: &str) -> Option<&'v Value> {
    for part in path.split('.') {
        let (key, index) = match part.strip_suffix(']').and_then(|part| part.split_once('[')) {
            Some((key, index)) => (key, index.parse::<usize>().ok()),
            None => (part, None),
        };
        value = value.get(key)?;
        if let Some(index) = index {
            value = value.get(index)?;
        }
    }
    Some(value)
}
