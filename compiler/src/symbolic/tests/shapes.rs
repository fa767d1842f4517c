//! What `simplify` makes of formulas, and how formulas print: a list a reviewer can read.

use super::{parse, pool};

/// `given => simplified`.
const SHAPES: &str = "
mu*x*(1/x) + (1/2)*(sigma*x)^2*(-1/x^2) => mu - sigma^2/2
mu*x + sigma^2*x/2 => (mu + sigma^2/2)*x
kappa*theta - kappa*log(x) => kappa*(theta - log(x))
kappa*(theta - x) => kappa*(theta - x)
-mu*x/x^2 + sigma^2*x^2/x^3*x => sigma^2 - mu/x
-mu/x^2*x + sigma^2*x^2/x^3 => (sigma^2 - mu)/x
2*x*mu*x + sigma^2*x^2 => (2*mu + sigma^2)*x^2
2*x*kappa*(theta - x) + sigma^2*x => x*(sigma^2 + 2*kappa*(theta - x))
exp(x)*exp(y) => exp(x + y)
exp(-mu*t)*mu*x - mu*exp(-mu*t)*x => 0
exp(kappa*t)*kappa*x + exp(kappa*t)*kappa*(theta - x) => kappa*theta*exp(kappa*t)
sqrt(x)*sqrt(x) => x
kappa*(theta - x)/(2*sqrt(x)) - sigma^2*x/(8*x^(3/2)) => (4*kappa*(theta - x) - sigma^2)/(8*sqrt(x))
x^a*x => x^(a + 1)
(x^2 - y^2)/(x - y) - y => x
x^2 + 2*x*y + y^2 => (x + y)^2
x^2 - 1 => x^2 - 1
(x + 1)^200 => (x + 1)^200
(x - 1)/(x - 1) => 1
a*b + a*c => a*(b + c)
x + x*y => x*(y + 1)
1 - tanh(x)^2 => 1 - tanh(x)^2
sin(x)^2 + cos(x)^2 => 1
2*(a + b) - 2*a => 2*b
x/2 + x/3 => 5*x/6
0.05*x => 0.05*x
log(x^3)/3 => log(x)
sigma*sqrt(x)*(sigma/(2*sqrt(x))) => sigma^2/2
(a*x + b*x)/(a + b) => x
1/(1/x) => x
sqrt(p^2*x) => p*sqrt(x)
log(exp(2*x)) => 2*x
a*(b + c) + a*(b - c) => 2*a*b
x*(1 - x)*(1 - 2*x) => x*(1 - 2*x)*(1 - x)
mu*(1 - x) - sigma^2*x*(1 - x)^2 => (1 - x)*(mu + sigma^2*x*(x - 1))
normal_pdf(x)*x - x*normal_pdf(x) => 0
(exp(2*a*t) - 1)/(2*a) => (exp(2*a*t) - 1)/(2*a)
max(x - 40, 0) => max(x - 40, 0)
kappa*(theta - u)/(u*(1 - u)) + sigma^2*u*(1 - u)/2*(1/(1 - u)^2 - 1/u^2) => (kappa*(theta - u) + sigma^2*(u - 1/2))/(u*(1 - u))
-r*exp(-r*t)*S + mu*S*exp(-r*t) => (mu - r)*exp(-r*t)*S
a*X*Y + b*X*Y + c*p*q*X*Y => (a + b + c*p*q)*X*Y
(2*x)*(-a*x) + (2*y)*(-a*y) + sigma^2 + sigma^2 => 2*(sigma^2 - a*(x^2 + y^2))
x/sqrt(x^2 + y^2)*a*x + y/sqrt(x^2 + y^2)*a*y => a*sqrt(x^2 + y^2)
S^(1 - a)*mu + (1 - a)*(-a)*S^(-a - 1)*sigma^2*S^(2*a)/2*0 => mu*S^(1 - a)
(1 - a)*S^(-a)*mu*S + (1 - a)*(-a)*S^(-a - 1)*sigma^2*S^(2*a)/2 => mu*(1 - a)*S^(1 - a) + a*sigma^2*(a - 1)*S^(a - 1)/2
2*kappa*theta*S - 2*kappa*S^2 + sigma^2*S => S*(sigma^2 + 2*kappa*(theta - S))
theta*(1 - exp(-kappa*t)) + x*exp(-kappa*t) => theta*(1 - exp(-kappa*t)) + exp(-kappa*t)*x
theta + (x - theta)*exp(-kappa*t) => theta + exp(-kappa*t)*(x - theta)
sigma^2/(2*kappa)*(1 - exp(-2*kappa*t)) => sigma^2*(1 - exp(-2*kappa*t))/(2*kappa)
cosh(x)*tanh(x)/sinh(x) => 1
S*(mu - sigma^2/2) + sigma^2*S/2 => mu*S
";

#[test]
fn simplified_shapes() {
    let pool = pool();
    let mut failures = Vec::new();
    for line in SHAPES.lines().filter(|line| !line.is_empty()) {
        let (given, expected) = line.split_once(" => ").expect("a pair");
        let e = parse(&pool, given);
        let simplified = pool.simplify(e);
        let text = pool.format(simplified);
        if text != expected {
            failures.push(format!(
                "{given}\n   gives    {text}\n   expected {expected}"
            ));
        }
        assert_eq!(
            parse(&pool, &text),
            simplified,
            "{text} parses to what was printed"
        );
        assert!(pool.equal(e, simplified).is_yes(), "{text} equals {given}");
    }
    assert!(failures.is_empty(), "{}", failures.join("\n"));
}

/// Long sums: what costs more than time proportional to the length would be noticed here.
#[test]
fn long_sums_are_quick() {
    let pool = pool();
    let text: Vec<String> = (1..=20_000).map(|i| format!("{i}*x^{i}")).collect();
    let sum = parse(&pool, &text.join(" + "));
    assert!(pool.equal(sum, sum).is_yes());
    let slope = pool.derivative(sum, pool.find_symbol("x").expect("x"));
    let twice = pool.add(slope, slope);
    assert!(
        pool.is_zero(pool.sub(twice, pool.mul(pool.int(2), slope)))
            .is_yes()
    );
}

/// Deep nesting must not overflow the stack, nor large powers be multiplied out.
#[test]
fn deep_and_large_formulas_end() {
    let pool = pool();
    let mut e = parse(&pool, "x");
    for depth in 0..300 {
        e = pool.log(pool.add(pool.square(e), pool.one()));
        if depth == 60 {
            assert_eq!(parse(&pool, &pool.format(e)), e);
        }
    }
    assert!(pool.equal(e, e).is_yes());
    pool.simplify(e);
    let x = pool.find_symbol("x").expect("x");
    assert!(!pool.is_zero(pool.derivative(e, x)).is_yes());
    let power = parse(&pool, "(x + y + z + a + b)^200");
    assert_eq!(pool.simplify(power), power);
    assert!(pool.equal(power, pool.mul(power, pool.int(2))).is_no());
}
