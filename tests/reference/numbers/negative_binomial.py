#!/usr/bin/env python3
"""Writes negative_binomial.tsv: chances and tails of the negative binomial by mpmath at 40 digits.

The chance of k from log gammas. Each tail is that chance times the sum of the ratios of successive
chances, until what is left adds less than 1e-22; below shape 10, where that sum is long, it is mpmath's
regularised incomplete beta function. Neither is what Countsel does.
"""
import mpmath as mp

mp.mp.dps = 40


def log_chance(k, r, m):
    value = mp.loggamma(k + r) - mp.loggamma(r) - mp.loggamma(k + 1) + r * mp.log(r / (r + m))
    return value + (k * mp.log(m / (r + m)) if k else 0)


def tail(k, r, m, up):
    """Sum of chances from k outwards over the chance of k."""
    q = m / (r + m)
    if r < 10:
        p = mp.exp(log_chance(k, r, m))
        if up:
            return (mp.betainc(k, r, 0, q, regularized=True) if k else mp.mpf(1)) / p
        return mp.betainc(r, k + 1, 0, 1 - q, regularized=True) / p
    term = total = mp.mpf(1)
    j = k
    while True:
        if up:
            ratio = (j + r) / (j + 1) * q
            j += 1
        else:
            if j == 0:
                return total
            ratio = j / ((j - 1 + r) * q)
            j -= 1
        term *= ratio
        total += term
        if ratio < 1 and term < total * mp.mpf(10) ** -22 * (1 - ratio):
            return total


def main():
    out = open("negative_binomial.tsv", "w")
    out.write("# P(X=k), P(X<=k), P(X>=k) of negative-binomial counts with this shape and mean; k from 0 to 1e9.\n")
    out.write("# Made by negative_binomial.py, mpmath %s, 40 digits worked, 20 given.\n" % mp.__version__)
    out.write("# k\tshape\tmean\tchance\tat_most\tat_least\n")
    shapes = ("0.001", "0.05", "1", "2.5", "1000", "1e7", "1e12", "1e15")
    means = ("1e-6", "0.01", "3", "40", "1000", "100000", "1e7", "1e9")
    for r_text in shapes:
        for m_text in means:
            r, m = mp.mpf(float(r_text)), mp.mpf(float(m_text))
            sd = mp.sqrt(m + m * m / r)
            if sd > 4e3 and (r_text, m_text) not in (("1e12", "1e9"), ("1e15", "1e9"), ("1e7", "1e7")):
                continue
            spans = (-30, -6, -1, 2, 8, 30) if sd < 500 else (-6, 2, 8)
            ks = {0, 1, 5, int(m)} | {max(0, int(m + z * sd)) for z in spans}
            if sd > 4e3:
                ks = {int(m - 6 * sd), int(m + 3 * sd), int(m + 30 * sd)}
            for k in sorted(ks):
                log_p = log_chance(mp.mpf(k), r, m)
                if log_p < -690:
                    continue
                p = mp.exp(log_p)
                if sd > 4e3:  # the long way round is not affordable: the short tail alone
                    low = p * tail(mp.mpf(k), r, m, False) if k < m else mp.nan
                    high = p * tail(mp.mpf(k), r, m, True) if k > m else mp.nan
                else:
                    low, high = p * tail(mp.mpf(k), r, m, False), p * tail(mp.mpf(k), r, m, True)
                out.write("\t".join([str(k), r_text, m_text] + [mp.nstr(x, 20) for x in (p, low, high)]) + "\n")
                out.flush()


main()
