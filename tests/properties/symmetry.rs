//! Banks of equal parts in which every rate of decay is the same: all terminals among themselves, or meeting at a star
//! point. Some voltages in them are nothing at all times, as the small difference of equal figures.

use ebbvolt::bank::file;
use ebbvolt::plan::{Options, Plan, plan};
use ebbvolt::quantity::Quantity;

const NODES: [&str; 5] = ["P", "N", "X", "Y", "Z"];
const OHMS: f64 = 100e3;
const FARADS: f64 = 10e-6;

/// How the equal parts of one kind stand between the nodes.
#[derive(Clone, Copy, Debug, PartialEq)]
enum Shape {
    /// One between any two nodes.
    All,
    /// One from each node to a star point of its own.
    Star(&'static str),
}

impl Shape {
    fn pairs(self, nodes: usize) -> Vec<(&'static str, &'static str)> {
        let list = &NODES[..nodes];
        match self {
            Shape::All => {
                list.iter().enumerate().flat_map(|(i, a)| list[i + 1..].iter().map(move |b| (*a, *b))).collect()
            }
            Shape::Star(point) => list.iter().map(|node| (*node, point)).collect(),
        }
    }
}

/// From 565 V to 50 V; `tolerance` is a further key of every part.
fn planned(nodes: usize, capacitors: Shape, resistors: Shape, tolerance: &str) -> Plan {
    nearly_equal(nodes, capacitors, resistors, tolerance, 0.0)
}

/// The same with the second resistor `off` from the others, as a share.
fn nearly_equal(nodes: usize, capacitors: Shape, resistors: Shape, tolerance: &str, off: f64) -> Plan {
    let list = |shape: Shape, letter: &str, keys: &dyn Fn(usize) -> String| -> String {
        let pairs = shape.pairs(nodes).into_iter().enumerate();
        let line = |(i, (a, b))| format!("  - {{id: {letter}{i}, across: [{a}, {b}], {}{tolerance}}}\n", keys(i));
        pairs.map(line).collect()
    };
    let ohms = |i: usize| OHMS * (1.0 + if i == 1 { off } else { 0.0 });
    let text = format!(
        "ebbvolt: 1\ntag: SM-EQUAL\ntouch_voltage: 50 V\ncharged_to: 565 V\ncapacitors:\n{}resistors:\n{}\
         test_points: [[P, N], [P, X], [X, N]]\n",
        list(capacitors, "C", &|_| format!("value: {FARADS:e} F")),
        list(resistors, "R", &|i| format!("role: bleeder, value: {:e} ohm", ohms(i)))
    );
    let (bank, noticed) = file::read("equal.yaml", text.as_bytes()).unwrap_or_else(|e| panic!("{text}{e:?}"));
    plan(&bank, "", noticed, Options::default()).unwrap_or_else(|e| panic!("{text}{e}"))
}

/// A star of n legs is, seen from its nodes, one leg times 1/n between any two (admittances): with all resistors and
/// all capacitors so placed, every difference of voltage decays with one time constant.
fn time_constant(nodes: f64, capacitors: Shape, resistors: Shape) -> f64 {
    let ohms = if resistors == Shape::All { OHMS } else { nodes * OHMS };
    let farads = if capacitors == Shape::All { FARADS } else { FARADS / nodes };
    ohms * farads
}

fn waits_are_those_of_one_time_constant(capacitors: Shape, resistors: Shape) {
    for nodes in 3..=NODES.len() {
        let plan = planned(nodes, capacitors, resistors, "");
        let tau = time_constant(nodes as f64, capacitors, resistors);
        // What is not a terminal stands half way between them.
        for (wait, volts) in plan.waits.iter().zip([565.0, 282.5, 282.5f64]) {
            let found = wait.nominal.expect("it ends").si();
            let expected = tau * (volts / 50.0).ln();
            assert!(
                (found / expected - 1.0).abs() < 1e-9,
                "{nodes} nodes, {:?}: {found} s for {expected} s",
                wait.across
            );
        }
    }
}

#[test]
fn resistors_and_capacitors_between_any_two_nodes_have_one_time_constant() {
    waits_are_those_of_one_time_constant(Shape::All, Shape::All);
}

#[test]
fn a_star_of_resistors_on_a_mesh_of_capacitors_has_one_time_constant() {
    waits_are_those_of_one_time_constant(Shape::All, Shape::Star("S"));
}

#[test]
fn a_mesh_of_resistors_on_a_star_of_capacitors_has_one_time_constant() {
    waits_are_those_of_one_time_constant(Shape::Star("T"), Shape::All);
}

#[test]
fn two_stars_that_share_no_star_point_have_one_time_constant() {
    waits_are_those_of_one_time_constant(Shape::Star("T"), Shape::Star("S"));
}

#[test]
fn two_stars_that_share_their_star_point_have_one_time_constant() {
    // Each leg is one capacitor with its resistor.
    for nodes in 3..=NODES.len() {
        let plan = planned(nodes, Shape::Star("S"), Shape::Star("S"), "");
        let found = plan.waits[0].nominal.expect("it ends").si();
        let expected = OHMS * FARADS * (565.0f64 / 50.0).ln();
        assert!((found / expected - 1.0).abs() < 1e-9, "{nodes} nodes: {found} s for {expected} s");
    }
}

#[test]
fn three_equal_legs_with_tolerances_have_a_plan_as_well() {
    // The search inside the box passes points where parts are equal to any number of digits.
    for (capacitors, resistors) in [
        (Shape::All, Shape::All),
        (Shape::All, Shape::Star("S")),
        (Shape::Star("T"), Shape::All),
        (Shape::Star("S"), Shape::Star("S")),
    ] {
        let [loose, tight] = [", tolerance: 5 %", ""].map(|t| planned(3, capacitors, resistors, t));
        let [slowest, nominal] = [&loose.waits[0].slowest, &tight.waits[0].nominal].map(|t| t.expect("it ends").si());
        // All at their high ends is a corner of the box.
        assert!(slowest >= nominal * 1.05 * 1.05 * (1.0 - 1e-12), "{capacitors:?}, {resistors:?}: {slowest} s");
    }
}

#[test]
fn legs_that_are_equal_to_any_number_of_digits_have_a_plan_and_move_the_wait_by_no_more() {
    for (capacitors, resistors) in
        [(Shape::All, Shape::All), (Shape::All, Shape::Star("S")), (Shape::Star("T"), Shape::All)]
    {
        let equal = planned(4, capacitors, resistors, "").waits[0].nominal.expect("it ends").si();
        for digits in 2..=15 {
            let off = 10f64.powi(-digits);
            let plan = nearly_equal(4, capacitors, resistors, "", off);
            let found = plan.waits[0].nominal.expect("it ends").si();
            let moved = (found / equal - 1.0).abs();
            assert!(moved <= off + 1e-12, "{capacitors:?}, {resistors:?}, off by {off}: {found} s and {equal} s");
        }
    }
}
