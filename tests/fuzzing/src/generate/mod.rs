//! Random models as text, from any bytes: mostly sound, so that what lies behind the front end is
//! reached, and with the shapes that the analysis knows, so that its branches are.

mod claims;
mod draw;
mod formula;
mod parameters;
mod states;

use std::fmt::Write as _;

use self::draw::Draw;

/// The parts of a model that formulas refer to.
#[derive(Default)]
struct Names {
    drivers: Vec<&'static str>,
    parameters: Vec<&'static str>,
    wheres: Vec<&'static str>,
    states: Vec<&'static str>,
    derived: Vec<&'static str>,
    readouts: Vec<&'static str>,
}

/// Where a formula stands: which names it may use.
#[derive(Clone, Copy, PartialEq, Eq)]
enum Scope {
    /// Parameters alone.
    Parameters,
    /// Parameters and time.
    Time,
    /// Parameters, time and states.
    States,
    /// All of these and derived quantities.
    Derived,
}

/// The text of a model. The same bytes give the same model.
#[must_use]
pub fn model(bytes: &[u8]) -> String {
    let mut draw = Draw::new(bytes);
    let mut names = Names::default();
    let mut text = head(&mut draw, &mut names);
    parameters::parameters(&mut draw, &mut names, &mut text);
    names.states = draw.prefix(&["X", "Y", "Z", "S", "vol"], 1);
    correlations(&mut draw, &names, &mut text);
    wheres(&mut draw, &mut names, &mut text);
    states::states(&mut draw, &names, &mut text);
    named(&mut draw, &mut names, &mut text);
    claims::claims(&mut draw, &names, &mut text);
    text
}

fn head(draw: &mut Draw<'_>, names: &mut Names) -> String {
    let calculus = draw.pick(&["ito", "ito", "ito", "stratonovich"]);
    names.drivers = draw.prefix(&["W", "B", "V"], 0);
    let name = draw.pick(&["pond", "type", "self_", "lane", "x1"]);
    let mut text = format!("[model]\nname = \"{name}\"\ncalculus = \"{calculus}\"\n");
    writeln!(text, "drivers = {:?}", names.drivers).expect("a string takes all text");
    if draw.one_in(8) {
        text.push_str("time_unit = \"year\"\ntitle = \"A | *b* _c_ `d`\"\n");
    }
    text
}

fn correlations(draw: &mut Draw<'_>, names: &Names, text: &mut String) {
    text.push_str("[correlation]\n");
    for (i, first) in names.drivers.iter().enumerate() {
        for second in &names.drivers[i + 1..] {
            let value = match draw.below(6) {
                0 => continue,
                1 => "0.5".to_owned(),
                2 => "rho".to_owned(),
                3 => "rho*exp(-t)".to_owned(),
                4 => draw.pick(&["1", "-1", "0", "0.999", "rho^2"]).to_owned(),
                _ => formula::formula(draw, names, Scope::Time, 2),
            };
            put(text, &format!("{first}.{second}"), &value);
        }
    }
}

fn wheres(draw: &mut Draw<'_>, names: &mut Names, text: &mut String) {
    text.push_str("[where]\n");
    for name in draw.prefix(&["inner", "outer"], 0) {
        let value = match draw.one_in(8) {
            true => formula::formula(draw, names, Scope::States, 3),
            false => formula::smooth(draw, names, Scope::States, 3),
        };
        put(text, name, &value);
        names.wheres.push(name);
    }
}

/// Derived quantities and readouts.
fn named(draw: &mut Draw<'_>, names: &mut Names, text: &mut String) {
    for name in draw.prefix(&["D", "E"], 0) {
        let value = formula::smooth(draw, names, Scope::Derived, 3);
        writeln!(text, "[derived.{name}]\nformula = \"{value}\"").expect("a string takes all text");
        names.derived.push(name);
    }
    for name in draw.prefix(&["R", "Q"], 0) {
        let value = formula::formula(draw, names, Scope::Derived, 3);
        writeln!(text, "[readouts.{name}]\nformula = \"{value}\"")
            .expect("a string takes all text");
        names.readouts.push(name);
    }
}

/// `key = "value"`
fn put(text: &mut String, key: &str, value: &str) {
    writeln!(text, "{key} = \"{value}\"").expect("a string takes all text");
}
