//! Analytic moments of the models with one random state and an exact law, from the sources named
//! in the models' `about` and beside each law.

use driftwright_tests::harness::laws::*;
use driftwright_tests::harness::values::Values;

use crate::cases::{At, Expected};

/// Brownian motion with drift.
pub(crate) fn harbour_toll(p: &Values, at: At) -> Expected {
    let (mean, variance) = (
        p.get("X0") + p.get("mu") * at.time,
        p.get("sigma").powi(2) * at.time,
    );
    let a = p.get("a");
    vec![
        ("X", normal(mean, variance)),
        ("square", squared_normal(mean, variance)),
        ("wald", lognormal(a * mean, a * a * variance)),
        (
            "shortfall",
            Moments::mean(bachelier_put(mean, variance, p.get("floor"))),
        ),
    ]
}

/// Geometric Brownian motion; the call's mean is the formula of Black & Scholes 1973.
pub(crate) fn orchard_spot(p: &Values, at: At) -> Expected {
    let (s0, mu, sigma) = (p.get("S0"), p.get("mu"), p.get("sigma"));
    let variance = sigma * sigma * at.time;
    let mean = s0.ln() + mu * at.time - variance / 2.0;
    let forward = s0 * (mu * at.time).exp();
    let call = (-mu * at.time).exp() * black_call(forward, p.get("strike"), variance);
    vec![
        ("S", lognormal(mean, variance)),
        ("log_S", normal(mean, variance)),
        ("square_root", lognormal(mean / 2.0, variance / 4.0)),
        ("call", Moments::mean(call)),
    ]
}

/// Ornstein-Uhlenbeck process.
pub(crate) fn river_spread(p: &Values, at: At) -> Expected {
    let (kappa, theta) = (p.get("kappa"), p.get("theta"));
    let mean = ou_mean(p.get("X0"), theta, kappa, at.time);
    let variance = ou_variance(kappa, p.get("sigma"), at.time);
    let growth = (kappa * at.time).exp();
    vec![
        ("X", normal(mean, variance)),
        (
            "deviation",
            normal(p.get("X0") - theta, growth * growth * variance),
        ),
        ("energy", squared_normal(mean - theta, variance)),
        ("congested", indicator(phi(mean / variance.sqrt()))),
    ]
}

/// The same process in disguise.
pub(crate) fn tide_gauge(p: &Values, at: At) -> Expected {
    let mean = ou_mean(p.get("Z0"), p.get("theta"), p.get("kappa"), at.time);
    let variance = ou_variance(p.get("kappa"), p.get("sigma"), at.time);
    vec![("Z", normal(mean, variance))]
}

/// Geometric Brownian motion under two correlated drivers, Stratonovich.
pub(crate) fn glacier_melt(p: &Values, at: At) -> Expected {
    let (v, w) = (p.get("sigma_V"), p.get("sigma_W"));
    let variance = (v * v + 2.0 * p.get("rho") * v * w + w * w) * at.time;
    let mean = p.get("Q0").ln() + p.get("mu") * at.time;
    vec![
        ("Q", lognormal(mean, variance)),
        ("log_Q", normal(mean, variance)),
    ]
}

/// Geometric Ornstein-Uhlenbeck process.
pub(crate) fn salt_price(p: &Values, at: At) -> Expected {
    let (kappa, sigma) = (p.get("kappa"), p.get("sigma"));
    let alpha = p.get("mu") - sigma * sigma / (2.0 * kappa);
    let mean = ou_mean(p.get("S0").ln(), alpha, kappa, at.time);
    let variance = ou_variance(kappa, sigma, at.time);
    vec![
        ("S", lognormal(mean, variance)),
        ("log_S", normal(mean, variance)),
    ]
}

/// Log-normal forward price whose variance is the integral of its squared volatility.
pub(crate) fn cider_forward(p: &Values, at: At) -> Expected {
    let (sigma, kappa) = (p.get("sigma"), p.get("kappa"));
    let faded = |time: f64| (-2.0 * kappa * (p.get("delivery") - time)).exp();
    let variance = sigma * sigma * (faded(at.time) - faded(0.0)) / (2.0 * kappa);
    let mean = p.get("F0").ln() - 0.5 * variance;
    vec![
        ("F", lognormal(mean, variance)),
        ("log_F", normal(mean, variance)),
    ]
}

/// A season and an Ornstein-Uhlenbeck process around it, in the logarithm.
pub(crate) fn peat_season(p: &Values, at: At) -> Expected {
    let season = |time: f64| {
        let phase = std::f64::consts::TAU * time / p.get("year");
        p.get("level") + p.get("swing") * phase.cos()
    };
    let apart = ou_mean(p.get("P0").ln() - season(0.0), 0.0, p.get("kappa"), at.time);
    let variance = ou_variance(p.get("kappa"), p.get("sigma"), at.time);
    let mean = season(at.time) + apart;
    vec![
        ("P", lognormal(mean, variance)),
        ("log_P", normal(mean, variance)),
    ]
}

/// Logit-normal share; the share's own moments by quadrature over the driver.
pub(crate) fn market_share(p: &Values, at: At) -> Expected {
    let odds = p.get("p0") / (1.0 - p.get("p0"));
    let mean = odds.ln() + p.get("mu") * at.time;
    let variance = p.get("sigma").powi(2) * at.time;
    vec![
        (
            "p",
            image_of_normal(mean, variance, |u| 1.0 / (1.0 + (-u).exp())),
        ),
        ("log_odds", normal(mean, variance)),
        ("odds", lognormal(mean, variance)),
    ]
}

/// Brownian motion reflected at 0: the modulus of a Brownian motion.
pub(crate) fn sluice_level(p: &Values, at: At) -> Expected {
    let variance = p.get("sigma").powi(2) * at.time;
    vec![
        ("H", folded_normal(p.get("H0"), variance)),
        ("square", squared_normal(p.get("H0"), variance)),
    ]
}

/// A square-root process with fading noise: `exp(-k t) tau` times a noncentral chi-square variable (Johnson, Kotz &
/// Balakrishnan 1995, section 29.4) with the time `tau = s^2/4 int exp((k - fade) u) du`.
pub(crate) fn hay_moisture(p: &Values, at: At) -> Expected {
    let (k, fade, n) = (p.get("k"), p.get("fade"), p.get("n"));
    let decay = (-k * at.time).exp();
    let tau = p.get("s").powi(2) / 4.0 * decayed(fade - k, at.time);
    let (scale, shift) = (decay * tau, p.get("x0") / tau);
    let variance = 2.0 * (n + 2.0 * shift);
    let skewness = 8.0 * (n + 3.0 * shift) / variance.powf(1.5);
    let (mean, variance) = (scale * (n + shift), scale * scale * variance);
    vec![
        ("x", Moments::all(mean, variance, skewness)),
        ("square", Moments::mean(mean * mean + variance)),
    ]
}

/// A Brownian motion of either drift, each with its probability, and the distance of a drifted Brownian motion in three
/// dimensions: its square's moments given the cosine of the first angle, which follows the law of von Mises & Fisher
/// (Mardia & Jupp 2000, section 9.3), its own by quadrature of the transition density (Rogers & Pitman 1981).
pub(crate) fn fog_buoy(p: &Values, at: At) -> Expected {
    let (x0, m, s2) = (p.get("X0"), p.get("m"), p.get("s").powi(2));
    let up = 1.0 / (1.0 + (-2.0 * (m * x0 / s2 + p.get("c"))).exp());
    let variance = s2 * at.time;
    let sides = [(up, x0 + m * at.time), (1.0 - up, x0 - m * at.time)];
    let raw = |n: i32| {
        let moment = |mean: f64| match n {
            1 => mean,
            2 => mean * mean + variance,
            _ => mean.powi(3) + 3.0 * mean * variance,
        };
        sides.iter().map(|&(w, mean)| w * moment(mean)).sum()
    };
    // E[(X - K)^+] = E[(K - X)^+] + E[X] - K.
    let level = 2.0 * x0;
    let found = sides
        .iter()
        .map(|&(w, mean)| w * (bachelier_put(mean, variance, level) + mean - level))
        .sum();
    let (r0, v, sigma2) = (p.get("R0"), p.get("v"), p.get("sigma").powi(2));
    let k = v * r0 / sigma2;
    let spread = sigma2 * at.time;
    let cosine = 1.0 / k.tanh() - 1.0 / k;
    let far = (v * at.time).powi(2);
    let square = r0 * r0 + 3.0 * spread + far + 2.0 * v * at.time * r0 * cosine;
    // |c|^2 of the vector's mean c has the variance of 2 v t r0 cos; a noncentral square adds its own.
    let cosine_2 = 1.0 - 2.0 * cosine / k;
    let between = (2.0 * v * at.time * r0).powi(2) * (cosine_2 - cosine * cosine);
    let within = 6.0 * spread * spread + 4.0 * spread * (square - 3.0 * spread);
    let distance = drifted_distance(r0, v, sigma2, at.time);
    vec![
        ("X", Moments::from_raw([raw(1), raw(2), raw(3)])),
        ("found", Moments::mean(found)),
        ("square", Moments::two(square, within + between)),
        ("R", distance),
    ]
}

/// Moments of a Bessel process with drift by the trapezoid rule over its transition density.
fn drifted_distance(r0: f64, v: f64, sigma2: f64, t: f64) -> Moments {
    let (k, spread) = (v / sigma2, (sigma2 * t).sqrt());
    let reach = r0 + v * t + 12.0 * spread;
    let parts = 200_000;
    let step = reach / f64::from(parts);
    let mut raw = [0.0; 3];
    for i in 1..parts {
        let y = f64::from(i) * step;
        let killed = density((y - r0) / spread) - density((y + r0) / spread);
        let tilt = (k * y).sinh() / (k * r0).sinh() * (-v * v * t / (2.0 * sigma2)).exp();
        let weight = killed / spread * tilt * step;
        for (power, sum) in raw.iter_mut().enumerate() {
            *sum += weight * y.powi(power as i32 + 1);
        }
    }
    Moments::from_raw(raw)
}
