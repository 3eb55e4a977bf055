#!/usr/bin/env python3
"""Least-squares fits of invented bump logs with scipy, for wald_test.go.

Writes wald-NAME.csv (t, u, y: the log) and wald.json (estimates and Wald
standard errors under white noise). The simulation is the closed form of the
step response, the optimum scipy.optimize.least_squares from many dead times,
the covariance s2 * inv(J'J) with J from central differences. Run it in this
folder: python3 wald.py. Made with numpy 1.24 and scipy 1.10.
"""
import json

import numpy as np
from scipy.optimize import least_squares


def step_response(s, lags):
    """Unit step response of distinct lags at the times s after the step."""
    out = np.zeros_like(s)
    on = s > 0
    x = s[on]
    z = np.ones_like(x)
    for i, a in enumerate(lags):
        c = 1.0
        for j, b in enumerate(lags):
            if j != i:
                c *= a / (a - b)
        z -= c * np.exp(-x / a)
    out[on] = z
    return out


def output(p, t, bumps, lags):
    """p = gain, lags..., dead time, baseline[, drift]"""
    tau, dead = p[1 : 1 + lags], p[1 + lags]
    y = np.full_like(t, p[2 + lags])
    if len(p) > 3 + lags:
        y += p[3 + lags] * t
    for at, du in bumps:
        y += p[0] * du * step_response(t - at - dead, tau)
    return y


def case(name, seed, n, h, lags, dead, drift, bumps, jitter):
    rng = np.random.default_rng(seed)
    t = h * np.arange(n)
    if jitter:
        t[1:-1] += h * jitter * (rng.random(n - 2) - 0.5)
    t = np.round(t, 6)
    truth = [7.3] + lags + [dead, 61.0] + ([drift] if drift else [])
    # A row's input holds from its time stamp on: bumps at row times.
    rows = [(int(np.searchsorted(t, at)), du) for at, du in bumps]
    u = np.full(n, 3.0)
    for k, du in rows:
        u[k:] += du
    bumps = [(t[k], du) for k, du in rows]
    y = output(np.array(truth), t, bumps, len(lags)) + 0.12 * rng.standard_normal(n)
    y = np.round(y, 6)
    with open(f"wald-{name}.csv", "w") as f:
        f.write("t_s,u_V,y_degC\n")
        for a, b, c in zip(t, u, y):
            f.write(f"{a:.6f},{b:.3f},{c:.6f}\n")

    def residual(p):
        return output(p, t, bumps, len(lags)) - y

    best = None
    for d in np.linspace(0.2 * dead, 2.5 * dead, 41):
        start = np.array(truth, float)
        start[1 + len(lags)] = d
        low = [-np.inf] + [1e-6] * len(lags) + [0.0] + [-np.inf] * (1 + bool(drift))
        r = least_squares(residual, start, bounds=(low, np.inf), x_scale=np.abs(start) + 1e-3, xtol=1e-15, ftol=1e-15, gtol=1e-15, max_nfev=400)
        if best is None or r.cost < best.cost:
            best = r
    p = best.x

    def jacobian(p):
        j = np.empty((n, len(p)))
        for i in range(len(p)):
            d = 1e-6 * max(abs(p[i]), 1e-3)
            up, down = p.copy(), p.copy()
            up[i] += d
            down[i] -= d
            j[:, i] = (residual(up) - residual(down)) / (2 * d)
        return j

    for _ in range(30):  # Gauss-Newton to the last digits
        j = jacobian(p)
        p = p - np.linalg.lstsq(j, residual(p), rcond=None)[0]
    r = residual(p)
    j = jacobian(p)
    s2 = r @ r / (n - len(p))
    se = np.sqrt(np.diag(s2 * np.linalg.inv(j.T @ j)))
    return {
        "name": name,
        "structure": "fopdt" if len(lags) == 1 else f"chain{len(lags)}",
        "drift": "linear" if drift else "none",
        "sse": float(r @ r),
        "value": [float(v) for v in p],
        "se": [float(v) for v in se],
    }


cases = [
    case("one-lag", 11, 240, 0.5, [9.0], 3.21, 0.0, [(20, 1.5)], 0.0),
    case("two-lags", 12, 260, 0.5, [11.0, 3.0], 2.63, 0.0, [(20, 1.5), (75, -1.5)], 0.3),
    case("two-lags-drift", 13, 280, 0.5, [11.0, 3.0], 2.63, 0.004, [(20, 1.5), (75, -1.5)], 0.0),
    case("two-lags-long", 14, 900, 0.2, [11.0, 3.0], 2.63, 0.0, [(30, 1.5), (100, -1.5)], 0.0),
]
with open("wald.json", "w") as f:
    json.dump(cases, f, indent=1)
    f.write("\n")
