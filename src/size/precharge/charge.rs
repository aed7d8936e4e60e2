//! The bank with the supply on it and nothing else that steps connect: what a charge from empty comes to.

use crate::bank::Bank;
use crate::bank::description::{Description, Lasts, Step, Supply};
use crate::check::{EngineError, Procedure, StepAnswers};
use crate::circuit::CircuitError;
use crate::discharge::{Model, StepFigure, element_model};
use crate::quantity::{Quantity, Time};
use crate::size::error::SizeError;
use crate::size::scan::Probe;

/// No network of the engine has less resistance than this, in ohm.
const LEAST: f64 = 1e-3;

/// A supply that holds a charged bank through little resistance has a current that is the small difference of two great
/// voltages: over T seconds rounding moves its energy by some 2e-16 V^2 T/R, which has to stay far below the 1e-9 to which
/// energies balance, of C V^2/2 and what the bank's own resistors take. Below this share of T over both no resistance is
/// looked at.
const ROUNDING: f64 = 1e-5;

/// Two steps that charge a bank through a supply.
pub(super) fn steps(supply: &str, within: Time) -> Vec<Step> {
    let step = |name: String, lasts, connect: &[&str], disconnect: &[&str]| Step {
        name,
        lasts: Lasts::For(lasts),
        connect: connect.iter().map(|id| id.to_string()).collect(),
        disconnect: disconnect.iter().map(|id| id.to_string()).collect(),
        measure: Vec::new(),
        hold: None,
        touch: false,
    };
    vec![
        step(format!("Charge the bank through {supply}"), within, &[supply], &[]),
        step(format!("Take {supply} off, the bank stays charged"), Time::from_si(0.0), &[], &[supply]),
    ]
}

/// A charge, its resistance still open.
pub(super) struct Charge {
    bank: Bank,
    model: Model,
    share: Option<f64>,
    within: f64,
    /// Less resistance in ohm than this is looked at as this much.
    pub least: f64,
}

/// The one supply of the bank that is charged, and the step that connects it.
const SOURCE: usize = 0;
const STAGE: usize = 0;

/// What was found at one actual resistance, in SI base units, greatest over the tolerances of all other parts.
#[derive(Debug, Clone, Copy, Default, PartialEq)]
pub(super) struct Point {
    /// Until the share is reached for good; infinite for never, and 0 where none was asked for.
    pub seconds: f64,
    /// How far below the supply's voltage the pair is after the time.
    pub short: f64,
    /// The same for ever.
    pub settles_short: f64,
    /// Greatest current, power, and energy of the whole resistor.
    pub current: f64,
    pub power: f64,
    pub energy: f64,
}

impl Charge {
    /// The bank of `description` with `supply` in it, charged for so long. What only steps connect is left out: it does
    /// nothing here, and its tolerances would only be tried in vain.
    pub fn new(
        description: &Description,
        supply: &Supply,
        share: Option<f64>,
        within: Time,
    ) -> Result<Self, SizeError> {
        let mut alone = description.clone();
        alone.resistors.retain(|r| r.role.always_connected());
        alone.supplies = vec![supply.clone()];
        alone.procedure = steps(&supply.id, within);
        alone.limits.clear();
        // Pairs may be named that only such a part had a node of.
        alone.test_points = Some(vec![supply.across.clone()]);
        let bank = Bank::new(alone).map_err(SizeError::Placed)?.expanded();
        let model = Model::new(&bank).map_err(EngineError::of("absorption"))?;
        Ok(Charge { bank, model, share, within: within.si(), least: LEAST })
    }

    /// The same with the least resistance that the engine can certify over `seconds`; `middle` is one that it can.
    pub fn certified(mut self, middle: f64, seconds: f64) -> Result<Self, EngineError> {
        let farad: f64 = self.model.capacitors.iter().map(|c| c.nominal).sum();
        let volts = self.model.sources[SOURCE].volts;
        let short = self.at(middle)?.settles_short.clamp(0.0, volts);
        // What the bank's own resistors come to: with `middle` in front they leave the pair so much.
        let siemens = short / (middle * (volts - short));
        self.least = (ROUNDING * seconds / (0.5 * farad + seconds * siemens)).max(LEAST);
        Ok(self)
    }

    /// The figures of the charge, in the order of [`Point`].
    fn figures(&self) -> Vec<StepFigure> {
        let (stage, source, resistor) = (STAGE, SOURCE, self.model.sources[SOURCE].resistor);
        let short = |after| StepFigure::ShortOfSupply { stage, source, after };
        let mut figures = vec![
            short(self.within),
            short(f64::INFINITY),
            StepFigure::Current { stage, resistor },
            StepFigure::Power { stage, resistor },
            StepFigure::Energy { stage, resistor },
        ];
        figures.extend(self.share.map(|share| StepFigure::ChargedTo { stage, source, share }));
        figures
    }

    fn answers(&self, model: &Model, figures: Vec<StepFigure>) -> Result<StepAnswers, EngineError> {
        let Some(procedure) = Procedure::resolve(&self.bank, model)? else {
            // The bank was made with steps.
            return Err(EngineError::of("a charge without steps")(CircuitError::SearchNotClosed));
        };
        procedure.healthy(model, figures)
    }

    /// Worst and nominal figures with the supply as it is.
    pub fn both(&self) -> Result<(Point, Point), EngineError> {
        let figures = self.figures();
        let answers = self.answers(&self.model, figures.clone())?;
        let worst: Vec<f64> = figures.iter().map(|f| answers.worst(*f)).collect();
        let nominal: Vec<f64> = figures.iter().map(|f| answers.nominal(*f)).collect();
        Ok((point(&worst), point(&nominal)))
    }

    /// Figures of one element of the supply's resistor.
    pub fn of_element(
        &self,
        supply: &Supply,
        figures: impl Fn(usize) -> Vec<StepFigure>,
    ) -> Result<Vec<f64>, EngineError> {
        let Some((model, element)) = element_model(&self.model, &supply.resistor()) else {
            return Ok(Vec::new());
        };
        let figures = figures(element);
        let answers = self.answers(&model, figures.clone())?;
        Ok(figures.iter().map(|f| answers.worst(*f)).collect())
    }
}

fn point(found: &[f64]) -> Point {
    Point {
        short: found[0],
        settles_short: found[1],
        current: found[2],
        power: found[3],
        energy: found[4],
        seconds: found.get(5).copied().unwrap_or(0.0),
    }
}

impl Probe for Charge {
    type Point = Point;

    fn at(&self, ohms: f64) -> Result<Point, EngineError> {
        let volts = self.model.sources[SOURCE].volts;
        if ohms.is_infinite() {
            let seconds = if self.share.is_some() { f64::INFINITY } else { 0.0 };
            return Ok(Point { seconds, short: volts, settles_short: volts, current: 0.0, power: 0.0, energy: 0.0 });
        }
        let mut model = self.model.clone();
        model.resistors[model.sources[SOURCE].resistor].nominal = ohms.max(self.least);
        let figures = self.figures();
        let answers = self.answers(&model, figures.clone())?;
        Ok(point(&figures.iter().map(|f| answers.worst(*f)).collect::<Vec<f64>>()))
    }
}
