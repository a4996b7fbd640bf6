//! Enclosures against reference values of an independent library.
//!
//! `tests/cases/enclosure/mpmath.tsv` holds values to 40 digits; the script
//! beside it says how they were made. An MPFR enclosure of 200 bits must agree
//! with all 40 digits and be two units wide at most, and the `f64` enclosure
//! must contain the MPFR one.

use boundwright::enclosure::{BigFloat, BigInterval, Bits, Definedness, End, Function, Interval, Toward};

const CASES: &str = include_str!("../cases/enclosure/mpmath.tsv");
const BITS: u32 = 200;
/// The digits to which the reference values are rounded.
const DIGITS: i32 = 40;

struct Case<'a> {
    line: &'a str,
    name: &'a str,
    arguments: Vec<f64>,
    value: &'a str,
}

fn cases() -> impl Iterator<Item = Case<'static>> {
    CASES.lines().filter(|line| !line.starts_with('#')).map(|line| {
        let fields: Vec<&str> = line.split('\t').collect();
        let (name, value) = (fields[0], fields[fields.len() - 1]);
        let arguments = fields[1..fields.len() - 1]
            .iter()
            .map(|text| text.parse().expect("arguments are f64 in decimals"))
            .collect();
        Case { line, name, arguments, value }
    })
}

fn evaluate<E: End>(
    case: &Case,
    precision: E::Precision,
) -> (boundwright::enclosure::Enclosure<E>, Definedness) {
    use boundwright::enclosure::Enclosure;
    let mut defined = Definedness::Continuous;
    let arguments: Vec<Enclosure<E>> =
        case.arguments.iter().map(|&x| Enclosure::point(E::from_f64(x, precision, Toward::Down))).collect();
    let value = if case.name == "power" {
        arguments[0].to_power(&arguments[1], &mut defined)
    } else {
        let f = Function::from_name(case.name).expect("a function of the language");
        Enclosure::apply(f, &arguments, &mut defined)
    };
    (value, defined)
}

/// The distance from the end nearer to 0 to the next number, times `units`.
fn units_of<E: End>(x: &boundwright::enclosure::Enclosure<E>, units: f64) -> E {
    let precision = x.precision();
    let unit = x.magnitude().times(&E::spacing(precision), Toward::Up);
    unit.times(&E::from_f64(units, precision, Toward::Up), Toward::Up)
}

#[test]
fn mpfr_enclosures_agree_with_all_digits() {
    let bits = Bits::new(BITS);
    for case in cases() {
        let (value, defined) = evaluate::<BigFloat>(&case, bits);
        assert!(defined.is_continuous(), "{}: {defined:?}", case.line);
        let reference = BigInterval::from_decimal(case.value, bits)
            .unwrap_or_else(|| panic!("no decimal: {}", case.line));
        // One unit of the last digit is at most this part of the value.
        let error = BigInterval::from_decimal(&format!("1e{}", 1 - DIGITS), bits).expect("a decimal");
        let around = reference.plus(&reference.times(&error.hull(&error.negated())));
        assert!(!value.is_disjoint_from(&around), "{}: got {:?}", case.line, value.to_decimals(45));
        assert!(
            value.width_upper().order(&units_of(&value, 2.0)).is_le(),
            "{}: too wide, {:?}",
            case.line,
            value.to_decimals(70)
        );
    }
}

#[test]
fn f64_enclosures_contain_the_mpfr_ones() {
    for case in cases() {
        let (precise, _) = evaluate::<BigFloat>(&case, Bits::new(BITS));
        let (fast, defined): (Interval, _) = evaluate::<f64>(&case, ());
        assert!(defined.is_continuous(), "{}: {defined:?}", case.line);
        let widened = BigInterval::from_interval(&fast, Bits::new(BITS));
        assert!(
            precise.is_subset_of(&widened),
            "{}: {fast:?} does not contain {:?}",
            case.line,
            precise.to_decimals(25)
        );
    }
}

#[test]
fn f64_enclosures_are_tight() {
    for case in cases() {
        let (fast, _): (Interval, _) = evaluate::<f64>(&case, ());
        // Some are computed by several operations, all others by one.
        let allowed = match case.name {
            "digamma" => units_of(&fast, 64.0).max(1e-14),
            "chebyshev" => units_of(&fast, 64.0).max(1e-9),
            "binomial" => units_of(&fast, 1e7),
            _ => units_of(&fast, 4.0).max(1e-322),
        };
        assert!(fast.width_upper() <= allowed || *fast.lo() == f64::MAX, "{}: {fast:?}", case.line);
    }
}

#[test]
fn every_function_of_one_real_argument_has_reference_values() {
    for f in Function::ALL {
        let by_case = cases().any(|case| case.name == f.name());
        let exact =
            matches!(f, Function::Abs | Function::Min | Function::Max | Function::Floor | Function::Ceil);
        assert!(by_case || exact, "no reference value for {}", f.name());
    }
}
