//! The two forms of a drawing, ASCII and binary, cut into tags in one pass over a window of a megabyte.

use std::io::Read;

use sha2::{Digest, Sha256};

use crate::refusal::Refusal;
use crate::tags::codes::{Kind, kind};
use crate::tags::source::{CHUNK, Reader, Source, hex};

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
}

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
    /// Tags whose value line ended in CR LF, and in LF.
    pub line_ends: [u64; 2],
    /// Length of the file.
    pub len: u64,
    /// SHA-256 of all bytes, if asked for.
    pub sha256: Option<String>,
}

struct Window {
    reader: Reader,
    source: Source,
    buf: Vec<u8>,
    end: usize,
    /// Offset in the file of the first byte of the buffer.
    base: u64,
    done: bool,
    hasher: Option<Sha256>,
}

impl Window {
    fn new(source: &Source, hash: bool) -> Self {
        Self {
            reader: source.reader(),
            source: source.clone(),
            buf: vec![0; CHUNK],
            end: 0,
            base: 0,
            done: false,
            hasher: hash.then(Sha256::new),
        }
    }

    /// Moves the bytes from `keep` on to the front and reads more behind them.
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
        let from = self.end;
        while self.end < self.buf.len() && !self.done {
            let count = self
                .reader
                .read(&mut self.buf[self.end..])
                .map_err(|error| self.source.unreadable(&error))?;
            self.done = count == 0;
            self.end += count;
        }
        if let Some(hasher) = &mut self.hasher {
            hasher.update(&self.buf[from..self.end]);
        }
        Ok(())
    }

    /// Reads to the end; gives the length of the file and its hash.
    fn finish(mut self) -> Result<(u64, Option<String>), Refusal> {
        while !self.done {
            self.refill(self.end)?;
        }
        let hash = self.hasher.map(|hasher| hex(&hasher.finalize()));
        Ok((self.base + self.end as u64, hash))
    }
}

/// Cuts a whole drawing into tags, up to the EOF tag.
pub(crate) fn tokenize(source: &Source, sink: &mut impl Sink, hash: bool) -> Result<Stream, Refusal> {
    let mut window = Window::new(source, hash);
    window.refill(0)?;
    let head = &window.buf[..window.end];
    let mut stream = Stream {
        form: Form::Ascii,
        utf8_mark: false,
        eof: None,
        tags_end: 0,
        tags_end_line: None,
        unterminated: false,
        last_crlf: false,
        line_ends: [0, 0],
        len: 0,
        sha256: None,
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
        ascii(&mut window, sink, &mut stream)?;
    }
    (stream.len, stream.sha256) = window.finish()?;
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

/// A code line, read from the start of some bytes.
enum CodeLine {
    /// The code, and where its value begins.
    Code(i32, usize),
    /// More bytes are needed to tell.
    Short,
    /// No group code.
    Bad,
}

#[inline(always)]
fn code_line(buf: &[u8], from: usize) -> CodeLine {
    let mut i = from;
    while matches!(buf.get(i), Some(b' ' | b'\t')) {
        i += 1;
    }
    let negative = buf.get(i) == Some(&b'-');
    i += usize::from(negative);
    let digits = i;
    let mut code = 0i32;
    while let Some(byte @ b'0'..=b'9') = buf.get(i) {
        code = code * 10 + i32::from(byte - b'0');
        i += 1;
        if i - digits > 6 {
            return CodeLine::Bad;
        }
    }
    let any = i > digits;
    while matches!(buf.get(i), Some(b' ' | b'\t')) {
        i += 1;
    }
    if buf.get(i) == Some(&b'\r') {
        i += 1;
    }
    match buf.get(i) {
        Some(b'\n') if any => CodeLine::Code(if negative { -code } else { code }, i + 1),
        Some(_) => CodeLine::Bad,
        None => CodeLine::Short,
    }
}

fn ascii(window: &mut Window, sink: &mut impl Sink, stream: &mut Stream) -> Result<(), Refusal> {
    let mut at = if stream.utf8_mark { MARK.len() } else { 0 };
    let mut line = 1u64;
    // Between sections, where nothing but another section or the end may follow.
    let mut outside = false;
    'tags: loop {
        let buf = &window.buf[..window.end];
        let (code, value) = match code_line(buf, at) {
            CodeLine::Code(code, value) => (code, value),
            CodeLine::Short if !window.done => {
                window.refill(at)?;
                at = 0;
                continue;
            }
            CodeLine::Bad | CodeLine::Short => {
                // Blank lines and the old end-of-file byte behind the last tag are no tags.
                while window.buf[at..window.end].iter().all(is_filling) {
                    if window.done {
                        break 'tags;
                    }
                    window.refill(at)?;
                    at = 0;
                }
                // Some programs forget the group code of the end.
                if outside && window.done && window.buf[at..window.end].trim_ascii() == b"EOF" {
                    break;
                }
                return Err(bad_code(&window.buf[at..window.end], line));
            }
        };
        let (value_end, end) = match memchr::memchr(b'\n', &buf[value..]) {
            Some(length) => {
                let end = value + length;
                let crlf = length > 0 && buf[end - 1] == b'\r';
                (end - usize::from(crlf), end + 1)
            }
            None if !window.done => {
                window.refill(at)?;
                at = 0;
                continue;
            }
            // Or what stands behind it.
            None if value == window.end && outside && code == 0 => break,
            None if value == window.end => {
                return Err(Refusal::new(
                    "truncated",
                    "the file ends behind a group code, before its value",
                    "The file is cut off: save or copy the drawing again",
                )
                .at_line(line));
            }
            None => {
                stream.unterminated = true;
                (window.end, window.end)
            }
        };
        if sink.wants(code) {
            let place = Place {
                start: window.base + at as u64,
                value: window.base + value as u64,
                value_end: window.base + value_end as u64,
                end: window.base + end as u64,
                line: Some(line),
                after_crlf: if line == 1 { value >= 2 && buf[value - 2] == b'\r' } else { stream.last_crlf },
            };
            let bytes = &buf[value..value_end];
            if code == 0 {
                outside = bytes.trim_ascii() == b"ENDSEC";
                if bytes.trim_ascii() == b"EOF" {
                    stream.eof = Some(place);
                }
            }
            sink.tag(code, bytes, &place)?;
        }
        if !stream.unterminated {
            stream.last_crlf = end - value_end == 2;
            stream.line_ends[usize::from(!stream.last_crlf)] += 1;
        }
        at = end;
        line += 2;
        if stream.eof.is_some() {
            break;
        }
        if at == window.end && window.done {
            break;
        }
    }
    stream.tags_end = window.base + at as u64;
    stream.tags_end_line = Some(line);
    Ok(())
}

fn is_filling(byte: &u8) -> bool {
    matches!(byte, b' ' | b'\t' | b'\r' | b'\n' | 0x1a | 0)
}

fn bad_code(bytes: &[u8], line: u64) -> Refusal {
    let text = bytes.split(|b| *b == b'\n').next().unwrap_or_default();
    let shown: String = String::from_utf8_lossy(&text[..text.len().min(40)])
        .trim_end()
        .chars()
        .map(|c| if c.is_control() { '\u{fffd}' } else { c })
        .collect();
    let message = if shown.is_empty() {
        "a blank line stands where a group code is due".to_owned()
    } else {
        format!("\u{201c}{shown}\u{201d} stands where a group code is due")
    };
    let remedy = if line == 1 {
        "Check that the file is a DXF drawing"
    } else {
        "The drawing is damaged near this line: save it again from the CAD program"
    };
    Refusal::new("tag-code", message, remedy).at_line(line)
}

/// A tag of a binary drawing: where its value begins and ends, where it ends, and the value.
struct BinaryTag<'a> {
    code: i32,
    value: usize,
    value_end: usize,
    end: usize,
    bytes: &'a [u8],
    kind: Kind,
}

enum Cut<'a> {
    Tag(BinaryTag<'a>),
    Short,
    Unknown(i32),
}

fn cut_binary(buf: &[u8], at: usize, wide: bool) -> Cut<'_> {
    let word = |i: usize| Some(i32::from(u16::from_le_bytes([*buf.get(i)?, *buf.get(i + 1)?])));
    let code = match (wide, buf.get(at)) {
        (true, _) => word(at).map(|code| (code, at + 2)),
        (false, Some(255)) => word(at + 1).map(|code| (code, at + 3)),
        (false, byte) => byte.map(|code| (i32::from(*code), at + 1)),
    };
    let Some((code, value)) = code else {
        return Cut::Short;
    };
    let Some(kind) = kind(code) else {
        return Cut::Unknown(code);
    };
    let fixed = |size: usize| Some((value, value + size, value + size));
    let ends = match kind {
        Kind::Text => buf
            .get(value..)
            .and_then(|rest| memchr::memchr(0, rest))
            .map(|length| (value, value + length, value + length + 1)),
        Kind::Chunk => buf.get(value).map(|length| {
            let end = value + 1 + usize::from(*length);
            (value + 1, end, end)
        }),
        Kind::Real | Kind::Int64 => fixed(8),
        Kind::Int32 => fixed(4),
        Kind::Int16 => fixed(2),
        Kind::Bool => fixed(if wide { 1 } else { 2 }),
    };
    match ends {
        Some((value, value_end, end)) if end <= buf.len() => {
            Cut::Tag(BinaryTag { code, value, value_end, end, bytes: &buf[value..value_end], kind })
        }
        _ => Cut::Short,
    }
}

fn binary(window: &mut Window, sink: &mut impl Sink, stream: &mut Stream, wide: bool) -> Result<(), Refusal> {
    let mut at = SENTINEL.len();
    let mut scratch = Vec::new();
    loop {
        if at == window.end && window.done {
            break;
        }
        let tag = match cut_binary(&window.buf[..window.end], at, wide) {
            Cut::Tag(tag) => tag,
            Cut::Short if !window.done => {
                window.refill(at)?;
                at = 0;
                continue;
            }
            Cut::Short => {
                if window.buf[at..window.end].iter().all(is_filling) {
                    break;
                }
                return Err(Refusal::new(
                    "truncated",
                    format!(
                        "the binary drawing ends in the middle of the tag at byte {}",
                        window.base + at as u64
                    ),
                    "The file is cut off: save or copy the drawing again",
                ));
            }
            Cut::Unknown(code) => {
                return Err(Refusal::new(
                    "tag-code",
                    format!(
                        "group code {code} at byte {} is none of the format, so the length of its value is not known",
                        window.base + at as u64
                    ),
                    "Save the drawing again as ASCII DXF",
                ));
            }
        };
        if sink.wants(tag.code) {
            let place = Place {
                start: window.base + at as u64,
                value: window.base + tag.value as u64,
                value_end: window.base + tag.value_end as u64,
                end: window.base + tag.end as u64,
                line: None,
                after_crlf: false,
            };
            let bytes = if tag.kind == Kind::Text {
                tag.bytes
            } else {
                scratch.clear();
                render(tag.kind, tag.bytes, &mut scratch);
                &scratch
            };
            if tag.code == 0 && bytes.trim_ascii() == b"EOF" {
                stream.eof = Some(place);
            }
            sink.tag(tag.code, bytes, &place)?;
        }
        at = tag.end;
        if stream.eof.is_some() {
            break;
        }
    }
    stream.tags_end = window.base + at as u64;
    Ok(())
}

/// Writes a binary value as an ASCII drawing would hold it.
fn render(kind: Kind, bytes: &[u8], out: &mut Vec<u8>) {
    use std::io::Write;
    let mut padded = [0; 8];
    let size = bytes.len().min(8);
    padded[..size].copy_from_slice(&bytes[..size]);
    let negative = size > 0 && kind != Kind::Bool && bytes[size - 1] & 0x80 != 0;
    if negative {
        padded[size..].fill(0xff);
    }
    // Writing to memory cannot fail.
    let _ = match kind {
        Kind::Text => out.write_all(bytes),
        Kind::Real => write!(out, "{:?}", f64::from_le_bytes(padded)),
        Kind::Chunk => bytes.iter().try_for_each(|byte| write!(out, "{byte:02X}")),
        Kind::Int16 | Kind::Int32 | Kind::Int64 | Kind::Bool => {
            write!(out, "{}", i64::from_le_bytes(padded))
        }
    };
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
        let stream = tokenize(&Source::from_bytes(bytes), &mut all, true)?;
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
        assert_eq!(stream.line_ends, [1, 3]);
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
        assert_eq!(stream.sha256.unwrap(), Source::from_bytes(text).sha256().unwrap());
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
