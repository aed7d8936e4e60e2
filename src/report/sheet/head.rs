//! The head of a sheet: which bank, the figures that matter most, what it holds.

use super::super::block::{Block, Grid, Labelled, LargeFigure, Side};
use super::super::plan::summary;
use super::super::words::{pair, up, whole};
use crate::plan::{Plan, Wait, fault_in_words};
use crate::quantity::{Quantity, Time, keepable};

pub(super) fn blocks(plan: &Plan, date: Option<&str>) -> Vec<Block> {
    let bank = &plan.bank;
    let title = bank.title.as_ref().map_or_else(|| bank.tag.clone(), |title| format!("{}: {title}", bank.tag));
    let mut blocks = vec![Block::Title { title, under: vec!["Discharge sheet".into()] }];
    if !plan.not_computed.is_empty() {
        blocks.push(summary::incomplete(plan));
    }
    blocks.push(Block::Large(figures(plan)));
    blocks.push(Block::Section("Identification"));
    blocks.push(Block::Table(identification(plan, date)));
    blocks.push(Block::Section("What the bank holds"));
    blocks.push(Block::Labelled(vec![
        summary::hazard(plan),
        Labelled::new("WARNING", vec![summary::caution()]),
        Labelled::new("HOLDS", summary::holds(plan)),
        Labelled::new("CHECKS", vec![summary::checks(plan)]),
    ]));
    blocks
}

fn figures(plan: &Plan) -> Vec<LargeFigure> {
    let mut figures = vec![wait(plan)];
    figures.extend(failed(plan));
    figures.push(LargeFigure {
        label: "Voltage at isolation",
        figure: up(plan.stored.as_ref().map_or(plan.charged_to.highest, |stored| stored.voltage_highest)),
        under: plan
            .stored
            .as_ref()
            .map_or_else(|| "stored energy not computed".into(), |s| format!("up to {} stored", up(s.energy_highest))),
    });
    figures.extend(plan.notice.left.map(|left| LargeFigure {
        label: "Left after the last step",
        figure: up(left),
        under: "greatest voltage at a test point from then on".into(),
    }));
    figures
}

fn wait(plan: &Plan) -> LargeFigure {
    let label = "Wait after isolation";
    if !plan.not_computed.is_empty() {
        // A figure without what is missing could be far too short; in large type it would be taken for the answer.
        let figure = "not computed".into();
        return LargeFigure { label, figure, under: "this sheet is incomplete".into() };
    }
    let never: Option<&Wait> = plan.waits.iter().find(|w| w.keep.is_none());
    if let Some(wait) = never {
        let under = format!("{} stays at up to {}; discharge by other means", pair(&wait.across), up(wait.settles_at));
        return LargeFigure { label, figure: "NEVER".into(), under };
    }
    let longest = plan.waits.iter().filter_map(|w| w.keep).map(Quantity::si).reduce(f64::max);
    let Some(longest) = longest.map(Time::from_si) else {
        return LargeFigure { label, figure: "not computed".into(), under: String::new() };
    };
    LargeFigure {
        label,
        figure: whole(keepable(longest)),
        under: format!("then TEST; predicted {} in the slowest case", summary::target(plan)),
    }
}

/// What one failed part makes of the wait.
fn failed(plan: &Plan) -> Option<LargeFigure> {
    let notice = &plan.notice;
    if !plan.not_computed.is_empty() {
        return None;
    }
    let label = "With one part failed";
    if let Some(fault) = notice.never_faults.first().map(|fault| fault_in_words(fault)) {
        let more = match notice.never_faults.len() {
            1 => String::new(),
            n => format!(" and {} more", n - 1),
        };
        return Some(LargeFigure {
            label,
            figure: "NEVER".into(),
            under: format!("{fault}{more}: only the test tells"),
        });
    }
    let longest = notice.longest_fault.as_ref()?;
    let figure = format!("up to {}", whole(longest.delay));
    Some(LargeFigure { label, figure, under: format!("{}; only the test tells", fault_in_words(&longest.fault)) })
}

fn identification(plan: &Plan, date: Option<&str>) -> Grid {
    let bank = &plan.bank;
    let mut grid = Grid::new(&[("What", Side::Left), ("Entry", Side::Left)]);
    let said = |text: &Option<String>| text.clone().unwrap_or_else(|| "not given".into());
    grid.row(["Equipment tag".into(), bank.tag.clone()]);
    grid.row(["Title".into(), said(&bank.title)]);
    grid.row(["Location".into(), said(&bank.location)]);
    grid.row(["Revision".into(), said(&bank.revision)]);
    grid.row(["Prepared by".into(), said(&bank.prepared_by)]);
    if let Some(date) = date {
        grid.row(["Date".into(), date.into()]);
    }
    grid.row(["SHA-256 of the input".into(), bank.input_sha256.clone()]);
    grid.row(["Made by".into(), format!("ebbvolt {}", plan.ebbvolt.version)]);
    grid
}
