//! Quantities: text with a unit in, typed values inside, text rounded in the cautious direction out.
//!
//! The types are those of the `uom` crate; this room gives them the names that the trade uses, reads them from
//! the strings of a bank file ([`parse`]) and prints them with directed rounding ([`show`]).

mod parse;
mod show;

pub use parse::{QuantityError, Reading, Tolerance, parse, parse_kind};
pub use show::{Direction, Rounded, duration, exact, for_a_notice, keepable, show, show_digits};

use uom::si;

/// Electric capacitance, in farad.
pub type Capacitance = si::f64::Capacitance;
/// Electric charge, in coulomb.
pub type Charge = si::f64::ElectricCharge;
/// Electric current, in ampere.
pub type Current = si::f64::ElectricCurrent;
/// Energy, in joule.
pub type Energy = si::f64::Energy;
/// Frequency, in hertz.
pub type Frequency = si::f64::Frequency;
/// Mass, in kilogram.
pub type Mass = si::f64::Mass;
/// Length: of paper, so it is in no bank file.
pub type Length = si::f64::Length;
/// Power, in watt; reactive power, in var, is carried by the same type.
pub type Power = si::f64::Power;
/// A pure number, such as a tolerance: 20 % is 0.2.
pub type Ratio = si::f64::Ratio;
/// Electric resistance, in ohm.
pub type Resistance = si::f64::ElectricalResistance;
/// Temperature, held in kelvin.
pub type Temperature = si::f64::ThermodynamicTemperature;
/// Time, in second.
pub type Time = si::f64::Time;
/// Relative change of a value per kelvin.
pub type TemperatureCoefficient = si::f64::TemperatureCoefficient;
/// Electric potential difference, in volt.
pub type Voltage = si::f64::ElectricPotential;

/// 0 degree Celsius in kelvin (definition of the Celsius scale, SI Brochure, 9th edition, 2.3.1).
pub const CELSIUS_ZERO_K: f64 = 273.15;

/// What kind of quantity a text is to be read as.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[allow(missing_docs)] // The names say it.
pub enum Kind {
    Capacitance,
    Charge,
    Current,
    Energy,
    Frequency,
    Mass,
    Power,
    ReactivePower,
    Ratio,
    Resistance,
    Temperature,
    TemperatureCoefficient,
    Time,
    Voltage,
}

/// A `uom` quantity that can be read from text and written in SI base units.
pub trait Quantity: Copy {
    /// The kind of this type.
    const KIND: Kind;
    /// The quantity of `value` SI base units (kelvin for a temperature).
    fn from_si(value: f64) -> Self;
    /// This quantity in SI base units (kelvin for a temperature).
    fn si(self) -> f64;
}

macro_rules! quantities {
    ($($type:ident: $module:ident :: $unit:ident),* $(,)?) => {$(
        impl Quantity for $type {
            const KIND: Kind = Kind::$type;
            fn from_si(value: f64) -> Self {
                Self::new::<si::$module::$unit>(value)
            }
            fn si(self) -> f64 {
                self.get::<si::$module::$unit>()
            }
        }
    )*};
}

quantities! {
    Capacitance: capacitance::farad,
    Charge: electric_charge::coulomb,
    Current: electric_current::ampere,
    Energy: energy::joule,
    Frequency: frequency::hertz,
    Mass: mass::kilogram,
    Power: power::watt,
    Ratio: ratio::ratio,
    Resistance: electrical_resistance::ohm,
    Temperature: thermodynamic_temperature::kelvin,
    TemperatureCoefficient: temperature_coefficient::per_kelvin,
    Time: time::second,
    Voltage: electric_potential::volt,
}

/// A length of `value` millimetres.
pub fn millimetres(value: f64) -> Length {
    Length::new::<si::length::millimeter>(value)
}

/// A temperature in degree Celsius.
pub fn celsius(temperature: Temperature) -> f64 {
    temperature.si() - CELSIUS_ZERO_K
}
