//! How long a plan takes: `cargo bench`. A measurement, never a test; the banks are invented.

use ebbvolt::bank::{Bank, file};
use ebbvolt::data;
use ebbvolt::finding::Findings;
use ebbvolt::plan::{Options, plan};
use std::fmt::Write;

fn main() {
    divan::main();
}

fn bank(text: &str) -> Bank {
    file::read("bench.yaml", text.as_bytes()).expect("a valid bank").0
}

fn planned(bencher: divan::Bencher, bank: &Bank) {
    bencher.bench(|| plan(divan::black_box(bank), "", Findings::default(), Options::default()).expect("certified"));
}

/// Sections of 1 mF behind 10 ohm each, with a bleeder; `loose` of the values have a tolerance.
fn ladder(sections: usize, loose: usize) -> Bank {
    let mut text = String::from(
        "ebbvolt: 1\ntag: L\ntouch_voltage: 50 V\ncharged_to: {nominal: 565 V, highest: 750 V}\n\
         terminals: [N1, N]\ntest_points: [[N1, N]]\ncapacitors:\n",
    );
    let mut given = 0;
    let mut tolerance = || {
        given += 1;
        if given <= loose { "10 %" } else { "0 %" }
    };
    for k in 1..=sections {
        let _ = writeln!(text, "  - {{id: C{k}, value: 1 mF, tolerance: {}, across: [N{k}, N]}}", tolerance());
    }
    text.push_str("resistors:\n  - {id: R1, role: bleeder, value: 10 kohm, tolerance: 5 %, across: [N1, N]}\n");
    for k in 1..sections {
        let next = k + 1;
        let _ = writeln!(
            text,
            "  - {{id: S{k}, role: series, value: 10 ohm, tolerance: {}, across: [N{k}, N{next}]}}",
            tolerance()
        );
    }
    bank(&text)
}

/// One capacitor and its bleeder.
#[divan::bench]
fn one_capacitor(bencher: divan::Bencher) {
    planned(bencher, &ladder(1, 1));
}

/// Six sections, five of their values loose beside the bleeder: every fault too.
#[divan::bench]
fn six_sections(bencher: divan::Bencher) {
    planned(bencher, &ladder(6, 6));
}

/// A ladder of 30, nothing loose but the bleeder.
#[divan::bench(sample_count = 20)]
fn ladder_of_thirty(bencher: divan::Bencher) {
    planned(bencher, &ladder(30, 0));
}

/// The demonstration banks: procedures, absorption, ratings.
#[divan::bench(args = data::demo_banks().iter().map(|(name, _)| *name), sample_count = 5)]
fn demonstration(bencher: divan::Bencher, name: &str) {
    let (_, text) = data::demo_banks().iter().find(|(known, _)| *known == name).expect("it is there");
    planned(bencher, &bank(text));
}
