//! One train of the job on one span: its axles, its ways across, and where its forces go.

use super::fill::Fill;
use super::posts::Posts;
use super::road::Road;
use super::{Parts, Push};
use crate::geometry::{Point, Vec2};
use crate::job::{Deck, Settings, Through, Traffic};
use crate::model::{Forces, Model, Span, weight};

/// Stretches of road that a uniform load is made of.
const STRETCHES: u32 = 200;

/// Why a train is not computed, and what would mend it.
#[derive(Debug, Clone, PartialEq)]
pub struct NotComputed {
    /// Why.
    pub why: String,
    /// What would mend it.
    pub remedy: String,
}

/// One way across.
#[derive(Debug, Clone, PartialEq)]
pub struct Course {
    /// First and last abscissa of the first axle, m: from before one end of the span to beyond the other.
    pub between: (f64, f64),
    /// Positions of the first axle at which some axle stands over a support of the deck.
    pub corners: Vec<f64>,
    /// Whether the train runs to the right.
    pub rightward: bool,
}

/// Where the forces of a train go at one position, kN.
#[derive(Debug, Clone, Copy, PartialEq, Default)]
pub struct Carried {
    /// All that stands on the road.
    pub applied: Vec2,
    /// What reaches the rib.
    pub on_rib: Vec2,
    /// What goes to the ground left of the span and right of it.
    pub beside: [Vec2; 2],
}

/// A train with all that runs beside it, on one span.
#[derive(Debug, Clone)]
pub struct Crossing {
    /// Lengths along the axis at which forces enter the ring, m.
    pub slots: Vec<f64>,
    /// The ways across; none for a uniform load alone.
    pub courses: Vec<Course>,
    /// The road.
    pub road: Road,
    /// Part of the train's force that counts: share or width over effective width, times the impact factor.
    pub scale: f64,
    /// Uniform load, kN/m, and knife edge, kN, as given: `cells` bring the scale.
    pub uniform: f64,
    /// The knife edge.
    pub knife: f64,
    /// What was taken to be so, in words.
    pub taken: Vec<String>,
    lanes: Vec<Lane>,
    ways: Vec<(usize, Way)>,
    span: (f64, f64),
}

/// The axles of one train.
#[derive(Debug, Clone)]
struct Lane {
    way: usize,
    /// Distance behind the first axle, m; downward force and size of the braking force, kN.
    axles: Vec<[f64; 3]>,
    contact: f64,
    own: bool,
}

#[derive(Debug, Clone)]
enum Way {
    Posts(Posts),
    Fill(Box<Fill>),
}

fn not(why: impl Into<String>, remedy: impl Into<String>) -> NotComputed {
    NotComputed { why: why.into(), remedy: remedy.into() }
}

/// Puts a train of the job on a span.
///
/// # Errors
/// What is missing for it: nothing without a safe default is guessed.
pub fn crossing(
    model: &Model,
    span: &Span,
    settings: &Settings,
    train: &Traffic,
) -> Result<Crossing, NotComputed> {
    if model.forces == Forces::UnitLoads {
        return Err(not(
            "the drawn loads have no figures, and beside loads of unknown size a train has no measure",
            "give the loads their figures",
        ));
    }
    if settings.rib.deck_inertia > 0.0 || settings.rib.imperfection.is_some_and(|i| i.abs() > 0.0) {
        return Err(not(
            "a deck that shares the bending and an imperfection are not reckoned with moving loads in this version",
            "take `rib.deck_inertia` and `rib.imperfection` out for the check under traffic",
        ));
    }
    let (left, right) = (span.axis.start().x, span.axis.end().x);
    let (uniform, knife) = (train.uniform.unwrap_or(0.0), train.knife.unwrap_or(0.0));
    let mut taken = Vec::new();
    let road = road_over(model, span, train, &mut taken)?;
    let others: Vec<(&Traffic, f64)> = train
        .with
        .iter()
        .filter_map(|(name, &factor)| {
            let known = settings.traffic.iter().find(|t| crate::job::same_name(&t.name, name))?;
            Some((known, factor))
        })
        .collect();
    if train.axles.is_empty() && uniform <= 0.0 && knife <= 0.0 {
        return Err(not("it has neither axles nor a uniform load nor a knife edge", "give it `axles`"));
    }
    // Where such a load is worst is looked for along one train alone.
    if let Some((other, _)) =
        others.iter().find(|(o, _)| o.uniform.unwrap_or(0.0) + o.knife.unwrap_or(0.0) > 0.0)
    {
        return Err(not(
            format!(
                "{} runs beside it and has a uniform load or a knife edge, which would not be counted",
                other.name
            ),
            "give `uniform` and `knife` to the train that the other runs beside",
        ));
    }
    let mut crossing = Crossing {
        slots: Vec::new(),
        courses: Vec::new(),
        road,
        scale: 0.0,
        uniform,
        knife,
        taken: Vec::new(),
        lanes: Vec::new(),
        ways: Vec::new(),
        span: (left, right),
    };
    for (i, (other, factor)) in std::iter::once((train, 1.0)).chain(others).enumerate() {
        let way = way(span, settings, other, model, &mut taken)?;
        let scale = scale(settings, other, &mut taken)? * other.dynamic * factor;
        if i == 0 {
            crossing.scale = scale;
        } else {
            taken.push(format!(
                "{} runs beside it with the factor {factor}, first axles abreast and the same way",
                other.name
            ));
        }
        let slots = match &way {
            Way::Posts(posts) => posts.feet.clone(),
            Way::Fill(fill) => fill.middles.clone(),
        };
        let offset = crossing.slots.len();
        crossing.slots.extend(slots);
        crossing.lanes.push(Lane {
            way: crossing.ways.len(),
            axles: other
                .axles
                .iter()
                .map(|&[behind, force]| {
                    [behind, force * scale, force * scale / other.dynamic * other.braking]
                })
                .collect(),
            contact: other.contact.unwrap_or(0.0),
            own: i == 0,
        });
        crossing.ways.push((offset, way));
    }
    crossing.set_courses(train.both_ways.unwrap_or(true));
    crossing.taken = taken;
    Ok(crossing)
}

/// The road over the span; a level line at the height of the highest load where none is drawn and none is needed.
fn road_over(
    model: &Model,
    span: &Span,
    train: &Traffic,
    taken: &mut Vec<String>,
) -> Result<Road, NotComputed> {
    let (left, right) = (span.axis.start().x, span.axis.end().x);
    if let Some(road) = Road::over(&model.road, left, right) {
        return Ok(road);
    }
    let drawn = !model.road.is_empty();
    let missing = if drawn { "no drawn road line runs over the whole span" } else { "no road line is drawn" };
    if train.through != Some(Through::Posts) {
        return Err(not(
            format!("{missing}, so the depth of the fill under a wheel is not known"),
            "draw the road line over the whole span on the layer of `[layers] road`",
        ));
    }
    let top = span.loads.iter().map(|l| l.at.y).fold(f64::NEG_INFINITY, f64::max);
    let crown = span.axis.point_at(span.axis.farthest_from_chord(false).0).y;
    taken.push(format!("{missing}: distances between axles are taken along a level deck"));
    Road::level(left, right, top.max(crown)).ok_or_else(|| not("the span has no width", "look at the axis"))
}

/// How the train reaches the rib.
fn way(
    span: &Span,
    settings: &Settings,
    train: &Traffic,
    model: &Model,
    taken: &mut Vec<String>,
) -> Result<Way, NotComputed> {
    match train.through {
        None => Err(not(
            format!("`through` of {} does not say how it reaches the rib", train.name),
            "state through = \"posts\" or through = \"fill\"",
        )),
        Some(Through::Posts) => {
            let at: Vec<f64> = span.loads.iter().map(|l| l.at.x).collect();
            let continuous = train.deck == Some(Deck::Continuous);
            let posts = Posts::new(&span.axis, &at, continuous).ok_or_else(|| {
                not(
                    "no post stands on the span: the places of the drawn loads are taken for the posts, and there is none",
                    "draw the loads of the posts, or let the train through the fill",
                )
            })?;
            taken.push(format!(
                "posts stand at the {} places of the drawn loads, and the deck {}",
                posts.feet.len(),
                if continuous {
                    "is one beam of one stiffness over them, which can lift a post"
                } else {
                    "spans between them simply supported"
                }
            ));
            if posts.end_spans().contains(&true) {
                taken.push(
                    "the end spans of the deck rest on the abutments over the springings: what goes there does not reach the rib"
                        .into(),
                );
            }
            Ok(Way::Posts(posts))
        }
        Some(Through::Fill) => {
            let Some(depths) = weight::depths(span, settings.rib.depth) else {
                return Err(not(
                    "no depth of the ring is known, so its extrados is not",
                    "draw intrados and extrados, or give [rib] depth",
                ));
            };
            let Some(dispersal) = train.dispersal else {
                return Err(not(
                    format!(
                        "`dispersal` of {} is missing: a wider spread is kinder, so none is assumed",
                        train.name
                    ),
                    "state `dispersal`, horizontal per vertical on each side",
                ));
            };
            let fill = Fill::new(span, &depths, settings.rib.voussoirs, dispersal).ok_or_else(|| {
                not("the ring has no extrados that fill could press on", "draw intrados and extrados")
            })?;
            if let Some(road) = Road::over(&model.road, span.axis.start().x, span.axis.end().x)
                && let Some(p) = fill.below(&road)
            {
                return Err(not(
                    format!("the road line lies at or below the extrados at ({:.3}, {:.3}) m", p.x, p.y),
                    "draw the road line over the ring",
                ));
            }
            Ok(Way::Fill(Box::new(fill)))
        }
    }
}

/// Part of the train that the rib carries.
fn scale(settings: &Settings, train: &Traffic, taken: &mut Vec<String>) -> Result<f64, NotComputed> {
    match (train.through, train.effective_width, train.share) {
        (_, None, Some(share)) => Ok(share),
        (Some(Through::Posts), Some(_), _) => Err(not(
            format!(
                "`effective_width` of {} is a width of ring under fill, and it runs through posts",
                train.name
            ),
            "state `share`, the part of the train on this rib",
        )),
        (Some(Through::Posts), None, None) => {
            taken.push(format!("the rib carries the whole of {}: no `share` is stated", train.name));
            Ok(1.0)
        }
        (_, Some(effective), _) => match settings.rib.width {
            Some(width) => {
                taken.push(format!(
                    "{} bears on {effective} m of ring: the whole width of {width} m is loaded like that",
                    train.name
                ));
                Ok(width / effective)
            }
            None => Err(not(
                format!(
                    "`effective_width` of {} is a part of the width of the ring, which is not given",
                    train.name
                ),
                "give [rib] width",
            )),
        },
        (_, None, None) => Err(not(
            format!(
                "`effective_width` (or `share`) of {} is missing: a wider one is kinder, so none is assumed",
                train.name
            ),
            "state `effective_width`, m of ring that carries it",
        )),
    }
}

impl Crossing {
    fn set_courses(&mut self, both: bool) {
        if self.lanes.iter().all(|l| l.axles.is_empty()) {
            return;
        }
        let longest = self.lanes.iter().flat_map(|l| &l.axles).map(|a| a[0]).fold(0.0, f64::max);
        let (mut from, mut to) = self.span;
        for lane in &self.lanes {
            if let Way::Fill(fill) = &self.ways[lane.way].1 {
                let (a, b) = fill.ends();
                let reach = fill.reach(&self.road, lane.contact);
                (from, to) = (from.min(a - reach), to.max(b + reach));
            }
        }
        // Lengths along a sloping road are longer than their abscissae.
        let (start, end) = (self.road.length_at(from), self.road.length_at(to));
        for rightward in [true, false] {
            if !rightward && !both {
                break;
            }
            let (first, last) = if rightward {
                (from, self.road.point_at(end + longest).x)
            } else {
                (self.road.point_at(start - longest).x, to)
            };
            let mut corners = Vec::new();
            for lane in &self.lanes {
                if let Way::Posts(posts) = &self.ways[lane.way].1 {
                    for support in posts.supports() {
                        let s = self.road.length_at(*support);
                        for axle in &lane.axles {
                            let at = if rightward { s + axle[0] } else { s - axle[0] };
                            corners.push(self.road.point_at(at).x);
                        }
                    }
                }
            }
            corners.sort_by(f64::total_cmp);
            corners.dedup();
            self.courses.push(Course { between: (first, last), corners, rightward });
        }
    }

    /// The axles at a position: where each stands on the road, its downward force, its force to the right.
    fn standing(&self, course: usize, x: f64) -> Vec<(&Lane, Point, f64, f64)> {
        let rightward = self.courses.get(course).is_none_or(|c| c.rightward);
        let (back, ahead) = if rightward { (-1.0, 1.0) } else { (1.0, -1.0) };
        let first = self.road.length_at(x);
        let stands = move |lane: &'_ Lane, axle: &[f64; 3]| {
            (self.road.point_at(first + back * axle[0]), axle[1], ahead * axle[2], lane.own)
        };
        self.lanes
            .iter()
            .flat_map(|lane| lane.axles.iter().map(move |a| (lane, stands(lane, a))))
            .map(|(lane, (at, down, along, _))| (lane, at, down, along))
            .collect()
    }

    /// Where the axles of the train itself stand at a position, with their downward forces as given times the scale.
    pub fn axles_at(&self, course: usize, x: f64) -> Vec<(Point, f64)> {
        self.standing(course, x).iter().filter(|a| a.0.own).map(|a| (a.1, a.2)).collect()
    }

    fn parts(&self, lane: &Lane, at: Point, down: f64, along: f64) -> Parts {
        let mut parts = Parts::default();
        let (offset, way) = &self.ways[lane.way];
        match way {
            Way::Posts(posts) => posts.hand_on(at.x, down, &mut parts),
            Way::Fill(fill) => fill.hand_on(at, lane.contact, down, along, &mut parts),
        }
        for push in &mut parts.pushes {
            push.slot += offset;
        }
        parts
    }

    /// What presses on the rib at a position of the first axle, each with whether it is of the train itself.
    pub fn place(&self, course: usize, x: f64) -> Vec<(Push, bool)> {
        self.standing(course, x)
            .into_iter()
            .flat_map(|(lane, at, down, along)| {
                self.parts(lane, at, down, along).pushes.into_iter().map(|p| (p, lane.own))
            })
            .collect()
    }

    /// Where all forces go at a position of the first axle.
    pub fn carried(&self, course: usize, x: f64) -> Carried {
        let mut sum = Carried::default();
        for (lane, at, down, along) in self.standing(course, x) {
            let parts = self.parts(lane, at, down, along);
            sum.applied += Vec2::new(along, -down);
            for push in &parts.pushes {
                sum.on_rib += push.force;
            }
            for side in 0..2 {
                sum.beside[side] += parts.beside[side];
            }
        }
        sum
    }

    /// Stretches of road between which no support of the deck stands: their ends, and what one kN of uniform load or knife
    /// edge as given, spread over the stretch, does to the rib.
    pub fn stretches(&self) -> Vec<((f64, f64), Vec<Push>)> {
        let Some((_, way)) = self.ways.first() else { return Vec::new() };
        let mut cuts = match way {
            Way::Posts(posts) => posts.supports().to_vec(),
            Way::Fill(fill) => {
                let reach = fill.reach(&self.road, 0.0);
                let (a, b) = fill.ends();
                vec![a - reach, b + reach]
            }
        };
        cuts.dedup();
        let whole = cuts[cuts.len() - 1] - cuts[0];
        let mut stretches = Vec::new();
        for pair in cuts.windows(2) {
            let length = pair[1] - pair[0];
            #[allow(clippy::cast_possible_truncation, clippy::cast_sign_loss)] // At most STRETCHES.
            let count = (f64::from(STRETCHES) * length / whole).ceil().max(2.0) as u32;
            for k in 0..count {
                let at = |k: u32| pair[0] + length * f64::from(k) / f64::from(count);
                let (a, b) = (at(k), at(k + 1));
                stretches.push(((a, b), self.unit(f64::midpoint(a, b), b - a)));
            }
        }
        stretches
    }

    /// What one kN as given, on a length of road about an abscissa, does to the rib.
    pub fn unit(&self, x: f64, length: f64) -> Vec<Push> {
        let Some(own) = self.lanes.first() else { return Vec::new() };
        let lane = Lane { contact: length, ..own.clone() };
        self.parts(&lane, self.road.over_x(x), self.scale, 0.0).pushes
    }
}
