//! Entities counted by layer and type while they pass by.

use std::collections::HashMap;

use crate::tags::outline::{LayerCensus, fold};

/// One pair of type and layer, as they are spelled.
pub(super) struct Entry {
    pub kind: String,
    pub layer: String,
    /// The block (or none) for which it was last asked whether such records are kept, and the answer.
    pub decision: Option<(Option<usize>, bool)>,
    /// In model space, in paper space, in blocks.
    counts: [u64; 3],
}

#[derive(Default)]
pub(super) struct Census {
    entries: Vec<Entry>,
    index: HashMap<Vec<u8>, usize>,
    key: Vec<u8>,
    /// The entry found last: neighbours are often alike.
    last: Option<(Vec<u8>, usize)>,
}

impl Census {
    fn set_key(&mut self, kind: &[u8], layer: &[u8]) {
        self.key.clear();
        self.key.extend_from_slice(kind);
        self.key.push(b'\n');
        self.key.extend_from_slice(layer);
    }

    pub fn find(&mut self, kind: &[u8], layer: &[u8]) -> Option<usize> {
        self.set_key(kind, layer);
        match &mut self.last {
            Some((key, index)) if *key == self.key => Some(*index),
            last => {
                let index = *self.index.get(&self.key)?;
                let (key, _) = last.get_or_insert_with(Default::default);
                key.clone_from(&self.key);
                *last = last.take().map(|(key, _)| (key, index));
                Some(index)
            }
        }
    }

    /// Adds a pair that [`Census::find`] does not know; the name is the layer decoded.
    pub fn add(&mut self, kind: &[u8], layer: &[u8], name: String) -> usize {
        self.set_key(kind, layer);
        let index = self.entries.len();
        self.entries.push(Entry {
            kind: String::from_utf8_lossy(kind).to_ascii_uppercase(),
            layer: name,
            decision: None,
            counts: [0; 3],
        });
        self.index.insert(self.key.clone(), index);
        index
    }

    pub fn entry(&mut self, index: usize) -> &mut Entry {
        &mut self.entries[index]
    }

    pub fn count(&mut self, index: usize, in_block: bool, paper: bool) {
        let place = if in_block { 2 } else { usize::from(paper) };
        self.entries[index].counts[place] += 1;
    }

    /// The counts by layer, in the order in which the layers first occurred.
    pub fn by_layer(self) -> Vec<LayerCensus> {
        let mut layers: Vec<LayerCensus> = Vec::new();
        let mut at: HashMap<String, usize> = HashMap::new();
        for entry in self.entries {
            if entry.counts == [0; 3] {
                continue;
            }
            let index = *at.entry(fold(&entry.layer)).or_insert_with(|| {
                layers.push(LayerCensus { name: entry.layer.clone(), ..LayerCensus::default() });
                layers.len() - 1
            });
            let layer = &mut layers[index];
            let places = [&mut layer.model, &mut layer.paper, &mut layer.blocks];
            for (place, count) in places.into_iter().zip(entry.counts) {
                if count > 0 {
                    *place.entry(entry.kind.clone()).or_default() += count;
                }
            }
        }
        layers
    }
}
