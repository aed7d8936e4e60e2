//! Three-phase parts as the plain parts that they stand for.

use super::Bank;
use super::description::{Capacitor, Description, Resistor, Source, Step};
use super::parts::legs;
use std::collections::HashMap;

impl Bank {
    /// The same bank with plain parts only: every three-phase part is replaced by its legs (see [`Bank::legs`]), each with
    /// the value, the tolerance and the ratings of one leg, and reactive power by its capacitance. The legs of one part
    /// have tolerances of their own. Steps connect and disconnect all legs of what they did before.
    ///
    /// How it was charged stays: three phases and their neutral. The voltages at isolation follow from the order in which
    /// the poles of the switch open, and are no property of a part.
    pub fn expanded(&self) -> Bank {
        let d = self.description();
        let mut expanded = Description {
            capacitors: d.capacitors.iter().flat_map(|c| capacitors(d, c)).collect(),
            resistors: d.resistors.iter().flat_map(|r| resistors(d, r)).collect(),
            ..d.clone()
        };
        let of_part: HashMap<&str, Vec<String>> = d
            .resistors
            .iter()
            .filter(|r| r.phases.is_some())
            .map(|r| (r.id.as_str(), resistors(d, r).into_iter().map(|leg| leg.id).collect()))
            .collect();
        for step in &mut expanded.procedure {
            let Step { connect, disconnect, .. } = step;
            for list in [connect, disconnect] {
                *list = list
                    .iter()
                    .flat_map(|id| of_part.get(id.as_str()).cloned().unwrap_or_else(|| vec![id.clone()]))
                    .collect();
            }
        }
        Bank::checked(expanded)
    }

    /// The rms voltage of the alternating supply that the bank was charged from (line to line, of three phases).
    pub(crate) fn supply_voltage(&self) -> Option<crate::quantity::Voltage> {
        match self.description().charged_to.source {
            Source::ThreePhase { rms, .. } | Source::Crest { rms } => Some(rms),
            Source::Direct => None,
        }
    }
}

fn capacitors(d: &Description, c: &Capacitor) -> Vec<Capacitor> {
    let plain = legs(d, &c.id, &c.across, c.phases).into_iter();
    plain.map(|(id, across)| Capacitor { id, across, phases: None, kvar: None, ..c.clone() }).collect()
}

fn resistors(d: &Description, r: &Resistor) -> Vec<Resistor> {
    let plain = legs(d, &r.id, &r.across, r.phases).into_iter();
    plain.map(|(id, across)| Resistor { id, across, phases: None, ..r.clone() }).collect()
}

#[cfg(test)]
mod tests {
    use super::super::description::{Connection, Role};
    use super::super::validate::samples::{resistor, step, three_phase};
    use super::*;

    #[test]
    fn legs_take_the_place_of_their_part_and_steps_connect_all_of_them() {
        let mut d = three_phase();
        d.resistors.push(Resistor { phases: Some(Connection::Star), ..resistor("T1", Role::Tool, "A", "B") });
        d.procedure = vec![step("Apply the tool"), step("Take it off")];
        d.procedure[0].connect = vec!["T1".into()];
        d.procedure[1].disconnect = vec!["T1".into()];
        let expanded = Bank::new(d).expect("it is valid").expanded();
        let d = expanded.description();
        let ids = |list: Vec<&String>| list.into_iter().cloned().collect::<Vec<_>>().join(" ");
        assert_eq!(ids(d.capacitors.iter().map(|c| &c.id).collect()), "CB.AB CB.BC CB.CA");
        assert_eq!(ids(d.resistors.iter().map(|r| &r.id).collect()), "RD.AB RD.BC RD.CA T1.A T1.B T1.C");
        assert_eq!(d.resistors[3].across, ["A".to_string(), "T1.star".to_string()]);
        assert_eq!(d.procedure[0].connect, ["T1.A", "T1.B", "T1.C"]);
        assert_eq!(d.procedure[1].disconnect, ["T1.A", "T1.B", "T1.C"]);
        assert!(expanded.is_three_phase());
        // What is plain already stays as it is, and what came out is a bank that passes every check.
        assert_eq!(expanded.expanded(), expanded);
        assert_eq!(Bank::new(d.clone()).expect("it is valid"), expanded);
    }
}
