# tests/reference/numbers/distributions.py -- writes distributions.tsv: tails, densities and quantiles to 20 digits.
#
# Tails are series and continued fractions (exactly.py), normal and gamma functions mpmath's own; quantiles are given
# as the tail at a chosen argument, so that no root is solved here: the engine's quantile of that tail must be
# that argument (`wobble` is how much the tail's rounding to a double moves it).
from pathlib import Path

import mpmath
from exactly import beta_tails, gamma_prefix, gamma_tails, mp, mpf, normal_tail

HERE = Path(__file__).resolve().parent
LEAST = mpf(10) ** -300
SHAPES = [0.5, 1, 2.5, 7, 19.5, 60, 199, 500, 1000.5, 1e5, 1e9]
OTHERS = [0.5, 1, 4, 30, 499, 2000, 1e6, 1e9]
DEVIATES = [-37, -12, -4, -1, 0, 1, 4, 12, 37]


def rows():
    for z in [-37.5, -30, -20, -12.1, -5.5, -3.3, -1, -1e-9, 0, 0.3, 2, 4.4, 8.25, 15, 26, 37.25]:
        yield "normal_below", (z,), normal_tail(-mpf(z))
        yield "normal_above", (z,), normal_tail(z)
    for x in [1e-9, 0.25, 0.999, 1.001, 1.5, 2.001, 3, 20.5, 1e4, 1e9, 1e15]:
        yield "log_gamma", (x,), mp.loggamma(x)
        yield "digamma", (x,), mp.digamma(x)
        yield "trigamma", (x,), mp.psi(1, x)
    for a in SHAPES:
        for z in DEVIATES:
            x = a + z * a**0.5 + (z * z / 3 if z > 0 else 0)
            x = float(x if x > 0 else a * 10.0**z)
            below, above = gamma_tails(a, x)
            yield "gamma_below", (a, x), below
            yield "gamma_above", (a, x), above
            yield "gamma_density", (a, x), gamma_prefix(mpf(a), mpf(x)) / mpf(x)
            if a == int(a):
                yield "poisson_at_most", (a - 1, x), above
                yield "poisson_at_least", (a, x), below
                yield "poisson_exactly", (a, x), gamma_prefix(mpf(a), mpf(x)) / mpf(a)
    for a in SHAPES:
        for b in OTHERS:
            for z in DEVIATES:
                # the smaller side as a double; the odds are exact in what the engine is given
                mean, sd = a / (a + b), (a * b / (a + b) ** 2 / (a + b + 1)) ** 0.5
                x = mean + z * sd
                x = x if x > 0 else mean * 10.0**z
                if not 0 < x < 1 - 1e-9:
                    continue
                x = float(x)
                below, above = beta_tails(a, b, x)
                yield "beta_below", (a, b, x), below
                yield "beta_above", (a, b, x), above
                if a == int(a) and b == int(b):
                    k, n = a, a + b - 1
                    yield "binomial_at_least", (k, n, x), below
                    yield "binomial_at_most", (k - 1, n, x), above
    for part, rest in [(3, 1e9), (1e9, 3), (1e9, 1e9), (1e6, 1e9), (5e-9, 1e3)]:
        for a, b in [(3, 1e9), (1e9, 3), (1e9, 1e9 - 70000), (1e6 + 2000, 1e9), (1, 1)]:
            x = mpf(part) / (mpf(part) + mpf(rest))
            below, above = beta_tails(a, b, x, mpf(rest) / (mpf(part) + mpf(rest)))
            yield "beta_below_share", (a, b, part, rest), below
            yield "beta_above_share", (a, b, part, rest), above
    for df in [1, 2.5, 10, 300, 1001, 1e5, 1e9]:
        for t in [-30, -2, 0, 1e-8, 0.7, 2.2, 12, 37, 1e4, 1e120]:
            t2, d = mpf(t) ** 2, mpf(df)
            tail = beta_tails(mpf(0.5), d / 2, t2 / (t2 + d), d / (t2 + d))[1] / 2 if t else mpf(0.5)
            yield "student_above", (t, df), tail if t >= 0 else 1 - tail
        for f in [1e-8, 0.2, 1, 3.5, 40, 1e5]:
            for df1 in [1, 2, 9, 400]:
                top, d = mpf(df1) * mpf(f), mpf(df)
                yield "f_above", (f, df1, df), beta_tails(mpf(df1) / 2, d / 2, top / (top + d), d / (top + d))[1]
    for x in [1e-3, 1, 10, 200, 1400]:
        for df in [1, 2, 5, 100, 1e4]:
            yield "chi_square_below", (x, df), gamma_tails(mpf(df) / 2, mpf(x) / 2)[0]
            yield "chi_square_above", (x, df), gamma_tails(mpf(df) / 2, mpf(x) / 2)[1]


QUANTILES = {
    "normal_below": "normal_quantile",
    "normal_above": "normal_upper_quantile",
    "gamma_below": "gamma_quantile",
    "gamma_above": "gamma_upper_quantile",
    "beta_below": "beta_quantile",
    "beta_above": "beta_upper_quantile",
    "student_above": "student_upper_quantile",
    "f_above": "f_upper_quantile",
    "chi_square_above": "chi_square_upper_quantile",
}
FIRST = ("normal_below", "normal_above", "student_above", "f_above", "chi_square_above")  # argument stands first


def derivative(name, args):
    """The tail's slope at its argument, by name of the distribution."""
    a = [mpf(v) for v in args]
    if name.startswith("normal"):
        return mp.exp(-a[0] ** 2 / 2) / mp.sqrt(2 * mp.pi)
    if name.startswith("gamma"):
        return gamma_prefix(a[0], a[1]) / a[1]
    if name.startswith("chi"):
        return gamma_prefix(a[1] / 2, a[0] / 2) / a[0]

    def beta_slope(p, q, x, y):
        return mp.exp(p * mp.log(x) + q * mp.log(y) + mp.loggamma(p + q) - mp.loggamma(p) - mp.loggamma(q))

    if name.startswith("beta"):
        return beta_slope(a[0], a[1], a[2], 1 - a[2]) / (a[2] * (1 - a[2]))
    if name.startswith("f_"):
        top = a[0] * a[1]
        return beta_slope(a[1] / 2, a[2] / 2, top / (top + a[2]), a[2] / (top + a[2])) / a[0]
    t2 = a[0] ** 2
    return beta_slope(mpf(0.5), a[1] / 2, t2 / (t2 + a[1]), a[1] / (t2 + a[1])) / abs(a[0]) if t2 else mpf(1) / 3


def main():
    with open(HERE / "distributions.tsv", "w", encoding="utf-8") as out:
        out.write(f"# Made by distributions.py: mpmath {mpmath.__version__} at {mp.dps} digits, written to 20; to be met to 12.\n")
        out.write("# Quantile rows: arguments hold the tail, the value is the argument that has it; last column: how far the\n")
        out.write("# rounding of the tail to a double may move it, relatively.\n")
        for name, args, value in rows():
            if value < LEAST and name not in ("log_gamma", "digamma"):
                continue
            out.write("\t".join([name, *(repr(float(v)) for v in args), mp.nstr(value, 20), "0"]) + "\n")
            if name not in QUANTILES or not mpf(10) ** -300 < value < 1 or args[0] == 1e120:
                continue
            at = args[0] if name in FIRST else args[-1]
            rest = args[1:] if name in FIRST else args[:-1]
            tail = float(value)
            if tail in (0.0, 1.0) or at == 0:
                continue
            wobble = abs(mpf(tail) - value) / derivative(name, args) / abs(mpf(at))
            if wobble > mpf(10) ** -9:
                continue
            order = (tail, *rest) if name in FIRST else (*rest, tail)
            out.write("\t".join([QUANTILES[name], *(repr(float(v)) for v in order), repr(float(at)), mp.nstr(wobble, 3)]) + "\n")


if __name__ == "__main__":
    main()
