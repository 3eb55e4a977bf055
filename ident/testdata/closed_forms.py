"""Closed forms of lag-chain responses in 300-digit arithmetic, for simulate_test.go.

    python3 closed_forms.py > closed_forms.json

The unit step response of distinct lags is 1 - sum_i c_i exp(-t/tau_i) with
c_i = prod_{j != i} tau_i/(tau_i - tau_j). Equal lags are parted by 1e-25 of
their length, which the 300 digits afford; sensitivities are central differences
with a step of 1e-30. Nothing here shares a formula with the Go code. Times are
taken as the doubles that they are.
"""

import json
import random

from mpmath import exp, mp, mpf

mp.dps = 300
SPLIT = mpf(10) ** -25
DELTA = mpf(10) ** -30

PLANTS = [
    ("fopdt", [0.7], 0.22),
    ("fopdt", [0.05], 0.231),
    ("fopdt", [5e-06], 0.04999),
    ("fopdt", [4000.0], 0.013),
    ("chain2", [2.1, 0.65], 0.0),
    ("chain2", [1.3, 1.3], 0.13),
    ("chain2", [0.8000008, 0.8], 0.317),
    ("chain2", [2.0, 0.0002], 0.06),
    ("chain3", [2.1, 0.65, 0.05], 0.22),
    ("chain3", [0.4, 0.4, 0.4], 0.111),
    ("chain3", [0.50000050, 0.5, 0.4999995], 0.0),
    ("chain3", [3.0, 0.03, 0.0003], 0.27),
    ("chain3", [0.05, 2.1, 0.65], 0.22),
    ("chain3", [0.9, 0.03, 0.03], 0.2),
    ("chain3", [0.1, 0.0100000100, 0.01], 0.07),
    ("chain4", [1.9, 0.8, 0.3, 0.02], 0.15),
    ("chain4", [0.6, 0.6, 0.6, 0.6], 0.15),
    ("chain4", [2.0, 1.9, 0.02, 0.0200001], 0.0),
    ("chain4", [7.0, 0.07, 0.0699, 0.0007], 0.4),
    ("equal2", [0.9], 0.1),
    ("equal3", [0.4], 0.111),
    ("equal5", [0.002], 0.3),
    ("equal8", [0.31], 0.06),
]

BEFORE = 1.5
CHANGES = [(0.0, 2.0), (0.3, 4.0), (0.4, -1.0), (0.77, -0.5), (2.05, 3.0), (2.1, 3.5), (2.1250001, 1.0), (6.0, 9.0)]


def times():
    uniform = [k * 0.05 for k in range(55)]
    rng = random.Random(5)
    jittered = [k * 0.1 + rng.uniform(-0.04, 0.04) for k in range(40)]
    gapped = [k * 0.05 for k in range(18)] + [7.3 + k * 0.05 for k in range(12)] + [29.0 + k * 0.25 for k in range(6)]
    return {"uniform": uniform, "jittered": jittered, "gapped": gapped}


def step(taus, t):
    if t < 0:
        return mpf(0)
    total = mpf(1)
    for i, a in enumerate(taus):
        c = mpf(1)
        for j, b in enumerate(taus):
            if j != i:
                c *= a / (a - b)
        total -= c * exp(-t / a)
    return total


def respond(structure, lags, theta, t):
    order = int(structure[-1]) if structure != "fopdt" else 1
    taus = lags * order if structure.startswith("equal") else lags
    taus = [tau * (1 + (k + 1) * SPLIT) for k, tau in enumerate(taus)]
    y, before = mpf(0), mpf(BEFORE)
    for at, value in CHANGES:
        y += (mpf(value) - before) * step(taus, t - mpf(at) - theta)
        before = mpf(value)
    return y


def derivative(f, x):
    return (f(x + DELTA) - f(x - DELTA)) / (2 * DELTA)


def columns(structure, lags, theta, t):
    lags, theta = [mpf(x) for x in lags], mpf(theta)
    out = [respond(structure, lags, theta, t)]
    for i in range(len(lags)):
        out.append(derivative(lambda x: respond(structure, lags[:i] + [x] + lags[i + 1 :], theta, t), lags[i]))
    out.append(derivative(lambda x: respond(structure, lags, x, t), theta))
    return out


def main():
    grids = times()
    cases = []
    for structure, lags, theta in PLANTS:
        for grid, ts in grids.items():
            rows = [columns(structure, lags, theta, mpf(t)) for t in ts]
            table = [[float(mp.nstr(v, 20)) for v in column] for column in zip(*rows)]
            cases.append({"structure": structure, "lags": lags, "dead_time": theta, "grid": grid, "columns": table})
    inputs = {"before": BEFORE, "at": [a for a, _ in CHANGES], "value": [v for _, v in CHANGES]}
    lines = ",\n".join(json.dumps(c) for c in cases)
    print('{"input": %s,\n"grids": %s,\n"cases": [\n%s\n]}' % (json.dumps(inputs), json.dumps(grids), lines))


main()
