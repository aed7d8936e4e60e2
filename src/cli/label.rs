//! `label`: the notice for the cabinet, or several on a page.

use super::args::{LabelArgs, SheetPaper};
use super::given;
use super::output::Output;
use super::{INPUT_WRONG, NO_VERDICT};
use crate::plan::{Options, Plan};
use crate::quantity::{Length, millimetres};
use crate::report::{self, LabelError, LabelSize, Paper};
use std::io::Read;

/// Reads, plans and draws.
pub(super) fn run(typed: &LabelArgs, stdin: &mut dyn Read, output: &mut Output) -> u8 {
    match made(typed, stdin, output) {
        Ok(status) | Err(status) => status,
    }
}

fn made(typed: &LabelArgs, stdin: &mut dyn Read, output: &mut Output) -> Result<u8, u8> {
    let size = typed.size.as_deref().map_or_else(|| Ok(LabelSize::default()), size);
    let size = size.map_err(|e| output.problem(&e, INPUT_WRONG))?;
    let file = typed.output.as_deref();
    let banks = typed.each();
    let mut plans: Vec<Plan> = Vec::new();
    for bank in &banks {
        given::refuse_overwriting(bank, file, output)?;
        plans.push(given::planned(bank, Options::default(), stdin, output)?);
    }
    for plan in &plans {
        given::incomplete(plan, "notice", output)?;
    }
    let page = typed.page.map(|paper| match paper {
        SheetPaper::A4 => Paper::A4,
        SheetPaper::Letter => Paper::Letter,
    });
    let svg = match (page, plans.as_slice()) {
        (None, [plan]) if typed.copies == 1 => report::label_svg(plan, size),
        (page, plans) => {
            let copies: Vec<&Plan> =
                plans.iter().flat_map(|plan| std::iter::repeat_n(plan, usize::from(typed.copies))).collect();
            report::labels_page_svg(&copies, size, page.unwrap_or_default())
        }
    };
    let svg = svg.map_err(|e| {
        let status = if e == LabelError::Incomplete { NO_VERDICT } else { INPUT_WRONG };
        output.problem(&e.to_string(), status)
    })?;
    let status = plans.iter().map(Plan::exit_code).max().unwrap_or(0);
    for plan in plans.iter().filter(|plan| plan.notice.delay.is_none()) {
        output.notice(&format!(
            "{}: with every part healthy a wait never ends, so its notice has no delay.",
            plan.bank.tag
        ));
    }
    Ok(output.file_or_result(file, &svg, status))
}

/// A size such as `100x60mm`.
fn size(typed: &str) -> Result<LabelSize, String> {
    let advice = || format!("`{typed}` is no size of a notice; write width and height such as `100x60mm`");
    let figures = typed.trim().strip_suffix("mm").ok_or_else(advice)?;
    let (width, height) = figures.split_once('x').ok_or_else(advice)?;
    let side = |text: &str| -> Result<Length, String> {
        let text = text.trim().trim_end_matches("mm").trim_end();
        let value: f64 = text.parse().map_err(|_| advice())?;
        Ok(millimetres(value))
    };
    LabelSize::new(side(width)?, side(height)?).map_err(|e| format!("`{typed}`: {e}"))
}
