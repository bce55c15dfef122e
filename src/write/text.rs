//! Numbers and foreign text made fit for people: three significant digits, millimetres, no locale, no control characters.

use unicode_width::UnicodeWidthChar;

use crate::outcome::{Finding, Units};

/// A number to three significant digits, with no exponent up to a thousand million.
///
/// ```
/// use thrustmark::write::text::three_digits;
/// assert_eq!(three_digits(1234.5), "1230");
/// assert_eq!(three_digits(-0.012345), "-0.0123");
/// assert_eq!(three_digits(0.0), "0");
/// ```
pub fn three_digits(value: f64) -> String {
    significant(value, 3)
}

/// A force or moment to four significant digits.
///
/// ```
/// use thrustmark::write::text::four_digits;
/// assert_eq!(four_digits(332.5), "332.5");
/// assert_eq!(four_digits(332.5 - 1e-12), "332.5");
/// assert_eq!(four_digits(12345.6), "12350");
/// ```
pub fn four_digits(value: f64) -> String {
    significant(value, 4)
}

/// A number to so many significant digits; trailing zeros after the point stay, so that columns tell their precision.
fn significant(value: f64, digits: usize) -> String {
    if value == 0.0 || !value.is_finite() {
        return if value.is_finite() { "0".into() } else { "-".into() };
    }
    // Twelve digits first: values that differ by rounding alone (332.5 and 332.49999999999994) read the same.
    let value = format!("{value:.11e}").parse().unwrap_or(value);
    let rounded = format!("{:.*e}", digits.saturating_sub(1), value);
    let (Some(exponent), Ok(number)) =
        (rounded.split_once('e').and_then(|(_, e)| e.parse::<i64>().ok()), rounded.parse::<f64>())
    else {
        return rounded;
    };
    if !(-6..9).contains(&exponent) {
        return rounded;
    }
    let last = i64::try_from(digits).unwrap_or(0) - 1;
    let decimals = usize::try_from(last - exponent).unwrap_or(0);
    format!("{number:.decimals$}")
}

/// A round number with no more decimals than it needs: `2.5`, `100`.
pub fn round_number(value: f64) -> String {
    let text = three_digits(value);
    if text.contains('e') || !text.contains('.') {
        return text;
    }
    text.trim_end_matches('0').trim_end_matches('.').to_owned()
}

/// The value, or nought when it is rounding beside values of size `scale`.
pub fn beside(value: f64, scale: f64) -> f64 {
    if value.abs() <= scale.abs() * crate::tolerance::NO_FORCE { 0.0 } else { value }
}

/// A length in metres told in millimetres as a bare figure: whole from 10 mm on, two significant digits below, nothing
/// finer than a hundredth.
///
/// ```
/// use thrustmark::write::text::millimetres;
/// assert_eq!(millimetres(0.0321), "32");
/// assert_eq!(millimetres(0.00321), "3.2");
/// assert_eq!(millimetres(0.0000001), "0");
/// ```
pub fn millimetres(metres: f64) -> String {
    let mm = metres * 1000.0;
    let size = mm.abs();
    let text = if size >= 9.95 {
        format!("{mm:.0}")
    } else if size >= 0.995 {
        format!("{mm:.1}")
    } else {
        format!("{mm:.2}")
    };
    if text.trim_start_matches('-').chars().all(|c| c == '0' || c == '.') { "0".into() } else { text }
}

/// The same with a plus sign where it is positive.
pub fn signed_millimetres(metres: f64) -> String {
    signed(millimetres(metres))
}

fn signed(text: String) -> String {
    if text == "0" || text.starts_with('-') { text } else { format!("+{text}") }
}

/// A small length of a run as a bare figure: in millimetres, or in inches where the run is told in feet.
pub fn small(length: f64, units: &Units) -> String {
    if units.length == "ft" { inches(length) } else { millimetres(length) }
}

/// The same with a plus sign where it is positive.
pub fn signed_small(length: f64, units: &Units) -> String {
    signed(small(length, units))
}

/// The units of the lengths of a run: of the large ones and of the small ones.
pub fn length_units(units: &Units) -> (&str, &'static str) {
    (&units.length, if units.length == "ft" { "in" } else { "mm" })
}

/// The unit of stress, empty where there is none.
pub fn stress_unit(units: &Units) -> &str {
    units.stress.as_deref().unwrap_or_default()
}

/// A length in feet told in inches as a bare figure, to about the precision of [`millimetres`].
///
/// ```
/// use thrustmark::write::text::inches;
/// assert_eq!(inches(0.5), "6.00");
/// assert_eq!(inches(2.0), "24.0");
/// assert_eq!(inches(1e-6), "0");
/// ```
pub fn inches(feet: f64) -> String {
    let inches = feet * 12.0;
    let size = inches.abs();
    let text = if size >= 9.995 {
        format!("{inches:.1}")
    } else if size >= 0.0995 {
        format!("{inches:.2}")
    } else {
        format!("{inches:.3}")
    };
    if text.trim_start_matches('-').chars().all(|c| c == '0' || c == '.') { "0".into() } else { text }
}

/// A length told as people say it: metres to three decimals.
pub fn metres(value: f64) -> String {
    let text = format!("{value:.3}");
    if text == "-0.000" { "0.000".into() } else { text }
}

/// A force with its unit.
pub fn force(value: f64, units: &Units) -> String {
    format!("{} {}", four_digits(value), force_unit(units))
}

/// The force unit, ASCII, in the plural where it is a word.
pub fn force_unit(units: &Units) -> &str {
    if units.force == "unit load" { "unit loads" } else { &units.force }
}

/// The moment unit in ASCII.
pub fn moment_unit(units: &Units) -> &str {
    match (units.force.as_str(), units.length.as_str()) {
        ("unit load", "ft") => "unit loads x ft",
        ("unit load", _) => "unit loads x m",
        ("kip", _) => "kip ft",
        _ => "kNm",
    }
}

/// A value of a finding with its unit: lengths in millimetres, others to three digits.
pub fn quantity(value: f64, unit: Option<&str>) -> String {
    match unit {
        Some("m") => format!("{} mm", millimetres(value)),
        Some("mm") => format!("{} mm", millimetres(value / 1000.0)),
        Some("ft") => format!("{} in", inches(value)),
        Some("-" | "" | "1") | None => three_digits(value),
        Some(unit @ ("kN" | "kip" | "unit load")) => format!("{} {unit}", four_digits(value)),
        Some(unit) => format!("{} {unit}", three_digits(value)),
    }
}

/// Value of a finding in the length unit of its run (m, or ft) when its unit is a length.
pub fn in_metres(value: f64, unit: Option<&str>) -> Option<f64> {
    match unit {
        Some("m" | "ft") => Some(value),
        Some("mm") => Some(value / 1000.0),
        _ => None,
    }
}

/// Value and limit of a finding, as `82 mm, limit 50 mm`.
pub fn against_limit(finding: &Finding) -> Option<String> {
    let unit = finding.unit.as_deref();
    match (finding.value, finding.limit) {
        (Some(value), Some(limit)) => {
            Some(format!("{}, limit {}", quantity(value, unit), quantity(limit, unit)))
        }
        (Some(value), None) => Some(quantity(value, unit)),
        _ => None,
    }
}

/// The text with control characters told as `\x1b`, so that nothing in a drawing can steer a terminal or break a record.
pub fn plain(text: &str) -> String {
    let mut out = String::with_capacity(text.len());
    for c in text.chars() {
        if c == '\t' {
            out.push(' ');
        } else if is_steering(c) {
            if u32::from(c) < 0x100 {
                out.push_str(&format!("\\x{:02x}", u32::from(c)));
            } else {
                out.push_str(&format!("\\u{{{:x}}}", u32::from(c)));
            }
        } else {
            out.push(c);
        }
    }
    out
}

/// Control characters, line separators, and the marks that turn the direction of writing.
fn is_steering(c: char) -> bool {
    c.is_control()
        || matches!(c, '\u{200b}'..='\u{200f}' | '\u{2028}'..='\u{202e}' | '\u{2060}'..='\u{206f}' | '\u{feff}')
}

/// Columns that a text takes in a terminal or in a font of even width.
pub fn columns(text: &str) -> usize {
    text.chars().map(|c| c.width().unwrap_or(0)).sum()
}

/// The text in lines of at most `width` columns, broken at blanks; a word longer than a line is cut.
pub fn wrap(text: &str, width: usize) -> Vec<String> {
    let width = width.max(8);
    let mut lines = Vec::new();
    let mut line = String::new();
    let mut used = 0;
    for mut word in words(text) {
        loop {
            let size = columns(&word);
            let gap = usize::from(used > 0);
            if used + gap + size <= width {
                if gap > 0 {
                    line.push(' ');
                }
                line.push_str(&word);
                used += gap + size;
                break;
            }
            if used > 0 {
                lines.push(std::mem::take(&mut line));
                used = 0;
                continue;
            }
            let (head, tail) = cut(&word, width);
            lines.push(head);
            word = tail;
        }
    }
    if used > 0 || lines.is_empty() {
        lines.push(line);
    }
    lines
}

/// Words of a text; a figure stays with its unit, and a letter that names a quantity with its figure.
fn words(text: &str) -> Vec<String> {
    let is_figure = |w: &str| w.trim_end_matches([',', ';', ':', '.', ')']).parse::<f64>().is_ok();
    let is_unit = |w: &str| {
        let w = w.trim_end_matches([',', ';', ':', '.', ')']);
        ["m", "mm", "kN", "kNm", "deg", "MPa", "unit", "times", "ft", "in", "kip", "ksi"].contains(&w)
    };
    let mut out: Vec<String> = Vec::new();
    for word in text.split_whitespace() {
        if let Some(last) = out.last_mut() {
            let tail = last.rsplit(' ').next().unwrap_or_default();
            let names = tail.len() == 1 && tail.chars().all(|c| c.is_ascii_alphabetic()) && tail != "a";
            if (is_unit(word) && is_figure(tail) && !tail.ends_with(',')) || (names && is_figure(word)) {
                last.push(' ');
                last.push_str(word);
                continue;
            }
        }
        out.push(word.to_owned());
    }
    out
}

/// Cuts a word after at most `width` columns.
fn cut(word: &str, width: usize) -> (String, String) {
    let mut used = 0;
    for (i, c) in word.char_indices() {
        used += c.width().unwrap_or(0);
        if used > width && i > 0 {
            return (word[..i].to_owned(), word[i..].to_owned());
        }
    }
    (word.to_owned(), String::new())
}

#[cfg(test)]
mod tests {
    use super::*;

    #[test]
    fn figures_keep_three_digits() {
        for (value, text) in [
            (999.6, "1000"),
            (0.99951, "1.00"),
            (12.345, "12.3"),
            (-12.355, "-12.4"),
            (123_456.0, "123000"),
            (2.5e12, "2.50e12"),
            (1.0e-9, "1.00e-9"),
        ] {
            assert_eq!(three_digits(value), text);
        }
    }

    #[test]
    fn millimetres_never_say_minus_nought() {
        assert_eq!(signed_millimetres(-0.000_000_4), "0");
        assert_eq!(signed_millimetres(0.0123), "+12");
        assert_eq!(signed_millimetres(-0.0123), "-12");
        assert_eq!(millimetres(0.009_96), "10");
        assert_eq!(millimetres(0.000_42), "0.42");
    }

    #[test]
    fn nothing_steers() {
        assert_eq!(plain("P\u{1b}[2J1\r\n"), "P\\x1b[2J1\\x0d\\x0a");
        assert_eq!(plain("a\u{202e}b\u{9b}"), "a\\u{202e}b\\x9b");
        assert_eq!(plain("Größe 桥"), "Größe 桥");
    }

    #[test]
    fn wraps_by_columns() {
        assert_eq!(wrap("one two three", 8), ["one two", "three"]);
        assert_eq!(wrap("", 8), [""]);
        assert_eq!(wrap("as at x 12.345 m, y 2.5 m", 14), ["as at", "x 12.345 m,", "y 2.5 m"]);
        assert_eq!(wrap(&"x".repeat(20), 8).len(), 3);
        assert!(wrap("桥桥桥桥桥桥 桥", 8).iter().all(|l| columns(l) <= 8));
    }
}
