//! Factor graphs as GraphML (<http://graphml.graphdrawing.org>), written word by word.

use crate::language::{Language, WordId};
use quick_xml::Writer;
use quick_xml::events::{BytesDecl, BytesEnd, BytesStart, BytesText, Event};
use std::io::{self, Write};

/// Attributes of the GraphML file: id, owner, name, type.
const KEYS: [(&str, &str, &str, &str); 4] = [
    ("word", "node", "word", "string"),
    ("left", "node", "left_extensions", "int"),
    ("right", "node", "right_extensions", "int"),
    ("letter", "edge", "letter", "string"),
];

/// Writes Γ_order. Vertices carry their word and the numbers of their extensions, arcs their letter.
///
/// # Errors
/// Those of the writer.
///
/// # Panics
/// Unless the language reaches length `order + 1`.
pub fn write_graphml(
    language: &Language,
    order: usize,
    letters: &[char],
    out: impl Write,
) -> io::Result<()> {
    let mut xml = Writer::new_with_indent(out, b' ', 1);
    xml.write_event(Event::Decl(BytesDecl::new("1.0", Some("UTF-8"), None)))?;
    let mut root = BytesStart::new("graphml");
    root.push_attribute(("xmlns", "http://graphml.graphdrawing.org/xmlns"));
    xml.write_event(Event::Start(root))?;
    for (id, owner, name, kind) in KEYS {
        let mut key = BytesStart::new("key");
        for attribute in [
            ("id", id),
            ("for", owner),
            ("attr.name", name),
            ("attr.type", kind),
        ] {
            key.push_attribute(attribute);
        }
        xml.write_event(Event::Empty(key))?;
    }
    let mut graph = BytesStart::new("graph");
    graph.push_attribute(("id", format!("order{order}").as_str()));
    graph.push_attribute(("edgedefault", "directed"));
    xml.write_event(Event::Start(graph))?;
    let left = language.left_extension_counts(order);
    let right = language.right_extension_counts(order);
    for v in 0..language.count(order) {
        let mut node = BytesStart::new("node");
        node.push_attribute(("id", format!("v{v}").as_str()));
        xml.write_event(Event::Start(node))?;
        let word: String = spell(language, order, v as WordId, letters);
        data(&mut xml, "word", &word)?;
        data(&mut xml, "left", &left[v].to_string())?;
        data(&mut xml, "right", &right[v].to_string())?;
        xml.write_event(Event::End(BytesEnd::new("node")))?;
    }
    for arc in 0..language.count(order + 1) as WordId {
        let mut edge = BytesStart::new("edge");
        edge.push_attribute((
            "source",
            format!("v{}", language.prefix(order + 1, arc)).as_str(),
        ));
        edge.push_attribute((
            "target",
            format!("v{}", language.suffix(order + 1, arc)).as_str(),
        ));
        xml.write_event(Event::Start(edge))?;
        let letter = letters[language.last_letter(order + 1, arc) as usize];
        data(&mut xml, "letter", &letter.to_string())?;
        xml.write_event(Event::End(BytesEnd::new("edge")))?;
    }
    xml.write_event(Event::End(BytesEnd::new("graph")))?;
    xml.write_event(Event::End(BytesEnd::new("graphml")))?;
    xml.into_inner().write_all(b"\n")
}

fn data(xml: &mut Writer<impl Write>, key: &str, text: &str) -> io::Result<()> {
    let mut element = BytesStart::new("data");
    element.push_attribute(("key", key));
    xml.write_event(Event::Start(element))?;
    xml.write_event(Event::Text(BytesText::new(text)))?;
    xml.write_event(Event::End(BytesEnd::new("data")))
}

/// A word in the letters of its table.
pub fn spell(language: &Language, length: usize, word: WordId, letters: &[char]) -> String {
    language
        .word(length, word)
        .iter()
        .map(|l| letters[*l as usize])
        .collect()
}
