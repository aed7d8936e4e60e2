//! How far a part's value can lie from the marked one: the tolerance it was bought with, age, temperature.

use crate::bank::Bank;
use crate::bank::description::{Capacitor, Rating, Resistor};
use crate::circuit::{Edge, Network};
use crate::quantity::{CELSIUS_ZERO_K, Quantity, Ratio, TemperatureCoefficient, Tolerance};

/// A marked value holds at 20 °C or at 25 °C, by the maker (common practice): the one that is farther off counts.
const REFERENCES_C: [f64; 2] = [20.0, 25.0];

/// No value falls below this share of itself by temperature: a coefficient that says so is no longer a straight line.
const LEAST_LEFT: f64 = 0.01;

/// What can move a part's value, each on its own.
#[derive(Debug, Clone, Copy, PartialEq)]
pub(crate) struct Spread {
    pub purchase: Tolerance,
    pub ageing: Tolerance,
    /// Per kelvin, as it was given.
    pub tempco: f64,
    /// Farthest from the temperature at which the marked value holds, in K.
    pub kelvin: f64,
}

impl Spread {
    /// What temperature can move, as a share either way.
    pub fn by_temperature(&self) -> f64 {
        self.tempco.abs() * self.kelvin
    }

    /// All of it together: the extremes multiply. `None` where nothing moves the value.
    pub fn total(&self) -> Option<Tolerance> {
        let share = self.by_temperature();
        let low = self.purchase.lowest_factor() * self.ageing.lowest_factor() * (1.0 - share).max(LEAST_LEFT);
        let high = self.purchase.highest_factor() * self.ageing.highest_factor() * (1.0 + share);
        let total = if self.moves() {
            Tolerance::new(Ratio::from_si(1.0 - low), Ratio::from_si(high - 1.0)).ok()
        } else {
            Some(self.purchase)
        };
        total.filter(|t| !t.is_none())
    }

    /// True where age or temperature was given.
    pub fn moves(&self) -> bool {
        !self.ageing.is_none() || self.tempco != 0.0
    }
}

/// Spreads of all parts of a bank.
#[derive(Debug, Clone, Default)]
pub(crate) struct Spreads {
    ambient_c: f64,
    /// (id of a resistor, power of one element before isolation in W).
    standing: Vec<(String, f64)>,
}

impl Spreads {
    pub fn of(bank: &Bank) -> Self {
        let asked = bank.description().resistors.iter().any(|r| r.tempco.is_some());
        let standing = if asked { standing(bank) } else { Vec::new() };
        Spreads { ambient_c: bank.ambient().si() - CELSIUS_ZERO_K, standing }
    }

    /// A capacitor lies anywhere between the reference and the ambient.
    pub fn capacitor(&self, c: &Capacitor) -> Spread {
        self.spread(c.tolerance, c.ageing, c.tempco, self.ambient_c)
    }

    /// An element of a resistor lies anywhere between the reference and its body at the highest voltage, before
    /// isolation; one that a step or a contact connects, up to where its rating ends. Without thermal data, up to the
    /// ambient.
    pub fn resistor(&self, r: &Resistor) -> Spread {
        let hottest = if r.stands_before_isolation() {
            let watt = self.standing.iter().find(|(id, _)| *id == r.id).map_or(0.0, |(_, watt)| *watt);
            self.ambient_c + kelvin_per_watt(&r.rating).unwrap_or(0.0) * watt
        } else {
            r.rating.zero_at.map_or(self.ambient_c, |t| t.si() - CELSIUS_ZERO_K)
        };
        self.spread(r.tolerance, r.ageing, r.tempco, hottest)
    }

    fn spread(
        &self,
        purchase: Option<Tolerance>,
        ageing: Option<Tolerance>,
        tempco: Option<TemperatureCoefficient>,
        hottest_c: f64,
    ) -> Spread {
        let ends = [self.ambient_c, hottest_c];
        let apart = ends.iter().flat_map(|t| REFERENCES_C.map(|r| (t - r).abs()));
        Spread {
            purchase: purchase.unwrap_or(Tolerance::NONE),
            ageing: ageing.unwrap_or(Tolerance::NONE),
            tempco: tempco.map_or(0.0, Quantity::si),
            kelvin: apart.fold(0.0, f64::max),
        }
    }
}

/// R_th = (zero_at - full_to) / power, of one element.
fn kelvin_per_watt(rating: &Rating) -> Option<f64> {
    let kelvin = rating.zero_at?.si() - rating.full_to?.si();
    let watt = rating.power?.si();
    (kelvin > 0.0 && watt > 0.0).then(|| kelvin / watt)
}

/// Power of one element of every resistor before isolation at the highest voltage, every value as marked.
fn standing(bank: &Bank) -> Vec<(String, f64)> {
    let description = bank.description();
    let [top, reference] = description.terminals.as_slice() else { return Vec::new() };
    let there = || description.resistors.iter().filter(|r| r.stands_before_isolation() && r.phases.is_none());
    let nodes = there().flat_map(|r| &r.across).chain(description.capacitors.iter().flat_map(|c| &c.across));
    let mut names: Vec<&str> = vec![top, reference];
    nodes.for_each(|n| {
        if !names.contains(&n.as_str()) {
            names.push(n);
        }
    });
    let at = |name: &str| names.iter().position(|n| *n == name).unwrap_or(0);
    let whole = |r: &Resistor| r.value.si() * f64::from(r.series) / f64::from(r.parallel);
    let edge = |across: &[String; 2], value: f64| Edge { a: at(&across[0]), b: at(&across[1]), value };
    let network = Network {
        nodes: names.len(),
        reference: 1,
        resistors: there().map(|r| edge(&r.across, whole(r))).collect(),
        capacitors: description
            .capacitors
            .iter()
            .map(|c| edge(&c.across, c.value.si() * f64::from(c.parallel) / f64::from(c.series)))
            .collect(),
        sources: Vec::new(),
    };
    let potentials = network.operating_point(&[(0, description.charged_to.highest.si()), (1, 0.0)]);
    let power = |r: &Resistor| {
        let volts = (potentials[at(&r.across[0])] - potentials[at(&r.across[1])]) / f64::from(r.series);
        (r.id.clone(), volts * volts / r.value.si())
    };
    there().map(power).collect()
}
