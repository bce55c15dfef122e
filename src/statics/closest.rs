//! The line of thrust closest to the axis: least possible largest `|e| / d`, exact on the continuous axis.
//!
//! `|M_j| ≤ τ d_j N_j` is linear in the unknowns for a given `τ`. On a finite set of joints the least `τ` follows from
//! linear programs `min z, ±M_j − τ d_j N_j ≤ z ω_j` with `ω_j = d_j N_j` of the line before, each giving a smaller `τ`
//! [Dinkelbach 1967; with these weights Crouzeix, Ferland and Schaible 1985]. Then the joint where `|M| / (d N)` is worst
//! on the whole axis comes in [exchange: Remez 1934], until it brings nothing.

#![allow(clippy::needless_range_loop, reason = "small dense matrices read best by index")]

use super::Proof;
use super::joint::{Affine, Joint, Unknowns};
use super::peaks::{Peak, Sampling};
use super::quadratic::Bound;
use super::simplex::{MOST, Outcome, Program, Row, Vertex};
use super::span::Span;
use super::subspace::Subspace;
use super::ties::{bending, independent};
use crate::tolerance;

/// Joints that the exchange starts with.
const START: usize = 24;
/// Joints that one round of the exchange may add.
const ROUND: usize = 8;
/// Rounds after which the exchange must have ended.
const ROUNDS: usize = 80;
/// Size of the box that the unknowns start in, and how it grows.
const FIRST_BOX: f64 = 100.0;
const BOX_GROWTH: f64 = 100.0;
/// Rounds of the polish, and how far from a peak (as a part of the axis) a joint is taken for its neighbour.
const POLISH: usize = 8;
const NEIGHBOUR: f64 = 0.02;
/// Peaks lower than the highest by less than this part may touch too; no more than so many are looked at.
const CONTACT: f64 = 0.001;
const MOST_CONTACTS: usize = 64;
/// Linear programs for one set of joints.
const STEPS: usize = 40;

/// The closest line, or why there is none.
#[derive(Debug, Clone)]
pub(super) enum Closest {
    /// The unknowns, the largest `|e| / d` and its proof, in local units.
    Found { r: Unknowns, proof: Proof },
    /// No line pushes throughout: the joint that is always pulled.
    None(Joint),
    /// The best value is only reached with the push growing without end.
    Unbounded,
    /// Rounding kept the exchange from ending.
    Stalled,
}

/// A joint of the program with its rows in the free unknowns.
#[derive(Debug, Clone, Copy)]
struct Cut {
    joint: Joint,
    moment: Affine,
    /// Depth times thrust in its own sense.
    room: Affine,
}

/// One problem on its way.
pub(super) struct Search<'a> {
    span: &'a Span,
    sampling: &'a Sampling<'a>,
    /// The whole axis, where `sampling` may be single joints.
    whole: &'a Sampling<'a>,
    space: &'a Subspace,
    sense: f64,
    cuts: Vec<Cut>,
    program: Program,
    /// Values below this are rounding.
    floor: f64,
}

/// The best line for the joints so far.
struct Step {
    r: Unknowns,
    tau: f64,
    /// The `τ` of the last program, its bound, and its multipliers.
    asked: f64,
    bound: f64,
    multipliers: Vec<Multiplier>,
    /// Largest multiplier of the box.
    held: f64,
}

/// The multiplier of one row of the last program.
#[derive(Debug, Clone, Copy)]
struct Multiplier {
    /// Index of the cut.
    cut: usize,
    row: RowKind,
    value: f64,
}

/// The rows of a cut.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
enum RowKind {
    /// `M ≤ τ d N`
    Upper,
    /// `−M ≤ τ d N`
    Lower,
    /// `N ≥ ε`: without it no thrust at all would count as close.
    Thrust,
}

impl RowKind {
    const ALL: [Self; 3] = [Self::Upper, Self::Lower, Self::Thrust];
}

impl<'a> Search<'a> {
    pub fn new(
        span: &'a Span,
        sampling: &'a Sampling<'a>,
        whole: &'a Sampling<'a>,
        space: &'a Subspace,
        sense: f64,
    ) -> Self {
        let mut cost = vec![0.0; space.free];
        cost.push(1.0);
        let deepest = sampling.joints().iter().fold(0.0, |m, j| f64::max(m, j.depth));
        let mut search = Self {
            span,
            sampling,
            whole,
            space,
            sense,
            cuts: Vec::new(),
            program: Program::new(&cost, FIRST_BOX),
            floor: 0.1 * span.crown.1.abs() / deepest,
        };
        for joint in sampling.spread(START) {
            search.add(joint);
        }
        search
    }

    fn add(&mut self, joint: Joint) {
        let moment = self.space.row(&joint.moment_row());
        let thrust = self.space.row(&joint.thrust_row());
        let factor = self.sense * joint.depth;
        let room = (thrust.0.map(|v| v * factor), thrust.1 * factor);
        self.cuts.push(Cut { joint, moment, room });
    }

    /// Finds the closest line, starting from `first` if that pushes throughout.
    pub fn run(mut self, first: Option<Unknowns>) -> Closest {
        // Vertices of a large box cost digits: it grows only as long as it holds the optimum.
        let mut size = FIRST_BOX;
        loop {
            let (held, ended) = self.run_in_box(first, size);
            if !held {
                return ended;
            }
            if size >= tolerance::UNBOUNDED {
                return Closest::Unbounded;
            }
            size *= BOX_GROWTH;
            self.program.widen(size);
        }
    }

    /// The closest line in the box, and whether the box holds it.
    fn run_in_box(&mut self, first: Option<Unknowns>, size: f64) -> (bool, Closest) {
        let start = first.filter(|r| self.worst_finite(r).is_some());
        let mut r = match start.map_or_else(|| self.pushing(), Ok) {
            Ok(r) => r,
            Err(joint) => return (false, Closest::None(joint)),
        };
        let Some(mut upper) = self.worst_finite(&r) else {
            return (false, Closest::Stalled);
        };
        let mut best: Option<(f64, Step)> = None;
        for _ in 0..ROUNDS {
            let Some(step) = self.least(&r, upper) else {
                break;
            };
            let peaks = self.sampling.peaks(&step.r, step.tau);
            let worst = peaks.first().map_or(step.tau, |p| p.value);
            let gain = worst - step.tau;
            let ends = gain <= tolerance::EXCHANGE_GAIN * step.tau.max(self.floor);
            let fresh = self.take(&peaks, step.tau);
            if worst.is_finite() && worst <= upper {
                (r, upper) = (step.r, worst);
            }
            if best.as_ref().is_none_or(|b| gain < b.0) {
                best = Some((gain, step));
            }
            if ends || fresh == 0 {
                break;
            }
        }
        let Some((gain, step)) = best else {
            return (false, Closest::Stalled);
        };
        if step.held * size > tolerance::PROOF_GAP * step.tau.max(self.floor) {
            return (true, Closest::Unbounded);
        }
        if gain > tolerance::PROOF_GAP * step.tau.max(self.floor) {
            return (false, Closest::Stalled);
        }
        let step = self.polish(step);
        (false, self.finish(&step))
    }

    /// Moves the joints of the program to the very peaks of the line, so that the multipliers belong to the places that
    /// the line touches and not to their neighbours. Each round squares the distance, as in Newton's method.
    fn polish(&mut self, mut step: Step) -> Step {
        for _ in 0..POLISH {
            let Some(before) = self.worst_finite(&step.r) else {
                break;
            };
            let peaks = self.sampling.peaks(&step.r, step.tau * (1.0 - CONTACT));
            let known = self.cuts.clone();
            let inner = |j: &Joint| {
                let piece = &self.span.pieces[j.piece];
                j.s > piece.s0 && j.s < piece.s1
            };
            let (inside, ends): (Vec<_>, Vec<_>) =
                peaks.iter().take(MOST_CONTACTS).map(|p| p.joint).partition(|j| inner(j));
            let mut moved = 0.0_f64;
            for joint in &inside {
                let near = known.iter().filter(|c| c.joint.piece == joint.piece && inner(&c.joint));
                let nearest = near.map(|c| (c.joint.s - joint.s).abs()).fold(f64::INFINITY, f64::min);
                moved = moved.max(nearest.min(NEIGHBOUR));
            }
            if moved <= tolerance::PEAK_PLACE {
                break;
            }
            self.cuts.retain(|c| {
                let near = |j: &Joint| c.joint.piece == j.piece && (c.joint.s - j.s).abs() < NEIGHBOUR;
                !(inner(&c.joint) && inside.iter().any(near))
            });
            for joint in inside {
                self.add(joint);
            }
            for joint in ends {
                let same = |c: &Cut| {
                    c.joint.piece == joint.piece && (c.joint.s - joint.s).abs() <= tolerance::PEAK_PLACE
                };
                if !self.cuts.iter().any(same) {
                    self.add(joint);
                }
            }
            let next = self.least(&step.r, before);
            let after = next.as_ref().and_then(|n| self.worst_finite(&n.r));
            match (next, after) {
                (Some(next), Some(after))
                    if after <= before + tolerance::EXCHANGE_GAIN * before.max(self.floor) =>
                {
                    step = next;
                }
                _ => {
                    self.cuts = known;
                    break;
                }
            }
        }
        step
    }

    /// Adds the highest peaks above `tau`; gives how many.
    fn take(&mut self, peaks: &[Peak], tau: f64) -> usize {
        let mut count = 0;
        for peak in peaks.iter().take(ROUND) {
            let known = self.cuts.iter().any(|c| {
                c.joint.piece == peak.joint.piece && (c.joint.s - peak.joint.s).abs() <= tolerance::PEAK_PLACE
            });
            if peak.value > tau && !known {
                self.add(peak.joint);
                count += 1;
            }
        }
        count
    }

    fn worst_finite(&self, r: &Unknowns) -> Option<f64> {
        self.sampling.worst(r).map(|p| p.value).filter(|v| v.is_finite())
    }

    /// Some line that pushes throughout, by `max z, N_j ≥ z`; the joint that cannot be pushed when there is none.
    fn pushing(&self) -> Result<Unknowns, Joint> {
        let mut cost = vec![0.0; self.space.free];
        cost.push(1.0);
        let mut program = Program::new(&cost, 1e3);
        for joint in self.sampling.joints() {
            let (a, c) = self.space.row(&joint.thrust_row());
            let mut row = Row { a: [0.0; MOST], b: c * self.sense };
            for (to, v) in row.a.iter_mut().zip(a).take(self.space.free) {
                *to = -v * self.sense;
            }
            row.a[self.space.free] = -1.0;
            program.push(row);
        }
        if let Outcome::Best(v) = program.solve() {
            let r = self.space.unknowns(&v.x[..self.space.free]);
            let (least, joint) = self.sampling.least_thrust(&r);
            return if least > tolerance::NO_THRUST { Ok(r) } else { Err(joint) };
        }
        Err(self.span.first())
    }

    /// Largest `|M| / (d N)` over the cuts; `None` where one does not push.
    fn ratio(&self, y: &[f64; 3]) -> Option<f64> {
        let mut most = 0.0_f64;
        for cut in &self.cuts {
            let (m, d) = (value(&cut.moment, y), value(&cut.room, y));
            if d <= 0.0 {
                if m.abs() > 0.0 || d < 0.0 {
                    return None;
                }
                continue;
            }
            most = most.max(m.abs() / d);
        }
        Some(most)
    }

    /// The best line for the cuts, from the line `r` whose ratio is at most `upper`.
    fn least(&mut self, r: &Unknowns, upper: f64) -> Option<Step> {
        let n = self.space.free;
        let mut weights: Vec<f64> =
            self.cuts.iter().map(|c| c.joint.thrust(r) * self.sense * c.joint.depth).collect();
        let mut tau = upper;
        let mut last: Option<Step> = None;
        for _ in 0..STEPS {
            let rows = self.cuts.iter().zip(&weights).flat_map(|(cut, w)| {
                RowKind::ALL.map(|kind| {
                    let (bound, b) = self.bound(cut, kind, tau);
                    let mut a = [0.0; MOST];
                    a[..n].copy_from_slice(&bound[..n]);
                    a[n] = if kind == RowKind::Thrust { 0.0 } else { -w.max(f64::MIN_POSITIVE) };
                    Row { a, b }
                })
            });
            let rows: Vec<Row> = rows.collect();
            self.program.replace(rows.into_iter());
            let Outcome::Best(vertex) = self.program.solve() else {
                return last;
            };
            let mut y = [0.0; 3];
            y[..n].copy_from_slice(&vertex.x[..n]);
            let Some(reached) = self.ratio(&y) else {
                return last;
            };
            let done = tau - reached <= 4.0 * f64::EPSILON * tau.max(self.floor);
            let mut step = Step {
                r: self.space.unknowns(&y),
                tau: reached,
                asked: tau,
                bound: vertex.dual,
                multipliers: self.multipliers(&vertex),
                held: self.program.held(&vertex),
            };
            if done {
                // The last program proves the line before it when rounding has made its own line the worse.
                if let Some(l) = last.filter(|l| l.tau < reached) {
                    (step.r, step.tau) = (l.r, l.tau);
                }
                return Some(step);
            }
            tau = reached;
            for (w, cut) in weights.iter_mut().zip(&self.cuts) {
                *w = value(&cut.room, &y);
            }
            last = Some(step);
        }
        last
    }

    /// Chooses among equally close lines, measures the line on the whole axis, and draws up the proof.
    fn finish(&mut self, step: &Step) -> Closest {
        let holds = self.holding(step);
        let mut r = step.r;
        if holds.len() < self.space.free
            && let Some(chosen) = self.least_bending(step, &holds)
        {
            r = chosen;
        }
        let Some(primal) = self.worst_finite(&r) else {
            return Closest::Stalled;
        };
        let dual = self.dual(step, &r);
        if (primal - dual).abs() > tolerance::PROOF_GAP * primal.max(self.floor) {
            // Never an optimum without its proof.
            return Closest::Stalled;
        }
        let gap = (primal - dual).abs() / primal.abs().max(dual.abs()).max(1.0);
        Closest::Found { r, proof: Proof { primal, dual, gap } }
    }

    /// The bound of the multipliers: with `Σ λ (±M − τ d N) = φ` for every line, no line has a ratio below
    /// `τ + φ / Σ λ d N`, to first order in the tiny `φ`.
    fn dual(&self, step: &Step, r: &Unknowns) -> f64 {
        let room: f64 = step
            .multipliers
            .iter()
            .filter(|m| m.row != RowKind::Thrust)
            .map(|m| {
                let joint = &self.cuts[m.cut].joint;
                m.value * joint.thrust(r) * self.sense * joint.depth
            })
            .sum();
        if room > 0.0 { step.asked + step.bound / room } else { 0.0 }
    }

    fn multipliers(&self, vertex: &Vertex) -> Vec<Multiplier> {
        let first = self.program.box_rows();
        let cuts = vertex.active.iter().filter(|a| a.0 >= first);
        cuts.map(|&(i, value)| Multiplier {
            cut: (i - first) / RowKind::ALL.len(),
            row: RowKind::ALL[(i - first) % RowKind::ALL.len()],
            value,
        })
        .collect()
    }

    /// The equations that hold the optimum in place: independent rows with multipliers.
    fn holding(&self, step: &Step) -> Vec<Bound> {
        let n = self.space.free;
        let most = step.multipliers.iter().fold(0.0, |m, a| f64::max(m, a.value));
        let mut active = step.multipliers.clone();
        active.retain(|m| m.value > tolerance::MULTIPLIER * most);
        active.sort_by(|a, b| b.value.total_cmp(&a.value).then(a.cut.cmp(&b.cut)));
        independent(n, active.iter().map(|m| self.bound(&self.cuts[m.cut], m.row, step.tau)))
    }

    /// `±M − τ d N ≤ 0` or `ε − N ≤ 0` as a row of the free unknowns.
    fn bound(&self, cut: &Cut, kind: RowKind, tau: f64) -> Bound {
        let (side, room) = match kind {
            RowKind::Upper => (1.0, tau),
            RowKind::Lower => (-1.0, tau),
            RowKind::Thrust => (0.0, 1.0 / cut.joint.depth),
        };
        let least = if kind == RowKind::Thrust { tolerance::LEAST_THRUST } else { 0.0 };
        let mut a = [0.0; 3];
        for (i, v) in a.iter_mut().enumerate().take(self.space.free) {
            *v = side * cut.moment.0[i] - room * cut.room.0[i];
        }
        (a, room * cut.room.1 - side * cut.moment.1 - least)
    }

    /// Of all lines as close as the best, the one of least `∫ M² ds`.
    fn least_bending(&mut self, step: &Step, holds: &[Bound]) -> Option<Unknowns> {
        let aim = bending(self.span, self.whole, self.space);
        let leave = step.tau + tolerance::TIE_LEAVE * step.tau.max(self.floor);
        let known = self.cuts.len();
        let mut chosen = None;
        for _ in 0..ROUNDS {
            let rows: Vec<Bound> =
                self.cuts.iter().flat_map(|c| RowKind::ALL.map(|kind| self.bound(c, kind, leave))).collect();
            let y = aim.least(holds, &rows)?;
            let r = self.space.unknowns(&y);
            let peaks = self.sampling.peaks(&r, leave);
            let worst = peaks.first().map_or(0.0, |p| p.value);
            if worst <= leave + tolerance::TIE_LEAVE * leave.max(self.floor) {
                chosen = Some(r);
                break;
            }
            if self.take(&peaks, leave) == 0 {
                break;
            }
        }
        // The multipliers of the proof count the cuts that the program knew.
        self.cuts.truncate(known);
        chosen
    }
}

fn value(row: &Affine, y: &[f64; 3]) -> f64 {
    row.0[0] * y[0] + row.0[1] * y[1] + row.0[2] * y[2] + row.1
}
