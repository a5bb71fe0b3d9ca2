//! Which declaration wins: style sheets, style attributes and presentation attributes (CSS 2, "The cascade").

use roxmltree::Node;
use simplecss::{AttributeOperator, DeclarationTokenizer, Element, PseudoClass, StyleSheet};

/// The style sheets of a document.
pub(super) struct Sheets<'a> {
    sheet: StyleSheet<'a>,
}

/// The declarations that apply to one element, the winner last.
pub(super) struct Declared<'a, 'n> {
    node: Node<'a, 'a>,
    declared: Vec<(&'n str, &'n str)>,
}

impl<'n> Sheets<'n> {
    /// Reads the sheets, in the order of the document.
    pub(super) fn new(texts: &'n [String]) -> Self {
        let mut sheet = StyleSheet::new();
        for text in texts {
            sheet.parse_more(text);
        }
        Self { sheet }
    }

    /// What is declared for an element, by rising weight: rules by specificity, the style attribute, then what is
    /// important in the same order.
    pub(super) fn declared<'a>(&'n self, node: Node<'a, 'a>) -> Declared<'a, 'n>
    where
        'a: 'n,
    {
        let mut normal = Vec::new();
        let mut important = Vec::new();
        let matching = self.sheet.rules.iter().filter(|rule| rule.selector.matches(&Selected(node)));
        let sheet = matching.flat_map(|rule| rule.declarations.iter().copied());
        let own = DeclarationTokenizer::from(node.attribute("style").unwrap_or_default());
        for d in sheet.chain(own) {
            let into = if d.important { &mut important } else { &mut normal };
            into.push((d.name, d.value));
        }
        normal.append(&mut important);
        Declared { node, declared: normal }
    }
}

impl<'a: 'n, 'n> Declared<'a, 'n> {
    /// The value of a property that has a presentation attribute of the same name.
    pub(super) fn get(&self, name: &str) -> Option<&'n str> {
        self.styled(name).or_else(|| self.node.attribute(name)).map(str::trim)
    }

    /// The value that a sheet or the style attribute gives a property.
    pub(super) fn styled(&self, name: &str) -> Option<&'n str> {
        self.declared.iter().rev().find(|(n, _)| n.eq_ignore_ascii_case(name)).map(|&(_, value)| value)
    }
}

/// The text of the style sheets that apply on a screen, and a word on what of them is not read.
pub(super) fn sheet_texts(document: &roxmltree::Document<'_>) -> (Vec<String>, Option<String>) {
    let is_css =
        |n: &Node<'_, '_>| n.attribute("type").is_none_or(|t| t.trim().eq_ignore_ascii_case("text/css"));
    let on_screen = |n: &Node<'_, '_>| {
        let media = n.attribute("media").unwrap_or_default().to_ascii_lowercase();
        media.trim().is_empty() || media.split(',').any(|m| matches!(m.trim(), "all" | "screen"))
    };
    let styles = document.descendants().filter(|n| n.is_element() && n.tag_name().name() == "style");
    let text = |n: Node<'_, '_>| n.children().filter_map(|c| c.text().map(str::to_owned)).collect::<String>();
    let texts: Vec<String> = styles.filter(|n| is_css(n) && on_screen(n)).map(text).collect();
    let linked = document.root().children().any(|n| n.pi().is_some_and(|pi| pi.target == "xml-stylesheet"));
    let unread = if linked || texts.iter().any(|t| t.contains("@import")) {
        Some("a style sheet in another file is not read: what it hides or shows is not known".to_owned())
    } else if texts.iter().any(|t| t.contains("@media")) {
        Some("style rules inside @media are not applied".to_owned())
    } else if texts
        .iter()
        .any(|t| [":not(", ":nth", ":is(", ":where(", ":last-", "~"].iter().any(|s| t.contains(s)))
    {
        Some("style rules with selectors newer than CSS 2 are not applied".to_owned())
    } else {
        None
    };
    (texts, unread)
}

/// An element as selectors see it.
struct Selected<'a>(Node<'a, 'a>);

impl Element for Selected<'_> {
    fn parent_element(&self) -> Option<Self> {
        self.0.parent_element().map(Selected)
    }

    fn prev_sibling_element(&self) -> Option<Self> {
        self.0.prev_sibling_element().map(Selected)
    }

    fn has_local_name(&self, name: &str) -> bool {
        self.0.tag_name().name() == name
    }

    fn attribute_matches(&self, local_name: &str, operator: AttributeOperator<'_>) -> bool {
        self.0.attribute(local_name).is_some_and(|value| operator.matches(value))
    }

    fn pseudo_class_matches(&self, class: PseudoClass<'_>) -> bool {
        matches!(class, PseudoClass::FirstChild) && self.0.prev_sibling_element().is_none()
    }
}
