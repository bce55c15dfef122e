//! The rectangle that a drawing's model space fills, from the points that its entities state.

use crate::refusal::Refusal;
use crate::tags::APPLICATION;
use crate::tags::source::Source;
use crate::tags::tokens::{Form, Place, Sink, tokenize};
use crate::tolerance;

/// Entities whose groups 11/21 are a point of theirs; for others they are a direction or an axis.
const SECOND_POINT: [&[u8]; 11] = [
    b"LINE",
    b"TEXT",
    b"ATTRIB",
    b"ATTDEF",
    b"SOLID",
    b"TRACE",
    b"3DFACE",
    b"SPLINE",
    b"DIMENSION",
    b"ARC_DIMENSION",
    b"VERTEX",
];

/// Entities with no place of their own, without bounds, or whose first point is none: the head of a POLYLINE states
/// its elevation, a HATCH too.
const NO_PLACE: [&[u8]; 8] =
    [b"POLYLINE", b"HATCH", b"RAY", b"XLINE", b"VIEWPORT", b"SEQEND", b"BODY", b"3DSOLID"];

/// Lower left and upper right corner of the entities in model space, in drawing units, from their points in groups 10/20
/// and, where those are points, 11/21; a CIRCLE with its radius, an INSERT by its insertion point. Left out are paper
/// space, the inside of blocks, entities turned out of the x-y plane, and what carries our marks. None when nothing is
/// left, or all of it is one point.
///
/// # Errors
/// As [`crate::tags::scan()`].
pub fn extents(source: &Source) -> Result<Option<[[f64; 2]; 2]>, Refusal> {
    let mut gather = Gather::default();
    tokenize(source, &mut gather)?;
    gather.close();
    let Extent { low, high } = gather.all;
    let wide = low[0] <= high[0] && low[1] <= high[1] && (low[0] < high[0] || low[1] < high[1]);
    Ok(wide.then_some([low, high]))
}

#[derive(Clone, Copy)]
struct Extent {
    low: [f64; 2],
    high: [f64; 2],
}

impl Default for Extent {
    fn default() -> Self {
        Self { low: [f64::INFINITY; 2], high: [f64::NEG_INFINITY; 2] }
    }
}

impl Extent {
    fn take(&mut self, point: [f64; 2]) {
        for (axis, value) in point.into_iter().enumerate() {
            self.low[axis] = self.low[axis].min(value);
            self.high[axis] = self.high[axis].max(value);
        }
    }
}

/// The entity at hand.
#[derive(Default)]
struct Current {
    open: bool,
    /// Nothing more of it counts.
    left_out: bool,
    second: bool,
    circle: bool,
    embedded: bool,
    depth: u32,
    /// The x whose y has not come yet, and its group code.
    x: Option<(i32, f64)>,
    extent: Extent,
    first: Option<[f64; 2]>,
}

#[derive(Default)]
struct Gather {
    naming: bool,
    entities: bool,
    current: Current,
    /// The POLYLINE or INSERT whose run follows was left out.
    run_left_out: bool,
    all: Extent,
}

impl Gather {
    fn close(&mut self) {
        let current = std::mem::take(&mut self.current);
        if current.open && !current.left_out && current.extent.low[0] <= current.extent.high[0] {
            self.all.take(current.extent.low);
            self.all.take(current.extent.high);
        }
    }

    fn open(&mut self, kind: &[u8]) {
        let was_left_out = self.current.left_out;
        let was_head = self.current.open && !self.current.circle;
        self.close();
        let is = |word: &[u8]| kind.eq_ignore_ascii_case(word);
        if is(b"SECTION") {
            self.naming = true;
            return;
        }
        if is(b"ENDSEC") || is(b"EOF") {
            self.entities = false;
            return;
        }
        if !self.entities {
            return;
        }
        let child = is(b"VERTEX") || is(b"ATTRIB") || is(b"SEQEND");
        if !child {
            self.run_left_out = false;
        } else if was_head && was_left_out {
            self.run_left_out = true;
        }
        self.current = Current {
            open: true,
            left_out: child && self.run_left_out,
            second: SECOND_POINT.iter().any(|word| is(word)),
            circle: is(b"CIRCLE"),
            // A head without a place is still looked at: its run may be left out with it.
            embedded: NO_PLACE.iter().any(|word| is(word)),
            ..Current::default()
        };
    }
}

fn number(value: &[u8]) -> Option<f64> {
    let value: f64 = std::str::from_utf8(value.trim_ascii()).ok()?.parse().ok()?;
    (value.abs() < tolerance::GREATEST_NUMBER).then_some(value)
}

impl Sink for Gather {
    fn begin(&mut self, _: Form, _: bool) {}

    fn wants(&self, code: i32) -> bool {
        match code {
            0 | 2 => true,
            10 | 20 | 11 | 21 | 12 | 22 | 13 | 23 | 40 | 67 | 101 | 102 | 210 | 220 | 230 | 1001 => {
                self.current.open
            }
            _ => false,
        }
    }

    fn tag(&mut self, code: i32, value: &[u8], _: &Place) -> Result<(), Refusal> {
        if code == 0 {
            self.open(value.trim_ascii());
            return Ok(());
        }
        if self.naming && code == 2 {
            self.naming = false;
            self.entities = value.trim_ascii().eq_ignore_ascii_case(b"ENTITIES");
            return Ok(());
        }
        let current = &mut self.current;
        if !current.open || current.left_out {
            return Ok(());
        }
        match code {
            67 => current.left_out |= value.trim_ascii() == b"1",
            1001 => {
                current.left_out |= value.trim_ascii().eq_ignore_ascii_case(APPLICATION.as_bytes());
                current.embedded = true;
            }
            101 => current.embedded = true,
            102 => {
                if value.trim_ascii_start().starts_with(b"{") {
                    current.depth += 1;
                } else {
                    current.depth = current.depth.saturating_sub(1);
                }
            }
            _ if current.depth > 0 || current.embedded => {}
            // A direction other than straight up means coordinates of another plane.
            210 | 220 => current.left_out |= number(value).is_none_or(|v| v.abs() > 0.0),
            230 => current.left_out |= number(value).is_none_or(|v| v <= 0.0),
            10..=13 if code == 10 || current.second => current.x = number(value).map(|x| (code, x)),
            20..=23 => {
                if let Some((x_code, x)) = current.x.take()
                    && x_code + 10 == code
                    && let Some(y) = number(value)
                {
                    current.extent.take([x, y]);
                    current.first.get_or_insert([x, y]);
                }
            }
            40 if current.circle => {
                if let (Some([x, y]), Some(radius)) = (current.first, number(value)) {
                    current.extent.take([x - radius, y - radius]);
                    current.extent.take([x + radius, y + radius]);
                }
            }
            _ => {}
        }
        Ok(())
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    fn of(entities: &str) -> Option<[[f64; 2]; 2]> {
        let text = format!(
            "0\nSECTION\n2\nBLOCKS\n0\nLINE\n8\n0\n10\n-99\n20\n-99\n0\nENDSEC\n\
             0\nSECTION\n2\nENTITIES\n{}0\nENDSEC\n0\nEOF\n",
            entities.replace([' ', ';'], "\n")
        );
        extents(&Source::from_bytes(text)).unwrap()
    }

    #[test]
    fn own_points_of_model_space_count() {
        let line = "0 LINE 8 0 10 1 20 2 30 0 11 5 21 -3 31 0;";
        assert_eq!(of(line), Some([[1.0, -3.0], [5.0, 2.0]]));
        for left_out in [
            "0 LINE 67 1 10 -50 20 0 11 0 21 0;",
            "0 LINE 10 -50 20 0 11 0 21 0 1001 THRUSTMARK 1000 line;",
            "0 CIRCLE 10 -50 20 0 40 1 210 0 220 0 230 -1;",
            "0 XLINE 10 -50 20 0 11 0 21 1;",
            "0 POLYLINE 10 -50 20 0 66 1;0 VERTEX 10 2 20 2;0 SEQEND;",
            "0 POLYLINE 67 1 10 0 20 0 66 1;0 VERTEX 10 -50 20 2;0 VERTEX 10 -50 20 2;0 SEQEND;",
            "0 TEXT 10 1e20 20 0;",
            "0 TEXT 10 -50 20 oops;",
            "0 LINE 102 {A 10 -50 20 0 102 } 10 2 20 0 11 2 21 1;",
        ] {
            assert_eq!(of(&format!("{left_out}{line}")), Some([[1.0, -3.0], [5.0, 2.0]]), "{left_out}");
        }
        assert_eq!(of(&format!("{line}0 MTEXT 10 2 20 9 11 1 21 99;")), Some([[1.0, -3.0], [5.0, 9.0]]));
        assert_eq!(of(&format!("{line}0 CIRCLE 10 2 20 0 40 7;")), Some([[-5.0, -7.0], [9.0, 7.0]]));
        assert_eq!(of("0 POINT 10 1 20 1;"), None);
        assert_eq!(of(""), None);
    }
}
