//! What can go wrong at the joints of a procedure.

use super::steps::{NOT_ISOLATED, StepCheck};
use super::stored::bands;
use super::waits::listed;
use super::{Recovery, ResistorResult, StepResult, Verdict, fault_in_words};
use crate::bank::description::Role;
use crate::discharge::StepFigure;
use crate::finding::{Findings, Severity};
use crate::quantity::{Current, Direction, Energy, Quantity, Voltage, duration, exact, show};

/// Adds the findings on a procedure.
pub(crate) fn step_findings(
    check: &StepCheck,
    steps: &[StepResult],
    recovery: &[Recovery],
    resistors: &[ResistorResult],
    findings: &mut Findings,
) {
    for stage in 0..steps.len() {
        never_ends(&steps[stage], stage, findings);
        straps(check, stage, &steps[stage], findings);
        lifted(check, stage, &steps[stage], findings);
        holds(stage, &steps[stage], findings);
        touched(check, stage, steps, findings);
        meters(check, stage, &steps[stage], findings);
        supplies(check, stage, &steps[stage], findings);
    }
    tools(check, steps, resistors, findings);
    stranded(check, steps, findings);
    comes_back(check, recovery, findings);
    left_on(check, findings);
}

fn named(stage: usize, step: &StepResult) -> String {
    format!("Step {} ({})", stage + 1, step.step)
}

fn volts(v: f64) -> String {
    show(Voltage::from_si(v), Direction::Up)
}

fn never_ends(step: &StepResult, stage: usize, findings: &mut Findings) {
    if step.never {
        findings.add(
            Severity::Danger,
            "until-never",
            format!("{} never ends: the slowest case does not stay below its voltage.", named(stage, step)),
        );
    }
}

/// The energy that a strap may be closed on, and whether the file gave it: otherwise the published band.
fn strap_energy(check: &StepCheck, voltage: f64) -> (Energy, bool) {
    let given = check.procedure.bank.description().strap_limit.energy;
    // The band's threshold for this voltage: the least energy above which a band holds.
    let thresholds = crate::data::energy_bands()
        .iter()
        .filter(|b| b.is_hazard() && b.holds(Voltage::from_si(voltage), Energy::from_si(f64::MAX)));
    let least = thresholds.map(|b| b.energy_over.si()).fold(f64::INFINITY, f64::min);
    given.map_or((Energy::from_si(least), false), |energy| (energy, true))
}

fn straps(check: &StepCheck, stage: usize, step: &StepResult, findings: &mut Findings) {
    let model = check.procedure.model;
    let limit = check.procedure.bank.description().strap_limit;
    for id in step.connect.iter().filter(|id| check.role(id) == Some(Role::Strap)) {
        let Some(resistor) = model.find_resistor(id) else { continue };
        let across = check.healthy.worst(StepFigure::VoltageAtStart { stage, resistor });
        let energy = check.healthy.worst(StepFigure::ReadyEnergy { stage });
        let current = Current::from_si(check.healthy.worst(StepFigure::Current { stage, resistor }));
        let (allowed, given) = strap_energy(check, across);
        if across > 0.0 && Verdict::at_most(energy, allowed.si()) != Verdict::Met {
            findings.add(
                Severity::Danger,
                "strap-on-energy",
                format!(
                    "{} closes {id} on up to {} and {}; allowed is {}{}. Up to {} flows through the strap and its \
                     contacts. Let the bleeders and a tool with resistance do their work first.",
                    named(stage, step),
                    volts(across),
                    show(Energy::from_si(energy), Direction::Up),
                    show(allowed, Direction::Down),
                    if given { "" } else { " (published band of stored energy, from memory)" },
                    show(current, Direction::Up)
                ),
            );
        }
        if limit.current.is_some_and(|most| Verdict::at_most(current.si(), most.si()) != Verdict::Met) {
            findings.add(
                Severity::Danger,
                "strap-current",
                format!(
                    "{} closes {id}: up to {} flows through the strap and its contacts, allowed is {}.",
                    named(stage, step),
                    show(current, Direction::Up),
                    limit.current.map_or_else(String::new, exact)
                ),
            );
        }
        let touch = check.procedure.bank.description().touch_voltage;
        if across > touch.si() {
            findings.add(
                Severity::Warning,
                "strap-too-early",
                format!(
                    "{} closes {id} while up to {} is still across it, over the touch voltage of {}.",
                    named(stage, step),
                    volts(across),
                    exact(touch)
                ),
            );
        }
    }
}

fn lifted(check: &StepCheck, stage: usize, step: &StepResult, findings: &mut Findings) {
    let touch = check.procedure.bank.description().touch_voltage;
    for id in step.disconnect.iter().filter(|id| check.role(id) == Some(Role::Tool)) {
        let model = check.procedure.model;
        let Some((resistor, last)) = model.find_resistor(id).zip(stage.checked_sub(1)) else { continue };
        let part = &model.resistors[resistor];
        let pair = model.pairs.iter().position(|p| *p == (part.a, part.b) || *p == (part.b, part.a));
        let Some(left) = pair.map(|pair| check.volts(last, pair)) else { continue };
        if left > touch.si() {
            findings.add(
                Severity::Warning,
                "tool-lifted-early",
                format!(
                    "{} lifts {id} while up to {} is still across it, over the touch voltage of {}.",
                    named(stage, step),
                    volts(left),
                    exact(touch)
                ),
            );
        }
    }
}

fn holds(stage: usize, step: &StepResult, findings: &mut Findings) {
    let Some(hold) = &step.hold else { return };
    if hold.predicted > hold.below {
        findings.add(
            Severity::Warning,
            "hold-exceeded-when-healthy",
            format!(
                "{}: up to {} is predicted where the hold point allows {}, with every part healthy. People will be \
                 stopped there by a bank that does what it should; wait longer before it.",
                named(stage, step),
                show(hold.predicted, Direction::Up),
                exact(hold.below)
            ),
        );
    }
}

/// Hands come near: was anything measured, and is every test point below the touch voltage, healthy and with one
/// part failed?
fn touched(check: &StepCheck, stage: usize, steps: &[StepResult], findings: &mut Findings) {
    let step = &steps[stage];
    if !step.touch {
        return;
    }
    let first = steps[..stage].iter().all(|s| !s.touch);
    if first && steps[..stage].iter().all(|s| s.measure.is_empty() && s.hold.is_none()) {
        findings.add(
            Severity::Danger,
            "touch-without-measuring",
            format!("{}: no step before it has the voltage measured. Test before touch.", named(stage, step)),
        );
    }
    let touch = check.procedure.bank.description().touch_voltage;
    // Hands are near from the step's start on: what stood at the end of the step before counts too.
    let before = stage.checked_sub(1).map(|s| &steps[s]);
    let both = || before.into_iter().chain([step]);
    let healthy = both().flat_map(|s| &s.test_points).max_by(|x, y| x.highest.si().total_cmp(&y.highest.si()));
    if let Some(point) = healthy.filter(|p| p.highest > touch) {
        findings.add(
            Severity::Danger,
            "touch-too-early",
            format!(
                "{}: up to {} is predicted at {} then, over the touch voltage of {}.",
                named(stage, step),
                show(point.highest, Direction::Up),
                point.across.join(" - "),
                exact(touch)
            ),
        );
    }
    if !first {
        return;
    }
    for (index, fault) in step.faults.iter().enumerate().filter(|(_, f)| f.fault != NOT_ISOLATED) {
        let points = both().flat_map(|s| s.faults.get(index).map_or(&[][..], |f| &f.test_points[..]));
        let worst = points.max_by(|x, y| x.highest.si().total_cmp(&y.highest.si()));
        let Some(point) = worst.filter(|p| p.highest > touch) else { continue };
        findings.add(
            Severity::Danger,
            "steps-not-enough-under-fault",
            format!(
                "{}: with {} up to {} is still at {}. {}",
                named(stage, step),
                fault_in_words(&fault.fault),
                show(point.highest, Direction::Up),
                point.across.join(" - "),
                shown_at(&steps[..stage], &fault.fault)
            ),
        );
    }
}

/// Which hold point would show a fault.
fn shown_at(steps: &[StepResult], fault: &str) -> String {
    let shows = |s: &&StepResult| s.hold.as_ref().is_some_and(|h| h.shown_faults.iter().any(|f| f == fault));
    let shown = steps.iter().enumerate().find(|(_, s)| shows(s));
    shown.map_or_else(
        || "No hold point shows it: add one.".to_string(),
        |(stage, step)| {
            let below = step.hold.as_ref().map_or_else(String::new, |h| exact(h.below));
            format!(
                "The hold point of step {} can show it, by a reading over {below}; within the tolerances a lower one does \
                 not rule it out.",
                stage + 1
            )
        },
    )
}

/// A meter loads what it reads.
fn meters(check: &StepCheck, stage: usize, step: &StepResult, findings: &mut Findings) {
    for id in step.connect.iter().filter(|id| check.role(id) == Some(Role::Meter)) {
        let Some(resistor) = check.procedure.model.find_resistor(id) else { continue };
        let taken = check.healthy.worst(StepFigure::Energy { stage, resistor });
        let stored = step.stored_at_start.si();
        let power = check.healthy.worst(StepFigure::Power { stage, resistor });
        // A tenth of the energy is a twentieth of the voltage: what a reading should not do to what it reads.
        if stored > 0.0 && taken > 0.1 * stored {
            findings.add(
                Severity::Warning,
                "meter-discharges-bank",
                format!(
                    "{}: {id} itself takes up to {} of the {} stored, at up to {}. Its reading hides the charge that \
                     was there, and a meter is no discharge tool.",
                    named(stage, step),
                    show(Energy::from_si(taken), Direction::Up),
                    show(step.stored_at_start, Direction::Up),
                    show(crate::quantity::Power::from_si(power), Direction::Up)
                ),
            );
        }
    }
    let touch = check.procedure.bank.description().touch_voltage.si();
    for reading in check.readings.iter().filter(|r| r.stage == stage) {
        // A reading that the meter pulls down by a tenth, of a voltage that would count.
        if reading.without > 0.1 * touch && reading.with < 0.9 * reading.without {
            findings.add(
                Severity::Danger,
                "meter-hides-charge",
                format!(
                    "{}: {} pulls down what it reads: {} at the step's end, where {} would be without it (nominal). A \
                     low reading does not tell what is stored behind the point. Read with a meter of higher \
                     resistance, and short every unit on its own.",
                    named(stage, step),
                    reading.id,
                    volts(reading.with),
                    volts(reading.without)
                ),
            );
        }
    }
}

/// What flows when a supply closes on the voltage that the bank then really has.
fn supplies(check: &StepCheck, stage: usize, step: &StepResult, findings: &mut Findings) {
    let model = check.procedure.model;
    for source in model.sources.iter().filter(|s| step.connect.contains(&s.id)) {
        let resistor = source.resistor;
        let across = check.healthy.worst(StepFigure::VoltageAtStart { stage, resistor });
        let inrush = across / model.resistors[resistor].nominal;
        let tried = check.healthy.worst(StepFigure::Current { stage, resistor });
        findings.add(
            Severity::Note,
            "supply-inrush",
            format!(
                "{} connects {}: up to {} at the voltage that the steps before leave (nominal series resistance), up \
                 to {} from the worst of 0 V, nominal and highest voltage.",
                named(stage, step),
                source.id,
                show(Current::from_si(inrush), Direction::Up),
                show(Current::from_si(tried), Direction::Up)
            ),
        );
    }
}

/// A tool whose ratings do not bear the step that applies it.
fn tools(check: &StepCheck, steps: &[StepResult], resistors: &[ResistorResult], findings: &mut Findings) {
    for tool in resistors.iter().filter(|r| r.role == Role::Tool.word()) {
        let over = |c: &&super::Check| c.verdict == Verdict::NotMet;
        let Some(failed) = tool.checks.iter().find(over) else { continue };
        let applied = steps.iter().position(|s| s.connect.contains(&tool.id));
        let Some(stage) = applied else { continue };
        let at = check.procedure.start(stage);
        findings.add(
            Severity::Danger,
            "tool-too-early",
            format!(
                "{} applies {} {} after isolation, before its ratings allow it ({}): wait longer, or take a tool with \
                 more resistance or rating.",
                named(stage, &steps[stage]),
                tool.id,
                duration(crate::quantity::Time::from_si(at), Direction::Down),
                failed.check
            ),
        );
    }
}

/// The terminals read low, and a capacitor inside does not.
fn stranded(check: &StepCheck, steps: &[StepResult], findings: &mut Findings) {
    let model = check.procedure.model;
    let touch = check.procedure.bank.description().touch_voltage.si();
    let terminals = model.terminals.iter().enumerate();
    let pairs: Vec<usize> = terminals
        .flat_map(|(i, a)| model.terminals[i + 1..].iter().map(move |b| (*a, *b)))
        .filter_map(|p| model.pairs.iter().position(|q| *q == p || *q == (p.1, p.0)))
        .collect();
    for (capacitor, described) in check.procedure.bank.description().capacitors.iter().enumerate() {
        let charged = |stage: usize| check.healthy.worst(StepFigure::CapacitorVoltage { stage, capacitor });
        let low = |stage: usize| pairs.iter().all(|p| check.volts(stage, *p) <= touch);
        let Some(stage) = (0..steps.len()).rev().find(|s| low(*s) && charged(*s) > touch) else { continue };
        findings.add(
            Severity::Danger,
            "stranded-charge",
            format!(
                "At the end of step {} ({}) the terminals are predicted below the touch voltage, but up to {} is still \
                 across {} ({}). Short every unit on its own, and test every pair.",
                stage + 1,
                steps[stage].step,
                volts(charged(stage)),
                described.id,
                described.across.join(" - ")
            ),
        );
    }
}

fn comes_back(check: &StepCheck, recovery: &[Recovery], findings: &mut Findings) {
    let touch = check.procedure.bank.description().touch_voltage;
    let over: Vec<&Recovery> = recovery.iter().filter(|r| r.voltage > touch).collect();
    let Some(worst) = over.iter().max_by(|x, y| x.voltage.si().total_cmp(&y.voltage.si())) else { return };
    let end = check.procedure.end();
    let when = worst.passes_touch_at.map_or_else(String::new, |t| {
        if t.si() <= end {
            format!(" (it is over {} as the last step ends)", exact(touch))
        } else {
            format!(", passing {} from {} after isolation on", exact(touch), duration(t, Direction::Down))
        }
    });
    let supplies = supplies_left_on(check);
    let advice = if supplies.is_empty() {
        "Leave a strap on for as long as anyone works.".to_string()
    } else {
        format!(
            "The procedure ends with {} on and the bank charged: no strap belongs on it as it is.",
            listed(&supplies)
        )
    };
    findings.add(
        Severity::Danger,
        "voltage-comes-back",
        format!(
            "After the last step up to {} comes back at {}{when}. {advice}",
            show(worst.voltage, Direction::Up),
            worst.across.join(" - ")
        ),
    );
}

/// Supplies that are still connected at the end.
fn supplies_left_on(check: &StepCheck) -> Vec<String> {
    let Some(last) = check.procedure.stages.last() else { return Vec::new() };
    let sources = check.procedure.model.sources.iter();
    sources.filter(|s| last.connected.contains(&s.resistor)).map(|s| s.id.clone()).collect()
}

fn left_on(check: &StepCheck, findings: &mut Findings) {
    let model = check.procedure.model;
    let Some(last) = check.procedure.stages.last() else { return };
    let supplies = supplies_left_on(check);
    if !supplies.is_empty() {
        findings.add(
            Severity::Danger,
            "supply-left-on",
            format!(
                "{} is on at the end of the procedure: the bank is charged. Before anyone comes near it is isolated and \
                 goes through a discharge again.",
                listed(&supplies)
            ),
        );
        return;
    }
    let straps = last.connected.iter().filter(|r| check.role(&model.resistors[**r].id) == Some(Role::Strap));
    if straps.count() == 0 {
        findings.add(
            Severity::Warning,
            "no-strap-left-on",
            "No strap is left on at the end of the procedure: charge can come back, and a source can come on.",
        );
    }
}

/// Assumptions that the checks of a procedure make.
pub(crate) fn step_assumptions(check: &StepCheck) -> Vec<String> {
    let description = check.procedure.bank.description();
    let straps: Vec<String> =
        description.resistors.iter().filter(|r| r.role == Role::Strap).map(|r| r.id.clone()).collect();
    let mut list = Vec::new();
    if description.strap_limit.energy.is_none() && !straps.is_empty() {
        let sources = bands(Voltage::from_si(1e4), Energy::from_si(1e9));
        let source = sources.first().map_or_else(String::new, |b| b.source.clone());
        list.push(format!(
            "No strap_limit energy was given: {} may be closed on what the published hazard band of stored energy \
             leaves ({source}); charge that a dielectric gives back slowly is not counted against it.",
            listed(&straps)
        ));
    }
    if !description.supplies.is_empty() {
        list.push(
            "A step that connects a supply is tried from 0 V, the nominal and the highest voltage; the worst counts \
             for its currents, powers and energies."
                .to_string(),
        );
    }
    list
}
