//! `reboundary words --format stored`.

use super::arguments::WordsOptions;
use super::fault::Fault;
use super::output::{note, read_table};
use super::progress::{Progress, interruptible_control};
use crate::complexity::{counts::p_from_diagonals, diagonals};
use crate::language::store::{Origin, choose_order, store_table};
use crate::run::memory;
use crate::study::results::check_memory;
use crate::table::file::LoadedTable;
use crate::unfold::Mesh;
use crate::unfold::engine::AnyEngine;

pub fn run(options: &WordsOptions) -> Result<(), Fault> {
    let Some(out) = &options.out else {
        let text = "--format stored needs a file: add --out FILE";
        return Err(Fault::BadInput(text.into()));
    };
    let quiet = options.common.quiet;
    let loaded = read_table(&options.table, &options.settings, quiet)?;
    let (table, length) = (&loaded.table, options.length);
    let mesh = Mesh::new(table);
    let engine = AnyEngine::new(table, length, options.exactness.arithmetic());
    let control = interruptible_control();
    let progress = Progress::new(&control, quiet);
    progress.begin("counting", None);
    // When words are bundles these are numbers of beams: near enough to choose the order.
    let most = length.saturating_sub(2);
    let (found, _) = diagonals::count(&engine, &mesh, most, &control)?;
    let expected = p_from_diagonals(table.sides() as u64, &found, length);
    let order = choose_order(&expected);
    let short = length.min(order + 1);
    check_memory(
        expected[..=short].iter().sum(),
        short,
        options.budget_memory,
    )?;
    progress.begin("storing", Some(expected.iter().sum()));
    let origin = origin(&loaded, &options.settings.set);
    let parts = (&engine, &mesh);
    let stored = store_table(out, &origin, parts, (length, order), &control)?;
    drop(progress);
    if !quiet {
        let words = stored.complexity[length];
        let bytes = std::fs::metadata(out).map_or(0, |file| file.len());
        note(&format!(
            "{words} words of length {length} in {} ({:.2} bytes a word); ask with `reboundary ask {}`",
            memory::display(bytes),
            bytes as f64 / words as f64,
            out.display()
        ));
    }
    Ok(())
}

/// Everything that makes the table.
fn origin(loaded: &LoadedTable, settings: &[String]) -> Origin {
    let mut text = loaded.text.clone();
    for base in &loaded.bases {
        text += &format!("\n[base {}]\n{}", base.name, base.text);
    }
    Origin {
        title: loaded.table.title().into(),
        letters: loaded.table.letters().to_vec(),
        table: text,
        settings: settings.to_vec(),
    }
}
