//! The two forms of a drawing, ASCII and binary, cut into tags in one pass over a window of a quarter of a megabyte.

use std::io::Read;

use crate::refusal::Refusal;
use crate::tags::binary::binary;
use crate::tags::skim::{Way, ascii};
use crate::tags::source::{CHUNK, Reader, Source};

/// The first bytes of every binary drawing.
pub(crate) const SENTINEL: &[u8; 22] = b"AutoCAD Binary DXF\r\n\x1a\0";
/// UTF-8 byte order mark.
const MARK: &[u8] = b"\xef\xbb\xbf";
/// Longest tag that is read, bytes. The format's longest value has some two thousand; without a bound a file with no
/// line ends would be taken into memory whole.
const LONGEST_TAG: usize = 64 << 20;

/// The form of a drawing file.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Form {
    /// Lines of text.
    Ascii,
    /// Binary with group codes of one byte (up to R12) or of two.
    Binary {
        /// Two bytes a code.
        wide: bool,
    },
}

impl Form {
    /// As the results name it: `ascii` or `binary`.
    pub fn name(self) -> &'static str {
        match self {
            Self::Ascii => "ascii",
            Self::Binary { .. } => "binary",
        }
    }
}

/// Where a tag stands.
#[derive(Debug, Clone, Copy)]
pub(crate) struct Place {
    /// First byte of its code line, or of its code.
    pub start: u64,
    /// First byte of its value.
    pub value: u64,
    /// Behind the last byte of its value, the line end not counted.
    pub value_end: u64,
    /// Behind its line end.
    pub end: u64,
    /// Line of its code.
    pub line: Option<u64>,
    /// Whether the tag before it ended in CR LF.
    pub after_crlf: bool,
}

/// Takes the tags of a drawing, one after the other.
pub(crate) trait Sink {
    /// Told once, before the first tag.
    fn begin(&mut self, form: Form, utf8_mark: bool);
    /// Whether the value of the next tag is of interest; if not, it is passed over unseen.
    fn wants(&self, code: i32) -> bool;
    /// One tag of interest.
    fn tag(&mut self, code: i32, value: &[u8], place: &Place) -> Result<(), Refusal>;
    /// Takes a tag that it wants when its place does not matter; false when it needs all of it.
    #[inline(always)]
    fn brief(&mut self, _code: i32, _value: &[u8]) -> bool {
        false
    }
    /// Whether it wants, for now, none of the codes from 10 to 100 but 67.
    fn skims(&self) -> bool {
        false
    }
    /// Whether all tags of the record at hand may still be asked for, also those that it did not want.
    fn holds(&self) -> bool {
        false
    }
    /// The record that it holds ends, with nothing decided.
    fn settle(&mut self) {}
    /// Whether it asks, now, for the tags of the record that it held. Answers once.
    fn recalls(&mut self) -> bool {
        false
    }
    /// One of those tags.
    fn recall(&mut self, _code: i32, _value: &[u8], _line: Option<u64>) -> Result<(), Refusal> {
        Ok(())
    }
    /// The refusal for a record that is held for too long.
    fn overlong(&self) -> Refusal {
        Refusal::new("record-length", "a record is too long", "Save the drawing again")
    }
}

/// Bytes of a record that are held before it is known whether it is kept; the layer, which decides, is among the first
/// tags of every entity.
pub(super) const MOST_HELD: usize = 1 << 20;

/// What was found about the file as a whole.
#[derive(Debug, Clone)]
pub(crate) struct Stream {
    pub form: Form,
    /// It begins with a UTF-8 byte order mark.
    pub utf8_mark: bool,
    /// First byte of the EOF tag.
    pub eof: Option<Place>,
    /// Behind the last tag.
    pub tags_end: u64,
    /// Line behind the last tag.
    pub tags_end_line: Option<u64>,
    /// The last tag lacks its line end.
    pub unterminated: bool,
    /// The last finished line ended in CR LF.
    pub last_crlf: bool,
    /// Whether there are tags whose value line ends in CR LF, and in LF alone.
    pub line_ends: [bool; 2],
    /// Length of the file.
    pub len: u64,
}

/// How far a drawing is cut.
pub(super) struct Walk {
    /// Place in the window of the next tag.
    pub at: usize,
    /// Its line; 0 in a binary drawing.
    pub line: u64,
    /// Place in the window, and line, of the second tag of the record that is held.
    pub held: Option<(usize, u64)>,
    /// Between sections, where nothing but another section or the end may follow.
    pub outside: bool,
}

/// A part of the file.
pub(super) struct Window {
    reader: Reader,
    source: Source,
    buf: Vec<u8>,
    end: usize,
    /// Offset in the file of the first byte of the buffer.
    pub base: u64,
    /// The file ends where the window does.
    pub done: bool,
}

impl Window {
    fn new(source: &Source) -> Self {
        let size = usize::try_from(source.len()).map_or(CHUNK, |len| CHUNK.min(len + 1));
        Self {
            reader: source.reader(),
            source: source.clone(),
            buf: vec![0; size],
            end: 0,
            base: 0,
            done: false,
        }
    }

    /// The bytes of the window.
    pub fn bytes(&self) -> &[u8] {
        &self.buf[..self.end]
    }

    /// Moves the bytes that are still of use to the front and reads more behind them.
    pub fn more(&mut self, sink: &impl Sink, walk: &mut Walk) -> Result<(), Refusal> {
        walk.held = walk.held.filter(|_| sink.holds());
        let keep = match walk.held {
            Some((from, _)) if walk.at - from > MOST_HELD => return Err(sink.overlong()),
            Some((from, _)) => from,
            None => walk.at,
        };
        walk.at -= keep;
        if let Some((from, _)) = &mut walk.held {
            *from = 0;
        }
        self.refill(keep)
    }

    fn refill(&mut self, keep: usize) -> Result<(), Refusal> {
        self.buf.copy_within(keep..self.end, 0);
        self.base += keep as u64;
        self.end -= keep;
        if self.end == self.buf.len() {
            if self.end >= LONGEST_TAG {
                return Err(Refusal::new(
                    "tag-length",
                    format!("a value of more than {} MB begins at byte {}", LONGEST_TAG >> 20, self.base),
                    "Check that the file is a DXF drawing and is not damaged",
                ));
            }
            self.buf.resize(2 * self.buf.len(), 0);
        }
        while self.end < self.buf.len() && !self.done {
            let count = self
                .reader
                .read(&mut self.buf[self.end..])
                .map_err(|error| self.source.unreadable(&error))?;
            self.done = count == 0;
            self.end += count;
        }
        Ok(())
    }
}

/// Hands one tag to the sink, which may ask for those before it in the record: `again` gives it the tags between two
/// places of the window, the first of which stands on a line.
#[inline(always)]
pub(super) fn deliver<S: Sink>(
    sink: &mut S,
    stream: &mut Stream,
    walk: &mut Walk,
    tag: (i32, &[u8], &Place),
    ends: [usize; 2],
    again: impl Fn(&mut S, usize, usize, u64) -> Result<(), Refusal>,
) -> Result<(), Refusal> {
    let (code, value, place) = tag;
    let [start, end] = ends;
    if code == 0 {
        settle(sink, walk.held.take(), start, &again)?;
        walk.outside = value.trim_ascii() == b"ENDSEC";
        if value.trim_ascii() == b"EOF" {
            stream.eof = Some(*place);
        }
        sink.tag(code, value, place)?;
        walk.held = sink.holds().then(|| (end, place.line.map_or(0, |line| line + 2)));
        return Ok(());
    }
    sink.tag(code, value, place)?;
    if sink.recalls()
        && let Some((from, line)) = walk.held.take()
    {
        again(sink, from, end, line)?;
    }
    Ok(())
}

/// The record that is held ends at a place in the window.
pub(super) fn settle<S: Sink>(
    sink: &mut S,
    held: Option<(usize, u64)>,
    end: usize,
    again: impl Fn(&mut S, usize, usize, u64) -> Result<(), Refusal>,
) -> Result<(), Refusal> {
    if let Some((from, line)) = held.filter(|_| sink.holds()) {
        if end - from > MOST_HELD {
            return Err(sink.overlong());
        }
        sink.settle();
        if sink.recalls() {
            again(sink, from, end, line)?;
        }
    }
    Ok(())
}

/// Cuts a whole drawing into tags, up to the EOF tag.
pub(crate) fn tokenize(source: &Source, sink: &mut impl Sink) -> Result<Stream, Refusal> {
    tokenize_by(source, sink, Way::Best)
}

/// The same in a way of choice; all give the same result.
pub(super) fn tokenize_by(source: &Source, sink: &mut impl Sink, way: Way) -> Result<Stream, Refusal> {
    let mut window = Window::new(source);
    window.refill(0)?;
    let head = window.bytes();
    let mut stream = Stream {
        form: Form::Ascii,
        utf8_mark: false,
        eof: None,
        tags_end: 0,
        tags_end_line: None,
        unterminated: false,
        last_crlf: false,
        line_ends: [false; 2],
        len: source.len(),
    };
    if head.starts_with(SENTINEL) {
        let wide = head.get(SENTINEL.len()..SENTINEL.len() + 2) == Some(&[0, 0]);
        stream.form = Form::Binary { wide };
        sink.begin(stream.form, false);
        binary(&mut window, sink, &mut stream, wide)?;
    } else {
        refuse_other_files(head)?;
        stream.utf8_mark = head.starts_with(MARK);
        sink.begin(Form::Ascii, stream.utf8_mark);
        let first = if stream.utf8_mark { MARK.len() } else { 0 };
        ascii(&mut window, sink, &mut stream, first, way)?;
    }
    Ok(stream)
}

/// Files that people take for DXF drawings, and what to do about each.
fn refuse_other_files(head: &[u8]) -> Result<(), Refusal> {
    let (message, remedy) = if head.is_empty() {
        ("the file is empty", "Save the drawing again as DXF")
    } else if head.starts_with(b"AC10") || head.starts_with(b"AC1.") || head.starts_with(b"AC2.") {
        (
            "the file is a DWG drawing, not a DXF drawing",
            "Save or export the drawing as DXF from your CAD program",
        )
    } else if head.starts_with(b"AutoCAD Binary DXF") {
        (
            "the first bytes of the binary drawing are damaged, as when it is sent as text",
            "Fetch the file again in binary mode, or save it again as DXF",
        )
    } else if head.starts_with(b"PK\x03\x04") || head.starts_with(b"\x1f\x8b") {
        ("the file is a compressed archive, not a DXF drawing", "Unpack it first")
    } else if head.starts_with(b"\xff\xfe") || head.starts_with(b"\xfe\xff") {
        (
            "the file is text in UTF-16, which the DXF format does not allow",
            "Save it again as DXF from your CAD program",
        )
    } else if head.contains(&b'\r') && !head.contains(&b'\n') {
        ("the lines of the file end in CR alone", "Save it again as DXF with LF or CR LF line ends")
    } else {
        return Ok(());
    };
    Err(Refusal::new("not-dxf", message, remedy))
}

/// Whether a byte means nothing behind the last tag.
pub(super) fn is_filling(byte: &u8) -> bool {
    matches!(byte, b' ' | b'\t' | b'\r' | b'\n' | 0x1a | 0)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[derive(Default)]
    struct All(Vec<(i32, String, u64, u64)>);

    impl Sink for All {
        fn begin(&mut self, _: Form, _: bool) {}
        fn wants(&self, _: i32) -> bool {
            true
        }
        fn tag(&mut self, code: i32, value: &[u8], place: &Place) -> Result<(), Refusal> {
            let text = String::from_utf8_lossy(value).into_owned();
            self.0.push((code, text, place.start, place.line.unwrap_or(0)));
            Ok(())
        }
    }

    fn cut(bytes: &[u8]) -> Result<(All, Stream), Refusal> {
        let mut all = All::default();
        let stream = tokenize(&Source::from_bytes(bytes), &mut all)?;
        Ok((all, stream))
    }

    #[test]
    fn code_lines_may_have_blanks_and_values_keep_theirs() {
        let (all, stream) = cut(b"  0\nSECTION\n\t2 \r\n HEADER \r\n-666\n\n 0\nEOF\nrest").unwrap();
        assert_eq!(
            all.0,
            [
                (0, "SECTION".into(), 0, 1),
                (2, " HEADER ".into(), 12, 3),
                (-666, String::new(), 27, 5),
                (0, "EOF".into(), 33, 7),
            ]
        );
        assert_eq!((stream.tags_end, stream.len), (40, 44));
        assert_eq!(stream.line_ends, [true, true]);
    }

    #[test]
    fn damage_is_told_with_its_line() {
        for (bytes, line) in [
            (&b"  0\nSECTION\n\n  2\nHEADER\n"[..], 3),
            (b"  0\nSECTION\n2x\nHEADER\n", 3),
            (b"hello\n", 1),
            (b"0\nSECTION\n2", 3),
            (b"0\nSECTION\n2\n", 3),
            (b"0\nSECTION\n99999999\nx\n", 3),
        ] {
            let Err(error) = cut(bytes) else {
                panic!("{bytes:?} was read");
            };
            assert_eq!(error.line, Some(line), "{error}");
        }
        for bytes in [&b""[..], b"AC1015\0\0", b"0\rSECTION\r", b"PK\x03\x04"] {
            assert!(cut(bytes).is_err_and(|error| error.check == "not-dxf"));
        }
    }

    #[test]
    fn the_end_may_lack_its_newline_or_be_filled_up() {
        let (all, stream) = cut(b"0\r\nENDSEC\r\n0\r\nEO").unwrap();
        assert_eq!(all.0[1].1, "EO");
        assert!(stream.unterminated && stream.last_crlf && stream.eof.is_none());
        let (_, stream) = cut(b"0\nENDSEC\n\n  \n\x1a").unwrap();
        assert_eq!(stream.tags_end, 9);
        assert!(!stream.unterminated);
    }

    #[test]
    fn tags_that_cross_the_window_are_whole() {
        let long = "x".repeat(3 * CHUNK + 17);
        let mut text = String::new();
        for i in 0..40_000 {
            text.push_str(&format!("  1\nvalue {i} of some length to cross the window\n"));
        }
        text.push_str(&format!("  1\n{long}\n  0\nEOF\n"));
        let (all, stream) = cut(text.as_bytes()).unwrap();
        assert_eq!(all.0.len(), 40_002);
        assert!(
            all.0[..40_000]
                .iter()
                .enumerate()
                .all(|(i, tag)| tag.1 == format!("value {i} of some length to cross the window")
                    && tag.3 == 2 * i as u64 + 1)
        );
        assert_eq!(all.0[40_000].1, long);
        assert_eq!((stream.tags_end, stream.len), (text.len() as u64, text.len() as u64));
    }

    #[test]
    fn binary_values() {
        let mut narrow = SENTINEL.to_vec();
        narrow.extend_from_slice(b"\x00SECTION\0\x3e\xfe\xff\xff\xe9\x03APP\0\x0a");
        narrow.extend_from_slice(&0.1f64.to_le_bytes());
        narrow.extend_from_slice(b"\x00EOF\0more");
        let (all, stream) = cut(&narrow).unwrap();
        let seen: Vec<_> = all.0.iter().map(|t| (t.0, t.1.as_str())).collect();
        assert_eq!(seen, [(0, "SECTION"), (62, "-2"), (1001, "APP"), (10, "0.1"), (0, "EOF")]);
        assert_eq!(stream.form, Form::Binary { wide: false });
        let mut wide = SENTINEL.to_vec();
        wide.extend_from_slice(b"\0\0SECTION\0\x22\x01\x01\x36\x01\x02\xab\x01\x5a\0\xff\xff\xff\x7f");
        let (all, _) = cut(&wide).unwrap();
        let seen: Vec<_> = all.0.iter().map(|t| (t.0, t.1.as_str())).collect();
        assert_eq!(seen, [(0, "SECTION"), (290, "1"), (310, "AB01"), (90, "2147483647")]);
        wide.extend_from_slice(b"\x5a\0\xff");
        assert!(cut(&wide).is_err_and(|error| error.check == "truncated"));
        wide.truncate(wide.len() - 3);
        wide.extend_from_slice(b"\x20\x03zz");
        assert!(cut(&wide).is_err_and(|error| error.check == "tag-code"));
    }
}
