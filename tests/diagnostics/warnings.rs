//! What an honest modeller writes is not scolded: each warning beside models that come near it.

use driftwright::diagnostic::{Code, human};
use driftwright::pipeline::compile;
use driftwright::source::SourceFile;

const HEAD: &str = "[model]\nname = \"m\"\ndrivers = [\"W\"]\n";

/// A state in words: initial value, drift, diffusion, domain, and what happens at its ends.
fn state(initial: &str, drift: &str, diffusion: &str, domain: &str, edge: &str) -> String {
    let edge = match edge {
        "" => String::new(),
        word => format!("at_edge = \"{word}\"\n"),
    };
    format!(
        "[states.X]\ninitial = \"{initial}\"\ndrift = \"{drift}\"\ndiffusion = \"{diffusion}\"\n\
         domain = \"{domain}\"\n{edge}"
    )
}

const POSITIVE: &str = "[parameters]\n\
    k = { value = 1, range = \"(0, inf)\" }\n\
    m = { value = 2, range = \"(0, inf)\" }\n\
    s = { value = 0.5, range = \"(0, inf)\" }\n";

/// The codes of the warnings about ends of a state with positive parameters `k`, `m` and `s`.
fn ends(initial: &str, drift: &str, diffusion: &str, domain: &str, edge: &str) -> Vec<Code> {
    let text = format!(
        "{HEAD}{POSITIVE}{}",
        state(initial, drift, diffusion, domain, edge)
    );
    let wanted = [Code::InitialOnEdge, Code::ClosedEndCrossed];
    let found = compile(&SourceFile::new("m.toml", text.as_str())).diagnostics;
    let codes = found.into_iter().map(|d| d.code);
    codes.filter(|code| wanted.contains(code)).collect()
}

#[test]
fn ends_that_are_left_or_kept_are_fine() {
    for (initial, drift, diffusion, domain, edge) in [
        // A square-root process may start at 0: its drift carries it off.
        ("0", "k*(m - X)", "s*sqrt(X)", "[0, inf)", "reflect"),
        ("0", "k*(m - X)", "s*sqrt(X)", "[0, inf)", "as_equation"),
        ("0", "k*(m - X)", "s*sqrt(X)", "[0, inf)", ""),
        ("0", "0", "s", "[0, inf)", "reflect"),
        ("m", "0", "s", "[0, inf)", "absorb"),
        ("1/2", "0", "s*sqrt(X*(1 - X))", "[0, 1]", "absorb"),
        ("1", "k*X*(1 - X/m)", "s*X", "[0, inf)", ""),
        // A Bessel process of dimension 3 never comes to its end.
        ("1", "1/X", "1", "[0, inf)", ""),
        ("k", "m + k - X", "s*sqrt(X - k)", "[k, inf)", "reflect"),
        ("0", "k", "0", "[0, inf)", ""),
    ] {
        let found = ends(initial, drift, diffusion, domain, edge);
        assert_eq!(found, [], "{initial}; {drift}; {diffusion}; {edge}");
    }
}

#[test]
fn ends_that_are_never_left_or_crossed_are_told() {
    let (stays, crosses) = (Code::InitialOnEdge, Code::ClosedEndCrossed);
    for (initial, drift, diffusion, domain, edge, expected) in [
        ("0", "k*(m - X)", "s*sqrt(X)", "[0, inf)", "absorb", stays),
        ("0", "k*X", "s*X", "[0, inf)", "", stays),
        ("1", "k*(1 - X)", "s*sqrt(X*(1 - X))", "[0, 1]", "", stays),
        ("m - k - 1", "0", "s*X", "[0, inf)", "", stays),
        ("1", "-k*X", "s", "[0, inf)", "", crosses),
        ("1", "k*X", "s*X", "[0, m]", "as_equation", crosses),
        ("1", "-k", "s*X", "[0, inf)", "", crosses),
        ("1/2", "k", "s*X*(1 - X)", "[0, 1]", "", crosses),
    ] {
        let found = ends(initial, drift, diffusion, domain, edge);
        assert_eq!(found, [expected], "{initial}; {drift}; {diffusion}; {edge}");
    }
}

/// The same drift is inward in Stratonovich's sense and outward in Ito's.
#[test]
fn the_drift_at_an_end_is_that_of_ito() {
    let body = state("1", "k*X - k/8", "sqrt(k*X)", "[0, inf)", "");
    let of = |calculus: &str| {
        let head = format!("[model]\nname = \"m\"\ndrivers = [\"W\"]\ncalculus = \"{calculus}\"\n");
        compile(&SourceFile::new(
            "m.toml",
            format!("{head}{POSITIVE}{body}"),
        ))
        .diagnostics
    };
    let crosses =
        |found: &[driftwright::Diagnostic]| found.iter().any(|d| d.code == Code::ClosedEndCrossed);
    assert!(crosses(&of("ito")));
    assert!(!crosses(&of("stratonovich")));
}

#[test]
fn assumptions_that_narrow_the_parameters_are_fine() {
    for assumptions in [
        "feller = \"2*k*m >= s^2\"",
        "order = \"k > m\"\nmore = \"m > s\"",
        "order = \"k > m\"\nsquares = \"k^2 > 2*m^2\"",
        "one = \"k >= m\"\nother = \"m >= k\"",
        "below = \"k < 3\"\nabove = \"k > 0.5\"",
        "strict = \"k >= 1\"\nless = \"m^2 <= 4\"",
        "logs = \"log(k) > 0\"\nplain = \"m > 1\"",
    ] {
        let state = state("1", "k*(m - X)", "s", "(-inf, inf)", "");
        let text = format!("{HEAD}{POSITIVE}[assumptions]\n{assumptions}\n{state}");
        let source = SourceFile::new("m.toml", text.as_str());
        let mut found = compile(&source).diagnostics;
        found.retain(|d| d.code != Code::AssumptionFails);
        assert!(found.is_empty(), "{}", human(&source, &found, false));
    }
}

#[test]
fn names_that_readers_tell_apart_are_fine() {
    for (one, other) in [
        ("S", "s"),
        ("p", "ρ"),
        ("n", "η"),
        ("a", "α"),
        ("y", "γ"),
        ("w", "ω"),
        ("k", "κ"),
        ("u", "υ"),
        ("x1", "xl"),
        ("sigma", "σ"),
        ("xa", "xₐ"),
        ("e", "é"),
    ] {
        let text = format!(
            "[model]\nname = \"m\"\n[parameters]\n\"{one}\" = 1\n\"{other}\" = 2\n\
             [states.X]\ninitial = \"{one}\"\ndrift = \"{other}\"\n"
        );
        let source = SourceFile::new("m.toml", text.as_str());
        let found = compile(&source).diagnostics;
        assert!(found.is_empty(), "{}", human(&source, &found, false));
    }
}

/// A composed and a decomposed accent are one character: the name is declared with the one and used
/// with the other.
#[test]
fn accents_may_be_composed_in_two_ways() {
    let text = "[model]\nname = \"m\"\n[parameters]\n\"e\u{301}tat\" = 1\n\
                [states.X]\ninitial = \"\u{e9}tat\"\ndrift = \"-e\u{301}tat*X\"\n";
    let compilation = compile(&SourceFile::new("m.toml", text));
    assert!(compilation.diagnostics.is_empty());
    assert_eq!(
        compilation.compiled.unwrap().model.parameters[0].name,
        "\u{e9}tat"
    );
}

#[test]
fn claims_about_states_are_fine() {
    for claim in [
        "martingale = \"exp(k*t)*(X - m)\"",
        "mean_of = \"X\", is = \"m + (1 - m)*exp(-k*t)\"",
        "drift_of = \"t*X\", is = \"X + t*k*(m - X)\"",
        "mean_of = \"max(X - m, 0)\", is = \"k*t\"",
    ] {
        let state = state("1", "k*(m - X)", "s", "(-inf, inf)", "");
        let text = format!("{HEAD}{POSITIVE}{state}[claims]\nc = {{ {claim} }}\n");
        let found = compile(&SourceFile::new("m.toml", text.as_str())).diagnostics;
        assert!(found.iter().all(|d| d.code != Code::EmptyClaim), "{claim}");
    }
}
