//! Exponents against exact fractions.

use crate::symbolic::Rational;
use crate::symbolic::normal::exponent::Exponent;

fn fractions() -> Vec<Rational> {
    let all = (-7..=7i64).flat_map(|n| (1..=6u64).map(move |d| (n, d)));
    all.map(|(n, d)| Rational::from_parts(n.into(), d.into()))
        .collect()
}

fn exponent(value: &Rational) -> Exponent {
    Exponent::from_rational(value).expect("a small fraction")
}

#[test]
fn arithmetic_is_that_of_fractions() {
    let all = fractions();
    for a in &all {
        let x = exponent(a);
        assert_eq!(x.to_rational(), *a);
        assert_eq!(x.is_zero(), a.is_zero());
        assert_eq!(x.is_negative(), *a < Rational::ZERO);
        assert_eq!(x.as_whole(), i64::try_from(a.clone()).ok(), "{a}");
        assert_eq!(x.negated().map(Exponent::to_rational), Some(-a.clone()));
        let inverse = (!a.is_zero()).then(|| Rational::ONE / a);
        assert_eq!(x.inverse().map(Exponent::to_rational), inverse, "1/{a}");
        for b in &all {
            let y = exponent(b);
            let is = |found: Option<Exponent>, exact: Rational| found == Some(exponent(&exact));
            assert!(is(x.plus(y), a + b), "{a} + {b}");
            assert!(is(x.minus(y), a - b), "{a} - {b}");
            assert!(is(x.times(y), a * b), "{a} * {b}");
            assert_eq!(x.cmp(&y), a.cmp(b), "{a} and {b}");
            assert_eq!(x.partial_cmp(&y), Some(a.cmp(b)), "{a} and {b}");
            if *b > Rational::ZERO {
                let (count, rest) = x.divided_by(y).expect("a small quotient");
                let rest = rest.to_rational();
                assert!(rest >= Rational::ZERO && rest < *b, "{a} by {b}");
                assert_eq!(Rational::from(count) * b + rest, *a, "{a} by {b}");
            }
        }
    }
}

#[test]
fn what_does_not_fit_is_none() {
    let largest = Exponent::whole(i64::MAX);
    assert_eq!(largest.plus(Exponent::ONE), None);
    assert_eq!(largest.times(largest), None);
    assert_eq!(Exponent::whole(i64::MIN).negated(), None);
    let long = Rational::from(i64::MAX) + Rational::ONE;
    assert_eq!(Exponent::from_rational(&long), None);
    // Fractions that fit when reduced do.
    let third = exponent(&Rational::from_parts(1.into(), 3u8.into()));
    let huge = Exponent::whole(3 << 60);
    assert_eq!(huge.times(third), Some(Exponent::whole(1 << 60)));
}
