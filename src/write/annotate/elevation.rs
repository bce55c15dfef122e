//! What is drawn on the elevation itself: lines, ticks, letters, abutment arrows, flags.

use std::f64::consts::{FRAC_PI_2, PI};

use crate::geometry::{Point, Vec2};
use crate::outcome::{Case, Check, Finding, FindingVerdict, Line, LineKind, Run, Status, Xy};
use crate::tags::marks::{Across, Along};
use crate::tolerance;
use crate::write::annotate::pen::{Canvas, Dash, LEADING, Layer, Leader, Words};
use crate::write::annotate::place::width;
use crate::write::annotate::ring;
use crate::write::annotate::shown::{Shown, governing, kind_name, point};
use crate::write::text;

/// Draws all spans. What texts must keep off is drawn first, then texts from the one that matters most. Gives back how
/// many figures found no room.
pub fn draw(run: &Run, spans: &[Shown], canvas: &mut Canvas) -> usize {
    for shown in spans {
        canvas.taken.keep_off(&shown.chords);
        ring::draw(run, shown, canvas);
        other_lines(shown, canvas);
        line(shown, canvas);
        for s in joints(shown) {
            tick(shown, s, canvas);
        }
    }
    let arrows: Vec<[Option<Arrow>; 2]> =
        spans.iter().map(|s| [arrow(s, true, canvas), arrow(s, false, canvas)]).collect();
    rings(run, spans, canvas);
    for shown in spans {
        worst_figure(shown, canvas);
        letters(shown, canvas);
    }
    flags(run, spans, canvas);
    for (shown, arrows) in spans.iter().zip(&arrows) {
        for arrow in arrows.iter().flatten() {
            reaction(run, shown, arrow, spans.len() > 1, canvas);
        }
    }
    let mut hidden = 0;
    for shown in spans {
        hidden += figures(shown, canvas);
        labels(shown, canvas);
    }
    hidden
}

/// The line type of a kind of line that does not govern.
pub fn dash_of(kind: LineKind) -> Dash {
    match kind {
        LineKind::Closest => Dash::Short,
        LineKind::Through | LineKind::Elastic => Dash::Long,
        LineKind::LeastThrust => Dash::Dot,
        LineKind::GreatestThrust => Dash::TwoDots,
    }
}

/// The governing lines of the cases that are not drawn heavy, each with its name and line type.
pub fn other_cases<'a>(shown: &Shown<'a>) -> Vec<(String, Dash, &'a Line)> {
    const DASHES: [Dash; 4] = [Dash::Long, Dash::Short, Dash::Dot, Dash::TwoDots];
    shown
        .span
        .cases
        .iter()
        .filter(|other| shown.case.is_none_or(|c| !std::ptr::eq(c, *other)))
        .filter_map(|other| governing(other).map(|line| (other, line)))
        .enumerate()
        .map(|(i, (case, line))| (format!("case {}", case.name), DASHES[i % DASHES.len()], line))
        .collect()
}

/// Lines beside the governing one: others of the same case, and the governing ones of other cases.
pub fn beside<'a>(shown: &Shown<'a>) -> Vec<(String, Dash, &'a Line)> {
    let lines = shown.case.map_or(&[][..], |c| &c.lines);
    let mut out: Vec<(String, Dash, &Line)> = lines
        .iter()
        .filter(|line| shown.line.is_none_or(|g| !std::ptr::eq(g, *line)))
        .filter(|line| line.status == Status::Found && line.vertices.len() > 1)
        .map(|line| (kind_name(line.kind).to_owned(), dash_of(line.kind), line))
        .collect();
    out.extend(other_cases(shown));
    out
}

fn line(shown: &Shown, canvas: &mut Canvas) {
    canvas.heavy(Layer::Line, "line", &shown.vertices);
    canvas.taken.keep_off(&shown.vertices);
}

fn other_lines(shown: &Shown, canvas: &mut Canvas) {
    for (_, dash, line) in beside(shown) {
        let points: Vec<Point> = line.vertices.iter().map(|&v| point(v, shown.unit)).collect();
        canvas.chain(Layer::OtherLines, "other-line", &points, Some(dash));
        canvas.taken.keep_off(&points);
    }
}

/// Names of the lines beside the governing one, each with a short leader.
fn labels(shown: &Shown, canvas: &mut Canvas) {
    let h = canvas.h;
    let out = -shown.inner_side();
    for (name, _, line) in beside(shown) {
        let vertices = &line.vertices;
        let n = vertices.len();
        // Begin at the quarter point, then try the pieces from left to right.
        let places = (0..n - 1).map(|i| (n / 4 + i) % (n - 1)).flat_map(|i| {
            let (a, b) = (point(vertices[i], shown.unit), point(vertices[i + 1], shown.unit));
            // Off the middle, where the letter of the space stands.
            let from = a.lerp(b, 0.25);
            let words = name.clone();
            (3..14).map(move |k| {
                let at = from + Vec2::new(0.0, out * f64::from(k) * 1.5 * h);
                let end = at - Vec2::new(0.0, out * 0.9 * h);
                (Words::new(words.clone(), at, h).centred(), Some((from, end)))
            })
        });
        if let Some((_, Some((from, end)))) = canvas.place(Layer::OtherLines, "other-line-name", places) {
            canvas.line(Layer::OtherLines, "other-line-name", from, end);
        }
    }
}

/// Joints that get a tick: under every load, and where the line strays most.
pub fn joints(shown: &Shown) -> Vec<f64> {
    let mut out = shown.feet.clone();
    out.extend(shown.worst().map(|w| w.0));
    out.sort_by(f64::total_cmp);
    let near = shown.path.as_ref().map_or(0.0, |p| p.length()) * tolerance::SAME_JOINT;
    out.dedup_by(|b, a| *b - *a <= near);
    out
}

fn tick(shown: &Shown, s: f64, canvas: &mut Canvas) {
    if let (Some((at, normal)), Some(e)) = (shown.joint(s), shown.eccentricity(s)) {
        let end = at + normal * (e * shown.unit);
        canvas.line(Layer::Offsets, "tick", at, end);
        canvas.taken.keep_off(&[at, end]);
    }
}

/// Turns a direction so that text along it reads from below or from the right.
fn readable(direction: Vec2) -> f64 {
    let angle = direction.atan2();
    if angle > FRAC_PI_2 + tolerance::UPRIGHT {
        angle - PI
    } else if angle <= -FRAC_PI_2 + tolerance::UPRIGHT {
        angle + PI
    } else {
        angle
    }
}

/// Places for a figure along a joint: on the inner side first, farther and farther, then on the outer side. A figure that
/// has to move away from its tick is tied to it.
fn figure_places(shown: &Shown, s: f64, e: f64, words: &str, h: f64, far: u32) -> Vec<(Words, Leader)> {
    let Some((at, normal)) = shown.joint(s) else {
        return Vec::new();
    };
    let mut out = Vec::new();
    let inner = shown.inner_side();
    let half = width(words, h) / 2.0;
    for side in [inner, -inner] {
        let direction = normal * side;
        let edge = (e * shown.unit * side).max(0.0);
        for k in 0..far {
            let begin = edge + (0.9 + 0.8 * f64::from(k)) * h;
            let middle = at + direction * (begin + half);
            let leader =
                (k > 1).then(|| (at + direction * (edge + 0.4 * h), at + direction * (begin - 0.4 * h)));
            let words = Words::new(words, middle, h).centred().turned(readable(normal));
            out.push((words, leader));
        }
    }
    out
}

fn worst_figure(shown: &Shown, canvas: &mut Canvas) {
    let Some((s, e)) = shown.worst() else { return };
    let words = format!("max {} {}", text::signed_small(e, shown.units), text::length_units(shown.units).1);
    if !figure(shown, s, e, &words, 24, canvas) {
        below_all(shown, s, e, &words, canvas);
    }
    if let Some((at, normal)) = shown.joint(s) {
        canvas.circle(Layer::Offsets, "worst", at + normal * (e * shown.unit), 0.45 * canvas.h);
    }
}

/// The worst figure is never left out: where the elevation has no room, it stands below it on a leader.
fn below_all(shown: &Shown, s: f64, e: f64, words: &str, canvas: &mut Canvas) {
    let Some((joint, normal)) = shown.joint(s) else { return };
    let h = canvas.h;
    let tip = joint + normal * (e * shown.unit);
    let low = canvas.extent().map_or(tip.y, |(corner, _)| corner.y.min(tip.y));
    let places = (0..400).map(|k| {
        let at = Point::new(tip.x, low - (2.0 + 0.5 * f64::from(k)) * h);
        (Words::new(words, at, h).centred(), None)
    });
    if let Some((placed, _)) = canvas.place(Layer::Offsets, "offset", places) {
        canvas.line(Layer::Offsets, "offset-leader", tip, placed.at + Vec2::new(0.0, 0.9 * h));
    }
}

/// Whether the figure found room.
fn figure(shown: &Shown, s: f64, e: f64, words: &str, far: u32, canvas: &mut Canvas) -> bool {
    let places = figure_places(shown, s, e, words, canvas.h, far);
    let placed = canvas.place(Layer::Offsets, "offset", places);
    if let Some((_, Some((a, b)))) = placed {
        canvas.line(Layer::Offsets, "offset-leader", a, b);
    }
    placed.is_some()
}

/// No more figures than fit along a long span; looking for room for thousands would only take time.
const MOST_FIGURES: usize = 300;

/// Figures at the loads, the larger first; one that finds no room near its tick is left out (the results hold them all)
/// and counted. Gives back how many.
fn figures(shown: &Shown, canvas: &mut Canvas) -> usize {
    let worst = shown.worst().map(|w| w.0);
    let near = shown.path.as_ref().map_or(0.0, |p| p.length()) * tolerance::SAME_JOINT;
    let mut list: Vec<(f64, f64)> = joints(shown)
        .into_iter()
        .filter(|s| worst.is_none_or(|w| (s - w).abs() > near))
        .filter_map(|s| shown.eccentricity(s).map(|e| (s, e)))
        .collect();
    list.sort_by(|a, b| b.1.abs().total_cmp(&a.1.abs()));
    let mut hidden = list.len().saturating_sub(MOST_FIGURES);
    list.truncate(MOST_FIGURES);
    for (s, e) in list {
        let placed = figure(shown, s, e, &text::signed_small(e, shown.units), 6, canvas);
        hidden += usize::from(!placed);
    }
    hidden
}

/// Bow's letters, one in each space between the lines of action, on the side of the loads.
fn letters(shown: &Shown, canvas: &mut Canvas) {
    let Some(path) = &shown.path else { return };
    let h = canvas.h;
    let length = path.length();
    let out = -shown.inner_side();
    let mut edges: Vec<(f64, f64, &str)> = Vec::new();
    let mut from = 0.0;
    for (i, group) in shown.groups.iter().enumerate() {
        let feet = &shown.feet[group.start..group.end];
        let first = feet.iter().copied().fold(f64::INFINITY, f64::min);
        let last = feet.iter().copied().fold(f64::NEG_INFINITY, f64::max);
        edges.push((from, first, &group.before));
        from = last;
        if i + 1 == shown.groups.len() {
            edges.push((from, length, &group.after));
        }
    }
    for (a, b, letter) in edges {
        // A space with no room between the springing and a load on it lies beyond the springing.
        let (s, beyond) = if b - a > 2.0 * h {
            (f64::midpoint(a, b), 0.0)
        } else if b <= 2.0 * h {
            (0.0, -2.2 * h)
        } else if a >= length - 2.0 * h {
            (length, 2.2 * h)
        } else {
            (f64::midpoint(a, b), 0.0)
        };
        let Some((at, normal)) = shown.joint(s) else { continue };
        let at = at + Vec2::new(beyond, 0.0);
        let places = (0..60).flat_map(|k| {
            let d = (2.2 + 0.5 * f64::from(k)) * h;
            let upright = at + Vec2::new(0.0, out * d);
            let square = at + normal * (out * d);
            [upright, square].map(|p| (Words::new(letter, p, h).centred(), None))
        });
        canvas.place(Layer::Letters, "letter", places);
    }
}

/// A drawn abutment arrow.
struct Arrow {
    tail: Point,
    left: bool,
}

/// The thrust of an abutment on the rib, drawn on the side away from the span along the line of thrust.
fn arrow(shown: &Shown, left: bool, canvas: &mut Canvas) -> Option<Arrow> {
    let line = shown.line?;
    let end = if left { line.left.as_ref()? } else { line.right.as_ref()? };
    let at = if left { *shown.vertices.first()? } else { *shown.vertices.last()? };
    let inward = if left { 1.0 } else { -1.0 };
    let push = Vec2::new(end.horizontal * inward, end.vertical);
    if push.hypot().partial_cmp(&0.0) != Some(std::cmp::Ordering::Greater) {
        return None;
    }
    let u = push.normalize();
    let h = canvas.h;
    let length = 9.0 * h;
    // A push comes from outside and ends at the springing; a pull begins there.
    let pushes = u.x * inward >= 0.0;
    let (tail, tip) = if pushes {
        (at - u * (length + 0.5 * h), at - u * (0.5 * h))
    } else {
        (at + u * (0.5 * h), at + u * (length + 0.5 * h))
    };
    canvas.arrow(Layer::Reactions, "reaction", tail, tip);
    canvas.taken.keep_off(&[tail, tip]);
    let outer = if pushes { tail } else { tip };
    Some(Arrow { tail: outer, left })
}

fn reaction(run: &Run, shown: &Shown, arrow: &Arrow, several: bool, canvas: &mut Canvas) {
    let Some(line) = shown.line else { return };
    let end = if arrow.left { &line.left } else { &line.right };
    let Some(end) = end else { return };
    let h = canvas.h;
    let mut lines = Vec::new();
    if several {
        let side = if arrow.left { "left" } else { "right" };
        lines.push(format!("{} {side}", shown.span.name));
    }
    lines.push(format!("H {}", text::force(end.horizontal, &run.units)));
    lines.push(format!("V {}", text::force(end.vertical, &run.units)));
    if let Some(moment) = springing_moment(shown, arrow.left) {
        lines.push(format!("M {} {}", text::four_digits(moment), text::moment_unit(&run.units)));
    }
    lines.push(format!("angle {} deg", thrust_angle(end.horizontal, end.vertical)));
    let (outward, across) = if arrow.left { (-1.0, Across::Right) } else { (1.0, Across::Left) };
    let inside = if arrow.left { Across::Left } else { Across::Right };
    let tall = lines.len() as f64 * LEADING * h;
    let places = (0..40).flat_map(|k| {
        let down = f64::from(k) * h;
        let beside = arrow.tail + Vec2::new(outward * 1.2 * h, tall / 2.0 - down);
        let below = arrow.tail + Vec2::new(0.0, -1.2 * h - down);
        [(beside, across), (below, across), (below, inside)]
    });
    canvas.place_block(Layer::Reactions, "reaction-figures", &lines, places);
}

/// Moment at a springing: of the station there.
pub fn springing_moment(shown: &Shown, left: bool) -> Option<f64> {
    let line = shown.line?;
    let station = if left { line.stations.first()? } else { line.stations.last()? };
    let s = if left { 0.0 } else { shown.span.axis.length };
    let near = shown.span.axis.length * tolerance::SAME_JOINT;
    let scale = station.thrust * shown.span.axis.span;
    ((station.s - s).abs() <= near).then(|| text::beside(station.moment, scale))
}

/// Slope of the thrust against the level, degrees to one decimal.
pub fn thrust_angle(horizontal: f64, vertical: f64) -> String {
    format!("{:.1}", vertical.atan2(horizontal.abs()).to_degrees())
}

/// Findings that a flag shows: limits that do not hold, accepted or not, with a place.
fn flagged(run: &Run) -> impl Iterator<Item = (&Finding, Xy)> {
    run.findings
        .iter()
        .filter(|f| matches!(f.verdict, FindingVerdict::Outside | FindingVerdict::Accepted))
        .filter_map(|f| f.at.map(|at| (f, at)))
}

/// Radius of the ring round a flagged place, in text heights.
const RING: f64 = 0.9;

/// The rings of the flags, one for each place.
fn rings(run: &Run, spans: &[Shown], canvas: &mut Canvas) {
    let unit = spans.first().map_or(1.0, |s| s.unit);
    let mut places: Vec<Xy> = flagged(run).map(|f| f.1).collect();
    places.sort_by(|a, b| a[0].total_cmp(&b[0]).then(a[1].total_cmp(&b[1])));
    places.dedup();
    for at in places {
        canvas.circle(Layer::Flags, "flag", point(at, unit), RING * canvas.h);
    }
}

/// A flag where a limit does not hold: a ring round the place, a staff, and a pennant with the words beside it.
fn flags(run: &Run, spans: &[Shown], canvas: &mut Canvas) {
    let h = canvas.h;
    for (finding, at) in flagged(run) {
        let shown = spans.iter().find(|s| finding.span.as_ref() == Some(&s.span.name)).or(spans.first());
        let Some(shown) = shown else { continue };
        let at = point(at, shown.unit);
        let out = -shown.inner_side();
        let words = flag_words(finding, shown.case, shown.span.cases.len() > 1);
        let foot = at + Vec2::new(0.0, out * RING * h);
        // Upright staffs first, each side of them; then leaning ones, where a letter stands in the way.
        let places = (0..120).flat_map(|k| {
            let lean = [0.0, 2.0, -2.0, 4.5, -4.5, 8.0][k % 6];
            let rise = 5.0 + 1.2 * ((k / 6) as f64);
            let top = at + Vec2::new(lean, out * rise) * h;
            [(1.0, Across::Left), (-1.0, Across::Right)].map(|(toward, across)| {
                let words = Words::new(words.clone(), top + Vec2::new(toward * 2.2 * h, 0.0), h)
                    .across(across)
                    .along(Along::Middle);
                (words, Some((foot, top)))
            })
        });
        let Some((words, Some((_, top)))) = canvas.place(Layer::Flags, "flag-words", places) else {
            continue;
        };
        let up = Vec2::new(0.0, 0.6 * h);
        let peak = top + Vec2::new((words.at.x - top.x).signum() * 1.6 * h, 0.0);
        canvas.line(Layer::Flags, "flag", foot, top + up * out);
        canvas.triangle(Layer::Flags, "flag", [top + up, top - up, peak]);
        canvas.taken.keep_off(&[top + up, peak, top - up, top + up]);
    }
}

fn flag_words(finding: &Finding, drawn: Option<&Case>, several: bool) -> String {
    let mut words = check_name(finding.check).to_uppercase();
    if let Some(figures) = text::against_limit(finding) {
        words.push(' ');
        words.push_str(&figures);
    }
    if let Some(case) = &finding.case
        && several
        && drawn.is_none_or(|c| &c.name != case)
    {
        words.push_str(&format!(" (case {case})"));
    }
    if finding.verdict == FindingVerdict::Accepted {
        words.push_str(" (accepted)");
    }
    words
}

/// The name of a check, for people.
pub fn check_name(check: Check) -> String {
    serde_json::to_value(check).ok().and_then(|v| v.as_str().map(|s| s.replace('-', " "))).unwrap_or_default()
}
