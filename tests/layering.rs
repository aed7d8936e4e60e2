//! The house: rooms know only what lies below them, only the program touches the terminal, files stay small, and the
//! top level holds what it is meant to hold.

#[path = "layering/source.rs"]
mod source;

use source::{Source, without_comments, without_tests, words};
use std::collections::BTreeSet;
use std::path::{Path, PathBuf};

/// Rooms from the ground up, and what each knows; a room also knows what those know.
const ROOMS: [(&str, &[&str]); 12] = [
    ("quantity", &[]),
    ("finding", &[]),
    ("circuit", &[]),
    ("data", &["quantity"]),
    ("bank", &["quantity", "finding", "data", "circuit"]),
    ("discharge", &["bank", "circuit"]),
    ("check", &["discharge"]),
    ("plan", &["check"]),
    ("size", &["plan"]),
    ("field", &["plan"]),
    ("report", &["plan", "size", "field"]),
    ("cli", &["report"]),
];

/// Lines of non-test code that a file may have.
const MOST_LINES: usize = 500;

const TOP_LEVEL: [&str; 9] =
    ["Cargo.lock", "Cargo.toml", "DEVELOPERS.md", "LICENSE", "README.md", "SAFETY.md", "data", "src", "tests"];

/// The rooms that `room` may use.
fn known(room: &str) -> BTreeSet<&'static str> {
    let Some((_, knows)) = ROOMS.iter().find(|(name, _)| *name == room) else { return BTreeSet::new() };
    knows.iter().flat_map(|below| known(below).into_iter().chain([*below])).collect()
}

/// Files that a `#[cfg(test)] mod name;` names: all of them is test code.
fn is_test_file(file: &str) -> bool {
    let parent = Path::new(file).parent().expect("a folder");
    let name = Path::new(file).file_stem().expect("a name").to_string_lossy().into_owned();
    let own = [parent.join("mod.rs"), parent.with_extension("rs")];
    let root = Path::new(env!("CARGO_MANIFEST_DIR")).join("src");
    own.iter().filter_map(|path| std::fs::read_to_string(root.join(path)).ok()).any(|text| {
        let text = without_comments(&text);
        text.contains(&format!("mod {name};")) && !without_tests(&text).contains(&format!("mod {name};"))
    })
}

fn files_below(folder: &Path, found: &mut Vec<PathBuf>) {
    for entry in std::fs::read_dir(folder).expect("a folder") {
        let path = entry.expect("an entry").path();
        if path.is_dir() {
            files_below(&path, found);
        } else if path.extension().is_some_and(|e| e == "rs") {
            found.push(path);
        }
    }
}

/// Every file of `src` that is not all test code.
fn sources() -> Vec<Source> {
    let root = Path::new(env!("CARGO_MANIFEST_DIR")).join("src");
    let mut paths = Vec::new();
    files_below(&root, &mut paths);
    paths.sort();
    let named = paths.iter().map(|path| {
        let file = path.strip_prefix(&root).expect("below src").to_string_lossy().replace('\\', "/");
        (file, std::fs::read_to_string(path).expect("UTF-8"))
    });
    let sources: Vec<Source> =
        named.filter(|(file, _)| !is_test_file(file)).map(|(file, text)| Source::new(&file, &text)).collect();
    assert!(sources.len() > 50, "{} files", sources.len());
    sources
}

/// Arrows that run up, or between rooms that don't know each other.
fn arrows_up(source: &Source) -> Vec<String> {
    let Some(room) = source.room() else { return Vec::new() };
    let known = known(room);
    let is_room = |name: &String| ROOMS.iter().any(|(room, _)| room == name);
    let wrong = source.reaches().into_iter().filter(|name| is_room(name) && name != room);
    wrong.filter(|name| !known.contains(name.as_str())).map(|name| format!("{}: {name}", source.file)).collect()
}

#[test]
fn rooms_know_only_what_lies_below_them() {
    let arrows: Vec<String> = sources().iter().flat_map(arrows_up).collect();
    assert!(arrows.is_empty(), "{arrows:#?}");
    let rooms: BTreeSet<String> = sources().iter().filter_map(|s| s.room().map(String::from)).collect();
    let strangers: Vec<_> = rooms.iter().filter(|room| ROOMS.iter().all(|(name, _)| name != room)).collect();
    assert!(strangers.is_empty(), "rooms that the list does not have: {strangers:?}");
    // The check sees arrows at all: most of the house stands on the quantities.
    assert!(sources().iter().filter(|s| s.reaches().contains("quantity")).count() > 10);
}

#[test]
fn only_the_program_touches_the_standard_streams() {
    let names = |source: &Source| {
        let words = words(&source.code);
        let uses_io = words.windows(3).any(|w| w[0] == "std" && w[2] == "io");
        let streams = ["stdin", "stdout", "stderr"];
        let called = words.windows(2).any(|w| streams.contains(&w[0].as_str()) && w[1] == "(");
        let pathed = words.windows(3).any(|w| w[0] == "io" && w[1] == "::" && streams.contains(&w[2].as_str()));
        uses_io && called || pathed
    };
    let named: Vec<String> = sources().iter().filter(|s| names(s)).map(|s| s.file.clone()).collect();
    // The terminal room asks whether standard output is a terminal; it writes nothing.
    assert_eq!(named, ["cli/terminal.rs", "main.rs"]);
}

#[test]
fn files_stay_under_five_hundred_lines_of_code() {
    let long: Vec<String> = sources()
        .iter()
        .map(|s| (s.file.clone(), s.code.lines().count()))
        .filter(|(_, lines)| *lines >= MOST_LINES)
        .map(|(file, lines)| format!("{file}: {lines}"))
        .collect();
    assert!(long.is_empty(), "{long:?}: ask whether two ideas share a room");
}

#[test]
fn the_top_level_is_exactly_that_of_the_house() {
    let entries = std::fs::read_dir(env!("CARGO_MANIFEST_DIR")).expect("the repository");
    let names = entries.map(|e| e.expect("an entry").file_name().to_string_lossy().into_owned());
    let mut found: Vec<String> = names.filter(|name| !name.starts_with('.') && name != "target").collect();
    found.sort();
    assert_eq!(found, TOP_LEVEL);
}

#[test]
fn a_planted_arrow_that_runs_up_is_caught_however_it_is_written() {
    for arrow in [
        "use crate::plan::Plan;",
        "pub use crate::plan;",
        "use crate::{quantity::Time, plan::{Plan, Options}};",
        "use crate::{\n    quantity,\n    plan,\n};",
        "fn f() -> crate::plan::Plan { loop {} }",
        "fn f() { let x = crate :: plan :: plan; }",
        "use super::super::plan;",
        "use super::super::{bank, plan::Plan};",
        "#[cfg(test)]\nmod tests { use crate::cli; }\nuse crate::plan;",
        "#[cfg(test)]\nuse crate::cli;\nuse crate::plan;",
        "const X: &str = \"{\"; use crate::plan; // }",
        "const X: char = '\"'; use crate::plan; const Y: char = '\"';",
        "fn f<'a>(x: &'a str) { crate::plan::f(x) }",
    ] {
        let source = Source::new("bank/file.rs", arrow);
        assert_eq!(arrows_up(&source), ["bank/file.rs: plan"], "{arrow}");
    }
}

#[test]
fn rooms_of_one_level_do_not_know_each_other_and_what_is_below_may_be_used() {
    for (file, code, arrows) in [
        ("quantity/mod.rs", "use crate::finding::Findings;", 1),
        ("data/mod.rs", "use crate::finding::Findings;", 1),
        ("bank/mod.rs", "use crate::discharge::Model;", 1),
        ("bank/mod.rs", "use crate::circuit::Network;", 0),
        ("check/notes.rs", "use crate::{circuit::Network, quantity::Time, check::Pair};", 0),
        ("cli/mod.rs", "use crate::{data, report, plan, bank::file::read};", 0),
        ("bank/file/mod.rs", "use super::super::bank::Bank; use super::{Bank, validate}; use self::tree;", 0),
        ("bank/mod.rs", "//! [`crate::plan`]\n/* crate::plan */ const X: &str = r#\"crate::plan\"#;", 0),
        ("bank/mod.rs", "#[cfg(test)]\nmod tests {\n    use crate::cli;\n    fn f() { {} }\n}\n", 0),
        ("lib.rs", "pub mod plan; pub use crate::plan::Plan;", 0),
    ] {
        assert_eq!(arrows_up(&Source::new(file, code)).len(), arrows, "{file}: {code}");
    }
}
