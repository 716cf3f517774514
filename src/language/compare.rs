//! Comparing two languages, letters as they are or up to a renaming.
//!
//! Two languages *agree to length n* under a one-to-one map of letters when it turns the words of each length up to n of
//! one into those of the other. So the maps under which they agree to length n are fewer and fewer as n grows.
//!
//! **Under one map.** Words are matched level by level: the partner of w·a is the child of w's partner with the
//! image of a. Cost: O(letters) a word, 8 bytes for each word of a level.
//!
//! **Up to a renaming.** One map is kept alive and extended level by level. When it dies, the backtracking search that
//! found it goes on from where it stood; maps that were passed over died at shorter lengths and need not be looked at
//! again. A partial map must match the words that use only letters assigned so far, in both directions; letters
//! must begin equally many words of each length as their images. The search follows the order in which each letter
//! shares the most short words with those before it, so that partial maps are tested on many words early. In a
//! convex table every two letters are a word, and length 3 is the first that prunes; sides of a nonconvex table that
//! do not see each other share no words at all, which is why the order matters. The worst case is exponential in
//! the number of letters, as for isomorphism of graphs; the control can end it.

use super::tree::{Language, WordId};
use crate::run::{Control, Stopped};
use thiserror::Error;

/// A one-to-one map from letters of a first language to letters of a second. Letters may be left without an image.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Renaming {
    image: Vec<Option<u8>>,
}

/// Two letters have the same image.
#[derive(Clone, Copy, Debug, PartialEq, Eq, Error)]
#[error("letters {first} and {second} both become letter {image}")]
pub struct NotOneToOne {
    /// A letter.
    pub first: u8,
    /// A later letter.
    pub second: u8,
    /// Their image.
    pub image: u8,
}

impl Renaming {
    /// A map from the image of each letter, by index.
    ///
    /// # Errors
    /// When two letters have the same image.
    pub fn new(image: Vec<Option<u8>>) -> Result<Renaming, NotOneToOne> {
        for (second, found) in image.iter().enumerate() {
            let earlier = image[..second].iter().position(|other| other == found);
            if let (Some(image), Some(first)) = (*found, earlier) {
                return Err(NotOneToOne {
                    first: first as u8,
                    second: second as u8,
                    image,
                });
            }
        }
        Ok(Renaming { image })
    }

    /// The letter that a letter becomes.
    pub fn image(&self, letter: u8) -> Option<u8> {
        self.image.get(letter as usize).copied().flatten()
    }

    /// The letters with their images, those without one left out.
    pub fn pairs(&self) -> impl Iterator<Item = (u8, u8)> + '_ {
        let letters = self.image.iter().enumerate();
        letters.filter_map(|(letter, image)| image.map(|image| (letter as u8, image)))
    }
}

/// How far two languages agree.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Comparison {
    /// The longest words that were compared.
    pub length: usize,
    /// They agree to this length; when it is less than `length` they differ at the next one.
    pub agree_to: usize,
    /// The map under which they agree to that length; `None` when the numbers of letters differ and a renaming was looked
    /// for.
    pub renaming: Option<Renaming>,
}

impl Comparison {
    /// The first length at which the languages differ.
    pub fn first_difference(&self) -> Option<usize> {
        (self.agree_to < self.length).then_some(self.agree_to + 1)
    }
}

/// Words of one length in one language and not in the other.
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Differences {
    /// Words of the first language, by number.
    pub only_first: Vec<WordId>,
    /// Words of the second language, by number.
    pub only_second: Vec<WordId>,
}

/// Words with their partners, in the order of the first language.
type Pairs = Vec<(WordId, WordId)>;

/// A child with a given last letter.
fn child(language: &Language, length: usize, word: WordId, letter: u8) -> Option<WordId> {
    language
        .extensions(length, word)
        .find(|c| language.last_letter(length + 1, *c) == letter)
}

/// The matched words of the next level: those of which the map has an image in the second language.
fn match_level(
    (first, second): (&Language, &Language),
    renaming: &Renaming,
    length: usize,
    pairs: &Pairs,
) -> Pairs {
    let mut longer = Pairs::new();
    for &(u, v) in pairs {
        for c in first.extensions(length, u) {
            let image = renaming.image(first.last_letter(length + 1, c));
            if let Some(d) = image.and_then(|letter| child(second, length, v, letter)) {
                longer.push((c, d));
            }
        }
    }
    longer
}

/// Compares two languages under a given map. A word with a letter that has no image is in the first alone.
///
/// # Errors
/// When the control asks to stop.
pub fn compare_under(
    first: &Language,
    second: &Language,
    renaming: &Renaming,
    control: &Control,
) -> Result<Comparison, Stopped> {
    let length = first.longest().min(second.longest());
    let mut pairs: Pairs = vec![(0, 0)];
    let mut agree_to = 0;
    while agree_to < length {
        control.tick(pairs.len() as u64)?;
        pairs = match_level((first, second), renaming, agree_to, &pairs);
        let n = agree_to + 1;
        if pairs.len() != first.count(n) || pairs.len() != second.count(n) {
            break;
        }
        agree_to = n;
    }
    Ok(Comparison {
        length,
        agree_to,
        renaming: Some(renaming.clone()),
    })
}

/// The words of one length that have no partner under a map.
///
/// Cost: as [`compare_under`] to this length.
///
/// # Panics
/// If a language is shorter.
pub fn differences(
    first: &Language,
    second: &Language,
    renaming: &Renaming,
    length: usize,
) -> Differences {
    let mut pairs: Pairs = vec![(0, 0)];
    for n in 0..length {
        pairs = match_level((first, second), renaming, n, &pairs);
    }
    let mut partner_of_first = vec![false; first.count(length)];
    let mut partner_of_second = vec![false; second.count(length)];
    for (u, v) in pairs {
        partner_of_first[u as usize] = true;
        partner_of_second[v as usize] = true;
    }
    let without = |has: Vec<bool>| (0..).zip(has).filter(|(_, has)| !has).map(|(w, _)| w);
    Differences {
        only_first: without(partner_of_first).collect(),
        only_second: without(partner_of_second).collect(),
    }
}

/// Compares two languages up to a renaming of letters: the longest length to which they agree under some one-to-one map
/// between all their letters, and such a map, the first in the order of the search.
///
/// # Errors
/// When the control asks to stop.
pub fn compare_up_to_renaming(
    first: &Language,
    second: &Language,
    control: &Control,
) -> Result<Comparison, Stopped> {
    let length = first.longest().min(second.longest());
    let ended = |agree_to, renaming| Comparison {
        length,
        agree_to,
        renaming,
    };
    if length == 0 || first.count(1) != second.count(1) {
        return Ok(ended(0, None));
    }
    let mut search = Search::new(first, second);
    let mut pairs = search
        .next(1, control)?
        .expect("at length 1 every one-to-one map will do");
    for n in 2..=length {
        control.tick(pairs.len() as u64)?;
        let last = search.renaming();
        if first.count(n) != second.count(n) {
            return Ok(ended(n - 1, Some(last)));
        }
        let matched = match_level((first, second), &last, n - 1, &pairs);
        pairs = if matched.len() == first.count(n) {
            matched
        } else {
            match search.next(n, control)? {
                Some(pairs) => pairs,
                None => return Ok(ended(n - 1, Some(last))),
            }
        };
    }
    let last = search.renaming();
    Ok(ended(length, Some(last)))
}

/// The backtracking over maps of letters.
struct Search<'a> {
    first: &'a Language,
    second: &'a Language,
    /// Letters of the first language in the order of assignment.
    order: Vec<u8>,
    /// For each of them its place among the letters of the first language.
    ranks: Vec<usize>,
    /// Letters of the second language.
    targets: Vec<u8>,
    /// Entry n, then letter: words of length n that begin with it.
    beginning: [Vec<Vec<usize>>; 2],
    /// The assignment, for a prefix of `order`: how many targets past its own place a letter's image stands. So letters
    /// are tried on their own places first.
    chosen: Vec<usize>,
}

impl<'a> Search<'a> {
    fn new(first: &'a Language, second: &'a Language) -> Search<'a> {
        let (order, letters_of_first) = (order_of_assignment(first), letters(first));
        let rank = |letter: &u8| letters_of_first.iter().position(|l| l == letter);
        Search {
            first,
            second,
            ranks: order.iter().filter_map(rank).collect(),
            order,
            targets: letters(second),
            beginning: [first, second].map(words_by_first_letter),
            chosen: Vec::new(),
        }
    }

    /// The image that a choice gives to the letter at a place of the order.
    fn image(&self, at: usize, choice: usize) -> u8 {
        self.targets[(self.ranks[at] + choice) % self.targets.len()]
    }

    /// The map so far.
    fn renaming(&self) -> Renaming {
        let mut image = vec![None; self.first.alphabet()];
        for (at, choice) in self.chosen.iter().enumerate() {
            image[self.order[at] as usize] = Some(self.image(at, *choice));
        }
        Renaming { image }
    }

    fn is_taken(&self, image: u8) -> bool {
        let mut chosen = self.chosen.iter().enumerate();
        chosen.any(|(at, choice)| self.image(at, *choice) == image)
    }

    /// Goes on to the next full map under which the languages agree to a length, and gives the matched words of that
    /// length; `None` when there is none. A full map that is there already is taken to have died.
    fn next(&mut self, length: usize, control: &Control) -> Result<Option<Pairs>, Stopped> {
        let mut from = 0;
        if self.chosen.len() == self.order.len() {
            // The shortest part of the dead map that is dead already at this length: everything below it is.
            let full = std::mem::take(&mut self.chosen);
            for choice in full {
                self.chosen.push(choice);
                if self.matched(length, control)?.is_none() {
                    break;
                }
            }
            from = self.chosen.pop().expect("at least one letter") + 1;
        }
        loop {
            let mut found = None;
            for choice in from..self.targets.len() {
                if self.is_taken(self.image(self.chosen.len(), choice)) {
                    continue;
                }
                self.chosen.push(choice);
                found = match self.fits(length) {
                    true => self.matched(length, control)?,
                    false => None,
                };
                if found.is_some() {
                    break;
                }
                self.chosen.pop();
            }
            match found {
                Some(pairs) if self.chosen.len() == self.order.len() => return Ok(Some(pairs)),
                Some(_) => from = 0,
                None => match self.chosen.pop() {
                    Some(choice) => from = choice + 1,
                    None => return Ok(None),
                },
            }
        }
    }

    /// Whether the last assigned letter begins as many words of each length as its image.
    fn fits(&self, length: usize) -> bool {
        let at = self.chosen.len() - 1;
        let letter = self.order[at] as usize;
        let image = self.image(at, self.chosen[at]) as usize;
        let [first, second] = &self.beginning;
        (1..=length).all(|n| first[n][letter] == second[n][image])
    }

    /// The matched words of a length that use only assigned letters; `None` when some word of either language that uses
    /// only assigned letters has no partner.
    fn matched(&self, length: usize, control: &Control) -> Result<Option<Pairs>, Stopped> {
        let renaming = self.renaming();
        let mut reached = [false; 256];
        renaming
            .pairs()
            .for_each(|(_, image)| reached[image as usize] = true);
        let mut pairs: Pairs = vec![(0, 0)];
        for n in 0..length {
            control.tick(pairs.len() as u64)?;
            let mut longer = Pairs::new();
            for &(u, v) in &pairs {
                let before = longer.len();
                for c in self.first.extensions(n, u) {
                    let letter = self.first.last_letter(n + 1, c);
                    let Some(image) = renaming.image(letter) else {
                        continue;
                    };
                    match child(self.second, n, v, image) {
                        Some(d) => longer.push((c, d)),
                        None => return Ok(None),
                    }
                }
                let in_reach = self
                    .second
                    .extensions(n, v)
                    .filter(|d| reached[self.second.last_letter(n + 1, *d) as usize]);
                if in_reach.count() != longer.len() - before {
                    return Ok(None);
                }
            }
            pairs = longer;
        }
        Ok(Some(pairs))
    }
}

/// The letters that occur, in order.
fn letters(language: &Language) -> Vec<u8> {
    (0..language.count(1) as WordId)
        .map(|w| language.last_letter(1, w))
        .collect()
}

/// Entry n, then letter: how many words of length n begin with it. Words with one prefix follow one another.
fn words_by_first_letter(language: &Language) -> Vec<Vec<usize>> {
    let mut counts = vec![vec![0; language.alphabet()]; language.longest() + 1];
    for w in 0..language.count(1) as WordId {
        let letter = language.last_letter(1, w) as usize;
        let mut range = w..w + 1;
        for (n, counts) in counts.iter_mut().enumerate().skip(1) {
            counts[letter] = range.len();
            if n < language.longest() && !range.is_empty() {
                range = language.extensions(n, range.start).start
                    ..language.extensions(n, range.end - 1).end;
            }
        }
    }
    counts
}

/// Each next letter shares the most words of length at most 3 with those before it; first of equals.
fn order_of_assignment(language: &Language) -> Vec<u8> {
    let longest = language.longest().min(3);
    let short: Vec<Vec<u8>> = (2..=longest)
        .flat_map(|n| (0..language.count(n) as WordId).map(move |w| language.word(n, w)))
        .collect();
    let mut left = letters(language);
    let mut assigned = [false; 256];
    let mut order = Vec::new();
    while !left.is_empty() {
        let mut shared = [0usize; 256];
        for word in &short {
            let mut open = word.iter().filter(|l| !assigned[**l as usize]);
            if let Some(letter) = open.next()
                && open.all(|other| other == letter)
            {
                shared[*letter as usize] += 1;
            }
        }
        let most = left.iter().map(|l| shared[*l as usize]).max();
        let at = left
            .iter()
            .position(|l| Some(shared[*l as usize]) == most)
            .expect("some letter has the most");
        let letter = left.remove(at);
        assigned[letter as usize] = true;
        order.push(letter);
    }
    order
}
