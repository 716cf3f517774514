//! The bibliography of reports.

/// Published sources that the statements of a study stand on.
pub const BIBLIOGRAPHY: [&str; 10] = [
    "J. Cassaigne, P. Hubert, S. Troubetzkoy: complexity and generalized diagonals of convex tables, cubic bounds, cubic asymptotics of tables that tile. Ann. Inst. Fourier 52 (2002) 835–847.",
    "J. Cassaigne: second difference and bispecial words. Bull. Belg. Math. Soc. 4 (1997) 67–88.",
    "A. Katok: subexponential growth in every polygon. Comm. Math. Phys. 111 (1987).",
    "H. Masur: quadratic bounds for generalized diagonals by length in rational polygons (1988, 1990).",
    "E. Gutkin, M. Rams: growth rates in polygonal billiards. Ergodic Theory Dynam. Systems 29 (2009).",
    "J. Berstel, M. Pocchiola: balanced words, a geometric proof of their number. Int. J. Algebra Comput. 3 (1993); OEIS A005598.",
    "P. Hubert: complexity in one direction of convex rational tables. Bull. Soc. Math. France 123 (1995) 257–270.",
    "Criterion for the local limit of factor graphs, and three conditions that imply it: arXiv 2402.15877.",
    "L. A. Santaló: Integral Geometry and Geometric Probability, 1976 (measure of lines, crossed-belt formula, mean chord).",
    "Secure Hash Standard: FIPS 180-4.",
];
