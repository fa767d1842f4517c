//! Arithmetic classes: what a multiply-add means.
//!
//! A path is the same, bit for bit, wherever it is computed, as long as the class is
//! the same. Both classes use IEEE 754 double precision and differ in one operation.

use std::fmt;
use std::str::FromStr;

/// The name of an arithmetic class, as runs request and outputs record it.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash, Default)]
pub enum ArithmeticClass {
    /// A multiply-add rounds once: the same bits on every processor that has a
    /// hardware fused multiply-add, whatever the width of its vectors.
    #[default]
    Fused,
    /// A multiply-add rounds twice: the same bits on every processor.
    Unfused,
}

impl fmt::Display for ArithmeticClass {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        f.write_str(match self {
            ArithmeticClass::Fused => "fused",
            ArithmeticClass::Unfused => "unfused",
        })
    }
}

/// A text that names no arithmetic class.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct UnknownArithmetic(pub String);

impl fmt::Display for UnknownArithmetic {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(
            f,
            "`{}` is not an arithmetic class: write `fused` or `unfused`",
            self.0
        )
    }
}

impl std::error::Error for UnknownArithmetic {}

impl FromStr for ArithmeticClass {
    type Err = UnknownArithmetic;

    fn from_str(text: &str) -> Result<Self, Self::Err> {
        match text {
            "fused" => Ok(ArithmeticClass::Fused),
            "unfused" => Ok(ArithmeticClass::Unfused),
            _ => Err(UnknownArithmetic(text.to_owned())),
        }
    }
}

/// An arithmetic class as a type, so that a step is compiled once for each.
pub trait Arith: Copy + Send + Sync + 'static {
    /// The class this type stands for.
    const CLASS: ArithmeticClass;

    /// `a * b + c`, rounded once (fused) or twice (unfused).
    fn mul_add(a: f64, b: f64, c: f64) -> f64;
}

/// The class with the fused multiply-add.
#[derive(Clone, Copy, Debug)]
pub struct Fused;

/// The class that rounds product and sum.
#[derive(Clone, Copy, Debug)]
pub struct Unfused;

impl Arith for Fused {
    const CLASS: ArithmeticClass = ArithmeticClass::Fused;

    #[inline(always)]
    fn mul_add(a: f64, b: f64, c: f64) -> f64 {
        a.mul_add(b, c)
    }
}

impl Arith for Unfused {
    const CLASS: ArithmeticClass = ArithmeticClass::Unfused;

    #[inline(always)]
    fn mul_add(a: f64, b: f64, c: f64) -> f64 {
        a * b + c
    }
}
