# tests/reference/numbers/exactly.py -- tails to 30 digits, by ways the engine does not take.
#
# The engine integrates large tails by quadrature and leaves small ones to Boost; here every tail is a series or a
# continued fraction in mpmath at 50 digits, so that the two agree only if both are right.
# Source: Abramowitz and Stegun 1964, 6.5.29, 6.5.31, 26.5.8; Gil, Segura and Temme 2007.
from mpmath import mp, mpf

mp.dps = 50
TINY = mpf(10) ** -45


def lentz(b0, terms):
    """b0 + a1/(b1 + a2/(b2 + ...)) from an iterator of (a, b)."""
    f = b0 if b0 != 0 else mpf(10) ** -60
    c, d = f, mpf(0)
    for a, b in terms:
        d = 1 / (b + a * d)
        c = b + a / c
        step = c * d
        f *= step
        if abs(step - 1) < TINY:
            return f


def gamma_prefix(a, x):
    """x^a e^-x / Gamma(a)"""
    return mp.exp(a * mp.log(x) - x - mp.loggamma(a))


def gamma_tails(a, x):
    """(P, Q) of shape a at x; the smaller one by its own expansion."""
    a, x = mpf(a), mpf(x)
    if x < a + 1:
        term = total = 1 / a
        n = a
        while term > total * TINY:
            n += 1
            term *= x / n
            total += term
        p = total * gamma_prefix(a, x)
        return p, 1 - p

    def terms():
        n = 0
        while True:
            n += 1
            yield -n * (n - a), x + 2 * n + 1 - a

    q = gamma_prefix(a, x) / lentz(x + 1 - a, terms())
    return 1 - q, q


def beta_tails(a, b, x, y=None):
    """(I_x(a, b), 1 - I_x(a, b)); y = 1 - x where x alone would lose it."""
    a, b, x = mpf(a), mpf(b), mpf(x)
    y = 1 - x if y is None else mpf(y)
    if x * (a + b + 2) > a + 1:
        high, low = beta_tails(b, a, y, x)
        return low, high

    def terms():
        m = 0
        while True:
            yield -(a + m) * (a + b + m) * x / ((a + 2 * m) * (a + 2 * m + 1)), mpf(1)
            m += 1
            yield m * (b - m) * x / ((a + 2 * m - 1) * (a + 2 * m)), mpf(1)

    front = mp.exp(a * mp.log(x) + b * mp.log(y) + mp.loggamma(a + b) - mp.loggamma(a) - mp.loggamma(b))
    low = front / (a * lentz(mpf(1), terms()))
    return low, 1 - low


def normal_tail(z):
    """P(Z > z)"""
    return mp.erfc(mpf(z) / mp.sqrt(2)) / 2


def root(f, guess, slope=None):
    """Root of f near guess by secant steps, to 35 digits."""
    x0, x1 = mpf(guess), mpf(guess) * (1 + mpf(10) ** -8)
    f0, f1 = f(x0), f(x1)
    for _ in range(60):
        if f1 == f0:
            return x1
        x0, x1, f0 = x1, x1 - f1 * (x1 - x0) / (f1 - f0), f1
        if abs(x1 - x0) < abs(x1) * mpf(10) ** -35:
            return x1
        f1 = f(x1)
    raise ValueError("no root")
