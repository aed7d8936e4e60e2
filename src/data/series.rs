//! Preferred values: the E series of IEC 60063.
//!
//! E24 and those below it are the historic lists, E12 every second of E24, E6 every fourth. E48, E96 and E192 are
//! 10^(k/n) rounded to three figures, with 9.20 in E192 (instead of 9.19) as the one exception. The tests hold every
//! value against a registry library's list, pinned as data.

use crate::quantity::{Quantity, Resistance};

/// A series of preferred values.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
#[allow(missing_docs)] // Their names in the standard.
pub enum Series {
    E6,
    E12,
    E24,
    E48,
    E96,
    E192,
}

/// E24 in hundredths, IEC 60063.
const E24: [u32; 24] = [
    100, 110, 120, 130, 150, 160, 180, 200, 220, 240, 270, 300, 330, 360, 390, 430, 470, 510, 560, 620, 680, 750, 820,
    910,
];

impl Series {
    /// All series, the coarsest first.
    pub const ALL: [Series; 6] = [Series::E6, Series::E12, Series::E24, Series::E48, Series::E96, Series::E192];

    /// Its name in the standard.
    pub fn name(self) -> &'static str {
        match self {
            Series::E6 => "E6",
            Series::E12 => "E12",
            Series::E24 => "E24",
            Series::E48 => "E48",
            Series::E96 => "E96",
            Series::E192 => "E192",
        }
    }

    /// The values of one decade in hundredths: 100 to under 1000.
    pub fn hundredths(self) -> Vec<u32> {
        let rounded = |n: u32| (0..n).map(|k| rounded(k, n)).collect();
        match self {
            Series::E6 => E24.iter().copied().step_by(4).collect(),
            Series::E12 => E24.iter().copied().step_by(2).collect(),
            Series::E24 => E24.to_vec(),
            Series::E48 => rounded(48),
            Series::E96 => rounded(96),
            Series::E192 => rounded(192),
        }
    }

    /// Every preferred resistance from `least` to `greatest`, rising. Each is the double nearest to its decimal
    /// digits, as a bank file would give it.
    ///
    /// # Example: what lies between 10 kohm and 20 kohm
    /// ```
    /// use ebbvolt::{data::Series, quantity::{Quantity, Resistance}};
    /// let found = Series::E6.between(Resistance::from_si(10e3), Resistance::from_si(20e3));
    /// assert_eq!(found.iter().map(|r| r.si()).collect::<Vec<_>>(), [10e3, 15e3]);
    /// ```
    pub fn between(self, least: Resistance, greatest: Resistance) -> Vec<Resistance> {
        let (least, greatest) = (least.si().max(LEAST), greatest.si().min(GREATEST));
        if least.is_nan() || greatest.is_nan() || least > greatest {
            return Vec::new();
        }
        let decade = |ohm: f64| ohm.log10().floor() as i32;
        let hundredths = self.hundredths();
        let value = |exponent: i32, h: &u32| format!("{h}e{}", exponent - 2).parse().unwrap_or(f64::NAN);
        (decade(least) - 1..=decade(greatest) + 1)
            .flat_map(|exponent| hundredths.iter().map(move |h| value(exponent, h)).collect::<Vec<f64>>())
            .filter(|ohm| *ohm >= least && *ohm <= greatest)
            .map(Resistance::from_si)
            .collect()
    }
}

/// Resistors are not made below and above these, in ohm; a window without an end stops here.
const LEAST: f64 = 1e-3;
const GREATEST: f64 = 1e12;

fn rounded(k: u32, n: u32) -> u32 {
    match (n, k) {
        (192, 185) => 920,
        _ => (10f64.powf(f64::from(k) / f64::from(n)) * 100.0).round() as u32,
    }
}
