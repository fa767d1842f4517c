//! What the tool tells people: one diagnostic type, one table of codes, renderers.
