//! A part put into the text of a bank file, every other character of it kept: comments, order, layout.
//!
//! The text that comes out is read again and has to describe the bank with the part, or it is not given out at all.

use super::log::Log;
use super::source::Source;
use super::tree::{self, Content};
use super::{keys, replace, write};
use crate::bank::description::{Capacitor, Description, Resistor, Step, Supply};

/// A resistor as an entry of a bank file's `resistors`, ready to paste: a line without indentation.
pub fn resistor_text(resistor: &Resistor) -> String {
    format!("- {}\n", write::resistor(resistor))
}

/// A capacitor as an entry of a bank file's `capacitors`, likewise.
pub fn capacitor_text(capacitor: &Capacitor) -> String {
    format!("- {}\n", write::capacitor(capacitor))
}

/// A supply as an entry of a bank file's `supplies`, ready to paste.
pub fn supply_text(supply: &Supply) -> String {
    format!("- {}\n", write::supply(supply))
}

/// Steps as entries of a bank file's `procedure`, ready to paste.
pub fn steps_text(steps: &[Step]) -> String {
    steps.iter().map(|step| format!("- {}\n", write::step(step))).collect()
}

/// The text of a bank file with one more resistor, at the end of the list (at its head where the list stands in
/// brackets).
///
/// # Errors
/// A sentence that says why the part can't be placed, and what to do instead.
pub fn with_resistor(name: &str, bytes: &[u8], resistor: &Resistor) -> Result<String, String> {
    with_resistor_and_steps(name, bytes, resistor, &[])
}

/// The same with the steps of a procedure, for a file that has none: they come at its end.
///
/// # Errors
/// As [`with_resistor`].
pub fn with_resistor_and_steps(
    name: &str,
    bytes: &[u8],
    resistor: &Resistor,
    steps: &[Step],
) -> Result<String, String> {
    let part = write::resistor(resistor);
    changed(
        name,
        bytes,
        "the list `resistors` stands neither in lines of its own nor in brackets, or the file has a `procedure` already",
        |source, tree, _| {
            let (text, at_head) = placed(source, tree, "resistors", &part)?;
            if steps.is_empty() {
                return Some((text, at_head));
            }
            let procedure = format!("\n\nprocedure:\n{}", indented(&steps_text(steps), 2));
            tree.get("procedure").is_none().then(|| (text.trim_end().to_string() + &procedure, at_head))
        },
        |after, at_head| {
            after.resistors.insert(if at_head { 0 } else { after.resistors.len() }, resistor.clone());
            after.procedure.extend_from_slice(steps);
        },
    )
}

/// The text of a bank file with the resistor of this id in the place of the one that has it. Comments between the old
/// one's keys come to stand before the new one, each in a line of its own.
///
/// # Errors
/// As [`with_resistor`].
pub fn with_resistor_exchanged(name: &str, bytes: &[u8], resistor: &Resistor) -> Result<String, String> {
    let id = &resistor.id;
    changed(
        name,
        bytes,
        &format!("the entry of {id} stands neither in lines of its own nor in braces without comments"),
        |source, tree, _| Some((replace::entry(source, tree, "resistors", id, &[write::resistor(resistor)])?, false)),
        |after, _| after.resistors.iter_mut().filter(|r| r.id == *id).for_each(|r| *r = resistor.clone()),
    )
}

/// The text of a bank file with `groups` in place of the capacitor `id`.
///
/// # Errors
/// As [`with_resistor`].
pub fn with_groups(name: &str, bytes: &[u8], id: &str, groups: &[Capacitor]) -> Result<String, String> {
    let texts: Vec<String> = groups.iter().map(write::capacitor).collect();
    changed(
        name,
        bytes,
        &format!("the entry of {id} stands neither in lines of its own nor in braces without comments"),
        |source, tree, _| Some((replace::entry(source, tree, "capacitors", id, &texts)?, false)),
        |after, _| {
            if let Some(at) = after.capacitors.iter().position(|c| c.id == id) {
                after.capacitors.splice(at..=at, groups.iter().cloned());
            }
        },
    )
}

/// The text of a bank file with a supply in it: where the file has one of this name, its series resistance (value,
/// tolerance, array, rating) is put in place of the old one; else one more supply.
///
/// # Errors
/// As [`with_resistor`].
pub fn with_supply(name: &str, bytes: &[u8], supply: &Supply) -> Result<String, String> {
    let part = write::supply(supply);
    let number = |d: &Description| d.supplies.iter().position(|s| s.id == supply.id);
    changed(
        name,
        bytes,
        "the list `supplies` is not written in a way that this tool can change",
        |source, tree, before| match number(before) {
            Some(index) => {
                let text = keys::replaced(source, tree, "supplies", index, &write::series_resistance(supply))?;
                Some((text, false))
            }
            None => placed(source, tree, "supplies", &part),
        },
        |after, at_head| match number(after) {
            Some(index) => after.supplies[index] = supply.clone(),
            None => after.supplies.insert(if at_head { 0 } else { after.supplies.len() }, supply.clone()),
        },
    )
}

/// Changes a text and reads the result back: it is only given out where it describes the bank after `change`, which is
/// told whether the part came to the head of its list. `no_place` says why there may be no new text.
fn changed(
    name: &str,
    bytes: &[u8],
    no_place: &str,
    text: impl FnOnce(&Source, &tree::Node, &Description) -> Option<(String, bool)>,
    change: impl FnOnce(&mut Description, bool),
) -> Result<String, String> {
    let by_hand = |why: &str| format!("{why}; `--part` prints the part, to be put in by hand");
    let mut log = Log::default();
    let source = Source::new(name, bytes).map_err(|e| by_hand(&e.text))?;
    let tree = tree::parse(&source, &mut log).ok_or_else(|| by_hand("the file can't be read"))?;
    let before = super::read(name, bytes).map_err(|_| by_hand("the file is no bank file"))?.0;
    let (text, at_head) = text(&source, &tree, before.description())
        .ok_or_else(|| by_hand(&format!("the part can't be placed: {no_place}")))?;
    let mut expected = before.description().clone();
    change(&mut expected, at_head);
    match super::read(name, text.as_bytes()) {
        Ok((bank, _)) if *bank.description() == expected => Ok(restored(bytes, text)),
        _ => Err(by_hand("the file with the part in it does not read as the bank with the part")),
    }
}

/// The new text, and whether the part stands at the head of its list; `None` where there is no place for it.
fn placed(source: &Source, tree: &tree::Node, key: &str, part: &str) -> Option<(String, bool)> {
    let Content::Mapping(top) = &tree.content else { return None };
    let lines: Vec<&str> = source.text.lines().collect();
    let entry = format!("- {part}\n");
    let Some((key, list)) = tree.get(key) else {
        if first_char(&lines, tree.span.line, tree.span.column) == Some('{') {
            return None;
        }
        let text = format!("{key}:\n{}", indented(&entry, 2));
        return Some((joined(&lines, end_of(&lines, lines.len()), &text), false));
    };
    let Content::Sequence(entries) = &list.content else { return None };
    if first_char(&lines, list.span.line, list.span.column) == Some('[') {
        let mut line: Vec<char> = lines.get(list.span.line - 1)?.chars().collect();
        let comma = if entries.is_empty() { "" } else { ", " };
        line.splice(list.span.column..list.span.column, format!("{part}{comma}").chars());
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
    Some((joined(&lines, end, &indented(&entry, indent)), false))
}

/// The number of lines up to the last before `before` that is neither empty nor a comment: what follows belongs to
/// what comes after.
pub(super) fn end_of(lines: &[&str], before: usize) -> usize {
    let said = |line: &&str| !line.trim().is_empty() && !line.trim_start().starts_with('#');
    lines.iter().take(before).rposition(said).map_or(0, |last| last + 1)
}

fn joined(lines: &[&str], at: usize, text: &str) -> String {
    let line = |line: &&str| format!("{line}\n");
    lines[..at].iter().map(line).chain([text.to_string()]).chain(lines[at..].iter().map(line)).collect()
}

pub(super) fn first_char(lines: &[&str], line: usize, column: usize) -> Option<char> {
    lines.get(line.checked_sub(1)?)?.chars().nth(column.checked_sub(1)?)
}

fn indented(text: &str, by: usize) -> String {
    text.lines().map(|line| format!("{}{line}\n", " ".repeat(by))).collect()
}

/// The line ends and the byte order mark that the file had.
pub(super) fn restored(bytes: &[u8], text: String) -> String {
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
    fn steps_come_at_the_end_of_a_file_that_has_none() {
        let tool = Resistor { id: "T1".into(), role: Role::Tool, ..part() };
        let (bank, _) = super::super::read(
            "steps",
            format!("{BANK}resistors: [{{id: T1, role: tool, value: 1 ohm}}]\nprocedure:\n  - {{step: Wait, for: 5 s}}\n  - \
                     {{step: 'Apply: now', connect: [T1], for: 20 s, hold: {{below: 50 V}}}}\n")
                .as_bytes(),
        )
        .expect("a bank");
        let steps = &bank.description().procedure;
        let written = |text: &str| with_resistor_and_steps("bank.yaml", text.as_bytes(), &tool, steps);
        let after = written(&format!("{BANK}# the end")).expect("it is placed");
        assert!(after.ends_with(&format!("\nprocedure:\n{}", indented(&steps_text(steps), 2))), "{after}");
        assert!(after.contains("# the end") && after.contains("  - {step: \"Apply: now\", connect: [T1]"), "{after}");
        assert!(written(&after.replace("T1", "T2")).is_err_and(|e| e.contains("`procedure` already")));
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
