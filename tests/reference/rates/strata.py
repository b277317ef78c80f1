"""Writes strata.tsv, kitagawa.tsv and trend.tsv.

Independent of the engine: the strata's binomials are convolved and roots found in mpmath at 50 digits, Poisson
regressions fitted by statsmodels. Run in this folder.
"""
import mpmath as mp
import numpy as np
import statsmodels.api as sm
from reference_table import either, normal_above, row, solve, write, z_of

alpha = mp.mpf("0.025")

# Strata: the sum of the conditional binomials by convolution.
def convolved(strata):
    """Coefficients c with P(A = k) proportional to c[k] ratio^k."""
    c = [mp.mpf(1)]
    for x1, t1, x0, t0 in strata:
        m = x1 + x0
        if m == 0 or t1 == 0 or t0 == 0:
            continue
        b = [mp.binomial(m, k) * (mp.mpf(t1) / t0) ** k for k in range(m + 1)]
        c = [mp.fsum(c[i] * b[k - i] for i in range(max(0, k - m), min(len(c) - 1, k) + 1))
             for k in range(len(c) + m)]
    return c


def exact(strata):
    c = convolved(strata)
    a = sum(s[0] for s in strata if s[1] > 0 and s[3] > 0)

    def chances(ratio):
        terms = [x * ratio**k for k, x in enumerate(c)]
        total = mp.fsum(terms)
        return mp.fsum(terms[a:]) / total, mp.fsum(terms[: a + 1]) / total, terms[a] / total

    answer = {}
    m = len(c) - 1
    if 0 < a < m:
        mean = lambda r: mp.fsum(k * x * r**k for k, x in enumerate(c)) / mp.fsum(x * r**k for k, x in enumerate(c))
        estimate = solve(lambda r: mean(r) - a, 1)
        log_at = lambda r: mp.log(chances(r)[2])
        drop = lambda r: 2 * (log_at(estimate) - log_at(r)) - z_of(alpha) ** 2
        answer.update(
            ratio=estimate, likelihood_low=mp.exp(mp.findroot(lambda u: drop(mp.exp(u)), mp.log(estimate) - 1)),
            likelihood_high=mp.exp(mp.findroot(lambda u: drop(mp.exp(u)), mp.log(estimate) + 1)))
        assert answer["likelihood_low"] < estimate < answer["likelihood_high"]
    else:
        estimate = mp.mpf(0) if a == 0 else mp.inf
        answer["ratio"] = estimate
    start = 1 if a in (0, m) else estimate
    answer["exact_low"] = solve(lambda r: chances(r)[0] - alpha, start) if a > 0 else 0
    answer["exact_high"] = solve(lambda r: chances(r)[1] - alpha, start) if a < m else mp.inf
    half = lambda r, i: chances(r)[i] - chances(r)[2] / 2
    answer["mid_p_low"] = solve(lambda r: half(r, 0) - alpha, start) if a > 0 else 0
    answer["mid_p_high"] = solve(lambda r: half(r, 1) - alpha, start) if a < m else mp.inf
    above, below, at = chances(mp.mpf(1))
    answer.update(exact_p=either(above, below), exact_above=above, exact_below=below,
                  mid_p_p=either(above - at / 2, below - at / 2))
    return answer


cases = {
    "doctors": [(32, 52407, 2, 18790), (104, 43248, 12, 10673), (206, 28612, 28, 5710), (186, 12663, 28, 2585),
                (102, 5317, 31, 1462)],
    "sparse": [(2, 10, 0, 14), (1, 3, 1, 9.5), (0, 7, 2, 6), (3, 4, 0, 1), (0, 5, 0, 6)],
    "one-sided strata": [(5, 10, 3, 12), (4, 9, 0, 0), (0, 0, 7, 30), (2, 5, 6, 8)],
    "none in group 1": [(0, 10, 3, 12), (0, 9, 1, 4)],
    "none in group 0": [(4, 10, 0, 12), (1, 9, 0, 40)],
    "far": [(150, 10, 2, 10), (90, 5, 1, 9)],
    "one event": [(1, 10, 0, 12), (0, 9, 0, 4)],
}
for name, strata in cases.items():
    x1, t1, x0, t0 = ([mp.mpf(v) for v in column] for column in zip(*strata))
    inputs = dict(count1=x1, exposure1=t1, count0=x0, exposure0=t0, confidence=0.95)
    both = [i for i in range(len(strata)) if t1[i] > 0 and t0[i] > 0]
    up = mp.fsum(x1[i] * t0[i] / (t1[i] + t0[i]) for i in both)
    down = mp.fsum(x0[i] * t1[i] / (t1[i] + t0[i]) for i in both)
    spread = mp.fsum((x1[i] + x0[i]) * t1[i] * t0[i] / (t1[i] + t0[i]) ** 2 for i in both)
    w = mp.fsum(t1[i] * t0[i] / (t1[i] + t0[i]) for i in both)
    variance = mp.fsum((t1[i] * t0[i] / (t1[i] + t0[i])) ** 2 * (x1[i] / t1[i] ** 2 + x0[i] / t0[i] ** 2)
                       for i in both) / w**2
    answer = dict(difference=(up - down) / w, difference_variance=variance,
                  statistic=(up - down) ** 2 / spread, p=2 * normal_above(abs(up - down) / mp.sqrt(spread)))
    if up and down:
        answer.update(mh_ratio=up / down, log_variance=spread / up / down)
    row("strata", f"mh {name}", "mpmath: formulas of Greenland and Robins (1985)", inputs, answer, "r1e-13")
    row("strata", f"exact {name}", "mpmath: convolution of the strata's binomials", inputs, exact(strata), "r2e-12")

for name in ("doctors", "sparse"):
    strata = [s for s in cases[name] if s[0] + s[2] > 0]
    x = np.array([v for s in strata for v in (s[0], s[2])], float)
    t = np.array([v for s in strata for v in (s[1], s[3])], float)
    design = np.zeros((len(x), len(strata) + 1))
    for i in range(len(strata)):
        design[2 * i : 2 * i + 2, i] = 1
        design[2 * i, -1] = 1
    fit = sm.GLM(x, design, family=sm.families.Poisson(), offset=np.log(t)).fit(tol=1e-14, maxiter=200)
    columns = ([s[i] for s in strata] for i in range(4))
    row("strata", f"glm {name}", "statsmodels: Poisson regression with a constant for each stratum",
        dict(zip(("count1", "exposure1", "count0", "exposure0"), columns)),
        dict(ratio=np.exp(fit.params[-1]), homogeneity=fit.deviance, df=len(strata) - 1), "r1e-8")

# A common difference: deviance minimised over it, each stratum's own rate from the quadratic.
for name in ("doctors", "sparse"):
    strata = [s for s in cases[name] if s[1] > 0 and s[3] > 0]

    def deviance(d):
        total = mp.mpf(0)
        for x1, t1, x0, t0 in strata:
            t = mp.mpf(t1) + t0
            b = t * d - x1 - x0
            r = (-b + mp.sqrt(b * b + 4 * t * x0 * d)) / (2 * t)
            r = max(r, mp.mpf(0), -d)
            for x, m in ((x1, (r + d) * t1), (x0, r * t0)):
                total += 2 * ((x * mp.log(x / m) if x else 0) - x + m)
        return total

    least, most = mp.mpf(-1), mp.mpf(1)
    for _ in range(260):  # golden section; the deviance is convex
        one, two = least + (most - least) * mp.mpf("0.381966"), least + (most - least) * mp.mpf("0.618034")
        if deviance(one) < deviance(two):
            most = two
        else:
            least = one
    best = (least + most) / 2
    excess = lambda d: deviance(d) - deviance(best) - z_of(alpha) ** 2

    def side(sign):
        near, far = best, best + sign * mp.mpf("0.00001")
        while excess(far) < 0:
            near, far = far, best + 2 * (far - best)
        for _ in range(170):
            middle = (near + far) / 2
            near, far = (middle, far) if excess(middle) < 0 else (near, middle)
        return near

    columns = ([s[i] for s in strata] for i in range(4))
    row("strata", f"difference {name}", "mpmath: profile deviance by golden section and bisection",
        dict(zip(("count1", "exposure1", "count0", "exposure0"), columns), confidence=0.95),
        dict(difference=best, low=side(-1), high=side(1), homogeneity=deviance(best),
             p=2 * normal_above(mp.sqrt(deviance(mp.mpf(0)) - deviance(best)))), "r1e-9")

# Rate or mix: the definition, term by term.
for name, strata in (("plain", [(30, 1000, 25, 1500), (40, 400, 50, 450), (2, 100, 9, 300)]),
                     ("absent", [(3, 10, 5, 20), (4, 9, 0, 0), (0, 5, 1, 8)])):
    x1, t1, x0, t0 = ([mp.mpf(v) for v in column] for column in zip(*strata))
    T1, T0 = mp.fsum(t1), mp.fsum(t0)
    crude = (mp.fsum(x1) / T1 + mp.fsum(x0) / T0) / 2
    rate, mix, rate_variance, mix_variance = [], [], mp.mpf(0), mp.mpf(0)
    for i in range(len(strata)):
        s1, s0 = t1[i] / T1, t0[i] / T0
        r1 = x1[i] / t1[i] if t1[i] else x0[i] / t0[i]
        r0 = x0[i] / t0[i] if t0[i] else r1
        rate.append((r1 - r0) * (s1 + s0) / 2)
        mix.append((s1 - s0) * ((r1 + r0) / 2 - crude))
        if t1[i] and t0[i]:
            v1, v0 = x1[i] / t1[i] ** 2, x0[i] / t0[i] ** 2
            rate_variance += ((s1 + s0) / 2) ** 2 * (v1 + v0)
            mix_variance += ((s1 - s0) / 2) ** 2 * (v1 + v0)
        else:
            mix_variance += (s1 - s0) ** 2 * (x1[i] + x0[i]) / (t1[i] + t0[i]) ** 2
    z = z_of(alpha)
    rate_part, mix_part = mp.fsum(rate), mp.fsum(mix)
    assert abs(rate_part + mix_part - (mp.fsum(x1) / T1 - mp.fsum(x0) / T0)) < mp.mpf(10) ** -40
    row("kitagawa", name, "mpmath: the definition, with rates of absent sides taken as the other side's",
        dict(count1=x1, exposure1=t1, count0=x0, exposure0=t0, confidence=0.95),
        dict(difference=rate_part + mix_part, rate_part=rate_part, mix_part=mix_part, rate_parts=rate, mix_parts=mix,
             rate_low=rate_part - z * mp.sqrt(rate_variance), rate_high=rate_part + z * mp.sqrt(rate_variance),
             mix_low=mix_part - z * mp.sqrt(mix_variance), mix_high=mix_part + z * mp.sqrt(mix_variance)), "r1e-12")

# Trend: slope by statsmodels, limits by roots of the conditional likelihood and score.
for name, counts, exposures, order in (
        ("doctors", [2, 12, 28, 28, 31], [18790, 10673, 5710, 2585, 1462], [1, 2, 3, 4, 5]),
        ("sparse", [0, 1, 0, 2], [3, 4, 5, 2], [0, 1, 4, 6]),
        ("flat", [10, 12, 9], [1, 1, 1], [-1, 0, 1]),
        ("all at the end", [0, 0, 5], [10, 10, 10], [1, 2, 3])):
    x, t, s = ([mp.mpf(v) for v in column] for column in (counts, exposures, order))
    n, seen = mp.fsum(x), mp.fsum(a * b for a, b in zip(x, s))

    def moments(b):
        share = [a * mp.exp(b * c) for a, c in zip(t, s)]
        total = mp.fsum(share)
        mean = mp.fsum(a * c for a, c in zip(share, s)) / total
        return total, mean, mp.fsum(a * (c - mean) ** 2 for a, c in zip(share, s)) / total

    loglik = lambda b: b * seen - n * mp.log(moments(b)[0])
    score = lambda b: (seen - n * moments(b)[1]) / mp.sqrt(n * moments(b)[2])
    z = z_of(alpha)
    answer = dict(signed_root=score(mp.mpf(0)), statistic=score(mp.mpf(0)) ** 2,
                  p=2 * normal_above(abs(score(mp.mpf(0)))))

    def root(f, near, far):
        return mp.findroot(f, (mp.mpf(near), mp.mpf(far)), solver="anderson", tol=1e-42, maxsteps=300)

    if name == "all at the end":
        lost = lambda b: -2 * n * (mp.log(t[-1]) + b * s[-1] - mp.log(moments(b)[0]))
        answer.update(likelihood_low=root(lambda b: lost(b) - z**2, 0.1, 3), score_low=root(lambda b: score(b) - z, -1, 3))
    else:
        fit = sm.GLM(np.array(counts, float), sm.add_constant(np.array(order, float)), family=sm.families.Poisson(),
                     offset=np.log(np.array(exposures, float))).fit(tol=1e-14, maxiter=100)
        slope = root(lambda b: seen - n * moments(b)[1], fit.params[1] - 0.5, fit.params[1] + 0.5)
        assert abs(slope - fit.params[1]) < 1e-7
        error = 1 / mp.sqrt(n * moments(slope)[2])
        assert abs(error - fit.bse[1]) < 1e-6
        drop = lambda b: 2 * (loglik(slope) - loglik(b)) - z**2
        reach = 6 * error
        answer.update(log_ratio=slope, log_error=error, wald_low=slope - z * error, wald_high=slope + z * error,
                      likelihood_low=root(drop, slope - reach, slope), likelihood_high=root(drop, slope, slope + reach),
                      score_low=root(lambda b: score(b) - z, slope - reach, slope),
                      score_high=root(lambda b: score(b) + z, slope, slope + reach))
        row("trend", f"departure {name}", "statsmodels: deviance of the log-linear Poisson regression",
            dict(count=counts, exposure=exposures, order=order), dict(departure=fit.deviance), "r1e-9")
    row("trend", f"slope {name}", "mpmath: conditional likelihood; slope and error agree with statsmodels",
        dict(count=counts, exposure=exposures, order=order, confidence=0.95), answer, "r1e-11")

write("strata.py")
