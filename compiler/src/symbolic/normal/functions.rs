//! What the normal form knows of each function.

use super::super::function::Function;
use super::super::node::{Expr, Node, Rational};
use super::exponent::Exponent;
use super::fraction::Fraction;
use super::poly::{Monomial, Poly};
use super::{Mode, Normalizer, Rule};

impl Normalizer<'_> {
    /// The normal form of a call.
    pub(super) fn function(
        &self,
        e: Expr,
        function: Function,
        arguments: &[Expr],
    ) -> Option<Fraction> {
        use Function::*;
        match function {
            Exp => self.exponential(&self.normal(arguments[0])),
            Log => self.log(arguments[0]),
            Cbrt => self.cube_root(arguments[0]),
            Abs => self.size(arguments[0]),
            Sign if self.pool.sign(arguments[0]).is_positive() => {
                Some(Fraction::constant(Rational::ONE))
            }
            Sign if self.pool.sign(arguments[0]) == super::super::Sign::Negative => {
                Some(Fraction::constant(Rational::from(-1)))
            }
            _ if self.mode == Mode::Proof => match self.rewritten(function, arguments) {
                Some(other) => Some((*self.normal(other)).clone()),
                None => self.proof_function(e, function, arguments),
            },
            _ => self.plain_call(e, function, arguments),
        }
    }

    /// An equal formula in fewer kinds of functions, for proofs.
    fn rewritten(&self, function: Function, arguments: &[Expr]) -> Option<Expr> {
        use Function::*;
        let p = self.pool;
        let x = match function {
            Cosh => self.without_size(arguments[0]),
            _ => arguments[0],
        };
        let one = p.one();
        let half = p.ratio(1, 2);
        let root = |sign: i64| p.sqrt(p.add(p.square(x), p.int(sign)));
        Some(match function {
            Sinh | Cosh | Tanh => p.hyperbolic(function, x)?,
            Asinh => p.log(p.add(x, root(1))),
            Acosh => p.log(p.add(x, root(-1))),
            Atanh => p.mul(half, p.sub(p.log(p.add(one, x)), p.log(p.sub(one, x)))),
            Tan => p.div(p.call(Sin, &[x]), p.call(Cos, &[x])),
            Acos => p.sub(p.mul(half, p.pi()), p.call(Asin, &[x])),
            Erf => {
                let scaled = p.mul(p.sqrt(p.int(2)), x);
                p.sub(p.mul(p.int(2), p.call(NormalCdf, &[scaled])), one)
            }
            NormalPdf => {
                let density = p.exp(p.mul(p.ratio(-1, 2), p.square(x)));
                p.div(density, p.sqrt(p.mul(p.int(2), p.pi())))
            }
            Expm1Ratio => p.div(p.sub(p.exp(x), one), x),
            Max | Min => {
                let y = arguments[1];
                let gap = p.call(Abs, &[p.sub(x, y)]);
                let gap = if function == Max { gap } else { p.neg(gap) };
                p.mul(half, p.sum([x, y, gap]))
            }
            _ => return None,
        })
    }

    fn proof_function(&self, e: Expr, function: Function, arguments: &[Expr]) -> Option<Fraction> {
        match function {
            Function::Sin => self.circular(function, arguments[0]),
            Function::Cos => self.circular(function, self.without_size(arguments[0])),
            Function::NormalQuantile => self.quantile(e, arguments[0]),
            _ => self.plain_call(e, function, arguments),
        }
    }

    /// What an even function may take for its argument: `cos(abs(x))` is `cos(x)`.
    fn without_size(&self, x: Expr) -> Expr {
        match &*self.pool.node(x) {
            Node::Call(Function::Abs, inner) => inner[0],
            _ => x,
        }
    }

    /// `cos x = (r + 1/r)/2` and `sin x = (r - 1/r)/(2i)` with `r = exp(i*x)`.
    fn circular(&self, function: Function, x: Expr) -> Option<Fraction> {
        let i = self.kernel(self.imaginary());
        let argument = self.multiply(&i, &self.normal(x))?;
        let forward = self.exponential(&argument)?;
        let backward = self.exponential(&argument.negated())?;
        let half = Rational::from_parts(1.into(), 2u8.into());
        if function == Function::Cos {
            return Some(self.add(&forward, &backward)?.scaled(&half));
        }
        // 1/i = -i
        let difference = self.add(&backward, &forward.negated())?;
        Some(self.multiply(&difference, &i)?.scaled(&half))
    }

    /// The quantile function is odd about 1/2, and undoes the distribution function.
    fn quantile(&self, e: Expr, level: Expr) -> Option<Fraction> {
        let normal = self.normal(level);
        let one = Fraction::constant(Rational::ONE);
        let opposite = self.add(&one, &normal.negated())?;
        let half = Rational::from_parts(1.into(), 2u8.into());
        let above = self.add(&normal, &Fraction::constant(-half))?;
        if above.is_zero() {
            return Some(Fraction::constant(Rational::ZERO));
        }
        let (level, opposite) = (self.argument(&normal), self.argument(&opposite));
        if let Node::Call(Function::NormalCdf, _) = &*self.pool.node(level) {
            return self.settled_call(e, Function::NormalQuantile, &[level]);
        }
        let is_tail = matches!(
            &*self.pool.node(opposite),
            Node::Call(Function::NormalCdf, _)
        );
        if is_tail || self.leads_negative(self.argument(&above)) {
            let mirrored = self.settled_call(e, Function::NormalQuantile, &[opposite])?;
            return Some(mirrored.negated());
        }
        self.settled_call(e, Function::NormalQuantile, &[level])
    }

    /// A call that stays one: of normalised arguments, with the sign taken out of odd and even
    /// functions.
    fn plain_call(&self, e: Expr, function: Function, arguments: &[Expr]) -> Option<Fraction> {
        use Function::*;
        let normal: Vec<Expr> = arguments
            .iter()
            .map(|&a| self.argument(&self.normal(a)))
            .collect();
        let argument = normal[0];
        if arguments.len() == 1 && self.leads_negative(argument) {
            let positive = self.pool.neg(argument);
            let mirrored =
                self.settled_call(e, function, &[self.argument(&self.normal(positive))])?;
            match function {
                Sin | Tan | Asin | Atan | Sinh | Tanh | Asinh | Atanh | Erf | Sign => {
                    return Some(mirrored.negated());
                }
                Cos | Cosh | NormalPdf => return Some(mirrored),
                NormalCdf => {
                    return self.add(&Fraction::constant(Rational::ONE), &mirrored.negated());
                }
                _ => {}
            }
        }
        self.settled_call(e, function, &normal)
    }

    /// The call as a kernel, unless the constructor finds something simpler.
    fn settled_call(&self, e: Expr, function: Function, arguments: &[Expr]) -> Option<Fraction> {
        let call = self.pool.call(function, arguments);
        match &*self.pool.node(call) {
            Node::Call(..) => {
                self.state_square(call, function, arguments[0]);
                Some(self.kernel(call))
            }
            _ if call == e => Some(self.kernel(call)),
            _ => Some((*self.normal(call)).clone()),
        }
    }

    /// `sin^2 = 1 - cos^2`, `sinh^2 = cosh^2 - 1`.
    fn state_square(&self, call: Expr, function: Function, argument: Expr) {
        let (other, sign) = match function {
            Function::Sin => (Function::Cos, 1),
            Function::Sinh => (Function::Cosh, -1),
            _ => return,
        };
        let other = self.pool.call(other, &[argument]);
        let mut square = Poly::term(
            Monomial::of(other, Exponent::whole(2)),
            Rational::from(-sign),
        );
        square.add_term(Monomial::one(), Rational::from(sign));
        self.register(call, Rule::for_positive_powers(2, square));
    }

    /// The real cube root, factor by factor.
    fn cube_root(&self, x: Expr) -> Option<Fraction> {
        if self.normal(x).is_zero() {
            return Some(Fraction::constant(Rational::ZERO));
        }
        if self.pool.sign(x).is_non_negative() {
            return self.power(x, &Rational::from_parts(1.into(), 3u8.into()));
        }
        let argument = self.formula(&self.normal(x));
        if self.is_complex(argument) {
            return Some(self.kernel(self.pool.call(Function::Cbrt, &[argument])));
        }
        let split = self.split(x)?;
        let size = self.pool.number(split.coefficient.clone());
        let size = if split.coefficient < Rational::ZERO {
            self.pool.neg(size)
        } else {
            size
        };
        let root = self.power(size, &Rational::from_parts(1.into(), 3u8.into()))?;
        let mut result = root.scaled(&split.coefficient.signum());
        for (base, exponent) in &split.factors {
            let poly = self.base_poly(base);
            let kernel = self.pool.call(Function::Cbrt, &[self.poly_formula(&poly)]);
            self.register(kernel, Rule::new(3, poly));
            result = self.multiply(&result, &self.kernel_power(kernel, *exponent)?)?;
        }
        Some(result)
    }

    /// The absolute value, factor by factor.
    fn size(&self, x: Expr) -> Option<Fraction> {
        let normal = self.normal(x);
        if normal.is_zero() {
            return Some(Fraction::constant(Rational::ZERO));
        }
        let sign = self.pool.sign(x);
        if sign.is_non_negative() {
            return Some((*normal).clone());
        }
        if sign.is_non_positive() {
            return Some(normal.negated());
        }
        let argument = self.formula(&normal);
        if self.is_complex(argument) {
            let kernel = self.pool.call(Function::Abs, &[argument]);
            let square = self.multiply(&normal, &normal)?;
            if square.denominator.is_empty() {
                self.register(kernel, Rule::new(2, square.numerator));
            }
            return Some(self.kernel(kernel));
        }
        let split = self.split(x)?;
        let mut result = Fraction::constant(split.coefficient.clone() * split.coefficient.signum());
        for (base, exponent) in &split.factors {
            let sign = self.base_sign(base);
            let factor = if exponent.as_whole().is_none_or(|n| n % 2 == 0) || sign.is_non_negative()
            {
                self.base_power(base, *exponent)?
            } else {
                self.kernel_power(self.size_kernel(base)?, *exponent)?
            };
            result = self.multiply(&result, &factor)?;
        }
        Some(result)
    }
}
