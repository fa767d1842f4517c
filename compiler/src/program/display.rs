//! A listing of a step program, for people and golden tests.

use std::fmt;

use super::op::{Comparison, Op, ValueId};
use super::rate::Rate;
use super::{Check, Fact, LawImage, Program};

impl fmt::Display for Program {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        writeln!(f, "program {}", self.name)?;
        for (index, source) in self.sources.iter().enumerate() {
            writeln!(f, "source {index} {source}")?;
        }
        for (index, source) in self.draws.iter().enumerate() {
            writeln!(f, "draw {index} {source}")?;
        }
        for rate in Rate::ALL {
            writeln!(f, "{rate}:")?;
            for id in self.section(rate) {
                self.write_value(f, id)?;
            }
        }
        for check in &self.checks {
            writeln!(f, "check {}", describe(check, self))?;
        }
        for fact in &self.facts {
            writeln!(f, "fact {} if {}", fact.statement, alternatives(fact))?;
        }
        for law in &self.laws {
            let name = &self.slots[law.slot].name;
            let numbers = list(law.shape.numbers());
            write!(f, "law of {name}: {} {numbers}", law.shape.name())?;
            match law.image {
                None => writeln!(f)?,
                Some(LawImage::Logarithm) => writeln!(f, " through log")?,
                Some(LawImage::Map {
                    forward,
                    slope,
                    inverse,
                    domain,
                }) => {
                    let domain = ends(&domain);
                    writeln!(
                        f,
                        " through {forward} slope {slope} back {inverse} on {domain}"
                    )?;
                }
            }
        }
        for slot in &self.slots {
            writeln!(
                f,
                "slot {} = {}: {} -> {}",
                slot.name, slot.coordinate, slot.initial, slot.next
            )?;
        }
        self.outputs
            .iter()
            .try_for_each(|o| writeln!(f, "output {} = {}", o.name, o.value))
    }
}

impl Program {
    fn write_value(&self, f: &mut fmt::Formatter<'_>, id: ValueId) -> fmt::Result {
        for note in self.notes.iter().filter(|n| n.value == id) {
            writeln!(f, "  ; {}", note.text)?;
        }
        let value = self.value(id);
        write!(f, "  {id} = {}", self.spell(&value.op))?;
        match &value.hint {
            Some(hint) => writeln!(f, "  ; {hint}"),
            None => writeln!(f),
        }
    }

    fn spell(&self, op: &Op) -> String {
        match op {
            Op::Const(number) => format!("{:?}", number.value()),
            Op::Parameter(index) => format!("parameter {}", self.parameters[*index].name),
            Op::Start => "start".to_owned(),
            Op::Length => "length".to_owned(),
            Op::Time => "time".to_owned(),
            Op::Instant => "instant".to_owned(),
            Op::Argument(argument) => argument.name().to_owned(),
            Op::State(slot) => format!("state {}", self.slots[*slot].name),
            Op::Noise(source) => format!("noise {source}"),
            Op::Draw {
                law,
                source,
                parameter,
            } => format!("{} draw {source} of {parameter}", law.name()),
            Op::Unary(op, a) => format!("{} {a}", op.runtime_name().unwrap_or("neg")),
            Op::Binary(op, a, b) => format!("{} {a} {b}", op.name()),
            Op::MulAdd(a, b, c) => format!("mul_add {a} {b} {c}"),
            Op::Select {
                compare,
                a,
                b,
                then,
                otherwise,
            } => {
                format!(
                    "select {a} {} {b} then {then} else {otherwise}",
                    compare.sign()
                )
            }
            Op::Cholesky { dim, covariance } => format!("cholesky {dim} {}", list(covariance)),
            Op::Transition {
                dim,
                a,
                alpha,
                q,
                length,
            } => format!(
                "transition {dim} a {} alpha {} q {} length {length}",
                list(a),
                list(alpha),
                list(q)
            ),
            Op::MovingTransition {
                dim,
                a,
                alpha,
                q,
                start,
                length,
            } => format!(
                "moving_transition {dim} a {} alpha {} q {} start {start} length {length}",
                list(a),
                list(alpha),
                list(q)
            ),
            Op::Correlate { factor, sources } => format!("correlate {factor} {sources:?}"),
            Op::Areas {
                length,
                drivers,
                pairs,
            } => format!("areas {length} {drivers:?} {pairs:?}"),
            Op::Extract(of, index) => format!("extract {of} {index}"),
        }
    }
}

impl Comparison {
    /// The sign of the comparison, in Rust too.
    pub fn sign(self) -> &'static str {
        match self {
            Self::Less => "<",
            Self::LessEqual => "<=",
        }
    }
}

fn list(ids: &[ValueId]) -> String {
    let ids: Vec<String> = ids.iter().map(ToString::to_string).collect();
    format!("[{}]", ids.join(" "))
}

fn describe(check: &Check, program: &Program) -> String {
    match check {
        Check::Range { parameter, range } => {
            let parameter = &program.parameters[*parameter];
            format!(
                "range {} in {} {}",
                parameter.name,
                parameter.range,
                ends(range)
            )
        }
        Check::Assumption {
            name,
            compare,
            left,
            right,
            ..
        } => {
            format!("assumption {name}: {left} {} {right}", compare.sign())
        }
        Check::Initial {
            state,
            value,
            domain,
        } => {
            format!("initial {state} = {value} in {}", ends(domain))
        }
    }
}

fn alternatives(fact: &Fact) -> String {
    let all = fact.alternatives.iter().map(|all| {
        let parts = all
            .iter()
            .map(|(left, relates, right)| format!("{left} {} {right}", relates.sign()));
        parts.collect::<Vec<_>>().join(" and ")
    });
    all.collect::<Vec<_>>().join(" or ")
}

fn ends(range: &super::Range) -> String {
    let end = |bound: super::Bound, infinite: &str| {
        bound
            .value()
            .map_or(infinite.to_owned(), |id| id.to_string())
    };
    let open = if range.lower.is_closed() { '[' } else { '(' };
    let close = if range.upper.is_closed() { ']' } else { ')' };
    format!(
        "{open}{}, {}{close}",
        end(range.lower, "-inf"),
        end(range.upper, "inf")
    )
}
