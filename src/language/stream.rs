//! All words of one length in order, one after another, without keeping them.
//!
//! The words are walked in subtrees as in [`walk`]. Threads take the subtrees in order, and each sends
//! the words of its subtree through a channel of its own; one consumer empties the channels in order. The thread
//! of the earliest unfinished subtree never waits for anything but the consumer, so the others may wait without harm:
//! for room in their channel, or, when they are too far ahead, before they begin a subtree.
//!
//! **What is sent.** Depth first, a word shares a prefix with the word before it. A record is the length of that
//! prefix and the letters behind it; records travel in chunks.
//!
//! **Memory.** At most `AHEAD` subtrees a thread are begun and not consumed, with at most `CHUNKS` chunks of `CHUNK` bytes
//! (and what one record is over that) each: 32 MiB a thread. The seeds of `PARTS` subtrees are kept beside it. Neither grows with the
//! number of words.

use super::bundle;
use super::walk::{self, Visit, Visitor};
use crate::number::Tiers;
use crate::run::{Control, Stopped};
use crate::unfold::engine::{AnyEngine, Engine, Trail};
use crate::unfold::{Mesh, with_engine};
use std::collections::BTreeMap;
use std::sync::mpsc::{Receiver, Sender, SyncSender, channel, sync_channel};
use std::sync::{Condvar, Mutex, MutexGuard, PoisonError};
use thiserror::Error;

/// Subtrees to aim for: many, so that most fit into a channel.
const PARTS: usize = 4096;
/// Subtrees for each thread that may be begun and not consumed.
const AHEAD: usize = 2;
/// Chunks that a channel holds.
const CHUNKS: usize = 256;
/// Bytes at which a chunk is sent.
const CHUNK: usize = 1 << 16;

/// Why a stream ended before the last word.
#[derive(Clone, Debug, PartialEq, Eq, Error)]
pub enum StreamFault<F> {
    /// Asked to stop.
    #[error(transparent)]
    Stopped(#[from] Stopped),
    /// The consumer of the words failed.
    #[error("{0}")]
    Consumer(F),
}

/// Walks all words of a length in lexicographic order of the letters. `consume` hears for each word how many letters it
/// shares with the word before it (0 for the first), and its letters behind them.
///
/// Cost: Σ p(n) beam steps, by as many threads as rayon has; memory as the module says.
///
/// # Errors
/// When the control asks to stop, or the consumer fails; threads notice the latter when they next send something.
///
/// # Panics
/// If the engine was prepared for fewer crossings.
pub fn stream_words<F: Send>(
    engine: &AnyEngine,
    mesh: &Mesh,
    length: usize,
    control: &Control,
    consume: impl FnMut(usize, &[u8]) -> Result<(), F>,
) -> Result<Tiers, StreamFault<F>> {
    with_engine!(engine, engine => stream_with(engine, mesh, length, control, consume))
}

/// Sees the short words, which the seeds remember.
struct Blind;

impl<E: Engine> Visitor<E> for Blind {
    fn visit(&mut self, _: &Visit<'_, E>, _: &mut Trail<E::Exact>) {}
}

fn stream_with<E: Engine, F: Send>(
    engine: &E,
    mesh: &Mesh,
    length: usize,
    control: &Control,
    consume: impl FnMut(usize, &[u8]) -> Result<(), F>,
) -> Result<Tiers, StreamFault<F>> {
    assert!(
        length <= engine.deepest() + 1,
        "the engine must reach the longest word"
    );
    let mut tiers = Tiers::default();
    if length == 0 {
        let mut consume = consume;
        consume(0, &[]).map_err(StreamFault::Consumer)?;
        return Ok(tiers);
    }
    let below = if mesh.has_one_beam_a_word() {
        let (seeds, _) =
            walk::divide(engine, mesh, length, PARTS, control, &mut Blind, &mut tiers)?;
        let roots = seeds.iter().map(|seed| seed.word(mesh)).collect();
        let walk = |part: usize, teller: &mut Teller| {
            walk::walk_subtree(engine, mesh, length, control, &seeds[part], teller)
        };
        in_order(roots, length, walk, consume)?
    } else {
        let (seeds, _) =
            bundle::divide(engine, mesh, length, PARTS, control, &mut Blind, &mut tiers)?;
        let roots = seeds.iter().map(|seed| seed.word(mesh)).collect();
        let walk = |part: usize, teller: &mut Teller| {
            bundle::walk_subtree(engine, mesh, length, control, &seeds[part], teller)
        };
        in_order(roots, length, walk, consume)?
    };
    tiers.absorb(below);
    Ok(tiers)
}

/// Writes the words of one subtree into chunks and sends them.
struct Teller {
    length: usize,
    /// The present word.
    word: Vec<u8>,
    /// How many of its letters it shares with the word told last.
    common: usize,
    chunk: Vec<u8>,
    to: SyncSender<Vec<u8>>,
    /// Nobody listens any more.
    deaf: bool,
}

impl Teller {
    /// Tells the present word.
    fn tell(&mut self) {
        if self.deaf {
            return;
        }
        self.chunk
            .extend_from_slice(&(self.common as u32).to_le_bytes());
        self.chunk.extend_from_slice(&self.word[self.common..]);
        self.common = self.length;
        if self.chunk.len() >= CHUNK {
            self.send();
        }
    }

    fn send(&mut self) {
        self.deaf |= self.to.send(std::mem::take(&mut self.chunk)).is_err();
    }
}

impl<E: Engine> Visitor<E> for Teller {
    #[inline]
    fn visit(&mut self, visit: &Visit<'_, E>, _: &mut Trail<E::Exact>) {
        if !visit.first {
            return;
        }
        let shorter = visit.length - 1;
        self.common = self.common.min(shorter);
        self.word.truncate(shorter);
        self.word.push(visit.letter.0);
        if visit.length == self.length {
            self.tell();
        }
    }
}

/// Which subtrees are begun and consumed.
#[derive(Default)]
struct Progress {
    begun: usize,
    consumed: usize,
    closed: bool,
}

/// The progress, and a bell that rings when it changes.
#[derive(Default)]
struct Window {
    progress: Mutex<Progress>,
    bell: Condvar,
}

impl Window {
    fn lock(&self) -> MutexGuard<'_, Progress> {
        // The fields are whole numbers; a panic elsewhere leaves them meaningful.
        self.progress.lock().unwrap_or_else(PoisonError::into_inner)
    }

    /// The next subtree to walk; waits when it is too far ahead.
    fn begin(&self, parts: usize, ahead: usize) -> Option<usize> {
        let mut progress = self.lock();
        loop {
            if progress.closed || progress.begun == parts {
                return None;
            }
            if progress.begun < progress.consumed + ahead {
                progress.begun += 1;
                return Some(progress.begun - 1);
            }
            progress = (self.bell.wait(progress)).unwrap_or_else(PoisonError::into_inner);
        }
    }

    fn consumed(&self) {
        self.lock().consumed += 1;
        self.bell.notify_all();
    }

    fn close(&self) {
        self.lock().closed = true;
        self.bell.notify_all();
    }
}

/// Closes the window however the scope is left, so that no thread waits for ever.
struct Closing<'a>(&'a Window);

impl Drop for Closing<'_> {
    fn drop(&mut self) {
        self.0.close();
    }
}

type Opened = (usize, Receiver<Vec<u8>>);

fn in_order<F: Send>(
    roots: Vec<Vec<u8>>,
    length: usize,
    walk: impl Fn(usize, &mut Teller) -> Result<Tiers, Stopped> + Sync,
    consume: impl FnMut(usize, &[u8]) -> Result<(), F>,
) -> Result<Tiers, StreamFault<F>> {
    let window = Window::default();
    let threads = rayon::current_num_threads().max(1);
    let work = |opened: Sender<Opened>| {
        let mut tiers = Tiers::default();
        while let Some(part) = window.begin(roots.len(), AHEAD * threads) {
            let (to, from) = sync_channel(CHUNKS);
            if opened.send((part, from)).is_err() {
                break;
            }
            tiers.absorb(walk_part(&roots[part], length, to, |teller| {
                walk(part, teller)
            })?);
        }
        Ok::<Tiers, Stopped>(tiers)
    };
    std::thread::scope(|scope| {
        let closing = Closing(&window);
        let (opened, channels) = channel();
        let workers: Vec<_> = (0..threads)
            .map(|_| {
                let opened = opened.clone();
                let work = &work;
                scope.spawn(move || work(opened))
            })
            .collect();
        drop(opened);
        let consumed = consume_in_order(&channels, roots.len(), length, &window, consume);
        drop(channels);
        drop(closing);
        let mut tiers = Tiers::default();
        let mut stopped = None;
        for worker in workers {
            match worker.join() {
                Ok(Ok(part)) => tiers.absorb(part),
                Ok(Err(stop)) => stopped = Some(stop),
                Err(panic) => std::panic::resume_unwind(panic),
            }
        }
        consumed.map_err(StreamFault::Consumer)?;
        match stopped {
            Some(stop) => Err(stop.into()),
            None => Ok(tiers),
        }
    })
}

/// Walks one subtree; a root that is as long as the words is the only word of its own.
fn walk_part(
    root: &[u8],
    length: usize,
    to: SyncSender<Vec<u8>>,
    walk: impl FnOnce(&mut Teller) -> Result<Tiers, Stopped>,
) -> Result<Tiers, Stopped> {
    let mut teller = Teller {
        length,
        word: root.to_vec(),
        common: 0,
        chunk: Vec::new(),
        to,
        deaf: false,
    };
    let mut tiers = Tiers::default();
    if root.len() == length {
        teller.tell();
    } else {
        tiers = walk(&mut teller)?;
    }
    teller.send();
    Ok(tiers)
}

/// Empties the channels of the subtrees in order.
fn consume_in_order<F>(
    channels: &Receiver<Opened>,
    parts: usize,
    length: usize,
    window: &Window,
    mut consume: impl FnMut(usize, &[u8]) -> Result<(), F>,
) -> Result<(), F> {
    let mut waiting = BTreeMap::new();
    let mut last: Vec<u8> = Vec::with_capacity(length);
    for part in 0..parts {
        while !waiting.contains_key(&part) {
            // When all threads have ended there is nothing more to come: they were asked to stop.
            let Ok((opened, from)) = channels.recv() else {
                return Ok(());
            };
            waiting.insert(opened, from);
        }
        let from = waiting.remove(&part).expect("waited for");
        for chunk in from {
            let mut rest = &chunk[..];
            while let Some((common, behind)) = rest.split_first_chunk::<4>() {
                let mut common = u32::from_le_bytes(*common) as usize;
                let (mut tail, behind) = behind.split_at(length - common);
                rest = behind;
                // The first word of a subtree does not know the word before it.
                let more = last[common.min(last.len())..].iter().zip(tail);
                let more = more.take_while(|(a, b)| a == b).count();
                common += more;
                tail = &tail[more..];
                consume(common, tail)?;
                last.truncate(common);
                last.extend_from_slice(tail);
            }
        }
        window.consumed();
    }
    Ok(())
}

#[cfg(test)]
mod tests {
    use super::*;

    /// Tells words of 64 letters: the number of the part, and a count in the last four letters.
    fn tell_many(part: usize, words: u32, teller: &mut Teller) -> Result<Tiers, Stopped> {
        for count in 0..words {
            teller.word = vec![7; 64];
            teller.word[0] = part as u8;
            teller.word[60..].copy_from_slice(&count.to_be_bytes());
            teller.common = 0;
            teller.tell();
        }
        Ok(Tiers::default())
    }

    fn pool(threads: usize) -> rayon::ThreadPool {
        let builder = rayon::ThreadPoolBuilder::new().num_threads(threads);
        builder.build().expect("threads")
    }

    #[test]
    fn words_come_in_order_when_channels_overflow() {
        // More than a channel holds: 68 bytes a record.
        let words = (CHUNK * (CHUNKS + 40) / 68) as u32;
        let parts = 5;
        let roots: Vec<Vec<u8>> = (0..parts).map(|part| vec![part as u8]).collect();
        let (mut seen, mut word) = (0u32, Vec::new());
        let told = pool(3).install(|| {
            in_order(
                roots,
                64,
                |part, teller| tell_many(part, words, teller),
                |common, tail: &[u8]| {
                    word.truncate(common);
                    word.extend_from_slice(tail);
                    let count = u32::from_be_bytes(word[60..].try_into().expect("four"));
                    let expected = ((seen / words) as u8, seen % words);
                    seen += 1;
                    if (word[0], count) == expected {
                        Ok(())
                    } else {
                        Err(expected)
                    }
                },
            )
        });
        assert!(told.is_ok(), "{told:?}");
        assert_eq!(seen, parts as u32 * words);
    }

    #[test]
    fn a_failing_consumer_ends_the_walk() {
        // Threads that wait for room in a channel, and threads that wait because they are too far ahead.
        for (words, enough) in [(300_000, 400_000), (10, 5)] {
            let mut seen = 0;
            let told = pool(3).install(|| {
                in_order(
                    vec![vec![0]; 40],
                    64,
                    |part, teller| tell_many(part, words, teller),
                    |_, _| {
                        seen += 1;
                        if seen < enough {
                            return Ok(());
                        }
                        std::thread::sleep(std::time::Duration::from_millis(200));
                        Err("full")
                    },
                )
            });
            assert_eq!(told.unwrap_err(), StreamFault::Consumer("full"));
        }
    }

    #[test]
    fn a_stopped_walk_is_no_complete_one() {
        let roots = vec![vec![0]; 40];
        let told = in_order(
            roots,
            64,
            |part, teller| {
                if part == 7 {
                    Err(Stopped)
                } else {
                    tell_many(part, 10, teller)
                }
            },
            |_, _| Ok::<(), ()>(()),
        );
        assert_eq!(told.unwrap_err(), StreamFault::Stopped(Stopped));
    }
}
