//! Where lines end, and which lines hold a group code that nobody asks for: sixty-four bytes at a time.
//!
//! There are two ways to the same answer, one for every processor and one for those with AVX2; which one runs is decided
//! when the program runs. Tests hold the two equal.

/// Bytes that one step looks at.
pub(super) const BLOCK: usize = 64;
/// Bytes behind them that it may look at too.
pub(super) const AHEAD: usize = 4;
/// What a step is given.
pub(super) type Bytes = [u8; BLOCK + AHEAD];

/// One bit for each byte of a block, the first byte lowest.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) struct Masks {
    /// It is a line feed.
    pub newlines: u64,
    /// It is a carriage return.
    pub returns: u64,
    /// Here begins a line that is a blank and two digits from 10 on, save 67, or is 100. As a code line it announces a
    /// number or a subclass marker: nothing that tells where a record stands, what it is called, or what it refers to.
    pub dull: u64,
}

/// The masks of a block, on any processor.
#[inline(always)]
pub(super) fn plain(bytes: &Bytes) -> Masks {
    let mut masks = Masks { newlines: 0, returns: 0, dull: 0 };
    for at in 0..BLOCK {
        let [b0, b1, b2, b3, b4] = [bytes[at], bytes[at + 1], bytes[at + 2], bytes[at + 3], bytes[at + 4]];
        let ends = b3 == b'\n' || b3 == b'\r' && b4 == b'\n';
        let two = b0 == b' ' && matches!(b1, b'1'..=b'9') && b2.is_ascii_digit() && [b1, b2] != *b"67";
        let dull = ends && (two || [b0, b1, b2] == *b"100");
        masks.newlines |= u64::from(b0 == b'\n') << at;
        masks.returns |= u64::from(b0 == b'\r') << at;
        masks.dull |= u64::from(dull) << at;
    }
    masks
}

/// The same with vectors of thirty-two bytes.
#[cfg(target_arch = "x86_64")]
#[target_feature(enable = "avx2")]
#[inline]
// The loads of std::arch take pointers; each is of thirty-two bytes inside of an array of known length.
#[allow(unsafe_code)]
pub(super) fn vector(bytes: &Bytes) -> Masks {
    use std::arch::x86_64::{
        __m256i, _mm256_and_si256, _mm256_andnot_si256, _mm256_cmpeq_epi8, _mm256_loadu_si256,
        _mm256_min_epu8, _mm256_movemask_epi8, _mm256_or_si256, _mm256_set1_epi8, _mm256_sub_epi8,
    };
    const HALF: usize = BLOCK / 2;
    let load = |at: usize| {
        let part: &[u8] = &bytes[at..at + HALF];
        // SAFETY: the slice holds exactly the thirty-two bytes that are read; the load needs no alignment.
        unsafe { _mm256_loadu_si256(part.as_ptr().cast::<__m256i>()) }
    };
    let all = |byte: u8| _mm256_set1_epi8(byte.cast_signed());
    let is = |v: __m256i, byte: u8| _mm256_cmpeq_epi8(v, all(byte));
    let both = |a, b| _mm256_and_si256(a, b);
    let either = |a, b| _mm256_or_si256(a, b);
    // Bytes from `low` on, at most `above` beyond it.
    let within = |v: __m256i, low: u8, above: u8| {
        let shifted = _mm256_sub_epi8(v, all(low));
        _mm256_cmpeq_epi8(_mm256_min_epu8(shifted, all(above)), shifted)
    };
    let bits = |v: __m256i| u64::from(_mm256_movemask_epi8(v).cast_unsigned());
    let half = |at: usize| {
        let [v0, v1, v2, v3, v4] = [load(at), load(at + 1), load(at + 2), load(at + 3), load(at + 4)];
        let ends = either(is(v3, b'\n'), both(is(v3, b'\r'), is(v4, b'\n')));
        let two = both(is(v0, b' '), both(within(v1, b'1', 8), within(v2, b'0', 9)));
        let two = _mm256_andnot_si256(both(is(v1, b'6'), is(v2, b'7')), two);
        let hundred = both(is(v0, b'1'), both(is(v1, b'0'), is(v2, b'0')));
        let dull = both(ends, either(two, hundred));
        [bits(is(v0, b'\n')), bits(is(v0, b'\r')), bits(dull)]
    };
    let [low, high] = [half(0), half(HALF)];
    Masks {
        newlines: low[0] | high[0] << HALF,
        returns: low[1] | high[1] << HALF,
        dull: low[2] | high[2] << HALF,
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use proptest::prelude::*;

    /// Both ways at every place of some bytes.
    #[allow(unsafe_code)]
    fn agree(bytes: &[u8]) {
        let mut padded = bytes.to_vec();
        padded.resize(bytes.len() + BLOCK + AHEAD, b'x');
        for at in 0..=bytes.len() {
            let block: &Bytes = padded[at..].first_chunk().unwrap();
            let masks = plain(block);
            #[cfg(target_arch = "x86_64")]
            if is_x86_feature_detected!("avx2") {
                // SAFETY: the processor has AVX2.
                assert_eq!(unsafe { vector(block) }, masks, "{block:?}");
            }
            let dull = masks.dull & 1 == 1;
            let line: Vec<u8> = block.iter().copied().take_while(|b| *b != b'\n').collect();
            let text = String::from_utf8_lossy(&line);
            let code = text.strip_suffix('\r').unwrap_or(&text);
            let number: Option<u32> = code.strip_prefix(' ').unwrap_or(code).parse().ok();
            let expected = (code == "100" || code.len() == 3 && code.starts_with(' '))
                && number.is_some_and(|n| n >= 10 && n != 67)
                && !code.contains('+');
            assert_eq!(dull, expected && block[line.len()] == b'\n', "{text:?}");
        }
    }

    #[test]
    fn every_code_line_is_judged_alike() {
        for code in -20..1100 {
            for end in ["\n", "\r\n", "\r", "\n\r", " \n"] {
                agree(format!("{code:>3}{end}x{code}{end}{code:>6}{end}").as_bytes());
            }
        }
    }

    proptest! {
        #[test]
        fn any_bytes(bytes in proptest::collection::vec(
            prop_oneof![Just(b'\n'), Just(b'\r'), Just(b' '), b'0'..=b'9', any::<u8>()], 0..200)) {
            agree(&bytes);
        }
    }

    #[test]
    fn outside_drawings() {
        let shared = std::env::var_os("THRUSTMARK_SHARED").map_or_else(
            || std::path::Path::new(env!("CARGO_MANIFEST_DIR")).join("../shared"),
            std::path::PathBuf::from,
        );
        let Ok(folder) = std::fs::read_dir(shared.join("corpus")) else {
            eprintln!("SKIPPED: no outside drawings at {}", shared.display());
            return;
        };
        for entry in folder {
            let bytes = std::fs::read(entry.unwrap().path()).unwrap_or_default();
            agree(&bytes[..bytes.len().min(20_000)]);
        }
    }
}
