//! Polynomials whose decompositions are known, and ones that have none.

use num_rational::BigRational;

use super::*;
use crate::search::polynomial::monomials;

fn q(n: i64) -> BigRational {
    BigRational::from_integer(n.into())
}

/// A polynomial from coefficients and exponents.
fn poly(list: &[(i64, &[u16])]) -> Polynomial {
    let mut p = Polynomial::default();
    for (c, m) in list {
        p.add(m.to_vec(), q(*c));
    }
    p
}

fn points(variables: usize, positive: bool) -> Vec<Vec<f64>> {
    let mut state = 7u64;
    let mut random = || {
        state = state.wrapping_mul(6364136223846793005).wrapping_add(1442695040888963407);
        let x = (state >> 11) as f64 / (1u64 << 53) as f64;
        if positive { 2.0 * x } else { 4.0 * x - 2.0 }
    };
    (0..400).map(|_| (0..variables).map(|_| random()).collect()).collect()
}

fn squares(target: &Polynomial, multipliers: &[Polynomial], positive: bool) -> Result<Vec<Square>, Lack> {
    let variables = target.terms().next().unwrap().0.len();
    let blocks = multipliers
        .iter()
        .map(|m| Block {
            multiplier: m.clone(),
            basis: monomials(variables, (target.degree() - m.degree()) / 2)
                .into_iter()
                .map(|m| Polynomial::single(BigRational::one(), m))
                .collect(),
        })
        .collect();
    let (points, zeros) = (points(variables, positive), simple_zeros(target, &[], variables));
    let problem = Problem { target: target.clone(), blocks, rules: &[], points: &points, zeros: &zeros };
    let found = decompose(&problem, &mut |_| true)?;
    let mut sum = target.scaled(&q(-1));
    for s in &found {
        assert!(s.weight.is_positive());
        let square = s.root.times(&s.root).and_then(|p| p.times(&multipliers[s.block])).unwrap();
        sum = sum.plus(&square.scaled(&s.weight));
    }
    assert!(sum.is_empty(), "{found:?}");
    Ok(found)
}

#[test]
fn inside_the_cone() {
    let one = poly(&[(1, &[0, 0])]);
    squares(&poly(&[(1, &[4, 0]), (1, &[0, 4]), (-1, &[1, 1]), (1, &[0, 0])]), &[one], false).unwrap();
}

#[test]
fn with_zeros() {
    let one2 = poly(&[(1, &[0, 0])]);
    squares(&poly(&[(1, &[2, 0]), (1, &[0, 2]), (-2, &[1, 1])]), std::slice::from_ref(&one2), false).unwrap();
    // (x^2 + y - 11)^2 + (x + y^2 - 7)^2, four zeros, three of them irrational.
    let p = [
        poly(&[(1, &[2, 0]), (1, &[0, 1]), (-11, &[0, 0])]),
        poly(&[(1, &[1, 0]), (1, &[0, 2]), (-7, &[0, 0])]),
    ];
    let sum = p[0].times(&p[0]).unwrap().plus(&p[1].times(&p[1]).unwrap());
    squares(&sum, &[one2], false).unwrap();
    // Choi and Lam, 1977: 1 + x^2 y^2 + y^2 z^2 + z^2 x^2 - 4 x y z is no sum of squares.
    let choi = poly(&[(1, &[0, 0, 0]), (1, &[2, 2, 0]), (1, &[0, 2, 2]), (1, &[2, 0, 2]), (-4, &[1, 1, 1])]);
    let one3 = poly(&[(1, &[0, 0, 0])]);
    assert!(squares(&choi, std::slice::from_ref(&one3), false).is_err());
    let more = one3.plus(&poly(&[(1, &[2, 0, 0]), (1, &[0, 2, 0]), (1, &[0, 0, 2])]));
    squares(&choi.times(&more).unwrap(), &[one3], false).unwrap();
}

#[test]
fn motzkin() {
    let one = poly(&[(1, &[0, 0])]);
    let m = poly(&[(1, &[4, 2]), (1, &[2, 4]), (1, &[0, 0]), (-3, &[2, 2])]);
    assert_eq!(squares(&m, std::slice::from_ref(&one), false).unwrap_err(), Lack::Separated);
    let more = one.plus(&poly(&[(1, &[2, 0]), (1, &[0, 2])]));
    squares(&m.times(&more).unwrap(), &[one], false).unwrap();
}

#[test]
fn with_multipliers() {
    // x^3 + y^3 - x^2 y - x y^2 = (x + y)(x - y)^2 for x, y >= 0.
    let p = poly(&[(1, &[3, 0]), (1, &[0, 3]), (-1, &[2, 1]), (-1, &[1, 2])]);
    squares(&p, &[poly(&[(1, &[1, 0])]), poly(&[(1, &[0, 1])])], true).unwrap();
    assert!(
        squares(&p.plus(&poly(&[(-1, &[2, 1])])), &[poly(&[(1, &[1, 0])]), poly(&[(1, &[0, 1])])], true)
            .is_err()
    );
}
