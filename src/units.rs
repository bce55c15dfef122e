//! Units of length and force, the drawing's own unit, and quantities written with a unit.
//!
//! Inside the tool lengths are in m, forces in kN, stresses in MPa and unit weights in kN/m³. The inch is 25.4 mm and
//! the foot 0.3048 m (international yard and pound agreement, 1959); the pound is 0.453 592 37 kg (the same); standard
//! gravity is 9.806 65 m/s² (3rd General Conference on Weights and Measures, 1901). All of them are exact by
//! definition.

use std::fmt;

use serde::{Serialize, Serializer};

/// kN/m² in a MPa.
pub const KN_PER_M2: f64 = 1000.0;

/// Standard gravity, m/s²: the weight of one kilogram in newtons (3rd CGPM, 1901).
pub const STANDARD_GRAVITY: f64 = 9.806_65;

/// Mass of one pound, kg (international yard and pound agreement, 1959).
pub const POUND: f64 = 0.453_592_37;

/// Unit of length of a drawing or of a written quantity.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub enum LengthUnit {
    /// Millimetre.
    Mm,
    /// Centimetre.
    Cm,
    /// Metre.
    M,
    /// International inch.
    In,
    /// International foot.
    Ft,
}

impl LengthUnit {
    /// All of them, in the order in which they are listed to the user.
    pub const ALL: [Self; 5] = [Self::Mm, Self::Cm, Self::M, Self::In, Self::Ft];

    /// Its sign: `mm`, `cm`, `m`, `in`, `ft`.
    pub fn name(self) -> &'static str {
        match self {
            Self::Mm => "mm",
            Self::Cm => "cm",
            Self::M => "m",
            Self::In => "in",
            Self::Ft => "ft",
        }
    }

    /// Metres in one unit.
    pub fn metres(self) -> f64 {
        self.to_metres(1.0)
    }

    /// A length of `value` units in metres. Rounds once for the metric units, so `200 mm` is exactly the double `0.2`.
    pub fn to_metres(self, value: f64) -> f64 {
        match self {
            Self::Mm => value / 1000.0,
            Self::Cm => value / 100.0,
            Self::M => value,
            Self::In => value * 254.0 / 10_000.0,
            Self::Ft => value * 3048.0 / 10_000.0,
        }
    }

    /// Reads a sign, in capitals or small letters; `None` for anything else.
    pub fn parse(text: &str) -> Option<Self> {
        Self::ALL.into_iter().find(|unit| unit.name().eq_ignore_ascii_case(text))
    }

    /// The unit that a drawing without `$INSUNITS` most likely uses by its `$MEASUREMENT`: 0 (English) inches, 1
    /// (metric) millimetres. The variable only chooses hatch and line type files, so this is a likelihood and belongs
    /// into the findings as such.
    pub fn from_measurement(code: i64) -> Option<Self> {
        match code {
            0 => Some(Self::In),
            1 => Some(Self::Mm),
            _ => None,
        }
    }
}

impl fmt::Display for LengthUnit {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(self.name())
    }
}

impl Serialize for LengthUnit {
    fn serialize<S: Serializer>(&self, serializer: S) -> Result<S::Ok, S::Error> {
        serializer.serialize_str(self.name())
    }
}

/// What `$INSUNITS` says.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Insunits {
    /// A unit that lengths can be converted from without loss of meaning.
    Known {
        /// Its sign, such as `mm`, or its name, such as `US survey foot`.
        name: &'static str,
        /// Metres in one unit.
        metres: f64,
    },
    /// Code 0: the drawing states no unit.
    Unitless,
    /// A unit in which no bridge is drawn (light years, ångström), or a code that does not exist.
    Refused {
        /// Its name, or `unknown code`.
        name: &'static str,
    },
}

impl From<LengthUnit> for Insunits {
    fn from(unit: LengthUnit) -> Self {
        Self::Known { name: unit.name(), metres: unit.metres() }
    }
}

/// Meaning of the header variable `$INSUNITS`.
///
/// The survey foot is 1200/3937 m (United States Coast and Geodetic Survey, 1893).
pub fn insunits(code: i64) -> Insunits {
    const SURVEY_FOOT: f64 = 1200.0 / 3937.0;
    let known = |name, metres| Insunits::Known { name, metres };
    let refused = |name| Insunits::Refused { name };
    match code {
        0 => Insunits::Unitless,
        1 => LengthUnit::In.into(),
        2 => LengthUnit::Ft.into(),
        3 => known("mile", 1609.344),
        4 => LengthUnit::Mm.into(),
        5 => LengthUnit::Cm.into(),
        6 => LengthUnit::M.into(),
        7 => known("km", 1000.0),
        8 => refused("microinch"),
        9 => refused("mil"),
        10 => known("yard", 0.9144),
        11 => refused("ångström"),
        12 => refused("nanometre"),
        13 => refused("micrometre"),
        14 => known("dm", 0.1),
        15 => known("dam", 10.0),
        16 => known("hm", 100.0),
        17 => refused("gigametre"),
        18 => refused("astronomical unit"),
        19 => refused("light year"),
        20 => refused("parsec"),
        21 => known("US survey foot", SURVEY_FOOT),
        22 => known("US survey inch", SURVEY_FOOT / 12.0),
        23 => known("US survey yard", SURVEY_FOOT * 3.0),
        24 => known("US survey mile", SURVEY_FOOT * 5280.0),
        _ => refused("unknown code"),
    }
}

/// Unit of force.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash, PartialOrd, Ord)]
pub enum ForceUnit {
    /// Newton.
    N,
    /// Kilonewton.
    KN,
    /// Meganewton.
    MN,
    /// Kilogram-force: the weight of 1 kg under standard gravity.
    Kgf,
    /// Tonne-force: 1000 kgf.
    Tf,
    /// Pound-force: the weight of one pound under standard gravity.
    Lbf,
    /// Kip: 1000 lbf.
    Kip,
}

impl ForceUnit {
    /// All of them, in the order in which they are listed to the user.
    pub const ALL: [Self; 7] = [Self::N, Self::KN, Self::MN, Self::Kgf, Self::Tf, Self::Lbf, Self::Kip];

    /// Its sign: `N`, `kN`, `MN`, `kgf`, `tf`, `lbf`, `kip`.
    pub fn name(self) -> &'static str {
        match self {
            Self::N => "N",
            Self::KN => "kN",
            Self::MN => "MN",
            Self::Kgf => "kgf",
            Self::Tf => "tf",
            Self::Lbf => "lbf",
            Self::Kip => "kip",
        }
    }

    /// Kilonewtons in one unit.
    pub fn kilonewtons(self) -> f64 {
        self.to_kilonewtons(1.0)
    }

    /// A force of `value` units in kN.
    pub fn to_kilonewtons(self, value: f64) -> f64 {
        match self {
            Self::N => value / 1000.0,
            Self::KN => value,
            Self::MN => value * 1000.0,
            Self::Kgf => value * STANDARD_GRAVITY / 1000.0,
            Self::Tf => value * STANDARD_GRAVITY,
            Self::Lbf => value * (POUND * STANDARD_GRAVITY) / 1000.0,
            Self::Kip => value * (POUND * STANDARD_GRAVITY),
        }
    }

    /// Reads a sign. Capitals and small letters do not matter (drawings are often lettered in capitals), except that
    /// only `MN` is a meganewton: `mN` would be a millinewton and `mn` could be either, so both are `None`. `kips` is
    /// read too; `t`, `kg` and `lb`, which may be masses, are not.
    pub fn parse(text: &str) -> Option<Self> {
        if text.eq_ignore_ascii_case("mn") {
            return (text == "MN").then_some(Self::MN);
        }
        if text.eq_ignore_ascii_case("kips") {
            return Some(Self::Kip);
        }
        Self::ALL.into_iter().find(|unit| unit.name().eq_ignore_ascii_case(text))
    }
}

impl fmt::Display for ForceUnit {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(self.name())
    }
}

impl Serialize for ForceUnit {
    fn serialize<S: Serializer>(&self, serializer: S) -> Result<S::Ok, S::Error> {
        serializer.serialize_str(self.name())
    }
}

/// What a quantity measures, and with it the unit that a plain number is in.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
pub enum Dimension {
    /// m.
    Length,
    /// kN.
    Force,
    /// kN/m.
    LineLoad,
    /// MPa.
    Stress,
    /// kN/m³.
    UnitWeight,
    /// m⁴.
    Inertia,
    /// K, a difference of temperatures.
    Temperature,
    /// 1/K.
    Expansion,
    /// rad.
    Angle,
    /// No unit.
    Plain,
}

impl Dimension {
    /// Unit of a plain number, and of every value inside the tool.
    pub fn unit(self) -> &'static str {
        match self {
            Self::Length => "m",
            Self::Force => "kN",
            Self::LineLoad => "kN/m",
            Self::Stress => "MPa",
            Self::UnitWeight => "kN/m3",
            Self::Inertia => "m4",
            Self::Temperature => "K",
            Self::Expansion => "1/K",
            Self::Angle => "rad",
            Self::Plain => "",
        }
    }

    /// Units that are read, for messages.
    pub fn examples(self) -> &'static str {
        match self {
            Self::Length => "mm, cm, m, in, ft",
            Self::Force => "N, kN, MN, kgf, tf, lbf, kip",
            Self::LineLoad => "kN/m, N/mm, kgf/m, lbf/ft, kip/ft",
            Self::Stress => "MPa, kPa, N/mm2, kN/m2, psi, ksi",
            Self::UnitWeight => "kN/m3, kgf/m3, lbf/ft3",
            Self::Inertia => "m4, cm4, mm4, in4, ft4",
            Self::Temperature => "K",
            Self::Expansion => "1/K",
            Self::Angle => "rad",
            Self::Plain => "none",
        }
    }

    /// `value` of the written `unit` in the tool's own unit; `None` when the unit does not measure this.
    pub fn convert(self, value: f64, unit: &str) -> Option<f64> {
        match self {
            Self::Length => Some(LengthUnit::parse(unit)?.to_metres(value)),
            Self::Force => Some(ForceUnit::parse(unit)?.to_kilonewtons(value)),
            Self::LineLoad => force_per_length(value, unit, 1),
            Self::UnitWeight => force_per_length(value, unit, 3),
            Self::Stress => stress(value, unit),
            Self::Inertia => {
                let (length, power) = length_power(unit)?;
                (power == 4).then(|| raise(length, value, 4))
            }
            Self::Temperature => (unit == "K").then_some(value),
            Self::Expansion => (unit == "1/K").then_some(value),
            Self::Angle => unit.eq_ignore_ascii_case("rad").then_some(value),
            Self::Plain => None,
        }
    }

    /// Reads a quantity such as `200 mm`, `25 kN/m3` or `0.2`, in the tool's own unit. A number without a unit is in
    /// [`Dimension::unit`].
    ///
    /// # Errors
    /// [`QuantityError`] when there is no number, the number is not finite, or the unit does not measure this.
    pub fn parse(self, text: &str) -> Result<f64, QuantityError> {
        let (value, unit) = split_quantity(text)?;
        let value = if unit.is_empty() {
            value
        } else {
            self.convert(value, unit).ok_or_else(|| QuantityError::Unit(unit.to_owned()))?
        };
        if value.is_finite() { Ok(value) } else { Err(QuantityError::NotFinite) }
    }
}

/// Why a quantity was not read.
#[derive(Debug, Clone, PartialEq, Eq, thiserror::Error)]
pub enum QuantityError {
    /// The text does not begin with a number.
    #[error("it does not begin with a number")]
    NoNumber,
    /// A comma stands in the number.
    #[error("it has a comma in the number")]
    Comma,
    /// The number is too large for a double.
    #[error("it is not a finite number")]
    NotFinite,
    /// The unit is unknown or measures something else.
    #[error("`{0}` is no unit for it")]
    Unit(String),
}

/// Splits `15 kip` into the number 15 and the unit `kip`; the unit is empty when there is none.
///
/// # Errors
/// [`QuantityError`] when the text does not begin with a number with a decimal point, or it overflows.
pub fn split_quantity(text: &str) -> Result<(f64, &str), QuantityError> {
    let text = text.trim();
    let end = number_length(text.as_bytes());
    let (number, unit) = (text.get(..end), text.get(end..));
    let (Some(number), Some(unit)) = (number, unit) else {
        return Err(QuantityError::NoNumber);
    };
    if unit.starts_with(',') {
        return Err(QuantityError::Comma);
    }
    let value: f64 = number.parse().map_err(|_| QuantityError::NoNumber)?;
    if value.is_finite() { Ok((value, unit.trim_start())) } else { Err(QuantityError::NotFinite) }
}

/// Bytes of the decimal number at the start: sign, digits, point, digits, exponent. Always ends between characters,
/// because all of these are ASCII.
fn number_length(bytes: &[u8]) -> usize {
    let digits = |from: usize| bytes.iter().skip(from).take_while(|byte| byte.is_ascii_digit()).count();
    let mut end = usize::from(matches!(bytes.first(), Some(b'+' | b'-')));
    end += digits(end);
    if bytes.get(end) == Some(&b'.') {
        end += 1 + digits(end + 1);
    }
    if matches!(bytes.get(end), Some(b'e' | b'E')) {
        let sign = usize::from(matches!(bytes.get(end + 1), Some(b'+' | b'-')));
        let exponent = digits(end + 1 + sign);
        if exponent > 0 {
            end += 1 + sign + exponent;
        }
    }
    end
}

/// `value` in kN per m to the `power`, from a unit such as `lbf/ft3`.
fn force_per_length(value: f64, unit: &str, power: u32) -> Option<f64> {
    let (force, length) = unit.split_once('/')?;
    let force = ForceUnit::parse(force.trim())?;
    let (length, written) = length_power(length.trim())?;
    (written == power).then(|| lower(length, force.to_kilonewtons(value), power))
}

/// `value` in MPa.
fn stress(value: f64, unit: &str) -> Option<f64> {
    match unit {
        "Pa" => Some(value / 1e6),
        "kPa" => Some(value / 1e3),
        "MPa" => Some(value),
        "GPa" => Some(value * 1e3),
        "psi" => stress(value, "lbf/in2"),
        "ksi" => stress(value, "kip/in2"),
        _ => Some(force_per_length(value, unit, 2)? / 1e3),
    }
}

/// Splits `m3`, `m^3`, `m³` or `m` into the unit and its power.
fn length_power(text: &str) -> Option<(LengthUnit, u32)> {
    let (unit, power) = match text.char_indices().next_back()? {
        (at, '2' | '²') => (&text[..at], 2),
        (at, '3' | '³') => (&text[..at], 3),
        (at, '4' | '⁴') => (&text[..at], 4),
        _ => (text, 1),
    };
    let unit = unit.strip_suffix('^').unwrap_or(unit);
    Some((LengthUnit::parse(unit)?, power))
}

/// Multiplies by metres per unit `power` times.
fn raise(unit: LengthUnit, value: f64, power: u32) -> f64 {
    (0..power).fold(value, |value, _| unit.to_metres(value))
}

/// Divides by metres per unit `power` times; for the metric units by whole numbers, so it rounds as little as it can.
fn lower(unit: LengthUnit, value: f64, power: u32) -> f64 {
    (0..power).fold(value, |value, _| match unit {
        LengthUnit::Mm => value * 1000.0,
        LengthUnit::Cm => value * 100.0,
        LengthUnit::M => value,
        LengthUnit::In | LengthUnit::Ft => value / unit.metres(),
    })
}

#[cfg(test)]
mod tests {
    use super::*;

    fn close(a: f64, b: f64) -> bool {
        (a - b).abs() <= 1e-14 * b.abs()
    }

    #[test]
    #[allow(clippy::float_cmp)]
    fn written_lengths_equal_the_literals() {
        for (text, value) in [
            ("200 mm", 0.2),
            ("300mm", 0.3),
            ("7 cm", 0.07),
            ("0.2", 0.2),
            ("-1.5e1 m", -15.0),
            ("1 ft", 0.3048),
            ("1 in", 0.0254),
            (" 12 IN ", 0.3048),
        ] {
            assert_eq!(Dimension::Length.parse(text), Ok(value), "{text}");
        }
    }

    #[test]
    fn forces_by_definition() {
        assert!(close(ForceUnit::Lbf.kilonewtons(), 4.448_221_615_260_5e-3));
        assert!(close(ForceUnit::Kip.kilonewtons(), 4.448_221_615_260_5));
        assert!(close(ForceUnit::Kgf.kilonewtons(), 9.806_65e-3));
        assert!(close(ForceUnit::Tf.kilonewtons(), 9.806_65));
        assert!(close(ForceUnit::MN.kilonewtons(), 1e3));
        assert!(close(ForceUnit::N.kilonewtons(), 1e-3));
        assert_eq!(ForceUnit::parse("KN"), Some(ForceUnit::KN));
        assert_eq!(ForceUnit::parse("KIPS"), Some(ForceUnit::Kip));
        for mass_or_doubt in ["mN", "mn", "Mn", "t", "kg", "lb", "", "k", "µN"] {
            assert_eq!(ForceUnit::parse(mass_or_doubt), None, "{mass_or_doubt}");
        }
    }

    #[test]
    fn stresses_and_unit_weights() {
        let stress = |text| Dimension::Stress.parse(text).unwrap();
        for text in
            ["20 MPa", "20 N/mm2", "20 N/mm²", "20000 kPa", "20000 kN/m^2", "2 kN/cm2", "0.02 GPa", "2e7 Pa"]
        {
            assert!(close(stress(text), 20.0), "{text}");
        }
        // 1 psi = 6894.757 293 168 361 Pa, from the definitions of pound, gravity and inch.
        assert!(close(stress("1 psi"), 6.894_757_293_168_361e-3));
        assert!(close(stress("1 ksi"), 6.894_757_293_168_361));
        let weight = |text| Dimension::UnitWeight.parse(text).unwrap();
        assert!(close(weight("25 kN/m3"), 25.0));
        assert!(close(weight("2500 kgf/m3"), 24.516_625));
        // 1 lbf/ft³ = 157.087 463 846 N/m³ (the quotient of the definitions).
        assert!(close(weight("150 lbf/ft3"), 150.0 * 4.448_221_615_260_5e-3 / 0.028_316_846_592));
        assert!(close(Dimension::LineLoad.parse("1 kip/ft").unwrap(), 4.448_221_615_260_5 / 0.3048));
        assert!(close(Dimension::Inertia.parse("1e12 mm4").unwrap(), 1.0));
        assert!(close(Dimension::Inertia.parse("1 ft⁴").unwrap(), 0.3048_f64.powi(4)));
    }

    #[test]
    fn what_is_no_quantity() {
        use QuantityError::{Comma, NoNumber, NotFinite, Unit};
        let length = |text| Dimension::Length.parse(text).unwrap_err();
        assert_eq!(length("wide"), NoNumber);
        assert_eq!(length(""), NoNumber);
        assert_eq!(length("."), NoNumber);
        assert_eq!(length("-"), NoNumber);
        assert_eq!(length("inf"), NoNumber);
        assert_eq!(length("1,5 m"), Comma);
        assert_eq!(length("1e999 m"), NotFinite);
        assert_eq!(length("3 kN"), Unit("kN".into()));
        assert_eq!(length("3 m2"), Unit("m2".into()));
        assert_eq!(Dimension::Plain.parse("3 m"), Err(Unit("m".into())));
        assert_eq!(Dimension::Stress.parse("3 kN/m3"), Err(Unit("kN/m3".into())));
        assert_eq!(Dimension::Force.parse("3 mN"), Err(Unit("mN".into())));
    }

    #[test]
    #[allow(clippy::float_cmp)]
    fn codes_of_the_drawing_unit() {
        let metres = |code| match insunits(code) {
            Insunits::Known { metres, .. } => metres,
            other => panic!("{code}: {other:?}"),
        };
        assert_eq!([1, 2, 4, 5, 6].map(metres), [0.0254, 0.3048, 0.001, 0.01, 1.0]);
        assert_eq!([7, 10, 14].map(metres), [1000.0, 0.9144, 0.1]);
        assert!(close(metres(21), 0.304_800_609_601_219_2));
        assert_eq!(insunits(0), Insunits::Unitless);
        for code in [8, 9, 11, 12, 13, 17, 18, 19, 20, 25, -1, i64::MAX] {
            assert!(matches!(insunits(code), Insunits::Refused { .. }), "{code}");
        }
        assert_eq!(LengthUnit::from_measurement(0), Some(LengthUnit::In));
        assert_eq!(LengthUnit::from_measurement(1), Some(LengthUnit::Mm));
        assert_eq!(LengthUnit::from_measurement(2), None);
    }
}
