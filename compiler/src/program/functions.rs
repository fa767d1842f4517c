//! The scalar operations and what they mean: one table ties each to the runtime's function, so that
//! the interpreter, constant folding and the generated code cannot differ.

use driftwright_runtime::{Arith, Lane, math};

use crate::symbolic::Function;

macro_rules! unary_operations {
    ($($variant:ident $name:ident $doc:literal;)*) => {
        /// A function of one value.
        #[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
        pub enum UnaryOp {
            /// The negative.
            Neg,
            $(#[doc = $doc] $variant,)*
        }

        impl UnaryOp {
            /// The name of the runtime's function in `driftwright_runtime::math`; none for the negative.
            pub fn runtime_name(self) -> Option<&'static str> {
                match self {
                    Self::Neg => None,
                    $(Self::$variant => Some(stringify!($name)),)*
                }
            }

            /// The value at `x`.
            #[inline(always)]
            pub fn apply<A: Arith>(self, x: f64) -> f64 {
                match self {
                    Self::Neg => -x,
                    $(Self::$variant => math::$name::<A>(x),)*
                }
            }

            /// The value on every lane.
            #[inline(always)]
            pub fn apply_lanes<A: Arith>(self, x: &Lane, out: &mut Lane) {
                match self {
                    Self::Neg => map(x, out, |x| -x),
                    $(Self::$variant => map(x, out, |x| math::$name::<A>(x)),)*
                }
            }

            /// The operation that computes a function of the formula language of one argument.
            pub fn of(function: Function) -> Option<Self> {
                match function {
                    $(Function::$variant => Some(Self::$variant),)*
                    Function::Min | Function::Max => None,
                }
            }
        }
    };
}

unary_operations! {
    Exp exp "The exponential.";
    Log ln "The natural logarithm.";
    Sqrt sqrt "The square root.";
    Abs abs "The absolute value.";
    Sin sin "The sine.";
    Cos cos "The cosine.";
    Tan tan "The tangent.";
    Asin asin "The inverse sine.";
    Acos acos "The inverse cosine.";
    Atan atan "The inverse tangent.";
    Sinh sinh "The hyperbolic sine.";
    Cosh cosh "The hyperbolic cosine.";
    Tanh tanh "The hyperbolic tangent.";
    Asinh asinh "The inverse hyperbolic sine.";
    Acosh acosh "The inverse hyperbolic cosine.";
    Atanh atanh "The inverse hyperbolic tangent.";
    Cbrt cbrt "The real cube root.";
    Erf erf "The error function.";
    NormalCdf normal_cdf "The standard normal distribution function.";
    NormalPdf normal_pdf "The standard normal density.";
    NormalQuantile normal_quantile "The standard normal quantile.";
    Sign sign "-1, 0 or 1.";
    Expm1Ratio expm1_ratio "`(exp(x) - 1)/x`, 1 at 0.";
}

#[inline(always)]
fn map(x: &Lane, out: &mut Lane, f: impl Fn(f64) -> f64) {
    for (out, &x) in out.0.iter_mut().zip(&x.0) {
        *out = f(x);
    }
}

/// A function of two values.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub enum BinaryOp {
    /// The sum.
    Add,
    /// The difference.
    Sub,
    /// The product.
    Mul,
    /// The quotient.
    Div,
    /// A power with an exponent that is no small integer or half of one.
    Pow,
    /// `a` where `a < b`, else `b`.
    Min,
    /// `a` where `a > b`, else `b`.
    Max,
}

impl BinaryOp {
    /// Whether the operands may be exchanged without changing a bit of the result.
    pub fn commutes(self) -> bool {
        matches!(self, Self::Add | Self::Mul)
    }

    /// The name in listings; for the last three that of the runtime's function.
    pub fn name(self) -> &'static str {
        match self {
            Self::Add => "add",
            Self::Sub => "sub",
            Self::Mul => "mul",
            Self::Div => "div",
            Self::Pow => "pow",
            Self::Min => "min",
            Self::Max => "max",
        }
    }

    /// The value at `(a, b)`.
    #[inline(always)]
    pub fn apply<A: Arith>(self, a: f64, b: f64) -> f64 {
        match self {
            Self::Add => a + b,
            Self::Sub => a - b,
            Self::Mul => a * b,
            Self::Div => a / b,
            Self::Pow => math::pow::<A>(a, b),
            Self::Min => math::min::<A>(a, b),
            Self::Max => math::max::<A>(a, b),
        }
    }
}
