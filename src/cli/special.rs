//! `reboundary special`.

use super::analysis_arguments::{SpecialOptions, SpecialRows};
use super::arguments::Format;
use super::diagonals::{Listed, listed};
use super::fault::Fault;
use super::grown::{Needs, grow};
use super::output::{emit, read_table, write_columns, write_json};
use super::progress::{Progress, interruptible_control};
use crate::complexity::diagonals::{Diagonal, list};
use crate::complexity::special_tree::{
    Bispecial, End, SpecialTree, Strength, bispecial_words, special_tree,
};
use crate::factor_graph::export::spell;
use crate::figure::{
    Caption, LABELLED_LEAVES, MOST_LEAVES, TreeDrawing, TreeMark, TreeNode, tree_picture,
};
use crate::language::{Language, WordId};
use crate::run::files::{check_place, write_whole};
use crate::table::Table;
use crate::table::summary::ExactVector;
use serde::Serialize;
use std::io::{self, Write};

/// Counts of one length.
#[derive(Serialize)]
struct Growth {
    length: usize,
    /// p(n).
    words: usize,
    /// s(n).
    first_difference: i64,
    /// b(n), the sum of the multiplicities.
    second_difference: i64,
    /// N(n).
    diagonals: usize,
    right_special: usize,
    left_special: usize,
    bispecial: usize,
    weak: usize,
    neutral: usize,
    strong: usize,
}

#[derive(Serialize)]
struct SpecialRow {
    length: usize,
    word: String,
    /// Null for the empty word.
    parent: Option<String>,
    /// The letters that can follow it, or stand before it.
    letters: String,
}

#[derive(Serialize)]
struct BispecialRow {
    length: usize,
    word: String,
    left: u32,
    right: u32,
    multiplicity: i64,
    strength: Strength,
    /// Positions in the list of diagonals.
    diagonals: Vec<usize>,
}

#[derive(Serialize)]
struct SpecialRecord {
    schema: &'static str,
    title: String,
    length: usize,
    /// Whether multiplicities of nonempty words count diagonals.
    one_beam_a_word: bool,
    growth: Vec<Growth>,
    right_special: Vec<SpecialRow>,
    left_special: Vec<SpecialRow>,
    bispecial: Vec<BispecialRow>,
    diagonals: Vec<Listed>,
}

/// Everything that the command found.
struct Found {
    table: Table,
    language: Language,
    length: usize,
    right: SpecialTree,
    left: SpecialTree,
    bispecial: Vec<Vec<Bispecial>>,
    diagonals: Vec<Diagonal>,
}

pub fn run(options: &SpecialOptions) -> Result<(), Fault> {
    if let Some(path) = &options.picture {
        check_place(path)?;
        if options.out.as_ref() == Some(path) {
            return Err(Fault::BadInput(format!(
                "--out and --picture both name {}; give them different names",
                path.display()
            )));
        }
    }
    let loaded = read_table(&options.table, &options.settings, options.common.quiet)?;
    let control = interruptible_control();
    let progress = Progress::new(&control, options.common.quiet);
    let needs = Needs {
        more_bytes_a_word: 0,
        allowed: options.budget_memory,
    };
    let length = options.length;
    let arithmetic = options.exactness.arithmetic();
    let grown = grow(
        &loaded.table,
        length + 2,
        arithmetic,
        needs,
        &control,
        &progress,
    )?;
    progress.begin("generalized diagonals", None);
    let (diagonals, _) = list(&grown.engine, &grown.mesh, length, &control)?;
    let language = grown.language;
    let found = Found {
        right: special_tree(&language, End::Right, length),
        left: special_tree(&language, End::Left, length),
        bispecial: bispecial_words(&language, length, &diagonals, |s| grown.mesh.letter(s)),
        table: loaded.table,
        language,
        length,
        diagonals,
    };
    drop(progress);
    if let Some(path) = &options.picture {
        let end = match options.rows {
            SpecialRows::Left => End::Left,
            _ => End::Right,
        };
        let svg = picture(&found, end)?;
        write_whole(path, |out| out.write_all(svg.as_bytes()))?;
    }
    emit(options.out.as_deref(), |out| match options.format {
        Format::Text => write_text(&found, options.rows, out),
        Format::Csv => write_csv(&found, options.rows, out),
        Format::Json => write_json(out, &found.record()),
    })
}

impl Found {
    fn spelled(&self, length: usize, word: WordId) -> String {
        spell(&self.language, length, word, self.table.letters())
    }

    fn growth(&self) -> Vec<Growth> {
        let p = self.language.complexity();
        (0..=self.length)
            .map(|n| {
                let of = |strength| {
                    let words = self.bispecial[n].iter();
                    words.filter(|w| w.strength() == strength).count()
                };
                Growth {
                    length: n,
                    words: self.language.count(n),
                    first_difference: p[n + 1] as i64 - p[n] as i64,
                    second_difference: p[n + 2] as i64 - 2 * p[n + 1] as i64 + p[n] as i64,
                    diagonals: self.diagonals.iter().filter(|d| d.code.len() == n).count(),
                    right_special: self.right.levels[n].len(),
                    left_special: self.left.levels[n].len(),
                    bispecial: self.bispecial[n].len(),
                    weak: of(Strength::Weak),
                    neutral: of(Strength::Neutral),
                    strong: of(Strength::Strong),
                }
            })
            .collect()
    }

    /// The letters by which each word of a length can be extended.
    fn extensions(&self, end: End, length: usize) -> Vec<String> {
        let mut letters = vec![String::new(); self.language.count(length)];
        let links = match end {
            End::Left => self.language.suffixes(length + 1),
            End::Right => self.language.prefixes(length + 1),
        };
        for (longer, link) in (0..).zip(links) {
            let word = self.language.word(length + 1, longer);
            let letter = match end {
                End::Left => word[0],
                End::Right => word[length],
            };
            letters[*link as usize].push(self.table.letters()[letter as usize]);
        }
        letters
    }

    fn special_rows(&self, tree: &SpecialTree) -> Vec<SpecialRow> {
        let mut rows = Vec::new();
        for (length, level) in tree.levels.iter().enumerate() {
            let letters = self.extensions(tree.end, length);
            rows.extend(level.iter().map(|special| {
                SpecialRow {
                    length,
                    word: self.spelled(length, special.word),
                    parent: special
                        .parent
                        .map(|p| self.spelled(length - 1, tree.levels[length - 1][p].word)),
                    letters: letters[special.word as usize].clone(),
                }
            }));
        }
        rows
    }

    fn bispecial_rows(&self) -> Vec<BispecialRow> {
        let levels = self.bispecial.iter().enumerate();
        levels
            .flat_map(|(length, level)| {
                level.iter().map(move |w| BispecialRow {
                    length,
                    word: self.spelled(length, w.word),
                    left: w.left,
                    right: w.right,
                    multiplicity: w.multiplicity,
                    strength: w.strength(),
                    diagonals: w.diagonals.clone(),
                })
            })
            .collect()
    }

    fn record(&self) -> SpecialRecord {
        SpecialRecord {
            schema: "reboundary-special/1",
            title: self.table.title().into(),
            length: self.length,
            one_beam_a_word: self.table.has_one_beam_a_word(),
            growth: self.growth(),
            right_special: self.special_rows(&self.right),
            left_special: self.special_rows(&self.left),
            bispecial: self.bispecial_rows(),
            diagonals: self
                .diagonals
                .iter()
                .map(|d| listed(&self.table, d))
                .collect(),
        }
    }

    /// Header and cells of the rows of counts or of bispecial words.
    fn cells(&self, rows: SpecialRows) -> (Vec<&'static str>, Vec<Vec<String>>) {
        match rows {
            SpecialRows::Growth => self.growth_cells(),
            SpecialRows::Right => self.tree_cells(&self.right),
            SpecialRows::Left => self.tree_cells(&self.left),
            SpecialRows::Bispecial => self.bispecial_cells(),
        }
    }

    fn growth_cells(&self) -> (Vec<&'static str>, Vec<Vec<String>>) {
        let header = vec![
            "length",
            "words",
            "first_difference",
            "second_difference",
            "diagonals",
            "right_special",
            "left_special",
            "bispecial",
            "weak",
            "neutral",
            "strong",
        ];
        let cells = self.growth().into_iter().map(|g| {
            vec![
                g.length.to_string(),
                g.words.to_string(),
                g.first_difference.to_string(),
                g.second_difference.to_string(),
                g.diagonals.to_string(),
                g.right_special.to_string(),
                g.left_special.to_string(),
                g.bispecial.to_string(),
                g.weak.to_string(),
                g.neutral.to_string(),
                g.strong.to_string(),
            ]
        });
        (header, cells.collect())
    }

    fn tree_cells(&self, tree: &SpecialTree) -> (Vec<&'static str>, Vec<Vec<String>>) {
        let rows = self.special_rows(tree).into_iter().map(|row| {
            let parent = row.parent.unwrap_or_default();
            vec![row.length.to_string(), row.word, parent, row.letters]
        });
        (vec!["length", "word", "parent", "letters"], rows.collect())
    }

    fn bispecial_cells(&self) -> (Vec<&'static str>, Vec<Vec<String>>) {
        let header = vec![
            "length",
            "word",
            "left",
            "right",
            "multiplicity",
            "strength",
            "diagonals",
        ];
        let cells = self.bispecial_rows().into_iter().map(|row| {
            let made_by = row.diagonals.iter().map(|d| name(&self.diagonals[*d]));
            let made_by: Vec<String> = made_by.collect();
            vec![
                row.length.to_string(),
                row.word,
                row.left.to_string(),
                row.right.to_string(),
                row.multiplicity.to_string(),
                match row.strength {
                    Strength::Weak => "weak",
                    Strength::Neutral => "neutral",
                    Strength::Strong => "strong",
                }
                .to_string(),
                made_by.join("; "),
            ]
        });
        (header, cells.collect())
    }
}

/// Ends and exact displacement of a diagonal.
fn name(diagonal: &Diagonal) -> String {
    let exact = ExactVector::new(&diagonal.displacement);
    let (x, y) = (exact.x.exact, exact.y.exact);
    format!("{} to {} by ({x}, {y})", diagonal.start.0, diagonal.end.0)
}

fn write_csv(found: &Found, rows: SpecialRows, out: &mut dyn Write) -> io::Result<()> {
    let mut csv = csv::Writer::from_writer(out);
    let (header, cells) = found.cells(rows);
    csv.write_record(header)?;
    for row in cells {
        csv.write_record(row)?;
    }
    csv.flush()
}

fn write_text(found: &Found, rows: SpecialRows, out: &mut dyn Write) -> io::Result<()> {
    writeln!(out, "{}", found.table.title())?;
    match rows {
        SpecialRows::Growth => {
            let (_, cells) = found.growth_cells();
            let header = [
                "n",
                "p(n)",
                "s(n)",
                "b(n)",
                "N(n)",
                "right special",
                "left special",
                "bispecial",
                "weak",
                "neutral",
                "strong",
            ];
            write_columns(out, &header, &cells)
        }
        SpecialRows::Bispecial => {
            // People are shown the ends alone.
            let (header, mut cells) = found.bispecial_cells();
            for (row, cells) in found.bispecial_rows().iter().zip(&mut cells) {
                let made_by = row.diagonals.iter().map(|d| &found.diagonals[*d]);
                let ends = made_by.map(|d| format!("{}-{}", d.start.0, d.end.0));
                cells[6] = ends.collect::<Vec<String>>().join(" ");
            }
            write_columns(out, &header, &cells)
        }
        SpecialRows::Right => write_tree(found, &found.right, out),
        SpecialRows::Left => write_tree(found, &found.left, out),
    }
}

/// The tree, indented: each word and the letters by which it can be extended.
fn write_tree(found: &Found, tree: &SpecialTree, out: &mut dyn Write) -> io::Result<()> {
    let letters: Vec<Vec<String>> = (0..=found.length)
        .map(|n| found.extensions(tree.end, n))
        .collect();
    let children = children(tree);
    let mut stack = vec![(0, 0)];
    while let Some((n, at)) = stack.pop() {
        let special = &tree.levels[n][at];
        let word = match n {
            0 => "(empty)".to_string(),
            _ => found.spelled(n, special.word),
        };
        let extensions = &letters[n][special.word as usize];
        let indent = "  ".repeat(n);
        match tree.end {
            End::Right => writeln!(out, "{indent}{word} then {extensions}")?,
            End::Left => writeln!(out, "{indent}{word} after {extensions}")?,
        }
        stack.extend(children[n][at].iter().rev().map(|c| (n + 1, *c)));
    }
    Ok(())
}

/// For each node the positions of its children in the next level.
fn children(tree: &SpecialTree) -> Vec<Vec<Vec<usize>>> {
    let mut children: Vec<Vec<Vec<usize>>> = tree
        .levels
        .iter()
        .map(|level| vec![Vec::new(); level.len()])
        .collect();
    for (n, level) in tree.levels.iter().enumerate().skip(1) {
        for (at, special) in level.iter().enumerate() {
            if let Some(parent) = special.parent {
                children[n - 1][parent].push(at);
            }
        }
    }
    children
}

/// The longest length to which the tree has at most so many leaves; at least 1.
fn drawn_length(children: &[Vec<Vec<usize>>], most: usize) -> usize {
    // Leaves when cut at length n: the words of length n, and shorter ones without children.
    let mut ended = 0;
    let mut drawn = 0;
    for (n, level) in children.iter().enumerate() {
        if level.len() + ended <= most || n <= 1 {
            drawn = n;
        } else {
            break;
        }
        ended += level.iter().filter(|c| c.is_empty()).count();
    }
    drawn
}

fn picture(found: &Found, end: End) -> Result<String, Fault> {
    let tree = match end {
        End::Left => &found.left,
        End::Right => &found.right,
    };
    let children = children(tree);
    let labelled = drawn_length(&children, LABELLED_LEAVES);
    // A tree that is cut early with labels is shown further without them.
    let drawn = match labelled < found.length.min(4) {
        true => drawn_length(&children, MOST_LEAVES),
        false => labelled,
    };
    let mut nodes: Vec<TreeNode> = Vec::new();
    let mut above: Vec<usize> = Vec::new();
    for (n, level) in tree.levels.iter().enumerate().take(drawn + 1) {
        let mut here = Vec::new();
        for special in level {
            let word = found.language.word(n, special.word);
            let letter = match end {
                End::Left => word.last(),
                End::Right => word.first(),
            };
            let bispecial = found.bispecial[n].iter().find(|b| b.word == special.word);
            here.push(nodes.len());
            nodes.push(TreeNode {
                parent: special.parent.map(|p| above[p]),
                label: letter.map_or("ε".into(), |l| {
                    found.table.letters()[*l as usize].to_string()
                }),
                mark: match bispecial.map(Bispecial::strength) {
                    None => TreeMark::Plain,
                    Some(Strength::Neutral) => TreeMark::Framed,
                    Some(Strength::Strong) => TreeMark::Filled,
                    Some(Strength::Weak) => TreeMark::Falling,
                },
                note: match bispecial.map(|b| b.multiplicity) {
                    None | Some(0) => String::new(),
                    Some(m @ 1..) => format!("+{m}"),
                    Some(m) => format!("−{}", -m),
                },
            });
        }
        above = here;
    }
    let (name, reading, made) = match end {
        End::Right => ("right", "from its node back to the root", "followed"),
        End::Left => ("left", "from the root to its node", "preceded"),
    };
    let cut = match drawn < found.length {
        true => format!(" Drawn to length {drawn} of {}.", found.length),
        false => String::new(),
    };
    let legend = [
        (TreeMark::Plain, format!("{name} special only")),
        (TreeMark::Framed, "bispecial, neutral: m = 0".into()),
        (
            TreeMark::Filled,
            "bispecial, strong: m > 0, new branches".into(),
        ),
        (
            TreeMark::Falling,
            "bispecial, weak: m < 0, branches end".into(),
        ),
    ];
    let title = format!("Tree of {name} special words in {}", found.table.title());
    let drawing = TreeDrawing {
        nodes,
        axis: "length of the word".into(),
        legend: legend.to_vec(),
        remark: format!("The letters of a word are read {reading}.{cut}"),
    };
    let description = format!(
        "The words up to length {drawn} that can be {made} by more than one letter. Each new column adds a letter; \
         marks tell which words are bispecial."
    );
    tree_picture(&drawing, &Caption::new(title, description))
        .map_err(|e| Fault::Failed(format!("cannot draw the tree: {e}")))
}
