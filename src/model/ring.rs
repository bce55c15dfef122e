//! The ring between its two drawn lines: the axis midway, or the depth about a drawn axis.

use super::chain::{self, Chain};
use super::middle::{Across, Band, plain};
use super::note::Note;
use crate::drawing::{Curve, Source};
use crate::geometry::{Path, Point, Vec2};
use crate::refusal::Refusal;
use crate::tolerance;

/// The ring of one span as drawn.
#[derive(Debug, Clone, PartialEq)]
pub struct Ring {
    /// Its inner line from left to right, m.
    pub intrados: Path,
    /// Its outer line from left to right, m.
    pub extrados: Path,
    /// Depth along the joints at lengths along the axis, ascending, m; linear between; a single value counts everywhere.
    pub depth: Vec<(f64, f64)>,
    /// The entities of both lines, the inner one first.
    pub sources: Vec<Source>,
}

/// The two lines of a ring before it has an axis.
#[derive(Debug, Clone)]
pub struct Lines {
    intrados: Path,
    extrados: Path,
    sources: Vec<Source>,
    band: Band,
}

/// The rings of a drawing, left to right; lengths in m, `metres` a drawing unit.
///
/// # Errors
/// When the curves of a line do not join ([`chain::chains`]), the two lines have different numbers of spans, the
/// extrados lies below the intrados, or they touch.
pub fn lines(
    intrados: &[Curve],
    extrados: &[Curve],
    metres: f64,
    notes: &mut Vec<Note>,
) -> Result<Vec<Lines>, Refusal> {
    if intrados.is_empty() || extrados.is_empty() {
        return Ok(Vec::new());
    }
    let inner = one_line(intrados, "intrados", metres, notes)?;
    let outer = one_line(extrados, "extrados", metres, notes)?;
    if inner.len() != outer.len() {
        let source = outer.first().and_then(|c| c.sources.first()).cloned().unwrap_or_default();
        return Err(source.refuse(
            "ring-spans",
            format!("the intrados has {} spans and the extrados {}", inner.len(), outer.len()),
            "Draw both lines of every ring from springing to springing",
        ));
    }
    inner.into_iter().zip(outer).map(|(i, o)| pair(i, o, metres)).collect()
}

fn one_line(
    curves: &[Curve],
    name: &'static str,
    metres: f64,
    notes: &mut Vec<Note>,
) -> Result<Vec<Chain>, Refusal> {
    let chains = chain::chains(curves).map_err(|refusal| named(refusal, name))?;
    notes.extend(chains.doubles.into_iter().map(|(source, kept)| Note::DrawnTwice { source, kept }));
    notes.extend(chains.lengthless.into_iter().map(|source| Note::NoLength { source }));
    for (i, chain) in chains.chains.iter().enumerate() {
        for gap in &chain.gaps {
            notes.push(Note::GapClosed {
                line: name,
                span: format!("span {}", i + 1),
                size: gap.size * metres,
                at: (gap.at.to_vec2() * metres).to_point(),
            });
        }
    }
    Ok(chains.chains)
}

/// What is wrong with a chain is said of the line that it makes.
pub(super) fn named(mut refusal: Refusal, name: &str) -> Refusal {
    refusal.check = refusal.check.replacen("axis", name, 1);
    let line = |text: &str| {
        text.replace("the axis of the arch", &format!("the {name}"))
            .replace("the axis", &format!("the {name}"))
            .replace("an axis", &format!("an {name}"))
            .replace("`[layers] axis`", &format!("`[layers] {name}`"))
            .replace("axis layer", &format!("{name} layer"))
    };
    refusal.message = line(&refusal.message);
    refusal.remedy = line(&refusal.remedy);
    refusal
}

fn pair(inner: Chain, outer: Chain, metres: f64) -> Result<Lines, Refusal> {
    let source = outer.sources.first().cloned().unwrap_or_default();
    let touch = || {
        source.refuse(
            "ring-touches",
            "intrados and extrados touch or cross: the ring has no depth there",
            "Draw the two lines apart from springing to springing",
        )
    };
    let intrados = inner.path.shifted_scaled(Vec2::ZERO, metres);
    let extrados = outer.path.shifted_scaled(Vec2::ZERO, metres);
    let band = Band::new(&intrados, &extrados).ok_or_else(touch)?;
    if !band.is_upright() {
        return Err(source.refuse(
            "ring-upside-down",
            format!(
                "the extrados ({}) lies below the intrados ({})",
                source.named(),
                inner.sources.first().map(Source::named).unwrap_or_default()
            ),
            "Exchange the layers of the two lines, or their names in `[layers]`",
        ));
    }
    let sources = inner.sources.into_iter().chain(outer.sources).collect();
    Ok(Lines { intrados, extrados, sources, band })
}

impl Lines {
    /// The axis midway between the lines, with the ring about it.
    ///
    /// # Errors
    /// When the lines touch or cross.
    pub fn midway(self, span: &str, notes: &mut Vec<Note>) -> Result<(Path, Ring), Refusal> {
        let middle = self.band.middle().ok_or_else(|| {
            self.sources.first().cloned().unwrap_or_default().refuse(
                "ring-touches",
                format!("{span}: intrados and extrados touch or cross: no line runs midway between them"),
                "Draw the two lines apart from springing to springing",
            )
        })?;
        notes.push(Note::AxisMidway {
            span: span.to_owned(),
            pieces: middle.path.segments().len(),
            stray: middle.stray,
        });
        if middle.skew > tolerance::END_SKEW {
            notes.push(Note::EndsSkew { span: span.to_owned(), angle: middle.skew });
        }
        Ok((middle.path, self.with_depth(middle.depth)))
    }

    /// The ring about a drawn axis: at each joint twice the distance to the nearer line, so that no place counts that
    /// lies outside.
    ///
    /// # Errors
    /// When the axis leaves the ring.
    pub fn about(self, span: &str, axis: &Path, notes: &mut Vec<Note>) -> Result<Ring, Refusal> {
        let mut table =
            Table { band: &self.band, axis, values: Vec::new(), off: (0.0, axis.start()), miss: None };
        for (i, cut) in axis.cumulative().windows(2).enumerate() {
            table.piece(i, cut[0], cut[1]);
        }
        if let Some(at) = table.miss {
            return Err(self.sources.first().cloned().unwrap_or_default().refuse(
                "axis-off-ring",
                format!(
                    "{span}: the joint through the axis at ({:.3}, {:.3}) m does not meet both ring lines",
                    at.x, at.y
                ),
                "Draw the axis between intrados and extrados, or leave it out: it is then found midway",
            ));
        }
        if table.off.0 > 0.0 {
            notes.push(Note::AxisOffMiddle { span: span.to_owned(), by: table.off.0, at: table.off.1 });
        }
        let depth = plain(table.values);
        Ok(self.with_depth(depth))
    }

    fn with_depth(self, depth: Vec<(f64, f64)>) -> Ring {
        Ring { intrados: self.intrados, extrados: self.extrados, depth, sources: self.sources }
    }
}

/// Depths along a drawn axis.
struct Table<'a> {
    band: &'a Band,
    axis: &'a Path,
    values: Vec<(f64, f64)>,
    /// Greatest distance from the middle, where it is worth telling, and where.
    off: (f64, Point),
    miss: Option<Point>,
}

impl Table<'_> {
    /// Adds the depths along one piece of the axis.
    fn piece(&mut self, index: usize, from: f64, to: f64) {
        let segment = self.axis.segments()[index];
        let depth = |table: &mut Self, s: f64| -> f64 {
            let t = segment.tangent_at(s - from);
            let at = segment.point_at(s - from);
            match table.band.across(at, Vec2::new(-t.y, t.x)) {
                Some(across) => {
                    table.measure(at, &across);
                    across.depth()
                }
                None => {
                    table.miss.get_or_insert(at);
                    0.0
                }
            }
        };
        let (first, last) = (depth(self, from), depth(self, to));
        // A kink of the axis has a joint on each side's normal: two depths a hair apart.
        let hair = self.axis.length() * tolerance::ONE_ARC;
        let start = match self.values.last() {
            Some(&(_, d)) if (d - first).abs() <= tolerance::RING_DEPTH * d => from,
            Some(_) => from + hair,
            None => from,
        };
        if start > from || self.values.is_empty() {
            self.values.push((start, first));
        }
        let mut open = vec![(start, first, to, last, tolerance::MIDDLE_HALVINGS)];
        while let Some((a, at_a, b, at_b, left)) = open.pop() {
            let mut good = true;
            for part in [0.25, 0.5, 0.75] {
                let d = depth(self, a + (b - a) * part);
                good &= (at_a + (at_b - at_a) * part - d).abs() <= tolerance::RING_DEPTH * d;
            }
            if good || left == 0 || self.miss.is_some() || self.values.len() > tolerance::MIDDLE_PIECES {
                self.values.push((b, at_b));
            } else {
                let middle = f64::midpoint(a, b);
                let d = depth(self, middle);
                open.push((middle, d, b, at_b, left - 1));
                open.push((a, at_a, middle, d, left - 1));
            }
        }
    }

    fn measure(&mut self, at: Point, across: &Across) {
        let off = (across.outer - across.inner).abs() / 2.0;
        if off > tolerance::OFF_MIDDLE * (across.outer + across.inner) && off > self.off.0 {
            self.off = (off, at);
        }
    }
}
