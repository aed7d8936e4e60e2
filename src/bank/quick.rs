//! The quick form: a bank of one capacitor and one bleeder from a few values on the command line, as a bank file.
//!
//! A quick answer goes the way of every other bank, through the text that `--save` writes.

use crate::finding::{Finding, Findings, Severity};
use crate::quantity::{Capacitance, Quantity, Ratio, Resistance, Tolerance, Voltage, parse};

/// What was typed on the command line, as it was typed.
#[derive(Debug, Clone, Default, PartialEq, Eq)]
pub struct QuickForm {
    /// `--charged-to`: nominal voltage at isolation.
    pub charged_to: String,
    /// `--highest`: worst credible voltage.
    pub highest: Option<String>,
    /// `--capacitance`.
    pub capacitance: String,
    /// `--capacitance-tolerance`.
    pub capacitance_tolerance: Option<String>,
    /// `--bleeder`: resistance across the terminals.
    pub bleeder: String,
    /// `--bleeder-tolerance`.
    pub bleeder_tolerance: Option<String>,
    /// `--touch-voltage`: the voltage to wait for.
    pub touch_voltage: String,
}

/// The bank file that a quick form stands for; [`super::file::read`] accepts it. Its tag is `QUICK`.
///
/// # Errors
/// Every value that is not the quantity that its flag asks for; the findings name the flag.
///
/// # Example: a few values as a bank file
/// ```
/// use ebbvolt::bank::{file, quick::{QuickForm, quick_text}};
/// let form = QuickForm {
///     charged_to: "565V".into(),
///     capacitance: "3300uF".into(),
///     bleeder: "22k".into(),
///     touch_voltage: "50V".into(),
///     ..QuickForm::default()
/// };
/// let text = quick_text(&form).expect("every value has its unit");
/// assert!(file::read("quick form", text.as_bytes()).is_ok());
/// ```
pub fn quick_text(form: &QuickForm) -> Result<String, Findings> {
    let mut errors = Findings::new();
    let nominal: Option<Voltage> = value("--charged-to", &form.charged_to, &mut errors);
    let highest: Option<Voltage> = form.highest.as_ref().and_then(|text| value("--highest", text, &mut errors));
    let touch: Option<Voltage> = value("--touch-voltage", &form.touch_voltage, &mut errors);
    value::<Capacitance>("--capacitance", &form.capacitance, &mut errors);
    value::<Resistance>("--bleeder", &form.bleeder, &mut errors);
    tolerance("--capacitance-tolerance", form.capacitance_tolerance.as_deref(), &mut errors);
    tolerance("--bleeder-tolerance", form.bleeder_tolerance.as_deref(), &mut errors);
    if nominal.zip(highest).is_some_and(|(nominal, highest)| highest.si() < nominal.si()) {
        let text = "`--highest` is below `--charged-to`";
        let help = "`--highest` is the worst credible voltage: at least that of `--charged-to`";
        errors.push(Finding::new(Severity::Error, "highest-below-nominal", text).with_help(help));
    }
    if touch.is_some_and(|touch| touch.si() <= 0.0) {
        let finding = Finding::new(Severity::Error, "not-above-zero", "`--touch-voltage` is zero");
        errors.push(finding.with_help("write the voltage to wait for, such as `50 V`"));
    }
    if errors.has_errors() { Err(errors) } else { Ok(text(form)) }
}

fn text(form: &QuickForm) -> String {
    let charged_to = match &form.highest {
        Some(highest) => format!("{{nominal: {}, highest: {}}}", one_line(&form.charged_to), one_line(highest)),
        None => one_line(&form.charged_to),
    };
    let tolerance = |text: &Option<String>| {
        text.as_ref().map_or_else(String::new, |text| format!(", tolerance: {}", one_line(text)))
    };
    format!(
        "# One capacitor and one bleeder, written from the quick form. `ebbvolt draft` shows what else can be said.\n\
         ebbvolt: 1\n\
         tag: QUICK\n\
         touch_voltage: {}\n\
         charged_to: {charged_to}\n\
         terminals: [P, N]\n\
         capacitors:\n  - {{id: C1, value: {}{}, across: [P, N]}}\n\
         resistors:\n  - {{id: R1, role: bleeder, value: {}{}, across: [P, N]}}\n",
        one_line(&form.touch_voltage),
        one_line(&form.capacitance),
        tolerance(&form.capacitance_tolerance),
        one_line(&form.bleeder),
        tolerance(&form.bleeder_tolerance),
    )
}

/// A quantity holds digits, a unit and blanks; a line break among the blanks would end the value in a file.
fn one_line(text: &str) -> String {
    text.split_whitespace().collect::<Vec<_>>().join(" ")
}

fn value<Q: Quantity>(flag: &str, text: &str, errors: &mut Findings) -> Option<Q> {
    match parse(text) {
        Ok(reading) => Some(reading.value),
        Err(e) => {
            let finding = Finding::new(Severity::Error, "bad-quantity", format!("`{flag}`: {}", e.problem));
            errors.push(finding.with_help(e.help));
            None
        }
    }
}

fn tolerance(flag: &str, text: Option<&str>, errors: &mut Findings) {
    let Some(share) = text.and_then(|text| value::<Ratio>(flag, text, errors)) else { return };
    if let Err(e) = Tolerance::new(share, share) {
        let finding = Finding::new(Severity::Error, "bad-quantity", format!("`{flag}`: {}", e.problem));
        errors.push(finding.with_help("write a tolerance such as `20 %`"));
    }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::bank::file::read;

    fn form() -> QuickForm {
        QuickForm {
            charged_to: "565V".into(),
            highest: None,
            capacitance: "3300uF".into(),
            capacitance_tolerance: None,
            bleeder: "22k".into(),
            bleeder_tolerance: None,
            touch_voltage: "50V".into(),
        }
    }

    #[test]
    fn the_text_is_the_bank_that_was_asked_for() {
        let form = QuickForm {
            highest: Some(" 0.75\nkV ".into()),
            capacitance_tolerance: Some("20 %".into()),
            bleeder_tolerance: Some("5%".into()),
            ..form()
        };
        let text = quick_text(&form).unwrap_or_else(|e| panic!("{e:?}"));
        let (bank, notes) = read("quick form", text.as_bytes()).unwrap_or_else(|e| panic!("{text}{e:?}"));
        assert_eq!(notes, Findings::new());
        let d = bank.description();
        assert_eq!(d.tag, "QUICK");
        assert!((d.charged_to.nominal.si() - 565.0).abs() < 1e-9 && (d.charged_to.highest.si() - 750.0).abs() < 1e-9);
        assert_eq!(d.capacitors[0].tolerance.map(|t| t.highest_factor()), Some(1.2));
        assert!((d.resistors[0].value.si() - 22e3).abs() < 1e-9);
        assert!(!d.charged_to.margin_given || form.highest.is_some());
    }

    #[test]
    fn every_bad_value_is_named_by_its_flag() {
        let bad = QuickForm {
            charged_to: "565".into(),
            highest: Some("750".into()),
            capacitance: "3300 ohm".into(),
            capacitance_tolerance: Some("100 %".into()),
            bleeder: "22 kF".into(),
            bleeder_tolerance: Some("5".into()),
            touch_voltage: "0 V".into(),
        };
        let findings = quick_text(&bad).expect_err("all are bad");
        let texts: Vec<_> = findings.as_slice().iter().map(|f| f.text.as_str()).collect();
        for flag in [
            "charged-to",
            "highest",
            "capacitance",
            "capacitance-tolerance",
            "bleeder",
            "bleeder-tolerance",
            "touch-voltage",
        ] {
            assert!(texts.iter().any(|text| text.starts_with(&format!("`--{flag}`"))), "{flag}: {texts:?}");
        }
        let bad = QuickForm { highest: Some("500 V".into()), ..form() };
        assert!(quick_text(&bad).is_err_and(|e| e.as_slice()[0].code == "highest-below-nominal"));
    }
}
