//! What a user can say about a bank: plain data, not yet checked.
//!
//! [`super::Bank`] is a description that passed every check; only that goes further into the tool.

use crate::quantity::{
    Capacitance, Charge, Current, Energy, Frequency, Power, Resistance, Temperature, TemperatureCoefficient, Time,
    Tolerance, Voltage,
};

/// A pair of nodes; for a part, the first is the positive one.
pub type Pair = [String; 2];

/// A capacitor bank as described: what stores charge, what bleeds it, what it may be charged to, which limits
/// apply, and the steps by which people discharge it.
#[derive(Debug, Clone, PartialEq)]
pub struct Description {
    /// Equipment tag.
    pub tag: String,
    /// Title, for print.
    pub title: Option<String>,
    /// Where it stands, for print.
    pub location: Option<String>,
    /// Who wrote the description, for print.
    pub prepared_by: Option<String>,
    /// Revision, for print.
    pub revision: Option<String>,
    /// Notes, for print.
    pub notes: Option<String>,
    /// Air at the resistors; `None` where the file does not say, and then [`DEFAULT_AMBIENT_C`] is assumed.
    pub ambient: Option<Temperature>,
    /// The voltage the user chooses to wait for.
    pub touch_voltage: Voltage,
    /// The energy the user waits for as well.
    pub hold_energy: Option<Energy>,
    /// What a strap may be closed on.
    pub strap_limit: StrapLimit,
    /// Where the bank was fed and is reached; the last is the reference.
    pub terminals: Vec<String>,
    /// Voltage across the terminals at the moment of isolation.
    pub charged_to: ChargedTo,
    /// Capacitors, in the order of the file.
    pub capacitors: Vec<Capacitor>,
    /// Resistors, in the order of the file.
    pub resistors: Vec<Resistor>,
    /// Paths that are no resistor.
    pub sinks: Vec<Sink>,
    /// Supplies that a step may connect.
    pub supplies: Vec<Supply>,
    /// Pairs that a hand or a meter can reach; `None` asks for the default (see [`super::Bank::test_points`]).
    pub test_points: Option<Vec<Pair>>,
    /// Limits that the bank has to meet.
    pub limits: Vec<Limit>,
    /// The steps by which people discharge the bank.
    pub procedure: Vec<Step>,
}

/// Assumed air temperature at the resistors where a file gives none, in degree Celsius (the contract's default).
pub const DEFAULT_AMBIENT_C: f64 = 40.0;

/// What a strap may be closed on; an absent figure is not given.
#[derive(Debug, Clone, Copy, Default, PartialEq)]
pub struct StrapLimit {
    /// Greatest stored energy.
    pub energy: Option<Energy>,
    /// Greatest peak current.
    pub current: Option<Current>,
}

/// Voltage across the terminals at the moment of isolation.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct ChargedTo {
    /// Nominal voltage.
    pub nominal: Voltage,
    /// Worst credible voltage.
    pub highest: Voltage,
    /// False where the short form was used: no margin over nominal was given.
    pub margin_given: bool,
    /// How the voltages were given.
    pub source: Source,
}

/// How `charged_to` was given.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Source {
    /// A DC voltage.
    Direct,
    /// The crest of a single-phase or rectified AC voltage of this rms value.
    Crest {
        /// The rms value.
        rms: Voltage,
    },
    /// Three phases; the voltages are crests, line to line.
    ThreePhase {
        /// The rms value, line to line.
        rms: Voltage,
        /// How the neutral stands.
        neutral: Neutral,
    },
}

/// How the neutral of a three-phase supply stands.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[allow(missing_docs)]
pub enum Neutral {
    Isolated,
    Grounded,
}

/// How a three-phase part is connected.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
#[allow(missing_docs)]
pub enum Connection {
    Delta,
    Star,
    OpenDelta,
}

impl Connection {
    /// The word of the bank file.
    pub fn word(self) -> &'static str {
        match self {
            Connection::Delta => "delta",
            Connection::Star => "star",
            Connection::OpenDelta => "open-delta",
        }
    }
}

/// A capacitor, or an array of identical units lumped into one.
#[derive(Debug, Clone, PartialEq)]
pub struct Capacitor {
    /// Name, unique in the bank.
    pub id: String,
    /// Capacitance of ONE unit (of one leg, for a three-phase part).
    pub value: Capacitance,
    /// The plate of a unit in reactive power, where the value was given so.
    pub kvar: Option<Kvar>,
    /// Tolerance of a unit's value; `None` where none is given (then it counts as 0 %).
    pub tolerance: Option<Tolerance>,
    /// How far a unit's value can move per kelvin, either way.
    pub tempco: Option<TemperatureCoefficient>,
    /// How far a unit's value can have moved by age, beside the tolerance it was bought with.
    pub ageing: Option<Tolerance>,
    /// Its two nodes, the positive one first. For a three-phase part the first two terminals.
    pub across: Pair,
    /// Groups in series.
    pub series: u32,
    /// Units in parallel in each group.
    pub parallel: u32,
    /// One unit's rated DC voltage.
    pub rated: Option<Voltage>,
    /// Dielectric, an entry of the data folder.
    pub dielectric: Option<String>,
    /// Dielectric absorption, as a share.
    pub absorption: Option<f64>,
    /// Its own voltage at isolation.
    pub charged_to: Option<Voltage>,
    /// Set for a three-phase part.
    pub phases: Option<Connection>,
}

/// A capacitor's plate in reactive power.
#[derive(Debug, Clone, Copy, PartialEq)]
#[allow(missing_docs)]
pub struct Kvar {
    pub power: Power,
    pub voltage: Voltage,
    pub frequency: Frequency,
}

/// What a resistor is there for.
#[derive(Debug, Clone, Copy, PartialEq, Eq, Hash)]
#[allow(missing_docs)]
pub enum Role {
    Bleeder,
    Balancing,
    Series,
    Leakage,
    Tool,
    Strap,
    Meter,
}

impl Role {
    /// All roles, in the order of the contract.
    pub const ALL: [Role; 7] =
        [Role::Bleeder, Role::Balancing, Role::Series, Role::Leakage, Role::Tool, Role::Strap, Role::Meter];

    /// The word of the bank file.
    pub fn word(self) -> &'static str {
        match self {
            Role::Bleeder => "bleeder",
            Role::Balancing => "balancing",
            Role::Series => "series",
            Role::Leakage => "leakage",
            Role::Tool => "tool",
            Role::Strap => "strap",
            Role::Meter => "meter",
        }
    }

    /// True for parts that no step has to connect; a tool, a strap or a meter is connected by a step only.
    pub fn always_connected(self) -> bool {
        !matches!(self, Role::Tool | Role::Strap | Role::Meter)
    }
}

/// A resistor, or an array of identical elements.
#[derive(Debug, Clone, PartialEq)]
pub struct Resistor {
    /// Name, unique in the bank.
    pub id: String,
    /// What it is there for.
    pub role: Role,
    /// Resistance of ONE element.
    pub value: Resistance,
    /// Tolerance of an element's value; `None` where none is given (then it counts as 0 %).
    pub tolerance: Option<Tolerance>,
    /// How far an element's value can move per kelvin, either way.
    pub tempco: Option<TemperatureCoefficient>,
    /// How far an element's value can have moved by age, beside the tolerance it was bought with.
    pub ageing: Option<Tolerance>,
    /// Its two nodes. For a three-phase part the first two terminals.
    pub across: Pair,
    /// Elements in series in each string.
    pub series: u32,
    /// Strings in parallel.
    pub parallel: u32,
    /// Ratings of one element.
    pub rating: Rating,
    /// Set for a three-phase part.
    pub phases: Option<Connection>,
    /// Set for a bleeder that a contact connects at isolation.
    pub switched: Option<Switched>,
}

impl Resistor {
    /// True for a part that carries current before isolation: no step and no contact has to connect it.
    pub fn stands_before_isolation(&self) -> bool {
        self.role.always_connected() && self.switched.is_none()
    }
}

/// A bleeder's contact: open while the bank is fed, closed from isolation on until it is fed again.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Switched {
    /// How long after isolation it has closed, the slowest contact.
    pub closes_after: Time,
    /// How long after the bank is fed again it has opened, the slowest contact.
    pub opens_after: Time,
    /// Discharges in a row that the bleeder has to bear, from cold.
    pub discharges: u32,
    /// How far apart they begin; `None` for a bank that is discharged now and then.
    pub every: Option<Time>,
}

impl Default for Switched {
    /// A contact without delay, and one discharge.
    fn default() -> Self {
        let none = <Time as crate::quantity::Quantity>::from_si(0.0);
        Switched { closes_after: none, opens_after: none, discharges: 1, every: None }
    }
}

/// Ratings of one resistor element; what is absent can't be checked.
#[derive(Debug, Clone, Copy, Default, PartialEq)]
pub struct Rating {
    /// Continuous power up to `full_to`.
    pub power: Option<Power>,
    /// Temperature up to which the full power is allowed.
    pub full_to: Option<Temperature>,
    /// Temperature at which nothing is allowed; linear between the two.
    pub zero_at: Option<Temperature>,
    /// Limiting element voltage.
    pub voltage: Option<Voltage>,
    /// Energy of one discharge from cold.
    pub pulse: Option<Energy>,
    /// Short overload.
    pub overload: Option<Overload>,
    /// First-order thermal time constant.
    pub thermal_time: Option<Time>,
}

/// A short overload that an element bears.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Overload {
    /// How many times its continuous power.
    pub times: f64,
    /// For how long.
    pub duration: Time,
}

/// A path that is no resistor.
#[derive(Debug, Clone, PartialEq)]
pub struct Sink {
    /// Name, unique in the bank.
    pub id: String,
    /// What it draws.
    pub draw: Draw,
    /// Its two nodes.
    pub across: Pair,
    /// The voltage at which it stops drawing.
    pub stops_below: Voltage,
    /// May a wait rely on it?
    pub counted: bool,
}

/// What a sink draws.
#[derive(Debug, Clone, Copy, PartialEq)]
#[allow(missing_docs)]
pub enum Draw {
    ConstantCurrent(Current),
    ConstantPower(Power),
}

/// A supply that a step may connect.
#[derive(Debug, Clone, PartialEq)]
pub struct Supply {
    /// Name, unique in the bank.
    pub id: String,
    /// Its open-circuit voltage.
    pub voltage: Voltage,
    /// ONE element of its series (precharge) resistance.
    pub series: Resistance,
    /// Tolerance of an element's value.
    pub tolerance: Option<Tolerance>,
    /// Elements in series in each string of the series resistance.
    pub array_series: u32,
    /// Strings in parallel of the series resistance.
    pub array_parallel: u32,
    /// Its two nodes.
    pub across: Pair,
    /// Ratings of one element of the series resistance.
    pub rating: Rating,
}

impl Supply {
    /// The series resistance as a resistor, under the name of the supply.
    pub fn resistor(&self) -> Resistor {
        Resistor {
            id: self.id.clone(),
            role: Role::Series,
            value: self.series,
            tolerance: self.tolerance,
            tempco: None,
            ageing: None,
            across: self.across.clone(),
            series: self.array_series,
            parallel: self.array_parallel,
            rating: self.rating,
            phases: None,
            switched: None,
        }
    }
}

/// A limit that the bank has to meet.
#[derive(Debug, Clone, PartialEq)]
pub struct Limit {
    /// Name: the user's own, or the id of the published limit.
    pub id: String,
    /// What has to hold.
    pub rule: Rule,
    /// Where it has to hold; `None` means at every test point.
    pub at: Option<Pair>,
    /// Must it hold with any one part failed as well?
    pub single_fault: bool,
}

/// What a limit asks.
#[derive(Debug, Clone, PartialEq)]
pub enum Rule {
    /// A published limit: an id of [`crate::data::published_limits`].
    Published(String),
    /// The user's own: at least one alternative holds from a time on.
    Own {
        /// At least one of these has to hold.
        any_of: Vec<Bound>,
        /// From this time after isolation on; zero only where every bound is on the charge at isolation.
        within: Time,
    },
}

/// One bound of a limit.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Bound {
    /// Voltage between the two points.
    Voltage(Voltage),
    /// Charge that a short between the two points would pass at the moment in question.
    Charge(Charge),
    /// The same at isolation.
    InitialCharge(Charge),
    /// Energy stored in all capacitors connected to the pair.
    Energy(Energy),
}

impl Bound {
    /// True for a bound on the state at isolation, which needs no time.
    pub fn is_of_isolation(&self) -> bool {
        matches!(self, Bound::InitialCharge(_))
    }
}

/// One step of a procedure.
#[derive(Debug, Clone, PartialEq)]
pub struct Step {
    /// What is done, in words.
    pub name: String,
    /// How long it lasts.
    pub lasts: Lasts,
    /// Parts connected at its start.
    pub connect: Vec<String>,
    /// Parts disconnected at its start.
    pub disconnect: Vec<String>,
    /// Pairs that people read at its end.
    pub measure: Vec<Pair>,
    /// The greatest reading with which they may go on.
    pub hold: Option<Hold>,
    /// Hands may come near.
    pub touch: bool,
}

/// How long a step lasts.
#[derive(Debug, Clone, PartialEq)]
pub enum Lasts {
    /// A fixed time.
    For(Time),
    /// Until the slowest case is below a voltage.
    Until(Hold),
}

/// A voltage at a pair that people have to find themselves below.
#[derive(Debug, Clone, PartialEq)]
pub struct Hold {
    /// The voltage.
    pub below: Voltage,
    /// The pair; `None` means every test point.
    pub at: Option<Pair>,
}
