//! The calculation of a wait, for a reviewer to check by hand.

use super::result::{Wait, Working, WorkingMode, WorkingSingle, WorkingValue};
use crate::bank::Bank;
use crate::check::EngineError;
use crate::circuit::CircuitError;
use crate::discharge::{Case, Model, Part, PartKind, Scenario};
use crate::quantity::{Capacitance, Quantity, Resistance, Time, Voltage};

/// One state of a scenario: the first, where it leaves several open.
fn solve(model: &Model, scenario: &Scenario, point: &[f64], volts: Voltage) -> Result<Case, EngineError> {
    let failed = |cause| EngineError { scenario: "healthy".into(), cause };
    let mut states = Case::solve(model, scenario, point, volts.si()).map_err(failed)?.into_iter();
    states.next().ok_or_else(|| failed(CircuitError::SearchNotClosed))
}

/// Nominal time constants in second, the slowest first; with contacts that close after isolation, once all of them have.
pub(super) fn time_constants(bank: &Bank, model: &Model) -> Result<Vec<f64>, EngineError> {
    let nominal = bank.description().charged_to.nominal;
    Ok(solve(model, &Scenario::default(), &model.nominal_point(), nominal)?.response.modes().time_constants())
}

/// The nominal and the slowest wait at every test point, worked out.
///
/// `governing` gives the scenario in which the slowest wait was found.
pub(super) fn working(
    bank: &Bank,
    model: &Model,
    waits: &[Wait],
    governing: impl Fn(usize) -> Scenario,
) -> Result<Vec<Working>, EngineError> {
    let charged = bank.description().charged_to;
    let mut list = Vec::with_capacity(2 * waits.len());
    for (pair, wait) in waits.iter().enumerate() {
        let worst: Vec<f64> = wait.worst_point.iter().map(|w| w.factor).collect();
        let states = wait.interruption.as_ref();
        let nominal = (states.map(|i| &i.nominal), model.nominal_point(), charged.nominal, wait.nominal);
        let slowest = (states.map(|i| &i.slowest), worst, charged.highest, wait.slowest);
        for (name, (state, point, volts, time)) in [("nominal", nominal), ("slowest", slowest)] {
            let scenario = Scenario { state: model.find_state(state.map(String::as_str)), ..governing(pair) };
            let name = state.map_or_else(|| name.to_string(), |state| format!("{name}, {state}"));
            list.push(worked(bank, (model, &scenario), (pair, name), &point, volts, time)?);
        }
    }
    Ok(list)
}

/// The resistors that no step connects.
fn resistors_of(model: &Model) -> impl Iterator<Item = &Part> {
    model.resistors.iter().filter(|r| r.kind != PartKind::Switched)
}

fn worked(
    bank: &Bank,
    (model, scenario): (&Model, &Scenario),
    (pair, name): (usize, String),
    point: &[f64],
    volts: Voltage,
    wait: Option<Time>,
) -> Result<Working, EngineError> {
    let case = solve(model, scenario, point, volts)?;
    let (a, b) = model.pairs[pair];
    let course = case.across(a, b);
    let voltage = course.last();
    let factor = |parameter: Option<usize>| parameter.map_or(1.0, |p| point[p]);
    let resistors = resistors_of(model).map(|r| WorkingValue {
        id: r.id.clone(),
        resistance: Some(Resistance::from_si(r.value(point, true))),
        capacitance: None,
        factor: factor(r.parameter),
    });
    let capacitors = model.capacitors.iter().map(|c| WorkingValue {
        id: c.id.clone(),
        resistance: None,
        capacitance: Some(Capacitance::from_si(c.value(point, false))),
        factor: factor(c.parameter),
    });
    let modes = voltage.terms().iter().map(|(amplitude, rate)| WorkingMode {
        tau: Time::from_si(rate.recip()),
        amplitude: Voltage::from_si(*amplitude),
    });
    // One capacitor and one mode: tau = R C by hand.
    let single = match (model.capacitors.as_slice(), voltage.terms()) {
        ([c], [(amplitude, rate)]) if voltage.constant() == 0.0 && course.pieces().is_empty() => {
            let farad = c.nominal * factor(c.parameter);
            Some(WorkingSingle {
                resistance: Resistance::from_si((rate * farad).recip()),
                capacitance: Capacitance::from_si(farad),
                from: Voltage::from_si(amplitude.abs()),
                to: bank.description().touch_voltage,
            })
        }
        _ => None,
    };
    Ok(Working {
        across: [model.node_names[a].clone(), model.node_names[b].clone()],
        case: name,
        values: resistors.chain(capacitors).collect(),
        charged_to: volts,
        from: (!course.pieces().is_empty()).then(|| Time::from_si(course.last_start())),
        settles_at: Voltage::from_si(voltage.constant()),
        modes: modes.collect(),
        single,
        wait,
    })
}
