//! Values that are the same on all lanes, evaluated one by one in unfused arithmetic.

use driftwright_runtime::{
    Arith, Interval, ParameterError, StepError, Unfused, check_initial, check_range, gauss,
};

use crate::program::{Argument, Bound, Check, Comparison, Op, Program, Range, Rate, ValueId};

/// The numbers behind a program's values; a matrix has several.
#[derive(Clone, Debug)]
pub(super) struct Uniform {
    parameters: Vec<f64>,
    first: Vec<usize>,
    numbers: Vec<f64>,
}

/// Computes constants and setup values and makes the program's checks, in the order in which generated
/// constructors do.
pub(super) fn construct(program: &Program, parameters: &[f64]) -> Result<Uniform, ParameterError> {
    let mut uniform = Uniform::new(program, parameters);
    let refused = |_: StepError| ParameterError::CorrelationNotPositiveSemidefinite;
    uniform
        .run(program, program.section(Rate::Constant), [0.0; 2])
        .map_err(refused)?;
    uniform
        .run(program, program.check_values().into_iter(), [0.0; 2])
        .map_err(refused)?;
    for check in &program.checks {
        uniform.check(program, check)?;
    }
    uniform
        .run(program, program.section(Rate::Setup), [0.0; 2])
        .map_err(refused)?;
    Ok(uniform)
}

impl Uniform {
    fn new(program: &Program, parameters: &[f64]) -> Self {
        let mut first = Vec::with_capacity(program.values.len());
        let mut total = 0;
        for value in &program.values {
            first.push(total);
            total += value.op.width();
        }
        Self {
            parameters: parameters.to_vec(),
            first,
            numbers: vec![0.0; total],
        }
    }

    /// The number behind a value.
    pub(super) fn get(&self, id: ValueId) -> f64 {
        self.numbers[self.first[id.index()]]
    }

    /// The numbers behind a value, more than one behind a matrix.
    pub(super) fn all(&self, program: &Program, id: ValueId) -> &[f64] {
        let width = program.value(id).op.width();
        &self.numbers[self.first[id.index()]..][..width]
    }

    /// Evaluates values; `times` are start and length of a step, or the time of an observation.
    pub(super) fn run(
        &mut self,
        program: &Program,
        ids: impl Iterator<Item = ValueId>,
        times: [f64; 2],
    ) -> Result<(), StepError> {
        for id in ids {
            let op = &program.value(id).op;
            let place = self.first[id.index()];
            if op.is_aggregate() {
                let result = self.matrix(program, id)?;
                self.numbers[place..place + result.len()].copy_from_slice(&result);
            } else {
                self.numbers[place] = self.scalar(op, times);
            }
        }
        Ok(())
    }

    /// Evaluates numbers that belong to a law; the arguments are the value before the step and the one at which the law
    /// is asked, `step` its start and length.
    pub(super) fn run_law(
        &mut self,
        program: &Program,
        ids: impl Iterator<Item = ValueId>,
        [before, at]: [f64; 2],
        step: [f64; 2],
    ) {
        for id in ids {
            self.numbers[self.first[id.index()]] = match &program.value(id).op {
                Op::Argument(Argument::Before) => before,
                Op::Argument(Argument::At) => at,
                op => self.scalar(op, step),
            };
        }
    }

    fn scalar(&self, op: &Op, [start, length]: [f64; 2]) -> f64 {
        match *op {
            Op::Const(number) => number.value(),
            Op::Parameter(index) => self.parameters[index],
            Op::Start | Op::Time | Op::Instant => start,
            Op::Length => length,
            Op::Unary(op, a) => op.apply::<Unfused>(self.get(a)),
            Op::Binary(op, a, b) => op.apply::<Unfused>(self.get(a), self.get(b)),
            Op::MulAdd(a, b, c) => Unfused::mul_add(self.get(a), self.get(b), self.get(c)),
            Op::Select {
                compare,
                a,
                b,
                then,
                otherwise,
            } => self.get(if compare.holds(self.get(a), self.get(b)) {
                then
            } else {
                otherwise
            }),
            Op::Extract(of, index) => self.numbers[self.first[of.index()] + index],
            Op::Argument(_)
            | Op::State(_)
            | Op::Noise(_)
            | Op::Draw { .. }
            | Op::Cholesky { .. }
            | Op::Transition { .. }
            | Op::MovingTransition { .. }
            | Op::Correlate { .. }
            | Op::Areas { .. } => {
                unreachable!("the verifier lets no lane and no matrix in here")
            }
        }
    }

    fn matrix(&self, program: &Program, id: ValueId) -> Result<Vec<f64>, StepError> {
        let op = &program.value(id).op;
        let all = |ids: &[ValueId]| ids.iter().map(|&id| self.get(id)).collect::<Vec<f64>>();
        let mut result = vec![0.0; op.width()];
        match op {
            Op::Cholesky { dim, covariance } => {
                gauss::cholesky(*dim, &all(covariance), &mut result)?
            }
            Op::Transition {
                dim,
                a,
                alpha,
                q,
                length,
            } => {
                let (e, rest) = result.split_at_mut(dim * dim);
                let (shift, covariance) = rest.split_at_mut(*dim);
                let length = self.get(*length);
                gauss::linear_transition(
                    *dim,
                    &all(a),
                    &all(alpha),
                    &all(q),
                    length,
                    e,
                    shift,
                    covariance,
                )?;
            }
            Op::MovingTransition {
                dim,
                a,
                alpha,
                q,
                start,
                length,
            } => {
                let coefficients = [&a[..], alpha, q].concat();
                self.moving(
                    program,
                    id,
                    *dim,
                    &coefficients,
                    [*start, *length],
                    &mut result,
                )?;
            }
            _ => unreachable!("only matrix operations are matrices"),
        }
        Ok(result)
    }

    /// The law of a system whose coefficients are evaluated anew at every instant it asks for.
    fn moving(
        &self,
        program: &Program,
        id: ValueId,
        dim: usize,
        coefficients: &[ValueId],
        [start, length]: [ValueId; 2],
        result: &mut [f64],
    ) -> Result<(), StepError> {
        let values = program.instant_values(id);
        let mut instant = self.clone();
        let evaluate = |time: f64, out: &mut [f64]| {
            for &id in &values {
                let value = instant.scalar(&program.value(id).op, [time, 0.0]);
                instant.numbers[instant.first[id.index()]] = value;
            }
            for (out, &id) in out.iter_mut().zip(coefficients) {
                *out = instant.get(id);
            }
        };
        let (e, rest) = result.split_at_mut(dim * dim);
        let (shift, covariance) = rest.split_at_mut(dim);
        let [start, length] = [self.get(start), self.get(length)];
        gauss::moving_transition(dim, start, length, evaluate, e, shift, covariance)
    }

    fn check(&self, program: &Program, check: &Check) -> Result<(), ParameterError> {
        match check {
            Check::Range { parameter, range } => {
                let name = program.parameters[*parameter].name.clone();
                check_range(name, self.parameters[*parameter], self.interval(range))
            }
            Check::Assumption {
                name,
                text,
                compare,
                left,
                right,
            } => {
                if compare.holds(self.get(*left), self.get(*right)) {
                    return Ok(());
                }
                Err(ParameterError::Assumption {
                    name: name.clone().into(),
                    text: text.clone().into(),
                })
            }
            Check::Initial {
                state,
                value,
                domain,
            } => check_initial(state.clone(), self.get(*value), self.interval(domain)),
        }
    }

    pub(super) fn interval(&self, range: &Range) -> Interval {
        let end = |bound: Bound, infinite: f64| bound.value().map_or(infinite, |id| self.get(id));
        Interval::new(
            end(range.lower, f64::NEG_INFINITY),
            range.lower.is_closed(),
            end(range.upper, f64::INFINITY),
            range.upper.is_closed(),
        )
    }
}

impl Comparison {
    /// Whether it holds; false where a side is NaN.
    #[inline(always)]
    pub(super) fn holds(self, a: f64, b: f64) -> bool {
        match self {
            Self::Less => a < b,
            Self::LessEqual => a <= b,
        }
    }
}
