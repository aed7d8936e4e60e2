//! What is asked of a bleeder.

use crate::bank::description::{Connection, Pair, Switched};
use crate::quantity::{Current, Power, Temperature, Time, Voltage};
use crate::size::Build;

/// A voltage that has to be reached in time, in place of the limits of the file.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Target {
    /// At or below this at every test point ...
    pub voltage: Voltage,
    /// ... from this time after isolation on.
    pub within: Time,
}

/// What a resistor that drains the bank has to do, and from what it may be built.
#[derive(Debug, Clone, PartialEq)]
pub struct BleederAsk {
    /// From what it may be built.
    pub build: Build,
    /// What has to be reached; `None` asks for every limit of the file.
    pub target: Option<Target>,
    /// Has it to hold with any one part failed as well, one element of the new resistor among them?
    pub single_fault: bool,
    /// Air at the resistors, in place of that of the file.
    pub ambient: Option<Temperature>,
    /// Greatest standing loss of the new resistor at the highest voltage; not with a contact, which leaves none.
    pub max_loss: Option<Power>,
    /// Greatest current through the new resistor.
    pub max_current: Option<Current>,
    /// What the new resistor is to be called.
    pub id: String,
    /// Where it goes; `None` is the terminals.
    pub across: Option<Pair>,
    /// How it is connected in a three-phase bank; `None` is delta.
    pub connection: Option<Connection>,
    /// The contact that connects it at isolation; `None` is a bleeder that is always connected.
    pub switched: Option<Switched>,
}

impl Default for BleederAsk {
    fn default() -> Self {
        BleederAsk {
            build: Build::default(),
            target: None,
            single_fault: false,
            ambient: None,
            max_loss: None,
            max_current: None,
            id: "RB".into(),
            across: None,
            connection: None,
            switched: None,
        }
    }
}
