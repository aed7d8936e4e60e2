//! Curves as CSV (RFC 4180: quotes doubled, lines ended by CR LF), in SI base units, never rounded.

use super::super::words::clean;
use crate::plan::{CurveSample, Curves};
use crate::quantity::{Quantity, celsius};

pub(super) fn table(curves: &Curves) -> String {
    let mut text = line(heads(curves));
    for span in &curves.spans {
        let step = span.step.map_or_else(String::new, |n| n.to_string());
        for sample in &span.samples {
            text.push_str(&line(row(&step, sample)));
        }
    }
    text
}

fn heads(curves: &Curves) -> Vec<String> {
    let mut heads = vec!["time_s".to_string(), "step".to_string()];
    for pair in &curves.pairs {
        let name = pair.across.join(" - ");
        heads.extend([format!("{name} nominal_v"), format!("{name} highest_v")]);
    }
    for part in &curves.parts {
        let name = &part.id;
        heads.extend([format!("{name} voltage_v"), format!("{name} current_a"), format!("{name} power_w")]);
    }
    for tool in &curves.tools {
        heads.extend([format!("{} highest_power_w", tool.id), format!("{} highest_temperature_c", tool.id)]);
    }
    heads
}

fn row(step: &str, sample: &CurveSample) -> Vec<String> {
    let mut row = vec![sample.time.si().to_string(), step.to_string()];
    row.extend(sample.voltages.iter().flat_map(|v| [v.nominal.si().to_string(), v.highest.si().to_string()]));
    let loads = sample.loads.iter();
    row.extend(loads.flat_map(|l| [l.voltage.si(), l.current.si(), l.power.si()].map(|figure| figure.to_string())));
    for tool in &sample.tools {
        row.extend([
            tool.power.si().to_string(),
            tool.temperature.map_or_else(String::new, |t| celsius(t).to_string()),
        ]);
    }
    row
}

fn line(cells: Vec<String>) -> String {
    let quoted = |cell: &String| {
        let cell = clean(cell);
        if cell.contains([',', '"']) { format!("\"{}\"", cell.replace('"', "\"\"")) } else { cell }
    };
    cells.iter().map(quoted).collect::<Vec<_>>().join(",") + "\r\n"
}
