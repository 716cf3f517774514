//! Field arithmetic against general-purpose libraries: FLINT decides zeros, mpmath gives the decimals.
//!
//! `data/field_arithmetic.json` was written by `data/make_field_arithmetic.py` with python-flint 0.9 and mpmath 1.4: random
//! expressions, zeros in disguise, and differences from rational numbers nearby.

use reboundary::number::Sign;
use reboundary::table::expression::Evaluator;
use rug::{Integer, Rational};
use serde_json::Value;

/// Places after the point that must agree.
const PLACES: u32 = 200;

fn fixture() -> (u32, Vec<Value>) {
    let json: Value = serde_json::from_str(include_str!("data/field_arithmetic.json")).unwrap();
    let places = json["places"].as_u64().unwrap() as u32;
    (places, json["expressions"].as_array().unwrap().clone())
}

#[test]
fn signs_zeros_and_200_places_agree_with_flint_and_mpmath() {
    let (places, rows) = fixture();
    assert!(rows.len() >= 300);
    let ten = |power: u32| Integer::from(Integer::u_pow_u(10, power));
    // One unit of the program's last place, and the reference's own rounding.
    let allowed = Rational::from((1, ten(PLACES))) + Rational::from((1, ten(places)));
    let mut signs = [0; 3];
    for row in &rows {
        let text = row["text"].as_str().unwrap();
        let value = Evaluator::default()
            .evaluate(text)
            .unwrap_or_else(|fault| panic!("{text}: {fault}"));
        let sign = match value.sign() {
            Sign::Negative => -1,
            Sign::Zero => 0,
            Sign::Positive => 1,
        };
        assert_eq!(row["sign"].as_i64().unwrap(), sign, "{text}");
        assert_eq!(sign == 0, value.is_zero(), "{text}");
        signs[(sign + 1) as usize] += 1;
        let reference: Integer = row["value_times_10_to_230"]
            .as_str()
            .unwrap()
            .parse()
            .unwrap();
        let reference = Rational::from((reference, ten(places)));
        let shown = value.decimal(PLACES as usize);
        let (whole, fraction) = shown.split_once('.').unwrap();
        let digits: Integer = format!("{whole}{fraction}").parse().unwrap();
        let shown = Rational::from((digits, ten(PLACES)));
        assert!(
            Rational::from(&shown - &reference).abs() <= allowed,
            "{text}"
        );
        // The nearest floating-point number, too.
        let near = value.to_f64();
        let expected = reference.to_f64();
        assert!(
            (near - expected).abs() <= 1e-15 * expected.abs() + 1e-200,
            "{text}"
        );
    }
    assert!(
        signs.iter().all(|n| *n >= 40),
        "every sign is there: {signs:?}"
    );
}
