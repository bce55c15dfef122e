//! What reader, builder and statics noticed, in words.

use super::{With, drawn, length, note, spans};
use crate::drawing;
use crate::drawing::{Doubt, FileNote, Reason, Role};
use crate::job::Support;
use crate::job::{Movement, Settings};
use crate::model;
use crate::model::figures::NoFigure;
use crate::model::{Forces, Model};
use crate::outcome::{Check, Finding, MagnitudeFrom, Span, Units};
use crate::statics::{Analysis, SpanKind};
use crate::tolerance;

/// Notes of the reader.
pub fn drawing(notes: &[drawing::Note], settings: &Settings, findings: &mut Vec<Finding>) {
    findings.extend(notes.iter().map(|n| {
        let finding = drawing_note(n);
        // Cases say what acts; where they name no load layer, none is missing.
        if matches!(n, drawing::Note::NoLoadLayer) && !settings.case.is_empty() {
            return Finding { unchecks: false, ..finding };
        }
        finding
    }));
}

fn drawing_note(n: &drawing::Note) -> Finding {
    use drawing::Note;
    match n {
        Note::File(file) => file_note(file),
        Note::LayerGuessed { role, layer, reason } => note(
            Check::Layers,
            format!("layer {layer} was taken as the {}: {}", role_name(*role), reason_words(reason)),
        )
        .uncheck()
        .remedy(format!("name it in the job file: [layers] {} = \"{layer}\"", role.key())),
        Note::NoLoadLayer => note(Check::Layers, "no layer of loads was found").uncheck(),
        Note::LayerHidden { layer, frozen } => note(
            Check::PassedOver,
            format!("layer {layer} is {} and was read all the same", if *frozen { "frozen" } else { "switched off" }),
        ),
        Note::PassedOver { role, layer, kind, count, could_be_load, first } => {
            let finding = note(
                Check::PassedOver,
                format!("{count} {kind} on layer {layer} passed over: not read as {}", role_name(*role)),
            );
            let finding = match first {
                Some(first) => finding.entity(first),
                None => finding,
            };
            if *could_be_load {
                finding.uncheck().remedy("draw these loads as POINT, CIRCLE or INSERT with a label, or move them to another layer")
            } else {
                finding
            }
        }
        Note::PaperSpace { layer, count } => {
            note(Check::PassedOver, format!("{count} entities on layer {layer} stand in paper space and do not count"))
        }
        Note::InBlock { role, block, layer, count } => note(
            Check::PassedOver,
            format!(
                "block {block} holds {count} entities on layer {layer} ({}), not read because its reference is a load itself",
                role_name(*role)
            ),
        )
        .uncheck()
        .remedy("insert the block on another layer when its entities are the loads, or move them to another layer"),
        Note::PlaneGuessed { plane } => {
            note(Check::Plane, format!("the axis does not lie in the x-y plane; the elevation was taken in the {plane} plane"))
                .uncheck()
                .remedy("state [drawing] plane in the job file, or allow it: [accept] assumed = [\"plane\"]")
        }
        Note::NotInLayouts { viewports, part } => note(
            Check::PassedOver,
            format!(
                "none of the {viewports} viewports of the layouts shows the whole axis ({part} show a part): the marks are seen \
                 in model space"
            ),
        ),
        Note::TitleMissing { key, pattern } => note(
            Check::PassedOver,
            format!("no title block has an attribute that [title] {key} = \"{pattern}\" names"),
        )
        .remedy("name the tag of the attribute as the drawing does"),
        Note::TitleUnclear { what, key, values } => note(
            Check::PassedOver,
            format!("title blocks say different things for the {what} ({}), and none was taken", values.join(", ")),
        )
        .remedy(format!("name the tag of the attribute: [title] {key}")),
        Note::NotToScale { source, text, count } => {
            let others = if *count > 1 { format!(" and {} more texts", count - 1) } else { String::new() };
            note(Check::Dimension, format!("\"{text}\"{others} say that the drawing, or a part of it, is not to scale"))
                .entity(source)
                .uncheck()
                .remedy("see to it that the arch is drawn to scale, and remove the note or move it into a block")
        }
        Note::SurroundingsNotRead => note(
            Check::PassedOver,
            format!(
                "the drawing is larger than {} MB: title block, dimensions and notes about the scale were not looked for",
                tolerance::SURROUNDINGS >> 20
            ),
        ),
        Note::CurveFitted { source, pieces } => note(
            Check::PassedOver,
            format!(
                "{} was read as {pieces} arcs that follow it to within {:e} of its extent",
                source.named(),
                tolerance::CURVE_FIT
            ),
        )
        .entity(source),
        Note::PartNotRead { part, layer, count } => note(
            Check::PassedOver,
            format!("layer {layer} ({count} entities) has the name of [layers] {part}, which is not read"),
        ),
        Note::UnitAssumed { unit, width, .. } => note(
            Check::Unit,
            format!("the drawing states no unit; {} was assumed from an axis {width:.6} drawing units wide", unit.name()),
        )
        .uncheck()
        .remedy(format!("state it in the job file: [drawing] unit = \"{}\"", unit.name())),
    }
}

/// What the byte layer noticed. A name or label that was read against the drawing's own encoding is an assumption.
fn file_note(n: &FileNote) -> Finding {
    match n {
        FileNote::Text { doubt, count, first, line } => {
            let place = line.map_or(String::new(), |l| format!(" (line {l})"));
            let finding = note(
                Check::Encoding,
                format!(
                    "{count} names do not fit the drawing's encoding, first {first:?}{place}: {}",
                    doubt_words(doubt)
                ),
            );
            if *doubt == Doubt::LooksLikeUtf8 {
                // By the format it was read rightly; only the eye can tell.
                return finding;
            }
            finding.uncheck().remedy(
                "save the drawing with the right code page, or allow it: [accept] assumed = [\"encoding\"]",
            )
        }
        FileNote::UnknownCodePage(page) => note(
            Check::Encoding,
            format!("$DWGCODEPAGE names {page}, which is not known; ANSI_1252 was taken"),
        )
        .uncheck()
        .remedy("correct $DWGCODEPAGE, or allow it: [accept] assumed = [\"encoding\"]"),
        FileNote::LaterVersion(version) => note(
            Check::PassedOver,
            format!("version {version} is later than any known here; read as the latest known"),
        ),
        FileNote::NoVersion => note(Check::PassedOver, "the drawing states no version; read as R12"),
        FileNote::NoEndOfFile => note(
            Check::PassedOver,
            "the drawing has no EOF: it may be cut off, and what was cut off is not read",
        )
        .uncheck()
        .remedy("export the drawing again"),
        FileNote::BehindEndOfFile(bytes) => {
            note(Check::PassedOver, format!("{bytes} bytes behind EOF are kept and not read"))
        }
        FileNote::SectionNotClosed(name) => {
            note(Check::PassedOver, format!("section {name} has no end: the drawing may be cut off"))
                .uncheck()
                .remedy("export the drawing again")
        }
        FileNote::TableNotClosed(name) => note(Check::PassedOver, format!("table {name} has no end")),
    }
}

fn doubt_words(doubt: &Doubt) -> &'static str {
    match doubt {
        Doubt::ReadAsUtf8 => "read as UTF-8",
        Doubt::ReadByPage => "read by the code page",
        Doubt::Unreadable => "some letters could not be read",
        Doubt::LooksLikeUtf8 => "read by the code page, though it would be good UTF-8 too",
    }
}

fn role_name(role: Role) -> &'static str {
    match role {
        Role::Areas => "outline of an area",
        Role::Axis => "axis",
        Role::Loads => "loads",
        Role::Intrados => "intrados",
        Role::Extrados => "extrados",
        Role::Hinges => "hinges",
        Role::Road => "road",
        Role::Posts => "posts",
        Role::Plan => "plan of the roadway",
    }
}

fn reason_words(reason: &Reason) -> String {
    match reason {
        Reason::Word(word) => format!("its name holds the word {word}"),
        Reason::OneLine { span, rise } => {
            format!(
                "it holds one line from springing to springing, {span:.6} wide and {rise:.6} high in drawing units"
            )
        }
        Reason::PointsOver { over, of } => format!("{over} of its {of} points stand over the axis"),
    }
}

/// Notes of the builder.
pub fn model(notes: &[model::Note], units: &Units, findings: &mut Vec<Finding>) {
    findings.extend(notes.iter().map(|n| model_note(n, units)));
}

fn model_note(n: &model::Note, units: &Units) -> Finding {
    use model::Note;
    match n {
        Note::GapClosed { line, span, size, at } => {
            note(Check::Gaps, format!("a gap of {} in the {line} was closed", small_length(*size)))
                .value(*size, "m")
                .at(spans::xy(*at))
                .of(span)
                .uncheck()
                .remedy("join the ends in the drawing, or allow it: [accept] assumed = [\"gaps\"]")
        }
        Note::AxisMidway { span, pieces, stray } => note(
            Check::Layers,
            format!(
                "no axis is drawn; it was found midway between intrados and extrados, in {pieces} arcs that stray at most \
                 {} from the true middle line",
                tiny_length(*stray)
            ),
        )
        .of(span),
        Note::EndsSkew { span, angle } => note(
            Check::LeftOut,
            format!(
                "the ring ends in a face {:.1}° off the joint square to its axis; the end joint was taken square",
                angle.to_degrees()
            ),
        )
        .value(angle.to_degrees(), "°")
        .of(span),
        Note::AxisOffMiddle { span, by, at } => note(
            Check::Layers,
            format!(
                "the drawn axis runs up to {} beside the middle of the ring; at each joint the depth was taken as twice \
                 the distance to the nearer ring line",
                small_length(*by)
            ),
        )
        .value(*by, "m")
        .at(spans::xy(*at))
        .of(span),
        Note::DrawnTwice { source, kept } => note(
            Check::PassedOver,
            format!("{} lies on {} and was passed over as drawn twice", source.named(), kept.named()),
        )
        .entity(source),
        Note::NoLength { source } => {
            note(Check::PassedOver, format!("{} has a piece of no length, passed over", source.named())).entity(source)
        }
        Note::TextIgnored { source, text, why } => {
            note(Check::PassedOver, format!("text \"{text}\" is no load: {}", no_figure(why))).entity(source)
        }
        Note::LabelUnused { source, text, nearest, .. } => note(
            Check::Labels,
            match nearest {
                Some(d) => format!("label \"{text}\" belongs to no load (the nearest stands {} away)", length(*d)),
                None => format!("label \"{text}\" belongs to no load"),
            },
        )
        .entity(source)
        .uncheck()
        .remedy("move the label next to its load, or to another layer"),
        Note::LabelDoubtful { label, text, load, other, .. } => note(
            Check::Labels,
            format!("label \"{text}\" was given to {}, and could nearly as well belong to {}", load.named(), other.named()),
        )
        .entity(label)
        .uncheck()
        .remedy("move the label next to its load, or allow it: [accept] assumed = [\"labels\"]"),
        Note::AttributesUnclear { source, tags } => note(
            Check::Labels,
            format!("{} has several attributes with figures ({}), and none says that it is the force", source.named(), tags.join(", ")),
        )
        .entity(source)
        .uncheck(),
        Note::MarkedTwice { source, kept } => note(
            Check::PassedOver,
            format!("{} stands on {} and was counted once", source.named(), kept.named()),
        )
        .entity(source),
        Note::Drawn(n) => drawn::finding(n),
        Note::LoadsEqual { count } => note(
            Check::Loads,
            format!("none of the {count} loads has a figure: all were taken as equal, and forces are multiples of one of them"),
        )
        .uncheck()
        .remedy("label the loads in the drawing, give [loads] unlabelled, or allow it: [accept] assumed = [\"loads\"]"),
        Note::Unlabelled { sources, force } => note(
            Check::Loads,
            format!("{} loads without a figure got {force} {} each from [loads] unlabelled", sources.len(), units.force),
        ),
        Note::ForceUnitAssumed { unit, count, from_labels } => note(
            Check::Loads,
            format!(
                "{count} figures stand without a unit; {unit} was taken{}",
                if *from_labels { ", as on other labels" } else { "" }
            ),
        )
        .uncheck()
        .remedy(format!("state it in the job file: [loads] unit = \"{unit}\"")),
        Note::OffSpan { source, label, at, force } => note(
            Check::OffSpan,
            format!("load {label} ({force:.4} {}) stands over no span and is left out", units.force),
        )
        .at(spans::xy(*at))
        .entity(source)
        .uncheck()
        .remedy("move it over the span, or to another layer"),
        Note::HingeRead { span, source, at } => note(
            Check::Support,
            format!("{} was read as a hinge of the rib at ({:.3}, {:.3}) m", source.named(), at.x, at.y),
        )
        .at(spans::xy(*at))
        .entity(source)
        .of(span),
        Note::HingeOff { source, at } => note(
            Check::Support,
            format!(
                "{} on the hinge layer stands at ({:.3}, {:.3}) m, off every rib, and is left out",
                source.named(),
                at.x,
                at.y
            ),
        )
        .at(spans::xy(*at))
        .entity(source)
        .uncheck()
        .remedy("move it onto the rib, or to another layer"),
        Note::BackingIdle { span, level } => note(
            Check::LeftOut,
            format!("rib.backing = {level:.3} m lies below both ends of {span}: all of the ring works"),
        )
        .value(*level, "m")
        .of(span),
        Note::BackingTrimmed { span, level, left, right, off, loads } => {
            let mut text = format!(
                "haunches solid up to y = {level:.3} m: the working ring runs from ({:.3}, {:.3}) to ({:.3}, {:.3}) m; {:.3} m and \
                 {:.3} m of axis with all that stands on them are left to the haunches",
                left.x, left.y, right.x, right.y, off[0], off[1]
            );
            let forces: Vec<String> = loads.iter().map(|(_, label, f)| format!("{label} ({f:.3})")).collect();
            if !forces.is_empty() {
                text.push_str(&format!(", with the loads {}", forces.join(", ")));
            }
            note(Check::LeftOut, text).value(*level, "m").at(spans::xy(*left)).of(span)
        }
        Note::NoLoads { span } => note(Check::Loads, "no load stands over this span").of(span).uncheck(),
        Note::SizeUnlikely { span, size } => note(
            Check::Unit,
            format!("a span of {size:.3} m is unlikely for a bridge: unit or scale may be wrong"),
        )
        .value(*size, "m")
        .of(span)
        .uncheck()
        .remedy("check $INSUNITS of the drawing, and [drawing] unit and scale of the job"),
    }
}

fn no_figure(why: &NoFigure) -> String {
    match why {
        NoFigure::NotAForce => "it holds no figure that could be a force".into(),
        NoFigure::PerLength => "a force per length".into(),
        NoFigure::Unit(unit) => format!("{unit} is no unit of force that is known"),
        NoFigure::Several => "several of its lines hold a force".into(),
        NoFigure::TwoReadings { written, .. } => format!("{written} can be read in two ways"),
        _ => "its figure could not be read".into(),
    }
}

/// A length of any smallness in words.
fn small_length(metres: f64) -> String {
    if metres < 0.001 { format!("{:.3} mm", metres * 1000.0) } else { format!("{:.1} mm", metres * 1000.0) }
}

/// A length far below what is drawn, in words.
fn tiny_length(metres: f64) -> String {
    if metres < 0.000_001 { "1 µm".into() } else { small_length(metres) }
}

/// What the statics of a span in one case found worth saying beside the limits.
pub fn analysis(a: &Analysis, span: &Span, units: &Units, findings: &mut Vec<Finding>) {
    let mut add = |finding: Finding| findings.push(finding.of(&span.name));
    let residual = note(Check::Equilibrium, "equilibrium of every line closes").value(a.residual, "1");
    if a.residual > tolerance::EQUILIBRIUM {
        let mut broken = residual.uncheck().remedy("report this drawing: the computation contradicts itself");
        broken.message = "equilibrium does not close within the tolerance".into();
        broken.limit = Some(tolerance::EQUILIBRIUM);
        add(broken);
    } else {
        add(residual);
    }
    for &i in &a.off_span {
        add(note(
            Check::OffSpan,
            format!("the line of action of load {} does not meet the axis; it is left out", i + 1),
        )
        .uncheck());
    }
    if let Some(pole) = a.pole {
        let mut text = format!(
            "the rays of the graphic method scatter by {:.4} {} about their pole",
            pole.scatter, units.force
        );
        if let Some(ratio) = pole.scatter_ratio {
            text.push_str(&format!(" ({:.2} % of the push)", ratio * 100.0));
        }
        let mut finding = note(Check::Offset, text).value(pole.scatter, &units.force);
        finding.basis = Some("the drawn axis against a funicular of the drawn loads".into());
        add(finding);
    }
}

/// What is worth saying of a span whatever the case.
pub fn shape(a: &Analysis, span: &Span, settings: &Settings, findings: &mut Vec<Finding>) {
    let mut add = |finding: Finding| findings.push(finding.of(&span.name));
    if a.kind == SpanKind::Arch && settings.rib.support.is_none() {
        add(note(
            Check::Support,
            "no support was declared; a ring without tension on rigid abutments was taken",
        )
        .uncheck()
        .remedy("declare it: [rib] support = \"none\" (no tension), or the support there is"));
    }
    if a.kind == SpanKind::Arch && matches!(settings.rib.support, Some(Support::None)) && settings.rib.tension
    {
        add(note(
            Check::Support,
            "support \"none\" with a section that takes tension: only the axis is judged",
        ));
    }
    if let Some(uneven) = uneven_spacing(a, span) {
        add(note(
            Check::Spacing,
            format!(
                "loads are unevenly spaced: gaps from {:.3} m to {:.3} m between neighbours",
                uneven.0, uneven.1
            ),
        )
        .value(uneven.1 / uneven.0, "1"));
    }
    if settings.rib.depth.is_some() && span.ring.as_ref().is_some_and(|r| !r.entities.is_empty()) {
        add(note(Check::Layers, "the depth was read from the ring lines; [rib] depth was not needed"));
    }
}

/// Least and greatest horizontal gap between neighbouring loads, when the gaps differ both measured horizontally (posts)
/// and measured along the axis (voussoirs).
fn uneven_spacing(a: &Analysis, span: &Span) -> Option<(f64, f64)> {
    let uneven = |places: Vec<f64>| {
        let gaps = places.windows(2).map(|w| w[1] - w[0]).filter(|g| *g > a.span * tolerance::SAME_ABSCISSA);
        let (low, high) = gaps.fold((f64::INFINITY, 0.0_f64), |(low, high), g| (low.min(g), high.max(g)));
        (high > low * (1.0 + tolerance::EVEN_SPACING)).then_some((low, high))
    };
    uneven(a.order.iter().map(|p| p.foot).collect())?;
    let weight = [MagnitudeFrom::SelfWeight, MagnitudeFrom::Area];
    let drawn = span.loads.iter().filter(|l| !weight.contains(&l.magnitude_from) && l.over.is_none());
    uneven(drawn.map(|l| l.at[0]).collect())
}

/// What each case leaves out, and what it names in vain.
pub fn cases(cases: &[model::Case], findings: &mut Vec<Finding>) {
    for case in cases {
        let mut add = |message: String, uncheck: bool| {
            let mut finding = note(Check::LeftOut, message);
            finding.case = Some(case.name.clone());
            findings.push(if uncheck {
                finding.uncheck().remedy("correct the name in the job file, or the layer in the drawing")
            } else {
                finding
            });
        };
        if !case.left_out.is_empty() {
            add(format!("case {} leaves out: {}", case.name, case.left_out.join(", ")), false);
        }
        if !case.unknown.is_empty() {
            let names = case.unknown.join(", ");
            add(format!("case {} names {names}, and nothing of that name acts here", case.name), true);
        }
    }
}

/// What the computation leaves out.
pub fn left_out(model: &Model, settings: &Settings, findings: &mut Vec<Finding>) {
    let mut parts = Vec::new();
    if model.own_weight(settings).is_none() {
        parts.push("the rib's own weight");
    }
    if model.areas.is_empty() {
        parts.push("fill");
    }
    if settings.traffic.is_empty() {
        parts.push("traffic");
    }
    parts.push("everything out of the plane of the elevation");
    if model.forces == Forces::UnitLoads {
        parts.push("stresses");
    }
    findings.push(note(Check::LeftOut, format!("left out: {}", parts.join(", "))));
    let rib = &settings.rib;
    if model.forces == Forces::UnitLoads {
        let sized = [
            (rib.strength.is_some(), "strength"),
            (rib.temperature.abs() > 0.0, "temperature"),
            (rib.shrinkage.abs() > 0.0, "shrinkage"),
            (rib.movement != Movement::default(), "movement"),
            (rib.imperfection.is_some_and(|i| i.abs() > 0.0), "imperfection"),
            (rib.deck_inertia > 0.0, "deck_inertia"),
        ];
        for (_, key) in sized.into_iter().filter(|(given, _)| *given) {
            let message = format!("[rib] {key} was left out: beside loads of unknown size it has no measure");
            findings.push(
                note(Check::NotJudged, message)
                    .uncheck()
                    .remedy("give the loads their figures, or remove the key"),
            );
        }
    }
    if rib.friction.is_some() {
        findings.push(note(
            Check::LeftOut,
            "sliding is reckoned with associated flow (joints open as they slide), so a load factor that sliding governs \
             may be an overestimate; check the joints that slide by themselves",
        ));
    }
}
