//! Reading quantities from text.

use super::{Kind, Quantity, Ratio};
use std::fmt;

/// A quantity that was read, with what its reader should know about it.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Reading<Q> {
    /// The value.
    pub value: Q,
    /// True where the text said `mF`: read as millifarad, but an old plate may have meant microfarad.
    pub millifarad: bool,
}

/// Why a text is not the quantity that was due, and what to write instead.
#[derive(Debug, Clone, PartialEq, Eq)]
pub struct QuantityError {
    /// What is wrong with the text.
    pub problem: String,
    /// What to write instead.
    pub help: String,
}

impl fmt::Display for QuantityError {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{}; {}", self.problem, self.help)
    }
}

impl std::error::Error for QuantityError {}

/// A tolerance: how far a value may lie below and above the marked one, as shares of it.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Tolerance {
    low: f64,
    high: f64,
}

impl Tolerance {
    /// No tolerance at all.
    pub const NONE: Tolerance = Tolerance { low: 0.0, high: 0.0 };

    /// A tolerance of `low` below and `high` above.
    ///
    /// # Errors
    /// Where `low` is 100 % or more, or either is negative or not finite.
    pub fn new(low: Ratio, high: Ratio) -> Result<Self, QuantityError> {
        let (low, high) = (low.si(), high.si());
        let usable = low.is_finite() && high.is_finite() && low >= 0.0 && high >= 0.0 && low < 1.0;
        usable.then_some(Tolerance { low, high }).ok_or_else(|| QuantityError {
            problem: "the lower side of a tolerance has to be under 100 %".into(),
            help: "write a tolerance such as `20 %` or `{low: 10 %, high: 30 %}`".into(),
        })
    }

    /// The lowest value over the marked one, such as 0.8 for 20 %.
    pub fn lowest_factor(&self) -> f64 {
        1.0 - self.low
    }

    /// The highest value over the marked one, such as 1.2 for 20 %.
    pub fn highest_factor(&self) -> f64 {
        1.0 + self.high
    }

    /// How far below the marked value, as a share.
    pub fn low(&self) -> Ratio {
        Ratio::from_si(self.low)
    }

    /// How far above the marked value, as a share.
    pub fn high(&self) -> Ratio {
        Ratio::from_si(self.high)
    }

    /// True where the value is the marked one.
    pub fn is_none(&self) -> bool {
        self.low == 0.0 && self.high == 0.0
    }
}

/// A prefix or a whole unit and the power of ten by which it multiplies.
type Scale = (&'static str, i32);

/// What the tool knows of a kind: how to speak of it, its units, an example, and the range it believes.
struct Grammar {
    /// With its article: `a capacitance`.
    name: &'static str,
    units: &'static [&'static str],
    prefixes: &'static [Scale],
    example: &'static str,
    /// Values outside are refused as slips of the pen; in SI base units.
    least: f64,
    greatest: f64,
}

const MICRO: [&str; 3] = ["u", "\u{b5}", "\u{3bc}"];

const OHM: &[&str] = &["ohm", "Ohm", "R", "\u{3a9}", "\u{2126}"];

const fn grammar(kind: Kind) -> Grammar {
    match kind {
        Kind::Capacitance => Grammar {
            name: "a capacitance",
            units: &["F"],
            prefixes: &[("p", -12), ("n", -9), ("u", -6), ("m", -3), ("", 0)],
            example: "3300 uF",
            least: 1e-15,
            greatest: 1e6,
        },
        Kind::Charge => Grammar {
            name: "a charge",
            units: &["C"],
            prefixes: &[("n", -9), ("u", -6), ("m", -3), ("", 0), ("k", 3)],
            example: "50 uC",
            least: 0.0,
            greatest: 1e12,
        },
        Kind::Current => Grammar {
            name: "a current",
            units: &["A"],
            prefixes: &[("n", -9), ("u", -6), ("m", -3), ("", 0), ("k", 3), ("M", 6)],
            example: "40 mA",
            least: 0.0,
            greatest: 1e12,
        },
        Kind::Energy => Grammar {
            name: "an energy",
            units: &["J", "Wh"],
            prefixes: &[("u", -6), ("m", -3), ("", 0), ("k", 3), ("M", 6), ("G", 9)],
            example: "10 J",
            least: 0.0,
            greatest: 1e15,
        },
        Kind::Frequency => Grammar {
            name: "a frequency",
            units: &["Hz"],
            prefixes: &[("", 0), ("k", 3), ("M", 6)],
            example: "50 Hz",
            least: 1e-6,
            greatest: 1e9,
        },
        Kind::Mass => Grammar {
            name: "a mass",
            units: &["g"],
            prefixes: &[("m", -6), ("", -3), ("k", 0)],
            example: "50 g",
            least: 0.0,
            greatest: 1e6,
        },
        Kind::Power => Grammar {
            name: "a power",
            units: &["W"],
            prefixes: &[("u", -6), ("m", -3), ("", 0), ("k", 3), ("M", 6), ("G", 9)],
            example: "25 W",
            least: 0.0,
            greatest: 1e15,
        },
        Kind::ReactivePower => Grammar {
            name: "a reactive power",
            units: &["var"],
            prefixes: &[("", 0), ("k", 3), ("M", 6)],
            example: "50 kvar",
            least: 1e-6,
            greatest: 1e12,
        },
        Kind::Ratio => Grammar {
            name: "a percentage",
            units: &["%"],
            prefixes: &[("", -2)],
            example: "20 %",
            least: 0.0,
            greatest: 1e3,
        },
        Kind::Resistance => Grammar {
            name: "a resistance",
            units: OHM,
            prefixes: &[("u", -6), ("m", -3), ("", 0), ("k", 3), ("K", 3), ("M", 6), ("G", 9), ("T", 12)],
            example: "4.7 kohm",
            least: 1e-9,
            greatest: 1e18,
        },
        Kind::Temperature => Grammar {
            name: "a temperature",
            units: &["°C", "degC", "C"],
            prefixes: &[("", 0)],
            example: "40 °C",
            least: -super::CELSIUS_ZERO_K,
            greatest: 1e4,
        },
        Kind::TemperatureCoefficient => Grammar {
            name: "a temperature coefficient",
            units: &["/K", "/°C", "/degC", "/C"],
            prefixes: &[("ppm", -6), ("%", -2)],
            example: "100 ppm/K",
            // A value that moves by 1 % per kelvin is a sensor.
            least: -1e-2,
            greatest: 1e-2,
        },
        Kind::Time => Grammar {
            name: "a time",
            units: &["us", "ms", "s", "min", "h", "d"],
            prefixes: &[("", 0)],
            example: "5 min",
            least: 0.0,
            greatest: 1e12,
        },
        Kind::Voltage => Grammar {
            name: "a voltage",
            units: &["V"],
            prefixes: &[("u", -6), ("m", -3), ("", 0), ("k", 3), ("M", 6)],
            example: "50 V",
            least: 0.0,
            greatest: 1e9,
        },
    }
}

const ALL_KINDS: [Kind; 14] = [
    Kind::Capacitance,
    Kind::Resistance,
    Kind::Voltage,
    Kind::Current,
    Kind::Time,
    Kind::Energy,
    Kind::Power,
    Kind::ReactivePower,
    Kind::Charge,
    Kind::Frequency,
    Kind::Temperature,
    Kind::TemperatureCoefficient,
    Kind::Mass,
    Kind::Ratio,
];

/// Reads a quantity from text, such as `3300 uF`, `4k7` or `5 min`.
///
/// # Errors
/// Where the text is not a finite, non-negative number with a unit of the right kind. The error says what was
/// expected and what to write instead.
///
/// # Example: a resistance in the letter-and-digit code of IEC 60062
/// ```
/// use ebbvolt::quantity::{Quantity, Resistance, parse};
/// let resistance: Resistance = parse("4k7")?.value;
/// assert_eq!(resistance.si(), 4700.0);
/// # Ok::<(), ebbvolt::quantity::QuantityError>(())
/// ```
pub fn parse<Q: Quantity>(text: &str) -> Result<Reading<Q>, QuantityError> {
    let Reading { value, millifarad } = parse_kind(text, Q::KIND)?;
    Ok(Reading { value: Q::from_si(value), millifarad })
}

/// Reads a quantity of `kind` and gives it in SI base units; see [`parse`]. Reactive power is in var.
///
/// # Errors
/// As [`parse`].
pub fn parse_kind(text: &str, kind: Kind) -> Result<Reading<f64>, QuantityError> {
    let grammar = grammar(kind);
    let text = text.trim();
    let instead = format!("write {} with its unit, such as `{}`", grammar.name, grammar.example);
    let fail = |problem: String, help: String| Err(QuantityError { problem, help });

    if let Some(code) = letter_code(text, kind) {
        return in_range(code, &grammar).map(|value| Reading { value, millifarad: false });
    }
    let Some((number, unit)) = split_number(text) else {
        return fail(format!("`{}` is not {}", clip(text), grammar.name), instead);
    };
    let unit = unit.trim_start();
    if let Some(rest) = unit.strip_prefix(',') {
        let rest = rest.trim_start_matches(|c: char| c.is_ascii_digit());
        let shown = format!("{number}.{}", &unit[1..unit.len() - rest.len()]);
        return fail(
            format!("`{}` has a comma in its number", clip(text)),
            format!("write a decimal point and no thousands separator: `{shown}{}`", clip(rest)),
        );
    }
    if unit.is_empty() {
        return fail(format!("`{number}` has no unit: {} is due", grammar.name), instead);
    }
    if kind == Kind::Capacitance && unit == "MF" {
        return fail(
            "`MF` is ambiguous: old plates use it for microfarad".into(),
            format!("write `{number} uF` for microfarad or `{number} mF` for millifarad"),
        );
    }
    let Some(exponent) = exponent_of(unit, kind) else {
        if let Some(other) = ALL_KINDS.into_iter().find(|k| *k != kind && exponent_of(unit, *k).is_some()) {
            let other = self::grammar(other).name;
            return fail(format!("`{}` is {other}; here {} is due", clip(text), grammar.name), instead);
        }
        return fail(
            format!("`{}` is not a unit of {}", clip(unit), grammar.name.split_once(' ').map_or("", |x| x.1)),
            format!("{instead}; units: {}", unit_list(&grammar)),
        );
    };
    let value = scaled(number, exponent);
    if !value.is_finite() {
        return fail(format!("`{}` is too large a number", clip(text)), instead);
    }
    let value = if kind == Kind::Time { value * seconds_in(unit) } else { value };
    let value = if kind == Kind::Energy && unit.ends_with("Wh") { value * 3600.0 } else { value };
    if !matches!(kind, Kind::Temperature | Kind::TemperatureCoefficient) && (value < 0.0 || number.starts_with('-')) {
        return fail(format!("`{}` is negative", clip(text)), format!("{instead}, without a sign"));
    }
    let value = in_range(value, &grammar)?;
    let value = if kind == Kind::Temperature { value + super::CELSIUS_ZERO_K } else { value };
    Ok(Reading { value, millifarad: kind == Kind::Capacitance && unit == "mF" })
}

fn in_range(value: f64, grammar: &Grammar) -> Result<f64, QuantityError> {
    let Grammar { name, example, least, greatest, .. } = grammar;
    if value == 0.0 && *least > 0.0 {
        return Err(QuantityError {
            problem: format!("{name} of zero is not possible here"),
            help: format!("write {name} above zero, such as `{example}`"),
        });
    }
    if value < *least || value > *greatest {
        return Err(QuantityError {
            problem: format!("{name} of {value:e} in SI units is outside what this tool accepts"),
            help: format!("check the number and its unit; accepted is {least:e} to {greatest:e} in SI units"),
        });
    }
    Ok(value)
}

/// `number` times ten to the `exponent`, correctly rounded: the exponent is joined as text, not multiplied.
fn scaled(number: &str, exponent: i32) -> f64 {
    let (mantissa, own) = match number.find(['e', 'E']) {
        Some(at) => (&number[..at], number[at + 1..].parse::<i64>().unwrap_or(i64::from(i32::MAX))),
        None => (number, 0),
    };
    format!("{mantissa}e{}", own.saturating_add(i64::from(exponent))).parse().unwrap_or(f64::NAN)
}

/// The power of ten for a unit of `kind`, or `None` where it is no such unit.
fn exponent_of(unit: &str, kind: Kind) -> Option<i32> {
    if kind == Kind::Capacitance && (unit == "MFD" || unit == "mfd") {
        return Some(-6);
    }
    let grammar = grammar(kind);
    let base = grammar.units.iter().find(|base| unit.ends_with(**base))?;
    if kind == Kind::Time {
        return (unit == *base).then_some(0).or_else(|| grammar.units.contains(&unit).then_some(0));
    }
    let prefix = unit[..unit.len() - base.len()].trim_end();
    let prefix = if MICRO.contains(&prefix) { "u" } else { prefix };
    grammar.prefixes.iter().find(|(p, _)| *p == prefix).map(|(_, e)| *e)
}

fn seconds_in(unit: &str) -> f64 {
    match unit {
        "us" => 1e-6,
        "ms" => 1e-3,
        "min" => 60.0,
        "h" => 3600.0,
        "d" => 86400.0,
        _ => 1.0,
    }
}

fn unit_list(grammar: &Grammar) -> String {
    let base = grammar.units[0];
    if grammar.units.contains(&"s") {
        return grammar.units.join(", ");
    }
    grammar.prefixes.iter().map(|(p, _)| format!("{p}{base}")).collect::<Vec<_>>().join(", ")
}

/// Splits `text` into a plain decimal number and the rest.
fn split_number(text: &str) -> Option<(&str, &str)> {
    let bytes = text.as_bytes();
    let digits = |mut at: usize| {
        while at < bytes.len() && bytes[at].is_ascii_digit() {
            at += 1;
        }
        at
    };
    let start = usize::from(matches!(bytes.first(), Some(b'+' | b'-')));
    let mut end = digits(start);
    let mut count = end - start;
    if bytes.get(end) == Some(&b'.') {
        let after = digits(end + 1);
        count += after - end - 1;
        end = after;
    }
    if count == 0 {
        return None;
    }
    if matches!(bytes.get(end), Some(b'e' | b'E')) {
        let sign = end + 1 + usize::from(matches!(bytes.get(end + 1), Some(b'+' | b'-')));
        let after = digits(sign);
        if after > sign {
            end = after;
        }
    }
    Some((&text[..end], &text[end..]))
}

/// The letter-and-digit code of IEC 60062 for resistances and capacitances: the letter stands for the decimal
/// point and the multiplier, as in `4k7`, `R47`, `100R`, `4n7`. The unit may follow.
fn letter_code(text: &str, kind: Kind) -> Option<f64> {
    let (letters, units): (&[Scale], &[&str]) = match kind {
        Kind::Resistance => (&[("R", 0), ("k", 3), ("K", 3), ("M", 6), ("G", 9), ("T", 12), ("L", -3)], OHM),
        Kind::Capacitance => {
            (&[("p", -12), ("n", -9), ("u", -6), ("\u{b5}", -6), ("\u{3bc}", -6), ("m", -3), ("F", 0)], &["F"])
        }
        _ => return None,
    };
    let at = text.find(|c: char| !c.is_ascii_digit() && c != '.')?;
    let (whole, rest) = text.split_at(at);
    let (letter, exponent) = letters.iter().find(|(l, _)| rest.starts_with(l))?;
    let rest = &rest[letter.len()..];
    let end = rest.find(|c: char| !c.is_ascii_digit()).unwrap_or(rest.len());
    let (fraction, unit) = rest.split_at(end);
    let unit = unit.trim_start();
    let is_code = (!whole.is_empty() || !fraction.is_empty())
        && !(whole.contains('.') && (!fraction.is_empty() || whole.matches('.').count() > 1 || whole == "."))
        && (unit.is_empty() || (units.contains(&unit) && !fraction.is_empty()));
    if !is_code {
        return None;
    }
    let number = if whole.contains('.') { whole.to_string() } else { format!("{whole}.{fraction}") };
    Some(scaled(&number, *exponent)).filter(|v| v.is_finite())
}

/// At most 40 characters of a text from outside, so that an error stays readable.
fn clip(text: &str) -> String {
    let mut shown: String = text.chars().take(40).map(|c| if c.is_control() { '\u{fffd}' } else { c }).collect();
    if text.chars().nth(40).is_some() {
        shown.push('…');
    }
    shown
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::quantity::{Capacitance, Energy, Power, Resistance, Temperature, TemperatureCoefficient, Time, Voltage};

    fn value<Q: Quantity>(text: &str) -> f64 {
        parse::<Q>(text).unwrap_or_else(|e| panic!("{text}: {e}")).value.si()
    }

    fn refused<Q: Quantity>(text: &str) -> QuantityError {
        parse::<Q>(text).map(|r| r.value.si()).expect_err(text)
    }

    #[test]
    #[allow(clippy::float_cmp)] // Decimal text must become the nearest double, to the last bit.
    fn quantities_of_the_contract_are_read_to_the_last_bit() {
        for text in ["3300 uF", "3300uF", "3300 \u{b5}F", "3300\u{3bc}F", "3300 MFD", "3300 mfd", "3300u", "3.3 mF"] {
            assert_eq!(value::<Capacitance>(text), 3300e-6, "{text}");
        }
        for text in ["4.7 kohm", "4k7", "4K7", "4.7kOhm", "4.7 k\u{3a9}", "4.7k\u{2126}", "4.7 kR", "4700R", "4700 ohm"]
        {
            assert_eq!(value::<Resistance>(text), 4700.0, "{text}");
        }
        assert_eq!(value::<Resistance>("2M2"), 2.2e6);
        assert_eq!(value::<Resistance>("R47"), 0.47);
        assert_eq!(value::<Resistance>("100R"), 100.0);
        assert_eq!(value::<Resistance>("33k"), 33e3);
        assert_eq!(value::<Resistance>("10 mohm"), 0.01);
        assert_eq!(value::<Resistance>("3 Tohm"), 3e12);
        assert_eq!(value::<Capacitance>("4n7"), 4.7e-9);
        assert_eq!(value::<Capacitance>("470u"), 470e-6);
        assert_eq!(value::<Time>("5 min"), 300.0);
        assert_eq!(value::<Time>("2 ms"), 0.002);
        assert_eq!(value::<Time>("1 d"), 86400.0);
        assert_eq!(value::<Temperature>("40 °C"), 313.15);
        assert_eq!(value::<Temperature>("-10 degC"), 263.15);
        assert_eq!(value::<Temperature>("25 C"), 298.15);
        assert_eq!(value::<TemperatureCoefficient>("100 ppm/K"), 1e-4);
        assert_eq!(value::<TemperatureCoefficient>("-750ppm/°C"), -7.5e-4);
        assert_eq!(value::<TemperatureCoefficient>("0.39 %/K"), 3.9e-3);
        assert_eq!(value::<Ratio>("20 %"), 0.2);
        assert_eq!(value::<Energy>("0.5 J"), 0.5);
        assert_eq!(value::<Power>("25 W"), 25.0);
        assert_eq!(value::<Voltage>("1.5e3 V"), 1500.0);
        assert_eq!(parse_kind("50 kvar", Kind::ReactivePower).map(|r| r.value), Ok(50e3));
    }

    #[test]
    fn millifarad_is_read_and_noted() {
        assert!(parse::<Capacitance>("3 mF").is_ok_and(|r| r.millifarad));
        assert!(parse::<Capacitance>("3 uF").is_ok_and(|r| !r.millifarad));
    }

    #[test]
    fn what_is_not_the_quantity_due_is_refused_with_a_way_out() {
        assert!(refused::<Capacitance>("3300").problem.contains("no unit"));
        assert!(refused::<Capacitance>("3300 V").problem.contains("a voltage"));
        assert!(refused::<Capacitance>("10 MF").help.contains("uF"));
        assert!(refused::<Capacitance>("4,7 uF").help.contains("4.7"));
        assert!(refused::<Capacitance>("0 uF").problem.contains("zero"));
        assert!(refused::<Resistance>("0 ohm").problem.contains("zero"));
        assert!(refused::<Resistance>("-5 ohm").problem.contains("negative"));
        assert!(refused::<Resistance>("0R").problem.contains("zero"));
        for text in
            ["NaN uF", "inf F", "-inf F", "1e999 F", "uF", "", "3300 furlong", "4k7k", "1.2.3 uF", "0x10 F", "."]
        {
            refused::<Capacitance>(text);
        }
        assert_eq!(value::<Voltage>("0 V").to_bits(), 0f64.to_bits());
        refused::<Voltage>("-0 V");
    }

    #[test]
    fn a_tolerance_is_under_one_hundred_percent_below() {
        let ratio = |x| Ratio::from_si(x);
        assert!(Tolerance::new(ratio(0.1), ratio(3.0)).is_ok());
        assert!(Tolerance::new(ratio(1.0), ratio(0.0)).is_err());
        assert!(Tolerance::new(ratio(f64::NAN), ratio(0.0)).is_err());
    }
}
