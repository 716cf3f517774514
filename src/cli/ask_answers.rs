//! Answers of `ask` in text, CSV and JSON.

use super::arguments::Format;
use serde::Serialize;
use std::io::{self, Write};

/// A row of an answer: the cells of its CSV, in the order of the fields.
pub trait Answer: Serialize {
    /// The header of the CSV.
    const HEADER: &'static [&'static str];
    /// One cell a column.
    fn cells(&self) -> Vec<String>;
    /// One line for people.
    fn text(&self) -> String;
}

/// Writes rows as they come.
pub enum Answers<'a> {
    /// A line each.
    Text(&'a mut dyn Write),
    /// A row each.
    Csv(Box<csv::Writer<&'a mut dyn Write>>),
    /// An object a line.
    Json(&'a mut dyn Write),
}

/// Writes the rows of one kind that `fill` makes, with their header where there is one.
pub fn write_answers<A: Answer, F: From<io::Error>>(
    format: Format,
    out: &mut dyn Write,
    fill: impl FnOnce(&mut Answers<'_>) -> Result<(), F>,
) -> Result<(), F> {
    let mut answers = match format {
        Format::Text => Answers::Text(out),
        Format::Json => Answers::Json(out),
        Format::Csv => {
            let mut csv = csv::Writer::from_writer(out);
            csv.write_record(A::HEADER).map_err(io::Error::from)?;
            Answers::Csv(Box::new(csv))
        }
    };
    fill(&mut answers)?;
    if let Answers::Csv(csv) = &mut answers {
        csv.flush()?;
    }
    Ok(())
}

impl Answers<'_> {
    /// Writes a row.
    pub fn write(&mut self, answer: &impl Answer) -> io::Result<()> {
        match self {
            Answers::Text(out) => writeln!(out, "{}", answer.text()),
            Answers::Csv(csv) => Ok(csv.write_record(answer.cells())?),
            Answers::Json(out) => {
                serde_json::to_writer(&mut **out, answer)?;
                out.write_all(b"\n")
            }
        }
    }
}

/// A word as text shows it.
fn shown(word: &str) -> &str {
    if word.is_empty() {
        "(empty word)"
    } else {
        word
    }
}

fn maybe(value: Option<impl ToString>) -> String {
    value.map_or(String::new(), |value| value.to_string())
}

/// `--contains`.
#[derive(Serialize)]
pub struct Contained {
    pub word: String,
    pub in_language: bool,
    /// The word itself when it is in the language.
    pub longest_prefix: String,
}

impl Answer for Contained {
    const HEADER: &'static [&'static str] = &["word", "in_language", "longest_prefix"];
    fn cells(&self) -> Vec<String> {
        let inside = self.in_language.to_string();
        vec![self.word.clone(), inside, self.longest_prefix.clone()]
    }
    fn text(&self) -> String {
        let word = shown(&self.word);
        match self.in_language {
            true => format!("{word} is in the language"),
            false => format!(
                "{word} is not in the language; its longest prefix that is: {}",
                shown(&self.longest_prefix)
            ),
        }
    }
}

/// `--after`.
#[derive(Serialize)]
pub struct Followed {
    pub word: String,
    /// `None` when the word is not in the language.
    pub letters: Option<String>,
}

impl Answer for Followed {
    const HEADER: &'static [&'static str] = &["word", "letters"];
    fn cells(&self) -> Vec<String> {
        vec![self.word.clone(), maybe(self.letters.as_ref())]
    }
    fn text(&self) -> String {
        let word = shown(&self.word);
        match &self.letters {
            Some(letters) => format!("{word} is followed by one of {letters}"),
            None => format!("{word} is not in the language"),
        }
    }
}

/// `--count`.
#[derive(Serialize)]
pub struct Counted {
    pub word: String,
    pub length: usize,
    pub words: u64,
}

impl Answer for Counted {
    const HEADER: &'static [&'static str] = &["word", "length", "words"];
    fn cells(&self) -> Vec<String> {
        vec![
            self.word.clone(),
            self.length.to_string(),
            self.words.to_string(),
        ]
    }
    fn text(&self) -> String {
        format!(
            "words of length {} that begin with {}: {}",
            self.length,
            shown(&self.word),
            self.words
        )
    }
}

/// `--place`.
#[derive(Serialize)]
pub struct Placed {
    pub word: String,
    /// `None` when the word is not in the language.
    pub index: Option<u64>,
}

impl Answer for Placed {
    const HEADER: &'static [&'static str] = &["word", "index"];
    fn cells(&self) -> Vec<String> {
        vec![self.word.clone(), maybe(self.index)]
    }
    fn text(&self) -> String {
        let word = shown(&self.word);
        match self.index {
            Some(index) => format!("{word} has number {index} of its length"),
            None => format!("{word} is not in the language"),
        }
    }
}

/// A word with its number.
#[derive(Serialize)]
pub struct Numbered {
    pub index: u64,
    pub word: String,
}

impl Answer for Numbered {
    const HEADER: &'static [&'static str] = &["index", "word"];
    fn cells(&self) -> Vec<String> {
        vec![self.index.to_string(), self.word.clone()]
    }
    fn text(&self) -> String {
        self.word.clone()
    }
}

/// A word alone.
#[derive(Serialize)]
pub struct Word {
    pub word: String,
}

impl Answer for Word {
    const HEADER: &'static [&'static str] = &["word"];
    fn cells(&self) -> Vec<String> {
        vec![self.word.clone()]
    }
    fn text(&self) -> String {
        self.word.clone()
    }
}

/// `--special`.
#[derive(Serialize)]
pub struct SpecialWord {
    pub word: String,
    pub left: String,
    pub right: String,
}

impl Answer for SpecialWord {
    const HEADER: &'static [&'static str] = &["word", "left", "right"];
    fn cells(&self) -> Vec<String> {
        vec![self.word.clone(), self.left.clone(), self.right.clone()]
    }
    fn text(&self) -> String {
        let word = shown(&self.word);
        format!("{word}  before: {}  behind: {}", self.left, self.right)
    }
}
