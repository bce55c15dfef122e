//! What all positions share: the span under its dead loads, cut at the slots.

use super::super::joint::{Affine, Joint, LoadSets, Loads, Weight};
use super::super::peaks::Sampling;
use super::super::rule::{Choice, choose};
use super::super::span::Span;
use super::super::{LineKind, Rule, SpanKind, Support, Unsolved};
use super::response::Response;
use super::{Moving, Push};
use crate::tolerance;

/// A span made ready for many positions.
pub(super) struct Prepared<'a> {
    pub moving: &'a Moving<'a>,
    pub span: Span,
    /// The same with depth 1 throughout.
    pub shallow: Span,
    pub choice: Choice,
    /// 1 for compression, −1 for a cable.
    pub sense: f64,
    /// First piece of the axis that a slot's load has entered before.
    pub first_piece: Vec<usize>,
    /// How the governing line answers to the slots, where it follows from linear equations.
    pub response: Option<Response>,
    /// Whether limits of a ring without tension mean something.
    pub ring: bool,
}

impl<'a> Prepared<'a> {
    /// Puts the dead loads on the ring. `live` is about the size of the moving load, kN.
    pub fn new(moving: &'a Moving<'a>, live: f64) -> Result<Self, Unsolved> {
        let problem = moving.with_slots();
        if !problem.joints.is_empty() {
            return Err(Unsolved::NotBuilt("moving loads over a ring with joints of its own".into()));
        }
        let span = Span::with_live(&problem, live)?;
        let mut choice = choose(&problem, &span)?;
        if span.hangs && span.total().hypot() <= 0.0 && problem.govern.is_none() {
            // A weightless axis that hangs is a cable as soon as something stands on it.
            choice.kind = SpanKind::Cable;
            (choice.governs, choice.rule) = (LineKind::Through, Rule::Cable);
        }
        let sense = if choice.kind == SpanKind::Cable { -1.0 } else { 1.0 };
        let starts_empty = span.pieces.first().is_some_and(|p| p.s1 <= p.s0);
        let first_piece = moving
            .slots
            .iter()
            .map(|&s| {
                let mut foot = (s / span.length).clamp(0.0, 1.0);
                for end in [0.0, 1.0] {
                    if (foot - end).abs() <= tolerance::ONE_JOINT {
                        foot = end;
                    }
                }
                let from = usize::from(starts_empty);
                from + span.pieces[from..].partition_point(|p| p.s0 + tolerance::SAME_PLACE < foot)
            })
            .collect();
        let ring = span.has_depth && !problem.tension && choice.kind == SpanKind::Arch;
        let shallow = span.with_unit_depth();
        let mut prepared = Self { moving, span, shallow, choice, sense, first_piece, response: None, ring };
        prepared.response = match prepared.choice.governs {
            LineKind::Elastic => Some(Response::elastic(&prepared)?),
            LineKind::Through => Some(Response::through(&prepared)?),
            _ => None,
        };
        Ok(prepared)
    }

    /// The joints that are looked at: of the voussoirs, or of the continuous ring.
    pub fn sampling<'s>(&self, span: &'s Span) -> Sampling<'s> {
        match self.moving.problem.voussoirs {
            Some(count) => Sampling::voussoirs(span, self.sense, count),
            None => Sampling::new(span, self.sense),
        }
    }

    /// The moments about the hinges, of the loads that are on a span.
    pub fn hinge_rows(&self, span: &Span) -> Vec<Affine> {
        self.choice.hinges.iter().map(|&p| span.hinge_row(p)).collect()
    }

    /// A push in local units.
    pub fn local(&self, push: &Push) -> Loads {
        let mut loads = Loads::default();
        loads.add(self.span.local(push.at), push.force / self.span.load);
        loads
    }

    /// What of the live load has entered before each piece.
    pub fn prefix(&self, pushes: &[Push], which: impl Fn(&Push) -> bool) -> Vec<Loads> {
        let mut entering = vec![Loads::default(); self.span.pieces.len()];
        for push in pushes.iter().filter(|p| which(p)) {
            if let Some(to) = entering.get_mut(self.first_piece[push.slot]) {
                *to = to.plus(&self.local(push));
            }
        }
        let mut sum = Loads::default();
        for loads in &mut entering {
            sum = sum.plus(loads);
            *loads = sum;
        }
        entering
    }

    /// The joints of the envelope: each place once, both sides where a load or a kink stands between.
    pub fn stations(&self) -> Vec<Joint> {
        let sampling = self.sampling(&self.span);
        let mut joints: Vec<Joint> = sampling.joints().to_vec();
        let enters: Vec<bool> = (0..self.span.pieces.len()).map(|i| self.first_piece.contains(&i)).collect();
        joints.dedup_by(|b, a| {
            let between = (a.piece + 1..=b.piece).any(|i| enters.get(i).copied().unwrap_or(false));
            b.s - a.s <= tolerance::ONE_JOINT
                && (b.piece == a.piece
                    || (!between
                        && b.loads == a.loads
                        && (b.tangent - a.tangent).hypot() <= tolerance::ONE_JOINT))
        });
        joints
    }

    /// Whether an elastic line can be told beside the governing one.
    pub fn support(&self) -> Option<Support> {
        self.choice.support
    }
}

impl Prepared<'_> {
    /// Whether any of the dead loads varies with the load factor.
    pub fn dead_varies(&self) -> bool {
        let l = self.span.last().loads.varying;
        l.fx.abs() + l.fy.abs() + l.moment.abs() > 0.0
    }

    /// Whether any of the dead loads stays.
    pub fn stays(&self) -> bool {
        let entered = self.span.entered.iter().any(|e| !e.varies && e.force.hypot() > 0.0);
        let l = self.span.last().loads.fixed;
        entered || l.fx.abs() + l.fy.abs() + l.moment.abs() > 0.0
    }

    /// The span with all its dead loads among those that stay.
    pub fn fixed_span(&self) -> Span {
        let mut span = self.span.clone();
        for piece in &mut span.pieces {
            let all = piece.before.times(1.0);
            piece.before = LoadSets { fixed: all, varying: Loads::default() };
            let [a, b] = piece.weight;
            let sum = Weight {
                on_axis: a.on_axis + b.on_axis,
                of_ring: a.of_ring + b.of_ring,
                on_plan: a.on_plan + b.on_plan,
            };
            piece.weight = [sum, Weight::default()];
        }
        span
    }

    /// Whether loads that choose their own place need the mechanism.
    pub fn wants_mechanism(&self) -> bool {
        !self.moving.cells.is_empty() && self.moving.uniform + self.moving.knife > 0.0
    }
}
