"""The benchmark's workloads in idiomatic NumPy: arrays over paths, a loop over steps.

Prints one JSON object, seconds by workload (the best of three runs). Usage: numpy_workloads.py PATHS STEPS
"""

import json
import sys
import time

import numpy as np

PATHS, STEPS = int(sys.argv[1]), int(sys.argv[2])
H = 1.0 / STEPS


def geometric_brownian_motion(rng):
    s0, mu, sigma = 42.0, 0.05, 0.2
    log_s = np.full(PATHS, np.log(s0))
    for _ in range(STEPS):
        log_s += (mu - sigma**2 / 2) * H + sigma * np.sqrt(H) * rng.standard_normal(PATHS)
    s = np.exp(log_s)
    return s.mean(), s.var(ddof=1)


def ornstein_uhlenbeck(rng):
    x0, kappa, theta, sigma = 4.0, 0.9, -1.5, 2.1
    decay = np.exp(-kappa * H)
    deviation = sigma * np.sqrt((1 - decay**2) / (2 * kappa))
    x = np.full(PATHS, x0)
    for _ in range(STEPS):
        x = theta + (x - theta) * decay + deviation * rng.standard_normal(PATHS)
    return x.mean(), x.var(ddof=1)


def correlated_pair(rng):
    start, mu = np.array([100.0, 95.0]), np.array([0.04, 0.02])
    sigma, rho = np.array([0.3, 0.22]), 0.6
    factor = np.linalg.cholesky(np.array([[1.0, rho], [rho, 1.0]]))
    log_s = np.tile(np.log(start)[:, None], (1, PATHS))
    drift = ((mu - sigma**2 / 2) * H)[:, None]
    scale = (sigma * np.sqrt(H))[:, None]
    for _ in range(STEPS):
        log_s += drift + scale * (factor @ rng.standard_normal((2, PATHS)))
    s = np.exp(log_s)
    return s.mean(axis=1), s.var(axis=1, ddof=1)


def best_of_three(workload):
    best = float("inf")
    for seed in range(3):
        rng = np.random.default_rng(seed)
        begin = time.perf_counter()
        workload(rng)
        best = min(best, time.perf_counter() - begin)
    return best


workloads = (geometric_brownian_motion, ornstein_uhlenbeck, correlated_pair)
print(json.dumps({w.__name__: best_of_three(w) for w in workloads} | {"numpy": np.__version__}))
