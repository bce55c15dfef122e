//! Writes tags in the form and with the line ends of the drawing at hand.

use crate::tags::codes::{Kind, kind};
use crate::tags::tokens::Form;

/// Tags being written.
pub(super) struct Emit {
    form: Form,
    crlf: bool,
    pub out: Vec<u8>,
}

impl Emit {
    pub fn new(form: Form, crlf: bool) -> Self {
        Self { form, crlf, out: Vec::new() }
    }

    /// One line end; nothing in a binary drawing.
    pub fn newline(&mut self) {
        if self.form == Form::Ascii {
            let end: &[u8] = if self.crlf { b"\r\n" } else { b"\n" };
            self.out.extend_from_slice(end);
        }
    }

    fn code(&mut self, code: i32) {
        match self.form {
            Form::Ascii => {
                self.out.extend_from_slice(format!("{code:>3}").as_bytes());
                self.newline();
            }
            Form::Binary { wide } => {
                // Every code written here is between 0 and 1071.
                let [low, high, ..] = code.to_le_bytes();
                if wide {
                    self.out.extend_from_slice(&[low, high]);
                } else if code < 255 {
                    self.out.push(low);
                } else {
                    self.out.extend_from_slice(&[255, low, high]);
                }
            }
        }
    }

    /// A text; it must hold neither line ends nor zero bytes.
    pub fn text(&mut self, code: i32, value: impl AsRef<[u8]>) {
        self.code(code);
        self.out.extend_from_slice(value.as_ref());
        match self.form {
            Form::Ascii => self.newline(),
            Form::Binary { .. } => self.out.push(0),
        }
    }

    /// A whole number, as long as its code says.
    pub fn int(&mut self, code: i32, value: i64) {
        self.code(code);
        let bytes = value.to_le_bytes();
        match self.form {
            Form::Ascii => {
                self.out.extend_from_slice(value.to_string().as_bytes());
                self.newline();
            }
            Form::Binary { .. } => {
                let size = match kind(code) {
                    Some(Kind::Int32) => 4,
                    Some(Kind::Int64) => 8,
                    _ => 2,
                };
                self.out.extend_from_slice(&bytes[..size]);
            }
        }
    }

    /// A number with a decimal point, in the shortest form that reads back to the same value.
    pub fn real(&mut self, code: i32, value: f64) {
        // No negative zero: it would be the one number whose text depends on how it was reached.
        let value = value + 0.0;
        self.code(code);
        match self.form {
            Form::Ascii => {
                let mut text = value.to_string();
                if !text.contains('.') {
                    text.push_str(".0");
                }
                self.out.extend_from_slice(text.as_bytes());
                self.newline();
            }
            Form::Binary { .. } => self.out.extend_from_slice(&value.to_le_bytes()),
        }
    }

    /// A point by its three codes `first`, `first + 10`, `first + 20`.
    pub fn point(&mut self, first: i32, [x, y, z]: [f64; 3]) {
        self.real(first, x);
        self.real(first + 10, y);
        self.real(first + 20, z);
    }
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn forms() {
        let write = |form, crlf| {
            let mut emit = Emit::new(form, crlf);
            emit.text(0, "LINE");
            emit.int(62, -3);
            emit.int(90, 70_000);
            emit.real(40, 0.1 + 0.2);
            emit.real(10, -0.0);
            emit.real(20, 1e-9);
            emit.text(1001, "APP");
            emit.out
        };
        assert_eq!(
            String::from_utf8(write(Form::Ascii, true)).unwrap(),
            "  0\r\nLINE\r\n 62\r\n-3\r\n 90\r\n70000\r\n 40\r\n0.30000000000000004\r\n 10\r\n0.0\r\n 20\r\n0.000000001\r\n1001\r\nAPP\r\n"
        );
        let narrow = write(Form::Binary { wide: false }, false);
        assert!(narrow.starts_with(b"\0LINE\0\x3e\xfd\xff\x5a\x70\x11\x01\x00\x28"));
        assert!(narrow.ends_with(b"\xff\xe9\x03APP\0"));
        let wide = write(Form::Binary { wide: true }, false);
        assert!(wide.starts_with(b"\0\0LINE\0\x3e\0\xfd\xff\x5a\0"));
        assert!(wide.ends_with(b"\xe9\x03APP\0"));
    }
}
