//! Finds the places where a program could be wrong, and writes both versions there.

use std::collections::BTreeMap;
use std::fmt;
use std::fs;
use std::path::{Path, PathBuf};

use quote::quote;
use syn::spanned::Spanned;
use syn::visit_mut::{self, VisitMut};
use syn::{BinOp, Expr, ImplItemFn, ItemFn, Lit, ReturnType, Stmt, Type, UnOp, parse_quote};

/// A place and what would be wrong there.
#[derive(Clone, Debug)]
pub(crate) struct Site {
    file: String,
    line: usize,
    what: String,
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
        found.extend(mutator.sites);
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

fn parse(path: &Path) -> syn::File {
    let text = fs::read_to_string(path).expect("a source file");
    syn::parse_file(&text).expect("the compiler is Rust")
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
        let what = what.to_owned();
        self.sites.push(Site {
            file: self.file.to_owned(),
            line,
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

    fn visit_item_fn_mut(&mut self, item: &mut ItemFn) {
        if item.sig.constness.is_none() {
            visit_mut::visit_item_fn_mut(self, item);
            self.early_return(false, &item.sig.output, &mut item.block);
        }
    }

    fn visit_impl_item_fn_mut(&mut self, item: &mut ImplItemFn) {
        if item.sig.constness.is_none() {
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
    fn visit_pat_mut(&mut self, _: &mut syn::Pat) {}
    fn visit_type_mut(&mut self, _: &mut Type) {}
    fn visit_generic_argument_mut(&mut self, _: &mut syn::GenericArgument) {}
    fn visit_attribute_mut(&mut self, _: &mut syn::Attribute) {}
    fn visit_variant_mut(&mut self, _: &mut syn::Variant) {}
    fn visit_expr_repeat_mut(&mut self, repeat: &mut syn::ExprRepeat) {
        self.visit_expr_mut(&mut repeat.expr);
    }
}

/// A wrong version of an expression, and what is wrong with it.
fn wrong(expr: &Expr) -> Option<(String, Expr)> {
    match expr {
        Expr::Binary(binary) => {
            let chained =
                |e: &Expr| matches!(e, Expr::Let(_)) || quote!(#e).to_string().contains("let ");
            if chained(&binary.left) || chained(&binary.right) {
                return None;
            }
            let op = other_operator(&binary.op)?;
            let what = format!("{} instead of {}", spelled(&op), spelled(&binary.op));
            let (left, right) = (&binary.left, &binary.right);
            Some((what, parse_quote!(#left #op #right)))
        }
        Expr::Unary(unary) => {
            let what = match unary.op {
                UnOp::Not(_) => "not negated",
                UnOp::Neg(_) => "sign lost",
                _ => return None,
            };
            let inner = &unary.expr;
            Some((what.to_owned(), parse_quote!(#inner)))
        }
        Expr::Lit(literal) => {
            let Lit::Int(number) = &literal.lit else {
                return None;
            };
            let value: u128 = number.base10_parse().ok()?;
            let wrong =
                syn::LitInt::new(&format!("{}{}", value + 1, number.suffix()), number.span());
            Some((format!("{wrong} instead of {number}"), parse_quote!(#wrong)))
        }
        Expr::MethodCall(call) => {
            let name = call.method.to_string();
            let other = other_method(&name)?;
            let mut wrong = call.clone();
            wrong.method = syn::Ident::new(other, call.method.span());
            Some((
                format!("{other} instead of {name}"),
                Expr::MethodCall(wrong),
            ))
        }
        _ => None,
    }
}

fn spelled(op: &BinOp) -> String {
    quote!(#op).to_string()
}

fn other_operator(op: &BinOp) -> Option<BinOp> {
    Some(match op {
        BinOp::Add(_) => parse_quote!(-),
        BinOp::Sub(_) => parse_quote!(+),
        BinOp::Mul(_) => parse_quote!(/),
        BinOp::Div(_) => parse_quote!(*),
        BinOp::Rem(_) => parse_quote!(/),
        BinOp::And(_) => parse_quote!(||),
        BinOp::Or(_) => parse_quote!(&&),
        BinOp::Eq(_) => parse_quote!(!=),
        BinOp::Ne(_) => parse_quote!(==),
        BinOp::Lt(_) => parse_quote!(<=),
        BinOp::Le(_) => parse_quote!(<),
        BinOp::Gt(_) => parse_quote!(>=),
        BinOp::Ge(_) => parse_quote!(>),
        BinOp::AddAssign(_) => parse_quote!(-=),
        BinOp::SubAssign(_) => parse_quote!(+=),
        BinOp::MulAssign(_) => parse_quote!(/=),
        BinOp::DivAssign(_) => parse_quote!(*=),
        _ => return None,
    })
}

/// The operations of the algebra and of the standard library that are taken for one another.
fn other_method(name: &str) -> Option<&'static str> {
    const PAIRS: [(&str, &str); 9] = [
        ("add", "sub"),
        ("mul", "div"),
        ("min", "max"),
        ("any", "all"),
        ("is_some", "is_none"),
        ("is_positive", "is_negative"),
        ("is_non_negative", "is_non_positive"),
        ("first", "last"),
        ("lower", "upper"),
    ];
    PAIRS.iter().find_map(|&(a, b)| match name {
        _ if name == a => Some(b),
        _ if name == b => Some(a),
        _ => None,
    })
}
