//! Formulas: hash-consed expressions with exact rational numbers, and the algebra on them.
//!
//! A [`Pool`] holds every formula of one model. Two formulas with the same structure are the same
//! [`Expr`], so work on a shared sub-formula is done once. The constructors of [`Pool`] fold exact
//! numbers and collect equal terms and factors; they never expand products. What costs more has a
//! name of its own: [`Pool::simplify`], [`Pool::expand`], [`Pool::is_zero`].
//!
//! Nothing here is approximate: a decision that rests on algebra is a proof, one that rests on a
//! high-precision evaluation is a refutation with a witness, and everything else is
//! [`Truth::CannotTell`].

mod ball;
mod big;
mod big_normal;
mod build;
mod calls;
mod derivative;
mod enclose;
mod enclosure;
mod evaluate;
mod expand;
mod facts;
mod function;
mod hyperbolic;
mod inequality;
mod invert;
mod limit;
mod node;
mod normal;
mod order;
mod pool;
mod power;
mod print;
mod print_number;
mod print_parts;
mod print_shared;
mod probe;
mod query;
mod sample;
mod sign;
mod simplex;
mod simplify;
mod substitute;
#[cfg(test)]
mod tests;
pub mod trace;
mod undo;
mod zero;

pub use big::Big;
pub use facts::{Bound, Interval, Sign};
pub use function::Function;
pub use inequality::Inequality;
pub use limit::Limit;
pub use node::{Expr, Node, Rational, Symbol, SymbolKind};
pub use pool::Pool;
pub use print_shared::SharedTexts;
pub use zero::{Truth, Witness};
