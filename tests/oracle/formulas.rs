//! Random formulas of the model language, from a seed.

/// The generator SplitMix64 (Steele, Lea, Flood 2014).
pub(crate) struct Random(pub(crate) u64);

impl Random {
    fn next(&mut self) -> u64 {
        self.0 = self.0.wrapping_add(0x9e37_79b9_7f4a_7c15);
        let mut z = self.0;
        z = (z ^ (z >> 30)).wrapping_mul(0xbf58_476d_1ce4_e5b9);
        z = (z ^ (z >> 27)).wrapping_mul(0x94d0_49bb_1331_11eb);
        z ^ (z >> 31)
    }

    /// A whole number below `bound`.
    pub(crate) fn below(&mut self, bound: usize) -> usize {
        (self.next() % bound as u64) as usize
    }

    /// One of a list.
    pub(crate) fn pick<T: Copy>(&mut self, list: &[T]) -> T {
        list[self.below(list.len())]
    }
}

/// Functions, most with an argument that keeps them inside their domain; `#` is any formula.
const CALLS: [&str; 30] = [
    "exp(#/3)",
    "exp(-(#)^2)",
    "log(#)",
    "log(1 + (#)^2)",
    "sqrt(#)",
    "sqrt(2 + (#)^2)",
    "1/sqrt(1 + (#)^2)",
    "sin(#)",
    "cos(#)",
    "tan((#)/4)",
    "tanh(#)",
    "sinh((#)/3)",
    "cosh((#)/3)",
    "asin(#)",
    "asin(tanh(#))",
    "acos(sin(#)/2)",
    "atan(#)",
    "asinh(#)",
    "acosh(1 + exp(#))",
    "atanh(sin(#)/2)",
    "cbrt(#)",
    "erf(#)",
    "normal_cdf(#)",
    "normal_pdf(#)",
    "normal_quantile(normal_cdf(#)/2)",
    "normal_quantile(#)",
    "(#)^2",
    "(#)^3",
    "1/(#)",
    "(#)^(1/3)",
];

/// Functions with kinks, which have no second derivative.
const KINKED: [&str; 4] = ["abs(#)", "max(#, 0.3)", "min(#, 1/2)", "sign(#)"];

/// A random formula over the given symbols.
pub(crate) fn formula(random: &mut Random, symbols: &[&str], depth: usize, kinks: bool) -> String {
    if depth == 0 || random.below(8) == 0 {
        return leaf(random, symbols);
    }
    let mut inner = || formula(random, symbols, depth - 1, kinks);
    let (a, b) = (inner(), inner());
    match random.below(12) {
        0 | 1 => format!("({a} + {b})"),
        2 => format!("({a} - {b})"),
        3 | 4 => format!("{a}*{b}"),
        5 => format!("({a})/({b})"),
        6 => format!("(1 + ({a})^2)^({b})"),
        7 if kinks => random.pick(&KINKED).replace('#', &a),
        _ => format!("({})", random.pick(&CALLS).replace('#', &a)),
    }
}

fn leaf(random: &mut Random, symbols: &[&str]) -> String {
    match random.below(6) {
        0 => (1 + random.below(9)).to_string(),
        1 => format!("0.{}", 1 + random.below(9)),
        _ => random.pick(symbols).to_string(),
    }
}

/// Ways to write the formula `#` that do not change its value where the other formula `@` has one.
const TWISTS: [&str; 12] = [
    "(#)*(sin(@)^2 + cos(@)^2)",
    "(#)*(cosh(@)^2 - sinh(@)^2)",
    "(#) + log(exp(@)) - (@)",
    "(#)*exp(@)*exp(-(@))",
    "(((#) + (@))^2 - ((#) - (@))^2)/(4*(@))",
    "(#) + erf(@) + erf(-(@))",
    "(#)/(1 + (@)^2) + (#)*(@)^2/(1 + (@)^2)",
    "(#) - tanh(@) + (exp(2*(@)) - 1)/(exp(2*(@)) + 1)",
    "(#)*sqrt(1 + (@)^2)*(1 + (@)^2)^(-1/2)",
    "(#) + normal_cdf(@) - 1 + normal_cdf(-(@))",
    "(#) + atan(@) - asin((@)/sqrt(1 + (@)^2))",
    "(#) + asinh(@) - log((@) + sqrt((@)^2 + 1))",
];

/// A formula written differently.
pub(crate) fn twisted(random: &mut Random, text: &str, symbols: &[&str]) -> String {
    let other = formula(random, symbols, 1, false);
    random.pick(&TWISTS).replace('#', text).replace('@', &other)
}
