//! A line of thrust laid out: stations, offset, depth use, and the ends.

use super::joint::{Joint, Unknowns};
use super::peaks::{Peak, Sampling};
use super::span::Span;
use super::{End, Line, LineKind, Offset, Proof, Station, Status, Support, Use};
use crate::tolerance;

/// Evenly spaced stations: parts of the axis.
const EVEN: u32 = 20;

/// What all lines of one span share.
pub(super) struct Sheet<'a> {
    pub span: &'a Span,
    /// With the depth of the ring, or 1 throughout.
    pub sampling: &'a Sampling<'a>,
    /// With depth 1 throughout; the same as `sampling` where the depth does not vary.
    pub bare: &'a Sampling<'a>,
}

impl Sheet<'_> {
    /// A line that was found.
    pub fn found(
        &self,
        kind: LineKind,
        support: Option<Support>,
        r: &Unknowns,
        proof: Option<Proof>,
    ) -> Line {
        let span = self.span;
        let own = self.sampling.has_own_directions();
        let worst = if own { self.sampling.farthest(r) } else { self.bare.worst(r) };
        let used = self.sampling.worst(r).filter(|_| span.has_depth);
        let reaction = span.reaction(r);
        let (first, last) = (span.first(), span.last());
        let end = last.resultant(r) * span.load;
        Line {
            kind,
            support,
            status: Status::Found,
            reason: None,
            reaction: Some(reaction),
            left: Some(End {
                horizontal: reaction.horizontal,
                vertical: reaction.vertical,
                eccentricity: eccentricity(&first, r).map(|e| e * span.length),
            }),
            right: Some(End {
                horizontal: end.x,
                vertical: -end.y,
                eccentricity: eccentricity(&last, r).map(|e| e * span.length),
            }),
            vertices: super::string::string(span, r),
            offset: worst.map(|w| self.offset(&w, r)),
            depth_use: used.map(|p| Use {
                ratio: p.value,
                at: span.drawn(p.joint.at),
                s: p.joint.s * span.length,
            }),
            stations: self.stations(worst.iter().chain(&used), r),
            proof,
            bending: None,
        }
    }

    fn offset(&self, worst: &Peak, r: &Unknowns) -> Offset {
        let span = self.span;
        let signed = eccentricity(&worst.joint, r).unwrap_or(0.0) * span.length;
        Offset {
            max_abs: signed.abs(),
            signed,
            at: span.drawn(worst.joint.at),
            s: worst.joint.s * span.length,
            rms: self.mean_square(r).sqrt() * span.length,
        }
    }

    /// Mean of `e²` over the length of the axis, by Gauss with four points between neighbouring samples.
    fn mean_square(&self, r: &Unknowns) -> f64 {
        const RULE: [(f64, f64); 4] = [
            (-0.861_136_311_594_052_6, 0.347_854_845_137_453_85),
            (-0.339_981_043_584_856_26, 0.652_145_154_862_546_1),
            (0.339_981_043_584_856_26, 0.652_145_154_862_546_1),
            (0.861_136_311_594_052_6, 0.347_854_845_137_453_85),
        ];
        let mut sum = 0.0;
        for pair in self.bare.joints().windows(2).filter(|p| p[0].piece == p[1].piece) {
            let piece = &self.span.pieces[pair[0].piece];
            let (half, middle) = ((pair[1].s - pair[0].s) / 2.0, f64::midpoint(pair[0].s, pair[1].s));
            for (x, w) in RULE {
                let joint = piece.joint(middle + half * x, pair[0].piece);
                if let Some(e) = eccentricity(&joint, r) {
                    sum += w * half * e * e;
                }
            }
        }
        sum
    }

    fn stations<'p>(&self, worst: impl Iterator<Item = &'p Peak>, r: &Unknowns) -> Vec<Station> {
        let span = self.span;
        if self.sampling.has_own_directions() {
            return self.sampling.joints().iter().map(|j| self.station(j, r)).collect();
        }
        let mut joints: Vec<Joint> = vec![span.first(), span.last()];
        joints.push(span.joint_at(span.crown.0, true));
        for e in &span.entered {
            joints.push(span.joint_at(e.foot, true));
            joints.push(span.joint_at(e.foot, false));
        }
        for l in &span.laid {
            joints.extend([span.joint_at(l.s0, true), span.joint_at(l.s1, true)]);
        }
        joints.extend((1..EVEN).map(|k| span.joint_at(f64::from(k) / f64::from(EVEN), true)));
        // The place alone: the joint may be one without depth.
        joints.extend(worst.map(|p| span.pieces[p.joint.piece].joint(p.joint.s, p.joint.piece)));
        joints.sort_by(|a, b| a.s.total_cmp(&b.s).then(a.piece.cmp(&b.piece)));
        // A joint at the end of one piece and at the start of the next is one, unless a load or a kink is between.
        joints.dedup_by(|b, a| {
            b.s - a.s <= tolerance::ONE_JOINT
                && (b.piece == a.piece
                    || (b.loads == a.loads && (b.tangent - a.tangent).hypot() <= tolerance::ONE_JOINT))
        });
        joints.iter().map(|j| self.station(j, r)).collect()
    }

    fn station(&self, joint: &Joint, r: &Unknowns) -> Station {
        let span = self.span;
        let resultant = joint.resultant(r);
        let flat = resultant.x.abs() > tolerance::VERTICAL_THRUST * resultant.hypot();
        Station {
            at: span.drawn(joint.at),
            s: joint.s * span.length,
            thrust: joint.thrust(r) * span.load,
            shear: joint.shear(r) * span.load,
            moment: joint.moment(r) * span.load * span.length,
            eccentricity: eccentricity(joint, r).map(|e| e * span.length),
            vertical_offset: flat.then(|| joint.moment(r) / resultant.x * span.length),
            depth: span.has_depth.then_some(joint.depth * span.length),
        }
    }
}

/// `M / N`; `None` where the thrust vanishes.
pub(super) fn eccentricity(joint: &Joint, r: &Unknowns) -> Option<f64> {
    let n = joint.thrust(r);
    (n.abs() > tolerance::NO_THRUST).then(|| joint.moment(r) / n)
}

/// A line that was not found.
pub(super) fn missing(kind: LineKind, support: Option<Support>, status: Status, reason: String) -> Line {
    Line {
        kind,
        support,
        status,
        reason: Some(reason),
        reaction: None,
        left: None,
        right: None,
        vertices: Vec::new(),
        offset: None,
        depth_use: None,
        stations: Vec::new(),
        proof: None,
        bending: None,
    }
}
