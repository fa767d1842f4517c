//! The HTML writer: one self-contained page with MathML and inline SVG, without scripts.
//!
//! It reads on a phone and in print, light and dark, and is never wider than the page: long sums break
//! between their terms, and what cannot break scrolls in a box of its own.

mod diagram;
mod equations;
mod scores;

use minijinja::{Environment, context};

use super::document::{Align, Block, Document, Inline, Mark, Table, Text};
use super::math::{Notation, Row, escape_html as escape, mathml, row, written};
use super::spell;
use crate::symbolic::Pool;

const TEMPLATE: &str = include_str!("html/page.html.jinja");
const STYLE: &str = include_str!("html/page.css");

/// Parts of a section that are open when the page is; longer sections start folded.
const MOST_OPEN: usize = 12;

/// Characters of a formula that fit on a line; wider terms break between their factors.
const LINE: usize = 70;

/// A line of the table of contents.
struct Entry {
    id: String,
    html: String,
    parts: Vec<Entry>,
}

/// Writes a document as an HTML page.
pub fn write(document: &Document) -> String {
    let mut page = Page {
        pool: &document.pool,
        body: String::new(),
        contents: Vec::new(),
        in_part: false,
        parts_of_section: parts_of_sections(document),
    };
    for block in &document.blocks {
        page.block(block);
    }
    page.end_section();
    let mut environment = Environment::new();
    environment
        .add_template("page.html", TEMPLATE)
        .expect("the template is sound");
    let template = environment
        .get_template("page.html")
        .expect("the template was added");
    template
        .render(context! {
            title => &document.title,
            subtitle => &document.subtitle,
            version => env!("CARGO_PKG_VERSION"),
            style => STYLE,
            contents => page.contents.iter().map(Entry::html).collect::<String>(),
            body => page.body,
        })
        .expect("the template reads what it is given")
}

/// How many parts each section has, in order; those before the first section count as one.
fn parts_of_sections(document: &Document) -> Vec<usize> {
    let mut parts = vec![0];
    for block in &document.blocks {
        match block {
            Block::Heading { level: 1, .. } => parts.push(0),
            Block::Heading { .. } => *parts.last_mut().expect("one at least") += 1,
            _ => {}
        }
    }
    parts
}

impl Entry {
    /// A link, and those of its parts behind it.
    fn html(&self) -> String {
        let link = |entry: &Self| format!("<a href=\"#{}\">{}</a>", entry.id, entry.html);
        let parts: Vec<String> = self.parts.iter().map(link).collect();
        match parts.as_slice() {
            [] => format!("<li>{}</li>\n", link(self)),
            parts => format!(
                "<li>{}<span class=\"parts\">{}</span></li>\n",
                link(self),
                parts.join(" ")
            ),
        }
    }
}

struct Page<'a> {
    pool: &'a Pool,
    body: String,
    contents: Vec<Entry>,
    in_part: bool,
    parts_of_section: Vec<usize>,
}

impl Page<'_> {
    fn block(&mut self, block: &Block) {
        match block {
            Block::Heading { level: 1, text } => self.section(text),
            Block::Heading { text, .. } => self.part(text),
            Block::Paragraph(text) => {
                let text = inline(self.pool, text);
                self.body.push_str(&format!("<p>{text}</p>\n"));
            }
            Block::List(items) => {
                self.body.push_str("<ul>\n");
                for item in items {
                    let item = inline(self.pool, item);
                    self.body.push_str(&format!("<li>{item}</li>\n"));
                }
                self.body.push_str("</ul>\n");
            }
            Block::Equations(list) => self.body.push_str(&equations::html(self.pool, list)),
            Block::Table(table) => self.table(table),
            Block::Diagram(diagram) => self.body.push_str(&diagram::html(diagram)),
            Block::Scores(scores) => self.body.push_str(&scores::html(scores)),
        }
    }

    fn section(&mut self, text: &Text) {
        self.end_section();
        let (id, html) = (
            format!("s{}", self.contents.len() + 1),
            inline(self.pool, text),
        );
        self.body
            .push_str(&format!("<section id=\"{id}\">\n<h2>{html}</h2>\n"));
        let parts = Vec::new();
        self.contents.push(Entry { id, html, parts });
    }

    fn end_section(&mut self) {
        self.end_part();
        if !self.contents.is_empty() {
            self.body.push_str("</section>\n");
        }
    }

    /// A part can be folded away; where a section has many, they start folded.
    fn part(&mut self, text: &Text) {
        self.end_part();
        let html = inline(self.pool, text);
        let many = self.parts_of_section[self.contents.len()] > MOST_OPEN;
        let open = if many { "" } else { " open" };
        let id = match self.contents.last_mut() {
            Some(section) => {
                let id = format!("{}-{}", section.id, section.parts.len() + 1);
                section.parts.push(Entry {
                    id: id.clone(),
                    html: name_of(self.pool, text),
                    parts: Vec::new(),
                });
                id
            }
            None => "start".to_owned(),
        };
        self.body.push_str(&format!(
            "<details id=\"{id}\"{open}>\n<summary><h3>{html}</h3></summary>\n"
        ));
        self.in_part = true;
    }

    fn end_part(&mut self) {
        if self.in_part {
            self.body.push_str("</details>\n");
            self.in_part = false;
        }
    }

    fn table(&mut self, table: &Table) {
        let class = |align: Align| match align {
            Align::Left => "",
            Align::Right => " class=\"number\"",
        };
        self.body
            .push_str("<div class=\"scroll\" tabindex=\"0\">\n<table>\n<thead><tr>");
        for column in &table.columns {
            self.body.push_str(&format!(
                "<th scope=\"col\"{}>{}</th>",
                class(column.align),
                escape(&column.title)
            ));
        }
        self.body.push_str("</tr></thead>\n<tbody>\n");
        for cells in &table.rows {
            self.body.push_str("<tr>");
            for (i, (cell, column)) in cells.iter().zip(&table.columns).enumerate() {
                let (open, close) = match i {
                    0 => ("th scope=\"row\"", "th"),
                    _ => ("td", "td"),
                };
                self.body.push_str(&format!(
                    "<{open}{}>{}</{close}>",
                    class(column.align),
                    inline(self.pool, cell)
                ));
            }
            self.body.push_str("</tr>\n");
        }
        self.body.push_str("</tbody>\n</table>\n</div>\n");
    }
}

/// What a part is called in the contents: the name it begins with.
fn name_of(pool: &Pool, text: &Text) -> String {
    match text.first() {
        Some(Inline::Code(name)) => format!("<code>{}</code>", escape(name)),
        _ => escape(&spell::text(pool, text)),
    }
}

fn inline(pool: &Pool, parts: &[Inline]) -> String {
    let one = |part: &Inline| match part {
        Inline::Words(words) => escape(words),
        Inline::Marked(mark, words) => {
            let class = match mark {
                Mark::Strong => "",
                Mark::Good => " class=\"good\"",
                Mark::Bad => " class=\"bad\"",
                Mark::Open => " class=\"open\"",
            };
            format!("<strong{class}>{}</strong>", escape(words))
        }
        Inline::Code(text) => format!("<code>{}</code>", escape(text)),
        Inline::Formula(e) => math(&Notation::of(pool, *e)),
        Inline::Written(text) => math(&written(pool, text)),
        Inline::Math(terms) => math(&row(pool, terms)),
    };
    parts.iter().map(one).collect()
}

/// A row of mathematics within running text; its named parts follow it.
fn math(row: &Row) -> String {
    let mut out = pieces(row, false);
    for (i, (name, part)) in row.parts.iter().enumerate() {
        let lead = if i == 0 { " where " } else { "; " };
        let name = mathml(&Notation::Name(name.clone()));
        out.push_str(&format!(
            "{lead}<math>{name}<mo>=</mo>{}</math>",
            mathml(part)
        ));
    }
    out
}

/// The pieces of a row, each a `math` of its own, so that lines break between them; in full size where
/// the formula does not stand in running text.
fn pieces(row: &Row, full_size: bool) -> String {
    let style = if full_size {
        " displaystyle=\"true\""
    } else {
        ""
    };
    let pieces: Vec<String> = row
        .broken(LINE)
        .iter()
        .map(|piece| format!("<math{style}>{}</math>", mathml(piece)))
        .collect();
    pieces.join(" ")
}
