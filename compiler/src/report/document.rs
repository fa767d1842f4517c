//! The neutral document: what a report says, before anyone decides how it looks.
//!
//! Formulas stay formulas of the pool, so that each writer can set them in its own way.

use crate::symbolic::{Expr, Pool};

/// A report.
#[derive(Clone)]
pub struct Document {
    /// Where the formulas live.
    pub pool: Pool,
    /// The title.
    pub title: String,
    /// A line below the title.
    pub subtitle: String,
    /// What it says.
    pub blocks: Vec<Block>,
}

/// A part of a document, one below the other.
#[derive(Clone, Debug)]
pub enum Block {
    /// A heading; level 1 is a section.
    Heading {
        /// 1 for a section, 2 for a part of one.
        level: u8,
        /// Its words.
        text: Text,
    },
    /// Running text.
    Paragraph(Text),
    /// Points, in order.
    List(Vec<Text>),
    /// Equations, one below the other, aligned at their relations.
    Equations(Vec<Equation>),
    /// A table.
    Table(Table),
    /// A diagram.
    Diagram(Diagram),
    /// Scores of checks.
    Scores(Scores),
}

/// Running text.
pub type Text = Vec<Inline>;

/// A part of running text.
#[derive(Clone, Debug)]
pub enum Inline {
    /// Words.
    Words(String),
    /// Words of a certain weight.
    Marked(Mark, String),
    /// Text of the file: a name, a key, a literal.
    Code(String),
    /// A formula.
    Formula(Expr),
    /// A formula as the author wrote it.
    Written(String),
    /// A larger piece of mathematics.
    Math(Math),
}

/// What marked words are.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Mark {
    /// Stressed.
    Strong,
    /// Something that holds.
    Good,
    /// Something that does not.
    Bad,
    /// Something open.
    Open,
}

/// Mathematics around formulas: differentials, brackets, operators.
pub type Math = Vec<Term>;

/// A part of mathematics.
#[derive(Clone, Debug)]
pub enum Term {
    /// A formula as it stands.
    Formula(Expr),
    /// A formula that multiplies what follows; in brackets where it is a sum.
    Factor(Expr),
    /// The differential of a name: `dS`, `dt`.
    Differential(String),
    /// A name.
    Name(String),
    /// Relations, operators and words between.
    Symbol(String),
}

/// `left = right`, with a remark.
#[derive(Clone, Debug, Default)]
pub struct Equation {
    /// Left side; empty where it continues the one above.
    pub left: Math,
    /// The relation; `=` mostly.
    pub relation: &'static str,
    /// Right side.
    pub right: Math,
    /// What the line is, in words; empty for none.
    pub remark: String,
}

/// A table.
#[derive(Clone, Debug)]
pub struct Table {
    /// Columns.
    pub columns: Vec<Column>,
    /// Rows, one text a column.
    pub rows: Vec<Vec<Text>>,
}

/// A column of a table.
#[derive(Clone, Debug)]
pub struct Column {
    /// Its head.
    pub title: String,
    /// How its cells stand.
    pub align: Align,
}

/// How the cells of a column stand.
#[derive(Clone, Copy, Debug, PartialEq, Eq)]
pub enum Align {
    /// At the left, as words do.
    Left,
    /// At the right, as numbers do.
    Right,
}

/// Named things, and arrows between them.
#[derive(Clone, Debug, Default)]
pub struct Diagram {
    /// The things.
    pub nodes: Vec<DiagramNode>,
    /// Arrows, from one node to another.
    pub arrows: Vec<(usize, usize)>,
}

/// A node of a diagram.
#[derive(Clone, Debug)]
pub struct DiagramNode {
    /// Its name.
    pub name: String,
    /// What it is.
    pub kind: NodeKind,
}

/// What a node of a diagram is; the kinds stand beside each other in this order.
#[derive(Clone, Copy, Debug, PartialEq, Eq, PartialOrd, Ord)]
pub enum NodeKind {
    /// A Brownian motion.
    Driver,
    /// A state.
    State,
    /// A derived quantity or a readout.
    Observed,
}

impl Diagram {
    /// The diagram in words, a line for each node that an arrow leads to.
    pub fn lines(&self) -> Vec<String> {
        let into = |to: usize| self.arrows.iter().filter(move |a| a.1 == to).map(|a| a.0);
        let of_kind = |to: usize, driver: bool| -> Vec<&str> {
            into(to)
                .map(|from| &self.nodes[from])
                .filter(|node| (node.kind == NodeKind::Driver) == driver)
                .map(|node| node.name.as_str())
                .collect()
        };
        let line = |(to, node): (usize, &DiagramNode)| {
            let (drivers, states) = (of_kind(to, true), of_kind(to, false));
            let driven = format!("driven by {}", drivers.join(", "));
            let reads = format!("reads {}", states.join(", "));
            let parts: Vec<String> = [(drivers, driven), (states, reads)]
                .into_iter()
                .filter(|(names, _)| !names.is_empty())
                .map(|(_, text)| text)
                .collect();
            (!parts.is_empty()).then(|| format!("{}: {}", node.name, parts.join("; ")))
        };
        self.nodes.iter().enumerate().filter_map(line).collect()
    }
}

/// Scores of checks, in standard errors; a check holds below the threshold.
#[derive(Clone, Debug, Default)]
pub struct Scores {
    /// The largest score that still holds.
    pub threshold: f64,
    /// The checks.
    pub points: Vec<Score>,
}

/// The score of one check.
#[derive(Clone, Debug)]
pub struct Score {
    /// What was checked.
    pub label: String,
    /// The score, in standard errors; what a known bias explains is taken off.
    pub z: f64,
    /// Whether it holds.
    pub passed: bool,
}

impl Scores {
    /// The scores in one sentence.
    pub fn in_words(&self) -> String {
        let failing: Vec<&str> = self
            .points
            .iter()
            .filter(|point| !point.passed)
            .map(|point| point.label.as_str())
            .collect();
        let (all, failed) = (self.points.len(), failing.len());
        let threshold = format!("within {:.2} standard errors", self.threshold);
        match failed {
            0 => format!("{all} of {all} checks are {threshold}"),
            _ => format!(
                "{} of {all} checks are {threshold}; not: {}",
                all - failed,
                failing.join(", ")
            ),
        }
    }
}

/// Plain words as text.
pub fn words(text: impl Into<String>) -> Text {
    vec![Inline::Words(text.into())]
}

/// A sentence of a pass as text: what it sets in backticks is text of the file.
pub fn prose(text: &str) -> Text {
    let parts = text
        .split('`')
        .enumerate()
        .filter(|(_, part)| !part.is_empty());
    let inline = |(i, part): (usize, &str)| match i % 2 {
        0 => Inline::Words(part.to_owned()),
        _ => Inline::Code(part.to_owned()),
    };
    parts.map(inline).collect()
}

/// A name of the file as text.
pub fn code(text: impl Into<String>) -> Text {
    vec![Inline::Code(text.into())]
}

impl Document {
    /// An empty document about the formulas of `pool`.
    pub fn new(pool: &Pool, title: impl Into<String>, subtitle: impl Into<String>) -> Self {
        Self {
            pool: pool.clone(),
            title: title.into(),
            subtitle: subtitle.into(),
            blocks: Vec::new(),
        }
    }

    /// Starts a section.
    pub fn section(&mut self, text: impl Into<String>) {
        self.blocks.push(Block::Heading {
            level: 1,
            text: words(text),
        });
    }

    /// Starts a part of a section.
    pub fn part(&mut self, text: Text) {
        self.blocks.push(Block::Heading { level: 2, text });
    }

    /// Adds a paragraph; an empty one adds nothing.
    pub fn paragraph(&mut self, text: Text) {
        if !text.is_empty() {
            self.blocks.push(Block::Paragraph(text));
        }
    }

    /// Adds a list; an empty one adds nothing.
    pub fn list(&mut self, items: Vec<Text>) {
        if !items.is_empty() {
            self.blocks.push(Block::List(items));
        }
    }

    /// Adds equations; none add nothing.
    pub fn equations(&mut self, equations: Vec<Equation>) {
        if !equations.is_empty() {
            self.blocks.push(Block::Equations(equations));
        }
    }

    /// Adds scores; none add nothing.
    pub fn scores(&mut self, scores: Scores) {
        if !scores.points.is_empty() {
            self.blocks.push(Block::Scores(scores));
        }
    }

    /// Adds a diagram.
    pub fn diagram(&mut self, diagram: Diagram) {
        self.blocks.push(Block::Diagram(diagram));
    }

    /// Adds a table; one without rows adds nothing.
    pub fn table(&mut self, table: Table) {
        if !table.rows.is_empty() {
            self.blocks.push(Block::Table(table));
        }
    }
}

impl Table {
    /// An empty table with these columns.
    pub fn new<const N: usize>(columns: [(&str, Align); N]) -> Self {
        let columns = columns
            .into_iter()
            .map(|(title, align)| Column {
                title: title.to_owned(),
                align,
            })
            .collect();
        Self {
            columns,
            rows: Vec::new(),
        }
    }

    /// Adds a row.
    pub fn row<const N: usize>(&mut self, cells: [Text; N]) {
        debug_assert_eq!(N, self.columns.len());
        self.rows.push(cells.into());
    }
}

impl Equation {
    /// `left = right`.
    pub fn new(left: Math, right: Math) -> Self {
        Self {
            left,
            relation: "=",
            right,
            remark: String::new(),
        }
    }

    /// Says what the line is.
    pub fn remark(mut self, remark: impl Into<String>) -> Self {
        self.remark = remark.into();
        self
    }
}

/// Mathematics that is one symbol.
pub fn symbol(text: impl Into<String>) -> Math {
    vec![Term::Symbol(text.into())]
}

/// `drift dt + diffusion dW + ...`, terms that are zero left out; `0` where all are.
pub fn increments<'a>(
    pool: &Pool,
    drift: Expr,
    diffusion: impl IntoIterator<Item = (&'a str, Expr)>,
) -> Math {
    let mut terms = Math::new();
    let parts = std::iter::once(("t", drift)).chain(diffusion);
    for (name, coefficient) in parts {
        if pool.is_zero_literal(coefficient) {
            continue;
        }
        if !terms.is_empty() {
            terms.push(Term::Symbol("+".to_owned()));
        }
        if !pool.is_one_literal(coefficient) {
            terms.push(Term::Factor(coefficient));
        }
        terms.push(Term::Differential(name.to_owned()));
    }
    if terms.is_empty() {
        terms.push(Term::Symbol("0".to_owned()));
    }
    terms
}
