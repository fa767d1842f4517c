//! Levy areas of the drivers.
//!
//! The increments of correlated drivers are combinations `W_j = sum_p c_jp Z_p` of independent normal sources, so that
//! their areas are combinations of those of the sources: `A_jk = sum_{p < q} (c_jp c_kq - c_jq c_kp) a_pq`. The
//! sources fall into sets that no area connects, each drawn by one operation.

use std::collections::{BTreeMap, BTreeSet};

use super::Lowering;
use super::noise::{Mixture, Noise, Normal};
use crate::program::op::{Op, ValueId};
use crate::scheme::Method;

/// A driver's increment: sources and their coefficients.
type Increment = BTreeMap<usize, ValueId>;

impl Lowering<'_> {
    /// The area of each pair of drivers that some state needs, on each path.
    pub(super) fn levy_areas(&mut self, noise: &Noise) -> BTreeMap<(usize, usize), ValueId> {
        let wanted = self.wanted_areas();
        let drivers: BTreeSet<usize> = wanted.iter().flat_map(|&(j, k)| [j, k]).collect();
        let increments: BTreeMap<usize, Increment> = drivers
            .into_iter()
            .map(|driver| {
                let mixture = noise.mixture(self.component(driver)).clone();
                (driver, self.increment_of_sources(&mixture))
            })
            .collect();
        let needed = wanted
            .iter()
            .flat_map(|(j, k)| pairs_between(&increments[j], &increments[k]));
        let drawn = self.drawn_areas(&needed.collect());
        let area = |(j, k): (usize, usize)| {
            let value = self.rotated(&increments[&j], &increments[&k], &drawn);
            let name = |driver: usize| &self.model.drivers[driver].name;
            let hint = format!("area_{}_{}", name(j), name(k));
            self.builder.hint(value, hint);
            ((j, k), value)
        };
        wanted.into_iter().map(area).collect()
    }

    fn wanted_areas(&self) -> BTreeSet<(usize, usize)> {
        let steps = self
            .plan
            .groups
            .iter()
            .flat_map(|group| match &group.method {
                Method::Step(steps) => &steps[..],
                _ => &[],
            });
        let areas = steps.flat_map(|step| step.areas.iter().map(|&(j, k, _)| (j, k)));
        areas.collect()
    }

    /// An increment in its sources. Mixed draws are a row of a triangular factor.
    fn increment_of_sources(&mut self, mixture: &Mixture) -> Increment {
        let mut found = Increment::new();
        for &(normal, coefficient) in mixture {
            let rows = match normal {
                Normal::Source(source) => {
                    found.insert(source, coefficient);
                    continue;
                }
                Normal::Mixed(_, value) => self.builder.op(value).clone(),
            };
            let Op::Extract(rows, row) = rows else {
                unreachable!("a mixed draw is a row of an operation")
            };
            let Op::Correlate { factor, sources } = self.builder.op(rows).clone() else {
                unreachable!("a mixed draw is a row of correlated draws")
            };
            for (column, &source) in sources.iter().enumerate().take(row + 1) {
                let entry = self.builder.extract(factor, row * sources.len() + column);
                let entry = self.builder.mul(entry, coefficient);
                found.insert(source, entry);
            }
        }
        found
    }

    /// The areas of pairs of sources, by connected sets.
    fn drawn_areas(
        &mut self,
        needed: &BTreeSet<(usize, usize)>,
    ) -> BTreeMap<(usize, usize), ValueId> {
        let plan = self.plan;
        let name = |source: usize| &plan.noise.components[source].source;
        let mut drawn = BTreeMap::new();
        for set in connected(needed) {
            let mut drivers = Vec::new();
            for &p in &set {
                drivers.push((p, self.named_draw(format!("area:{}", name(p)))));
            }
            let place = |source: usize| set.binary_search(&source).ok();
            let mut pairs = Vec::new();
            let mut inside = Vec::new();
            for &(p, q) in needed {
                if let (Some(first), Some(second)) = (place(p), place(q)) {
                    let rest = self.named_draw(format!("area:{}:{}", name(p), name(q)));
                    pairs.push((first, second, rest));
                    inside.push((p, q));
                }
            }
            let areas = self.builder.areas(&drivers, &pairs);
            self.builder.hint(areas, "areas");
            for (index, (p, q)) in inside.into_iter().enumerate() {
                let area = self.builder.extract(areas, index);
                let hint = format!("unit_area_{}_{}", name(p), name(q));
                self.builder.hint(area, hint);
                drawn.insert((p, q), area);
            }
        }
        drawn
    }

    fn named_draw(&mut self, name: String) -> usize {
        self.draws.push(name);
        self.draws.len() - 1
    }

    /// The area of two increments out of those of their sources.
    fn rotated(
        &mut self,
        first: &Increment,
        second: &Increment,
        drawn: &BTreeMap<(usize, usize), ValueId>,
    ) -> ValueId {
        let mut sum = None;
        for (p, q) in pairs_between(first, second) {
            let mut product = |one: Option<&ValueId>, other: Option<&ValueId>| {
                Some(self.builder.mul(*one?, *other?))
            };
            let forth = product(first.get(&p), second.get(&q));
            let back = product(first.get(&q), second.get(&p));
            let weight = match (forth, back) {
                (Some(forth), Some(back)) => self.builder.sub(forth, back),
                (Some(forth), None) => forth,
                (None, Some(back)) => self.builder.neg(back),
                (None, None) => continue,
            };
            let area = drawn[&(p, q)];
            sum = Some(match sum {
                Some(sum) => self.builder.mul_add(weight, area, sum),
                None => self.builder.mul(weight, area),
            });
        }
        sum.unwrap_or_else(|| self.builder.number(0.0))
    }
}

/// The pairs of different sources, one of each increment, in ascending order.
fn pairs_between(first: &Increment, second: &Increment) -> BTreeSet<(usize, usize)> {
    let all = first
        .keys()
        .flat_map(|&p| second.keys().map(move |&q| (p.min(q), p.max(q))));
    all.filter(|(p, q)| p != q).collect()
}

/// The sets of numbers that pairs connect, each ascending.
fn connected(pairs: &BTreeSet<(usize, usize)>) -> Vec<Vec<usize>> {
    let mut sets: Vec<BTreeSet<usize>> = Vec::new();
    for &(p, q) in pairs {
        let touches = |set: &BTreeSet<usize>| set.contains(&p) || set.contains(&q);
        let (touched, mut apart): (Vec<_>, Vec<_>) = sets.into_iter().partition(touches);
        apart.push(touched.into_iter().flatten().chain([p, q]).collect());
        sets = apart;
    }
    sets.into_iter().map(|s| s.into_iter().collect()).collect()
}
