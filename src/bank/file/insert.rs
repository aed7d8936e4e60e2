//! A resistor put into the text of a bank file, every other character of it kept: comments, order, layout.
//!
//! The text that comes out is read again and has to describe the bank with the part, or it is not given out at all.

use super::log::Log;
use super::source::Source;
use super::tree::{self, Content};
use super::write;
use crate::bank::description::{Description, Resistor};

/// A resistor as an entry of a bank file's `resistors`, ready to paste: a line without indentation.
pub fn resistor_text(resistor: &Resistor) -> String {
    format!("- {}\n", write::resistor(resistor))
}

/// The text of a bank file with one more resistor, at the end of the list (at its head where the list stands in
/// brackets).
///
/// # Errors
/// A sentence that says why the part can't be placed, and what to do instead.
pub fn with_resistor(name: &str, bytes: &[u8], resistor: &Resistor) -> Result<String, String> {
    let by_hand = |why: &str| format!("{why}; `--part` prints the part, to be put in by hand");
    let mut log = Log::default();
    let source = Source::new(name, bytes).map_err(|e| by_hand(&e.text))?;
    let tree = tree::parse(&source, &mut log).ok_or_else(|| by_hand("the file can't be read"))?;
    let (text, at_head) = placed(&source, &tree, resistor).ok_or_else(|| {
        by_hand("the part can't be placed: the list `resistors` stands neither in lines of its own nor in brackets")
    })?;
    let expected = |before: &Description| {
        let mut after = before.clone();
        after.resistors.insert(if at_head { 0 } else { after.resistors.len() }, resistor.clone());
        after
    };
    let before = super::read(name, bytes).map_err(|_| by_hand("the file is no bank file"))?.0;
    match super::read(name, text.as_bytes()) {
        Ok((bank, _)) if *bank.description() == expected(before.description()) => Ok(restored(bytes, text)),
        _ => Err(by_hand("the file with the part in it does not read as the bank with the part")),
    }
}

/// The new text, and whether the part stands at the head of its list; `None` where there is no place for it.
fn placed(source: &Source, tree: &tree::Node, resistor: &Resistor) -> Option<(String, bool)> {
    let Content::Mapping(top) = &tree.content else { return None };
    let lines: Vec<&str> = source.text.lines().collect();
    let Some((key, list)) = tree.get("resistors") else {
        if first_char(&lines, tree.span.line, tree.span.column) == Some('{') {
            return None;
        }
        let text = format!("resistors:\n{}", indented(&resistor_text(resistor), 2));
        return Some((joined(&lines, end_of(&lines, lines.len()), &text), false));
    };
    let Content::Sequence(entries) = &list.content else { return None };
    if first_char(&lines, list.span.line, list.span.column) == Some('[') {
        let mut line: Vec<char> = lines.get(list.span.line - 1)?.chars().collect();
        let comma = if entries.is_empty() { "" } else { ", " };
        let part = format!("{}{comma}", write::resistor(resistor));
        line.splice(list.span.column..list.span.column, part.chars());
        let line: String = line.into_iter().collect();
        let mut all = lines;
        *all.get_mut(list.span.line - 1)? = &line;
        return Some((joined(&all, all.len(), ""), true));
    }
    let first = lines.get(entries.first()?.span.line - 1)?;
    let indent = first.len() - first.trim_start().len();
    if !first.trim_start().starts_with('-') {
        return None;
    }
    let next = top.iter().map(|(k, _)| k.span.line).filter(|line| *line > key.span.line).min();
    let end = end_of(&lines, next.map_or(lines.len(), |line| line - 1));
    Some((joined(&lines, end, &indented(&resistor_text(resistor), indent)), false))
}

/// The number of lines up to the last before `before` that is neither empty nor a comment: what follows belongs to
/// what comes after.
fn end_of(lines: &[&str], before: usize) -> usize {
    let said = |line: &&str| !line.trim().is_empty() && !line.trim_start().starts_with('#');
    lines.iter().take(before).rposition(said).map_or(0, |last| last + 1)
}

fn joined(lines: &[&str], at: usize, text: &str) -> String {
    let line = |line: &&str| format!("{line}\n");
    lines[..at].iter().map(line).chain([text.to_string()]).chain(lines[at..].iter().map(line)).collect()
}

fn first_char(lines: &[&str], line: usize, column: usize) -> Option<char> {
    lines.get(line.checked_sub(1)?)?.chars().nth(column.checked_sub(1)?)
}

fn indented(text: &str, by: usize) -> String {
    text.lines().map(|line| format!("{}{line}\n", " ".repeat(by))).collect()
}

/// The line ends and the byte order mark that the file had.
fn restored(bytes: &[u8], text: String) -> String {
    let text = if bytes.windows(2).any(|two| two == b"\r\n") { text.replace('\n', "\r\n") } else { text };
    if bytes.starts_with(b"\xef\xbb\xbf") { format!("\u{feff}{text}") } else { text }
}

#[cfg(test)]
mod tests {
    use super::*;
    use crate::bank::description::{Overload, Rating, Role};
    use crate::quantity::{Energy, Power, Quantity, Ratio, Resistance, Temperature, Time, Tolerance, Voltage};

    const BANK: &str = "# A bank.\nebbvolt: 1\ntag: X\ntouch_voltage: 50 V\ncharged_to: 565 V\ncapacitors:\n  - {id: C1, \
                        value: 1 mF}   # kept\n";

    fn part() -> Resistor {
        Resistor {
            id: "RB".into(),
            role: Role::Bleeder,
            value: Resistance::from_si(22e3),
            tolerance: Tolerance::new(Ratio::from_si(0.05), Ratio::from_si(0.1)).ok(),
            across: ["P".into(), "N".into()],
            series: 2,
            parallel: 3,
            rating: Rating {
                power: Some(Power::from_si(25.0)),
                full_to: Some(Temperature::from_si(298.15)),
                zero_at: Some(Temperature::from_si(548.15)),
                voltage: Some(Voltage::from_si(750.0)),
                pulse: Some(Energy::from_si(400.0)),
                overload: Some(Overload { times: 5.0, duration: Time::from_si(5.0) }),
                thermal_time: Some(Time::from_si(90.0)),
            },
            tempco: None,
            ageing: None,
            phases: None,
            switched: None,
        }
    }

    fn with(text: &str) -> String {
        with_resistor("bank.yaml", text.as_bytes(), &part()).unwrap_or_else(|e| panic!("{e}\n{text}"))
    }

    /// Every line of the one stands in the other, in its order.
    fn keeps(before: &str, after: &str) -> bool {
        let mut left = after.lines();
        before.lines().all(|line| left.any(|l| l == line))
    }

    #[test]
    fn the_part_comes_after_the_last_entry_and_every_line_stays() {
        let list = "resistors:\n  # the old one\n  - id: R1   # oldest\n    role: bleeder\n    value: 1 Mohm\n\n  # about limits\nlimits:\n";
        let text = format!("{BANK}{list}  - {{id: a, voltage: 50 V, within: 1 h}}\n");
        let after = with(&text);
        assert!(keeps(&text, &after), "{after}");
        assert!(after.contains("    value: 1 Mohm\n  - {id: RB, role: bleeder, value: 22 kohm"), "{after}");
        for more in ["", "resistors:\n- {id: R1, role: bleeder, value: 1 Mohm}\n# the end"] {
            let text = format!("{BANK}{more}");
            assert!(keeps(&text, &with(&text)));
        }
    }

    #[test]
    fn a_list_in_brackets_takes_the_part_at_its_head() {
        for list in
            ["[]", "[{id: R1, role: bleeder, value: 1 Mohm}] # µ", "[\n  {id: R1, role: bleeder, value: 1 Mohm}]"]
        {
            let after = with(&format!("{BANK}resistors: {list}\n"));
            assert!(after.contains("resistors: [{id: RB, role: bleeder"), "{after}");
        }
    }

    #[test]
    fn line_ends_stay_and_a_file_without_a_place_for_the_part_is_refused() {
        let text = BANK.replace('\n', "\r\n");
        assert!(
            with(&text).lines().count() == with(BANK).lines().count() && with(&text).contains("1 mF}   # kept\r\n")
        );
        let flow = "{ebbvolt: 1, tag: X, touch_voltage: 50 V, charged_to: 565 V, capacitors: [{id: C1, value: 1 mF}]}";
        let refused = with_resistor("bank.yaml", flow.as_bytes(), &part());
        assert!(refused.is_err_and(|e| e.contains("--part")));
        // An id that is there twice describes no bank.
        let twice = format!("{BANK}resistors: [{{id: RB, role: bleeder, value: 1 Mohm}}]\n");
        assert!(with_resistor("bank.yaml", twice.as_bytes(), &part()).is_err());
    }
}
