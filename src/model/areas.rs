//! Dead load by outline and fill: what each piece of the ring carries of every area, exactly.
//!
//! Upright cuts through the places where the joints meet the extrados (the axis, where no depth is known) divide what stands
//! over the ring; what stands beyond its ends is left to the abutments. Fill that presses sideways does so with the vertical
//! pressure that its own weight has on the extrados, on the vertical projection of each piece.

use super::outline::{self, Groups};
use super::roof::Roof;
use super::{Forces, Model, Span};
use crate::drawing::Source;
use crate::drawing::outlines::Rule;
use crate::geometry::slab::{self, Between, Bounding, Edge, Moments, TooMany, Upright};
use crate::geometry::{Point, Segment, Vec2};
use crate::job::{Area, Settings};
use crate::refusal::Refusal;
use crate::tolerance;

/// An area of the job as it stands on the spans of a drawing.
#[derive(Debug, Clone, PartialEq)]
pub struct Weighed {
    /// Its name.
    pub name: String,
    /// The outlines; the entities of the extrados for fill up to a level.
    pub sources: Vec<Source>,
    /// The level, m; `None` for outlines.
    pub level: Option<f64>,
    /// Weight per area of the elevation, kN/m²: unit weight times width.
    pub weight: f64,
    /// Sideways over vertical pressure on the extrados.
    pub pressure: Option<f64>,
    /// Upper bound of the same ratio, where resistance counts.
    pub passive: f64,
    /// Area of the outlines, m², by Green's theorem on their loops; of fill, without the cuts.
    pub whole: f64,
    /// What separates the sum of all parts from it, relative.
    pub residual: f64,
    /// What stands on each span, in order.
    pub shares: Vec<Share>,
    /// Areas beyond the rings, m²: left of the first span, between spans, right of the last.
    pub beyond: Vec<f64>,
    /// Area over a span but under its extrados, m².
    pub under: f64,
    /// Where outlines cross themselves or one another, m.
    pub crossing: Option<Point>,
    /// Area that several hatches or outlines cover, m², counted as often.
    pub doubled: f64,
    /// Area that it covers together with later areas of the job, m², by their names.
    pub over: Vec<(String, f64)>,
    /// Area of voids: what loops within loops leave out, m².
    pub voids: f64,
    /// Entities left aside because another one draws the same.
    pub doubles: Vec<(Source, Source)>,
    /// Loops passed over that only keep room for texts.
    pub text_boxes: usize,
}

/// What stands on one span.
#[derive(Debug, Clone, PartialEq, Default)]
pub struct Share {
    /// The pieces, from left to right.
    pub strips: Vec<Strip>,
    /// Part of the extrados, measured level, over which there is no fill because it rises above the level; 0 to 1.
    pub bare: f64,
    /// Whether it stands on the axis because no depth is known.
    pub on_axis: bool,
}

/// What one piece of a ring carries.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Strip {
    /// Lengths along the axis of its joints, m.
    pub between: (f64, f64),
    /// Area over it, m².
    pub area: f64,
    /// Its centroid, m; the middle of the roof where there is none.
    pub centroid: Point,
    /// `∫ h dy` over the extrados where it rises to the right, and where it falls (negative), with the height above it in each:
    /// m², and the place where it acts, m.
    pub rise: [(f64, Point); 2],
}

/// A force that stands for a piece of an area.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Lump {
    /// Index of the area.
    pub area: usize,
    /// Length along the axis at which it enters the ring, m.
    pub s: f64,
    /// Where it acts, m.
    pub at: Point,
    /// Components to the right and upward, kN, without the factor of a case.
    pub force: Vec2,
}

impl Share {
    /// Area over the span, m², and its centroid.
    pub fn total(&self) -> (f64, Option<Point>) {
        let area: f64 = self.strips.iter().map(|s| s.area).sum();
        let first = self.strips.iter().fold(Vec2::ZERO, |m, s| m + s.centroid.to_vec2() * s.area);
        (area, (area > 0.0).then(|| (first / area).to_point()))
    }
}

/// The forces of all areas on one span, area by area from left to right.
pub fn lumps(model: &Model, span: &str) -> Vec<Lump> {
    let span = model.place_of(span);
    let mut out = Vec::new();
    for (area, weighed) in model.areas.iter().enumerate() {
        let Some(share) = weighed.shares.get(span) else {
            continue;
        };
        for strip in &share.strips {
            let s = f64::midpoint(strip.between.0, strip.between.1);
            if strip.area > 0.0 {
                let force = Vec2::new(0.0, -weighed.weight * strip.area);
                out.push(Lump { area, s, at: strip.centroid, force });
            }
            for (rise, at) in strip.rise {
                let force = weighed.pressure.unwrap_or(0.0) * weighed.weight * rise;
                if force.abs() > 0.0 {
                    out.push(Lump { area, s, at, force: Vec2::new(force, 0.0) });
                }
            }
        }
    }
    out
}

/// Lengths along the axis of the joints between the pieces that weight is cut for, m: those of the stated voussoirs, else of
/// [`tolerance::FILL_PIECES`] equal pieces.
pub fn joints(span: &Span, settings: &Settings) -> Vec<f64> {
    let n = settings.rib.voussoirs.unwrap_or(tolerance::FILL_PIECES).max(1);
    let whole = span.axis.length();
    (0..=n).map(|k| whole * f64::from(k) / f64::from(n)).collect()
}

/// Weighs the areas of the job on the spans of a model. None where forces are multiples of an unknown load.
///
/// # Errors
/// When an outline does not close, is too tangled, or no width is given.
pub fn weigh(model: &Model, settings: &Settings) -> Result<Vec<Weighed>, Refusal> {
    if settings.area.is_empty() || model.forces == Forces::UnitLoads {
        return Ok(Vec::new());
    }
    let (outlines, metres) = &model.outlines;
    let origin = model.spans.first().map_or(Point::ORIGIN, |s| s.axis.start());
    let ground = Ground::new(model, settings, origin);
    let mut regions = Vec::new();
    let mut all = Vec::new();
    for (i, area) in settings.area.iter().enumerate() {
        let Some(width) = area.width.or(settings.rib.width) else {
            let refusal = Refusal::new(
                "area-width",
                format!("[[area]] {} has no width, and [rib] has none: its weight cannot be told", area.name),
                "Add `width` to the area or to [rib], in metres",
            );
            return Err(match &settings.origin.file {
                Some(file) => refusal.in_file(file),
                None => refusal,
            });
        };
        let (region, sources, groups) = match (area.level, outlines.get(i)) {
            (Some(level), _) => {
                let rings = model.spans.iter().filter_map(|s| s.ring.as_ref()).flat_map(|r| r.sources.iter());
                let mut sources: Vec<Source> = rings.cloned().collect();
                if sources.is_empty() {
                    sources = model.spans.iter().flat_map(|s| s.sources.iter().cloned()).collect();
                }
                (Region::fill(&ground, level - origin.y), sources, None)
            }
            (None, Some(drawn)) => {
                let groups = outline::groups(drawn, *metres, origin)?;
                let mut sources: Vec<Source> = Vec::new();
                for one in groups.groups.iter().flat_map(|g| &g.loops) {
                    if !sources.contains(&one.source) {
                        sources.push(one.source.clone());
                    }
                }
                (Region::drawn(&groups), sources, Some(groups))
            }
            (None, None) => continue,
        };
        let boxes = outlines.get(i).map_or(0, |o| o.hatches.iter().map(|h| h.text_boxes).sum());
        let weight = area.unit_weight * width;
        let weighed = ground.weigh(area, weight, &region, sources, groups.as_ref(), boxes);
        all.push(weighed.map_err(|TooMany| tangled(area))?);
        regions.push(region);
    }
    for (i, one) in regions.iter().enumerate() {
        for (j, other) in regions.iter().enumerate().skip(i + 1) {
            let both = both(one, other).map_err(|TooMany| tangled(&settings.area[j]))?;
            if both > all[i].whole.min(all[j].whole) * tolerance::AREA_OVERLAP {
                let name = all[j].name.clone();
                all[i].over.push((name, both));
            }
        }
    }
    Ok(all)
}

fn tangled(area: &Area) -> Refusal {
    Refusal::new(
        "area-tangled",
        format!("[[area]] {}: its outlines have too many edges over one another to be weighed", area.name),
        "Draw the area with one simple outline",
    )
}

/// Area that two regions cover together.
fn both(a: &Region, b: &Region) -> Result<f64, TooMany> {
    let theirs = b.edges.iter().map(|e| Bounding { edge: e.edge, owner: e.owner + a.owners });
    let edges: Vec<Bounding> = a.edges.iter().copied().chain(theirs).collect();
    let mut sum = 0.0;
    slab::walk(&edges, a.owners + b.owners, 0, &[], &mut |part| {
        let (mine, theirs) = part.odd.split_at(a.owners);
        if a.times(mine) > 0 && b.times(theirs) > 0 {
            sum += part.moments().area;
        }
    })?;
    Ok(sum)
}

/// A part of the elevation, bounded by edges.
struct Region {
    edges: Vec<Bounding>,
    uprights: Vec<Upright>,
    owners: usize,
    kind: Kind,
}

enum Kind {
    /// Over the extrados (owner 0) and under the level (owner 1).
    Fill,
    /// Groups of owners, each with its rule.
    Drawn(Vec<(Rule, std::ops::Range<usize>)>),
}

impl Region {
    fn fill(ground: &Ground, level: f64) -> Self {
        let mut edges: Vec<Bounding> = Vec::new();
        for place in &ground.places {
            edges.extend(place.edges.iter().map(|edge| Bounding { edge: *edge, owner: 0 }));
            let (a, b) = place.ends;
            let line = Segment::line(Point::new(a, level), Point::new(b, level));
            edges.extend(Edge::of(&line).into_iter().map(|edge| Bounding { edge, owner: 1 }));
        }
        Self { edges, uprights: Vec::new(), owners: 2, kind: Kind::Fill }
    }

    fn drawn(groups: &Groups) -> Self {
        let (mut edges, mut uprights) = (Vec::new(), Vec::new());
        let mut owners = 0;
        let mut kinds = Vec::new();
        for group in &groups.groups {
            let from = owners;
            for one in &group.loops {
                let all = one.pieces.iter().flat_map(Edge::of);
                edges.extend(all.map(|edge| Bounding { edge, owner: owners }));
                uprights.extend(one.pieces.iter().filter_map(Upright::of));
                owners += 1;
            }
            kinds.push((group.rule, from..owners));
        }
        Self { edges, uprights, owners, kind: Kind::Drawn(kinds) }
    }

    /// How many times a place counts that lies over an odd number of edges of these owners.
    fn times(&self, odd: &[bool]) -> u32 {
        match &self.kind {
            Kind::Fill => u32::from(odd[0] && !odd[1]),
            Kind::Drawn(groups) => groups
                .iter()
                .map(|(rule, of)| {
                    let around = odd[of.clone()].iter().filter(|o| **o).count();
                    u32::from(match rule {
                        Rule::EvenOdd => around % 2 == 1,
                        Rule::Outermost => around == 1,
                        Rule::Whole => around > 0,
                    })
                })
                .sum(),
        }
    }
}

/// The rings on which areas stand, about an origin.
struct Ground {
    origin: Point,
    places: Vec<Place>,
}

/// One ring.
struct Place {
    edges: Vec<Edge>,
    ends: (f64, f64),
    joints: Vec<f64>,
    cuts: Vec<f64>,
    on_axis: bool,
}

/// What has been gathered of a strip.
#[derive(Clone, Copy, Default)]
struct Gathered {
    moments: Moments,
    /// `∫ h dy` and its first moments, rising and falling.
    rise: [(f64, Vec2); 2],
}

impl Ground {
    fn new(model: &Model, settings: &Settings, origin: Point) -> Self {
        let by = -origin.to_vec2();
        let mut places: Vec<Place> = Vec::new();
        for span in &model.spans {
            let roof = Roof::new(span, settings.rib.depth);
            let joints = joints(span, settings);
            let cuts = roof.cuts(&joints).iter().map(|x| x - origin.x).collect();
            let ends = (roof.across().0 - origin.x, roof.across().1 - origin.x);
            let edges = roof.edges().iter().map(|e| e.moved(by)).collect();
            places.push(Place { edges, ends, joints, cuts, on_axis: roof.is_axis() });
        }
        // Where two rings reach over one another at a pier, each carries half of what stands there.
        for i in 1..places.len() {
            let (a, b) = (places[i - 1].ends.1, places[i].ends.0);
            if a > b {
                let middle = f64::midpoint(a, b);
                places[i - 1].end_at(middle, false);
                places[i].end_at(middle, true);
            }
        }
        Self { origin, places }
    }

    fn weigh(
        &self,
        area: &Area,
        weight: f64,
        region: &Region,
        sources: Vec<Source>,
        groups: Option<&Groups>,
        text_boxes: usize,
    ) -> Result<Weighed, TooMany> {
        // Behind the owners of the region one for each ring.
        let mut edges = region.edges.clone();
        for (i, place) in self.places.iter().enumerate() {
            edges.extend(place.edges.iter().map(|e| Bounding { edge: *e, owner: region.owners + i }));
        }
        let cuts: Vec<f64> = self.places.iter().flat_map(|p| p.cuts.iter().copied()).collect();
        let mut strips: Vec<Vec<Gathered>> =
            self.places.iter().map(|p| vec![Gathered::default(); p.joints.len() - 1]).collect();
        let mut beyond = vec![Moments::default(); self.places.len() + 1];
        let mut bare = vec![0.0; self.places.len()];
        let (mut under, mut doubled) = (0.0, 0.0);
        let presses = area.earth_pressure.is_some() || area.passive > 0.0;
        let mut each = |part: &Between<'_>| {
            let middle = f64::midpoint(part.sides.0, part.sides.1);
            let times = f64::from(region.times(part.odd));
            let over = self.places.iter().position(|p| p.ends.0 <= middle && middle <= p.ends.1);
            if times <= 0.0 {
                if let (Kind::Fill, Some(i)) = (&region.kind, over)
                    && part.odd[1]
                    && !part.odd[0]
                {
                    bare[i] += part.sides.1 - part.sides.0;
                }
                return;
            }
            let m = part.moments();
            let m = Moments { area: m.area * times, x: m.x * times, y: m.y * times };
            doubled += m.area * (times - 1.0) / times;
            let Some(i) = over else {
                let zone = self.places.iter().filter(|p| p.ends.1 < middle).count();
                beyond[zone] += m;
                return;
            };
            let place = &self.places[i];
            let over_ring = part.odd[region.owners + i] || matches!(region.kind, Kind::Fill);
            if !over_ring {
                under += m.area;
            }
            let strip = &mut strips[i][place.strip(middle)];
            strip.moments += m;
            if presses
                && over_ring
                && let Some(edge) = place.edge_at(middle)
            {
                for (at, dy) in edge.rises(part.sides.0, part.sides.1) {
                    let h = part.above.edge.y_at(at.x) - part.below.edge.y_at(at.x);
                    let side = &mut strip.rise[usize::from(dy < 0.0)];
                    side.0 += times * h * dy;
                    side.1 += at.to_vec2() * (times * h * dy);
                }
            }
        };
        let crossed = slab::walk(&edges, region.owners + self.places.len(), region.owners, &cuts, &mut each)?;
        let crossing = match crossed.first().filter(|_| groups.is_some()) {
            Some(crossed) => Some(crossed.at),
            None => Upright::crossed(&region.uprights, &region.edges)?,
        };
        let crossing = crossing.map(|at| at + self.origin.to_vec2());
        let (whole, voids) = match groups {
            Some(groups) => {
                let all: f64 = groups.groups.iter().map(|g| outline::whole(g).area).sum();
                let loops = groups.groups.iter().flat_map(|g| &g.loops);
                (all, (loops.map(|l| l.enclosed.area).sum::<f64>() - all).max(0.0))
            }
            None => {
                let mut sum = Moments::default();
                slab::walk(&region.edges, region.owners, 0, &[], &mut |part| {
                    if region.times(part.odd) > 0 {
                        sum += part.moments();
                    }
                })?;
                (sum.area, 0.0)
            }
        };
        let parts: f64 = strips.iter().flatten().map(|s| s.moments.area).sum::<f64>()
            + beyond.iter().map(|m| m.area).sum::<f64>();
        let shares = self.places.iter().zip(&strips).zip(&bare);
        Ok(Weighed {
            name: area.name.clone(),
            sources,
            level: area.level,
            weight,
            pressure: area.earth_pressure,
            passive: area.passive,
            whole,
            residual: (parts - whole).abs() / whole.abs().max(f64::MIN_POSITIVE),
            shares: shares.map(|((place, strips), bare)| place.share(strips, *bare, self.origin)).collect(),
            beyond: beyond.iter().map(|m| m.area).collect(),
            under,
            crossing,
            doubled,
            over: Vec::new(),
            voids: if voids > whole.abs() * tolerance::AREA_OVERLAP { voids } else { 0.0 },
            doubles: groups.map(|g| g.doubles.clone()).unwrap_or_default(),
            text_boxes,
        })
    }
}

impl Place {
    /// Ends at an abscissa.
    fn end_at(&mut self, x: f64, left: bool) {
        let keep = if left { (x, self.ends.1) } else { (self.ends.0, x) };
        self.ends = keep;
        for cut in &mut self.cuts {
            *cut = cut.clamp(keep.0, keep.1);
        }
        self.edges.retain(|e| e.right.x > keep.0 && e.left.x < keep.1);
        for edge in &mut self.edges {
            *edge = edge.between(keep.0, keep.1);
        }
    }

    fn strip(&self, x: f64) -> usize {
        (self.cuts.partition_point(|c| *c <= x).max(1) - 1).min(self.joints.len() - 2)
    }

    fn edge_at(&self, x: f64) -> Option<&Edge> {
        let i = self.edges.partition_point(|e| e.right.x < x);
        self.edges.get(i).filter(|e| e.left.x <= x)
    }

    fn share(&self, strips: &[Gathered], bare: f64, origin: Point) -> Share {
        let by = origin.to_vec2();
        let strip = |(i, g): (usize, &Gathered)| {
            let middle = f64::midpoint(self.cuts[i], self.cuts[i + 1]);
            let roof = Point::new(middle, self.edge_at(middle).map_or(0.0, |e| e.y_at(middle)));
            let rise = g.rise.map(|(p, first)| {
                let at = if p.abs() > 0.0 { (first / p).to_point() } else { roof };
                (p, at + by)
            });
            Strip {
                between: (self.joints[i], self.joints[i + 1]),
                area: g.moments.area,
                centroid: g.moments.centroid().unwrap_or(roof) + by,
                rise,
            }
        };
        let across = self.ends.1 - self.ends.0;
        Share {
            strips: strips.iter().enumerate().map(strip).collect(),
            bare: if across > 0.0 { bare / across } else { 0.0 },
            on_axis: self.on_axis,
        }
    }
}
