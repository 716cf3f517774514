//! Factor graphs of classical languages, and of billiards, against published counts and a slow census.

mod support;

use reboundary::factor_graph::census::{GraphCounts, count_graph, count_graphs};
use reboundary::factor_graph::criterion::line_figures;
use reboundary::language::Language;
use std::collections::{BTreeMap, BTreeSet, VecDeque};
use support::{named_tables, words};

/// A beginning of the fixed point of a substitution, from the letter 0, at least `length` letters long.
fn fixed_point(images: &[&[u8]], length: usize) -> Vec<u8> {
    let mut word = vec![0];
    while word.len() < length {
        word = word
            .iter()
            .flat_map(|a| images[*a as usize])
            .copied()
            .collect();
    }
    word
}

/// The factors up to a length of one long word. The caller's word is long enough to hold them all: the
/// published counts say so, since a factor that were missing would lower one.
fn factors(alphabet: usize, word: &[u8], longest: usize) -> Language {
    Language::from_factors(alphabet, [word], longest).expect("factors are a language")
}

fn fibonacci(longest: usize) -> Language {
    factors(2, &fixed_point(&[&[0, 1], &[0]], 1000), longest)
}

fn tribonacci(longest: usize) -> Language {
    factors(3, &fixed_point(&[&[0, 1], &[0, 2], &[0]], 4000), longest)
}

fn chacon(longest: usize) -> Language {
    factors(2, &fixed_point(&[&[0, 0, 1, 0], &[1]], 4000), longest)
}

fn thue_morse(longest: usize) -> Language {
    factors(2, &fixed_point(&[&[0, 1], &[1, 0]], 2048), longest)
}

fn period_doubling(longest: usize) -> Language {
    factors(2, &fixed_point(&[&[0, 1], &[0, 0]], 2048), longest)
}

/// Letter n of the regular paperfolding word: with n = 2^k·m and m odd, whether m is 3 modulo 4.
fn paperfolding(longest: usize) -> Language {
    let word: Vec<u8> = (1..=8192u32)
        .map(|n| ((n >> n.trailing_zeros()) % 4 == 3) as u8)
        .collect();
    factors(2, &word, longest)
}

/// Letter n of the Rudin–Shapiro word: the parity of the number of pairs of adjacent ones in binary n.
fn rudin_shapiro(longest: usize) -> Language {
    let word: Vec<u8> = (0..8192u32)
        .map(|n| ((n & n >> 1).count_ones() % 2) as u8)
        .collect();
    factors(2, &word, longest)
}

/// All words over the first letters.
fn full_shift(alphabet: usize, longest: usize) -> Language {
    let mut all = vec![Vec::new()];
    for _ in 0..longest {
        all = all
            .iter()
            .flat_map(|w| (0..alphabet as u8).map(move |a| [&w[..], &[a]].concat()))
            .collect();
    }
    Language::from_factors(alphabet, all.iter().map(Vec::as_slice), longest).expect("a language")
}

fn classical(longest: usize) -> Vec<(&'static str, Language)> {
    vec![
        ("Fibonacci", fibonacci(longest)),
        ("Tribonacci", tribonacci(longest)),
        ("Chacon", chacon(longest)),
        ("Thue–Morse", thue_morse(longest)),
        ("period doubling", period_doubling(longest)),
        ("paperfolding", paperfolding(longest)),
        ("Rudin–Shapiro", rudin_shapiro(longest)),
    ]
}

fn assert_complexity(language: &Language, expected: impl Fn(u64) -> u64) {
    for (n, p) in (0..).zip(language.complexity()) {
        assert_eq!(p, if n == 0 { 1 } else { expected(n) }, "p({n})");
    }
    assert!(language.is_bi_extendable());
}

/// Recomputed; n + 1 is the complexity of every Sturmian word (Morse and Hedlund [from memory]).
#[test]
fn fibonacci_complexity_recomputed() {
    assert_complexity(&fibonacci(60), |n| n + 1);
}

/// Recomputed.
#[test]
fn tribonacci_complexity_recomputed() {
    assert_complexity(&tribonacci(60), |n| 2 * n + 1);
}

/// Recomputed; 2n − 1 from n = 2.
#[test]
fn chacon_complexity_recomputed() {
    assert_complexity(&chacon(60), |n| if n == 1 { 2 } else { 2 * n - 1 });
}

/// Brlek 1989; de Luca and Varricchio 1989. Beyond the listed values Brlek's formula [from memory]: for
/// n − 1 = 2^a + b with 0 < b ≤ 2^a, p(n) = 6·2^(a−1) + 4b when b ≤ 2^(a−1), else 8·2^(a−1) + 2b.
#[test]
fn thue_morse_complexity_brlek() {
    let listed = [2, 4, 6, 10, 12, 16, 20, 22, 24, 28, 32, 36];
    let language = thue_morse(60);
    assert_eq!(language.complexity()[1..=12], listed);
    assert_complexity(&language, |n| {
        if n < 4 {
            return 2 * n;
        }
        let power = (n - 2).ilog2();
        let (half, b) = (1 << (power - 1), n - 1 - (1 << power));
        if b <= half {
            6 * half + 4 * b
        } else {
            8 * half + 2 * b
        }
    });
}

/// Recomputed for n ≤ 10. Beyond, by the blocks 01 and 00 of the substitution, told apart by their second
/// letters: a factor of length 2m that starts with a block is m blocks; one that starts within a block is a second
/// letter, m − 1 blocks and a first letter, which is always 0. Likewise for length 2m + 1. So p(2m) = 2p(m)
/// and p(2m + 1) = p(m) + p(m + 1), except at m = 1, where 00 is of both kinds.
#[test]
fn period_doubling_complexity_recomputed() {
    let language = period_doubling(60);
    let p = language.complexity();
    assert_eq!(p[1..=10], [2, 3, 5, 6, 8, 10, 11, 12, 14, 16]);
    for m in 2..=30 {
        assert_eq!(p[2 * m], 2 * p[m], "p({})", 2 * m);
        assert_eq!(p[2 * m - 1], p[m - 1] + p[m], "p({})", 2 * m - 1);
    }
    assert!(language.is_bi_extendable());
}

/// Allouche 1992.
#[test]
fn paperfolding_complexity_allouche() {
    let start = [2, 4, 8, 12, 18, 23];
    assert_complexity(&paperfolding(60), |n| {
        if n <= 6 { start[n as usize - 1] } else { 4 * n }
    });
}

/// OEIS A005943.
#[test]
fn rudin_shapiro_complexity_oeis_a005943() {
    let start = [2, 4, 8, 16, 24, 36, 46];
    assert_complexity(&rudin_shapiro(60), |n| {
        if n <= 7 {
            start[n as usize - 1]
        } else {
            8 * n - 8
        }
    });
}

/// Special words by hand: a Sturmian word has one left and one right special factor of each length, and both are
/// the same word exactly at lengths where p allows a bispecial one.
#[test]
fn fibonacci_has_one_special_word_of_each_kind() {
    let language = fibonacci(60);
    let mut bispecial_lengths = Vec::new();
    for counts in count_graphs(&language, 1, 1) {
        assert_eq!(
            (counts.left_special, counts.right_special),
            (1, 1),
            "order {}",
            counts.order
        );
        assert_eq!(counts.vertices, counts.order as u64 + 1);
        assert_eq!(counts.arcs, counts.order as u64 + 2);
        assert_eq!(counts.unique_both, counts.vertices - 2 + counts.bispecial);
        if counts.bispecial == 1 {
            bispecial_lengths.push(counts.order);
        }
    }
    // The bispecial factors are the palindromic prefixes, of lengths F − 2 for Fibonacci numbers F (de Luca,
    // Theoret. Comput. Sci. 136 (1994) [from memory]).
    assert_eq!(bispecial_lengths, [1, 3, 6, 11, 19, 32, 53]);
}

/// Recomputed: 1824, 928, 468 of 2230 words of length 30.
#[test]
fn right_isosceles_path_balls_recomputed() {
    let language = support::language(&support::right_isosceles(), 31);
    let counts = count_graph(&language, 30, 3);
    assert_eq!(
        (counts.vertices, &counts.path_balls[..]),
        (2230, &[1824, 928, 468][..])
    );
}

/// Recomputed: 49, 43, 39 of 51 words of length 50.
#[test]
fn fibonacci_path_balls_recomputed() {
    let counts = count_graph(&fibonacci(51), 50, 3);
    assert_eq!(
        (counts.vertices, &counts.path_balls[..]),
        (51, &[49, 43, 39][..])
    );
}

/// Recomputed: 158, 146, 134 of 162 words of length 50.
#[test]
fn thue_morse_path_balls_recomputed() {
    let counts = count_graph(&thue_morse(51), 50, 3);
    assert_eq!(
        (counts.vertices, &counts.path_balls[..]),
        (162, &[158, 146, 134][..])
    );
}

/// A factor graph as lists of arcs, built from the spelled words alone.
struct SlowGraph {
    vertices: usize,
    arcs: Vec<(usize, usize)>,
    out: Vec<Vec<usize>>,
    into: Vec<Vec<usize>>,
}

impl SlowGraph {
    fn new(language: &Language, order: usize) -> SlowGraph {
        let numbers: BTreeMap<Vec<u8>, usize> =
            words(language, order).into_iter().zip(0..).collect();
        let arcs: Vec<(usize, usize)> = words(language, order + 1)
            .iter()
            .map(|w| (numbers[&w[..order]], numbers[&w[1..]]))
            .collect();
        let (mut out, mut into) = (
            vec![Vec::new(); numbers.len()],
            vec![Vec::new(); numbers.len()],
        );
        for (number, (from, to)) in arcs.iter().enumerate() {
            out[*from].push(number);
            into[*to].push(number);
        }
        SlowGraph {
            vertices: numbers.len(),
            arcs,
            out,
            into,
        }
    }

    /// Distances without directions from one vertex, up to a radius.
    fn ball(&self, centre: usize, radius: usize) -> BTreeMap<usize, usize> {
        let mut distance = BTreeMap::from([(centre, 0)]);
        let mut queue = VecDeque::from([centre]);
        while let Some(v) = queue.pop_front() {
            if distance[&v] == radius {
                continue;
            }
            for w in self.neighbours(v) {
                if !distance.contains_key(&w) {
                    distance.insert(w, distance[&v] + 1);
                    queue.push_back(w);
                }
            }
        }
        distance
    }

    fn neighbours(&self, v: usize) -> impl Iterator<Item = usize> {
        let forward = self.out[v].iter().map(|arc| self.arcs[*arc].1);
        forward.chain(self.into[v].iter().map(|arc| self.arcs[*arc].0))
    }

    fn is_special(&self, v: usize) -> bool {
        self.out[v].len() != 1 || self.into[v].len() != 1
    }

    fn is_branch_free(&self, centre: usize, radius: usize) -> bool {
        let near = self.ball(centre, radius - 1);
        near.keys().all(|v| !self.is_special(*v))
    }

    /// A path of 2r arcs: 2r + 1 vertices, 2r arcs among them, two ends of degree 1 at distance r from the
    /// centre, all others of degree 2. (A ball is connected, so that is enough.)
    fn is_path_ball(&self, centre: usize, radius: usize) -> bool {
        let ball = self.ball(centre, radius);
        let inside: Vec<(usize, usize)> = ball
            .keys()
            .flat_map(|v| self.out[*v].iter().map(|arc| self.arcs[*arc]))
            .filter(|(_, to)| ball.contains_key(to))
            .collect();
        let degree = |v: usize| {
            inside
                .iter()
                .map(|(from, to)| (*from == v) as usize + (*to == v) as usize)
                .sum::<usize>()
        };
        let ends: Vec<usize> = ball.keys().copied().filter(|v| degree(*v) == 1).collect();
        ball.len() == 2 * radius + 1
            && inside.len() == 2 * radius
            && ends.len() == 2
            && ends.iter().all(|v| ball[v] == radius)
            && ball.keys().all(|v| ends.contains(v) || degree(*v) == 2)
    }
}

/// The census by looking at every ball.
fn slow_counts(language: &Language, order: usize, radii: usize) -> GraphCounts {
    let graph = SlowGraph::new(language, order);
    let count =
        |test: &dyn Fn(usize) -> bool| (0..graph.vertices).filter(|v| test(*v)).count() as u64;
    GraphCounts {
        order,
        vertices: graph.vertices as u64,
        arcs: graph.arcs.len() as u64,
        left_special: count(&|v| graph.into[v].len() > 1),
        right_special: count(&|v| graph.out[v].len() > 1),
        bispecial: count(&|v| graph.into[v].len() > 1 && graph.out[v].len() > 1),
        unique_both: count(&|v| !graph.is_special(v)),
        branch_free: (1..=radii)
            .map(|r| count(&|v| graph.is_branch_free(v, r)))
            .collect(),
        path_balls: (1..=radii)
            .map(|r| count(&|v| graph.is_path_ball(v, r)))
            .collect(),
    }
}

/// Runs the fast census on all orders and compares it with the slow one on these.
fn assert_census(title: &str, language: &Language, orders: impl IntoIterator<Item = usize>) {
    let all = count_graphs(language, 0, 4);
    for order in orders {
        assert_eq!(
            all[order],
            slow_counts(language, order, 4),
            "order {order} of {title}"
        );
    }
    for counts in &all {
        assert!(
            line_figures(counts).within_bound,
            "order {} of {title}",
            counts.order
        );
    }
}

#[test]
fn classical_censuses_agree_with_the_slow_one() {
    for (title, language) in classical(51) {
        assert_census(title, &language, (0..24).chain([50]));
    }
}

#[test]
fn billiard_censuses_agree_with_the_slow_one() {
    for table in named_tables() {
        let language = support::language(&table, 10);
        let orders = (0..10).filter(|n| language.count(*n) <= 1500);
        assert_census(table.title(), &language, orders);
    }
    let language = support::language(&support::right_isosceles(), 21);
    assert_census("right isosceles", &language, 0..=20);
}

/// Every finite set of periodic words: graphs that are nothing but cycles, each shorter or longer than a ball.
#[test]
fn cycles_are_no_paths_until_they_are_longer_than_the_ball() {
    for period in 1..=12u8 {
        let word: Vec<u8> = (0..60).map(|i| i % period).collect();
        let language = factors(period as usize, &word, 11);
        assert_census("one cycle", &language, 1..11);
        let counts = count_graph(&language, 10, 4);
        assert_eq!(counts.branch_free, [period as u64; 4]);
        // A ball of radius r in a cycle is a path with no arc between its ends when the cycle has at least
        // 2r + 2 words.
        let expected: Vec<u64> = (1..=4u8)
            .map(|r| {
                if period >= 2 * r + 2 {
                    period as u64
                } else {
                    0
                }
            })
            .collect();
        assert_eq!(counts.path_balls, expected, "period {period}");
    }
}

/// Factor graphs of the full shift are de Bruijn graphs: every word has two extensions on each side, so no ball is
/// a path, at any order, and there is no line limit.
#[test]
fn full_shift_graphs_have_no_line_limit() {
    let language = full_shift(2, 12);
    assert_complexity(&language, |n| 1 << n);
    for counts in count_graphs(&language, 1, 3) {
        assert_eq!(counts.bispecial, counts.vertices, "order {}", counts.order);
        assert_eq!(counts.arcs, 2 * counts.vertices);
        assert_eq!(
            (counts.unique_both, &counts.path_balls[..]),
            (0, &[0, 0, 0][..])
        );
        let figures = line_figures(&counts);
        assert_eq!(figures.growth, 1.0);
        assert_eq!(figures.path_share, [0.0; 3]);
    }
    assert_census("full shift", &language, 0..10);
}

/// Ball sizes of the limit of the de Bruijn graphs on two letters: 1, 5, 15, 39, 92 (J. Phys. A 49 (2016) 205004).
/// In a finite graph most words already have that ball. This checks the slow census's balls, too.
#[test]
fn full_shift_ball_sizes_j_phys_a_49_205004() {
    let graph = SlowGraph::new(&full_shift(2, 15), 14);
    for (radius, expected) in (0..).zip([1, 5, 15, 39, 92]) {
        let mut sizes: BTreeMap<usize, usize> = BTreeMap::new();
        for v in (0..graph.vertices).step_by(7) {
            *sizes.entry(graph.ball(v, radius).len()).or_default() += 1;
        }
        let (most_frequent, _) = sizes
            .iter()
            .max_by_key(|(_, count)| **count)
            .expect("balls");
        assert_eq!(*most_frequent, expected, "radius {radius}: {sizes:?}");
    }
}

/// All sequences over the blocks ab and ac: why the bound speaks of words without a near branch and not of balls
/// that are paths. With p(1) = 3, s(1) = 1, two of three words are not special, yet no ball of radius 1 is a path,
/// because both neighbours of b are the one word a.
#[test]
fn blocks_ab_ac_break_the_bound_for_path_balls() {
    let blocks = [[0u8, 1], [0, 2]];
    // Concatenations of 7 blocks hold all factors up to length 12 from every place.
    let all: Vec<Vec<u8>> = (0..128u32)
        .map(|bits| {
            (0..7)
                .flat_map(|i| blocks[(bits >> i & 1) as usize])
                .collect()
        })
        .collect();
    let language =
        Language::from_factors(3, all.iter().map(Vec::as_slice), 12).expect("a language");
    assert!(language.is_bi_extendable());
    assert_eq!(language.complexity()[..3], [1, 3, 4]);
    let counts = count_graph(&language, 1, 1);
    assert_eq!((counts.branch_free[0], counts.path_balls[0]), (2, 0));
    let (p, s) = (counts.vertices, counts.arcs - counts.vertices);
    assert!(
        p - counts.path_balls[0] > (6 - 4) * s,
        "the smaller bound fails for path balls"
    );
    assert!(
        p - counts.path_balls[0] <= (6 + 2) * s,
        "the larger one holds"
    );
    assert!(line_figures(&counts).within_bound);
    assert_census("blocks ab and ac", &language, 0..12);
}

/// Constant words beside a Sturmian language: each is a loop of its own, without a special word at any distance and
/// without a path ball. Enough of them exceed both bounds for path balls, while s(n) stays 1.
#[test]
fn isolated_cycles_break_both_bounds_for_path_balls() {
    let sturmian = fixed_point(&[&[0, 1], &[0]], 1000);
    let constants: Vec<Vec<u8>> = (2..11u8).map(|letter| vec![letter; 60]).collect();
    let all = constants.iter().map(Vec::as_slice).chain([&sturmian[..]]);
    let language = Language::from_factors(11, all, 51).expect("a language");
    assert!(language.is_bi_extendable());
    let (with, without) = (
        count_graph(&language, 50, 3),
        count_graph(&fibonacci(51), 50, 3),
    );
    assert_eq!(with.vertices, without.vertices + 9);
    assert_eq!(with.arcs - with.vertices, 1);
    assert_eq!(with.path_balls, without.path_balls);
    let raised: Vec<u64> = without.branch_free.iter().map(|free| free + 9).collect();
    assert_eq!(with.branch_free, raised);
    let bent = with.vertices - with.path_balls[0];
    assert!(bent > (6 + 2), "{bent} balls are no paths");
    assert!(line_figures(&with).within_bound);
    assert_census("constants beside Fibonacci", &language, [1, 2, 5, 20, 50]);
}

/// The figures are the counts divided by p(n), with the bound (6r − 4)·s(n)/p(n), and a share beyond the bound is
/// reported as such.
#[test]
fn figures_are_shares_and_the_bound_can_fail() {
    let honest = count_graph(&thue_morse(51), 50, 3);
    let figures = line_figures(&honest);
    let (p, s) = (
        honest.vertices as f64,
        (honest.arcs - honest.vertices) as f64,
    );
    assert_eq!(figures.order, 50);
    assert!((figures.growth - s / p).abs() < 1e-12);
    for r in 0..3 {
        assert!((figures.path_share[r] - honest.path_balls[r] as f64 / p).abs() < 1e-12);
        assert!((figures.branch_free_share[r] - honest.branch_free[r] as f64 / p).abs() < 1e-12);
        assert!((figures.bound[r] - (6 * r + 2) as f64 * s / p).abs() < 1e-12);
    }
    for r in 0..3 {
        let slope = 6 * r as u64 + 2;
        let mut edge = honest.clone();
        edge.branch_free[r] = honest.vertices - slope * (honest.arcs - honest.vertices);
        assert!(
            line_figures(&edge).within_bound,
            "exactly at the bound, radius {}",
            r + 1
        );
        edge.branch_free[r] -= 1;
        assert!(
            !line_figures(&edge).within_bound,
            "one word beyond, radius {}",
            r + 1
        );
    }
}

/// On convex rational tables p(n+1)/p(n) → 1, so the share of path balls of radius 1 grows; on the full shift it stays
/// at zero. A trend up to n is no proof; this only checks that the figures show it.
#[test]
fn path_share_grows_on_the_square() {
    let language = support::language(&support::unit_square(), 33);
    let share = |order| line_figures(&count_graph(&language, order, 1)).path_share[0];
    let shares: Vec<f64> = [8, 16, 32].map(share).to_vec();
    assert!(shares.is_sorted_by(|a, b| a < b), "{shares:?}");
    let distinct: BTreeSet<Vec<u8>> = words(&language, 33).into_iter().collect();
    assert_eq!(distinct.len(), language.count(33));
}
