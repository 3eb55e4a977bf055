"""Independent closed-loop steps with exact dead time, for tune's tests.

Run:  python3 steps.py > steps.csv   (numpy; about a minute)

The loop is integrated as a delay differential equation by the classical
Runge-Kutta method of order 4 on a grid that divides the dead time, the delayed
output interpolated by cubic Hermite polynomials at half steps; the step is
halved until the figures agree. Without dead time the same method integrates
the ordinary equation. Nothing of the program under test is used.
"""
import numpy as np

# structure, gain, lags, dead time, kc, ti, td, tf, b
LOOPS = [
    ("fopdt", 2, [10], 2, 1.25, 10, 0, 0, 1),
    ("fopdt", 2, [10], 2, 1.9, 6, 0, 0, 1),
    ("fopdt", 1, [1], 5, 0.2, 1.5, 0, 0, 1),
    ("chain2", -1.6, [420, 60], 25, -3.0, 300, 40, 5, 1),
    ("chain2", 1.6, [420, 60], 25, 3.0, 300, 0, 0, 0.4),
    ("chain3", 4.5, [30, 8, 1], 3, 0.9, 18, 6, 0.8, 1),
    ("chain4", 0.7, [100, 30, 9, 0.5], 12, 2.0, 110, 0, 0, 1),
    ("chain3", 1, [10, 3, 1], 0.02, 3.0, 10, 0, 0, 1),
    ("chain3", 1, [10, 3, 1], 0, 3.0, 10, 0, 0, 1),
    ("chain2", 1, [5, 5], 1, 2.0, None, 0, 0, 1),
]


def run(spec, n, r, d):
    structure, k, lags, theta, kc, ti, td, tf, b = spec
    m = len(lags)
    span = sum(lags) + theta
    horizon = 40 * span
    h = theta / n if theta > 0 else span / 400 / n * 8
    if theta > 0 and h > span / 400 / n * 8:
        h = theta / np.ceil(theta / (span / 400 / n * 8))
    delay = int(round(theta / h))
    steps = int(horizon / h)
    size = m + 1 + (1 if tf > 0 else 0)

    def output(x):
        y = k * x[m - 1]
        yf = x[m + 1] if tf > 0 else y
        slope = (y - yf) / tf if tf > 0 else 0.0
        return kc * (b * r - yf - td * slope) + (kc / ti * x[m] if ti else 0.0)

    def rhs(x, v):
        dx = np.empty(size)
        before = v + d_now
        for i, tau in enumerate(lags):
            dx[i] = (before - x[i]) / tau
            before = x[i]
        y = k * x[m - 1]
        yf = x[m + 1] if tf > 0 else y
        dx[m] = r - yf
        if tf > 0:
            dx[m + 1] = (y - yf) / tf
        return dx

    x = np.zeros(size)
    u = np.zeros(steps + 2)
    du0 = np.zeros(steps + 2)  # slope of u at the start of a step
    du1 = np.zeros(steps + 2)  # and at its end
    y = np.zeros(steps + 1)
    for i in range(steps):
        j = i - delay
        d_now = d if i * h >= theta - 1e-12 else 0.0
        u[i] = output(x)
        if delay == 0:
            f = lambda x: rhs(x, output(x))
            k1 = f(x)
            k2 = f(x + h / 2 * k1)
            k3 = f(x + h / 2 * k2)
            k4 = f(x + h * k3)
        else:
            v0 = u[j] if j >= 0 else 0.0
            v1 = u[j + 1] if j >= 0 else 0.0
            vm = (v0 + v1) / 2 + h / 8 * (du0[j] - du1[j]) if j >= 0 else 0.0
            k1 = rhs(x, v0)
            k2 = rhs(x + h / 2 * k1, vm)
            k3 = rhs(x + h / 2 * k2, vm)
            k4 = rhs(x + h * k3, v1)
        nxt = x + h / 6 * (k1 + 2 * k2 + 2 * k3 + k4)

        def slope(x, dx):
            dy = k * dx[m - 1]
            dyf = dx[m + 1] if tf > 0 else dy
            return kc * (-dyf - (td * (dy - dyf) / tf if tf > 0 else 0.0)) + (kc / ti * dx[m] if ti else 0.0)

        du0[i] = slope(x, k1)
        du1[i] = slope(nxt, k4 if delay == 0 else rhs(nxt, v1))
        if delay > 0:
            u[i + 1] = output(nxt)
        x = nxt
        y[i + 1] = k * x[m - 1]
    return np.arange(steps + 1) * h, y


def figures(spec, n):
    structure, k, lags, theta, kc, ti, td, tf, b = spec
    t, y = run(spec, n, 1.0, 0.0)
    target = 1.0 if ti else b * k * kc / (1 + k * kc)
    i = int(np.argmax(y))
    a, c, e = y[i - 1], y[i], y[min(i + 1, len(y) - 1)]
    bend = a - 2 * c + e
    peak = c - (a - e) ** 2 / (8 * bend) if bend < 0 and 0 < i < len(y) - 1 else c
    overshoot = max(0.0, peak / target - 1)
    out = np.nonzero(np.abs(y - target) > 0.02 * target)[0]
    j = out[-1]
    da, db = abs(y[j] - target), abs(y[j + 1] - target)
    settling = t[j] + (da - 0.02 * target) / (da - db) * (t[j + 1] - t[j])
    t, y = run(spec, n, 0.0, 1.0)
    iae = float(np.sum(np.abs(y[1:]) + np.abs(y[:-1])) * (t[1] - t[0]) / 2) if ti else float("nan")
    return np.array([100 * overshoot, settling, iae, float(np.max(y * np.sign(k)))])


print("structure,gain,lags,dead_time,kc,ti,td,tf,b,overshoot_percent,settling_s,load_iae,load_peak")
for spec in LOOPS:
    n, last = 8, figures(spec, 8)
    while n < 64:
        n *= 2
        now = figures(spec, n)
        if np.allclose(now, last, rtol=2e-5, atol=2e-5, equal_nan=True):
            break
        last = now
    row = [spec[0], spec[1], "|".join(map(repr, spec[2])), spec[3], spec[4], spec[5] if spec[5] else "", *spec[6:]]
    print(",".join(map(str, row + ["%.7g" % v for v in now])), flush=True)
