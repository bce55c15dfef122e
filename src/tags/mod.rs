//! The lossless tag layer: a drawing's bytes, what stands where in them, and what may be added without touching the rest.
//!
//! Imports nothing else of ours but geometry and refusals; knows no arch.
//!
//! A [`Source`] is scanned into an [`Outline`]; [`mark()`] gives the edits that put [`marks::Marks`] in, [`unmark()`] those
//! that take them out; [`Source::spliced`] is the drawing with the edits made.

mod binary;
mod census;
mod close;
mod codes;
mod emit;
mod extents;
mod facts;
mod finish;
mod handles;
mod hashing;
mod inserts;
mod items;
mod lines;
mod machine;
mod mark;
pub mod marks;
mod outline;
mod place;
mod placement;
mod plane;
mod record;
mod scan;
mod shapes;
mod skim;
mod sound;
mod source;
mod text;
mod tokens;
mod unmark;
pub mod validate;

pub use extents::extents;
pub use facts::FoundMarks;
pub use hashing::Hashing;
pub use inserts::inserted;
pub use machine::{Candidate, Keep, Options};
pub use mark::mark;
pub use outline::{
    Anchor, Block, HandleState, HeaderValue, HeaderVariable, Layer, LayerCensus, Newline, Note, Outline,
    Section, Table, fold,
};
pub use placement::Placement;
pub use record::{Record, Tag, Tags};
pub use scan::scan;
pub use source::{Edit, Reader, Source};
pub use text::{Decoder, Doubt, carets, unescape};
pub use tokens::Form;
pub use unmark::unmark;

/// Name of the registered application under which everything that is added is known as ours.
pub const APPLICATION: &str = "THRUSTMARK";
