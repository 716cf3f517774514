//! `[define]`, `[parameters]`, and the settings that override parameters.
//!
//! Names may stand in any order; a definition that leads back to itself is refused. A name that the table does
//! not use is checked as well, but in a field of its own, so that it makes no number of the table longer.

use super::read::Link;
use super::source::{Outcome, Source, kind, place_in_string};
use crate::number::Field;
use crate::table::diagnostic::Diagnostic;
use crate::table::expression::{Evaluator, ExpressionFault, name_fault, names_in};
use std::collections::BTreeSet;
use std::ops::Range;
use toml::de::{DeTable, DeValue};

/// The most names of one file: it bounds the work that chains of definitions can cause.
pub const MOST_NAMES: usize = 64;

/// A parameter and the expression that it stands for.
#[derive(Clone, Debug, PartialEq, Eq, serde::Serialize)]
pub struct Parameter {
    /// Its name.
    pub name: String,
    /// The expression: the file's, or that of a setting.
    pub expression: String,
    /// True when a setting overrides the file.
    pub set: bool,
}

/// Where an expression is written.
#[derive(Clone, Debug)]
enum Origin {
    /// At this place of the table file, as a string or an integer.
    File(Range<usize>),
    /// In a setting, from this byte on.
    Setting(String, usize),
}

#[derive(Clone, Debug)]
struct Definition {
    name: String,
    text: String,
    origin: Origin,
    is_parameter: bool,
}

/// All definitions of a file, settings applied.
#[derive(Clone, Debug, Default)]
pub(super) struct Names {
    own: Vec<Definition>,
    /// Settings of names that this file does not have: they are for its base.
    for_base: Vec<String>,
}

const SECTIONS: [&str; 2] = ["define", "parameters"];
/// Keys whose strings are expressions.
const NUMERIC: [&str; 8] = [
    "corners", "triangle", "regular", "outline", "form", "holes", "stretch", "turn",
];

impl Names {
    /// Reads both sections and applies the settings, each of the form `name=expression`.
    ///
    /// A setting of a name that the file does not have is kept for its base, if it has one. `outer` are the files that
    /// stand on this one, which have passed the settings on.
    pub(super) fn read(
        source: Source,
        document: &DeTable,
        settings: &[String],
        outer: &[Link],
    ) -> Outcome<Names> {
        let mut names = Names::default();
        for section in SECTIONS {
            names.read_section(source, document, section)?;
        }
        let mut set = BTreeSet::new();
        for setting in settings {
            names.apply(setting, &mut set, document.contains_key("base"), outer)?;
        }
        names.check_cycles(source)?;
        names.check_unused(source, document)?;
        Ok(names)
    }

    fn read_section(&mut self, source: Source, document: &DeTable, section: &str) -> Outcome<()> {
        let Some((key, value)) = document.get_key_value(section) else {
            return Ok(());
        };
        let example = format!("write `[{section}]` with lines such as `t = \"1/3\"` below it");
        let DeValue::Table(table) = value.get_ref() else {
            let message = format!(
                "`{section}` must be a table of names, this is {}",
                kind(value.get_ref())
            );
            return source.fault(&key.span(), message, example);
        };
        let mut entries: Vec<_> = table.iter().collect();
        entries.sort_by_key(|(key, _)| key.span().start);
        for (key, value) in entries {
            let name = key.get_ref().as_ref();
            if let Some((message, help)) = name_fault(name) {
                return source.fault(&key.span(), message, help);
            }
            if self.own.iter().any(|known| known.name == name) {
                let message = format!("`{name}` stands in `[define]` and in `[parameters]`");
                return source.fault(&key.span(), message, "keep one of the two");
            }
            if self.own.len() == MOST_NAMES {
                let message = format!("a table file can have at most {MOST_NAMES} names");
                return source.fault(&key.span(), message, "remove names that are not needed");
            }
            let text = match value.get_ref() {
                DeValue::String(text) => text.to_string(),
                DeValue::Integer(integer) if integer.radix() == 10 => {
                    integer.as_str().replace('_', "")
                }
                other => {
                    let message = format!(
                        "the value of `{name}` must be an exact expression, this is {}",
                        kind(other)
                    );
                    let help = "write it in quotes, such as \"1/3\"";
                    return source.fault(&value.span(), message, help);
                }
            };
            self.own.push(Definition {
                name: name.to_string(),
                text,
                origin: Origin::File(value.span()),
                is_parameter: section == "parameters",
            });
        }
        Ok(())
    }

    fn apply(
        &mut self,
        setting: &str,
        set: &mut BTreeSet<String>,
        has_base: bool,
        outer: &[Link],
    ) -> Outcome<()> {
        let help = "write NAME=VALUE, such as t=2/5";
        let Some(at) = setting.find('=') else {
            let message = "this setting has no `=` between its name and its value";
            return Err(in_setting(setting, 0..setting.len(), message, help));
        };
        let name = setting[..at].trim();
        if name.is_empty() {
            return Err(in_setting(
                setting,
                0..at,
                "a name is missing before `=`",
                help,
            ));
        }
        let start = setting[..at].find(name).unwrap_or(0);
        let span = start..start + name.len();
        if has_base && self.find(name).is_none() {
            self.for_base.push(setting.to_string());
            return Ok(());
        }
        let known = self.known(outer);
        let Some(definition) = self.own.iter_mut().find(|d| d.name == name) else {
            let message = match outer.len() {
                0 => format!("the table file has no parameter `{name}`"),
                1 => format!("neither the table file nor its base has a parameter `{name}`"),
                _ => format!(
                    "neither the table file nor those that it stands on have a parameter `{name}`"
                ),
            };
            return Err(in_setting(setting, span, &message, &known));
        };
        if !definition.is_parameter {
            let message = format!("`{name}` is fixed by `[define]` and cannot be set");
            return Err(in_setting(setting, span, &message, &known));
        }
        if !set.insert(name.to_string()) {
            let message = format!("`{name}` is set twice");
            return Err(in_setting(
                setting,
                span,
                &message,
                "set each parameter once",
            ));
        }
        definition.text = setting[at + 1..].to_string();
        definition.origin = Origin::Setting(setting.to_string(), at + 1);
        Ok(())
    }

    /// Which parameters there are to set, in this file and in those that stand on it.
    fn known(&self, outer: &[Link]) -> String {
        let own: Vec<String> = self.parameters().into_iter().map(|p| p.name).collect();
        let list = |names: &[String]| {
            let quoted: Vec<String> = names.iter().map(|name| format!("`{name}`")).collect();
            quoted.join(", ")
        };
        if outer.is_empty() {
            return match own.is_empty() {
                true => "the table file has no `[parameters]`".into(),
                false => format!("the parameters of the table file are {}", list(&own)),
            };
        }
        let mut files: Vec<(&str, Vec<String>)> = outer
            .iter()
            .map(|link| (link.name.as_str(), link.parameters.clone()))
            .collect();
        files.push(("its base", own));
        files[0].0 = "the table file";
        let told: Vec<String> = files
            .iter()
            .map(|(file, names)| match names.is_empty() {
                true => format!("{file} has no `[parameters]`"),
                false => format!("the parameters of {file} are {}", list(names)),
            })
            .collect();
        told.join("; ")
    }

    /// The settings for the base.
    pub(super) fn for_base(&self) -> &[String] {
        &self.for_base
    }

    /// True when the file gives a name a meaning, so that a setting of it does not reach the base.
    pub(super) fn has(&self, name: &str) -> bool {
        self.find(name).is_some()
    }

    /// What the file calls parameters.
    pub(super) fn parameters(&self) -> Vec<Parameter> {
        let parameters = self.own.iter().filter(|d| d.is_parameter);
        parameters
            .map(|d| Parameter {
                name: d.name.clone(),
                expression: d.text.trim().to_string(),
                set: matches!(d.origin, Origin::Setting(..)),
            })
            .collect()
    }

    fn find(&self, name: &str) -> Option<usize> {
        self.own.iter().position(|d| d.name == name)
    }

    /// The definitions that one uses. A text that is no expression uses none; evaluating it tells the fault.
    fn uses(&self, definition: usize) -> Vec<usize> {
        let names = names_in(&self.own[definition].text).unwrap_or_default();
        names
            .iter()
            .filter_map(|(name, _)| self.find(name))
            .collect()
    }

    fn check_cycles(&self, source: Source) -> Outcome<()> {
        let is_set = |d: &usize| matches!(self.own[*d].origin, Origin::Setting(..));
        let (set, others): (Vec<usize>, Vec<usize>) = (0..self.own.len()).partition(is_set);
        for start in set.into_iter().chain(others) {
            let mut way = vec![start];
            if self.leads_back(&mut way, &mut BTreeSet::new()) {
                let names: Vec<&str> = way.iter().map(|&d| self.own[d].name.as_str()).collect();
                let message = format!(
                    "the definition of `{}` leads back to itself: {}",
                    names[0],
                    names.join(" → ")
                );
                let whole = 0..self.own[start].text.len();
                let fault = ExpressionFault {
                    span: whole,
                    message,
                    help: "define it by other names".into(),
                };
                return Err(self.diagnostic(source, start, &fault, ""));
            }
        }
        Ok(())
    }

    /// Extends a way of definitions, each used by the one before, back to its first. The depth is at most
    /// [`MOST_NAMES`].
    fn leads_back(&self, way: &mut Vec<usize>, seen: &mut BTreeSet<usize>) -> bool {
        for next in self.uses(way[way.len() - 1]) {
            if next == way[0] {
                way.push(next);
                return true;
            }
            if seen.insert(next) {
                way.push(next);
                if self.leads_back(way, seen) {
                    return true;
                }
                way.pop();
            }
        }
        false
    }

    /// Evaluates one definition after those that it uses.
    fn install(
        &self,
        source: Source,
        evaluator: &mut Evaluator,
        definition: usize,
        done: &mut BTreeSet<usize>,
    ) -> Outcome<()> {
        if !done.insert(definition) {
            return Ok(());
        }
        for used in self.uses(definition) {
            self.install(source, evaluator, used, done)?;
        }
        let Definition { name, text, .. } = &self.own[definition];
        evaluator.define(name, text).map_err(|fault| {
            let what = format!("the value of `{name}`: ");
            self.diagnostic(source, definition, &fault, &what)
        })
    }

    fn used_by(&self, document: &DeTable) -> Vec<usize> {
        let mut names = BTreeSet::new();
        for key in NUMERIC {
            if let Some(value) = document.get(key) {
                collect(value.get_ref(), &mut names);
            }
        }
        names.iter().filter_map(|name| self.find(name)).collect()
    }

    /// An evaluator in a field that knows the names that the file's numbers use.
    pub(super) fn evaluator(
        &self,
        source: Source,
        document: &DeTable,
        field: Field,
    ) -> Outcome<Evaluator> {
        let mut evaluator = Evaluator::new(field);
        let mut done = BTreeSet::new();
        for definition in self.used_by(document) {
            self.install(source, &mut evaluator, definition, &mut done)?;
        }
        Ok(evaluator)
    }

    fn check_unused(&self, source: Source, document: &DeTable) -> Outcome<()> {
        let used = self.used_by(document);
        let mut shared = (Evaluator::default(), BTreeSet::new());
        for definition in (0..self.own.len()).filter(|d| !used.contains(d)) {
            let (evaluator, done) = &mut shared;
            if self.install(source, evaluator, definition, done).is_err() {
                // Perhaps only all of them together need too large a field.
                shared = (Evaluator::default(), BTreeSet::new());
                let (evaluator, done) = &mut shared;
                self.install(source, evaluator, definition, done)?;
            }
        }
        Ok(())
    }

    fn diagnostic(
        &self,
        source: Source,
        definition: usize,
        fault: &ExpressionFault,
        what: &str,
    ) -> Box<Diagnostic> {
        let Definition { text, origin, .. } = &self.own[definition];
        let message = format!("{what}{}", fault.message);
        match origin {
            Origin::File(span) => {
                let inside = place_in_string(source.text, span, text, &fault.span);
                source.diagnostic(&inside, message, fault.help.as_str())
            }
            Origin::Setting(setting, start) => {
                let span = start + fault.span.start..start + fault.span.end;
                in_setting(setting, span, &message, &fault.help)
            }
        }
    }
}

/// The names in all strings of a value.
fn collect(value: &DeValue, names: &mut BTreeSet<String>) {
    match value {
        DeValue::String(text) => {
            let found = names_in(text).unwrap_or_default();
            names.extend(found.into_iter().map(|(name, _)| name));
        }
        DeValue::Array(items) => items.iter().for_each(|item| collect(item.get_ref(), names)),
        DeValue::Table(table) => table.iter().for_each(|(_, v)| collect(v.get_ref(), names)),
        _ => {}
    }
}

/// A fault in the text of a setting.
fn in_setting(setting: &str, span: Range<usize>, message: &str, help: &str) -> Box<Diagnostic> {
    Box::new(Diagnostic {
        file: "--set".into(),
        source: setting.into(),
        span,
        label: String::new(),
        context: Vec::new(),
        message: message.into(),
        help: help.into(),
    })
}
