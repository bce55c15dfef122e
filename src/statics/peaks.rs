//! Where a constraint's own function is worst on the continuous axis.
//!
//! The function is `|M| / (d N)` for a line of thrust, eccentricity over depth, `|S| / N` for sliding, or the like for
//! crushing. Between loads,
//! kinks and joints of pieces it is smooth; it is sampled at every end and every few degrees, and every change of sign of
//! its slope is followed to the peak. A ring of a stated number of voussoirs has its own joints and no others.

use super::Unsolved;
use super::joint::{Joint, Loads, Unknowns};
use super::piece::Piece;
use super::span::Span;
use crate::geometry::{Boxes, Point, Vec2};
use crate::tolerance;

/// Turning of the axis between two samples, degrees.
const SAMPLE_TURN: f64 = 3.0;
/// Samples of a straight piece under its own weight.
const SAMPLES_STRAIGHT: usize = 4;

/// What is measured in a joint.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(super) enum Measure {
    /// `|M| / (d N)`
    Eccentricity,
    /// `|S| / N`
    Sliding,
    /// `|M| / (N d / 2 − c N²)` with this `c`
    Crushing(f64),
}

/// A joint where the function has a peak or an end.
#[derive(Debug, Clone, Copy)]
pub(super) struct Peak {
    pub joint: Joint,
    /// `|M| / (d N)` or `|S| / N`; infinite where the thrust vanishes or has the wrong sense.
    pub value: f64,
    /// Thrust in its own sense over the load: orders the peaks that are infinite.
    thrust: f64,
}

/// The samples of a span, made once.
pub(super) struct Sampling<'a> {
    span: &'a Span,
    /// 1 for compression, −1 for a cable.
    sense: f64,
    joints: Vec<Joint>,
    /// The joints are all there are.
    separate: bool,
    /// They have a direction of their own.
    drawn: bool,
}

impl<'a> Sampling<'a> {
    pub fn new(span: &'a Span, sense: f64) -> Self {
        let mut joints = Vec::with_capacity(3 * span.pieces.len());
        for (i, piece) in span.pieces.iter().enumerate() {
            let length = piece.s1 - piece.s0;
            let parts = parts(piece);
            joints.push(piece.joint(piece.s0, i));
            for k in 1..parts {
                joints.push(piece.joint(piece.s0 + length * k as f64 / parts as f64, i));
            }
            if length > 0.0 {
                joints.push(piece.joint(piece.s1, i));
            }
        }
        Self { span, sense, joints, separate: false, drawn: false }
    }

    /// The joints of a ring of `count` equal pieces along the axis, on both sides of a load or kink.
    pub fn voussoirs(span: &'a Span, sense: f64, count: usize) -> Self {
        let mut joints = Vec::with_capacity(count + 1);
        for k in 0..=count {
            let s = k as f64 / count as f64;
            let (before, after) = (span.joint_at(s, true), span.joint_at(s, false));
            joints.push(before);
            let loaded = span.entered.partition_point(|e| e.foot < s - tolerance::ONE_JOINT);
            let loaded = span.entered.get(loaded).is_some_and(|e| e.foot <= s + tolerance::ONE_JOINT);
            if loaded || after.loads != before.loads || after.tangent != before.tangent {
                joints.push(after);
            }
        }
        Self { span, sense, joints, separate: true, drawn: false }
    }

    /// Joints with a direction and depth of their own, on both sides of a load or kink.
    pub fn drawn(span: &'a Span, sense: f64, ends: &[[Point; 2]]) -> Result<Self, Unsolved> {
        let mut joints = Vec::with_capacity(ends.len());
        let boxes = Boxes::new(&span.path);
        let mut last = f64::NEG_INFINITY;
        for &[a, b] in ends {
            let bad = |what: &str| {
                let text =
                    format!("the joint from ({:.3}, {:.3}) to ({:.3}, {:.3}) m {what}", a.x, a.y, b.x, b.y);
                Err(Unsolved::Input(text))
            };
            let (low, high) = (span.local(a), span.local(b));
            let depth = (high - low).hypot();
            if !(depth > tolerance::ONE_JOINT && depth.is_finite()) {
                return bad("has no depth");
            }
            let (middle, up) = (low.midpoint(high), (high - low) / depth);
            let crossings = span.path.crossings_of_line(&boxes, middle, up, tolerance::ONE_JOINT);
            let crossing = crossings.iter().min_by(|p, q| p.along.abs().total_cmp(&q.along.abs()));
            let Some(s) = crossing.map(|c| c.s.clamp(0.0, 1.0)) else {
                return bad("does not cross the axis");
            };
            if s < last + tolerance::ONE_JOINT {
                return bad("does not stand right of the one before it");
            }
            last = s;
            let tangent = Vec2::new(up.y, -up.x);
            let (before, after) = (span.joint_at(s, true), span.joint_at(s, false));
            if tangent.dot(before.tangent) <= tolerance::ONE_JOINT {
                return bad("runs along the axis, or from extrados to intrados");
            }
            let own = |joint: Joint| Joint { at: middle, tangent, depth, ..joint };
            joints.push(own(before));
            if after.loads != before.loads {
                joints.push(own(after));
            }
        }
        if joints.len() < 2 {
            return Err(Unsolved::Input("a ring has at least the two joints at its springings".into()));
        }
        Ok(Self { span, sense, joints, separate: true, drawn: true })
    }

    /// Whether the joints have a direction of their own.
    pub fn has_own_directions(&self) -> bool {
        self.drawn
    }

    /// Of joints with a direction of their own the one with the largest `|M / N|`.
    pub fn farthest(&self, r: &Unknowns) -> Option<Peak> {
        let peaks =
            self.joints.iter().map(|j| self.peak(Measure::Eccentricity, &Joint { depth: 1.0, ..*j }, r));
        peaks.max_by(|a, b| a.value.total_cmp(&b.value))
    }

    /// The same joints of a span that carries other loads: what `fixed` and `varying` say has entered before each piece
    /// comes to the loads of each joint.
    pub fn carrying<'b>(&self, span: &'b Span, fixed: &[Loads], varying: &[Loads]) -> Sampling<'b> {
        let mut joints = self.joints.clone();
        for joint in &mut joints {
            if let Some(loads) = fixed.get(joint.piece) {
                joint.loads.fixed = joint.loads.fixed.plus(loads);
            }
            if let Some(loads) = varying.get(joint.piece) {
                joint.loads.varying = joint.loads.varying.plus(loads);
            }
        }
        Sampling { span, sense: self.sense, joints, separate: self.separate, drawn: self.drawn }
    }

    pub fn joints(&self) -> &[Joint] {
        &self.joints
    }

    /// About `count` joints spread evenly, with both ends: a start for the exchange.
    pub fn spread(&self, count: usize) -> Vec<Joint> {
        let last = self.joints.len() - 1;
        let count = count.min(last).max(1);
        (0..=count).map(|k| self.joints[last * k / count]).collect()
    }

    /// Least thrust, in its own sense, over all samples.
    pub fn least_thrust(&self, r: &Unknowns) -> (f64, Joint) {
        let mut least = (f64::INFINITY, self.joints[0]);
        for joint in &self.joints {
            let n = joint.thrust(r) * self.sense;
            if n < least.0 {
                least = (n, *joint);
            }
        }
        least
    }

    fn peak(&self, what: Measure, joint: &Joint, r: &Unknowns) -> Peak {
        let thrust = joint.thrust(r) * self.sense;
        let value = if thrust > tolerance::NO_THRUST {
            match what {
                Measure::Eccentricity => joint.moment(r).abs() / (joint.depth * thrust),
                Measure::Sliding => joint.shear(r).abs() / thrust,
                Measure::Crushing(c) => {
                    let room = thrust * (joint.depth / 2.0 - c * thrust);
                    if room > 0.0 { joint.moment(r).abs() / room } else { f64::INFINITY }
                }
            }
        } else {
            f64::INFINITY
        };
        Peak { joint: *joint, value, thrust }
    }

    /// All ends and peaks of the eccentricity over depth at least as high as `floor`, highest first.
    pub fn peaks(&self, r: &Unknowns, floor: f64) -> Vec<Peak> {
        self.peaks_of(Measure::Eccentricity, r, floor)
    }

    /// All ends and peaks at least as high as `floor`, highest first.
    pub fn peaks_of(&self, what: Measure, r: &Unknowns, floor: f64) -> Vec<Peak> {
        let mut found: Vec<Peak> = Vec::new();
        let mut best = floor;
        let mut k = 0;
        while k < self.joints.len() {
            let piece = self.joints[k].piece;
            let end = k + self.joints[k..].iter().take_while(|j| j.piece == piece).count();
            let ends = [k, end - 1];
            for i in k..end {
                if !(self.separate || ends.contains(&i)) {
                    continue;
                }
                let peak = self.peak(what, &self.joints[i], r);
                if peak.value >= floor {
                    best = best.max(if peak.value.is_finite() { peak.value } else { best });
                    found.push(peak);
                }
            }
            k = end;
        }
        if !self.separate {
            self.inner_peaks(what, r, floor, best, &mut found);
        }
        found.retain(|p| p.value >= floor);
        found.sort_by(|a, b| {
            b.value
                .total_cmp(&a.value)
                .then(a.thrust.total_cmp(&b.thrust))
                .then(a.joint.s.total_cmp(&b.joint.s))
        });
        found
    }

    /// The peaks between the ends.
    fn inner_peaks(&self, what: Measure, r: &Unknowns, floor: f64, best: f64, found: &mut Vec<Peak>) {
        let mut before: Option<(&Joint, f64)> = None;
        for joint in &self.joints {
            let piece = &self.span.pieces[joint.piece];
            if piece.is_plain() {
                before = None;
                continue;
            }
            if joint.thrust(r) * self.sense <= tolerance::NO_THRUST {
                let peak = self.peak(what, joint, r);
                if peak.value.is_infinite() {
                    found.push(peak);
                }
                before = None;
                continue;
            }
            let slope = self.slope(what, piece, joint, r);
            if slope.abs() <= 0.0 {
                // The sample is the peak itself.
                found.push(self.peak(what, joint, r));
            }
            if let Some((from, earlier)) = before
                && from.piece == joint.piece
                && earlier * slope < 0.0
            {
                // No peak between two samples is higher than this.
                let reach = |j: &Joint, slope: f64| {
                    let (over, under) = fraction(what, j, r);
                    (over / under).abs() + (slope / (under * under)).abs() * (joint.s - from.s)
                };
                if reach(from, earlier).max(reach(joint, slope)) >= floor.max(0.5 * best) {
                    let top = self.summit(what, (from.s, earlier), (joint.s, slope), joint.piece, r);
                    let peak = self.peak(what, &top, r);
                    if peak.value >= floor {
                        found.push(peak);
                    }
                }
            }
            before = Some((joint, slope));
        }
    }

    /// The highest peak of all.
    pub fn worst(&self, r: &Unknowns) -> Option<Peak> {
        self.peaks(r, 0.0).first().copied()
    }

    /// `A' B − A B'` for the fraction `A / B`: its slope but for a positive factor. With `D = d N`, `N' = κ S − w t_y`,
    /// `S' = −κ N − w t_x`.
    fn slope(&self, what: Measure, piece: &Piece, joint: &Joint, r: &Unknowns) -> f64 {
        let (over, under) = fraction(what, joint, r);
        let thrust = piece.thrust_slope(joint, r);
        let (rise, base) = match what {
            Measure::Eccentricity => {
                (piece.moment_slope(joint, r), piece.depth_slope * joint.thrust(r) + joint.depth * thrust)
            }
            Measure::Sliding => (piece.shear_slope(joint, r), thrust),
            Measure::Crushing(c) => {
                let n = joint.thrust(r);
                let room = thrust * (joint.depth / 2.0 - 2.0 * c * n) + n * piece.depth_slope / 2.0;
                (piece.moment_slope(joint, r), room)
            }
        };
        rise * under - over * base
    }

    /// Where the slope vanishes between two joints at which it has opposite signs: regula falsi, halving the weight of
    /// an end that stays [Dowell and Jarratt 1971, the Illinois rule].
    fn summit(&self, what: Measure, from: (f64, f64), to: (f64, f64), index: usize, r: &Unknowns) -> Joint {
        let piece = &self.span.pieces[index];
        let ((mut a, mut fa), (mut b, mut fb)) = (from, to);
        let mut joint = piece.joint(f64::midpoint(a, b), index);
        let mut moved = 0.0;
        let mut last = f64::INFINITY;
        for _ in 0..80 {
            let c = (a * fb - b * fa) / (fb - fa);
            let c = if c > a && c < b { c } else { f64::midpoint(a, b) };
            let step = (c - last).abs();
            last = c;
            joint = piece.joint(c, index);
            let fc = self.slope(what, piece, &joint, r);
            if step <= tolerance::PEAK_PLACE || fc.abs() <= f64::MIN_POSITIVE {
                break;
            }
            let side = (fc * fa).signum();
            if side < 0.0 {
                (b, fb) = (c, fc);
                if moved < 0.0 {
                    fa *= 0.5;
                }
            } else {
                (a, fa) = (c, fc);
                if moved > 0.0 {
                    fb *= 0.5;
                }
            }
            moved = side;
        }
        joint
    }
}

/// What stands above and below the line of the fraction.
fn fraction(what: Measure, joint: &Joint, r: &Unknowns) -> (f64, f64) {
    let thrust = joint.thrust(r);
    match what {
        Measure::Eccentricity => (joint.moment(r), joint.depth * thrust),
        Measure::Sliding => (joint.shear(r), thrust),
        Measure::Crushing(c) => (joint.moment(r), thrust * (joint.depth / 2.0 - c * thrust)),
    }
}

fn parts(piece: &Piece) -> usize {
    if piece.is_plain() || piece.s1 <= piece.s0 {
        return 1;
    }
    let turn = (piece.curvature * (piece.s1 - piece.s0)).abs().to_degrees();
    let least = if piece.curvature.abs() > 0.0 { 2 } else { SAMPLES_STRAIGHT };
    (least..10_000).find(|&n| n as f64 * SAMPLE_TURN >= turn).unwrap_or(10_000)
}
