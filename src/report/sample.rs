//! A plan made by hand (invented figures) to develop and test the reports on.

mod procedure;

pub use procedure::with_steps;

use crate::finding::{Finding, Severity};
use crate::plan::*;
use crate::quantity::{Capacitance, Charge, Current, Energy, Power, Quantity, Resistance, Temperature, Time, Voltage};

fn v(x: f64) -> Voltage {
    Voltage::from_si(x)
}

fn s(x: f64) -> Time {
    Time::from_si(x)
}

fn nodes(a: &str, b: &str) -> Pair {
    [a.into(), b.into()]
}

fn fault(fault: &str, wait: Option<f64>, settles_at: f64) -> FaultWait {
    FaultWait {
        fault: fault.into(),
        wait: wait.map(s),
        settles_at: v(settles_at),
        opens: None,
        opens_at: None,
        settles_opens_at: None,
    }
}

fn wait(across: Pair, at: f64, nominal: f64, slowest: f64, faults: Vec<FaultWait>) -> Wait {
    Wait {
        across,
        nominal: Some(s(nominal)),
        slowest: Some(s(slowest)),
        keep: Some(s(slowest)),
        settles_at: v(0.0),
        at_isolation: v(at),
        worst_point: vec![WorstValue { id: "R1".into(), factor: 1.05 }],
        interruption: None,
        found_by: "all 4 corners of 2 loose values".into(),
        faults,
        fault_pairs: Vec::new(),
    }
}

fn check(check: &'static str, unit: &'static str, found: f64, allowed: Option<f64>) -> Check {
    let verdict = allowed.map_or(Verdict::NotChecked, |allowed| Verdict::at_most(found, allowed));
    let remark = allowed.is_none().then(|| "the file gives no rating".to_string());
    Check { check, unit, found: Some(found), allowed, verdict, remark }
}

fn resistor(id: &str, role: &'static str, ohm: f64, watt: f64) -> ResistorResult {
    ResistorResult {
        id: id.into(),
        role,
        value: Resistance::from_si(ohm),
        elements: 1,
        continuous_power: Some(Power::from_si(watt)),
        allowed_power: Some(Power::from_si(25.0)),
        element_voltage: Some(v(750.0)),
        peak_current: Some(Current::from_si(0.0359)),
        peak_power: Some(Power::from_si(watt)),
        energy: Some(Energy::from_si(1061.0)),
        body_temperature: None,
        contact: None,
        checks: vec![
            check("continuous power", "W", watt, Some(25.0)),
            check("element voltage", "V", 750.0, Some(750.0)),
            check("pulse energy", "J", 1061.0, None),
        ],
    }
}

fn capacitor(id: &str) -> CapacitorResult {
    CapacitorResult {
        id: id.into(),
        voltage_highest: v(413.2),
        rated: Some(v(450.0)),
        voltage_fault: v(750.0),
        worst_fault: Some("R2 open".into()),
        verdict: Verdict::Met,
    }
}

fn limits() -> Vec<LimitResult> {
    let source = LimitSource {
        document: "IEC 60204-1".into(),
        clause: "6.2.4".into(),
        edition: Some("2016".into()),
        seen: "quoted".into(),
    };
    let limit = |id: &str, rule: &str, source, within: f64, met| LimitResult {
        id: id.into(),
        rule: rule.into(),
        source,
        across: nodes("P", "N"),
        within: Some(s(within)),
        met,
        single_fault_met: Some(false),
        single_fault_asked: true,
        single_fault_missed_by: Some("R1 open".into()),
        everywhere: true,
        allowed_voltage: Some(v(50.0)),
        voltage: v(41.2),
        charge: Charge::from_si(0.0816),
        energy: Energy::from_si(1.69),
        holds_from: Some(s(247.72)),
    };
    vec![
        limit(
            "iec-60204-1",
            "60 V within 5 s, or at most 60 uC stored at disconnection",
            Some(source),
            5.0,
            Some(false),
        ),
        limit("site-rule", "50 V within 5 min", None, 300.0, Some(true)),
    ]
}

fn working() -> Vec<Working> {
    let resistance = Resistance::from_si(23_100.0);
    let capacitance = Capacitance::from_si(1.98e-3);
    let mode = |tau: f64, amplitude: f64| WorkingMode { tau: s(tau), amplitude: v(amplitude) };
    let values = vec![
        WorkingValue { id: "C1".into(), resistance: None, capacitance: Some(capacitance), factor: 1.2 },
        WorkingValue { id: "R1".into(), resistance: Some(resistance), capacitance: None, factor: 1.05 },
    ];
    let single = WorkingSingle { resistance, capacitance, from: v(750.0), to: v(50.0) };
    let one = Working {
        across: nodes("P", "N"),
        case: "slowest".into(),
        values,
        charged_to: v(750.0),
        from: None,
        settles_at: v(0.0),
        modes: vec![mode(45.738, 750.0)],
        single: Some(single),
        wait: Some(s(123.861)),
    };
    let two = Working {
        across: nodes("P", "M"),
        case: "R1 open".into(),
        modes: vec![mode(91.47612345, 390.123_456_7), mode(0.5, -12.0)],
        single: None,
        ..one.clone()
    };
    vec![one, two]
}

/// A drive's DC bus with two capacitors in series.
pub fn plan() -> Plan {
    let faults = || {
        vec![fault("R1 open", None, 750.0), fault("R2 open", Some(640.4), 0.0), fault("C1 shorted", Some(410.0), 0.0)]
    };
    let mut findings = vec![Finding::new(Severity::Note, "typed-short", "No margin over nominal was given.")];
    findings.push(
        Finding::new(Severity::Danger, "bleeder-open-never", "With R1 open, P - N never falls below 50 V.")
            .with_help("give the bank a second bleeder"),
    );
    Plan {
        ebbvolt: Stamp { version: env!("CARGO_PKG_VERSION"), format: 1 },
        bank: Identity {
            tag: "PU-07".into(),
            title: Some("Lift pump drive, DC bus".into()),
            location: Some("Saltmarsh pumping station, switchroom 2".into()),
            prepared_by: Some("shift electrician".into()),
            revision: Some("B".into()),
            notes: Some("Braking chopper is fed from the same bus.".into()),
            input_sha256: "0".repeat(64),
        },
        verdict: Verdict::NotMet,
        not_computed: Vec::new(),
        spreads: Vec::new(),
        draws: None,
        sensitivity: None,
        touch_voltage: v(50.0),
        hold_energy: None,
        ambient: Temperature::from_si(313.15),
        terminals: vec!["P".into(), "N".into()],
        charged_to: ChargedTo { nominal: v(565.0), highest: v(750.0) },
        stored: Some(Stored {
            energy_nominal: Energy::from_si(263.4),
            energy_highest: Energy::from_si(556.9),
            charge_highest: Charge::from_si(1.485),
            capacitance: Some(Capacitance::from_si(1.65e-3)),
            voltage_highest: v(750.0),
            bands: vec![
                Band { hazard: "shock".into(), source: "NFPA 70E (2021) 360.3".into(), seen: "memory".into() },
                Band { hazard: "shock".into(), source: "DOE electrical safety programme".into(), seen: "text".into() },
            ],
        }),
        time_constants: vec![s(36.3), s(36.1)],
        waits: vec![
            wait(nodes("P", "N"), 750.0, 88.1, 247.72, faults()),
            wait(nodes("P", "M"), 413.2, 60.2, 180.0, faults()),
            wait(nodes("M", "N"), 413.2, 60.2, 180.0, faults()),
        ],
        limits: limits(),
        resistors: vec![resistor("R1", "bleeder", 22e3, 25.6), resistor("R2", "balancing", 47e3, 3.9)],
        capacitors: vec![capacitor("C1"), capacitor("C2")],
        steps: Vec::new(),
        recovery: Vec::new(),
        notice: Notice { delay: Some(s(300.0)), longest_fault: None, never_faults: vec!["R1 open".into()], left: None },
        equipment: Equipment { instrument_voltage: v(750.0), parts: Vec::new() },
        findings,
        assumptions: vec!["Air at the resistors is 40 °C: the file gives none.".into()],
        worst_case_search: "all 16 corners of 4 loose values, then a search inside the box from the best.".into(),
        working: Some(working()),
        curves: None,
    }
}
