//! Reads an arch from a DXF drawing, computes the line of thrust of the drawn loads, and writes an annotated copy in
//! which every other byte is as it was.
//!
//! The modules, in the order in which data flows through them: [`tags`] (lossless bytes), [`drawing`] (entities),
//! [`model`] (spans and loads), [`statics`] (lines of thrust), [`verdict`] (findings), [`write`](mod@write) (marks and other outputs),
//! with [`job`] (settings), [`outcome`] (the results as one tree), and [`geometry`], [`units`], [`tolerance`] and
//! [`refusal`] beneath; [`flow`] goes from a file to results, [`office`] does sets of drawings.
//!
//! Checking a drawing from another program:
//!
//! ```
//! use std::path::Path;
//! use thrustmark::flow::{self, Environment};
//! use thrustmark::outcome::Verdict;
//!
//! let run = flow::check(Path::new("fixtures/good/masonry-ring.dxf"), None, Environment::of_process()?);
//! if let Some(refusal) = &run.error {
//!     return Err(refusal.clone());
//! }
//! for finding in run.findings.iter().filter(|finding| finding.limit.is_some()) {
//!     println!("{:?} {:?}: {}", finding.check, finding.verdict, finding.message);
//! }
//! assert_eq!(run.verdict, Some(Verdict::Within));
//! # Ok::<(), thrustmark::refusal::Refusal>(())
//! ```

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
