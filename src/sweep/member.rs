//! One member of a family: its table, or why there is none, and its complexity.

use crate::complexity::counts::p_from_diagonals;
use crate::complexity::diagonals;
use crate::language::walk::{self, GrowthFault};
use crate::run::Control;
use crate::table::Table;
use crate::table::facts::{ReflectionGroup, facts};
use crate::table::file::{TableFileError, parse_with};
use crate::unfold::Mesh;
use crate::unfold::engine::{AnyEngine, Arithmetic};
use serde::{Deserialize, Serialize};

/// What is computed for every member.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct Request {
    /// Longest words.
    pub length: usize,
    /// Count generalized diagonals.
    pub by_diagonals: bool,
    /// Count words.
    pub by_beams: bool,
    /// Decide every sign with big integers only.
    pub exact_only: bool,
}

/// A parameter's value in one member.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct Setting {
    /// The parameter.
    pub name: String,
    /// Its exact value.
    pub value: String,
    /// The value as a floating-point number, for plots.
    pub approximate: f64,
}

impl Setting {
    /// `name=value`, as tables are loaded with it.
    pub fn as_option(&self) -> String {
        format!("{}={}", self.name, self.value)
    }
}

/// The row of one member.
#[derive(Clone, Debug, PartialEq, Serialize, Deserialize)]
pub struct Row {
    /// The values of the parameters.
    pub settings: Vec<Setting>,
    /// True when these values give a table: a simple polygon.
    pub is_table: bool,
    /// Why they give none.
    pub fault: Option<String>,
    /// The number of sides.
    pub sides: Option<usize>,
    /// Degree of the field of the coordinates.
    pub field_degree: Option<usize>,
    /// All interior angles below π.
    pub convex: Option<bool>,
    /// Order of the reflection group; null when infinite.
    pub reflection_group_order: Option<u64>,
    /// p(0), p(1), …; empty without a table. By beams where holes or shared letters make words bundles of beams.
    pub p: Vec<u64>,
    /// N(0), N(1), … where the route ran.
    pub diagonals: Option<Vec<u64>>,
    /// Null unless both routes ran.
    pub routes_agree: Option<bool>,
}

/// Reads a member's table file and computes its row.
///
/// # Errors
/// When the control asks to stop, or a language outgrows what can be indexed. A file that gives no table is no
/// error but a row that says so.
pub fn compute(
    (file, text): (&str, &str),
    settings: Vec<Setting>,
    request: Request,
    control: &Control,
) -> Result<Row, GrowthFault> {
    let set: Vec<String> = settings.iter().map(Setting::as_option).collect();
    match parse_with(file, text, &set) {
        Ok(loaded) => row_of(&loaded.table, settings, request, control),
        Err(fault) => Ok(Row {
            settings,
            is_table: false,
            fault: Some(one_line(&fault)),
            sides: None,
            field_degree: None,
            convex: None,
            reflection_group_order: None,
            p: Vec::new(),
            diagonals: None,
            routes_agree: None,
        }),
    }
}

fn one_line(fault: &TableFileError) -> String {
    match fault {
        TableFileError::Fault(diagnostic) => diagnostic.message.clone(),
        other => other.to_string(),
    }
}

/// The row of a table.
///
/// # Errors
/// As [`compute`].
pub fn row_of(
    table: &Table,
    settings: Vec<Setting>,
    request: Request,
    control: &Control,
) -> Result<Row, GrowthFault> {
    let arithmetic = match request.exact_only {
        true => Arithmetic::BigOnly,
        false => Arithmetic::Tiered,
    };
    let length = request.length;
    let engine = AnyEngine::new(table, length, arithmetic);
    let mesh = Mesh::new(table);
    let mut found = None;
    if request.by_diagonals {
        found = Some(diagonals::count(&engine, &mesh, length.saturating_sub(2), control)?.0);
    }
    // Where a word is a bundle of beams p does not follow from the diagonals.
    let follows = table.has_one_beam_a_word();
    let by_diagonals = found
        .as_ref()
        .filter(|_| follows)
        .map(|n| p_from_diagonals(table.sides() as u64, n, length));
    let mut by_beams = None;
    if request.by_beams || !follows {
        by_beams = Some(walk::count(&engine, &mesh, length, control)?.0);
    }
    let facts = facts(table);
    Ok(Row {
        settings,
        is_table: true,
        fault: None,
        sides: Some(table.sides()),
        field_degree: Some(table.field().degree()),
        convex: Some(facts.convex),
        reflection_group_order: match facts.group {
            ReflectionGroup::Finite { r } => Some(2 * r),
            ReflectionGroup::Infinite => None,
        },
        routes_agree: match (&by_beams, &by_diagonals) {
            (Some(a), Some(b)) => Some(a == b),
            _ => None,
        },
        p: by_beams.or(by_diagonals).unwrap_or_default(),
        diagonals: found,
    })
}
