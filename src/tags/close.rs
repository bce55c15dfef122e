//! The end of each record: it is counted, kept, or noted for what it says about the drawing.

use crate::refusal::Refusal;
use crate::tags::machine::{Collect, Machine, Part, Word};
use crate::tags::outline::Block;
use crate::tags::record::Record;

impl Machine<'_> {
    /// The current record ends where the next group 0 begins.
    pub(super) fn close_record(&mut self, end: u64) -> Result<(), Refusal> {
        if !std::mem::take(&mut self.current.open) {
            return Ok(());
        }
        let word = self.current.word;
        match self.part {
            Part::Tables if word == Word::Table => self.close_table_head(),
            Part::Tables => self.close_table_record(end),
            Part::Blocks if word == Word::Block => self.close_block_head(),
            Part::Blocks if word == Word::EndBlock => {
                self.block = None;
                self.count(false);
            }
            Part::Blocks | Part::Entities => self.close_entity(end),
            _ => self.count(false),
        }
        self.all = false;
        Ok(())
    }

    fn count(&mut self, ours: bool) {
        if let Some(section) = self.sections.last_mut() {
            section.records += 1;
            section.ours += u64::from(ours);
        }
    }

    fn close_table_head(&mut self) {
        let name = self.tags.word(2).unwrap_or_default().to_ascii_uppercase();
        let handle = self.tags.word(5).map(str::to_owned);
        if let Some(table) = self.tables.last_mut() {
            table.name = name;
            table.handle = handle;
        }
    }

    fn close_table_record(&mut self, end: u64) {
        self.count(self.current.ours);
        if self.current.ours {
            self.note_our_handle();
        }
        if !self.table_open {
            return;
        }
        let record = (self.current.collect == Collect::Yes).then(|| {
            let name = self.tags.first(2).map(|tag| tag.trimmed().to_vec());
            let name = self.name(&name.unwrap_or_default(), self.current.line);
            self.record(name, end)
        });
        if let Some(table) = self.tables.last_mut() {
            table.count += 1;
            table.records.extend(record);
        }
    }

    fn close_block_head(&mut self) {
        self.count(false);
        let value = |code: i32| self.tags.first(code).map(|tag| tag.trimmed().to_vec());
        let real = |code: i32| self.tags.first(code).and_then(|tag| tag.real()).unwrap_or(0.0);
        let base = [real(10), real(20), real(30)];
        let flags = self.tags.first(70).and_then(|tag| tag.int()).unwrap_or(0);
        let (name, layer, path) = (value(2), value(8), value(1));
        let handle = self.tags.word(5).map(str::to_owned);
        let owner = self.tags.word(330).map(str::to_owned);
        let line = self.current.line;
        let block = Block {
            name: self.name(&name.unwrap_or_default(), line),
            handle,
            owner,
            flags,
            base,
            path: path.filter(|path| !path.is_empty()).map(|path| self.name(&path, line)),
            layer: self.name(&layer.unwrap_or_else(|| b"0".to_vec()), line),
            line,
        };
        self.block = Some(self.blocks.len());
        self.blocks.push(block);
    }

    fn close_entity(&mut self, end: u64) {
        if self.current.entry.is_none() {
            self.layer(b"0", self.current.line);
        }
        self.count(self.current.ours);
        if self.current.ours {
            self.our_entities += u64::from(!self.current.child);
            self.note_our_handle();
            match self.our_ranges.last_mut() {
                Some(last) if last.1 == self.current.start => last.1 = end,
                _ => self.our_ranges.push((self.current.start, end)),
            }
        }
        if std::mem::take(&mut self.current.owner) && self.current.paper {
            self.model_owner = None;
        }
        let kept = self.current.collect == Collect::Yes;
        if self.current.child {
            if kept {
                let record = self.entity(end);
                if let Some(parent) = self.records.last_mut() {
                    parent.children.push(record);
                }
            }
            if self.current.word == Word::EndRun {
                self.parent_kept = false;
                self.parent_ours = false;
            }
            return;
        }
        let in_block = self.part == Part::Blocks;
        if let Some(index) = self.current.entry {
            self.census.count(index, in_block, self.current.paper);
        }
        let parent = self.current.word == Word::Parent;
        self.parent_ours = parent && self.current.ours;
        self.parent_kept = parent && kept;
        if kept {
            let record = self.entity(end);
            self.records.push(record);
        }
    }

    fn note_our_handle(&mut self) {
        self.our_highest = self.our_highest.max(self.current.handle.unwrap_or(0));
    }

    fn entity(&mut self, end: u64) -> Record {
        let layer =
            self.current.entry.map_or_else(String::new, |index| self.census.entry(index).layer.clone());
        self.record(layer, end)
    }

    fn record(&self, layer: String, end: u64) -> Record {
        let own = if self.current.dimstyle { 105 } else { 5 };
        Record {
            kind: String::from_utf8_lossy(&self.current.kind).to_ascii_uppercase(),
            layer,
            handle: self.tags.word(own).map(str::to_owned),
            line: self.current.line,
            start: self.current.start,
            end,
            block: self.block,
            ours: self.current.ours,
            tags: self.tags.clone(),
            children: Vec::new(),
            placement: None,
        }
    }
}
