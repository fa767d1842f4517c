//! Nesting of any depth is an error with a code, on the stack of a small thread too.

use driftwright::diagnostic::Code;
use driftwright::pipeline::compile;
use driftwright::source::SourceFile;

const DEPTH: usize = 100_000;

/// Half of what the standard library gives a thread.
const SMALL_STACK: usize = 1 << 20;

/// The codes of all findings in a model, found on a small stack.
fn codes(text: String) -> Vec<Code> {
    let small = std::thread::Builder::new().stack_size(SMALL_STACK);
    let run = small.spawn(move || {
        let compilation = compile(&SourceFile::new("deep.toml", text));
        compilation.diagnostics.iter().map(|d| d.code).collect()
    });
    run.expect("a thread").join().expect("no panic")
}

fn model(drift: &str, more: &str) -> String {
    format!(
        "[model]\nname = \"deep\"\ndrivers = [\"W\"]\n[parameters]\na = 0.1\n[states.X]\n\
         initial = \"0.1\"\ndrift = {drift}\ndiffusion = \"a\"\n{more}"
    )
}

#[test]
fn formulas() {
    let around =
        |open: &str, close: &str| format!("\"{}X{}\"", open.repeat(DEPTH), close.repeat(DEPTH));
    let drifts = [
        around("(", ")"),
        around("(", ""),
        around("sin(", ")"),
        around("max(X, ", ")"),
        around("-", ""),
        around("X^", ""),
        around("X^-", ""),
    ];
    for drift in drifts {
        let codes = codes(model(&drift, ""));
        assert_eq!(codes, [Code::NestedTooDeep], "{}", &drift[..20]);
    }
}

#[test]
fn long_but_flat_formulas_are_no_fault() {
    for repeated in ["X + ", "X - ", "X*", "X/"] {
        let drift = format!("\"{}a\"", repeated.repeat(DEPTH));
        let codes = codes(model(&drift, ""));
        assert!(!codes.contains(&Code::NestedTooDeep), "{repeated}");
    }
}

#[test]
fn definitions_that_nest_once_they_are_put_in() {
    let mut more = String::from("[derived.D0]\nformula = \"X\"\n");
    for k in 1..DEPTH / 10 {
        more.push_str(&format!("[derived.D{k}]\nformula = \"sin(D{})\"\n", k - 1));
    }
    // One error, not one for each that uses it.
    assert_eq!(codes(model("\"-X\"", &more)), [Code::NestedTooDeep]);
}

#[test]
fn toml() {
    let around =
        |open: &str, close: &str| format!("{}1{}", open.repeat(DEPTH), close.repeat(DEPTH));
    let path = vec!["a"; DEPTH].join(".");
    let texts = [
        model("\"-X\"", &format!("more = {}\n", around("[", "]"))),
        model("\"-X\"", &format!("more = {}\n", around("{a = ", "}"))),
        model("\"-X\"", &format!("{path} = 1\n")),
        model("\"-X\"", &format!("[{path}]\n")),
        model("\"-X\"", &format!("[[{path}]]\n")),
        model(&around("[", "]"), ""),
    ];
    for text in texts {
        assert!(codes(text).contains(&Code::TomlSyntax));
    }
}
