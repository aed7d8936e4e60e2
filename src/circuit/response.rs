//! What follows from an initial state: every voltage as a sum of exponentials.

use super::grown::{Grown, grown};
use super::pull::Pull;
use super::{CircuitError, ExpSum, Modes, Network, quadrature};
use std::sync::Arc;

/// A current that is drawn: where, and how much in ampere, as coefficients of the powers of time.
#[derive(Debug, Clone)]
pub(super) struct Drawn {
    pub pull: Arc<Pull>,
    pub ampere: Vec<f64>,
}

impl Drawn {
    fn at(&self, t: f64) -> f64 {
        self.ampere.iter().rev().fold(0.0, |sum, c| sum * t + c)
    }
}

/// A network let go from an initial state.
#[derive(Debug, Clone)]
pub struct Response {
    modes: Arc<Modes>,
    /// Amplitude of every mode.
    pub(super) amplitudes: Vec<f64>,
    /// States at infinite time in volt, then the voltages of the sources.
    settled: Vec<f64>,
    /// Potentials at the start: a part that nothing ties to the reference keeps that of its anchor.
    start: Vec<f64>,
    /// Voltages of all capacitors at the start.
    voltages: Vec<f64>,
    /// Currents that sinks draw.
    drawn: Vec<Drawn>,
}

/// What one mode adds at the start; the mode without a rate stays for ever.
pub(super) struct ByMode {
    pub rate: Option<f64>,
    pub voltages: Vec<f64>,
    pub potentials: Vec<f64>,
}

impl Modes {
    /// Lets the network go with these capacitor voltages in volt (one per capacitor, in order). `potentials` are
    /// those of all nodes before: only parts that nothing ties to the reference refer to them.
    ///
    /// # Errors
    /// [`CircuitError::Contradiction`] where the voltages do not add up to zero around a loop of capacitors.
    pub fn response(self: &Arc<Self>, voltages: &[f64], potentials: &[f64]) -> Result<Response, CircuitError> {
        let network = self.network();
        if self.tree.len() < network.capacitors.len() {
            network.check_loops(voltages)?;
        }
        // Where the sources drive the states, and what is trapped of the difference to it.
        let mut settled = self.driven_states();
        let nothing_trapped = self.rates.len() == self.tree.len();
        if !nothing_trapped {
            let driven = self.all_voltages(&settled);
            let rest: Vec<f64> = voltages.iter().zip(driven).map(|(u, d)| u - d).collect();
            let trapped = network.settled(&rest);
            settled.iter_mut().zip(&self.tree).for_each(|(s, c)| *s += trapped[*c]);
        }
        let falling: Vec<f64> = self.tree.iter().zip(&settled).map(|(c, s)| voltages[*c] - s).collect();
        let amplitudes = self.weights.iter().map(|w| w.iter().zip(&falling).map(|(x, u)| x * u).sum()).collect();
        settled.extend(network.sources.iter().map(|s| s.value));
        let (voltages, start) = (voltages.to_vec(), potentials.to_vec());
        Ok(Response { modes: Arc::clone(self), amplitudes, settled, start, voltages, drawn: Vec::new() })
    }

    /// A steady state under the sources, in volt. Where they stand on the reference it is an operating point, free of
    /// subtraction; else it is put together from the modes.
    fn driven_states(&self) -> Vec<f64> {
        let network = self.network();
        let mut settled = vec![0.0; self.tree.len()];
        if network.sources.is_empty() {
            return settled;
        }
        if network.sources.iter().all(|s| s.b == network.reference) {
            let held = network.sources.iter().map(|s| (s.a, s.value)).chain([(network.reference, 0.0)]);
            let potential = network.operating_point(&held.collect::<Vec<_>>());
            let voltage = |c: &usize| potential[network.capacitors[*c].a] - potential[network.capacitors[*c].b];
            return self.tree.iter().map(voltage).collect();
        }
        for (shape, driven) in self.shapes.iter().zip(&self.driven).filter(|(_, d)| **d != 0.0) {
            settled.iter_mut().zip(shape).for_each(|(s, x)| *s += driven * x);
        }
        settled
    }

    /// Voltages of all capacitors from those of the states.
    fn all_voltages(&self, states: &[f64]) -> Vec<f64> {
        let dot = |node: usize| self.potentials[node].iter().zip(states).map(|(x, u)| x * u).sum::<f64>();
        self.network().capacitors.iter().map(|c| dot(c.a) - dot(c.b)).collect()
    }
}

impl Response {
    /// The modes that it is made of.
    pub fn modes(&self) -> &Modes {
        &self.modes
    }

    /// The network.
    pub fn network(&self) -> &Network {
        self.modes.network()
    }

    /// The same start while these currents are drawn. What follows holds for a finite time only, unless the currents
    /// are constant and [`Response::for_ever`] is asked for.
    pub(super) fn drawing(&self, drawn: Vec<Drawn>) -> Self {
        Response { drawn, ..self.clone() }
    }

    /// The network without any charge and with its sources at 0 V: what currents do to it is what is left.
    pub(super) fn uncharged(&self) -> Self {
        let zeros = |list: &[f64]| vec![0.0; list.len()];
        Response {
            modes: Arc::clone(&self.modes),
            amplitudes: zeros(&self.amplitudes),
            settled: zeros(&self.settled),
            start: zeros(&self.start),
            voltages: zeros(&self.voltages),
            drawn: Vec::new(),
        }
    }

    /// The same with the currents of the start kept for ever.
    pub(super) fn for_ever(&self) -> Self {
        let first = |d: &Drawn| Drawn { pull: Arc::clone(&d.pull), ampere: vec![d.at(0.0)] };
        Response { drawn: self.drawn.iter().map(first).collect(), ..self.clone() }
    }

    /// Voltage in volt of node `a` against node `b`.
    pub fn across(&self, a: usize, b: usize) -> ExpSum {
        let (constant, amplitudes) = self.amplitudes_across(a, b);
        let modes = &self.modes;
        let passive = ExpSum::new(constant, amplitudes.into_iter().zip(modes.rates.iter().copied()));
        if self.drawn.is_empty() {
            return passive;
        }
        let (pa, pb) = (&modes.potentials[a], &modes.potentials[b]);
        let dot = |other: &[f64]| pa.iter().zip(pb).zip(other).map(|((x, y), u)| (x - y) * u).sum::<f64>();
        let mut jump = 0.0;
        let mut grown = Vec::new();
        for Drawn { pull, ampere } in &self.drawn {
            let jumps = pull.jump[a] - pull.jump[b];
            let slope = dot(&pull.slope);
            let times = |factor: f64| ampere.iter().map(|i| factor * i).collect::<Vec<f64>>();
            let shapes = modes.shapes.iter().zip(&modes.rates).zip(&pull.force);
            grown.extend(shapes.map(|((s, rate), force)| Grown { rate: *rate, factors: times(dot(s) * force) }));
            jump += jumps * ampere[0];
            // t^j is what grows from a force j t^(j-1).
            let mut lasting = times(slope);
            for (order, ampere) in ampere.iter().enumerate().skip(1) {
                lasting[order - 1] += jumps * ampere * order as f64;
            }
            grown.push(Grown { rate: 0.0, factors: lasting });
        }
        passive.plus(&ExpSum::new(jump, [])).with_grown(grown)
    }

    /// The constant and the amplitude of every mode of the voltage of node `a` against node `b`, in volt.
    pub(super) fn amplitudes_across(&self, a: usize, b: usize) -> (f64, Vec<f64>) {
        let modes = &self.modes;
        let (pa, pb) = (&modes.potentials[a], &modes.potentials[b]);
        let difference: Vec<f64> = pa.iter().zip(pb).map(|(x, y)| x - y).collect();
        let dot = |other: &[f64]| difference.iter().zip(other).map(|(x, y)| x * y).sum::<f64>();
        // Nodes that resistors join end at one potential: exactly, not to rounding.
        let no_source = self.network().sources.is_empty();
        let constant = if no_source && modes.resistive[a] == modes.resistive[b] {
            0.0
        } else {
            let anchors = self.start[modes.anchor[a]] - self.start[modes.anchor[b]];
            dot(&self.settled) + if modes.anchor[a] == modes.anchor[b] { 0.0 } else { anchors }
        };
        (constant, modes.shapes.iter().zip(&self.amplitudes).map(|(shape, amplitude)| dot(shape) * amplitude).collect())
    }

    /// The response taken apart: what each mode adds to the voltages of all capacitors and the potentials of all
    /// nodes at the start, and what stays for ever. The network has no sources.
    pub(super) fn parts_by_mode(&self) -> Vec<ByMode> {
        let network = self.network();
        let dot = |node: usize, states: &[f64]| -> f64 {
            self.modes.potentials[node].iter().zip(states).map(|(x, u)| x * u).sum()
        };
        let part = |states: &[f64], rate: Option<f64>| {
            let voltages = network.capacitors.iter().map(|c| dot(c.a, states) - dot(c.b, states)).collect();
            let kept = |node: usize| if rate.is_none() { self.start[self.modes.anchor[node]] } else { 0.0 };
            let potentials = (0..network.nodes).map(|node| kept(node) + dot(node, states)).collect();
            ByMode { rate, voltages, potentials }
        };
        let modes = self.modes.shapes.iter().zip(&self.modes.rates).zip(&self.amplitudes);
        let decaying = modes.map(|((shape, rate), amplitude)| {
            let states: Vec<f64> = shape.iter().map(|x| x * amplitude).collect();
            part(&states, Some(*rate))
        });
        std::iter::once(part(&self.settled, None)).chain(decaying).collect()
    }

    /// Energy in joule in all capacitors as a function of time, those of `parts` only where they are given: labels
    /// of [`Network::connected_parts`].
    pub fn stored_energy(&self, parts: Option<&[usize]>) -> ExpSum {
        let network = self.network();
        let label = network.connected_parts();
        let chosen = network.capacitors.iter().filter(|c| parts.is_none_or(|p| p.contains(&label[c.a])));
        chosen.fold(ExpSum::default(), |sum, c| sum.plus(&self.across(c.a, c.b).squared().times(0.5 * c.value)))
    }

    /// Energy in joule in all capacitors at the start.
    pub fn initial_energy(&self) -> f64 {
        self.network().stored_energy(&self.voltages)
    }

    /// Voltages in volt of all capacitors after `t` seconds.
    pub fn voltages_at(&self, t: f64) -> Vec<f64> {
        if t <= 0.0 {
            return self.voltages.clone();
        }
        let states = self.states_at(t);
        let dot = |node: usize| self.modes.potentials[node].iter().zip(&states).map(|(x, u)| x * u).sum::<f64>();
        let network = self.network();
        let mut voltages: Vec<f64> = network.capacitors.iter().map(|c| dot(c.a) - dot(c.b)).collect();
        self.modes.tree.iter().zip(&states).for_each(|(c, u)| voltages[*c] = *u);
        voltages
    }

    /// States after `t` seconds, then the voltages of the sources.
    fn states_at(&self, t: f64) -> Vec<f64> {
        let mut states = self.settled.clone();
        for ((shape, rate), amplitude) in self.modes.shapes.iter().zip(&self.modes.rates).zip(&self.amplitudes) {
            let left = amplitude * (-rate * t).exp();
            states.iter_mut().zip(shape).for_each(|(s, x)| *s += left * x);
        }
        for Drawn { pull, ampere } in &self.drawn {
            let brought =
                |rate: f64| -> f64 { ampere.iter().zip(grown(ampere.len(), rate, t)).map(|(c, x)| c * x).sum() };
            for ((shape, rate), force) in self.modes.shapes.iter().zip(&self.modes.rates).zip(&pull.force) {
                let left = force * brought(*rate);
                states.iter_mut().zip(shape).for_each(|(s, x)| *s += left * x);
            }
            let charge = brought(0.0);
            states.iter_mut().zip(&pull.slope).for_each(|(s, x)| *s += charge * x);
        }
        states
    }

    /// Potentials in volt of all nodes after `t` seconds. Only parts that nothing ties to the reference need them in
    /// what follows; they keep the potential of their anchor.
    pub fn potentials_at(&self, t: f64) -> Vec<f64> {
        let states = self.states_at(t);
        let dot = |node: usize| self.modes.potentials[node].iter().zip(&states).map(|(x, u)| x * u).sum::<f64>();
        let jump = |node: usize| self.drawn.iter().map(|d| d.pull.jump[node] * d.at(t)).sum::<f64>();
        (0..self.network().nodes).map(|node| self.start[self.modes.anchor[node]] + dot(node) + jump(node)).collect()
    }

    /// Energy in joule that the sinks take within `t` seconds.
    fn drawn_energy(&self, t: f64) -> f64 {
        let taken = |d: &Drawn| {
            let volts = self.across(d.pull.a, d.pull.b);
            quadrature::integral(|x| volts.value(x) * d.at(x), volts.fastest(), t)
        };
        self.drawn.iter().map(taken).sum()
    }

    /// Charge in coulomb that a source gives within `t` seconds (its current flows out of its node `a`), in all
    /// resistors at that node.
    fn source_energy(&self, source: usize, t: f64) -> f64 {
        let source = &self.network().sources[source];
        let out = |node: usize| if node == source.a { 1.0 } else { -1.0 };
        let at = self.network().resistors.iter().filter(|r| (r.a == source.a) != (r.b == source.a));
        at.map(|r| out(r.a) * self.across(r.a, r.b).integral(t) / r.value).sum::<f64>() * source.value
    }

    /// Checks over `t` seconds (infinite for ever; finite where there are sources or sinks) that what was stored at
    /// the start and what the sources gave is what is stored at the end and what the resistors and sinks took, to
    /// 1e-9 of the former.
    ///
    /// # Errors
    /// [`CircuitError::Unbalanced`] where it is not.
    pub fn check_balance(&self, t: f64) -> Result<(), CircuitError> {
        let network = self.network();
        let taken: f64 = network
            .resistors
            .iter()
            .filter(|r| r.a != r.b)
            .map(|r| self.across(r.a, r.b).integral_of_square(t) / r.value)
            .sum();
        let taken = taken + self.drawn_energy(t);
        let given: f64 = (0..network.sources.len()).map(|s| self.source_energy(s, t)).sum();
        let end: Vec<f64> = if t.is_infinite() {
            network.capacitors.iter().map(|c| self.across(c.a, c.b).constant()).collect()
        } else {
            self.voltages_at(t)
        };
        let start = self.initial_energy();
        let (before, after) = (start + given, network.stored_energy(&end) + taken);
        // Squares of voltages under 1e-154 V lose their digits to gradual underflow: what is left of a bank after hundreds
        // of time constants is balanced to no digit, and to far less than any energy that there is.
        const UNDERFLOW: f64 = f64::MIN_POSITIVE / f64::EPSILON;
        let holds = (before - after).abs() <= 1e-9 * start.max(given.abs()) + UNDERFLOW;
        if holds { Ok(()) } else { Err(CircuitError::Unbalanced { before, after }) }
    }
}
