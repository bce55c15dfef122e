//! Results turned into what people and other programs read: marks for the drawing, JSON, a summary for the terminal,
//! and files that are written whole or not at all.
//!
//! Knows results and neutral marks only: no bytes of a drawing, no mechanics.

pub mod annotate;
pub mod csv;
pub mod file;
pub mod json;
pub mod junit;
pub mod picture;
pub mod report;
#[cfg(test)]
#[allow(clippy::unwrap_used, missing_docs)]
pub(crate) mod sample;
pub mod terminal;
pub mod text;
pub mod us;
