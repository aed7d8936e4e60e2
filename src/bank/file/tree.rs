//! YAML events to a small tree that remembers where everything stands.
//!
//! Scalars keep the text that was typed, so that a tag `0012` or an id `NO` stays what it is. What a bank file has no
//! use for (tags, merge keys, several documents) is refused, and what could blow up (depth, aliases) is bounded.

use super::log::Log;
use super::source::{Source, Span};
use super::syntax;
use saphyr_parser::{Event, Parser, ScalarStyle};
use std::collections::HashMap;
use std::rc::Rc;

/// Deeper nesting is refused.
pub(super) const MAX_DEPTH: usize = 64;

/// Aliases may stand for this many values together; a few lines of them could otherwise stand for billions.
const MAX_ALIASED: usize = 20_000;

/// A file with more values is refused: no plant has such a bank, and no page would hold its plan.
const MAX_VALUES: usize = 500_000;

/// A value and where it stands.
#[derive(Debug)]
pub(super) struct Node {
    pub(super) content: Content,
    pub(super) span: Span,
    /// Line and column just past its last character; of a list or mapping in lines of its own, somewhere after that.
    pub(super) end: (usize, usize),
    /// Levels below this one.
    height: usize,
    /// Values in it, itself included.
    size: usize,
}

/// What a value is.
#[derive(Debug)]
pub(super) enum Content {
    /// Text; `plain` where it has no quotes and is no block.
    Scalar { text: String, plain: bool },
    /// Entries in order.
    Sequence(Vec<Rc<Node>>),
    /// Keys and values in order, each key once.
    Mapping(Vec<(Key, Rc<Node>)>),
    /// Something that was reported already.
    Refused,
}

/// A key and where it stands.
#[derive(Debug)]
pub(super) struct Key {
    pub(super) text: String,
    pub(super) span: Span,
}

impl Node {
    /// A value that was read from something else than YAML.
    pub(super) fn made(content: Content, span: Span) -> Self {
        Node { content, span, end: (span.line, span.column + span.length), height: 0, size: 1 }
    }

    /// True for a value that is not there: nothing, `~` or `null` without quotes.
    pub(super) fn is_null(&self) -> bool {
        match &self.content {
            Content::Scalar { text, plain } => *plain && matches!(text.as_str(), "" | "~" | "null" | "Null" | "NULL"),
            _ => false,
        }
    }

    /// The value of a key of a mapping.
    pub(super) fn get(&self, key: &str) -> Option<(&Key, &Rc<Node>)> {
        match &self.content {
            Content::Mapping(entries) => entries.iter().find(|(k, _)| k.text == key).map(|(k, v)| (k, v)),
            _ => None,
        }
    }
}

/// Reads the one document of a source. Errors go to `log`; `None` where nothing can be made of it.
pub(super) fn parse(source: &Source, log: &mut Log) -> Option<Rc<Node>> {
    let mut builder =
        Builder { source, log, open: vec![], root: None, anchors: HashMap::new(), aliased: 0, end: (1, 1) };
    let mut parser = Parser::new_from_str(&source.text);
    let (mut documents, mut values) = (0, 0);
    loop {
        let (event, span) = match parser.next_event()? {
            Ok((event, span)) => {
                builder.end = (span.end.line(), span.end.col() + 1);
                (event, from_parser(source, span))
            }
            Err(e) => {
                builder.log.push(syntax::explain(source, &e, MAX_DEPTH));
                return None;
            }
        };
        match event {
            Event::StreamEnd => break,
            Event::DocumentStart(_) => {
                documents += 1;
                if documents > 1 {
                    let text = "a second document begins here, and a bank file is one document";
                    let help = "write one bank to a file; `---` may stand at the top only";
                    builder.log.push(source.error("several-documents", span, text, help));
                    return None;
                }
            }
            event => {
                values += 1;
                if values > MAX_VALUES {
                    let text = format!("the file has more than {MAX_VALUES} values");
                    builder.log.push(source.error("too-many-values", span, text, "write one bank to a file"));
                    return None;
                }
                builder.take(event, span)?;
            }
        }
    }
    builder.root.take()
}

/// The parser's span in lines and columns from 1. What runs over several lines is shown to the end of its first.
fn from_parser(source: &Source, span: saphyr_parser::Span) -> Span {
    let (line, column) = (span.start.line(), span.start.col() + 1);
    let length = if span.end.line() == line {
        span.end.col().saturating_sub(span.start.col())
    } else {
        source.line(line).chars().count().saturating_sub(column - 1)
    };
    Span { line, column, length: length.max(1) }
}

/// A sequence or mapping that is not complete yet.
struct Open {
    anchor: usize,
    span: Span,
    height: usize,
    size: usize,
    items: Items,
}

enum Items {
    Sequence(Vec<Rc<Node>>),
    Mapping { entries: Vec<(Key, Rc<Node>)>, lines: HashMap<String, usize>, key: Option<Slot> },
}

/// Where the value that comes next goes.
enum Slot {
    Under(Key),
    /// Its key was refused.
    Nowhere,
}

struct Builder<'a> {
    source: &'a Source,
    log: &'a mut Log,
    open: Vec<Open>,
    root: Option<Rc<Node>>,
    anchors: HashMap<usize, Rc<Node>>,
    aliased: usize,
    /// Where the event that is being taken ends.
    end: (usize, usize),
}

impl Builder<'_> {
    /// Takes one event. `None` where reading has to stop; the log then says why.
    fn take(&mut self, event: Event<'_>, span: Span) -> Option<()> {
        match event {
            Event::Scalar(text, style, anchor, tag) => {
                self.no_tag(tag.is_some(), span);
                self.scalar(text.into_owned(), style == ScalarStyle::Plain, anchor, span);
            }
            Event::SequenceStart(anchor, tag) => {
                self.no_tag(tag.is_some(), span);
                self.begin(anchor, span, Items::Sequence(vec![]))?;
            }
            Event::MappingStart(anchor, tag) => {
                self.no_tag(tag.is_some(), span);
                let items = Items::Mapping { entries: vec![], lines: HashMap::new(), key: None };
                self.begin(anchor, span, items)?;
            }
            Event::SequenceEnd | Event::MappingEnd => self.end(),
            Event::Alias(anchor) => self.alias(anchor, span)?,
            _ => {}
        }
        Some(())
    }

    fn refuse(&mut self, code: &'static str, span: Span, text: &str, help: &str) {
        self.log.push_with(|| self.source.error(code, span, text, help));
    }

    fn no_tag(&mut self, tagged: bool, span: Span) {
        if tagged {
            let help = "leave out the word with the exclamation mark; ids and tags are text as they stand";
            self.refuse("tag-refused", span, "a YAML tag has no meaning in a bank file", help);
        }
    }

    /// True where the innermost open mapping waits for a key.
    fn at_key(&self) -> bool {
        matches!(self.open.last(), Some(Open { items: Items::Mapping { key: None, .. }, .. }))
    }

    fn scalar(&mut self, text: String, plain: bool, anchor: usize, span: Span) {
        if !self.at_key() {
            let content = Content::Scalar { text, plain };
            return self.complete(Node { content, span, end: self.end, height: 0, size: 1 }, anchor);
        }
        let slot = if plain && text == "<<" {
            let help = "write the keys out where they belong";
            self.refuse("merge-key-refused", span, "`<<` (a merge of mappings) is not taken in a bank file", help);
            Slot::Nowhere
        } else {
            self.key(text, span)
        };
        if let Some(Open { items: Items::Mapping { key, .. }, .. }) = self.open.last_mut() {
            *key = Some(slot);
        }
    }

    /// A key, or nowhere where the mapping has it already.
    fn key(&mut self, text: String, span: Span) -> Slot {
        let Some(Open { items: Items::Mapping { lines, .. }, .. }) = self.open.last_mut() else { return Slot::Nowhere };
        if let Some(first) = lines.get(&text) {
            let problem = format!("the key `{}` stands here a second time; the first is in line {first}", clip(&text));
            self.refuse("duplicate-key", span, &problem, "keep one of the two");
            return Slot::Nowhere;
        }
        lines.insert(text.clone(), span.line);
        Slot::Under(Key { text, span })
    }

    fn begin(&mut self, anchor: usize, span: Span, items: Items) -> Option<()> {
        if self.open.len() >= MAX_DEPTH {
            let text = format!("values are nested more than {MAX_DEPTH} deep here");
            self.refuse("nested-too-deep", span, &text, syntax::DEPTH_HELP);
            return None;
        }
        // A flow collection may run over many lines; its first character is enough to find it by.
        self.open.push(Open { anchor, span: Span { length: 1, ..span }, height: 0, size: 1, items });
        Some(())
    }

    fn end(&mut self) {
        let Some(Open { anchor, span, height, size, items }) = self.open.pop() else { return };
        let content = match items {
            Items::Sequence(entries) => Content::Sequence(entries),
            Items::Mapping { entries, .. } => Content::Mapping(entries),
        };
        self.complete(Node { content, span, end: self.end, height: height + 1, size }, anchor);
    }

    fn alias(&mut self, anchor: usize, span: Span) -> Option<()> {
        let Some(node) = self.anchors.get(&anchor).cloned() else {
            let help = "write the values out";
            self.refuse("alias-refused", span, "this alias stands inside the value that it repeats", help);
            self.complete(Node { content: Content::Refused, span, end: self.end, height: 0, size: 1 }, 0);
            return Some(());
        };
        self.aliased += node.size;
        if self.aliased > MAX_ALIASED {
            let text = format!("the aliases of this file stand for more than {MAX_ALIASED} values");
            self.refuse("alias-refused", span, &text, "write the values out");
            return None;
        }
        if self.open.len() + node.height > MAX_DEPTH {
            let text = format!("values are nested more than {MAX_DEPTH} deep with this alias");
            self.refuse("nested-too-deep", span, &text, syntax::DEPTH_HELP);
            return None;
        }
        self.place(node);
        Some(())
    }

    fn complete(&mut self, node: Node, anchor: usize) {
        let node = Rc::new(node);
        if anchor > 0 {
            self.anchors.insert(anchor, Rc::clone(&node));
        }
        self.place(node);
    }

    /// Puts a complete value where it belongs.
    fn place(&mut self, node: Rc<Node>) {
        let Some(open) = self.open.last_mut() else {
            self.root = Some(node);
            return;
        };
        open.height = open.height.max(node.height);
        open.size += node.size;
        match &mut open.items {
            Items::Sequence(entries) => entries.push(node),
            Items::Mapping { entries, key, .. } => match key.take() {
                Some(Slot::Under(key)) => entries.push((key, node)),
                Some(Slot::Nowhere) => {}
                None => {
                    *key = Some(Slot::Nowhere);
                    let help = "a key is a word before a colon";
                    self.refuse("key-not-text", node.span, "a list, a mapping or an alias can't be a key", help);
                }
            },
        }
    }
}

/// A word for a message, cut where it is long.
pub(super) fn clip(text: &str) -> String {
    const LONGEST: usize = 60;
    if text.chars().count() <= LONGEST {
        return text.to_string();
    }
    text.chars().take(LONGEST).chain(['…']).collect()
}
