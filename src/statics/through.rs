//! The one line of thrust through three points.

use super::joint::{Joint, Unknowns};
use super::span::Span;
use super::subspace::Subspace;
use crate::geometry::Point;

/// The line with no moment about three points (local units); `None` when they lie on one straight line.
pub(super) fn through(span: &Span, points: &[Point; 3]) -> Option<Unknowns> {
    let rows = points.map(|p| span.hinge_row(p));
    let space = Subspace::lines(span, &rows)?;
    Some(space.unknowns(&[]))
}

/// Springings and crown of the axis, in local units.
pub(super) fn ends_and_crown(span: &Span) -> [Point; 3] {
    [span.first().at, span.joint_at(span.crown.0, true).at, span.last().at]
}

/// The joint at which a line pushes least in its own sense, when it does not push everywhere.
pub(super) fn slack(least: (f64, Joint)) -> Option<Joint> {
    (least.0 <= crate::tolerance::NO_THRUST).then_some(least.1)
}
