//! Buckling, imperfection, shared bending and sharp curvature of an elastic rib.

use super::{With, length, note, spans};
use crate::job::{Settings, Support};
use crate::model::Forces;
use crate::outcome::{self, Check, Finding, SectionForces, Span};
use crate::statics::{Analysis, Bending, Line, LineKind, Offset, Rule, Status, Use};
use crate::tolerance;

/// Least radius of the axis over the depth for which a curved rib is reckoned as a straight bar [Timoshenko and Goodier,
/// Theory of Elasticity, 3rd ed. 1970, section 29: the stress of a curved bar differs by 3 % at a ratio of 10].
const SHARP: f64 = 10.0;

/// The governing line as limits see it: with the bending of the rib where that differs from the line's own.
pub fn state(line: &Line) -> Line {
    let Some(b) = &line.bending else { return line.clone() };
    let mut state = line.clone();
    if let Some(offset) = &mut state.offset {
        *offset =
            Offset { max_abs: b.eccentricity.abs(), signed: b.eccentricity, at: b.at, s: b.s, ..*offset };
    }
    if let Some(used) = &mut state.depth_use {
        *used = Use { ratio: b.ratio.0, at: b.ratio.1, s: b.ratio.2 };
    }
    state
}

/// What is worth saying of a slender rib.
pub fn notes(
    analysis: &Analysis,
    span: &Span,
    settings: &Settings,
    forces: Forces,
    findings: &mut Vec<Finding>,
) {
    let mut fresh = Vec::new();
    let governing = &analysis.lines[analysis.governs];
    let elastic = analysis.lines.iter().any(|l| l.kind == LineKind::Elastic && l.status == Status::Found);
    if let Some((ratio, at)) = analysis.sharpest.filter(|(ratio, _)| elastic && *ratio < SHARP) {
        fresh.push(
            note(
                Check::Buckling,
                format!(
                    "the axis is bent to {ratio:.1} times the depth: below {SHARP:.0} the stresses of a curved bar differ \
                     from those of a straight one, which were told"
                ),
            )
            .value(ratio, "1")
            .at(spans::xy(at)),
        );
    }
    let rib = &settings.rib;
    let imperfection = rib.imperfection.unwrap_or(0.0).abs();
    if let Some(b) = &governing.bending {
        bending(b, imperfection, &mut fresh);
        if rib.deck_inertia > 0.0 && b.share.is_none() {
            let why = if rib.support == Some(Support::ThreeHinged) {
                "the deck has no hinge where the rib has its crown hinge"
            } else {
                "nothing varies in this case, and a deck shares the bending of the varying loads alone"
            };
            fresh.push(not_counted("deck_inertia", why));
        }
    } else if forces == Forces::Kilonewtons && governing.status == Status::Found {
        let why = "it bends an elastic rib of known depth that governs (support hingeless, two-hinged or three-hinged)";
        for (key, given) in [("imperfection", imperfection > 0.0), ("deck_inertia", rib.deck_inertia > 0.0)] {
            if given {
                fresh.push(not_counted(key, why));
            }
        }
    }
    findings.extend(fresh.into_iter().map(|f| f.of(&span.name)));
}

fn not_counted(key: &str, why: &str) -> Finding {
    note(Check::NotJudged, format!("[rib] {key} was not counted: {why}"))
        .uncheck()
        .remedy("remove the key, or give what it needs")
}

fn bending(b: &Bending, imperfection: f64, fresh: &mut Vec<Finding>) {
    match (b.critical, b.coefficient) {
        (Some(critical), Some(coefficient)) => {
            let mut text = format!(
                "the push of {:.1} kN is {:.1} % of the {critical:.1} kN at which the rib buckles in its plane \
                 ({coefficient:.1} EI/l\u{b2}, for a parabola of uniform stiffness under a load uniform in plan; out of its \
                 plane was not looked at); antisymmetric bending was multiplied by {:.3}",
                b.push,
                100.0 * b.push / critical,
                b.amplification
            );
            if imperfection <= 0.0 {
                text.push_str("; no imperfection was stated, and a funicular rib without one has nothing to multiply");
            } else {
                text.push_str(&format!(
                    "; with an imperfection of {} to either side the moment in the rib is at most {} times its thrust",
                    length(imperfection),
                    length(b.eccentricity.abs())
                ));
            }
            fresh.push(note(Check::Buckling, text).value(b.push / critical, "1").at(spans::xy(b.at)));
        }
        _ => fresh.push(
            note(
                Check::Buckling,
                "no coefficient of buckling is published for so high a rise: whether the rib buckles was not looked at",
            )
            .uncheck(),
        ),
    }
    if let Some((slim, limit)) = b.shallow {
        fresh.push(
            note(
                Check::Buckling,
                format!(
                    "the rise is {slim:.1} times the radius of gyration: below {limit:.1} a rib may snap through before it \
                     buckles sideways, at a push that was not worked out"
                ),
            )
            .value(slim, "1"),
        );
    }
    if let Some((low, high)) = b.share {
        fresh.push(note(
            Check::Buckling,
            format!(
                "of the bending by the varying loads the rib has {:.1} to {:.1} %, the deck the rest; the forces in the posts \
                 change with it, so the moments told are not those of a line of thrust of the drawn loads: the line drawn is \
                 that of rib and deck together",
                low * 100.0,
                high * 100.0
            ),
        ));
    }
}

/// Buckling as the results hold it.
pub fn told(b: &Bending) -> outcome::Buckling {
    outcome::Buckling {
        push: b.push,
        critical: b.critical,
        coefficient: b.coefficient,
        amplification: b.amplification,
        shallow: b.shallow.is_some(),
        share: b.share.map(|(low, high)| [low, high]),
        eccentricity: b.eccentricity,
        at: spans::xy(b.at),
    }
}

/// Both extremes of thrust and of moment over the stations of a line that is the state of the rib, each with what goes with
/// it. Nothing of a line that is only the most favourable one.
pub fn section_forces(analysis: &Analysis) -> Vec<SectionForces> {
    let line = &analysis.lines[analysis.governs];
    if matches!(analysis.rule, Rule::RingWithoutTension | Rule::AxisOnly | Rule::Cable) {
        return Vec::new();
    }
    let mut pairs = Vec::new();
    for (i, s) in line.stations.iter().enumerate() {
        let both = line.bending.as_ref().map_or([s.moment; 2], |b| b.moments[i]);
        pairs.extend(both.map(|m| (s.thrust, m, s)));
    }
    type Pair<'a> = (f64, f64, &'a crate::statics::Station);
    let size = pairs.iter().fold(0.0, |m, p| f64::max(m, p.0.abs()));
    // Thrusts that are equal but for rounding: the greater moment counts.
    let even = |v: f64| (v / (size * tolerance::SAME_JOINT)).round();
    let top = |what: &str, key: &dyn Fn(&Pair) -> (f64, f64)| {
        let best = pairs.iter().max_by(|a, b| {
            let (a, b) = (key(a), key(b));
            a.0.total_cmp(&b.0).then(a.1.total_cmp(&b.1))
        });
        best.map(|(n, m, s)| SectionForces {
            what: what.into(),
            thrust: *n,
            moment: *m,
            at: spans::xy(s.at),
            s: s.s,
        })
    };
    [
        top("greatest-thrust", &|p| (even(p.0), p.1.abs())),
        top("least-thrust", &|p| (-even(p.0), p.1.abs())),
        top("greatest-moment", &|p| (p.1, 0.0)),
        top("least-moment", &|p| (-p.1, 0.0)),
    ]
    .into_iter()
    .flatten()
    .collect()
}
