//! What a bleeder's report says of its designs.

use super::{SizeReport, Told, bought, document, energy, of, rank, strings, value};
use crate::report::block::{Grid, Labelled, Side};
use crate::report::words::{down, list, pair, time, up, wait, whole};
use crate::size::{BleederFigures, Candidate, Sizing};

/// A sizing of a bleeder, ready for people.
pub fn size_bleeder(sizing: &Sizing<BleederFigures>) -> SizeReport {
    let place = match sizing.connection {
        Some(connection) => format!("Three legs in {connection}, from up to {}.", up(sizing.charged_to.highest)),
        None => format!("Across {}, from up to {}.", pair(&sizing.across), up(sizing.charged_to.highest)),
    };
    let first = sizing.candidates.first();
    let tables = if first.is_some_and(|c| c.figures.contact.is_some()) {
        let explained = "* none other has as few elements, as low a peak and as short a wait, and less of one. Current: \
                         the peak, all of the array. Each design was put into the bank and planned in full; the figures \
                         are that plan's.";
        vec![
            ("Designs", designs(&sizing.candidates), Some(explained.into())),
            ("One element, each discharge with its feeding", pulses(&sizing.candidates), None),
        ]
    } else {
        let explained = "* none other has as few elements, as little loss and as short a wait, and less of one. Loss: at \
                         the highest voltage, all of the array. Each design was put into the bank and planned in full; \
                         the figures are that plan's.";
        vec![
            ("Designs", designs(&sizing.candidates), Some(explained.into())),
            ("One element", elements(&sizing.candidates), None),
        ]
    };
    let told = Told {
        place,
        clock: "Times run from isolation.",
        predicted: first.map(predicted),
        tables,
        first: first.map_or_else(Vec::new, first_design),
    };
    document(sizing, told)
}

fn predicted(first: &Candidate<BleederFigures>) -> String {
    let kept = first.figures.limits.iter().map(|l| {
        let within = l.within.map_or_else(String::new, |t| format!(" (due {})", whole(t)));
        format!("{} holds from {}{within}", l.id, wait(l.holds_from))
    });
    let kept = list(&kept.collect::<Vec<_>>());
    match &first.figures.contact {
        None => format!("Predicted: {kept}; standing loss {}.", up(first.figures.loss_highest)),
        Some(_) => format!("Predicted: {kept}; no standing loss, up to {}.", up(first.figures.peak_current)),
    }
}

fn designs(candidates: &[Candidate<BleederFigures>]) -> Grid {
    let switched = candidates.iter().any(|c| c.figures.contact.is_some());
    let mut grid = Grid::new(&[
        ("No.", Side::Left),
        ("Element", Side::Left),
        ("Value", Side::Right),
        ("s x p", Side::Right),
        ("Wait", Side::Right),
        ("One open", Side::Right),
        (if switched { "Current" } else { "Loss" }, Side::Right),
    ]);
    for c in candidates {
        grid.row([
            rank(c),
            c.element.clone(),
            value(c.value),
            strings(c),
            wait(c.figures.wait),
            wait(c.figures.open_wait),
            if switched { up(c.figures.peak_current) } else { up(c.figures.loss_highest) },
        ]);
    }
    grid
}

/// What one element bears of a discharge through a contact.
fn pulses(candidates: &[Candidate<BleederFigures>]) -> Grid {
    let mut columns = vec![
        ("No.", Side::Left),
        ("Peak", Side::Right),
        ("Energy", Side::Right),
        ("On average", Side::Right),
        ("Voltage", Side::Right),
        ("Body", Side::Right),
        ("All of it", Side::Right),
    ];
    let bought = bought(&mut columns, candidates);
    let mut grid = Grid::new(&columns);
    for c in candidates {
        let peak = c.figures.contact.as_ref().and_then(|contact| contact.element_peak_power);
        let average = c.element_power.map(up).map(|found| of(Some(found), c.allowed_power.map(down)));
        let mut row = vec![
            c.rank.to_string(),
            peak.map_or_else(String::new, up),
            c.element_energy.map_or_else(String::new, up),
            average.unwrap_or_else(|| "-".into()),
            of(c.element_voltage.map(up), c.allowed_voltage.map(down)),
            c.body_temperature.map_or_else(String::new, up),
            value(c.resistance),
        ];
        row.extend(bought(c));
        grid.row(row);
    }
    grid
}

fn elements(candidates: &[Candidate<BleederFigures>]) -> Grid {
    let mut columns = vec![
        ("No.", Side::Left),
        ("Power", Side::Right),
        ("Voltage", Side::Right),
        ("Body", Side::Right),
        ("All of it", Side::Right),
        ("kWh/year", Side::Right),
    ];
    let bought = bought(&mut columns, candidates);
    let mut grid = Grid::new(&columns);
    for c in candidates {
        let mut row = vec![
            c.rank.to_string(),
            of(c.element_power.map(up), c.allowed_power.map(down)),
            of(c.element_voltage.map(up), c.allowed_voltage.map(down)),
            c.body_temperature.map_or_else(String::new, up),
            value(c.resistance),
            energy(c.figures.energy_per_year_kwh),
        ];
        row.extend(bought(c));
        grid.row(row);
    }
    grid
}

fn first_design(c: &Candidate<BleederFigures>) -> Vec<Labelled> {
    let mut items: Vec<Labelled> = c
        .figures
        .limits
        .iter()
        .map(|l| {
            let faults = match l.single_fault_met {
                Some(true) => " With any one part failed as well.",
                Some(false) => " NOT with any one part failed.",
                None => "",
            };
            let text = format!("{}: holds from {} on at {}.{faults}", l.id, wait(l.holds_from), pair(&l.across));
            Labelled::new("limit", vec![text])
        })
        .collect();
    let open = match c.figures.open_wait {
        Some(open) => format!("The longest wait is then {}.", time(open)),
        None => "The wait then NEVER ends by itself: test before touch, whatever time has passed.".into(),
    };
    items.push(Labelled::new("one open", vec![open]));
    items.extend(c.figures.contact.as_ref().map(|contact| {
        let text = match contact.not_closing_wait {
            Some(wait) => format!("Where it does not close, the longest wait is {}.", time(wait)),
            None => "Where it does not close, the wait NEVER ends by itself: test before touch.".into(),
        };
        Labelled::new("contact", vec![text])
    }));
    items.push(Labelled::new("current", vec![format!("Up to {} through the array.", up(c.figures.peak_current))]));
    items
}
