//! Normal forms have the values of what they stand for.

use std::collections::BTreeMap;

use super::normalizer;
use crate::symbolic::normal::Mode;
use crate::symbolic::tests::{parse, pool};
use crate::symbolic::{Expr, Pool, Symbol};

/// Roots, logarithms, absolute values and cube roots of products whose factors have all kinds of signs.
const FORMULAS: &str = "
sqrt(-w*p)
sqrt(w^2*x^2)
sqrt(w^2*x^4*p)
sqrt((p - 1)^2*(q - 1)^2)
sqrt((x - 1)^2*(y + 2)^4)
sqrt((x - y)*(x + y))
sqrt((1 - x)^3*(y - 2)^5)
sqrt((1 - x)^3*(2 - y)^5)
sqrt(-(x - 1)*(y - 3)^3)
sqrt((1 - x^2)/(1 + x)^3)
sqrt(12*p/5)
sqrt(x^2*y^2/9)
(w^2*p)^(1/4)
(x^2*y^4)^(1/3)
(x^2*y^2)^(3/2)
(-w)^(1/3)*p
(-8*w^3)^(2/3)
p^(5/2)/p^(1/2)
(1/p + 1)^(3/2)
(p + q)^(7/2)*(p + q)^(-1)
log(-w^3*p)
log(w^4*x^2)
log(x^2*y^6)
log((x^2 - 2*x + 1)/(p + 1)^3)
log((1 - u)/u)
log(360*p/7)
log(p^2*exp(x)/q^3)
log(exp(x)*exp(y))
log(-x*(y - 1)*(x - 2)^2)
log((x - y)/(y - x - 1))
cbrt(-8*w^3*x)
cbrt(x^4*y)
cbrt(-27*(x - 1)^2*y)
cbrt(p/8)
cbrt(-x/y^3)
abs(w*x^3*y^2)
abs(-3*x*y/w)
abs((x - 1)^3/(y + 4)^2)
abs(-p*w)
abs(x)^3*abs(x*y)
exp(2*log(p) + x)
exp(x*log(p))*p^2
exp(log(p)/2 - 3*log(q))
exp(x)^2*exp(-y)/exp(x - 1)
exp(x/(1 + p))*exp(-x/(p + 1)^2)
p^x*p^(2 - x)
(p*q)^x/q^x
sinh(x)^2 - cosh(x)^2
sinh(x)^3 + sinh(-x)
1 - 3*x + 3*x^2 - x^3
8 - 12*x + 6*x^2 - x^3 + (1 - x)/(2 - x)^3
-4*x^2 + 4*x*y - y^2
(x*y - x - y + 1)*(x - 1)^2
(1 - x)^5*(y + 2)^3/(2 - y)^3
1/(2 - x)^3 + y
x/(2 - x - y)^3 - 1/(w - x)^5
x/(2 - x)^4 - p/(w - x)^2
-(x^2 - 2*x*y + y^2)^3/(p - 2*q)^3
1/(x + y) + 1/(x - y) - 2*x/(x^2 - y^2)
(x^2 - y^2)/(x - y)^2 - (x + y)/(x - y) + 1/(p + 1)
(1/(x - 1) - 1/(x + 1))^3/(1/(x^2 - 1))
x/(p + q)^2 - y/(p^2 + 2*p*q + q^2)
tanh(x)*cosh(x)^2/sinh(x)
asinh(x) + acosh(p + 2) - atanh(u)
max(x, y)*min(x, y) + x*y
erf(x)*normal_pdf(x)
normal_cdf(-x) + normal_quantile(1 - u) + erf(-y)
normal_quantile(u/2) - normal_quantile(1 - u/2)
sqrt(2)*sqrt(6)/sqrt(27) + 5^(2/3)*25^(2/3)
(x + sqrt(2))^3*(x - sqrt(2))^2
1/(sqrt(p) + 1) - 1/(sqrt(p) - 1)
sqrt(x + sqrt(p + 3) + 4)^3
";

fn points(pool: &Pool) -> Vec<BTreeMap<Symbol, f64>> {
    let rows = [
        [0.7, -1.3, -0.8, 1.9, 0.4, 2.3],
        [-2.1, 0.6, -1.7, 0.3, 0.8, 0.6],
        [1.4, 2.2, -0.2, 2.5, 0.1, 3.0],
        [-0.4, 3.1, -2.4, 0.8, 0.6, 1.2],
        [2.6, -0.9, -0.5, 1.3, 0.3, 0.2],
        [-1.5, -2.7, -1.1, 2.2, 0.9, 1.7],
    ];
    let names =
        ["x", "y", "w", "p", "u", "q"].map(|name| pool.find_symbol(name).expect("a symbol"));
    rows.into_iter()
        .map(|row| names.into_iter().zip(row).collect())
        .collect()
}

/// Every way of writing a formula: its normal forms, its lightest shape, multiplied out.
fn rewritings(pool: &Pool, e: Expr) -> [Expr; 4] {
    let [light, proof] = [Mode::Light, Mode::Proof].map(|mode| {
        let normal = pool.normal(e, mode);
        normalizer(pool, mode).formula(&normal)
    });
    [light, proof, pool.simplify(e), pool.expand(e)]
}

#[test]
fn rewritten_formulas_have_the_value_of_the_formula() {
    let pool = pool();
    let points = points(&pool);
    for text in FORMULAS.lines().filter(|line| !line.is_empty()) {
        let e = parse(&pool, text);
        let mut compared = 0;
        for point in &points {
            let Some(exact) = pool.eval_f64(e, point) else {
                continue;
            };
            for other in rewritings(&pool, e) {
                let found = pool.eval_f64(other, point);
                let close = found.is_some_and(|v| (v - exact).abs() <= 1e-9 * (1.0 + exact.abs()));
                assert!(
                    close,
                    "{text} as {}: {found:?} for {exact}",
                    pool.format(other)
                );
            }
            compared += 1;
        }
        assert!(compared > 0, "{text} has no value at any point");
    }
}
