//! Work against the size of a model, counted in formulas and term operations, which are the same on
//! every machine.

use std::fmt::Write as _;

use driftwright::pipeline::{Compiled, compile};
use driftwright::source::SourceFile;

fn compiled(text: &str) -> Compiled {
    let compilation = compile(&SourceFile::new("scale.toml", text));
    assert!(!compilation.has_errors());
    compilation.compiled.expect("a model without errors")
}

/// Geometric Brownian motions, all correlated, with a logarithm of a quotient for each.
fn correlated(count: usize) -> Compiled {
    let drivers: Vec<String> = (0..count).map(|i| format!("\"W{i}\"")).collect();
    let mut text = format!(
        "[model]\nname = \"many\"\ndrivers = [{}]\n",
        drivers.join(", ")
    );
    text.push_str("[parameters]\nmu = 0.05\nsigma = 0.2\nrho = 0.3\n[correlation]\n");
    for i in 0..count {
        for j in i + 1..count {
            writeln!(text, "W{i}.W{j} = \"rho\"").unwrap();
        }
    }
    for i in 0..count {
        writeln!(
            text,
            "[states.S{i}]\ninitial = \"100\"\ndrift = \"mu*S{i}\"\n\
             diffusion = {{ W{i} = \"sigma*S{i}\" }}\ndomain = \"(0, inf)\""
        )
        .unwrap();
        let next = (i + 1) % count;
        writeln!(text, "[derived.D{i}]\nformula = \"log(S{i}/S{next})\"").unwrap();
    }
    compiled(&text)
}

/// One state whose drift is a sum of terms over different denominators.
fn long_drift(terms: usize) -> Compiled {
    let terms: Vec<String> = (1..=terms)
        .map(|k| format!("{k}*sin({k}*X)/{}", k * k + 1))
        .collect();
    compiled(&format!(
        "[model]\nname = \"long\"\ndrivers = [\"W\"]\n[parameters]\na = 0.1\n\
         [states.X]\ninitial = \"1\"\ndrift = \"{}\"\ndiffusion = \"a\"\n",
        terms.join(" + ")
    ))
}

fn work(compiled: &Compiled) -> (usize, u64) {
    let pool = &compiled.model.pool;
    (pool.node_count(), pool.operations())
}

#[test]
fn correlated_states_take_formulas_in_proportion() {
    let (small, large) = (work(&correlated(10)), work(&correlated(40)));
    // Four times the states; the correlation matrix, which is part of the output, has 16 times the entries
    // but one value, so that formulas and operations grow with the states.
    assert!(large.0 < 5 * small.0, "{small:?} to {large:?} formulas");
    assert!(large.1 < 5 * small.1, "{small:?} to {large:?} operations");
}

#[test]
fn a_long_sum_takes_work_in_proportion() {
    let (small, large) = (work(&long_drift(100)), work(&long_drift(400)));
    assert!(large.0 < 5 * small.0, "{small:?} to {large:?} formulas");
    assert!(large.1 < 5 * small.1, "{small:?} to {large:?} operations");
}
