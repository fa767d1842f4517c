//! Intervals whose ends are numbers and multiples of pi.

use crate::symbolic::enclosure::{Enclosure, End};
use crate::symbolic::{Rational, Sign};

fn end(number: Rational, turns: Rational, open: bool) -> End {
    End {
        number,
        turns,
        open,
    }
}

#[test]
fn an_interval_is_within_another_by_its_ends() {
    let closed = |a: i64, b: i64| Enclosure::between(End::number(a, false), End::number(b, false));
    let open = Enclosure::open;
    for (inner, outer) in [
        (open(0, 1), open(0, 1)),
        (open(0, 1), closed(0, 1)),
        (closed(0, 1), closed(0, 1)),
        (closed(0, 1), open(-1, 2)),
        (closed(0, 1), Enclosure::UNKNOWN),
        (closed(3, 4), Enclosure::of_sign(Sign::Positive)),
        (Enclosure::UNKNOWN, Enclosure::UNKNOWN),
        // 3 < pi < 4
        (open(0, 3), Enclosure::half_turn()),
        (Enclosure::half_turn(), closed(0, 4)),
        (closed(-1, 1), Enclosure::within_turns(1, 3, true)),
    ] {
        assert!(inner.is_within(&outer), "{inner:?} within {outer:?}");
    }
    for (inner, outer) in [
        (closed(0, 1), open(0, 1)),
        (
            closed(0, 1),
            Enclosure::between(End::number(0, true), End::number(1, false)),
        ),
        (
            closed(0, 1),
            Enclosure::between(End::number(0, false), End::number(1, true)),
        ),
        (open(-1, 1), open(0, 1)),
        (open(0, 2), open(0, 1)),
        (Enclosure::UNKNOWN, open(0, 1)),
        (Enclosure::of_sign(Sign::Positive), open(0, 1)),
        (Enclosure::half_turn(), closed(0, 3)),
        (open(0, 4), Enclosure::half_turn()),
        (open(-2, 2), Enclosure::within_turns(1, 2, false)),
        (open(-1, 2), Enclosure::half_turn()),
    ] {
        assert!(!inner.is_within(&outer), "{inner:?} within {outer:?}");
    }
}

#[test]
fn signs_and_intervals_say_the_same() {
    for sign in [
        Sign::Positive,
        Sign::NonNegative,
        Sign::NonPositive,
        Sign::Negative,
        Sign::Unknown,
    ] {
        assert_eq!(Enclosure::of_sign(sign).sign(), sign);
    }
    assert_eq!(Enclosure::open(0, 1).sign(), Sign::Positive);
    assert_eq!(Enclosure::open(-1, 0).sign(), Sign::Negative);
    assert_eq!(Enclosure::open(-1, 1).sign(), Sign::Unknown);
}

/// The sine is positive between even and odd multiples of pi, negative between odd and even ones.
#[test]
fn the_sine_changes_sign_at_every_multiple_of_pi() {
    for k in -120i64..=120 {
        let sign = if k % 2 == 0 {
            Sign::Positive
        } else {
            Sign::Negative
        };
        let weak = if k % 2 == 0 {
            Sign::NonNegative
        } else {
            Sign::NonPositive
        };
        let (lower, upper) = (End::turns(k, 1, true), End::turns(k + 1, 1, true));
        let open = Enclosure::between(lower.clone(), upper.clone());
        assert_eq!(open.sign_of_sine(), sign, "{k}");
        let closed = Enclosure::between(End::turns(k, 1, false), End::turns(k + 1, 1, false));
        assert_eq!(closed.sign_of_sine(), weak, "{k}");
        let half = End::turns(2 * k + 3, 2, true);
        assert_eq!(
            Enclosure::between(lower, half).sign_of_sine(),
            Sign::Unknown,
            "{k}"
        );
        // Less before the multiple than a double shows.
        let tiny = Rational::from(10).pow(-40);
        let before = end(-tiny.clone(), Rational::from(k + 1), false);
        let around = Enclosure::between(before.clone(), end(tiny, Rational::from(k + 1), false));
        assert_eq!(around.sign_of_sine(), Sign::Unknown, "{k}");
        assert_eq!(
            Enclosure::between(before, upper).sign_of_sine(),
            sign,
            "{k}"
        );
    }
    assert_eq!(Enclosure::UNKNOWN.sign_of_sine(), Sign::Unknown);
    assert_eq!(Enclosure::open(10, 12).sign_of_sine(), Sign::Negative);
    assert_eq!(Enclosure::open(13, 15).sign_of_sine(), Sign::Positive);
}
