//! Binary drawings, cut into tags.

use crate::refusal::Refusal;
use crate::tags::codes::{Kind, kind};
use crate::tags::tokens::{Place, SENTINEL, Sink, Stream, Walk, Window, deliver, is_filling, settle};

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

/// The first zero byte. Most texts are short, for which a plain look is the fastest.
#[inline(always)]
fn zero(bytes: &[u8]) -> Option<usize> {
    let near = bytes.len().min(16);
    let found = bytes[..near].iter().position(|byte| *byte == 0);
    found.or_else(|| memchr::memchr(0, &bytes[near..]).map(|far| near + far))
}

#[inline(always)]
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
        Kind::Text => {
            buf.get(value..).and_then(zero).map(|length| (value, value + length, value + length + 1))
        }
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

/// Cuts a binary drawing into tags.
pub(super) fn binary<S: Sink>(
    window: &mut Window,
    sink: &mut S,
    stream: &mut Stream,
    wide: bool,
) -> Result<(), Refusal> {
    let mut walk = Walk { at: SENTINEL.len(), line: 0, held: None, outside: false };
    let mut scratch = Vec::new();
    loop {
        let buf = window.bytes();
        if walk.at == buf.len() && window.done {
            break;
        }
        let at = walk.at;
        let tag = match cut_binary(buf, at, wide) {
            Cut::Tag(tag) => tag,
            Cut::Short if !window.done => {
                window.more(sink, &mut walk)?;
                continue;
            }
            Cut::Short => {
                if buf[at..].iter().all(is_filling) {
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
            let value = rendered(&tag, &mut scratch);
            deliver(
                sink,
                stream,
                &mut walk,
                (tag.code, value, &place),
                [at, tag.end],
                |sink, from, to, _| again(&buf[..to], from, wide, sink),
            )?;
        }
        walk.at = tag.end;
        if stream.eof.is_some() {
            break;
        }
    }
    let buf = window.bytes();
    settle(sink, walk.held, walk.at, |sink, from, to, _| again(&buf[..to], from, wide, sink))?;
    stream.tags_end = window.base + walk.at as u64;
    Ok(())
}

/// Tags that were cut before, once more.
fn again(buf: &[u8], from: usize, wide: bool, sink: &mut impl Sink) -> Result<(), Refusal> {
    let mut scratch = Vec::new();
    let mut at = from;
    while at < buf.len()
        && let Cut::Tag(tag) = cut_binary(buf, at, wide)
    {
        sink.recall(tag.code, rendered(&tag, &mut scratch), None)?;
        at = tag.end;
    }
    Ok(())
}

/// The value as an ASCII drawing would hold it.
fn rendered<'a>(tag: &BinaryTag<'a>, scratch: &'a mut Vec<u8>) -> &'a [u8] {
    if tag.kind == Kind::Text {
        return tag.bytes;
    }
    scratch.clear();
    render(tag.kind, tag.bytes, scratch);
    scratch
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
