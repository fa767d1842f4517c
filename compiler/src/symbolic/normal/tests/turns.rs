//! Turns by parts of pi against the sine and the cosine.

use std::collections::BTreeMap;

use super::normalizer;
use crate::symbolic::Rational;
use crate::symbolic::normal::Mode;
use crate::symbolic::normal::exponent::Exponent;
use crate::symbolic::tests::pool;

/// `exp(i*pi*k/60)` for whole k: real and imaginary part.
#[test]
fn turns_by_sixtieths_are_cosines_and_sines() {
    let pool = pool();
    let normalizer = normalizer(&pool, Mode::Proof);
    let unit = pool.symbols_of(normalizer.imaginary())[0];
    for k in -130..=130i64 {
        let exponent = Exponent::from_rational(&Rational::from_parts(k.into(), 60u8.into()));
        let turn = normalizer
            .half_turns(exponent.expect("small"))
            .expect("in the budget");
        assert!(turn.denominator.is_empty(), "{k}");
        let formula = normalizer.formula(&turn);
        // a + b*i is linear in i.
        let [plus, minus] = [1.0, -1.0].map(|i| {
            let values = BTreeMap::from([(unit, i)]);
            pool.eval_f64(formula, &values).expect("a value")
        });
        let (cosine, sine) = ((plus + minus) / 2.0, (plus - minus) / 2.0);
        let angle = std::f64::consts::PI * k as f64 / 60.0;
        assert!((cosine - angle.cos()).abs() < 1e-12, "{k}: {cosine}");
        assert!((sine - angle.sin()).abs() < 1e-12, "{k}: {sine}");
    }
}

/// n turns by an n-th part of pi are half a turn: -1.
#[test]
fn other_turns_add_up() {
    let pool = pool();
    let normalizer = normalizer(&pool, Mode::Proof);
    for n in [7i64, 8, 9, 11, 13, 16, 24] {
        for k in [1, 2, 5] {
            let exponent =
                Exponent::from_rational(&Rational::from_parts(k.into(), (n as u64).into()));
            let turn = normalizer
                .half_turns(exponent.expect("small"))
                .expect("in the budget");
            let all = (1..n).try_fold(turn.clone(), |product, _| {
                normalizer.multiply(&product, &turn)
            });
            let all = all.expect("in the budget");
            let expected = if k % 2 == 0 { 1 } else { -1 };
            assert_eq!(all.as_constant(), Some(Rational::from(expected)), "{k}/{n}");
        }
    }
}
