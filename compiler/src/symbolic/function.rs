//! The functions a formula may call: names, arity, smoothness.

/// A function of the formula language, and one the compiler uses for itself.
#[derive(Clone, Copy, PartialEq, Eq, Hash, PartialOrd, Ord, Debug)]
pub enum Function {
    /// The exponential.
    Exp,
    /// The natural logarithm.
    Log,
    /// The square root; formulas hold it as a power with exponent 1/2.
    Sqrt,
    /// The absolute value; has a kink.
    Abs,
    /// The sine.
    Sin,
    /// The cosine.
    Cos,
    /// The tangent.
    Tan,
    /// The inverse sine.
    Asin,
    /// The inverse cosine.
    Acos,
    /// The inverse tangent.
    Atan,
    /// The hyperbolic sine.
    Sinh,
    /// The hyperbolic cosine.
    Cosh,
    /// The hyperbolic tangent.
    Tanh,
    /// The inverse hyperbolic sine.
    Asinh,
    /// The inverse hyperbolic cosine.
    Acosh,
    /// The inverse hyperbolic tangent.
    Atanh,
    /// The real cube root, of negative numbers too.
    Cbrt,
    /// The error function.
    Erf,
    /// The distribution function of the standard normal law.
    NormalCdf,
    /// The density of the standard normal law.
    NormalPdf,
    /// The quantile function of the standard normal law, on (0, 1).
    NormalQuantile,
    /// The smaller of two; has a kink.
    Min,
    /// The larger of two; has a kink.
    Max,
    /// -1, 0 or 1; jumps at 0.
    Sign,
    /// `(exp(x) - 1)/x`, 1 at 0: keeps step coefficients stable where a rate tends to zero. It is never
    /// parsed and prints as the quotient.
    Expm1Ratio,
}

impl Function {
    /// Every function that can be written in a formula.
    pub const ALL: [Function; 24] = [
        Function::Exp,
        Function::Log,
        Function::Sqrt,
        Function::Abs,
        Function::Sin,
        Function::Cos,
        Function::Tan,
        Function::Asin,
        Function::Acos,
        Function::Atan,
        Function::Sinh,
        Function::Cosh,
        Function::Tanh,
        Function::Asinh,
        Function::Acosh,
        Function::Atanh,
        Function::Cbrt,
        Function::Erf,
        Function::NormalCdf,
        Function::NormalPdf,
        Function::NormalQuantile,
        Function::Min,
        Function::Max,
        Function::Sign,
    ];

    /// The name in the formula language.
    pub fn name(self) -> &'static str {
        match self {
            Function::Exp => "exp",
            Function::Log => "log",
            Function::Sqrt => "sqrt",
            Function::Abs => "abs",
            Function::Sin => "sin",
            Function::Cos => "cos",
            Function::Tan => "tan",
            Function::Asin => "asin",
            Function::Acos => "acos",
            Function::Atan => "atan",
            Function::Sinh => "sinh",
            Function::Cosh => "cosh",
            Function::Tanh => "tanh",
            Function::Asinh => "asinh",
            Function::Acosh => "acosh",
            Function::Atanh => "atanh",
            Function::Cbrt => "cbrt",
            Function::Erf => "erf",
            Function::NormalCdf => "normal_cdf",
            Function::NormalPdf => "normal_pdf",
            Function::NormalQuantile => "normal_quantile",
            Function::Min => "min",
            Function::Max => "max",
            Function::Sign => "sign",
            Function::Expm1Ratio => "expm1_ratio",
        }
    }

    /// The function with that name in the formula language, if there is one.
    ///
    /// ```
    /// use driftwright::symbolic::Function;
    /// assert_eq!(Function::from_name("normal_cdf"), Some(Function::NormalCdf));
    /// assert_eq!(Function::from_name("expm1_ratio"), None);
    /// ```
    pub fn from_name(name: &str) -> Option<Function> {
        Function::ALL.into_iter().find(|f| f.name() == name)
    }

    /// The number of arguments.
    pub fn arity(self) -> usize {
        match self {
            Function::Min | Function::Max => 2,
            _ => 1,
        }
    }

    /// Whether the function is twice differentiable inside its domain, which Ito's rule asks for.
    pub fn is_smooth(self) -> bool {
        !matches!(
            self,
            Function::Abs | Function::Min | Function::Max | Function::Sign
        )
    }
}
