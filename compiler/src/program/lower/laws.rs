//! The laws of single states after a step, given their values before, where they have a name: normal, one of two normal
//! laws, a multiple of a noncentral chi-square variable, and images of them.

use std::collections::BTreeMap;

use super::Lowering;
use super::rows::{covariance_rate, elapsed};
use crate::analysis::random_drift::Shape;
use crate::analysis::square_root::AtZero;
use crate::program::formula::{Environment, Formulas};
use crate::program::laws::{LawImage, LawShape, StateLaw};
use crate::program::op::{Argument, ValueId};
use crate::scheme::{Drawn, Group, LinearGaussian, Method, RandomDriftStep, SquareRootStep};
use crate::symbolic::{Bound, Expr};

impl Lowering<'_> {
    /// The laws of all states that are stepped exactly by themselves, with coefficients that do not depend on time.
    pub(super) fn laws(&mut self) -> Vec<StateLaw> {
        let plan = self.plan;
        let groups = plan.groups.iter().filter(|g| g.is_exact());
        groups.filter_map(|group| self.law(group)).collect()
    }

    fn law(&mut self, group: &Group) -> Option<StateLaw> {
        let &[state] = group.states.as_slice() else {
            return None;
        };
        let shape = match &group.method {
            Method::LinearGaussian(system) if !system.moving => self.normal_law(state, system)?,
            Method::SquareRoot(step) if !step.moving && step.draw == Drawn::Exactly => {
                self.chi_square_law(step)
            }
            Method::RandomDrift(step) if step.shape == Shape::Line => self.mixture_law(step),
            _ => return None,
        };
        let normal = matches!(shape, LawShape::Normal(_));
        let moved = !self.plan.coordinates[state].identity;
        let image = moved.then(|| match normal && self.is_logarithm(state) {
            true => LawImage::Logarithm,
            false => self.law_image(state),
        });
        Some(StateLaw {
            slot: state,
            shape,
            image,
        })
    }

    fn normal_law(&mut self, state: usize, system: &LinearGaussian) -> Option<LawShape> {
        let pool = self.model.pool.clone();
        let (rate, alpha) = (system.a[0][0], system.alpha[0]);
        // A model of many drivers has few in each state: pairs of the others are not looked at.
        let drivers = system.c[0].iter().copied().enumerate();
        let noise: Vec<(usize, Expr)> = drivers
            .filter(|&(_, coefficient)| !pool.is_zero_literal(coefficient))
            .collect();
        let square = pool.simplify(covariance_rate(self, &noise, &noise));
        if pool.is_zero_literal(square) {
            return None;
        }
        let u = pool.var(self.plan.coordinates[state].symbol);
        let kept = pool.mul(pool.exp(pool.mul(rate, self.length())), u);
        let mean = pool.add(kept, pool.mul(alpha, elapsed(self, rate)));
        let variance = pool.mul(square, elapsed(self, pool.mul(pool.int(2), rate)));
        let numbers = [mean, pool.sqrt(variance)];
        Some(LawShape::Normal(self.before(state, numbers)))
    }

    fn chi_square_law(&mut self, step: &SquareRootStep) -> LawShape {
        let pool = self.model.pool.clone();
        let y = pool.var(self.plan.coordinates[step.state].symbol);
        let negative = pool.neg(step.rate);
        let window = elapsed(self, negative);
        let scale = pool.product([pool.ratio(1, 4), step.square, window]);
        let left = pool.mul(y, pool.exp(pool.mul(negative, self.length())));
        let numbers = [scale, step.dimension, pool.div(left, scale)];
        let numbers = self.before(step.state, numbers);
        match step.at_zero {
            AtZero::NotReached | AtZero::Reflected => LawShape::Reflected(numbers),
            AtZero::Absorbed => LawShape::Absorbed(numbers),
        }
    }

    fn mixture_law(&mut self, step: &RandomDriftStep) -> LawShape {
        let pool = self.model.pool.clone();
        let u = pool.var(self.plan.coordinates[step.state].symbol);
        let length = self.length();
        let gain = pool.mul(step.speed, length);
        let share = pool.div(
            pool.add(step.speed, step.drift),
            pool.mul(pool.int(2), step.speed),
        );
        let deviation = pool.sqrt(pool.mul(step.square, length));
        let numbers = [share, pool.add(u, gain), pool.sub(u, gain), deviation];
        LawShape::Mixture(self.before(step.state, numbers))
    }

    /// Formulas in the coordinate before the step and its length, as values.
    fn before<const N: usize>(&mut self, state: usize, formulas: [Expr; N]) -> [ValueId; N] {
        let (model, coordinate) = (self.model, &self.plan.coordinates[state]);
        let mut bindings = self.parameters.clone();
        bindings.insert(model.time, self.builder.law_start());
        bindings.insert(self.length, self.builder.law_length());
        let before = self.builder.argument(Argument::Before);
        bindings.insert(model.states[state].symbol, before);
        let mut environment = Environment::new(bindings);
        let u = self.lowered(&mut environment, coordinate.forward);
        environment.bind(coordinate.symbol, u);
        formulas.map(|formula| self.lowered(&mut environment, formula))
    }

    /// The state's coordinate at the end of the step, with its slope, and back.
    fn law_image(&mut self, state: usize) -> LawImage {
        let (model, coordinate) = (self.model, &self.plan.coordinates[state]);
        let pool = &model.pool;
        let declared = &model.states[state];
        let (start, length) = (self.builder.law_start(), self.builder.law_length());
        let end = self.builder.add(start, length);
        let at = self.builder.argument(Argument::At);
        let mut bindings: BTreeMap<_, _> = self.parameters.clone();
        bindings.insert(model.time, end);
        bindings.insert(declared.symbol, at);
        let mut of_state = Environment::new(bindings.clone());
        bindings.remove(&declared.symbol);
        bindings.insert(coordinate.symbol, at);
        let mut of_coordinate = Environment::new(bindings);
        let slope = pool.simplify(pool.derivative(coordinate.forward, declared.symbol));
        LawImage::Map {
            forward: self.lowered(&mut of_state, coordinate.forward),
            slope: self.lowered(&mut of_state, slope),
            inverse: self.lowered(&mut of_coordinate, coordinate.inverse),
            domain: self.range(&declared.domain),
        }
    }

    /// Whether a state lives on the positive numbers and its coordinate is the natural logarithm.
    fn is_logarithm(&self, state: usize) -> bool {
        let (pool, declared) = (&self.model.pool, &self.model.states[state]);
        let zero = matches!(declared.domain.lower, Bound::Open(e) if pool.is_zero_literal(e));
        let logarithm = pool.log(pool.var(declared.symbol));
        zero && declared.domain.upper == Bound::Infinite
            && self.plan.coordinates[state].forward == logarithm
    }

    fn lowered(&mut self, environment: &mut Environment, formula: Expr) -> ValueId {
        Formulas {
            pool: &self.model.pool,
            builder: &mut self.builder,
            environment,
        }
        .lower(formula)
    }
}
