# tests/reference/rates/two_rates.py -- writes two_rates.tsv: two rates compared, to 16 digits of 30 or more.
#
# Limits are the roots of their own tests, the tests are tails from series and continued fractions
# (../numbers/exactly.py); the rates under a difference come from the likelihood's quadratic, not from the
# multiplier that the engine solves for. E-test values are the plain double sum.
import sys
from pathlib import Path

HERE = Path(__file__).resolve().parent
sys.path.append(str(HERE.parent / "numbers"))

import mpmath  # noqa: E402
from exactly import beta_tails, mp, mpf, normal_tail  # noqa: E402
from limits import deviate  # noqa: E402

mp.dps = 45
PAIRS = [
    (60, 51477.5, 30, 54308.7),
    (41, 28010, 15, 19017),
    (0, 100, 3, 100),
    (5, 12.5, 0, 80),
    (1, 1, 1, 1),
    (2, 0.001, 7, 1e6),
    (14, 2300, 5, 2100),
    (300, 700, 260, 900),
    (1200, 1000, 900, 1000),
    (10**5, 3.1e4, 7, 2.9),
    (10**9, 1e6, 10**9 - 10**6, 1e6),
    (10**9, 2.5e8, 12, 3),
]
FAR = [(10**9 - 3, 1, 1, 3e-9), (2, 1e-9, 10**9, 1), (10**9, 1e6, 10**9 - 1500000, 1e6), (400, 100, 1000, 900), (90, 3, 5000, 2000), (700, 1, 0, 1), (3000, 1, 800, 1)]


def conditional(x1, e1, x0, e0, ratio):
    """(P(X < x1), P(X = x1), P(X > x1)) given the sum, at a null ratio."""
    p, q = ratio * e1 / (ratio * e1 + e0), e0 / (ratio * e1 + e0)
    n = x1 + x0
    exactly = mp.exp(mp.loggamma(n + 1) - mp.loggamma(x1 + 1) - mp.loggamma(x0 + 1) + x1 * mp.log(p) + x0 * mp.log(q))
    below = beta_tails(x1, x0 + 1, p, q)[1] if x1 > 0 else mpf(0)
    above = beta_tails(x1 + 1, x0, p, q)[0] if x0 > 0 else mpf(0)
    return below, exactly, above


def tails(method, x1, e1, x0, e0, ratio):
    """(p against a smaller ratio, p against a larger ratio)."""
    x1, e1, x0, e0, ratio = map(mpf, (x1, e1, x0, e0, ratio))
    if method in ("exact", "mid_p"):
        below, exactly, above = conditional(x1, e1, x0, e0, ratio)
        share = exactly if method == "exact" else exactly / 2
        return below + share, above + share
    n, p = x1 + x0, ratio * e1 / (ratio * e1 + e0)
    if method == "score":
        z = (x1 - n * p) / mp.sqrt(n * p * (1 - p))
    else:
        part = sum(x * mp.log(x / m) for x, m in ((x1, n * p), (x0, n * (1 - p))) if x > 0)
        z = mp.sign(x1 - n * p) * mp.sqrt(2 * abs(part))
    return normal_tail(-z), normal_tail(z)


def root(f, low, high):
    """Root of the increasing f between low and high, to 30 digits."""
    f_low, f_high = f(low), f(high)
    assert f_low < 0 < f_high, (f_low, f_high)
    while True:
        x0, x1 = low, high
        guess = x1 - f_high * (x1 - x0) / (f_high - f_low)
        for middle in (guess, (low + high) / 2):
            if not low < middle < high:
                continue
            f_middle = f(middle)
            if f_middle < 0:
                low, f_low = middle, f_middle
            else:
                high, f_high = middle, f_middle
            # a point just beyond the secant's guess pins the other side
            beside = middle + (guess - middle) + (high - low) * mpf(10) ** -6 * (1 if f_middle < 0 else -1)
            if low < beside < high:
                f_beside = f(beside)
                if f_beside < 0:
                    low, f_low = beside, f_beside
                else:
                    high, f_high = beside, f_beside
        if high - low < mpf(10) ** -28 * max(abs(low), abs(high)):
            return (low + high) / 2


def ratio_limits(method, x1, e1, x0, e0, confidence):
    tail = (1 - mpf(confidence)) / 2
    seen = (mpf(x1) + mpf(0.5)) / e1 / ((mpf(x0) + mpf(0.5)) / e0)
    spread = mp.sqrt(1 / (mpf(x1) + mpf(0.5)) + 1 / (mpf(x0) + mpf(0.5)))
    if method == "log_wald":
        if x1 == 0 or x0 == 0:
            return mp.nan, mp.nan
        seen = mpf(x1) / e1 / (mpf(x0) / e0)
        step = deviate(tail) * mp.sqrt(1 / mpf(x1) + 1 / mpf(x0))
        return seen * mp.exp(-step), seen * mp.exp(step)
    wide = 60 if min(x1, x0) < 3 else 12
    low, high = mpf(0), mp.inf
    if x1 > 0:
        low = root(lambda t: mp.log(tails(method, x1, e1, x0, e0, mp.exp(t))[1] / tail), mp.log(seen) - wide * spread, mp.log(seen) + spread)
        low = mp.exp(low)
    if x0 > 0:
        high = root(lambda t: mp.log(tail / tails(method, x1, e1, x0, e0, mp.exp(t))[0]), mp.log(seen) - spread, mp.log(seen) + wide * spread)
        high = mp.exp(high)
    return low, high


def difference_z(method, x1, e1, x0, e0, d):
    x1, e1, x0, e0, d = map(mpf, (x1, e1, x0, e0, d))
    seen = x1 / e1 - x0 / e0
    if method == "wald":
        return (seen - d) / mp.sqrt(x1 / e1**2 + x0 / e0**2)
    n, e = x1 + x0, e1 + e0
    b = n - e * d
    rate0 = (b + mp.sqrt(b * b + 4 * e * x0 * d)) / (2 * e)
    rate0 = max(rate0, mpf(0), -d)
    rate1 = max(rate0 + d, mpf(0))
    if method == "score":
        return (seen - d) / mp.sqrt(rate1 / e1 + rate0 / e0)
    part = sum((x * mp.log(x / (e_ * r)) if x > 0 else 0) - x + e_ * r for x, e_, r in ((x1, e1, rate1), (x0, e0, rate0)))
    return mp.sign(seen - d) * mp.sqrt(2 * abs(part))


def difference_limits(method, x1, e1, x0, e0, confidence):
    z = deviate((1 - mpf(confidence)) / 2)
    seen = mpf(x1) / e1 - mpf(x0) / e0
    if method == "wald":
        step = z * mp.sqrt(mpf(x1) / mpf(e1) ** 2 + mpf(x0) / mpf(e0) ** 2)
        return seen - step, seen + step
    reach = 3 * z * mp.sqrt((x1 + 1) / mpf(e1) ** 2 + (x0 + 1) / mpf(e0) ** 2) + 2 * z * z * (1 / mpf(e1) + 1 / mpf(e0))
    f = lambda d: -difference_z(method, x1, e1, x0, e0, d)
    return root(lambda d: f(d) + z, seen - reach, seen), root(lambda d: f(d) - z, seen, seen + reach)


def e_test(x1, e1, x0, e0, kind, ratio=1):
    """(against a larger ratio, against a smaller, two-sided) by the double sum."""
    p = mpf(ratio) * e1 / (mpf(ratio) * e1 + e0)
    q, n = 1 - p, x1 + x0
    a, b = n * p, n * q

    def statistic(i, j):
        if i + j == 0:
            return mpf(0)
        v = (i + j) * p * q if kind == "score" else i * q * q + j * p * p
        return (i * q - j * p) / mp.sqrt(v)

    seen = statistic(x1, x0)
    top = int(n + 30 + 16 * n**0.5)
    first = [mp.exp(i * mp.log(a) - a - mp.loggamma(i + 1)) for i in range(top)]
    second = [mp.exp(j * mp.log(b) - b - mp.loggamma(j + 1)) for j in range(top)]
    near = mpf(10) ** -30
    above = below = two = mpf(0)
    for i in range(top):
        for j in range(top):
            t = statistic(i, j)
            w = first[i] * second[j]
            above += w if t >= seen - near else 0
            below += w if t <= seen + near else 0
            two += w if abs(t) >= abs(seen) - near else 0
    return above, below, two


def row(out, case, pair, extra, expected, tolerance="r1e-12"):
    x1, e1, x0, e0 = pair
    values = " ".join(f"{k}={'inf' if v == mp.inf else mp.nstr(v, 20)}" for k, v in expected.items() if not mp.isnan(v))
    if values:
        out.write(f"{case}\ttwo_rates.py\tcount1={x1} exposure1={e1!r} count0={x0} exposure0={e0!r}{extra}\t{values}\t{tolerance}\n")


def main():
    with open(HERE / "two_rates.tsv", "w", encoding="utf-8") as out:
        out.write(f"# Two rates compared. Made by two_rates.py: mpmath {mpmath.__version__} at {mp.dps} digits, written to 20.\n")
        out.write("case\tsource\tinputs\texpected\ttolerance\n")
        for pair in PAIRS:
            x1, e1, x0, e0 = pair
            for level in (0.5, 0.95, 0.9999):
                for method in ("exact", "mid_p", "score", "likelihood", "log_wald"):
                    low, high = ratio_limits(method, *pair, level)
                    row(out, f"ratio_limits {method}", pair, f" confidence={level!r}", {"low": low, "high": high})
                for method in ("score", "likelihood", "wald"):
                    low, high = difference_limits(method, *pair, level)
                    size = max(mpf(x1) / e1, mpf(x0) / e0)
                    worst = min(abs(low), abs(high))
                    loose = max(mpf(10) ** -12, 4 * mpf(10) ** -16 * size / worst)
                    row(out, f"difference_limits {method}", pair, f" confidence={level!r}", {"low": low, "high": high}, f"r{mp.nstr(loose, 3)}")
        for pair in PAIRS + FAR:
            for ratio in (1, 1.25, 0.3):
                for method in ("exact", "mid_p", "score", "likelihood"):
                    smaller, larger = tails(method, *pair, ratio)
                    both = min(mpf(1), 2 * min(smaller, larger))
                    expected = {k: v for k, v in (("above", larger), ("below", smaller), ("either", both)) if v > mpf(10) ** -300}
                    row(out, f"ratio_test {method}", pair, f" null_ratio={ratio!r}", expected)
            for method in ("score", "likelihood", "wald"):
                z = difference_z(method, *pair, 0)
                expected = {"above": normal_tail(z), "below": normal_tail(-z), "either": 2 * normal_tail(abs(z))}
                row(out, f"difference_test {method}", pair, " null_difference=0", {k: v for k, v in expected.items() if v > mpf(10) ** -300})
            x1, e1, x0, e0 = map(mpf, pair)
            higher = beta_tails(x1 + mpf(0.5), x0 + mpf(0.5), e1 / (e1 + e0), e0 / (e1 + e0))[1]
            if higher > mpf(10) ** -300:
                row(out, "posterior_higher", pair, "", {"chance": higher})
        for pair in [(0, 100, 3, 100), (3, 100, 20, 300), (3, 12, 4, 20), (1, 1, 9, 15), (14, 2300, 5, 2100), (12, 1, 0, 40)]:
            for kind in ("score", "unpooled"):
                for ratio in (1, 1.5):
                    above, below, two = e_test(*pair, kind, ratio)
                    row(out, f"e_test {kind}", pair, f" null_ratio={ratio}", {"above": above, "below": below, "either": two}, "r1e-11")


if __name__ == "__main__":
    main()
