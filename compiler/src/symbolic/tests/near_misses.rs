//! Equations that do not hold and look as if they might: the zero test must refute each, with a point
//! at which the sides differ. And some that it must not prove, because they hold on a part of the
//! range only.

use std::collections::BTreeMap;

use super::{pool, sides};
use crate::symbolic::Truth;

const NEAR_MISSES: &str = "
(x + y)^2 = x^2 + x*y + y^2
(x + y)^2 = x^2 + 2.000000001*x*y + y^2
(x - y)*(x + y) = x^2 + y^2
(x^2 - y^2)/(x - y) = x - y
(x^3 - y^3)/(x - y) = x^2 - x*y + y^2
1/(x - 1) - 1/(x + 1) = 2/(x^2 + 1)
1/(x*(x + 1)) = 1/x + 1/(x + 1)
x/(x + y) + y/(x + y) = 1.000000001
x^5*x^(-3) = x^3
(x*y)^3 = x^3*y^2
1/(1/x + 1/y) = x + y
(x^2 + 3*x + 2)/(x + 1) = x + 2.000000001
(x - 1)*(x - 2)*(x - 3) = x^3 - 6*x^2 + 11*x - 7
0.1 + 0.2 = 0.30000000000000004
kappa*(theta - x) = kappa*theta - x
sqrt(x)^2 = x + 1/1000000000
sqrt(p*q) = sqrt(p) + sqrt(q)
sqrt(p^2) = -p
sqrt(x^2) = x
sqrt(x^2) = -x
sqrt(w^2) = w
sqrt(p/q) = sqrt(p)/q
sqrt(p^3) = p^2*sqrt(p)
sqrt(12) = 3*sqrt(2)
sqrt(8)*sqrt(2) = 4.000000001
sqrt(2)*sqrt(3) = sqrt(5)
1/(sqrt(2) - 1) = sqrt(2) - 1
sqrt(4*x + 4*y) = 4*sqrt(x + y)
sqrt(p^2 + q^2) = p + q
sqrt(x^2 + 2*x + 1) = x + 1
sqrt(x^2*y^2) = x*y
sqrt(x*y)^2 = -x*y
(x + y)^(3/2) = (x + y)*sqrt(x - y)
p^a*p^b = p^(a*b)
(p^a)^b = p^(a + b)
(p*q)^a = p^a*q
p^a/p^(a - 1) = p^2
2^a*3^a = 5^a
4^a = 2^(2*a + 1/1000000000)
p^(1/3)*p^(2/3) = p^(1/2)
(x^2)^(1/4) = sqrt(x + 1)
x^0.7 = x^0.700000001
8^(2/3) = 4.000000001
cbrt(x)^2 = x
cbrt(x + y) = cbrt(x) + cbrt(y)
cbrt(-x) = cbrt(x)
cbrt(8*x) = 8*cbrt(x)
exp(x)*exp(y) = exp(x*y)
exp(x) + exp(y) = exp(x + y)
exp(2*x) = exp(x) + exp(x)
exp(2*x) = exp(x)^2.000000001
exp(a*log(p)) = a*p
exp(3*log(p)) = p^2
sqrt(exp(x)) = exp(x/3)
exp((x + y)^2) = exp(x^2)*exp(y^2)
exp(mu*t - sigma^2*t/2) = exp(mu*t)*exp(sigma^2/2*t)
log(p*q) = log(p)*log(q)
log(p + q) = log(p) + log(q)
log(p/q) = log(p)/log(q)
log(p^a) = log(p)^a
log(x^2) = 2*log(x + 1)
log(sqrt(p)) = sqrt(log(p)^2)
log(6) = log(2)*log(3)
log(8)/log(2) = 2.999999999
log(1/p) = 1/log(p)
log(2*p) = 2*log(p)
log(u/(1 - u)) = log(u) + log(1 - u)
log(w^2) = 2*log(1 - w)
sin(x)^2 + cos(x)^2 = 1.000000001
sin(x)^2 - cos(x)^2 = 1
sin(2*x) = 2*sin(x)
cos(2*x) = 1 - sin(x)^2
sin(x + y) = sin(x)*cos(y) - cos(x)*sin(y)
cos(x - y) = cos(x)*cos(y) - sin(x)*sin(y)
sin(3*x) = 3*sin(x) - 3*sin(x)^3
cos(x/2)^2 = (1 - cos(x))/2
1 + tan(x)^2 = 1/sin(x)^2
tan(2*x) = 2*tan(x)/(1 + tan(x)^2)
sin(-x) = sin(x)
sin(x + pi) = sin(x)
sin(pi/2 - x) = sin(x)
cos(pi/3) = 0.500000001
sin(x + 3.141592653589793) = -sin(x)
pi = 3.141592653589793
pi = 355/113
cos(asin(u)) = 1 - u^2
asin(sin(x)) = x
atan(x) + atan(1/x) = pi/2
acos(u) - asin(u) = pi/2
cosh(x)^2 + sinh(x)^2 = 1
sinh(2*x) = sinh(x)*cosh(x)
1 + tanh(x)^2 = 1/cosh(x)^2
cosh(x) - sinh(x) = exp(x)
tanh(2*x) = 2*tanh(x)/(1 - tanh(x)^2)
asinh(x) = log(x + sqrt(x^2 - 1) + 1)
exp(2*atanh(u)) = (1 - u)/(1 + u)
acosh(cosh(x)) = x
normal_pdf(x) = exp(-x^2)/sqrt(2*pi)
normal_pdf(x) = exp(-x^2/2)/sqrt(pi)
normal_cdf(-x) = normal_cdf(x)
normal_cdf(x) = 1/(1 + exp(-1.702*x))
erf(x) = 2*normal_cdf(x) - 1
erf(-x) = erf(x)
normal_cdf(normal_quantile(u)) = u + 1e-9
abs(x) = x
abs(x + y) = abs(x) + abs(y)
max(x, y) + min(x, y) = x - y
max(x, y) = (x + y)/2
max(x, 0) = x
sign(x) = 1
x + 1e-9*x^3 = x
kappa*(theta - x) + 1e-9*x^2 = kappa*(theta - x)
";

#[test]
fn near_misses_are_refuted() {
    let mut failures = Vec::new();
    let lines: Vec<&str> = NEAR_MISSES
        .lines()
        .filter(|line| !line.is_empty())
        .collect();
    assert!(lines.len() >= 100);
    let pool = pool();
    for line in lines {
        let (left, right) = sides(&pool, line);
        let Truth::No(witness) = pool.equal(left, right) else {
            failures.push(format!("{line}: {:?}", pool.equal(left, right)));
            continue;
        };
        // In double precision the witness shows the difference too, unless it is very small.
        let point: BTreeMap<_, _> = witness.point.iter().copied().collect();
        let found = (pool.eval_f64(left, &point), pool.eval_f64(right, &point));
        let close =
            |a: f64, b: Option<f64>| b.is_some_and(|b| (a - b).abs() <= 1e-9 * a.abs().max(1.0));
        if !close(witness.left, found.0) || !close(witness.right, found.1) {
            failures.push(format!("{line}: witness {witness:?} gives {found:?}"));
        }
    }
    assert!(failures.is_empty(), "not refuted:\n{}", failures.join("\n"));
}

/// Equal only where a symbol has one sign, or in a way the algebra here does not know.
#[test]
fn what_holds_in_part_is_not_proved() {
    let pool = pool();
    for line in [
        "sqrt(x^2) = x",
        "log(x^2) = 2*log(x)",
        "(x^2)^(a/2) = x^a",
        "asin(sin(x)) = x",
        "log(x*y) = log(x) + log(y)",
    ] {
        let (left, right) = sides(&pool, line);
        assert!(!pool.equal(left, right).is_yes(), "{line}");
    }
}
