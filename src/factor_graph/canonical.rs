//! Canonical forms of small rooted graphs.
//!
//! Two rooted graphs are isomorphic when a bijection of vertices carries root to root and arcs to arcs, with their
//! multiplicities (and directions, and labels, as [`Kind`] says). The canonical form numbers the vertices, the
//! root 0, so that isomorphic graphs get the same list of arcs, and others a different one.
//!
//! **Method.** Colours start from the distance to the root and are refined by the colours of the neighbours until nothing
//! changes. While a colour has several vertices, each of them is tried as the first of its colour, followed by
//! refinement, and the least list of arcs wins. Two numberings with the same list differ by an automorphism; a
//! vertex is not tried when an automorphism that is known, and keeps all vertices singled out before, carries one that was
//! tried to it. (Individualization and refinement: McKay, Congr. Numer. 30 (1981), from memory.) Colours
//! and choices depend on nothing but the isomorphism type, so the least list does not either. Balls of factor
//! graphs are close to trees, where refinement finds the orbits and the search does not branch beyond automorphisms.

use serde::Serialize;

/// What an isomorphism must keep.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash, Serialize)]
#[serde(rename_all = "lowercase")]
pub enum Kind {
    /// Neither directions nor labels; each arc is an edge.
    Plain,
    /// Directions.
    Oriented,
    /// Directions and labels.
    Labelled,
}

/// All kinds.
pub const KINDS: [Kind; 3] = [Kind::Plain, Kind::Oriented, Kind::Labelled];

/// An arc: from, to, label.
pub type Arc = (u16, u16, u8);

/// A rooted graph in canonical form; the root is vertex 0.
#[derive(Clone, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub struct Form {
    /// What it keeps.
    pub kind: Kind,
    /// Number of vertices.
    pub vertices: u16,
    /// The arcs in increasing order. In plain forms the first end is the smaller one; in all but labelled forms labels
    /// are 0.
    pub arcs: Vec<Arc>,
}

/// The canonical form of a connected graph with root 0.
///
/// # Panics
/// If an end of an arc is not below `vertices`.
pub fn canonical(kind: Kind, vertices: u16, arcs: &[Arc]) -> Form {
    let mut neighbours: Vec<Vec<(u16, u16)>> = vec![Vec::new(); vertices as usize];
    for &(from, to, label) in arcs {
        let (out, into) = match kind {
            Kind::Plain => (0, 0),
            Kind::Oriented => (0, 1),
            Kind::Labelled => (2 * u16::from(label), 2 * u16::from(label) + 1),
        };
        neighbours[from as usize].push((out, to));
        neighbours[to as usize].push((into, from));
    }
    let mut search = Search {
        kind,
        arcs,
        neighbours: &neighbours,
        best: None,
        automorphisms: Vec::new(),
    };
    let start = search.refine(distances(&neighbours));
    search.explore(start, &mut Vec::new());
    let (arcs, _) = search.best.expect("a numbering");
    Form {
        kind,
        vertices,
        arcs,
    }
}

fn distances(neighbours: &[Vec<(u16, u16)>]) -> Vec<u32> {
    let mut distance = vec![u32::MAX; neighbours.len()];
    let mut queue = std::collections::VecDeque::from([0usize]);
    distance[0] = 0;
    while let Some(v) = queue.pop_front() {
        for (_, w) in &neighbours[v] {
            let w = *w as usize;
            if distance[w] == u32::MAX {
                distance[w] = distance[v] + 1;
                queue.push_back(w);
            }
        }
    }
    distance
}

struct Search<'a> {
    kind: Kind,
    arcs: &'a [Arc],
    /// For each vertex the arcs at it: what the arc is from here, and its other end.
    neighbours: &'a [Vec<(u16, u16)>],
    /// The least list of arcs, and the number of each vertex in it.
    best: Option<(Vec<Arc>, Vec<u32>)>,
    automorphisms: Vec<Vec<u16>>,
}

impl Search<'_> {
    /// Refines until the number of colours stays. Colours are ranks of what they stand for.
    fn refine(&self, mut colours: Vec<u32>) -> Vec<u32> {
        let mut count = 0;
        loop {
            let signatures: Vec<(u32, Vec<(u16, u32)>)> = (0..colours.len())
                .map(|v| {
                    let around = self.neighbours[v].iter();
                    let mut around: Vec<(u16, u32)> = around
                        .map(|(tag, w)| (*tag, colours[*w as usize]))
                        .collect();
                    around.sort_unstable();
                    (colours[v], around)
                })
                .collect();
            let mut sorted: Vec<u16> = (0..colours.len() as u16).collect();
            sorted.sort_unstable_by(|a, b| signatures[*a as usize].cmp(&signatures[*b as usize]));
            let mut colour = 0;
            for (i, v) in sorted.iter().enumerate() {
                if i > 0 && signatures[*v as usize] != signatures[sorted[i - 1] as usize] {
                    colour += 1;
                }
                colours[*v as usize] = colour;
            }
            if colour + 1 == count {
                return colours;
            }
            count = colour + 1;
        }
    }

    fn explore(&mut self, colours: Vec<u32>, singled_out: &mut Vec<u16>) {
        let mut sizes = vec![0u32; colours.len()];
        for colour in &colours {
            sizes[*colour as usize] += 1;
        }
        let Some(cell) = sizes.iter().position(|size| *size > 1) else {
            self.leaf(colours);
            return;
        };
        let members: Vec<u16> = (0..colours.len() as u16)
            .filter(|v| colours[*v as usize] as usize == cell)
            .collect();
        let mut tried: Vec<u16> = Vec::new();
        for v in members {
            if self.carries_one_of(&tried, v, singled_out) {
                continue;
            }
            tried.push(v);
            let first =
                |w: u16, colour: u32| 2 * colour + u32::from(w != v && colour as usize == cell);
            let next = (0..).zip(&colours).map(|(w, c)| first(w, *c)).collect();
            let next = self.refine(next);
            singled_out.push(v);
            self.explore(next, singled_out);
            singled_out.pop();
        }
    }

    /// True when known automorphisms that keep the vertices singled out carry a vertex that was tried to `v`.
    fn carries_one_of(&self, tried: &[u16], v: u16, singled_out: &[u16]) -> bool {
        let keeps = |g: &&Vec<u16>| singled_out.iter().all(|s| g[*s as usize] == *s);
        let generators: Vec<&Vec<u16>> = self.automorphisms.iter().filter(keeps).collect();
        let mut orbit = vec![v];
        let mut seen = vec![false; self.neighbours.len()];
        seen[v as usize] = true;
        let mut at = 0;
        while at < orbit.len() {
            for g in &generators {
                // Generators have finite order, so forward images reach the whole orbit.
                let image = g[orbit[at] as usize];
                if !seen[image as usize] {
                    seen[image as usize] = true;
                    orbit.push(image);
                }
            }
            at += 1;
        }
        tried.iter().any(|t| seen[*t as usize])
    }

    fn leaf(&mut self, numbers: Vec<u32>) {
        let number = |v: u16| numbers[v as usize] as u16;
        let arc = |&(from, to, label): &Arc| {
            let (from, to) = (number(from), number(to));
            match self.kind {
                Kind::Plain => (from.min(to), from.max(to), 0),
                Kind::Oriented => (from, to, 0),
                Kind::Labelled => (from, to, label),
            }
        };
        let mut arcs: Vec<Arc> = self.arcs.iter().map(arc).collect();
        arcs.sort_unstable();
        match &self.best {
            Some((best, its_numbers)) if *best == arcs => {
                let mut by_number = vec![0u16; numbers.len()];
                for (v, number) in (0..).zip(&numbers) {
                    by_number[*number as usize] = v;
                }
                let image = |number: &u32| by_number[*number as usize];
                let automorphism = its_numbers.iter().map(image).collect();
                self.automorphisms.push(automorphism);
            }
            Some((best, _)) if *best < arcs => {}
            _ => self.best = Some((arcs, numbers)),
        }
    }
}

impl Form {
    /// True for a path of 2·radius arcs, all in one direction if there are directions, with the root in its middle.
    pub fn is_path(&self, radius: usize) -> bool {
        let n = self.vertices as usize;
        let mut degree = vec![(0usize, 0usize); n];
        for (from, to, _) in &self.arcs {
            degree[*from as usize].1 += 1;
            degree[*to as usize].0 += 1;
        }
        let ends = degree.iter().filter(|d| d.0 + d.1 == 1).count();
        let inner = degree.iter().filter(|d| match self.kind {
            Kind::Plain => d.0 + d.1 == 2,
            _ => **d == (1, 1),
        });
        // The ball is connected; with no vertex farther than the radius, the root is in the middle of 2r arcs.
        n == 2 * radius + 1 && self.arcs.len() == 2 * radius && ends == 2 && inner.count() == n - 2
    }

    /// The form as text: number of vertices, then arcs, such as `3: 0-1 0-2`, `3: 0>1 2>0` or `3: 0>1a 2>0b`.
    pub fn code(&self, letters: &[char]) -> String {
        let mut code = format!("{}:", self.vertices);
        for (from, to, label) in &self.arcs {
            code += &match self.kind {
                Kind::Plain => format!(" {from}-{to}"),
                Kind::Oriented => format!(" {from}>{to}"),
                Kind::Labelled => format!(" {from}>{to}{}", letters[*label as usize]),
            };
        }
        code
    }
}
