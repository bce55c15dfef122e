//! Which blocks a drawing inserts, and from where.

use std::collections::{BTreeMap, BTreeSet};

use crate::refusal::Refusal;
use crate::tags::outline::{Outline, fold};
use crate::tags::source::Source;
use crate::tags::tokens::{Form, Place, Sink, tokenize};

/// Names, folded, of all blocks that are inserted in model space, directly or by way of others. Goes through the whole
/// drawing and keeps each name once, however often it is inserted. The outline must be that of the source.
///
/// # Errors
/// As [`crate::tags::scan()`].
pub fn inserted(source: &Source, outline: &Outline) -> Result<BTreeSet<String>, Refusal> {
    let mut gather = Gather::default();
    tokenize(source, &mut gather)?;
    gather.close();
    let name = |bytes: &[u8]| fold(outline.decoder.text(bytes).trim());
    let mut inside: BTreeMap<String, BTreeSet<String>> = BTreeMap::new();
    let mut open = Vec::new();
    for (block, inserted) in &gather.pairs {
        match block {
            Some(block) => {
                inside.entry(name(block)).or_default().insert(name(inserted));
            }
            None => open.push(name(inserted)),
        }
    }
    let mut seen = BTreeSet::new();
    while let Some(name) = open.pop() {
        if seen.insert(name.clone())
            && let Some(inner) = inside.get(&name)
        {
            open.extend(inner.iter().cloned());
        }
    }
    Ok(seen)
}

#[derive(Default, PartialEq, Eq)]
enum Part {
    #[default]
    Other,
    Unnamed,
    Blocks,
    Entities,
}

#[derive(Default, PartialEq, Eq)]
enum What {
    #[default]
    Other,
    Block,
    Insert,
}

#[derive(Default)]
struct Gather {
    part: Part,
    what: What,
    /// Group 2 of the record at hand.
    name: Option<Vec<u8>>,
    paper: bool,
    depth: u32,
    /// The block that is being read.
    block: Option<Vec<u8>>,
    /// Each block, or model space, with each name inserted in it.
    pairs: BTreeSet<(Option<Vec<u8>>, Vec<u8>)>,
    /// The pair found last: neighbours are often alike.
    last: Option<Vec<u8>>,
}

impl Gather {
    fn close(&mut self) {
        let Some(name) = self.name.take() else {
            return;
        };
        match self.what {
            What::Block => {
                self.last = None;
                self.block = Some(name);
            }
            What::Insert
                if (self.part == Part::Blocks || !self.paper) && self.last.as_ref() != Some(&name) =>
            {
                self.last = Some(name.clone());
                self.pairs.insert((self.block.clone(), name));
            }
            _ => {}
        }
    }
}

impl Sink for Gather {
    fn begin(&mut self, _: Form, _: bool) {}

    fn wants(&self, code: i32) -> bool {
        matches!(code, 0 | 2 | 67 | 102 | 1001)
    }

    fn skims(&self) -> bool {
        true
    }

    fn tag(&mut self, code: i32, value: &[u8], _: &Place) -> Result<(), Refusal> {
        let value = value.trim_ascii();
        match code {
            0 => {
                self.close();
                self.paper = false;
                self.depth = 0;
                let is = |word: &[u8]| value.eq_ignore_ascii_case(word);
                self.what = What::Other;
                if is(b"SECTION") {
                    self.part = Part::Unnamed;
                } else if is(b"ENDSEC") {
                    (self.part, self.block, self.last) = (Part::Other, None, None);
                } else if is(b"ENDBLK") {
                    (self.block, self.last) = (None, None);
                } else if is(b"BLOCK") && self.part == Part::Blocks {
                    self.what = What::Block;
                } else if is(b"INSERT") && matches!(self.part, Part::Blocks | Part::Entities) {
                    self.what = What::Insert;
                }
            }
            2 if self.part == Part::Unnamed => {
                self.part = if value.eq_ignore_ascii_case(b"BLOCKS") {
                    Part::Blocks
                } else if value.eq_ignore_ascii_case(b"ENTITIES") {
                    Part::Entities
                } else {
                    Part::Other
                };
            }
            102 if value.starts_with(b"{") => self.depth += 1,
            102 => self.depth = self.depth.saturating_sub(1),
            2 if self.what != What::Other && self.depth == 0 && self.name.is_none() => {
                self.name = Some(value.to_vec());
            }
            67 => self.paper |= value == b"1",
            _ => {}
        }
        Ok(())
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::tags::{Options, scan};

    #[test]
    fn blocks_are_found_through_others() {
        let text = "0 SECTION 2 BLOCKS \
            0 BLOCK 8 0 2 A 0 INSERT 8 0 2 b 0 INSERT 8 0 2 b 0 ENDBLK \
            0 BLOCK 8 0 2 B 0 LINE 8 0 0 ENDBLK 0 BLOCK 8 0 2 C 0 INSERT 8 0 2 D 0 ENDBLK 0 ENDSEC \
            0 SECTION 2 ENTITIES 0 INSERT 8 0 102 {X 2 nothing 102 } 2 a 10 1 \
            0 INSERT 8 0 67 1 2 E 0 LINE 8 0 2 F 0 ENDSEC 0 EOF ";
        let source =
            Source::from_bytes(text.split_whitespace().map(|w| format!("{w}\n")).collect::<String>());
        let outline = scan(&source, &Options::default()).unwrap();
        let found: Vec<String> = inserted(&source, &outline).unwrap().into_iter().collect();
        assert_eq!(found, ["a", "b"]);
    }
}
