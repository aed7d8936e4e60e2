//! The same bank with a procedure (invented figures).

use super::{nodes, plan, resistor, s, v};
use crate::plan::*;
use crate::quantity::{Current, Energy, Power, Quantity};

fn step(name: &str, from: f64, to: f64, stored: f64, volts: [(f64, f64); 3]) -> StepResult {
    let pairs = [nodes("P", "N"), nodes("P", "M"), nodes("M", "N")];
    let point = |(across, (nominal, highest)): (Pair, (f64, f64))| StepPoint {
        across,
        nominal: v(nominal),
        highest: v(highest),
    };
    let failed = |fault: &str, factor: f64| StepFault {
        fault: fault.into(),
        test_points: pairs
            .iter()
            .zip(volts)
            .map(|(across, (_, highest))| FaultPoint { across: across.clone(), highest: v(factor * highest) })
            .collect(),
    };
    StepResult {
        step: name.into(),
        start: s(from),
        end: s(to),
        until: false,
        never: false,
        connect: vec![],
        disconnect: vec![],
        measure: vec![],
        readings: vec![],
        hold: None,
        touch: false,
        stored_at_start: Energy::from_si(stored),
        ready_at_start: Energy::from_si(stored),
        test_points: pairs.iter().cloned().zip(volts).map(point).collect(),
        charging: Vec::new(),
        parts: vec![
            step_part("R1", volts[0].1 / 22e3, volts[0].1.powi(2) / 22e3, stored / 2.0),
            step_part("R2", volts[1].1 / 47e3, volts[1].1.powi(2) / 47e3, stored / 9.0),
        ],
        faults: vec![failed("R1 open", 3.0), failed("R2 open", 1.5)],
    }
}

fn step_part(id: &str, ampere: f64, watt: f64, joule: f64) -> StepPart {
    StepPart {
        id: id.into(),
        peak_current: Current::from_si(ampere),
        peak_power: Power::from_si(watt),
        energy: Energy::from_si(joule),
    }
}

fn hold(below: f64, at: Vec<Pair>, predicted: f64, faults: &[&str]) -> Option<StepHold> {
    let shown_faults = faults.iter().map(|fault| fault.to_string()).collect();
    Some(StepHold { below: v(below), at, predicted: v(predicted), shown_faults })
}

fn comes_back(across: Pair, volt: f64, at: Option<f64>, passes: Option<f64>) -> Recovery {
    Recovery { across, voltage: v(volt), at: at.map(s), passes_touch_at: passes.map(s) }
}

/// The same bank with a procedure: wait, test, tool, strap, work.
pub fn with_steps() -> Plan {
    let all = || vec![nodes("P", "N"), nodes("P", "M"), nodes("M", "N")];
    let mut plan = plan();
    plan.resistors.extend([
        resistor("M1", "meter", 10e6, 0.056),
        resistor("T1", "tool", 1e3, 2.63),
        resistor("ST1", "strap", 0.01, 0.4),
        resistor("ST2", "strap", 0.01, 0.4),
    ]);
    plan.resistors[3].elements = 10;
    let mut wait = step("Wait for the bleeders", 0.0, 250.0, 556.9, [(11.2, 49.6), (5.6, 36.0), (5.6, 36.0)]);
    wait.until = true;
    let mut test =
        step("Prove the meter, test, prove it again", 250.0, 370.0, 2.44, [(2.1, 13.3), (1.0, 9.9), (1.0, 9.9)]);
    test.connect = vec!["M1".into()];
    test.measure = all();
    test.measure.push(nodes("P", "E"));
    test.hold = hold(49.97, vec![nodes("P", "N")], 13.3, &["R1 open", "R2 open"]);
    test.parts.push(step_part("M1", 5.1e-6, 2.5e-4, 3.3e-3));
    let mut tool = step("Apply the discharge tool", 370.0, 400.0, 0.18, [(1e-4, 0.012), (0.2, 1.9), (0.2, 1.9)]);
    tool.connect = vec!["T1".into()];
    tool.disconnect = vec!["M1".into()];
    tool.measure = all();
    tool.hold = hold(5.0, all(), 1.9, &[]);
    tool.parts.push(step_part("T1", 0.0141, 0.0188, 0.17));
    let mut strap = step("Put a strap on each half, the tool still on", 400.0, 460.0, 0.012, [(0.0, 0.0); 3]);
    strap.connect = vec!["ST1".into(), "ST2".into()];
    strap.parts.extend([step_part("T1", 2e-6, 4e-9, 1e-9), step_part("ST1", 380.0, 722.0, 0.006)]);
    let mut work = step("Work begins with both straps on", 460.0, 460.0, 0.0, [(0.0, 0.0); 3]);
    work.disconnect = vec!["T1".into()];
    work.touch = true;
    let isolate = step("Lock out and isolate", 0.0, 0.0, 556.9, [(565.0, 750.0), (282.5, 413.2), (282.5, 413.2)]);
    plan.steps = vec![isolate, wait, test, tool, strap, work];
    plan.recovery = vec![
        comes_back(nodes("P", "N"), 62.1, Some(864_000.0), Some(90_000.0)),
        comes_back(nodes("P", "M"), 31.0, None, None),
        comes_back(nodes("M", "N"), 31.0, Some(864_000.0), None),
    ];
    plan
}
