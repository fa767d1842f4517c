//! From tokens to a source file: checked, formatted, commented, framed.

use std::fmt::Write as _;

use minijinja::{Environment, context};
use proc_macro2::TokenStream;

use crate::program::Program;

const TEMPLATE: &str = include_str!("module.rs.jinja");

/// Width of a comment line, indentation included.
const WIDTH: usize = 100;

pub(super) fn source(program: &Program, tokens: TokenStream) -> String {
    let file: syn::File = syn::parse2(tokens)
        .unwrap_or_else(|error| panic!("the module of `{}` is no Rust: {error}", program.name));
    let body = commented(program, &prettyplease::unparse(&file));
    let mut environment = Environment::new();
    environment
        .add_template("module", TEMPLATE)
        .expect("the template is sound");
    let template = environment
        .get_template("module")
        .expect("the template was added");
    template
        .render(context! { name => &program.name, version => env!("CARGO_PKG_VERSION"), body })
        .expect("the template reads what it is given")
}

/// Replaces the markers of notes by comments.
fn commented(program: &Program, source: &str) -> String {
    let mut out = String::new();
    let mut before = "";
    for line in source.lines() {
        if starts_item_after(before, line) {
            out.push('\n');
        }
        before = line;
        match marker(line) {
            Some((indent, index)) => comment(&mut out, indent, &program.notes[index].text),
            None => {
                out.push_str(line);
                out.push('\n');
            }
        }
    }
    out
}

/// Whether a line begins an item that follows another one: a blank line sets it apart.
fn starts_item_after(before: &str, line: &str) -> bool {
    let item = line.trim_start();
    let ended =
        matches!(before.trim_start(), "}" | ">();") || before.trim_start().starts_with("//! ");
    let ended = ended || (before.trim_start().starts_with("const _") && before.ends_with(';'));
    let begins = ["///", "#[", "impl", "pub ", "fn ", "use ", "const "];
    ended && begins.iter().any(|start| item.starts_with(start))
}

/// The indentation and the note of a line `__note!(17);`.
fn marker(line: &str) -> Option<(&str, usize)> {
    let (indent, rest) = line.split_at(line.len() - line.trim_start().len());
    let digits = rest.strip_prefix("__note!(")?.strip_suffix(");")?;
    Some((indent, digits.parse().ok()?))
}

/// A comment, wrapped between words.
fn comment(out: &mut String, indent: &str, text: &str) {
    let mut column = 0;
    for word in text.split_whitespace() {
        let length = word.chars().count();
        if column == 0 || column + 1 + length > WIDTH {
            let end = if column == 0 { "" } else { "\n" };
            write!(out, "{end}{indent}// {word}").expect("a string takes all text");
            column = indent.len() + 3 + length;
        } else {
            write!(out, " {word}").expect("a string takes all text");
            column += 1 + length;
        }
    }
    out.push('\n');
}
