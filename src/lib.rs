//! Reads an arch from a DXF drawing, computes the line of thrust of the drawn loads, and writes an annotated copy in
//! which every other byte is as it was.
//!
//! The modules, in the order in which data flows through them: [`tags`] (lossless bytes), [`drawing`] (entities),
//! [`model`] (spans and loads), [`statics`] (lines of thrust), [`verdict`] (findings), [`write`](mod@write) (marks and other outputs),
//! with [`job`] (settings), [`outcome`] (the results as one tree), and [`geometry`], [`units`], [`tolerance`] and
//! [`refusal`] beneath.

pub mod cli;
pub mod drawing;
pub mod flow;
pub mod geometry;
pub mod job;
pub mod model;
pub mod office;
pub mod outcome;
pub mod refusal;
pub mod statics;
pub mod tags;
pub mod tolerance;
pub mod units;
pub mod verdict;
pub mod write;
