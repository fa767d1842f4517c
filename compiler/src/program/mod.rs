//! The step program: SSA over lanes, in sections by rate of change.
