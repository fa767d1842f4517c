//! Random numbers of one state's own, each from a source of its own name.

use super::Lowering;
use crate::program::op::{DrawLaw, ValueId};

impl Lowering<'_> {
    /// A standard normal number of the state's own, beside the Gaussian vector of the plan.
    pub(super) fn own_normal(&mut self, state: usize, purpose: Option<&str>) -> ValueId {
        let mut name = format!("law:{}", self.model.states[state].name);
        if let Some(purpose) = purpose {
            name = format!("{name}:{purpose}");
        }
        let source = self.plan.noise.components.len() + self.normals.len();
        let draw = self.builder.noise(source);
        self.builder.hint(draw, format!("draw_{name}"));
        self.normals.push(name);
        draw
    }

    /// A draw of a state's own from another law.
    pub(super) fn other_draw(
        &mut self,
        state: usize,
        law: DrawLaw,
        purpose: &str,
        parameter: ValueId,
    ) -> ValueId {
        let name = &self.model.states[state].name;
        let draw = self.builder.other_draw(law, self.draws.len(), parameter);
        self.builder.hint(draw, format!("{purpose}_{name}"));
        self.draws.push(format!("law:{name}:{purpose}"));
        draw
    }
}
