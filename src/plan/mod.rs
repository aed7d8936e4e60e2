//! The plan: one result for one bank, its verdict and its exit status.

mod result;
mod working;

pub use crate::check::{EngineError, fault_in_words};
pub use result::*;

use crate::bank::Bank;
use crate::check::{
    Answers, CapacitorCheck, CurveCheck, FaultAnswers, LimitChecks, Procedure, ResistorChecks, StepCheck, StoredCheck,
    WaitCheck, assumptions, equipment, notes, notice, phase_findings, remaining_energy, sensitivities, spreads,
    step_assumptions, step_findings,
};
use crate::discharge::{Figure, MOST_CORNERS, Model, faults, pairs_of_faults};
use crate::finding::{Findings, Severity};
use crate::quantity::{Quantity, Time};

/// What a plan is to contain beyond the figures.
#[derive(Debug, Clone, Default, PartialEq)]
pub struct Options {
    /// The calculation of every wait, for a reviewer to check by hand.
    pub working: bool,
    /// Waits with every two parts failed at once.
    pub two_faults: bool,
    /// Random draws over the tolerances beside the worst case.
    pub draws: Option<Drawing>,
    /// How the waits depend on every part.
    pub sensitivity: bool,
    /// Curves at these moments.
    pub curves: Option<CurveTimes>,
}

/// So many pairs of faults are examined at most: each is a search over the box of its own.
const MOST_FAULT_PAIRS: usize = 500;

/// Makes the plan of `bank`. `input_sha256` is printed with it, so that a plan can be matched with its file;
/// `noticed` are findings that reading the file brought up.
///
/// # Errors
/// [`EngineError`] where the engine can't certify a result: the energy balance fails or a search does not close.
/// There is no plan then.
///
/// # Example: one capacitor and its bleeder
/// ```
/// use ebbvolt::{bank, finding::Findings, plan, quantity::Quantity};
/// let file = b"
/// ebbvolt: 1
/// tag: PU-07
/// touch_voltage: 50 V
/// charged_to: {nominal: 565 V, highest: 750 V}
/// capacitors: [{id: C1, value: 3300 uF, tolerance: 20 %}]
/// resistors: [{id: R1, role: bleeder, value: 22 kohm, tolerance: 5 %}]
/// ";
/// let (bank, noticed) = bank::file::read("pu-07.yaml", file).expect("a valid file");
/// let plan = plan::plan(&bank, "", noticed, plan::Options::default()).expect("a certified result");
/// // tau = 1.05 * 22 kohm * 1.2 * 3300 uF, t = tau ln(750/50)
/// let expected = 1.05 * 22e3 * 1.2 * 3300e-6 * (750.0f64 / 50.0).ln();
/// let slowest = plan.waits[0].slowest.expect("it ends").si();
/// assert!((slowest / expected - 1.0).abs() < 1e-9);
/// ```
pub fn plan(bank: &Bank, input_sha256: &str, noticed: Findings, options: Options) -> Result<Plan, EngineError> {
    let mut findings = noticed;
    // From here on every part is a plain one: the plan of a file and that of its expanded form are the same.
    let bank = &bank.expanded();
    let mut plan = blank(bank, input_sha256);
    compute(bank, &mut plan, &mut findings, &options)?;
    for missing in &plan.not_computed {
        findings.add(Severity::Warning, "not-computed", format!("Not computed by this version: {missing}."));
    }
    plan.notice = notice(&plan.waits, &plan.recovery);
    plan.equipment = equipment(bank, plan.stored.as_ref(), &plan.waits, &plan.steps, &plan.recovery);
    plan.findings = findings.into_sorted();
    plan.verdict = plan.judged();
    Ok(plan)
}

/// Fills in everything that is computed.
fn compute(bank: &Bank, plan: &mut Plan, findings: &mut Findings, options: &Options) -> Result<(), EngineError> {
    let model = Model::new(bank).map_err(EngineError::of("absorption"))?;
    let description = bank.description();
    let (first, last) = (description.terminals.first(), description.terminals.last());
    let terminals = first.zip(last).and_then(|(a, b)| model.find_pair(a, b)).unwrap_or(0);

    let waits = WaitCheck { bank, model: &model };
    let stored = StoredCheck { bank, model: &model, terminals };
    let limits = LimitChecks::new(bank, &model)?;
    let resistors = ResistorChecks { bank, model: &model };
    let capacitors = CapacitorCheck { bank };

    let figures =
        [waits.figures(), stored.figures(), limits.figures(), capacitors.figures(), resistors.figures()].concat();
    let healthy = Answers::healthy(bank, &model, figures)?;
    let fault_figures: Vec<Figure> =
        [waits.fault_figures(), limits.fault_figures(), capacitors.figures(), resistors.fault_figures()].concat();
    let under_faults = FaultAnswers::all(bank, &model, faults(bank, &model), &fault_figures, &healthy)?;

    plan.time_constants = working::time_constants(bank, &model)?.into_iter().map(Time::from_si).collect();
    plan.stored = Some(stored.conclude(&healthy, findings));
    plan.waits = waits.conclude(&healthy, &under_faults, findings);
    remaining_energy(bank, &model, &plan.waits, findings)?;
    plan.limits = limits.conclude(&healthy, &under_faults, findings);
    let procedure = Procedure::resolve(bank, &model)?;
    plan.resistors = resistors.conclude(&healthy, procedure.as_ref(), &under_faults, findings)?;
    if let Some(procedure) = &procedure {
        let steps = StepCheck::new(procedure, faults(bank, &model))?;
        plan.steps = steps.results(&plan.waits);
        plan.recovery = steps.recovery()?;
        step_findings(&steps, &plan.steps, &plan.recovery, &plan.resistors, findings);
        plan.assumptions.extend(step_assumptions(&steps));
    }
    plan.capacitors = capacitors.conclude(&healthy, &under_faults, findings);
    phase_findings(bank, &model, &healthy, &plan.waits, findings);
    notes(bank, &model, &plan.resistors, &plan.capacitors, findings);
    plan.worst_case_search = search_used(model.passive, &plan.waits);
    if let Some(drawing) = &options.draws {
        plan.draws = Some(Draws::make(&waits, &model, &plan.waits, drawing)?);
    }
    if options.sensitivity {
        plan.sensitivity = Some(sensitivities(&waits, &model, &plan.waits, &healthy)?);
    }
    if options.two_faults {
        two_faults(bank, &model, &waits, &healthy, plan, findings)?;
    }
    if options.working {
        plan.working =
            Some(working::working(bank, &model, &plan.waits, |pair| healthy.worst_scenario(waits.wait(pair)))?);
    }
    if let Some(times) = &options.curves {
        let alone = model.passive_only();
        let followed = if procedure.is_some() { &model } else { &alone };
        plan.curves = Some(CurveCheck::new(bank, followed, procedure.as_ref(), followed_for(plan))?.curves(times)?);
    }
    Ok(())
}

/// Why the pairs of faults of a bank are too many to be examined; `None` where they are not.
///
/// # Errors
/// Where the absorption of a capacitor can't be calibrated.
pub fn too_many_fault_pairs(bank: &Bank) -> Result<Option<String>, EngineError> {
    let model = Model::new(bank).map_err(EngineError::of("absorption"))?;
    let single = faults(bank, &model);
    Ok(too_many(single.len(), pairs_of_faults(&model, &single).len()))
}

fn too_many(single: usize, pairs: usize) -> Option<String> {
    (pairs > MOST_FAULT_PAIRS).then(|| {
        format!(
            "Two faults at once: {single} single faults make {pairs} pairs, and up to {MOST_FAULT_PAIRS} are \
             examined, so none was. Split the bank into files of sections that hang together, or lump equal units \
             (`units`, `array`)."
        )
    })
}

/// Waits with every two parts failed at once.
fn two_faults(
    bank: &Bank,
    model: &Model,
    waits: &WaitCheck,
    healthy: &Answers,
    plan: &mut Plan,
    findings: &mut Findings,
) -> Result<(), EngineError> {
    let single = faults(bank, model);
    let pairs = pairs_of_faults(model, &single);
    if let Some(text) = too_many(single.len(), pairs.len()) {
        findings.add(Severity::Warning, "too-many-fault-pairs", text);
        return Ok(());
    }
    let answers = FaultAnswers::all(bank, model, pairs, &waits.fault_figures(), healthy)?;
    for (pair, wait) in plan.waits.iter_mut().enumerate() {
        wait.fault_pairs = waits.fault_waits(pair, &answers);
    }
    Ok(())
}

/// How long a bank that nobody discharges is followed, in second: somewhat past its longest wait and the times of its
/// limits; where there is no wait, over its slowest time constant.
fn followed_for(plan: &Plan) -> f64 {
    let waits = plan.waits.iter().filter_map(|w| w.keep);
    let limits = plan.limits.iter().filter_map(|l| l.within);
    let longest = waits.chain(limits).map(Quantity::si).fold(0.0, f64::max);
    let slowest = plan.time_constants.first().map_or(0.0, |tau| tau.si());
    let never = plan.waits.iter().any(|w| w.keep.is_none());
    let followed = if never || longest <= 0.0 { longest.max(5.0 * slowest) } else { 1.25 * longest };
    if followed > 0.0 { followed } else { 3600.0 }
}

/// A plan with everything that needs no engine.
fn blank(bank: &Bank, input_sha256: &str) -> Plan {
    let description = bank.description();
    Plan {
        ebbvolt: Stamp { version: env!("CARGO_PKG_VERSION"), format: 1 },
        bank: Identity {
            tag: description.tag.clone(),
            title: description.title.clone(),
            location: description.location.clone(),
            prepared_by: description.prepared_by.clone(),
            revision: description.revision.clone(),
            notes: description.notes.clone(),
            input_sha256: input_sha256.to_string(),
        },
        verdict: Verdict::NotChecked,
        // Every part of the format is computed; a later one that is only read would be named here.
        not_computed: Vec::new(),
        touch_voltage: description.touch_voltage,
        hold_energy: description.hold_energy,
        ambient: bank.ambient(),
        terminals: description.terminals.clone(),
        charged_to: ChargedTo { nominal: description.charged_to.nominal, highest: description.charged_to.highest },
        stored: None,
        time_constants: Vec::new(),
        waits: Vec::new(),
        spreads: spreads(bank),
        limits: Vec::new(),
        resistors: Vec::new(),
        capacitors: Vec::new(),
        steps: Vec::new(),
        recovery: Vec::new(),
        notice: notice(&[], &[]),
        equipment: equipment(bank, None, &[], &[], &[]),
        findings: Vec::new(),
        assumptions: assumptions(bank),
        worst_case_search: String::new(),
        draws: None,
        sensitivity: None,
        working: None,
        curves: None,
    }
}

/// Which search found the worst cases, in one sentence.
fn search_used(loose: usize, waits: &[Wait]) -> String {
    match loose {
        0 => "No value is loose: the worst case is the nominal one at the highest voltage.".into(),
        1..=MOST_CORNERS => format!(
            "All {} corners of {loose} loose values, then a search inside the box from the best of them.",
            1usize << loose
        ),
        _ => {
            let mut ways: Vec<(&str, Vec<String>)> = Vec::new();
            for wait in waits {
                let at = wait.across.join(" - ");
                match ways.iter_mut().find(|(way, _)| *way == wait.found_by) {
                    Some((_, pairs)) => pairs.push(at),
                    None => ways.push((&wait.found_by, vec![at])),
                }
            }
            let ways: Vec<String> = ways.iter().map(|(way, pairs)| format!("{}: {way}", pairs.join(", "))).collect();
            format!(
                "{loose} loose values. Slowest waits: {}. Then a search inside the box. Figures that nothing is said \
                 of are searched from several starts: a search, not a proof.",
                ways.join("; ")
            )
        }
    }
}

impl Plan {
    /// What the whole plan comes to: healthy figures decide, and single faults only where a limit asks for them.
    fn judged(&self) -> Verdict {
        if !self.not_computed.is_empty() {
            return Verdict::Incomplete;
        }
        let limit_missed =
            |l: &LimitResult| l.met == Some(false) || (l.single_fault_asked && l.single_fault_met == Some(false));
        let missed = self.steps.iter().any(|s| s.never)
            || self.waits.iter().any(|w| w.slowest.is_none() || w.nominal.is_none())
            || self.limits.iter().any(limit_missed)
            || self.resistors.iter().flat_map(|r| &r.checks).any(|c| c.verdict == Verdict::NotMet)
            || self.capacitors.iter().any(|c| c.verdict == Verdict::NotMet);
        if missed { Verdict::NotMet } else { Verdict::Met }
    }

    /// Exit status: 0 met, 1 not met, 3 no verdict.
    pub fn exit_code(&self) -> u8 {
        match self.verdict {
            Verdict::Met => 0,
            Verdict::NotMet => 1,
            Verdict::NotChecked | Verdict::Incomplete => 3,
        }
    }
}
