//! ASCII drawings, cut into tags: step by step where every tag is asked for, and by leaps over the many that are not.

use crate::refusal::Refusal;
use crate::tags::lines::{self, AHEAD, BLOCK, Bytes, Masks};
use crate::tags::tokens::{Place, Sink, Stream, Walk, Window, deliver, is_filling, settle};

/// Bytes that make a leap worth its start.
const WORTH_IT: usize = 4 * (BLOCK + AHEAD);

/// A code line, read from the start of some bytes.
#[derive(Clone, Copy)]
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

/// Cuts an ASCII drawing into tags; the first one stands behind `first` bytes.
pub(super) fn ascii<S: Sink>(
    window: &mut Window,
    sink: &mut S,
    stream: &mut Stream,
    first: usize,
    way: Way,
) -> Result<(), Refusal> {
    let mut walk = Walk { at: first, line: 1, held: None, outside: false };
    let leap = leaper::<S>(way);
    while step(window, sink, stream, &mut walk)? && stream.eof.is_none() {
        if let Some(leap) = leap
            && sink.skims()
            && window.bytes().len() - walk.at > WORTH_IT
        {
            leap(window.bytes(), window.base, sink, stream, &mut walk)?;
            if stream.eof.is_some() {
                break;
            }
        }
    }
    let buf = window.bytes();
    settle(sink, walk.held, walk.at, |sink, from, to, line| again(&buf[..to], from, line, sink))?;
    stream.tags_end = window.base + walk.at as u64;
    stream.tags_end_line = Some(walk.line);
    Ok(())
}

/// One tag; false at the end.
fn step<S: Sink>(
    window: &mut Window,
    sink: &mut S,
    stream: &mut Stream,
    walk: &mut Walk,
) -> Result<bool, Refusal> {
    loop {
        let buf = window.bytes();
        let at = walk.at;
        if at == buf.len() && window.done && walk.line > 1 {
            return Ok(false);
        }
        let (code, value) = match code_line(buf, at) {
            CodeLine::Code(code, value) => (code, value),
            CodeLine::Short if !window.done => {
                window.more(sink, walk)?;
                continue;
            }
            CodeLine::Bad | CodeLine::Short => {
                // Blank lines and the old end-of-file byte behind the last tag are no tags.
                return only_filling(window, sink, walk);
            }
        };
        let (value_end, end) = match memchr::memchr(b'\n', &buf[value..]) {
            Some(length) => {
                let end = value + length;
                let crlf = length > 0 && buf[end - 1] == b'\r';
                (end - usize::from(crlf), end + 1)
            }
            None if !window.done => {
                window.more(sink, walk)?;
                continue;
            }
            // A lone group code of the end, whose value was forgotten.
            None if value == buf.len() && walk.outside && code == 0 => return Ok(false),
            None if value == buf.len() => {
                return Err(Refusal::new(
                    "truncated",
                    "the file ends behind a group code, before its value",
                    "The file is cut off: save or copy the drawing again",
                )
                .at_line(walk.line));
            }
            None => {
                stream.unterminated = true;
                (buf.len(), buf.len())
            }
        };
        if sink.wants(code) {
            let place = Place {
                start: window.base + at as u64,
                value: window.base + value as u64,
                value_end: window.base + value_end as u64,
                end: window.base + end as u64,
                line: Some(walk.line),
                after_crlf: if walk.line == 1 {
                    value >= 2 && buf[value - 2] == b'\r'
                } else {
                    stream.last_crlf
                },
            };
            deliver(
                sink,
                stream,
                walk,
                (code, &buf[value..value_end], &place),
                [at, end],
                |sink, from, to, line| again(&buf[..to], from, line, sink),
            )?;
        }
        if !stream.unterminated {
            stream.last_crlf = end - value_end == 2;
            stream.line_ends[usize::from(!stream.last_crlf)] = true;
        }
        walk.at = end;
        walk.line += 2;
        return Ok(true);
    }
}

/// Reads on to the end of a file that should hold nothing more; false, or the refusal of what it holds.
fn only_filling(window: &mut Window, sink: &impl Sink, walk: &mut Walk) -> Result<bool, Refusal> {
    loop {
        let rest = &window.bytes()[walk.at..];
        // Some programs forget the group code of the end.
        if walk.outside && window.done && rest.trim_ascii() == b"EOF" {
            return Ok(false);
        }
        if !rest.iter().all(is_filling) {
            return Err(bad_code(rest, walk.line));
        }
        if window.done {
            return Ok(false);
        }
        window.more(sink, walk)?;
    }
}

/// Tags that were cut before, once more.
fn again(buf: &[u8], from: usize, mut line: u64, sink: &mut impl Sink) -> Result<(), Refusal> {
    let mut at = from;
    while at < buf.len()
        && let CodeLine::Code(code, value) = code_line(buf, at)
    {
        let end = memchr::memchr(b'\n', &buf[value..]).map_or(buf.len(), |length| value + length);
        let crlf = end > value && end < buf.len() && buf[end - 1] == b'\r';
        sink.recall(code, &buf[value..end - usize::from(crlf)], Some(line))?;
        at = end + 1;
        line += 2;
    }
    Ok(())
}

/// How to get over the tags that are not asked for.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Way {
    /// As fast as this processor can.
    Best,
    /// With what every processor has.
    #[cfg_attr(not(test), allow(dead_code))]
    Plain,
    /// Not at all: tag by tag.
    #[cfg_attr(not(test), allow(dead_code))]
    Steps,
}

type Leap<S> = fn(&[u8], u64, &mut S, &mut Stream, &mut Walk) -> Result<(), Refusal>;

fn leaper<S: Sink>(way: Way) -> Option<Leap<S>> {
    #[cfg(target_arch = "x86_64")]
    if way == Way::Best
        && is_x86_feature_detected!("avx2")
        && is_x86_feature_detected!("bmi1")
        && is_x86_feature_detected!("popcnt")
        && is_x86_feature_detected!("lzcnt")
    {
        return Some(leap_by_vectors);
    }
    (way != Way::Steps).then_some(leap_plainly)
}

fn leap_plainly<S: Sink>(
    buf: &[u8],
    base: u64,
    sink: &mut S,
    stream: &mut Stream,
    walk: &mut Walk,
) -> Result<(), Refusal> {
    leap(buf, base, sink, stream, walk, lines::plain)
}

/// Only to be called where AVX2, BMI1, POPCNT and LZCNT are there, as [`leaper`] sees to.
#[cfg(target_arch = "x86_64")]
// What needs these instructions is a function of its own, so that all around it is compiled with them.
#[allow(unsafe_code)]
fn leap_by_vectors<S: Sink>(
    buf: &[u8],
    base: u64,
    sink: &mut S,
    stream: &mut Stream,
    walk: &mut Walk,
) -> Result<(), Refusal> {
    #[target_feature(enable = "avx2,bmi1,popcnt,lzcnt")]
    fn inner<S: Sink>(
        buf: &[u8],
        base: u64,
        sink: &mut S,
        stream: &mut Stream,
        walk: &mut Walk,
    ) -> Result<(), Refusal> {
        leap(buf, base, sink, stream, walk, |bytes| lines::vector(bytes))
    }
    // SAFETY: `leaper`, the only one who hands this function out, has looked for the four of them.
    unsafe { inner(buf, base, sink, stream, walk) }
}

/// Passes over tags that the sink does not want, handing it those that it may; stops before one that is damaged or not
/// whole in the window, and where the sink wants to see every tag. The walk must stand at a code line.
#[inline(always)]
fn leap<S: Sink>(
    buf: &[u8],
    base: u64,
    sink: &mut S,
    stream: &mut Stream,
    walk: &mut Walk,
    masks: impl Fn(&Bytes) -> Masks,
) -> Result<(), Refusal> {
    let entry = walk.at;
    let entry_crlf = stream.last_crlf;
    let mut block = entry;
    let mut line = walk.line;
    // What the block before leaves: whether its last line is a value line, is finished, ends in a carriage return.
    let mut in_value = false;
    let mut fresh = 1u64;
    let mut returned = 0u64;
    let mut ends = [0u64; 2];
    let mut stop = None;
    // The end of the tag handed over last, the line behind it, and whether it ends in CR LF.
    let mut handed = (entry, walk.line, entry_crlf);
    'blocks: while let Some(bytes) = buf.get(block..).and_then(|rest| rest.first_chunk()) {
        let Masks { newlines, returns, dull } = masks(bytes);
        // Every other line feed ends a value.
        let odd = prefix_parity(newlines);
        let values = newlines & if in_value { odd } else { !odd };
        let starts = values << 1 | fresh;
        let crlf = values & (returns << 1 | returned);
        let mut asked = starts & !dull;
        while asked != 0 {
            let bit = asked.trailing_zeros();
            asked &= asked - 1;
            let before = (1u64 << bit) - 1;
            let at = block + bit as usize;
            let here = line + u64::from((newlines & before).count_ones());
            let CodeLine::Code(code, value) = quick_code_line(buf, at) else {
                ends[0] |= crlf & before;
                ends[1] |= values & !crlf & before;
                stop = Some((at, here));
                break 'blocks;
            };
            if !sink.wants(code) {
                continue;
            }
            let Some(line_end) = line_end(buf, block, newlines, value) else {
                ends[0] |= crlf & before;
                ends[1] |= values & !crlf & before;
                stop = Some((at, here));
                break 'blocks;
            };
            let value_crlf = line_end > value && buf[line_end - 1] == b'\r';
            let value_end = line_end - usize::from(value_crlf);
            let end = line_end + 1;
            if sink.brief(code, &buf[value..value_end]) {
                handed = (end, here + 2, value_crlf);
                continue;
            }
            let place = Place {
                start: base + at as u64,
                value: base + value as u64,
                value_end: base + value_end as u64,
                end: base + end as u64,
                line: Some(here),
                after_crlf: if at == entry { entry_crlf } else { buf[at - 2] == b'\r' },
            };
            deliver(
                sink,
                stream,
                walk,
                (code, &buf[value..value_end], &place),
                [at, end],
                |sink, from, to, line| again(&buf[..to], from, line, sink),
            )?;
            handed = (end, here + 2, value_crlf);
            if stream.eof.is_some() || !sink.skims() {
                let passed = if end - block >= BLOCK { u64::MAX } else { (1u64 << (end - block)) - 1 };
                ends[0] |= crlf & passed;
                ends[1] |= values & !crlf & passed;
                stop = Some((end, here + 2));
                break 'blocks;
            }
        }
        ends[0] |= crlf;
        ends[1] |= values & !crlf;
        if starts != 0 {
            let last = starts.ilog2();
            walk.at = block + last as usize;
            walk.line = line + u64::from((newlines & ((1u64 << last) - 1)).count_ones());
        }
        line += u64::from(newlines.count_ones());
        in_value ^= newlines.count_ones() % 2 == 1;
        fresh = values >> (BLOCK - 1);
        returned = returns >> (BLOCK - 1);
        block += BLOCK;
    }
    if let Some((at, here)) = stop {
        walk.at = at;
        walk.line = here;
    } else if fresh == 1 {
        walk.at = block;
        walk.line = line;
    }
    if handed.0 > walk.at {
        // Its value ends behind the last whole block.
        (walk.at, walk.line, _) = handed;
    }
    if handed.0 == walk.at && walk.at > entry {
        ends[usize::from(!handed.2)] |= 1;
    }
    for (seen, bits) in stream.line_ends.iter_mut().zip(ends) {
        *seen |= bits != 0;
    }
    if walk.at > entry {
        stream.last_crlf = buf[walk.at - 2] == b'\r';
    }
    Ok(())
}

/// For each bit, whether the number of bits set from the lowest up to it is odd.
#[inline(always)]
fn prefix_parity(mut bits: u64) -> u64 {
    for shift in [1, 2, 4, 8, 16, 32] {
        bits ^= bits << shift;
    }
    bits
}

/// The line feed that ends the line with a place in it, given the line feeds of a block that begins before it.
#[inline(always)]
fn line_end(buf: &[u8], block: usize, newlines: u64, from: usize) -> Option<usize> {
    let inside = from - block;
    let rest = if inside < BLOCK { newlines >> inside } else { 0 };
    if rest != 0 {
        return Some(from + rest.trailing_zeros() as usize);
    }
    let next = from.max(block + BLOCK);
    memchr::memchr(b'\n', &buf[next..]).map(|length| next + length)
}

/// [`code_line`], with a short way for codes as most programs write them: in three places.
#[inline(always)]
fn quick_code_line(buf: &[u8], at: usize) -> CodeLine {
    if let Some([b0, b1, b2, b3, b4]) = buf.get(at..).and_then(|rest| rest.first_chunk()) {
        let digit = |byte: u8| i32::from(byte.wrapping_sub(b'0'));
        let ends = match (b3, b4) {
            (b'\n', _) => 4,
            (b'\r', b'\n') => 5,
            _ => return code_line(buf, at),
        };
        if b2.is_ascii_digit() {
            if *b0 == b' ' && *b1 == b' ' {
                return CodeLine::Code(digit(*b2), at + ends);
            }
            if b0.is_ascii_digit() && b1.is_ascii_digit() {
                return CodeLine::Code(100 * digit(*b0) + 10 * digit(*b1) + digit(*b2), at + ends);
            }
        }
    }
    code_line(buf, at)
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

#[cfg(test)]
mod tests {
    use super::*;
    use crate::tags::source::Source;
    use crate::tags::tokens::{Form, tokenize_by};
    use proptest::prelude::*;

    /// Wants what a scan wants, and everything for a while after certain values; notes all it is told.
    #[derive(Default)]
    struct Notes {
        heard: Vec<String>,
        all: u32,
        holding: bool,
        recalled: bool,
    }

    impl Sink for Notes {
        fn begin(&mut self, _: Form, _: bool) {}
        fn wants(&self, code: i32) -> bool {
            self.all > 0 || matches!(code, 0 | 5 | 8 | 67 | 102 | 330 | 1001)
        }
        fn skims(&self) -> bool {
            self.all == 0
        }
        fn holds(&self) -> bool {
            self.holding
        }
        fn settle(&mut self) {
            self.holding = false;
            self.heard.push("settle".into());
        }
        fn recalls(&mut self) -> bool {
            std::mem::take(&mut self.recalled)
        }
        fn recall(&mut self, code: i32, value: &[u8], line: Option<u64>) -> Result<(), Refusal> {
            self.heard.push(format!("again {code} {} {line:?}", value.escape_ascii()));
            Ok(())
        }
        fn tag(&mut self, code: i32, value: &[u8], place: &Place) -> Result<(), Refusal> {
            self.heard.push(format!("{code} {} {place:?}", value.escape_ascii()));
            self.all = self.all.saturating_sub(1);
            if code == 0 {
                self.holding = value.len().is_multiple_of(2);
            }
            if code == 8 && std::mem::take(&mut self.holding) && value.ends_with(b"7") {
                self.recalled = true;
                self.all = 5;
            }
            if code == 5 && value.ends_with(b"3") {
                self.all = 3;
            }
            Ok(())
        }
    }

    fn heard(source: &Source, way: Way) -> (Vec<String>, String) {
        let mut notes = Notes::default();
        let end = match tokenize_by(source, &mut notes, way) {
            Ok(stream) => format!("{stream:?}"),
            Err(refusal) => format!("{refusal:?}"),
        };
        // What is passed over tag by tag need not be whole where the sink is asked first, so all ways end alike.
        (notes.heard, end)
    }

    fn agree(bytes: &[u8]) -> usize {
        let source = Source::from_bytes(bytes);
        let steps = heard(&source, Way::Steps);
        for way in [Way::Best, Way::Plain] {
            let leaps = heard(&source, way);
            assert_eq!(leaps.1, steps.1, "{way:?}");
            let same = leaps.0.iter().zip(&steps.0).take_while(|(a, b)| a == b).count();
            let near = |heard: &[String]| heard[same.saturating_sub(3)..heard.len().min(same + 1)].to_vec();
            assert_eq!(near(&leaps.0), near(&steps.0), "{way:?}");
            assert_eq!(leaps.0.len(), steps.0.len(), "{way:?}");
        }
        steps.0.len()
    }

    #[test]
    fn outside_drawings_are_cut_alike() {
        let shared = std::env::var_os("THRUSTMARK_SHARED").map_or_else(
            || std::path::Path::new(env!("CARGO_MANIFEST_DIR")).join("../shared"),
            std::path::PathBuf::from,
        );
        let Ok(folder) = std::fs::read_dir(shared.join("corpus")) else {
            eprintln!("SKIPPED: no outside drawings at {}", shared.display());
            return;
        };
        let files = folder.map(|entry| std::fs::read(entry.unwrap().path()).unwrap_or_default());
        assert!(files.map(|bytes| agree(&bytes)).sum::<usize>() > 100_000);
    }

    fn tag() -> impl Strategy<Value = String> {
        let code = prop_oneof![
            4 => prop_oneof![Just(10), Just(20), Just(40), Just(62), Just(100), Just(70), Just(67), Just(1)],
            4 => prop_oneof![Just(0), Just(5), Just(8), Just(330), Just(102), Just(1001)],
            1 => -5..1100i32,
        ];
        let written = (code, 0..20u8).prop_map(|(code, form)| match form {
            0 => format!("{code}"),
            1 => format!("{code:>6}"),
            2 => format!("\t{code} "),
            3 => format!("{code:03}"),
            _ => format!("{code:>3}"),
        });
        let value = prop_oneof![
            4 => "[A-Z0-9. ]{0,12}",
            2 => prop_oneof![Just("  0".to_owned()), Just(" 10".to_owned()), Just("100".to_owned()), Just("\r".to_owned())],
            1 => "[a-z]{60,200}",
        ];
        let end = || prop_oneof![9 => Just("\n"), 1 => Just("\r\n")];
        (written, end(), value, end()).prop_map(|(code, a, value, b)| format!("{code}{a}{value}{b}"))
    }

    proptest! {
        #[test]
        fn invented_drawings_are_cut_alike(
            tags in proptest::collection::vec(tag(), 0..300),
            crlf in any::<bool>(),
            fault in prop_oneof![3 => Just(""), 1 => Just("x"), 1 => Just("\n"), 1 => Just("  0\nEOF\n 10\n"), 1 => Just("  0\nEOF\nrest")],
            at in 0..300usize,
        ) {
            let mut tags = tags;
            tags.insert(at.min(tags.len()), fault.to_owned());
            let mut text = format!("  0\nSECTION\n{}", tags.concat());
            if crlf {
                text = text.replace("\r\n", "\n").replace('\n', "\r\n");
            }
            agree(text.as_bytes());
        }
    }
}
