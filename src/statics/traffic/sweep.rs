//! All positions of a moving load: first evenly, then ever closer, then closest about the worst.

use std::sync::Mutex;
use std::sync::atomic::{AtomicUsize, Ordering};

use super::super::{LineKind, Status, Unsolved, analyse::analyse, analyse::elastic};
use super::envelope::{Extreme, Tally};
use super::evaluate::Evaluator;
use super::patch::Patches;
use super::prepared::Prepared;
use super::{Moving, Position, Push, Traverse};
use crate::tolerance;

/// Positions that follow one another from a cold start. Fixed, so that the result does not depend on the threads.
const CHUNK: usize = 16;
/// Chunks whose results are held at one time.
const BATCH: usize = 64;
/// Parts of a course that the first round looks at.
const FIRST: f64 = 64.0;
/// Halvings of the step all along, and about the worst positions.
const HALVINGS: u32 = 5;
const FINE_HALVINGS: u32 = 14;
/// Positions above which the step is not halved any more.
const MOST: usize = 20_000;

/// Moves the load across the span.
///
/// # Errors
/// As [`super::super::analyse`]; numbers that are not finite.
pub fn traverse(moving: &Moving) -> Result<Traverse, Unsolved> {
    sound(moving)?;
    let live = size(moving);
    let prepared = Prepared::new(moving, live)?;
    let patches = Patches::new(&prepared);
    let mut walk = Walk { prepared: &prepared, patches: &patches, tally: Tally::default(), positions: 0 };
    let (step, finest, uncertainty) = walk.all();
    let Walk { mut tally, positions, .. } = walk;
    if tally.envelope.is_empty() {
        tally = Evaluator::new(&prepared).tally;
    }
    let alone = |extreme: &Extreme| {
        let at = extreme.found?.position;
        let mut pushes = pushes(moving, at);
        pushes.extend(patches.at_worst(&prepared, &pushes, extreme.found?));
        let problem = moving.problem_at(&pushes);
        match moving.stiffness {
            Some(f) if prepared.choice.governs == LineKind::Elastic => elastic(&problem, &|p| f(p)).ok(),
            _ => analyse(&problem).ok(),
        }
    };
    Ok(Traverse {
        governs: prepared.choice.governs,
        rule: prepared.choice.rule,
        positions,
        step,
        finest,
        uncertainty,
        at_worst: alone(&tally.offset),
        at_least_factor: (tally.load_factor.status() == Status::Found)
            .then(|| alone(&tally.load_factor))
            .flatten(),
        tally,
    })
}

fn sound(moving: &Moving) -> Result<(), Unsolved> {
    let bad = |what: &str| Err(Unsolved::Input(what.into()));
    let length = moving.problem.axis.length();
    if !moving.slots.iter().all(|s| (0.0..=length * (1.0 + tolerance::ONE_JOINT)).contains(s)) {
        return bad("a place where live load enters the ring does not lie on the axis");
    }
    if !moving.courses.iter().all(|c| {
        c.between.0.is_finite() && c.between.1.is_finite() && c.corners.iter().all(|x| x.is_finite())
    }) {
        return bad("a position of the moving load is not a finite number");
    }
    if moving.step.is_some_and(|s| !(s > 0.0 && s.is_finite())) {
        return bad("the distance of the positions must be positive");
    }
    let whole = |p: &Push| p.slot < moving.slots.len() && p.at.is_finite() && p.force.is_finite();
    if !moving.cells.iter().flat_map(|c| &c.unit).all(whole) {
        return bad("a stretch of road loads a place that does not exist");
    }
    Ok(())
}

/// About how much live load there is, kN.
fn size(moving: &Moving) -> f64 {
    let sum = |pushes: &[Push]| pushes.iter().map(|p| p.force.hypot()).sum::<f64>();
    let mut most = 0.0_f64;
    for (i, course) in moving.courses.iter().enumerate() {
        for k in 0..=32 {
            let x = course.between.0 + (course.between.1 - course.between.0) * f64::from(k) / 32.0;
            most = most.max(sum(&(moving.place)(i, x)));
        }
    }
    let cells: f64 = moving.cells.iter().map(|c| sum(&c.unit) * (c.between.1 - c.between.0)).sum();
    most + cells * moving.uniform + moving.knife
}

fn pushes(moving: &Moving, at: Position) -> Vec<Push> {
    if moving.courses.is_empty() { Vec::new() } else { (moving.place)(at.course, at.at) }
}

/// The positions on their way.
struct Walk<'a, 'm> {
    prepared: &'a Prepared<'m>,
    patches: &'a Patches,
    tally: Tally,
    positions: usize,
}

impl Walk<'_, '_> {
    /// Step all along, step about the worst, and what the last halving all along changed.
    fn all(&mut self) -> (f64, f64, f64) {
        let moving = self.prepared.moving;
        if moving.courses.is_empty() {
            self.look(&[Position { course: 0, at: 0.0 }]);
            return (0.0, 0.0, 0.0);
        }
        let longest = moving.courses.iter().map(|c| c.between.1 - c.between.0).fold(0.0, f64::max);
        // A stated step is the finer of two rounds, so that what it leaves open can be told.
        let mut parts = match moving.step {
            Some(step) => (longest / step / 2.0).ceil().clamp(1.0, MOST as f64),
            None => FIRST,
        };
        let mut first: Vec<Position> = Vec::new();
        for (i, course) in moving.courses.iter().enumerate() {
            first.extend(even(i, course.between, parts, false));
            let inside = course.corners.iter().filter(|x| (course.between.0..=course.between.1).contains(*x));
            first.extend(inside.map(|&at| Position { course: i, at }));
        }
        self.look(&first);
        let fixed = moving.step.is_some();
        let mut finest = longest / parts;
        if !fixed {
            finest = self.close_in(longest / parts);
        }
        let mut change = 1.0;
        for _ in 0..if fixed { 1 } else { HALVINGS } {
            if self.positions * 2 > MOST && !fixed {
                break;
            }
            let before = self.worst();
            let between: Vec<Position> = moving
                .courses
                .iter()
                .enumerate()
                .flat_map(|(i, course)| even(i, course.between, parts, true))
                .collect();
            self.look(&between);
            parts *= 2.0;
            finest = if fixed { longest / parts } else { self.close_in(longest / parts) };
            change = moved(&before, &self.worst());
            if change <= tolerance::STEP_CHANGE {
                break;
            }
        }
        (longest / parts, finest, change.max(if fixed { 0.0 } else { tolerance::STEP_FINE }))
    }

    /// Halves the step about the worst positions until they bring nothing; gives the last step.
    fn close_in(&mut self, step: f64) -> f64 {
        let mut reach = step;
        for _ in 0..FINE_HALVINGS {
            let before = self.worst();
            let mut near: Vec<Position> = Vec::new();
            for extreme in self.tally.watched() {
                let Some(value) = extreme.found else { continue };
                let Some(course) = self.prepared.moving.courses.get(value.position.course) else { continue };
                for side in [-0.5, 0.5] {
                    let at = value.position.at + side * reach;
                    if at > course.between.0 && at < course.between.1 {
                        near.push(Position { course: value.position.course, at });
                    }
                }
            }
            self.look(&near);
            reach /= 2.0;
            if moved(&before, &self.worst()) <= tolerance::STEP_FINE && reach <= step / 16.0 {
                break;
            }
        }
        reach
    }

    fn worst(&self) -> Vec<Option<f64>> {
        self.tally.watched().iter().map(|e| e.found.map(|v| v.value)).collect()
    }

    /// Takes in positions, in parallel and in their order.
    fn look(&mut self, positions: &[Position]) {
        let mut positions = positions.to_vec();
        positions.sort_by(|a, b| a.course.cmp(&b.course).then(a.at.total_cmp(&b.at)));
        positions.dedup();
        self.positions += positions.len();
        for batch in positions.chunks(CHUNK * BATCH) {
            let chunks: Vec<&[Position]> = batch.chunks(CHUNK).collect();
            let threads = self.prepared.moving.threads.clamp(1, chunks.len().max(1));
            let next = AtomicUsize::new(0);
            let done: Vec<Mutex<Option<Tally>>> = chunks.iter().map(|_| Mutex::new(None)).collect();
            let work = || {
                let mut evaluator = Evaluator::new(self.prepared);
                let clean = evaluator.tally.clone();
                while let Some((i, chunk)) = {
                    let i = next.fetch_add(1, Ordering::Relaxed);
                    chunks.get(i).map(|c| (i, *c))
                } {
                    evaluator.forget();
                    evaluator.tally = clean.clone();
                    for &position in chunk {
                        let pushes = pushes(self.prepared.moving, position);
                        let solved = evaluator.take(&pushes, position);
                        self.patches.take(&mut evaluator, &pushes, &solved, position);
                    }
                    if let Ok(mut slot) = done[i].lock() {
                        *slot = Some(evaluator.tally.clone());
                    }
                }
            };
            if threads <= 1 {
                work();
            } else {
                std::thread::scope(|scope| {
                    for _ in 0..threads {
                        scope.spawn(work);
                    }
                });
            }
            for slot in done {
                if let Ok(Some(tally)) = slot.into_inner() {
                    self.tally.merge(&tally);
                }
            }
        }
    }
}

/// Places that part a course evenly, or the middles between them.
fn even(course: usize, (from, to): (f64, f64), parts: f64, middles: bool) -> impl Iterator<Item = Position> {
    #[allow(clippy::cast_possible_truncation, clippy::cast_sign_loss)] // At most some ten thousand.
    let count = parts as u32 + u32::from(!middles);
    let shift = if middles { 0.5 } else { 0.0 };
    (0..count).map(move |k| Position { course, at: from + (to - from) * (f64::from(k) + shift) / parts })
}

/// Largest relative change of any value; new ones count as wholly changed.
fn moved(before: &[Option<f64>], after: &[Option<f64>]) -> f64 {
    before.iter().zip(after).fold(0.0, |m: f64, pair| {
        m.max(match pair {
            (Some(a), Some(b)) => (a - b).abs() / a.abs().max(b.abs()).max(f64::MIN_POSITIVE),
            (None, None) => 0.0,
            _ => 1.0,
        })
    })
}
