//! Points inside the ranges of symbols, drawn with a fixed seed.

use std::collections::{BTreeMap, BTreeSet};

use super::big::{self, Big, PRECISION};
use super::facts::{Bound, Interval};
use super::node::Symbol;
use super::pool::Pool;

/// Draws points; the same sequence in every run.
pub(super) struct Sampler<'a> {
    pool: &'a Pool,
    state: u64,
}

impl<'a> Sampler<'a> {
    pub(super) fn new(pool: &'a Pool) -> Self {
        Sampler {
            pool,
            state: 0x9e37_79b9_7f4a_7c15,
        }
    }

    /// Values for the symbols, and for those that the ends of their ranges name, all inside their
    /// ranges; none if this draw found an empty range.
    pub(super) fn point(&mut self, symbols: &[Symbol]) -> Option<BTreeMap<Symbol, Big>> {
        let mut values = BTreeMap::new();
        let mut open = BTreeSet::new();
        for &symbol in symbols {
            self.draw(symbol, &mut values, &mut open)?;
        }
        Some(values)
    }

    /// Draws a symbol after the symbols its range depends on. `open` guards against ranges that refer
    /// to each other: such an end is left out of account.
    fn draw(
        &mut self,
        symbol: Symbol,
        values: &mut BTreeMap<Symbol, Big>,
        open: &mut BTreeSet<Symbol>,
    ) -> Option<()> {
        if values.contains_key(&symbol) || !open.insert(symbol) {
            return Some(());
        }
        let Interval { lower, upper } = self.pool.range(symbol);
        let lower = self.end(lower, values, open);
        let upper = self.end(upper, values, open);
        let value = self.between(lower, upper)?;
        values.insert(
            symbol,
            Big::try_from(value).ok()?.with_precision(PRECISION).value(),
        );
        open.remove(&symbol);
        Some(())
    }

    /// The value of an end, or none where it is infinite or has no value.
    fn end(
        &mut self,
        bound: Bound,
        values: &mut BTreeMap<Symbol, Big>,
        open: &mut BTreeSet<Symbol>,
    ) -> Option<f64> {
        let e = bound.value()?;
        for symbol in self.pool.symbols_of(e) {
            self.draw(symbol, values, open)?;
        }
        self.pool
            .eval_big(e, values)
            .map(|value| big::to_f64(&value))
    }

    /// A double strictly between two ends, away from them, and of moderate size.
    fn between(&mut self, lower: Option<f64>, upper: Option<f64>) -> Option<f64> {
        let u = self.uniform();
        let stretch = |u: f64| u / (1.0 - u);
        let value = match (lower, upper) {
            (Some(a), Some(b)) => a + (b - a) * u,
            (Some(a), None) => a + stretch(u),
            (None, Some(b)) => b - stretch(u),
            (None, None) => {
                let size = stretch(u);
                if self.uniform() < 0.5 { -size } else { size }
            }
        };
        (lower.is_none_or(|a| value > a) && upper.is_none_or(|b| value < b)).then_some(value)
    }

    /// A number in (0.08, 0.92), by the generator SplitMix64 (Steele, Lea, Flood 2014).
    fn uniform(&mut self) -> f64 {
        self.state = self.state.wrapping_add(0x9e37_79b9_7f4a_7c15);
        let mut z = self.state;
        z = (z ^ (z >> 30)).wrapping_mul(0xbf58_476d_1ce4_e5b9);
        z = (z ^ (z >> 27)).wrapping_mul(0x94d0_49bb_1331_11eb);
        z ^= z >> 31;
        0.08 + 0.84 * (z >> 11) as f64 / (1u64 << 53) as f64
    }
}
