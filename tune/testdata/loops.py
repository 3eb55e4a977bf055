"""Independent figures of closed loops with exact dead time, for tune's tests.

Run:  python3 loops.py > loops.csv   (numpy, mpmath; about a minute)

Ms, Mt, gain, phase and delay margin come from a dense sweep in double
precision refined in 30-digit arithmetic; the rightmost poles from Newton's
method started on a grid of the right part of the plane, their number checked
by the argument principle on a rectangle.
"""
import mpmath as mp
import numpy as np

mp.mp.dps = 30

# structure, gain, lags, dead time, kc, ti, td, tf
LOOPS = [
    ("fopdt", 2, [10], 2, 1.25, 10, 0, 0),
    ("fopdt", 2, [10], 2, 2.25, 20 / 3, 0, 0),
    ("fopdt", 1, [1], 5, 0.2, 1.5, 0, 0),
    ("chain2", 1.6, [420, 60], 25, 3.0, 300, 0, 0),
    ("chain2", -1.6, [420, 60], 25, -3.0, 300, 40, 5),
    ("chain3", 4.5, [30, 8, 1], 3, 0.4, 25, 6, 0.8),
    ("chain4", 0.7, [100, 30, 9, 0.5], 12, 2.0, 110, 0, 0),
    ("equal4", 1, [1], 0.3, 0.5, 2.5, 0, 0),
    ("equal8", 3, [2], 1, 0.15, 9, 2.5, 0.3),
    ("chain2", 1, [5, 5], 1, 2.0, None, 0, 0),
    ("fopdt", 1, [20], 1, 8.0, None, 0, 0),
    ("ipdt", 0.05, [], 4, 2.5, 32, 0, 0),
    ("ipdt", 0.05, [], 4, 2.2, 40, 2, 0.5),
    ("chain3", 1, [10, 3, 1], 0, 3.0, 10, 0, 0),
]


def expand(structure, lags):
    return lags * int(structure[5:]) if structure.startswith("equal") else lags


def loop(spec, lib):
    structure, k, lags, theta, kc, ti, td, tf = spec
    lags = expand(structure, lags)

    def value(s):
        c = 1 + td * s
        if ti is not None:
            c = c + 1 / (ti * s)
        g = k * kc * c / (1 + tf * s) * lib.exp(-theta * s)
        if structure == "ipdt":
            g = g / s
        for tau in lags:
            g = g / (1 + tau * s)
        return g

    return value


def phase(spec, w):
    structure, k, lags, theta, kc, ti, td, tf = spec
    a = -theta * w - mp.atan(tf * w)
    if ti is not None:
        a += mp.arg(mp.mpc(1 - ti * td * w * w, ti * w)) - mp.pi / 2
    else:
        a += mp.atan(td * w)
    if structure == "ipdt":
        a -= mp.pi / 2
    for tau in expand(structure, lags):
        a -= mp.atan(tau * w)
    return a


def peak(f, grid, v):
    i = int(np.argmax(v))
    d = lambda x: mp.diff(lambda lw: mp.log(f(mp.exp(lw))), x)
    if i in (0, len(v) - 1):
        return mp.mpf(v[i])
    x = mp.findroot(d, (mp.log(grid[i - 1]), mp.log(grid[i + 1])), solver="anderson", tol=1e-24, verify=False)
    return f(mp.exp(x))


def figures(spec):
    fast, exact = loop(spec, np), loop(spec, mp)
    grid = np.logspace(-7, 4, 1_500_001)
    with np.errstate(all="ignore"):
        l = fast(1j * grid)
    ms = peak(lambda w: 1 / abs(1 + exact(1j * w)), grid, 1 / abs(1 + l))
    mt = peak(lambda w: abs(exact(1j * w) / (1 + exact(1j * w))), grid, abs(l / (1 + l)))
    size = abs(l) - 1
    pm, dm = mp.inf, mp.inf
    for i in np.nonzero(size[:-1] * size[1:] < 0)[0]:
        w = mp.findroot(lambda w: mp.log(abs(exact(1j * w))), (grid[i], grid[i + 1]), solver="anderson", tol=1e-24, verify=False)
        above = (phase(spec, w) + mp.pi) % (2 * mp.pi)
        pm = min(pm, min(above, 2 * mp.pi - above) * 180 / mp.pi)
        dm = min(dm, above / w)
    gm = mp.inf
    keep = abs(l) > 1e-4
    for i in np.nonzero((l.imag[:-1] * l.imag[1:] < 0) & (l.real[:-1] < 0) & keep[:-1])[0]:
        w = mp.findroot(lambda w: mp.im(exact(1j * w)), (grid[i], grid[i + 1]), solver="anderson", tol=1e-24, verify=False)
        m = abs(exact(1j * w))
        if m < 1:
            gm = min(gm, 1 / m)
    return ms, mt, gm, pm, dm


def poles(spec):
    structure, k, lags, theta, kc, ti, td, tf = spec
    lags = expand(structure, lags)

    def f(s, lib=mp):
        d = 1 + tf * s
        n = k * kc * (1 + td * s)
        if ti is not None:
            d = d * ti * s
            n = k * kc * (1 + ti * s + ti * td * s * s)
        if structure == "ipdt":
            d = d * s
        for tau in lags:
            d = d * (1 + tau * s)
        return d + n * lib.exp(-theta * s)

    unit = 1 / (sum(lags) + theta + (0 if lags else 4 * theta))
    x, y = np.meshgrid(np.linspace(-40, 4, 89), np.linspace(0, 40, 81))
    starts = [((x + 1j * y) * unit).ravel()]
    if theta > 0:
        x, y = np.meshgrid(np.linspace(-10, 1, 67), np.linspace(0, 30, 121))
        starts.append(((x + 1j * y) / theta).ravel())
    s = np.concatenate(starts)
    with np.errstate(all="ignore"):
        for _ in range(60):
            h = 1e-6 * (np.abs(s) + 1e-3 * unit)
            s = s - f(s, np) * 2 * h / (f(s + h, np) - f(s - h, np))
        good = np.isfinite(s) & (s.real > -60 * max(unit, 1 / theta if theta > 0 else 0))
    found = []
    for z in s[good]:
        z = complex(z.real, abs(z.imag))
        if any(abs(z - complex(q)) < 1e-5 * abs(z) for q in found):
            continue
        try:
            r = mp.findroot(f, mp.mpc(z), tol=1e-24, maxsteps=50)
        except (ValueError, ZeroDivisionError):
            continue
        r = mp.mpc(mp.re(r), abs(mp.im(r)))
        if abs(mp.im(r)) < 1e-14 * abs(r):
            r = mp.mpc(mp.re(r), 0)
        if all(abs(r - q) > 1e-8 * abs(r) for q in found):
            found.append(r)
    found.sort(key=lambda r: (-mp.re(r), mp.im(r)))
    within = [r for r in found if theta == 0 or mp.re(r) > -8 / theta]
    keep = within[: min(4, len(within))]
    # argument principle on the rectangle that should hold exactly these
    rest = found[len(keep):]
    left = float(mp.re(keep[-1])) * 1.2 if not rest else float(mp.re(keep[-1]) + mp.re(rest[0])) / 2
    if theta > 0:
        left = max(left, -8.5 / theta)
    right, top = 5 * unit, max(400 * unit, 40 / theta if theta > 0 else 0)
    path = np.concatenate([
        np.linspace(complex(left, -top), complex(right, -top), 200_000),
        np.linspace(complex(right, -top), complex(right, top), 400_000),
        np.linspace(complex(right, top), complex(left, top), 200_000),
        np.linspace(complex(left, top), complex(left, -top), 2_000_000)])
    v = f(path, np)
    turns = round(float(np.sum(np.angle(v[1:] / v[:-1])) / (2 * np.pi)))
    count = sum(2 if mp.im(r) > 0 else 1 for r in keep)
    assert turns == count, (spec, turns, count, keep, found[:8])
    return keep


def text(x):
    return "inf" if x == mp.inf else mp.nstr(x, 16)


print("structure,gain,lags,dead_time,kc,ti,td,tf,ms,mt,gain_margin,phase_margin_deg,delay_margin,poles")
for spec in LOOPS:
    row = [spec[0], spec[1], "|".join(map(repr, spec[2])), spec[3], spec[4], spec[5] if spec[5] else "", spec[6], spec[7]]
    row += [text(x) for x in figures(spec)]
    row.append("|".join(text(mp.re(p)) + ":" + text(mp.im(p)) for p in poles(spec)))
    print(",".join(map(str, row)), flush=True)
