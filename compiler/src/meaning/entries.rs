//! The meaning of a model as entries: a key and a formula or a word.

use std::cell::RefCell;

use crate::model::{AtEdge, Calculus, Claim, ClaimKind, Formula, Model, Relation};
use crate::symbolic::{Expr, Interval, SharedTexts};

/// The number of the form in which meanings are written. A change of what is written, or how, is a new
/// form; a reader keeps knowing the old ones.
pub const FORM: u32 = 1;

/// One fact of a model.
#[derive(Clone, Debug, PartialEq, Eq)]
pub struct Entry {
    /// Where it belongs, from the outside in: `states`, `S`, `drift`.
    pub key: Vec<String>,
    /// What it says.
    pub value: Value,
}

/// What an entry says.
#[derive(Clone, Debug, PartialEq, Eq)]
pub enum Value {
    /// A formula in the grammar of the model file.
    Formula(String),
    /// An interval in its notation, formulas as ends.
    Interval(String),
    /// A word of the language: `reflect`, `milstein`, `lognormal`.
    Word(String),
}

impl Value {
    /// What it says, as text.
    pub fn text(&self) -> &str {
        match self {
            Self::Formula(text) | Self::Interval(text) | Self::Word(text) => text,
        }
    }
}

/// The meaning of a model.
///
/// ```
/// use driftwright::meaning::Meaning;
/// use driftwright::pipeline::compile;
/// use driftwright::source::SourceFile;
/// let text = "[model]\nname = \"level\"\ndrivers = [\"W\"]\n[states.X]\ninitial = \"1\"\n\
///             drift = \"0\"\ndiffusion = \"X + X\"\n";
/// let compiled = compile(&SourceFile::new("level.toml", text)).compiled.unwrap();
/// let meaning = Meaning::of(&compiled.model);
/// assert_eq!(meaning.text("states.X.diffusion.W"), Some("2*X"));
/// ```
#[derive(Clone, Debug, Default, PartialEq, Eq)]
pub struct Meaning {
    /// The entries, in the order of the file.
    pub entries: Vec<Entry>,
    /// Parts of long formulas that have a name in them, each before what reads it.
    pub parts: Vec<(String, String)>,
    /// The names of parameters, drivers and states, each list in the order of the file.
    pub names: [Vec<String>; 3],
}

impl Meaning {
    /// What a model means.
    pub fn of(model: &Model) -> Self {
        let taken = |name: &str| model.pool.find_symbol(name).is_some();
        let writer = Writer {
            model,
            texts: SharedTexts::new(&model.pool, taken),
            entries: RefCell::default(),
        };
        writer.declarations();
        writer.states();
        writer.quantities();
        for claim in &model.claims {
            writer.claim(claim);
        }
        let names = [
            model.parameters.iter().map(|p| p.name.clone()).collect(),
            model.drivers.iter().map(|d| d.name.clone()).collect(),
            model.states.iter().map(|s| s.name.clone()).collect(),
        ];
        Self {
            parts: writer.texts.definitions(),
            entries: writer.entries.into_inner(),
            names,
        }
    }

    /// The text of an entry, its key joined by dots.
    pub fn text(&self, key: &str) -> Option<&str> {
        let found = self.entries.iter().find(|e| e.key.join(".") == key)?;
        Some(found.value.text())
    }
}

struct Writer<'a> {
    model: &'a Model,
    texts: SharedTexts<'a>,
    entries: RefCell<Vec<Entry>>,
}

impl Writer<'_> {
    fn push(&self, key: &[&str], value: Value) {
        let key = key.iter().map(|&part| part.to_owned()).collect();
        self.entries.borrow_mut().push(Entry { key, value });
    }

    fn formula(&self, key: &[&str], e: Expr) {
        self.push(key, Value::Formula(self.texts.format(e)));
    }

    fn word(&self, key: &[&str], word: &str) {
        self.push(key, Value::Word(word.to_owned()));
    }

    fn interval(&self, key: &[&str], interval: &Interval) {
        let text = interval.notation(|end| self.texts.format(end));
        self.push(key, Value::Interval(text));
    }

    fn declarations(&self) {
        let model = self.model;
        let calculus = match model.calculus {
            Calculus::Ito => "ito",
            Calculus::Stratonovich => "stratonovich",
        };
        self.word(&["calculus"], calculus);
        for p in &model.parameters {
            self.interval(&["parameters", &p.name, "range"], &p.range);
        }
        for a in &model.assumptions {
            // Both sides on one: what is assumed to be positive, or not negative.
            let (larger, smaller, strict) = match a.relation {
                Relation::Less => (a.right, a.left, true),
                Relation::LessEqual => (a.right, a.left, false),
                Relation::Greater => (a.left, a.right, true),
                Relation::GreaterEqual => (a.left, a.right, false),
            };
            let kind = if strict { "positive" } else { "not_negative" };
            let difference = model.pool.sub(larger, smaller);
            self.formula(&["assumptions", &a.name, kind], difference);
        }
        for (i, first) in model.drivers.iter().enumerate() {
            for (j, second) in model.drivers.iter().enumerate().skip(i + 1) {
                let rate = model.correlation[i][j];
                if !model.pool.is_zero_literal(rate) {
                    let (a, b) = (first.name.as_str(), second.name.as_str());
                    self.formula(&["correlation", a.min(b), a.max(b)], rate);
                }
            }
        }
    }

    fn states(&self) {
        let edge = |edge: AtEdge| match edge {
            AtEdge::Absorb => "absorb",
            AtEdge::Reflect => "reflect",
            AtEdge::AsEquation => "as_equation",
        };
        for s in &self.model.states {
            let key = |rest: &'static str| ["states", s.name.as_str(), rest];
            self.formula(&key("initial"), s.initial.expr);
            self.formula(&key("drift"), s.drift.expr);
            for (driver, &coefficient) in self.model.drivers.iter().zip(&s.diffusion) {
                if !self.model.pool.is_zero_literal(coefficient) {
                    let key = ["states", &s.name, "diffusion", &driver.name];
                    self.formula(&key, coefficient);
                }
            }
            self.interval(&key("domain"), &s.domain);
            for (side, rule) in [("lower", s.at_lower), ("upper", s.at_upper)] {
                if let Some(rule) = rule {
                    self.word(&["states", &s.name, "at_edge", side], edge(rule));
                }
            }
            if let Some(through) = &s.through {
                self.formula(&key("through"), through.expr);
            }
            if let Some((scheme, _)) = s.scheme {
                self.word(&key("scheme"), scheme.name());
            }
        }
    }

    fn quantities(&self) {
        let kinds = [
            ("derived", &self.model.derived),
            ("readouts", &self.model.readouts),
        ];
        for (kind, quantities) in kinds {
            for quantity in quantities {
                self.formula(&[kind, &quantity.name, "formula"], quantity.formula.expr);
            }
        }
    }

    fn claim(&self, claim: &Claim) {
        let name = claim.name.as_str();
        let of_and_is = |kind: &str, of: &Formula, is: &Formula| {
            self.formula(&["claims", name, kind], of.expr);
            self.formula(&["claims", name, "is"], is.expr);
        };
        match &claim.kind {
            ClaimKind::DriftOf { of, is } => of_and_is("drift_of", of, is),
            ClaimKind::MeanOf { of, is } => of_and_is("mean_of", of, is),
            ClaimKind::VarianceOf { of, is } => of_and_is("variance_of", of, is),
            ClaimKind::DiffusionOf { of, is } => {
                self.formula(&["claims", name, "diffusion_of"], of.expr);
                for (j, formula) in is {
                    let driver = &self.model.drivers[*j].name;
                    self.formula(&["claims", name, "is", driver], formula.expr);
                }
            }
            ClaimKind::Martingale { of } => self.formula(&["claims", name, "martingale"], of.expr),
            ClaimKind::CovarianceOf { of: [x, y], is } => {
                self.formula(&["claims", name, "covariance_of", "1"], x.expr);
                self.formula(&["claims", name, "covariance_of", "2"], y.expr);
                self.formula(&["claims", name, "is"], is.expr);
            }
            ClaimKind::LawOf { of, is } => {
                self.formula(&["claims", name, "law_of"], of.expr);
                self.word(&["claims", name, "is"], &is.0);
            }
        }
    }
}
