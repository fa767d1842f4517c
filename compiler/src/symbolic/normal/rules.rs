//! Kernels that satisfy an equation, and the reduction of polynomials by it.

use std::rc::Rc;

use super::super::node::{Expr, Node, Rational, SymbolKind};
use super::exponent::Exponent;
use super::fraction::Fraction;
use super::poly::{Monomial, Poly};
use super::{Mode, Normalizer};

/// Terms one reduction may touch.
const MAX_STEPS: usize = 50_000;

/// The name of the imaginary unit; no formula can spell it.
const IMAGINARY: &str = "imaginary unit";

/// `kernel^modulus = replacement`.
#[derive(Debug)]
pub(crate) struct Rule {
    modulus: Exponent,
    replacement: Poly,
    /// Whether only positive powers are replaced: a negative one would put a sum into the denominator
    /// without need.
    positive_only: bool,
}

impl Rule {
    pub(super) fn new(modulus: i64, replacement: Poly) -> Rule {
        Rule {
            modulus: Exponent::whole(modulus),
            replacement,
            positive_only: false,
        }
    }

    pub(super) fn for_positive_powers(modulus: i64, replacement: Poly) -> Rule {
        Rule {
            positive_only: true,
            ..Rule::new(modulus, replacement)
        }
    }

    fn applies(&self, exponent: Exponent) -> bool {
        exponent >= self.modulus || (exponent.is_negative() && !self.positive_only)
    }
}

impl Normalizer<'_> {
    /// States the equation of a kernel.
    pub(super) fn register(&self, kernel: Expr, rule: Rule) {
        let mut inner = self.pool.inner.borrow_mut();
        inner
            .rules
            .entry((kernel, self.mode))
            .or_insert_with(|| Rc::new(rule));
    }

    fn rule(&self, kernel: Expr) -> Option<Rc<Rule>> {
        self.pool
            .inner
            .borrow()
            .rules
            .get(&(kernel, self.mode))
            .cloned()
    }

    /// The imaginary unit.
    pub(super) fn imaginary(&self) -> Expr {
        let i = self
            .pool
            .var(self.pool.symbol(IMAGINARY, SymbolKind::Auxiliary));
        self.register(i, Rule::new(2, Poly::constant(Rational::from(-1))));
        i
    }

    /// Whether the imaginary unit occurs: then nothing is known of signs.
    pub(super) fn is_complex(&self, e: Expr) -> bool {
        if self.mode == Mode::Light {
            return false;
        }
        self.pool
            .find_symbol(IMAGINARY)
            .is_some_and(|i| self.pool.depends_on(e, i))
    }

    /// `exp(i*pi)^exponent`. Multiples of a twelfth are made of `exp(i*pi/3) = (1 + i*sqrt(3))/2` and
    /// `exp(-i*pi/4) = (1 - i)/sqrt(2)`, those of a sixtieth also of
    /// `exp(i*pi/5) = (1 + sqrt(5) + i*sqrt(10 - 2*sqrt(5)))/4`; in others what is beyond a multiple of a
    /// twelfth is a power of a kernel.
    pub(super) fn half_turns(&self, exponent: Exponent) -> Option<Fraction> {
        let p = self.pool;
        let i = self.imaginary();
        let third = p.mul(p.ratio(1, 2), p.add(p.one(), p.mul(i, p.sqrt(p.int(3)))));
        let fourth = p.div(p.sub(p.one(), i), p.sqrt(p.int(2)));
        let twelfth = p.mul(third, fourth);
        let turn = |count: i64| p.pow(twelfth, p.int(count.rem_euclid(24)));
        let (count, rest) = exponent.divided_by(Exponent::whole(12).inverse()?)?;
        if rest.is_zero() {
            return Some((*self.normal(turn(count))).clone());
        }
        if let Some(sixtieths) = exponent.times(Exponent::whole(60))?.as_whole() {
            // sixtieths/60 = count/12 + fifths/5
            let fifths = (3 * (sixtieths % 5)).rem_euclid(5);
            let root = p.sqrt(p.int(5));
            let sine = p.sqrt(p.sub(p.int(10), p.mul(p.int(2), root)));
            let fifth = p.sum([p.one(), root, p.mul(i, sine)]);
            let fifth = p.pow(p.mul(p.ratio(1, 4), fifth), p.int(fifths));
            let product = p.mul(turn((sixtieths - 12 * fifths) / 5), fifth);
            return Some((*self.normal(product)).clone());
        }
        let kernel = p.exp(p.mul(i, p.pi()));
        let replacement = self.normal(twelfth);
        let modulus = Exponent::whole(12).inverse()?;
        self.register(
            kernel,
            Rule {
                modulus,
                ..Rule::new(1, replacement.numerator.clone())
            },
        );
        self.multiply(
            &self.normal(turn(count)),
            &Fraction::monomial(Monomial::of(kernel, rest)),
        )
    }

    /// The number as a kernel under a root.
    pub(super) fn number_kernel(&self, value: &Rational) -> Expr {
        let kernel = self.pool.number(value.clone());
        self.register(kernel, Rule::new(1, Poly::constant(value.clone())));
        kernel
    }

    /// A sum as a kernel under a root; none if it prints as something that is no sum.
    pub(super) fn root_kernel(&self, poly: &Poly) -> Option<Expr> {
        let kernel = self.poly_formula(poly);
        self.under_root(kernel, poly)
    }

    /// `kernel`, with `kernel^1` replaced by the polynomial; none for what is a kernel anyway.
    pub(super) fn under_root(&self, kernel: Expr, poly: &Poly) -> Option<Expr> {
        if !matches!(
            &*self.pool.node(kernel),
            Node::Sum(_) | Node::Product(_) | Node::Power(..)
        ) {
            return None;
        }
        if *poly != Poly::term(Monomial::of(kernel, Exponent::ONE), Rational::ONE) {
            self.register(kernel, Rule::new(1, poly.clone()));
        }
        Some(kernel)
    }

    /// `kernel^exponent`, reduced.
    pub(super) fn kernel_power(&self, kernel: Expr, exponent: Exponent) -> Option<Fraction> {
        let Some(rule) = self.rule(kernel).filter(|rule| rule.applies(exponent)) else {
            return Some(Fraction::monomial(Monomial::of(kernel, exponent)));
        };
        let (count, rest) = exponent.divided_by(rule.modulus)?;
        let replaced = self.whole_power(&Fraction::polynomial(rule.replacement.clone()), count)?;
        self.multiply(&replaced, &Fraction::monomial(Monomial::of(kernel, rest)))
    }

    /// A monomial to a power, reduced.
    pub(super) fn monomial_power(
        &self,
        monomial: &Monomial,
        exponent: Exponent,
    ) -> Option<Fraction> {
        let mut result = Fraction::polynomial(Poly::one());
        let mut plain = Monomial::one();
        for &(kernel, e) in &monomial.0 {
            let e = e.times(exponent)?;
            if self.rule(kernel).is_some_and(|rule| rule.applies(e)) {
                result = self.multiply(&result, &self.kernel_power(kernel, e)?)?;
            } else {
                plain = plain.times(&Monomial::of(kernel, e))?;
            }
        }
        self.multiply(&result, &Fraction::monomial(plain))
    }

    /// The polynomial with every power replaced that a rule replaces. Powers of kernels with rules are
    /// not negative here.
    pub(super) fn reduce(&self, poly: Poly) -> Option<Poly> {
        let has_rule = |monomial: &Monomial| {
            monomial.0.iter().find_map(|&(kernel, exponent)| {
                let rule = self.rule(kernel)?;
                (exponent >= rule.modulus).then_some((kernel, exponent, rule))
            })
        };
        if poly.0.keys().all(|monomial| has_rule(monomial).is_none()) {
            return Some(poly);
        }
        let mut result = Poly::zero();
        let mut pending: Vec<(Monomial, Rational)> = poly.0.into_iter().collect();
        let mut steps = 0;
        while let Some((monomial, coefficient)) = pending.pop() {
            let Some((kernel, exponent, rule)) = has_rule(&monomial) else {
                result.add_term(monomial, coefficient);
                continue;
            };
            steps += rule.replacement.0.len();
            if steps > MAX_STEPS {
                return None;
            }
            let rest = Monomial::of(kernel, exponent.minus(rule.modulus)?);
            let rest = monomial.without(kernel).times(&rest)?;
            for (m, c) in &rule.replacement.0 {
                pending.push((rest.times(m)?, c * &coefficient));
            }
        }
        Some(result)
    }
}
