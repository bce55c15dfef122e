//! Text in a drawing: its encoding, and the escapes of the format.
//!
//! Up to R2004 text is in the code page that `$DWGCODEPAGE` names, from R2007 (AC1021) on it is UTF-8. In both,
//! `\U+XXXX` stands for a UTF-16 unit, `\M+nXXXX` for a character of one of five double-byte code pages, and a caret
//! with the next character for a control character.

use std::borrow::Cow;

use encoding_rs::Encoding;
use oem_cp::code_table_type::TableType;

/// What made the reading of a text doubtful.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Doubt {
    /// The bytes are no text of the drawing's encoding; they were read as UTF-8, which they are.
    ReadAsUtf8,
    /// The bytes are no UTF-8 as the version demands; they were read by the code page that the drawing names.
    ReadByPage,
    /// The bytes make no sense in any way; what could not be read shows as replacement characters.
    Unreadable,
    /// The bytes were read by the code page, as the format demands, but they would be valid UTF-8 too.
    LooksLikeUtf8,
}

#[derive(Debug, Clone, Copy)]
enum Page {
    /// A page of the WHATWG Encoding Standard.
    Standard(&'static Encoding),
    /// A single-byte page of DOS.
    Dos(&'static TableType),
}

/// Reads the text of one drawing.
#[derive(Debug, Clone)]
pub struct Decoder {
    page: Page,
    page_name: String,
    utf8: bool,
    known: bool,
}

impl Decoder {
    /// For a drawing of the given version rank (1021 for AC1021), `$DWGCODEPAGE`, and whether it begins with a UTF-8
    /// byte order mark.
    pub fn new(rank: u32, code_page: Option<&str>, utf8_mark: bool) -> Self {
        let name = code_page.map_or_else(|| "ANSI_1252".to_owned(), |n| n.trim().to_ascii_uppercase());
        let found = page_by_name(&name);
        Self {
            page: found.unwrap_or(Page::Standard(encoding_rs::WINDOWS_1252)),
            known: found.is_some(),
            page_name: if found.is_some() { name } else { "ANSI_1252".to_owned() },
            utf8: rank >= 1021 || utf8_mark,
        }
    }

    /// Name of the encoding that texts are read by.
    pub fn name(&self) -> &str {
        if self.utf8 { "UTF-8" } else { &self.page_name }
    }

    /// Whether the drawing's code page is one that is known here; if not, ANSI_1252 stands in for it.
    pub fn page_known(&self) -> bool {
        self.known
    }

    /// Whether texts are UTF-8.
    pub fn is_utf8(&self) -> bool {
        self.utf8
    }

    /// The characters of a text as its encoding has them, with all escapes left standing.
    pub fn characters<'a>(&self, bytes: &'a [u8]) -> (Cow<'a, str>, Option<Doubt>) {
        let utf8 = std::str::from_utf8(bytes);
        if bytes.is_ascii() {
            return (utf8.map_or(Cow::Borrowed(""), Cow::Borrowed), None);
        }
        if self.utf8 {
            return match utf8 {
                Ok(text) => (Cow::Borrowed(text), None),
                Err(_) => match self.by_page(bytes) {
                    Some(text) => (text, Some(Doubt::ReadByPage)),
                    None => (String::from_utf8_lossy(bytes), Some(Doubt::Unreadable)),
                },
            };
        }
        match (self.by_page(bytes), utf8) {
            (Some(text), Ok(_)) => (text, Some(Doubt::LooksLikeUtf8)),
            (Some(text), Err(_)) => (text, None),
            (None, Ok(text)) => (Cow::Borrowed(text), Some(Doubt::ReadAsUtf8)),
            (None, Err(_)) => {
                let text = match self.page {
                    Page::Standard(page) => page.decode_without_bom_handling(bytes).0,
                    Page::Dos(table) => Cow::Owned(table.decode_string_lossy(bytes)),
                };
                (text, Some(Doubt::Unreadable))
            }
        }
    }

    /// A text with its escapes resolved: what a person sees as a name.
    pub fn decode(&self, bytes: &[u8]) -> (String, Option<Doubt>) {
        let (text, doubt) = self.characters(bytes);
        (carets(&unescape(&text)), doubt)
    }

    /// As [`Decoder::decode`], without the doubt.
    pub fn text(&self, bytes: &[u8]) -> String {
        self.decode(bytes).0
    }

    fn by_page<'a>(&self, bytes: &'a [u8]) -> Option<Cow<'a, str>> {
        match self.page {
            Page::Standard(page) => page.decode_without_bom_handling_and_without_replacement(bytes),
            Page::Dos(table) => table.decode_string_checked(bytes).map(Cow::Owned),
        }
    }
}

fn page_by_name(name: &str) -> Option<Page> {
    use encoding_rs as e;
    let number: Option<u16> = ["ANSI_", "ANSI", "DOS", "DOS_", "CP", "WINDOWS-"]
        .iter()
        .find_map(|prefix| name.strip_prefix(prefix)?.parse().ok());
    let standard = match (name, number) {
        (_, Some(874)) => e::WINDOWS_874,
        (_, Some(932)) => e::SHIFT_JIS,
        (_, Some(936)) | ("GB2312", _) => e::GBK,
        (_, Some(949)) | ("KSC5601", _) => e::EUC_KR,
        (_, Some(950)) | ("BIG5", _) => e::BIG5,
        (_, Some(1250)) => e::WINDOWS_1250,
        (_, Some(1251)) => e::WINDOWS_1251,
        (_, Some(1252)) | ("ASCII" | "UNDEFINED" | "ISO8859-1" | "ISO_8859-1", _) => e::WINDOWS_1252,
        (_, Some(1253)) => e::WINDOWS_1253,
        (_, Some(1254)) | ("ISO8859-9", _) => e::WINDOWS_1254,
        (_, Some(1255)) => e::WINDOWS_1255,
        (_, Some(1256)) => e::WINDOWS_1256,
        (_, Some(1257)) => e::WINDOWS_1257,
        (_, Some(1258)) => e::WINDOWS_1258,
        ("ISO8859-2", _) => e::ISO_8859_2,
        ("ISO8859-3", _) => e::ISO_8859_3,
        ("ISO8859-4", _) => e::ISO_8859_4,
        ("ISO8859-5", _) => e::ISO_8859_5,
        ("ISO8859-6", _) => e::ISO_8859_6,
        ("ISO8859-7", _) => e::ISO_8859_7,
        ("ISO8859-8", _) => e::ISO_8859_8,
        ("MACINTOSH" | "MAC-ROMAN", _) => e::MACINTOSH,
        ("UTF-8" | "UTF8", _) | (_, Some(65001)) => e::UTF_8,
        (_, Some(page)) => {
            return oem_cp::code_table::DECODING_TABLE_CP_MAP.get(&page).map(Page::Dos);
        }
        _ => return None,
    };
    Some(Page::Standard(standard))
}

/// Resolves `\U+XXXX` (surrogate pairs too) and `\M+nXXXX`; what is not well formed stays as it is.
pub fn unescape(text: &str) -> Cow<'_, str> {
    if !text.contains("\\U+") && !text.contains("\\u+") && !text.contains("\\M+") {
        return Cow::Borrowed(text);
    }
    let mut out = String::with_capacity(text.len());
    let mut rest = text;
    while let Some(at) = rest.find('\\') {
        out.push_str(&rest[..at]);
        rest = &rest[at..];
        if let Some((character, used)) = unicode_escape(rest).or_else(|| multibyte_escape(rest)) {
            out.push(character);
            rest = &rest[used..];
        } else {
            out.push('\\');
            rest = &rest[1..];
        }
    }
    out.push_str(rest);
    Cow::Owned(out)
}

fn unicode_unit(text: &str) -> Option<u16> {
    let digits = text.strip_prefix("\\U+").or_else(|| text.strip_prefix("\\u+"))?;
    hex4(digits)
}

fn hex4(digits: &str) -> Option<u16> {
    let digits = digits.get(..4)?;
    if !digits.bytes().all(|b| b.is_ascii_hexdigit()) {
        return None;
    }
    u16::from_str_radix(digits, 16).ok()
}

fn unicode_escape(text: &str) -> Option<(char, usize)> {
    let first = unicode_unit(text)?;
    if let Some(character) = char::from_u32(u32::from(first)) {
        return Some((character, 7));
    }
    let second = unicode_unit(text.get(7..)?)?;
    let character = char::decode_utf16([first, second]).next()?.ok()?;
    Some((character, 14))
}

fn multibyte_escape(text: &str) -> Option<(char, usize)> {
    let rest = text.strip_prefix("\\M+")?;
    let page = match rest.as_bytes().first()? {
        b'1' => encoding_rs::SHIFT_JIS,
        b'2' => encoding_rs::BIG5,
        b'3' => encoding_rs::EUC_KR,
        b'5' => encoding_rs::GBK,
        _ => return None,
    };
    let bytes = hex4(rest.get(1..)?)?.to_be_bytes();
    let text = page.decode_without_bom_handling_and_without_replacement(&bytes)?;
    let mut characters = text.chars();
    let first = characters.next()?;
    characters.next().is_none().then_some((first, 8))
}

/// Resolves caret codes: `^J` is a line feed, `^I` a tab, `^ ` the caret itself.
pub fn carets(text: &str) -> String {
    if !text.contains('^') {
        return text.to_owned();
    }
    let mut out = String::with_capacity(text.len());
    let mut characters = text.chars();
    while let Some(character) = characters.next() {
        if character != '^' {
            out.push(character);
            continue;
        }
        match characters.next() {
            Some(' ') => out.push('^'),
            Some(code @ '@'..='_') => out.push(char::from(code as u8 - b'@')),
            Some(other) => {
                out.push('^');
                out.push(other);
            }
            None => out.push('^'),
        }
    }
    out
}

/// Writes characters as the format wants them, one piece of bytes for each, so that a caller may cut between any two.
pub(crate) fn encode(text: &str, utf8: bool) -> Vec<Vec<u8>> {
    let mut pieces = Vec::with_capacity(text.len());
    for (at, character) in text.char_indices() {
        let after = &text[at + character.len_utf8()..];
        pieces.push(match character {
            '^' => b"^ ".to_vec(),
            '\0'..='\x1f' => vec![b'^', character as u8 + b'@'],
            // A backslash that would read as the start of an escape.
            '\\' if after.starts_with("U+") || after.starts_with("u+") || after.starts_with("M+") => {
                b"\\U+005C".to_vec()
            }
            ' '..='\x7e' => vec![character as u8],
            _ if utf8 => character.to_string().into_bytes(),
            _ => {
                let mut units = [0; 2];
                character
                    .encode_utf16(&mut units)
                    .iter()
                    .flat_map(|unit| format!("\\U+{unit:04X}").into_bytes())
                    .collect()
            }
        });
    }
    pieces
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn pages() {
        let read = |page: &str, bytes: &[u8]| Decoder::new(1015, Some(page), false).decode(bytes);
        assert_eq!(read("ANSI_1252", b"Br\xfccke"), ("Brücke".into(), None));
        assert_eq!(read("ansi_1251", b"\xcc\xee\xf1\xf2"), ("Мост".into(), None));
        assert_eq!(read("ANSI_932", b"\x8b\xb4"), ("橋".into(), None));
        assert_eq!(read("ANSI_936", b"\xc7\xc5"), ("桥".into(), None));
        assert_eq!(read("dos850", b"Br\x81cke"), ("Brücke".into(), None));
        assert_eq!(read("DOS437", b"Br\x81cke"), ("Brücke".into(), None));
        // The trail byte of this character is a backslash: escapes are looked for in characters, not in bytes.
        assert_eq!(read("ANSI_932", b"\x95\x5cU+0041"), ("表U+0041".into(), None));
    }

    #[test]
    fn bytes_against_the_page() {
        let utf8 = "桥拱".as_bytes();
        let (text, doubt) = Decoder::new(1015, Some("ANSI_936"), false).decode("桥".as_bytes());
        assert_eq!((text.as_str(), doubt), ("桥", Some(Doubt::ReadAsUtf8)));
        let (_, doubt) = Decoder::new(1015, Some("ANSI_1252"), false).decode("Brücke".as_bytes());
        assert_eq!(doubt, Some(Doubt::LooksLikeUtf8));
        let (text, doubt) = Decoder::new(1024, Some("ANSI_1252"), false).decode(b"Br\xfccke");
        assert_eq!((text.as_str(), doubt), ("Brücke", Some(Doubt::ReadByPage)));
        let (text, doubt) = Decoder::new(1024, Some("ANSI_936"), false).decode(utf8);
        assert_eq!((text.as_str(), doubt), ("桥拱", None));
        let (text, doubt) = Decoder::new(1024, Some("ANSI_932"), false).decode(b"a\xff\xfe");
        assert_eq!(doubt, Some(Doubt::Unreadable));
        assert!(text.starts_with('a'));
    }

    #[test]
    fn escapes() {
        let decoder = Decoder::new(1015, None, false);
        assert_eq!(decoder.text(b"Br\\U+00FCcke"), "Brücke");
        assert_eq!(decoder.text(b"\\U+D83D\\U+DE00!"), "😀!");
        assert_eq!(decoder.text(b"\\U+D83D"), "\\U+D83D");
        assert_eq!(decoder.text(b"\\M+18BB4"), "橋");
        assert_eq!(decoder.text(b"a^Jb^ c^"), "a\nb^c^");
        assert_eq!(decoder.text(b"C:\\temp\\U"), "C:\\temp\\U");
    }

    #[test]
    fn what_is_written_reads_back() {
        for text in ["plain", "Brücke ^ 橋 😀", "C:\\U+0041 \\M+18BB4", "two\nlines\ttab", "^J", " blank "]
        {
            for utf8 in [false, true] {
                let bytes = encode(text, utf8).concat();
                let rank = if utf8 { 1021 } else { 1009 };
                assert_eq!(Decoder::new(rank, None, false).text(&bytes), text);
                assert!(utf8 || bytes.is_ascii());
                assert!(!bytes.iter().any(|b| *b < b' '));
            }
        }
    }
}
