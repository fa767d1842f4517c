//! Between which numbers the values of a formula lie, with multiples of pi kept exact: what tells the
//! branches of circular functions and their inverses apart.

use std::cmp::Ordering;

use super::big::{self, Big, PRECISION};
use super::facts::Sign;
use super::node::Rational;

/// An end: `number + turns*pi`.
#[derive(Clone, PartialEq, Debug)]
pub(super) struct End {
    pub(super) number: Rational,
    pub(super) turns: Rational,
    pub(super) open: bool,
}

/// The ends between which the values lie; none where nothing is known on that side.
#[derive(Clone, PartialEq, Debug)]
pub(super) struct Enclosure {
    pub(super) lower: Option<End>,
    pub(super) upper: Option<End>,
}

impl End {
    pub(super) fn number(value: i64, open: bool) -> End {
        End {
            number: Rational::from(value),
            turns: Rational::ZERO,
            open,
        }
    }

    /// `count` parts of pi, each of one `parts`-th.
    pub(super) fn turns(count: i64, parts: u64, open: bool) -> End {
        End {
            number: Rational::ZERO,
            turns: Rational::from_parts(count.into(), parts.into()),
            open,
        }
    }

    pub(super) fn plus(&self, other: &End) -> End {
        End {
            number: &self.number + &other.number,
            turns: &self.turns + &other.turns,
            open: self.open || other.open,
        }
    }

    pub(super) fn times(&self, factor: &Rational) -> End {
        End {
            number: &self.number * factor,
            turns: &self.turns * factor,
            open: self.open,
        }
    }

    /// The value; exact in the sense that it is zero only for `0 + 0*pi`.
    fn value(&self) -> Big {
        big::from_rational(&self.number, PRECISION)
            + big::from_rational(&self.turns, PRECISION) * Big::pi(PRECISION)
    }

    /// Which of the two numbers is larger, whether they belong to an interval or not.
    fn compare(&self, other: &End) -> Ordering {
        let gap = self.plus(&other.times(&Rational::from(-1)));
        if gap.turns.is_zero() {
            return gap.number.cmp(&Rational::ZERO);
        }
        // Pi is irrational, and the numbers are far shorter than 256 bits.
        if big::is_negative(&gap.value()) {
            Ordering::Less
        } else {
            Ordering::Greater
        }
    }
}

impl Enclosure {
    pub(super) const UNKNOWN: Enclosure = Enclosure {
        lower: None,
        upper: None,
    };

    pub(super) fn between(lower: End, upper: End) -> Enclosure {
        Enclosure {
            lower: Some(lower),
            upper: Some(upper),
        }
    }

    /// `[-count/parts*pi, count/parts*pi]`, with or without its ends.
    pub(super) fn within_turns(count: i64, parts: u64, open: bool) -> Enclosure {
        Enclosure::between(
            End::turns(-count, parts, open),
            End::turns(count, parts, open),
        )
    }

    /// `[0, pi]`.
    pub(super) fn half_turn() -> Enclosure {
        Enclosure::between(End::number(0, false), End::turns(1, 1, false))
    }

    /// `(lower, upper)`.
    pub(super) fn open(lower: i64, upper: i64) -> Enclosure {
        Enclosure::between(End::number(lower, true), End::number(upper, true))
    }

    pub(super) fn of_sign(sign: Sign) -> Enclosure {
        let zero = |open| Some(End::number(0, open));
        let (lower, upper) = match sign {
            Sign::Positive => (zero(true), None),
            Sign::NonNegative => (zero(false), None),
            Sign::Zero => (zero(false), zero(false)),
            Sign::NonPositive => (None, zero(false)),
            Sign::Negative => (None, zero(true)),
            Sign::Unknown => (None, None),
        };
        Enclosure { lower, upper }
    }

    pub(super) fn plus(&self, other: &Enclosure) -> Enclosure {
        let sum = |a: &Option<End>, b: &Option<End>| Some(a.as_ref()?.plus(b.as_ref()?));
        Enclosure {
            lower: sum(&self.lower, &other.lower),
            upper: sum(&self.upper, &other.upper),
        }
    }

    pub(super) fn times(&self, factor: &Rational) -> Enclosure {
        let scale = |end: &Option<End>| end.as_ref().map(|end| end.times(factor));
        let (lower, upper) = (scale(&self.lower), scale(&self.upper));
        if *factor < Rational::ZERO {
            return Enclosure {
                lower: upper,
                upper: lower,
            };
        }
        Enclosure { lower, upper }
    }

    /// Whether every value lies in the other interval.
    pub(super) fn is_within(&self, other: &Enclosure) -> bool {
        let fits = |own: &Option<End>, end: &Option<End>, outside: Ordering| match (own, end) {
            (_, None) => true,
            (None, Some(_)) => false,
            (Some(own), Some(end)) => match own.compare(end) {
                Ordering::Equal => own.open || !end.open,
                order => order != outside,
            },
        };
        fits(&self.lower, &other.lower, Ordering::Less)
            && fits(&self.upper, &other.upper, Ordering::Greater)
    }

    /// The sign of what lies here.
    pub(super) fn sign(&self) -> Sign {
        [
            Sign::Positive,
            Sign::NonNegative,
            Sign::Negative,
            Sign::NonPositive,
        ]
        .into_iter()
        .find(|&sign| self.is_within(&Enclosure::of_sign(sign)))
        .unwrap_or(Sign::Unknown)
    }

    /// The sign of the sine of what lies here.
    pub(super) fn sign_of_sine(&self) -> Sign {
        let Some(lower) = &self.lower else {
            return Sign::Unknown;
        };
        let turn = (big::to_f64(&lower.value()) / std::f64::consts::PI).floor() as i64;
        // Rounding may have put an end that is a multiple of pi on the wrong side.
        let found = [turn - 1, turn, turn + 1].into_iter().find_map(|turn| {
            let around =
                |open| Enclosure::between(End::turns(turn, 1, open), End::turns(turn + 1, 1, open));
            let sign = if self.is_within(&around(true)) {
                Sign::Positive
            } else if self.is_within(&around(false)) {
                Sign::NonNegative
            } else {
                return None;
            };
            Some(if turn % 2 == 0 { sign } else { sign.negate() })
        });
        found.unwrap_or(Sign::Unknown)
    }

    /// What lies here, a quarter turn on: the sine of it is the cosine.
    pub(super) fn quarter_turn_on(&self) -> Enclosure {
        let quarter = End::turns(1, 2, false);
        self.plus(&Enclosure::between(quarter.clone(), quarter))
    }
}
