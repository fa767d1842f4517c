//! The verifier: what every back end relies on.

use std::fmt;

use super::op::{Op, ValueId};
use super::rate::Rate;
use super::{Check, Fact, Program, StateLaw};

/// A fault in a program; it is the compiler's, never the author's.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Fault {
    /// Where.
    pub value: Option<ValueId>,
    /// What.
    pub text: String,
}

impl fmt::Display for Fault {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        match self.value {
            Some(id) => write!(f, "{id}: {}", self.text),
            None => f.write_str(&self.text),
        }
    }
}

impl Program {
    /// Checks single assignment (operands stand before what reads them), rates, indices, matrix shapes
    /// and that matrices are only read entry by entry, or as factors.
    ///
    /// # Errors
    /// The first fault.
    pub fn verify(&self) -> Result<(), Fault> {
        for id in self.ids() {
            self.verify_value(id).map_err(|text| Fault {
                value: Some(id),
                text,
            })?;
        }
        self.verify_results()
            .map_err(|text| Fault { value: None, text })
    }

    fn verify_value(&self, id: ValueId) -> Result<(), String> {
        let value = self.value(id);
        for operand in value.op.operands() {
            if operand >= id {
                return Err(format!("reads {operand}, which stands after it"));
            }
            let read = self.value(operand);
            let integrated = read.rate == Rate::Instant && value.op.integrates(operand);
            if !integrated && !value.rate.may_read(read.rate) {
                return Err(format!(
                    "of rate {} reads {operand} of rate {}",
                    value.rate, read.rate
                ));
            }
            let whole = matches!(value.op, Op::Extract(..) | Op::Correlate { .. });
            if read.op.is_aggregate() && !whole {
                return Err(format!("reads the matrix {operand} as a number"));
            }
        }
        self.verify_leaf(&value.op, value.rate)?;
        self.verify_areas(&value.op)?;
        self.verify_matrix(&value.op, value.rate)
    }

    fn verify_leaf(&self, op: &Op, rate: Rate) -> Result<(), String> {
        let (index, end) = match *op {
            Op::Parameter(i) => (i, self.parameters.len()),
            Op::State(i) => (i, self.slots.len()),
            Op::Noise(i) => (i, self.sources.len()),
            Op::Draw { source, .. } => (source, self.draws.len()),
            Op::Correlate { ref sources, .. } => (
                sources.iter().copied().max().unwrap_or(0),
                self.sources.len(),
            ),
            _ => (0, 1),
        };
        if index >= end {
            return Err(format!("index {index} where there are {end}"));
        }
        let right = match op {
            Op::Const(_) => rate == Rate::Constant,
            Op::Parameter(_) => rate == Rate::Setup,
            Op::Start | Op::Length => matches!(rate, Rate::Step | Rate::Law),
            Op::Argument(_) => rate == Rate::Law,
            Op::Time => rate == Rate::Observation,
            Op::Instant => rate == Rate::Instant,
            Op::State(_) => rate.is_lane(),
            Op::Noise(_) | Op::Draw { .. } | Op::Correlate { .. } | Op::Areas { .. } => {
                rate == Rate::StepLane
            }
            _ => true,
        };
        if right {
            Ok(())
        } else {
            Err(format!("a leaf of rate {rate}"))
        }
    }

    fn verify_areas(&self, op: &Op) -> Result<(), String> {
        let Op::Areas { drivers, pairs, .. } = op else {
            return Ok(());
        };
        let (sources, draws) = (self.sources.len(), self.draws.len());
        let driver = |&(increment, terms): &(usize, usize)| increment < sources && terms < draws;
        let pair = |&(p, q, rest): &(usize, usize, usize)| {
            p != q && p.max(q) < drivers.len() && rest < draws
        };
        if drivers.iter().all(driver) && pairs.iter().all(pair) {
            Ok(())
        } else {
            Err("an area of drivers or draws that do not exist".to_owned())
        }
    }

    fn verify_matrix(&self, op: &Op, rate: Rate) -> Result<(), String> {
        let sound = match op {
            Op::Cholesky { dim, covariance } => covariance.len() == dim * dim && !rate.is_lane(),
            Op::Transition {
                dim, a, alpha, q, ..
            }
            | Op::MovingTransition {
                dim, a, alpha, q, ..
            } => {
                a.len() == dim * dim
                    && alpha.len() == *dim
                    && q.len() == dim * dim
                    && !rate.is_lane()
            }
            Op::Correlate { factor, sources } => match &self.value(*factor).op {
                Op::Cholesky { dim, .. } => *dim == sources.len(),
                _ => false,
            },
            Op::Extract(of, index) => {
                let matrix = &self.value(*of).op;
                matrix.is_aggregate() && *index < matrix.width()
            }
            _ => true,
        };
        if sound {
            Ok(())
        } else {
            Err("a matrix of another shape, or on lanes".to_owned())
        }
    }

    fn verify_results(&self) -> Result<(), String> {
        let rate = |id: ValueId| self.value(id).rate;
        for id in self
            .checks
            .iter()
            .flat_map(Check::operands)
            .chain(self.facts.iter().flat_map(Fact::operands))
            .chain(self.correlation)
        {
            if rate(id) > Rate::Setup {
                return Err(format!("a check or fact reads {id} of rate {}", rate(id)));
            }
        }
        for id in self.laws.iter().flat_map(StateLaw::operands) {
            if !Rate::Law.may_read(rate(id)) {
                return Err(format!("a law reads {id} of rate {}", rate(id)));
            }
        }
        for slot in &self.slots {
            if rate(slot.initial) > Rate::Setup || !Rate::StepLane.may_read(rate(slot.next)) {
                return Err(format!(
                    "slot `{}` has a value of the wrong rate",
                    slot.name
                ));
            }
        }
        for output in &self.outputs {
            if !Rate::ObservationLane.may_read(rate(output.value)) {
                return Err(format!(
                    "output `{}` has a value of the wrong rate",
                    output.name
                ));
            }
        }
        match self.left_domain {
            Some(slot) if slot >= self.slots.len() => Err("the flag has no slot".to_owned()),
            _ => Ok(()),
        }
    }
}
