//! Results in feet and kips, for those who asked for them: report and terminal only. The results themselves, and what is
//! written for other programs, stay in m, kN and MPa.
//!
//! Factors: the international foot of 0.3048 m and the avoirdupois pound of 0.453 592 37 kg (international yard and pound
//! agreement, 1959) under standard gravity of 9.806 65 m/s² (ISO 80000-3), all exact.

use std::borrow::Cow;

use crate::outcome::{Case, Document, Finding, Line, Run, Span, Station, Traffic, Units, WorstValue, Xy};

/// Feet in a metre.
const FEET: f64 = 1.0 / 0.3048;
/// Kips in a kilonewton.
const KIPS: f64 = 1.0 / (0.453_592_37 * 9.806_65);
/// Kips per square inch in a megapascal: 1000 kN/m² by kips and square inches.
const KSI: f64 = 1000.0 * KIPS / (FEET * FEET * 144.0);

/// Whether a run's job asks for feet and kips.
pub fn asked(run: &Run) -> bool {
    run.settings.pointer("/report/units").and_then(|u| u.as_str()) == Some("us")
}

/// The document with every run whose job asks for it in feet, kips and ksi; unit loads stay unit loads.
pub fn told(document: &Document) -> Cow<'_, Document> {
    if !document.runs.iter().any(asked) {
        return Cow::Borrowed(document);
    }
    let mut document = document.clone();
    document.runs.iter_mut().filter(|run| asked(run)).for_each(run);
    Cow::Owned(document)
}

/// What numbers of a run are multiplied by.
struct Scale {
    force: f64,
    moment: f64,
}

fn run(run: &mut Run) {
    let unit_loads = run.units.force != "kN";
    let force = if unit_loads { 1.0 } else { KIPS };
    let scale = Scale { force, moment: force * FEET };
    run.units = if unit_loads {
        Units { length: "ft".into(), moment: "unit load·ft".into(), ..Units::unit_loads() }
    } else {
        Units {
            length: "ft".into(),
            force: "kip".into(),
            moment: "kip·ft".into(),
            stress: Some("ksi".into()),
        }
    };
    run.spans.iter_mut().for_each(|s| span(s, &scale));
    run.findings.iter_mut().for_each(finding);
    if let Some(error) = &mut run.error {
        error.message = prose(&error.message);
    }
}

fn point(p: &mut Xy) {
    p.iter_mut().for_each(|c| *c *= FEET);
}

fn times(value: &mut Option<f64>, by: f64) {
    if let Some(v) = value {
        *v *= by;
    }
}

fn span(span: &mut Span, scale: &Scale) {
    let axis = &mut span.axis;
    [&mut axis.span, &mut axis.rise, &mut axis.length].into_iter().for_each(|v| *v *= FEET);
    [&mut axis.left, &mut axis.right, &mut axis.crown].into_iter().for_each(point);
    for [x, y, _] in &mut axis.curve {
        *x *= FEET;
        *y *= FEET;
    }
    if let Some(ring) = &mut span.ring {
        ring.depth_min *= FEET;
        ring.depth_max *= FEET;
        times(&mut ring.width, FEET);
    }
    for load in &mut span.loads {
        point(&mut load.at);
        load.force.iter_mut().for_each(|f| *f *= scale.force);
        times(&mut load.per_length, scale.force / FEET);
        times(&mut load.sideways, FEET);
        load.over.iter_mut().flatten().for_each(|x| *x *= FEET);
    }
    for area in &mut span.areas {
        times(&mut area.level, FEET);
        area.area *= FEET * FEET;
        area.whole *= FEET * FEET;
        area.weight *= scale.force;
        area.at.iter_mut().for_each(point);
        area.beyond.iter_mut().chain(&mut area.sideways).for_each(|f| *f *= scale.force);
    }
    for pier in &mut span.piers {
        times(&mut pier.least, scale.force);
        times(&mut pier.greatest, scale.force);
    }
    span.cases.iter_mut().for_each(|c| case(c, scale));
    if let Some(suggestion) = &mut span.suggestion {
        for axis in &mut suggestion.axes {
            times(&mut axis.horizontal, scale.force);
            axis.points.iter_mut().for_each(point);
            for m in &mut axis.moves {
                point(&mut m.at);
                m.by *= FEET;
            }
            axis.reason = axis.reason.as_deref().map(prose);
        }
        if let Some(depth) = &mut suggestion.depth {
            times(&mut depth.depth_min, FEET);
            times(&mut depth.depth_max, FEET);
        }
    }
}

fn case(case: &mut Case, scale: &Scale) {
    case.total_load.iter_mut().for_each(|f| *f *= scale.force);
    case.forces.iter_mut().flatten().for_each(|f| *f *= scale.force);
    if let Some(pole) = &mut case.pole {
        [&mut pole.horizontal, &mut pole.vertical, &mut pole.scatter]
            .into_iter()
            .for_each(|f| *f *= scale.force);
    }
    case.lines.iter_mut().for_each(|l| line(l, scale));
    for forces in &mut case.section_forces {
        forces.thrust *= scale.force;
        forces.moment *= scale.moment;
        forces.s *= FEET;
        point(&mut forces.at);
    }
    if let Some(safety) = &mut case.safety {
        times(&mut safety.least_depth, FEET);
        safety.hinges.iter_mut().for_each(|h| point(&mut h.at));
    }
    case.traffic.iter_mut().for_each(|t| traffic(t, scale));
}

/// A train: what it does to the span, and where it stands for it.
fn traffic(train: &mut Traffic, scale: &Scale) {
    train.reason = train.reason.as_deref().map(prose);
    train.taken.iter_mut().for_each(|t| *t = prose(t));
    for step in [&mut train.step, &mut train.finest_step] {
        times(step, FEET);
    }
    for station in &mut train.envelope {
        point(&mut station.at);
        station.s *= FEET;
        for length in [
            &mut station.depth,
            &mut station.eccentricity_min,
            &mut station.eccentricity_max,
            &mut station.position_min,
            &mut station.position_max,
        ] {
            times(length, FEET);
        }
        for forces in station.thrust_min.iter_mut().chain(&mut station.thrust_max) {
            forces.thrust *= scale.force;
            forces.moment *= scale.moment;
            forces.position *= FEET;
        }
    }
    let worst = |value: &mut WorstValue, by: f64| {
        times(&mut value.value, by);
        times(&mut value.position, FEET);
        value.at.iter_mut().for_each(point);
    };
    if let Some(w) = &mut train.worst {
        worst(&mut w.offset, FEET);
        worst(&mut w.stress, KSI);
        for bare in [&mut w.kern, &mut w.ring, &mut w.load_factor, &mut w.load_factor_least, &mut w.multiple]
        {
            worst(bare, 1.0);
        }
    }
    if let Some(push) = &mut train.push {
        for pair in [&mut push.left, &mut push.right, &mut push.inside_ring] {
            pair.iter_mut().for_each(|v| worst(v, scale.force));
        }
    }
    train.hinges.iter_mut().for_each(|h| point(&mut h.at));
    if let Some(at) = &mut train.at_worst {
        for axle in &mut at.axles {
            point(&mut axle.at);
            axle.force *= scale.force;
        }
        at.road.iter_mut().chain(&mut at.line).for_each(point);
        let forces = [&mut at.applied, &mut at.on_rib].into_iter().chain(&mut at.beside);
        forces.flatten().for_each(|f| *f *= scale.force);
    }
    for line in &mut train.influence {
        point(&mut line.at);
        line.s *= FEET;
        for o in &mut line.ordinates {
            // Of one unit of force: a push is a number, a moment a length, an eccentricity a length for each unit.
            o.x *= FEET;
            o.moment *= FEET;
            times(&mut o.eccentricity, FEET / scale.force);
        }
    }
}

fn line(line: &mut Line, scale: &Scale) {
    for end in line.left.iter_mut().chain(&mut line.right) {
        end.horizontal *= scale.force;
        end.vertical *= scale.force;
        times(&mut end.eccentricity, FEET);
    }
    line.vertices.iter_mut().for_each(point);
    line.reason = line.reason.as_deref().map(prose);
    if let Some(offset) = &mut line.offset {
        [&mut offset.max_abs, &mut offset.signed, &mut offset.rms].into_iter().for_each(|v| *v *= FEET);
        point(&mut offset.at);
    }
    if let Some(buckling) = &mut line.buckling {
        buckling.push *= scale.force;
        times(&mut buckling.critical, scale.force);
        buckling.eccentricity *= FEET;
        point(&mut buckling.at);
    }
    line.stations.iter_mut().for_each(|s| station(s, scale));
}

fn station(station: &mut Station, scale: &Scale) {
    point(&mut station.at);
    station.s *= FEET;
    station.thrust *= scale.force;
    station.shear *= scale.force;
    station.moment *= scale.moment;
    for length in [&mut station.eccentricity, &mut station.vertical_offset, &mut station.depth] {
        times(length, FEET);
    }
    for moment in [&mut station.moment_min, &mut station.moment_max] {
        times(moment, scale.moment);
    }
    for stress in [&mut station.stress_max, &mut station.stress_min] {
        times(stress, KSI);
    }
}

fn finding(finding: &mut Finding) {
    if let Some((by, unit)) = finding.unit.as_deref().and_then(of_unit) {
        times(&mut finding.value, by);
        times(&mut finding.limit, by);
        finding.unit = Some(unit.into());
    }
    if let Some(at) = &mut finding.at {
        point(at);
    }
    finding.message = prose(&finding.message);
    finding.remedy = finding.remedy.as_deref().map(prose);
}

/// Factor and unit for a value of a finding.
fn of_unit(unit: &str) -> Option<(f64, &'static str)> {
    match unit {
        "m" => Some((FEET, "ft")),
        "mm" => Some((FEET / 1000.0, "ft")),
        "kN" => Some((KIPS, "kip")),
        "MPa" => Some((KSI, "ksi")),
        _ => None,
    }
}

/// Factor, unit and least decimals of a unit in words.
fn of_word(word: &str) -> Option<(f64, &'static str, usize)> {
    match word {
        "mm" => Some((FEET * 12.0 / 1000.0, "in", 2)),
        "m" => Some((FEET, "ft", 2)),
        "kN" => Some((KIPS, "kip", 1)),
        "kNm" => Some((KIPS * FEET, "kip ft", 1)),
        "MPa" => Some((KSI, "ksi", 3)),
        _ => None,
    }
}

/// A sentence of ours with its figures in feet, inches, kips and ksi. Every figure before a unit is turned, and both of a
/// place told as `(x, y) m`; what stands in quotes is drawn so, and stays.
///
/// ```
/// use thrustmark::write::us::prose;
/// assert_eq!(prose("strays 82 mm at x = 30.48 m"), "strays 3.23 in at x = 100.00 ft");
/// assert_eq!(prose("near (3.048, 6.096) m"), "near (10.000, 20.000) ft");
/// assert_eq!(prose("the text \"12 m\" is no load"), "the text \"12 m\" is no load");
/// ```
pub fn prose(text: &str) -> String {
    let mut out = String::with_capacity(text.len());
    let mut quoted = false;
    for word in text.split_inclusive(' ') {
        let quotes = word.chars().filter(|c| matches!(c, '"' | '`' | '\u{201c}' | '\u{201d}')).count();
        let bare = word.trim_end();
        let unit = bare.trim_end_matches([',', ';', ':', '.', ')', ']']);
        match of_word(unit).filter(|_| !quoted) {
            Some((by, name, decimals)) if turn(&mut out, by, decimals) => {
                out.push_str(name);
                out.push_str(&word[unit.len()..]);
            }
            _ => out.push_str(word),
        }
        quoted ^= quotes % 2 == 1;
    }
    out
}

/// Multiplies the figure at the end of what was written, or both of a pair in brackets; whether there was one.
fn turn(out: &mut String, by: f64, decimals: usize) -> bool {
    let before = out.trim_end().len();
    let pair = out[..before].ends_with(')');
    let start = if pair {
        out[..before].rfind('(').map(|i| i + 1)
    } else {
        Some(out[..before].rfind([' ', '(', '[']).map_or(0, |i| i + 1))
    };
    let end = if pair { before - 1 } else { before };
    let Some(start) = start.filter(|s| *s < end) else { return false };
    let mut turned = Vec::new();
    for figure in out[start..end].split(", ") {
        let Ok(value) = figure.parse::<f64>() else { return false };
        let given = figure.split_once('.').map_or(0, |(_, d)| d.len());
        let places = given.max(decimals);
        turned.push(format!("{:.places$}", value * by));
    }
    out.replace_range(start..end, &turned.join(", "));
    true
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::write::sample;

    /// Against the tables of NIST Special Publication 811 (2008), appendix B.8: foot 0.3048 m, kip-force 4.448 222 kN,
    /// kip per square inch 6.894 757 MPa.
    #[test]
    fn factors() {
        assert!((1.0 / FEET - 0.3048).abs() < 1e-15);
        assert!((1.0 / KIPS - 4.448_222).abs() < 5e-7);
        assert!((1.0 / KSI - 6.894_757).abs() < 5e-7);
    }

    #[test]
    fn only_what_was_asked_for_is_turned() {
        let mut us = sample::suggested();
        us.settings = serde_json::json!({ "report": { "units": "us" } });
        let document = sample::document(vec![sample::suggested(), us]);
        let told = told(&document);
        assert_eq!(told.runs[0], document.runs[0]);
        let (si, us) = (&document.runs[1].spans[0], &told.runs[1].spans[0]);
        assert!((us.axis.span * 0.3048 - si.axis.span).abs() < 1e-12);
        let push = |s: &Span| s.cases[0].lines[0].left.as_ref().unwrap().horizontal;
        assert!((push(us) / push(si) - KIPS).abs() < 1e-12);
        let station = |s: &Span| s.cases[0].lines[0].stations[20].clone();
        let ratio = station(us).moment / station(si).moment;
        assert!((ratio - KIPS * FEET).abs() < 1e-9, "{ratio}");
        assert_eq!(told.runs[1].units.stress.as_deref(), Some("ksi"));
        let limit = told.runs[1].findings.iter().find_map(|f| f.limit).unwrap();
        assert!((limit * 0.3048 - 0.01).abs() < 1e-12);
        assert!(matches!(super::told(&sample::document(vec![sample::suggested()])), Cow::Borrowed(_)));
    }
}
