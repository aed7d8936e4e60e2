//! What is asked of balancing resistors.

use crate::bank::description::Pair;
use crate::quantity::{Current, Power, Temperature, Voltage};
use crate::size::{Build, Target};

/// What resistors across the units of a string have to do, and from what they may be built: one and the same array
/// across each unit.
#[derive(Debug, Clone, PartialEq)]
pub struct BalancingAsk {
    /// From what each of them may be built.
    pub build: Build,
    /// The two ends of the string; `None` is the terminals.
    pub across: Option<Pair>,
    /// A capacitor of the string that is meant, where several lie between the two ends.
    pub capacitor: Option<String>,
    /// The greatest leakage of one unit; or the greatest difference between two, where the least is known. `None` takes
    /// what is typical of the dielectric.
    pub leakage: Option<Current>,
    /// Rated voltage of units for which the file gives none.
    pub rated: Option<Voltage>,
    /// False where the bank is charged so slowly that the resistors set the division on the way.
    pub fast_charge: bool,
    /// Do the limits of the file bound the resistors?
    pub limits: bool,
    /// A voltage to be reached in time.
    pub target: Option<Target>,
    /// Air at the resistors, in place of that of the file.
    pub ambient: Option<Temperature>,
    /// Greatest standing loss of all new resistors together at the highest voltage.
    pub max_loss: Option<Power>,
    /// What the new resistors are to be called, before their numbers; `None` takes a name that is free.
    pub id: Option<String>,
}

impl Default for BalancingAsk {
    fn default() -> Self {
        BalancingAsk {
            build: Build::default(),
            across: None,
            capacitor: None,
            leakage: None,
            rated: None,
            fast_charge: true,
            limits: false,
            target: None,
            ambient: None,
            max_loss: None,
            id: None,
        }
    }
}
