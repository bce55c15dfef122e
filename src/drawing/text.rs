//! What a drawn text says: formatting codes taken out, symbols put in.

/// A single-line text (TEXT, attribute) as it is seen: `%%d` is a degree sign, `%%c` a diameter sign, `%%p` plus-minus,
/// `%%%` a per cent sign, `%%nnn` the character of that decimal number; `%%u`, `%%o`, `%%k` only underline, overline
/// or strike and vanish.
pub fn plain_line(raw: &str) -> String {
    let mut out = String::with_capacity(raw.len());
    let mut rest = raw;
    while let Some(at) = rest.find("%%") {
        out.push_str(&rest[..at]);
        rest = &rest[at + 2..];
        let Some(code) = rest.chars().next() else {
            out.push_str("%%");
            break;
        };
        let taken = match code.to_ascii_lowercase() {
            'd' => symbol(&mut out, '°'),
            'c' => symbol(&mut out, '⌀'),
            'p' => symbol(&mut out, '±'),
            '%' => symbol(&mut out, '%'),
            'u' | 'o' | 'k' => 1,
            '0'..='9' => {
                let digits: String = rest.chars().take(3).take_while(char::is_ascii_digit).collect();
                let character = digits.parse::<u32>().ok().and_then(char::from_u32);
                match character {
                    Some(c) if digits.len() == 3 && !c.is_control() => {
                        out.push(c);
                        3
                    }
                    _ => {
                        out.push_str("%%");
                        0
                    }
                }
            }
            _ => {
                out.push_str("%%");
                0
            }
        };
        rest = &rest[taken..];
    }
    out.push_str(rest);
    out
}

/// Puts a symbol down for a code of one character; the length of the code.
fn symbol(out: &mut String, c: char) -> usize {
    out.push(c);
    1
}

/// A formatted paragraph (MTEXT) as it is seen, its lines separated by line feeds: `\P` and `\N` break a line, `\~` is
/// a blank that does not break, `\S1^2;` a stack (`1/2`), `\\`, `\{`, `\}` the characters themselves; fonts, heights,
/// colours, alignment and grouping braces vanish; `\U+XXXX` is that character, and the codes of [`plain_line`] count
/// too. Carets are taken for what they are: the format's caret codes are resolved before.
pub fn plain_paragraph(raw: &str) -> String {
    let mut out = String::with_capacity(raw.len());
    let mut chars = raw.chars().peekable();
    while let Some(c) = chars.next() {
        match c {
            '{' | '}' => {}
            '\\' => escape(&mut chars, &mut out),
            _ => out.push(c),
        }
    }
    out.split('\n').map(plain_line).collect::<Vec<_>>().join("\n")
}

/// One code after a backslash.
fn escape(chars: &mut std::iter::Peekable<std::str::Chars<'_>>, out: &mut String) {
    let Some(code) = chars.next() else {
        out.push('\\');
        return;
    };
    match code {
        '\\' | '{' | '}' => out.push(code),
        'P' | 'N' | 'X' => out.push('\n'),
        '~' => out.push('\u{a0}'),
        // Underline, overline, strike: on and off, no argument.
        'L' | 'l' | 'O' | 'o' | 'K' | 'k' => {}
        'A' | 'C' | 'c' | 'F' | 'f' | 'H' | 'Q' | 'T' | 'W' | 'p' => {
            for c in chars.by_ref() {
                if c == ';' {
                    break;
                }
            }
        }
        'S' => {
            let mut stack = String::new();
            while let Some(c) = chars.next() {
                match c {
                    ';' => break,
                    '\\' => stack.extend(chars.next()),
                    // A caret that stood before a letter was resolved to a control character on the way here.
                    '\0'..='\x1f' => stack.extend(['/', char::from(c as u8 + b'@')]),
                    '^' | '#' | '/' => {
                        stack.push('/');
                        if chars.peek() == Some(&' ') {
                            chars.next();
                        }
                    }
                    _ => stack.push(c),
                }
            }
            let stack = stack.trim_matches('/');
            // A stack after a digit is a vulgar fraction of its own: 3 1/2, not 31/2.
            if out.ends_with(|c: char| c.is_ascii_digit()) && stack.starts_with(|c: char| c.is_ascii_digit())
            {
                out.push(' ');
            }
            out.push_str(stack);
        }
        'U' if chars.peek() == Some(&'+') => {
            let mut ahead = chars.clone();
            ahead.next();
            let digits: String = ahead.by_ref().take(4).collect();
            match u32::from_str_radix(&digits, 16).ok().and_then(char::from_u32) {
                Some(c) if digits.len() == 4 => {
                    out.push(c);
                    *chars = ahead;
                }
                _ => out.push_str("\\U"),
            }
        }
        _ => {
            out.push('\\');
            out.push(code);
        }
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn line_codes() {
        assert_eq!(plain_line("30%%d %%c20 %%P5 50%%%"), "30° ⌀20 ±5 50%");
        assert_eq!(plain_line("%%uP3%%u = %%o120%%O kN"), "P3 = 120 kN");
        assert_eq!(plain_line("%%065%%1x%%"), "A%%1x%%");
        assert_eq!(plain_line("%%é"), "%%é");
    }

    #[test]
    fn paragraph_codes() {
        assert_eq!(
            plain_paragraph(r"{\fArial|b0|i0;\H2.5x;P3 = 120\~kN}\PSpandrel \Lpost\l 3"),
            "P3 = 120\u{a0}kN\nSpandrel post 3"
        );
        assert_eq!(plain_paragraph(r"\A1;3\S1/2; kN \S+0.1^ -0.2;"), "3 1/2 kN +0.1/-0.2");
        assert_eq!(plain_paragraph(r"a\\b \{c\} \U+00B0 \C1;red"), "a\\b {c} ° red");
        assert_eq!(plain_paragraph("85\nx%%d ^J"), "85\nx° ^J");
        assert_eq!(plain_paragraph("\\SA\x02;"), "A/B");
    }

    #[test]
    fn unfinished_codes_do_no_harm() {
        for raw in ["\\", "\\S", "\\S1^", "\\f", "\\U+00", "\\U", "{", "^", "%%", "%%1"] {
            plain_paragraph(raw);
            plain_line(raw);
        }
    }
}
