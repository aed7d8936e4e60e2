//! A stock file: resistor elements at hand, as YAML or CSV. Problems are reported like those of a bank file.

use super::log::Log;
use super::rating;
use super::reader::{Group, Reader, Spot};
use super::source::{Source, Span};
use super::top::optional;
use super::tree::{self, Content, Key, Node};
use crate::bank::stock::{Element, Values};
use crate::data::Series;
use crate::finding::Findings;
use crate::quantity::{Quantity, Resistance};
use std::rc::Rc;

const ELEMENT: [&str; 9] = ["name", "value", "series", "from", "to", "tolerance", "rating", "mass", "price"];
const EXAMPLE: &str = "- {name: shelf 4, value: 22 kohm, tolerance: 5 %, rating: {power: 25 W}}";

/// Columns of a CSV that belong into `rating`, and those that belong into its `overload`.
const RATING: [&str; 6] = ["power", "full_to", "zero_at", "voltage", "pulse", "thermal_time"];
const OVERLOAD: [(&str, &str); 2] = [("overload_times", "times"), ("overload_for", "for")];

/// The most elements that a list may have; a search beside it would take long.
const MOST: usize = 100_000;

/// Reads a list of elements at hand: CSV where the name ends in `.csv`, else YAML.
///
/// # Errors
/// Everything that is wrong with the file, in the order of its lines, each with its place.
///
/// # Example: one line of a shelf
/// ```
/// let csv = "name,value,tolerance,power\nshelf 4,22 kohm,5 %,25 W\n";
/// let elements = ebbvolt::bank::file::read_stock("shelf.csv", csv.as_bytes()).expect("a valid list");
/// assert_eq!(elements[0].name, "shelf 4");
/// ```
pub fn read_stock(name: &str, bytes: &[u8]) -> Result<Vec<Element>, Findings> {
    let mut log = Log::default();
    match read_into(&mut log, name, bytes) {
        Some(elements) if log.is_empty() => Ok(elements),
        _ => Err(log.into_findings()),
    }
}

fn read_into(log: &mut Log, name: &str, bytes: &[u8]) -> Option<Vec<Element>> {
    let source = match Source::new(name, bytes) {
        Ok(source) => source,
        Err(error) => {
            log.push(*error);
            return None;
        }
    };
    let is_csv = name.to_lowercase().ends_with(".csv");
    let tree = if is_csv { from_csv(&source, log)? } else { tree::parse(&source, log)? };
    let mut reader = Reader::new(&source, log);
    let top = Spot::top(&tree);
    if !top.is_mapping() {
        let help = format!("begin with `elements:` and then lines such as `{EXAMPLE}`");
        reader.error("not-a-mapping", tree.span, "a list of elements begins with the key `elements`", help);
        return None;
    }
    let group = reader.group(&top, "the list of elements".into(), &["elements"])?;
    let spots = reader.need(&group, "elements", EXAMPLE).and_then(|spot| reader.list(&spot, "entry", EXAMPLE))?;
    if spots.is_empty() || spots.len() > MOST {
        let text = format!("the list has {} elements", spots.len());
        reader.wrong_key(&group, "elements", "count-out-of-range", text, "list at least one, and at most 100 000");
        return None;
    }
    Some(spots.iter().filter_map(|spot| element(&mut reader, spot)).collect())
}

fn element(reader: &mut Reader<'_>, spot: &Spot<'_>) -> Option<Element> {
    let owner = match spot.node.get("name").map(|(_, node)| &node.content) {
        Some(Content::Scalar { text, .. }) => format!("element `{}`", tree::clip(text)),
        _ => "this element".into(),
    };
    let group = reader.group(spot, owner, &ELEMENT)?;
    let name = reader.need(&group, "name", "shelf 4").and_then(|spot| reader.text(&spot));
    let values = values(reader, &group);
    let tolerance = reader.may(&group, "tolerance").and_then(|spot| reader.tolerance(&spot));
    let rating = rating::read(reader, &group);
    if rating.full_to.zip(rating.zero_at).is_some_and(|(full, zero)| full >= zero) {
        let text = format!("`rating` of {}: nothing is borne at a temperature at which all is", group.owner);
        reader.wrong_key(&group, "rating", "derating-order", text, "`zero_at` has to be above `full_to`");
    }
    let mass = optional(reader, &group, "mass");
    let price = reader.may(&group, "price").and_then(|spot| reader.number(&spot));
    Some(Element { name: name?, values: values?, tolerance, rating, mass, price })
}

fn values(reader: &mut Reader<'_>, group: &Group<'_>) -> Option<Values> {
    let given = group.given(&["value", "series"]);
    if given.len() != 1 {
        let code = if given.is_empty() { "missing-key" } else { "keys-exclude-each-other" };
        let text =
            format!("{} has {} `value` and `series`", group.owner, if given.is_empty() { "neither" } else { "both" });
        let help = "write `value: 22 kohm`, or `series: E24` with `from: 10 ohm` and `to: 1 Mohm`";
        reader.wrong_key(group, given.first().copied().unwrap_or(""), code, text, help);
        return None;
    }
    if group.has("value") {
        for key in group.given(&["from", "to"]) {
            let text = format!("{} has one value, and `{key}`", group.owner);
            reader.wrong_key(group, key, "keys-exclude-each-other", text, "leave it out, or write `series`");
        }
        return reader.may(group, "value").and_then(|spot| reader.quantity(&spot)).map(Values::One);
    }
    let words = Series::ALL.map(|series| (series.name(), series));
    let series = reader.may(group, "series").and_then(|spot| reader.word(&spot, &words));
    let from = reader.need(group, "from", "10 ohm").and_then(|spot| reader.quantity::<Resistance>(&spot));
    let to = reader.need(group, "to", "1 Mohm").and_then(|spot| reader.quantity::<Resistance>(&spot));
    let (series, from, to) = (series?, from?, to?);
    if from.si() > to.si() {
        let text = format!("{}: `from` is above `to`", group.owner);
        reader.wrong_key(group, "from", "bad-figure", text, "write the lowest value first");
        return None;
    }
    Some(Values::Preferred { series, from, to })
}

/// A CSV as the tree that its YAML form would give: one mapping per line, ratings gathered under `rating`.
fn from_csv(source: &Source, log: &mut Log) -> Option<Rc<Node>> {
    let mut reader = csv::ReaderBuilder::new().trim(csv::Trim::All).flexible(false).from_reader(source.text.as_bytes());
    let whole = |line: usize| Span { line, column: 1, length: source.line(line).chars().count().max(1) };
    let mut refuse = |line: usize, text: String| {
        let help = "the first line names the columns; fields with a comma stand in double quotes";
        log.push(source.error("csv-syntax", whole(line), text, help));
    };
    let columns: Vec<String> = match reader.headers() {
        Ok(headers) => headers.iter().map(str::to_string).collect(),
        Err(e) => {
            refuse(1, format!("the line of columns can't be read: {e}"));
            return None;
        }
    };
    let mut entries = Vec::new();
    for record in reader.records() {
        match record {
            Ok(record) => {
                let line = record.position().map_or(1, |p| usize::try_from(p.line()).unwrap_or(1));
                entries.push(Rc::new(entry(source, line, &columns, &record)));
            }
            Err(e) => {
                let line = e.position().map_or(1, |p| usize::try_from(p.line()).unwrap_or(1));
                let text = match e.kind() {
                    csv::ErrorKind::UnequalLengths { expected_len, len, .. } => {
                        format!("this line has {len} fields, and {expected_len} columns are named")
                    }
                    _ => format!("this line can't be read: {e}"),
                };
                refuse(line, text);
            }
        }
    }
    let key = Key { text: "elements".into(), span: whole(1) };
    let list = Rc::new(Node::made(Content::Sequence(entries), whole(1)));
    Some(Rc::new(Node::made(Content::Mapping(vec![(key, list)]), whole(1))))
}

/// One line as a mapping; empty fields are keys that are not there.
fn entry(source: &Source, line: usize, columns: &[String], record: &csv::StringRecord) -> Node {
    let text = source.line(line);
    let mut after = 0;
    let (mut own, mut rating, mut overload) = (Vec::new(), Vec::new(), Vec::new());
    for (column, field) in columns.iter().zip(record) {
        if field.is_empty() {
            continue;
        }
        // Where the field stands: fields come in the order of the line.
        let at = text.get(after..).and_then(|rest| rest.find(field)).map_or(0, |found| after + found);
        after = at + field.len();
        let first = text.get(..at).map_or(1, |before| before.chars().count() + 1);
        let span = Span { line, column: first, length: field.chars().count() };
        let value = Rc::new(Node::made(Content::Scalar { text: field.to_string(), plain: true }, span));
        let nested = OVERLOAD.iter().find(|(name, _)| name == column).map(|(_, key)| *key);
        let list = if nested.is_some() {
            &mut overload
        } else if RATING.contains(&column.as_str()) {
            &mut rating
        } else {
            &mut own
        };
        list.push((Key { text: nested.unwrap_or(column).to_string(), span }, value));
    }
    let span = Span { line, column: 1, length: text.chars().count().max(1) };
    let group = |entries| Rc::new(Node::made(Content::Mapping(entries), span));
    if !overload.is_empty() {
        rating.push((Key { text: "overload".into(), span }, group(overload)));
    }
    if !rating.is_empty() {
        own.push((Key { text: "rating".into(), span }, group(rating)));
    }
    Node::made(Content::Mapping(own), span)
}

#[cfg(test)]
mod tests {
    use super::*;

    fn problems(name: &str, text: &str) -> Vec<(String, usize, usize)> {
        let findings = read_stock(name, text.as_bytes()).map_or_else(|e| e, |found| panic!("{found:?}"));
        let place = |f: &crate::finding::Finding| f.place.as_ref().map_or((0, 0), |p| (p.line, p.column));
        findings.as_slice().iter().map(|f| (f.code.to_string(), place(f).0, place(f).1)).collect()
    }

    #[test]
    fn yaml_and_csv_say_the_same() {
        let yaml = "elements:\n  - {name: shelf 4, value: 22 kohm, tolerance: 5 %, mass: 50 g, price: 2.4,\n     rating: \
                    {power: 25 W, full_to: 25 °C, zero_at: 275 °C, voltage: 750 V, pulse: 400 J, overload: {times: 5, \
                    for: 5 s}, thermal_time: 90 s}}\n  - {name: films, series: E12, from: 1 kohm, to: 10 kohm}\n";
        let csv = "name,value,series,from,to,tolerance,power,full_to,zero_at,voltage,pulse,overload_times,overload_for,\
                   thermal_time,mass,price\nshelf 4,22 kohm,,,,5 %,25 W,25 °C,275 °C,750 V,400 J,5,5 s,90 s,50 g,2.4\n\
                   films,,E12,1 kohm,10 kohm,,,,,,,,,,,\n";
        let read = |name: &str, text: &str| read_stock(name, text.as_bytes()).unwrap_or_else(|e| panic!("{e:?}"));
        assert_eq!(read("a.yaml", yaml), read("a.CSV", csv));
    }

    #[test]
    fn the_generic_elements_are_read_and_called_generic() {
        let found = read_stock("generic", crate::data::generic_stock().as_bytes()).unwrap_or_else(|e| panic!("{e:?}"));
        assert!(found.len() > 3 && found.iter().all(|e| e.name.starts_with("generic") && e.rating.power.is_some()));
    }

    #[test]
    fn what_is_wrong_has_its_line_and_column() {
        let csv = "name,value,power\nshelf 4,22,25 W\nshelf 5,22 kohm,5 V\nshelf 6,1 kohm\n";
        let found = problems("a.csv", csv);
        assert!(found.contains(&("bad-quantity".into(), 2, 9)), "{found:?}");
        assert!(found.contains(&("bad-quantity".into(), 3, 17)), "{found:?}");
        assert!(found.contains(&("csv-syntax".into(), 4, 1)), "{found:?}");
        let yaml = "elements:\n  - {name: a}\n  - {name: b, series: E24, from: 2 ohm, to: 1 ohm}\n  - {nam: c, value: 1 ohm}\n";
        let codes: Vec<String> = problems("a.yaml", yaml).into_iter().map(|p| p.0).collect();
        assert_eq!(codes, ["missing-key", "bad-figure", "missing-key", "unknown-key"]);
        assert_eq!(problems("a.yaml", "elements: []\n")[0].0, "count-out-of-range");
    }
}
