//! Finds the places where a program could be wrong, and writes both versions there.

use std::collections::BTreeMap;
use std::fmt;
use std::fs;
use std::path::{Path, PathBuf};

use quote::quote;
use syn::spanned::Spanned;
use syn::visit_mut::{self, VisitMut};
use syn::{Expr, ImplItemFn, ItemFn, ReturnType, Stmt, Type, parse_quote};

use crate::wrong::wrong;

/// A place and what would be wrong there.
#[derive(Clone, Debug)]
pub(crate) struct Site {
    pub(crate) file: String,
    line: usize,
    /// The line as it is written.
    pub(crate) text: String,
    /// The change; the second of the same kind on a line says so.
    pub(crate) what: String,
}

impl fmt::Display for Site {
    fn fmt(&self, f: &mut fmt::Formatter<'_>) -> fmt::Result {
        write!(f, "{}:{} {}", self.file, self.line, self.what)
    }
}

/// The places that are mutated: the number of the mutant by that of the place.
pub(crate) struct Chosen(BTreeMap<usize, usize>);

impl Chosen {
    pub(crate) fn new(sites: &[usize]) -> Self {
        Self(
            sites
                .iter()
                .enumerate()
                .map(|(mutant, &site)| (site, mutant))
                .collect(),
        )
    }
}

/// All places in the given directories of the compiler, in the order of files and lines.
pub(crate) fn sites(repository: &Path, directories: &[&str]) -> Vec<Site> {
    let nothing = Chosen::new(&[]);
    let mut found = Vec::new();
    for (name, path) in sources(repository, directories) {
        let mut mutator = Mutator::new(&name, found.len(), &nothing);
        mutator.visit_file_mut(&mut parse(&path));
        let text = read(&path);
        let lines: Vec<&str> = text.lines().map(str::trim).collect();
        found.extend(mutator.sites.into_iter().map(|site| Site {
            text: lines[site.line - 1].to_owned(),
            ..site
        }));
    }
    found
}

/// Rewrites the files below `into` with both versions at the chosen places.
pub(crate) fn write(from: &Path, into: &Path, directories: &[&str], chosen: &Chosen) {
    let mut count = 0;
    for (name, path) in sources(from, directories) {
        let mut file = parse(&path);
        let mut mutator = Mutator::new(&name, count, chosen);
        mutator.visit_file_mut(&mut file);
        count += mutator.sites.len();
        fs::write(into.join(&name), prettyplease::unparse(&file)).expect("the copy is writable");
    }
}

fn read(path: &Path) -> String {
    fs::read_to_string(path).expect("a source file")
}

fn parse(path: &Path) -> syn::File {
    syn::parse_file(&read(path)).expect("the compiler is Rust")
}

/// The source files, those of tests left out, each with its path in the repository.
fn sources(repository: &Path, directories: &[&str]) -> Vec<(String, PathBuf)> {
    let mut pending: Vec<PathBuf> = directories
        .iter()
        .map(|d| repository.join("compiler/src").join(d))
        .collect();
    let mut found = Vec::new();
    while let Some(directory) = pending.pop() {
        for entry in fs::read_dir(&directory).expect("a source directory") {
            let path = entry.expect("a readable directory").path();
            let name = path
                .strip_prefix(repository)
                .expect("inside")
                .display()
                .to_string();
            if path.is_dir() && !path.ends_with("tests") {
                pending.push(path);
            } else if path.extension().is_some_and(|e| e == "rs") {
                found.push((name, path));
            }
        }
    }
    found.sort();
    found
}

/// Functions that are a table of amounts, or a published generator of numbers.
const TASTE_FUNCTIONS: [&str; 2] = ["amount", "uniform"];

/// Functions whose arguments are amounts of memory or of work.
const TASTE_CALLS: [&str; 2] = ["with_capacity", "Budget :: share"];

struct Mutator<'a> {
    file: &'a str,
    first: usize,
    chosen: &'a Chosen,
    sites: Vec<Site>,
}

impl<'a> Mutator<'a> {
    fn new(file: &'a str, first: usize, chosen: &'a Chosen) -> Self {
        Self {
            file,
            first,
            chosen,
            sites: Vec::new(),
        }
    }

    /// Notes a place; the number of its mutant if it is chosen.
    fn site(&mut self, line: usize, what: &str) -> Option<usize> {
        let index = self.first + self.sites.len();
        let same = |s: &&Site| s.line == line && s.what.split(" (").next() == Some(what);
        let what = match self.sites.iter().filter(same).count() {
            0 => what.to_owned(),
            before => format!("{what} ({})", before + 1),
        };
        self.sites.push(Site {
            file: self.file.to_owned(),
            line,
            text: String::new(),
            what,
        });
        self.chosen.0.get(&index).copied()
    }

    /// A function that returns at once what says the least, or the opposite.
    fn early_return(&mut self, constant: bool, output: &ReturnType, body: &mut syn::Block) {
        let ReturnType::Type(_, result) = output else {
            return;
        };
        let Type::Path(path) = &**result else { return };
        let Some(name) = path.path.segments.last().map(|s| s.ident.to_string()) else {
            return;
        };
        let values: &[(&str, Expr)] = match name.as_str() {
            _ if constant => return,
            "bool" => &[
                ("always true", parse_quote!(true)),
                ("always false", parse_quote!(false)),
            ],
            "Option" => &[("always none", parse_quote!(None))],
            "Vec" => &[("always empty", parse_quote!(Vec::new()))],
            _ => return,
        };
        for (what, value) in values {
            if let Some(mutant) = self.site(output.span().start().line, what) {
                let statement: Stmt = parse_quote! {
                    if crate::mutants::is_active(#mutant) { return #value; }
                };
                body.stmts.insert(0, statement);
            }
        }
    }
}

impl VisitMut for Mutator<'_> {
    fn visit_expr_mut(&mut self, expr: &mut Expr) {
        let line = expr.span().start().line;
        visit_mut::visit_expr_mut(self, expr);
        let Some((what, wrong)) = wrong(expr) else {
            return;
        };
        if let Some(mutant) = self.site(line, &what) {
            *expr = parse_quote! {
                (if crate::mutants::is_active(#mutant) { #wrong } else { #expr })
            };
        }
    }

    fn visit_expr_call_mut(&mut self, call: &mut syn::ExprCall) {
        let function = &call.func;
        let name = quote!(#function).to_string();
        if !TASTE_CALLS.iter().any(|taste| name.ends_with(taste)) {
            visit_mut::visit_expr_call_mut(self, call);
        }
    }

    fn visit_item_fn_mut(&mut self, item: &mut ItemFn) {
        if item.sig.constness.is_none() {
            visit_mut::visit_item_fn_mut(self, item);
            self.early_return(false, &item.sig.output, &mut item.block);
        }
    }

    fn visit_impl_item_fn_mut(&mut self, item: &mut ImplItemFn) {
        let name = item.sig.ident.to_string();
        if item.sig.constness.is_none() && !TASTE_FUNCTIONS.contains(&name.as_str()) {
            visit_mut::visit_impl_item_fn_mut(self, item);
            self.early_return(false, &item.sig.output, &mut item.block);
        }
    }

    fn visit_item_mod_mut(&mut self, item: &mut syn::ItemMod) {
        let tests = item
            .attrs
            .iter()
            .any(|a| quote!(#a).to_string().contains("test"));
        if !tests {
            visit_mut::visit_item_mod_mut(self, item);
        }
    }

    // Where no function can be called, or where a literal is part of a type or a pattern.
    fn visit_item_const_mut(&mut self, _: &mut syn::ItemConst) {}
    fn visit_impl_item_const_mut(&mut self, _: &mut syn::ImplItemConst) {}
    fn visit_item_static_mut(&mut self, _: &mut syn::ItemStatic) {}
    fn visit_pat_mut(&mut self, pattern: &mut syn::Pat) {
        if let syn::Pat::Guard(guarded) = pattern {
            self.visit_expr_mut(&mut guarded.guard);
        }
    }
    fn visit_type_mut(&mut self, _: &mut Type) {}
    fn visit_generic_argument_mut(&mut self, _: &mut syn::GenericArgument) {}
    fn visit_attribute_mut(&mut self, _: &mut syn::Attribute) {}
    fn visit_variant_mut(&mut self, _: &mut syn::Variant) {}
    fn visit_expr_repeat_mut(&mut self, repeat: &mut syn::ExprRepeat) {
        self.visit_expr_mut(&mut repeat.expr);
    }
}
