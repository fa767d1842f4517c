//! Whether ends of domains are attained, finite ones and infinite ones.

use super::{Fact, Finder, Topic, plain};
use crate::analysis::asymptotics::Side;
use crate::analysis::boundary::{Case, Class, bound, cases, not_attained};
use crate::analysis::condition::{All, Condition, Standing};
use crate::analysis::limits::{Limit, limit};
use crate::analysis::moments::grows_linearly;
use crate::symbolic::Bound;

const FELLER: &str = "Feller's test";

impl Finder<'_> {
    /// One fact for each finite end of a domain.
    pub(super) fn ends(&self) -> Vec<Fact> {
        self.facts_at(|bound| bound != Bound::Infinite)
    }

    /// One fact for each state that may go to infinity; where it does so at neither end, one for both.
    pub(super) fn explosions(&self) -> Vec<Fact> {
        let facts = self.facts_at(|bound| bound == Bound::Infinite);
        let calm = |fact: &Fact| fact.standing == Standing::Implied && fact.classes.len() < 2;
        let (calm, mut others): (Vec<Fact>, Vec<Fact>) = facts.into_iter().partition(calm);
        let both = |state: &usize| !others.iter().any(|f| f.states.contains(state));
        let mut states: Vec<usize> = calm.iter().flat_map(|f| f.states.clone()).collect();
        states.dedup();
        let quiet: Vec<usize> = states.into_iter().filter(both).collect();
        let singly = calm
            .into_iter()
            .filter(|f| f.states.iter().any(|s| !quiet.contains(s)));
        let mut all: Vec<Fact> = singly.collect();
        all.append(&mut others);
        if !quiet.is_empty() {
            let verb = if quiet.len() == 1 { "does" } else { "do" };
            let statement = format!("{} {verb} not explode", self.names(&quiet));
            let because = format!("{FELLER}, or at most linear growth of the drift");
            let fact = plain(
                Topic::Explosion,
                quiet,
                statement,
                Standing::Implied,
                because,
            );
            all.insert(0, fact);
        }
        all
    }

    fn facts_at(&self, wanted: impl Fn(Bound) -> bool) -> Vec<Fact> {
        let sides = [Side::Lower, Side::Upper];
        let ends = (0..self.model.states.len()).flat_map(|i| sides.map(|side| (i, side)));
        ends.filter(|&(i, side)| wanted(bound(self.model, i, side)))
            .map(|(i, side)| self.end(i, side))
            .collect()
    }

    fn end(&self, state: usize, side: Side) -> Fact {
        let (model, name) = (self.model, self.name(state));
        let pool = &model.pool;
        let end = bound(model, state, side);
        let (found, because) = self.cases(state, side);
        let (standing, condition) = not_attained(model, &found);
        let (topic, statement) = match end.value() {
            Some(end) => {
                let end = pool.format(end);
                (Topic::Boundary, format!("{name} does not attain {end}"))
            }
            None => {
                let infinity = if side == Side::Lower { "-inf" } else { "inf" };
                (
                    Topic::Explosion,
                    format!("{name} does not explode to {infinity}"),
                )
            }
        };
        Fact {
            topic,
            states: vec![state],
            statement,
            standing,
            condition,
            classes: classes(self, &found),
            because: because.to_owned(),
        }
    }

    /// The classes of an end, and the rule that gives them: Feller's test, else what is known of the law of the state
    /// or of the growth of its coefficients.
    fn cases(&self, state: usize, side: Side) -> (Vec<Case>, &'static str) {
        let found = cases(self.model, self.dynamics, state, side);
        if found.iter().any(|c| c.class != Class::Unknown) {
            return (found, FELLER);
        }
        let not_attained = vec![Case {
            class: Class::NotAttained,
            when: Vec::new(),
        }];
        if self.moments.has_exact_law(state) {
            let because = "a coordinate that takes the domain onto the whole line is Gaussian";
            return (not_attained, because);
        }
        if let Some(by_dimension) = self.by_dimension(state, side) {
            return (
                by_dimension,
                "a square-root process in some coordinate, by its dimension",
            );
        }
        if bound(self.model, state, side) == Bound::Infinite && grows_linearly(&self.system, state)
        {
            return (not_attained, "coefficients that grow at most linearly");
        }
        let because = "the coefficients depend on time or on other states, or have no leading terms that the rules know";
        (found, because)
    }

    /// An end at which a coordinate is zero that is a square-root process: it is attained below dimension 2 (Revuz and
    /// Yor 1999, chapter XI).
    fn by_dimension(&self, state: usize, side: Side) -> Option<Vec<Case>> {
        let pool = &self.model.pool;
        let law = self.moments.square_root(state)?;
        let place = match (bound(self.model, state, side).value(), side) {
            (Some(end), _) => Limit::Value(end),
            (None, Side::Lower) => Limit::MinusInfinity,
            (None, Side::Upper) => Limit::PlusInfinity,
        };
        let x = self.model.states[state].symbol;
        let at_zero = match limit(pool, law.coordinate.forward, x, place) {
            Limit::Value(value) => pool.is_zero(value).is_yes(),
            Limit::Unknown => return None,
            _ => false,
        };
        let (two, zero) = (pool.int(2), pool.zero());
        let case = |class, when| Case { class, when };
        if !at_zero {
            return Some(vec![case(Class::NotAttained, Vec::new())]);
        }
        let (at_least, greater) = (Condition::at_least, Condition::greater);
        Some(vec![
            case(Class::Entrance, vec![at_least(law.dimension, two)]),
            case(
                Class::Regular,
                vec![greater(two, law.dimension), greater(law.dimension, zero)],
            ),
            case(Class::Exit, vec![at_least(zero, law.dimension)]),
        ])
    }
}

fn classes(finder: &Finder<'_>, found: &[Case]) -> Vec<(&'static str, All)> {
    let pool = &finder.model.pool;
    let known = found.iter().filter(|c| c.class != Class::Unknown);
    known
        .map(|c| {
            let when = c.when.iter().map(|condition| condition.written(pool));
            (c.class.name(), when.collect())
        })
        .collect()
}
