//! Analytic moments of the models with several states and an exact law.

use driftwright_tests::harness::laws::*;
use driftwright_tests::harness::values::Values;

use crate::cases::{At, Expected};

/// Two correlated geometric Brownian motions; the swap's mean is Margrabe's formula (1978).
pub(crate) fn twin_orchards(p: &Values, at: At) -> Expected {
    let t = at.time;
    let (sa, sb) = (p.get("sigma_A"), p.get("sigma_B"));
    let (va, vb, cov) = (sa * sa * t, sb * sb * t, p.get("rho") * sa * sb * t);
    let ma = p.get("A0").ln() + p.get("mu_A") * t - va / 2.0;
    let mb = p.get("B0").ln() + p.get("mu_B") * t - vb / 2.0;
    let (a, b) = (lognormal(ma, va), lognormal(mb, vb));
    let (fa, fb) = ((ma + va / 2.0).exp(), (mb + vb / 2.0).exp());
    let between = va + vb - 2.0 * cov;
    let spread = a.variance.unwrap() + b.variance.unwrap() - 2.0 * fa * fb * cov.exp_m1();
    vec![
        ("A", a),
        ("B", b),
        ("ratio", lognormal(ma - mb, between)),
        ("product", lognormal(ma + mb, va + vb + 2.0 * cov)),
        ("spread", Moments::two(fa - fb, spread)),
        ("log_ratio", normal(ma - mb, between)),
        ("swap", Moments::mean(black_call(fa, fb, between))),
    ]
}

/// Two Gaussian rates and the currency that links them: variances from the integrals of the rates'
/// bond volatilities (Brigo & Mercurio 2006, section 4.2 and 14.1, from memory).
pub(crate) fn ferry_currency(p: &Values, at: At) -> Expected {
    let t = at.time;
    let (kd, kf) = (p.get("k_d"), p.get("k_f"));
    let (sd, sf, sx) = (p.get("sigma_d"), p.get("sigma_f"), p.get("sigma_X"));
    let (rdf, rdx, rfx) = (p.get("rho_df"), p.get("rho_dX"), p.get("rho_fX"));
    let level_f = p.get("m_f") - rfx * sf * sx / kf;
    let paid = |start: f64, level: f64, k: f64| level * t + (start - level) * decayed(k, t);
    let (md, mf) = (
        paid(p.get("d0"), p.get("m_d"), kd),
        paid(p.get("f0"), level_f, kf),
    );
    let (vd, vf) = (
        sd * sd * integrated_covariance(kd, kd, t),
        sf * sf * integrated_covariance(kf, kf, t),
    );
    let linear = |k: f64| (t - decayed(k, t)) / k;
    let log_variance = vd + vf - 2.0 * rdf * sd * sf * integrated_covariance(kd, kf, t)
        + sx * sx * t
        + 2.0 * sx * (rdx * sd * linear(kd) - rfx * sf * linear(kf));
    let log_mean = p.get("X0").ln() + md - mf - sx * sx * t / 2.0;
    let home = p.get("X0").ln() - sx * sx * t / 2.0;
    vec![
        (
            "d",
            normal(
                ou_mean(p.get("d0"), p.get("m_d"), kd, t),
                ou_variance(kd, sd, t),
            ),
        ),
        (
            "f",
            normal(ou_mean(p.get("f0"), level_f, kf, t), ou_variance(kf, sf, t)),
        ),
        ("X", lognormal(log_mean, log_variance)),
        ("paid_d", normal(md, vd)),
        ("paid_f", normal(mf, vf)),
        ("island_account", lognormal(home, sx * sx * t)),
    ]
}

/// Two factors of a log price (Schwartz & Smith 2000, equations 3 to 6).
pub(crate) fn barley_two_factor(p: &Values, at: At) -> Expected {
    let t = at.time;
    let (kappa, sx, sy) = (p.get("kappa"), p.get("sigma_x"), p.get("sigma_y"));
    let vx = ou_variance(kappa, sx, t);
    let vy = sy * sy * t;
    let cov = decayed(kappa, t) * p.get("rho") * sx * sy;
    let mx = ou_mean(p.get("x0"), 0.0, kappa, t);
    let my = p.get("y0") + p.get("mu_y") * t;
    let variance = vx + vy + 2.0 * cov;
    vec![
        ("x", normal(mx, vx)),
        ("y", normal(my, vy)),
        ("log_spot", normal(mx + my, variance)),
        ("spot", lognormal(mx + my, variance)),
    ]
}

/// A Gaussian rate and its integral; `discount` has the mean of Vasicek's bond (1977).
pub(crate) fn harbour_account(p: &Values, at: At) -> Expected {
    let t = at.time;
    let (kappa, theta, sigma) = (p.get("kappa"), p.get("theta"), p.get("sigma"));
    let interest = theta * t + (p.get("r0") - theta) * decayed(kappa, t);
    let variance = sigma * sigma * integrated_covariance(kappa, kappa, t);
    vec![
        (
            "r",
            normal(
                ou_mean(p.get("r0"), theta, kappa, t),
                ou_variance(kappa, sigma, t),
            ),
        ),
        ("I", normal(interest, variance)),
        ("account", lognormal(interest, variance)),
        ("discount", lognormal(-interest, variance)),
    ]
}

/// A pot that follows a kiln cooling by Newton's law.
pub(crate) fn cooling_kiln(p: &Values, at: At) -> Expected {
    let t = at.time;
    let (lambda, kappa) = (p.get("λ"), p.get("κ"));
    let kiln = p.get("D0") * (-lambda * t).exp();
    let fed = ((-lambda * t).exp() - (-kappa * t).exp()) / (kappa - lambda);
    let pot = p.get("P0") * (-kappa * t).exp() + kappa * p.get("D0") * fed;
    let variance = ou_variance(kappa, p.get("σ"), t);
    vec![
        ("D", Moments::two(kiln, 0.0)),
        ("P", normal(pot, variance)),
        ("lag", normal(pot - kiln, variance)),
    ]
}

/// Verhulst's curve (1838) beside a level that reverts to 0.
pub(crate) fn reed_bed(p: &Values, at: At) -> Expected {
    let t = at.time;
    let carried = p.get("K") / p.get("N0") - 1.0;
    let cover = p.get("K") / (1.0 + carried * (-p.get("r") * t).exp());
    let mean = ou_mean(p.get("H0"), 0.0, p.get("kappa"), t);
    let variance = ou_variance(p.get("kappa"), p.get("sigma"), t);
    let wet = phi(mean / variance.sqrt());
    vec![
        ("N", Moments::two(cover, 0.0)),
        ("H", normal(mean, variance)),
        ("reciprocal", Moments::two(1.0 / cover, 0.0)),
        (
            "flooded",
            Moments::two(cover * wet, cover * cover * wet * (1.0 - wet)),
        ),
    ]
}
