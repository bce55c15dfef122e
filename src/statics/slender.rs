//! Slender ribs: the push at which a rib buckles in its plane, what an imperfection and the movement of the rib add to its
//! bending, and what a deck takes off it.
//!
//! **Buckling push.** `H_cr = c E I / l²` of a parabolic rib of uniform stiffness under a load uniform in plan, with the
//! coefficients of S.P. Timoshenko and J.M. Gere, Theory of Elastic Stability, 2nd ed. 1961, Table 7-5 (from memory): there
//! `q_cr = γ E I / l³`, here `c = γ / (8 f / l)` as `H = q l² / (8 f)`. The stiffness is the least along the axis, and that
//! of a deck that shares is added (`E_d I_d`, which stands for `E_d I_d / cos φ` and more along the rib).
//!
//! **Amplification.** The antisymmetric part of the bending, and the bending `−H δ` of an imperfection `δ` of the first
//! antisymmetric shape with what the redundants make of it, grow by `1 / (1 − H / H_cr)`.
//!
//! **Snap-through.** A flat two-hinged sinusoidal rib snaps through in its symmetric shape before it buckles sideways when
//! `(f / 2 i)² < 5.5`, `i² = I / A` [Timoshenko and Gere, section 7.8]. The same argument with one term for the symmetric
//! shape, `f² EA π² / (4 l²) = (3 H₂ − H₁) / 2` with the pushes `H₁`, `H₂` of a straight bar in its first symmetric and
//! antisymmetric shape, gives 10.3 for built-in ends (`H₁ = 4 π²`, `H₂ = 80.8`).
//!
//! **Deck.** Close, stiff, pinned posts: rib and deck bend alike under live load, and the rib has the part
//! `E I cos φ / (E I cos φ + E_d I_d)` of the moment.

use std::f64::consts::TAU;

use super::elastic::{Effects, Flexibility, Place, add, least_energy, place};
use super::joint::{Joint, LoadSets, Unknowns, Weight};
use super::peaks::Sampling;
use super::quadratic::Quadratic;
use super::rule::Choice;
use super::span::Span;
use super::subspace::Subspace;
use super::{Station, Support};
use crate::geometry::Point;
use crate::tolerance;

/// What bends a slender rib beside its line of thrust.
#[derive(Debug, Clone, Copy, PartialEq, Default)]
pub struct Slender {
    /// Size of the imperfection, m, measured vertically; 0: none.
    pub imperfection: f64,
    /// `E_d I_d` of a deck that shares the bending of the varying loads, kN·m²; 0: none.
    pub deck: f64,
}

/// The bending of a slender rib.
#[derive(Debug, Clone, PartialEq)]
pub struct Bending {
    /// The greater push of the two abutments, kN.
    pub push: f64,
    /// The buckling push, kN; `None` where no coefficient is published.
    pub critical: Option<f64>,
    /// `H_cr l² / EI`.
    pub coefficient: Option<f64>,
    /// Factor on the antisymmetric bending.
    pub amplification: f64,
    /// `f / i` at the crown where it is so small that the rib may snap through, with the value below which it may.
    pub shallow: Option<(f64, f64)>,
    /// Least and greatest part of the varying loads' bending that the rib has where a deck shares it.
    pub share: Option<(f64, f64)>,
    /// Least and greatest moment at each station, kN·m: imperfection to either side.
    pub moments: Vec<[f64; 2]>,
    /// Largest `|M / N|` over all of them, m, with its sign.
    pub eccentricity: f64,
    /// Where.
    pub at: Point,
    /// Its length along the axis, m.
    pub s: f64,
    /// Largest `|M| / (N d)`, and where.
    pub ratio: (f64, Point, f64),
}

/// `(f / l, γ)` with `q_cr = γ E I / l³` [Timoshenko and Gere 1961, Table 7-5, constant cross section; from memory].
const HINGELESS: [(f64, f64); 8] = [
    (0.1, 60.7),
    (0.2, 101.0),
    (0.3, 115.0),
    (0.4, 111.0),
    (0.5, 97.4),
    (0.6, 83.8),
    (0.8, 59.1),
    (1.0, 43.7),
];
const TWO_HINGED: [(f64, f64); 8] =
    [(0.1, 28.5), (0.2, 45.4), (0.3, 46.5), (0.4, 43.9), (0.5, 38.4), (0.6, 30.5), (0.8, 20.0), (1.0, 14.1)];
const THREE_HINGED: [(f64, f64); 8] =
    [(0.1, 22.5), (0.2, 39.6), (0.3, 46.5), (0.4, 43.9), (0.5, 38.4), (0.6, 30.5), (0.8, 20.0), (1.0, 14.1)];

/// `H_cr l² / EI` of a parabolic rib of uniform stiffness under a load uniform in plan. Between the rises of the table `c`
/// is linear in the rise; flatter than a tenth the value there counts, which is below that of a flatter rib of two or no
/// hinges. `None` above the table, and for a ring on rigid abutments.
pub fn coefficient(support: Support, rise_to_span: f64) -> Option<f64> {
    let table = match support {
        Support::Hingeless => HINGELESS,
        Support::TwoHinged => TWO_HINGED,
        Support::ThreeHinged => THREE_HINGED,
        Support::None => return None,
    };
    let c = |(rise, gamma): (f64, f64)| gamma / (8.0 * rise);
    if rise_to_span <= table[0].0 {
        return Some(c(table[0]));
    }
    table.windows(2).find(|w| rise_to_span <= w[1].0 * (1.0 + tolerance::SAME_JOINT)).map(|w| {
        let part = (rise_to_span - w[0].0) / (w[1].0 - w[0].0);
        c(w[0]) + part * (c(w[1]) - c(w[0]))
    })
}

/// `(f / 2 i)²` below which a flat rib may snap through before it buckles sideways.
fn snap(support: Support) -> f64 {
    if support == Support::Hingeless { 10.3 } else { 5.5 }
}

/// `k l / 2` of the first antisymmetric shape of a bar with built-in ends: the first root of `tan u = u`.
const CLAMPED: f64 = 4.493_409_457_909_064;

/// The first antisymmetric shape, largest value 1 on the left half: of a straight bar, at the part `u` of the span.
fn shape(support: Support, u: f64) -> f64 {
    if support != Support::Hingeless {
        return (TAU * u).sin();
    }
    // `2 ξ − sin(k ξ) / sin(k l / 2)`, ξ from the middle in parts of half the span. Its slope is zero where
    // `cos(k ξ) = sin(u) / u = cos(u)`, which for this root is `ξ = 2 π / u − 1`.
    let bar = |xi: f64| xi - (CLAMPED * xi).sin() / CLAMPED.sin();
    let top = TAU / CLAMPED - 1.0;
    bar(1.0 - 2.0 * u) / bar(top)
}

/// The two parts of an elastic line that a deck divides: of the loads that stay, carried by the rib alone, and of the
/// varying ones, carried together.
pub(super) struct Parts {
    /// The reaction to all loads.
    pub all: Unknowns,
    /// The reaction to the loads that stay, with the factor 0 on the others.
    fixed: Unknowns,
}

/// The elastic line with a deck that shares the bending of the varying loads. `None` where nothing varies, or the stiffness
/// is no number.
pub(super) fn with_deck(
    span: &Span,
    whole: &Sampling,
    choice: &Choice,
    flexibility: &dyn Fn(&Place) -> Flexibility,
    effects: &Effects,
    deck: f64,
) -> Option<Parts> {
    let together = |p: &Place| {
        let rib = flexibility(p);
        let stiff = 1.0 / rib.bending + deck / p.tangent.x.abs().max(tolerance::VERTICAL_THRUST);
        Flexibility { bending: 1.0 / stiff, ..rib }
    };
    let part = |varying: bool| {
        let mut part = span.clone();
        for piece in &mut part.pieces {
            let (sets, weights) = (piece.before, piece.weight);
            let none = Weight::default();
            (piece.before, piece.weight) = if varying {
                (LoadSets { varying: sets.varying, ..LoadSets::default() }, [none, weights[1]])
            } else {
                (LoadSets { fixed: sets.fixed, ..LoadSets::default() }, [weights[0], none])
            };
        }
        part
    };
    let solve = |part: &Span, soft: &dyn Fn(&Place) -> Flexibility, effects: &Effects| {
        let rows: Vec<_> = choice.hinges.iter().map(|&p| part.hinge_row(p)).collect();
        least_energy(part, whole, &Subspace::lines(part, &rows)?, soft, effects)
    };
    let loads = span.last().loads.varying;
    let varies = span.entered.iter().any(|e| e.varies && e.force.hypot() > 0.0)
        || loads.fx.abs() + loads.fy.abs() + loads.moment.abs() > 0.0;
    if !varies {
        return None;
    }
    let fixed = solve(&part(false), flexibility, effects)?;
    let live = solve(&part(true), &together, &Effects::default())?;
    let all = [fixed[0] + live[0], fixed[1] + live[1], fixed[2] + live[2], 1.0];
    Some(Parts { all, fixed: [fixed[0], fixed[1], fixed[2], 0.0] })
}

/// One line of thrust of a slender rib.
pub(super) struct Rib<'a> {
    pub span: &'a Span,
    pub whole: &'a Sampling<'a>,
    pub space: &'a Subspace,
    pub support: Support,
    pub slender: Slender,
    pub flexibility: &'a dyn Fn(&Place) -> Flexibility,
    /// Its reaction, and what a deck makes of it.
    pub r: Unknowns,
    pub parts: Option<&'a Parts>,
}

impl Rib<'_> {
    /// The bending at the stations of the line.
    ///
    /// # Errors
    /// Why the rib has no such bending: its push reaches the buckling push, or no coefficient is known for it.
    pub fn bending(&self, stations: &[Station]) -> Result<Bending, String> {
        let span = self.span;
        let (rise, wide) = (span.crown.1 * span.length, span.path.end().x * span.length);
        let push = self.r[0].max(span.last().resultant(&self.r).x) * span.load;
        let joints: Vec<Joint> =
            self.whole.joints().iter().map(|j| span.pieces[j.piece].joint(j.s, j.piece)).collect();
        let least = joints
            .iter()
            .map(|j| 1.0 / (self.flexibility)(&place(span, j)).bending)
            .fold(f64::INFINITY, f64::min);
        let coefficient = coefficient(self.support, rise / wide);
        let critical = coefficient.map(|c| c * (least + self.slender.deck) / (wide * wide));
        let amplification = match critical {
            Some(critical) if push >= critical => {
                return Err(format!(
                    "the push of {push:.1} kN reaches the push of {critical:.1} kN at which the rib buckles in its plane"
                ));
            }
            Some(critical) => 1.0 / (1.0 - push.max(0.0) / critical),
            None if self.slender.imperfection.abs() > 0.0 => {
                return Err(format!(
                    "no coefficient of buckling is published for a rise of {:.2} times the span, so the imperfection \
                     cannot be amplified",
                    rise / wide
                ));
            }
            None => 1.0,
        };
        let crown = (self.flexibility)(&place(span, &span.joint_at(span.crown.0, true)));
        let slim = rise * (crown.bending / crown.axial).sqrt();
        let limit = 2.0 * snap(self.support).sqrt();
        let shallow = (crown.axial > 0.0 && slim < limit).then_some((slim, limit));
        let redundant = self.redundant(&joints);
        let (mut low, mut high) = (f64::INFINITY, 0.0_f64);
        let mut share = |joint: &Joint| {
            let part = self.share(joint);
            (low, high) = (low.min(part), high.max(part));
        };
        let unit = span.load * span.length;
        let mut worst = (0.0_f64, joints[0]);
        let mut used = (0.0_f64, joints[0]);
        // Between two samples the bending is followed at three places more.
        for pair in self.whole.joints().windows(2).filter(|p| p[0].piece == p[1].piece) {
            for k in 0..=4 {
                let s = pair[0].s + (pair[1].s - pair[0].s) * f64::from(k) / 4.0;
                let joint = span.pieces[pair[0].piece].joint(s, pair[0].piece);
                share(&joint);
                let thrust = joint.thrust(&self.r);
                if thrust <= tolerance::NO_THRUST {
                    continue;
                }
                for m in self.extremes(&joint, amplification, &redundant) {
                    let e = m / thrust;
                    if e.abs() > worst.0.abs() {
                        worst = (e, joint);
                    }
                    if e.abs() / joint.depth > used.0 {
                        used = (e.abs() / joint.depth, joint);
                    }
                }
            }
        }
        let moments = stations
            .iter()
            .map(|station| {
                let joint = span.joint_at(station.s / span.length, true);
                self.extremes(&joint, amplification, &redundant).map(|m| m * unit)
            })
            .collect();
        Ok(Bending {
            push,
            critical,
            coefficient,
            amplification,
            shallow,
            share: self.parts.map(|_| (low, high)),
            moments,
            eccentricity: worst.0 * span.length,
            at: span.drawn(worst.1.at),
            s: worst.1.s * span.length,
            ratio: (used.0, span.drawn(used.1.at), used.1.s * span.length),
        })
    }

    /// The part of the varying loads' bending that the rib has.
    fn share(&self, joint: &Joint) -> f64 {
        let rib = joint.tangent.x.abs() / (self.flexibility)(&place(self.span, joint)).bending;
        rib / (rib + self.slender.deck)
    }

    /// Moment in the rib before anything is amplified.
    fn moment(&self, joint: &Joint) -> f64 {
        let all = joint.moment(&self.r);
        let Some(parts) = self.parts else { return all };
        let fixed = joint.moment(&parts.fixed);
        fixed + self.share(joint) * (all - fixed)
    }

    /// Least and greatest moment with the imperfection to either side.
    fn extremes(&self, joint: &Joint, amplification: f64, redundant: &[f64; 3]) -> [f64; 2] {
        let here = self.moment(joint);
        let other = self.moment(&self.span.joint_at(1.0 - joint.s, true));
        let base = here + (amplification - 1.0) * (here - other) / 2.0;
        let shaped = amplification * self.imperfect(joint, redundant).abs();
        [base - shaped, base + shaped]
    }

    /// Bending by the imperfection, without the redundants.
    fn bare(&self, joint: &Joint) -> f64 {
        let u = joint.at.x / self.span.path.end().x;
        let off = self.slender.imperfection / self.span.length * shape(self.support, u);
        -joint.resultant(&self.r).x * off
    }

    fn imperfect(&self, joint: &Joint, redundant: &[f64; 3]) -> f64 {
        let row = self.space.row(&joint.moment_row()).0;
        self.bare(joint) + (0..self.space.free).map(|i| row[i] * redundant[i]).sum::<f64>()
    }

    /// What the redundants make of the imperfection: least energy of its bending.
    fn redundant(&self, joints: &[Joint]) -> [f64; 3] {
        let mut energy = Quadratic { n: self.space.free, matrix: [[0.0; 3]; 3], linear: [0.0; 3] };
        let (span, length) = (self.span, self.span.length);
        for pair in joints.windows(2).filter(|p| p[0].piece == p[1].piece) {
            let piece = &span.pieces[pair[0].piece];
            let (half, middle) = ((pair[1].s - pair[0].s) / 2.0, f64::midpoint(pair[0].s, pair[1].s));
            for (x, w) in super::piece::GAUSS_10 {
                for x in [-x, x] {
                    let joint = piece.joint(middle + half * x, pair[0].piece);
                    let soft = (self.flexibility)(&place(span, &joint));
                    let (mut m, mut n) =
                        (self.space.row(&joint.moment_row()), self.space.row(&joint.thrust_row()));
                    (m.1, n.1) = (self.bare(&joint), 0.0);
                    add(&mut energy, &m, w * half * soft.bending);
                    add(&mut energy, &n, w * half * soft.axial / (length * length));
                }
            }
        }
        energy.least(&[], &[]).unwrap_or([0.0; 3])
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn shapes_vanish_at_the_ends_and_reach_one() {
        for support in [Support::TwoHinged, Support::Hingeless] {
            for u in [0.0, 0.5, 1.0] {
                assert!(shape(support, u).abs() < 1e-12);
            }
            let top = (0..=1000).map(|i| shape(support, f64::from(i) / 1000.0)).fold(0.0, f64::max);
            assert!((top - 1.0).abs() < 1e-5, "{support:?} {top}");
            assert!((shape(support, 0.3) + shape(support, 0.7)).abs() < 1e-12);
        }
        // Built in: no slope at the ends.
        assert!(shape(Support::Hingeless, 1e-4).abs() < 1e-6);
        assert!((CLAMPED.tan() - CLAMPED).abs() < 1e-12);
    }
}
