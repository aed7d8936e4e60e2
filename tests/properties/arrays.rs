//! An array of equal elements is as one resistor of its total; each element has its share of the voltage, the current,
//! the power and the energy, whether it is always connected or a step connects it.

use ebbvolt::bank::file;
use ebbvolt::plan::{Options, Plan, ResistorResult, plan};
use ebbvolt::quantity::Quantity;

/// A bleeder and a tool, both given by `(ohm of one element, series, parallel)`; the tool is put on after 10 s.
fn planned(bleeder: (f64, u32, u32), tool: (f64, u32, u32)) -> Plan {
    let part = |(ohms, series, parallel): (f64, u32, u32)| {
        format!("value: {ohms:e} ohm, array: {{series: {series}, parallel: {parallel}}}")
    };
    let text = format!(
        "ebbvolt: 1\ntag: SM-ARRAY\ntouch_voltage: 50 V\ncharged_to: {{nominal: 500 V, highest: 565 V}}\n\
         capacitors: [{{id: C1, value: 1000 uF, tolerance: 10 %}}]\nresistors:\n  \
         - {{id: R1, role: bleeder, {}, tolerance: 0 %}}\n  - {{id: T1, role: tool, {}, tolerance: 0 %}}\n\
         procedure:\n  - {{step: wait, for: 10 s}}\n  - {{step: tool, connect: [T1], for: 10 s}}\n",
        part(bleeder),
        part(tool)
    );
    let (bank, noticed) = file::read("array.yaml", text.as_bytes()).unwrap_or_else(|e| panic!("{text}{e:?}"));
    plan(&bank, "", noticed, Options::default()).unwrap_or_else(|e| panic!("{text}{e}"))
}

/// Voltage, current, power and energy of one element.
fn load(plan: &Plan, id: &str) -> [f64; 4] {
    let found: &ResistorResult = plan.resistors.iter().find(|r| r.id == id).expect("a resistor");
    [
        found.element_voltage.expect("connected").si(),
        found.peak_current.expect("connected").si(),
        found.peak_power.expect("connected").si(),
        found.energy.expect("connected").si(),
    ]
}

fn elements_share(id: &str, whole: &Plan, array: &Plan, series: u32, parallel: u32) {
    let (series, parallel) = (f64::from(series), f64::from(parallel));
    let shares = [series, parallel, series * parallel, series * parallel];
    for ((found, total), share) in load(array, id).into_iter().zip(load(whole, id)).zip(shares) {
        assert!(
            total > 0.0 && (found * share / total - 1.0).abs() < 1e-9,
            "{id}: {found} of {total}, a share of {share}"
        );
    }
}

const ARRAYS: [(u32, u32); 4] = [(10, 1), (1, 4), (2, 3), (3, 2)];

#[test]
fn an_element_of_a_bleeder_has_its_share_of_what_one_resistor_would_bear() {
    for (series, parallel) in ARRAYS {
        let ohms = 100e3 * f64::from(parallel) / f64::from(series);
        let (whole, array) = (planned((100e3, 1, 1), (20e3, 1, 1)), planned((ohms, series, parallel), (20e3, 1, 1)));
        elements_share("R1", &whole, &array, series, parallel);
        elements_share("T1", &whole, &array, 1, 1);
    }
}

#[test]
fn an_element_of_a_tool_that_a_step_connects_has_its_share_too() {
    for (series, parallel) in ARRAYS {
        let ohms = 20e3 * f64::from(parallel) / f64::from(series);
        let (whole, array) = (planned((100e3, 1, 1), (20e3, 1, 1)), planned((100e3, 1, 1), (ohms, series, parallel)));
        elements_share("T1", &whole, &array, series, parallel);
        elements_share("R1", &whole, &array, 1, 1);
    }
}

#[test]
fn what_a_step_says_of_a_part_is_what_its_own_line_says() {
    // With no tolerance on the elements there is no unequal sharing to tell them apart.
    for (series, parallel) in ARRAYS {
        let plan = planned((100e3, 1, 1), (20e3, series, parallel));
        let step = plan.steps[1].parts.iter().find(|p| p.id == "T1").expect("it is connected");
        let in_step = [step.peak_current.si(), step.peak_power.si(), step.energy.si()];
        for (found, in_step) in load(&plan, "T1")[1..].iter().zip(in_step) {
            assert!(in_step > 0.0 && (found / in_step - 1.0).abs() < 1e-9, "{series} x {parallel}: {found}, {in_step}");
        }
    }
}
