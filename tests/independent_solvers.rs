//! The engine against solvers that know nothing of it: `nalgebra`'s matrix exponential and the Runge-Kutta method
//! of `ode_solvers` (Dormand and Prince, order 5), both on node potentials, where the engine works on capacitor
//! voltages and singular values.

use ebbvolt::circuit::{Edge, ExpSum, LastExit, Modes, Network};
use nalgebra::{DMatrix, DVector, SymmetricEigen};
use ode_solvers::{DVector as State, Dopri5, System};
use proptest::prelude::*;
use std::sync::Arc;

/// Node potentials obey `C v' = -G v` with a singular C where nodes have no capacitor or groups float. With N a
/// basis of the null space of C and R of its range, `v = R y + N z`, the rows of N are algebraic.
struct Descriptor {
    range: DMatrix<f64>,
    /// z over y.
    algebraic: DMatrix<f64>,
    null: DMatrix<f64>,
    /// y' = rate y.
    rate: DMatrix<f64>,
    capacitance: DMatrix<f64>,
}

impl Descriptor {
    fn new(network: &Network) -> Self {
        // Node 0 is the reference; the others are rows 0.. of the matrices.
        let n = network.nodes - 1;
        let (mut c, mut g) = (DMatrix::zeros(n, n), DMatrix::zeros(n, n));
        let stamp = |m: &mut DMatrix<f64>, e: &Edge, value: f64| {
            for (i, j, sign) in [(e.a, e.a, 1.0), (e.b, e.b, 1.0), (e.a, e.b, -1.0), (e.b, e.a, -1.0)] {
                if i > 0 && j > 0 {
                    m[(i - 1, j - 1)] += sign * value;
                }
            }
        };
        network.capacitors.iter().for_each(|e| stamp(&mut c, e, e.value));
        network.resistors.iter().for_each(|e| stamp(&mut g, e, 1.0 / e.value));
        let eigen = SymmetricEigen::new(c.clone());
        let largest = eigen.eigenvalues.amax();
        let (range, null): (Vec<usize>, Vec<usize>) = (0..n).partition(|i| eigen.eigenvalues[*i] > 1e-9 * largest);
        let columns = |list: &[usize]| DMatrix::from_fn(n, list.len(), |i, j| eigen.eigenvectors[(i, list[j])]);
        let (range, null) = (columns(&range), columns(&null));
        let algebraic = if null.ncols() == 0 {
            DMatrix::zeros(0, range.ncols())
        } else {
            -(null.transpose() * &g * &null).try_inverse().expect("connected") * null.transpose() * &g * &range
        };
        let inner = (range.transpose() * &c * &range).try_inverse().expect("positive definite");
        let rate = -inner * range.transpose() * &g * (&range + &null * &algebraic);
        Descriptor { range, algebraic, null, rate, capacitance: c }
    }

    /// States whose capacitor voltages are those of the node potentials `v`.
    fn states(&self, v: &DVector<f64>) -> DVector<f64> {
        let inner =
            (self.range.transpose() * &self.capacitance * &self.range).try_inverse().expect("positive definite");
        inner * self.range.transpose() * &self.capacitance * v
    }

    fn potentials(&self, y: &DVector<f64>) -> DVector<f64> {
        (&self.range + &self.null * &self.algebraic) * y
    }
}

fn engine(network: &Network, potentials: &[f64]) -> Vec<ExpSum> {
    let voltages: Vec<f64> = network.capacitors.iter().map(|c| potentials[c.a] - potentials[c.b]).collect();
    let modes = Arc::new(Modes::new(network.clone()).expect("rates are found"));
    let response = modes.response(&voltages, potentials).expect("no contradiction");
    response.check_balance(f64::INFINITY).expect("energy is accounted for");
    (1..network.nodes).map(|node| response.across(node, 0)).collect()
}

/// Connected networks of 2 to 9 nodes with the reference, at least one capacitor, and starting potentials.
fn networks() -> impl Strategy<Value = (Network, Vec<f64>)> {
    (2usize..=9).prop_flat_map(|nodes| {
        let part = |nodes: usize| (0..nodes, 0..nodes, any::<bool>(), -1.5f64..1.5);
        let tree = prop::collection::vec((any::<prop::sample::Index>(), any::<bool>(), -1.5f64..1.5), nodes - 1);
        let extra = prop::collection::vec(part(nodes), 1..2 * nodes);
        let start = prop::collection::vec(-100f64..100.0, nodes);
        (tree, extra, start).prop_map(move |(tree, extra, mut start)| {
            let mut network = Network { nodes, reference: 0, ..Network::default() };
            let mut add = |a: usize, b: usize, capacitor: bool, decade: f64| {
                let value = 10f64.powf(decade);
                if capacitor {
                    network.capacitors.push(Edge { a, b, value });
                } else {
                    network.resistors.push(Edge { a, b, value });
                }
            };
            for (node, (to, capacitor, decade)) in tree.iter().enumerate() {
                add(node + 1, to.index(node + 1), *capacitor, *decade);
            }
            extra.iter().filter(|(a, b, ..)| a != b).for_each(|(a, b, c, d)| add(*a, *b, *c, *d));
            if network.capacitors.is_empty() {
                network.capacitors.push(Edge { a: 1, b: 0, value: 1.0 });
            }
            start[0] = 0.0;
            (network, start)
        })
    })
}

proptest! {
    #![proptest_config(ProptestConfig { cases: 400, ..ProptestConfig::default() })]

    #[test]
    fn random_networks_follow_the_matrix_exponential((network, start) in networks()) {
        let reference = Descriptor::new(&network);
        let y0 = reference.states(&DVector::from_vec(start[1..].to_vec()));
        let voltages = engine(&network, &start);
        for t in [0.0, 0.03, 0.3, 1.0, 4.0, 30.0, 1000.0] {
            let y = (&reference.rate * t).exp() * &y0;
            let expected = reference.potentials(&y);
            for (voltage, expected) in voltages.iter().zip(expected.iter()) {
                prop_assert!((voltage.value(t) - expected).abs() <= 1e-7 * 100.0, "{} {} at {t}", voltage.value(t), expected);
            }
        }
    }

    #[test]
    fn after_the_last_exit_no_sample_is_outside_and_just_before_it_one_is((network, start) in networks(), level in 0.5f64..50.0) {
        for voltage in engine(&network, &start) {
            match voltage.last_outside(level, 0.0).expect("the search closes") {
                LastExit::Never => prop_assert!(voltage.constant().abs() > level * (1.0 - 1e-9)),
                LastExit::At(t) => {
                    for k in 0..200 {
                        let later = t * (1.0 + 1e-9) + 1e-3 * f64::from(k) * (1.0 + t);
                        prop_assert!(voltage.value(later).abs() <= level * (1.0 + 1e-9), "{later} after {t}");
                    }
                    if t > 0.0 {
                        prop_assert!(voltage.value(t * (1.0 - 1e-6)).abs() >= level * (1.0 - 1e-6), "before {t}");
                    }
                }
            }
        }
    }

    #[test]
    fn the_greatest_magnitude_is_reached_and_never_passed((network, start) in networks()) {
        for voltage in engine(&network, &start) {
            let (greatest, at) = voltage.greatest_magnitude().expect("the search closes");
            let there = if at.is_finite() { voltage.value(at).abs() } else { voltage.constant().abs() };
            prop_assert!((there - greatest).abs() <= 1e-12 * greatest);
            for k in 0..300 {
                let t = 1e-3 * 1.08f64.powi(k);
                prop_assert!(voltage.value(t).abs() <= greatest * (1.0 + 1e-11));
            }
        }
    }
}

struct Ode(DMatrix<f64>);

impl System<f64, State<f64>> for Ode {
    fn system(&self, _: f64, y: &State<f64>, dy: &mut State<f64>) {
        for i in 0..y.len() {
            dy[i] = (0..y.len()).map(|j| self.0[(i, j)] * y[j]).sum();
        }
    }
}

#[test]
fn a_ladder_with_a_floating_stage_follows_the_runge_kutta_method() {
    let edge = |a, b, value| Edge { a, b, value };
    // Node 3 has no capacitor, nodes 4 and 5 are a floating capacitor.
    let network = Network {
        nodes: 6,
        reference: 0,
        resistors: vec![
            edge(1, 2, 2.0),
            edge(2, 3, 1.0),
            edge(3, 0, 5.0),
            edge(3, 4, 3.0),
            edge(5, 0, 4.0),
            edge(1, 0, 9.0),
        ],
        capacitors: vec![edge(1, 0, 1.0), edge(2, 0, 0.5), edge(4, 5, 0.7), edge(1, 2, 0.2)],
        sources: vec![],
    };
    let start = [0.0, 100.0, 40.0, 0.0, 90.0, 10.0];
    let reference = Descriptor::new(&network);
    let y0 = reference.states(&DVector::from_vec(start[1..].to_vec()));
    let voltages = engine(&network, &start);
    let end = 12.0;
    let mut stepper =
        Dopri5::new(Ode(reference.rate.clone()), 0.0, end, 0.5, State::from_vec(y0.as_slice().to_vec()), 1e-10, 1e-10);
    stepper.integrate().expect("integrates");
    for (t, y) in stepper.x_out().iter().zip(stepper.y_out()) {
        let expected = reference.potentials(&DVector::from_vec(y.as_slice().to_vec()));
        for (voltage, expected) in voltages.iter().zip(expected.iter()) {
            approx::assert_abs_diff_eq!(voltage.value(*t), *expected, epsilon = 1e-7 * 100.0);
        }
    }
    assert!(stepper.x_out().len() > 10);
}
