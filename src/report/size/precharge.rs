//! What a precharge resistor's report says of its designs.

use super::{SizeReport, Told, bought, document, of, rank, strings, value};
use crate::plan::{Check, Verdict};
use crate::quantity::{CELSIUS_ZERO_K, Direction, Energy, Quantity, Ratio, Temperature, show};
use crate::report::block::{Grid, Labelled, Side};
use crate::report::words::{down, early, glued, pair, typed, up, wait, whole};
use crate::size::{Candidate, PrechargeFigures, Repeated, Shorted, Sizing};

/// A sizing of a precharge resistor, ready for people.
pub fn size_precharge(sizing: &Sizing<PrechargeFigures>) -> SizeReport {
    let place = format!(
        "The series resistance of {}, which charges {} before the main contactor closes.",
        sizing.id,
        pair(&sizing.across)
    );
    let first = sizing.candidates.first();
    let explained = "* none other has as few elements, as little current and as short a time, and less of one. Current, \
                     inrush and energy are those of all of the array. Each design was put into the bank and planned in \
                     full; its ratings are judged by that plan.";
    let elements_explained = "Pulse: energy of one element beside its pulse rating; a peak within the continuous power \
                              is no pulse. Shorted: how long the body takes to the end of its rating where the bank is a \
                              short.";
    let tables = vec![
        ("Designs", designs(&sizing.candidates), Some(explained.into())),
        ("One element", elements(&sizing.candidates), Some(elements_explained.into())),
    ];
    let told = Told {
        place,
        clock: "Times run from the moment at which the supply is connected to an empty bank.",
        predicted: first.map(predicted),
        tables,
        first: first.map_or_else(Vec::new, first_design),
    };
    document(sizing, told)
}

/// A share as it was typed.
fn asked(share: Ratio) -> String {
    typed(share)
}

/// A share that is reached, never shown higher.
fn reached(volts: f64, of: f64) -> String {
    glued(&show(Ratio::from_si((volts / of).clamp(0.0, 1.0)), Direction::Down))
}

fn predicted(first: &Candidate<PrechargeFigures>) -> String {
    let f = &first.figures;
    let mut said = Vec::new();
    if let Some(share) = f.share {
        said.push(format!(
            "{} of {} in {} at the latest (due {})",
            asked(share),
            typed(f.supply_voltage),
            wait(f.to_share_slowest),
            whole(f.within)
        ));
    }
    if let Some(inrush) = &f.inrush {
        said.push(format!("inrush up to {}", up(inrush.current)));
    }
    said.push(format!("up to {} and {} a charge in the resistor", up(f.peak_current), up(f.attempt_energy)));
    format!("Predicted: {}.", said.join("; "))
}

fn designs(candidates: &[Candidate<PrechargeFigures>]) -> Grid {
    let figures = || candidates.iter().map(|c| &c.figures);
    let (share, main) = (figures().find_map(|f| f.share), figures().any(|f| f.inrush.is_some()));
    let mut columns = vec![
        ("No.", Side::Left),
        ("Element", Side::Left),
        ("Value", Side::Right),
        ("s x p", Side::Right),
        (if share.is_some() { "In time" } else { "Reached" }, Side::Right),
        ("Current", Side::Right),
    ];
    // A charge leaves much the same energy in every resistor, so that it gives way where columns are short.
    columns.push((if main { "Inrush" } else { "Energy" }, Side::Right));
    let mut grid = Grid::new(&columns);
    for c in candidates {
        let f = &c.figures;
        let charge = if share.is_some() { wait(f.to_share_slowest) } else { down(f.reached_lowest) };
        let mut row = vec![rank(c), c.element.clone(), value(c.value), strings(c), charge, up(f.peak_current)];
        let last = f.inrush.as_ref().map(|i| up(i.current));
        row.push(if main { last.unwrap_or_default() } else { up(f.attempt_energy) });
        grid.row(row);
    }
    grid
}

fn check<'c>(c: &'c Candidate<PrechargeFigures>, name: &str) -> Option<&'c Check> {
    c.checks.iter().find(|check| check.check == name)
}

fn elements(candidates: &[Candidate<PrechargeFigures>]) -> Grid {
    let mut columns = vec![
        ("No.", Side::Left),
        ("Pulse", Side::Right),
        ("Voltage", Side::Right),
        ("Body", Side::Right),
        ("Shorted", Side::Right),
    ];
    let bought = bought(&mut columns, candidates);
    let mut grid = Grid::new(&columns);
    for c in candidates {
        let pulse = match check(c, "pulse energy") {
            Some(check) => {
                let joule = |value: Option<f64>| value.map(Energy::from_si);
                of(joule(check.found).map(up), joule(check.allowed).map(down))
            }
            None => "no\u{a0}pulse".into(),
        };
        let allowed = check(c, "body temperature").and_then(|check| check.allowed);
        let allowed = allowed.map(|celsius| down(Temperature::from_si(celsius + CELSIUS_ZERO_K)));
        let mut row = vec![
            c.rank.to_string(),
            pulse,
            of(c.element_voltage.map(up), c.allowed_voltage.map(down)),
            c.body_temperature.map_or_else(String::new, |t| of(Some(up(t)), allowed)),
            too_hot(&c.figures.shorted),
        ];
        row.extend(bought(c));
        grid.row(row);
    }
    grid
}

/// How long a shorted bank is borne, never shown longer.
fn too_hot(shorted: &Shorted) -> String {
    match shorted.too_hot_after {
        Some(after) => early(after),
        None if shorted.checked => "for\u{a0}ever".into(),
        None => "not\u{a0}checked".into(),
    }
}

fn first_design(c: &Candidate<PrechargeFigures>) -> Vec<Labelled> {
    let f = &c.figures;
    let volts = f.supply_voltage.si();
    let mut items = vec![
        Labelled::new(
            "charge",
            vec![format!(
                "After {}: {} of the supply's voltage or more ({}); left on, it settles at {} or more.",
                whole(f.within),
                reached(f.reached_lowest.si(), volts),
                down(f.reached_lowest),
                down(f.settles_lowest)
            )],
        ),
        Labelled::new(
            "resistor",
            vec![format!(
                "Up to {}, {} and {} a charge, all of the array.",
                up(f.peak_current),
                up(f.peak_power),
                up(f.attempt_energy)
            )],
        ),
    ];
    if let Some(inrush) = &f.inrush {
        let text = format!("Up to {} as it closes over {}.", up(inrush.current), typed(inrush.main));
        items.push(Labelled::new("main", vec![text]));
    }
    items.extend(f.attempts.as_ref().map(attempts));
    items.push(Labelled::new("shorted bank", vec![shorted(&f.shorted)]));
    items.push(Labelled::new(
        "WARNING",
        vec![format!(
            "This charges the bank: after it the bank holds up to {} whatever the main contactor does. Lock out, wait, \
             discharge, test before touch.",
            up(f.supply_voltage)
        )],
    ));
    if let Some(steps) = &f.steps {
        let mut text = vec!["No step of the file connects the supply; it was tried with these:".to_string()];
        text.extend(steps.lines().map(str::to_string));
        items.push(Labelled::new("steps", text));
    }
    items
}

fn attempts(repeated: &Repeated) -> Labelled {
    let often = format!("{} charges from empty, one every {}", repeated.count, whole(repeated.every));
    let text = match (repeated.body_temperature, repeated.verdict) {
        (Some(hottest), _) => format!(
            "{often}: the hottest element's body comes to {}, on average {} an element.",
            up(hottest),
            up(repeated.average_power)
        ),
        (None, Verdict::NotMet) => format!("{often}: {} on average is too much.", up(repeated.average_power)),
        (None, _) => format!(
            "{often}: body temperature NOT CHECKED, the rating gives no thermal data; on average {} an element.",
            up(repeated.average_power)
        ),
    };
    Labelled::new("attempts", vec![text])
}

fn shorted(shorted: &Shorted) -> String {
    let (all, one) = (up(shorted.power), up(shorted.element_power));
    let told = match shorted.too_hot_after {
        Some(after) => format!(
            "the body is at the end of its rating {} after the start, from the air's temperature: a supervision that \
             opens has to be quicker",
            early(after)
        ),
        None if shorted.checked => "the body stays within its rating".into(),
        None => "how long that is borne is NOT CHECKED, the rating gives no thermal data".into(),
    };
    format!("{all} in all, {one} in one element, until the supply is opened; {told}.")
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::quantity::{Power, Time};

    #[test]
    fn a_time_that_a_short_is_borne_is_not_shown_longer_and_what_was_not_checked_says_so() {
        let short = |checked, after: Option<f64>| Shorted {
            power: Power::from_si(800.0),
            element_power: Power::from_si(400.0),
            checked,
            too_hot_after: after.map(Time::from_si),
        };
        let text = |s: Shorted| shorted(&s).replace('\u{a0}', " ");
        assert!(
            text(short(true, Some(1.5199)))
                .contains("element, until the supply is opened; the body is at the end of its rating 1.51 s after")
        );
        assert!(text(short(true, None)).contains("; the body stays within its rating."));
        assert!(text(short(false, None)).contains("; how long that is borne is NOT CHECKED"));
    }
}
