//! The report as a PDF: sheets of A4 with the same content as the page for browsers, drawn by `krilla`. Its text is text, in
//! the font that comes with the program, and it is tagged for screen readers.

mod emit;
mod flow;
mod lettering;
mod picture;
mod set;
mod table;

use super::Head;
use super::page::Block;
use crate::refusal::Refusal;

/// What the file says of its maker, in clear text.
pub const CREATOR: &str = env!("CARGO_PKG_NAME");

/// The sheets of a report as the bytes of a PDF file.
///
/// # Errors
/// When the font or the PDF library fails, faults of the program.
pub fn pdf(head: &Head, blocks: &[Block]) -> Result<Vec<u8>, Refusal> {
    let lettering = lettering::Lettering::new()?;
    let mut flow = flow::Flow::new(&lettering);
    set::set(head, blocks, &mut flow);
    emit::emit(head, &lettering, flow)
}

/// A number of the PDF library's width; places on a sheet need no more digits.
#[allow(clippy::cast_possible_truncation)]
fn narrow(value: f64) -> f32 {
    value as f32
}

#[cfg(test)]
mod tests;
