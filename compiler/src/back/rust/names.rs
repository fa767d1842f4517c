//! Names in generated code: the author's where Rust allows them, made unique where they meet.

use std::collections::{BTreeMap, BTreeSet};

use proc_macro2::{Ident, Span};

use super::stages::Stages;
use crate::program::{Op, Program, Rate, ValueId};

/// Names of locals that the frame of a function uses itself.
const RESERVED: [&str; 18] = [
    "parameters",
    "required",
    "states",
    "values",
    "noise",
    "draws",
    "outputs",
    "lane",
    "start",
    "length",
    "time",
    "scratch",
    "holds",
    "place",
    "covariance",
    "before",
    "at",
    "state",
];

/// Every name of a module.
pub(super) struct Names {
    /// The simulator's type.
    pub(super) simulator: Ident,
    /// Fields of the parameters.
    pub(super) parameters: Vec<Ident>,
    /// Constants for the observed quantities.
    pub(super) quantities: Vec<Ident>,
    /// One per value; setup values are fields of the simulator too.
    values: Vec<Ident>,
    /// The lanes of values that one loop of a step hands to a later one.
    kept: BTreeMap<ValueId, Ident>,
    /// The lane of each slot, source and output.
    pub(super) slots: Vec<Ident>,
    pub(super) sources: Vec<Ident>,
    pub(super) outputs: Vec<Ident>,
}

impl Names {
    pub(super) fn new(program: &Program) -> Self {
        let mut fields = Unique::default();
        let parameters = program
            .parameters
            .iter()
            .map(|p| fields.add(&latin(&p.name)))
            .collect();
        let mut constants = Unique::default();
        let upper = |name: &str| latin(name).to_uppercase();
        let quantities = program
            .outputs
            .iter()
            .map(|o| constants.add(&upper(&o.name)))
            .collect();
        let mut shared = Unique::reserving(RESERVED);
        let mut lanes = |prefix: &str, names: Vec<&str>| -> Vec<Ident> {
            names
                .iter()
                .map(|name| shared.add(&format!("{prefix}_{}", snake(name))))
                .collect()
        };
        let slots = lanes(
            "slot",
            program.slots.iter().map(|s| s.name.as_str()).collect(),
        );
        let sources = lanes(
            "normal",
            program.sources.iter().map(String::as_str).collect(),
        );
        let outputs = lanes(
            "output",
            program.outputs.iter().map(|o| o.name.as_str()).collect(),
        );
        let kept = Stages::new(program).kept().collect::<Vec<_>>();
        let kept = kept
            .into_iter()
            .map(|id| {
                (
                    id,
                    shared.add(&format!("lanes_{}", value_hint(program, id))),
                )
            })
            .collect();
        let values = value_names(program, &shared);
        let simulator = simulator_name(&program.name);
        Self {
            simulator,
            parameters,
            quantities,
            values,
            kept,
            slots,
            sources,
            outputs,
        }
    }

    /// The lane of a value that one loop of a step hands to a later one.
    pub(super) fn lane(&self, id: ValueId) -> &Ident {
        &self.kept[&id]
    }

    pub(super) fn value(&self, id: ValueId) -> &Ident {
        &self.values[id.index()]
    }
}

/// Names unique within the functions they appear in: setup values everywhere, the others in their own
/// step or observation.
fn value_names(program: &Program, shared: &Unique) -> Vec<Ident> {
    let mut setup = shared.clone();
    let mut names: Vec<Option<Ident>> = vec![None; program.values.len()];
    let mut assign = |rate: Rate, scope: &mut Unique| {
        for id in program.section(rate) {
            names[id.index()] = Some(scope.add(&value_hint(program, id)));
        }
    };
    assign(Rate::Constant, &mut setup);
    assign(Rate::Setup, &mut setup);
    for rates in [
        [Rate::Step, Rate::Instant, Rate::StepLane].as_slice(),
        &[Rate::Observation, Rate::ObservationLane],
        &[Rate::Law],
    ] {
        let mut scope = setup.clone();
        rates.iter().for_each(|&rate| assign(rate, &mut scope));
    }
    names
        .into_iter()
        .map(|name| name.expect("every value has a rate"))
        .collect()
}

fn value_hint(program: &Program, id: ValueId) -> String {
    let value = program.value(id);
    match (&value.op, &value.hint) {
        (Op::State(slot), _) => format!("state_{}", snake(&program.slots[*slot].name)),
        (Op::Start, _) => "start_of_step".to_owned(),
        (Op::Length, _) => "length_of_step".to_owned(),
        (Op::Instant, _) => "instant_of_step".to_owned(),
        (Op::Time, _) => "time_of_observation".to_owned(),
        (_, Some(hint)) => snake(hint),
        (_, None) => format!("v{}", id.index()),
    }
}

/// Names taken so far in a scope.
#[derive(Clone, Default)]
struct Unique {
    taken: BTreeSet<String>,
    /// The number to try next for a wish that has been met before.
    next: BTreeMap<String, usize>,
}

impl Unique {
    fn reserving(names: impl IntoIterator<Item = &'static str>) -> Self {
        Self {
            taken: names.into_iter().map(str::to_owned).collect(),
            next: BTreeMap::new(),
        }
    }

    fn add(&mut self, wish: &str) -> Ident {
        let mut name = wish.to_owned();
        let next = self.next.entry(wish.to_owned()).or_insert(2);
        while self.taken.contains(&name) {
            name = format!("{wish}_{next}");
            *next += 1;
        }
        self.taken.insert(name.clone());
        identifier(&name)
    }
}

/// A name as a Rust identifier: keywords become raw ones, those that cannot be raw get an underscore.
pub(super) fn identifier(name: &str) -> Ident {
    let raw_impossible = ["self", "Self", "super", "crate", "_"];
    if raw_impossible.contains(&name) {
        return Ident::new(&format!("{name}_"), Span::call_site());
    }
    match syn::parse_str::<Ident>(name) {
        Ok(_) => Ident::new(name, Span::call_site()),
        Err(_) => Ident::new_raw(name, Span::call_site()),
    }
}

/// The type of the simulator: the model's name in camel case.
fn simulator_name(model: &str) -> Ident {
    let capital = |part: &str| {
        let mut letters = part.chars();
        letters
            .next()
            .map(|first| first.to_uppercase().chain(letters).collect::<String>())
    };
    let name: String = latin(model).split('_').filter_map(capital).collect();
    // The module has types of these names already.
    let taken = ["Parameters", "Required", "Self"].contains(&name.as_str());
    identifier(&if taken {
        format!("{name}Simulator")
    } else {
        name
    })
}

/// A local's name: Latin, lower case, underscores for whatever else.
fn snake(name: &str) -> String {
    let spaced = |c: char| if c.is_alphanumeric() { c } else { '_' };
    latin(name).to_lowercase().chars().map(spaced).collect()
}

/// Greek letters by their names: a lone `σ` among Latin names is what rustc warns of as confusable.
pub(super) fn latin(name: &str) -> String {
    name.chars()
        .map(|c| match GREEK.iter().find(|(letter, _)| *letter == c) {
            Some((_, name)) => (*name).to_owned(),
            None => c.to_string(),
        })
        .collect()
}

const GREEK: [(char, &str); 51] = [
    ('α', "alpha"),
    ('β', "beta"),
    ('γ', "gamma"),
    ('δ', "delta"),
    ('ε', "epsilon"),
    ('ζ', "zeta"),
    ('η', "eta"),
    ('θ', "theta"),
    ('ι', "iota"),
    ('κ', "kappa"),
    ('λ', "lambda"),
    ('μ', "mu"),
    ('ν', "nu"),
    ('ξ', "xi"),
    ('ο', "omicron"),
    ('π', "pi"),
    ('ρ', "rho"),
    ('σ', "sigma"),
    ('ς', "sigma"),
    ('τ', "tau"),
    ('υ', "upsilon"),
    ('φ', "phi"),
    ('χ', "chi"),
    ('ψ', "psi"),
    ('ω', "omega"),
    ('ϕ', "phi"),
    ('ϑ', "theta"),
    ('Α', "Alpha"),
    ('Β', "Beta"),
    ('Γ', "Gamma"),
    ('Δ', "Delta"),
    ('Ε', "Epsilon"),
    ('Ζ', "Zeta"),
    ('Η', "Eta"),
    ('Θ', "Theta"),
    ('Ι', "Iota"),
    ('Κ', "Kappa"),
    ('Λ', "Lambda"),
    ('Μ', "Mu"),
    ('Ν', "Nu"),
    ('Ξ', "Xi"),
    ('Ο', "Omicron"),
    ('Π', "Pi"),
    ('Ρ', "Rho"),
    ('Σ', "Sigma"),
    ('Τ', "Tau"),
    ('Υ', "Upsilon"),
    ('Φ', "Phi"),
    ('Χ', "Chi"),
    ('Ψ', "Psi"),
    ('Ω', "Omega"),
];
