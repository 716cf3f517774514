//! What a run took: steps, decisions by tier, time of each walk, memory.
//!
//! Steps and times are of this run: parts recalled from a checkpoint took none. Decisions tell of all parts.

use crate::number::Tiers;
use crate::run::checkpoint::Checkpoint;
use crate::run::memory;
use crate::unfold::engine::AnyEngine;
use serde::Serialize;
use std::io::Write;
use std::time::{Duration, Instant};

/// The `stats` object of JSON output.
#[derive(Debug, Serialize)]
pub struct Stats {
    /// How signs are decided.
    engine: &'static str,
    walks: Vec<WalkStats>,
    /// What a stored word takes, when words are stored.
    #[serde(skip_serializing_if = "Option::is_none")]
    pub bytes_per_word: Option<u64>,
    /// Parts whose results came from a checkpoint.
    recalled_parts: usize,
    /// Of the whole run, reading and preparing included.
    seconds: f64,
    /// The most memory that the process held; null where the system does not tell.
    peak_memory_bytes: Option<u64>,
    #[serde(skip)]
    begun: Instant,
}

#[derive(Debug, Serialize)]
struct WalkStats {
    walk: &'static str,
    length: usize,
    /// Steps of fans, or beams visited.
    steps: u64,
    /// Orientations by the tier that decided; null when the walk was stopped or decided none.
    decisions: Option<Tiers>,
    seconds: f64,
}

/// A walk that has begun.
pub struct Begun {
    walk: &'static str,
    length: usize,
    done: u64,
    at: Instant,
}

impl Stats {
    /// The clock starts.
    pub fn new() -> Stats {
        Stats {
            engine: "",
            walks: Vec::new(),
            bytes_per_word: None,
            recalled_parts: 0,
            seconds: 0.0,
            peak_memory_bytes: None,
            begun: Instant::now(),
        }
    }

    /// A walk begins, when so many steps were done in all.
    pub fn begin(&self, walk: &'static str, length: usize, done: u64) -> Begun {
        Begun {
            walk,
            length,
            done,
            at: Instant::now(),
        }
    }

    /// It ends; without tiers when it was stopped.
    pub fn end(&mut self, begun: Begun, done: u64, tiers: Option<Tiers>) {
        let steps = done - begun.done;
        self.add(begun.walk, begun.length, begun.at.elapsed(), steps, tiers);
    }

    /// A walk that took so long and so many steps.
    pub fn add(
        &mut self,
        walk: &'static str,
        length: usize,
        time: Duration,
        steps: u64,
        decisions: Option<Tiers>,
    ) {
        self.walks.push(WalkStats {
            walk,
            length,
            steps,
            decisions,
            seconds: time.as_secs_f64(),
        });
    }

    /// The run ends.
    pub fn finish(&mut self, engine: &AnyEngine, checkpoint: Option<&Checkpoint>) {
        self.engine = engine.describe();
        self.recalled_parts = checkpoint.map_or(0, Checkpoint::recalled);
        self.seconds = self.begun.elapsed().as_secs_f64();
        self.peak_memory_bytes = memory::peak();
    }

    /// For people, on standard error.
    pub fn tell(&self) {
        let mut text = format!("stats: signs by {}\n", self.engine);
        for walk in &self.walks {
            let name = match walk.walk {
                "diagonals" => "steps of fans",
                "factor graphs" => "steps",
                _ => "beams",
            };
            text += &format!(
                "stats: {} to length {}: {} {name} in {:.3} s; ",
                walk.walk, walk.length, walk.steps, walk.seconds
            );
            text += &match &walk.decisions {
                Some(tiers) => format!(
                    "decisions: {} by floating point, {} by machine integers, {} by symmetry, {} by enclosures, {} by big integers\n",
                    tiers.float, tiers.integer, tiers.symmetry, tiers.enclosure, tiers.big
                ),
                None => "no decisions told\n".into(),
            };
        }
        if let Some(bytes) = self.bytes_per_word {
            text += &format!("stats: the tree of words takes {bytes} bytes a word\n");
        }
        if self.recalled_parts > 0 {
            text += &format!("stats: {} parts from the checkpoint\n", self.recalled_parts);
        }
        let memory = (self.peak_memory_bytes).map_or("unknown".into(), memory::display);
        text += &format!(
            "stats: {:.3} s in all, peak memory {memory}\n",
            self.seconds
        );
        // A closed standard error is no reason to fail.
        let _ = std::io::stderr().write_all(text.as_bytes());
    }
}
