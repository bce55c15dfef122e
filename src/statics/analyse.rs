//! From a problem to its lines of thrust.

use super::closest::{Closest, Search};
use super::elastic::{Effects, Flexibility, Place, least_energy};
use super::joint::{Joint, Unknowns};
use super::limit::{Aim, Extreme, Limit};
use super::line::{Sheet, missing};
use super::peaks::Sampling;
use super::rule::{Choice, choose, through_points};
use super::slender::{Parts, Rib, with_deck};
use super::span::Span;
use super::subspace::Subspace;
use super::through::{slack, through};
use super::{Analysis, Line, LineKind, Placed, Problem, Proof, Slender, SpanKind, Status, Support, Unsolved};

/// Computes the governing line of thrust of a span and those wanted beside it.
///
/// Lengths in m, forces in kN (or unit loads), moments in kN·m; signs and unknowns as in the module's head.
///
/// # Errors
///
/// [`Unsolved`] says why: no load, an axis without rise or one that crosses itself, hinges that contradict each other, a
/// cable that would have to push, numbers that are not finite. An optimum that does not exist
/// is no error but a [`Status`] of its line.
pub fn analyse(problem: &Problem) -> Result<Analysis, Unsolved> {
    solve(problem, None)
}

/// As [`analyse`], with the elastic line among its lines worked out for a stiffness that is given along the axis, where
/// [`analyse`] takes the rectangle of the drawn depth.
///
/// # Errors
///
/// As [`analyse`].
pub fn elastic(problem: &Problem, flexibility: &dyn Fn(&Place) -> Flexibility) -> Result<Analysis, Unsolved> {
    solve(problem, Some(flexibility))
}

fn solve(
    problem: &Problem,
    flexibility: Option<&dyn Fn(&Place) -> Flexibility>,
) -> Result<Analysis, Unsolved> {
    let span = Span::new(problem)?;
    let choice = choose(problem, &span)?;
    let sense = if choice.kind == SpanKind::Cable { -1.0 } else { 1.0 };
    let sampling = match (&problem.joints[..], problem.voussoirs) {
        ([], Some(count)) => Sampling::voussoirs(&span, sense, count),
        ([], None) => Sampling::new(&span, sense),
        (_, Some(_)) => {
            return Err(Unsolved::Input("joints are given, and a number of voussoirs beside them".into()));
        }
        (_, None) if problem.ring_weight > 0.0 || problem.depth.is_none() => {
            return Err(Unsolved::Input(
                "a ring with joints of its own needs its depth, and the weight of its pieces as forces"
                    .into(),
            ));
        }
        (joints, None) => Sampling::drawn(&span, sense, joints)?,
    };
    let shallow = span.with_unit_depth();
    let bare = Sampling::new(&shallow, sense);
    let rows: Vec<_> = choice.hinges.iter().map(|&p| span.hinge_row(p)).collect();
    let Some(space) = Subspace::lines(&span, &rows) else {
        return Err(Unsolved::Hinges(
            "the drawn hinges lie on one straight line or in one place: no single line of thrust passes through them"
                .into(),
        ));
    };
    let work = Work {
        problem,
        span: &span,
        choice: &choice,
        space: &space,
        flexibility,
        sense,
        sheet: Sheet { span: &span, sampling: &sampling, bare: &bare },
    };

    let mut kinds = vec![choice.governs];
    for &kind in &problem.draw {
        if !kinds.contains(&kind) {
            kinds.push(kind);
        }
    }
    let mut lines = Vec::with_capacity(kinds.len());
    let mut residual = 0.0_f64;
    let judged = span.has_depth && !problem.tension && choice.kind == SpanKind::Arch;
    let closest = (judged || kinds.contains(&LineKind::Closest)).then(|| work.search());
    for kind in kinds {
        let (line, r) = work.line(kind, closest.as_ref())?;
        if let Some(r) = r {
            let found = super::check::residual(problem, &span, &bare, &r, &line.vertices);
            residual = residual.max(found);
        }
        lines.push(line);
    }

    let safety = closest.filter(|_| judged).map(|closest| {
        let with_factor = Subspace::with_factor(&span, &rows);
        super::safety::safety(problem, &span, (&sampling, &bare), with_factor.as_ref(), &closest)
    });

    let crown = span.joint_at(span.crown.0, true).at;
    Ok(Analysis {
        kind: choice.kind,
        crown: span.drawn(crown),
        span: span.path.end().x * span.length,
        rise: span.crown.1 * span.length,
        order: span.entered.iter().map(|e| Placed { force: e.index, foot: e.foot * span.length }).collect(),
        off_span: span.missed.clone(),
        total: span.total() * span.load,
        pole: super::pole::pole(&span),
        governs: 0,
        rule: choice.rule,
        lines,
        safety,
        sharpest: span.sharpest(),
        residual,
    })
}

/// The flexibility of a rectangle of the drawn depth, for a modulus times a width in kN/m.
fn rectangle(modulus: f64) -> impl Fn(&Place) -> Flexibility {
    move |p| {
        let d = p.depth.unwrap_or(1.0);
        Flexibility { bending: 12.0 / (modulus * d.powi(3)), axial: 1.0 / (modulus * d) }
    }
}

/// One problem with all that its lines share.
struct Work<'a> {
    problem: &'a Problem,
    span: &'a Span,
    choice: &'a Choice,
    /// Lines through all hinges.
    space: &'a Subspace,
    flexibility: Option<&'a dyn Fn(&Place) -> Flexibility>,
    sense: f64,
    sheet: Sheet<'a>,
}

impl Work<'_> {
    fn line(&self, kind: LineKind, closest: Option<&Closest>) -> Result<(Line, Option<Unknowns>), Unsolved> {
        match (kind, closest) {
            (LineKind::Through, _) => self.through(),
            (LineKind::Closest, Some(closest)) => self.closest(closest),
            (LineKind::LeastThrust, _) => self.extreme(kind, Aim::LeastPush),
            (LineKind::GreatestThrust, _) => self.extreme(kind, Aim::GreatestPush),
            (LineKind::Closest | LineKind::Elastic, _) => self.elastic(),
        }
    }

    /// Least complementary energy.
    fn elastic(&self) -> Result<(Line, Option<Unknowns>), Unsolved> {
        let kind = LineKind::Elastic;
        let support = self.choice.support;
        let refuse = |reason: &str| Ok((missing(kind, support, Status::Refused, reason.into()), None));
        if self.choice.kind == SpanKind::Cable {
            return refuse("a cable has no bending stiffness");
        }
        if support.is_none_or(|s| s == Support::None) {
            return refuse("the elastic line needs a support: hingeless, two-hinged or three-hinged");
        }
        let effects = self.problem.effects;
        if self.flexibility.is_none() {
            if !self.span.has_depth {
                return refuse("the elastic line needs the depth of the rib");
            }
            if effects != Effects::default() && self.problem.stiffness.is_none() {
                return refuse(
                    "temperature, shrinkage and movement need the modulus of elasticity and the width",
                );
            }
        }
        let modulus = self.problem.stiffness.unwrap_or(1.0);
        let rectangle = rectangle(modulus);
        let flexibility = self.flexibility.unwrap_or(&rectangle);
        let whole = self.sheet.bare;
        let deck = self.problem.slender.map_or(0.0, |s| s.deck);
        let parts = (deck > 0.0 && support != Some(Support::ThreeHinged))
            .then(|| with_deck(self.span, whole, self.choice, flexibility, &effects, deck))
            .flatten();
        let alone = || least_energy(self.span, whole, self.space, flexibility, &effects);
        let Some(r) = parts.as_ref().map(|p| p.all).or_else(alone) else {
            return refuse("the stiffness along the axis is no positive number");
        };
        match slack(whole.least_thrust(&r)) {
            Some(joint) => self.no_line(kind, "the elastic line", &joint),
            None => self.slender(self.sheet.found(kind, support, &r, None), r, parts.as_ref()),
        }
    }

    /// Adds the bending of a slender rib to its line, or refuses the line of a rib that buckles.
    fn slender(
        &self,
        mut line: Line,
        r: Unknowns,
        parts: Option<&Parts>,
    ) -> Result<(Line, Option<Unknowns>), Unsolved> {
        let (Some(slender), Some(support)) = (self.problem.slender, self.choice.support) else {
            return Ok((line, Some(r)));
        };
        let stiffness = self.problem.stiffness.filter(|_| self.span.has_depth);
        if support == Support::None || (self.flexibility.is_none() && stiffness.is_none()) {
            return Ok((line, Some(r)));
        }
        let rectangle = rectangle(stiffness.unwrap_or(1.0));
        let rib = Rib {
            span: self.span,
            whole: self.sheet.bare,
            space: self.space,
            support,
            slender: if support == Support::ThreeHinged { Slender { deck: 0.0, ..slender } } else { slender },
            flexibility: self.flexibility.unwrap_or(&rectangle),
            r,
            parts,
        };
        match rib.bending(&line.stations) {
            Ok(bending) => {
                line.bending = Some(bending);
                Ok((line, Some(r)))
            }
            Err(reason) => Ok((missing(line.kind, line.support, Status::Refused, reason), None)),
        }
    }

    /// Least or greatest push with the line inside the ring.
    fn extreme(&self, kind: LineKind, aim: Aim) -> Result<(Line, Option<Unknowns>), Unsolved> {
        let name = if aim == Aim::LeastPush { "least-thrust" } else { "greatest-thrust" };
        let support = self.choice.support;
        let refuse = |reason: String| Ok((missing(kind, support, Status::Refused, reason), None));
        if !self.span.has_depth {
            return refuse(format!("the line {name} lies inside the ring: it needs a depth"));
        }
        if self.choice.kind == SpanKind::Cable {
            return refuse(format!("a cable has no ring that the line {name} could lie in"));
        }
        let limit = Limit {
            span: self.span,
            sampling: self.sheet.sampling,
            whole: self.sheet.bare,
            space: self.space,
            friction: self.problem.friction,
            crushing: self.span.crushing,
        };
        match limit.solve(aim) {
            Extreme::Found { r, primal, dual, .. } => {
                let (primal, dual) = (primal * self.span.load, dual * self.span.load);
                let gap = (primal - dual).abs() / primal.abs().max(dual.abs()).max(1.0);
                Ok((self.sheet.found(kind, support, &r, Some(Proof { primal, dual, gap })), Some(r)))
            }
            Extreme::Unbounded => {
                let reason = "the push can grow without end with the line inside the ring: a straight line fits into it";
                Ok((missing(kind, support, Status::Unbounded, reason.into()), None))
            }
            Extreme::None(leans) => {
                let why = super::safety::contradiction(self.span, &leans, self.problem);
                let reason = format!("no line of thrust lies inside the ring{why}");
                Ok((missing(kind, support, Status::None, reason), None))
            }
            Extreme::Stalled => {
                refuse(format!("the program of the line {name} did not end within its accuracy"))
            }
        }
    }

    fn through(&self) -> Result<(Line, Option<Unknowns>), Unsolved> {
        let kind = LineKind::Through;
        let points = through_points(self.problem, self.span, self.choice)?;
        let Some(r) = through(self.span, &points) else {
            return Err(Unsolved::Hinges(
                "the three points that the line of thrust should pass through lie on one straight line"
                    .into(),
            ));
        };
        match slack(self.sheet.bare.least_thrust(&r)) {
            Some(joint) => self.no_line(kind, "the line through its three points", &joint),
            None => {
                let line = self.sheet.found(kind, self.choice.support, &r, None);
                // Of three hinges this is the elastic line too.
                if self.choice.support == Some(Support::ThreeHinged) && self.choice.kind == SpanKind::Arch {
                    self.slender(line, r, None)
                } else {
                    Ok((line, Some(r)))
                }
            }
        }
    }

    fn search(&self) -> Closest {
        let start = through_points(self.problem, self.span, self.choice)
            .ok()
            .and_then(|points| through(self.span, &points))
            .filter(|_| self.problem.through.is_none());
        Search::new(self.span, self.sheet.sampling, self.sheet.bare, self.space, self.sense).run(start)
    }

    fn closest(&self, closest: &Closest) -> Result<(Line, Option<Unknowns>), Unsolved> {
        let kind = LineKind::Closest;
        let support = self.choice.support;
        match closest {
            Closest::Found { r, proof } => {
                // Without a depth the optimum is a length.
                let unit = if self.span.has_depth { 1.0 } else { self.span.length };
                let (primal, dual) = (proof.primal * unit, proof.dual * unit);
                let gap = (primal - dual).abs() / primal.max(dual).max(1.0);
                Ok((self.sheet.found(kind, support, r, Some(Proof { primal, dual, gap })), Some(*r)))
            }
            Closest::None(joint) => self.no_line(kind, "every line", joint),
            Closest::Unbounded => {
                let reason = "the line comes closer to the axis the greater the push is, without end: the loads do not \
                              act as a load on an arch of this shape";
                Ok((missing(kind, support, Status::Unbounded, reason.into()), None))
            }
            Closest::Stalled => {
                let reason = "the search for the closest line did not end within its accuracy";
                Ok((missing(kind, support, Status::Refused, reason.into()), None))
            }
        }
    }

    /// A line that would have to pull in an arch, or push in a cable.
    fn no_line(
        &self,
        kind: LineKind,
        which: &str,
        joint: &Joint,
    ) -> Result<(Line, Option<Unknowns>), Unsolved> {
        let at = self.span.drawn(joint.at);
        let place = format!("near ({:.3}, {:.3}) m", at.x, at.y);
        let load = self
            .span
            .entered
            .iter()
            .min_by(|a, b| (a.foot - joint.s).abs().total_cmp(&(b.foot - joint.s).abs()))
            .map_or_else(String::new, |e| {
                let f = self.problem.forces[e.index].at;
                format!("; the nearest load acts at ({:.3}, {:.3}) m", f.x, f.y)
            });
        if self.choice.kind == SpanKind::Cable {
            return Err(Unsolved::SlackCable(format!(
                "{which} would have to push {place}: a cable cannot{load}"
            )));
        }
        let reason = format!("{which} has no compression left {place}{load}");
        Ok((missing(kind, self.choice.support, Status::None, reason), None))
    }
}
