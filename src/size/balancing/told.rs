//! What is told in words: findings, what the answer rests on, the parts.

use super::Job;
use super::looks::Look;
use super::request::BalancingAsk;
use super::result::BalancingFigures;
use super::shares::Shares;
use super::string::WrittenOut;
use crate::bank::Bank;
use crate::bank::description::Resistor;
use crate::bank::file::{capacitor_text, resistor_text};
use crate::finding::{Finding, Severity};
use crate::quantity::{Direction, Quantity, Ratio, Voltage, celsius, exact, show};
use crate::size::error::SizeError;
use crate::size::trial::rest_not_met;

/// Where the division by capacitance alone breaks a rating: no resistor helps there.
pub(super) fn over_by_fast_charge(job: &Job) -> Result<Option<Finding>, SizeError> {
    if !job.fast_charge {
        return Ok(None);
    }
    let shares = Shares::new(&job.description, &job.members, &job.bears, &[])?;
    let divided = shares.divided(job.volts_highest())?;
    let worst = divided.iter().zip(&job.bears).zip(&job.members);
    let worst = worst.filter(|((found, bears), _)| **found > bears.rated.si());
    let over = |found: f64, rated: f64| found / rated;
    let worst = worst.max_by(|((a, x), _), ((b, y), _)| over(**a, x.rated.si()).total_cmp(&over(**b, y.rated.si())));
    Ok(worst.map(|((found, bears), member)| {
        let text = format!(
            "Right after a fast charge to {}, which divides by capacitance, {} can be at {}, rated {}: {} too much within \
             the tolerances. No resistor changes that.",
            exact(Voltage::from_si(job.volts_highest())),
            member.capacitors.join(" and "),
            show(Voltage::from_si(*found), Direction::Up),
            exact(bears.rated),
            show(Voltage::from_si(found - bears.rated.si()), Direction::Up)
        );
        Finding::new(Severity::Warning, "fast-charge-over-rated", text).with_help(
            "Only a closer tolerance of the capacitors, more units in series, or units of a higher rated voltage help. A \
             bank whose charge takes many times the time constant of a unit with its resistor never divides so: \
             `--slow-charge`.",
        )
    }))
}

/// What has to be said of the first design.
pub(super) fn about_the_first(figures: &BalancingFigures, not_met: &[String]) -> Vec<Finding> {
    let mut findings = Vec::new();
    let least = figures.units.iter().map(|u| u.rated.si()).fold(f64::INFINITY, f64::min);
    let lowest = Voltage::from_si(least);
    let open = figures.open_unit_voltage;
    if open.is_none_or(|v| v.si() > least) {
        let reaches = match open {
            Some(volts) => format!("a unit can reach {}", show(volts, Direction::Up)),
            None => "nothing but leakage decides the voltage of a unit".to_string(),
        };
        let text = format!(
            "With one of the new resistors open (of an array, one element), {reaches}, where {} is the least that they \
             are rated: that fault can break units.",
            exact(lowest)
        );
        let finding = Finding::new(Severity::Warning, "open-resistor-overloads-unit", text);
        findings.push(finding.with_help("More strings in an array leave more when one is lost: `--parallel-up-to`."));
    }
    findings.extend(rest_not_met(not_met, "file"));
    findings
}

/// What the answer rests on; `told` is what was assumed in finding the string.
pub(super) fn assumptions(bank: &Bank, ask: &BalancingAsk, job: &Job, told: Vec<String>, shown: &Look) -> Vec<String> {
    let percent = |share: f64| show(Ratio::from_si(share), Direction::Up);
    let (low, high) = shown.tolerance();
    let spread =
        if low <= 0.0 && high <= 0.0 { "no tolerance".into() } else { format!("-{}/+{}", percent(low), percent(high)) };
    let mut list = vec![format!(
        "The window is one of MARKED resistance across each unit, for the closest tolerance at hand ({spread}), every one \
         of the resistors anywhere in it on its own. Designs of another tolerance have a window of their own."
    )];
    list.extend(told);
    list.push(
        "A leakage is taken as a constant current whatever the voltage, which is cautious below the rated voltage, where \
         real leakage is less. Each unit's lies anywhere from nothing to its greatest; what all have in common changes \
         nothing in a plain string."
            .into(),
    );
    list.push(format!(
        "The terminals are held at {}, long enough for the resistors to set the division, every other resistor in place.",
        exact(Voltage::from_si(job.volts_highest()))
    ));
    if ask.fast_charge {
        let all = shown.scan.points().iter().filter_map(|(_, p)| p.fast.as_ref()).all(|fast| fast.every_corner);
        let how = if all {
            "every corner of the tolerances and a search inside them"
        } else {
            "a search from many starts, beside its two ends, which are exact"
        };
        list.push(format!(
            "A fast charge brings the terminals from 0 V to that at once; the way from there on is the worst of {how}. What \
             dielectrics take up slowly (absorption) is left out of it."
        ));
        if !shown.probe.is_chain() {
            list.push(
                "Other parts lie at the inside of the string. On the way after a fast charge leakages count as they do where \
                 it has settled, which is proven to be the worst for a plain string only."
                    .into(),
            );
        }
    } else {
        list.push(
            "No fast charge: the bank is taken to be charged so slowly that the resistors set the division.".into(),
        );
    }
    list.push(
        "The power of an element is that at the highest voltage of a unit, the element at the worst end of its tolerance. \
         The loss is that of all new resistors together, without the units' leakage."
            .into(),
    );
    list.push("The year's energy is that of the nominal voltage, connected for 8760 h.".into());
    list.extend(ask.build.assumptions());
    match ask.ambient {
        Some(ambient) => list.push(format!(
            "Air at the resistors: {:.0} °C as asked, whatever the file says; the plan of the file itself uses its own.",
            celsius(ambient)
        )),
        None if !bank.ambient_given() => {
            list.push(format!("Air at the resistors: {:.0} °C, since the file gives none.", celsius(bank.ambient())));
        }
        None => {}
    }
    if ask.target.is_none() && !ask.limits {
        list.push(
            "The limits of the file don't bound the resistors (`--limits`); the plan checks them all the same.".into(),
        );
    }
    list
}

/// That a capacitor was written out.
pub(super) fn written_out_text(lumped: &WrittenOut) -> String {
    let ids: Vec<&str> = lumped.groups.iter().map(|c| c.id.as_str()).collect();
    format!(
        "{} stands for groups in series and is written out as {}, since it has no node to balance at{}.",
        lumped.id,
        ids.join(", "),
        if lumped.groups.iter().any(|g| g.charged_to.is_some()) { "; its own voltage is shared equally" } else { "" }
    )
}

/// The parts as entries of a bank file.
pub(super) fn part_text(resistors: &[Resistor], written_out: &[WrittenOut]) -> String {
    let mut text = String::new();
    for lumped in written_out {
        text.push_str(&format!("# capacitors: these in place of {}\n", lumped.id));
        text.extend(lumped.groups.iter().map(capacitor_text));
    }
    if !written_out.is_empty() {
        text.push_str("# resistors: one across each of them\n");
    }
    text.extend(resistors.iter().map(resistor_text));
    text
}
