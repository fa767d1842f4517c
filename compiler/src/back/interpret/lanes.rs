//! Runs lane code: one instruction at a time over the 256 lanes of a block.

use driftwright_runtime::random::Draws;
use driftwright_runtime::{Arith, Lane, gauss};

use super::code::{Action, Before, Code, Factor, Instruction, Operand};
use crate::program::{BinaryOp, Comparison, DrawLaw};

/// An operand in place.
#[derive(Clone, Copy)]
enum Read<'a> {
    Same(f64),
    Lane(&'a Lane),
}

/// What an instruction can read.
struct Inputs<'a> {
    values: &'a [f64],
    states: &'a [Lane],
    noise: &'a [Lane],
    draws: Option<&'a Draws>,
    below: &'a [Lane],
    above: &'a [Lane],
}

impl<'a> Inputs<'a> {
    #[inline(always)]
    fn read(&self, operand: Operand) -> Read<'a> {
        match operand {
            Operand::Number(value) => Read::Same(value),
            Operand::Value(place) => Read::Same(self.values[place]),
            Operand::State(slot) => Read::Lane(&self.states[slot]),
            Operand::Noise(source) => Read::Lane(&self.noise[source]),
            Operand::Register(r) if r < self.below.len() => Read::Lane(&self.below[r]),
            // The target itself lies between and is never an operand.
            Operand::Register(r) => Read::Lane(&self.above[r - self.below.len() - 1]),
        }
    }
}

/// Runs the instructions; results stay in the registers. Only a step has draws.
#[inline(always)]
pub(super) fn run<A: Arith>(
    code: &Code,
    values: &[f64],
    states: &[Lane],
    noise: &[Lane],
    draws: Option<&Draws>,
    scratch: &mut [Lane],
) {
    for before in &code.before {
        prepare::<A>(before, values, noise, draws, scratch);
    }
    for instruction in &code.instructions {
        let (below, rest) = scratch.split_at_mut(instruction.target);
        let (target, above) = rest
            .split_first_mut()
            .expect("the driver provides the scratch lanes");
        execute::<A>(
            instruction,
            &Inputs {
                values,
                states,
                noise,
                draws,
                below,
                above,
            },
            target,
        );
    }
}

/// Mixes draws, or draws Levy areas, into their registers.
#[inline(always)]
fn prepare<A: Arith>(
    before: &Before,
    values: &[f64],
    noise: &[Lane],
    draws: Option<&Draws>,
    scratch: &mut [Lane],
) {
    match before {
        Before::Correlate {
            factor,
            sources,
            first,
        } => {
            let factor = match factor {
                Factor::Numbers(numbers) => numbers,
                Factor::Values(places) => &values[places.clone()],
            };
            gauss::correlate::<A>(factor, sources, noise, &mut scratch[*first..]);
        }
        Before::Areas {
            length,
            drivers,
            pairs,
            first,
        } => {
            let length = match *length {
                Operand::Number(number) => number,
                Operand::Value(place) => values[place],
                _ => unreachable!("the length of a step is the same on all lanes"),
            };
            let draws = draws.expect("the verifier lets areas into steps only");
            let lanes = pairs.len() + 2 * drivers.len();
            draws.areas(
                length,
                drivers,
                pairs,
                noise,
                &mut scratch[*first..][..lanes],
            );
        }
    }
}

/// Copies the results to their lanes. `states` is none where the results are the states themselves: a
/// result that is the old value of another slot is then read before anything is written.
#[inline(always)]
pub(super) fn write(
    code: &Code,
    values: &[f64],
    states: Option<&[Lane]>,
    noise: &[Lane],
    scratch: &[Lane],
    results: &mut [Lane],
) {
    for (place, &operand) in code.results.iter().enumerate() {
        results[place] = match operand {
            Operand::Number(value) => Lane::splat(value),
            Operand::Value(index) => Lane::splat(values[index]),
            Operand::Noise(source) => noise[source],
            Operand::Register(r) => scratch[r],
            Operand::State(slot) => match states {
                Some(states) => states[slot],
                None if slot == place => continue,
                None => unreachable!("a slot never takes over another slot's old value"),
            },
        };
    }
}

#[inline(always)]
fn execute<A: Arith>(instruction: &Instruction, inputs: &Inputs<'_>, out: &mut Lane) {
    match instruction.action {
        Action::Unary(op, a) => match inputs.read(a) {
            Read::Lane(a) => op.apply_lanes::<A>(a, out),
            Read::Same(a) => *out = Lane::splat(op.apply::<A>(a)),
        },
        Action::Binary(op, a, b) => binary::<A>(op, inputs.read(a), inputs.read(b), out),
        Action::MulAdd(a, b, c) => {
            map3(
                inputs.read(a),
                inputs.read(b),
                inputs.read(c),
                out,
                A::mul_add,
            );
        }
        Action::Draw(law, source, parameter) => {
            let parameter = match inputs.read(parameter) {
                Read::Lane(lane) => lane,
                Read::Same(value) => &Lane::splat(value),
            };
            let draws = inputs
                .draws
                .expect("the verifier lets draws into steps only");
            match law {
                DrawLaw::Gamma => draws.gamma(source, parameter, out),
                DrawLaw::Poisson => draws.poisson(source, parameter, out),
            }
        }
        Action::Select(compare, operands) => {
            let [a, b, then, otherwise] = operands.map(|o| inputs.read(o));
            match compare {
                Comparison::Less => select([a, b, then, otherwise], out, |a, b| a < b),
                Comparison::LessEqual => select([a, b, then, otherwise], out, |a, b| a <= b),
            }
        }
    }
}

#[inline(always)]
fn binary<A: Arith>(op: BinaryOp, a: Read<'_>, b: Read<'_>, out: &mut Lane) {
    match op {
        BinaryOp::Add => map2(a, b, out, |a, b| a + b),
        BinaryOp::Sub => map2(a, b, out, |a, b| a - b),
        BinaryOp::Mul => map2(a, b, out, |a, b| a * b),
        BinaryOp::Div => map2(a, b, out, |a, b| a / b),
        BinaryOp::Pow => map2(a, b, out, |a, b| BinaryOp::Pow.apply::<A>(a, b)),
        BinaryOp::Min => map2(a, b, out, |a, b| BinaryOp::Min.apply::<A>(a, b)),
        BinaryOp::Max => map2(a, b, out, |a, b| BinaryOp::Max.apply::<A>(a, b)),
    }
}

#[inline(always)]
fn map2(a: Read<'_>, b: Read<'_>, out: &mut Lane, f: impl Fn(f64, f64) -> f64) {
    let out = out.0.iter_mut();
    match (a, b) {
        (Read::Lane(a), Read::Lane(b)) => {
            out.zip(&a.0)
                .zip(&b.0)
                .for_each(|((out, &a), &b)| *out = f(a, b));
        }
        (Read::Same(a), Read::Lane(b)) => out.zip(&b.0).for_each(|(out, &b)| *out = f(a, b)),
        (Read::Lane(a), Read::Same(b)) => out.zip(&a.0).for_each(|(out, &a)| *out = f(a, b)),
        (Read::Same(a), Read::Same(b)) => {
            let value = f(a, b);
            out.for_each(|out| *out = value);
        }
    }
}

#[inline(always)]
fn map3(a: Read<'_>, b: Read<'_>, c: Read<'_>, out: &mut Lane, f: impl Fn(f64, f64, f64) -> f64) {
    match (a, b, c) {
        (Read::Same(a), b, c) => map2(b, c, out, |b, c| f(a, b, c)),
        (a, Read::Same(b), c) => map2(a, c, out, |a, c| f(a, b, c)),
        (a, b, Read::Same(c)) => map2(a, b, out, |a, b| f(a, b, c)),
        (Read::Lane(a), Read::Lane(b), Read::Lane(c)) => {
            let lanes = out.0.iter_mut().zip(&a.0).zip(&b.0).zip(&c.0);
            lanes.for_each(|(((out, &a), &b), &c)| *out = f(a, b, c));
        }
    }
}

#[inline(always)]
fn select(operands: [Read<'_>; 4], out: &mut Lane, holds: impl Fn(f64, f64) -> bool) {
    // Selects are rare: what is the same on all lanes is spread out rather than specialised.
    let mut spread = [Lane::ZERO; 4];
    let mut lanes = [&Lane::ZERO; 4];
    for ((read, room), lane) in operands.iter().zip(&mut spread).zip(&mut lanes) {
        *lane = match *read {
            Read::Lane(lane) => lane,
            Read::Same(value) => {
                *room = Lane::splat(value);
                room
            }
        };
    }
    let [a, b, then, otherwise] = lanes.map(|lane| &lane.0);
    for (i, out) in out.0.iter_mut().enumerate() {
        *out = if holds(a[i], b[i]) {
            then[i]
        } else {
            otherwise[i]
        };
    }
}
