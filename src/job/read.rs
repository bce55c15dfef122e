//! From the tables of a job file to settings.

use super::actions::{Area, Case, Range, Step, Traffic};
use super::layers::Layers;
use super::limits::{Accept, Exception, LimitCheck, Limits};
use super::names::same_name;
use super::rib::{Movement, Rib, RibDepth};
use super::section::{Bound, Notes, Section};
use super::settings::{Drawing, JobForce, Line, Loads, Mark, Origin, Report, Settings, TextHeight, Title};
use super::tree::{Kind, Table, Value};
use crate::tolerance::ONE_STRAIGHT_LINE;
use crate::units::{Dimension, ForceUnit, LengthUnit, split_quantity};

use Bound::{Any, NotNegative, Part, Positive};
use Dimension::{Angle, Expansion, Force, Inertia, Length, LineLoad, Plain, Stress, Temperature, UnitWeight};

/// Reads all tables; what is wrong goes to `notes`, and its place is taken by the default.
pub(super) fn settings(table: &Table, also: &[&str], notes: &Notes) -> Settings {
    let root = Section::root(table, also, notes);
    Settings {
        origin: Origin::default(),
        drawing: drawing(&root.table("drawing")),
        layers: layers(&root.table("layers")),
        rib: rib(&root.table("rib")),
        loads: loads(&root.table("loads")),
        area: named(root.tables("area"), area, |area| &area.name),
        case: named(root.tables("case"), case, |case| &case.name),
        traffic: named(root.tables("traffic"), traffic, |traffic| &traffic.name),
        range: root.tables("range").iter().filter_map(range).collect(),
        line: line_table(&root.table("line")),
        limits: limits(&root.table("limits")),
        accept: accept(&root.table("accept")),
        mark: mark(&root.table("mark")),
        title: title(&root.table("title")),
        report: report(&root.table("report")),
    }
}

fn drawing(section: &Section<'_>) -> Drawing {
    let default = Drawing::default();
    Drawing {
        unit: length_unit(section, "unit"),
        scale: section.number("scale", Positive).unwrap_or(default.scale),
        plane: section.choice("plane").unwrap_or(default.plane),
    }
}

fn length_unit(section: &Section<'_>, key: &str) -> Option<LengthUnit> {
    let text = section.text(key)?;
    let unit = LengthUnit::parse(&text);
    if unit.is_none() {
        section.object(
            key,
            format!("has no value \"{text}\"; the values are \"mm\", \"cm\", \"m\", \"in\", \"ft\""),
            "Write the unit that the drawing is drawn in",
        );
    }
    unit
}

fn layers(section: &Section<'_>) -> Layers {
    let default = Layers::default();
    Layers {
        axis: section.patterns("axis").unwrap_or(default.axis),
        intrados: section.patterns("intrados").unwrap_or(default.intrados),
        extrados: section.patterns("extrados").unwrap_or(default.extrados),
        loads: section.patterns("loads").unwrap_or(default.loads),
        posts: section.patterns("posts").unwrap_or(default.posts),
        joints: section.patterns("joints").unwrap_or(default.joints),
        hinges: section.patterns("hinges").unwrap_or(default.hinges),
        road: section.patterns("road").unwrap_or(default.road),
        plan: section.patterns("plan").unwrap_or(default.plan),
    }
}

/// What the numbers of `[rib]` measure and must be: for the table itself and for the ranges over its keys.
const RIB: &[(&str, Dimension, Bound)] = &[
    ("depth", Length, Positive),
    ("width", Length, Positive),
    ("unit_weight", UnitWeight, NotNegative),
    ("strength", Stress, Positive),
    ("friction", Plain, Positive),
    ("joint_loss", Length, NotNegative),
    ("backing", Length, Any),
    ("elastic_modulus", Stress, Positive),
    ("creep", Plain, NotNegative),
    ("imperfection", Length, Any),
    ("deck_inertia", Inertia, NotNegative),
    ("deck_modulus", Stress, Positive),
    ("temperature", Temperature, Any),
    ("expansion", Expansion, Positive),
    ("shrinkage", Plain, Any),
];

fn rib_number(section: &Section<'_>, key: &str) -> Option<f64> {
    let &(_, dimension, bound) = RIB.iter().find(|(name, _, _)| *name == key)?;
    section.quantity(key, dimension, bound)
}

fn rib(section: &Section<'_>) -> Rib {
    let number = |key| rib_number(section, key);
    let default = Rib::default();
    Rib {
        depth: rib_depth(section),
        width: number("width"),
        unit_weight: number("unit_weight"),
        voussoirs: section.count("voussoirs"),
        strength: number("strength"),
        friction: number("friction"),
        tension: section.flag("tension").unwrap_or(default.tension),
        joint_loss: number("joint_loss").unwrap_or(default.joint_loss),
        backing: number("backing"),
        support: section.choice("support"),
        elastic_modulus: number("elastic_modulus"),
        creep: number("creep").unwrap_or(default.creep),
        imperfection: number("imperfection"),
        deck_inertia: number("deck_inertia").unwrap_or(default.deck_inertia),
        deck_modulus: number("deck_modulus"),
        temperature: number("temperature").unwrap_or(default.temperature),
        expansion: number("expansion"),
        shrinkage: number("shrinkage").unwrap_or(default.shrinkage),
        movement: movement(&section.table("movement")),
    }
}

fn rib_depth(section: &Section<'_>) -> Option<RibDepth> {
    let value = section.value("depth")?;
    if matches!(value.kind, Kind::Array(_)) {
        let parts = [(Length, Positive); 2];
        return section.quantities_in("depth", value, parts).map(RibDepth::Linear);
    }
    rib_number(section, "depth").map(RibDepth::Constant)
}

fn movement(section: &Section<'_>) -> Movement {
    let parts = [(Length, Any), (Length, Any), (Angle, Any)];
    let end = |key| {
        let value = section.value(key)?;
        section.quantities_in(key, value, parts)
    };
    Movement { left: end("left").unwrap_or_default(), right: end("right").unwrap_or_default() }
}

fn loads(section: &Section<'_>) -> Loads {
    let default = Loads::default();
    Loads {
        unit: force_unit(section),
        unlabelled: unlabelled(section),
        arrow_scale: section.quantity("arrow_scale", Length, Positive),
        decimal: section.choice("decimal").unwrap_or(default.decimal),
    }
}

fn force_unit(section: &Section<'_>) -> Option<ForceUnit> {
    let text = section.text("unit")?;
    let unit = ForceUnit::parse(&text);
    if unit.is_none() {
        section.object(
            "unit",
            format!("has no value \"{text}\"; the values are \"N\", \"kN\", \"MN\", \"kgf\", \"tf\", \"lbf\", \"kip\""),
            "Write the unit that the figures on the drawing are in",
        );
    }
    unit
}

fn unlabelled(section: &Section<'_>) -> Option<JobForce> {
    let value = section.value("unlabelled")?;
    // Read as a quantity first, for the refusals; then again, to keep the figure and the unit as written.
    let plain = section.quantity_in("unlabelled", value, Force, Positive)?;
    let written = match &value.kind {
        Kind::Text(text) => split_quantity(text).ok(),
        _ => None,
    };
    Some(match written {
        Some((value, unit)) => JobForce { value, unit: ForceUnit::parse(unit) },
        None => JobForce { value: plain, unit: None },
    })
}

/// Reads tables that have names, and refuses a name that is given twice.
fn named<T>(
    sections: Vec<Section<'_>>,
    read: impl Fn(&Section<'_>) -> Option<T>,
    name: impl Fn(&T) -> &String,
) -> Vec<T> {
    let mut items: Vec<T> = Vec::new();
    for section in sections {
        if let Some(item) = read(&section) {
            if items.iter().any(|known| same_name(name(known), name(&item))) {
                section.object(
                    "name",
                    format!("is given twice: \"{}\"", name(&item)),
                    "Give every one a name of its own; capitals and small letters do not matter",
                );
            }
            items.push(item);
        }
    }
    items
}

fn area(section: &Section<'_>) -> Option<Area> {
    let name = section.require("name", section.text("name"));
    if let Some(name) = &name
        && (same_name(name, "rib") || same_name(name, "self"))
    {
        section.object(
            "name",
            format!("must not be \"{name}\", which stands for the rib itself"),
            "Choose another name",
        );
    }
    if section.has("layer") == section.has("level") {
        section.object(
            "layer",
            "and `area.level`: exactly one of the two must be given",
            "Give `layer` for drawn outlines, or `level` for fill up to a level",
        );
    }
    let unit_weight = section.quantity("unit_weight", UnitWeight, Positive);
    let unit_weight = section.require("unit_weight", unit_weight);
    let area = Area {
        name: name.clone().unwrap_or_default(),
        layer: section.patterns("layer"),
        level: section.quantity("level", Length, Any),
        unit_weight: unit_weight.unwrap_or_default(),
        width: section.quantity("width", Length, Positive),
        earth_pressure: section.number("earth_pressure", NotNegative),
        passive: section.number("passive", NotNegative).unwrap_or_default(),
    };
    (name.is_some() && unit_weight.is_some()).then_some(area)
}

fn case(section: &Section<'_>) -> Option<Case> {
    let name = section.require("name", section.text("name"));
    let factors = section.factors("factors").unwrap_or_default();
    let vary = texts(section, "vary");
    Some(Case { name: name?, factors, vary })
}

fn texts(section: &Section<'_>, key: &str) -> Vec<String> {
    section.array(key).unwrap_or_default().iter().filter_map(|value| section.text_in(key, value)).collect()
}

fn traffic(section: &Section<'_>) -> Option<Traffic> {
    let name = section.require("name", section.text("name"));
    let axle = [(Length, NotNegative), (Force, Positive)];
    let axles: Vec<[f64; 2]> = section
        .array("axles")
        .unwrap_or_default()
        .iter()
        .filter_map(|value| section.quantities_in("axles", value, axle))
        .collect();
    if section.has("effective_width") && section.has("share") {
        section.object(
            "share",
            "and `traffic.effective_width` say the same thing twice",
            "Remove one of the two",
        );
    }
    let through = section.choice("through");
    let braking = section.number("braking", NotNegative).unwrap_or_default();
    if through == Some(super::actions::Through::Posts) && braking > 0.0 {
        section.object(
            "braking",
            "needs `through = \"fill\"`: a load pushed sideways at the top of a post bends the post, and no model of that is at hand",
            "Remove `braking`, or let the train through the fill",
        );
    }
    let traffic = Traffic {
        name: name.clone().unwrap_or_default(),
        axles,
        through,
        deck: section.choice("deck"),
        effective_width: section.quantity("effective_width", Length, Positive),
        share: section.number("share", Part),
        dispersal: section.number("dispersal", NotNegative),
        contact: section.quantity("contact", Length, NotNegative),
        dynamic: section.number("dynamic", Positive).unwrap_or(1.0),
        braking,
        step: auto_or_length(section, "step").map_or(Step::Auto, Step::Metres),
        both_ways: section.flag("both_ways"),
        case: section.text("case"),
        with: section.factors("with").unwrap_or_default(),
        uniform: section.quantity("uniform", LineLoad, NotNegative),
        knife: section.quantity("knife", Force, NotNegative),
        influence: section
            .array("influence")
            .unwrap_or_default()
            .iter()
            .filter_map(|value| section.quantity_in("influence", value, Plain, Part))
            .collect(),
    };
    name.is_some().then_some(traffic)
}

/// A length, or `None` for `"auto"` and an absent key.
fn auto_or_length(section: &Section<'_>, key: &str) -> Option<f64> {
    match section.value(key) {
        Some(Value { kind: Kind::Text(text), .. }) if text == "auto" => None,
        _ => section.quantity(key, Length, Positive),
    }
}

fn range(section: &Section<'_>) -> Option<Range> {
    let what = section.require("what", section.text("what"))?;
    let measured = match what.rsplit_once('.') {
        Some(("rib", key)) => RIB.iter().find(|(name, _, _)| *name == key).copied(),
        Some((_, "unit_weight")) => Some(("unit_weight", UnitWeight, Positive)),
        Some((_, "level")) => Some(("level", Length, Any)),
        _ => None,
    };
    let Some((_, dimension, bound)) = measured else {
        section.object(
            "what",
            format!("= \"{what}\" is nothing that can have a range"),
            "Write rib.KEY with a key of [rib] that is a number, or AREA.unit_weight or AREA.level with the name of an [[area]]",
        );
        return None;
    };
    let low = section.require("low", section.quantity("low", dimension, bound));
    let high = section.require("high", section.quantity("high", dimension, bound));
    let (low, high) = (low?, high?);
    if low > high {
        section.object("low", format!("= {low} is greater than `range.high` = {high}"), "Exchange the two");
    }
    Some(Range { what, low, high })
}

fn line_table(section: &Section<'_>) -> Line {
    let default = Line::default();
    Line {
        govern: section.choice("govern").unwrap_or(default.govern),
        draw: section.choices("draw").unwrap_or_default(),
        through: through_points(section),
    }
}

fn through_points(section: &Section<'_>) -> Option<[[f64; 2]; 3]> {
    let values = section.array("through")?;
    if values.is_empty() {
        return None;
    }
    if values.len() != 3 {
        section.object(
            "through",
            format!("needs three points, not {}", values.len()),
            "Write [[x, y], [x, y], [x, y]], or [] for springings and crown",
        );
        return None;
    }
    let mut points = [[0.0; 2]; 3];
    for (point, value) in points.iter_mut().zip(values) {
        *point = section.quantities_in("through", value, [(Length, Any); 2])?;
    }
    if in_one_line(points) {
        section.object(
            "through",
            "has three points in one straight line, and no line of thrust is fixed by them",
            "Move one of the points, or write [] for springings and crown",
        );
        return None;
    }
    Some(points)
}

/// Whether the height of the triangle is nothing beside its longest side.
fn in_one_line([a, b, c]: [[f64; 2]; 3]) -> bool {
    let side = |p: [f64; 2], q: [f64; 2]| [q[0] - p[0], q[1] - p[1]];
    let (ab, ac, bc) = (side(a, b), side(a, c), side(b, c));
    let longest = [ab, ac, bc].iter().map(|v| v[0].hypot(v[1])).fold(0.0, f64::max);
    // Scaled before the product, which could overflow otherwise.
    let scaled = |v: [f64; 2]| [v[0] / longest, v[1] / longest];
    let (ab, ac) = (scaled(ab), scaled(ac));
    let height = (ab[0] * ac[1] - ab[1] * ac[0]).abs();
    // Not a number: all points in one place, or sides that overflow; no line is fixed by them either.
    height.is_nan() || height <= ONE_STRAIGHT_LINE
}

fn limits(section: &Section<'_>) -> Limits {
    Limits {
        offset: section.quantity("offset", Length, Positive),
        kern: section.number("kern", Positive),
        ring: section.number("ring", Positive),
        stress: section.quantity("stress", Stress, Positive),
        geometric_factor: section.number("geometric_factor", Positive),
        load_factor: section.number("load_factor", Positive),
        pier_push: section.quantity("pier_push", Force, Positive),
        dimension: section.quantity("dimension", Length, Positive),
    }
}

fn accept(section: &Section<'_>) -> Accept {
    Accept {
        assumed: section.choices("assumed").unwrap_or_default(),
        finding: section.tables("finding").iter().filter_map(exception).collect(),
    }
}

fn exception(section: &Section<'_>) -> Option<Exception> {
    let check = section.require("check", section.choice("check"));
    let dimension = match check {
        Some(LimitCheck::Offset | LimitCheck::Dimension) => Length,
        Some(LimitCheck::Stress) => Stress,
        Some(LimitCheck::PierPush) => Force,
        _ => Plain,
    };
    // With no check there is no unit to read the value in; one problem is enough.
    let up_to = check.and_then(|_| section.quantity("up_to", dimension, Positive));
    let up_to = section.require("up_to", up_to);
    let reason = section.require("reason", section.text("reason"));
    let by = section.require("by", section.text("by"));
    let span = section.text("span");
    let case = section.text("case");
    let until = section.day("until");
    Some(Exception { check: check?, span, case, up_to: up_to?, reason: reason?, by: by?, until })
}

/// Characters that no layer name may hold (they part names, paths and patterns in drawings).
const NOT_IN_LAYER_NAMES: &[char] = &['<', '>', '/', '\\', '"', ':', ';', '?', '*', '|', ',', '=', '`'];

/// Longest prefix: a layer name of the old versions has 31 characters, and the longest name behind the prefix has to
/// find room.
const PREFIX_LENGTH: usize = 16;

fn mark(section: &Section<'_>) -> Mark {
    let default = Mark::default();
    let prefix = section.text("prefix").filter(|prefix| {
        let fits = prefix.chars().count() <= PREFIX_LENGTH
            && prefix.trim_start() == prefix
            && !prefix.contains(NOT_IN_LAYER_NAMES);
        if !fits {
            section.object(
                "prefix",
                format!("= \"{prefix}\" cannot begin a layer name"),
                format!(
                    "Use at most {PREFIX_LENGTH} letters, digits, - or _; none of < > / \\ \" : ; ? * | , = ` and no space in front"
                ),
            );
        }
        fits
    });
    Mark {
        prefix: prefix.unwrap_or(default.prefix),
        frozen: section.flag("frozen").unwrap_or(default.frozen),
        text_height: auto_or_length(section, "text_height").map_or(TextHeight::Auto, TextHeight::Metres),
        suggest: section.flag("suggest").unwrap_or(default.suggest),
    }
}

fn title(section: &Section<'_>) -> Title {
    Title { sheet: section.text("sheet"), revision: section.text("revision") }
}

fn report(section: &Section<'_>) -> Report {
    let default = Report::default();
    Report { units: section.choice("units").unwrap_or(default.units) }
}
