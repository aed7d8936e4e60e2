//! What is asked of a precharge resistor.

use crate::bank::description::Pair;
use crate::quantity::{Current, Ratio, Resistance, Temperature, Time, Voltage};
use crate::size::Build;

/// The share of the supply's voltage that is asked for where nothing says what the charge has to come to: common
/// practice is to close the main contactor somewhere from 90 % to 95 % (no source).
pub const USUAL_SHARE: f64 = 0.95;

/// The closing of the main contactor after the precharge.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct MainContactor {
    /// The least resistance of the closed path: source, cables and contacts.
    pub resistance: Resistance,
    /// The greatest current that may flow as it closes.
    pub max_inrush: Option<Current>,
}

/// Charges one after the other, each from an empty bank.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Attempts {
    /// How many.
    pub count: u32,
    /// From the start of one to the start of the next.
    pub every: Time,
}

/// What the series resistance of a supply has to do, and from what it may be built.
#[derive(Debug, Clone, PartialEq)]
pub struct PrechargeAsk {
    /// From what it may be built. The margin counts for the energy and the power of a pulse and for the body's rise.
    pub build: Build,
    /// The supply of the file that is sized anew; `None` is the only one, or a new one where there is none.
    pub supply: Option<String>,
    /// A new supply of this name.
    pub id: Option<String>,
    /// Voltage of a new supply; `None` is the highest of `charged_to`.
    pub voltage: Option<Voltage>,
    /// The pair that a new supply feeds; `None` is the terminals.
    pub across: Option<Pair>,
    /// The share of the supply's voltage that the pair it feeds has to come to. `None` asks for no share, or, where no
    /// inrush is asked for either, for [`USUAL_SHARE`].
    pub share: Option<Ratio>,
    /// How long the precharge takes.
    pub within: Time,
    /// The main contactor that closes then.
    pub main: Option<MainContactor>,
    /// Greatest current through the precharge resistor.
    pub max_current: Option<Current>,
    /// How often it has to be borne.
    pub attempts: Option<Attempts>,
    /// Air at the resistors, in place of that of the file.
    pub ambient: Option<Temperature>,
    /// Are elements welcome whose rating says nothing of a pulse?
    pub unrated_pulse: bool,
}

impl PrechargeAsk {
    /// A charge in a time, and nothing else asked.
    pub fn within(within: Time) -> Self {
        PrechargeAsk {
            build: Build::default(),
            supply: None,
            id: None,
            voltage: None,
            across: None,
            share: None,
            within,
            main: None,
            max_current: None,
            attempts: None,
            ambient: None,
            unrated_pulse: false,
        }
    }
}
