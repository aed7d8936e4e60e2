//! What is printed and hung up: the sheet, the notice, the curves. Read back as a browser and an XML reader see them.

mod access;
mod curves;
mod escaping;
mod notice;
mod sheet;

use ebbvolt::bank::file;
use ebbvolt::cli::{Terminal, run};
use ebbvolt::data::demo_banks;
use ebbvolt::plan::{CurveTimes, Options, Plan, plan};
use ebbvolt::report::{Sheet, sheet_html};
use scraper::{ElementRef, Html, Selector};
use std::sync::OnceLock;

/// What one command left behind.
pub struct Printed {
    /// Its exit status.
    pub status: u8,
    /// What it printed.
    pub out: String,
    /// What it told beside that.
    pub err: String,
}

/// Runs a command with a bank file on standard input.
pub fn with_bank(words: &[&str], bank: &str) -> Printed {
    let (mut out, mut err) = (Vec::new(), Vec::new());
    let words = std::iter::once(&"ebbvolt").chain(words).map(Into::into);
    let status = run(words, &mut bank.as_bytes(), &mut out, &mut err, Terminal::NONE);
    let text = |bytes: Vec<u8>| String::from_utf8(bytes).expect("UTF-8");
    Printed { status, out: text(out), err: text(err) }
}

/// The HTML sheet of a bank.
pub fn sheet(bank: &str) -> String {
    let printed = with_bank(&["sheet", "-"], bank);
    assert!(printed.out.ends_with("</html>\n"), "{}", printed.err);
    printed.out
}

/// Every demonstration bank with its calculation and its curves, planned once.
pub fn demo_plans() -> &'static [(&'static str, Plan)] {
    static PLANS: OnceLock<Vec<(&'static str, Plan)>> = OnceLock::new();
    PLANS.get_or_init(|| {
        let planned = |(name, text): &(&'static str, &'static str)| {
            let (bank, noticed) = file::read(name, text.as_bytes()).expect("a valid bank");
            let options = Options { working: true, curves: Some(CurveTimes::Automatic), ..Options::default() };
            (*name, plan(&bank, "0123", noticed, options).expect("a certified plan"))
        };
        demo_banks().iter().map(planned).collect()
    })
}

/// Name and HTML sheet of every demonstration bank.
pub fn demo_sheets() -> Vec<(&'static str, String)> {
    demo_plans().iter().map(|(name, plan)| (*name, sheet_html(plan, &Sheet::default()))).collect()
}

/// All elements that a CSS selector finds.
pub fn all<'a>(page: &'a Html, selector: &str) -> Vec<ElementRef<'a>> {
    let selector = Selector::parse(selector).unwrap_or_else(|e| panic!("{selector}: {e}"));
    page.select(&selector).collect()
}

/// The text of an element, its pieces and all blanks separated by single spaces.
pub fn text(element: ElementRef<'_>) -> String {
    element.text().flat_map(str::split_whitespace).collect::<Vec<_>>().join(" ")
}

/// The text of an element, its pieces put together as they stand.
pub fn joined(element: ElementRef<'_>) -> String {
    element.text().collect::<String>()
}

/// One capacitance and one bleeder (invented).
pub const PLAIN: &str = "\
ebbvolt: 1
tag: PU-09
title: Washwater pump drive
ambient: 40 °C
touch_voltage: 50 V
charged_to: {nominal: 565 V, highest: 750 V}
capacitors: [{id: C1, value: 3300 uF, tolerance: 20 %, rated: 800 V}]
resistors: [{id: R1, role: bleeder, value: 22 kohm, tolerance: 5 %, rating: {power: 50 W, full_to: 70 °C, zero_at: 155 °C, voltage: 1 kV}}]
";

/// The same with a second bleeder, so that no single failure makes the wait endless.
pub const TWO_BLEEDERS: &str = "\
ebbvolt: 1
tag: PU-10
touch_voltage: 50 V
charged_to: {nominal: 565 V, highest: 750 V}
capacitors: [{id: C1, value: 3300 uF, tolerance: 20 %}]
resistors:
  - {id: R1, role: bleeder, value: 22 kohm, tolerance: 5 %}
  - {id: R2, role: bleeder, value: 47 kohm, tolerance: 5 %}
";

/// The same without any bleeder.
pub const NO_BLEEDER: &str = "\
ebbvolt: 1
tag: NV-01
touch_voltage: 50 V
charged_to: {nominal: 565 V, highest: 750 V}
capacitors: [{id: C1, value: 3300 uF, tolerance: 20 %}]
";

/// A discharge tool, a strap and a meter, used one after the other.
pub const WITH_STEPS: &str = "\
ebbvolt: 1
tag: PU-11
touch_voltage: 50 V
strap_limit: {energy: 1 J, current: 100 A}
charged_to: {nominal: 565 V, highest: 750 V}
capacitors: [{id: C1, value: 3300 uF, tolerance: 20 %, rated: 800 V}]
resistors:
  - {id: R1, role: bleeder, value: 22 kohm, tolerance: 5 %}
  - {id: M1, role: meter, value: 10 Mohm, tolerance: 2 %, rating: {voltage: 1 kV}}
  - {id: T1, role: tool, value: 1 kohm, tolerance: 5 %, rating: {power: 100 W, full_to: 25 °C, zero_at: 275 °C, voltage: 1 kV, thermal_time: 90 s}}
  - {id: ST1, role: strap, value: 10 mohm, tolerance: 50 %}
limits: [{id: site-rule, voltage: 50 V, within: 10 min}]
procedure:
  - {step: Lock out and isolate, for: 0 s}
  - {step: Wait for the bleeder, for: 60 s}
  - {step: Prove the meter and test, connect: [M1], for: 30 s, measure: [[P, N]], hold: {below: 449.96 V, at: [P, N]}}
  - {step: Apply the discharge tool, connect: [T1], disconnect: [M1], for: 60 s, measure: [[P, N]], hold: {below: 5 V, at: [P, N]}}
  - {step: Put the strap on, connect: [ST1], for: 60 s}
  - {step: Take the tool off, disconnect: [T1], for: 60 s}
  - {step: Work begins, touch: true, for: 0 s}
";
