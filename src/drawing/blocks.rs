//! What inserted blocks bring into the drawing: their entities of interest, each with its place, as if drawn there.
//!
//! An entity of a block lies where the block's references put it, one in another. On layer `0` of a block it takes the layer
//! of the reference; on any other it keeps its own. References on a layer of loads are loads themselves, symbols and all;
//! what their blocks hold is not read again.

use std::borrow::Cow;
use std::collections::{BTreeMap, BTreeSet};

use super::gather::keeps;
use super::insert::Insert;
use super::names;
use super::note::{Note, Role};
use super::outlines;
use super::roles::{self, CURVES, POINTS};
use crate::geometry::Affine;
use crate::job::{Role as JobRole, Settings};
use crate::refusal::Refusal;
use crate::tags::{self, Candidate, LayerCensus, Options, Outline, Placement, Record, fold};
use crate::tolerance;

/// The outline of a drawing with what its blocks bring in added to its records and to the census of model space. Scans the
/// drawing again only when a block holds something of interest, or stands on the layer of a curve.
///
/// # Errors
/// When blocks hold one another without end, or too deep, or too many times over; when a reference cannot be read.
pub fn expanded<'o>(
    bytes: &tags::Source,
    outline: &'o Outline,
    settings: &Settings,
    notes: &mut Vec<Note>,
) -> Result<Cow<'o, Outline>, Refusal> {
    let mut inherits = false;
    let mut inside = false;
    for record in outline.records.iter().filter(|r| !r.ours && !r.in_paper_space()) {
        let on_sheet = record
            .block
            .is_some_and(|b| outline.blocks.get(b).is_some_and(|b| names::is_paper_space(&b.name)));
        inside |= record.block.is_some() && !on_sheet && record.kind != "VIEWPORT";
        inherits |= record.kind == "INSERT" && lends_layer(settings, &record.layer)?;
    }
    if !(inside || inherits) {
        return Ok(Cow::Borrowed(outline));
    }
    let keep = |c: &Candidate<'_>| {
        c.kind == "INSERT"
            || c.block.is_some()
                && (keeps(settings, c) || inherits && c.layer == "0" && CURVES.contains(&c.kind))
    };
    let second = tags::scan(bytes, &Options { keep: Some(&keep), hash: false })?;
    let mut blocks = Blocks::new(outline, settings, &second.records)?;
    // Counted first, so that what is refused for its number takes no memory.
    for counting in [true, false] {
        (blocks.counting, blocks.steps) = (counting, 0);
        for record in second.records.iter().filter(|r| r.block.is_none() && !r.ours && !r.in_paper_space()) {
            blocks.place(record, &record.layer, &Affine::IDENTITY)?;
        }
    }
    let Blocks { placed, passed_over, .. } = blocks;
    notes.extend(passed_over.into_iter().map(|((role, block, layer), count)| Note::InBlock {
        role,
        block,
        layer,
        count,
    }));
    if placed.is_empty() {
        return Ok(Cow::Borrowed(outline));
    }
    let mut whole = outline.clone();
    for record in placed {
        count_in_model(&mut whole.census, &record);
        whole.records.push(record);
    }
    Ok(Cow::Owned(whole))
}

/// Whether a reference on this layer gives its layer to curves on layer `0` of its block: it serves as something, but not as
/// loads, where the reference is a load itself.
fn lends_layer(settings: &Settings, layer: &str) -> Result<bool, Refusal> {
    Ok(outlines::is_area_layer(settings, layer)
        || roles::role_of(settings, layer)?.is_some_and(|role| role != JobRole::Loads))
}

fn count_in_model(census: &mut Vec<LayerCensus>, record: &Record) {
    let name = fold(&record.layer);
    let index = census.iter().position(|c| fold(&c.name) == name).unwrap_or_else(|| {
        census.push(LayerCensus { name: record.layer.clone(), ..LayerCensus::default() });
        census.len() - 1
    });
    *census[index].model.entry(record.kind.clone()).or_default() += 1;
}

/// What a block holds.
#[derive(Default)]
struct Content<'r> {
    /// Entities on layers that serve as something.
    own: Vec<&'r Record>,
    /// Curves on layer `0`.
    zero: Vec<&'r Record>,
    /// References in it.
    inserts: Vec<&'r Record>,
}

struct Blocks<'r> {
    outline: &'r Outline,
    settings: &'r Settings,
    /// Blocks by folded name; of several with one name the first counts.
    index: BTreeMap<String, usize>,
    content: Vec<Content<'r>>,
    /// Whether a block, or one in it, holds something on a layer of its own that serves, and on layer `0`.
    serves: Vec<[bool; 2]>,
    /// The blocks that are being placed, outermost first.
    open: Vec<usize>,
    steps: usize,
    /// Whether what blocks bring in is only counted.
    counting: bool,
    placed: Vec<Record>,
    passed_over: BTreeMap<(Role, String, String), u64>,
}

impl<'r> Blocks<'r> {
    fn new(outline: &'r Outline, settings: &'r Settings, records: &'r [Record]) -> Result<Self, Refusal> {
        let mut index = BTreeMap::new();
        for (i, block) in outline.blocks.iter().enumerate() {
            index.entry(fold(&block.name)).or_insert(i);
        }
        let mut content: Vec<Content<'r>> = Vec::new();
        content.resize_with(outline.blocks.len(), Content::default);
        for record in records.iter().filter(|r| !r.ours) {
            let Some(held) = record.block.and_then(|b| content.get_mut(b)) else {
                continue;
            };
            if outlines::is_area_layer(settings, &record.layer)
                || roles::role_of(settings, &record.layer)?.is_some()
            {
                held.own.push(record);
            } else if record.layer == "0" && record.kind != "INSERT" {
                held.zero.push(record);
            }
            if record.kind == "INSERT" {
                held.inserts.push(record);
            }
        }
        let mut blocks = Self {
            outline,
            settings,
            index,
            serves: Vec::new(),
            content,
            open: Vec::new(),
            steps: 0,
            counting: false,
            placed: Vec::new(),
            passed_over: BTreeMap::new(),
        };
        blocks.serves = blocks.what_serves()?;
        Ok(blocks)
    }

    fn block_of(&self, insert: &Record) -> Option<usize> {
        let name = self.outline.decoder.text(insert.tags.first(2)?.trimmed());
        self.index.get(&fold(name.trim())).copied()
    }

    /// Which blocks bring something in, by what they hold and what the blocks in them hold: repeated until nothing changes.
    fn what_serves(&self) -> Result<Vec<[bool; 2]>, Refusal> {
        let mut serves: Vec<[bool; 2]> = self
            .content
            .iter()
            .map(|c| [c.own.iter().any(|r| r.kind != "INSERT" || self.is_load(r)), !c.zero.is_empty()])
            .collect();
        // Who holds whom, inside out.
        let mut holders: Vec<Vec<(usize, bool, bool)>> = vec![Vec::new(); self.content.len()];
        for (outer, content) in self.content.iter().enumerate() {
            for insert in &content.inserts {
                if let Some(inner) = self.block_of(insert) {
                    let lends = lends_layer(self.settings, &insert.layer)?;
                    holders[inner].push((outer, lends, insert.layer == "0"));
                }
            }
        }
        let mut open: Vec<usize> = (0..serves.len()).filter(|&i| serves[i][0] || serves[i][1]).collect();
        while let Some(inner) = open.pop() {
            let [own, zero] = serves[inner];
            for &(outer, lends, through) in &holders[inner] {
                let before = serves[outer];
                serves[outer][0] |= own || zero && lends;
                serves[outer][1] |= zero && through;
                if serves[outer] != before {
                    open.push(outer);
                }
            }
        }
        Ok(serves)
    }

    fn is_load(&self, record: &Record) -> bool {
        POINTS.contains(&record.kind.as_str())
            && matches!(roles::role_of(self.settings, &record.layer), Ok(Some(JobRole::Loads)))
    }

    /// Brings in what the block of a reference holds, for each place of its array.
    fn place(&mut self, insert: &Record, layer: &str, outer: &Affine) -> Result<(), Refusal> {
        if insert.kind != "INSERT" {
            return Ok(());
        }
        let Some(block) = self.block_of(insert) else {
            return Ok(());
        };
        let lends = lends_layer(self.settings, layer)?;
        let [own, zero] = self.serves[block];
        if !(own || zero && lends) {
            return Ok(());
        }
        if self.is_load(insert) {
            if own && !self.counting {
                self.pass_over(block);
            }
            return Ok(());
        }
        if self.open.contains(&block) {
            return Err(self.refuse(insert, "block-loop", "holds itself, directly or by way of others"));
        }
        if self.open.len() >= tolerance::DEEPEST_BLOCK {
            let what = format!("stands in more than {} blocks, one in another", tolerance::DEEPEST_BLOCK);
            return Err(self.refuse(insert, "block-depth", &what));
        }
        let read = Insert::read(insert)?;
        let base = self.outline.blocks[block].base;
        self.open.push(block);
        for map in read.maps(base) {
            self.step(insert)?;
            self.bring_in(block, layer, lends, &outer.after(&map))?;
        }
        self.open.pop();
        Ok(())
    }

    fn bring_in(&mut self, block: usize, layer: &str, lends: bool, map: &Affine) -> Result<(), Refusal> {
        let path: Vec<String> = self.open.iter().map(|&b| self.outline.blocks[b].name.clone()).collect();
        let own: Vec<&'r Record> = self.content[block].own.clone();
        let zero: Vec<&'r Record> = if lends { self.content[block].zero.clone() } else { Vec::new() };
        let with_layer =
            own.into_iter().map(|r| (r, r.layer.as_str())).chain(zero.into_iter().map(|r| (r, layer)));
        for (record, on) in with_layer {
            // References on layers of curves are no curves; what they hold comes below.
            if record.kind == "INSERT" && !self.is_load(record) {
                continue;
            }
            self.step(record)?;
            if self.counting {
                continue;
            }
            let mut record = record.clone();
            record.layer = on.to_owned();
            record.block = None;
            record.placement = Some(Box::new(Placement { map: *map, path: path.clone() }));
            self.placed.push(record);
        }
        for insert in self.content[block].inserts.clone() {
            let on = if insert.layer == "0" { layer } else { insert.layer.as_str() };
            self.place(insert, on, map)?;
        }
        Ok(())
    }

    /// What is not read because the reference to its block is a load itself.
    fn pass_over(&mut self, block: usize) {
        let mut seen = BTreeSet::from([block]);
        let mut open = vec![block];
        while let Some(block) = open.pop() {
            for record in &self.content[block].own {
                let role = match roles::role_of(self.settings, &record.layer) {
                    Ok(Some(JobRole::Axis)) if CURVES.contains(&record.kind.as_str()) => Role::Axis,
                    Ok(Some(JobRole::Loads)) if POINTS.contains(&record.kind.as_str()) => Role::Loads,
                    _ => continue,
                };
                let name = self.outline.blocks[block].name.clone();
                *self.passed_over.entry((role, name, record.layer.clone())).or_default() += 1;
            }
            let inner = self.content[block].inserts.iter().filter_map(|i| self.block_of(i));
            open.extend(inner.filter(|b| seen.insert(*b)));
        }
    }

    fn step(&mut self, at: &Record) -> Result<(), Refusal> {
        self.steps += 1;
        if self.steps <= tolerance::MOST_PLACED {
            return Ok(());
        }
        let what = format!("and others bring more than {} entities into the drawing", tolerance::MOST_PLACED);
        Err(self.refuse(at, "block-explosion", &what))
    }

    fn refuse(&self, at: &Record, check: &str, what: &str) -> Refusal {
        let name = match self.block_of(at) {
            Some(block) if at.kind == "INSERT" => self.outline.blocks[block].name.clone(),
            _ => self.open.last().map_or_else(String::new, |&b| self.outline.blocks[b].name.clone()),
        };
        let mut path: Vec<&str> = self.open.iter().map(|&b| self.outline.blocks[b].name.as_str()).collect();
        // Of a long way the ends are enough.
        if path.len() > 8 {
            path.splice(4..path.len() - 3, ["…"]);
        }
        let place = if path.is_empty() { String::new() } else { format!(" (in {})", path.join(" in ")) };
        at.refuse(Refusal::new(
            check,
            format!("block {name} {what}{place}"),
            "Purge or redefine the block, or draw the axis and the loads in model space",
        ))
    }
}
