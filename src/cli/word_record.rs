//! What `reboundary locate` says of a word.

use crate::certificate::format::Refutation;
use crate::complexity::diagonals::Diagonal;
use crate::language::beams::WordBeam;
use crate::language::measure::RootSum;
use crate::number::Enclosure;
use crate::study::folder::spell_code;
use crate::study::record::decimal;
use crate::table::summary::ExactVector;
use crate::table::{LetterId, Table};
use serde::Serialize;
use std::io::{self, Write};

/// One word.
#[derive(Serialize)]
#[serde(untagged)]
pub enum WordRecord {
    /// Membership and measure.
    Brief(Brief),
    /// Everything.
    Full(Box<Full>),
}

/// Membership and measure.
#[derive(Serialize)]
pub struct Brief {
    word: String,
    in_language: bool,
    #[serde(skip_serializing_if = "Option::is_none")]
    measure: Option<String>,
    #[serde(skip_serializing_if = "Option::is_none")]
    longest_prefix: Option<String>,
}

impl Brief {
    /// Of a word whose longest prefix in the language has `reached` letters.
    pub fn new(word: String, length: usize, reached: usize, measure: &Enclosure) -> Brief {
        let in_language = reached == length;
        Brief {
            in_language,
            measure: in_language.then(|| decimal(measure)),
            longest_prefix: (!in_language).then(|| word.chars().take(reached).collect()),
            word,
        }
    }
}

/// A term `coefficient·√radicand` of a measure.
#[derive(Serialize)]
struct Term {
    coefficient: String,
    radicand: String,
}

/// One beam of a word: all lines with certain corner images on their left and others on their right.
#[derive(Serialize)]
struct BeamRecord {
    /// The first corner of each side, in the order in which they are hit.
    sides: Vec<usize>,
    /// The images that bound the beam on its left, from the farthest to the nearest, as vectors from corner 0.
    left: Vec<ExactVector>,
    /// Those on its right.
    right: Vec<ExactVector>,
}

#[derive(Serialize)]
struct Orbit {
    start: String,
    aim: String,
}

#[derive(Serialize)]
struct DiagonalRecord {
    start: usize,
    end: usize,
    displacement: ExactVector,
}

#[derive(Serialize)]
struct PinRecord {
    /// Sides crossed before the copy of the table that the image belongs to.
    crossings: usize,
    corner: usize,
    /// `left` or `right` of the lines.
    side: &'static str,
    weight: String,
}

/// Everything about a word. Beams and orbit are those of its longest prefix in the language.
#[derive(Serialize)]
pub struct Full {
    #[serde(flatten)]
    brief: Brief,
    #[serde(skip_serializing_if = "Option::is_none")]
    measure_exact: Option<Vec<Term>>,
    beams: Vec<BeamRecord>,
    #[serde(skip_serializing_if = "Option::is_none")]
    orbit: Option<Orbit>,
    #[serde(skip_serializing_if = "Option::is_none")]
    left_extensions: Option<Vec<char>>,
    #[serde(skip_serializing_if = "Option::is_none")]
    right_extensions: Option<Vec<char>>,
    /// |awb| − |aw| − |wb| + 1.
    #[serde(skip_serializing_if = "Option::is_none")]
    multiplicity: Option<i64>,
    /// The generalized diagonals with the word as their code.
    #[serde(skip_serializing_if = "Option::is_none")]
    diagonals: Option<Vec<DiagonalRecord>>,
    /// Why the longest prefix cannot be continued.
    #[serde(skip_serializing_if = "Option::is_none")]
    refutations: Option<Vec<Vec<PinRecord>>>,
}

impl Full {
    /// A word with its beams and an orbit, as start and aim.
    pub fn new(
        brief: Brief,
        table: &Table,
        beams: &[WordBeam],
        orbit: Option<(String, String)>,
    ) -> Full {
        let origin = table.corner(0);
        // A plain vector from corner 0 is placed where the table lies.
        let place = |v: &crate::table::Vector| ExactVector::new(&v.plus(origin));
        Full {
            brief,
            measure_exact: None,
            beams: beams
                .iter()
                .map(|beam| BeamRecord {
                    sides: beam.word.iter().map(|side| side.0 as usize).collect(),
                    left: beam.images[..beam.lefts].iter().map(place).collect(),
                    right: beam.images[beam.lefts..].iter().map(place).collect(),
                })
                .collect(),
            orbit: orbit.map(|(start, aim)| Orbit { start, aim }),
            left_extensions: None,
            right_extensions: None,
            multiplicity: None,
            diagonals: None,
            refutations: None,
        }
    }

    /// The exact measure.
    pub fn set_measure(&mut self, measure: &RootSum) {
        let terms = measure.terms().map(|(coefficient, radicand)| Term {
            coefficient: coefficient.to_string(),
            radicand: radicand.to_string(),
        });
        self.measure_exact = Some(terms.collect());
    }

    /// The extensions, found by asking for each longer word.
    pub fn set_extensions(
        &mut self,
        letters: &[char],
        word: &[LetterId],
        inside: impl Fn(&[LetterId]) -> bool,
    ) {
        let all = || (0..letters.len()).map(|l| LetterId(l as u8));
        let with = |before: Option<LetterId>, after: Option<LetterId>| -> Vec<LetterId> {
            let (before, after) = (before.into_iter(), after.into_iter());
            before.chain(word.iter().copied()).chain(after).collect()
        };
        let left: Vec<LetterId> = all().filter(|a| inside(&with(Some(*a), None))).collect();
        let right: Vec<LetterId> = all().filter(|b| inside(&with(None, Some(*b)))).collect();
        let both = left
            .iter()
            .flat_map(|a| right.iter().map(move |b| (*a, *b)))
            .filter(|(a, b)| inside(&with(Some(*a), Some(*b))))
            .count();
        self.multiplicity = Some(both as i64 - left.len() as i64 - right.len() as i64 + 1);
        let spell = |found: Vec<LetterId>| found.iter().map(|l| letters[l.0 as usize]).collect();
        self.left_extensions = Some(spell(left));
        self.right_extensions = Some(spell(right));
    }

    /// The generalized diagonals with this code.
    pub fn set_diagonals(&mut self, table: &Table, diagonals: &[Diagonal]) {
        debug_assert!(
            diagonals
                .iter()
                .all(|d| spell_code(table, &d.code) == self.brief.word),
            "the code is the word"
        );
        let records = diagonals.iter().map(|d| DiagonalRecord {
            start: d.start.0 as usize,
            end: d.end.0 as usize,
            displacement: ExactVector::new(&d.displacement),
        });
        self.diagonals = Some(records.collect());
    }

    /// Why the longest prefix cannot be continued.
    pub fn set_refutations(&mut self, table: &Table, refutations: Vec<Refutation>) {
        let field = table.field();
        let pins = |refutation: Refutation| {
            let pins = refutation.pins.into_iter().map(|pin| PinRecord {
                crossings: pin.crossings,
                corner: pin.corner,
                side: if pin.left { "left" } else { "right" },
                weight: crate::certificate::verify::read_number(field, &pin.weight)
                    .map_or(pin.weight, |weight| weight.to_string()),
            });
            pins.collect()
        };
        self.refutations = Some(refutations.into_iter().map(pins).collect());
    }
}

/// The columns of the CSV.
pub fn write_csv_header(out: &mut dyn Write) -> io::Result<()> {
    writeln!(
        out,
        "word,in_language,measure,longest_prefix,start,aim,multiplicity,diagonals"
    )
}

impl WordRecord {
    fn brief(&self) -> &Brief {
        match self {
            WordRecord::Brief(brief) => brief,
            WordRecord::Full(full) => &full.brief,
        }
    }

    /// One row.
    pub fn write_csv(&self, out: &mut dyn Write) -> io::Result<()> {
        let brief = self.brief();
        let text = |value: &Option<String>| value.clone().unwrap_or_default();
        let mut row = vec![
            brief.word.clone(),
            brief.in_language.to_string(),
            text(&brief.measure),
            text(&brief.longest_prefix),
        ];
        match self {
            WordRecord::Brief(_) => row.extend(vec![String::new(); 4]),
            WordRecord::Full(full) => {
                let orbit = full.orbit.as_ref();
                row.push(orbit.map_or(String::new(), |o| o.start.clone()));
                row.push(orbit.map_or(String::new(), |o| o.aim.clone()));
                row.push(full.multiplicity.map_or(String::new(), |m| m.to_string()));
                let count = full.diagonals.as_ref().map(Vec::len);
                row.push(count.map_or(String::new(), |n| n.to_string()));
            }
        }
        let mut csv = csv::WriterBuilder::new().from_writer(out);
        csv.write_record(&row)?;
        csv.flush()
    }
}

/// For people: a line for a brief record, a paragraph for a full one.
pub fn write_text(record: &WordRecord, first: bool, out: &mut dyn Write) -> io::Result<()> {
    let brief = record.brief();
    let full = match record {
        WordRecord::Brief(_) => {
            return match (&brief.measure, &brief.longest_prefix) {
                (Some(measure), _) => writeln!(out, "{}  in  {measure}", brief.word),
                (_, prefix) => {
                    let prefix = prefix.as_deref().unwrap_or("");
                    writeln!(out, "{}  out  longest prefix {prefix}", brief.word)
                }
            };
        }
        WordRecord::Full(full) => full,
    };
    if !first {
        writeln!(out)?;
    }
    let list = |letters: &Option<Vec<char>>| -> String {
        let letters: Vec<String> = letters.iter().flatten().map(char::to_string).collect();
        if letters.is_empty() {
            "none".into()
        } else {
            letters.join(", ")
        }
    };
    match &brief.measure {
        Some(measure) => {
            writeln!(out, "{} is in the language", brief.word)?;
            writeln!(out, "  measure     {measure}")?;
            if let Some(terms) = &full.measure_exact {
                let terms: Vec<String> = terms
                    .iter()
                    .map(|term| format!("({})·√({})", term.coefficient, term.radicand))
                    .collect();
                let text = terms.join(" + ");
                // Long exact numbers are for programs.
                if text.chars().count() <= 200 {
                    writeln!(out, "  exactly     {text}")?;
                }
            }
            for beam in &full.beams {
                writeln!(out, "  left images   {}", points(&beam.left))?;
                writeln!(out, "  right images  {}", points(&beam.right))?;
            }
        }
        None => {
            let prefix = brief.longest_prefix.as_deref().unwrap_or("");
            writeln!(out, "{} is not in the language", brief.word)?;
            writeln!(out, "  its longest prefix there is {prefix}")?;
            let refutations = full.refutations.iter().flatten();
            for refutation in refutations {
                let side = |side: &str| -> String {
                    let pins = refutation.iter().filter(|pin| pin.side == side);
                    let pins: Vec<String> = pins
                        .map(|pin| {
                            format!("corner {} after {} crossings", pin.corner, pin.crossings)
                        })
                        .collect();
                    pins.join(" and ")
                };
                writeln!(
                    out,
                    "  no line has {} on its left and {} on its right",
                    side("left"),
                    side("right")
                )?;
            }
            if full.refutations.as_ref().is_some_and(Vec::is_empty) {
                writeln!(out, "  the table has no way from its last side to the next")?;
            }
        }
    }
    if let Some(orbit) = &full.orbit {
        let of = if brief.in_language {
            "an orbit"
        } else {
            "its orbit"
        };
        writeln!(out, "  {of}    --start {} --aim {}", orbit.start, orbit.aim)?;
    }
    if brief.in_language {
        writeln!(out, "  before it   {}", list(&full.left_extensions))?;
        writeln!(out, "  after it    {}", list(&full.right_extensions))?;
        if let Some(multiplicity) = full.multiplicity {
            writeln!(out, "  bilateral multiplicity {multiplicity}")?;
        }
        for diagonal in full.diagonals.iter().flatten() {
            writeln!(
                out,
                "  generalized diagonal from corner {} to corner {}",
                diagonal.start, diagonal.end
            )?;
        }
    }
    Ok(())
}

fn points(images: &[ExactVector]) -> String {
    let short = |decimal: &str| match decimal.split_once('.') {
        Some((whole, places)) => format!("{whole}.{}", &places[..places.len().min(6)]),
        None => decimal.to_string(),
    };
    let point = |v: &ExactVector| format!("({}, {})", short(&v.x.decimal), short(&v.y.decimal));
    let points: Vec<String> = images.iter().map(point).collect();
    points.join(", ")
}
