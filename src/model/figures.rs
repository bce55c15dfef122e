//! Figures in labels: `P3 = 120 kN`, `85`, `12,5 kN`, `1 200 kN`, `27 kip`.

use std::fmt;

use crate::job::Decimal;
use crate::units::{ForceUnit, LengthUnit};

/// A force read from a text.
#[derive(Debug, Clone, PartialEq)]
pub struct Figure {
    /// The name before the figure, as in `P3 = 120 kN`.
    pub name: Option<String>,
    /// The number, in `unit` or, without one, in the job's unit of force.
    pub value: f64,
    /// The unit written after it.
    pub unit: Option<ForceUnit>,
    /// Metres in the length that a force per length is given for; `None`: a force.
    pub per: Option<f64>,
}

/// What a figure is read as.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Kind {
    /// A force: `120 kN`.
    Force,
    /// A force per length: `12 kN/m`.
    PerLength,
}

/// Why a text gives no force.
#[derive(Debug, Clone, PartialEq)]
pub enum NoFigure {
    /// It holds no figure in a form that could be a force.
    NotAForce,
    /// A force per length, such as `12 kN/m`: the label of a line load.
    PerLength,
    /// A figure followed by a unit that is no unit of force that is known.
    Unit(String),
    /// Several lines of it hold a force each.
    Several,
    /// The figure can be read in two ways, and nothing says which is meant.
    TwoReadings {
        /// The figure as written.
        written: String,
        /// Both readings.
        readings: [String; 2],
    },
    /// The separators in the figure do not fit the decimal sign that the job states.
    Separator(String),
}

impl fmt::Display for Figure {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{}", self.value)?;
        if let Some(unit) = self.unit {
            write!(f, " {unit}")?;
        }
        Ok(())
    }
}

/// Reads a label. Of a paragraph the one line counts that gives a force; a force without a name of its own may have it on
/// another line.
///
/// # Errors
/// When the text holds no force, or one that cannot be told.
pub fn read(text: &str, decimal: Decimal) -> Result<Figure, NoFigure> {
    read_as(text, decimal, Kind::Force)
}

/// Reads a label as a force or as a force per length.
///
/// # Errors
/// As [`read`]; of a force per length read as a force [`NoFigure::PerLength`], the other way round [`NoFigure::NotAForce`].
pub fn read_as(text: &str, decimal: Decimal, kind: Kind) -> Result<Figure, NoFigure> {
    let lines: Vec<String> = text.lines().map(tidy).filter(|l| !l.is_empty()).collect();
    if let [] | [_] = lines.as_slice() {
        return read_line(&tidy(text), decimal, kind);
    }
    let mut found = None;
    let mut worst = NoFigure::NotAForce;
    for line in &lines {
        match read_line(line, decimal, kind) {
            Ok(figure) if found.is_none() => found = Some(figure),
            Ok(_) => return Err(NoFigure::Several),
            Err(why @ (NoFigure::TwoReadings { .. } | NoFigure::Separator(_))) => return Err(why),
            Err(NoFigure::NotAForce) => {}
            Err(why) => worst = why,
        }
    }
    match found {
        Some(figure) if figure.name.is_some() => Ok(figure),
        Some(figure) => Ok(read_line(&tidy(text), decimal, kind).unwrap_or(figure)),
        None => Err(worst),
    }
}

/// Blanks of all widths become plain ones, runs of them one; dashes used as a minus become one.
fn tidy(text: &str) -> String {
    let mut out = String::with_capacity(text.len());
    for c in text.chars() {
        match c {
            c if c.is_whitespace() || matches!(c, '\u{200b}' | '\u{2060}' | '\u{feff}') => {
                if !out.ends_with(' ') && !out.is_empty() {
                    out.push(' ');
                }
            }
            '\u{2212}' | '\u{2013}' => out.push('-'),
            '\u{2019}' => out.push('\''),
            c => out.push(c),
        }
    }
    out.truncate(out.trim_end().len());
    out
}

fn read_line(line: &str, decimal: Decimal, kind: Kind) -> Result<Figure, NoFigure> {
    if let Some(at) = line.find(['=', ':', '≈']) {
        let separator = line[at..].chars().next().map_or(1, char::len_utf8);
        let name = line[..at].trim();
        let value = line[at + separator..].trim();
        if value.contains(['=', ':']) {
            return Err(NoFigure::NotAForce);
        }
        let mut figure = quantity(value, decimal, kind)?;
        figure.name = (!name.is_empty()).then(|| name.to_owned());
        return Ok(figure);
    }
    if starts_number(line) {
        return quantity(line, decimal, kind);
    }
    named(line, decimal, kind)
}

/// A name and a figure with nothing between them but a blank: only with a unit, so that `Axis 3` is no force.
fn named(line: &str, decimal: Decimal, kind: Kind) -> Result<Figure, NoFigure> {
    let Some((name, value)) = line.split_once(' ') else {
        return Err(NoFigure::NotAForce);
    };
    if !starts_number(value) || !name.starts_with(char::is_alphabetic) {
        return Err(NoFigure::NotAForce);
    }
    let mut figure = quantity(value, decimal, kind)?;
    if figure.unit.is_none() {
        return Err(NoFigure::NotAForce);
    }
    // `P 3 120 kN`: load P of 3120 kN, or load P 3 of 120 kN.
    if let Some((first, second)) = value.split_once(' ')
        && second.starts_with(|c: char| c.is_ascii_digit())
    {
        return Err(NoFigure::TwoReadings {
            written: line.to_owned(),
            readings: [format!("{name} = {figure}"), format!("{name} {first} = {second}")],
        });
    }
    figure.name = Some(name.to_owned());
    Ok(figure)
}

fn starts_number(text: &str) -> bool {
    let digits = text.trim_start_matches(['+', '-']).trim_start();
    let mut chars = digits.chars();
    match chars.next() {
        Some('0'..='9') => true,
        Some('.' | ',') => chars.next().is_some_and(|c| c.is_ascii_digit()),
        _ => false,
    }
}

/// A number and perhaps a unit, and nothing else but a remark in parentheses.
fn quantity(text: &str, decimal: Decimal, kind: Kind) -> Result<Figure, NoFigure> {
    if !starts_number(text) {
        return Err(NoFigure::NotAForce);
    }
    let end = number_end(text);
    let (number, rest) = text.split_at(end);
    let unit_text = rest.trim();
    let (unit_text, remark) = match unit_text.find('(') {
        Some(at) => (unit_text[..at].trim_end(), &unit_text[at..]),
        None => (unit_text, ""),
    };
    if !remark.is_empty() && !remark.ends_with(')') {
        return Err(NoFigure::NotAForce);
    }
    let (unit, per) = if unit_text.is_empty() {
        (None, None)
    } else if let Some(unit) = ForceUnit::parse(unit_text) {
        (Some(unit), None)
    } else if let Some((unit, metres)) = per_length(unit_text) {
        (Some(unit), Some(metres))
    } else if unit_text.chars().all(char::is_alphabetic) {
        return Err(NoFigure::Unit(unit_text.to_owned()));
    } else {
        return Err(NoFigure::NotAForce);
    };
    match (kind, per) {
        (Kind::Force, Some(_)) => return Err(NoFigure::PerLength),
        (Kind::PerLength, None) => return Err(NoFigure::NotAForce),
        _ => {}
    }
    let value = number_value(number, decimal).map_err(|e| match e {
        // Name the unit too: the readings are what the user chooses from.
        NoFigure::TwoReadings { written, readings } if unit.is_some() => NoFigure::TwoReadings {
            written: format!("{written} {unit_text}"),
            readings: readings.map(|r| format!("{r} {unit_text}")),
        },
        other => other,
    })?;
    Ok(Figure { name: None, value, unit, per })
}

/// A unit of force over a unit of length, with the metres in the latter: `kN/m`, `lbf / ft`, and the running metre and foot.
fn per_length(text: &str) -> Option<(ForceUnit, f64)> {
    match text.to_ascii_lowercase().as_str() {
        "plf" => return Some((ForceUnit::Lbf, LengthUnit::Ft.metres())),
        "klf" => return Some((ForceUnit::Kip, LengthUnit::Ft.metres())),
        _ => {}
    }
    let (force, length) = text.split_once('/')?;
    let force = ForceUnit::parse(force.trim_end())?;
    let length = length.trim_start();
    let metres = match length.to_ascii_lowercase().as_str() {
        "lfm" | "ml" | "m'" => 1.0,
        "lf" | "lin ft" | "ft'" => LengthUnit::Ft.metres(),
        _ => LengthUnit::parse(length)?.metres(),
    };
    Some((force, metres))
}

/// Where the number at the start of the text ends: digits, separators, and blanks or apostrophes before groups of three.
fn number_end(text: &str) -> usize {
    let bytes = text.as_bytes();
    let digit = |i: usize| bytes.get(i).is_some_and(u8::is_ascii_digit);
    let mut i = 0;
    while matches!(bytes.get(i), Some(b'+' | b'-' | b' ')) {
        i += 1;
    }
    loop {
        match bytes.get(i) {
            Some(b'0'..=b'9') => i += 1,
            Some(b'.' | b',') if digit(i + 1) => i += 1,
            Some(b' ' | b'\'') if digit(i + 1) && digit(i + 2) && digit(i + 3) && !digit(i + 4) => {
                i += 4;
            }
            // A separator with nothing after it, as in `85.`, belongs to the number.
            Some(b'.' | b',') if i > 0 && digit(i - 1) => return i + 1,
            _ => return i,
        }
    }
}

fn number_value(text: &str, decimal: Decimal) -> Result<f64, NoFigure> {
    let written = text.trim();
    let negative = match written.as_bytes().first() {
        Some(b'-') => true,
        Some(b'+') => false,
        _ => false,
    };
    let body = written.trim_start_matches(['+', '-']).trim_start();
    if written.len() - body.len() > 1 + usize::from(written.contains(' ')) || body.is_empty() {
        return Err(NoFigure::NotAForce);
    }
    let plain = plain_digits(body, decimal)?;
    let value: f64 = plain.parse().map_err(|_| NoFigure::NotAForce)?;
    if !value.is_finite() {
        return Err(NoFigure::NotAForce);
    }
    Ok(if negative { -value } else { value })
}

/// The number with a point for its decimal sign and no grouping.
fn plain_digits(body: &str, decimal: Decimal) -> Result<String, NoFigure> {
    let body = body.trim_end_matches(['.', ',']);
    let blanks = body.contains([' ', '\'']);
    let commas = body.matches(',').count();
    let points = body.matches('.').count();
    let (mark, group) = match (commas, points) {
        (0, 0) => (None, None),
        (1, 0) | (0, 1) => {
            let sign = if commas == 1 { ',' } else { '.' };
            match decimal {
                Decimal::Auto => {
                    if !blanks && grouped(body, sign) {
                        let stated = body.replace(sign, ".");
                        let joined = body.replace(sign, "");
                        return Err(NoFigure::TwoReadings {
                            written: body.to_owned(),
                            readings: [joined, stated],
                        });
                    }
                    (Some(sign), None)
                }
                Decimal::Comma if sign == ',' => (Some(sign), None),
                Decimal::Point if sign == '.' => (Some(sign), None),
                _ if !blanks && grouped(body, sign) => (None, Some(sign)),
                _ => return Err(NoFigure::Separator(body.to_owned())),
            }
        }
        (_, 0) | (0, _) => (None, Some(if commas > 0 { ',' } else { '.' })),
        _ => {
            // Both kinds: the last one marks the fraction, the other the thousands.
            let last = if body.rfind(',') > body.rfind('.') { ',' } else { '.' };
            (Some(last), Some(if last == ',' { '.' } else { ',' }))
        }
    };
    match (decimal, mark, group) {
        (Decimal::Comma, Some('.'), _) | (Decimal::Point, Some(','), _) => {
            return Err(NoFigure::Separator(body.to_owned()));
        }
        (Decimal::Comma, _, Some(',')) | (Decimal::Point, _, Some('.')) => {
            return Err(NoFigure::Separator(body.to_owned()));
        }
        _ => {}
    }
    let (whole, fraction) = match mark {
        Some(sign) => body.rsplit_once(sign).unwrap_or((body, "")),
        None => (body, ""),
    };
    if !fraction.chars().all(|c| c.is_ascii_digit()) {
        return Err(NoFigure::NotAForce);
    }
    if let Some(sign) = group
        && (blanks || !grouped(whole, sign))
    {
        return Err(NoFigure::NotAForce);
    }
    let whole: String = whole.chars().filter(char::is_ascii_digit).collect();
    Ok(format!("{whole}.{fraction}"))
}

/// Whether the digits stand in groups of three after a first group of one to three that does not begin with 0.
fn grouped(digits: &str, sign: char) -> bool {
    let mut groups = digits.split(sign);
    let first = groups.next().unwrap_or("");
    !first.is_empty()
        && first.len() <= 3
        && !first.starts_with('0')
        && first.bytes().all(|b| b.is_ascii_digit())
        && groups.all(|g| g.len() == 3 && g.bytes().all(|b| b.is_ascii_digit()))
}

#[cfg(test)]
mod tests {
    // What is read from decimal digits is the double nearest to them, to the last bit.
    #![allow(clippy::float_cmp)]

    use super::*;

    fn value(text: &str) -> f64 {
        read(text, Decimal::Auto).unwrap().value
    }

    #[test]
    fn plain_figures() {
        assert_eq!(value("85"), 85.0);
        assert_eq!(value("12,5 kN"), 12.5);
        assert_eq!(value("12.5kN"), 12.5);
        assert_eq!(value(".5 kN"), 0.5);
        assert_eq!(value("85."), 85.0);
        assert_eq!(value("−40 kN"), -40.0);
        assert_eq!(value("- 40"), -40.0);
        assert_eq!(value("+40"), 40.0);
        assert_eq!(value("120 kN (dead)"), 120.0);
        assert_eq!(value("0,125 MN"), 0.125);
        assert_eq!(value("1234.567 N"), 1234.567);
    }

    #[test]
    fn thousands() {
        assert_eq!(value("1 200 kN"), 1200.0);
        assert_eq!(value("1\u{2009}200\u{202f}000 N"), 1_200_000.0);
        assert_eq!(value("1\u{a0}234,567 kN"), 1234.567);
        assert_eq!(value("1.234,5 kN"), 1234.5);
        assert_eq!(value("1,234.5 kN"), 1234.5);
        assert_eq!(value("1'200 kN"), 1200.0);
        assert_eq!(value("1.234.567 N"), 1_234_567.0);
    }

    #[test]
    fn units_and_names() {
        let f = read("P3 = 120 kN", Decimal::Auto).unwrap();
        assert_eq!((f.name.as_deref(), f.value, f.unit), (Some("P3"), 120.0, Some(ForceUnit::KN)));
        let f = read("P3 27 kips", Decimal::Auto).unwrap();
        assert_eq!((f.name.as_deref(), f.unit), (Some("P3"), Some(ForceUnit::Kip)));
        let f = read("Post 3: 85", Decimal::Auto).unwrap();
        assert_eq!((f.name.as_deref(), f.value, f.unit), (Some("Post 3"), 85.0, None));
        let f = read("P3\n120 kN", Decimal::Auto).unwrap();
        assert_eq!((f.name.as_deref(), f.value), (Some("P3"), 120.0));
        let f = read("Spandrel post\nP3 = 120 kN", Decimal::Auto).unwrap();
        assert_eq!((f.name.as_deref(), f.value), (Some("P3"), 120.0));
        for (text, unit) in [
            ("1 N", ForceUnit::N),
            ("1 MN", ForceUnit::MN),
            ("1 KN", ForceUnit::KN),
            ("1 kgf", ForceUnit::Kgf),
            ("1 tf", ForceUnit::Tf),
            ("1 lbf", ForceUnit::Lbf),
            ("1 kip", ForceUnit::Kip),
        ] {
            assert_eq!(read(text, Decimal::Auto).unwrap().unit, Some(unit));
        }
    }

    #[test]
    fn two_readings_are_named() {
        let Err(NoFigure::TwoReadings { written, readings }) = read("1.234 kN", Decimal::Auto) else {
            panic!("one reading");
        };
        assert_eq!(written, "1.234 kN");
        assert_eq!(readings, ["1234 kN".to_owned(), "1.234 kN".to_owned()]);
        assert!(matches!(read("12,500", Decimal::Auto), Err(NoFigure::TwoReadings { .. })));
        assert!(matches!(read("P 3 120 kN", Decimal::Auto), Err(NoFigure::TwoReadings { .. })));
        assert_eq!(read("1.234 kN", Decimal::Point).unwrap().value, 1.234);
        assert_eq!(read("1.234 kN", Decimal::Comma).unwrap().value, 1234.0);
        assert_eq!(read("1,234 kN", Decimal::Point).unwrap().value, 1234.0);
        assert!(matches!(read("12.5 kN", Decimal::Comma), Err(NoFigure::Separator(_))));
        assert!(matches!(read("1,234.5", Decimal::Comma), Err(NoFigure::Separator(_))));
    }

    #[test]
    fn no_force() {
        for text in [
            "",
            "P3",
            "Axis 3",
            "2 x 60 kN",
            "1/2",
            "R = 12,5 m x",
            "3-4",
            "1..2",
            "1,2,3",
            "A = B = 3",
            "--5",
            "1.2.3",
            "see note",
            "120 kN max",
            "= kN",
            "1 2",
            "12:30:00",
            "°",
        ] {
            assert!(read(text, Decimal::Auto).is_err(), "{text}");
        }
        assert_eq!(read("12 kN/m", Decimal::Auto), Err(NoFigure::PerLength));
        assert_eq!(read("g = 12,5 kN / m", Decimal::Auto), Err(NoFigure::PerLength));
        assert_eq!(read("3,5 t", Decimal::Auto), Err(NoFigure::Unit("t".into())));
        assert_eq!(read("3 mN", Decimal::Auto), Err(NoFigure::Unit("mN".into())));
        assert_eq!(read("12 kN\n13 kN", Decimal::Auto), Err(NoFigure::Several));
    }

    #[test]
    fn forces_per_length() {
        let read = |text: &str| read_as(text, Decimal::Auto, Kind::PerLength);
        for (text, value, unit, per) in [
            ("12 kN/m", 12.0, ForceUnit::KN, 1.0),
            ("g = 12,5 kN / m", 12.5, ForceUnit::KN, 1.0),
            ("1.2 tf/m", 1.2, ForceUnit::Tf, 1.0),
            ("0.8 kip/ft", 0.8, ForceUnit::Kip, 0.3048),
            ("850 LBF/FT", 850.0, ForceUnit::Lbf, 0.3048),
            ("2 klf", 2.0, ForceUnit::Kip, 0.3048),
            ("-3 N/mm", -3.0, ForceUnit::N, 0.001),
            ("q 9 kN/lfm", 9.0, ForceUnit::KN, 1.0),
        ] {
            let figure = read(text).unwrap();
            assert_eq!((figure.value, figure.unit, figure.per), (value, Some(unit), Some(per)), "{text}");
        }
        assert_eq!(read("g = 12 kN/m\ndeck").unwrap().name.as_deref(), Some("g"));
        assert!(matches!(read("1.234 kN/m"), Err(NoFigure::TwoReadings { .. })));
        for text in ["12 kN", "12", "12 kN/m2", "12 kN/m²", "12 kNm", "12 /m", "deck"] {
            assert!(read(text).is_err(), "{text}");
        }
    }

    proptest::proptest! {
        #[test]
        fn any_text_is_read_or_refused(text in "\\PC{0,40}") {
            for decimal in [Decimal::Auto, Decimal::Comma, Decimal::Point] {
                if let Ok(figure) = read(&text, decimal) {
                    assert!(figure.value.is_finite());
                }
            }
        }
    }
}
