//! New handles: higher than all that a drawing uses, refers to, or has promised in its seed.

use crate::refusal::Refusal;
use crate::tags::codes::{is_reference, parse_handle};
use crate::tags::outline::Outline;
use crate::tags::source::Source;
use crate::tags::tokens::{Form, Place, Sink, tokenize};

/// Hands out handles, if the drawing at hand has any.
pub(super) struct Handles {
    /// The next one; none when the drawing has no handles.
    next: Option<u64>,
    /// Handles that are not free, in order; only when numbering had to begin below them.
    taken: Vec<u64>,
}

impl Handles {
    /// Prepares to hand out at most `need` handles.
    pub fn new(source: &Source, outline: &Outline, need: u64) -> Result<Self, Refusal> {
        let state = &outline.handles;
        let mut handles = Self { next: None, taken: Vec::new() };
        if !outline.numbered() {
            return Ok(handles);
        }
        let above = |highest: u64| highest.checked_add(1);
        let first = above(state.highest)
            .zip(above(state.highest_reference))
            .map(|(a, b)| a.max(b).max(state.seed.unwrap_or(0)).max(1))
            .filter(|first| first.checked_add(need).is_some());
        handles.next = Some(match first {
            Some(first) => first,
            None => {
                handles.taken = all_handles(source)?;
                1
            }
        });
        Ok(handles)
    }

    /// Whether the drawing has handles.
    pub fn any(&self) -> bool {
        self.next.is_some()
    }

    /// A new handle; none when the drawing has no handles.
    pub fn take(&mut self) -> Option<String> {
        let free = self.free()?;
        self.next = free.checked_add(1);
        Some(format!("{free:X}"))
    }

    /// The handle that would be given out next.
    pub fn free(&mut self) -> Option<u64> {
        let mut next = self.next?;
        while self.taken.binary_search(&next).is_ok() {
            next = next.checked_add(1)?;
        }
        Some(next)
    }
}

/// Every handle that a drawing uses or refers to, in order. For the rare drawing whose highest leaves no room above it.
fn all_handles(source: &Source) -> Result<Vec<u64>, Refusal> {
    struct Collect(Vec<u64>);
    impl Sink for Collect {
        fn begin(&mut self, _: Form, _: bool) {}
        fn wants(&self, code: i32) -> bool {
            matches!(code, 0 | 5 | 105) || is_reference(code)
        }
        fn tag(&mut self, code: i32, value: &[u8], _: &Place) -> Result<(), Refusal> {
            if code != 0 {
                self.0.extend(parse_handle(value));
            }
            Ok(())
        }
    }
    let mut collect = Collect(Vec::new());
    tokenize(source, &mut collect)?;
    collect.0.sort_unstable();
    collect.0.dedup();
    Ok(collect.0)
}
