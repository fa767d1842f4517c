//! Levy areas of a step, given the increments of its drivers.
//!
//! For independent drivers with increments `x_p` over a unit step the area between two of them has the
//! Fourier series (Levy 1951; Kloeden and Platen 1992, section 5.8)
//!
//! `A_pq = 1/(2 pi) sum_k (X_pk (Y_qk + sqrt(2) x_q) - X_qk (Y_pk + sqrt(2) x_p))/k`,
//!
//! `X` and `Y` independent standard normals. Of the terms that are left out, the part with `x` is normal given `x`
//! and drawn as it is; the rest is replaced by independent normals of its variance (Mrongowius and Roessler
//! 2022). Given the increments, the variance is that of the area whatever the number of terms.

use std::f64::consts::{PI, SQRT_2};

use super::{Address, Draws, fill_normals};
use crate::arith::Arith;
use crate::dispatch::Task;
use crate::lane::{LANES, Lane};

/// The terms the address of a draw has room for.
const MOST_TERMS: u32 = u16::MAX as u32;

/// How many terms of the series a step of length `length` takes among `drivers` drivers.
///
/// The mean square error of an area is at most `m h^2/(12 pi^2 n^2)` for `n` terms and `m` drivers (Mrongowius and
/// Roessler 2022, from memory). The number is the smallest that makes it at most `h^3`, as strong order 1 asks
/// for; it grows like `h^-1/2`. Time is in the units of the grid.
///
/// ```
/// use driftwright_runtime::random::area_terms;
/// assert_eq!((area_terms(2, 1.0), area_terms(2, 0.01), area_terms(2, 1e-4)), (1, 2, 13));
/// ```
#[must_use]
pub fn area_terms(drivers: usize, length: f64) -> u32 {
    let terms = (drivers as f64 / (12.0 * PI * PI * length)).sqrt().ceil();
    // Infinite and undefined numbers of terms end at a bound of the range too.
    (terms as u32).clamp(1, MOST_TERMS)
}

impl Draws {
    /// The Levy areas `(int W_p dW_q - W_q dW_p)/2` of independent drivers over a step, divided by its length,
    /// given their increments divided by the root of its length.
    ///
    /// `drivers` names for each driver the lane of `noise` with its standardised increment and the number of
    /// the source of its terms ([`crate::source_id`] of a name), `pairs` for each area `(p, q, source)`, `p` and `q`
    /// places in `drivers` and the source that of its remainder. The areas come first in `out`; as many lanes
    /// as twice the drivers follow, for the working.
    ///
    /// # Panics
    /// If a place does not exist, `out` is too short, or there are pairs among fewer than two drivers.
    ///
    /// ```
    /// use driftwright_runtime::random::Draws;
    /// use driftwright_runtime::{ArithmeticClass, Generator, Lane, source_id};
    ///
    /// let draws = Draws::new(7, Generator::default(), ArithmeticClass::Unfused, 0, 0);
    /// let (noise, mut out) = ([Lane::splat(0.3), Lane::splat(-1.1)], [Lane::ZERO; 5]);
    /// let drivers = [(0, source_id("area:W")), (1, source_id("area:B"))];
    /// draws.areas(0.01, &drivers, &[(0, 1, source_id("area:W:B"))], &noise, &mut out);
    /// assert!(out[0].iter().all(|area| area.is_finite()));
    /// ```
    pub fn areas(
        &self,
        length: f64,
        drivers: &[(usize, u64)],
        pairs: &[(usize, usize, u64)],
        noise: &[Lane],
        out: &mut [Lane],
    ) {
        let (areas, working) = out.split_at_mut(pairs.len());
        let (first, second) = working.split_at_mut(drivers.len());
        areas.fill(Lane::ZERO);
        let mut left = PI * PI / 6.0;
        for term in 1..=area_terms(drivers.len(), length) {
            let weight = 1.0 / f64::from(term);
            left -= weight * weight;
            for (p, &(increment, source)) in drivers.iter().enumerate() {
                self.normals(source, term, [&mut first[p], &mut second[p]]);
                self.target.run(Tilt(&noise[increment], &mut second[p]));
            }
            for (&(p, q, _), area) in pairs.iter().zip(areas.iter_mut()) {
                let factors = [&first[p], &second[q], &first[q], &second[p]];
                self.target.run(Swept(weight, factors, area));
            }
        }
        for (p, &(_, source)) in drivers.iter().enumerate() {
            self.normals(source, 0, [&mut first[p], &mut second[0]]);
        }
        let root = (2.0 * left.max(0.0)).sqrt();
        for (&(p, q, source), area) in pairs.iter().zip(areas) {
            let (rest, spare) = second.split_at_mut(1);
            self.normals(source, 0, [&mut rest[0], &mut spare[0]]);
            let [x_p, x_q] = [p, q].map(|place| &noise[drivers[place].0]);
            self.target
                .run(Swept(root, [&first[p], x_q, &first[q], x_p], area));
            self.target.run(Finish(root, &rest[0], area));
        }
    }

    /// The two normals a path has at one place of a source in this step.
    fn normals(&self, source: u64, place: u32, pair: [&mut Lane; 2]) {
        let address = Address {
            seed: self.seed,
            source,
            block: self.step,
            attempt: u64::from(place),
        };
        fill_normals(self.target, self.generator, &address, self.first_path, pair);
    }
}

/// `y + sqrt(2) x` in the place of `y`.
struct Tilt<'a>(&'a Lane, &'a mut Lane);

impl Task for Tilt<'_> {
    type Output = ();

    #[inline(always)]
    fn run<A: Arith>(self) {
        let Tilt(x, y) = self;
        for i in 0..LANES {
            y[i] = A::mul_add(SQRT_2, x[i], y[i]);
        }
    }
}

/// Adds `weight (a b - c d)`.
struct Swept<'a>(f64, [&'a Lane; 4], &'a mut Lane);

impl Task for Swept<'_> {
    type Output = ();

    #[inline(always)]
    fn run<A: Arith>(self) {
        let Swept(weight, [a, b, c, d], area) = self;
        for i in 0..LANES {
            let swept = A::mul_add(a[i], b[i], -(c[i] * d[i]));
            area[i] = A::mul_add(weight, swept, area[i]);
        }
    }
}

/// Adds the remainder and divides by `2 pi`.
struct Finish<'a>(f64, &'a Lane, &'a mut Lane);

impl Task for Finish<'_> {
    type Output = ();

    #[inline(always)]
    fn run<A: Arith>(self) {
        let Finish(root, rest, area) = self;
        for i in 0..LANES {
            area[i] = A::mul_add(root, rest[i], area[i]) * (0.5 / PI);
        }
    }
}
