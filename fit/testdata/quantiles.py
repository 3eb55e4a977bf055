# Makes the figures of quantiles_test.go with 40-digit arithmetic: python3 quantiles.py
# Needs mpmath, and scipy for starting values only.
import mpmath as mp
from scipy import stats

mp.mp.dps = 40
mpf = mp.mpf


def t_quantile(p, nu):
    nu = mpf(nu)
    c = mp.exp(mp.loggamma((nu + 1) / 2) - mp.loggamma(nu / 2)) / mp.sqrt(mp.pi * nu)
    cdf = lambda x: mpf(1) / 2 + c * mp.quad(lambda s: (1 + s * s / nu) ** (-(nu + 1) / 2), [0, x / 2, x])
    return mp.findroot(lambda x: cdf(x) - mpf(p), stats.t.ppf(p, float(nu)))


def chi2_tail(x, k):
    return mp.gammainc(mpf(k) / 2, mpf(x) / 2, mp.inf, regularized=True)


def chi2_quantile(p, k):
    return mp.findroot(lambda x: 1 - chi2_tail(x, k) - mpf(p), stats.chi2.ppf(p, k))


def f_quantile(p, a, b):
    a, b = mpf(a), mpf(b)
    c = mp.loggamma((a + b) / 2) - mp.loggamma(a / 2) - mp.loggamma(b / 2) + a / 2 * mp.log(a / b)
    # in s = sqrt(x), whose density has no pole at 0
    density = lambda s: 2 * s * mp.exp(c + (a / 2 - 1) * mp.log(s * s) - (a + b) / 2 * mp.log1p(a * s * s / b)) if s > 0 else mpf(0)
    start = mp.sqrt(stats.f.ppf(p, float(a), float(b)))
    return mp.findroot(lambda s: mp.quad(density, [0, s / 8, s / 2, s]) - mpf(p), start) ** 2


for p, nu in [(0.975, 1), (0.975, 2), (0.975, 4), (0.975, 10), (0.995, 16), (0.6, 1000), (0.975, 12.5),
              (0.975, 10000), (0.975, 10001), (0.9999, 20000), (0.975, 1e6), (0.975, 1e9), (0.025, 1e9)]:
    print("t", p, nu, mp.nstr(t_quantile(p, nu), 17))
for p, k in [(0.95, 1), (0.95, 3), (0.05, 5), (0.999, 20), (0.5, 2.5)]:
    print("chi2", p, k, mp.nstr(chi2_quantile(p, k), 17))
for x, k in [(7.8147279, 3), (22.673185, 5), (200, 5), (50, 2)]:
    print("tail", x, k, mp.nstr(chi2_tail(x, k), 17))
for p, a, b in [(0.95, 3, 20), (0.95, 1, 4), (0.95, 1, 10), (0.5, 7, 33.5), (0.95, 3, 1e6), (0.95, 3, 1e8), (0.95, 5, 1e9)]:
    print("F", p, a, b, mp.nstr(f_quantile(p, a, b), 17))
