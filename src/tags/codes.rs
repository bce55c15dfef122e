//! Group codes: the kind of value each one announces, which decides how long a value is in a binary drawing.

/// What kind of value stands behind a group code.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(crate) enum Kind {
    Text,
    Real,
    Int16,
    Int32,
    Int64,
    /// One byte in the two-byte form, two bytes in the one-byte form.
    Bool,
    /// A length byte and that many bytes; hexadecimal digits in an ASCII drawing.
    Chunk,
}

/// The kind of value behind a group code; `None` for a code that the format does not list.
#[inline]
pub(crate) fn kind(code: i32) -> Option<Kind> {
    *usize::try_from(code).ok().and_then(|code| KINDS.get(code))?
}

/// The kinds of all codes in a table: a binary drawing is passed over by them.
static KINDS: [Option<Kind>; 1072] = {
    let mut kinds = [None; 1072];
    let mut code = 0;
    let mut index = 0;
    while index < kinds.len() {
        kinds[index] = listed(code);
        code += 1;
        index += 1;
    }
    kinds
};

const fn listed(code: i32) -> Option<Kind> {
    Some(match code {
        0..=9
        | 100..=105
        | 300..=309
        | 320..=369
        | 390..=399
        | 410..=419
        | 430..=439
        | 470..=481
        | 999
        | 1000..=1003
        | 1005..=1009 => Kind::Text,
        10..=59 | 110..=149 | 210..=239 | 460..=469 | 1010..=1059 => Kind::Real,
        60..=79 | 170..=179 | 270..=289 | 370..=389 | 400..=409 | 1060..=1070 => Kind::Int16,
        90..=99 | 420..=429 | 440..=459 | 1071 => Kind::Int32,
        160..=169 => Kind::Int64,
        290..=299 => Kind::Bool,
        310..=319 | 1004 => Kind::Chunk,
        _ => return None,
    })
}

/// Whether a code refers to another record by its handle.
pub(crate) fn is_reference(code: i32) -> bool {
    matches!(code, 320..=369 | 390..=399 | 480 | 481 | 1005)
}

/// What each byte counts as a hexadecimal digit; 16 for those that are none.
const DIGITS: [u8; 256] = {
    let mut digits = [16; 256];
    let mut digit = 0;
    while digit < 16 {
        digits[b"0123456789abcdef"[digit as usize] as usize] = digit;
        digits[b"0123456789ABCDEF"[digit as usize] as usize] = digit;
        digit += 1;
    }
    digits
};

/// The number a handle spells, when it is one: up to sixteen hexadecimal digits with blanks around them.
#[inline]
pub(crate) fn parse_handle(value: &[u8]) -> Option<u64> {
    let digits = value.trim_ascii();
    if digits.is_empty() || digits.len() > 16 {
        return None;
    }
    let mut sum = 0u64;
    let mut seen = 0;
    for byte in digits {
        let digit = DIGITS[usize::from(*byte)];
        seen |= digit;
        sum = sum << 4 | u64::from(digit);
    }
    (seen < 16).then_some(sum)
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn handles() {
        assert_eq!(parse_handle(b"  2aF "), Some(0x2AF));
        assert_eq!(parse_handle(b"FFFFFFFFFFFFFFFF"), Some(u64::MAX));
        for bad in [&b""[..], b"  ", b"-1", b"1G", b"10000000000000000", b"0x1"] {
            assert_eq!(parse_handle(bad), None);
        }
    }
}
