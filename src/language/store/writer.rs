//! Writing a stored language from its words in order, one at a time.
//!
//! The order M of the factor graph is chosen for a small file. With p the complexity and s its first difference, the parts take about
//!
//! - 5 bytes for each state of the graph, and 2 for the letters of a key that spell it: together 7·(p(0) + … + p(M));
//! - 1.1 bytes for each letter where M letters of memory leave a choice that longer memory does not: the share s(M)/p(M) of the
//!   prefixes of length M … N − 1.
//!
//! The two factors were measured on tables of `polygons/`; only the size of the file depends on them. Memory while writing: the language of length M + 1,
//! which is kept below [`MOST_SHORT_WORDS`] words, and a few MiB for the automaton's builder, which remembers 20 000 states and
//! so finds most, not all, equal ones.

use super::file::Summed;
use super::graph::Graph;
use super::{Description, Origin, StoreFault};
use crate::language::stream::{StreamFault, stream_words};
use crate::language::walk;
use crate::language::{Language, WordId};
use crate::run::Control;
use crate::run::files::write_whole;
use crate::unfold::Mesh;
use crate::unfold::engine::AnyEngine;
use fst::raw::Builder;
use std::io::{self, Write};
use std::path::Path;

/// The most words of length at most M + 1.
const MOST_SHORT_WORDS: u64 = 1 << 22;

/// The order of the factor graph that makes a small file of the words of length N, from p(0), …, p(N) or about these.
/// It is below N, or 0.
pub fn choose_order(p: &[u64]) -> usize {
    let longest = p.len().saturating_sub(1);
    // Entry d: the prefixes of length d … N − 1.
    let mut above = vec![0.0; longest + 1];
    for d in (0..longest).rev() {
        above[d] = above[d + 1] + p[d] as f64;
    }
    let mut states = 0u64;
    let (mut best, mut least) = (0, f64::INFINITY);
    for order in 0..longest {
        states += p[order];
        if states + p[order + 1] > MOST_SHORT_WORDS {
            break;
        }
        let special = p[order + 1].saturating_sub(p[order]) as f64 / p[order].max(1) as f64;
        let bytes = 7.0 * states as f64 + 1.1 * special.min(1.0) * above[order];
        if bytes < least {
            (best, least) = (order, bytes);
        }
    }
    best
}

/// Takes words in order.
struct Writer<'a, W: Write> {
    graph: Graph<'a>,
    builder: Builder<Summed<W>>,
    graph_bytes: u64,
    length: usize,
    /// The last word.
    word: Vec<u8>,
    /// Its key.
    key: Vec<u8>,
    /// For each prefix of the last word, by length: the state of the graph, and how many letters its key has.
    prefixes: Vec<(u32, u32)>,
    complexity: Vec<u64>,
}

impl<'a, W: Write> Writer<'a, W> {
    /// Writes header and graph.
    fn begin(out: W, graph_bytes: &'a [u8], length: usize) -> io::Result<Writer<'a, W>> {
        let mut out = Summed::begin(out)?;
        out.write_all(graph_bytes)?;
        let mut complexity = vec![0; length + 1];
        complexity[0] = 1;
        Ok(Writer {
            graph: Graph::view(graph_bytes).expect("just encoded"),
            builder: Builder::new(out).map_err(system_error)?,
            graph_bytes: graph_bytes.len() as u64,
            length,
            word: Vec::with_capacity(length),
            key: Vec::new(),
            prefixes: vec![(0, 0)],
            complexity,
        })
    }

    /// Adds the word that shares `common` letters with the last one and goes on with `tail`.
    fn push(&mut self, common: usize, tail: &[u8]) -> Result<(), PushFault> {
        let place = *self.complexity.last().expect("p(0)") - u64::from(self.length == 0);
        let ordered = match self.word.get(common) {
            Some(letter) => tail.first().is_some_and(|next| next > letter),
            None => place == 0,
        };
        let out_of_order = PushFault::OutOfOrder(place);
        if !ordered || common + tail.len() != self.length {
            return Err(out_of_order);
        }
        self.word.truncate(common);
        self.word.extend_from_slice(tail);
        self.prefixes.truncate(common + 1);
        let (mut state, keyed) = self.prefixes[common];
        self.key.truncate(keyed as usize);
        for letter in tail {
            let arcs = self.graph.arcs(state);
            if arcs.len() > 1 {
                self.key.push(*letter);
            }
            let Some(arc) = self.graph.arc(arcs, *letter) else {
                return Err(out_of_order);
            };
            state = self.graph.target(arc);
            self.prefixes.push((state, self.key.len() as u32));
        }
        for count in &mut self.complexity[common + 1..] {
            *count += 1;
        }
        let inserted = self.builder.insert(&self.key, place);
        inserted.map_err(|e| PushFault::System(system_error(e)))
    }

    /// Writes the description and the footer.
    fn finish(self, origin: &Origin, order: usize) -> io::Result<Description> {
        let description = Description {
            program: env!("CARGO_PKG_VERSION").into(),
            title: origin.title.clone(),
            letters: origin.letters.clone(),
            length: self.length,
            order,
            complexity: self.complexity,
            table: origin.table.clone(),
            settings: origin.settings.clone(),
        };
        let mut out = self.builder.into_inner().map_err(system_error)?;
        let header_and_graph = super::file::HEADER as u64 + self.graph_bytes;
        let automaton = out.written - header_and_graph;
        let text = serde_json::to_vec(&description)?;
        out.write_all(&text)?;
        out.end([self.graph_bytes, automaton, text.len() as u64])?;
        Ok(description)
    }
}

enum PushFault {
    System(io::Error),
    OutOfOrder(u64),
}

fn system_error(error: fst::Error) -> io::Error {
    match error {
        fst::Error::Io(error) => error,
        other => io::Error::other(other),
    }
}

/// Fills a file with the words that `tell` pushes.
fn store(
    path: &Path,
    origin: &Origin,
    short: &Language,
    (order, length): (usize, usize),
    tell: impl FnOnce(
        &mut dyn FnMut(usize, &[u8]) -> Result<(), PushFault>,
    ) -> Result<(), StreamFault<PushFault>>,
) -> Result<Description, StoreFault> {
    assert!(
        order == 0 || order < length,
        "the graph's words must be shorter than the stored ones"
    );
    let graph = Graph::encode(short, order);
    let mut description = None;
    let mut fault = None;
    let written = write_whole(path, |out| {
        let mut writer = Writer::begin(out, &graph, length)?;
        match tell(&mut |common, tail| writer.push(common, tail)) {
            Ok(()) => {
                description = Some(writer.finish(origin, order)?);
                Ok(())
            }
            Err(StreamFault::Consumer(PushFault::System(error))) => Err(error),
            Err(StreamFault::Consumer(PushFault::OutOfOrder(number))) => {
                fault = Some(StoreFault::OutOfOrder { number });
                Err(io::Error::other("the words are out of order"))
            }
            Err(StreamFault::Stopped(stopped)) => {
                fault = Some(stopped.into());
                Err(io::Error::other("stopped"))
            }
        }
    });
    match (written, fault) {
        (_, Some(fault)) => Err(fault),
        (Err(fault), None) => Err(fault.into()),
        (Ok(()), None) => Ok(description.expect("finished")),
    }
}

/// Stores the words of a table up to a length. The file appears whole or not at all.
///
/// `order` is that of the factor graph, as [`choose_order`] finds it; only the size of the file depends on it.
///
/// Cost: Σ p(n) beam steps; memory as [`stream`](crate::language::stream) and this module say, whatever p(N).
///
/// # Errors
/// When the control asks to stop or the file cannot be written; the old file, if any, is then untouched.
///
/// # Panics
/// If the engine was prepared for fewer crossings, or the order is neither 0 nor below the length.
pub fn store_table(
    path: &Path,
    origin: &Origin,
    (engine, mesh): (&AnyEngine, &Mesh),
    (length, order): (usize, usize),
    control: &Control,
) -> Result<Description, StoreFault> {
    let (short, _) = walk::grow(engine, mesh, length.min(order + 1), control)?;
    store(path, origin, &short, (order, length), |push| {
        stream_words(engine, mesh, length, control, push).map(|_| ())
    })
}

/// Stores a language that is in memory, such as one of words from elsewhere.
///
/// Cost: O(N) a word of length N.
///
/// # Errors
/// When a word below the greatest length has no continuation, or the file cannot be written.
///
/// # Panics
/// If the order is neither 0 nor below the length.
pub fn store_language(
    path: &Path,
    origin: &Origin,
    language: &Language,
    order: usize,
) -> Result<Description, StoreFault> {
    let length = language.longest();
    let dead = |n: &usize| language.right_extension_counts(*n).contains(&0);
    if let Some(length) = (0..length).find(dead) {
        return Err(StoreFault::NotProlongable { length });
    }
    store(path, origin, language, (order, length), |push| {
        let mut last = Vec::new();
        for word in 0..language.count(length) as WordId {
            let letters = language.word(length, word);
            let same = letters.iter().zip(&last).take_while(|(a, b)| a == b);
            let common = same.count();
            push(common, &letters[common..]).map_err(StreamFault::Consumer)?;
            last = letters;
        }
        Ok(())
    })
}
