//! What does a stored language cost beside a sorted text file and a hash set, to build, to keep and to ask?
//!
//! `cargo bench --bench store -- TABLE LENGTH`, with a file of `polygons/` without its ending [right-isosceles 250]. All three hold the
//! words of one length and answer for the same words, half of them in the language and half with one letter altered; the text file
//! is in memory and its lines have one length, so it is asked by halving. What holds only the words of one length cannot answer for shorter
//! ones, the stored language can. When the words need more than a GiB as text, the other two are left out and the size of the text is computed.

use rand::{RngExt, SeedableRng};
use rand_chacha::ChaCha8Rng;
use reboundary::complexity::{counts::p_from_diagonals, diagonals};
use reboundary::language::store::{
    Everything, Origin, Side, StoredLanguage, choose_order, open, store_table,
};
use reboundary::run::{Control, memory};
use reboundary::table::Table;
use reboundary::table::file::load;
use reboundary::unfold::Mesh;
use reboundary::unfold::engine::{AnyEngine, Arithmetic};
use std::collections::HashSet;
use std::hint::black_box;
use std::ops::ControlFlow;
use std::path::Path;
use std::time::Instant;

const QUERIES: usize = 100_000;

fn main() {
    let arguments: Vec<String> = std::env::args()
        .skip(1)
        .filter(|argument| !argument.starts_with('-'))
        .collect();
    let name = arguments.first().map_or("right-isosceles", String::as_str);
    let length = match arguments.get(1) {
        Some(text) => text.parse().expect("a length"),
        None => 250,
    };
    let polygons = Path::new(env!("CARGO_MANIFEST_DIR")).join("polygons");
    let table = load(&polygons.join(format!("{name}.toml")));
    let table = table.unwrap_or_else(|fault| panic!("{fault}")).table;
    let folder = tempfile::tempdir().expect("a folder");
    let path = folder.path().join("words");
    let stored = build(&table, length, &path);
    let p = stored.count(length).expect("stored");
    let asked = questions(&stored);
    println!("{:<34} {:>10}", "question", "ns");
    questions_to_stored(&stored, &asked);
    let text_bytes = p * (length as u64 + 1);
    println!(
        "sorted text: {} ({} bytes a word)",
        memory::display(text_bytes),
        length + 1
    );
    if text_bytes <= 1 << 30 {
        beside_text(&stored, &asked);
        beside_hash_set(&stored, &asked);
    }
}

fn build(table: &Table, length: usize, path: &Path) -> StoredLanguage {
    let (mesh, control) = (Mesh::new(table), Control::new());
    let engine = AnyEngine::new(table, length, Arithmetic::Tiered);
    let most = length.saturating_sub(2);
    let (found, _) = diagonals::count(&engine, &mesh, most, &control).expect("not stopped");
    let p = p_from_diagonals(table.sides() as u64, &found, length);
    let order = choose_order(&p);
    let origin = Origin {
        title: table.title().into(),
        letters: table.letters().to_vec(),
        table: String::new(),
        settings: Vec::new(),
    };
    let begun = Instant::now();
    store_table(path, &origin, (&engine, &mesh), (length, order), &control).expect("stored");
    let seconds = begun.elapsed().as_secs_f64();
    let words = p[length] as f64;
    let peak = memory::peak().map_or("unknown".into(), memory::display);
    let begun = Instant::now();
    let stored = open(path).expect("opened");
    println!(
        "{}: {words} words of length {length}, {} threads, graph of order {order}\n\
         stored: {} ({:.2} bytes a word), {seconds:.1} s, {:.0} words/s, peak memory {peak}; opened in {:.1?}",
        table.title(),
        rayon::current_num_threads(),
        memory::display(stored.bytes()),
        stored.bytes() as f64 / words,
        words / seconds,
        begun.elapsed()
    );
    stored
}

fn questions(stored: &StoredLanguage) -> Vec<Vec<u8>> {
    let mut random = ChaCha8Rng::seed_from_u64(1);
    let length = stored.longest();
    let letters = stored.description().letters.len() as u8;
    let mut words = stored.words_of_length(length).expect("stored");
    (0..QUERIES)
        .map(|i| {
            let mut word = words.random(&mut random);
            if i % 2 == 1 {
                word[random.random_range(0..length)] = random.random_range(0..letters);
            }
            word
        })
        .collect()
}

/// The mean time of a question.
fn time(name: &str, times: usize, mut ask: impl FnMut(usize)) {
    let begun = Instant::now();
    for i in 0..times {
        ask(i);
    }
    let ns = begun.elapsed().as_nanos() as f64 / times as f64;
    println!("{name:<34} {ns:>10.0}");
}

fn questions_to_stored(stored: &StoredLanguage, asked: &[Vec<u8>]) {
    let length = stored.longest();
    time("stored: contains", QUERIES, |i| {
        black_box(stored.find(&asked[i]).expect("short"));
    });
    time("stored: contains, half the length", QUERIES, |i| {
        black_box(stored.find(&asked[i][..length / 2]).expect("short"));
    });
    time("stored: continuations", QUERIES, |i| {
        let prefix = stored.longest_prefix(&asked[i][..length - 1]);
        black_box(stored.continuations(&prefix).expect("short"));
    });
    let mut words = stored.words_of_length(length).expect("stored");
    let mut random = ChaCha8Rng::seed_from_u64(2);
    time("stored: random word", QUERIES, |_| {
        black_box(words.random(&mut random));
    });
    time("stored: number of a word", QUERIES, |i| {
        black_box(words.place(&asked[i & !1]));
    });
    time("stored: count behind a prefix", QUERIES, |i| {
        let prefix = stored.longest_prefix(&asked[i][..length / 3]);
        black_box(words.count(&prefix));
    });
    let mut shorter = stored.words_of_length(length / 2).expect("stored");
    time("stored: first random word of N/2", 1, |_| {
        black_box(shorter.random(&mut random));
    });
    time("stored: next random words of N/2", QUERIES, |_| {
        black_box(shorter.random(&mut random));
    });
    let mut found = 0u64;
    time("stored: all bispecial words of N-2", 1, |_| {
        let visited = stored.special(Side::Both, length - 2, |_| {
            found += 1;
            ControlFlow::Continue(())
        });
        visited.expect("short");
    });
    println!("({found} of them)");
}

fn beside_text(stored: &StoredLanguage, asked: &[Vec<u8>]) {
    let length = stored.longest();
    let mut text = Vec::new();
    let visited = stored.visit_length(length, &Everything, |word, _, ()| {
        text.extend_from_slice(word);
        text.push(b'\n');
        ControlFlow::Continue(())
    });
    visited.expect("stored");
    let line = |i: usize| &text[i * (length + 1)..][..length];
    time("text: contains", QUERIES, |i| {
        let (mut low, mut high) = (0, text.len() / (length + 1));
        while low < high {
            let middle = low + (high - low) / 2;
            if line(middle) < &asked[i][..] {
                low = middle + 1;
            } else {
                high = middle;
            }
        }
        black_box(low * (length + 1) < text.len() && line(low) == asked[i]);
    });
}

fn beside_hash_set(stored: &StoredLanguage, asked: &[Vec<u8>]) {
    let length = stored.longest();
    let before = memory::resident();
    let begun = Instant::now();
    let mut set: HashSet<Box<[u8]>> = HashSet::new();
    let visited = stored.visit_length(length, &Everything, |word, _, ()| {
        set.insert(word.into());
        ControlFlow::Continue(())
    });
    visited.expect("stored");
    let grown = memory::resident().zip(before);
    let grown = grown.map_or(0, |(after, before)| after.saturating_sub(before));
    println!(
        "hash set: {} ({:.1} bytes a word), filled in {:.1?}",
        memory::display(grown),
        grown as f64 / set.len() as f64,
        begun.elapsed()
    );
    time("hash set: contains", QUERIES, |i| {
        black_box(set.contains(&asked[i][..]));
    });
}
