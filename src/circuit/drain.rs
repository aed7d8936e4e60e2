//! A network let go while sinks draw from it.
//!
//! A sink takes its current from the node that is the higher one when it begins, for as long as the voltage across it
//! is above the one at which it stops; once stopped it does not start again. A constant current keeps the network
//! linear between two stops, so that the phases are exact; a constant power is taken in steps ([`super::power`]).
//!
//! Where a contact closes meanwhile the network itself is another one from then on ([`Drain::through`]): the voltages
//! of its capacitors go on from where they are.

use super::response::Drawn;
use super::{CircuitError, Course, EnergyCourse, ExpSum, Modes, Network, Response, ShortCharge, pull::Pull};
use std::sync::Arc;

/// A path that is no resistor.
#[derive(Debug, Clone, Copy, PartialEq)]
pub struct Sink {
    /// First node.
    pub a: usize,
    /// Second node.
    pub b: usize,
    /// What it draws.
    pub draw: Draw,
    /// The voltage in volt at which it stops.
    pub stops_below: f64,
}

/// What a sink draws.
#[derive(Debug, Clone, Copy, PartialEq)]
pub enum Draw {
    /// A current in ampere, whatever the voltage.
    Current(f64),
    /// A power in watt, whatever the voltage.
    Power(f64),
}

/// A time in which the network is one and the same and the same sinks draw.
#[derive(Debug, Clone)]
struct Phase {
    /// The number of the network: see [`Drain::through`].
    network: usize,
    /// In second; infinite for the last one.
    length: f64,
    response: Response,
    /// Which sinks still draw.
    drawing: Vec<bool>,
}

/// A network let go from an initial state, through all phases.
#[derive(Debug, Clone)]
pub struct Drain {
    /// All but the last are finite.
    phases: Vec<Phase>,
}

/// A sink that draws, at the beginning of a phase.
pub(super) struct Active {
    pub index: usize,
    pub sink: Sink,
    pub pull: Arc<Pull>,
    /// 1 where node `a` is the higher one, else -1.
    pub sign: f64,
}

/// A phase is cut here; a sink with a positive stop in a network without sources has long stopped by then.
const MOST_PHASES: usize = 100_000;

impl Modes {
    /// Lets the network go with these capacitor voltages and potentials in volt ([`Modes::response`]) while those of
    /// the `sinks` draw that are still `drawing`.
    ///
    /// # Errors
    /// [`CircuitError::Contradiction`] as [`Modes::response`]; [`CircuitError::SearchNotClosed`] where the moment of a
    /// stop is not found.
    pub fn drain(
        self: &Arc<Self>,
        voltages: &[f64],
        potentials: &[f64],
        sinks: &[Sink],
        drawing: &[bool],
    ) -> Result<Drain, CircuitError> {
        let mut drain = Drain { phases: Vec::new() };
        let (mut voltages, mut potentials) = (voltages.to_vec(), potentials.to_vec());
        // Nothing flows where no parts close the way.
        let label = self.network().connected_parts();
        let closed = |s: &Sink| s.a != s.b && label[s.a] == label[s.b];
        let mut drawing: Vec<bool> = sinks.iter().zip(drawing).map(|(s, on)| *on && closed(s)).collect();
        let pulls: Vec<Option<Arc<Pull>>> =
            sinks.iter().zip(&drawing).map(|(s, on)| on.then(|| Arc::new(self.pull(s.a, s.b)))).collect();
        while drain.phases.len() < MOST_PHASES {
            let rest = self.response(&voltages, &potentials)?;
            let active: Vec<Active> = pulls
                .iter()
                .enumerate()
                .filter(|(index, _)| drawing[*index])
                .filter_map(|(index, pull)| {
                    let (sink, pull) = (sinks[index], Arc::clone(pull.as_ref()?));
                    let sign = rest.across(sink.a, sink.b).value(0.0).signum();
                    Some(Active { index, sink, pull, sign })
                })
                .collect();
            if active.is_empty() {
                drain.phases.push(Phase { network: 0, length: f64::INFINITY, response: rest, drawing });
                return Ok(drain);
            }
            match super::power::next(&rest, &active)? {
                // None of these draws at all.
                Next::Stopped(stopped) => stopped.into_iter().for_each(|index| drawing[index] = false),
                Next::Lasts(response) => {
                    drain.phases.push(Phase { network: 0, length: f64::INFINITY, response, drawing });
                    return Ok(drain);
                }
                Next::Until { length, response, stopped } => {
                    voltages = response.voltages_at(length);
                    potentials = response.potentials_at(length);
                    drain.phases.push(Phase { network: 0, length, response, drawing: drawing.clone() });
                    stopped.into_iter().for_each(|index| drawing[index] = false);
                }
            }
        }
        Err(CircuitError::SearchNotClosed)
    }
}

/// What comes next of a network with sinks that draw.
pub(super) enum Next {
    /// These sinks stop at once.
    Stopped(Vec<usize>),
    /// All go on for ever: a source feeds them.
    Lasts(Response),
    /// A phase of `length` seconds, at whose end these sinks stop.
    Until { length: f64, response: Response, stopped: Vec<usize> },
}

impl Active {
    /// A current in this sink, as coefficients of the powers of time.
    pub fn drawn(&self, ampere: impl Iterator<Item = f64>) -> Drawn {
        Drawn { pull: Arc::clone(&self.pull), ampere: ampere.map(|i| i * self.sign).collect() }
    }
}

impl Drain {
    /// Lets one network after the other go, each with its length in second; the last goes on for ever, whatever its
    /// length. All have the same nodes and the same capacitors in one order. The rest is as for [`Modes::drain`].
    ///
    /// # Errors
    /// As [`Modes::drain`].
    pub fn through(
        networks: &[(f64, Arc<Modes>)],
        voltages: &[f64],
        potentials: &[f64],
        sinks: &[Sink],
        drawing: &[bool],
    ) -> Result<Drain, CircuitError> {
        let Some(((_, last), before)) = networks.split_last() else { return Err(CircuitError::SearchNotClosed) };
        let mut whole = Drain { phases: Vec::new() };
        let (mut voltages, mut potentials) = (voltages.to_vec(), potentials.to_vec());
        let mut drawing = drawing.to_vec();
        let mut add = |number: usize, part: Drain| {
            whole.phases.extend(part.phases.into_iter().map(|phase| Phase { network: number, ..phase }));
        };
        for (number, (length, modes)) in before.iter().enumerate() {
            let part = modes.drain(&voltages, &potentials, sinks, &drawing)?;
            voltages = part.voltages_at(*length);
            potentials = part.potentials_at(*length);
            // A sink that found no closed way draws nothing so far; a contact may close one for it.
            let (stopped, going) = (part.drawing_at(*length), part.phases[0].response.network().connected_parts());
            let waiting = |(s, on): (&Sink, &bool)| *on && going[s.a] != going[s.b];
            let waiting: Vec<bool> = sinks.iter().zip(&drawing).map(waiting).collect();
            drawing = stopped.iter().zip(waiting).map(|(on, waits)| *on || waits).collect();
            add(number, part.until(*length));
        }
        add(before.len(), last.drain(&voltages, &potentials, sinks, &drawing)?);
        Ok(whole)
    }

    /// What happens up to `at` seconds.
    fn until(self, at: f64) -> Drain {
        let mut left = at;
        let mut phases = Vec::with_capacity(self.phases.len());
        for mut phase in self.phases {
            if phase.length.is_infinite() {
                // What lasts for ever goes on with the currents of its start.
                phase.response = phase.response.for_ever();
            }
            phase.length = phase.length.min(left);
            left -= phase.length;
            phases.push(phase);
            if left <= 0.0 {
                break;
            }
        }
        Drain { phases }
    }

    /// The network; where it changes, the last one.
    pub fn network(&self) -> &Network {
        self.modes().network()
    }

    /// The modes of the network; where it changes, those of the last one.
    pub fn modes(&self) -> &Modes {
        self.last().response.modes()
    }

    /// The response itself, where no sink draws at any time and the network never changes.
    pub fn undrawn(&self) -> Option<&Response> {
        match self.phases.as_slice() {
            [only] if !only.drawing.contains(&true) => Some(&only.response),
            _ => None,
        }
    }

    fn last(&self) -> &Phase {
        &self.phases[self.phases.len() - 1]
    }

    fn finite(&self) -> &[Phase] {
        &self.phases[..self.phases.len() - 1]
    }

    /// Voltage in volt of node `a` against node `b`.
    pub fn across(&self, a: usize, b: usize) -> Course {
        self.across_from(0, a, b)
    }

    /// The same, but 0 V before the network of this number begins: the voltage on a part that only comes with it.
    pub fn across_from(&self, network: usize, a: usize, b: usize) -> Course {
        let piece = |p: &Phase| if p.network < network { ExpSum::default() } else { p.response.across(a, b) };
        let pieces = self.finite().iter().map(|p| (p.length, piece(p))).collect();
        Course::new(pieces, self.last_across(a, b))
    }

    fn last_across(&self, a: usize, b: usize) -> ExpSum {
        self.last().response.for_ever().across(a, b).settled()
    }

    /// Charge in coulomb that a short between two nodes would pass, by the moment at which it closes, with the network
    /// of that moment kept: a contact that closes later takes no part in it.
    pub fn short_charge(&self, a: usize, b: usize) -> Course {
        let mut known: Option<(usize, ShortCharge)> = None;
        let mut sum = |phase: &Phase, across: &dyn Fn(usize, usize) -> ExpSum| {
            let network = phase.response.network();
            let short = match known.take() {
                Some((number, short)) if number == phase.network => short,
                _ => ShortCharge::new(network, a, b),
            };
            let parts = network.capacitors.iter().zip(short.weights());
            let sum = parts.map(|(c, w)| across(c.a, c.b).times(*w)).reduce(|sum, part| sum.plus(&part));
            known = Some((phase.network, short));
            sum.unwrap_or_default()
        };
        let finite = self.finite().iter();
        let pieces = finite.map(|p| (p.length, sum(p, &|a, b| p.response.across(a, b)))).collect();
        let last = sum(self.last(), &|a, b| self.last_across(a, b));
        Course::new(pieces, last)
    }

    /// The phase at `t` seconds, and the time into it.
    fn phase_at(&self, mut t: f64) -> (&Phase, f64) {
        for phase in self.finite() {
            if t < phase.length {
                return (phase, t);
            }
            t -= phase.length;
        }
        (self.last(), t)
    }

    /// Voltages in volt of all capacitors after `t` seconds.
    pub fn voltages_at(&self, t: f64) -> Vec<f64> {
        let (phase, into) = self.phase_at(t);
        phase.response.voltages_at(into)
    }

    /// Potentials in volt of all nodes after `t` seconds; see [`Response::potentials_at`].
    pub fn potentials_at(&self, t: f64) -> Vec<f64> {
        let (phase, into) = self.phase_at(t);
        phase.response.potentials_at(into)
    }

    /// Which sinks still draw after `t` seconds.
    pub fn drawing_at(&self, t: f64) -> &[bool] {
        &self.phase_at(t).0.drawing
    }

    /// Energy in joule in all capacitors at the start.
    pub fn initial_energy(&self) -> f64 {
        self.phases[0].response.initial_energy()
    }

    /// Energy in all capacitors over time; with a pair, in those that are connected to it through any parts at the
    /// moment in question.
    pub fn stored_energy(&self, pair: Option<(usize, usize)>) -> EnergyCourse {
        let parts_of = |network: &Network, label: &[usize]| -> Vec<bool> {
            let counts = |node: usize| pair.is_none_or(|(a, b)| label[node] == label[a] || label[node] == label[b]);
            network.capacitors.iter().map(|c| counts(c.a)).collect()
        };
        let phase = |phase: &Phase| {
            let network = phase.response.network();
            let counted = parts_of(network, &network.connected_parts());
            let chosen = network.capacitors.iter().zip(counted).filter(|(_, counts)| *counts).map(|(c, _)| c);
            (phase.length, chosen.map(|c| (0.5 * c.value, phase.response.across(c.a, c.b))).collect())
        };
        let label = self.network().connected_parts();
        let parts = pair.map(|(a, b)| [label[a], label[b]]);
        let last = self.last().response.stored_energy(parts.as_ref().map(|p| p.as_slice()));
        EnergyCourse { phases: self.finite().iter().map(phase).collect(), last }
    }

    /// Checks the energy balance of every phase up to `t` seconds; see [`Response::check_balance`].
    ///
    /// # Errors
    /// [`CircuitError::Unbalanced`] where it does not hold.
    pub fn check_balance(&self, mut t: f64) -> Result<(), CircuitError> {
        for phase in &self.phases {
            phase.response.check_balance(t.min(phase.length))?;
            if t <= phase.length {
                break;
            }
            t -= phase.length;
        }
        Ok(())
    }
}
