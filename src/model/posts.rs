//! Spandrel posts: a load at the deck end of a post, or on the post, acts down the post where that meets the rib.
//!
//! A post is taken as pinned at both ends: it carries the upright part of the load along its own line, and the deck holds it
//! sideways. What the deck holds so is told.

use super::note::Note;
use super::{Drawn, LineLoad, Load, Span, weight};
use crate::drawing::{Source, Stroke};
use crate::geometry::{Boxes, Point, Vec2};
use crate::job::RibDepth;
use crate::tolerance;

/// A post between deck and rib. Places in m, in the drawing's origin.
#[derive(Debug, Clone, PartialEq)]
struct Post {
    source: Source,
    /// Its end at the deck.
    top: Point,
    /// Its end at the rib.
    foot: Point,
    /// Where its line meets the axis.
    meets: Point,
}

impl Post {
    /// Unit vector down the post.
    fn down(&self) -> Vec2 {
        (self.foot - self.top).normalize()
    }

    fn length(&self) -> f64 {
        (self.foot - self.top).hypot()
    }

    /// Distance of a point from the post, or from its line above the deck up to the height `above`.
    fn distance(&self, p: Point, above: f64) -> f64 {
        let along = (p - self.top).dot(self.down()).clamp(-above, self.length());
        (p - (self.top + self.down() * along)).hypot()
    }
}

/// Puts loads that stand on a post where it meets the rib; `metres` is a drawing unit of the strokes. Line loads stay spread over
/// the rib, which is told where they stand on the deck.
pub fn carry(
    loads: &mut [Load],
    lines: &[LineLoad],
    strokes: &[Stroke],
    spans: &[Span],
    depth: Option<RibDepth>,
    metres: f64,
    notes: &mut Vec<Note>,
) {
    let posts: Vec<Post> = strokes.iter().filter_map(|s| post(s, spans, depth, metres, notes)).collect();
    if posts.is_empty() {
        return;
    }
    // Labels and marks of loads are often set above the deck; over a short post at the crown no less than over a long one.
    let above = posts.iter().map(Post::length).fold(0.0, f64::max);
    let mut carried = 0;
    let mut between: Vec<Source> = Vec::new();
    let (mut held, mut own) = (0.0, 0.0);
    for load in loads.iter_mut() {
        let nearest = posts
            .iter()
            .map(|p| (p.distance(load.at, above), p))
            .min_by(|a, b| a.0.total_cmp(&b.0).then(a.1.foot.x.total_cmp(&b.1.foot.x)));
        let Some((distance, post)) = nearest else { continue };
        if distance > tolerance::ON_POST * above {
            if stands_on_deck([load.at; 2], &posts, spans, depth) {
                between.push(load.source.clone());
            }
            continue;
        }
        let down = post.down();
        // The upright part of the load, along the post; a post that lies flat carries nothing upright.
        let along = down * (load.force.y / down.y);
        held = f64::max(held, (load.force.x - along.x).abs());
        own = f64::max(own, load.force.x.abs());
        load.at = post.meets;
        load.force = along;
        load.post = Some(post.source.clone());
        carried += 1;
    }
    let on_deck = lines.iter().filter(|l| stands_on_deck([l.from, l.to], &posts, spans, depth));
    between.extend(on_deck.map(|l| l.source.clone()));
    if carried > 0 {
        notes.push(Note::Drawn(Drawn::DownPosts { count: carried, held, own }));
    }
    if !between.is_empty() {
        notes.push(Note::Drawn(Drawn::BetweenPosts { sources: between }));
    }
}

/// Whether a load from one place to another stands between posts and not on the rib.
fn stands_on_deck(ends: [Point; 2], posts: &[Post], spans: &[Span], depth: Option<RibDepth>) -> bool {
    let (left, right) =
        posts.iter().fold((f64::INFINITY, f64::NEG_INFINITY), |(l, r), p| (l.min(p.top.x), r.max(p.top.x)));
    let inside = left < ends[1].x && ends[0].x < right;
    let on_rib = |p: Point| {
        spans.iter().any(|s| {
            let (place, distance) = s.axis.nearest(p);
            let half = weight::depths(s, depth).map_or(0.0, |d| weight::depth_at(&d, place) / 2.0);
            distance <= half + s.axis.length() * tolerance::GAP
        })
    };
    inside && !(on_rib(ends[0]) && on_rib(ends[1]))
}

/// A stroke as a post; one that is none is told.
fn post(
    stroke: &Stroke,
    spans: &[Span],
    depth: Option<RibDepth>,
    metres: f64,
    notes: &mut Vec<Note>,
) -> Option<Post> {
    let mut no_post = |why: &'static str| {
        notes.push(Note::Drawn(Drawn::NoPost { source: stroke.source.clone(), why }));
    };
    let Some([a, b]) = centre_line(stroke).map(|ends| ends.map(|p| (p.to_vec2() * metres).to_point())) else {
        no_post("it is not straight");
        return None;
    };
    let away = |p: Point| {
        let of = |s: &Span| s.axis.nearest(p);
        spans.iter().map(|s| (of(s), s)).min_by(|x, y| x.0.1.total_cmp(&y.0.1))
    };
    let ((at_a, near_a), (at_b, near_b)) = (away(a)?, away(b)?);
    let (foot, top, (place, distance), span) =
        if at_a.1 <= at_b.1 { (a, b, at_a, near_a) } else { (b, a, at_b, near_b) };
    let length = (foot - top).hypot();
    // Posts are drawn down to the extrados; where no depth says how far that is, they may end farther off the axis.
    let reach = match weight::depths(span, depth) {
        Some(d) => weight::depth_at(&d, place) / 2.0 + tolerance::POST_REACH * length,
        None => tolerance::POST_REACH_BLIND * length,
    };
    if distance > reach {
        no_post("it does not reach the rib");
        return None;
    }
    if (foot.y - top.y).abs() < tolerance::NEARLY_UPRIGHT.sin() * length {
        no_post("it lies flatter than 30° and carries no load down");
        return None;
    }
    // Where its line meets the axis, of several places the one nearest to its foot.
    let boxes = Boxes::new(&span.axis);
    let meets = span
        .axis
        .crossings_of_line(&boxes, foot, top - foot, span.axis.length() * tolerance::ONE_JOINT)
        .into_iter()
        .min_by(|x, y| x.along.abs().total_cmp(&y.along.abs()));
    let Some(meets) = meets else {
        no_post("its line does not meet the axis");
        return None;
    };
    Some(Post { source: stroke.source.clone(), top, foot, meets: span.axis.point_at(meets.s) })
}

/// Ends of a post: of a line, or of the middle line of a closed four-cornered outline between its two shorter sides.
fn centre_line(stroke: &Stroke) -> Option<[Point; 2]> {
    let points = stroke.corners()?;
    match points.as_slice() {
        [a, b, c, d, _] if stroke.closed => {
            let sides = [(*a, *b), (*b, *c), (*c, *d), (*d, *a)];
            let length = |s: &(Point, Point)| (s.1 - s.0).hypot();
            let middle = |s: (Point, Point)| s.0.midpoint(s.1);
            let even = length(&sides[0]) + length(&sides[2]) <= length(&sides[1]) + length(&sides[3]);
            Some(if even {
                [middle(sides[0]), middle(sides[2])]
            } else {
                [middle(sides[1]), middle(sides[3])]
            })
        }
        _ if stroke.closed => None,
        [a, .., b] => {
            let way = *b - *a;
            let slack = tolerance::STRAIGHT_LINE * way.hypot();
            let straight = points.iter().all(|p| (*p - *a).cross(way).abs() <= slack * way.hypot());
            (straight && way.hypot() > 0.0).then_some([*a, *b])
        }
        _ => None,
    }
}
