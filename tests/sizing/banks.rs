//! Invented banks and elements, and the library's public path to a sizing.

use ebbvolt::bank::stock::Values;
use ebbvolt::bank::{Bank, file, stock::Element};
use ebbvolt::data::{Series, generic_stock};
use ebbvolt::plan::{Options, Plan, plan};
use ebbvolt::quantity::{Quantity, Time, Voltage};
use ebbvolt::size::{BleederAsk, BleederFigures, Build, Sizing, Target, bleeder};

pub fn bank(text: &str) -> Bank {
    file::read("bank.yaml", text.as_bytes()).unwrap_or_else(|e| panic!("{text}{e:?}")).0
}

pub fn elements(text: &str) -> Vec<Element> {
    file::read_stock("stock.yaml", text.as_bytes()).unwrap_or_else(|e| panic!("{text}{e:?}"))
}

pub fn generic(series: Series) -> Vec<Element> {
    let mut elements = elements(generic_stock());
    for element in &mut elements {
        if let Values::Preferred { series: own, .. } = &mut element.values {
            *own = series;
        }
    }
    elements
}

pub fn target(volts: f64, seconds: f64) -> Option<Target> {
    Some(Target { voltage: Voltage::from_si(volts), within: Time::from_si(seconds) })
}

pub fn sized(bank: &Bank, ask: &BleederAsk) -> Sizing<BleederFigures> {
    bleeder(bank, "", ask).unwrap_or_else(|e| panic!("{e}"))
}

pub fn planned(bank: &Bank) -> Plan {
    plan(bank, "", Default::default(), Options::default()).unwrap_or_else(|e| panic!("{e}"))
}

/// The greatest actual resistance of the window, in ohm.
pub fn greatest<F>(sizing: &Sizing<F>) -> f64 {
    sizing.window.as_ref().and_then(|w| w.greatest).expect("bounded above").si()
}

/// The least, likewise.
pub fn least<F>(sizing: &Sizing<F>) -> f64 {
    sizing.window.as_ref().and_then(|w| w.least).expect("bounded below").si()
}

pub const HEAD: &str = "ebbvolt: 1\ntag: SM-SIZE\nlocation: Saltmarsh pumping station\nambient: 40 °C\n";

/// Generic elements of a series, and nothing else asked of the build.
pub fn of(series: Series) -> Build {
    Build { elements: generic(series), ..Build::default() }
}
