//! The document and the way from its elements back to lines of the text.

use std::collections::HashMap;

use roxmltree::{Document, Node, ParsingOptions};

use super::shape::Flaw;
use crate::error::{Error, Kind};

/// The namespace of SVG elements.
pub(super) const SVG: &str = "http://www.w3.org/2000/svg";

/// A parsed document with its text.
pub(super) struct Source<'a> {
    pub(super) document: &'a Document<'a>,
    text: &'a str,
    /// The byte at which each line starts.
    lines: Vec<usize>,
    ids: HashMap<&'a str, Node<'a, 'a>>,
}

/// Parses XML; entities that multiply beyond reason are refused.
pub(super) fn parse(text: &str) -> Result<Document<'_>, Error> {
    let options = ParsingOptions { allow_dtd: true, ..ParsingOptions::default() };
    Document::parse_with_options(text, options).map_err(|error| {
        let (what, line) = match error {
            roxmltree::Error::UnexpectedEndOfStream | roxmltree::Error::UnclosedRootNode => {
                ("the XML is cut short: the file ends inside an element".to_owned(), text.lines().count())
            }
            error => (format!("the XML is broken: {error}"), error.pos().row as usize),
        };
        let remedy = "save the drawing again, or open it in a browser to see what is left of it";
        Error::new(Kind::Input, what).on_line(line).remedy(remedy)
    })
}

impl<'a> Source<'a> {
    pub(super) fn new(document: &'a Document<'a>) -> Self {
        let text = document.input_text();
        let lines = std::iter::once(0).chain(text.match_indices('\n').map(|(at, _)| at + 1)).collect();
        let mut ids = HashMap::new();
        for node in document.descendants() {
            if let Some(id) = node.attribute("id") {
                ids.entry(id).or_insert(node);
            }
        }
        Self { document, text, lines, ids }
    }

    /// The element that a reference of this file names.
    pub(super) fn target(&self, href: &str) -> Option<Node<'a, 'a>> {
        self.ids.get(href.trim().strip_prefix('#')?).copied()
    }

    /// The line, from 1, of a byte of the text.
    fn line_at(&self, byte: usize) -> usize {
        self.lines.partition_point(|&start| start <= byte)
    }

    /// The line on which an element starts.
    pub(super) fn line(&self, node: Node<'a, 'a>) -> usize {
        self.line_at(node.range().start)
    }

    /// The error for a flaw of an element.
    pub(super) fn error(&self, node: Node<'a, 'a>, flaw: &Flaw) -> Error {
        let name = node.tag_name().name();
        let id = node.attribute("id").map(|id| format!(" \"{id}\"")).unwrap_or_default();
        let line = flaw.at.and_then(|(name, left)| self.line_in(node, name, left));
        Error::new(Kind::Input, format!("{name}{id}: {}", flaw.what))
            .on_line(line.unwrap_or_else(|| self.line(node)))
            .remedy("correct the element, or delete it and draw it again")
    }

    /// The line in an attribute's value with `left` bytes of it to come. Counted from the end, where no white space
    /// was trimmed; entities in a value may put it off by their length.
    fn line_in(&self, node: Node<'a, 'a>, name: &str, left: usize) -> Option<usize> {
        let range = node.attribute_node(name)?.range_value();
        let value = self.text.get(range.clone())?.trim_end();
        Some(self.line_at(range.start + value.len().saturating_sub(left)))
    }

    /// True for an element that SVG defines, or one without a namespace where the root has none.
    pub(super) fn is_svg(&self, node: Node<'a, 'a>) -> bool {
        match node.tag_name().namespace() {
            Some(namespace) => namespace == SVG,
            None => self.document.root_element().tag_name().namespace().is_none(),
        }
    }
}
