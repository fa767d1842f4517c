//! Values at 256 bits and in double precision against digits of a general library for arithmetic of any
//! precision (mpmath 1.3, at 110 digits), and the points where a function has no value.

use std::collections::BTreeMap;

use dashu_base::Abs;

use super::{parse, pool};
use crate::symbolic::big::{self, PRECISION};
use crate::symbolic::{Big, Function, Pool, Rational};

/// `formula => digits`.
const VALUES: &str = "
erf(1/2) => 0.52049987781304653768274665389196452873645157575796370005880572564719352171685357
erf(-3) => -0.99997790950300141455862722387041767962015229291260075034276104515705754331637987
erf(1/1000) => 0.0011283787909692363799484776569048125992468632126466421387975623811772852508510619
erf(6) => 0.99999999999999997848026328750108688340664960081261536952248593831145789947210795
normal_cdf(1/2) => 0.69146246127401310363770461060833773988360217555457793682077614267915579540627954
normal_cdf(3) => 0.9986501019683699054733481852324050226221706318416193506357780146441942792354279
normal_cdf(-10) => 0.0000000000000000000000076198530241605260659733432515993083635040332779569605780353554628966156220596482
normal_cdf(-20) => 2.7536241186062336950756227808574653328074977347593305676993716545849186208828035e-89
normal_cdf(-1/8) => 0.45026177516988710702070437008952976002676008885155249875184018134569326848179589
normal_pdf(1/2) => 0.35206532676429947777468044159651765311031518037571194965546901798822319783671661
normal_pdf(-3) => 0.0044318484119380071756023526961210112431687318043410432572490999364453192375437478
normal_quantile(1/3) => -0.43072729929545749020594039277022219473820695791936211042313372883406527907421949
normal_quantile(9/10) => 1.2815515655446004669651033294487428186199078243525826597026482305657033248122454
normal_quantile(1/1000) => -3.0902323061678135415403998301073792054910084918658088556971711085435691428951456
normal_quantile(1/10^10) => -6.3613409024040562046953758282652216792039373509158361317578653502793743420159441
normal_quantile(1/10^40) => -13.310921371425170890029500956701224977746340014600232139935569852791696386852689
normal_quantile(1/10^100) => -21.27345356096532429511721218866222641864876548625167797185234044762410844379119
exp(5) => 148.41315910257660342111558004055227962348766759387898904675284511091206482095858
log(2) => 0.69314718055994530941723212145817656807550013436025525412068000949339362196969472
sqrt(2) => 1.414213562373095048801688724209698078569671875376948073176679737990732478462107
2^(1/3) => 1.2599210498948731647672106072782283505702514647015079800819751121552996765139595
2^(-3/2) => 0.35355339059327376220042218105242451964241796884423701829416993449768311961552676
2^sqrt(2) => 2.665144142690225188650297249873139848274211313714659492835979593364920446178706
2^(-sqrt(2)) => 0.37521422724648177367305847404942247525826134437107329276460114863981689661466752
(3/2)^10000 => 8.1769352134242726840918687840451866696435960856569871124445019017263064154849374e+1760
(-3/2)^9999 => -5.4512901422828484560612458560301244464290640571046580749630012678175376103232916e+1760
(2/3)^10000 => 1.2229520888930069641643382096258737745224951082039470995165949282208000349519632e-1761
cbrt(2) => 1.2599210498948731647672106072782283505702514647015079800819751121552996765139595
cbrt(-2) => -1.2599210498948731647672106072782283505702514647015079800819751121552996765139595
sin(1) => 0.84147098480789650665250232163029899962256306079837106567275170999191040439123967
cos(1) => 0.54030230586813971740093660744297660373231042061792222767009725538110039477447176
tan(1) => 1.5574077246549022305069748074583601730872507723815200383839466056988613971517273
asin(1/2) => 0.52359877559829887307710723054658381403286156656251763682915743205130273438103483
asin(1) => 1.5707963267948966192313216916397514420985846996875529104874722961539082031431045
asin(-1) => -1.5707963267948966192313216916397514420985846996875529104874722961539082031431045
acos(1/2) => 1.0471975511965977461542144610931676280657231331250352736583148641026054687620697
acos(-1) => 3.141592653589793238462643383279502884197169399375105820974944592307816406286209
atan(2) => 1.1071487177940905030170654601785370400700476454014326466765392074337103389773628
sinh(2) => 3.626860407847018767668213982801261704886342012321135721309484474934250210988785
cosh(2) => 3.7621956910836314595622134777737461082939735582307116027776433475883235850902727
tanh(2) => 0.9640275800758168839464137241009231502550299762409347760482632174131079463176102
asinh(-2) => -1.4436354751788103424932767402731052694055530031569815589830545065204916028246653
acosh(2) => 1.316957896924816708625046347307968444026981971467516479768472256920460185416444
acosh(5/4) => 0.69314718055994530941723212145817656807550013436025525412068000949339362196969472
atanh(1/2) => 0.54930614433405484569762261846126285232374527891137472586734716681874714660930448
sqrt(2) + sqrt(3) - pi => 0.0046717163521791038664916824360675613153077298122228802575421251348490890846980773
sqrt(2)*sqrt(3)/pi => 0.77969680123367610790586805027325676094346696653319322710898490165721273819141133
max(sqrt(2), sqrt(3)) => 1.7320508075688772935274463415058723669428052538103806280558069794519330169088
min(sqrt(2), sqrt(3)) => 1.414213562373095048801688724209698078569671875376948073176679737990732478462107
max(sqrt(3), sqrt(2)) => 1.7320508075688772935274463415058723669428052538103806280558069794519330169088
min(sqrt(3), sqrt(2)) => 1.414213562373095048801688724209698078569671875376948073176679737990732478462107
sign(-sqrt(2)) => -1.0
sign(sqrt(2)) => 1.0
abs(-sqrt(2)) => 1.414213562373095048801688724209698078569671875376948073176679737990732478462107
";

/// Formulas in x, and values of x for which they have none: outside of a domain, or out of all
/// proportion.
const WITHOUT_VALUE: &[(&str, &[f64])] = &[
    ("log(x)", &[0.0, -1.0]),
    ("sqrt(x)", &[-1.0]),
    ("x^(1/3)", &[-2.0]),
    ("x^sqrt(2)", &[-2.0]),
    ("1/x", &[0.0]),
    ("1/sqrt(x)", &[0.0]),
    ("asin(x)", &[1.5, -1.5]),
    ("acos(x)", &[1.5, -1.5]),
    ("acosh(x)", &[0.5, -2.0]),
    ("atanh(x)", &[1.0, -1.0, 2.0]),
    ("normal_quantile(x)", &[0.0, 1.0, 1.5, -1.0]),
    ("exp(x)", &[1e7]),
    ("sinh(x)", &[1e7]),
    ("sin(x)", &[1e300]),
    ("x^100000000", &[2.0]),
    ("erf(x)", &[100.0]),
    ("normal_cdf(x)", &[-100.0]),
];

/// A decimal number, exactly.
fn decimal(text: &str) -> Rational {
    let (digits, exponent) = text.split_once('e').unwrap_or((text, "0"));
    let (whole, fraction) = digits.split_once('.').unwrap_or((digits, ""));
    let number: dashu_int::IBig = format!("{whole}{fraction}").parse().expect("digits");
    let ten = Rational::from(10);
    let exponent: isize = exponent.parse().expect("an exponent");
    Rational::from(number) * ten.pow(exponent - fraction.len() as isize)
}

/// The difference of two numbers, relative to the second, is at most `10^-digits`.
fn agrees(found: &Big, exact: &Rational, digits: usize) -> bool {
    let exact = big::from_rational(exact, 2 * PRECISION);
    let gap = (found.clone().with_precision(2 * PRECISION).value() - &exact).abs();
    gap * big::whole(10, PRECISION).powi(digits.into()) <= exact.abs()
}

#[test]
fn values_have_all_their_digits() {
    let pool = pool();
    for line in VALUES.lines().filter(|line| !line.is_empty()) {
        let (formula, digits) = line.split_once(" => ").expect("a pair");
        let (e, exact) = (parse(&pool, formula), decimal(digits));
        let found = pool.eval_big(e, &BTreeMap::new()).expect(formula);
        assert!(agrees(&found, &exact, 72), "{formula} = {found}");
        let nearest = exact.to_f64().value();
        if let Some(rough) = pool.eval_f64(e, &BTreeMap::new()) {
            let gap = (rough - nearest).abs();
            assert!(gap <= 1e-12 * nearest.abs(), "{formula} = {rough}");
        }
    }
}

fn at(pool: &Pool, text: &str, x: f64) -> Option<Big> {
    let symbol = pool.find_symbol("x").expect("x");
    let point = Big::try_from(x).expect("a number");
    let values = BTreeMap::from([(symbol, point.with_precision(PRECISION).value())]);
    pool.eval_big(parse(pool, text), &values)
}

#[test]
fn ends_of_domains_have_a_value_and_what_is_beyond_has_none() {
    let pool = pool();
    for (text, points) in WITHOUT_VALUE {
        for &x in *points {
            assert_eq!(at(&pool, text, x), None, "{text} at {x}");
        }
    }
    for (text, x, exact) in [
        ("acosh(x)", 1.0, 0),
        ("x^(3/2)", 0.0, 0),
        ("x^3", 0.0, 0),
        ("sqrt(x)", 0.0, 0),
        ("cbrt(x)", 0.0, 0),
        ("erf(x)", 0.0, 0),
        ("cos(x)", 0.0, 1),
        ("2*normal_cdf(x)", 0.0, 1),
        ("sign(x)", 0.0, 0),
    ] {
        let found = at(&pool, text, x).expect(text);
        assert_eq!(found, big::whole(exact, PRECISION), "{text} at {x}");
    }
    // A power of a huge number that is itself no constant.
    let x = pool.find_symbol("x").expect("x");
    let huge = BTreeMap::from([(x, big::whole(2, PRECISION).powi(1000.into()))]);
    assert!(pool.eval_big(parse(&pool, "x^1000"), &huge).is_some());
    assert_eq!(pool.eval_big(parse(&pool, "x^10000"), &huge), None);
}

/// Near one, where the argument itself keeps 36 of its digits from the end: the same but for the sign
/// as near zero.
#[test]
fn the_quantile_is_odd_about_one_half() {
    let pool = pool();
    let value = |text: &str| pool.eval_big(parse(&pool, text), &BTreeMap::new());
    for level in ["1/10^40", "1/10^10", "1/3"] {
        let lower = value(&format!("normal_quantile({level})")).expect(level);
        let upper = value(&format!("normal_quantile(1 - {level})")).expect(level);
        assert!(big::to_f64(&(lower + upper)).abs() < 1e-34, "{level}");
    }
}

/// `(exp(x) - 1)/x`, which no formula spells.
#[test]
fn the_ratio_is_one_at_zero_and_the_quotient_elsewhere() {
    let pool = pool();
    let x = pool.find_symbol("x").expect("x");
    let ratio = pool.call(Function::Expm1Ratio, &[pool.var(x)]);
    let quotient = parse(&pool, "(exp(x) - 1)/x");
    for (value, at_zero) in [(2.0, false), (-3.0, false), (0.0, true)] {
        let doubles = BTreeMap::from([(x, value)]);
        let point = Big::try_from(value)
            .expect("a number")
            .with_precision(PRECISION)
            .value();
        let precise = BTreeMap::from([(x, point)]);
        let found = (
            pool.eval_f64(ratio, &doubles),
            pool.eval_big(ratio, &precise),
        );
        let (rough, fine) = (found.0.expect("a value"), found.1.expect("a value"));
        if at_zero {
            assert_eq!((rough, big::to_f64(&fine)), (1.0, 1.0));
            continue;
        }
        let exact = pool.eval_big(quotient, &precise).expect("a value");
        assert!((rough - big::to_f64(&exact)).abs() < 1e-15 * rough.abs());
        assert!(big::to_f64(&(fine - &exact)).abs() < 1e-70);
    }
}

/// Saturated, or too far out, in double precision too.
#[test]
fn tails_of_the_normal_law_in_double_precision() {
    let pool = pool();
    let value = |text: &str| pool.eval_f64(parse(&pool, text), &BTreeMap::new());
    for (text, exact) in [
        ("erf(50)", 1.0),
        ("erf(-50)", -1.0),
        ("normal_cdf(50)", 1.0),
        ("normal_cdf(-50)", 0.0),
        ("sign(0)", 0.0),
    ] {
        assert_eq!(value(text), Some(exact), "{text}");
    }
    let x = pool.find_symbol("x").expect("x");
    for (text, x_value) in [
        ("1/x", 0.0),
        ("log(x)", 0.0),
        ("exp(x)", 1000.0),
        ("sqrt(x)", -1.0),
    ] {
        let values = BTreeMap::from([(x, x_value)]);
        assert_eq!(pool.eval_f64(parse(&pool, text), &values), None, "{text}");
    }
}
