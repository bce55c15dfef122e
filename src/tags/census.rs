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
    /// Type and layer byte for byte, with a line feed between them.
    key: Vec<u8>,
}

/// Places of the small table that most pairs are found in.
const PLACES: usize = 1 << 10;

#[derive(Default)]
pub(super) struct Census {
    entries: Vec<Entry>,
    /// Every pair; its hashing withstands names chosen to collide, and costs more than all the rest of an entity.
    index: HashMap<Vec<u8>, usize>,
    /// The pair last seen of those that share a place.
    places: Vec<usize>,
    key: Vec<u8>,
}

/// A number that is mostly another one for another pair: of the lengths, and of eight bytes at each end of the names.
#[inline(always)]
fn place(kind: &[u8], layer: &[u8]) -> usize {
    const ODD: u64 = 0x9E37_79B9_7F4A_7C15;
    let mut sum = (kind.len() + (layer.len() << 8)) as u64;
    for bytes in [kind, layer] {
        let ends = match (bytes.first_chunk(), bytes.last_chunk()) {
            (Some(first), Some(last)) => {
                u64::from_le_bytes(*first) ^ u64::from_le_bytes(*last).rotate_left(32)
            }
            _ => match (bytes.first_chunk(), bytes.last_chunk()) {
                (Some(first), Some(last)) => {
                    u64::from(u32::from_le_bytes(*first)) | u64::from(u32::from_le_bytes(*last)) << 32
                }
                _ => bytes.iter().fold(0, |sum, byte| sum << 8 | u64::from(*byte)),
            },
        };
        sum = (sum ^ ends).wrapping_mul(ODD).rotate_left(29);
    }
    usize::try_from(sum.wrapping_mul(ODD) >> 32).unwrap_or(0) % PLACES
}

impl Census {
    fn set_key(&mut self, kind: &[u8], layer: &[u8]) {
        self.key.clear();
        self.key.extend_from_slice(kind);
        self.key.push(b'\n');
        self.key.extend_from_slice(layer);
    }

    #[inline(always)]
    pub fn find(&mut self, kind: &[u8], layer: &[u8]) -> Option<usize> {
        let place = place(kind, layer);
        if let Some(&index) = self.places.get(place)
            && let Some(Entry { key, .. }) = self.entries.get(index)
            && let Some(rest) = key.strip_prefix(kind)
            && rest.split_first() == Some((&b'\n', layer))
        {
            return Some(index);
        }
        self.find_any(kind, layer, place)
    }

    #[cold]
    fn find_any(&mut self, kind: &[u8], layer: &[u8], place: usize) -> Option<usize> {
        if self.places.is_empty() {
            self.places = vec![usize::MAX; PLACES];
        }
        self.set_key(kind, layer);
        let index = *self.index.get(&self.key)?;
        self.places[place] = index;
        Some(index)
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
            key: self.key.clone(),
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
