//! One position: its line of thrust, its extremes, its factors.

use super::super::analyse::analyse;
use super::super::closest::{Closest, Search};
use super::super::elastic::Effects;
use super::super::joint::{Joint, Loads, Unknowns};
use super::super::limit::{Aim, Extreme as End, Limit, Warm};
use super::super::line::eccentricity;
use super::super::peaks::Sampling;
use super::super::span::Span;
use super::super::stress;
use super::super::subspace::Subspace;
use super::super::through::slack;
use super::super::{LineKind, Status};
use super::envelope::{Extreme, Station, Tally, Value};
use super::prepared::Prepared;
use super::{Position, Push};
use crate::geometry::Point;
use crate::tolerance;

/// Works through positions one after the other, from left to right.
pub(super) struct Evaluator<'p, 'm> {
    pub prepared: &'p Prepared<'m>,
    pub span: Span,
    pub shallow: Span,
    /// Joints of the span under its dead loads.
    sampling: Sampling<'p>,
    bare: Sampling<'p>,
    pub stations: Vec<Joint>,
    /// The closest line of the position before.
    last: Option<Unknowns>,
    /// Where the programs of the position before ended.
    warm: [Warm; 6],
    pub tally: Tally,
    /// Kept where one loading is looked for.
    pub record: Option<Record>,
}

/// What a position leaves behind for loads that choose their own place.
pub(super) struct Solved {
    /// The governing line.
    pub r: Option<Unknowns>,
    /// What has entered before each piece.
    pub prefix: Vec<Loads>,
    /// The mechanism of the load factor.
    pub mechanism: Option<End>,
    /// Largest offset, m, and use of the depth of the governing line.
    pub offset: Option<f64>,
    pub depth_use: Option<f64>,
}

impl Solved {
    /// The load factor.
    pub fn factor(&self) -> Option<f64> {
        match self.mechanism {
            Some(End::Found { primal, .. }) => Some(primal),
            _ => None,
        }
    }
}

/// The loading whose value comes nearest to a target.
pub(super) struct Record {
    pub target: f64,
    pub off: f64,
    pub pushes: Vec<Push>,
}

impl<'p, 'm> Evaluator<'p, 'm> {
    pub fn new(prepared: &'p Prepared<'m>) -> Self {
        let stations = prepared.stations();
        let envelope = stations.iter().map(|j| Station::new(&prepared.span, j)).collect();
        Self {
            prepared,
            span: prepared.span.clone(),
            shallow: prepared.shallow.clone(),
            sampling: prepared.sampling(&prepared.span),
            bare: Sampling::new(&prepared.shallow, prepared.sense),
            stations,
            last: None,
            warm: Default::default(),
            tally: Tally { envelope, ..Tally::default() },
            record: None,
        }
    }

    /// Forgets the position before.
    pub fn forget(&mut self) {
        self.last = None;
        self.warm = Default::default();
    }

    /// Takes in one position.
    pub fn take(&mut self, pushes: &[Push], position: Position) -> Solved {
        let prepared = self.prepared;
        let prefix = prepared.prefix(pushes, |_| true);
        let found = self.governing(pushes, &prefix, position);
        let mechanism = self.limits(pushes, &prefix, position);
        let (r, offset, depth_use) = found.map_or((None, None, None), |(r, (o, d))| (Some(r), o, d));
        Solved { r, prefix, mechanism, offset, depth_use }
    }

    /// The governing line and all that is measured on it.
    fn governing(
        &mut self,
        pushes: &[Push],
        prefix: &[Loads],
        position: Position,
    ) -> Option<(Unknowns, Measures)> {
        let prepared = self.prepared;
        self.span.carry(&prepared.span, &[], prefix);
        self.shallow.carry(&prepared.shallow, &[], prefix);
        let span = &self.span;
        let sampling = self.sampling.carrying(span, &[], prefix);
        let bare = self.bare.carrying(&self.shallow, &[], prefix);
        let dead = prepared.span.total();
        let loaded = prefix.last().is_some_and(|l| l.fx.abs() + l.fy.abs() > 0.0);
        if !loaded && dead.hypot() <= 0.0 && prepared.moving.problem.effects == Effects::default() {
            // Nothing stands on a weightless span: there is no line, and none is wanted.
            return None;
        }
        let found = match (&prepared.response, prepared.choice.governs) {
            (Some(response), _) => {
                let mut r = response.dead();
                for push in pushes {
                    let change = response.change(push.slot, &prepared.local(push));
                    for (v, c) in r.iter_mut().zip(change) {
                        *v += c;
                    }
                }
                slack(bare.least_thrust(&r)).map_or(Ok(r), |_| Err(Status::None))
            }
            (None, LineKind::Closest) => {
                let rows = prepared.hinge_rows(span);
                match Subspace::lines(span, &rows) {
                    None => Err(Status::Refused),
                    Some(space) => {
                        let run =
                            |first| Search::new(span, &sampling, &bare, &space, prepared.sense).run(first);
                        let mut ended = run(self.last);
                        if self.last.is_some() && !matches!(ended, Closest::Found { .. }) {
                            // The line of another loading can be a bad start, and is never the reason that there is none.
                            ended = run(None);
                        }
                        match ended {
                            Closest::Found { r, .. } => Ok(r),
                            // In units of its own load the same program may end where it did not here.
                            ended => alone(prepared, pushes).map_err(|_| match ended {
                                Closest::None(_) => Status::None,
                                Closest::Unbounded => Status::Unbounded,
                                Closest::Stalled | Closest::Found { .. } => Status::Refused,
                            }),
                        }
                    }
                }
            }
            (None, kind) => {
                let rows = prepared.hinge_rows(span);
                let aim = if kind == LineKind::LeastThrust { Aim::LeastPush } else { Aim::GreatestPush };
                let ended = Subspace::lines(span, &rows)
                    .map(|space| limit(prepared, span, &sampling, &bare, &space).solve(aim));
                match ended {
                    Some(End::Found { r, .. }) => Ok(r),
                    Some(End::None(_)) => Err(Status::None),
                    Some(End::Unbounded) => Err(Status::Unbounded),
                    Some(End::Stalled) | None => Err(Status::Refused),
                }
            }
        };
        let r = match found {
            Ok(r) => r,
            Err(status) => {
                self.last = None;
                let t = &mut self.tally;
                for extreme in [&mut t.offset, &mut t.depth_use, &mut t.stress] {
                    extreme.miss(status, position);
                }
                for extreme in t.push.iter_mut().chain(&mut t.push_right) {
                    extreme.miss(status, position);
                }
                return None;
            }
        };
        self.last = Some(r);
        let measures = measure(prepared, span, (&sampling, &bare), &r, position, &mut self.tally);
        for (joint, station) in self.stations.iter().zip(&mut self.tally.envelope) {
            let mut here = *joint;
            if let Some(loads) = prefix.get(joint.piece) {
                here.loads.varying = here.loads.varying.plus(loads);
            }
            let (n, m) = (here.thrust(&r) * span.load, here.moment(&r) * span.load * span.length);
            station.take(n, m, position);
            edge_stress(
                prepared,
                joint,
                (n, m),
                position,
                &mut self.tally.stress,
                &mut self.tally.stress_incomplete,
            );
        }
        Some((r, measures))
    }

    /// Range of the push, interval of the load factor, and permitted multiple.
    fn limits(&mut self, pushes: &[Push], prefix: &[Loads], position: Position) -> Option<End> {
        let prepared = self.prepared;
        if !prepared.ring || pushes.is_empty() {
            return None;
        }
        let span = &self.span;
        let sampling = self.sampling.carrying(span, &[], prefix);
        let bare = self.bare.carrying(&self.shallow, &[], prefix);
        let rows = prepared.hinge_rows(span);
        let at = span.drawn(span.joint_at(span.crown.0, true).at);
        let value = |value: f64| Value { value, position, at };
        if let Some(space) = Subspace::lines(span, &rows) {
            let limit = limit(prepared, span, &sampling, &bare, &space);
            for (aim, i) in [(Aim::LeastPush, 0), (Aim::GreatestPush, 1)] {
                let ended = limit.value(aim, &mut self.warm[i]);
                note(&mut self.tally.range[i], ended.map(|v| v * span.load), value, position, i == 1);
            }
        }
        let mut mechanism = None;
        let stays = prepared.stays();
        if let Some(space) = Subspace::with_factor(span, &rows) {
            let limit = limit(prepared, span, &sampling, &bare, &space);
            let tally = &mut self.tally;
            if stays || prepared.moving.problem.strength.is_some() {
                let upper = limit.value(Aim::GreatestFactor, &mut self.warm[2]);
                note(&mut tally.load_factor, upper, value, position, false);
                let least = limit.value(Aim::LeastFactor, &mut self.warm[3]);
                note(&mut tally.load_factor_least, least.map(|v| v.max(0.0)), value, position, true);
            } else {
                tally.load_factor.miss(Status::Refused, position);
                tally.load_factor_least.miss(Status::Refused, position);
            }
            if prepared.wants_mechanism() {
                mechanism = Some(limit.solve(Aim::GreatestFactor));
            }
        }
        self.multiple(pushes, position, &rows);
        mechanism
    }

    /// How many times the train alone may stand there, all else as it is.
    fn multiple(&mut self, pushes: &[Push], position: Position, rows: &[super::super::joint::Affine]) {
        let prepared = self.prepared;
        let others = pushes.iter().any(|p| !p.own);
        if !others && !prepared.dead_varies() {
            self.tally.multiple = self.tally.load_factor;
            return;
        }
        let own = prepared.prefix(pushes, |p| p.own);
        let rest = prepared.prefix(pushes, |p| !p.own);
        let mut span = prepared.fixed_span();
        let base = span.clone();
        span.carry(&base, &rest, &own);
        let mut shallow = span.with_unit_depth();
        shallow.has_depth = false;
        let sampling = prepared.sampling(&span);
        let bare = Sampling::new(&shallow, prepared.sense);
        let at = span.drawn(span.joint_at(span.crown.0, true).at);
        let value = |value: f64| Value { value, position, at };
        if own.last().is_none_or(|l| l.fx.abs() + l.fy.abs() + l.moment.abs() <= 0.0) {
            return;
        }
        if let Some(space) = Subspace::with_factor(&span, rows) {
            let limit = limit(prepared, &span, &sampling, &bare, &space);
            let upper = limit.value(Aim::GreatestFactor, &mut self.warm[4]);
            note(&mut self.tally.multiple, upper, value, position, false);
        }
    }
}

/// The governing line of a position solved on its own.
fn alone(prepared: &Prepared, pushes: &[Push]) -> Result<Unknowns, Status> {
    let analysis = analyse(&prepared.moving.problem_at(pushes)).map_err(|_| Status::Refused)?;
    let line = analysis.lines.get(analysis.governs).ok_or(Status::Refused)?;
    let r = line.reaction.ok_or(line.status)?;
    let (load, length) = (prepared.span.load, prepared.span.length);
    Ok([r.horizontal / load, r.vertical / load, r.moment / (load * length), 1.0])
}

fn limit<'a>(
    prepared: &'a Prepared,
    span: &'a Span,
    sampling: &'a Sampling<'a>,
    whole: &'a Sampling<'a>,
    space: &'a Subspace,
) -> Limit<'a> {
    let friction = prepared.moving.problem.friction;
    Limit { span, sampling, whole, space, friction, crushing: span.crushing }
}

/// Takes in how a program ended.
fn note(
    to: &mut Extreme,
    ended: Result<f64, Status>,
    value: impl Fn(f64) -> Value,
    position: Position,
    greater: bool,
) {
    match ended {
        Ok(v) if greater => to.greater(value(v)),
        Ok(v) => to.less(value(v)),
        Err(status) => to.miss(status, position),
    }
}

/// Largest offset, m, and use of the depth.
type Measures = (Option<f64>, Option<f64>);

/// Offset, use of the depth and pushes of a line.
fn measure(
    prepared: &Prepared,
    span: &Span,
    (sampling, bare): (&Sampling, &Sampling),
    r: &Unknowns,
    position: Position,
    tally: &mut Tally,
) -> Measures {
    let mut measures = (None, None);
    if let Some(worst) = bare.worst(r) {
        let e = eccentricity(&worst.joint, r).unwrap_or(0.0).abs() * span.length;
        measures.0 = Some(e);
        tally.offset.greater(Value { value: e, position, at: span.drawn(worst.joint.at) });
    }
    if span.has_depth
        && let Some(worst) = sampling.worst(r)
    {
        measures.1 = Some(worst.value);
        tally.depth_use.greater(Value { value: worst.value, position, at: span.drawn(worst.joint.at) });
        let kern = worst.value * 6.0 > 1.0 + tolerance::LIMIT_MET;
        tally.cracked |=
            kern && prepared.choice.governs == LineKind::Elastic && !prepared.moving.problem.tension;
    }
    let end = span.last().resultant(r) * span.load;
    let left = r[0] * span.load;
    for (to, push, at) in [
        (&mut tally.push, left, span.drawn(Point::ORIGIN)),
        (&mut tally.push_right, end.x, span.drawn(span.path.end())),
    ] {
        let value = Value { value: push, position, at };
        to[0].less(value);
        to[1].greater(value);
    }
    measures
}

/// The larger of the two edge stresses, tension counted as its size.
fn edge_stress(
    prepared: &Prepared,
    joint: &Joint,
    (n, m): (f64, f64),
    position: Position,
    to: &mut Extreme,
    incomplete: &mut bool,
) {
    let span = &prepared.span;
    let Some(section) = prepared.moving.section.filter(|_| span.has_depth && prepared.sense > 0.0) else {
        return;
    };
    let depth = joint.depth * span.length;
    let cracked = (m / n).abs() > depth / 6.0 * (1.0 + tolerance::LIMIT_MET);
    let edges = if section.tension {
        stress::uncracked(n, m, depth, section.width)
    } else if prepared.choice.governs == LineKind::Elastic && cracked {
        None
    } else {
        stress::without_tension(n, m, depth, section.width)
    };
    match edges {
        Some(edges) => {
            let value = edges.extrados.abs().max(edges.intrados.abs());
            to.greater(Value { value, position, at: span.drawn(joint.at) });
        }
        None => *incomplete = true,
    }
}
