//! The normal transition of one state by itself as formulas: what the coordinate is after a time, and with
//! it the distribution function, the density and, where they are short, the moments of the state.

use crate::analysis::linear::Row;
use crate::calculus::bracket;
use crate::model::{Model, State};
use crate::symbolic::{Expr, Function, Node, Pool, Sign, SymbolKind};

/// The law over a time t, given the value before, for coefficients that do not depend on time.
pub(super) fn transition(model: &Model, state: usize, row: &Row) -> Vec<(String, Expr)> {
    let pool = &model.pool;
    let square = pool.simplify(bracket(model, &row.noise, &row.noise));
    if pool.is_zero(square).is_yes() {
        return Vec::new();
    }
    let time = pool.var(model.time);
    let rate = row
        .slopes
        .get(&state)
        .copied()
        .unwrap_or_else(|| pool.zero());
    let u = row.coordinate.forward;
    let kept = pool.mul(pool.exp(pool.mul(rate, time)), u);
    let drifted = pool.mul(row.constant, elapsed(pool, rate, time));
    let doubled = elapsed(pool, pool.mul(pool.int(2), rate), time);
    let mean = pool.simplify(pool.add(kept, drifted));
    let variance = pool.simplify(pool.mul(square, doubled));
    let shown = pool.format(u);
    let mut lines = vec![
        (
            format!("{shown} after a time t, given its value before, is normal: its mean"),
            mean,
        ),
        ("its variance".to_owned(), variance),
    ];
    let name = &model.states[state].name;
    if is_logarithm(pool, u) {
        let half = pool.div(variance, pool.int(2));
        let first = pool.simplify(pool.exp(pool.add(mean, half)));
        let spread = pool.sub(pool.exp(variance), pool.one());
        let second = pool.simplify(pool.mul(spread, pool.square(first)));
        lines.push((format!("mean of {name}"), first));
        lines.push((format!("variance of {name}"), second));
    }
    lines.extend(distribution(model, state, u, [mean, variance]));
    lines
}

/// `int_0^t exp(rate s) ds`.
fn elapsed(pool: &Pool, rate: Expr, time: Expr) -> Expr {
    if pool.is_zero(rate).is_yes() {
        return time;
    }
    let grown = pool.exp(pool.mul(rate, time));
    pool.div(pool.sub(grown, pool.one()), rate)
}

fn is_logarithm(pool: &Pool, e: Expr) -> bool {
    let inner = match &*pool.node(e) {
        Node::Call(Function::Log, arguments) => arguments[0],
        _ => return false,
    };
    matches!(*pool.node(inner), Node::Symbol(_))
}

/// Distribution function and density of the state at a value after the time; none where it is not known
/// whether the coordinate rises or falls with the state.
fn distribution(
    model: &Model,
    state: usize,
    u: Expr,
    [mean, variance]: [Expr; 2],
) -> Vec<(String, Expr)> {
    let pool = &model.pool;
    let State { name, symbol, .. } = &model.states[state];
    let mut after = format!("{name}_after");
    while pool.find_symbol(&after).is_some() {
        after.push('_');
    }
    let next = pool.symbol(&after, SymbolKind::Auxiliary);
    pool.set_range(next, pool.range(*symbol));
    let there = [(*symbol, pool.var(next))].into_iter().collect();
    let slope = pool.simplify(pool.derivative(u, *symbol));
    let rises = match pool.sign(slope) {
        Sign::Positive => true,
        Sign::Negative => false,
        _ => return Vec::new(),
    };
    let deviation = pool.simplify(pool.sqrt(variance));
    let score = pool.div(pool.sub(pool.substitute(u, &there), mean), deviation);
    let (toward, steepness) = match rises {
        true => (score, slope),
        false => (pool.neg(score), pool.neg(slope)),
    };
    let distribution = pool.call(Function::NormalCdf, &[toward]);
    let density = pool.product([
        pool.call(Function::NormalPdf, &[score]),
        pool.substitute(steepness, &there),
        pool.div(pool.one(), deviation),
    ]);
    vec![
        (
            format!("distribution function of {name} at {after}, the value after that time"),
            distribution,
        ),
        (format!("density of {name} there"), density),
    ]
}
