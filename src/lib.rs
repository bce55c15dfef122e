//! Reads an arch from a DXF drawing, computes the line of thrust of the drawn loads, and writes an annotated copy in
//! which every other byte is as it was.

pub mod cli;
pub mod drawing;
pub mod geometry;
pub mod job;
pub mod model;
pub mod outcome;
pub mod refusal;
pub mod statics;
pub mod tags;
pub mod tolerance;
pub mod units;
