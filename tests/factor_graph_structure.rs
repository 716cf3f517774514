//! Branches, components, cycles, spectra and laws of factor graphs, measured again by petgraph or from the words.

use petgraph::algo::{connected_components, dijkstra, tarjan_scc};
use petgraph::graph::{DiGraph, NodeIndex, UnGraph};
use petgraph::visit::EdgeRef;
use reboundary::factor_graph::census::count_graph;
use reboundary::factor_graph::criterion::line_figures;
use reboundary::factor_graph::labelled::{
    APART, block_frequencies, middle_law, settling, total_variation,
};
use reboundary::factor_graph::reduced::{evolution, reduce};
use reboundary::factor_graph::spectrum::{diameter, distance_to_arcsine, spectrum};
use reboundary::factor_graph::view::GraphView;
use reboundary::language::Language;
use reboundary::reference::file::load;
use reboundary::reference::substitution::{Directive, Substitution};
use std::collections::BTreeMap;
use std::path::Path;

fn demo_language(name: &str, longest: usize) -> Language {
    let path = Path::new(env!("CARGO_MANIFEST_DIR")).join("demo-data/reference");
    let reference = load(&path.join(name), &[]).unwrap_or_else(|fault| panic!("{name}: {fault}"));
    reference
        .rule
        .language(longest, 1 << 24)
        .expect("a language")
}

/// Languages with one strong component, with several, with bare cycles, and with words that end.
fn samples() -> Vec<(String, Language)> {
    let mut all: Vec<(String, Language)> = [
        "bell-buoy.toml",
        "ferry-rests.toml",
        "ebb-and-flood.toml",
        "chart-folds.toml",
        "silted-lock.toml",
        "two-currents.toml",
    ]
    .map(|name| (name.to_string(), demo_language(name, 42)))
    .to_vec();
    let once = "letters = \"abc\"\nforbidden = [\"ba\", \"cb\", \"ca\"]";
    let once = reboundary::reference::file::parse("once.toml", once, &[]).expect("a reference");
    all.push((
        "one way".into(),
        once.rule.language(42, 1 << 20).expect("a language"),
    ));
    let cycles: Vec<Vec<u8>> = [2u8, 3, 5, 7]
        .map(|p| (0..90).map(|i| i % p + p).collect())
        .to_vec();
    let factors = Language::from_factors(14, cycles.iter().map(Vec::as_slice), 42);
    all.push(("bare cycles".into(), factors.expect("a language")));
    let ends = Language::from_factors(2, [&b"\0\x01\0\0\x01\x01\0\x01\x01\x01\0"[..]], 8);
    all.push(("words that end".into(), ends.expect("a language")));
    all
}

fn petgraph_of(graph: &GraphView<'_>) -> DiGraph<(), ()> {
    let arcs = (0..graph.arcs() as u32).map(|a| (graph.source(a), graph.target(a)));
    let mut all = DiGraph::new();
    (0..graph.vertices()).for_each(|_| {
        all.add_node(());
    });
    arcs.for_each(|(from, to)| {
        all.add_edge(
            NodeIndex::new(from as usize),
            NodeIndex::new(to as usize),
            (),
        );
    });
    all
}

/// Arcs of the shortest directed cycle: the shortest way back from the end of each arc.
fn girth(graph: &DiGraph<(), ()>) -> Option<usize> {
    let back = graph.edge_references().filter_map(|e| {
        let ways = dijkstra(graph, e.target(), Some(e.source()), |_| 1usize);
        ways.get(&e.source()).map(|d| d + 1)
    });
    back.min()
}

#[test]
fn components_and_cycles_agree_with_petgraph() {
    for (title, language) in samples() {
        for order in [1, 2, 3, 4, 6, 7, 12, 25, 41] {
            if order + 1 > language.longest() {
                continue;
            }
            let graph = GraphView::new(&language, order);
            let found = reduce(&graph).structure(&graph);
            let slow = petgraph_of(&graph);
            let place = format!("{title}, order {order}");
            let strong = tarjan_scc(&slow);
            assert_eq!(found.components, connected_components(&slow), "{place}");
            assert_eq!(found.strong_components, strong.len(), "{place}");
            let largest = strong.iter().map(Vec::len).max();
            assert_eq!(Some(found.largest_strong), largest, "{place}");
            assert_eq!(found.shortest_cycle, girth(&slow), "{place}");
            let independent = slow.edge_count() + found.components - slow.node_count();
            assert_eq!(found.independent_cycles, independent, "{place}");
            let lengths: usize = reduce(&graph).branches.iter().map(|b| b.length).sum();
            let bare: usize = reduce(&graph).bare_cycles.iter().sum();
            assert_eq!(lengths + bare, slow.edge_count(), "{place}");
        }
    }
}

#[test]
fn diameters_agree_with_petgraph() {
    for (title, language) in samples() {
        for order in [2, 5, 12, 30] {
            if order + 1 > language.longest() {
                continue;
            }
            let graph = GraphView::new(&language, order);
            let slow = petgraph_of(&graph);
            let strong = tarjan_scc(&slow).len() == 1;
            let both: UnGraph<(), ()> = slow.clone().into_edge_type();
            let far = |ways: Vec<usize>| ways.into_iter().max().unwrap_or(0);
            let of =
                |v: NodeIndex| far(dijkstra(&both, v, None, |_| 1usize).into_values().collect());
            let exact = far(both.node_indices().map(of).collect());
            let of =
                |v: NodeIndex| far(dijkstra(&slow, v, None, |_| 1usize).into_values().collect());
            let directed = far(slow.node_indices().map(of).collect());
            let place = format!("{title}, order {order}");
            let found = diameter(&graph, strong, usize::MAX);
            assert_eq!((found.lower, found.upper), (exact, exact), "{place}");
            assert_eq!(
                found.directed,
                strong.then_some((directed, directed)),
                "{place}"
            );
            let bounds = diameter(&graph, strong, 0);
            assert!(
                bounds.lower <= exact && exact <= bounds.upper,
                "{place}: {bounds:?}, {exact}"
            );
            if let Some((low, high)) = bounds.directed {
                assert!(
                    low <= directed && directed <= high,
                    "{place}: {bounds:?}, {directed}"
                );
            }
        }
    }
}

/// A cycle of c words has the eigenvalues 2cos(2πj/c) (from memory), so its law is within 1/c of the arcsine law, and the
/// moments of the line up to c − 1.
#[test]
fn spectra_of_cycles_are_known() {
    let word: Vec<u8> = (0..60).map(|i| i % 12).collect();
    let language = Language::from_factors(12, [&word[..]], 6).expect("a language");
    let graph = GraphView::new(&language, 5);
    let found = spectrum(&graph, &reduce(&graph));
    let expected = (0..12).map(|j| 2.0 * (std::f64::consts::TAU * f64::from(j) / 12.0).cos());
    let mut expected: Vec<f64> = expected.collect();
    expected.sort_by(f64::total_cmp);
    let distance = found.distance.expect("a small graph");
    assert!((distance - distance_to_arcsine(&expected)).abs() < 1e-9);
    // Two eigenvalues in each place: the step is 2/12, and it meets the arcsine law in its middle.
    assert!((distance - 1.0 / 12.0).abs() < 1e-6, "{distance}");
    let line: Vec<f64> = found.line_moments.iter().map(|m| *m as f64).collect();
    assert_eq!(found.moments, line);
    assert_eq!(found.line_moments, [1, 0, 2, 0, 6, 0, 20, 0, 70]);
    assert_eq!(found.reduced_distance, None);
}

/// Closed walks are traces of powers of the matrix: here by multiplying it out in integers.
#[test]
fn moments_are_traces_of_powers() {
    for (title, language) in samples() {
        for order in [1, 3, 7, 20] {
            if order + 1 > language.longest() {
                continue;
            }
            let graph = GraphView::new(&language, order);
            let n = graph.vertices();
            let mut matrix = vec![vec![0u64; n]; n];
            for a in 0..graph.arcs() as u32 {
                let (from, to) = (graph.source(a) as usize, graph.target(a) as usize);
                matrix[from][to] += 1;
                matrix[to][from] += 1;
            }
            let mut power: Vec<Vec<u64>> = (0..n)
                .map(|i| (0..n).map(|j| u64::from(i == j)).collect())
                .collect();
            let found = spectrum(&graph, &reduce(&graph));
            for k in 0..=8 {
                let trace: u64 = (0..n).map(|i| power[i][i]).sum();
                assert_eq!(
                    found.closed_walks[k], trace,
                    "{title}, order {order}, moment {k}"
                );
                let product = |row: &Vec<u64>| -> Vec<u64> {
                    (0..n)
                        .map(|j| (0..n).map(|i| row[i] * matrix[i][j]).sum())
                        .collect()
                };
                power = power.iter().map(product).collect();
            }
        }
    }
}

/// With s(n)/p(n) → 0 the spectral laws approach the arcsine law; those of the full shift do not.
#[test]
fn spectra_approach_the_arcsine_law_only_on_the_way_to_the_line() {
    let distance = |language: &Language, order| {
        let graph = GraphView::new(language, order);
        spectrum(&graph, &reduce(&graph))
            .distance
            .expect("a small graph")
    };
    let sturmian = demo_language("bell-buoy.toml", 301);
    let distances: Vec<f64> = [10, 40, 300].map(|n| distance(&sturmian, n)).to_vec();
    assert!(
        distances.is_sorted_by(|a, b| a > b) && distances[2] < 0.01,
        "{distances:?}"
    );
    let text = "letters = \"01\"\nforbidden = []";
    let shift = reboundary::reference::file::parse("full.toml", text, &[]).expect("a reference");
    let shift = shift.rule.language(9, 1 << 20).expect("a language");
    assert!(distance(&shift, 8) > 0.1);
}

/// Heirs of special words, from the definition; the multiplicities sum to b(n), and the numbers of special words at
/// n + 1 are those of the heirs.
#[test]
fn evolution_agrees_with_the_words() {
    for (title, language) in samples() {
        for order in 1..language.longest().min(30) - 1 {
            let found = evolution(&language, order);
            let p = language.complexity();
            let b = p[order + 2] as i64 - 2 * p[order + 1] as i64 + p[order] as i64;
            assert_eq!(found.second_difference, b, "{title}, order {order}");
            let right = |n: usize| -> Vec<Vec<u8>> {
                let counts = language.right_extension_counts(n);
                let words = (0..).zip(counts).filter(|(_, c)| *c > 1);
                words.map(|(w, _)| language.word(n, w)).collect()
            };
            let next = right(order + 1);
            let heirs = right(order)
                .into_iter()
                .map(|w| next.iter().filter(|v| v[1..] == w[..]).count());
            let mut expected = [0u64; 3];
            heirs.for_each(|count| expected[count.min(2)] += 1);
            let counted = [found.right_ends, found.right_goes_on, found.right_splits];
            assert_eq!(counted, expected, "{title}, order {order}");
        }
    }
}

/// The law of the middle letters, counted word by word.
#[test]
fn middle_laws_agree_with_the_words() {
    for (title, language) in samples() {
        for (order, radius) in [(1, 0), (5, 1), (6, 2), (7, 3), (4, 2), (20, 1)] {
            if order > language.longest() {
                continue;
            }
            let law = middle_law(&language, order, radius);
            if order < 2 * radius + 1 {
                assert_eq!(law, None);
                continue;
            }
            let mut counts: BTreeMap<Vec<u8>, u64> = BTreeMap::new();
            for w in 0..language.count(order) as u32 {
                let m = order / 2;
                let block = language.word(order, w)[m - radius..=m + radius].to_vec();
                *counts.entry(block).or_default() += 1;
            }
            let law = law.expect("long enough");
            let block = 2 * radius + 1;
            let found: BTreeMap<Vec<u8>, u64> = (0..)
                .zip(&law.counts)
                .filter(|(_, c)| **c > 0)
                .map(|(w, c)| (language.word(block, w), *c))
                .collect();
            assert_eq!(found, counts, "{title}, order {order}, radius {radius}");
            // Moving the block by one letter moves its law by at most 2·s/p when all words have extensions.
            if language.is_bi_extendable() && order < language.longest() {
                let s = language.count(order + 1) as f64 - language.count(order) as f64;
                let steps = (order - block) as f64;
                let bound = 2.0 * s / language.count(order) as f64 * steps;
                assert!(
                    law.drift(&language, radius) <= bound + 1e-12,
                    "{title}, order {order}"
                );
            }
        }
    }
}

/// The golden rotation: letters at their frequencies (√5 − 1)/2 and (3 − √5)/2 (from memory), and laws that settle.
#[test]
fn sturmian_laws_settle_at_the_frequencies() {
    let language = demo_language("bell-buoy.toml", 401);
    let found = settling(&language, 400, 0);
    let golden = (5f64.sqrt() - 1.0) / 2.0;
    let last = found.laws.last().expect("laws").shares();
    assert!((last[0] - golden).abs() < 0.01, "{last:?}");
    assert!(found.subsequences.is_empty());
    assert!(
        found.spread.last().expect("a spread").1 < 0.02,
        "{:?}",
        found.spread
    );
    let graph_law = settling(&language, 400, 2);
    assert!(graph_law.spread.last().expect("a spread").1 < 0.05);
}

/// 0 → 0^a 1, 1 → 1^b 0.
fn powers(a: usize, b: usize) -> Substitution {
    let mut zero = vec![0u8; a];
    zero.push(1);
    let mut one = vec![1u8; b];
    one.push(0);
    Substitution::new(vec![zero, one])
}

/// A directive sequence whose columns stay apart: if h_k, l_k are the lengths of the images of 0 and 1, and a_k, b_k the
/// powers, the image of 0 takes over a share l_k/(a_k·h_k + l_k) of the other column, the image of 1 a share
/// h_k/(b_k·l_k + h_k). With the shares summable the frequencies of 1 in the two columns have different
/// limits: two ergodic measures. Here the lengths also take turns in being much the longer one, so the uniform law on
/// L_n leans to one measure and then to the other: the plain graphs go to the line, and the labelled ones do not settle.
///
/// The words up to length 1600 are factors of images of two-letter words under the first three steps, and all four
/// two-letter words occur from there on, so they are the same for every continuation of the sequence.
#[test]
fn two_measures_do_not_settle_while_plain_graphs_go_to_the_line() {
    let steps = [
        (12usize, 2usize),
        (2, 40),
        (200, 2),
        (2, 4000),
        (400_000, 2),
    ];
    let (mut lengths, mut ones) = ([1u64, 1], [0f64, 1.0]);
    for (a, b) in steps {
        let (h, l) = (lengths[0], lengths[1]);
        let next = [a as u64 * h + l, b as u64 * l + h];
        ones = [
            (a as f64 * h as f64 * ones[0] + l as f64 * ones[1]) / next[0] as f64,
            (b as f64 * l as f64 * ones[1] + h as f64 * ones[0]) / next[1] as f64,
        ];
        lengths = next;
    }
    assert!(ones[1] - ones[0] > 0.35, "the columns stay apart: {ones:?}");
    let first: Vec<Substitution> = steps[..3].iter().map(|(a, b)| powers(*a, *b)).collect();
    let directive = Directive::new(first, powers(2, 4000));
    let longest = 1600;
    let language = directive
        .language(longest + 1, 1 << 24)
        .expect("a language");
    let plain = line_figures(&count_graph(&language, longest, 3));
    assert!(
        plain.path_share.iter().all(|share| *share > 0.99),
        "{plain:?}"
    );
    let found = settling(&language, longest, 0);
    let tail = found
        .spread
        .iter()
        .find(|(n, _)| *n >= longest / 8)
        .expect("a tail");
    assert!(tail.1 > APART, "{:?}", found.spread);
    let [one, other] = &found.subsequences[..] else {
        panic!("two subsequences: {:?}", found.spread);
    };
    assert!(total_variation(&one.shares, &other.shares) > APART);
    assert!(one.orders.contains(&one.at) && other.orders.contains(&other.at));
    assert!(one.orders.iter().all(|n| !other.orders.contains(n)));
}

#[test]
fn frequencies_of_long_words_are_counted_place_by_place() {
    let language = demo_language("bell-buoy.toml", 5);
    let texts = [vec![0u8, 1, 0, 0], vec![1, 1]];
    let (shares, strange) = block_frequencies(&language, &texts, 2);
    // 01, 10, 00 and the strange 11.
    assert_eq!(shares, [0.25, 0.25, 0.25]);
    assert_eq!(strange, 0.25);
}
