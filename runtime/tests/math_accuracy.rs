//! The worst error of each function against 128-bit arithmetic (crate `dashu-float`), in
//! units of the last place, in both arithmetic classes; and its special values.
//!
//! The bounds are the worst errors measured over 10,000 arguments each, rounded up to the
//! next tenth; the table in the documentation of `math` repeats them. Run with `--nocapture`
//! to see the measurements.

use dashu_float::FBig;
use dashu_float::round::mode::HalfEven;
use driftwright_runtime::random::{normal_pair, threefry2x64_20, uniform};
use driftwright_runtime::{Fused, Unfused, math};

type Big = FBig<HalfEven, 2>;

/// Arguments a function is tried on.
const ARGUMENTS: u64 = 2_500;

/// An exact argument with 128 bits to compute in.
fn big(x: f64) -> Big {
    let exact = Big::try_from(x).expect("a finite argument");
    exact.with_precision(128).value()
}

/// The error of `value` in units of the last place of the true result.
fn ulps(value: f64, truth: &Big) -> f64 {
    let near = truth.to_f64().value().abs();
    let unit = near.next_up() - near;
    ((big(value) - truth) / big(unit)).to_f64().value().abs()
}

/// Uniform arguments between two ends; `first` and `second` for functions of two.
fn between(low: f64, high: f64) -> impl Fn([f64; 2]) -> f64 {
    move |[u, _]| low + u * (high - low)
}

/// Arguments of both signs whose sizes are spread evenly over powers of two.
fn scales(low: i32, high: i32) -> impl Fn([f64; 2]) -> f64 {
    move |[u, v]| {
        let size = (f64::from(low) + v * f64::from(high - low)).exp2();
        if u < 0.5 { -size } else { size }
    }
}

/// The worst errors of both classes, each with its arguments.
struct Worst([(f64, [f64; 2]); 2]);

impl Worst {
    fn new() -> Worst {
        Worst([(0.0, [f64::NAN; 2]); 2])
    }

    /// Takes in the values of both classes at some arguments.
    fn update(&mut self, arguments: [f64; 2], values: [f64; 2], truth: &Big) {
        for (worst, value) in self.0.iter_mut().zip(values) {
            let error = ulps(value, truth);
            if error > worst.0 || error.is_nan() {
                *worst = (error, arguments);
            }
        }
    }

    fn check(&self, name: &str, bound: f64) {
        let [fused, unfused] = self.0;
        println!("{name}: fused {fused:?}, unfused {unfused:?}");
        assert!(fused.0 <= bound, "{name}, fused: {fused:?}");
        assert!(unfused.0 <= bound, "{name}, unfused: {unfused:?}");
    }
}

/// Holds both classes of a function to a bound.
macro_rules! accuracy {
    ($($test:ident: $function:ident, $truth:expr, $sample:expr, $bound:literal;)*) => { $(
        #[test]
        fn $test() {
            let sample: Box<dyn Fn([f64; 2]) -> f64> = Box::new($sample);
            let truth: fn(&Big) -> Big = $truth;
            let mut worst = Worst::new();
            for i in 0..ARGUMENTS {
                let x = sample(threefry2x64_20([20_261_201, 0], [i, 0]).map(uniform));
                let values = [math::$function::<Fused>(x), math::$function::<Unfused>(x)];
                worst.update([x, 0.0], values, &truth(&big(x)));
            }
            worst.check(stringify!($test), $bound);
        }
    )* };
}

accuracy! {
    exp_in_steps: exp, Big::exp, between(-1.0, 1.0), 0.7;
    exp_everywhere: exp, Big::exp, between(-708.0, 709.7), 0.7;
    expm1_small: expm1, Big::exp_m1, scales(-40, 1), 1.3;
    expm1_everywhere: expm1, Big::exp_m1, between(-60.0, 709.7), 1.0;
    ln_near_one: ln, Big::ln, between(0.5, 2.0), 0.8;
    ln_everywhere: ln, Big::ln, |u| scales(-1022, 1023)(u).abs(), 0.6;
    sin_small: sin, Big::sin, between(-7.0, 7.0), 0.9;
    sin_large: sin, Big::sin, scales(3, 49), 0.8;
    cos_small: cos, Big::cos, between(-7.0, 7.0), 0.8;
    cos_large: cos, Big::cos, scales(3, 49), 0.8;
    tan: tan, Big::tan, scales(-10, 10), 0.7;
    sinh: sinh, Big::sinh, scales(-30, 9), 1.7;
    cosh: cosh, Big::cosh, scales(-30, 9), 1.1;
    tanh: tanh, Big::tanh, scales(-30, 5), 2.0;
    asin: asin, Big::asin, between(-1.0, 1.0), 0.8;
    acos: acos, Big::acos, between(-1.0, 1.0), 0.9;
    atan: atan, Big::atan, scales(-30, 30), 0.8;
    asinh: asinh, Big::asinh, scales(-30, 30), 1.3;
    acosh: acosh, Big::acosh, |u| 1.0 + scales(-20, 30)(u).abs(), 1.8;
    atanh: atanh, Big::atanh, between(-1.0, 1.0), 1.5;
    cbrt: cbrt, |x| x.nth_root(3), scales(-100, 100), 0.6;
    normal_pdf: normal_pdf, density, between(-38.0, 38.0), 1.9;
}

/// The normal density from its definition.
fn density(x: &Big) -> Big {
    let exponent = -(x * x) / big(2.0);
    exponent.exp() / (big(2.0) * Big::pi(128)).sqrt()
}

/// `x^y` for arguments with results all over the range of doubles.
#[test]
fn pow_everywhere() {
    for widest in [0.001, 0.5, 4.0, 900.0] {
        let mut worst = Worst::new();
        for i in 0..ARGUMENTS / 2 {
            let [u, v] = threefry2x64_20([20_261_201, 1], [i, 0]).map(uniform);
            let x = (widest * (2.0 * u - 1.0)).exp2();
            let y = 1000.0 * (2.0 * v - 1.0) / widest;
            let values = [math::pow::<Fused>(x, y), math::pow::<Unfused>(x, y)];
            worst.update([x, y], values, &big(x).powf(&big(y)));
        }
        worst.check(&format!("pow to 2^{widest}"), 0.7);
    }
}

/// Values that must come out exactly; NaN stands for any NaN.
#[test]
fn special_values() {
    let (inf, nan) = (f64::INFINITY, f64::NAN);
    let same = |name: &str, value: f64, expected: f64| {
        let equal = value.to_bits() == expected.to_bits() || (value.is_nan() && expected.is_nan());
        assert!(equal, "{name}: {value} instead of {expected}");
    };
    same("exp(0)", math::exp::<Fused>(0.0), 1.0);
    same("exp(inf)", math::exp::<Fused>(inf), inf);
    same("exp(-inf)", math::exp::<Fused>(-inf), 0.0);
    same("exp(nan)", math::exp::<Fused>(nan), nan);
    same("exp(710)", math::exp::<Fused>(710.0), inf);
    same("exp(-745.1)", math::exp::<Fused>(-745.1), 4.9e-324);
    same("exp(-746)", math::exp::<Fused>(-746.0), 0.0);
    same("expm1(-0)", math::expm1::<Fused>(-0.0), -0.0);
    same("expm1(-inf)", math::expm1::<Fused>(-inf), -1.0);
    same("expm1(inf)", math::expm1::<Fused>(inf), inf);
    same("ln(0)", math::ln::<Fused>(0.0), -inf);
    same("ln(-0)", math::ln::<Fused>(-0.0), -inf);
    same("ln(1)", math::ln::<Fused>(1.0), 0.0);
    same("ln(-1)", math::ln::<Fused>(-1.0), nan);
    same("ln(inf)", math::ln::<Fused>(inf), inf);
    same("ln(nan)", math::ln::<Fused>(nan), nan);
    same(
        "ln(2^-1074)",
        math::ln::<Fused>(4.9e-324),
        -744.440_071_921_381_2,
    );
    same("sin(-0)", math::sin::<Fused>(-0.0), -0.0);
    same("sin(inf)", math::sin::<Fused>(inf), nan);
    same("sin(1e16)", math::sin::<Fused>(1e16), nan);
    same("cos(0)", math::cos::<Fused>(0.0), 1.0);
    same("sinh(-0)", math::sinh::<Fused>(-0.0), -0.0);
    same("sinh(-inf)", math::sinh::<Fused>(-inf), -inf);
    same("cosh(-inf)", math::cosh::<Fused>(-inf), inf);
    same("cosh(710.4)", math::cosh::<Fused>(710.4), libm::cosh(710.4));
    same("tanh(inf)", math::tanh::<Fused>(inf), 1.0);
    same("tanh(nan)", math::tanh::<Fused>(nan), nan);
    same("normal_cdf(-inf)", math::normal_cdf::<Fused>(-inf), 0.0);
    same("normal_cdf(inf)", math::normal_cdf::<Fused>(inf), 1.0);
    same("normal_cdf(nan)", math::normal_cdf::<Fused>(nan), nan);
    same("normal_pdf(inf)", math::normal_pdf::<Fused>(inf), 0.0);
    same(
        "normal_quantile(0)",
        math::normal_quantile::<Fused>(0.0),
        -inf,
    );
    same(
        "normal_quantile(1)",
        math::normal_quantile::<Fused>(1.0),
        inf,
    );
    same(
        "normal_quantile(1.5)",
        math::normal_quantile::<Fused>(1.5),
        nan,
    );
    same("sign(-0)", math::sign::<Fused>(-0.0), -0.0);
    same("sign(-3)", math::sign::<Fused>(-3.0), -1.0);
    same("sign(nan)", math::sign::<Fused>(nan), nan);
    same("min(nan, 1)", math::min::<Fused>(nan, 1.0), 1.0);
    same("min(1, nan)", math::min::<Fused>(1.0, nan), nan);
    same("max(-0, 0)", math::max::<Fused>(-0.0, 0.0), 0.0);
    same("powi(2, -3)", math::powi::<Fused>(2.0, -3), 0.125);
    same("powi(0, 0)", math::powi::<Fused>(0.0, 0), 1.0);
}

/// Every pair of special arguments of `x^y` against the rules of IEEE 754-2019, section
/// 9.2.1, as the crate `libm` implements them.
#[test]
fn special_powers() {
    let specials = [
        0.0,
        0.5,
        1.0,
        2.0,
        3.0,
        1.5,
        1e300,
        5e-324,
        1e17,
        f64::MAX,
        f64::INFINITY,
        f64::NAN,
        4_503_599_627_370_497.0,
    ];
    let signed = specials.iter().flat_map(|&x| [x, -x]);
    for x in signed.clone() {
        for y in signed.clone() {
            for value in [math::pow::<Fused>(x, y), math::pow::<Unfused>(x, y)] {
                let rule = libm::pow(x, y);
                let close = (value - rule).abs() <= 2.0 * f64::EPSILON * rule.abs();
                let same = value.is_sign_negative() == rule.is_sign_negative();
                let fits = value == rule || close;
                let nan = value.is_nan() && rule.is_nan();
                assert!(nan || (fits && same), "{x}^{y}: {value} instead of {rule}");
            }
        }
    }
}

/// The normals of a pair of words are those of Box and Muller's transform (1958), computed
/// here in 128 bits, to a few units in the last place of the larger one.
#[test]
fn normals_are_those_of_the_transform() {
    let mut worst = 0.0_f64;
    for i in 0..ARGUMENTS {
        let words = threefry2x64_20([20_261_201, 2], [i, 0]);
        let [u, v] = words.map(|word| big(uniform(word)));
        let radius = (big(-2.0) * u.ln()).sqrt();
        let angle = big(2.0) * Big::pi(128) * v;
        let truths = [&radius * angle.cos(), &radius * angle.sin()];
        let unit = radius.to_f64().value() * f64::EPSILON;
        for pair in [normal_pair::<Fused>(words), normal_pair::<Unfused>(words)] {
            for (z, truth) in pair.into_iter().zip(&truths) {
                let error = (big(z) - truth).to_f64().value().abs();
                worst = worst.max(error / unit);
            }
        }
    }
    println!("normals: {worst}");
    assert!(worst <= 1.5, "{worst}");
}
