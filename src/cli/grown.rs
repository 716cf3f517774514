//! A language for the commands that analyse one: estimated, then grown.

use super::fault::Fault;
use super::progress::Progress;
use crate::complexity::counts::p_from_diagonals;
use crate::complexity::diagonals::count;
use crate::language::{Language, walk};
use crate::run::Control;
use crate::study::results::{STUDY_BYTES_PER_WORD, check_bytes};
use crate::table::Table;
use crate::unfold::Mesh;
use crate::unfold::engine::AnyEngine;

/// What a command needs of a table.
pub struct Grown {
    pub mesh: Mesh,
    pub engine: AnyEngine,
    pub language: Language,
}

/// Needs beside the language.
#[derive(Clone, Copy)]
pub struct Needs {
    /// Bytes a word.
    pub more_bytes_a_word: u64,
    /// The most memory, when the user named it.
    pub allowed: Option<u64>,
}

/// All words to a length, unless they would not fit. The words are counted by fans first; when a word is a bundle of
/// beams, that counts the beams, of which there are at least as many.
pub fn grow(
    table: &Table,
    length: usize,
    arithmetic: crate::unfold::engine::Arithmetic,
    needs: Needs,
    control: &Control,
    progress: &Progress,
) -> Result<Grown, Fault> {
    let mesh = Mesh::new(table);
    let engine = AnyEngine::new(table, length, arithmetic);
    progress.begin("counting", None);
    let (diagonals, _) = count(&engine, &mesh, length.saturating_sub(2), control)?;
    let words = p_from_diagonals(table.sides() as u64, &diagonals, length)
        .iter()
        .sum::<u64>();
    let bytes = words.saturating_mul(STUDY_BYTES_PER_WORD + needs.more_bytes_a_word);
    check_bytes(words, length, bytes, needs.allowed)?;
    progress.begin("language", Some(words));
    let (language, _) = walk::grow(&engine, &mesh, length, control)?;
    Ok(Grown {
        mesh,
        engine,
        language,
    })
}
