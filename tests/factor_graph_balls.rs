//! The census of balls against petgraph's isomorphism test, and known ball sizes.

mod support;

use petgraph::Directed;
use petgraph::algo::is_isomorphic_matching;
use petgraph::graph::{DiGraph, Graph, NodeIndex, UnGraph};
use proptest::prelude::*;
use reboundary::factor_graph::balls::{ball_form, census};
use reboundary::factor_graph::canonical::{Arc, Form, KINDS, Kind, canonical};
use reboundary::factor_graph::census::count_graph;
use reboundary::factor_graph::view::GraphView;
use reboundary::language::Language;
use reboundary::reference::file::load;
use std::collections::{BTreeMap, HashMap, VecDeque};
use std::path::Path;

fn demo_language(name: &str, longest: usize) -> Language {
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join("demo-data/reference");
    let reference = load(&path.join(name), &[]).unwrap_or_else(|fault| panic!("{name}: {fault}"));
    reference
        .rule
        .language(longest, 1 << 24)
        .expect("a language")
}

/// A rooted graph for petgraph: whether a vertex is the root, and what an edge keeps. Parallel edges are one edge
/// with a multiplicity, because the isomorphism test is not for multigraphs.
enum Rooted {
    Directed(DiGraph<bool, (u8, u32)>),
    Plain(UnGraph<bool, (u8, u32)>),
}

/// Isomorphic balls: one of them, their canonical form, and how many there are.
type Class = (Rooted, Form, u64);

fn rooted(kind: Kind, vertices: usize, arcs: &[(usize, usize, u8)]) -> Rooted {
    let mut edges: BTreeMap<(usize, usize, u8), u32> = BTreeMap::new();
    for &(from, to, label) in arcs {
        let key = match kind {
            Kind::Plain => (from.min(to), from.max(to), 0),
            Kind::Oriented => (from, to, 0),
            Kind::Labelled => (from, to, label),
        };
        *edges.entry(key).or_default() += 1;
    }
    fn fill<T: petgraph::EdgeType>(
        mut graph: Graph<bool, (u8, u32), T>,
        vertices: usize,
        edges: BTreeMap<(usize, usize, u8), u32>,
    ) -> Graph<bool, (u8, u32), T> {
        let nodes: Vec<NodeIndex> = (0..vertices).map(|v| graph.add_node(v == 0)).collect();
        for ((from, to, label), count) in edges {
            graph.add_edge(nodes[from], nodes[to], (label, count));
        }
        graph
    }
    match kind {
        Kind::Plain => Rooted::Plain(fill(Graph::new_undirected(), vertices, edges)),
        _ => Rooted::Directed(fill(Graph::<_, _, Directed>::new(), vertices, edges)),
    }
}

fn isomorphic(a: &Rooted, b: &Rooted) -> bool {
    match (a, b) {
        (Rooted::Directed(a), Rooted::Directed(b)) => {
            is_isomorphic_matching(a, b, |x, y| x == y, |x, y| x == y)
        }
        (Rooted::Plain(a), Rooted::Plain(b)) => {
            is_isomorphic_matching(a, b, |x, y| x == y, |x, y| x == y)
        }
        _ => false,
    }
}

/// The balls of one graph, from the spelled words alone.
struct SlowBalls {
    out: Vec<Vec<(usize, u8)>>,
    into: Vec<Vec<usize>>,
}

impl SlowBalls {
    fn new(language: &Language, order: usize) -> SlowBalls {
        let words = support::words(language, order);
        let number: HashMap<Vec<u8>, usize> = words.into_iter().zip(0..).collect();
        let mut slow = SlowBalls {
            out: vec![Vec::new(); number.len()],
            into: vec![Vec::new(); number.len()],
        };
        for arc in support::words(language, order + 1) {
            let (from, to) = (number[&arc[..order]], number[&arc[1..]]);
            slow.out[from].push((to, arc[order]));
            slow.into[to].push(from);
        }
        slow
    }

    fn ball(&self, centre: usize, radius: usize) -> (usize, Vec<(usize, usize, u8)>) {
        let mut distance = BTreeMap::from([(centre, 0)]);
        let mut queue = VecDeque::from([centre]);
        let mut found = Vec::new();
        while let Some(v) = queue.pop_front() {
            found.push(v);
            if distance[&v] == radius {
                continue;
            }
            for w in self.out[v]
                .iter()
                .map(|o| o.0)
                .chain(self.into[v].iter().copied())
            {
                if !distance.contains_key(&w) {
                    distance.insert(w, distance[&v] + 1);
                    queue.push_back(w);
                }
            }
        }
        let number: BTreeMap<usize, usize> = found.iter().copied().zip(0..).collect();
        let arcs = found.iter().flat_map(|v| {
            let inside = self.out[*v]
                .iter()
                .filter(|(to, _)| number.contains_key(to));
            inside.map(|(to, label)| (number[v], number[to], *label))
        });
        (found.len(), arcs.collect())
    }
}

/// Sorts all balls into classes by petgraph and compares with the census: the same classes, word by word, and the same
/// counts.
fn assert_census(title: &str, language: &Language, order: usize, radii: usize) {
    let slow = SlowBalls::new(language, order);
    let graph = GraphView::new(language, order);
    let all = census(&graph, radii, &KINDS);
    let paths = count_graph(language, order, radii).path_balls;
    for found in &all {
        let (kind, radius) = (found.kind, found.radius);
        let place = format!("{title}, order {order}, radius {radius}, {kind:?}");
        let mut classes: HashMap<(usize, usize), Vec<Class>> = HashMap::new();
        for v in 0..slow.out.len() {
            let (vertices, arcs) = slow.ball(v, radius);
            let ball = rooted(kind, vertices, &arcs);
            let form = ball_form(&graph, v as u32, radius, kind);
            let alike = classes.entry((vertices, arcs.len())).or_default();
            match alike
                .iter_mut()
                .find(|(other, _, _)| isomorphic(&ball, other))
            {
                Some((_, its_form, count)) => {
                    assert_eq!(form, *its_form, "{place}: one class, two forms");
                    *count += 1;
                }
                None => {
                    let fresh = alike.iter().all(|(_, other, _)| *other != form);
                    assert!(fresh, "{place}: two classes, one form");
                    alike.push((ball, form, 1));
                }
            }
        }
        let expected: BTreeMap<Form, u64> = classes
            .into_values()
            .flatten()
            .map(|(_, form, count)| (form, count))
            .collect();
        let counted: BTreeMap<Form, u64> = found
            .types
            .iter()
            .map(|t| (t.form.clone(), t.count))
            .collect();
        assert_eq!(counted, expected, "{place}");
        assert_eq!(found.words, slow.out.len() as u64, "{place}");
        let of_paths: u64 = found
            .types
            .iter()
            .filter(|t| t.is_path)
            .map(|t| t.count)
            .sum();
        assert_eq!(of_paths, paths[radius - 1], "{place}");
        let share = 1.0 - of_paths as f64 / found.words as f64;
        assert!((found.distance_to_line() - share).abs() < 1e-12);
    }
}

#[test]
fn censuses_of_reference_languages_agree_with_petgraph() {
    for name in [
        "bell-buoy.toml",
        "three-piers.toml",
        "ferry-rests.toml",
        "ebb-and-flood.toml",
        "chart-folds.toml",
        "lamp-periods.toml",
        "lock-gates.toml",
        "silted-lock.toml",
        "two-currents.toml",
    ] {
        let language = demo_language(name, 61);
        for order in [1, 2, 3, 4, 5, 8, 13, 30, 60] {
            assert_census(name, &language, order, 4);
        }
    }
    let golden = demo_language("flag-hoist.toml", 12);
    for order in 1..11 {
        assert_census("flag hoist", &golden, order, 2);
    }
}

/// Every ball of every billiard graph with at most 2000 words, as far as the lengths below reach.
#[test]
fn censuses_of_billiards_agree_with_petgraph() {
    for (table, longest) in [
        (support::unit_square(), 14),
        (support::right_isosceles(), 26),
        (support::legs_three_and_four(), 12),
    ] {
        let language = support::language(&table, longest + 1);
        let orders = (1..=longest).filter(|n| language.count(*n) <= 2000);
        for order in orders {
            assert_census(table.title(), &language, order, 3);
        }
    }
}

/// Graphs that are only cycles, shorter and longer than balls.
#[test]
fn censuses_of_cycles_agree_with_petgraph() {
    for period in 1..=12u8 {
        let word: Vec<u8> = (0..60).map(|i| (i % period) / 2).collect();
        let language = Language::from_factors(6, [&word[..]], 31).expect("a language");
        for order in [1, 2, 12, 30] {
            assert_census("a cycle", &language, order, 4);
        }
    }
}

/// Words that end on one side: special without being branches.
#[test]
fn censuses_of_finite_words_agree_with_petgraph() {
    let words: [&[u8]; 3] = [
        b"\0\x01\0\0\x01\x01\0",
        b"\x01\x01\x01\x01",
        b"\0\x01\x01\0\x01\x01\0\0\0\0",
    ];
    let language = Language::from_factors(2, words, 7).expect("a language");
    for order in 1..6 {
        let slow = SlowBalls::new(&language, order);
        let graph = GraphView::new(&language, order);
        for found in census(&graph, 3, &KINDS) {
            let mut expected: BTreeMap<Form, u64> = BTreeMap::new();
            for v in 0..slow.out.len() as u32 {
                *expected
                    .entry(ball_form(&graph, v, found.radius, found.kind))
                    .or_default() += 1;
            }
            let counted: BTreeMap<Form, u64> = found
                .types
                .iter()
                .map(|t| (t.form.clone(), t.count))
                .collect();
            assert_eq!(counted, expected, "order {order}");
        }
    }
}

/// Ball sizes of the limit of the de Bruijn graphs on two letters: 1, 5, 15, 39, 92 (J. Phys. A 49 (2016) 205004). The
/// commonest ball of a finite graph has that size already, and no ball is a path. The ball of radius 4 has
/// many automorphisms, which a search without them would not survive.
#[test]
fn full_shift_ball_sizes_j_phys_a_49_205004() {
    let text = "letters = \"01\"\nforbidden = []";
    let shift = reboundary::reference::file::parse("full.toml", text, &[]).expect("a reference");
    let language = shift.rule.language(14, 1 << 24).expect("a language");
    let graph = GraphView::new(&language, 13);
    for found in census(&graph, 4, &[Kind::Plain, Kind::Oriented]) {
        let mut by_size: BTreeMap<u16, u64> = BTreeMap::new();
        for t in &found.types {
            *by_size.entry(t.form.vertices).or_default() += t.count;
        }
        let commonest = by_size
            .iter()
            .max_by_key(|(_, count)| **count)
            .expect("balls");
        assert_eq!(
            *commonest.0,
            [5, 15, 39, 92][found.radius - 1],
            "{by_size:?}"
        );
        assert_eq!(found.distance_to_line(), 1.0);
    }
}

/// Only words within r + 1 of a special word are looked at: at most (6r + 8)·s(n), and short cycles.
#[test]
fn path_balls_are_counted_in_bulk() {
    let language = demo_language("lock-gates.toml", 400);
    let graph = GraphView::new(&language, 399);
    for found in census(&graph, 4, &KINDS) {
        assert!(found.visited <= (6 * found.radius as u64 + 8) * 2);
        assert_eq!(found.words, 799);
        assert_eq!(found.types.iter().map(|t| t.count).sum::<u64>(), 799);
    }
}

fn arcs(vertices: u16) -> impl Strategy<Value = Vec<Arc>> {
    // A tree that connects, and more arcs.
    let tree = prop::collection::vec(
        (any::<prop::sample::Index>(), any::<bool>(), 0u8..2),
        vertices as usize - 1,
    );
    let more = prop::collection::vec((0..vertices, 0..vertices, 0u8..2), 0..4);
    (tree, more).prop_map(|(tree, more)| {
        let connect = (1u16..).zip(tree).map(|(v, (other, forward, label))| {
            let w = other.index(v as usize) as u16;
            if forward {
                (w, v, label)
            } else {
                (v, w, label)
            }
        });
        connect.chain(more).collect()
    })
}

proptest! {
    #![proptest_config(ProptestConfig::with_cases(400))]

    #[test]
    fn forms_do_not_depend_on_the_numbering(
        (graph, order) in (2u16..10).prop_flat_map(|n| {
            let rest: Vec<u16> = (1..n).collect();
            (arcs(n), Just(rest).prop_shuffle())
        })
    ) {
        let n = order.len() as u16 + 1;
        let renumber = |v: u16| if v == 0 { 0 } else { order[v as usize - 1] };
        let mut moved: Vec<Arc> = graph.iter().map(|(a, b, l)| (renumber(*a), renumber(*b), *l)).collect();
        moved.reverse();
        for kind in KINDS {
            let form = canonical(kind, n, &graph);
            prop_assert_eq!(&form, &canonical(kind, n, &moved));
            prop_assert_eq!(&form, &canonical(kind, n, &form.arcs), "a form is its own form");
        }
    }

    #[test]
    fn forms_agree_exactly_when_petgraph_says_isomorphic(
        (a, b) in (2u16..6).prop_flat_map(|n| (arcs(n), arcs(n)))
    ) {
        let n = 1 + a.iter().chain(&b).map(|x| x.0.max(x.1)).max().unwrap_or(0);
        let wide = |arcs: &[Arc]| -> Vec<(usize, usize, u8)> {
            arcs.iter().map(|(x, y, l)| (*x as usize, *y as usize, *l)).collect()
        };
        for kind in KINDS {
            let same = isomorphic(&rooted(kind, n as usize, &wide(&a)), &rooted(kind, n as usize, &wide(&b)));
            prop_assert_eq!(canonical(kind, n, &a) == canonical(kind, n, &b), same);
        }
    }
}
