//! A reference to a block: where it puts what the block holds.

use super::ocs::Frame;
use crate::geometry::Affine;
use crate::refusal::Refusal;
use crate::tags::Record;
use crate::tolerance;

/// The numbers of an INSERT record.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Insert {
    frame: Frame,
    at: [f64; 3],
    scale: [f64; 3],
    /// Radians.
    turn: f64,
    /// Columns and rows.
    count: [i64; 2],
    /// Distances of columns and of rows.
    spacing: [f64; 2],
}

impl Insert {
    /// Reads the record.
    ///
    /// # Errors
    /// When a number of it cannot be read or is out of all bounds, or its normal has no length.
    pub fn read(record: &Record) -> Result<Self, Refusal> {
        let real = |code: i32, usual: f64| -> Result<f64, Refusal> {
            let Some(tag) = record.tags.first(code) else {
                return Ok(usual);
            };
            tag.real().filter(|v| v.abs() <= tolerance::GREATEST_NUMBER).ok_or_else(|| {
                let shown: String = String::from_utf8_lossy(tag.trimmed()).chars().take(40).collect();
                let mut refusal = Refusal::new(
                    "entity-number",
                    format!(
                        "group {code} of the INSERT is \"{}\", which is no usable number",
                        shown.escape_debug()
                    ),
                    "Mend the value, or insert the block again",
                );
                refusal.line = tag.line.map(|line| line + 1);
                record.refuse(refusal)
            })
        };
        let normal = [real(210, 0.0)?, real(220, 0.0)?, real(230, 1.0)?];
        let frame = Frame::of_normal(normal).ok_or_else(|| {
            record.refuse(Refusal::new(
                "entity-number",
                "the normal of the INSERT has no length",
                "Insert the block again",
            ))
        })?;
        let count = |code: i32| record.tags.first(code).and_then(|t| t.int()).unwrap_or(1).max(1);
        Ok(Self {
            frame,
            at: [real(10, 0.0)?, real(20, 0.0)?, real(30, 0.0)?],
            scale: [real(41, 1.0)?, real(42, 1.0)?, real(43, 1.0)?],
            turn: real(50, 0.0)?.to_radians(),
            count: [count(70), count(71)],
            spacing: [real(44, 0.0)?, real(45, 0.0)?],
        })
    }

    /// From the block's coordinates, with this base point, to those around the reference: one map for each place of the
    /// array, whose distances turn with the reference and are not scaled.
    pub fn maps(self, base: [f64; 3]) -> impl Iterator<Item = Affine> {
        let [sx, sy, sz] = self.scale;
        let (sin, cos) = if self.turn == 0.0 { (0.0, 1.0) } else { self.turn.sin_cos() };
        let scaled =
            Affine::of_columns([cos * sx, sin * sx, 0.0], [-sin * sy, cos * sy, 0.0], [0.0, 0.0, sz]);
        let frame = self.frame.map();
        let from_base = Affine::moved(base.map(|b| -b));
        (0..self.count[1]).flat_map(move |row| {
            (0..self.count[0]).map(move |column| {
                let (x, y) = (column as f64 * self.spacing[0], row as f64 * self.spacing[1]);
                let [ax, ay, az] = self.at;
                let place = Affine::moved([ax + (cos * x - sin * y), ay + (sin * x + cos * y), az]);
                frame.after(&place.after(&scaled.after(&from_base)))
            })
        })
    }
}
