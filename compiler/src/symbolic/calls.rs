//! Calls of functions, with the values that need no algebra folded.

use dashu_base::Abs;

use super::function::Function;
use super::node::{Expr, Node, Rational};
use super::pool::Pool;
use super::power::exact_cube_root;

impl Pool {
    /// `exp(a)`.
    pub fn exp(&self, a: Expr) -> Expr {
        self.call(Function::Exp, &[a])
    }

    /// `log(a)`, the natural logarithm.
    pub fn log(&self, a: Expr) -> Expr {
        self.call(Function::Log, &[a])
    }

    /// A function of its arguments.
    ///
    /// # Panics
    /// If the number of arguments is not the function's arity; the parser has checked it.
    pub fn call(&self, function: Function, arguments: &[Expr]) -> Expr {
        assert_eq!(
            arguments.len(),
            function.arity(),
            "arguments of {}",
            function.name()
        );
        if function == Function::Sqrt {
            return self.sqrt(arguments[0]);
        }
        let folded = match arguments {
            [a] => self.fold_unary(function, *a),
            [a, b] => self.fold_binary(function, *a, *b),
            _ => None,
        };
        folded.unwrap_or_else(|| self.intern(Node::Call(function, arguments.into())))
    }

    fn fold_unary(&self, function: Function, a: Expr) -> Option<Expr> {
        if let Some(value) = self.as_number(a) {
            return self.fold_number(function, &value);
        }
        match (function, &*self.node(a)) {
            (Function::Exp, Node::Call(Function::Log, inner))
            | (Function::Log, Node::Call(Function::Exp, inner))
            | (Function::NormalCdf, Node::Call(Function::NormalQuantile, inner))
            | (Function::NormalQuantile, Node::Call(Function::NormalCdf, inner)) => Some(inner[0]),
            (Function::Abs, Node::Call(Function::Abs | Function::Exp, _)) => Some(a),
            _ => None,
        }
    }

    /// The value at a number, where it is exact.
    fn fold_number(&self, function: Function, value: &Rational) -> Option<Expr> {
        use Function::*;
        match function {
            Abs => return Some(self.number(value.clone().abs())),
            Sign => return Some(self.number(value.signum())),
            Cbrt => return exact_cube_root(value).map(|root| self.number(root)),
            Log if value.is_one() => return Some(self.zero()),
            _ => {}
        }
        if !value.is_zero() {
            return None;
        }
        match function {
            Exp | Cos | Cosh | Expm1Ratio => Some(self.one()),
            Sin | Tan | Asin | Atan | Sinh | Tanh | Asinh | Atanh | Erf => Some(self.zero()),
            NormalCdf => Some(self.ratio(1, 2)),
            _ => None,
        }
    }

    fn fold_binary(&self, function: Function, a: Expr, b: Expr) -> Option<Expr> {
        if a == b {
            return Some(a);
        }
        let (x, y) = (self.as_number(a)?, self.as_number(b)?);
        match function {
            Function::Min => Some(if x < y { a } else { b }),
            Function::Max => Some(if x > y { a } else { b }),
            _ => None,
        }
    }
}
