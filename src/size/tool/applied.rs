//! When the tool is applied and for how long it is held: the file's own steps where they apply it, else two steps.

use super::request::ToolAsk;
use crate::bank::Bank;
use crate::bank::description::{Connection, Description, Hold, Lasts, Pair, Resistor, Role, Step};
use crate::quantity::{Direction, Quantity, Resistance, Time, Voltage, duration, exact};
use crate::size::error::SizeError;

/// A voltage that has to be reached while the tool is held.
#[derive(Debug, Clone, PartialEq)]
pub(super) struct Goal {
    pub below: Voltage,
    /// `None` is every test point.
    pub at: Option<Pair>,
}

/// What a tool is sized for whose steps leave it nothing to do.
#[derive(Debug, Clone, Copy, PartialEq, Eq)]
pub(super) enum Instead {
    /// The bank as it was isolated, at once.
    AtIsolation,
    /// The same without what discharges it for good: its bleeders, and sinks that count.
    WithoutBleeders,
}

/// The bank with the steps that apply the tool, and what they ask of it.
pub(super) struct Applied {
    /// With the ambient that was asked for and with the steps; a tool that is sized anew is still the old one in it.
    pub description: Description,
    /// The tool, its value not known yet.
    pub place: Resistor,
    /// The resistor of the file that it takes the place of.
    pub replaces: Option<usize>,
    /// True where the steps are those of the file, at their own times.
    pub as_filed: bool,
    /// When it is applied in steps of its own, from isolation on.
    pub after: Time,
    /// What it is sized for instead, where the steps that were asked for leave it nothing to do.
    pub nothing_to_do: Option<Instead>,
    /// True where the file has steps at all.
    pub file_has_steps: bool,
    /// Steps of the trial that the file does not have; empty where it has all.
    pub steps: Vec<Step>,
    pub goals: Vec<Goal>,
    /// How long it is held.
    pub held: Time,
    /// The step that connects it, the one at whose end the voltage counts, and the last in which it is connected.
    pub first: usize,
    pub held_to: usize,
    pub last: usize,
}

/// The voltage that was asked for, or the touch voltage.
fn below(bank: &Bank, ask: &ToolAsk) -> Voltage {
    ask.voltage.unwrap_or(bank.description().touch_voltage)
}

fn asked(text: impl Into<String>) -> SizeError {
    SizeError::Asked(text.into())
}

impl Applied {
    pub fn of(bank: &Bank, ask: &ToolAsk) -> Result<Self, SizeError> {
        let mut description = bank.description().clone();
        description.ambient = ask.ambient.or(description.ambient);
        let replaces = existing(&description, ask)?;
        let place = place(bank, &description, replaces, ask)?;
        let connects = |step: &Step| step.connect.contains(&place.id);
        let first = replaces.and_then(|_| description.procedure.iter().position(connects));
        match first.filter(|_| ask.after.is_none()) {
            Some(first) => in_file(description, place, replaces, first, ask),
            None => {
                // A tool that the file's steps apply is held as long as they hold it, whenever it is applied.
                let filed = first.map(|first| held(&description.procedure, first, ask.within)).transpose()?;
                let within = ask.within.or(filed.map(|(time, _)| time)).ok_or_else(|| {
                    asked(
                        "how long the tool is held is not known; write `--within 20s`, or name with `--id` a tool that \
                           the file's steps apply",
                    )
                })?;
                let after = ask.after.unwrap_or_else(|| Time::from_si(0.0));
                Ok(on_its_own(
                    bank,
                    description,
                    place,
                    replaces,
                    (after, within),
                    Goal { below: below(bank, ask), at: None },
                ))
            }
        }
    }

    /// The tool on the bank as it was isolated, held as long, for steps that leave it nothing to do: what discharges the
    /// bank before it is applied may have failed, and a tool has to do its work then. The voltage counts where it is
    /// applied. Where the bleeders would still do it by themselves, `gone` takes them out as well.
    pub fn at_isolation(&self, bank: &Bank, ask: &ToolAsk, gone: bool) -> Self {
        let mut description = bank.description().clone();
        description.ambient = ask.ambient.or(description.ambient);
        if gone {
            description.resistors.retain(|r| r.role != Role::Bleeder);
            description.sinks.retain(|s| !s.counted);
        }
        let replaces = self.replaces.and_then(|_| description.resistors.iter().position(|r| r.id == self.place.id));
        let own = Some(self.place.across.clone()).filter(|_| self.place.phases.is_none());
        let goal = Goal { below: below(bank, ask), at: own };
        let times = (Time::from_si(0.0), self.held);
        let applied = on_its_own(bank, description, self.place.clone(), replaces, times, goal);
        let nothing_to_do = Some(if gone { Instead::WithoutBleeders } else { Instead::AtIsolation });
        Applied { nothing_to_do, file_has_steps: self.file_has_steps, ..applied }
    }

    /// The bank with a tool in it.
    pub fn with(&self, tool: Resistor) -> Result<Bank, SizeError> {
        let mut with = self.description.clone();
        match self.replaces {
            Some(index) => with.resistors[index] = tool,
            None => with.resistors.push(tool),
        }
        Bank::new(with).map_err(SizeError::Placed)
    }
}

/// The tool of the file that is to be sized anew: the one that was named, or the only one that a step connects.
fn existing(description: &Description, ask: &ToolAsk) -> Result<Option<usize>, SizeError> {
    let resistors = &description.resistors;
    let Some(id) = &ask.id else {
        let connected = |id: &String| description.procedure.iter().any(|s| s.connect.contains(id));
        let tools: Vec<usize> =
            (0..resistors.len()).filter(|i| resistors[*i].role == Role::Tool && connected(&resistors[*i].id)).collect();
        return Ok(match tools[..] {
            [one] if ask.across.is_none() => Some(one),
            _ => None,
        });
    };
    let Some(index) = resistors.iter().position(|r| r.id == *id) else { return Ok(None) };
    let there = &resistors[index];
    if there.role != Role::Tool {
        let text = format!(
            "`{id}` is a resistor of role {} in the file; give the tool another name, such as `--id T1`",
            there.role.word()
        );
        return Err(asked(text));
    }
    let same = |[a, b]: &Pair| there.across == [a.clone(), b.clone()] || there.across == [b.clone(), a.clone()];
    if ask.across.as_ref().is_some_and(|pair| there.phases.is_some() || !same(pair)) {
        let text = format!(
            "`{id}` is applied elsewhere in the file; leave `--across` out, or give the new tool another name with `--id`"
        );
        return Err(asked(text));
    }
    Ok(Some(index))
}

/// Where the tool goes, its value not known yet.
fn place(
    bank: &Bank,
    description: &Description,
    replaces: Option<usize>,
    ask: &ToolAsk,
) -> Result<Resistor, SizeError> {
    let old = replaces.map(|index| &description.resistors[index]);
    let three_legs = old.map_or(bank.is_three_phase() && ask.across.is_none(), |r| r.phases.is_some());
    if !three_legs && ask.connection.is_some() {
        return Err(asked(
            "`--connection` is for a tool with three legs, at a three-phase bank's terminals; leave it out",
        ));
    }
    let before = old.and_then(|r| r.phases).unwrap_or(Connection::Delta);
    let across = match (old, &ask.across, description.terminals.as_slice()) {
        (Some(old), _, _) => old.across.clone(),
        (None, Some(pair), _) => pair.clone(),
        (None, None, [first, .., last]) => [first.clone(), last.clone()],
        _ => return Err(asked("the bank has no two terminals; write `--across P,N`")),
    };
    Ok(Resistor {
        id: ask.id.clone().or_else(|| old.map(|r| r.id.clone())).unwrap_or_else(|| free_id(description)),
        role: Role::Tool,
        value: Resistance::from_si(1.0),
        tolerance: None,
        tempco: None,
        ageing: None,
        across,
        series: 1,
        parallel: 1,
        rating: Default::default(),
        phases: three_legs.then(|| ask.connection.unwrap_or(before)),
        switched: None,
    })
}

/// `T1`, or `T2` and so on where the bank has it.
fn free_id(d: &Description) -> String {
    let taken = |id: &String| {
        d.resistors.iter().any(|r| r.id == *id)
            || d.capacitors.iter().any(|c| c.id == *id)
            || d.sinks.iter().any(|s| s.id == *id)
            || d.supplies.iter().any(|s| s.id == *id)
    };
    (1..).map(|n| format!("T{n}")).find(|id| !taken(id)).unwrap_or_default()
}

/// How long the file's steps hold what step `first` connects, and the last of these steps: those that follow without
/// connecting or disconnecting anything belong to it. `within` stands in place of what the last of them says.
fn held(steps: &[Step], first: usize, within: Option<Time>) -> Result<(Time, usize), SizeError> {
    let quiet = |s: &&Step| s.connect.is_empty() && s.disconnect.is_empty();
    let to = first + steps[first + 1..].iter().take_while(quiet).count();
    let length = |stage: usize| match steps[stage].lasts {
        Lasts::For(time) => Ok(time.si()),
        Lasts::Until(_) => Err(asked(format!(
            "step {} (`{}`) ends when a voltage is reached, so that any tool would do; write `--within 20s`",
            stage + 1,
            steps[stage].name
        ))),
    };
    let before: f64 = (first..to).map(length).sum::<Result<f64, _>>()?;
    let last = match within {
        Some(time) if time.si() >= before => time.si() - before,
        Some(time) => {
            let text = format!(
                "`--within {}` is shorter than the steps that hold the tool before its last one ({})",
                exact(time),
                duration(Time::from_si(before), Direction::Up)
            );
            return Err(asked(text));
        }
        None => length(to)?,
    };
    let time = before + last;
    if time <= 0.0 {
        let text = format!("step {} holds the tool for no time; write `--within 20s`", to + 1);
        return Err(asked(text));
    }
    Ok((Time::from_si(time), to))
}

/// The tool in the file's own steps.
fn in_file(
    mut description: Description,
    place: Resistor,
    replaces: Option<usize>,
    first: usize,
    ask: &ToolAsk,
) -> Result<Applied, SizeError> {
    let (time, held_to) = held(&description.procedure, first, ask.within)?;
    if ask.within.is_some() {
        let before: f64 = description.procedure[first..held_to].iter().map(|s| length(s).si()).sum();
        description.procedure[held_to].lasts = Lasts::For(Time::from_si(time.si() - before));
    }
    let touch = description.touch_voltage;
    let hold = description.procedure[held_to].hold.clone();
    let everywhere = |below| Goal { below, at: None };
    let goals = match (ask.voltage, hold) {
        (Some(voltage), _) => vec![everywhere(voltage)],
        (None, Some(Hold { below, at: None })) => vec![everywhere(if below < touch { below } else { touch })],
        (None, Some(Hold { below, at: Some(pair) })) if below < touch => {
            vec![everywhere(touch), Goal { below, at: Some(pair) }]
        }
        (None, _) => vec![everywhere(touch)],
    };
    let mut connected = false;
    let mut last = held_to;
    for (stage, step) in description.procedure.iter().enumerate() {
        connected = (connected || step.connect.contains(&place.id)) && !step.disconnect.contains(&place.id);
        last = if connected { stage } else { last };
    }
    let steps = if ask.within.is_some() { description.procedure[first..=held_to].to_vec() } else { Vec::new() };
    Ok(Applied {
        description,
        place,
        replaces,
        as_filed: true,
        after: Time::from_si(0.0),
        nothing_to_do: None,
        file_has_steps: true,
        steps,
        goals,
        held: time,
        first,
        held_to,
        last,
    })
}

fn length(step: &Step) -> Time {
    match step.lasts {
        Lasts::For(time) => time,
        Lasts::Until(_) => Time::from_si(0.0),
    }
}

/// The tool in two steps of its own, whatever the file's steps are.
fn on_its_own(
    bank: &Bank,
    mut description: Description,
    place: Resistor,
    replaces: Option<usize>,
    (after, held): (Time, Time),
    goal: Goal,
) -> Applied {
    let step = |name: &str, lasts: Time| Step {
        name: name.into(),
        lasts: Lasts::For(lasts),
        connect: Vec::new(),
        disconnect: Vec::new(),
        measure: Vec::new(),
        hold: None,
        touch: false,
    };
    let steps = vec![
        step("Lock out and isolate", after),
        Step {
            connect: vec![place.id.clone()],
            measure: bank.test_points(),
            hold: Some(Hold { below: goal.below, at: goal.at.clone() }),
            ..step("Apply the discharge tool", held)
        },
    ];
    let file_has_steps = !description.procedure.is_empty();
    description.procedure = steps.clone();
    Applied {
        description,
        place,
        replaces,
        as_filed: false,
        after,
        nothing_to_do: None,
        file_has_steps,
        steps,
        goals: vec![goal],
        held,
        first: 1,
        held_to: 1,
        last: 1,
    }
}
