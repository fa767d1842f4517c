//! Models of any size, for the tests and the benchmark of the compiler's own work.

// Each test takes the families it needs.
#![allow(dead_code)]

use std::fmt::Write as _;

/// Geometric Brownian motions, all correlated, with a logarithm of a quotient for each.
pub(crate) fn correlated(count: usize) -> String {
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
    text
}

/// One state whose drift is a sum of terms over different denominators.
pub(crate) fn long_drift(terms: usize) -> String {
    let terms: Vec<String> = (1..=terms)
        .map(|k| format!("{k}*sin({k}*X)/{}", k * k + 1))
        .collect();
    format!(
        "[model]\nname = \"long\"\ndrivers = [\"W\"]\n[parameters]\na = 0.1\n\
         [states.X]\ninitial = \"1\"\ndrift = \"{}\"\ndiffusion = \"a\"\n",
        terms.join(" + ")
    )
}

/// Derived quantities of which each reads the one before; `step` names it `D`.
pub(crate) fn chain(length: usize, step: &str) -> String {
    let mut text = "[model]\nname = \"chain\"\ndrivers = [\"W\"]\n[parameters]\na = 0.1\n\
                    [states.X]\ninitial = \"0.1\"\ndrift = \"-X\"\ndiffusion = \"a\"\n\
                    [derived.D0]\nformula = \"X\"\n"
        .to_owned();
    for k in 1..length {
        let formula = step.replace('D', &format!("D{}", k - 1));
        writeln!(text, "[derived.D{k}]\nformula = \"{formula}\"").unwrap();
    }
    text
}

/// States of which each follows the one before: every state reaches all after it.
pub(crate) fn cascade(count: usize) -> String {
    let mut text = "[model]\nname = \"cascade\"\ndrivers = [\"W\"]\n[parameters]\nk = 0.5\n\
                    [states.X0]\ninitial = \"1\"\ndrift = \"-k*X0\"\ndiffusion = \"1\"\n"
        .to_owned();
    for i in 1..count {
        let before = i - 1;
        writeln!(
            text,
            "[states.X{i}]\ninitial = \"1\"\ndrift = \"k*(X{before} - X{i})\""
        )
        .unwrap();
    }
    text
}

/// The power of a sum, which is never multiplied out.
pub(crate) fn power_of_sum(exponent: usize) -> String {
    format!(
        "[model]\nname = \"power\"\ndrivers = [\"W\"]\n[parameters]\na = 0.1\nb = 0.2\n\
         [states.X]\ninitial = \"0.5\"\ndrift = \"-X\"\ndiffusion = \"a\"\n\
         [derived.P]\nformula = \"(X + a + b + 1)^{exponent}\"\n"
    )
}

/// A small model, one of many.
pub(crate) fn small(number: usize) -> String {
    format!(
        "[model]\nname = \"small_{number}\"\ndrivers = [\"W\"]\n[parameters]\nmu = 0.05\nsigma = 0.2\n\
         [states.S]\ninitial = \"{number} + 1\"\ndrift = \"mu*S\"\ndiffusion = \"sigma*S\"\n\
         domain = \"(0, inf)\"\n[derived.L]\nformula = \"log(S)\"\n\
         [claims]\nmean = {{ mean_of = \"S\", is = \"({number} + 1)*exp(mu*t)\" }}\n"
    )
}
