//! Voltages, currents and powers against time: what traces and plots show.

use super::procedure::{CORNERS_ASIDE, Procedure};
use super::resistors::{body, derated};
use super::{EngineError, Pair, celsius_or_null, curve_times, si, si_or_null};
use crate::bank::Bank;
use crate::discharge::{
    self, Body, CourseStudy, Load, Model, Moment, PartKind, Scenario, Setting, Stage, Timeline, capacitor_load, load,
    sink_load,
};
use crate::quantity::{Current, Power, Quantity, Temperature, Time, Voltage};
use serde::Serialize;

/// Which moments curves are given for.
#[derive(Debug, Clone, PartialEq)]
pub enum CurveTimes {
    /// Chosen by the tool, close together where a voltage changes.
    Automatic,
    /// These, counted from isolation; one where a step ends and the next begins is given for both.
    At(Vec<Time>),
}

/// Curves of a bank through its steps, or from isolation on where it has none.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct Curves {
    /// The pairs that have a voltage: the test points, then each capacitor's own pair that is none.
    pub pairs: Vec<CurvePair>,
    /// The parts that have a load: capacitors, then resistors, supplies, sinks.
    pub parts: Vec<CurvePart>,
    /// Parts that only steps connect to take energy up or to charge: tools and the series resistances of supplies.
    pub tools: Vec<CurveTool>,
    /// The steps one after another, and what comes after the last one.
    pub spans: Vec<CurveSpan>,
}

/// A pair with its voltage against time.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct CurvePair {
    /// The pair.
    pub across: Pair,
    /// True for a test point; false for a capacitor that nobody reads.
    pub test_point: bool,
    /// Capacitors that stand across just this pair.
    pub capacitors: Vec<String>,
}

/// A part with its load against time.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct CurvePart {
    /// The part, all its elements together.
    pub id: String,
    /// `capacitor`, the role of a resistor, `supply` for the series resistance of one, or `sink`.
    pub role: &'static str,
}

/// A tool or a supply's series resistance, of which ONE element is followed, all elements being alike.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct CurveTool {
    /// The part.
    pub id: String,
    /// `tool` or `supply`.
    pub role: &'static str,
    /// How many elements it has.
    pub elements: u32,
    /// Power that its rating allows continuously at the ambient.
    #[serde(rename = "allowed_power_w", serialize_with = "si_or_null")]
    pub allowed_power: Option<Power>,
    /// The temperature at which its rating allows nothing more; `None` where no temperature is computed.
    #[serde(rename = "allowed_temperature_c", serialize_with = "celsius_or_null")]
    pub allowed_temperature: Option<Temperature>,
}

/// A step, or what comes after the last one.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct CurveSpan {
    /// The step's number from 1; `None` (null) where nobody does anything: after the last step, or without steps.
    pub step: Option<usize>,
    /// When it begins, from isolation.
    #[serde(rename = "start_s", serialize_with = "si")]
    pub start: Time,
    /// When it ends; for what comes last, when the curves end.
    #[serde(rename = "end_s", serialize_with = "si")]
    pub end: Time,
    /// Its moments, in order.
    pub samples: Vec<CurveSample>,
}

/// All figures of one moment.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct CurveSample {
    /// When, from isolation.
    #[serde(rename = "time_s", serialize_with = "si")]
    pub time: Time,
    /// One per pair.
    pub voltages: Vec<CurveVoltage>,
    /// One per part, every value nominal and without sinks that nobody counts on; with their signs, from the first node
    /// to the second.
    pub loads: Vec<CurveLoad>,
    /// One per tool, greatest over the box.
    pub tools: Vec<ToolLoad>,
}

/// |v| across a pair at a moment.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct CurveVoltage {
    /// Every value nominal.
    #[serde(rename = "nominal_v", serialize_with = "si")]
    pub nominal: Voltage,
    /// Greatest over the box at the highest voltage.
    #[serde(rename = "highest_v", serialize_with = "si")]
    pub highest: Voltage,
}

/// Load of a whole part at a moment.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct CurveLoad {
    /// Voltage across it.
    #[serde(rename = "voltage_v", serialize_with = "si")]
    pub voltage: Voltage,
    /// Current in it.
    #[serde(rename = "current_a", serialize_with = "si")]
    pub current: Current,
    /// Power that it takes up; below zero for a capacitor that gives off.
    #[serde(rename = "power_w", serialize_with = "si")]
    pub power: Power,
}

/// What one element of a tool bears at a moment.
#[derive(Debug, Clone, PartialEq, Serialize)]
pub struct ToolLoad {
    /// Its power.
    #[serde(rename = "highest_power_w", serialize_with = "si")]
    pub power: Power,
    /// Its body temperature; `None` (null) where the rating does not give one.
    #[serde(rename = "highest_temperature_c", serialize_with = "celsius_or_null")]
    pub temperature: Option<Temperature>,
}

/// Where the curves of a bank come from.
pub(crate) struct CurveCheck<'a> {
    bank: &'a Bank,
    model: &'a Model,
    /// The steps, then what comes after them.
    stages: Vec<Stage>,
    /// Number of each pair's nodes.
    pairs: Vec<(usize, usize)>,
    tools: Vec<Tool>,
    tried_from: [f64; 3],
}

struct Tool {
    resistor: usize,
    elements: u32,
    body: Option<Body>,
}

impl<'a> CurveCheck<'a> {
    /// Curves through `procedure`, or of the bank left alone; `until` is how long to follow it then, in second.
    pub fn new(
        bank: &'a Bank,
        model: &'a Model,
        procedure: Option<&Procedure>,
        until: f64,
    ) -> Result<Self, EngineError> {
        let charged = bank.description().charged_to;
        let mut pairs = model.pairs[..model.test_points].to_vec();
        for c in model.capacitors.iter().filter(|c| c.kind == PartKind::Fixed) {
            if !pairs.contains(&(c.a, c.b)) && !pairs.contains(&(c.b, c.a)) {
                pairs.push((c.a, c.b));
            }
        }
        let alone = Stage { connected: Vec::new(), duration: until, tried: false };
        let mut check = CurveCheck {
            bank,
            model,
            stages: procedure.map_or_else(|| vec![alone], |p| p.stages.clone()),
            pairs,
            tools: tools(bank, model, procedure),
            tried_from: [0.0, charged.nominal.si(), charged.highest.si()],
        };
        if let Some(last) = procedure.and_then(|p| p.stages.last()) {
            let duration = check.afterwards()?;
            check.stages.push(Stage { connected: last.connected.clone(), duration, tried: false });
        }
        Ok(check)
    }

    fn setting<'s>(&'s self, scenario: &'s Scenario, volts: f64) -> Setting<'s> {
        Setting { model: self.model, scenario, volts, tried_from: &self.tried_from, stages: &self.stages }
    }

    fn at(&self, scenario: &Scenario, point: &[f64], volts: f64) -> Result<Vec<Timeline>, EngineError> {
        Timeline::run(&self.setting(scenario, volts), point).map_err(EngineError::of("healthy, curves"))
    }

    /// Points of the box that show where voltages change: the middle and the two extreme corners, in every way in which
    /// the healthy bank may go.
    fn guides(&self) -> Result<Vec<Timeline>, EngineError> {
        let all =
            |of: &dyn Fn(&discharge::Parameter) -> f64| self.model.parameters.iter().map(of).collect::<Vec<f64>>();
        let points = [all(&|_| 1.0), all(&|p| p.low), all(&|p| p.high)];
        let scenarios = discharge::healthy(self.model);
        let runs = scenarios.iter().flat_map(|scenario| points.iter().map(move |point| (scenario, point)));
        let mut guides = Vec::new();
        for (scenario, point) in runs {
            guides.extend(self.at(scenario, point, self.tried_from[2])?);
        }
        Ok(guides)
    }

    /// How long the bank is followed after the last step: five of the slowest time constants that still matter there.
    fn afterwards(&self) -> Result<f64, EngineError> {
        const LEAST: f64 = 60.0;
        const MOST: f64 = 3.2e7;
        let mut longest: f64 = 0.0;
        for guide in self.guides()? {
            for (a, b) in &self.pairs {
                let course = guide.afterwards(*a, *b);
                let terms = course.last().terms().iter();
                let matters = terms.filter(|(amplitude, _)| amplitude.abs() > 1e-5 * self.tried_from[2]);
                let slowest = matters.map(|(_, rate)| rate.recip()).fold(0.0, f64::max);
                longest = longest.max(course.last_start() + 5.0 * slowest);
            }
        }
        Ok(longest.clamp(LEAST, MOST))
    }

    /// The curves at the moments that are wanted.
    pub fn curves(&self, times: &CurveTimes) -> Result<Curves, EngineError> {
        let chosen = self.times(times)?;
        let moments = self.moments(&chosen);
        let failed = EngineError::of("healthy, curves");
        let mut highest = vec![0.0f64; moments.len()];
        let mut nominal = Vec::new();
        let middle = vec![1.0; self.model.parameters.len()];
        // With and without what nobody may count on; the first is without.
        for scenario in &discharge::healthy(self.model) {
            let setting = self.setting(scenario, self.tried_from[2]);
            let study = CourseStudy { setting, most_corners: CORNERS_ASIDE, moments: &moments };
            let worst = discharge::worst(&study).map_err(&failed)?;
            // NaN stays NaN, so that no guard lets it pass.
            let greater = |known: f64, found: f64| if found <= known { known } else { found };
            highest.iter_mut().zip(worst).for_each(|(known, found)| *known = greater(*known, found.value));
            let timelines = self.at(scenario, &middle, self.tried_from[1])?;
            timelines.iter().try_for_each(Timeline::certify).map_err(&failed)?;
            nominal.extend(timelines);
        }
        let mut highest = highest.into_iter();
        let mut spans = Vec::new();
        for (stage, times) in chosen.iter().enumerate() {
            let start = self.start(stage);
            let samples = times.iter().map(|t| self.sample(&nominal, stage, *t, start + *t, &mut highest)).collect();
            let is_step = stage < self.bank.description().procedure.len();
            spans.push(CurveSpan {
                step: is_step.then_some(stage + 1),
                start: Time::from_si(start),
                end: Time::from_si(start + self.stages[stage].duration),
                samples,
            });
        }
        Ok(Curves {
            pairs: self.pairs.iter().enumerate().map(|(i, pair)| self.pair(i, *pair)).collect(),
            parts: self.parts(),
            tools: self.tools.iter().map(|tool| self.tool(tool)).collect(),
            spans,
        })
    }

    /// For every step, moments in second from its start.
    fn times(&self, times: &CurveTimes) -> Result<Vec<Vec<f64>>, EngineError> {
        let stages = 0..self.stages.len();
        match times {
            CurveTimes::Automatic => {
                let guides = self.guides()?;
                let touch = self.bank.description().touch_voltage.si();
                let floor = 1e-3 * touch.max(1e-3 * self.tried_from[2]);
                Ok(stages
                    .map(|stage| {
                        let courses: Vec<_> = guides
                            .iter()
                            .flat_map(|guide| self.pairs.iter().map(move |(a, b)| guide.across(stage, *a, *b)))
                            .collect();
                        curve_times::chosen(&courses, self.stages[stage].duration, floor)
                    })
                    .collect())
            }
            CurveTimes::At(times) => Ok(stages
                .map(|stage| {
                    let (start, length) = (self.start(stage), self.stages[stage].duration);
                    let last = stage + 1 == self.stages.len();
                    let inside = |t: &f64| *t >= 0.0 && (*t <= length * (1.0 + 1e-12) || last);
                    let mut within: Vec<f64> = times.iter().map(|t| t.si() - start).filter(inside).collect();
                    within.sort_by(f64::total_cmp);
                    within.dedup();
                    within
                })
                .collect()),
        }
    }

    fn start(&self, stage: usize) -> f64 {
        self.stages[..stage].iter().map(|s| s.duration).sum()
    }

    /// All that is asked of the worst case, in the order in which [`Self::sample`] takes it.
    fn moments(&self, chosen: &[Vec<f64>]) -> Vec<Moment> {
        let mut moments = Vec::new();
        for (stage, times) in chosen.iter().enumerate() {
            for t in times.iter().copied() {
                moments.extend(self.pairs.iter().map(|(a, b)| Moment::Voltage { stage, a: *a, b: *b, t }));
                for tool in &self.tools {
                    let resistor = tool.resistor;
                    moments.push(Moment::Power { stage, resistor, t });
                    moments.extend(tool.body.map(|body| Moment::Rise { stage, resistor, body, t }));
                }
            }
        }
        moments
    }

    fn sample(
        &self,
        nominal: &[Timeline],
        stage: usize,
        t: f64,
        time: f64,
        highest: &mut impl Iterator<Item = f64>,
    ) -> CurveSample {
        // What was never answered is no figure, and no guard lets it pass.
        let mut next = || highest.next().unwrap_or(f64::NAN);
        let voltage = |(a, b): &(usize, usize)| CurveVoltage {
            nominal: Voltage::from_si(
                nominal.iter().map(|n| n.across(stage, *a, *b).value(t).abs()).fold(0.0, f64::max),
            ),
            highest: Voltage::from_si(next()),
        };
        let voltages = self.pairs.iter().map(voltage).collect();
        let ambient = self.bank.ambient().si();
        let tool = |tool: &Tool| ToolLoad {
            power: Power::from_si(next() / f64::from(tool.elements)),
            temperature: tool.body.map(|_| Temperature::from_si(ambient + next())),
        };
        let tools = self.tools.iter().map(tool).collect();
        let loads = nominal.first().map_or_else(Vec::new, |first| self.loads(first, stage, t));
        CurveSample { time: Time::from_si(time), voltages, loads, tools }
    }

    /// The loads of all parts in the first way in which the healthy bank may go: no sink draws that nobody counts
    /// on, and of the states that poles can leave it is the first.
    fn loads(&self, nominal: &Timeline, stage: usize, t: f64) -> Vec<CurveLoad> {
        let model = self.model;
        let capacitors = self.capacitors().map(|c| capacitor_load(model, nominal, stage, c, t));
        let resistors = self.resistors().map(|r| load(model, nominal, stage, r, t));
        let sinks = (0..model.loads.len()).map(|s| sink_load(model, nominal, stage, s, t));
        let load = |l: Load| CurveLoad {
            voltage: Voltage::from_si(l.voltage),
            current: Current::from_si(l.current),
            power: Power::from_si(l.power),
        };
        capacitors.chain(resistors).chain(sinks).map(load).collect()
    }

    fn capacitors(&self) -> impl Iterator<Item = usize> + '_ {
        let parts = self.model.capacitors.iter().enumerate();
        parts.filter(|(_, c)| c.kind == PartKind::Fixed).map(|(i, _)| i)
    }

    fn resistors(&self) -> impl Iterator<Item = usize> + '_ {
        let there = |kind: PartKind| matches!(kind, PartKind::Fixed | PartKind::Switched | PartKind::Contact);
        self.model.resistors.iter().enumerate().filter(move |(_, r)| there(r.kind)).map(|(i, _)| i)
    }

    fn role(&self, id: &str) -> &'static str {
        self.bank.description().resistors.iter().find(|r| r.id == id).map_or("supply", |r| r.role.word())
    }

    fn parts(&self) -> Vec<CurvePart> {
        let capacitors =
            self.capacitors().map(|c| CurvePart { id: self.model.capacitors[c].id.clone(), role: "capacitor" });
        let resistors = self.resistors().map(|r| {
            let id = &self.model.resistors[r].id;
            CurvePart { id: id.clone(), role: self.role(id) }
        });
        let sinks = self.model.loads.iter().map(|s| CurvePart { id: s.id.clone(), role: "sink" });
        capacitors.chain(resistors).chain(sinks).collect()
    }

    fn pair(&self, index: usize, (a, b): (usize, usize)) -> CurvePair {
        let capacitors = self.model.capacitors.iter().filter(|c| c.kind == PartKind::Fixed);
        let there = capacitors.filter(|c| (c.a, c.b) == (a, b) || (c.b, c.a) == (a, b));
        CurvePair {
            across: [self.model.node_names[a].clone(), self.model.node_names[b].clone()],
            test_point: index < self.model.test_points,
            capacitors: there.map(|c| c.id.clone()).collect(),
        }
    }

    fn tool(&self, tool: &Tool) -> CurveTool {
        let id = &self.model.resistors[tool.resistor].id;
        let description = self.bank.description();
        let rating = description.resistors.iter().find(|r| r.id == *id).map(|r| r.rating);
        let rating = rating.or_else(|| description.supplies.iter().find(|s| s.id == *id).map(|s| s.rating));
        CurveTool {
            id: id.clone(),
            role: self.role(id),
            elements: tool.elements,
            allowed_power: rating.and_then(|rating| derated(&rating, self.bank.ambient())),
            allowed_temperature: rating.and_then(|rating| rating.zero_at).filter(|_| tool.body.is_some()),
        }
    }
}

/// Tools and supplies that a step connects.
fn tools(bank: &Bank, model: &Model, procedure: Option<&Procedure>) -> Vec<Tool> {
    let Some(procedure) = procedure else { return Vec::new() };
    let description = bank.description();
    let tools = description.resistors.iter().filter(|r| r.role == crate::bank::description::Role::Tool);
    let tools = tools.map(|r| (&r.id, r.series * r.parallel, r.rating));
    let all = tools.chain(description.supplies.iter().map(|s| (&s.id, s.array_series * s.array_parallel, s.rating)));
    all.filter_map(|(id, elements, rating)| {
        let resistor = model.find_resistor(id).filter(|r| procedure.ever_connects(*r))?;
        // The thermal resistance is that of one element; the model's part is all of them.
        let body = body(&rating).map(|b| Body { kelvin_per_watt: b.kelvin_per_watt / f64::from(elements), ..b });
        Some(Tool { resistor, elements, body })
    })
    .collect()
}
