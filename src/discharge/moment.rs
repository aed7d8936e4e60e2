//! A bank through its steps at chosen moments: what curves and traces are drawn from.

use super::body::Thermal;
use super::model::{Model, Parameter, PartKind};
use super::study::greatest;
use super::timeline::{Setting, Timeline};
use super::worst::Objective;
use crate::circuit::{CircuitError, Course, Draw, ExpSum, Sink};

/// What is asked at a moment: `t` seconds after the start of a step.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(crate) enum Moment {
    /// Voltage between two nodes of the model.
    Voltage { stage: usize, a: usize, b: usize, t: f64 },
    /// Power in a resistor; 0 where it is not connected.
    Power { stage: usize, resistor: usize, t: f64 },
    /// Rise of a resistor's body over the air, in K.
    Rise { stage: usize, resistor: usize, body: Thermal, t: f64 },
}

impl Moment {
    fn stage(&self) -> usize {
        match *self {
            Moment::Voltage { stage, .. } | Moment::Power { stage, .. } | Moment::Rise { stage, .. } => stage,
        }
    }

    /// Its value, a magnitude.
    fn of(&self, model: &Model, timeline: &Timeline) -> Result<f64, CircuitError> {
        Ok(match *self {
            Moment::Voltage { stage, a, b, t } => timeline.across(stage, a, b).value(t).abs(),
            Moment::Power { stage, resistor, t } => {
                let ohms = timeline.ohms(stage, resistor);
                if ohms.is_finite() { timeline.hottest(model, stage, resistor).value(t).powi(2) / ohms } else { 0.0 }
            }
            Moment::Rise { stage, resistor, body, t } => {
                let mut rise = body.kelvin_per_watt * timeline.standing(resistor);
                for at in 0..=stage {
                    let volts = timeline.hottest(model, at, resistor);
                    let time = if at == stage { t } else { timeline.duration(at) };
                    rise = heated(body, rise, &volts, timeline.ohms(at, resistor), time)?;
                }
                rise
            }
        })
    }
}

/// The rise of a body after a time. In closed form where no sink draws, without looking for the greatest on the way.
fn heated(body: Thermal, start: f64, volts: &Course, ohms: f64, time: f64) -> Result<f64, CircuitError> {
    if volts.pieces().is_empty() && !volts.last().is_driven() {
        let power = if ohms.is_finite() { volts.last().squared().times(ohms.recip()) } else { ExpSum::default() };
        return Ok(body.rise(start, &power).value(time));
    }
    Ok(body.heated(start, volts, ohms, time)?.end)
}

/// What a part has across it, what flows in it from its first node to its second, and the power that it takes up.
#[derive(Debug, Clone, Copy, Default, PartialEq)]
pub(crate) struct Load {
    pub voltage: f64,
    pub current: f64,
    pub power: f64,
}

/// The load of a whole resistor at a moment; nothing flows in one that is not connected, and the voltage stands on its
/// contact where that is still open.
pub(crate) fn load(model: &Model, timeline: &Timeline, stage: usize, resistor: usize, t: f64) -> Load {
    let ohms = timeline.ohms(stage, resistor);
    let voltage = timeline.on_resistor(model, stage, resistor).value(t);
    let current = if ohms.is_finite() { voltage / ohms } else { 0.0 };
    Load { voltage, current, power: voltage * current }
}

/// The load of a whole capacitor of its marked value at a moment, its absorption included: i = C dv/dt, and what flows
/// in the branches.
pub(crate) fn capacitor_load(model: &Model, timeline: &Timeline, stage: usize, capacitor: usize, t: f64) -> Load {
    let part = &model.capacitors[capacitor];
    let (voltage, slope) = timeline.across(stage, part.a, part.b).value_and_slope(t);
    let branches = model.resistors.iter().enumerate().filter(|(_, r)| r.kind == PartKind::Absorbing(capacitor));
    let absorbed: f64 = branches.map(|(r, _)| load(model, timeline, stage, r, t).current).sum();
    let current = part.nominal * slope + absorbed;
    Load { voltage, current, power: voltage * current }
}

/// The load of a sink at a moment; nothing flows in one that has stopped.
pub(crate) fn sink_load(model: &Model, timeline: &Timeline, stage: usize, sink: usize, t: f64) -> Load {
    let Sink { a, b, draw, .. } = model.loads[sink].sink;
    let voltage = timeline.across(stage, a, b).value(t);
    let draws = timeline.drawing(stage, t).get(sink).copied().unwrap_or(false) && voltage.abs() > 0.0;
    let current = match draw {
        _ if !draws => 0.0,
        Draw::Current(ampere) => ampere * voltage.signum(),
        Draw::Power(watt) => watt / voltage,
    };
    Load { voltage, current, power: voltage * current }
}

/// Moments of a procedure, to be maximised over the box.
pub(crate) struct CourseStudy<'a> {
    pub setting: Setting<'a>,
    /// Up to how many loose values every corner is tried.
    pub most_corners: usize,
    pub moments: &'a [Moment],
}

impl Objective for CourseStudy<'_> {
    type Case = Vec<Timeline>;

    fn parameters(&self) -> &[Parameter] {
        &self.setting.model.parameters
    }

    fn count(&self) -> usize {
        self.moments.len()
    }

    fn most_corners(&self) -> usize {
        self.most_corners
    }

    fn case(&self, point: &[f64]) -> Result<Vec<Timeline>, CircuitError> {
        Timeline::run(&self.setting, point)
    }

    /// A curve is drawn to a hundredth of its scale; what lies a thousand times below the bank's voltage or its power
    /// is not worth a search inside the box.
    fn negligible(&self, index: usize) -> f64 {
        let Setting { model, volts, .. } = self.setting;
        match self.moments[index] {
            Moment::Voltage { .. } => 1e-6 * volts,
            Moment::Power { resistor, .. } => 1e-6 * volts * volts / model.resistors[resistor].nominal,
            Moment::Rise { .. } => 1e-3,
        }
    }

    fn case_for(&self, index: usize, point: &[f64]) -> Result<Vec<Timeline>, CircuitError> {
        let needed = self.moments[index].stage() + 1;
        Timeline::run(&Setting { stages: &self.setting.stages[..needed], ..self.setting }, point)
    }

    fn certify(&self, cases: &Vec<Timeline>) -> Result<(), CircuitError> {
        cases.iter().try_for_each(Timeline::certify)
    }

    fn figure(&self, index: usize, cases: &Vec<Timeline>, floor: f64) -> Result<f64, CircuitError> {
        greatest(cases, floor, |timeline, _| self.moments[index].of(self.setting.model, timeline))
    }
}
