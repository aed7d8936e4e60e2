//! Checks: one file per question that a plan answers. Each names the figures it needs, and from the answers makes
//! its part of the result, its verdicts and its findings.

mod answers;
mod capacitors;
mod charging;
mod curve_times;
mod curves;
mod draws;
mod energy;
mod equipment;
mod fault_words;
mod limits;
mod notes;
mod notice;
mod phases;
mod procedure;
mod resistors;
mod sensitivity;
mod serial;
mod spreads;
mod step_findings;
mod step_result;
mod steps;
mod stored;
mod verdict;
mod waits;

pub(crate) use answers::{Answers, FaultAnswers, Moment};
pub(crate) use capacitors::CapacitorCheck;
pub(crate) use curves::CurveCheck;
pub(crate) use energy::remaining_energy;
pub(crate) use equipment::equipment;
pub(crate) use limits::LimitChecks;
pub(crate) use notes::{assumptions, contact, notes};
pub(crate) use notice::notice;
pub(crate) use phases::phase_findings;
pub(crate) use procedure::{Procedure, StepAnswers};
pub(crate) use resistors::{ResistorChecks, body, derated};
pub(crate) use sensitivity::sensitivities;
pub(crate) use serial::{celsius_or_null, degrees, si, si_list, si_or_null};
pub(crate) use spreads::spreads;
pub(crate) use step_findings::{step_assumptions, step_findings};
pub(crate) use steps::StepCheck;
pub(crate) use stored::StoredCheck;
pub(crate) use waits::WaitCheck;

pub use answers::EngineError;
pub use capacitors::CapacitorResult;
pub use charging::{Charging, ChargingMoment};
pub use curves::{
    CurveLoad, CurvePair, CurvePart, CurveSample, CurveSpan, CurveTimes, CurveTool, CurveVoltage, Curves, ToolLoad,
};
pub use draws::{DrawFrom, Drawing, DrawnWait, Draws};
pub use equipment::{Equipment, EquipmentPart};
pub use fault_words::fault_in_words;
pub use limits::{LimitResult, LimitSource};
pub use notice::{Notice, NoticeFault};
pub use resistors::{Check, ContactResult, ResistorResult};
pub use sensitivity::{PartSensitivity, Sensitivity};
pub use spreads::SpreadResult;
pub use step_result::{
    FaultPoint, FaultReading, Recovery, StepFault, StepHold, StepPart, StepPoint, StepReading, StepResult,
};
pub use stored::{Band, Stored};
pub use verdict::Verdict;
pub use waits::{FaultWait, Interruption, Opens, Wait, WorstValue};

/// A pair of nodes by name.
pub type Pair = [String; 2];
