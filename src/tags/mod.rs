//! The lossless tag layer: a drawing's bytes, what stands where in them, and what may be added without touching the rest.
//!
//! Imports nothing else of ours but geometry and refusals; knows no arch.

pub mod marks;
