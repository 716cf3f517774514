//! The fields that elements of a larger field generate: degrees worked out by Galois theory.

use reboundary::number::adjoin::embed;
use reboundary::number::subfield::{Subfield, smaller_field};
use reboundary::number::{Field, Real};
use reboundary::table::expression::Evaluator;
use rug::Integer;

/// Numbers of one field, by their expressions.
fn numbers(texts: &[&str]) -> (Field, Vec<Real>) {
    let mut evaluator = Evaluator::default();
    let mut numbers: Vec<Real> = texts
        .iter()
        .map(|t| evaluator.evaluate(t).unwrap())
        .collect();
    let field = evaluator.finish(&mut numbers);
    (field, numbers)
}

fn found(wide: &[&str], texts: &[&str]) -> Option<(Subfield, Vec<Real>)> {
    let all: Vec<&str> = wide.iter().chain(texts).copied().collect();
    let (field, numbers) = numbers(&all);
    let elements = numbers[wide.len()..].to_vec();
    let small = smaller_field(&field, &elements)?;
    for (element, written) in elements.iter().zip(&small.elements) {
        assert_eq!(embed(written, &small.generator), *element);
        assert_eq!(written.sign(), element.sign());
    }
    Some((small, elements))
}

#[test]
fn subfields_of_a_field_of_square_roots() {
    let wide = ["sqrt(2)", "sqrt(3)", "sqrt(5)"];
    for (texts, degree) in [
        (vec!["3/7", "-2"], 1),
        (vec!["sqrt(2)/3 + 5"], 2),
        (vec!["sqrt(6) - 1", "7 + 2*sqrt(6)"], 2),
        (vec!["sqrt(6)", "sqrt(10)"], 4),
        (vec!["sqrt(6)", "sqrt(10)", "sqrt(15)", "1/2"], 4),
        (vec!["sqrt(2) + sqrt(3)"], 4),
    ] {
        let (small, _) = found(&wide, &texts).unwrap_or_else(|| panic!("{texts:?}"));
        assert_eq!(small.field.degree(), degree, "{texts:?}");
    }
    assert!(found(&wide, &["sqrt(2) + sqrt(3) + sqrt(5)"]).is_none());
    assert!(found(&wide, &["sqrt(2)", "sqrt(3)", "sqrt(30)"]).is_none());
}

#[test]
fn subfields_of_cosine_fields_and_of_a_mixed_field() {
    // ℚ(cos 2π/21) of degree 6 holds ℚ(cos 2π/7) and ℚ(√21).
    let wide = ["cos(2/21*pi)"];
    let (small, _) = found(&wide, &["cos(2/7*pi)", "cos(4/7*pi)"]).unwrap();
    assert_eq!(small.field.degree(), 3);
    let (small, _) = found(&wide, &["sqrt(21)"]).unwrap();
    assert_eq!(small.field.degree(), 2);
    let (small, _) = found(
        &["sqrt(2)", "root(x^3-2, 1.26)"],
        &["root(x^3-2, 1.26)^2 + 1"],
    )
    .unwrap();
    assert_eq!(small.field.degree(), 3);
}

#[test]
fn the_generator_of_a_quadratic_field_is_small() {
    let (small, _) = found(&["sqrt(2)", "sqrt(3)"], &["(17 + 12*sqrt(2))/5"]).unwrap();
    let expected = [-2, 0, 1].map(Integer::from);
    assert_eq!(small.field.minimal_polynomial(), expected);
}

#[test]
fn a_field_of_degree_64_is_recognised_as_needed_at_once() {
    let roots = [2, 3, 5, 7, 11, 13].map(|n| format!("sqrt({n})"));
    let texts: Vec<&str> = roots.iter().map(String::as_str).collect();
    let (field, elements) = numbers(&texts);
    assert_eq!(field.degree(), 64);
    assert!(smaller_field(&field, &elements).is_none());
    let small = smaller_field(&field, &elements[1..3]).unwrap();
    assert_eq!(small.field.degree(), 4);
}
