"""Poisson fits with log link on badly behaved data, at 80 digits with mpmath: python3 extreme.py  writes extreme_cases.json.

Columns are exact doubles (written so that reading gives the same double) and are taken as exact; Newton's method runs
at 80 digits until the step is below 1e-60. Nothing of Countsel is used. Values are printed to 20 digits.
"""
import json, os, random
from mpmath import mp, mpf
mp.dps = 80
random.seed(11)


def solve(a, b):
    return mp.lu_solve(mp.matrix(a), mp.matrix(b))


def fit(y, columns, exposure):
    n, p = len(y), len(columns) + 1
    x = [[mpf(1)] + [mpf(c[i]) for c in columns] for i in range(n)]
    # Centred on the first row and scaled for a start; the answer is mapped back exactly at 80 digits.
    lo = [mpf(1)] + [mpf(min(c)) for c in columns]
    span = [mpf(1)] + [(mpf(max(c)) - mpf(min(c))) or mpf(1) for c in columns]
    z = [[mpf(1)] + [(x[i][j] - lo[j]) / span[j] for j in range(1, p)] for i in range(n)]
    log_e = [mp.log(mpf(e)) for e in exposure]
    mu = [(mpf(t) + mpf("0.5")) for t in y]
    eta = [mp.log(m) - o for m, o in zip(mu, log_e)]
    work = [e + (mpf(t) - m) / m for e, t, m in zip(eta, y, mu)]
    def info(m):
        return [[mp.fsum(m[i] * z[i][a] * z[i][b] for i in range(n)) for b in range(p)] for a in range(p)]
    beta = solve(info(mu), [mp.fsum(mu[i] * z[i][a] * work[i] for i in range(n)) for a in range(p)])
    for _ in range(400):
        mu = [mp.exp(mp.fsum(z[i][a] * beta[a] for a in range(p)) + log_e[i]) for i in range(n)]
        score = [mp.fsum((mpf(y[i]) - mu[i]) * z[i][a] for i in range(n)) for a in range(p)]
        step = solve(info(mu), score)
        size = max(abs(mp.fsum(z[i][a] * step[a] for a in range(p))) for i in range(n))
        share = min(mpf(1), 2 / size) if size > 0 else mpf(1)
        beta = beta + step * share
        if size < mpf(10) ** -60:
            break
    else:
        raise RuntimeError("no convergence")
    cov_z = mp.matrix(info(mu)) ** -1
    t = mp.matrix(p, p)
    for j in range(p):
        t[j, j] = 1 / span[j]
        if j:
            t[0, j] = -lo[j] / span[j]
    coef = t * beta
    cov = t * cov_z * t.T
    loglik = mp.fsum(mpf(a) * mp.log(m) - m - mp.loggamma(mpf(a) + 1) for a, m in zip(y, mu))
    deviance = 2 * mp.fsum((mpf(a) * mp.log(a / m) if a else mpf(0)) - (mpf(a) - m) for a, m in zip(y, mu))
    pearson = mp.fsum((mpf(a) - m) ** 2 / m for a, m in zip(y, mu))
    show = lambda v: mp.nstr(v, 20)
    return dict(coef=[show(c) for c in coef], se=[show(mp.sqrt(cov[j, j])) for j in range(p)], loglik=show(loglik),
                deviance=show(deviance), pearson=show(pearson))


def poisson(mean):
    """A whole number near a Poisson one; only its being whole matters."""
    if mean > 1e4:
        return float(max(0, round(random.gauss(mean, mean ** 0.5))))
    import math
    limit, k, product = math.exp(-min(mean, 700)), 0, random.random()
    while product > limit:
        k += 1
        product *= random.random()
    return float(k)


def make():
    import math
    n = 40
    u = [random.uniform(0, 3) for _ in range(n)]
    v = [random.gauss(0, 1) for _ in range(n)]
    ones = [1.0] * n
    y = [poisson(math.exp(0.8 + 0.4 * a - 0.3 * b)) for a, b in zip(u, v)]
    cases = {}
    def add(name, y, columns, exposure, digits=(9, 7), condition=None):
        cases[name] = dict(count=y, columns=columns, exposure=exposure, coef_digits=digits[0], se_digits=digits[1])
    add("plain", y, [u, v], ones)
    add("shifted by 1e8", y, [[a + 1e8 for a in u], [b - 3e8 for b in v]], ones)
    add("scaled by 1e8 and 1e-8", y, [[a * 1e8 for a in u], [b * 1e-8 for b in v]], ones)
    add("shifted and scaled", y, [[(a + 2e7) * 1e8 for a in u], [(b + 1e8) * 1e-8 for b in v]], ones)
    big = [poisson(1e9 * math.exp(0.4 * a - 0.3 * b)) for a, b in zip(u, v)]
    add("counts of 1e9", big, [u, v], ones)
    exposure = [10 ** random.uniform(-9, 12) for _ in range(n)]
    add("exposures 1e-9 to 1e12", [poisson(1e-3 * e * math.exp(0.4 * a)) for e, a in zip(exposure, u)], [u, v], exposure)
    exposure = [10 ** random.uniform(-9, 12) for _ in range(n)]
    add("exposures 1e-9 to 1e12, high rate", [poisson(min(1e9, 10 * e * math.exp(0.4 * a))) for e, a in zip(exposure, u)], [u, v], exposure)
    for k in (4, 6, 8, 10, 11, 12):
        add(f"two columns apart by 1e-{k}", y, [u, [a + 10.0 ** -k * b for a, b in zip(u, v)]], ones)
    add("two columns apart by 1e-8, shifted by 1000", y, [[a + 1000 for a in u], [a + 1000 + 1e-8 * b for a, b in zip(u, v)]], ones)
    year = [1980.0 + i for i in range(n)]
    trend = [poisson(math.exp(1 + 0.02 * i - 0.0004 * i * i)) for i in range(n)]
    add("a cubic in the year", trend, [year, [t * t for t in year], [t ** 3 for t in year]], ones)
    rare = [1.0 if i == 7 else 0.0 for i in range(n)]
    add("a level of one row", y, [u, rare], ones)
    one = [poisson(2 * math.exp(0.3 * b)) for b in v]
    one[3] = 1.0e9
    e = [1.0] * n
    e[3] = 5.0e8
    add("one row outweighs all", one, [u, v], e)
    w = [random.gauss(0, 1) for _ in range(n)]
    add("three columns, two near-dependences", y, [u, [a + 1e-7 * b for a, b in zip(u, v)], [a - 1e-9 * c for a, c in zip(u, w)]], ones)
    for name, case in cases.items():
        case["name"] = name
        case.update(fit(case["count"], case["columns"], case["exposure"]))
        print(name, case["coef"], case["se"][-1], flush=True)
    here = os.path.dirname(os.path.abspath(__file__))
    json.dump(list(cases.values()), open(os.path.join(here, "extreme_cases.json"), "w"), indent=1)


make()
