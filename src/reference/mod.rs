//! Reference languages: what a billiard's language is set beside.
//!
//! Each language is given by a finite rule in a small file (see [`mod@file`]) and is computed *completely* up to a
//! length, by a method whose completeness is proved in its module:
//!
//! - [`substitution`]: one substitution, or a directive sequence of them (S-adic);
//! - [`translation`]: interval exchanges and interval translation maps with exact lengths;
//! - [`toeplitz`]: a periodic pattern whose holes are filled with the word itself;
//! - [`finite_type`]: all two-sided sequences without forbidden words.
//!
//! All of them end in the common form, [`Language`], so whatever works on a billiard's language works on them.

pub mod file;
pub mod finite_type;
pub mod substitution;
pub mod toeplitz;
pub mod translation;

use crate::language::Language;
use crate::language::suffixes::TextFault;
use crate::language::tree::LanguageFault;
use thiserror::Error;

/// The rule of a language.
#[derive(Clone, Debug)]
pub enum Rule {
    /// A substitution, or a directive sequence.
    Substitutive(substitution::Directive),
    /// An interval exchange or interval translation map.
    Translations(translation::Translations),
    /// A pattern with holes.
    Toeplitz(toeplitz::Pattern),
    /// Forbidden words.
    FiniteType(finite_type::FiniteType),
}

/// Why a rule gives no language.
#[derive(Clone, Debug, PartialEq, Eq, Error)]
pub enum ReferenceFault {
    /// More words than fit.
    #[error("the language has more than {allowed} words up to length {longest}")]
    TooManyWords {
        /// The length that was asked for.
        longest: usize,
        /// How many fit.
        allowed: u64,
    },
    /// Images of letters that are too long to be written out.
    #[error(
        "words of length {longest} need images of more than {} letters",
        substitution::LONGEST_IMAGES
    )]
    ImagesTooLong {
        /// The length that was asked for.
        longest: usize,
    },
    /// The images of an interval translation map go on shrinking.
    #[error("the images of the map are still shrinking after {steps} steps")]
    StillShrinking {
        /// How many steps were made.
        steps: usize,
    },
    /// No two-sided sequence avoids the forbidden words.
    #[error("no two-sided sequence avoids the forbidden words")]
    Empty,
    /// Too many allowed words as long as the forbidden ones.
    #[error(
        "the forbidden words leave more than {} words of length {length}",
        finite_type::MOST_STATES
    )]
    TooManyStates {
        /// Their length.
        length: usize,
    },
    /// The words cannot be searched or numbered.
    #[error(transparent)]
    Text(#[from] TextFault),
}

impl From<LanguageFault> for ReferenceFault {
    fn from(fault: LanguageFault) -> ReferenceFault {
        ReferenceFault::Text(fault.into())
    }
}

impl Rule {
    /// All words up to a length.
    ///
    /// # Errors
    /// As [`ReferenceFault`] says; more than `allowed` words are refused.
    pub fn language(&self, longest: usize, allowed: u64) -> Result<Language, ReferenceFault> {
        let found = match self {
            Rule::Substitutive(directive) => directive.language(longest, allowed),
            Rule::Translations(map) => map.language(longest, allowed),
            Rule::Toeplitz(pattern) => pattern.language(longest, allowed),
            Rule::FiniteType(shift) => shift.language(longest, allowed),
        };
        found.map_err(|fault| match fault {
            ReferenceFault::Text(TextFault::TooMany { .. }) => {
                ReferenceFault::TooManyWords { longest, allowed }
            }
            other => other,
        })
    }

    /// The number of letters.
    pub fn alphabet(&self) -> usize {
        match self {
            Rule::Substitutive(directive) => directive.alphabet(),
            Rule::Translations(map) => map.alphabet(),
            Rule::Toeplitz(pattern) => pattern.alphabet(),
            Rule::FiniteType(shift) => shift.alphabet(),
        }
    }

    /// What kind of rule it is, for people and scripts.
    pub fn kind(&self) -> &'static str {
        match self {
            Rule::Substitutive(directive) if directive.is_one_substitution() => "substitution",
            Rule::Substitutive(_) => "directive sequence",
            Rule::Translations(map) if map.is_exchange() => "interval exchange",
            Rule::Translations(_) => "interval translation map",
            Rule::Toeplitz(_) => "Toeplitz pattern",
            Rule::FiniteType(_) => "finite type",
        }
    }
}
