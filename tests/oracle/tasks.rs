//! What the oracle is asked: formulas as given, and what the compiler makes of them.

use driftwright::calculus::dynamics;
use driftwright::diagnostic::Diagnostics;
use driftwright::front;
use driftwright::front::formula::parse_in_pool;
use driftwright::source::SourceFile;
use driftwright::symbolic::{Bound, Expr, Interval, Pool, SymbolKind, Truth};
use serde_json::{Map, Value, json};

use crate::formulas::{Random, formula, twisted};

/// Symbols with the box that points are drawn from: `x` and `y` are any number, `p` is positive, `u`
/// between 0 and 1.
const SYMBOLS: [(&str, f64, f64); 4] = [
    ("x", -2.0, 2.0),
    ("y", -1.5, 2.5),
    ("p", 0.0, 3.0),
    ("u", 0.0, 1.0),
];

fn pool() -> Pool {
    let pool = Pool::new();
    for (name, ..) in SYMBOLS {
        pool.symbol(name, SymbolKind::State);
    }
    let range = |upper| Interval {
        lower: Bound::Open(pool.zero()),
        upper,
    };
    let symbol = |name| pool.find_symbol(name).expect("a symbol");
    pool.set_range(symbol("p"), range(Bound::Infinite));
    pool.set_range(symbol("u"), range(Bound::Open(pool.one())));
    pool
}

fn names() -> Vec<&'static str> {
    SYMBOLS.iter().map(|(name, ..)| *name).collect()
}

fn ranges() -> Value {
    let boxes = SYMBOLS
        .iter()
        .map(|&(n, low, high)| (n.to_owned(), json!([low, high])));
    Value::Object(boxes.collect())
}

/// Random formulas that mean something: a division by the number 0 is refused by the parser.
fn parsed(random: &mut Random, kinks: bool) -> (Pool, String, Expr) {
    loop {
        let text = formula(random, &names(), 3, kinks);
        let pool = pool();
        if let Ok(e) = parse_in_pool(&pool, &text) {
            return (pool, text, e);
        }
    }
}

/// Derivatives of random formulas by one of their symbols.
pub(crate) fn derivatives(seed: u64, count: usize) -> Vec<Value> {
    let mut random = Random(seed);
    let task = |id| {
        let (pool, text, e) = parsed(&mut random, false);
        let by = random.pick(&names());
        let slope = pool.derivative(e, pool.find_symbol(by).expect("a symbol"));
        json!({ "id": id, "kind": "derivative", "ranges": ranges(), "formula": text, "by": by,
                "result": pool.format(slope) })
    };
    (0..count).map(task).collect()
}

/// Random formulas beside what the normal form makes of them, and multiplied out.
pub(crate) fn shapes(seed: u64, count: usize) -> Vec<Value> {
    let mut random = Random(seed);
    let task = |id| {
        let (pool, text, e) = parsed(&mut random, true);
        let other = if id % 2 == 0 {
            pool.simplify(e)
        } else {
            pool.expand(e)
        };
        json!({ "id": id, "kind": "same", "ranges": ranges(), "left": text,
                "right": pool.format(other) })
    };
    (0..count).map(task).collect()
}

/// Equations between random formulas and rewritten ones, some of these shifted: what the zero test
/// proves as `same`, what it refutes as `witness`. Those it cannot tell are left out.
pub(crate) fn equations(seed: u64, count: usize) -> Vec<Value> {
    let mut random = Random(seed);
    let mut tasks = Vec::new();
    let mut open = 0;
    while tasks.len() < count {
        let kinks = random.below(4) == 0;
        let (pool, left, a) = parsed(&mut random, kinks);
        let mut right = twisted(&mut random, &left, &names());
        if random.below(2) == 0 {
            right = twisted(&mut random, &right, &names());
        }
        if random.below(2) == 0 {
            right = format!("{right} + 1e-9*x");
        }
        let Ok(b) = parse_in_pool(&pool, &right) else {
            continue;
        };
        let kind = match pool.equal(a, b) {
            Truth::Yes => json!({ "kind": "same" }),
            Truth::CannotTell => {
                open += 1;
                continue;
            }
            Truth::No(witness) => {
                let coordinates = witness.point.iter();
                let point: Map<String, Value> = coordinates
                    .map(|&(symbol, value)| (pool.symbol_name(symbol).to_string(), json!(value)))
                    .collect();
                json!({ "kind": "witness", "point": point,
                        "declared": { "p": [0, null], "u": [0, 1] } })
            }
        };
        let mut task =
            json!({ "id": tasks.len(), "ranges": ranges(), "left": left, "right": right });
        let fields = task.as_object_mut().expect("an object");
        fields.extend(kind.as_object().expect("an object").clone());
        tasks.push(task);
    }
    println!("{open} cannot be told");
    tasks
}

/// Parameters of random models with the box that points are drawn from.
const PARAMETERS: [(&str, f64, f64); 3] =
    [("mu", -1.0, 1.0), ("sigma", 0.0, 1.5), ("rho", -1.0, 1.0)];

/// Drifts and diffusions in one state, `#`: published families and a few that are not.
const DRIFTS: [&str; 8] = [
    "mu*#",
    "mu*(1 - #)",
    "mu*#*(2 - #)",
    "mu*sin(t) - #",
    "-sigma^2*#^3/(1 + t)",
    "mu*# - log(#)*#",
    "0",
    "mu*sqrt(1 + #^2)",
];
const DIFFUSIONS: [&str; 8] = [
    "sigma*#",
    "sigma",
    "sigma*sqrt(#)",
    "sigma*exp(-t)*#",
    "sigma*#*(1 + t)",
    "sigma*#^(3/2)",
    "sigma*sqrt(1 + #^2)",
    "cos(t)*#/2",
];

/// Ito expansions of random functions of time and one or two states under one or two drivers.
pub(crate) fn expansions(seed: u64, count: usize, states: usize) -> Vec<Value> {
    let mut random = Random(seed);
    let mut tasks = Vec::new();
    while tasks.len() < count {
        let model = RandomModel::draw(&mut random, states);
        if let Some(task) = model.expansion(tasks.len()) {
            tasks.push(task);
        }
    }
    tasks
}

/// A random model with one derived quantity.
struct RandomModel {
    drivers: Vec<&'static str>,
    correlation: &'static str,
    states: Vec<RandomState>,
    formula: String,
}

/// One state of a random model.
struct RandomState {
    name: &'static str,
    drift: String,
    /// Coefficients by driver.
    diffusion: Vec<(&'static str, String)>,
}

impl RandomModel {
    fn draw(random: &mut Random, count: usize) -> RandomModel {
        let names = &["x", "y"][..count];
        let drivers = ["W", "B"][..count].to_vec();
        let of = |random: &mut Random, list: &[&str]| {
            let name = random.pick(names);
            random.pick(list).replace('#', name)
        };
        let mut states = Vec::new();
        for &name in names {
            let mut diffusion = Vec::new();
            for &driver in &drivers {
                if count == 1 || random.below(3) > 0 {
                    diffusion.push((driver, of(random, &DIFFUSIONS)));
                }
            }
            let drift = of(random, &DRIFTS);
            states.push(RandomState {
                name,
                drift,
                diffusion,
            });
        }
        let symbols: Vec<&str> = ["t", "sigma"]
            .iter()
            .chain(names)
            .chain(names)
            .copied()
            .collect();
        RandomModel {
            drivers,
            correlation: random.pick(&["rho", "rho*exp(-t)", "rho/(1 + t^2)", "1/2"]),
            states,
            formula: formula(random, &symbols, 3, false),
        }
    }

    fn text(&self) -> String {
        let quoted: Vec<String> = self.drivers.iter().map(|d| format!("{d:?}")).collect();
        let mut text = format!(
            "[model]\nname = \"oracle\"\ndrivers = [{}]\n[parameters]\n\
             mu = {{ value = 0.1, range = \"(-1, 1)\" }}\n\
             sigma = {{ value = 0.2, range = \"(0, inf)\" }}\n\
             rho = {{ value = 0.3, range = \"(-1, 1)\" }}\n",
            quoted.join(", ")
        );
        if self.drivers.len() == 2 {
            text += &format!("[correlation]\nW.B = \"{}\"\n", self.correlation);
        }
        for RandomState {
            name,
            drift,
            diffusion,
        } in &self.states
        {
            let noise: Vec<String> = diffusion
                .iter()
                .map(|(d, b)| format!("{d} = \"{b}\""))
                .collect();
            text += &format!(
                "[states.{name}]\ninitial = \"1\"\ndomain = \"(0, inf)\"\ndrift = \"{drift}\"\n\
                 diffusion = {{ {} }}\n",
                noise.join(", ")
            );
        }
        text + &format!("[derived.f]\nformula = \"{}\"\n", self.formula)
    }

    /// The task; none if the formula has no meaning, like a division by the number 0.
    fn expansion(&self, id: usize) -> Option<Value> {
        let mut diagnostics = Diagnostics::new();
        let source = SourceFile::new("oracle.toml", self.text());
        let model = front::read(&source, &mut diagnostics);
        diagnostics.finish();
        let model = model?;
        let derived = dynamics(&model);
        let expansion = derived.derived.first()?;
        let show = |e: Expr| model.pool.format(e);
        let states = self.states.iter().map(|state| {
            let noise: Map<String, Value> = state
                .diffusion
                .iter()
                .map(|(d, b)| ((*d).to_owned(), json!(b)))
                .collect();
            (
                state.name.to_owned(),
                json!({ "drift": state.drift, "diffusion": noise }),
            )
        });
        let noise = self.drivers.iter().zip(&expansion.diffusion);
        let noise = noise.map(|(d, &b)| ((*d).to_owned(), json!(show(b))));
        let boxes = PARAMETERS
            .iter()
            .chain(&[("t", 0.0, 2.0), ("x", 0.0, 3.0), ("y", 0.0, 3.0)])
            .map(|&(name, low, high)| (name.to_owned(), json!([low, high])));
        Some(json!({
            "id": id,
            "kind": "ito",
            "ranges": boxes.collect::<Map<_, _>>(),
            "states": states.collect::<Map<_, _>>(),
            "correlation": self.correlation,
            "formula": self.formula,
            "chain_rule": show(expansion.chain_rule_drift),
            "correction": show(expansion.ito_correction),
            "drift": show(expansion.drift),
            "noise": noise.collect::<Map<_, _>>(),
        }))
    }
}
