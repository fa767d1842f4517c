//! Exact order statistics in bounded memory.
//!
//! If all values fit the budget they are kept and the order statistics selected. If not,
//! they are found by radix selection: each pass over the paths counts values by the next
//! few bits of their ordered representation and so narrows every order statistic down, until
//! all 64 bits are known. A path is a pure function of its number, so it can be run again.

use std::collections::BTreeMap;

use super::Layout;

/// Maps a number to a word so that the order of words is that of numbers; NaN comes last.
fn ordered(x: f64) -> u64 {
    let bits = if x.is_nan() {
        f64::NAN.to_bits()
    } else {
        x.to_bits()
    };
    let negative = bits >> 63 == 1;
    if negative { !bits } else { bits | 1 << 63 }
}

/// The inverse of [`ordered`].
fn unordered(word: u64) -> f64 {
    let positive = word >> 63 == 1;
    f64::from_bits(if positive { word & !(1 << 63) } else { !word })
}

/// The order statistics a quantile interpolates: those of index `floor((n - 1) p)` and the
/// next, from 0, and the weight of the second.
fn position(probability: f64, count: u64) -> (u64, u64, f64) {
    let last = count - 1;
    let place = probability * last as f64;
    let low = (place.floor() as u64).min(last);
    (low, (low + 1).min(last), place - low as f64)
}

/// The interpolated value; equal order statistics give themselves, infinite ones too.
fn interpolate(low: f64, high: f64, weight: f64) -> f64 {
    if low == high || weight == 0.0 {
        return low;
    }
    low + weight * (high - low)
}

/// What is known of the order statistics after a number of passes.
#[derive(Clone, Debug)]
pub struct Selection {
    layout: Layout,
    probabilities: Vec<f64>,
    cells: Vec<Cell>,
    /// Bits of the ordered words known so far, and bits learned in a pass.
    known: u32,
    digit: u32,
}

/// The values at one time of one quantity.
#[derive(Clone, Debug)]
enum Cell {
    /// All of them.
    Kept(Vec<f64>),
    /// For each prefix that leads to an order statistic, which it holds.
    Counted(BTreeMap<u64, Bin>),
}

/// The values whose ordered words start with a certain prefix.
#[derive(Clone, Debug)]
struct Bin {
    /// How many values lie below all of these.
    below: u64,
    /// How many have each next digit.
    counts: Vec<u64>,
    /// The indices of the order statistics among them.
    ranks: Vec<u64>,
}

impl Bin {
    /// The prefixes, one digit longer, that hold this bin's order statistics.
    fn narrowed(&self, prefix: u64, digit: u32) -> Vec<(u64, Bin)> {
        let mut bins: Vec<(u64, Bin)> = Vec::new();
        let mut below = self.below;
        let mut ranks = self.ranks.iter().copied().peekable();
        for (value, &count) in self.counts.iter().enumerate() {
            let mut inside = Vec::new();
            while let Some(rank) = ranks.next_if(|rank| *rank < below + count) {
                inside.push(rank);
            }
            if !inside.is_empty() {
                let bin = Bin {
                    below,
                    counts: Vec::new(),
                    ranks: inside,
                };
                bins.push((prefix << digit | value as u64, bin));
            }
            below += count;
        }
        bins
    }
}

impl Selection {
    pub(super) fn new(layout: &Layout, probabilities: &[f64], budget: usize) -> Selection {
        let cells = layout.cells();
        let needed = u128::from(layout.paths) * cells as u128 * 8;
        let keep = needed <= budget as u128;
        let mut ranks: Vec<u64> = probabilities
            .iter()
            .flat_map(|&p| {
                let (low, high, _) = position(p, layout.paths);
                [low, high]
            })
            .collect();
        ranks.sort_unstable();
        ranks.dedup();
        // At most one histogram for each order statistic of each cell; while a pass starts
        // there are two copies.
        let counters = budget / 16 / (cells * ranks.len()).max(1);
        let digit = counters.max(2).ilog2().clamp(2, 16);
        let empty = || match keep {
            true => Cell::Kept(Vec::with_capacity(layout.paths as usize)),
            false => Cell::Counted(BTreeMap::from([(
                0,
                Bin {
                    below: 0,
                    counts: vec![0; 1 << digit],
                    ranks: ranks.clone(),
                },
            )])),
        };
        Selection {
            layout: *layout,
            probabilities: probabilities.to_vec(),
            cells: (0..cells).map(|_| empty()).collect(),
            known: 0,
            digit,
        }
    }

    /// Takes in a block of values.
    pub(super) fn count(&mut self, values: &[f64]) {
        let lanes = values.len() / self.cells.len().max(1);
        let (known, digit) = (self.known, self.digit);
        for (cell, values) in self.cells.iter_mut().zip(values.chunks(lanes.max(1))) {
            match cell {
                Cell::Kept(all) => all.extend_from_slice(values),
                Cell::Counted(bins) => {
                    for &value in values {
                        let word = ordered(value);
                        let prefix = word.checked_shr(64 - known).unwrap_or(0);
                        if let Some(bin) = bins.get_mut(&prefix) {
                            let next = (word << known) >> (64 - digit);
                            bin.counts[next as usize] += 1;
                        }
                    }
                }
            }
        }
    }

    /// Whether another pass over the paths is needed.
    #[must_use]
    pub fn needs_another_pass(&self) -> bool {
        let counted = |cell: &Cell| matches!(cell, Cell::Counted(_));
        self.known < 64 && self.cells.first().is_some_and(counted)
    }

    /// Evaluates the counts of a pass and prepares the next.
    fn narrow(&mut self) {
        let digit = self.digit;
        self.known += digit;
        self.digit = digit.min(64 - self.known);
        let width = if self.known < 64 { 1 << self.digit } else { 0 };
        for cell in &mut self.cells {
            if let Cell::Counted(bins) = cell {
                let narrowed = bins
                    .iter()
                    .flat_map(|(&prefix, bin)| bin.narrowed(prefix, digit));
                let mut next: BTreeMap<u64, Bin> = narrowed.collect();
                for bin in next.values_mut() {
                    bin.counts = vec![0; width];
                }
                *bins = next;
            }
        }
    }

    /// How many quantities there are at each time.
    pub(super) fn quantities(&self) -> usize {
        self.layout.quantities
    }

    /// The quantiles of each cell, once every order statistic is known.
    pub(super) fn quantiles(&mut self) -> Vec<Vec<f64>> {
        let probabilities = &self.probabilities;
        let count = self.layout.paths;
        let quantiles = |cell: &mut Cell| cell.quantiles(probabilities, count);
        self.cells.iter_mut().map(quantiles).collect()
    }

    /// The end of a pass.
    pub(super) fn passed(mut self) -> Selection {
        if self.needs_another_pass() {
            self.narrow();
        }
        self
    }
}

impl Cell {
    /// The quantiles, once every order statistic is known.
    fn quantiles(&mut self, probabilities: &[f64], count: u64) -> Vec<f64> {
        let mut statistic = |rank: u64| match self {
            Cell::Kept(values) => {
                let by_word = |a: &f64, b: &f64| ordered(*a).cmp(&ordered(*b));
                *values.select_nth_unstable_by(rank as usize, by_word).1
            }
            Cell::Counted(bins) => {
                let found = bins.iter().find(|(_, bin)| bin.ranks.contains(&rank));
                found.map_or(f64::NAN, |(&word, _)| unordered(word))
            }
        };
        let quantile = |&p: &f64| {
            let (low, high, weight) = position(p, count);
            interpolate(statistic(low), statistic(high), weight)
        };
        probabilities.iter().map(quantile).collect()
    }
}
