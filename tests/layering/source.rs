//! A source file as text without comments, strings and `#[cfg(test)]` items, so that a link in a comment is no arrow
//! and a test may reach anywhere; and the rooms that its paths lead to.

use std::collections::BTreeSet;

/// A file of `src` and its path in modules: `src/bank/file/mod.rs` is `["bank", "file"]`.
pub struct Source {
    pub file: String,
    modules: Vec<String>,
    pub code: String,
}

impl Source {
    pub fn new(file: &str, text: &str) -> Self {
        let trimmed = file.strip_suffix("/mod.rs").or(file.strip_suffix(".rs")).unwrap_or(file);
        let modules = trimmed.split('/').filter(|m| !["lib", "main"].contains(m)).map(String::from).collect();
        Source { file: file.into(), modules, code: without_tests(&without_comments(text)) }
    }

    /// The room, where it is in one; `lib.rs` and `main.rs` belong to none.
    pub fn room(&self) -> Option<&str> {
        self.modules.first().map(String::as_str)
    }

    /// Names that stand right after `crate::` or after as many `super::` as lead to the top.
    pub fn reaches(&self) -> BTreeSet<String> {
        let words = words(&self.code);
        let mut found = BTreeSet::new();
        let mut at = 0;
        while at < words.len() {
            let start = at;
            let mut depth = if words[at] == "crate" { Some(0) } else { None };
            while words[at] == "super" && words.get(at + 1).is_some_and(|w| w == "::") {
                depth = Some(depth.unwrap_or(self.modules.len()).saturating_sub(1));
                at += 2;
            }
            if words[start] == "crate" && words.get(at + 1).is_some_and(|w| w == "::") {
                at += 2;
            }
            if depth == Some(0) && at > start {
                found.extend(first_names(&words[at..]));
            }
            at = at.max(start + 1);
        }
        found
    }
}

/// The first name of a path, or the first name of each path of a group: `{a::b, c}` gives a and c.
fn first_names(words: &[String]) -> Vec<String> {
    if words.first().is_some_and(|w| w != "{") {
        return vec![words[0].clone()];
    }
    let (mut names, mut depth, mut due) = (Vec::new(), 0, false);
    for word in words {
        match word.as_str() {
            "{" => (depth, due) = (depth + 1, depth == 0),
            "}" if depth == 1 => break,
            "}" => depth -= 1,
            "," => due = depth == 1,
            name if due => {
                names.push(name.to_string());
                due = false;
            }
            _ => {}
        }
    }
    names
}

/// Identifiers, `::`, and every other character on its own.
pub fn words(code: &str) -> Vec<String> {
    let mut list: Vec<String> = Vec::new();
    let mut characters = code.chars().peekable();
    while let Some(c) = characters.next() {
        let in_name = |c: char| c.is_alphanumeric() || c == '_';
        if in_name(c) {
            let mut name = String::from(c);
            while let Some(next) = characters.next_if(|c| in_name(*c)) {
                name.push(next);
            }
            list.push(name);
        } else if c == ':' && characters.next_if_eq(&':').is_some() {
            list.push("::".into());
        } else if !c.is_whitespace() {
            list.push(c.into());
        }
    }
    list
}

/// The text with comments and the insides of strings and characters blanked; lines stay where they are.
pub fn without_comments(text: &str) -> String {
    let bytes: Vec<char> = text.chars().collect();
    let starts = |at: usize, what: &str| what.chars().enumerate().all(|(k, c)| bytes.get(at + k) == Some(&c));
    let mut out = String::with_capacity(text.len());
    let mut at = 0;
    // Blanks everything up to `end`.
    let blank = |out: &mut String, from: usize, to: usize| {
        out.extend(bytes[from..to.min(bytes.len())].iter().map(|c| if *c == '\n' { '\n' } else { ' ' }));
    };
    while at < bytes.len() {
        let from = at;
        if starts(at, "//") {
            while at < bytes.len() && bytes[at] != '\n' {
                at += 1;
            }
            blank(&mut out, from, at);
        } else if starts(at, "/*") {
            let mut depth = 0;
            while at < bytes.len() {
                let step = if starts(at, "/*") || starts(at, "*/") { 2 } else { 1 };
                depth += i32::from(starts(at, "/*")) - i32::from(starts(at, "*/"));
                at += step;
                if depth == 0 {
                    break;
                }
            }
            blank(&mut out, from, at);
        } else if let Some(hashes) = raw_string(&bytes, at) {
            at += hashes + 2;
            let end = format!("\"{}", "#".repeat(hashes));
            while at < bytes.len() && !starts(at, &end) {
                at += 1;
            }
            at += hashes + 1;
            blank(&mut out, from, at);
        } else if bytes[at] == '"' {
            at += 1;
            while at < bytes.len() && bytes[at] != '"' {
                at += if bytes[at] == '\\' { 2 } else { 1 };
            }
            at += 1;
            blank(&mut out, from, at);
        } else if bytes[at] == '\'' && (bytes.get(at + 1) == Some(&'\\') || bytes.get(at + 2) == Some(&'\'')) {
            // A character, not a lifetime.
            at += if bytes[at + 1] == '\\' { 3 } else { 2 };
            while at < bytes.len() && bytes[at] != '\'' {
                at += 1;
            }
            at += 1;
            blank(&mut out, from, at);
        } else {
            out.push(bytes[at]);
            at += 1;
        }
    }
    out
}

/// How many `#` a raw string that begins here has.
fn raw_string(text: &[char], at: usize) -> Option<usize> {
    let in_name = at > 0 && (text[at - 1].is_alphanumeric() || text[at - 1] == '_');
    let hashes = text.get(at + 1..)?.iter().take_while(|c| **c == '#').count();
    (text[at] == 'r' && !in_name && text.get(at + 1 + hashes) == Some(&'"')).then_some(hashes)
}

/// Code without its `#[cfg(test)]` items: each up to the `;` or the closing brace that ends it.
pub fn without_tests(code: &str) -> String {
    const MARK: &str = "#[cfg(test)]";
    let mut out = String::with_capacity(code.len());
    let mut rest = code;
    while let Some(at) = rest.find(MARK) {
        out.push_str(&rest[..at]);
        let item = &rest[at..];
        let mut depth = 0i32;
        let end = item.char_indices().find(|(_, c)| {
            depth += i32::from(*c == '{') - i32::from(*c == '}');
            depth == 0 && (*c == '}' || *c == ';')
        });
        rest = &item[end.map_or(item.len(), |(k, _)| k + 1)..];
    }
    out + rest
}
