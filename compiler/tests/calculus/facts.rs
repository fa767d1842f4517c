//! Facts with conditions in the author's parameters, against handbooks and papers.

use driftwright::analysis::condition::Standing;
use driftwright::analysis::facts::{Fact, Topic};
use driftwright::pipeline::Compiled;

use super::common::compiled;

/// A model with one state and one driver; `rest` holds its parameters and what else there is.
fn model(drift: &str, diffusion: &str, domain: &str, rest: &str) -> Compiled {
    compiled(&format!(
        "[model]\nname = \"case\"\ndrivers = [\"W\"]\n[states.x]\ninitial = \"0.5\"\ndrift = \"{drift}\"\n\
         diffusion = \"{diffusion}\"\ndomain = {domain}\n{rest}"
    ))
}

const POSITIVE: &str = "[parameters]\nkappa = { value = 1, range = \"(0, inf)\" }\n\
     theta = { value = 0.04, range = \"(0, inf)\" }\nsigma = { value = 0.2, range = \"(0, inf)\" }\n";

fn of(compiled: &Compiled, topic: Topic) -> Vec<&Fact> {
    compiled.facts.iter().filter(|f| f.topic == topic).collect()
}

/// Statement, condition and standing of the first fact of a topic.
fn first(compiled: &Compiled, topic: Topic) -> (String, Option<String>, Standing) {
    let fact = of(compiled, topic)[0];
    let condition = fact.condition_text(&compiled.model);
    (fact.statement.clone(), condition, fact.standing)
}

fn classes(compiled: &Compiled, fact: &Fact) -> Vec<(&'static str, String)> {
    let pool = &compiled.model.pool;
    let text = |when| driftwright::analysis::condition::format(pool, std::slice::from_ref(when));
    fact.classes
        .iter()
        .map(|(c, when)| (*c, text(when)))
        .collect()
}

/// Feller 1951; Cox, Ingersoll and Ross 1985, section 3: the square-root process does not attain 0 if and only if
/// `2 kappa theta >= sigma^2`. An assumption that says so implies it, its contrary contradicts it, a weaker one leaves
/// it open.
#[test]
fn fellers_condition_against_assumptions() {
    let condition = Some("2*kappa*theta >= sigma^2".to_owned());
    for (assumption, standing) in [
        ("2*kappa*theta >= sigma^2", Standing::Implied),
        ("kappa*theta > sigma^2", Standing::Implied),
        ("2*kappa*theta < sigma^2", Standing::Contradicted),
        ("3*kappa*theta >= sigma^2", Standing::Open),
    ] {
        let rest = format!("{POSITIVE}[assumptions]\na = \"{assumption}\"\n");
        let found = model(
            "kappa*(theta - x)",
            "sigma*sqrt(x)",
            "\"[0, inf)\"\nat_edge = \"as_equation\"",
            &rest,
        );
        let expected = (
            "x does not attain 0".to_owned(),
            condition.clone(),
            standing,
        );
        assert_eq!(first(&found, Topic::Boundary), expected, "{assumption}");
        let checked = of(&found, Topic::Boundary)[0]
            .to_check(&found.model)
            .is_some();
        assert_eq!(checked, standing == Standing::Open);
    }
}

/// Karlin and Taylor 1981, section 15.6, example 8: both ends of the Jacobi diffusion, in the author's parameters.
#[test]
fn both_ends_of_a_jacobi_diffusion() {
    let rest = "[parameters]\nk = { value = 1, range = \"(0, inf)\" }\nm = { value = 0.4, range = \"(0, 1)\" }\n\
                s = { value = 0.5, range = \"(0, inf)\" }\n";
    let found = model("k*(m - x)", "s*sqrt(x*(1 - x))", "\"(0, 1)\"", rest);
    let facts = of(&found, Topic::Boundary);
    let text = |fact: &Fact| {
        (
            fact.statement.clone(),
            fact.condition_text(&found.model).unwrap(),
        )
    };
    let [lower, upper] = [text(facts[0]), text(facts[1])];
    assert_eq!(lower, ("x does not attain 0".into(), "2*k*m >= s^2".into()));
    assert_eq!(
        upper,
        ("x does not attain 1".into(), "2*k*(1 - m) >= s^2".into())
    );
}

/// Constant elasticity of variance, `gamma` a parameter: 0 is natural from 1 on, exit from 1/2 to 1, regular below
/// (Borodin and Salminen 2002, section II.6; Davydov and Linetsky 2001, "Pricing and hedging path-dependent options
/// under the CEV process", section 2); the discounted price is a true martingale up to 1 and a strict local one beyond
/// (Delbaen and Shirakawa 2002).
#[test]
fn constant_elasticity_with_an_elasticity_to_be_given() {
    let rest = |range: &str| {
        format!(
            "at_edge = \"absorb\"\n[parameters]\nmu = 0.02\nsigma = {{ value = 0.2, range = \"(0, inf)\" }}\n\
             gamma = {{ range = \"{range}\" }}\n"
        )
    };
    let price = |range: &str| model("mu*x", "sigma*x^gamma", "\"[0, inf)\"", &rest(range));
    let open = price("(0, 2)");
    let end = of(&open, Topic::Boundary)[0];
    assert_eq!(end.condition_text(&open.model).unwrap(), "gamma >= 1");
    let expected = [
        ("exit", "gamma < 1 and 2*gamma >= 1"),
        ("regular", "2*gamma < 1"),
        ("natural", "gamma >= 1"),
    ];
    assert_eq!(
        classes(&open, end),
        expected.map(|(c, w)| (c, w.to_owned()))
    );
    for (range, standing) in [
        ("(0, 2)", Standing::Open),
        ("[1/2, 1]", Standing::Implied),
        ("(1, 3)", Standing::Contradicted),
    ] {
        let found = first(&price(range), Topic::Martingale);
        let statement = "exp(-mu*t)*x is a martingale".to_owned();
        assert_eq!(
            found,
            (statement, Some("gamma <= 1".into()), standing),
            "{range}"
        );
    }
}

/// The elasticity that Chan, Karolyi, Longstaff and Sanders 1992 estimate: a mean-reverting rate stays positive above
/// 1/2, and at 1/2 under Feller's condition (Andersen and Piterbarg 2007, section 2.3).
#[test]
fn mean_reversion_with_an_elasticity_to_be_given() {
    let rest = POSITIVE.to_owned() + "gamma = { value = 0.7, range = \"(0, 2)\" }\n";
    let found = model("kappa*(theta - x)", "sigma*x^gamma", "\"(0, inf)\"", &rest);
    let (_, condition, standing) = first(&found, Topic::Boundary);
    let expected = "2*gamma = 1 and 2*kappa*theta >= sigma^2, or 2*gamma > 1";
    assert_eq!(
        (condition.as_deref(), standing),
        (Some(expected), Standing::Open)
    );
}

/// `dx = x^2 dW + b x^3 dt` explodes if and only if `b > 1/2` (comparison with `1/W`, which is the case `b = 1`; Feller's test
/// with `c = 2 (1 - b)` at `1/x = 0`: Karatzas and Shreve 1991, section 5.5); a quadratic rate explodes.
#[test]
fn explosion_with_its_condition() {
    let rest = "[parameters]\nb = { value = 0.2, range = \"(0, inf)\" }\n";
    let found = model("b*x^3", "x^2", "\"(0, inf)\"", rest);
    let (statement, condition, standing) = first(&found, Topic::Explosion);
    assert_eq!(statement, "x does not explode to inf");
    assert_eq!(
        (condition.as_deref(), standing),
        (Some("2*b <= 1"), Standing::Open)
    );
    let certain = model("1 + x^2", "1", "\"(-inf, inf)\"", "");
    let facts = of(&certain, Topic::Explosion);
    let of_upper = facts
        .iter()
        .find(|f| f.statement.ends_with("to inf"))
        .unwrap();
    assert_eq!(of_upper.standing, Standing::Contradicted);
    let none = model("-x^3", "1", "\"(-inf, inf)\"", "");
    assert_eq!(
        first(&none, Topic::Explosion),
        ("x does not explode".into(), None, Standing::Implied)
    );
    let growth = first(&none, Topic::Growth);
    assert_eq!(growth.2, Standing::Contradicted);
}

/// Driftless noise that grows faster than linearly gives a strict local martingale (Delbaen and Shirakawa 2002), on
/// the line as well (Kotani 2006); noise of linear growth, with a factor that is no power, a true one.
#[test]
fn no_strict_local_martingale_is_certified() {
    for (diffusion, domain, standing) in [
        ("x^2", "\"(0, inf)\"", Standing::Contradicted),
        ("x*(1 + x)", "\"(0, inf)\"", Standing::Contradicted),
        ("1 + x^2", "\"(-inf, inf)\"", Standing::Contradicted),
        ("sqrt(1 + x^2)", "\"(-inf, inf)\"", Standing::Implied),
        ("x/(1 + x)", "\"(0, inf)\"", Standing::Implied),
        ("x^(9/10)*(1 + x)^(1/10)", "\"(0, inf)\"", Standing::Implied),
        (
            "x^(9/10)*(1 + x)^(1/5)",
            "\"(0, inf)\"",
            Standing::Contradicted,
        ),
    ] {
        let found = first(&model("0", diffusion, domain, ""), Topic::Martingale);
        assert_eq!(found.2, standing, "{diffusion}");
    }
    // Reflection adds what Ito's drift does not show.
    let reflected = model("0", "1", "\"[0, inf)\"\nat_edge = \"reflect\"", "");
    assert!(of(&reflected, Topic::Martingale).is_empty());
}

/// Commuting noise by Lie brackets (Kloeden and Platen 1992, section 10.3), closed moments by degrees (Cuchiero,
/// Keller-Ressel and Teichmann 2012): the price under square-root variance has neither, its variance the second.
#[test]
fn price_under_stochastic_variance() {
    let found = compiled(&format!(
        "[model]\nname = \"case\"\ndrivers = [\"W\", \"B\"]\n{POSITIVE}\
         [states.S]\ninitial = \"1\"\ndrift = \"0\"\ndiffusion = {{ W = \"sqrt(v)*S\" }}\ndomain = \"(0, inf)\"\n\
         [states.v]\ninitial = \"theta\"\ndrift = \"kappa*(theta - v)\"\ndiffusion = {{ B = \"sigma*sqrt(v)\" }}\n\
         domain = \"[0, inf)\"\nat_edge = \"as_equation\"\n"
    ));
    let (statement, _, standing) = first(&found, Topic::Commutativity);
    assert_eq!(statement, "the noises of W and B commute in S");
    assert_eq!(standing, Standing::Contradicted);
    let polynomial: Vec<_> = of(&found, Topic::Moments)
        .into_iter()
        .map(|f| (f.statement.as_str(), f.standing))
        .collect();
    let expected = [
        ("v is a polynomial process", Standing::Implied),
        ("S is a polynomial process", Standing::Contradicted),
    ];
    assert_eq!(polynomial, expected);
    let martingale = first(&found, Topic::Martingale);
    assert_eq!(
        (martingale.0.as_str(), martingale.2),
        ("S is a martingale", Standing::Implied)
    );
    let end = of(&found, Topic::Boundary)[0];
    assert_eq!(end.statement, "S does not attain 0");
    assert_eq!(end.standing, Standing::Implied);
}
