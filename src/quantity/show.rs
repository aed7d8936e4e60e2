//! Quantities as text, rounded in a stated direction.
//!
//! A wait that is shown shorter, or a voltage shown lower than it was computed, can hurt; so every figure is
//! rounded up or down on its decimal digits, never to the nearest by accident.

use super::{CELSIUS_ZERO_K, Kind, Quantity, Time};
use std::fmt;

/// Which way a shown figure may differ from the computed one.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub enum Direction {
    /// Never less than the computed value: waits, voltages, currents, energies, powers, temperatures.
    Up,
    /// Never more than the computed value: margins, ratings, allowed values, the lower edge of a band.
    Down,
}

/// A decimal number `digits * 10^exponent`, already rounded.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub struct Rounded {
    negative: bool,
    digits: u128,
    exponent: i32,
}

/// Digits that are taken as meant: the engine's figures are good to 1e-9, so a 1 in the 13th digit is noise of
/// floating-point arithmetic and must not turn 50 V into 50.1 V.
const MEANT_DIGITS: i32 = 13;

impl Rounded {
    /// `value` rounded to a multiple of `10^last`.
    fn at(value: f64, last: i32, direction: Direction) -> Self {
        let text = format!("{:.*e}", MEANT_DIGITS as usize - 1, value.abs());
        let (mantissa, exponent) = text.split_once('e').unwrap_or((&text, "0"));
        let digits: u128 = mantissa.replace('.', "").parse().unwrap_or(0);
        let exponent = exponent.parse::<i32>().unwrap_or(0) - (MEANT_DIGITS - 1);
        let negative = value < 0.0;
        if exponent >= last {
            return Rounded { negative, digits, exponent };
        }
        let away = (direction == Direction::Up) != negative;
        let drop = u32::try_from(last - exponent).unwrap_or(u32::MAX);
        let unit = 10u128.checked_pow(drop).unwrap_or(u128::MAX);
        let kept = digits / unit + u128::from(away && !digits.is_multiple_of(unit));
        Rounded { negative: negative && kept != 0, digits: kept, exponent: last }
    }

    /// `value` rounded to `count` significant digits.
    fn significant(value: f64, count: i32, direction: Direction) -> Self {
        let rounded = Self::at(value, leading_exponent(value) - count + 1, direction);
        // 999.1 rounded up to three digits is 1000: one digit too many.
        let carried =
            rounded.digits.checked_ilog10().is_some_and(|n| n as i32 >= count) && rounded.digits.is_multiple_of(10);
        if carried {
            Rounded { digits: rounded.digits / 10, exponent: rounded.exponent + 1, ..rounded }
        } else {
            rounded
        }
    }

    /// Power of ten of the first digit; 0 for zero.
    fn leading(&self) -> i32 {
        self.digits.checked_ilog10().map_or(0, |n| n as i32 + self.exponent)
    }
}

impl fmt::Display for Rounded {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        let sign = if self.negative { "-" } else { "" };
        if self.exponent >= 0 {
            let zeros = if self.digits == 0 { 0 } else { self.exponent as usize };
            return write!(f, "{sign}{}{}", self.digits, "0".repeat(zeros));
        }
        let decimals = self.exponent.unsigned_abs() as usize;
        let digits = format!("{:0>width$}", self.digits, width = decimals + 1);
        let (whole, fraction) = digits.split_at(digits.len() - decimals);
        write!(f, "{sign}{whole}.{fraction}")
    }
}

fn leading_exponent(value: f64) -> i32 {
    let text = format!("{:.*e}", MEANT_DIGITS as usize - 1, value.abs());
    text.split_once('e').and_then(|(_, e)| e.parse().ok()).unwrap_or(0)
}

const PREFIXES: [(i32, &str); 9] =
    [(-12, "p"), (-9, "n"), (-6, "u"), (-3, "m"), (0, ""), (3, "k"), (6, "M"), (9, "G"), (12, "T")];

/// Unit and the powers of ten of the smallest and largest prefix that people use with it.
fn unit_of(kind: Kind) -> (&'static str, i32, i32) {
    match kind {
        Kind::Capacitance => ("F", -12, 0),
        Kind::Charge => ("C", -9, 3),
        Kind::Current => ("A", -9, 6),
        Kind::Energy => ("J", -6, 9),
        Kind::Frequency => ("Hz", 0, 6),
        Kind::Mass => ("kg", 0, 0),
        Kind::Power => ("W", -6, 9),
        Kind::ReactivePower => ("var", 0, 6),
        Kind::Ratio => ("%", 0, 0),
        Kind::Resistance => ("ohm", -6, 12),
        Kind::Temperature => ("°C", 0, 0),
        Kind::TemperatureCoefficient => ("1/K", 0, 0),
        Kind::Time => ("s", -9, 0),
        Kind::Voltage => ("V", -3, 6),
    }
}

/// A quantity with three significant digits and its unit, rounded in `direction`.
///
/// # Example: a voltage that is shown is never lower than the computed one
/// ```
/// use ebbvolt::quantity::{Direction, Quantity, Voltage, show};
/// assert_eq!(show(Voltage::from_si(49.91), Direction::Up), "50.0 V");
/// assert_eq!(show(Voltage::from_si(49.91), Direction::Down), "49.9 V");
/// ```
pub fn show<Q: Quantity>(quantity: Q, direction: Direction) -> String {
    show_digits(quantity, 3, direction)
}

/// The same with `digits` significant digits, for figures that are checked by hand; a temperature stays in whole
/// degrees.
pub fn show_digits<Q: Quantity>(quantity: Q, digits: u32, direction: Direction) -> String {
    let digits = digits.clamp(1, MEANT_DIGITS as u32) as i32;
    let si = quantity.si();
    if !si.is_finite() {
        return "not finite".into();
    }
    match Q::KIND {
        Kind::Temperature => format!("{} °C", Rounded::at(si - CELSIUS_ZERO_K, 0, direction)),
        Kind::Ratio => format!("{} %", trimmed(&Rounded::significant(si * 100.0, digits, direction).to_string())),
        kind => {
            let (unit, least, greatest) = unit_of(kind);
            with_prefix(si, unit, (least, greatest), digits, direction)
        }
    }
}

fn with_prefix(si: f64, unit: &str, (least, greatest): (i32, i32), digits: i32, direction: Direction) -> String {
    if si == 0.0 {
        return format!("0 {unit}");
    }
    // Far below the smallest prefix, two decimals of it are enough; rounding up keeps it above zero.
    let mut rounded = Rounded::significant(si, digits, direction);
    if rounded.leading() < least {
        rounded = Rounded::at(si, least - 2, direction);
        if rounded.digits == 0 {
            return format!("0 {unit}");
        }
        let prefix = PREFIXES.iter().find(|(e, _)| *e == least).map_or("", |(_, p)| p);
        rounded.exponent -= least;
        return format!("{rounded} {prefix}{unit}");
    }
    let scale = rounded.leading().div_euclid(3).saturating_mul(3).clamp(least, greatest);
    let prefix = PREFIXES.iter().find(|(e, _)| *e == scale).map_or("", |(_, p)| p);
    rounded.exponent -= scale;
    format!("{rounded} {prefix}{unit}")
}

fn trimmed(text: &str) -> &str {
    if text.contains('.') { text.trim_end_matches('0').trim_end_matches('.') } else { text }
}

/// A time as people say it, rounded in `direction`: `12.3 ms`, `47.2 s`, `4 min 33 s`, `5 h 12 min`, `3 d 4 h`.
pub fn duration(time: Time, direction: Direction) -> String {
    let s = time.si();
    if !s.is_finite() {
        return "not finite".into();
    }
    if s < 120.0 {
        return show(time, direction);
    }
    let (coarse, fine) = match s {
        s if s < 7200.0 => (("min", 60u32), ("s", 1u32)),
        s if s < 172_800.0 => (("h", 3600), ("min", 60)),
        _ => (("d", 86_400), ("h", 3600)),
    };
    let count = units(s / f64::from(fine.1), direction);
    let per = u128::from(coarse.1 / fine.1);
    let (whole, rest) = (count / per, count % per);
    if rest == 0 { format!("{whole} {}", coarse.0) } else { format!("{whole} {} {rest} {}", coarse.0, fine.0) }
}

/// A whole number of units, rounded in `direction`.
fn units(value: f64, direction: Direction) -> u128 {
    let r = Rounded::at(value, 0, direction);
    r.digits * 10u128.pow(r.exponent.max(0) as u32)
}

/// A time rounded up to one that people can keep: whole seconds under 2 min, 10 s under 20 min, else 1 min.
pub fn keepable(time: Time) -> Time {
    let s = time.si();
    let grid = if s < 120.0 {
        1.0
    } else if s < 1200.0 {
        10.0
    } else {
        60.0
    };
    Time::from_si((units(s / grid, Direction::Up) as f64) * grid)
}

/// A time rounded up to one that a notice can carry for years: whole seconds up to 2 min, whole minutes beyond.
pub fn for_a_notice(time: Time) -> Time {
    let s = time.si();
    let seconds = units(s, Direction::Up) as f64;
    Time::from_si(if seconds > 120.0 { 60.0 * units(s / 60.0, Direction::Up) as f64 } else { seconds })
}

/// A quantity as a bank file takes it, with every digit of its value.
pub fn exact<Q: Quantity>(quantity: Q) -> String {
    let si = quantity.si();
    match Q::KIND {
        Kind::Temperature => format!("{} °C", trim_noise(si - CELSIUS_ZERO_K)),
        Kind::Ratio => format!("{} %", trim_noise(si * 100.0)),
        Kind::TemperatureCoefficient => format!("{} ppm/K", trim_noise(si * 1e6)),
        Kind::Time => format!("{si} s"),
        kind => {
            let (unit, least, greatest) = unit_of(kind);
            let scale = if si == 0.0 { 0 } else { leading_exponent(si).div_euclid(3) * 3 }.clamp(least, greatest);
            let prefix = PREFIXES.iter().find(|(e, _)| *e == scale).map_or("", |(_, p)| p);
            // Shift the decimal point in the shortest text that reads back as the same double.
            let shortest = format!("{si:e}");
            let (mantissa, exponent) = shortest.split_once('e').unwrap_or((&shortest, "0"));
            let digits = mantissa.replace('.', "");
            let decimals = mantissa.split_once('.').map_or(0, |(_, f)| f.len() as i32);
            let rounded = Rounded {
                negative: false,
                digits: digits.parse().unwrap_or(0),
                exponent: exponent.parse::<i32>().unwrap_or(0) - decimals - scale,
            };
            format!("{rounded} {prefix}{unit}")
        }
    }
}

/// Temperatures and percentages went through an offset or a factor; their noise is not part of what was typed.
fn trim_noise(value: f64) -> String {
    trimmed(&format!("{value:.9}")).to_string()
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::quantity::{Capacitance, Energy, Resistance, Temperature, Voltage, parse};
    use Direction::{Down, Up};

    #[test]
    fn figures_round_on_decimal_digits() {
        let v = |x| Voltage::from_si(x);
        assert_eq!(show(v(50.0), Up), "50.0 V");
        assert_eq!(show(v(50.000_000_000_000_01), Up), "50.0 V");
        assert_eq!(show(v(50.000_1), Up), "50.1 V");
        assert_eq!(show(v(999.1), Up), "1.00 kV");
        assert_eq!(show(v(999.1), Down), "999 V");
        assert_eq!(show(v(12_345.0), Up), "12.4 kV");
        assert_eq!(show(v(0.0), Up), "0 V");
        assert_eq!(show(v(1e-9), Up), "0.01 mV");
        assert_eq!(show(v(1e-9), Down), "0 V");
        assert_eq!(show(Energy::from_si(928.125), Up), "929 J");
        assert_eq!(show(Temperature::from_si(313.15), Up), "40 °C");
        assert_eq!(show(Temperature::from_si(CELSIUS_ZERO_K - 10.5), Up), "-10 °C");
        assert_eq!(show(Capacitance::from_si(0.0033), Down), "3.30 mF");
        assert_eq!(show(Capacitance::from_si(130.0), Down), "130 F");
        assert_eq!(show(Resistance::from_si(2.2e15), Up), "2200 Tohm");
    }

    #[test]
    fn times_read_as_people_say_them() {
        let t = |x| duration(Time::from_si(x), Up);
        assert_eq!(t(0.0), "0 s");
        assert_eq!(t(0.0240), "24.0 ms");
        assert_eq!(t(47.21), "47.3 s");
        assert_eq!(t(272.001), "4 min 33 s");
        assert_eq!(t(300.0), "5 min");
        assert_eq!(t(18_720.0), "5 h 12 min");
        assert_eq!(t(273_600.0), "3 d 4 h");
        assert_eq!(duration(Time::from_si(272.9), Down), "4 min 32 s");
    }

    #[test]
    #[allow(clippy::float_cmp)] // Whole seconds are exact.
    fn a_time_to_keep_is_never_shorter() {
        let k = |x| keepable(Time::from_si(x)).si();
        assert_eq!(k(0.2), 1.0);
        assert_eq!(k(119.2), 120.0);
        assert_eq!(k(121.0), 130.0);
        assert_eq!(k(1200.5), 1260.0);
        assert_eq!(k(0.0), 0.0);
    }

    #[test]
    fn an_exact_text_reads_back_as_the_same_value() {
        for x in [3300e-6, 4.7e-9, 130.0, 1.0 / 3.0, 1e-12] {
            let text = exact(Capacitance::from_si(x));
            assert_eq!(parse::<Capacitance>(&text).map(|r| r.value.si().to_bits()), Ok(x.to_bits()), "{text}");
        }
        for x in [0.01, 22e3, 1e12, 123_456.789] {
            let text = exact(Resistance::from_si(x));
            assert_eq!(parse::<Resistance>(&text).map(|r| r.value.si().to_bits()), Ok(x.to_bits()), "{text}");
        }
    }
}
