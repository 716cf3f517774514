//! Results of the finished parts of long walks, kept in a folder.
//!
//! A walk is divided into parts whose results are lists of counts. The folder holds one log: a first line that says
//! what is computed, and a line for each finished part, appended in one write when the part ends. Each line begins with
//! a sum over the first line's content and its own, so a torn, altered or foreign line is known and not believed;
//! its part is computed again. Opening writes the log anew with the lines that are believed, under another name,
//! and renames it: at any moment the folder holds a log that can be continued.
//!
//! A part does not depend on threads or on other parts, so a continued run gives the same results.

use serde::{Deserialize, Serialize};
use std::collections::BTreeMap;
use std::fs::{self, File, OpenOptions};
use std::io::{self, Write};
use std::path::{Path, PathBuf};
use std::sync::atomic::{AtomicUsize, Ordering};
use std::sync::{Mutex, PoisonError};
use std::time::{Duration, Instant};
use thiserror::Error;

/// Knows results of parts of one walk, and hears of finished ones.
pub trait Ledger: Sync {
    /// The counts of a part, when they are known.
    fn recall(&self, part: usize) -> Option<Vec<u64>>;
    /// Called once for each part that was not recalled, when it is finished.
    fn keep(&self, part: usize, counts: &[u64]);
    /// False when [`Ledger::keep`] does nothing, so that there is no need to prepare for it.
    fn keeps(&self) -> bool {
        true
    }
}

/// Knows nothing and keeps nothing.
#[derive(Clone, Copy, Debug)]
pub struct Unkept;

impl Ledger for Unkept {
    fn recall(&self, _: usize) -> Option<Vec<u64>> {
        None
    }

    fn keep(&self, _: usize, _: &[u64]) {}

    fn keeps(&self) -> bool {
        false
    }
}

/// The parts of one walk in a checkpoint, when there is one.
pub fn ledger<'a>(
    checkpoint: Option<&'a Checkpoint>,
    walk: &'static str,
    length: usize,
) -> Box<dyn Ledger + 'a> {
    match checkpoint {
        Some(checkpoint) => Box::new(checkpoint.walk(walk, length)),
        None => Box::new(Unkept),
    }
}

/// What a checkpoint is of. Its parts are of no use to anything else.
#[derive(Clone, Debug, PartialEq, Eq, Serialize, Deserialize)]
pub struct Identity {
    /// Version of the program.
    pub version: String,
    /// Everything that makes the table.
    pub table: String,
    /// The options that the results depend on, as the user would write them.
    pub options: String,
}

/// Why a checkpoint cannot be used.
#[derive(Debug, Error)]
pub enum CheckpointFault {
    /// The system refused.
    #[error("cannot use the checkpoint {}: {source}", path.display())]
    System {
        /// The folder or file.
        path: PathBuf,
        /// The reason.
        source: io::Error,
    },
    /// The folder holds something else.
    #[error("{} is not empty and holds no checkpoint: choose another folder", path.display())]
    Occupied {
        /// The folder.
        path: PathBuf,
    },
    /// There is a checkpoint, and nobody asked to continue it.
    #[error("{} holds a checkpoint: add --resume to continue it, or remove it", path.display())]
    NotAsked {
        /// The folder.
        path: PathBuf,
    },
    /// Another run writes there.
    #[error("{} is in use by another run", path.display())]
    InUse {
        /// The folder.
        path: PathBuf,
    },
    /// It is a checkpoint of something else.
    #[error("the checkpoint in {} is of {difference}: use another folder, or remove it", path.display())]
    Foreign {
        /// The folder.
        path: PathBuf,
        /// What is different.
        difference: String,
    },
}

/// The line of a part, behind its sum.
#[derive(Serialize, Deserialize)]
struct Record {
    walk: String,
    length: usize,
    part: usize,
    counts: Vec<u64>,
}

/// What tells a part: its walk, the walk's length, and its number.
type PartKey = (String, usize, usize);

/// The log, to be written by one part after another.
#[derive(Debug)]
struct Log {
    file: File,
    flushed: Instant,
    failure: Option<io::Error>,
}

/// A checkpoint in use. No other run can open it meanwhile.
#[derive(Debug)]
pub struct Checkpoint {
    identity: String,
    known: BTreeMap<PartKey, Vec<u64>>,
    recalled: AtomicUsize,
    rejected: usize,
    log: Mutex<Log>,
    /// Holds the lock; the system frees it however the process ends.
    _lock: Lock,
}

/// A locked file. It is unlocked in so many words, because closing it is not enough while a child process that
/// is being started shares it.
#[derive(Debug)]
struct Lock(File);

impl Drop for Lock {
    fn drop(&mut self) {
        // The system frees what this could not.
        let _ = self.0.unlock();
    }
}

const LOG: &str = "parts.log";
const NEW_LOG: &str = "parts.new";
const LOCK: &str = "lock";

/// Lines are flushed to disk this often, so that a power cut costs little; the death of the process costs nothing.
const FLUSH_EVERY: Duration = Duration::from_secs(1);

impl Checkpoint {
    /// Opens the checkpoint in a folder, or begins one in an empty or missing folder (whose parent exists).
    ///
    /// Cost: reads and writes the log once.
    ///
    /// # Errors
    /// As [`CheckpointFault`] says.
    pub fn open(
        folder: &Path,
        identity: &Identity,
        resume: bool,
    ) -> Result<Checkpoint, CheckpointFault> {
        let system = |source| CheckpointFault::System {
            path: folder.into(),
            source,
        };
        let path = || folder.to_path_buf();
        if !folder.exists() {
            // One level only: a mistyped path should not grow a tree of folders.
            fs::create_dir(folder).map_err(system)?;
        }
        for entry in fs::read_dir(folder).map_err(system)? {
            let name = entry.map_err(system)?.file_name();
            if ![LOG, NEW_LOG, LOCK].iter().any(|own| name == **own) {
                return Err(CheckpointFault::Occupied { path: path() });
            }
        }
        let log_path = folder.join(LOG);
        if log_path.exists() && !resume {
            return Err(CheckpointFault::NotAsked { path: path() });
        }
        let lock = (OpenOptions::new().create(true).append(true))
            .open(folder.join(LOCK))
            .map_err(system)?;
        match lock.try_lock() {
            Ok(()) => {}
            Err(fs::TryLockError::WouldBlock) => {
                return Err(CheckpointFault::InUse { path: path() });
            }
            Err(fs::TryLockError::Error(source)) => return Err(system(source)),
        }
        let lock = Lock(lock);
        let identity_text = serde_json::to_string(identity).map_err(|e| system(e.into()))?;
        let (mut known, mut rejected) = (BTreeMap::new(), 0);
        if log_path.exists() {
            let bytes = fs::read(&log_path).map_err(system)?;
            let mut lines = bytes.split(|byte| *byte == b'\n');
            check_identity(lines.next().unwrap_or_default(), identity).map_err(|difference| {
                CheckpointFault::Foreign {
                    path: path(),
                    difference,
                }
            })?;
            for line in lines.filter(|line| !line.is_empty()) {
                match believed(&identity_text, line) {
                    Some(Record {
                        walk,
                        length,
                        part,
                        counts,
                    }) => {
                        known.insert((walk, length, part), counts);
                    }
                    None => rejected += 1,
                }
            }
        }
        let new_path = folder.join(NEW_LOG);
        let mut text = sealed("", &identity_text);
        for ((walk, length, part), counts) in &known {
            text += &line_of(&identity_text, walk, *length, *part, counts).map_err(system)?;
        }
        let mut file = File::create(&new_path).map_err(system)?;
        file.write_all(text.as_bytes()).map_err(system)?;
        file.sync_all().map_err(system)?;
        fs::rename(&new_path, &log_path).map_err(system)?;
        Ok(Checkpoint {
            identity: identity_text,
            known,
            recalled: AtomicUsize::new(0),
            rejected,
            log: Mutex::new(Log {
                file,
                flushed: Instant::now(),
                failure: None,
            }),
            _lock: lock,
        })
    }

    /// The parts of one walk, told from others by its name and length.
    pub fn walk(&self, name: &'static str, length: usize) -> KeptWalk<'_> {
        KeptWalk {
            checkpoint: self,
            name,
            length,
        }
    }

    /// Parts that were recalled so far.
    pub fn recalled(&self) -> usize {
        self.recalled.load(Ordering::Relaxed)
    }

    /// Lines of the log that were torn or altered.
    pub fn rejected(&self) -> usize {
        self.rejected
    }

    /// Why parts could not be written, if so. Nothing is written after a failure; the results are not touched by it.
    pub fn failure(&self) -> Option<String> {
        let log = self.log.lock().unwrap_or_else(PoisonError::into_inner);
        log.failure.as_ref().map(io::Error::to_string)
    }
}

/// The parts of one walk in a checkpoint.
#[derive(Clone, Copy, Debug)]
pub struct KeptWalk<'a> {
    checkpoint: &'a Checkpoint,
    name: &'static str,
    length: usize,
}

impl Ledger for KeptWalk<'_> {
    fn recall(&self, part: usize) -> Option<Vec<u64>> {
        let key = (self.name.to_string(), self.length, part);
        let counts = self.checkpoint.known.get(&key)?;
        self.checkpoint.recalled.fetch_add(1, Ordering::Relaxed);
        Some(counts.clone())
    }

    fn keep(&self, part: usize, counts: &[u64]) {
        let line = line_of(
            &self.checkpoint.identity,
            self.name,
            self.length,
            part,
            counts,
        );
        let lock = self.checkpoint.log.lock();
        let mut log = lock.unwrap_or_else(PoisonError::into_inner);
        if log.failure.is_some() {
            // A torn line may be at the end; the next line would be lost with it.
            return;
        }
        let written = line.and_then(|line| {
            log.file.write_all(line.as_bytes())?;
            if log.flushed.elapsed() >= FLUSH_EVERY {
                log.file.sync_data()?;
                log.flushed = Instant::now();
            }
            Ok(())
        });
        log.failure = written.err();
    }
}

fn line_of(
    identity: &str,
    walk: &str,
    length: usize,
    part: usize,
    counts: &[u64],
) -> io::Result<String> {
    let record = Record {
        walk: walk.into(),
        length,
        part,
        counts: counts.into(),
    };
    Ok(sealed(identity, &serde_json::to_string(&record)?))
}

/// A line: the sum over the identity and the content, and the content.
fn sealed(identity: &str, content: &str) -> String {
    format!("{:016x} {content}\n", sum(identity, content))
}

/// FNV-1a over both texts, each behind its length. Each byte acts on the sum one to one, so no change of one byte goes unseen.
fn sum(identity: &str, content: &str) -> u64 {
    let mut sum = 0xcbf2_9ce4_8422_2325_u64;
    for text in [identity, content] {
        for byte in (text.len() as u64)
            .to_le_bytes()
            .iter()
            .chain(text.as_bytes())
        {
            sum = (sum ^ u64::from(*byte)).wrapping_mul(0x0000_0100_0000_01b3);
        }
    }
    sum
}

/// The content of a line, when its sum is right.
fn unsealed<'a>(identity: &str, line: &'a [u8]) -> Option<&'a str> {
    let (written, content) = std::str::from_utf8(line).ok()?.split_once(' ')?;
    (written == format!("{:016x}", sum(identity, content))).then_some(content)
}

fn believed(identity: &str, line: &[u8]) -> Option<Record> {
    serde_json::from_str(unsealed(identity, line)?).ok()
}

/// Says what is different when the first line of a log is not of this identity.
fn check_identity(line: &[u8], identity: &Identity) -> Result<(), String> {
    let damaged = "unknown origin, because its first line is damaged".to_string();
    let earlier: Identity = unsealed("", line)
        .and_then(|content| serde_json::from_str(content).ok())
        .ok_or(damaged)?;
    if earlier.version != identity.version {
        Err(format!(
            "version {} of the program, and this is {}",
            earlier.version, identity.version
        ))
    } else if earlier.table != identity.table {
        Err("another table (or its file has changed)".into())
    } else if earlier.options != identity.options {
        Err(format!(
            "a run with `{}`, not `{}`",
            earlier.options, identity.options
        ))
    } else {
        Ok(())
    }
}
