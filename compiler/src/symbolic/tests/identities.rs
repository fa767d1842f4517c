//! Identities that the zero test must prove.
//!
//! The names of the symbols tell their ranges: see [`super::pool`]. Algebra, exponentials and
//! logarithms: NIST Digital Library of Mathematical Functions (Olver and others 2010), sections 4.8
//! and 4.10; circular functions 4.21 and 4.24; hyperbolic functions 4.35 and 4.37; error function and
//! normal law 7.2 and 7.17.

use super::{pool, sides};
use crate::symbolic::Truth;

const IDENTITIES: &str = "
(x + y)^2 = x^2 + 2*x*y + y^2
(x - y)*(x + y) = x^2 - y^2
(x + y)^3 - (x - y)^3 = 6*x^2*y + 2*y^3
(x^2 - y^2)/(x - y) = x + y
(x^2 - y^2)/(x - y) - y = x
(x^3 - y^3)/(x - y) = x^2 + x*y + y^2
(x^4 - 1)/(x^2 + 1) = x^2 - 1
1/(x - 1) - 1/(x + 1) = 2/(x^2 - 1)
1/(x*(x + 1)) = 1/x - 1/(x + 1)
x/(x + y) + y/(x + y) = 1
(a*x + b)/(a*x + b) = 1
((x + 1)^2 - (x - 1)^2)/(4*x) = 1
(x + y + z)^2 - (x^2 + y^2 + z^2) = 2*(x*y + y*z + z*x)
x^5*x^(-3) = x^2
(x*y)^3 = x^3*y^3
1/(1/x + 1/y) = x*y/(x + y)
(x^2 + 3*x + 2)/(x + 1) - (x + 2) = 0
(x^2*y + x*y^2)/(x*y) = x + y
(a^2 - 2*a*b + b^2)/(a - b) = a - b
1/(x + 1/(x + 1/x)) = (x^2 + 1)/(x^3 + 2*x)
(x^6 - y^6)/((x - y)*(x^2 + x*y + y^2)) = (x + y)*(x^2 - x*y + y^2)
(x - 1)*(x - 2)*(x - 3) = x^3 - 6*x^2 + 11*x - 6
0.1 + 0.2 = 0.3
kappa*(theta - x) = kappa*theta - kappa*x
sqrt(x)^2 = x
sqrt(x)*sqrt(x) = x
sqrt(p*q) = sqrt(p)*sqrt(q)
sqrt(p^2) = p
sqrt(p/q) = sqrt(p)/sqrt(q)
sqrt(p^3) = p*sqrt(p)
sqrt(x^3) = x*sqrt(x)
sqrt(12) = 2*sqrt(3)
sqrt(8)*sqrt(2) = 4
sqrt(2)*sqrt(3) = sqrt(6)
sqrt(1/2) = sqrt(2)/2
1/(sqrt(2) - 1) = sqrt(2) + 1
1/(sqrt(x) - sqrt(y)) = (sqrt(x) + sqrt(y))/(x - y)
(sqrt(x) + sqrt(y))*(sqrt(x) - sqrt(y)) = x - y
sqrt(4*x + 4*y) = 2*sqrt(x + y)
sqrt(x^2 + 2*x + 1)^2 = (x + 1)^2
sqrt(p^2 + 2*p*q + q^2) = p + q
sqrt(x + y)*sqrt(x + y) = x + y
(x + y)^(3/2) = (x + y)*sqrt(x + y)
(x + y)/sqrt(x + y) = sqrt(x + y)
sqrt(x^2) = abs(x)
sqrt(w^2) = -w
sqrt(x^2*y^2) = abs(x)*abs(y)
sqrt(1 - u)^2 = 1 - u
p^a*p^b = p^(a + b)
(p^a)^b = p^(a*b)
(p*q)^a = p^a*q^a
p^a/p^(a - 1) = p
x^a*x = x^(a + 1)
2^a*3^a = 6^a
4^a = 2^(2*a)
p^(1/3)*p^(2/3) = p
(p^2)^(1/4) = sqrt(p)
x^0.7*x^0.3 = x
sqrt(sqrt(p)) = p^0.25
8^(2/3) = 4
cbrt(x)^3 = x
cbrt(x*y) = cbrt(x)*cbrt(y)
cbrt(-x) = -cbrt(x)
cbrt(8*x) = 2*cbrt(x)
cbrt(x^3) = x
cbrt(p) = p^(1/3)
exp(x)*exp(y) = exp(x + y)
exp(x)/exp(y) = exp(x - y)
exp(2*x) - exp(x)^2 = 0
(exp(x) - 1)*(exp(x) + 1) = exp(2*x) - 1
(exp(2*x) - 1)/(exp(x) - 1) = exp(x) + 1
exp(a*log(p)) = p^a
exp(log(x) + y) = x*exp(y)
exp(3*log(x)) = x^3
exp(log(x)/2) = sqrt(x)
exp(-log(x)) = 1/x
sqrt(exp(x)) = exp(x/2)
exp(x)^a = exp(a*x)
exp((x + y)^2) = exp(x^2)*exp(2*x*y)*exp(y^2)
exp(x/(y + 1))*exp(-x/(1 + y)) = 1
exp(mu*t - sigma^2*t/2) = exp(mu*t)*exp(-sigma^2/2*t)
log(exp(x)) = x
log(p*q) = log(p) + log(q)
log(p/q) = log(p) - log(q)
log(p^a) = a*log(p)
log(x^3) = 3*log(x)
log(x^2) = 2*log(abs(x))
log(sqrt(x)) = log(x)/2
log(6) = log(2) + log(3)
log(8)/log(2) = 3
log(1/p) = -log(p)
log(p*exp(x)) = log(p) + x
log(2*x) = log(2) + log(x)
log(p^2 + 2*p*q + q^2) = 2*log(p + q)
log((1 - u)*u) = log(1 - u) + log(u)
log(u/(1 - u)) = log(u) - log(1 - u)
log(w^2) = 2*log(-w)
sin(x)^2 + cos(x)^2 = 1
sin(2*x) = 2*sin(x)*cos(x)
cos(2*x) = 1 - 2*sin(x)^2
sin(x + y) = sin(x)*cos(y) + cos(x)*sin(y)
cos(x - y) = cos(x)*cos(y) + sin(x)*sin(y)
sin(3*x) = 3*sin(x) - 4*sin(x)^3
cos(x/2)^2 = (1 + cos(x))/2
tan(x) = sin(x)/cos(x)
1 + tan(x)^2 = 1/cos(x)^2
tan(2*x) = 2*tan(x)/(1 - tan(x)^2)
tan(x/2) = (1 - cos(x))/sin(x)
sin(-x) = -sin(x)
cos(x - y) = cos(y - x)
sin(x + pi) = -sin(x)
sin(pi/2 - x) = cos(x)
cos(pi/3) = 1/2
sin(pi) = 0
sin(pi/4) = sqrt(2)/2
sin(x)*sin(y) = (cos(x - y) - cos(x + y))/2
sin(asin(x)) = x
cos(asin(x)) = sqrt(1 - x^2)
sin(2*atan(x)) = 2*x/(1 + x^2)
tan(atan(x)) = x
acos(x) + asin(x) = pi/2
sin(acos(x)) = sqrt(1 - x^2)
cosh(x)^2 - sinh(x)^2 = 1
sinh(2*x) = 2*sinh(x)*cosh(x)
tanh(x) = sinh(x)/cosh(x)
1 - tanh(x)^2 = 1/cosh(x)^2
cosh(x) + sinh(x) = exp(x)
tanh(x) = (exp(2*x) - 1)/(exp(2*x) + 1)
tanh(2*x) = 2*tanh(x)/(1 + tanh(x)^2)
sinh(x + y) = sinh(x)*cosh(y) + cosh(x)*sinh(y)
tanh(x/2) = sinh(x)/(1 + cosh(x))
sinh(asinh(x)) = x
cosh(asinh(x)) = sqrt(1 + x^2)
tanh(atanh(x)) = x
cosh(acosh(x)) = x
asinh(x) = log(x + sqrt(x^2 + 1))
exp(2*atanh(u)) = (1 + u)/(1 - u)
sinh(log(p)) = (p - 1/p)/2
normal_pdf(x) = exp(-x^2/2)/sqrt(2*pi)
normal_pdf(-x) = normal_pdf(x)
normal_cdf(-x) = 1 - normal_cdf(x)
normal_cdf(x - y) + normal_cdf(y - x) = 1
erf(x) = 2*normal_cdf(sqrt(2)*x) - 1
erf(-x) = -erf(x)
normal_cdf(normal_quantile(u)) = u
normal_pdf(x)*exp(x^2/2) = 1/sqrt(2*pi)
abs(x)^2 = x^2
abs(x*y) = abs(x)*abs(y)
abs(-x) = abs(x)
abs(p*x) = p*abs(x)
abs(x/y) = abs(x)/abs(y)
max(x, y) + min(x, y) = x + y
max(x, y) = max(y, x)
max(x, y) - min(x, y) = abs(x - y)
max(x, 0) - max(-x, 0) = x
";

#[test]
fn identities_are_proved() {
    let mut failures = Vec::new();
    let lines: Vec<&str> = IDENTITIES.lines().filter(|line| !line.is_empty()).collect();
    assert!(lines.len() >= 100);
    let pool = pool();
    for line in lines {
        let (left, right) = sides(&pool, line);
        match pool.equal(left, right) {
            Truth::Yes => {}
            other => failures.push(format!("{line}: {other:?}")),
        }
    }
    assert!(failures.is_empty(), "not proved:\n{}", failures.join("\n"));
}
