//! Builds values: equal operations become one value, constants fold, each value gets the slowest rate
//! its operands allow.

use std::collections::HashMap;

use driftwright_runtime::Unfused;

use super::Value;
use super::functions::{BinaryOp, UnaryOp};
use super::op::{Argument, Comparison, DrawLaw, Number, Op, ValueId};
use super::rate::Rate;

/// What lanes are being built for: the same state slot is another value in a step and at an
/// observation.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord, Hash)]
pub(super) enum Phase {
    /// A step.
    Step,
    /// An observation.
    Observation,
}

/// How many operations a program may have, each entry of a matrix counted as one.
pub(super) const MAX_OPERATIONS: usize = 2_000_000;

/// The values made so far.
#[derive(Default)]
pub(super) struct Builder {
    values: Vec<Value>,
    index: HashMap<(Op, Rate), ValueId>,
    operations: usize,
}

impl Builder {
    pub(super) fn into_values(self) -> Vec<Value> {
        self.values
    }

    /// Whether the program has more operations than it may. Nothing is kept from then on, and what has
    /// been built is no program.
    pub(super) fn is_exhausted(&self) -> bool {
        self.operations > MAX_OPERATIONS
    }

    pub(super) fn rate(&self, id: ValueId) -> Rate {
        self.values[id.index()].rate
    }

    pub(super) fn is_lane(&self, id: ValueId) -> bool {
        self.rate(id).is_lane()
    }

    /// The number behind a constant.
    pub(super) fn constant_value(&self, id: ValueId) -> Option<f64> {
        match self.values[id.index()].op {
            Op::Const(number) => Some(number.value()),
            _ => None,
        }
    }

    /// Names a value for people; the first name stays.
    pub(super) fn hint(&mut self, id: ValueId, hint: impl Into<String>) {
        self.values[id.index()].hint.get_or_insert(hint.into());
    }

    fn intern(&mut self, op: Op, rate: Rate) -> ValueId {
        if let Some(&id) = self.index.get(&(op.clone(), rate)) {
            return id;
        }
        self.operations += match op.is_aggregate() {
            true => op.operands().len(),
            false => 1,
        };
        if self.is_exhausted() {
            return ValueId(0);
        }
        let id = ValueId(
            u32::try_from(self.values.len()).expect("a program has fewer than 2^32 values"),
        );
        self.values.push(Value {
            op: op.clone(),
            rate,
            hint: None,
        });
        self.index.insert((op, rate), id);
        id
    }

    /// A value whose rate follows from its operands.
    fn computed(&mut self, op: Op) -> ValueId {
        let rate = op
            .operands()
            .into_iter()
            .map(|id| self.rate(id))
            .max()
            .unwrap_or(Rate::Constant);
        self.intern(op, rate)
    }

    pub(super) fn number(&mut self, value: f64) -> ValueId {
        self.intern(Op::Const(Number::new(value)), Rate::Constant)
    }

    pub(super) fn parameter(&mut self, index: usize) -> ValueId {
        self.intern(Op::Parameter(index), Rate::Setup)
    }

    pub(super) fn start(&mut self) -> ValueId {
        self.intern(Op::Start, Rate::Step)
    }

    pub(super) fn length(&mut self) -> ValueId {
        self.intern(Op::Length, Rate::Step)
    }

    /// Start of the step that a law is of.
    pub(super) fn law_start(&mut self) -> ValueId {
        self.intern(Op::Start, Rate::Law)
    }

    /// Length of the step that a law is of.
    pub(super) fn law_length(&mut self) -> ValueId {
        self.intern(Op::Length, Rate::Law)
    }

    /// What a law is asked with.
    pub(super) fn argument(&mut self, argument: Argument) -> ValueId {
        self.intern(Op::Argument(argument), Rate::Law)
    }

    pub(super) fn instant(&mut self) -> ValueId {
        self.intern(Op::Instant, Rate::Instant)
    }

    pub(super) fn time(&mut self) -> ValueId {
        self.intern(Op::Time, Rate::Observation)
    }

    pub(super) fn state(&mut self, slot: usize, phase: Phase) -> ValueId {
        let rate = match phase {
            Phase::Observation => Rate::ObservationLane,
            Phase::Step => Rate::StepLane,
        };
        self.intern(Op::State(slot), rate)
    }

    pub(super) fn noise(&mut self, source: usize) -> ValueId {
        self.intern(Op::Noise(source), Rate::StepLane)
    }

    /// A draw from another law than the normal; a new one on each path, whatever its parameter's rate.
    pub(super) fn other_draw(
        &mut self,
        law: DrawLaw,
        source: usize,
        parameter: ValueId,
    ) -> ValueId {
        let op = Op::Draw {
            law,
            source,
            parameter,
        };
        self.intern(op, Rate::StepLane)
    }

    pub(super) fn unary(&mut self, op: UnaryOp, a: ValueId) -> ValueId {
        if let Some(x) = self.constant_value(a) {
            return self.number(op.apply::<Unfused>(x));
        }
        if let (UnaryOp::Neg, &Op::Unary(UnaryOp::Neg, inner)) = (op, &self.values[a.index()].op) {
            return inner;
        }
        self.computed(Op::Unary(op, a))
    }

    pub(super) fn neg(&mut self, a: ValueId) -> ValueId {
        self.unary(UnaryOp::Neg, a)
    }

    pub(super) fn binary(&mut self, op: BinaryOp, a: ValueId, b: ValueId) -> ValueId {
        if let (Some(x), Some(y)) = (self.constant_value(a), self.constant_value(b)) {
            return self.number(op.apply::<Unfused>(x, y));
        }
        let (a, b) = if op.commutes() && b < a {
            (b, a)
        } else {
            (a, b)
        };
        self.computed(Op::Binary(op, a, b))
    }

    pub(super) fn add(&mut self, a: ValueId, b: ValueId) -> ValueId {
        match (self.constant_value(a), self.constant_value(b)) {
            (Some(0.0), _) => b,
            (_, Some(0.0)) => a,
            (Some(x), None) if x < 0.0 => self.add_number(b, x),
            (None, Some(x)) if x < 0.0 => self.add_number(a, x),
            _ => self.binary(BinaryOp::Add, a, b),
        }
    }

    /// `a + x` for a negative number, as people write it.
    fn add_number(&mut self, a: ValueId, x: f64) -> ValueId {
        let size = self.number(-x);
        self.binary(BinaryOp::Sub, a, size)
    }

    pub(super) fn sub(&mut self, a: ValueId, b: ValueId) -> ValueId {
        match (self.constant_value(a), self.constant_value(b)) {
            (Some(0.0), _) => self.neg(b),
            (_, Some(0.0)) => a,
            _ => self.binary(BinaryOp::Sub, a, b),
        }
    }

    pub(super) fn mul(&mut self, a: ValueId, b: ValueId) -> ValueId {
        for (factor, other) in [(a, b), (b, a)] {
            match self.constant_value(factor) {
                Some(1.0) => return other,
                Some(-1.0) => return self.neg(other),
                _ => {}
            }
        }
        self.binary(BinaryOp::Mul, a, b)
    }

    /// The quotient; a lane is multiplied by the reciprocal of what is the same on all lanes, and
    /// everything by the reciprocal of a constant.
    pub(super) fn div(&mut self, a: ValueId, b: ValueId) -> ValueId {
        let hoisted = self.is_lane(a) && !self.is_lane(b);
        if self.constant_value(a) == Some(1.0) || !(hoisted || self.constant_value(b).is_some()) {
            return self.binary(BinaryOp::Div, a, b);
        }
        let one = self.number(1.0);
        let reciprocal = self.binary(BinaryOp::Div, one, b);
        self.mul(a, reciprocal)
    }

    /// `a * b + c`: fused where it is computed on lanes, else a product and a sum.
    pub(super) fn mul_add(&mut self, a: ValueId, b: ValueId, c: ValueId) -> ValueId {
        let trivial = [a, b]
            .iter()
            .any(|&f| matches!(self.constant_value(f), Some(1.0 | -1.0)));
        let uniform = !self.is_lane(a) && !self.is_lane(b);
        if trivial || uniform || self.constant_value(c) == Some(0.0) {
            let product = self.mul(a, b);
            return self.add(product, c);
        }
        let (a, b) = if b < a { (b, a) } else { (a, b) };
        self.computed(Op::MulAdd(a, b, c))
    }

    pub(super) fn select(
        &mut self,
        compare: Comparison,
        (a, b): (ValueId, ValueId),
        then: ValueId,
        otherwise: ValueId,
    ) -> ValueId {
        self.computed(Op::Select {
            compare,
            a,
            b,
            then,
            otherwise,
        })
    }

    /// The square root.
    pub(super) fn sqrt(&mut self, a: ValueId) -> ValueId {
        self.unary(UnaryOp::Sqrt, a)
    }

    /// The lower triangular factor of a matrix, row by row.
    pub(super) fn cholesky(&mut self, dim: usize, covariance: Vec<ValueId>) -> ValueId {
        self.matrix(Op::Cholesky {
            dim,
            covariance: covariance.into(),
        })
    }

    /// A matrix operation. Never folded, so that what can fail fails in the constructor at the earliest.
    pub(super) fn matrix(&mut self, op: Op) -> ValueId {
        let rate = op
            .operands()
            .into_iter()
            .map(|id| self.rate(id))
            .max()
            .unwrap_or(Rate::Setup);
        let rate = match op {
            // What it reads at instants it has integrated.
            Op::MovingTransition { .. } => Rate::Step,
            _ => rate.max(Rate::Setup),
        };
        self.intern(op, rate)
    }

    /// Normal draws mixed by a triangular factor.
    pub(super) fn correlate(&mut self, factor: ValueId, sources: &[usize]) -> ValueId {
        let sources = sources.into();
        self.intern(Op::Correlate { factor, sources }, Rate::StepLane)
    }

    /// Levy areas of a step, as [`Op::Areas`] has them.
    pub(super) fn areas(
        &mut self,
        drivers: &[(usize, usize)],
        pairs: &[(usize, usize, usize)],
    ) -> ValueId {
        let length = self.length();
        let (drivers, pairs) = (drivers.into(), pairs.into());
        self.intern(
            Op::Areas {
                length,
                drivers,
                pairs,
            },
            Rate::StepLane,
        )
    }

    /// What a value is computed by.
    pub(super) fn op(&self, id: ValueId) -> &Op {
        &self.values[id.index()].op
    }

    pub(super) fn extract(&mut self, matrix: ValueId, index: usize) -> ValueId {
        self.computed(Op::Extract(matrix, index))
    }

    /// `base^exponent` by squaring.
    pub(super) fn integer_power(&mut self, base: ValueId, exponent: u32) -> ValueId {
        let mut result = None;
        let mut square = base;
        let mut rest = exponent;
        while rest > 0 {
            if rest & 1 == 1 {
                result = Some(result.map_or(square, |r| self.mul(r, square)));
            }
            rest >>= 1;
            if rest > 0 {
                square = self.mul(square, square);
            }
        }
        result.unwrap_or_else(|| self.number(1.0))
    }
}
