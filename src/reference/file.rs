//! The reference file: a language by its rule, in TOML.
//!
//! | key             | value |
//! |-----------------|-------|
//! | `title`         | text; optional, the file's name without it |
//! | `about`         | free text, ignored |
//! | `letters`       | the alphabet in its order, one character a letter; needed with `forbidden`, else optional |
//! | `substitution`  | table: a word for each letter |
//! | `directive`     | array of names of `substitutions`, each perhaps with a power: `"ebb^3"`; σ₀ first |
//! | `repeat`        | with `directive`: what follows for ever; the last of the directive without it |
//! | `substitutions` | with `directive`: tables like `substitution`, by name |
//! | `permutation`   | interval exchange: the letters in their order after it |
//! | `shifts`        | interval translation map: by how much each piece moves |
//! | `lengths`       | with these two: exact expressions, one for each letter |
//! | `pattern`       | Toeplitz word: letters and holes `?` |
//! | `forbidden`     | array of words |
//! | `define`, `parameters` | names in expressions, as in a table file |
//!
//! Exactly one of `substitution`, `directive`, `permutation`, `shifts`, `pattern` and `forbidden` is there. Numbers are
//! written as in a [table file](crate::table::file). Every fault is a [`Diagnostic`] that points at its place.

use super::Rule;
use super::finite_type::FiniteType;
use super::substitution::{Directive, Substitution};
use super::toeplitz::{Pattern, PatternFault};
use super::translation::{TranslationFault, Translations};
use crate::number::{Field, Real};
use crate::table::diagnostic::Diagnostic;
use crate::table::file::LARGEST_FILE;
use crate::table::file::names::Names;
use crate::table::file::source::{Outcome, Source, Value, array, kind, number};
use crate::table::{MOST_SIDES, default_letters};
use std::io::Read;
use std::ops::Range;
use std::path::Path;
use thiserror::Error;
use toml::de::{DeTable, DeValue};

const KINDS: [&str; 6] = [
    "substitution",
    "directive",
    "permutation",
    "shifts",
    "pattern",
    "forbidden",
];
/// Other keys, each with the kinds that it goes with.
const OTHERS: [(&str, &[&str]); 8] = [
    ("title", &KINDS),
    ("about", &KINDS),
    ("letters", &KINDS),
    ("repeat", &["directive"]),
    ("substitutions", &["directive"]),
    ("lengths", &["permutation", "shifts"]),
    ("define", &["permutation", "shifts"]),
    ("parameters", &["permutation", "shifts"]),
];
/// The largest power of a substitution in a directive, and the most substitutions of a directive.
pub const LONGEST_DIRECTIVE: usize = 10_000;

/// A language by its rule.
#[derive(Clone, Debug)]
pub struct Reference {
    /// Its title.
    pub title: String,
    /// Its letters in their order.
    pub letters: Vec<char>,
    /// The rule.
    pub rule: Rule,
}

/// Why a file gave no rule.
#[derive(Debug, Error)]
pub enum ReferenceFileError {
    /// The file cannot be read.
    #[error("{file}: cannot read this file: {reason}")]
    Unreadable {
        /// The name as given.
        file: String,
        /// What the operating system says.
        reason: std::io::Error,
    },
    /// The file is too large.
    #[error(
        "{file}: this file is larger than {LARGEST_FILE} bytes, the most that a reference file can have"
    )]
    TooLarge {
        /// The name as given.
        file: String,
    },
    /// The file is no text.
    #[error(
        "{file}: this is not a text file in UTF-8: byte {offset} fits no character; write it in a plain text editor"
    )]
    NotText {
        /// The name as given.
        file: String,
        /// The first byte at fault, from 0.
        offset: usize,
    },
    /// The text is no rule.
    #[error("{0}")]
    Fault(Box<Diagnostic>),
}

/// Reads a reference file, with settings `name=expression` for its parameters.
///
/// # Errors
/// As [`ReferenceFileError`] says.
pub fn load(path: &Path, settings: &[String]) -> Result<Reference, ReferenceFileError> {
    let file = path.display().to_string();
    let unreadable = |reason| ReferenceFileError::Unreadable {
        file: file.clone(),
        reason,
    };
    let mut bytes = Vec::new();
    let handle = std::fs::File::open(path).map_err(unreadable)?;
    let mut limited = handle.take(LARGEST_FILE as u64 + 1);
    limited.read_to_end(&mut bytes).map_err(unreadable)?;
    if bytes.len() > LARGEST_FILE {
        return Err(ReferenceFileError::TooLarge { file });
    }
    let text = String::from_utf8(bytes).map_err(|e| ReferenceFileError::NotText {
        file: file.clone(),
        offset: e.utf8_error().valid_up_to(),
    })?;
    parse(&file, &text, settings).map_err(ReferenceFileError::Fault)
}

/// Reads a reference from a text; `file` is used in messages and for the title.
///
/// # Errors
/// The first fault, with its place.
pub fn parse(file: &str, text: &str, settings: &[String]) -> Outcome<Reference> {
    let text = text.strip_prefix('\u{feff}').unwrap_or(text);
    let source = Source { file, text };
    let document = DeTable::parse(text).map_err(|e| {
        let message = format!("this is not valid TOML: {}", e.message());
        let help = "check the quotes, brackets and commas here; a line reads `key = value`";
        source.diagnostic(&e.span().unwrap_or(0..0), message, help)
    })?;
    let document = document.into_inner();
    let sheet = Sheet {
        source,
        document: &document,
    };
    let chosen = sheet.check_keys()?;
    let stem = Path::new(file).file_stem().unwrap_or_default();
    let title = sheet.text("title")?.map(|(title, _)| title);
    sheet.text("about")?;
    let (letters, rule) = match chosen {
        "substitution" => sheet.substitution()?,
        "directive" => sheet.directive()?,
        "pattern" => sheet.pattern()?,
        "forbidden" => sheet.forbidden()?,
        _ => sheet.translations(chosen, settings)?,
    };
    if let (Some(setting), "substitution" | "directive" | "pattern" | "forbidden") =
        (settings.first(), chosen)
    {
        let place = Source {
            file: "--set",
            text: setting,
        };
        let help = format!("leave the setting out: `{chosen}` holds no expressions");
        return place.fault(&(0..setting.len()), "the file has no parameters", help);
    }
    Ok(Reference {
        title: title.unwrap_or_else(|| stem.to_string_lossy().into_owned()),
        letters,
        rule,
    })
}

#[derive(Clone, Copy)]
struct Sheet<'a> {
    source: Source<'a>,
    document: &'a DeTable<'a>,
}

impl<'a> Sheet<'a> {
    /// The one kind of the file, after a look at all its keys.
    fn check_keys(self) -> Outcome<&'static str> {
        let source = self.source;
        let mut keys: Vec<_> = self.document.keys().collect();
        keys.sort_by_key(|key| key.span().start);
        let known = || KINDS.into_iter().chain(OTHERS.map(|(name, _)| name));
        if let Some(key) = keys
            .iter()
            .find(|k| !known().any(|name| name == k.get_ref()))
        {
            let help = format!("known keys are {}", known().collect::<Vec<_>>().join(", "));
            let message = format!("unknown key `{}`", key.get_ref());
            return source.fault(&key.span(), message, help);
        }
        let chosen: Vec<_> = keys
            .iter()
            .filter_map(|key| Some((KINDS.into_iter().find(|kind| kind == key.get_ref())?, key)))
            .collect();
        let listed = KINDS.map(|kind| format!("`{kind}`")).join(", ");
        let kind = match chosen[..] {
            [(kind, _)] => kind,
            [] => {
                let help = format!("add one of {listed}");
                return source.fault(&(0..0), "the file describes no language", help);
            }
            [_, (_, second), ..] => {
                let message = "the language is described more than once";
                let help = format!("keep exactly one of {listed}");
                return source.fault(&second.span(), message, help);
            }
        };
        for key in keys {
            let goes = OTHERS.iter().find(|(name, _)| name == key.get_ref());
            if let Some((name, kinds)) = goes
                && !kinds.contains(&kind)
            {
                let message = format!("`{name}` does not go with `{kind}`");
                let help = format!("remove it: it goes with {}", ticked(kinds));
                return source.fault(&key.span(), message, help);
            }
        }
        Ok(kind)
    }

    fn value(self, key: &str) -> Option<&'a Value<'a>> {
        self.document.get(key)
    }

    /// A key that the kind of the file cannot do without.
    fn needed(self, kind: &str, key: &str, example: &str) -> Outcome<&'a Value<'a>> {
        match self.value(key) {
            Some(value) => Ok(value),
            None => {
                let (place, _) = self.document.get_key_value(kind).expect("the kind");
                let message = format!("`{kind}` needs `{key}` beside it");
                self.source
                    .fault(&place.span(), message, format!("add {example}"))
            }
        }
    }

    fn text(self, key: &str) -> Outcome<Option<(String, Range<usize>)>> {
        let Some(value) = self.value(key) else {
            return Ok(None);
        };
        let text = self.string(value, &format!("`{key}`"))?;
        if key == "title" && text.chars().any(char::is_control) {
            let message = "the title holds a line break or another control character";
            let help = "write it on one line; longer text goes into `about`";
            return self.source.fault(&value.span(), message, help);
        }
        Ok(Some((text, value.span())))
    }

    fn string(self, value: &Value, what: &str) -> Outcome<String> {
        match value.get_ref() {
            DeValue::String(text) => Ok(text.to_string()),
            other => {
                let message = format!("{what} must be a string, this is {}", kind(other));
                self.source
                    .fault(&value.span(), message, "write it in quotes")
            }
        }
    }

    /// The `letters`, or others when the file has none.
    fn letters(self, otherwise: impl FnOnce() -> Vec<char>) -> Outcome<Vec<char>> {
        let Some((text, span)) = self.text("letters")? else {
            return Ok(otherwise());
        };
        let letters: Vec<char> = text.chars().collect();
        for (i, letter) in letters.iter().enumerate() {
            if letters[..i].contains(letter) {
                let message = format!("`letters` names `{letter}` twice");
                return self.source.fault(&span, message, "name each letter once");
            }
            if letter.is_control() || letter.is_whitespace() || *letter == '?' {
                let message = "a letter is a visible character, and not `?`";
                return self.source.fault(&span, message, "choose other letters");
            }
        }
        self.check_count(letters.len(), &span)?;
        Ok(letters)
    }

    fn check_count(self, letters: usize, span: &Range<usize>) -> Outcome<()> {
        if (1..=MOST_SIDES).contains(&letters) {
            return Ok(());
        }
        let message = format!("a language has 1 to {MOST_SIDES} letters, here are {letters}");
        self.source
            .fault(span, message, "name as many letters as that")
    }

    /// A word in the letters, as their numbers.
    fn word(self, value: &Value, letters: &[char], what: &str) -> Outcome<Vec<u8>> {
        let text = self.string(value, what)?;
        if text.is_empty() {
            let message = format!("{what} is empty");
            return self
                .source
                .fault(&value.span(), message, "write at least one letter");
        }
        let number = |c: char| letters.iter().position(|l| *l == c);
        match text.chars().find(|c| number(*c).is_none()) {
            None => Ok(text.chars().map(|c| number(c).unwrap_or(0) as u8).collect()),
            Some(c) => {
                let message = format!("`{}` is no letter of the language", c.escape_debug());
                let listed: String = letters.iter().collect();
                let help = format!("the letters are {listed}");
                self.source.fault(&value.span(), message, help)
            }
        }
    }

    fn table(self, value: &'a Value<'a>, what: &str, help: &str) -> Outcome<&'a DeTable<'a>> {
        match value.get_ref() {
            DeValue::Table(table) => Ok(table),
            other => {
                let message = format!("{what} must be a table of keys, this is {}", kind(other));
                self.source.fault(&value.span(), message, help)
            }
        }
    }

    /// The letters that a table of images names, in the order of characters.
    fn image_letters(self, value: &'a Value<'a>, what: &str) -> Outcome<Vec<char>> {
        let help = "write `[substitution]` with lines such as `a = \"ab\"` below it";
        let table = self.table(value, what, help)?;
        let mut letters: Vec<char> = Vec::new();
        for key in table.keys() {
            let mut characters = key.get_ref().chars();
            match (characters.next(), characters.next()) {
                (Some(letter), None) => letters.push(letter),
                _ => {
                    let message = format!("`{}` is not one letter", key.get_ref());
                    let help = "write the image of a single letter, such as `a = \"ab\"`";
                    return self.source.fault(&key.span(), message, help);
                }
            }
        }
        letters.sort_unstable();
        self.check_count(letters.len(), &value.span())?;
        Ok(letters)
    }

    fn images(self, value: &'a Value<'a>, letters: &[char], what: &str) -> Outcome<Substitution> {
        let named = self.image_letters(value, what)?;
        let table = self.table(value, what, "")?;
        if let Some(extra) = named.iter().find(|l| !letters.contains(l)) {
            let message =
                format!("{what} has an image for `{extra}`, which is no letter of the language");
            let listed: String = letters.iter().collect();
            return self
                .source
                .fault(&value.span(), message, format!("the letters are {listed}"));
        }
        let mut images = Vec::new();
        for letter in letters {
            let Some(image) = table.get(letter.to_string().as_str()) else {
                let message = format!("{what} has no image for the letter `{letter}`");
                let help = format!("add `{letter} = \"...\"`; a letter may be its own image");
                return self.source.fault(&value.span(), message, help);
            };
            images.push(self.word(image, letters, &format!("the image of `{letter}`"))?);
        }
        Ok(Substitution::new(images))
    }

    fn substitution(self) -> Outcome<(Vec<char>, Rule)> {
        let value = self.value("substitution").expect("the kind");
        let named = self.image_letters(value, "`substitution`")?;
        let letters = self.letters(|| named)?;
        let tau = self.images(value, &letters, "`substitution`")?;
        Ok((letters, Rule::Substitutive(Directive::new(Vec::new(), tau))))
    }

    fn directive(self) -> Outcome<(Vec<char>, Rule)> {
        let example = "`[substitutions.NAME]` with lines such as `a = \"ab\"` below it";
        let place = self.needed("directive", "substitutions", example)?;
        let tables = self.table(place, "`substitutions`", &format!("write {example}"))?;
        let Some((_, one)) = tables.iter().min_by_key(|(key, _)| key.span().start) else {
            let message = "`substitutions` names no substitution";
            return self
                .source
                .fault(&place.span(), message, format!("add {example}"));
        };
        let named = self.image_letters(one, "this substitution")?;
        let letters = self.letters(|| named)?;
        let mut known = Vec::new();
        for (key, value) in tables.iter() {
            let what = format!("`{}`", key.get_ref());
            known.push((
                key.get_ref().to_string(),
                self.images(value, &letters, &what)?,
            ));
        }
        let mut first = self.listed("directive", &known)?;
        let repeated = match self.value("repeat") {
            Some(_) => self.listed("repeat", &known)?,
            None => vec![first.pop().expect("at least one")],
        };
        let product = repeated[1..]
            .iter()
            .fold(repeated[0].clone(), |all, next| all.after(next));
        Ok((letters, Rule::Substitutive(Directive::new(first, product))))
    }

    /// The substitutions that an array names, powers written out; not empty.
    fn listed(self, key: &str, known: &[(String, Substitution)]) -> Outcome<Vec<Substitution>> {
        let value = self.value(key).expect("a key that is there");
        let help = "write names of `substitutions`, such as `[\"ebb\", \"flood^3\"]`";
        let items = array(self.source, value, &format!("`{key}`"), help)?;
        let mut found = Vec::new();
        for item in items {
            let text = self.string(item, "the name of a substitution")?;
            let (name, power) = match text.split_once('^') {
                Some((name, power)) => (name.trim(), power.trim().parse::<usize>().ok()),
                None => (text.trim(), Some(1)),
            };
            let Some(power) = power.filter(|k| (1..=LONGEST_DIRECTIVE).contains(k)) else {
                let message = format!("the power in `{text}` is out of range");
                let help = format!("write a whole number from 1 to {LONGEST_DIRECTIVE} after `^`");
                return self.source.fault(&item.span(), message, help);
            };
            let Some((_, sigma)) = known.iter().find(|(known, _)| known == name) else {
                let message = format!("there is no substitution `{name}`");
                let names: Vec<&str> = known.iter().map(|(name, _)| name.as_str()).collect();
                let help = format!("`substitutions` has {}", ticked(&names));
                return self.source.fault(&item.span(), message, help);
            };
            if found.len() + power > LONGEST_DIRECTIVE {
                let message = format!("`{key}` lists more than {LONGEST_DIRECTIVE} substitutions");
                return self
                    .source
                    .fault(&item.span(), message, "write a shorter list");
            }
            found.extend(std::iter::repeat_n(sigma.clone(), power));
        }
        if found.is_empty() {
            let message = format!("`{key}` names no substitution");
            return self.source.fault(&value.span(), message, help);
        }
        Ok(found)
    }

    fn pattern(self) -> Outcome<(Vec<char>, Rule)> {
        let (text, span) = self.text("pattern")?.expect("the kind");
        let named = || {
            let mut letters: Vec<char> = text.chars().filter(|c| *c != '?').collect();
            letters.sort_unstable();
            letters.dedup();
            letters
        };
        let letters = self.letters(named)?;
        self.check_count(letters.len(), &span)?;
        let mut places = Vec::new();
        for c in text.chars() {
            let letter = letters.iter().position(|l| *l == c);
            if c != '?' && letter.is_none() {
                let listed: String = letters.iter().collect();
                let message = format!("`{}` is no letter of the language", c.escape_debug());
                let help = format!("write `?` for a hole; the letters are {listed}");
                return self.source.fault(&span, message, help);
            }
            places.push(letter.map(|l| l as u8));
        }
        match Pattern::new(letters.len(), places) {
            Ok(pattern) => Ok((letters, Rule::Toeplitz(pattern))),
            Err(fault) => {
                let help = match fault {
                    PatternFault::BeginsWithHole => "begin it with a letter, such as \"0?1?\"",
                    PatternFault::Classes { .. } => {
                        "choose a number of holes that divides the number of places, or is prime to it"
                    }
                };
                self.source.fault(&span, fault.to_string(), help)
            }
        }
    }

    fn forbidden(self) -> Outcome<(Vec<char>, Rule)> {
        self.needed(
            "forbidden",
            "letters",
            "the alphabet, such as `letters = \"01\"`",
        )?;
        let letters = self.letters(Vec::new)?;
        let value = self.value("forbidden").expect("the kind");
        let help = "write an array of words, such as `[\"11\", \"010\"]`; it may be empty";
        let mut words = Vec::new();
        for item in array(self.source, value, "`forbidden`", help)? {
            words.push(self.word(item, &letters, "a forbidden word")?);
        }
        Ok((
            letters.clone(),
            Rule::FiniteType(FiniteType::new(letters.len(), words)),
        ))
    }

    fn translations(self, kind: &str, settings: &[String]) -> Outcome<(Vec<char>, Rule)> {
        let source = self.source;
        let names = Names::read(source, self.document, settings, &[])?;
        let mut evaluator = names.evaluator(source, self.document, Field::rationals())?;
        let example = "the lengths of the pieces, such as `lengths = [\"1\", \"sqrt(2)\"]`";
        let place = self.needed(kind, "lengths", example)?;
        let help = format!("write {example}");
        let items = array(source, place, "`lengths`", &help)?;
        self.check_count(items.len(), &place.span())?;
        let mut numbers: Vec<Real> = Vec::new();
        for (i, item) in items.iter().enumerate() {
            let what = format!("length {i} (counting from 0)");
            numbers.push(number(source, &mut evaluator, item, &what)?);
        }
        let pieces = numbers.len();
        let letters = self.letters(|| default_letters(pieces))?;
        if letters.len() != pieces {
            let message = format!("there are {pieces} lengths and {} letters", letters.len());
            return source.fault(&place.span(), message, "write one length for each letter");
        }
        let moves = self.value(kind).expect("the kind");
        let mut spans: Vec<Range<usize>> = items.iter().map(|item| item.span()).collect();
        let built = if kind == "permutation" {
            let order = self.order(moves, &letters)?;
            evaluator.finish(&mut numbers);
            Translations::exchange(&numbers, &order)
        } else {
            let help = "write one exact number for each piece, such as `[\"1\", \"-sqrt(2)\"]`";
            let shifts = array(source, moves, "`shifts`", help)?;
            if shifts.len() != pieces {
                let message = format!("there are {pieces} lengths and {} shifts", shifts.len());
                return source.fault(&moves.span(), message, help);
            }
            for (i, item) in shifts.iter().enumerate() {
                let what = format!("shift {i} (counting from 0)");
                numbers.push(number(source, &mut evaluator, item, &what)?);
            }
            spans.extend(shifts.iter().map(|item| item.span()));
            evaluator.finish(&mut numbers);
            let shifts = numbers.split_off(pieces);
            Translations::map(&numbers, shifts)
        };
        match built {
            Ok(map) => Ok((letters, Rule::Translations(map))),
            Err(fault @ TranslationFault::NotPositive { piece }) => {
                source.fault(&spans[piece], fault.to_string(), "write a positive number")
            }
            Err(fault @ TranslationFault::LeavesInterval { piece }) => {
                let help =
                    "choose shifts that keep every piece between 0 and the sum of the lengths";
                source.fault(&spans[pieces + piece], fault.to_string(), help)
            }
        }
    }

    fn order(self, value: &Value, letters: &[char]) -> Outcome<Vec<usize>> {
        let word = self.word(value, letters, "`permutation`")?;
        let mut order: Vec<usize> = word.iter().map(|a| *a as usize).collect();
        let given = order.clone();
        order.sort_unstable();
        if !order.iter().copied().eq(0..letters.len()) {
            let listed: String = letters.iter().rev().collect();
            let message = "`permutation` must name each letter once";
            let help = format!(
                "write the letters in their order after the exchange, such as \"{listed}\""
            );
            return self.source.fault(&value.span(), message, help);
        }
        Ok(given)
    }
}

/// Names in ticks, joined by commas.
fn ticked(names: &[&str]) -> String {
    let names: Vec<String> = names.iter().map(|name| format!("`{name}`")).collect();
    names.join(", ")
}
