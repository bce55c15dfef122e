//! Where a record of a block lies in the drawing.

use crate::geometry::Affine;

/// The place of an entity that stands in an inserted block, or is looked at in another plane.
#[derive(Debug, Clone, PartialEq)]
pub struct Placement {
    /// From the coordinates of its block to those that it is read in.
    pub map: Affine,
    /// Names of the blocks it stands in, outermost first.
    pub path: Vec<String>,
}
