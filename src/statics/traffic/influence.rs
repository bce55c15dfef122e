//! Influence lines: what one load that walks along the road does to the push, and to moment and eccentricity in a joint.

use super::super::joint::Loads;
use super::super::{LineKind, Unsolved};
use super::prepared::Prepared;
use super::{Moving, Push};
use crate::geometry::Point;

/// The influence of a load of one kN on one joint.
#[derive(Debug, Clone, PartialEq)]
pub struct Influence {
    /// Fraction of the span at which the joint stands.
    pub fraction: f64,
    /// Its point of the axis, m.
    pub at: Point,
    /// Its length along the axis, m.
    pub s: f64,
    /// One ordinate for each place of the load.
    pub ordinates: Vec<Ordinate>,
}

/// The influence of a load at one place.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Ordinate {
    /// Abscissa of the load, m.
    pub x: f64,
    /// Push at the left springing, kN per kN.
    pub push: f64,
    /// Moment in the joint, kN·m per kN.
    pub moment: f64,
    /// Eccentricity in the joint, m per kN: its rate of change from where the dead loads have it; `None` where they leave no
    /// thrust there.
    pub eccentricity: Option<f64>,
}

/// Influence lines of the governing line at fractions of the span, for one kN at the places `units`. `None` when the
/// governing line is an optimum: it has no influence line, since it does not answer in proportion.
///
/// # Errors
/// As [`super::traverse`].
pub fn influence(
    moving: &Moving,
    fractions: &[f64],
    units: &[(f64, Vec<Push>)],
) -> Result<Option<Vec<Influence>>, Unsolved> {
    let prepared = Prepared::new(moving, units.len().max(1) as f64)?;
    let Some(response) = &prepared.response else { return Ok(None) };
    debug_assert!(matches!(prepared.choice.governs, LineKind::Elastic | LineKind::Through));
    let span = &prepared.span;
    let dead = response.dead();
    let answers: Vec<(f64, [f64; 3], Vec<Loads>)> = units
        .iter()
        .map(|(x, pushes)| {
            let mut change = [0.0; 3];
            for push in pushes {
                let by = response.change(push.slot, &prepared.local(push));
                for (v, c) in change.iter_mut().zip(by) {
                    *v += c;
                }
            }
            (*x, change, prepared.prefix(pushes, |_| true))
        })
        .collect();
    let lines = fractions
        .iter()
        .map(|&fraction| {
            let x = span.path.end().x * fraction;
            let s = span.path.crossings_of_vertical(x).first().copied().unwrap_or(fraction);
            let joint = span.joint_at(s, true);
            let (m, n) = (joint.moment(&dead), joint.thrust(&dead));
            let ordinates = answers
                .iter()
                .map(|(x, change, before)| {
                    let l = before.get(joint.piece).copied().unwrap_or_default();
                    let (h, v) = (change[0] + l.fx, change[1] + l.fy);
                    let dm = change[2] + v * joint.at.x - h * joint.at.y - l.moment;
                    let dn = h * joint.tangent.x + v * joint.tangent.y;
                    let e = (dm - m / n * dn) / n * span.length;
                    Ordinate {
                        x: *x,
                        push: change[0] * span.load,
                        moment: dm * span.load * span.length,
                        eccentricity: (n.abs() > crate::tolerance::NO_THRUST).then_some(e),
                    }
                })
                .collect();
            Influence { fraction, at: span.drawn(joint.at), s: joint.s * span.length, ordinates }
        })
        .collect();
    Ok(Some(lines))
}
