#!/usr/bin/env python3
"""Writes funnel.tsv, chance.tsv and shrinkage.tsv by mpmath, SciPy and plain enumeration.

Tails are sums of chances written out from log gammas at 50 digits; quantiles are counted up from 0;
the normal deviate is a root of mpmath's erfc. Nothing of it is how Countsel does it.
"""
import mpmath as mp
import numpy as np
from scipy import stats
from scipy.optimize import minimize

mp.mp.dps = 50


def chance(k, r, m):
    k, m = mp.mpf(k), mp.mpf(m)
    if r is None:
        return mp.exp(k * mp.log(m) - m - mp.loggamma(k + 1))
    r = mp.mpf(r)
    return mp.exp(mp.loggamma(k + r) - mp.loggamma(r) - mp.loggamma(k + 1)
                  + r * mp.log(r / (r + m)) + k * mp.log(m / (r + m)))


def ratio(k, r, m):  # chance(k) / chance(k - 1)
    return mp.mpf(m) / k if r is None else (mp.mpf(r) + k - 1) / k * mp.mpf(m) / (mp.mpf(r) + m)


def at_most(k, r, m):
    term = total = chance(k, r, m)
    while k > 0 and term > total * mp.mpf(10) ** -40:
        term /= ratio(k, r, m)
        total += term
        k -= 1
    return total


def at_least(k, r, m):
    if k == 0:
        return mp.mpf(1)
    term = total = chance(k, r, m)
    while True:
        k += 1
        q = ratio(k, r, m)
        term *= q
        total += term
        if q < 1 and term < total * mp.mpf(10) ** -40 * (1 - q):
            return total


def deviate(k, r, m):
    at, low, high = chance(k, r, m), at_most(k, r, m), at_least(k, r, m)
    tail = min(low, high) - at / 2
    goal = mp.log(tail)
    guess = mp.sqrt(-2 * goal) if goal < -3 else mp.mpf(1)
    z = mp.findroot(lambda x: mp.log(mp.erfc(x / mp.sqrt(2)) / 2) - goal, guess)
    return min(mp.mpf(1), 2 * min(low, high)), z if high - at / 2 < low - at / 2 else -z


def lower_step(tail, r, m):
    k = 0
    while at_most(k, r, m) < tail:
        k += 1
    return k


def upper_step(tail, r, m):
    k = int(m)
    while at_least(k + 1, r, m) > tail:
        k += 1
    return k


def text(values):
    return ",".join(mp.nstr(mp.mpf(v), 17) for v in values)


class Table:
    def __init__(self, name, about):
        self.out = open(name, "w")
        self.out.write(f"# {about}\n# Made by many_units.py (mpmath {mp.__version__}, SciPy) unless a source says otherwise.\n")
        self.out.write("case\tsource\tinputs\texpected\ttolerance\n")

    def row(self, case, source, inputs, expected, tolerance):
        def fill(named):
            return " ".join(f"{k}={text(v if isinstance(v, (list, tuple, np.ndarray)) else [v])}" for k, v in named.items())
        self.out.write("\t".join([case, source, fill(inputs), fill(expected), tolerance]) + "\n")


def winsorised(z, share):
    z = np.sort(z)
    cut = int(share * len(z) + 1e-9)
    z[:cut] = z[cut]
    if cut:
        z[-cut:] = z[-cut - 1]
    return z


def funnel():
    table = Table("funnel.tsv", "Counts against a benchmark: doubled exact p, mid-p deviate, step limits, spread between units.")
    for k, r, m in [(0, None, 5), (1, None, 5), (5, None, 5), (10, None, 5), (11, None, 5), (0, None, 0.01),
                    (7, None, 0.01), (81, None, 100), (121, None, 100), (130, None, 100), (600, None, 100),
                    (3000, None, 1000), (2000, None, 100), (40, None, 2000), (10500, None, 10000), (0, None, 900),
                    (0, 2.5, 5), (30, 2.5, 5), (400, 2.5, 5), (3, 40, 60), (150, 40, 60), (5000, 40, 60), (0, 0.5, 0.2),
                    (9, 0.5, 0.2), (100, 1000, 20)]:
        p, z = deviate(k, r, m)
        # A value below the least double is kept to show the deviate alone.
        expected = {"z": z} if p < mp.mpf(10) ** -300 else {"p_value": p, "z": z}
        table.row("deviate-", "mpmath, sums of chances", {"count": k, "shape": r if r is not None else mp.inf, "mean": m},
                  expected, "r1e-10")
    for e in (0.4, 5, 23.7, 100):
        for band in (0.95, 0.998):
            tail = (mp.mpf(1) - mp.mpf(band)) / 2
            table.row("steps-poisson-", "mpmath, counted up", {"expected": e, "band": band},
                      {"low": lower_step(tail, None, e), "high": upper_step(tail, None, e)}, "a0")
            table.row("steps-scaled-", "mpmath, counted up; shape = mean / (dispersion - 1)",
                      {"expected": e, "band": band, "dispersion": 2.5},
                      {"low": lower_step(tail, e / mp.mpf(1.5), e), "high": upper_step(tail, e / mp.mpf(1.5), e)}, "a0")
            table.row("steps-added-", "mpmath, counted up; shape = 1 / between_sd^2",
                      {"expected": e, "band": band, "between_sd": 0.5},
                      {"low": lower_step(tail, 4, e), "high": upper_step(tail, 4, e)}, "a0")
    table.row("published-limits-E5", "cases G-funnel-E5 (scipy poisson.ppf), after Spiegelhalter 2005, appendix A.1.1",
              {"expected": 5}, {"low_outer": 0, "low_inner": 0.2, "high_inner": 2, "high_outer": 2.6}, "r1e-12")
    table.row("published-limits-E100", "cases G-funnel-E100 (scipy poisson.ppf), after Spiegelhalter 2005, appendix A.1.1",
              {"expected": 100}, {"low_outer": 0.71, "low_inner": 0.81, "high_inner": 1.2, "high_outer": 1.32}, "r1e-12")
    rng = np.random.default_rng(7)
    for n, zeros in ((9, 0), (12, 1), (30, 2), (30, 12)):
        e = np.round(rng.uniform(3, 60, n), 1)
        counts = rng.poisson(e * rng.gamma(6, 1 / 6, n)) + 1
        counts[:zeros] = 0
        for share in (0, 0.1):
            z = winsorised((counts - e) / np.sqrt(e), share)
            with np.errstate(divide="ignore"):
                log_z = winsorised(np.log(counts / e) * np.sqrt(e), share)
            on_log = np.isfinite(log_z).all()
            use = log_z if on_log else z
            tau2 = max(0, ((use**2).sum() - (n - 1)) / (e.sum() - (e**2).sum() / e.sum()))
            table.row("spread-", "numpy, formulas of Spiegelhalter 2005 and DerSimonian and Laird 1986",
                      {"counts": [int(c) for c in counts], "expected": [float(v) for v in e], "winsorise": share},
                      {"dispersion": float((z**2).mean()), "between_sd": float(np.sqrt(tau2)), "on_log_scale": int(on_log)},
                      "r1e-12")


def chances():
    table = Table("chance.tsv", "Chances for a count to come: Poisson, negative binomial, after a past record.")
    for mean, alpha, k in [(2.5, 0, 7), (0.003, 0, 40), (50, 0, 300), (1000, 0, 120), (1000, 0, 2300), (2.5, 0.4, 7), (30, 0.1, 700),
                           (12, 2, 0), (400, 0.05, 3)]:
        r = None if alpha == 0 else 1 / mp.mpf(alpha)
        table.row("known-", "mpmath, sums of chances", {"expected": mean, "overdispersion": alpha, "k": k},
                  {"at_least": at_least(k, r, mean), "at_most": at_most(k, r, mean), "exactly": chance(k, r, mean)}, "r1e-12")
    for count, exposure, nxt, k in [(24, 5, 1, 10), (24, 5, 0.5, 6), (0, 5000, 1000, 2), (7, 1200, 300, 60), (3, 1, 1, 0)]:
        r, m = mp.mpf(count) + mp.mpf("0.5"), (mp.mpf(count) + mp.mpf("0.5")) * nxt / exposure
        table.row("past-", "mpmath, sums of negative-binomial chances", {"count": count, "exposure": exposure, "next": nxt, "k": k},
                  {"at_least": at_least(k, r, m), "at_most": at_most(k, r, m), "mean": m,
                   "sd": mp.sqrt(m * (1 + m / r))}, "r1e-12")
    mp.mp.dps = 25
    for count, exposure, nxt, alpha, k in [(24, 5, 1, 0.1, 12), (3, 10, 20, 0.3, 2), (0, 10, 20, 0.5, 5), (3, 1, 1, 0.3, 200)]:
        a = mp.mpf(alpha)

        def weight(m):
            return chance(count, 1 / a, m) / mp.sqrt(m * (1 + a * m))

        # in the logarithm of the mean, where the posterior is smooth on both sides
        def whole(f):
            return mp.quad(lambda x: weight(mp.exp(x)) * mp.exp(x) * f(mp.exp(x)), [-80, -20, -5, 0, 2, 3, 4, 6, 9, 15, 40])
        norm = whole(lambda m: 1)
        up = 1 - sum(whole(lambda m: chance(j, 1 / a, m * nxt / exposure)) for j in range(k)) / norm if k < 50 else None
        exact = whole(lambda m: chance(k, 1 / a, m * nxt / exposure)) / norm
        expected = {"exactly": exact}
        if up is not None:
            expected["at_least"] = up
        table.row("wandering-", "mpmath quadrature over the posterior", {"count": count, "exposure": exposure, "next": nxt,
                  "overdispersion": alpha, "k": k}, expected, "r1e-9")
    mp.mp.dps = 50
    table.row("published-range-hahn-meeker",
              "cases H-hahn-meeker-pred (scipy nbinom), data of Hahn and Meeker 1991: 24 shutdowns in 5 years",
              {"count": 24, "exposure": 5, "next": 1}, {"low": 1, "high": 10}, "a0")
    table.row("published-chance-2", "four-figure Poisson tables (from memory): P(X <= 6) = 0.9858 at mean 2.5", {"expected": 2.5, "k": 7},
              {"at_least": mp.mpf("0.0142")}, "a0.00005")


def shrinkage():
    table = Table("shrinkage.tsv", "Gamma of units' rates by marginal likelihood, and shrunk rates.")
    counts = [3, 0, 12, 1, 0, 7, 25, 0, 2, 4, 0, 9, 1, 31]
    exposures = [480, 210, 730, 400, 150, 520, 880, 60, 300, 610, 120, 450, 333, 2000]

    def loss(x):
        shape, rate = np.exp(x)
        return -stats.nbinom.logpmf(counts, shape, rate / (rate + np.array(exposures))).sum()
    best = min((minimize(loss, s, method="Nelder-Mead", options={"xatol": 1e-10, "fatol": 1e-13, "maxiter": 20000})
                for s in ([0, 5], [1, 4])), key=lambda r: r.fun)
    shape, rate = np.exp(best.x)
    table.row("prior-", "scipy nbinom, Nelder-Mead", {"counts": counts, "exposures": exposures},
              {"shape": float(shape), "rate": float(rate), "loglik": float(-best.fun)}, "r1e-6")
    post = stats.gamma(np.array(counts) + 2.863, scale=1 / (np.array(exposures) + 1522.46))
    table.row("posterior-", "scipy gamma", {"counts": counts, "exposures": exposures, "shape": 2.863, "rate": 1522.46},
              {"rates": post.mean().tolist(), "low": post.ppf(0.025).tolist(), "high": post.isf(0.025).tolist()}, "r1e-10")
    table.row("published-posterior-nist", "cases G-gamma-posterior: NIST/SEMATECH e-Handbook prior, own numbers by scipy gamma.ppf",
              {"shape": 2.863, "rate": 1522.46, "count": 2, "exposure": 1600, "confidence": 0.9},
              {"mean": mp.mpf("0.00155742587575"), "high": mp.mpf("0.00287094639984")}, "r1e-10")
    table.row("published-claims", "Efron and Hastie, Table 6.1 (from memory), mean for 0 to 6 claims by a gamma prior of shape 0.70, scale 0.306",
              {"counts": list(range(7)), "shape": 0.70, "scale": 0.306},
              {"means": [0.164, 0.398, 0.633, 0.87, 1.10, 1.34, 1.57]}, "a0.005")


funnel()
chances()
shrinkage()
