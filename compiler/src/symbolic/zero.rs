//! The zero test: yes by algebra, no by a witness, or cannot tell.

use dashu_base::Abs;

use super::big::{self, Big, PRECISION};
use super::limit::Limit;
use super::node::{Expr, Symbol};
use super::normal::Mode;
use super::pool::Pool;
use super::sample::Sampler;

/// Points tried before the answer is "cannot tell".
const ATTEMPTS: usize = 24;

/// Of formulas with more distinct parts than this the bounds of double precision are trusted; smaller
/// ones are evaluated in high precision in any case.
const LARGE: usize = 1_000;

/// A point at which two formulas differ.
#[derive(Clone, PartialEq, Debug)]
pub struct Witness {
    /// The values of the symbols.
    pub point: Vec<(Symbol, f64)>,
    /// The value of the first formula there.
    pub left: f64,
    /// The value of the second formula there.
    pub right: f64,
}

/// The answer to a question about all values of the symbols in their ranges.
#[derive(Clone, PartialEq, Debug)]
pub enum Truth {
    /// Proved by algebra.
    Yes,
    /// Refuted at a point.
    No(Witness),
    /// Neither proved nor refuted.
    CannotTell,
}

impl Truth {
    /// Whether it is proved.
    pub fn is_yes(&self) -> bool {
        matches!(self, Truth::Yes)
    }

    /// Whether it is refuted.
    pub fn is_no(&self) -> bool {
        matches!(self, Truth::No(_))
    }
}

/// What points inside the ranges show of two formulas.
enum Search {
    /// A point where they differ.
    Found(Witness),
    /// A point where only one of them has a value, and none where they differ: `log(x^2)` is `2*log(x)`
    /// for positive x alone, and nobody has declared x to be positive.
    DomainsDiffer,
    Nothing,
}

impl Pool {
    /// Whether the formula is 0 wherever it has a value.
    pub fn is_zero(&self, e: Expr) -> Truth {
        self.equal(e, self.zero())
    }

    /// Whether double precision shows that the formula differs from 0 at some point: a cheap question,
    /// of which only the answer `true` means something.
    pub fn is_plainly_not_zero(&self, e: Expr) -> bool {
        self.apart(e, self.zero()).is_some()
    }

    /// Whether two formulas agree wherever both have a value.
    pub fn equal(&self, a: Expr, b: Expr) -> Truth {
        if a == b {
            return Truth::Yes;
        }
        // Where double precision tells the two apart no proof is looked for, only the witness.
        let apart = self.apart(a, b);
        if let Some(witness) = apart.clone().filter(|_| self.is_large(a, b)) {
            return Truth::No(witness);
        }
        if apart.is_none() && self.equal_by_algebra(a, b) {
            return Truth::Yes;
        }
        // Most of what the normal form does not prove is false: a point is found quickly.
        match (self.look_for_witness(a, b), apart) {
            (Search::Found(witness), _) | (_, Some(witness)) => Truth::No(witness),
            (Search::Nothing, None) if self.equal_by_undoing(a, b) => Truth::Yes,
            _ => Truth::CannotTell,
        }
    }

    /// Whether evaluation in high precision would take long beside that in double precision.
    fn is_large(&self, a: Expr, b: Expr) -> bool {
        self.postorder_of(&[a, b], |_| true).len() > LARGE
    }

    /// Whether the normal form proves that two formulas agree wherever both have a value.
    pub(super) fn equal_by_algebra(&self, a: Expr, b: Expr) -> bool {
        let difference = self.sub(a, b);
        [Mode::Light, Mode::Proof]
            .into_iter()
            .any(|mode| self.normal(difference, mode).is_zero())
    }

    /// Looks for a point inside the ranges at which the two differ for certain: the difference comes
    /// out the same at 256 and at 384 bits, so it is not rounding, and is not small beside the two sides.
    fn look_for_witness(&self, a: Expr, b: Expr) -> Search {
        let mut found = Search::Nothing;
        let difference = self.sub(a, b);
        let mut symbols = self.symbols_of(a);
        symbols.extend(self.symbols_of(b));
        symbols.sort_unstable();
        symbols.dedup();
        let mut sampler = Sampler::new(self);
        let parts = self.postorder_of(&[difference, a, b], |_| true).len() as u64;
        let affordable = Limit::Witness.amount() / (2 * parts).max(1);
        let attempts = ATTEMPTS.min(affordable.max(1) as usize);
        for _ in 0..attempts {
            let Some(point) = sampler.point(&symbols) else {
                continue;
            };
            let Some(roughly) = self.eval_precise(&[difference, a, b], &point, PRECISION) else {
                let exists = |e| self.eval_big(e, &point).is_some();
                if exists(a) != exists(b) {
                    found = Search::DomainsDiffer;
                }
                continue;
            };
            let Some(finely) = self.eval_precise(&[difference], &point, PRECISION + 128) else {
                continue;
            };
            let [rough, left, right] = roughly.try_into().expect("one value a formula");
            let [fine] = finely.try_into().expect("one value a formula");
            let scale = left.clone().abs() + right.clone().abs();
            if is_settled(&rough, &fine) && scale < fine.abs() * tolerance(30) {
                let point = symbols
                    .iter()
                    .map(|&s| (s, big::to_f64(&point[&s])))
                    .collect();
                return Search::Found(Witness {
                    point,
                    left: big::to_f64(&left),
                    right: big::to_f64(&right),
                });
            }
        }
        if attempts < ATTEMPTS {
            self.exceed(Limit::Witness);
        }
        found
    }
}

/// Whether two evaluations of one number, the second with more bits, show that it is not zero: they
/// agree to ten digits.
pub(super) fn is_settled(rough: &Big, fine: &Big) -> bool {
    let (size, error) = (fine.clone().abs(), (rough - fine).abs());
    error * tolerance(10) < size
}

/// `10^decimals`.
fn tolerance(decimals: usize) -> Big {
    big::whole(10, PRECISION).powi(decimals.into())
}
