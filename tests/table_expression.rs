//! Exact expressions: values against floating point, zeros in disguise, degrees of fields, and faults with
//! their places.

use reboundary::number::{Field, Real};
use reboundary::table::expression::Evaluator;
use std::time::{Duration, Instant};

/// Text, value in floating point, degree of the field that it needs.
const VALUES: &[(&str, f64, usize)] = &[
    ("0", 0.0, 1),
    ("-7", -7.0, 1),
    ("3/7", 3.0 / 7.0, 1),
    ("0.125", 0.125, 1),
    (".5", 0.5, 1),
    ("1e-3", 0.001, 1),
    ("2.5e2", 250.0, 1),
    ("1 + 2*3 - 4/5", 6.2, 1),
    ("(1+2)*3", 9.0, 1),
    ("-2^2", -4.0, 1),
    ("(-2)^2", 4.0, 1),
    ("2^-3", 0.125, 1),
    ("2^3^2", 512.0, 1),
    ("2^(1+2)", 8.0, 1),
    ("--3", 3.0, 1),
    ("6/2/3", 1.0, 1),
    ("sqrt(4/9)", 2.0 / 3.0, 1),
    ("sqrt(0)", 0.0, 1),
    ("sqrt(2)", std::f64::consts::SQRT_2, 2),
    ("sqrt(12)/sqrt(3)", 2.0, 2),
    ("(1+sqrt(5))/2", 1.618_033_988_749_895, 2),
    ("sqrt(2)+sqrt(3)", 3.146_264_369_941_972_6, 4),
    ("sqrt(2)*sqrt(3)-sqrt(6)", 0.0, 4),
    ("sqrt(2+sqrt(2))", 1.847_759_065_022_573_5, 4),
    ("sqrt(3+2*sqrt(2))", 2.414_213_562_373_095, 2),
    ("sqrt(5+2*sqrt(6))", 3.146_264_369_941_972_6, 4),
    ("1/(1+sqrt(2))", 0.414_213_562_373_095, 2),
    ("sqrt(2)^-3", 0.353_553_390_593_273_8, 2),
    ("cos(0)", 1.0, 1),
    ("cos(pi)", -1.0, 1),
    ("cos(pi/3)", 0.5, 1),
    ("sin(pi/6)", 0.5, 1),
    ("tan(pi/4)", 1.0, 1),
    ("tan(-pi/4)", -1.0, 1),
    ("cos(pi/4)", 0.707_106_781_186_547_5, 2),
    ("sin(pi/3)", 0.866_025_403_784_438_6, 2),
    ("cos(2/7*pi)", 0.623_489_801_858_733_5, 3),
    ("cos(2*pi/7)", 0.623_489_801_858_733_5, 3),
    ("cos(pi*2/7 + pi*2)", 0.623_489_801_858_733_5, 3),
    ("sin(pi/5)", 0.587_785_252_292_473_1, 4),
    ("tan(pi/5)", 0.726_542_528_005_360_9, 4),
    ("tan(pi/8)", 0.414_213_562_373_095, 2),
    ("cos(2*pi/15)", 0.913_545_457_642_600_9, 4),
    ("cos(22*pi/7)", -0.900_968_867_902_419_1, 3),
    ("cos(pi/7)-cos(2*pi/7)+cos(3*pi/7)", 0.5, 3),
    ("cos(2*pi/5)+cos(2*pi/7)", 0.932_506_796_233_681, 6),
    ("cos(2*pi/5)-(sqrt(5)-1)/4", 0.0, 2),
    ("root(x^3-2, 1.26)", 1.259_921_049_894_873_2, 3),
    ("root(x^2-2, -1)", -std::f64::consts::SQRT_2, 2),
    ("root(x^2-x-1, 2)", 1.618_033_988_749_895, 2),
    ("root((x-1)*(x-2)*(x^2-3), 1.7)", 1.732_050_807_568_877_2, 2),
    ("root((x-1)^2*(x-2), 1.4)", 1.0, 1),
    ("root(x^3 - 6*x^2 + 11*x - 6, 2)", 2.0, 1),
    ("root(x^5-x-1, 1)", 1.167_303_978_261_418_7, 5),
    ("root(2*x^3-1, 1)", 0.793_700_525_984_099_7, 3),
    ("root(x^3-2, 1.26)+sqrt(2)", 2.674_134_612_267_968_4, 6),
    ("root(x^4-10*x^2+1, 3)-sqrt(2)-sqrt(3)", 0.0, 4),
    ("sqrt(root(x^3-2, 1.26))", 1.122_462_048_309_373, 6),
    ("sqrt(2)+sqrt(3)+sqrt(5)+sqrt(7)", 8.028083658506354, 16),
    ("cos(2*pi/17)", 0.9324722294043558, 8),
    (
        "cos(2*pi/5)+cos(2*pi/7)-cos(2*pi/35)+cos(2*pi/105)",
        0.9467873374027865,
        24,
    ),
    (
        "sqrt(2)+sqrt(3)+cos(2*pi/7)+cos(2*pi/24)+cos(2*pi/56)",
        5.729392207983017,
        24,
    ),
    ("sqrt(2)+cos(2*pi/9)+cos(2*pi/27)", 3.153302876071897, 18),
    (
        "sqrt(2)+sqrt(3)+sqrt(5)+sqrt(7)+sqrt(11)+sqrt(2310)",
        59.407167811653416,
        32,
    ),
    (
        "root(x^5-2,1)+root(x^5-3,1)+sqrt(5)",
        4.6304972721123425,
        50,
    ),
    ("cos(2*pi/51) + sqrt(2)", 2.4066340720450308, 32),
];

#[test]
fn values_agree_with_floating_point_and_need_the_stated_degree() {
    for (text, expected, degree) in VALUES {
        let start = Instant::now();
        let mut evaluator = Evaluator::default();
        let value = evaluator
            .evaluate(text)
            .unwrap_or_else(|e| panic!("{text}: {e} {:?}", e.span));
        let error = (value.to_f64() - expected).abs();
        assert!(
            error < 1e-12 * expected.abs().max(1.0),
            "{text}: {} for {expected}",
            value.to_f64()
        );
        assert_eq!(evaluator.field().degree(), *degree, "{text}");
        assert!(
            start.elapsed() < Duration::from_secs(5),
            "{text} took {:?}",
            start.elapsed()
        );
    }
}

#[test]
fn zeros_in_disguise_are_zero() {
    let zeros = [
        "sqrt(2)*sqrt(3) - sqrt(6)",
        "sqrt(2+sqrt(3)) - (sqrt(6)+sqrt(2))/2",
        "cos(pi/7)*cos(2*pi/7)*cos(3*pi/7) - 1/8",
        "sin(pi/5)^2 + cos(pi/5)^2 - 1",
        "tan(pi/5)*cos(pi/5) - sin(pi/5)",
        "4*sin(pi/10)*sin(3*pi/10) - 1",
        "root(x^3-2, 1.26)^3 - 2",
        "root(x^3+x^2-2*x-1, 1.2) - 2*cos(2*pi/7)",
        "sqrt(root(x^2-2, 1.4)) - root(x^4-2, 1.1)",
        "2*cos(pi/32) - sqrt(2+sqrt(2+sqrt(2+sqrt(2))))",
        "sqrt(2+sqrt(2+sqrt(2+sqrt(2)))) - 2*cos(pi/32)",
        "sqrt(1-cos(2*pi/31)^2) - sin(2*pi/31)",
        "sqrt(2)*sqrt(3)*sqrt(5) - sqrt(30)",
        "sqrt(8)*sqrt(2/9) - 4/3",
    ];
    for text in zeros {
        let mut evaluator = Evaluator::default();
        let value = evaluator
            .evaluate(text)
            .unwrap_or_else(|e| panic!("{text}: {e}"));
        assert!(value.is_zero(), "{text} = {}", value.decimal(20));
    }
}

/// Text, the part that the fault points at, a piece of the message, a piece of the help.
const FAULTS: &[(&str, &str, &str, &str)] = &[
    ("", "", "empty", "write a number"),
    ("   ", "   ", "empty", "write a number"),
    ("1 +", "", "ends too early", "write a number"),
    ("* 2", "*", "missing before", "number"),
    ("1 2", "2", "operator is missing", "*"),
    ("2pi", "pi", "operator is missing", "*"),
    ("(1 + 2", "(", "never closed", ")"),
    ("1 + 2)", ")", "closes nothing", "remove"),
    ("()", ")", "missing before", "number"),
    ("1,5", ",", "unexpected `,`", "decimal point"),
    ("√2", "√", "unexpected character", "sqrt"),
    ("2×3", "×", "unexpected character", "*"),
    ("2−1", "−", "unexpected character", "-"),
    ("3²", "²", "unexpected character", "^2"),
    ("30°", "°", "unexpected character", "pi/6"),
    ("2**3", "**", "unexpected `**`", "^"),
    ("1.", "1.", "decimal point", "1.0"),
    (".", ".", "decimal point", "0"),
    ("1e99999", "1e99999", "power of ten", "1000"),
    (
        "foo",
        "foo",
        "unknown name `foo`",
        "sqrt, cos, sin, tan, root",
    ),
    ("1 + phi*2", "phi", "unknown name `phi`", "known are"),
    ("x^2", "x", "unknown name `x`", "root"),
    ("sqrt", "sqrt", "unknown name `sqrt`", "parentheses"),
    ("log(2)", "log", "unknown function `log`", "known functions"),
    ("cbrt(2)", "cbrt", "unknown function", "root(x^3"),
    ("pi", "pi", "transcendental", "cos"),
    ("2*pi+1", "1", "cannot be added", "rational multiple"),
    ("sqrt(pi)", "pi", "transcendental", "cos"),
    ("pi*pi", "pi", "rational multiple of `pi`", "rational"),
    ("pi^2", "pi", "transcendental", "cos"),
    ("cos(1)", "1", "rational multiple of `pi`", "cos("),
    ("cos(sqrt(2)*pi)", "pi", "irrational multiple", "2/7"),
    ("tan(pi/2)", "tan(pi/2)", "infinite", "pole"),
    ("1/0", "0", "division by exact zero", "zero"),
    (
        "1/(sqrt(2)^2-2)",
        "(sqrt(2)^2-2)",
        "division by exact zero",
        "zero",
    ),
    (
        "1/(cos(2*pi/5)-(sqrt(5)-1)/4)",
        "(cos(2*pi/5)-(sqrt(5)-1)/4)",
        "division by exact zero",
        "zero",
    ),
    ("0^-1", "0", "division by exact zero", "zero"),
    ("sqrt(-2)", "-2", "negative", "at least 0"),
    ("sqrt(1-sqrt(2))", "1-sqrt(2)", "negative", "at least 0"),
    (
        "sqrt(2, 3)",
        "sqrt(2, 3)",
        "takes 1 argument",
        "one expression",
    ),
    (
        "root(x^3-2)",
        "root(x^3-2)",
        "takes 2 arguments",
        "root(x^3",
    ),
    ("root(x^2+1, 0)", "x^2+1", "no real root", "one"),
    ("root(x^2-2, 0)", "0", "equally near", "nearer"),
    ("root(x^3-x, 1/2)", "1/2", "equally near", "nearer"),
    ("root(5, 1)", "5", "constant polynomial", "in x"),
    (
        "root(x^2-2, sqrt(2))",
        "sqrt(2)",
        "must be rational",
        "decimal",
    ),
    (
        "root(x^2-sqrt(2), 1)",
        "sqrt(2)",
        "must be rational",
        "rational coefficients",
    ),
    ("root(1/x, 1)", "x", "no polynomial", "multiply out"),
    ("root(x^-1, 1)", "-1", "no polynomial", "exponents"),
    ("root(x^65-2, 1)", "x^65", "degree 65", "64"),
    ("2^(1/2)", "(1/2)", "exponent must be an integer", "sqrt"),
    ("2^1001", "1001", "exponent is too large", "1000"),
    ("cos(2*pi/1021)", "cos(2*pi/1021)", "degree", "lower degree"),
    (
        "sqrt(2)+root(x^33-3,1)",
        "root(x^33-3,1)",
        "degree 66",
        "lower degree",
    ),
];

#[test]
fn faults_point_at_their_place_and_say_what_to_write() {
    for (text, part, message, help) in FAULTS {
        let fault = Evaluator::default().evaluate(text).expect_err(text);
        assert_eq!(&text[fault.span.clone()], *part, "{text}: {fault}");
        assert!(fault.message.contains(message), "{text}: {}", fault.message);
        assert!(fault.help.contains(help), "{text}: {}", fault.help);
        assert!(
            fault.message.starts_with(|c: char| !c.is_uppercase()),
            "{}",
            fault.message
        );
    }
}

#[test]
fn nothing_runs_away() {
    let deep = format!("{}1{}", "(".repeat(2000), ")".repeat(2000));
    let signs = format!("{}1", "-".repeat(4000));
    let tower = format!("2{}", "^2".repeat(1500));
    let long_sum = format!("1{}", "+1".repeat(2000));
    let too_long = format!("1{}", "+1".repeat(2100));
    let digits = "9".repeat(1001);
    let most_digits = "9".repeat(1000);
    let roots: String = [2, 3, 5, 7, 11, 13, 17, 19]
        .map(|p| format!("sqrt({p})"))
        .join("+");
    let nested = (0..9).fold("2".to_string(), |inner, _| format!("sqrt(1+{inner})"));
    let cosines = "cos(2*pi/127)+cos(2*pi/113)".to_string();
    let powers = "((1+sqrt(2)+sqrt(3)+sqrt(5))^900)^900".to_string();
    let large_root = format!("sqrt({most_digits})");
    let refused = [
        (&deep, "nested deeper"),
        (&signs, "nested deeper"),
        (&tower, "nested deeper"),
        (&too_long, "too long"),
        (&digits, "too long"),
        (&roots, "degree"),
        (&nested, "degree"),
        (&cosines, "degree"),
        (&powers, "longer than"),
    ];
    for (text, message) in refused {
        let start = Instant::now();
        let fault = Evaluator::default().evaluate(text).expect_err(text);
        assert!(fault.message.contains(message), "{fault}");
        assert!(
            start.elapsed() < Duration::from_secs(10),
            "{message}: {:?}",
            start.elapsed()
        );
    }
    for text in [&long_sum, &most_digits, &large_root] {
        let start = Instant::now();
        Evaluator::default()
            .evaluate(text)
            .unwrap_or_else(|e| panic!("{e}"));
        assert!(
            start.elapsed() < Duration::from_secs(10),
            "{:?}",
            start.elapsed()
        );
    }
}

#[test]
fn every_short_text_gives_a_value_or_a_fault_inside_it() {
    // All sequences of up to four of these pieces.
    let pieces = [
        "1", "0", "x", "pi", "(", ")", "+", "-", "*", "/", "^", ",", "sqrt(", "root(", ".", "é",
    ];
    for length in 1..=4u32 {
        for mut code in 0..pieces.len().pow(length) {
            let mut text = String::new();
            for _ in 0..length {
                text.push_str(pieces[code % pieces.len()]);
                code /= pieces.len();
            }
            if let Err(fault) = Evaluator::default().evaluate(&text) {
                assert!(
                    text.get(fault.span.clone()).is_some(),
                    "{text}: {:?}",
                    fault.span
                );
                assert!(!fault.message.is_empty() && !fault.help.is_empty());
            }
        }
    }
}

#[test]
fn numbers_of_one_evaluator_end_in_one_field() {
    let mut evaluator = Evaluator::default();
    let texts = [
        "sqrt(2)",
        "1/3",
        "cos(2*pi/7)",
        "sqrt(2)*cos(2*pi/7)",
        "sin(pi/4)",
    ];
    let mut numbers: Vec<Real> = texts
        .iter()
        .map(|t| evaluator.evaluate(t).unwrap())
        .collect();
    let field = evaluator.finish(&mut numbers);
    assert_eq!(field.degree(), 6);
    assert_eq!(&numbers[0] * &numbers[2], numbers[3]);
    assert_eq!(&numbers[0] * Real::from(1), Real::from(2) * &numbers[4]);
    assert_eq!(numbers[1], Real::from(rug::Rational::from((1, 3))));
}

#[test]
fn rational_numbers_end_in_the_rationals_even_when_roots_came_up() {
    let mut evaluator = Evaluator::default();
    let mut numbers = vec![evaluator.evaluate("sqrt(2)^2").unwrap(), Real::from(1)];
    assert!(evaluator.finish(&mut numbers).is_rational());
}

#[test]
fn an_evaluator_can_start_in_a_field() {
    let mut first = Evaluator::new(Field::rationals());
    let root = first.evaluate("cos(2*pi/7)").unwrap();
    let mut second = Evaluator::new(first.field().clone());
    let same = second.evaluate("cos(2*pi/7)").unwrap();
    assert_eq!(same, root);
    assert!(
        second.field().same(first.field()),
        "the cosine was there already"
    );
    let grown = second.evaluate("sqrt(2)").unwrap();
    assert_eq!(second.field().degree(), 6);
    assert_eq!(&second.lift(&root) * &grown, &grown * &second.lift(&root));
}
