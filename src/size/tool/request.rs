//! What is asked of a discharge tool.

use crate::bank::description::{Connection, Pair};
use crate::quantity::{Current, Energy, Resistance, Temperature, Time, Voltage};
use crate::size::Build;

/// What a resistor that people connect by hand has to do, and from what it may be built.
#[derive(Debug, Clone, Default, PartialEq)]
pub struct ToolAsk {
    /// From what it may be built.
    pub build: Build,
    /// How long it is held; `None` takes what the file's steps say of the tool that is sized anew.
    pub within: Option<Time>,
    /// What every test point has to be at or below by then; `None` is the touch voltage, and the hold point of the step.
    pub voltage: Option<Voltage>,
    /// When it is applied, from isolation on; `None` takes the file's steps where they apply it, and else 0 s.
    pub after: Option<Time>,
    /// Air at the resistors, in place of that of the file.
    pub ambient: Option<Temperature>,
    /// Greatest current through the tool.
    pub max_current: Option<Current>,
    /// Greatest energy that cable and contact turn into heat in one discharge.
    pub contact_energy: Option<Energy>,
    /// Resistance of cable and contact in series with the tool at most; it may be as little as none.
    pub lead: Option<Resistance>,
    /// How many banks like this one it has to discharge in a row, from cold.
    pub banks: Option<u32>,
    /// From one application to the next; `None` is one right after the other.
    pub every: Option<Time>,
    /// What the tool is called: one that the file has is sized anew.
    pub id: Option<String>,
    /// Where it is applied; `None` is the terminals.
    pub across: Option<Pair>,
    /// How it is connected in a three-phase bank; `None` is delta.
    pub connection: Option<Connection>,
}
