//! Load factors of one ring under loads that move: prepared once, solved by the thousand.
//!
//! The joints of a ring of voussoirs are all there are, so the program of the greatest factor has the same rows for every
//! place of the moving loads, and its best vertex is a good start for the next place.

use super::joint::{Entered, Joint, LoadSets};
use super::peaks::Sampling;
use super::place::place;
use super::simplex::{Outcome, Program, Row};
use super::span::Span;
use super::subspace::Subspace;
use super::{Factor, Force, Problem, Proof, Status, Unsolved};
use crate::geometry::Boxes;
use crate::tolerance;

/// Size of the box that the unknowns start in, and how it grows.
const FIRST_BOX: f64 = 100.0;
const BOX_GROWTH: f64 = 100.0;

/// A ring of voussoirs under loads that stay, made ready for loads that move.
pub struct Factors {
    problem: Problem,
    span: Span,
    boxes: Boxes,
    joints: Vec<Joint>,
    space: Subspace,
    program: Program,
}

impl Factors {
    /// Makes a ring ready. All forces and weights of the problem stay; [`Problem::varying`] is not looked at.
    ///
    /// # Errors
    ///
    /// As [`super::analyse`]; [`Unsolved::NotBuilt`] for a ring without a stated number of voussoirs, without a depth, or of
    /// finite strength, whose joints are found anew for every place of the loads.
    pub fn new(problem: &Problem) -> Result<Self, Unsolved> {
        let mut problem = problem.clone();
        problem.varying.clear();
        problem.weight_varies = false;
        let (Some(count), Some(_), None) = (problem.voussoirs, &problem.depth, problem.strength) else {
            return Err(Unsolved::NotBuilt(
                "factors of moving loads are prepared for a ring of voussoirs of known depth and unlimited strength".into(),
            ));
        };
        let span = Span::new(&problem)?;
        let joints = Sampling::voussoirs(&span, 1.0, count).joints().to_vec();
        let choice = super::rule::choose(&problem, &span)?;
        let rows: Vec<_> = choice.hinges.iter().map(|&p| span.hinge_row(p)).collect();
        if !rows.is_empty() {
            return Err(Unsolved::NotBuilt(
                "factors of moving loads are prepared for a ring without hinges".into(),
            ));
        }
        let Some(space) = Subspace::with_factor(&span, &rows) else {
            return Err(Unsolved::Input("the unknowns of the ring depend on each other".into()));
        };
        let (cost, _) = space.row(&([0.0, 0.0, 0.0, -1.0], 0.0));
        let program = Program::new(&cost[..space.free], FIRST_BOX);
        let boxes = Boxes::new(&span.path);
        Ok(Self { problem, span, boxes, joints, space, program })
    }

    /// The greatest factor on `varying` for which a line of thrust lies inside the ring at all joints.
    ///
    /// # Errors
    ///
    /// [`Unsolved::Input`] where a force is not finite or its line of action misses the ring.
    pub fn greatest(&mut self, varying: &[Force]) -> Result<Factor, Unsolved> {
        if !varying.iter().all(|f| f.at.is_finite() && f.force.is_finite()) {
            return Err(Unsolved::Input("a load has a place or a force that is not a finite number".into()));
        }
        let moving = Problem {
            forces: varying.to_vec(),
            entering: Vec::new(),
            ..Problem::new(self.problem.axis.clone())
        };
        let (mut entered, missed) =
            place(&self.span.path, &self.boxes, &moving, self.span.origin, self.span.length);
        if !missed.is_empty() {
            return Err(Unsolved::Input("the line of action of a moving load misses the ring".into()));
        }
        for e in &mut entered {
            e.force /= self.span.load;
            e.varies = true;
        }
        let rows = rows(&self.joints, &entered, &self.space, self.problem.friction);
        let mut size = FIRST_BOX;
        self.program.widen(size);
        self.program.replace(rows.into_iter());
        let (_, constant) = self.space.row(&([0.0, 0.0, 0.0, -1.0], 0.0));
        loop {
            let (held, ended) = match self.program.solve() {
                Outcome::Best(vertex) => {
                    let held =
                        self.program.held(&vertex) * size > tolerance::PROOF_GAP * vertex.cost.abs().max(1.0);
                    let (primal, dual) = (-(vertex.cost + constant), -(vertex.dual + constant));
                    let gap = (primal - dual).abs() / primal.abs().max(dual.abs()).max(1.0);
                    let proof = Some(Proof { primal, dual, gap });
                    (
                        held,
                        Factor { status: Status::Found, value: Some(primal.max(0.0)), reason: None, proof },
                    )
                }
                Outcome::Infeasible(proof) => {
                    let held = proof.iter().any(|p| p.0 < self.program.box_rows() && p.1 > 0.0);
                    (held, without(Status::None, "no line of thrust lies inside the ring at any factor"))
                }
                Outcome::Stalled => {
                    (false, without(Status::Refused, "the program did not end within its accuracy"))
                }
            };
            if !held {
                return Ok(ended);
            }
            if size >= tolerance::UNBOUNDED {
                return Ok(match ended.status {
                    Status::Found => {
                        without(Status::Unbounded, "the varying loads alone find a line inside the ring")
                    }
                    _ => ended,
                });
            }
            size *= BOX_GROWTH;
            self.program.widen(size);
        }
    }
}

fn without(status: Status, reason: &str) -> Factor {
    Factor { status, value: None, reason: Some(reason.into()), proof: None }
}

/// The conditions of all joints, on both sides of a moving load that stands on one.
fn rows(joints: &[Joint], entered: &[Entered], space: &Subspace, friction: Option<f64>) -> Vec<Row> {
    let mut rows = Vec::with_capacity(4 * joints.len() + 1);
    let mut push = |a: [f64; 4], c: f64| {
        let (a, c) = space.row(&(a, c));
        rows.push(Row { a, b: -c });
    };
    // A load factor is not negative.
    push([0.0, 0.0, 0.0, -1.0], 0.0);
    let mut before = LoadSets::default();
    let mut next = 0;
    let mut add = |joint: &Joint, varying: &LoadSets| {
        let mut joint = *joint;
        joint.loads.varying = varying.varying;
        let (m, n) = (joint.moment_row(), joint.thrust_row());
        let half = joint.depth / 2.0;
        for side in [1.0, -1.0] {
            push(std::array::from_fn(|i| side * m.0[i] - half * n.0[i]), side * m.1 - half * n.1);
        }
        if let Some(friction) = friction {
            let s = joint.shear_row();
            for side in [1.0, -1.0] {
                push(std::array::from_fn(|i| side * s.0[i] - friction * n.0[i]), side * s.1 - friction * n.1);
            }
        }
    };
    for joint in joints {
        while entered.get(next).is_some_and(|e| e.foot < joint.s - tolerance::SAME_PLACE) {
            before.enter(&entered[next]);
            next += 1;
        }
        add(joint, &before);
        let mut on = before;
        let mut here = next;
        while entered.get(here).is_some_and(|e| e.foot <= joint.s + tolerance::SAME_PLACE) {
            on.enter(&entered[here]);
            here += 1;
        }
        if here > next {
            add(joint, &on);
        }
    }
    rows
}
