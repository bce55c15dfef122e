//! Uniform loads and knife edges where they make things worst: on the stretches of road whose influence is adverse.
//!
//! Where the governing line follows from linear equations, the eccentricity in a joint is a fraction of two sums over the
//! stretches, `(M + Σ m q) / (N + Σ n q)`; at its greatest value `e` those are loaded for which `m − e n > 0` [Dinkelbach
//! 1967]. Of an optimum (the closest line, the load factor) the multipliers give the influence: those of a mechanism are
//! its displacements, so that a stretch counts as adverse where its load does work. Loading these makes the optimum worse
//! or leaves it; a new optimum has new multipliers, until nothing changes.

use super::super::LineKind;
use super::super::joint::{Joint, Loads, Unknowns};
use super::super::limit::{Extreme as End, Lean, virtual_work};
use super::super::simplex::{MOST, Outcome, Program, Row};
use super::super::subspace::Subspace;
use super::envelope::Value;
use super::evaluate::{Evaluator, Record, Solved};
use super::prepared::Prepared;
use super::{Position, Push};

/// Rounds of loading and solving.
const ROUNDS: usize = 8;
/// Parts of the road between which single stretches are looked for.
const PARTS: usize = 24;
/// The worst of them that are followed further.
const KEPT: usize = 4;

/// The stretches of road with what they do.
pub(super) struct Patches {
    /// kN on each stretch when it is loaded; 0 without a uniform load.
    uniform: Vec<f64>,
    knife: f64,
    /// What one kN in each stretch brings before each piece, in local units.
    units: Vec<Vec<Loads>>,
    pushes: Vec<Vec<Push>>,
    /// Change of moment and thrust in each station by one kN in each stretch, in local units; of a line that answers.
    answers: Vec<Vec<[f64; 2]>>,
    /// Change of the line itself.
    changes: Vec<[f64; 3]>,
}

/// Load on each stretch, kN.
type Loading = Vec<f64>;

impl Patches {
    pub fn new(prepared: &Prepared) -> Self {
        let moving = prepared.moving;
        let used = prepared.wants_mechanism();
        let cells = if used { moving.cells } else { &[] };
        let stations = prepared.stations();
        let mut patches = Self {
            uniform: cells.iter().map(|c| moving.uniform * (c.between.1 - c.between.0)).collect(),
            knife: moving.knife,
            units: cells.iter().map(|c| prepared.prefix(&c.unit, |_| true)).collect(),
            pushes: cells.iter().map(|c| c.unit.clone()).collect(),
            answers: Vec::new(),
            changes: Vec::new(),
        };
        if let Some(response) = &prepared.response {
            for (cell, unit) in cells.iter().zip(&patches.units) {
                let mut change = [0.0; 3];
                for push in &cell.unit {
                    let by = response.change(push.slot, &prepared.local(push));
                    for (v, c) in change.iter_mut().zip(by) {
                        *v += c;
                    }
                }
                patches.answers.push(stations.iter().map(|j| answer(j, unit, &change)).collect());
                patches.changes.push(change);
            }
        }
        patches
    }

    /// Adds the worst patches to what a position has shown.
    pub fn take(&self, evaluator: &mut Evaluator, pushes: &[Push], solved: &Solved, position: Position) {
        if self.pushes.is_empty() {
            return;
        }
        if let (false, Some(r)) = (self.answers.is_empty(), solved.r)
            && let Some((_, _, loading)) = self.by_stations(evaluator, &r, &solved.prefix, position)
        {
            self.look(evaluator, pushes, &loading, position);
        }
        let closest = self.answers.is_empty() && evaluator.prepared.choice.governs == LineKind::Closest;
        if !closest && !evaluator.prepared.ring {
            return;
        }
        let [by_line, by_factor] = self.starts(evaluator, pushes, position);
        if closest {
            for start in by_line {
                self.climb(evaluator, pushes, start, position, |e, s| self.against_closest(e, s));
            }
        }
        if evaluator.prepared.ring {
            for start in by_factor {
                self.climb(evaluator, pushes, start, position, |_, s| self.against_mechanism(s));
            }
        }
    }

    /// The loading that belongs to a worst value, as pushes: the loadings of the position are gone through again.
    pub fn at_worst(&self, prepared: &Prepared, pushes: &[Push], worst: Value) -> Vec<Push> {
        if self.pushes.is_empty() {
            return Vec::new();
        }
        let mut evaluator = Evaluator::new(prepared);
        evaluator.record = Some(Record { target: worst.value, off: f64::INFINITY, pushes: Vec::new() });
        let nothing = vec![0.0; self.pushes.len()];
        let plain = self.look(&mut evaluator, pushes, &nothing, worst.position);
        self.take(&mut evaluator, pushes, &plain, worst.position);
        evaluator.record.map(|r| r.pushes).unwrap_or_default()
    }

    /// Solves the position with a loading.
    fn look(
        &self,
        evaluator: &mut Evaluator,
        pushes: &[Push],
        loading: &Loading,
        position: Position,
    ) -> Solved {
        let mut all = pushes.to_vec();
        all.extend(self.on(loading));
        let solved = evaluator.take(&all, position);
        if let Some(record) = &mut evaluator.record {
            for value in [solved.offset, solved.factor()].into_iter().flatten() {
                let off = (value - record.target).abs();
                if off < record.off {
                    (record.off, record.pushes) = (off, self.on(loading));
                }
            }
        }
        solved
    }

    /// A loading as pushes.
    fn on(&self, loading: &Loading) -> Vec<Push> {
        let loaded = loading.iter().zip(&self.pushes).filter(|l| *l.0 > 0.0);
        loaded.flat_map(|(&q, unit)| unit.iter().map(move |p| Push { force: p.force * q, ..*p })).collect()
    }

    /// A stretch from one cell to another, with the knife edge in its middle.
    fn part(&self, from: usize, to: usize) -> Loading {
        let inside = |i: usize| if (from..to).contains(&i) { self.uniform[i] } else { 0.0 };
        let mut loading: Loading = (0..self.pushes.len()).map(inside).collect();
        if let Some(q) = loading.get_mut(usize::midpoint(from, to)) {
            *q += self.knife;
        }
        loading
    }

    /// Where to begin, against the line and against the factor, since an optimum may be the worst only among its neighbours:
    /// with a train, with it alone and with the road or a half of it loaded; without one, with the worst of all single
    /// stretches.
    fn starts(&self, evaluator: &mut Evaluator, pushes: &[Push], position: Position) -> [Vec<Loading>; 2] {
        let n = self.pushes.len();
        if pushes.iter().any(|p| p.force.hypot() > 0.0) {
            let starts = vec![vec![0.0; n], self.part(0, n), self.part(0, n / 2), self.part(n / 2, n)];
            return [starts.clone(), starts];
        }
        let mut look = |(from, to): (usize, usize)| {
            let solved = self.look(evaluator, pushes, &self.part(from, to), position);
            let line = solved.depth_use.or(solved.offset);
            [line, solved.factor().map(|f| -f)].map(|b| b.unwrap_or(f64::NEG_INFINITY))
        };
        let cut = |k: usize| k * n / PARTS;
        let stretches = (0..PARTS).flat_map(|a| (a + 1..=PARTS).map(move |b| (cut(a), cut(b))));
        let coarse: Vec<([f64; 2], (usize, usize))> =
            stretches.filter(|s| s.0 < s.1).map(|s| (look(s), s)).collect();
        [0, 1].map(|which| {
            let mut best: Vec<(f64, (usize, usize))> = coarse.iter().map(|c| (c.0[which], c.1)).collect();
            best.sort_by(|a, b| b.0.total_cmp(&a.0).then(a.1.cmp(&b.1)));
            best.truncate(KEPT);
            best.into_iter().map(|start| self.moved(start, n, |s| look(s)[which])).collect()
        })
    }

    /// The ends of a stretch moved for the worse, by ever smaller steps.
    fn moved(
        &self,
        mut best: (f64, (usize, usize)),
        n: usize,
        mut look: impl FnMut((usize, usize)) -> f64,
    ) -> Loading {
        let mut step = n.div_ceil(PARTS) / 2;
        while step > 0 {
            let (from, to) = best.1;
            let ends = [
                (from.saturating_sub(step), to),
                (from + step, to),
                (from, to.saturating_sub(step)),
                (from, (to + step).min(n)),
            ];
            for stretch in ends.into_iter().filter(|e| e.0 < e.1 && *e != (from, to)) {
                let bad = look(stretch);
                if bad > best.0 {
                    best = (bad, stretch);
                }
            }
            if best.1 == (from, to) {
                step /= 2;
            }
        }
        self.part(best.1.0, best.1.1)
    }

    /// Loads against the optimum found and solves again, until that brings no new loading.
    fn climb(
        &self,
        evaluator: &mut Evaluator,
        pushes: &[Push],
        start: Loading,
        position: Position,
        against: impl Fn(&Evaluator, &Solved) -> Option<Loading>,
    ) {
        let mut seen = vec![start];
        while let Some(loading) = seen.last().cloned() {
            let solved = self.look(evaluator, pushes, &loading, position);
            match against(evaluator, &solved) {
                Some(next) if seen.len() < ROUNDS && !seen.contains(&next) => seen.push(next),
                _ => break,
            }
        }
    }

    /// The stretches that count for the worse by their scores.
    fn adverse(&self, score: impl Fn(usize) -> f64) -> Loading {
        let scores: Vec<f64> = (0..self.pushes.len()).map(score).collect();
        let mut loading: Loading =
            scores.iter().zip(&self.uniform).map(|(s, q)| if *s > 0.0 { *q } else { 0.0 }).collect();
        let worst = scores.iter().enumerate().fold(None, |best: Option<(usize, f64)>, (i, &s)| {
            if s > best.map_or(0.0, |b| b.1) { Some((i, s)) } else { best }
        });
        if let Some((i, _)) = worst {
            loading[i] += self.knife;
        }
        loading
    }

    /// Both extremes of every station of a line that answers; gives the loading of the largest use of the depth.
    fn by_stations(
        &self,
        evaluator: &mut Evaluator,
        r: &Unknowns,
        prefix: &[Loads],
        position: Position,
    ) -> Option<(f64, usize, Loading)> {
        let mut worst: Option<(f64, usize, Loading)> = None;
        let span = &evaluator.prepared.span;
        for (k, joint) in evaluator.stations.iter().enumerate() {
            let mut here = *joint;
            if let Some(loads) = prefix.get(joint.piece) {
                here.loads.varying = here.loads.varying.plus(loads);
            }
            let (m, n) = (here.moment(r), here.thrust(r));
            for side in [1.0, -1.0] {
                let mut e = m / n;
                let mut chosen: Loading = Vec::new();
                let mut sum = [m, n];
                for _ in 0..ROUNDS {
                    let loading = self.adverse(|c| {
                        let [dm, dn] = self.answers[c][k];
                        side * (dm - e * dn) * n.signum()
                    });
                    sum = [m, n];
                    for (q, a) in loading.iter().zip(&self.answers).filter(|l| *l.0 > 0.0) {
                        sum[0] += q * a[k][0];
                        sum[1] += q * a[k][1];
                    }
                    let same = loading == chosen;
                    chosen = loading;
                    e = sum[0] / sum[1];
                    if same {
                        break;
                    }
                }
                let station = &mut evaluator.tally.envelope[k];
                station.take(sum[1] * span.load, sum[0] * span.load * span.length, position);
                let share = e.abs() / joint.depth;
                if e.is_finite() && worst.as_ref().is_none_or(|w| share > w.0) {
                    worst = Some((share, k, chosen));
                }
            }
        }
        for side in [1.0, -1.0] {
            let loading = self.adverse(|c| side * self.changes[c][0]);
            let push: f64 = loading.iter().zip(&self.changes).map(|(q, c)| q * c[0]).sum();
            let value =
                Value { value: (r[0] + push) * span.load, position, at: span.drawn(span.path.start()) };
            evaluator.tally.push[0].less(value);
            evaluator.tally.push[1].greater(value);
        }
        worst
    }

    /// The stretches whose load does work in the mechanism of the load factor.
    fn against_mechanism(&self, solved: &Solved) -> Option<Loading> {
        let Some(End::Found { leans, .. }) = &solved.mechanism else { return None };
        let (_, varying, _) = virtual_work(leans);
        (varying.abs() > 0.0).then(|| {
            self.adverse(|c| leans.iter().map(|l| work(l, &self.units[c])).sum::<f64>() * varying.signum())
        })
    }

    /// The stretches that drive the closest line away, by the multipliers of the program that it solves.
    fn against_closest(&self, evaluator: &Evaluator, solved: &Solved) -> Option<Loading> {
        let r = solved.r?;
        let prepared = evaluator.prepared;
        let space = Subspace::lines(&evaluator.span, &prepared.hinge_rows(&evaluator.span))?;
        let loaded: Vec<Joint> = evaluator
            .stations
            .iter()
            .map(|joint| {
                let mut here = *joint;
                if let Some(loads) = solved.prefix.get(joint.piece) {
                    here.loads.varying = here.loads.varying.plus(loads);
                }
                here
            })
            .collect();
        let sense = prepared.sense;
        let tau =
            loaded.iter().fold(0.0, |t: f64, j| t.max(j.moment(&r).abs() / (j.depth * j.thrust(&r) * sense)));
        let n = space.free;
        let mut cost = vec![0.0; n];
        cost.push(1.0);
        let mut program = Program::new(&cost, 1000.0);
        for joint in &loaded {
            let (m, t) = (space.row(&joint.moment_row()), space.row(&joint.thrust_row()));
            let room = tau * joint.depth * sense;
            for side in [1.0, -1.0] {
                let mut a = [0.0; MOST];
                for (to, (m, t)) in a.iter_mut().zip(m.0.iter().zip(&t.0)).take(n) {
                    *to = side * m - room * t;
                }
                a[n] = -1.0;
                program.push(Row { a, b: room * t.1 - side * m.1 });
            }
        }
        let Outcome::Best(vertex) = program.solve() else { return None };
        let first = program.box_rows();
        let active: Vec<(usize, f64, f64)> = vertex
            .active
            .iter()
            .filter(|a| a.0 >= first && a.1 > 0.0)
            .map(|&(i, y)| ((i - first) / 2, if (i - first).is_multiple_of(2) { 1.0 } else { -1.0 }, y))
            .collect();
        Some(self.adverse(|c| {
            active
                .iter()
                .map(|&(k, side, y)| {
                    let joint = &loaded[k];
                    let [m, t] = answer(joint, &self.units[c], &[0.0; 3]);
                    y * (side * m - tau * joint.depth * sense * t)
                })
                .sum()
        }))
    }
}

/// Change of moment and thrust in a joint by loads before each piece and a change of the line.
fn answer(joint: &Joint, before: &[Loads], change: &[f64; 3]) -> [f64; 2] {
    let l = before.get(joint.piece).copied().unwrap_or_default();
    let (p, t) = (joint.at, joint.tangent);
    let (h, v) = (change[0] + l.fx, change[1] + l.fy);
    [change[2] + v * p.x - h * p.y - l.moment, h * t.x + v * t.y]
}

/// Work of loads in the mechanism at one of its hinges.
fn work(lean: &Lean, before: &[Loads]) -> f64 {
    let loads = before.get(lean.joint.piece).copied().unwrap_or_default();
    lean.multiplier * lean.work(&loads)
}
