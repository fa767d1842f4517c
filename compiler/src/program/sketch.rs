//! Models and plans put together by hand, so that lowering and the back ends are tested on their own.

use crate::calculus::Process;
use crate::front::formula::parse_in_pool;
use crate::model::{Calculus, Driver, Formula, Model, Named, Parameter, State};
use crate::scheme::{
    Component, Coordinate, Group, Kind, LinearGaussian, Method, NoiseComponent, NoisePlan, Plan,
    RowNoise, SchemeName, StateStep,
};
use crate::source::{SourceFile, Span};
use crate::symbolic::trace::Trace;
use crate::symbolic::{Bound, Expr, Interval, Pool, Symbol, SymbolKind};

/// A model under construction and its plan.
pub(crate) struct Sketch {
    pub(crate) model: Model,
    pub(crate) plan: Plan,
}

impl Sketch {
    /// A model with the drivers `W` and `B` (correlation `rho`) and these parameters, default 0.5.
    pub(crate) fn new(parameters: &[&str]) -> Self {
        let pool = Pool::new();
        let time = pool.symbol("t", SymbolKind::Time);
        let parameter = |name: &&str| Parameter {
            name: (*name).to_owned(),
            symbol: pool.symbol(name, SymbolKind::Parameter),
            value: Some("1/2".parse().expect("a rational")),
            unit: None,
            about: None,
            range: Interval::REAL,
            span: Span::default(),
        };
        let parameters: Vec<Parameter> = parameters.iter().map(parameter).collect();
        let rho = pool
            .find_symbol("rho")
            .map_or(pool.zero(), |rho| pool.var(rho));
        let driver = |name: &str| Driver {
            name: name.to_owned(),
            span: Span::default(),
        };
        let model = Model {
            source: SourceFile::new("sketch.toml", ""),
            name: "sketch".to_owned(),
            title: None,
            about: None,
            time_unit: None,
            calculus: Calculus::Ito,
            time,
            drivers: vec![driver("W"), driver("B")],
            parameters,
            assumptions: Vec::new(),
            correlation: vec![vec![pool.one(), rho], vec![rho, pool.one()]],
            declared_correlations: Vec::new(),
            states: Vec::new(),
            wheres: Vec::new(),
            derived: Vec::new(),
            readouts: Vec::new(),
            claims: Vec::new(),
            pool,
        };
        let plan = Plan {
            coordinates: Vec::new(),
            groups: Vec::new(),
            noise: NoisePlan::default(),
        };
        Self { model, plan }
    }

    pub(crate) fn formula(&self, text: &str) -> Expr {
        parse_in_pool(&self.model.pool, text).unwrap_or_else(|_| panic!("`{text}` does not parse"))
    }

    fn written(&self, text: &str) -> Formula {
        Formula {
            expr: self.formula(text),
            text: text.to_owned(),
            span: Span::default(),
        }
    }

    /// Symbols of states, before formulas mention them.
    pub(crate) fn symbols(&self, names: &[&str]) -> Vec<Symbol> {
        names
            .iter()
            .map(|name| self.model.pool.symbol(name, SymbolKind::State))
            .collect()
    }

    /// A state with its equation and, if it is not stepped itself, its coordinate `(u, forward, inverse)`.
    pub(crate) fn state(
        &mut self,
        name: &str,
        drift: &str,
        diffusion: [&str; 2],
        domain: Interval,
        through: Option<(&str, &str)>,
    ) -> usize {
        let symbol = self.symbols(&[name])[0];
        let index = self.model.states.len();
        self.model.pool.set_range(symbol, domain);
        let diffusion = diffusion.map(|b| self.formula(b)).to_vec();
        let auxiliary = through.map(|_| {
            self.model
                .pool
                .symbol(&format!("u_{name}"), SymbolKind::Auxiliary)
        });
        let own = self.model.pool.var(symbol);
        let (forward, inverse) = match through {
            None => (own, own),
            Some((forward, inverse)) => (self.formula(forward), self.formula(inverse)),
        };
        self.plan.coordinates.push(Coordinate {
            state: index,
            symbol: auxiliary.unwrap_or(symbol),
            forward,
            inverse,
            identity: through.is_none(),
            image: Some(if through.is_none() {
                domain
            } else {
                Interval::REAL
            }),
            process: Process {
                drift: self.formula(drift),
                diffusion: diffusion.clone(),
            },
        });
        self.model.states.push(State {
            name: name.to_owned(),
            symbol,
            about: None,
            unit: None,
            initial: self.written("1"),
            drift: self.written(drift),
            diffusion,
            declared_diffusion: Vec::new(),
            domain,
            domain_span: None,
            at_lower: None,
            at_upper: None,
            through: None,
            scheme: None,
            span: Span::default(),
        });
        index
    }

    pub(crate) fn readout(&mut self, name: &str, text: &str) {
        let formula = self.written(text);
        let named = Named {
            name: name.to_owned(),
            formula,
            about: None,
            unit: None,
            span: Span::default(),
        };
        self.model.readouts.push(named);
    }

    /// The open interval from 0 to infinity.
    pub(crate) fn positive(&self) -> Interval {
        Interval {
            lower: Bound::Open(self.model.pool.zero()),
            upper: Bound::Infinite,
        }
    }

    /// The increments of both drivers as components, correlated.
    pub(crate) fn increments(&mut self) {
        for (driver, name) in ["W", "B"].into_iter().enumerate() {
            self.component(Component::Increment { driver }, name);
        }
    }

    pub(crate) fn component(&mut self, component: Component, source: &str) {
        self.plan.noise.components.push(NoiseComponent {
            component,
            source: source.to_owned(),
        });
    }

    /// A group stepped exactly: rows of `a`, `alpha`, rows of `c`, all as formulas.
    pub(crate) fn exact(
        &mut self,
        states: &[usize],
        a: &[&[&str]],
        alpha: &[&str],
        c: &[[&str; 2]],
        noise: &[RowNoise],
    ) {
        let row = |sketch: &Self, row: &[&str]| {
            row.iter().map(|e| sketch.formula(e)).collect::<Vec<Expr>>()
        };
        let system = LinearGaussian {
            a: a.iter().map(|r| row(self, r)).collect(),
            alpha: row(self, alpha),
            c: c.iter().map(|r| row(self, r)).collect(),
            noise: noise.to_vec(),
            moving: false,
        };
        self.group(
            states,
            Kind::Exact,
            SchemeName::Exact,
            Method::LinearGaussian(system),
        );
    }

    /// A group of one state stepped approximately: drift, diffusion and Milstein coefficients in the
    /// coordinates.
    pub(crate) fn stepped(&mut self, step: StateStep) {
        let state = step.state;
        self.group(
            &[state],
            Kind::Approximate,
            SchemeName::Milstein,
            Method::Step(vec![step]),
        );
    }

    pub(crate) fn group(
        &mut self,
        states: &[usize],
        kind: Kind,
        scheme: SchemeName,
        method: Method,
    ) {
        self.plan.groups.push(Group {
            states: states.to_vec(),
            kind,
            law: None,
            becomes: None,
            scheme,
            strong_order: None,
            weak_order: None,
            preserves_domain: kind == Kind::Exact,
            reasons: Vec::new(),
            rejected: Vec::new(),
            trace: Trace::default(),
            method,
        });
    }
}
