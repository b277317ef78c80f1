"""Writes expected_ratio.tsv, standardise.tsv and many_rates.tsv.

Independent of the engine: tails are summed term by term and quantiles found by roots in mpmath at 50 digits,
multinomial outcomes listed in whole fractions. Run in this folder.
"""
import itertools
from fractions import Fraction

import mpmath as mp
import numpy as np
from reference_table import either, normal_above, row, solve, write, z_of


def upper_tail(first, ratio, start):
    """Sum of terms from `start` on, each ratio(k) times the one before."""
    total, term, k = mp.mpf(0), first, start
    while True:
        total += term
        k += 1
        term *= ratio(k)
        if term < total * mp.mpf(10) ** -40:
            return total


def poisson(k, mean):
    return mp.exp(k * mp.log(mean) - mean - mp.loggamma(k + 1)) if k >= 0 else mp.mpf(0)


def poisson_tails(k, mean):
    """P(X >= k) and P(X <= k), the smaller summed, the other by complement."""
    mean = mp.mpf(mean)
    p = poisson(k, mean)
    if k > mean:
        above = upper_tail(p, lambda j: mean / j, k)
        return above, 1 - above + p
    below, term, j = mp.mpf(0), p, k
    while j >= 0:
        below += term
        if j == 0 or term < below * mp.mpf(10) ** -40:
            break
        term *= j / mean
        j -= 1
    return 1 - below + p, below


# Observed over expected.
for count in (0, 1, 2, 5, 17, 300, 10**6):
    for times in (0.02, 0.5, 0.97, 1.0, 1.3, 4.0):
        mean = max(0.7, round(count * times, 3))
        if count == 10**6 and not 0.9 < times < 1.31:
            continue
        above, below = poisson_tails(count, mean)
        p = poisson(count, mp.mpf(mean))
        half = (mp.mpf(count) * mp.log(count / mp.mpf(mean)) if count else 0) - count + mp.mpf(mean)
        root = mp.sign(count - mp.mpf(mean)) * mp.sqrt(2 * half)
        score = (count - mp.mpf(mean)) / mp.sqrt(mp.mpf(mean))
        row("expected_ratio", f"test {count} {mean}", "mpmath: tails summed term by term",
            dict(observed=count, expected=mean),
            dict(exact=either(above, below), exact_above=above, exact_below=below,
                 mid_p=either(above - p / 2, below - p / 2), mid_p_above=above - p / 2, mid_p_below=below - p / 2,
                 score=2 * normal_above(abs(score)), likelihood=2 * normal_above(abs(root)),
                 likelihood_above=normal_above(root), likelihood_below=normal_above(-root)), "r1e-12")


# Weighted sums of counts: gamma laws.
def gamma_below(a, x):
    return mp.gammainc(a, 0, x, regularized=True) if x > 0 else mp.mpf(0)


def beta_prime_below(a, b, x):
    return mp.betainc(a, b, 0, x / (1 + x), regularized=True)


def summed(counts, exposures, weights):
    total = mp.fsum(map(mp.mpf, weights))
    w = [mp.mpf(c) / total / mp.mpf(t) for c, t in zip(weights, exposures)]
    value = mp.fsum(a * x for a, x in zip(w, counts))
    variance = mp.fsum(a * a * x for a, x in zip(w, counts))
    return value, variance, max(w)


def laws(value, variance, largest):
    """Shape and scale below and above; None stands for all of it at 0."""
    low = (value**2 / variance, variance / value) if value else None
    v, s = value + largest, variance + largest**2
    return low, (v**2 / s, s / v)


alpha = mp.mpf("0.025")
direct = {
    "typical": ([1, 26, 64, 89, 137, 96], [2293, 68800, 132424, 98301, 46075, 9834]),
    "sparse": ([0, 2, 0, 1], [310.5, 120, 44, 9.5]),
    "one event": ([0, 0, 1, 0], [500, 200, 20, 30]),
    "none": ([0, 0, 0, 0], [500, 200, 20, 30]),
    "big": ([400000, 2500000, 90000], [8e7, 3e8, 2e6]),
}
weights = {6: [63986.6, 186263.6, 157302.2, 97647.0, 47572.6, 12262.6], 4: [5, 3, 2, 1], 3: [0.2, 0.5, 0.3]}
for name, (counts, exposures) in direct.items():
    value, variance, largest = summed(counts, exposures, weights[len(counts)])
    low, high = laws(value, variance, largest)
    answer = dict(rate=value)
    if name != "big":
        answer["gamma_low"] = solve(lambda x: gamma_below(low[0], x / low[1]) - alpha, value) if low else 0
        answer["gamma_high"] = solve(lambda x: gamma_below(high[0], x / high[1]) - 1 + alpha, value + 2 * largest)
        mixed = lambda x: ((gamma_below(low[0], x / low[1]) if low else 1) + gamma_below(high[0], x / high[1])) / 2
        answer["mid_p_low"] = solve(lambda x: mixed(x) - alpha, value) if low else 0
        answer["mid_p_high"] = solve(lambda x: mixed(x) - 1 + alpha, value + largest)
    if value:
        z = z_of(alpha)
        answer["normal_low"] = max(mp.mpf(0), value - z * mp.sqrt(variance))
        answer["normal_high"] = value + z * mp.sqrt(variance)
    row("standardise", f"direct {name}", "mpmath: gamma law by moments, quantile by root",
        dict(count=counts, exposure=exposures, weight=weights[len(counts)], confidence=0.95), answer, "r1e-12")

for name, one, other in (("sparse", "sparse", "one event"), ("no events", "none", "sparse")):
    a, b = (summed(*direct[g], weights[4]) for g in (one, other))
    (al, ah), (bl, bh) = laws(*a), laws(*b)
    cdf = lambda up, down, x: beta_prime_below(up[0], down[0], x * down[1] / up[1])
    low_cdf = (lambda x: cdf(al, bh, x)) if al else (lambda x: mp.mpf(1))
    high_cdf = lambda x: cdf(ah, bl, x)
    start = (a[0] + a[2]) / b[0]
    answer = dict(
        ratio=a[0] / b[0],
        gamma_low=solve(lambda x: low_cdf(x) - alpha, start) if al else 0,
        gamma_high=solve(lambda x: high_cdf(x) - 1 + alpha, start),
        mid_p_low=solve(lambda x: (low_cdf(x) + high_cdf(x)) / 2 - alpha, start) if al else 0,
        mid_p_high=solve(lambda x: (low_cdf(x) + high_cdf(x)) / 2 - 1 + alpha, start))
    row("standardise", f"ratio {name}", "mpmath: ratio of two gamma laws by the incomplete beta",
        dict(count1=direct[one][0], exposure1=direct[one][1], count0=direct[other][0], exposure0=direct[other][1],
             weight=weights[4], confidence=0.95), answer, "r1e-12")


# Several groups: every way to share the events out, in whole numbers.
def conditional_p(counts, exposures):
    n, total = sum(counts), sum(map(Fraction, exposures))
    share = [Fraction(t) / total for t in exposures]
    e = [float(s * n) for s in share]
    pearson = lambda x: sum((Fraction(a) - s * n) ** 2 / (s * n) for a, s in zip(x, share))
    likelihood = lambda x: 2 * sum(a * np.log(a / m) for a, m in zip(x, e) if a)
    seen_p, seen_l = pearson(counts), likelihood(counts)
    at_least_p, at_least_l = Fraction(0), Fraction(0)
    for cut in itertools.combinations(range(n + len(counts) - 1), len(counts) - 1):
        edges = (-1, *cut, n + len(counts) - 1)
        x = [b - a - 1 for a, b in zip(edges, edges[1:])]
        chance = Fraction(int(mp.factorial(n)))
        for k, s in zip(x, share):
            chance = chance * s**k / int(mp.factorial(k))
        if pearson(x) >= seen_p:
            at_least_p += chance
        if likelihood(x) >= seen_l - 1e-10:
            at_least_l += chance
    return (mp.mpf(f.numerator) / f.denominator for f in (at_least_p, at_least_l))


for counts, exposures in (([3, 0, 5], [12, 8, 15]), ([0, 0, 7, 1], [1, 1, 1, 1]), ([9, 2], [100, 100]),
                          ([1, 1, 1, 1, 1], [1, 2, 3, 4, 5]), ([12, 0, 0], [1, 1, 2])):
    p, l = conditional_p(counts, exposures)
    row("many_rates", f"conditional {counts}".replace(" ", ""), "Python fractions: all outcomes listed",
        dict(count=counts, exposure=exposures), dict(pearson=p, likelihood=l), "r1e-12")

write("comparisons.py")
