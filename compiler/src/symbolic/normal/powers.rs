//! Powers: whole, broken and symbolic.

use dashu_base::UnsignedAbs;
use dashu_int::{IBig, UBig};

use super::super::function::Function;
use super::super::node::{Expr, Node, Rational};
use super::exponent::Exponent;
use super::fraction::Fraction;
use super::poly::Poly;
use super::split::Base;
use super::{Mode, Normalizer};

/// Primes are looked for up to here; a larger number without small divisors counts as one.
const MAX_DIVISOR: u64 = 20_000;

impl Normalizer<'_> {
    /// `base^n` for a number n.
    pub(super) fn power(&self, base: Expr, n: &Rational) -> Option<Fraction> {
        if n.is_int() {
            let n: i64 = n.numerator().try_into().ok()?;
            return self.whole_power(&self.normal(base), n);
        }
        if self.normal(base).is_zero() {
            return (*n > Rational::ZERO).then(|| Fraction::constant(Rational::ZERO));
        }
        let exponent = Exponent::from_rational(n)?;
        let parts = self.by_sign(self.split(base)?)?;
        let mut result = self.number_power(parts.coefficient.clone(), n)?;
        for (factor, e) in &parts.positive {
            result = self.multiply(&result, &self.base_power(factor, e.times(exponent)?)?)?;
        }
        for (factor, e) in &parts.even {
            result = self.multiply(&result, &self.even_power(factor, *e, exponent)?)?;
        }
        match parts.mixed {
            None => Some(result),
            Some(mixed) => self.multiply(&result, &self.base_power(&Base::Sum(mixed), exponent)?),
        }
    }

    /// The power of a number's size.
    fn number_power(&self, value: Rational, n: &Rational) -> Option<Fraction> {
        let exponent = Exponent::from_rational(n)?;
        let mut result = Fraction::polynomial(Poly::one());
        for (prime, count) in prime_powers(&value) {
            let kernel = self.number_kernel(&Rational::from(prime));
            let e = Exponent::whole(count).times(exponent)?;
            result = self.multiply(&result, &self.kernel_power(kernel, e)?)?;
        }
        Some(result)
    }

    /// A factor that is positive or zero, to any power.
    pub(super) fn base_power(&self, base: &Base, exponent: Exponent) -> Option<Fraction> {
        match base {
            Base::Kernel(kernel) => self.kernel_power(*kernel, exponent),
            Base::Sum(poly) => {
                let (count, rest) = exponent.divided_by(Exponent::ONE)?;
                let whole = self.whole_power(&Fraction::polynomial(poly.clone()), count)?;
                if rest.is_zero() {
                    return Some(whole);
                }
                let kernel = self.root_kernel(poly)?;
                self.multiply(&whole, &self.kernel_power(kernel, rest)?)
            }
        }
    }

    /// `(base^e)^exponent` for even e and a base of unknown sign: the size of the base counts.
    fn even_power(&self, base: &Base, e: Exponent, exponent: Exponent) -> Option<Fraction> {
        let total = e.times(exponent)?;
        if self.mode == Mode::Proof {
            return self.kernel_power(self.size_kernel(base)?, total);
        }
        let half = total.times(Exponent::from_rational(&Rational::from_parts(
            1.into(),
            2u8.into(),
        ))?)?;
        let poly = self.base_poly(base);
        let square = self.poly_product(&poly, &poly)?;
        let kernel = self.pool.square(self.poly_formula(&poly));
        self.kernel_power(self.under_root(kernel, &square)?, half)
    }

    /// The absolute value of a factor as a kernel whose square is that of the factor.
    pub(super) fn size_kernel(&self, base: &Base) -> Option<Expr> {
        let poly = self.base_poly(base);
        let kernel = self.pool.call(Function::Abs, &[self.poly_formula(&poly)]);
        if !matches!(&*self.pool.node(kernel), Node::Call(Function::Abs, _)) {
            return None;
        }
        self.register(
            kernel,
            super::Rule::new(2, self.poly_product(&poly, &poly)?),
        );
        Some(kernel)
    }

    /// `base^exponent = exp(exponent*log(base))`.
    pub(super) fn symbolic_power(&self, base: Expr, exponent: Expr) -> Option<Fraction> {
        let exponent = self.normal(exponent);
        if let Some(n) = exponent.as_constant() {
            return self.power(base, &n);
        }
        let log = self.log(base)?;
        self.exponential(&self.multiply(&exponent, &log)?)
    }
}

/// A positive number as powers of primes, or of what is left after the search.
pub(super) fn prime_powers(value: &Rational) -> Vec<(IBig, i64)> {
    let mut result = Vec::new();
    let mut add = |number: UBig, sign: i64| {
        factorise(number, |prime, count| {
            result.push((IBig::from(prime), sign * count))
        });
    };
    add(value.numerator().unsigned_abs(), 1);
    add(value.denominator().clone(), -1);
    result
}

fn factorise(mut number: UBig, mut found: impl FnMut(UBig, i64)) {
    let mut divisor = 2u64;
    while divisor <= MAX_DIVISOR && number > UBig::ONE {
        let mut count = 0;
        while (&number % divisor) == 0 {
            number /= divisor;
            count += 1;
        }
        if count > 0 {
            found(UBig::from(divisor), count);
        }
        divisor += if divisor == 2 { 1 } else { 2 };
    }
    if number > UBig::ONE {
        found(number, 1);
    }
}
