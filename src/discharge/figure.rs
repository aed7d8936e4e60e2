//! Questions to a solved case. All answers are magnitudes in SI base units; a wait that never ends is infinite.

use super::body::Thermal;
use super::case::Case;
use super::model::Model;
use crate::circuit::{CircuitError, Course, LastExit};

/// Thermal data and standing power for a body temperature.
pub(crate) type Body = Thermal;

/// One figure. Pairs are numbers of test points of the model, `t` and levels are in SI base units.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(crate) enum Figure {
    /// Last time at which the voltage is over `level`, in second.
    VoltageWait { pair: usize, level: f64 },
    /// Last time at which the voltage is over `level` or the energy connected to the pair over `energy`.
    TouchWait { pair: usize, level: f64, energy: Option<f64> },
    /// Voltage at infinite time.
    Settles { pair: usize },
    /// Voltage at isolation.
    Start { pair: usize },
    /// Voltage at a time.
    VoltageAt { pair: usize, t: f64 },
    /// Charge that a short at a time would pass.
    ChargeAt { pair: usize, t: f64 },
    /// Last time at which that charge is over `level`.
    ChargeWait { pair: usize, level: f64 },
    /// Energy stored in all that is connected to the pair, at a time.
    EnergyAt { pair: usize, t: f64 },
    /// Last time at which that energy is over `level`.
    EnergyWait { pair: usize, level: f64 },
    /// Energy in all capacitors, at a time.
    StoredAt { t: f64 },
    /// Capacitance that the pair shows at isolation: charge over voltage (0 where there is no voltage).
    Capacitance { pair: usize },
    /// Power before isolation.
    StandingPower { resistor: usize },
    /// Greatest voltage before and after isolation.
    ResistorVoltage { resistor: usize },
    /// Greatest current from isolation on.
    PeakCurrent { resistor: usize },
    /// Greatest power from isolation on.
    PeakPower { resistor: usize },
    /// Energy from isolation on.
    ResistorEnergy { resistor: usize },
    /// Energy of one cycle, where a contact connects it every so often: from isolation to the next one, with the feeding
    /// in between; 0 where that is not said.
    CycleEnergy { resistor: usize },
    /// Greatest rise of the body over the air, in K, from the steady temperature before isolation.
    BodyRise { resistor: usize, body: Body },
    /// Greatest voltage before and after isolation.
    CapacitorVoltage { capacitor: usize },
    /// Voltage of a capacitor at a time.
    CapacitorVoltageAt { capacitor: usize, t: f64 },
}

impl Figure {
    /// The figure's value in a case. A value that is proven not to exceed `floor` may be given as `floor`.
    pub fn of(&self, model: &Model, case: &Case, floor: f64) -> Result<f64, CircuitError> {
        let pair = |pair: usize| case.across(model.pairs[pair].0, model.pairs[pair].1);
        let charge = |pair: usize| case.charge(model.pairs[pair].0, model.pairs[pair].1);
        let energy = |pair: usize| case.energy(model.pairs[pair].0, model.pairs[pair].1);
        let resistor = |r: usize| case.on_resistor(model, r);
        Ok(match *self {
            Figure::VoltageWait { pair: p, level } => pair(p).last_outside(level, floor.max(0.0))?.seconds(),
            Figure::TouchWait { pair: p, level, energy: most } => {
                let from = floor.max(0.0);
                match (pair(p).last_outside(level, from)?, most) {
                    (LastExit::At(from), Some(most)) => energy(p).last_over(most, from)?.seconds(),
                    (exit, _) => exit.seconds(),
                }
            }
            Figure::Settles { pair: p } => pair(p).constant().abs(),
            Figure::Start { pair: p } => pair(p).value(0.0).abs(),
            Figure::VoltageAt { pair: p, t } => pair(p).value(t).abs(),
            Figure::ChargeAt { pair: p, t } => charge(p).value(t).abs(),
            Figure::ChargeWait { pair: p, level } => charge(p).last_outside(level, floor.max(0.0))?.seconds(),
            Figure::EnergyAt { pair: p, t } => energy(p).value(t),
            Figure::EnergyWait { pair: p, level } => energy(p).last_over(level, floor.max(0.0))?.seconds(),
            Figure::StoredAt { t } => {
                if t == 0.0 {
                    case.response.initial_energy()
                } else {
                    case.response.stored_energy(None).value(t)
                }
            }
            Figure::Capacitance { pair: p } => {
                let volts = pair(p).value(0.0);
                if volts == 0.0 { 0.0 } else { (charge(p).value(0.0) / volts).abs() }
            }
            Figure::StandingPower { resistor: r } => standing_power(model, case, r),
            Figure::ResistorVoltage { resistor: r } => {
                // What a contact connects bears nothing before isolation but what the next feeding brings.
                let standing = match model.contact(r) {
                    Some(_) => case.fed_volts(r),
                    None => case.before(model.resistors[r].a, model.resistors[r].b),
                };
                resistor(r).greatest_magnitude_over(floor.max(standing))?.0
            }
            Figure::PeakCurrent { resistor: r } => {
                let ohms = case.after_ohms[r];
                let over = case.fed_volts(r).max(floor * ohms);
                per_ohm(resistor(r).greatest_magnitude_over(over)?.0, ohms)
            }
            Figure::PeakPower { resistor: r } => {
                let ohms = case.after_ohms[r];
                let over = case.fed_volts(r).max((floor * ohms).sqrt());
                per_ohm(resistor(r).greatest_magnitude_over(over)?.0.powi(2), ohms)
            }
            Figure::ResistorEnergy { resistor: r } => {
                let fed = model.contact(r).map_or(0.0, |c| case.fed_volts(r).powi(2) * c.opens_after);
                per_ohm(resistor(r).integral_of_square(f64::INFINITY) + fed, case.after_ohms[r])
            }
            Figure::CycleEnergy { resistor: r } => match model.contact(r).and_then(|c| Some((c, c.every?))) {
                Some((contact, every)) => {
                    let fed = case.fed_volts(r).powi(2) * contact.opens_after;
                    per_ohm(resistor(r).integral_of_square(every) + fed, case.after_ohms[r])
                }
                None => 0.0,
            },
            Figure::BodyRise { resistor: r, body } => {
                let ohms = case.after_ohms[r];
                let volts = if ohms.is_finite() { resistor(r) } else { Course::default() };
                let through = |start: f64, until: f64| body.heated(start, &volts, ohms, until);
                let greatest = match model.contact(r) {
                    Some(contact) => contact.greatest_rise(body, per_ohm(case.fed_volts(r).powi(2), ohms), through)?,
                    None => through(body.kelvin_per_watt * standing_power(model, case, r), f64::INFINITY)?.greatest,
                };
                greatest.max(floor)
            }
            Figure::CapacitorVoltage { capacitor } => {
                let c = &model.capacitors[capacitor];
                let standing = case.before(c.a, c.b);
                case.across(c.a, c.b).greatest_magnitude_over(floor.max(standing))?.0
            }
            Figure::CapacitorVoltageAt { capacitor, t } => {
                let c = &model.capacitors[capacitor];
                case.across(c.a, c.b).value(t).abs()
            }
        })
    }
}

fn standing_power(model: &Model, case: &Case, r: usize) -> f64 {
    per_ohm(case.before_mean_square(model.resistors[r].a, model.resistors[r].b), case.before_ohms[r])
}

/// An open resistor carries nothing, whatever its voltage.
fn per_ohm(value: f64, ohms: f64) -> f64 {
    if ohms.is_finite() { value / ohms } else { 0.0 }
}
