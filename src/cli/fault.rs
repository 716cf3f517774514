//! What can go wrong, and the exit code that says so.

use crate::language::store::{PatternFault, QueryFault, StoreFault};
use crate::language::walk::GrowthFault;
use crate::reference::file::ReferenceFileError;
use crate::run::Stopped;
use crate::run::checkpoint::CheckpointFault;
use crate::run::files::OutputFault;
use crate::study::folder::FolderFault;
use crate::study::results::StudyFault;
use crate::table::diagnostic::Diagnostic;
use crate::table::file::TableFileError;
use std::fmt;
use std::io;

/// Exit code: the tool failed.
pub const FAILED: u8 = 1;
/// Exit code: bad input or usage.
pub const BAD_INPUT: u8 = 2;
/// Exit code: stopped by a budget or a signal.
pub const STOPPED: u8 = 3;

/// Why a command did not end well.
#[derive(Debug)]
pub enum Fault {
    /// The input is wrong; the text says where and what to write.
    BadInput(String),
    /// The input is wrong at a place of a text.
    BadText(Box<Diagnostic>),
    /// The machine or the program failed.
    Failed(String),
    /// Stopped by a signal or a budget.
    Stopped(String),
    /// Nobody reads the output any more: end quietly.
    PipeClosed,
}

impl Fault {
    /// 0 for a closed pipe, else as the constants say.
    pub fn exit_code(&self) -> u8 {
        match self {
            Fault::BadInput(_) | Fault::BadText(_) => BAD_INPUT,
            Fault::Failed(_) => FAILED,
            Fault::Stopped(_) => STOPPED,
            Fault::PipeClosed => 0,
        }
    }
}

impl fmt::Display for Fault {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self {
            Fault::BadInput(text) | Fault::Failed(text) => write!(f, "error: {text}"),
            Fault::BadText(diagnostic) => write!(f, "{diagnostic}"),
            Fault::Stopped(text) => write!(f, "stopped: {text}"),
            Fault::PipeClosed => Ok(()),
        }
    }
}

impl From<TableFileError> for Fault {
    fn from(error: TableFileError) -> Fault {
        match error {
            TableFileError::Fault(diagnostic) => Fault::BadText(diagnostic),
            other => Fault::BadInput(other.to_string()),
        }
    }
}

impl From<ReferenceFileError> for Fault {
    fn from(error: ReferenceFileError) -> Fault {
        match error {
            ReferenceFileError::Fault(diagnostic) => Fault::BadText(diagnostic),
            other => Fault::BadInput(other.to_string()),
        }
    }
}

impl From<Box<Diagnostic>> for Fault {
    fn from(diagnostic: Box<Diagnostic>) -> Fault {
        Fault::BadText(diagnostic)
    }
}

impl From<io::Error> for Fault {
    fn from(error: io::Error) -> Fault {
        if is_closed_pipe(&error) {
            Fault::PipeClosed
        } else {
            Fault::Failed(format!("cannot write the output: {error}"))
        }
    }
}

/// A closed pipe, perhaps told by the CSV writer, which hides the kind.
fn is_closed_pipe(error: &io::Error) -> bool {
    let of_csv = || {
        let inner = error.get_ref()?.downcast_ref::<csv::Error>()?;
        match inner.kind() {
            csv::ErrorKind::Io(inner) => Some(inner.kind()),
            _ => None,
        }
    };
    error.kind() == io::ErrorKind::BrokenPipe || of_csv() == Some(io::ErrorKind::BrokenPipe)
}

impl From<Stopped> for Fault {
    fn from(_: Stopped) -> Fault {
        Fault::Stopped("a signal came before the work was complete; nothing was written".into())
    }
}

impl From<GrowthFault> for Fault {
    fn from(error: GrowthFault) -> Fault {
        match error {
            GrowthFault::Stopped(stopped) => stopped.into(),
            GrowthFault::Language(fault) => Fault::Failed(fault.to_string()),
        }
    }
}

impl From<OutputFault> for Fault {
    fn from(error: OutputFault) -> Fault {
        match error {
            OutputFault::System { .. } => Fault::Failed(error.to_string()),
            _ => Fault::BadInput(error.to_string()),
        }
    }
}

impl From<CheckpointFault> for Fault {
    fn from(error: CheckpointFault) -> Fault {
        Fault::BadInput(error.to_string())
    }
}

impl From<StudyFault> for Fault {
    fn from(error: StudyFault) -> Fault {
        match error {
            StudyFault::Stopped(stopped) => stopped.into(),
            StudyFault::Growth(growth) => growth.into(),
            StudyFault::Memory { .. } => Fault::BadInput(error.to_string()),
        }
    }
}

impl From<FolderFault> for Fault {
    fn from(error: FolderFault) -> Fault {
        match error {
            FolderFault::Stopped(stopped) => stopped.into(),
            FolderFault::Output(output) => output.into(),
            FolderFault::Figure(_) => Fault::Failed(error.to_string()),
        }
    }
}

impl From<StoreFault> for Fault {
    fn from(error: StoreFault) -> Fault {
        match error {
            StoreFault::Growth(growth) => growth.into(),
            StoreFault::Output(output) => output.into(),
            StoreFault::OutOfOrder { .. } | StoreFault::NotProlongable { .. } => {
                Fault::Failed(error.to_string())
            }
            _ => Fault::BadInput(error.to_string()),
        }
    }
}

impl From<QueryFault> for Fault {
    fn from(error: QueryFault) -> Fault {
        match error {
            QueryFault::Language(_) => Fault::Failed(error.to_string()),
            _ => Fault::BadInput(error.to_string()),
        }
    }
}

impl From<PatternFault> for Fault {
    fn from(error: PatternFault) -> Fault {
        Fault::BadInput(error.to_string())
    }
}
