//! Equality of two formulas for all admissible values: ranges, domains and assumptions.

use std::collections::BTreeMap;

use crate::model::{Model, Relation};
use crate::symbolic::{Bound, Expr, Interval, Pool, Symbol, Truth, Witness};

/// Points tried to find one that the assumptions admit.
const ATTEMPTS: usize = 4_000;
/// Two double-precision values farther apart than this, relative to their size, confirm at another
/// point what the high-precision test has already shown.
const APART: f64 = 1e-6;

/// How two formulas compare.
#[derive(Clone, Debug, PartialEq)]
pub(super) enum Comparison {
    /// Equal, by normal form.
    Equal,
    /// Different at this admissible point.
    Different(Witness),
    /// Neither shown.
    Unknown,
}

/// Compares two formulas for all admissible values of their symbols.
pub(super) fn compare(model: &Model, left: Expr, right: Expr) -> Comparison {
    match model.pool.equal(left, right) {
        Truth::Yes => Comparison::Equal,
        Truth::CannotTell => Comparison::Unknown,
        Truth::No(witness) => {
            let point = witness.point.iter().copied().collect();
            if is_admissible(model, &point) {
                return Comparison::Different(witness);
            }
            // The formulas differ, but that point breaks an assumption: look for one that does not.
            admissible_witness(model, left, right)
                .map_or(Comparison::Unknown, Comparison::Different)
        }
    }
}

/// Whether no assumption is broken at a point. An assumption on symbols without a value there says
/// nothing about the point.
fn is_admissible(model: &Model, point: &BTreeMap<Symbol, f64>) -> bool {
    model.assumptions.iter().all(|assumption| {
        let value = |e: Expr| model.pool.eval_f64(e, point);
        match (value(assumption.left), value(assumption.right)) {
            (Some(left), Some(right)) => match assumption.relation {
                Relation::Less => left < right,
                Relation::LessEqual => left <= right,
                Relation::Greater => left > right,
                Relation::GreaterEqual => left >= right,
            },
            _ => true,
        }
    })
}

fn admissible_witness(model: &Model, left: Expr, right: Expr) -> Option<Witness> {
    let pool = &model.pool;
    let mut symbols = pool.symbols_of(pool.sub(left, right));
    for assumption in &model.assumptions {
        symbols.extend(pool.symbols_of(assumption.left));
        symbols.extend(pool.symbols_of(assumption.right));
    }
    let mut draws = Draws {
        pool,
        state: 0x2545_f491_4f6c_dd1d,
    };
    (0..ATTEMPTS).find_map(|_| {
        let mut point = BTreeMap::new();
        for &symbol in &symbols {
            draws.draw(symbol, &mut point)?;
        }
        if !is_admissible(model, &point) {
            return None;
        }
        let (a, b) = (pool.eval_f64(left, &point)?, pool.eval_f64(right, &point)?);
        let apart = (a - b).abs() > APART * (1.0 + a.abs().max(b.abs()));
        let point = point.into_iter().collect();
        apart.then_some(Witness {
            point,
            left: a,
            right: b,
        })
    })
}

/// A fixed sequence of pseudo-random points (SplitMix64, Steele, Lea and Flood 2014).
struct Draws<'a> {
    pool: &'a Pool,
    state: u64,
}

impl Draws<'_> {
    fn uniform(&mut self) -> f64 {
        self.state = self.state.wrapping_add(0x9e37_79b9_7f4a_7c15);
        let mut z = self.state;
        z = (z ^ (z >> 30)).wrapping_mul(0xbf58_476d_1ce4_e5b9);
        z = (z ^ (z >> 27)).wrapping_mul(0x94d0_49bb_1331_11eb);
        ((z ^ (z >> 31)) >> 11) as f64 / (1_u64 << 53) as f64
    }

    /// Gives a symbol a value inside its range, after those its ends depend on. The point is left
    /// where two ranges name each other.
    fn draw(&mut self, symbol: Symbol, point: &mut BTreeMap<Symbol, f64>) -> Option<()> {
        if point.contains_key(&symbol) {
            return Some(());
        }
        let Interval { lower, upper } = self.pool.range(symbol);
        let (lower, upper) = (
            self.end(lower, symbol, point)?,
            self.end(upper, symbol, point)?,
        );
        let u = 0.02 + 0.96 * self.uniform();
        let stretched = u / (1.0 - u);
        let value = match (lower, upper) {
            (Some(a), Some(b)) => a + (b - a) * u,
            (Some(a), None) => a + stretched,
            (None, Some(b)) => b - stretched,
            (None, None) => stretched.ln(),
        };
        point.insert(symbol, value);
        Some(())
    }

    fn end(
        &mut self,
        bound: Bound,
        of: Symbol,
        point: &mut BTreeMap<Symbol, f64>,
    ) -> Option<Option<f64>> {
        let Some(end) = bound.value() else {
            return Some(None);
        };
        for symbol in self.pool.symbols_of(end) {
            if symbol == of || self.pool.range(symbol) == self.pool.range(of) {
                return None;
            }
            self.draw(symbol, point)?;
        }
        self.pool.eval_f64(end, point).map(Some)
    }
}
