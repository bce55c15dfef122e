//! Which lines are shafts of arrows, and which strokes are the heads of others.
//!
//! A head is what draughtsmen draw for one: a LEADER's own, a polyline that tapers to a point, two short strokes back from the
//! tip on either side, a wedge of one polyline, a closed or filled triangle with its apex at the tip or its base across the
//! end. Nothing here depends on the order of the strokes.

use crate::drawing::{End, Stroke, clusters};
use crate::geometry::{Point, Vec2};
use crate::tolerance;

/// A straight line that may be an arrow.
#[derive(Debug, Clone, PartialEq)]
pub struct Shaft {
    /// Index of its stroke.
    pub stroke: usize,
    /// Its ends; where a head stands beyond the line, the tip of the head.
    pub ends: [Point; 2],
    /// Which of them carry a head.
    pub heads: [bool; 2],
}

/// What the strokes are.
#[derive(Debug, Clone, PartialEq)]
pub struct Arrows {
    /// Straight lines, in the order of the strokes.
    pub shafts: Vec<Shaft>,
    /// For each stroke, the stroke whose head it is part of.
    pub head_of: Vec<Option<usize>>,
    /// For each stroke, the one that it was drawn over.
    pub double_of: Vec<Option<usize>>,
    /// For ends of strokes, two each, the lowest number of the ends that meet there.
    meets: Vec<usize>,
}

impl Arrows {
    /// Whether two strokes meet in a point.
    pub fn touch(&self, a: usize, b: usize) -> bool {
        (0..2).any(|i| (0..2).any(|j| self.meets[2 * a + i] == self.meets[2 * b + j]))
    }
}

/// Shape of a stroke.
enum Shape {
    Shaft {
        ends: [Point; 2],
        head: Option<usize>,
    },
    Triangle([Point; 3]),
    /// A point with two arms.
    Wedge(Point, [Point; 2]),
    Other,
}

/// Sorts the strokes; ends within `reach` meet.
pub fn find(strokes: &[Stroke], reach: f64) -> Arrows {
    let shapes: Vec<Shape> = strokes.iter().map(shape).collect();
    let places: Vec<Point> = strokes.iter().zip(&shapes).flat_map(|(s, shape)| ends(s, shape)).collect();
    let meets = clusters(&places, reach);
    let mut arrows = Arrows {
        shafts: Vec::new(),
        head_of: vec![None; strokes.len()],
        double_of: doubles(&shapes, &meets),
        meets,
    };
    for (stroke, shape) in shapes.iter().enumerate() {
        if let Shape::Shaft { ends, head } = *shape
            && arrows.double_of[stroke].is_none()
        {
            arrows.shafts.push(Shaft { stroke, ends, heads: [head == Some(0), head == Some(1)] });
        }
    }
    attach(&mut arrows, &shapes, reach);
    barbs(&mut arrows);
    let taken = &arrows.head_of;
    arrows.shafts.retain(|s| taken[s.stroke].is_none());
    arrows
}

fn ends(stroke: &Stroke, shape: &Shape) -> [Point; 2] {
    match (shape, &stroke.pieces[..]) {
        (Shape::Shaft { ends, .. }, _) => *ends,
        (_, [first, .., last]) => [first.start(), last.end()],
        (_, [one]) => [one.start(), one.end()],
        (_, []) => [Point::ORIGIN; 2],
    }
}

fn shape(stroke: &Stroke) -> Shape {
    let Some(points) = stroke.corners() else {
        return Shape::Other;
    };
    let head = stroke.head.map(|h| if h == End::Start { 0 } else { 1 });
    match &points[..] {
        // The first point is given again.
        [a, b, c, _] if stroke.closed => Shape::Triangle([*a, *b, *c]),
        _ if stroke.closed => Shape::Other,
        // A bent leader points as its first piece does.
        [a, b, ..] if stroke.source.kind == "LEADER" => Shape::Shaft { ends: [*a, *b], head },
        [a, .., b] if straight(&points) => Shape::Shaft { ends: [*a, *b], head },
        [a, b, c] => Shape::Wedge(*b, [*a, *c]),
        [first, .., last] => match (whole_arrow(*first, &points), whole_arrow(*last, &points)) {
            (Some(tip), _) => Shape::Shaft { ends: [*first, tip], head: Some(1) },
            (None, Some(tip)) => Shape::Shaft { ends: [tip, *last], head: Some(0) },
            (None, None) => Shape::Other,
        },
        _ => Shape::Other,
    }
}

/// Whether the points follow one another along one line.
fn straight(points: &[Point]) -> bool {
    let (Some(a), Some(b)) = (points.first(), points.last()) else {
        return false;
    };
    let way = *b - *a;
    let slack = tolerance::STRAIGHT_LINE * way.hypot();
    points.windows(2).all(|w| (w[1] - w[0]).dot(way) > 0.0)
        && points.iter().all(|p| (*p - *a).cross(way).abs() <= slack * way.hypot())
}

/// On which side of an arrow a stroke of its head lies that reaches back from the tip to `p`; `None` when it is none.
fn barb(tip: Point, tail: Point, p: Point) -> Option<f64> {
    let (shaft, arm) = (tail - tip, p - tip);
    let (back, off) = (shaft.dot(arm), shaft.cross(arm));
    let angle = off.abs().atan2(back);
    let [least, most] = tolerance::HEAD_ANGLES;
    let fits = arm.hypot() <= tolerance::HEAD_PART * shaft.hypot() && angle >= least && angle <= most;
    fits.then_some(off.signum())
}

/// Whether two strokes back from the tip make a head: one on each side, alike.
fn pair(tip: Point, tail: Point, [a, b]: [Point; 2]) -> bool {
    let (Some(one), Some(other)) = (barb(tip, tail, a), barb(tip, tail, b)) else {
        return false;
    };
    one * other < 0.0 && uneven(tip, tail, [a, b]) <= tolerance::HEAD_EVEN
}

/// By how much one stroke differs from the mirror image of the other, over their length.
fn uneven(tip: Point, tail: Point, [a, b]: [Point; 2]) -> f64 {
    let along = (tail - tip).normalize();
    let (a, b) = (a - tip, b - tip);
    let mirrored = along * (2.0 * along.dot(b)) - b;
    (a - mirrored).hypot() / a.hypot().max(b.hypot())
}

/// The tip of a polyline that draws a whole arrow from this tail: the point farthest from it, where all others lie on the
/// shaft near the tip or draw the head, on both sides.
fn whole_arrow(tail: Point, points: &[Point]) -> Option<Point> {
    let away = |p: &&Point| (**p - tail).hypot();
    let tip = *points.iter().max_by(|a, b| away(a).total_cmp(&away(b)))?;
    let length = (tail - tip).hypot();
    let slack = tolerance::HEAD_OFF * length;
    let mut sides = [false; 2];
    for p in points.iter().filter(|p| **p != tail) {
        let arm = *p - tip;
        let beside = (tail - tip).cross(arm).abs() / length;
        match barb(tip, tail, *p) {
            Some(side) => sides[usize::from(side > 0.0)] = true,
            None if beside <= slack && arm.hypot() <= tolerance::HEAD_PART * length => {}
            None => return None,
        }
    }
    (sides == [true, true]).then_some(tip)
}

/// Straight lines drawn over one another: for each the one that stays.
fn doubles(shapes: &[Shape], meets: &[usize]) -> Vec<Option<usize>> {
    let mut seen = std::collections::BTreeMap::new();
    let mut double_of = vec![None; shapes.len()];
    // One with a head of its own comes first, so that the head is not lost.
    let mut order: Vec<usize> = (0..shapes.len()).collect();
    order.sort_by_key(|&i| (!matches!(shapes[i], Shape::Shaft { head: Some(_), .. }), i));
    for i in order {
        if matches!(shapes[i], Shape::Shaft { .. }) {
            let (a, b) = (meets[2 * i], meets[2 * i + 1]);
            match seen.get(&(a.min(b), a.max(b))) {
                Some(&first) => double_of[i] = Some(first),
                None => {
                    seen.insert((a.min(b), a.max(b)), i);
                }
            }
        }
    }
    double_of
}

/// Gives wedges and triangles to the shafts at whose ends they stand.
fn attach(arrows: &mut Arrows, shapes: &[Shape], reach: f64) {
    // Ends of shafts from left to right.
    let mut by_x: Vec<(f64, usize, usize)> = arrows
        .shafts
        .iter()
        .enumerate()
        .flat_map(|(i, s)| [(s.ends[0].x, i, 0), (s.ends[1].x, i, 1)])
        .collect();
    by_x.sort_by(|a, b| a.0.total_cmp(&b.0).then((a.1, a.2).cmp(&(b.1, b.2))));
    for (stroke, shape) in shapes.iter().enumerate() {
        let (corners, wedge) = match shape {
            Shape::Triangle(corners) => (*corners, false),
            Shape::Wedge(apex, arms) => ([*apex, arms[0], arms[1]], true),
            _ => continue,
        };
        let size = (corners[1] - corners[0]).hypot().max((corners[2] - corners[0]).hypot());
        let slack = reach.max(tolerance::HEAD_OFF * size);
        let mut fitting: Vec<(f64, usize, usize, Point)> = Vec::new();
        for turn in 0..if wedge { 1 } else { 3 } {
            let [apex, a, b] = [corners[turn], corners[(turn + 1) % 3], corners[(turn + 2) % 3]];
            let base = a.midpoint(b);
            for place in [apex, base] {
                if wedge && place != apex {
                    continue;
                }
                let from = by_x.partition_point(|e| e.0 < place.x - slack);
                for &(_, shaft, end) in by_x[from..].iter().take_while(|e| e.0 <= place.x + slack) {
                    let [tip, tail] = [arrows.shafts[shaft].ends[end], arrows.shafts[shaft].ends[1 - end]];
                    if (tip - place).hypot() > slack {
                        continue;
                    }
                    // With the base across the end the head stands beyond it.
                    let beyond = (apex - base).dot(tip - tail) > 0.0;
                    if pair(apex, tail, [a, b]) && (place == apex || beyond) {
                        fitting.push(((apex - tail).hypot(), shaft, end, apex));
                    }
                }
            }
        }
        fitting.sort_by(|a, b| b.0.total_cmp(&a.0).then((a.1, a.2).cmp(&(b.1, b.2))));
        if let Some(&(_, shaft, end, apex)) = fitting.first() {
            arrows.shafts[shaft].heads[end] = true;
            arrows.shafts[shaft].ends[end] = apex;
            arrows.head_of[stroke] = Some(arrows.shafts[shaft].stroke);
        }
    }
}

/// Finds pairs of short lines that make a head; the longest arrows first.
fn barbs(arrows: &mut Arrows) {
    let mut at: std::collections::BTreeMap<usize, Vec<(usize, usize)>> = std::collections::BTreeMap::new();
    for (i, shaft) in arrows.shafts.iter().enumerate() {
        for end in 0..2 {
            at.entry(arrows.meets[2 * shaft.stroke + end]).or_default().push((i, end));
        }
    }
    let length = |s: &Shaft| (s.ends[1] - s.ends[0]).hypot();
    let mut order: Vec<usize> = (0..arrows.shafts.len()).collect();
    let key = |i: usize| {
        let s = &arrows.shafts[i];
        (length(s), s.ends[0].x + s.ends[1].x, s.ends[0].y + s.ends[1].y)
    };
    order.sort_by(|&i, &j| {
        let (a, b) = (key(i), key(j));
        b.0.total_cmp(&a.0).then(a.1.total_cmp(&b.1)).then(a.2.total_cmp(&b.2))
    });
    for i in order {
        if arrows.head_of[arrows.shafts[i].stroke].is_some() {
            continue;
        }
        for end in 0..2 {
            let shaft = &arrows.shafts[i];
            let [tip, tail] = [shaft.ends[end], shaft.ends[1 - end]];
            let meeting = at.get(&arrows.meets[2 * shaft.stroke + end]).map_or(&[][..], Vec::as_slice);
            let free: Vec<(usize, Point, f64)> = meeting
                .iter()
                .filter(|m| m.0 != i && arrows.head_of[arrows.shafts[m.0].stroke].is_none())
                .filter_map(|&(j, near)| {
                    let far = arrows.shafts[j].ends[1 - near];
                    Some((j, far, barb(tip, tail, far)?))
                })
                .collect();
            let mut best: Option<(f64, usize, usize)> = None;
            for (k, a) in free.iter().enumerate() {
                for b in &free[k + 1..] {
                    let off = uneven(tip, tail, [a.1, b.1]);
                    if a.2 * b.2 < 0.0 && off <= tolerance::HEAD_EVEN && best.is_none_or(|best| off < best.0)
                    {
                        best = Some((off, a.0, b.0));
                    }
                }
            }
            if let Some((_, a, b)) = best {
                let stroke = arrows.shafts[i].stroke;
                arrows.shafts[i].heads[end] = true;
                for part in [a, b] {
                    let part = arrows.shafts[part].stroke;
                    arrows.head_of[part] = Some(stroke);
                }
            }
        }
    }
}

/// Unit vector from one point to another.
pub fn toward(from: Point, to: Point) -> Vec2 {
    (to - from).normalize()
}
