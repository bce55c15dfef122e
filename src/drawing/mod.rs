//! What a drawing shows: curves of the axis, points of the loads, texts, each with its source.
//!
//! Knows layers and entities, and no mechanics.

mod blocks;
pub mod convert;
mod dimension;
mod ends;
mod entity;
mod gather;
mod hatch;
mod insert;
mod lay;
pub mod names;
mod note;
mod nurbs;
pub mod ocs;
pub mod outlines;
mod outlook;
pub mod read;
mod reference;
mod roles;
mod space;
mod stroke;
mod suggest;
mod surroundings;
pub mod text;
mod title;
pub mod unit;
pub mod viewport;

use crate::tags;
pub use crate::tags::{Doubt, Note as FileNote};
pub use dimension::Dimension;
pub use ends::{clusters, near_pairs};
pub use entity::{Attribute, Curve, Extended, PointLike, Source, Text};
pub use gather::{keeps, read_outlined, scan};
pub use note::{Note, Reason, Role};
pub use stroke::{End, Stroke};
pub use suggest::{Suggestion, suggest};
pub use title::Title;
pub use unit::{NoUnit, Unit, UnitSource};

/// What was read from a drawing. Coordinates are drawing units.
#[derive(Debug, Clone, PartialEq)]
pub struct Drawing {
    /// Its unit.
    pub unit: Unit,
    /// The plane in which the elevation lies; all coordinates below are in it.
    pub plane: tags::marks::Plane,
    /// Layers that serve as the axis.
    pub axis_layers: Vec<String>,
    /// Layers that hold loads.
    pub load_layers: Vec<String>,
    /// Curves on the axis layers, in the order of the file; empty where ring lines stand for it.
    pub axis: Vec<Curve>,
    /// Curves of the inner line of the ring, in the order of the file.
    pub intrados: Vec<Curve>,
    /// Curves of its outer line, in the order of the file.
    pub extrados: Vec<Curve>,
    /// Points on the load layers, in the order of the file.
    pub points: Vec<PointLike>,
    /// Lines on the load layers, in the order of the file.
    pub strokes: Vec<Stroke>,
    /// Lines on the post layers, in the order of the file.
    pub posts: Vec<Stroke>,
    /// Lines of the roadway and the rib in plan: x as in the elevation, y across the bridge.
    pub plan: Vec<PlanLine>,
    /// In an upright elevation the ordinate of its plane in the coordinates of `plan`.
    pub plan_of_rib: Option<f64>,
    /// Dimensions of lengths in model space.
    pub dimensions: Vec<Dimension>,
    /// What the title block says.
    pub title: Title,
    /// Points on the hinge layers, in the order of the file.
    pub hinges: Vec<PointLike>,
    /// Curves of the road line, in the order of the file; read only where the job has traffic.
    pub road: Vec<Curve>,
    /// Outlines of the areas of the job, in its order.
    pub areas: Vec<outlines::Outlines>,
    /// Texts on the load layers, in the order of the file.
    pub texts: Vec<Text>,
    /// Viewports of the layouts.
    pub viewports: Vec<viewport::Viewport>,
    /// What was noticed.
    pub notes: Vec<Note>,
}

/// A line of the roadway or the rib in plan.
#[derive(Debug, Clone, PartialEq)]
pub struct PlanLine {
    /// The entity.
    pub source: Source,
    /// Its pieces.
    pub pieces: Vec<crate::geometry::Segment>,
}

impl Drawing {
    /// Corners of the box about the axis, or the ring lines that stand for it: least and greatest coordinates of the ends
    /// and middles of their pieces.
    pub fn axis_box(&self) -> (crate::geometry::Point, crate::geometry::Point) {
        if self.axis.is_empty() {
            return gather::corners(&[&self.intrados[..], &self.extrados].concat());
        }
        gather::corners(&self.axis)
    }
}

#[cfg(test)]
mod tests;
#[cfg(test)]
mod tests_space;
