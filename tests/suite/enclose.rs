//! `enclose` is as tight as it promises, against the reference values of
//! `tests/cases/enclosure/` (mpmath, 40 digits; the script stands beside them).

use std::collections::BTreeMap;

use boundwright::enclosure::{BigInterval, Bits};

use crate::command::{project, run};

const CASES: &str = include_str!("../cases/enclosure/mpmath.tsv");
const DIGITS: i32 = 12;
/// Decimals are compared in this precision.
const BITS: u32 = 400;
/// Functions that grow wherever they are defined.
const INCREASING: &[&str] =
    &["exp", "log", "log2", "sqrt", "asin", "atan", "sinh", "tanh", "asinh", "acosh", "atanh", "erf"];
const DECREASING: &[&str] = &["acos", "erfc"];

fn decimal(text: &str) -> BigInterval {
    BigInterval::from_decimal(text, Bits::new(BITS)).unwrap_or_else(|| panic!("no decimal: {text}"))
}

/// Answers to requests, each an expression and the box as JSON.
fn answers(requests: &[(String, String)]) -> Vec<(String, String)> {
    let lines: String = requests
        .iter()
        .map(|(expression, ranges)| {
            format!("{{\"expr\": \"{expression}\", \"box\": {{{ranges}}}, \"digits\": {DIGITS}}}\n")
        })
        .collect();
    let outcome = run(project(&[]).path(), &["enclose", "-"], lines.as_bytes());
    assert_eq!(outcome.code, 0, "{}{}", outcome.out, outcome.err);
    let read = |line: &str| {
        let answer: serde_json::Value = serde_json::from_str(line).expect("JSON");
        assert_eq!(answer["defined"], "everywhere", "{line}");
        (
            answer["lo"].as_str().expect("a text").to_string(),
            answer["hi"].as_str().expect("a text").to_string(),
        )
    };
    let found: Vec<_> = outcome.out.lines().map(read).collect();
    assert_eq!(found.len(), requests.len());
    found
}

/// A relative error in the last of so many digits.
fn unit(digits: i32) -> BigInterval {
    decimal(&format!("1e{}", 1 - digits))
}

#[test]
fn at_a_point_the_relative_width_is_as_small_as_asked() {
    let cases: Vec<Vec<&str>> = CASES
        .lines()
        .filter(|line| !line.starts_with('#'))
        .map(|line| line.split('\t').collect::<Vec<_>>())
        .filter(|fields| !["factorial", "binomial", "chebyshev"].contains(&fields[0]))
        .collect();
    let requests: Vec<(String, String)> = cases
        .iter()
        .map(|fields| {
            let arguments = &fields[1..fields.len() - 1];
            let names = ["x", "y"];
            let ranges: Vec<String> = arguments
                .iter()
                .zip(names)
                .map(|(value, name)| {
                    let value = exact_rational(value);
                    format!("\"{name}\": [\"{value}\", \"{value}\"]")
                })
                .collect();
            let expression = match fields[0] {
                "power" => "x^y".to_string(),
                name => format!("{name}({})", names[..arguments.len()].join(", ")),
            };
            (expression, ranges.join(", "))
        })
        .collect();
    for (fields, (lo, hi)) in cases.iter().zip(answers(&requests)) {
        let reference = decimal(fields[fields.len() - 1]);
        let near = reference.plus(&reference.times(&unit(40).hull(&unit(40).negated())));
        let (lo, hi) = (decimal(&lo), decimal(&hi));
        assert!(lo.is_possibly_at_most(&near) && near.is_possibly_at_most(&hi), "{fields:?}: {lo:?} {hi:?}");
        let width = BigInterval::point(hi.minus(&lo).hi().clone());
        let allowed = BigInterval::point(reference.mignitude()).times(&unit(DIGITS + 1));
        assert!(width.is_possibly_at_most(&allowed), "{fields:?}: {lo:?} {hi:?}");
    }
}

/// An f64 as a term whose value is exactly that number.
fn exact_rational(text: &str) -> String {
    let x: f64 = text.parse().expect("an f64");
    let bits = x.abs().to_bits();
    let (high, low) = (bits >> 52, bits & ((1 << 52) - 1));
    let (mantissa, exponent) =
        if high == 0 { (low, -1074) } else { (low | (1 << 52), i64::try_from(high).expect("small") - 1075) };
    let sign = if x < 0.0 { "-" } else { "" };
    format!("{sign}{mantissa}*2^({exponent})")
}

/// On a box, one operation gives its exact range up to two units of the last digit.
#[test]
fn on_a_box_one_operation_gives_its_exact_range() {
    let mut by_name: BTreeMap<&str, Vec<(f64, &str)>> = BTreeMap::new();
    for line in CASES.lines().filter(|line| !line.starts_with('#')) {
        let fields: Vec<&str> = line.split('\t').collect();
        if fields.len() == 3 && [INCREASING, DECREASING].concat().contains(&fields[0]) {
            by_name.entry(fields[0]).or_default().push((fields[1].parse().expect("an f64"), fields[2]));
        }
    }
    let mut boxes = Vec::new();
    for (name, mut points) in by_name {
        points.sort_by(|a, b| a.0.total_cmp(&b.0));
        for pair in points.windows(2).filter(|pair| pair[0].0 < pair[1].0) {
            let range = format!(
                "\"x\": [\"{}\", \"{}\"]",
                exact_rational(&pair[0].0.to_string()),
                exact_rational(&pair[1].0.to_string())
            );
            let (least, most) = if DECREASING.contains(&name) { (1, 0) } else { (0, 1) };
            boxes.push(((format!("{name}(x)"), range), pair[least].1, pair[most].1));
        }
    }
    assert!(boxes.len() > 100, "only {} boxes", boxes.len());
    let requests: Vec<_> = boxes.iter().map(|(request, ..)| request.clone()).collect();
    for ((request, least, most), (lo, hi)) in boxes.iter().zip(answers(&requests)) {
        for (end, reference, below) in [(lo, least, true), (hi, most, false)] {
            let (found, reference) = (decimal(&end), decimal(reference));
            let allowed = reference.times(&unit(DIGITS + 2)).times(&decimal("2"));
            let room = allowed.hull(&allowed.negated());
            assert!(!found.is_disjoint_from(&reference.plus(&room)), "{request:?}: {end}");
            let slack = reference.times(&unit(40).hull(&unit(40).negated()));
            let outward = if below {
                found.is_possibly_at_most(&reference.plus(&slack))
            } else {
                reference.plus(&slack).is_possibly_at_most(&found)
            };
            assert!(outward, "{request:?}: {end} is inside");
        }
    }
}
