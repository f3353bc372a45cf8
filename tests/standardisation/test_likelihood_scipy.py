"""The marginal likelihood and its maximum, redone with scipy.

Value: true stretch and colour are integrated out by brute force on a grid, from the generative model alone, so that the closed
form is not used. Maximum: scipy's BFGS with numerical derivatives. Tolerances: 1e-6 in ln L a supernova (grid), 0.01
of its error in each parameter (where the search stops), 2% in the errors (differences of the function).
"""
import json
import os
import subprocess
import sys
import tempfile

import numpy as np
from scipy import optimize, stats

program = os.path.join("tests", "test_standardisation")
if not os.path.exists(program):
    print("test_standardisation is not built")
    sys.exit(77)
with tempfile.TemporaryDirectory() as folder:
    path = os.path.join(folder, "fit.json")
    subprocess.run([program, "[.dump]"], check=True, env=dict(os.environ, THIRDRUNG_DUMP=path), stdout=subprocess.DEVNULL)
    with open(path) as file:
        fit = json.load(file)

data = np.array(fit["data"])
x = data[:, :3]
covariance = np.empty((len(data), 3, 3))
for k, (i, j) in enumerate([(0, 0), (0, 1), (0, 2), (1, 1), (1, 2), (2, 2)]):
    covariance[:, i, j] = covariance[:, j, i] = data[:, 3 + k]
flow, mass = data[:, 9], data[:, 10]
names = fit["names"]
best = np.array(fit["values"])
errors = np.array(fit["errors"])


def by_integration(p, n):
    """ln of the likelihood of supernova n: product of densities integrated over true s and c on a grid of +-8 widths."""
    v = dict(zip(names, p))
    s = v["s_mean"] + v["s_width"] * np.linspace(-8, 8, 801)
    c = v["c_mean"] + v["c_width"] * np.linspace(-8, 8, 801)
    ss, cc = np.meshgrid(s, c, indexing="ij")
    m = v["intercept"] - v["alpha"] * (ss - 1) + v["beta"] * cc - v["gamma"] * (mass[n] - 0.5)
    # Scatter of the true magnitude adds to the noise of the observed one.
    noise = covariance[n].copy()
    noise[0, 0] += flow[n] + v["sigma_int"] ** 2 + v["gamma"] ** 2 * mass[n] * (1 - mass[n])
    residual = np.stack([x[n, 0] - m, x[n, 1] - ss, x[n, 2] - cc], axis=-1)
    density = stats.multivariate_normal(cov=noise).pdf(residual)
    density *= stats.norm.pdf(ss, v["s_mean"], v["s_width"]) * stats.norm.pdf(cc, v["c_mean"], v["c_width"])
    return np.log(density.sum() * (s[1] - s[0]) * (c[1] - c[0]))


def minus_two_ln_likelihood(p):
    v = dict(zip(names, p))
    if min(v["sigma_int"], v["s_width"], v["c_width"]) <= 0:
        return np.inf
    mean_m = v["intercept"] - v["alpha"] * (v["s_mean"] - 1) + v["beta"] * v["c_mean"] - v["gamma"] * (mass - 0.5)
    to_observed = np.array([[-v["alpha"], v["beta"], 1], [1, 0, 0], [0, 1, 0]])
    total = 0.0
    for n in range(len(x)):
        inner = np.diag([v["s_width"] ** 2, v["c_width"] ** 2,
                         v["sigma_int"] ** 2 + flow[n] + v["gamma"] ** 2 * mass[n] * (1 - mass[n])])
        full = covariance[n] + to_observed @ inner @ to_observed.T
        r = x[n] - [mean_m[n], v["s_mean"], v["c_mean"]]
        total += np.linalg.slogdet(2 * np.pi * full)[1] + r @ np.linalg.solve(full, r)
    return total


value = minus_two_ln_likelihood(best)
print("value", value, fit["minus_two_ln_likelihood"])
assert abs(value - fit["minus_two_ln_likelihood"]) < 1e-7
integrated = np.array([by_integration(best, n) for n in range(6)])


def closed(p, n):
    global x, covariance, flow, mass
    keep = x, covariance, flow, mass
    x, covariance, flow, mass = x[n:n + 1], covariance[n:n + 1], flow[n:n + 1], mass[n:n + 1]
    result = -0.5 * minus_two_ln_likelihood(p)
    x, covariance, flow, mass = keep
    return result


analytic = np.array([closed(best, n) for n in range(6)])
print("integration minus closed form", integrated - analytic)
assert np.all(np.abs(integrated - analytic) < 1e-6)

# From a start two errors away in every parameter.
start = best + 2 * errors * np.array([1, -1, 1, -1, 1, -1, 1, -1, 1])
scaled = lambda u: minus_two_ln_likelihood(best + errors * u)
found = optimize.minimize(scaled, (start - best) / errors, method="BFGS", options={"gtol": 1e-4})
print("maximum, in errors from the fit's", np.round(found.x, 5))
assert np.all(np.abs(found.x) < 0.01)
step = 1e-3
hessian = np.empty((9, 9))
for i in range(9):
    for j in range(i, 9):
        e_i, e_j = step * np.eye(9)[i], step * np.eye(9)[j]
        hessian[i, j] = hessian[j, i] = (scaled(e_i + e_j) - scaled(e_i - e_j) - scaled(e_j - e_i) + scaled(-e_i - e_j)) / (4 * step**2)
ratio = np.sqrt(np.diag(2 * np.linalg.inv(hessian)))
print("errors, ratio to the fit's", np.round(ratio, 4))
assert np.all(np.abs(ratio - 1) < 0.02)
